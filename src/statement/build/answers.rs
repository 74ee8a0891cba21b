//! The first answers: what is kept of each named step, and the hours that a sum needs.

use super::steps::Step;
use super::words::{Answers, Measure, Told, Words, hours_text};
use crate::measures::{EarnerResult, ItemKind, Point};
use crate::num::{Fraction, Hours, Money};
use crate::statement::error::StatementError;
use crate::statement::money::kept_of_ten;
use crate::statement::view::{Answer, AnswerWeight};

/// How far the hours of a step may turn out otherwise, in hundredths of an hour a week.
const NEAR: i64 = 100;

/// All answers of the earner whose section has this place: those to offers lead; without an offer the one to four hours more does.
pub(super) fn answers(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
    (measure, place): (Measure, usize),
) -> Result<Vec<Answer>, StatementError> {
    let mut answers = vec![];
    let offered = |step: &&Step<'_>| step.offer.is_some();
    let asked = steps.iter().any(|step| step.offer.is_some());
    let mut first = place == 0 || asked;
    let ordered = steps
        .iter()
        .filter(offered)
        .chain(steps.iter().filter(|step| !offered(step)));
    for step in ordered {
        if words.answers == Answers::Asked && asked && step.offer.is_none() {
            continue;
        }
        let weight = if asked && step.offer.is_none() {
            AnswerWeight::Beside
        } else {
            AnswerWeight::Lead
        };
        let mut answer = answer(words, earner, step, (measure, weight))?;
        if first
            && words.answers == Answers::All
            && let Some(near) = near(words, earner, step, measure)?
        {
            answer.detail.push(' ');
            answer.detail.push_str(&near);
        }
        first = false;
        answers.push(answer);
    }
    if let Some(target) = target(words, earner, measure)? {
        answers.push(target);
    }
    Ok(answers)
}

/// The answer to one step.
fn answer(
    words: &Words<'_>,
    earner: &EarnerResult,
    step: &Step<'_>,
    (measure, weight): (Measure, AnswerWeight),
) -> Result<Answer, StatementError> {
    let today = Words::today(earner);
    let gain = measure.at(step.to) - measure.at(today);
    let star = words.marks.of_points(&[today, step.to], |_| true);
    let sum = format!("{}{star}", words.currency.short(Money(gain.0.abs())));
    let kept = match gain.0 {
        0 => words.plain("step.same")?,
        1.. => words.say("step.gain", &[("sum", &sum)])?,
        _ => words.say("step.loss", &[("sum", &sum)])?,
    };
    Ok(Answer {
        step: step.name.clone(),
        about: step.about.clone(),
        kept,
        detail: detail(words, earner, step, measure, gain)?,
        weight,
    })
}

/// The second sentence of an answer, and the marginal one.
fn detail(
    words: &Words<'_>,
    earner: &EarnerResult,
    step: &Step<'_>,
    measure: Measure,
    gain: Money,
) -> Result<String, StatementError> {
    let today = Words::today(earner);
    let rise = step.to.pay - today.pay;
    let wage = words.currency.wage(step.line.terms.wage);
    let wage_key = if step.has_premium() {
        "step.wage_premium"
    } else {
        "step.wage"
    };
    let rate = if earner.has_job && rise.0 > 0 {
        let share = Fraction::new(i128::from(gain.0), i128::from(rise.0));
        Some(Fraction::ONE - share)
    } else {
        measure.rate_at(step.to)
    };
    let told = if earner.has_job {
        Told::OfThis
    } else {
        Told::FromThere
    };
    let rate = match rate {
        Some(rate) => words.rate(told, kept_of_ten(rate))?,
        None => String::new(),
    };
    let key = match (earner.has_job, step.offer.is_some(), rise.0) {
        (false, _, _) if rate.is_empty() => "step.detail_start_plain",
        (false, _, _) => "step.detail_start",
        (true, false, 1..) => "step.detail_more",
        (true, true, 1..) => "step.detail_offer",
        (true, _, 0) => "step.detail_level",
        (true, _, _) => "step.detail_lower",
    };
    let values = [
        ("from", hours_text(today.hours)),
        ("to", hours_text(step.to.hours)),
        ("at_wage", words.say(wage_key, &[("wage", &wage)])?),
        ("pay", words.currency.short(Money(rise.0.abs()))),
        ("rate", rate),
    ];
    let values: Vec<(&str, &str)> = values.iter().map(|(k, v)| (*k, v.as_str())).collect();
    let mut text = words.say(key, &values)?;
    // Which hours at the new wage keep today's net income matters where the offer itself does not keep it.
    if let (true, true, Some(offer)) = (earner.has_job, gain.0 < 0, step.offer) {
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

/// What it would be with about an hour less and more; none where the grid does not reach there or nothing is gained.
fn near(
    words: &Words<'_>,
    earner: &EarnerResult,
    step: &Step<'_>,
    measure: Measure,
) -> Result<Option<String>, StatementError> {
    let today = measure.at(Words::today(earner));
    let grid = &step.line.grid;
    let at = step.to.hours.0;
    let close = |point: &&Point| (point.hours.0 - at).abs() < 2 * NEAR && point.hours.0 > 0;
    let less = grid
        .iter()
        .rev()
        .filter(close)
        .find(|point| point.hours.0 <= at - NEAR);
    let more = grid
        .iter()
        .filter(close)
        .find(|point| point.hours.0 >= at + NEAR);
    let (Some(less), Some(more)) = (less, more) else {
        return Ok(None);
    };
    let gains = [less, step.to, more].map(|point| measure.at(point) - today);
    if gains.iter().any(|gain| gain.0 <= 0) {
        return Ok(None);
    }
    let values = [
        ("less", hours_text(less.hours)),
        ("less_sum", words.currency.short(gains[0])),
        ("more", hours_text(more.hours)),
        ("more_sum", words.currency.short(gains[2])),
    ];
    let values: Vec<(&str, &str)> = values.iter().map(|(k, v)| (*k, v.as_str())).collect();
    words.say("step.near", &values).map(Some)
}

/// The hours that the sum asked for needs. It is a sum of net income, so costs of working are not taken off it.
fn target(
    words: &Words<'_>,
    earner: &EarnerResult,
    measure: Measure,
) -> Result<Option<Answer>, StatementError> {
    let (Some(target), Some(line)) = (&earner.target, earner.lines.first()) else {
        return Ok(None);
    };
    let sum = words.currency.short(target.sum);
    let last = hours_text(line.up_to);
    let (kept, mut detail) = match (target.first, target.stays) {
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
                Some(hours) if hours == first => words.plain("step.target_stays_first")?,
                Some(hours) => words.say(
                    "step.target_stays",
                    &[("hours", &hours_text(hours)), ("sum", &sum)],
                )?,
                None => words.say("step.target_stays_none", &[("sum", &sum)])?,
            };
            (kept, detail)
        }
    };
    if !line.terms.offer.is_empty() {
        let wage = words.currency.wage(line.terms.wage);
        detail = format!(
            "{} {detail}",
            words.say("step.target_wage", &[("wage", &wage)])?
        );
    }
    if measure == Measure::AfterCosts {
        detail = format!("{detail} {}", words.plain("step.target_net")?);
    }
    Ok(Some(Answer {
        step: words.plain("step.target")?,
        about: String::new(),
        kept,
        detail: detail.trim().to_owned(),
        weight: AnswerWeight::Beside,
    }))
}

/// What "you keep" means: who is meant, and which costs of working are taken off; may be empty.
pub(super) fn meaning(
    words: &Words<'_>,
    earner: &EarnerResult,
    measure: Measure,
) -> Result<String, StatementError> {
    let mut said = vec![];
    if words.couple() {
        said.push(words.plain("measure.couple")?);
    }
    if measure == Measure::AfterCosts {
        let mut names: Vec<String> = vec![];
        for (position, item) in words.assessment.items.iter().enumerate() {
            let due = earner
                .lines
                .iter()
                .flat_map(|line| &line.grid)
                .any(|point| point.items[position].0 != 0);
            let name = words.item(position)?;
            if item.kind == ItemKind::Cost && due && !names.contains(&name) {
                names.push(name);
            }
        }
        let list = words.enumerated(&names);
        said.push(words.say("measure.after_costs", &[("list", &list)])?);
    }
    Ok(said.join(" "))
}

/// Hours that are four fewer, if any are left.
pub(super) fn four_fewer(today: Hours) -> Option<Hours> {
    (today.0 > 400).then_some(Hours(today.0 - 400))
}
