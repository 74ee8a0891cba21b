//! One earner's budget lines: every turning point, the segments, traps, and the whole grid; and both partners' hours.

use super::{Copy, Side, percent, signed};
use crate::measures::{
    BudgetLine, EarnerResult, ItemKind, Point, Turn, TurnKind, participation_rate,
};
use crate::num::{Fraction, Hours, Money};
use crate::statement::build::steps::steps;
use crate::statement::build::turn_words::cause_text;
use crate::statement::build::words::hours_text;
use crate::statement::copy_view::{CopyPart, CopySection, LongRow};
use crate::statement::error::StatementError;
use crate::statement::money::{NONE, hours, money};
use crate::statement::view::Line;

/// Width that the first column gets at least, in sizes of print.
const NAMES: f64 = 5.0;

pub(super) fn section(
    copy: &Copy<'_>,
    earner: &EarnerResult,
) -> Result<CopySection, StatementError> {
    let words = &copy.words;
    let mut parts = vec![];
    for line in &earner.lines {
        let named = named(copy, earner, line)?;
        // Overtime on today's terms moves along today's line.
        let first = &earner.lines[0];
        if !std::ptr::eq(first, line) && first.grid == line.grid && first.turns == line.turns {
            parts.push(CopyPart {
                heading: words.say("copy.turns.title", &[("line", &named)])?,
                lines: vec![words.plain("copy.line.same")?.into()],
                tables: vec![],
            });
            continue;
        }
        parts.push(turns(copy, earner, line, &named)?);
        parts.push(segments(copy, line, &named)?);
        parts.push(grid(copy, line, &named)?);
    }
    Ok(CopySection {
        heading: copy.of_earner("copy.line.heading", earner)?,
        parts,
    })
}

/// The name of a line: today's terms, or the offer's.
fn named(
    copy: &Copy<'_>,
    earner: &EarnerResult,
    line: &BudgetLine,
) -> Result<String, StatementError> {
    let words = &copy.words;
    let wage = words.currency.wage(line.terms.wage);
    let steps = steps(words, earner)?;
    let same = |other: &BudgetLine| std::ptr::eq(other, line);
    match steps
        .iter()
        .find(|step| step.offer.is_some() && same(step.line))
    {
        None => words.say("copy.line.today", &[("wage", &wage)]),
        Some(step) => words.say("copy.line.offer", &[("name", &step.name), ("wage", &wage)]),
    }
}

/// Every turning point, and the traps and stretches without gain.
fn turns(
    copy: &Copy<'_>,
    earner: &EarnerResult,
    line: &BudgetLine,
    named: &str,
) -> Result<CopyPart, StatementError> {
    let words = &copy.words;
    let mut rows = vec![];
    for turn in &line.turns {
        let ptr = participation_rate(turn.net_after, earner.not_in_work.net, turn.pay);
        let kind = match turn.kind {
            TurnKind::Kink => "kink",
            TurnKind::Cliff => "cliff",
            TurnKind::CostStep => "cost",
            TurnKind::Passport => "passport",
        };
        let cells = vec![
            hours_text(turn.hours),
            words.plain(&format!("copy.turns.{kind}"))?,
            copy.figure(turn.pay),
            copy.figure(turn.net_before),
            copy.figure(turn.net_after),
            percent(turn.metr_before),
            percent(turn.metr_after),
            percent(ptr),
        ];
        rows.push(LongRow {
            under: why(copy, line, turn)?,
            ..LongRow::plain(cells)
        });
    }
    let heads = [
        "hours",
        "kind",
        "pay",
        "before",
        "after",
        "metr_before",
        "metr_after",
        "ptr",
    ];
    let heads = heads_of(copy, "copy.turns", &heads)?;
    let summary = words.say("copy.turns.summary", &[("line", named)])?;
    let mut lines = vec![Line::from(words.say(
        "copy.turns.lead",
        &[
            ("count", &line.turns.len().to_string()),
            ("hours", &hours_text(line.up_to)),
        ],
    )?)];
    lines.extend(traps(copy, line)?);
    let tables = if rows.is_empty() {
        vec![]
    } else {
        vec![
            copy.room
                .whole(&summary, &heads, rows, (2, NAMES), Side::Figures),
        ]
    };
    Ok(CopyPart {
        heading: words.say("copy.turns.title", &[("line", named)])?,
        lines,
        tables,
    })
}

/// The heads of a table's columns.
fn heads_of(copy: &Copy<'_>, table: &str, keys: &[&str]) -> Result<Vec<String>, StatementError> {
    let keys = keys.iter();
    keys.map(|key| copy.words.plain(&format!("{table}.{key}")))
        .collect()
}

/// Causes and effects of a turn, and its jump.
fn why(copy: &Copy<'_>, line: &BudgetLine, turn: &Turn) -> Result<Vec<Line>, StatementError> {
    let words = &copy.words;
    let mut causes = vec![];
    for cause in &turn.causes {
        let label = cause_text(words, line, turn, cause)?;
        let values = [
            ("label", label.as_str()),
            ("part", &cause.part),
            ("figure", &cause.line),
        ];
        causes.push(words.say("copy.turns.cause", &values)?);
    }
    let mut effects = vec![];
    for effect in &turn.effects {
        let name = copy.item(effect.item)?;
        if words.assessment.items[effect.item].kind == ItemKind::Passport {
            let key = if effect.jump.0 > 0 { "won" } else { "lost" };
            effects.push(words.say(&format!("copy.turns.{key}"), &[("name", &name)])?);
            continue;
        }
        if effect.jump.0 != 0 {
            let sum = words.currency.exact(effect.jump);
            effects.push(words.say("copy.turns.jump", &[("name", &name), ("sum", &sum)])?);
        }
        if !effect.slope.is_zero() {
            let slope = signed(&effect.slope.decimal(4));
            effects.push(words.say("copy.turns.slope", &[("name", &name), ("slope", &slope)])?);
        }
    }
    let mut lines = vec![];
    let mut add = |key: &str, said: &[String]| -> Result<(), StatementError> {
        if !said.is_empty() {
            lines.push(Line {
                lead: words.plain(key)?,
                text: words.listed(said)?,
            });
        }
        Ok(())
    };
    add("copy.turns.causes", &causes)?;
    add("copy.turns.effects", &effects)?;
    if turn.size.0 != 0 {
        add("copy.turns.size", &[words.currency.exact(turn.size)])?;
    }
    if line.has_costs {
        let (before, after) = (
            words.currency.exact(turn.after_costs_before),
            words.currency.exact(turn.after_costs_after),
        );
        let said = words.say(
            "copy.turns.costs",
            &[("before", &before), ("after", &after)],
        )?;
        add("copy.turns.costs_lead", &[said])?;
    }
    Ok(lines)
}

/// The traps and the stretches where more pay adds nothing.
fn traps(copy: &Copy<'_>, line: &BudgetLine) -> Result<Vec<Line>, StatementError> {
    let words = &copy.words;
    let place = |at: Fraction| hours_text(hours(at));
    let mut lines = vec![];
    for trap in &line.traps {
        let to = match trap.to {
            Some(to) => words.say("copy.turns.trap_to", &[("hours", &place(to))])?,
            None => {
                let hours = hours_text(line.up_to);
                words.say("copy.turns.trap_open", &[("hours", &hours)])?
            }
        };
        let (peak, depth) = (
            words.currency.exact(trap.peak),
            words.currency.exact(trap.depth),
        );
        lines.push(Line {
            lead: words.plain("copy.turns.trap_lead")?,
            text: words.say(
                "copy.turns.trap",
                &[
                    ("from", &place(trap.from)),
                    ("to", &to),
                    ("peak", &peak),
                    ("depth", &depth),
                ],
            )?,
        });
    }
    for flat in &line.no_gain {
        lines.push(Line {
            lead: words.plain("copy.turns.flat_lead")?,
            text: words.say(
                "copy.turns.flat",
                &[("from", &place(flat.from)), ("to", &place(flat.to))],
            )?,
        });
    }
    Ok(lines)
}

/// The segments with what each item adds to net income.
fn segments(copy: &Copy<'_>, line: &BudgetLine, named: &str) -> Result<CopyPart, StatementError> {
    let words = &copy.words;
    let mut rows = vec![];
    for segment in &line.segments {
        let mut cells = vec![
            signed(&segment.from.decimal(4)),
            signed(&segment.to.decimal(4)),
            copy.figure(money(segment.net_from)),
            copy.figure(money(segment.net_to)),
            percent(segment.metr),
        ];
        if line.has_costs {
            cells.push(percent(segment.metr_after_costs));
        }
        cells.push(percent(Some(segment.pension_share)));
        cells.push(copy.figure(money(segment.virtual_income)));
        let mut shares = vec![];
        for (position, share) in segment.shares.iter().enumerate() {
            if !share.is_zero() {
                let share = signed(&share.decimal(4));
                let name = copy.item(position)?;
                shares
                    .push(words.say("copy.segments.share", &[("name", &name), ("share", &share)])?);
            }
        }
        rows.push(LongRow {
            under: if shares.is_empty() {
                vec![]
            } else {
                vec![Line {
                    lead: words.plain("copy.segments.shares")?,
                    text: words.listed(&shares)?,
                }]
            },
            ..LongRow::plain(cells)
        });
    }
    let mut keys = vec!["from", "to", "net_from", "net_to", "metr"];
    if line.has_costs {
        keys.push("metr_after_costs");
    }
    keys.extend(["pension", "virtual"]);
    let heads = heads_of(copy, "copy.segments", &keys)?;
    let summary = words.say("copy.segments.summary", &[("line", named)])?;
    Ok(CopyPart {
        heading: words.say("copy.segments.title", &[("line", named)])?,
        lines: vec![words.plain("copy.segments.lead")?.into()],
        tables: vec![
            copy.room
                .whole(&summary, &heads, rows, (2, NAMES), Side::Figures),
        ],
    })
}

/// The whole grid: every item that is not nothing everywhere as it enters the sums, the sums, the rates.
fn grid(copy: &Copy<'_>, line: &BudgetLine, named: &str) -> Result<CopyPart, StatementError> {
    let words = &copy.words;
    type Cell<'c> = Box<dyn Fn(&Point) -> String + 'c>;
    let sum =
        |of: fn(&Point) -> Money| -> Cell<'_> { Box::new(move |point| copy.figure(of(point))) };
    let word = |key: &str| words.plain(&format!("copy.grid.{key}"));
    let (yes, no) = (words.plain("facts.yes")?, words.plain("facts.no")?);
    let mut columns: Vec<(String, Cell<'_>)> =
        vec![(word("hours")?, Box::new(|point| hours_text(point.hours)))];
    for (position, item) in words.assessment.items.iter().enumerate() {
        if line.grid.iter().all(|point| point.items[position].0 == 0) {
            continue;
        }
        let (yes, no, kind) = (yes.clone(), no.clone(), item.kind);
        let cell = move |point: &Point| {
            let sum = point.items[position];
            match (kind, sum.0) {
                (ItemKind::Passport, 0) => no.clone(),
                (ItemKind::Passport, _) => yes.clone(),
                (_, 0) => NONE.to_owned(),
                (ItemKind::Cost | ItemKind::Housing, _) => copy.figure(-sum),
                (kind, _) if kind.sign_in_net() < 0 => copy.figure(-sum),
                (_, _) => copy.figure(sum),
            }
        };
        columns.push((copy.item(position)?, Box::new(cell)));
    }
    if line.grid.iter().all(|point| point.take_home == point.net) {
        columns.push((word("take_home_net")?, sum(|point| point.net)));
    } else {
        columns.push((word("take_home")?, sum(|point| point.take_home)));
        columns.push((word("net")?, sum(|point| point.net)));
    }
    if line.has_costs {
        columns.push((word("after_costs")?, sum(|point| point.after_costs)));
    }
    let housing = |point: &Point| point.after_housing != point.after_costs;
    if line.grid.iter().any(housing) {
        columns.push((word("after_housing")?, sum(|point| point.after_housing)));
    }
    columns.push((word("ptr")?, Box::new(|point| percent(point.ptr))));
    columns.push((word("metr")?, Box::new(|point| percent(point.metr_here))));
    if line.has_costs {
        let cell = |point: &Point| percent(point.metr_here_after_costs);
        columns.push((word("metr_after_costs")?, Box::new(cell)));
    }
    let marked = [line.own, line.step_to];
    let points = line.grid.iter().enumerate();
    let rows: Vec<LongRow> = points
        .map(|(place, point)| {
            let cells = columns.iter().map(|(_, cell)| cell(point)).collect();
            if marked.contains(&place) {
                LongRow::marked(cells)
            } else {
                LongRow::plain(cells)
            }
        })
        .collect();
    let heads: Vec<String> = columns.iter().map(|(head, _)| head.clone()).collect();
    let summary = words.say("copy.grid.summary", &[("line", named)])?;
    Ok(CopyPart {
        heading: words.say("copy.grid.title", &[("line", named)])?,
        lines: vec![words.plain("copy.grid.lead")?.into()],
        tables: copy.room.pieces(&summary, &heads, &rows),
    })
}

/// Net income by both partners' hours.
pub(super) fn couple(copy: &Copy<'_>) -> Result<Option<CopySection>, StatementError> {
    let words = &copy.words;
    let Some(table) = &words.assessment.couple else {
        return Ok(None);
    };
    let name = |adult: usize| {
        let earner = words
            .assessment
            .earners
            .iter()
            .find(|one| one.adult == adult);
        let number = (adult + 1).to_string();
        match earner.filter(|one| !one.name.is_empty()) {
            Some(earner) => Ok(earner.name.clone()),
            None => words.say("copy.adult", &[("number", &number)]),
        }
    };
    let (first, second) = (name(0)?, name(1)?);
    let costs = table.net != table.after_costs;
    let sums = if costs {
        &table.after_costs
    } else {
        &table.net
    };
    let mut heads = vec![words.say("copy.couple.corner", &[("name", &first)])?];
    let hours = |hours: &Hours| hours_text(*hours);
    heads.extend(table.second.iter().map(hours));
    let rows: Vec<LongRow> = table
        .first
        .iter()
        .zip(sums)
        .map(|(hours, sums)| {
            let mut cells = vec![hours_text(*hours)];
            cells.extend(sums.iter().map(|sum| copy.figure(*sum)));
            LongRow::plain(cells)
        })
        .collect();
    let key = if costs { "lead_after_costs" } else { "lead" };
    let values = [("first", first.as_str()), ("second", &second)];
    let lead = words.say(&format!("copy.couple.{key}"), &values)?;
    Ok(Some(CopySection {
        heading: words.plain("copy.couple.heading")?,
        parts: vec![CopyPart {
            heading: String::new(),
            lines: vec![lead.clone().into()],
            tables: copy.room.pieces(&lead, &heads, &rows),
        }],
    }))
}
