//! One earner's section: first answers, chart, bars, turning points, help in kind, table, the way back.
//! The section of a second earner without an offer is short: no chart, no bars, no table.

use super::Detail;
use super::answers::{answers, four_fewer, meaning};
use super::figure;
use super::later::later;
use super::steps::{Step, steps};
use super::table;
use super::turns;
use super::words::{Measure, Words, hours_text};
use crate::measures::{EarnerResult, ItemKind, Point};
use crate::num::Money;
use crate::statement::bars::Bars;
use crate::statement::chart::Chart;
use crate::statement::error::StatementError;
use crate::statement::view::{Line, Part, PartKind, Section};

/// Builds the section that has this place in the letter, counted from 0.
pub(super) fn section(
    words: &Words<'_>,
    earner: &EarnerResult,
    place: usize,
) -> Result<Section, StatementError> {
    let measure = Words::measure(earner);
    let steps = steps(words, earner)?;
    let turns = turns::turns(words, earner, &steps, (measure, place))?;
    let asked = place == 0 || steps.iter().any(|step| step.offer.is_some());
    let back = Line::from(way_back(words, earner, measure)?);
    let mut parts = vec![words.part("back.heading", PartKind::Paragraphs, vec![back])?];
    parts.extend(later(words, earner, &steps, (measure, place))?);
    let drawn = match words.detail {
        Detail::Full | Detail::Plain | Detail::Short | Detail::Bare => asked,
        Detail::Brief => place == 0,
    };
    Ok(Section {
        heading: if words.couple() && !earner.name.is_empty() {
            words.say("section.named", &[("name", &earner.name)])?
        } else {
            words.plain("section.you")?
        },
        answers: answers(words, earner, &steps, (measure, place))?,
        measure: if place == 0 {
            meaning(words, earner, measure)?
        } else {
            String::new()
        },
        chart: if drawn {
            figure::chart(words, earner, &steps, measure)?
        } else {
            Chart::default()
        },
        bars: if words.detail < Detail::Short && place == 0 {
            figure::bars(words, earner, &steps, measure)?
        } else {
            Bars::default()
        },
        turns_heading: words.plain("turns.heading")?,
        turns: turns.texts,
        turns_lead: turns.lead,
        turns_note: turns.note,
        help: passported(words, earner, &steps)?
            .into_iter()
            .chain(employer(words, earner, &steps)?)
            .collect(),
        table_heading: words.plain("table.heading")?,
        tables: if asked {
            table::tables(words, earner, &steps)?
        } else {
            vec![]
        },
        parts,
    })
}

/// What the employer pays on top of this earner's pay, today and at the steps; none where nothing is known of it.
fn employer(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
) -> Result<Option<Part>, StatementError> {
    let today = Words::today(earner);
    let mut lines: Vec<Line> = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        let theirs = item.adult.is_none_or(|adult| adult == earner.adult);
        if item.kind != ItemKind::Employer || !theirs || words.folded(&item.name) {
            continue;
        }
        let sum = |point: &Point| words.currency.exact(point.items[position]);
        let reached = steps.iter().map(|step| step.to);
        if std::iter::once(today)
            .chain(reached)
            .all(|point| point.items[position].0 == 0)
        {
            continue;
        }
        let mut said = vec![words.say("employer.today", &[("sum", &sum(today))])?];
        for step in steps {
            let values = [("step", step.name.as_str()), ("sum", &sum(step.to))];
            said.push(words.say("employer.step", &values)?);
        }
        lines.push(Line {
            lead: words.say("employer.lead", &[("name", &words.item(position)?)])?,
            text: words.ended(&words.listed(&said)?)?,
        });
    }
    if lines.is_empty() {
        return Ok(None);
    }
    lines.push(Line::from(words.plain("employer.note")?));
    let mut part = words.part("kind.employer", PartKind::Paragraphs, lines)?;
    part.heading = words.kind(ItemKind::Employer)?;
    Ok(Some(part))
}

/// Help in kind between today and the steps; none where there is none.
fn passported(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
) -> Result<Option<Part>, StatementError> {
    let today = Words::today(earner);
    let mut lines: Vec<Line> = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        if item.kind != ItemKind::Passport {
            continue;
        }
        let name = words.item(position)?;
        let has = |point: &Point| point.items[position].0 != 0;
        let change = steps.iter().find(|step| has(step.to) != has(today));
        let text = match change {
            Some(step) => help_changes(words, (today, step), position)?,
            None if has(today) => words.plain("passport.kept")?,
            None => continue,
        };
        let lead = words.say("passport.lead", &[("name", &name)])?;
        let line = Line { lead, text };
        if !lines.contains(&line) {
            lines.push(line);
        }
    }
    if lines.is_empty() {
        return Ok(None);
    }
    let mut part = words.part("kind.passport", PartKind::Paragraphs, lines)?;
    part.heading = words.kind(ItemKind::Passport)?;
    Ok(Some(part))
}

/// Help that is won or lost between today and a step: where, if that is known.
fn help_changes(
    words: &Words<'_>,
    (today, step): (&Point, &Step<'_>),
    position: usize,
) -> Result<String, StatementError> {
    let (wanted, verb) = match today.items[position].0 {
        0 => (1, "won"),
        _ => (-1, "lost"),
    };
    let (low, high) = (
        today.hours.min(step.to.hours),
        today.hours.max(step.to.hours),
    );
    let turn = step.line.turns.iter().find(|turn| {
        turn.hours >= low
            && turn.hours <= high
            && turn
                .effects
                .iter()
                .any(|effect| effect.item == position && effect.jump.0.signum() == wanted)
    });
    match turn {
        Some(turn) if step.to.hours >= today.hours => {
            let (hours, pay) = (hours_text(turn.hours), words.currency.short(turn.pay));
            let values = [("hours", hours.as_str()), ("pay", &pay)];
            words.say(&format!("passport.{verb}"), &values)
        }
        Some(_) | None => words.say(&format!("passport.{verb}_step"), &[("step", &step.name)]),
    }
}

/// What there is if the job ends or hours fall back by four.
fn way_back(
    words: &Words<'_>,
    earner: &EarnerResult,
    measure: Measure,
) -> Result<String, StatementError> {
    let today = Words::today(earner);
    if !earner.has_job {
        let sum = words.currency.short(measure.at(today));
        let star = words.marks.of_points(&[today], |_| true);
        return words.say("back.start", &[("sum", &format!("{sum}{star}"))]);
    }
    let values = (measure.at(today), measure);
    let ends = against(words, ("back.ends", ""), &earner.not_in_work, values)?;
    let mut lines = vec![ends];
    if let (Some(line), Some(fewer)) = (earner.lines.first(), four_fewer(today.hours))
        && let Some(point) = line.grid.iter().find(|point| point.hours == fewer)
    {
        let hours = hours_text(fewer);
        lines.push(against(words, ("back.fewer", &hours), point, values)?);
    }
    if words.marks.has_benefits(words.assessment) {
        lines.push(words.plain("back.report")?);
    }
    Ok(lines.join(" "))
}

/// A point's sum against today's.
fn against(
    words: &Words<'_>,
    (key, hours): (&str, &str),
    point: &Point,
    (today, measure): (Money, Measure),
) -> Result<String, StatementError> {
    let sum = measure.at(point);
    let star = words.marks.of_points(&[point], |_| true);
    let text = format!("{}{star}", words.currency.short(sum));
    let difference = words.currency.short(Money((today - sum).0.abs()));
    let key = match (today - sum).0 {
        0 => format!("{key}_same"),
        1.. => key.to_owned(),
        _ => format!("{key}_more"),
    };
    words.say(
        &key,
        &[
            ("sum", &text),
            ("hours", hours),
            ("less", &difference),
            ("more", &difference),
        ],
    )
}
