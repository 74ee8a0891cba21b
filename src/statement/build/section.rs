//! One earner's section: first answers, chart, bars, turning points, table, passported help, the way back.

use super::Detail;
use super::figure;
use super::table;
use super::turns;
use super::words::{Measure, Words, hours_text, listed};
use crate::measures::{BudgetLine, EarnerResult, ItemKind, OfferMeasures, Point};
use crate::num::{Fraction, Hours, Money};
use crate::statement::bars::Bars;
use crate::statement::chart::Chart;
use crate::statement::error::StatementError;
use crate::statement::money::{kept_of_ten, readable};
use crate::statement::view::{Answer, PartKind, Section};

/// A named step: from today to a point of a line.
pub(super) struct Step<'a> {
    /// The line that it lies on.
    pub line: &'a BudgetLine,
    /// The point that it leads to.
    pub to: &'a Point,
    /// The offer; none for four hours more.
    pub offer: Option<&'a OfferMeasures>,
    /// What the step is called.
    pub name: String,
}

/// All named steps of an earner.
pub(super) fn steps<'a>(
    words: &Words<'_>,
    earner: &'a EarnerResult,
) -> Result<Vec<Step<'a>>, StatementError> {
    let mut steps = vec![];
    if let (true, Some(line)) = (earner.has_job, earner.lines.first())
        && line.step_to != line.own
    {
        let to = &line.grid[line.step_to];
        let more = Hours(to.hours.0 - line.grid[line.own].hours.0);
        steps.push(Step {
            line,
            to,
            offer: None,
            name: words.say("step.more", &[("hours", &hours_text(more))])?,
        });
    }
    for offer in &earner.offers {
        let Some(line) = earner.lines.get(offer.line) else {
            continue;
        };
        let name = match line.terms.offer.as_str() {
            "" if line.terms.reference.is_empty() => words.plain("step.offer")?,
            "" => readable(&line.terms.reference),
            given => given.to_owned(),
        };
        let to = &line.grid[line.step_to];
        steps.push(Step {
            line,
            to,
            offer: Some(offer),
            name,
        });
    }
    Ok(steps)
}

/// Builds the section that has this place in the letter, counted from 0.
pub(super) fn section(
    words: &Words<'_>,
    earner: &EarnerResult,
    place: usize,
) -> Result<Section, StatementError> {
    let measure = words.measure(earner);
    let steps = steps(words, earner)?;
    let mut answers = vec![];
    for step in &steps {
        answers.push(answer(words, earner, step, measure)?);
    }
    if let Some(target) = target(words, earner)? {
        answers.push(target);
    }
    let turns = turns::turns(words, earner, &steps, measure)?;
    let mut parts = vec![];
    let help = passported(words, earner, &steps)?;
    if !help.is_empty() {
        parts.push(words.part("passport.heading", PartKind::Paragraphs, help)?);
    }
    let back = way_back(words, earner, measure)?;
    parts.push(words.part("back.heading", PartKind::Paragraphs, back)?);
    Ok(Section {
        heading: if words.by_name(earner) {
            words.say("section.named", &[("name", &earner.name)])?
        } else {
            words.plain("section.you")?
        },
        answers,
        measure: match measure {
            Measure::Net => String::new(),
            Measure::AfterCosts => words.plain("measure.after_costs")?,
        },
        chart: match (words.detail, place) {
            (Detail::Full, _) | (Detail::Brief, 0) => {
                figure::chart(words, earner, &steps, measure)?
            }
            (Detail::Brief, _) => Chart::default(),
        },
        bars: match words.detail {
            Detail::Full => figure::bars(words, earner, &steps, measure)?,
            Detail::Brief => Bars::default(),
        },
        turns_heading: words.plain("turns.heading")?,
        turns: turns.texts,
        turns_lead: turns.lead,
        turns_note: turns.note,
        table_heading: words.plain("table.heading")?,
        tables: table::tables(words, earner, &steps)?,
        parts,
    })
}

/// The first answer to one step.
fn answer(
    words: &Words<'_>,
    earner: &EarnerResult,
    step: &Step<'_>,
    measure: Measure,
) -> Result<Answer, StatementError> {
    let today = Words::today(earner);
    let (now, then) = (measure.at(today), measure.at(step.to));
    let gain = then - now;
    let kept = match gain.0 {
        0 => words.plain("step.same")?,
        above if above > 0 => words.say("step.gain", &[("sum", &words.currency.short(gain))])?,
        _ => words.say("step.loss", &[("sum", &words.currency.short(-gain))])?,
    };
    Ok(Answer {
        step: step.name.clone(),
        kept,
        detail: detail(words, earner, step, measure, gain)?,
    })
}

/// The second sentence of a first answer, and the marginal one.
fn detail(
    words: &Words<'_>,
    earner: &EarnerResult,
    step: &Step<'_>,
    measure: Measure,
    gain: Money,
) -> Result<String, StatementError> {
    let today = Words::today(earner);
    let rise = step.to.pay - today.pay;
    let named = if words.by_name(earner) { "_named" } else { "" };
    let (from, to) = (hours_text(today.hours), hours_text(step.to.hours));
    let wage = words.currency.wage(step.line.terms.wage);
    let ten = if earner.has_job && rise.0 > 0 {
        let share = Fraction::new(i128::from(gain.0), i128::from(rise.0));
        Some(kept_of_ten(Fraction::ONE - share))
    } else {
        measure.rate_at(step.to).map(kept_of_ten)
    };
    let ten = ten.map(|sum| words.currency.short(sum)).unwrap_or_default();
    let key = match (earner.has_job, step.offer.is_some(), rise.0) {
        (false, _, _) if ten.is_empty() => "detail_start_plain".to_owned(),
        (false, _, _) => format!("detail_start{named}"),
        (true, false, above) if above > 0 => format!("detail_more{named}"),
        (true, true, above) if above > 0 => format!("detail_offer{named}"),
        (true, _, 0) => "detail_level".to_owned(),
        (true, _, _) => "detail_lower".to_owned(),
    };
    let pay = words.currency.short(Money(rise.0.abs()));
    let values = [
        ("name", earner.name.as_str()),
        ("from", &from),
        ("to", &to),
        ("wage", &wage),
        ("pay", &pay),
        ("ten", &ten),
    ];
    let mut text = words.say(&format!("step.{key}"), &values)?;
    if let (true, Some(offer)) = (earner.has_job, step.offer) {
        text.push(' ');
        text.push_str(&match offer.holding {
            Some(hours) => words.say("step.holding", &[("hours", &hours_text(hours))])?,
            None => {
                let last = hours_text(step.line.up_to);
                words.say("step.holding_none", &[("hours", &last)])?
            }
        });
    }
    Ok(text)
}

/// The hours that the sum asked for needs.
fn target(words: &Words<'_>, earner: &EarnerResult) -> Result<Option<Answer>, StatementError> {
    let (Some(target), Some(line)) = (&earner.target, earner.lines.first()) else {
        return Ok(None);
    };
    let sum = words.currency.short(target.sum);
    let last = hours_text(line.up_to);
    let (kept, detail) = match (target.first, target.stays) {
        (None, _) => (
            words.say("step.target_none", &[("hours", &last), ("sum", &sum)])?,
            String::new(),
        ),
        (Some(first), stays) => {
            let first_text = hours_text(first);
            let kept = words.say(
                "step.target_first",
                &[("hours", &first_text), ("sum", &sum)],
            )?;
            let detail = match stays {
                Some(hours) => words.say(
                    "step.target_stays",
                    &[("hours", &hours_text(hours)), ("sum", &sum)],
                )?,
                None => words.say("step.target_stays_none", &[("sum", &sum)])?,
            };
            (kept, detail)
        }
    };
    Ok(Some(Answer {
        step: words.plain("step.target")?,
        kept,
        detail,
    }))
}

/// Help in kind between today and the steps.
fn passported(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
) -> Result<Vec<String>, StatementError> {
    let today = Words::today(earner);
    let mut lines = vec![];
    let mut kept = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        if item.kind != ItemKind::Passport {
            continue;
        }
        let name = words.item(position)?;
        let has = |point: &Point| point.items[position].0 != 0;
        let change = steps.iter().find(|step| has(step.to) != has(today));
        let Some(step) = change else {
            if has(today) && !kept.contains(&name) {
                kept.push(name);
            }
            continue;
        };
        let wanted = if has(today) { -1 } else { 1 };
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
        let verb = if has(today) { "lost" } else { "won" };
        lines.push(match turn {
            Some(turn) if step.to.hours >= today.hours => words.say(
                &format!("passport.{verb}"),
                &[("name", &name), ("hours", &hours_text(turn.hours))],
            )?,
            Some(_) | None => words.say(
                &format!("passport.{verb}_step"),
                &[("name", &name), ("step", &step.name)],
            )?,
        });
    }
    if !kept.is_empty() {
        lines.push(words.say("passport.kept", &[("list", &listed(&kept))])?);
    }
    lines.dedup();
    Ok(lines)
}

/// What there is if the job ends or hours fall back by four.
fn way_back(
    words: &Words<'_>,
    earner: &EarnerResult,
    measure: Measure,
) -> Result<Vec<String>, StatementError> {
    let today = Words::today(earner);
    let without = measure.at(&earner.not_in_work);
    let sum = words.currency.short(without);
    if !earner.has_job {
        return Ok(vec![words.say("back.start", &[("sum", &sum)])?]);
    }
    let mut lines = vec![against(words, "back.ends", "", without, measure.at(today))?];
    let fewer = Hours(today.hours.0 - 400);
    if let (Some(line), true) = (earner.lines.first(), fewer.0 > 0)
        && let Some(point) = line.grid.iter().find(|point| point.hours == fewer)
    {
        let hours = hours_text(fewer);
        lines.push(against(
            words,
            "back.fewer",
            &hours,
            measure.at(point),
            measure.at(today),
        )?);
    }
    lines.push(words.plain("back.report")?);
    Ok(vec![lines.join(" ")])
}

/// A sum against today's.
fn against(
    words: &Words<'_>,
    key: &str,
    hours: &str,
    sum: Money,
    today: Money,
) -> Result<String, StatementError> {
    let text = words.currency.short(sum);
    let difference = words.currency.short(Money((today - sum).0.abs()));
    let key = match (today - sum).0 {
        0 => format!("{key}_same"),
        above if above > 0 => key.to_owned(),
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
