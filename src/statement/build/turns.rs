//! Turning points in words: at most five, falls and traps between today and the steps first.

use super::Detail;
use super::section::Step;
use super::words::{Measure, Words, hours_text, listed};
use crate::measures::{BudgetLine, EarnerResult, ItemKind, NoGain, Segment, Trap, Turn, TurnKind};
use crate::num::{Fraction, Hours, Money};
use crate::statement::error::StatementError;
use crate::statement::money::{capital, hours, kept_of_ten, readable};
use crate::statement::view::TurnText;

/// Turning points that a letter prints at most.
const MOST: usize = 5;
/// Turning points of least weight are printed up to this many.
const FILL: usize = 3;
/// Effects named at one turning point at most.
const EFFECTS: usize = 3;
/// The least jump that is worth a line, in minor units.
const LEAST_JUMP: i64 = 100;
/// The least change of what is kept of ten units that is worth a line, in minor units.
const LEAST_SLOPE: i64 = 5;

/// What is printed.
pub(super) struct Turns {
    /// The chosen ones, by hours.
    pub texts: Vec<TurnText>,
    /// That nothing turns between today and the steps; may be empty.
    pub lead: String,
    /// That there are more; may be empty.
    pub note: String,
}

/// How early a turning point is chosen.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
enum Rank {
    /// Falls, traps and no-gain stretches between today and the steps.
    FallOnTheWay,
    /// Rises and passport changes there.
    OtherOnTheWay,
    /// Changes of slope there.
    SlopeOnTheWay,
    /// Falls and traps beyond.
    FallBeyond,
    /// Everything else.
    Beyond,
}

/// A turning point that may be printed.
struct Candidate {
    rank: Rank,
    away: i64,
    at: Fraction,
    text: TurnText,
}

/// Today's hours and the steps' hours: least and largest.
pub(super) fn in_range(earner: &EarnerResult, steps: &[Step<'_>]) -> (Hours, Hours) {
    let today = Words::today(earner).hours;
    steps.iter().fold((today, today), |(low, high), step| {
        (low.min(step.to.hours), high.max(step.to.hours))
    })
}

/// The jump of a turn in the income that the section speaks of.
pub(super) fn jump(turn: &Turn, measure: Measure) -> Money {
    match (turn.kind, measure) {
        (TurnKind::Kink | TurnKind::Passport, _) | (TurnKind::CostStep, Measure::Net) => Money::ZERO,
        (TurnKind::Cliff, Measure::Net) => turn.size,
        (TurnKind::Cliff | TurnKind::CostStep, Measure::AfterCosts) => turn.after_costs_after - turn.after_costs_before,
    }
}

/// Chooses and words the turning points.
pub(super) fn turns(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
    measure: Measure,
) -> Result<Turns, StatementError> {
    let Some(main) = earner.lines.first() else {
        return Ok(Turns {
            texts: vec![],
            lead: String::new(),
            note: String::new(),
        });
    };
    let range = in_range(earner, steps);
    let today = Words::today(earner).hours;
    let mut candidates = vec![];
    for turn in &main.turns {
        if let Some((fall, text)) = turn_text(words, main, turn, measure)? {
            let inside = turn.hours >= range.0 && turn.hours <= range.1;
            candidates.push(Candidate {
                rank: rank(fall, inside),
                away: (turn.hours.0 - today.0).abs(),
                at: turn.at,
                text,
            });
        }
    }
    stretches(words, main, range, today, measure, &mut candidates)?;
    on_offers(words, main, steps, range, measure, &mut candidates)?;
    let all = candidates.len();
    candidates.sort_by(|a, b| (a.rank, a.away, a.at).cmp(&(b.rank, b.away, b.at)));
    candidates.truncate(match words.detail {
        Detail::Full => MOST,
        Detail::Brief => FILL,
    });
    let mut position = 0;
    candidates.retain(|found| {
        position += 1;
        found.rank < Rank::Beyond || position <= FILL
    });
    let on_the_way = candidates
        .iter()
        .any(|found| found.rank <= Rank::SlopeOnTheWay);
    candidates.sort_by(|a, b| a.at.cmp(&b.at));
    let lead = if on_the_way {
        String::new()
    } else {
        words.plain("turns.none")?
    };
    let note = match all - candidates.len() {
        0 => String::new(),
        1 => words.plain("turns.more_one")?,
        more => words.say("turns.more", &[("count", &more.to_string())])?,
    };
    Ok(Turns {
        texts: candidates.into_iter().map(|found| found.text).collect(),
        lead,
        note,
    })
}

/// What a turning point does to the income.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Way {
    Falls,
    Rises,
    Slope,
    Passport,
}

fn rank(way: Way, inside: bool) -> Rank {
    match (way, inside) {
        (Way::Falls, true) => Rank::FallOnTheWay,
        (Way::Rises | Way::Passport, true) => Rank::OtherOnTheWay,
        (Way::Slope, true) => Rank::SlopeOnTheWay,
        (Way::Falls, false) => Rank::FallBeyond,
        (Way::Rises | Way::Passport | Way::Slope, false) => Rank::Beyond,
    }
}

/// A turn in words; none where it is too small to matter.
fn turn_text(
    words: &Words<'_>,
    line: &BudgetLine,
    turn: &Turn,
    measure: Measure,
) -> Result<Option<(Way, TurnText)>, StatementError> {
    let size = jump(turn, measure);
    let slopes = (
        rate_before(line, turn, measure).map(kept_of_ten),
        rate_after(line, turn, measure).map(kept_of_ten),
    );
    let turned = match slopes {
        (Some(before), Some(after)) => (before.0 - after.0).abs() >= LEAST_SLOPE,
        (_, Some(_)) => true,
        (_, None) => false,
    };
    let passport = turn.effects.iter().any(|effect| {
        effect.jump.0 != 0 && words.assessment.items[effect.item].kind == ItemKind::Passport
    });
    let way = if size.0 <= -LEAST_JUMP {
        Way::Falls
    } else if size.0 >= LEAST_JUMP {
        Way::Rises
    } else if passport {
        Way::Passport
    } else if turned && turn.at > Fraction::ZERO {
        Way::Slope
    } else {
        return Ok(None);
    };
    let mut said = vec![];
    let causes = causes(words, turn)?;
    if !causes.is_empty() {
        said.push(format!("{}.", capital(causes.trim_end_matches('.'))));
    }
    match way {
        Way::Falls | Way::Rises => {
            let (key, sum) = if way == Way::Falls {
                ("turns.fall", -size)
            } else {
                ("turns.rise", size)
            };
            let sum = words.currency.short(sum);
            let mut text = words.say(key, &[("sum", &sum)])?;
            let effects = effects(words, turn)?;
            if effects.len() > 1 {
                text = format!("{}: {}.", text.trim_end_matches('.'), listed(&effects));
            }
            said.push(text);
            if let Some(trap) = line.traps.iter().find(|trap| trap.from == turn.at) {
                said.push(regained(words, line, trap)?);
            }
        }
        Way::Passport if said.is_empty() => {
            let effects = effects(words, turn)?;
            said.push(words.say("turns.passport", &[("effects", &listed(&effects))])?);
        }
        Way::Passport => {}
        Way::Slope => said.push(slope(words, slopes)?),
    }
    let pay = words.currency.short(turn.pay);
    let text = TurnText {
        place: words.say("turns.place", &[("hours", &hours_text(turn.hours))])?,
        pay: words.say("turns.pay", &[("sum", &pay)])?,
        what: said.join(" "),
    };
    Ok(Some((way, text)))
}

/// What is kept before and after, in words.
fn slope(
    words: &Words<'_>,
    slopes: (Option<Money>, Option<Money>),
) -> Result<String, StatementError> {
    let exact = |sum: Money| words.currency.short(sum);
    match slopes {
        (Some(before), Some(after)) if after.0 < 0 => words.say(
            "turns.slope_loses",
            &[("after", &exact(-after)), ("before", &exact(before))],
        ),
        (Some(before), Some(after)) => words.say(
            "turns.slope",
            &[("after", &exact(after)), ("before", &exact(before))],
        ),
        (None, Some(after)) => words.say("turns.slope_first", &[("after", &exact(after))]),
        (_, None) => Ok(String::new()),
    }
}

/// When the sum before a fall is reached again.
fn regained(words: &Words<'_>, line: &BudgetLine, trap: &Trap) -> Result<String, StatementError> {
    match trap.to {
        Some(to) => words.say("turns.regained", &[("hours", &hours_text(hours(to)))]),
        None => words.say(
            "turns.regained_never",
            &[("hours", &hours_text(line.up_to))],
        ),
    }
}

/// The rates of the segments around a turn; those of the turn itself where no segment meets it.
fn rate_before(line: &BudgetLine, turn: &Turn, measure: Measure) -> Option<Fraction> {
    let meets = |segment: &&Segment| segment.to == turn.at && segment.from < segment.to;
    match line.segments.iter().rev().find(meets) {
        Some(segment) => measure.rate(segment),
        None => turn.metr_before,
    }
}

/// See [`rate_before`].
fn rate_after(line: &BudgetLine, turn: &Turn, measure: Measure) -> Option<Fraction> {
    let meets = |segment: &&Segment| segment.from == turn.at && segment.from < segment.to;
    match line.segments.iter().find(meets) {
        Some(segment) => measure.rate(segment),
        None => turn.metr_after,
    }
}

/// The causes of a turn in words; at most two.
fn causes(words: &Words<'_>, turn: &Turn) -> Result<String, StatementError> {
    let mut said: Vec<String> = vec![];
    for cause in &turn.causes {
        let text = if words.folded(&cause.line) {
            let name = words.plain("sum.folded")?;
            words.say("turns.cause_plain", &[("name", &name)])?
        } else if let Some(text) = words.label(&format!("turn.{}", cause.line)) {
            text
        } else {
            let name = words
                .label(&format!("item.{}", cause.line))
                .unwrap_or_else(|| format!("{}, {}", cause.part, readable(&cause.line)));
            words.say("turns.cause_plain", &[("name", &name)])?
        };
        if !said.contains(&text) {
            said.push(text);
        }
    }
    said.truncate(2);
    Ok(listed(&said))
}

/// The largest effects of a turn in words: sums first, then help in kind.
fn effects(words: &Words<'_>, turn: &Turn) -> Result<Vec<String>, StatementError> {
    let mut sums: Vec<(usize, Money)> = vec![];
    let mut help = vec![];
    for effect in turn.effects.iter().filter(|effect| effect.jump.0 != 0) {
        match words.assessment.items[effect.item].kind {
            ItemKind::Passport => {
                let name = words.item(effect.item)?;
                let key = if effect.jump.0 < 0 {
                    "turns.effect_lost"
                } else {
                    "turns.effect_won"
                };
                let text = capital(&words.say(key, &[("name", &name)])?);
                if !help.contains(&text) {
                    help.push(text);
                }
            }
            ItemKind::Pay
            | ItemKind::Income
            | ItemKind::Tax
            | ItemKind::Contribution
            | ItemKind::Pension
            | ItemKind::Loan
            | ItemKind::Benefit
            | ItemKind::Cost
            | ItemKind::Housing => sums.push((effect.item, effect.jump)),
        }
    }
    sums.sort_by_key(|(item, jump)| (-jump.0.abs(), *item));
    let mut said = vec![];
    for (item, jump) in sums.into_iter().take(EFFECTS) {
        let name = words.item(item)?;
        let comes_off = match words.assessment.items[item].kind {
            ItemKind::Tax
            | ItemKind::Contribution
            | ItemKind::Pension
            | ItemKind::Loan
            | ItemKind::Cost
            | ItemKind::Housing => true,
            ItemKind::Pay | ItemKind::Income | ItemKind::Benefit | ItemKind::Passport => false,
        };
        let key = if (jump.0 < 0) == comes_off {
            "turns.effect_more"
        } else {
            "turns.effect_less"
        };
        let sum = words.currency.short(Money(jump.0.abs()));
        said.push(words.say(key, &[("name", &name), ("sum", &sum)])?);
    }
    said.append(&mut help);
    Ok(said)
}

/// Traps that do not start with a fall, and no-gain stretches.
fn stretches(
    words: &Words<'_>,
    main: &BudgetLine,
    range: (Hours, Hours),
    today: Hours,
    measure: Measure,
    out: &mut Vec<Candidate>,
) -> Result<(), StatementError> {
    let at_a_fall = |trap: &&Trap| {
        !main
            .turns
            .iter()
            .any(|turn| turn.at == trap.from && jump(turn, measure).0 <= -LEAST_JUMP)
    };
    for trap in main.traps.iter().filter(at_a_fall) {
        let from = hours_text(hours(trap.from));
        let depth = words.currency.short(trap.depth);
        let mut what = words.say("turns.trap", &[("sum", &depth), ("hours", &from)])?;
        what.push(' ');
        what.push_str(&regained(words, main, trap)?);
        let to = trap.to.unwrap_or(main.up_to.as_fraction());
        push_stretch(
            words,
            (trap.from, to),
            what,
            (range, today),
            Way::Falls,
            out,
        )?;
    }
    for NoGain { from, to } in &main.no_gain {
        let what = words.plain("turns.no_gain")?;
        push_stretch(words, (*from, *to), what, (range, today), Way::Falls, out)?;
    }
    Ok(())
}

/// Adds a range of hours.
fn push_stretch(
    words: &Words<'_>,
    (from, to): (Fraction, Fraction),
    what: String,
    (range, today): ((Hours, Hours), Hours),
    way: Way,
    out: &mut Vec<Candidate>,
) -> Result<(), StatementError> {
    let (first, last) = (hours(from), hours(to));
    let inside = first <= range.1 && last >= range.0;
    let place = words.say(
        "turns.range",
        &[("from", &hours_text(first)), ("to", &hours_text(last))],
    )?;
    out.push(Candidate {
        rank: rank(way, inside),
        away: (first.0 - today.0).abs(),
        at: from,
        text: TurnText {
            place,
            pay: String::new(),
            what,
        },
    });
    Ok(())
}

/// Falls on the way to an offer at another wage.
fn on_offers(
    words: &Words<'_>,
    main: &BudgetLine,
    steps: &[Step<'_>],
    range: (Hours, Hours),
    measure: Measure,
    out: &mut Vec<Candidate>,
) -> Result<(), StatementError> {
    for step in steps
        .iter()
        .filter(|step| step.line.terms.wage != main.terms.wage)
    {
        let falls = step.line.turns.iter().filter(|turn| {
            jump(turn, measure).0 <= -LEAST_JUMP
                && turn.hours >= range.0
                && turn.hours <= step.to.hours
                && !main
                    .turns
                    .iter()
                    .any(|known| known.hours == turn.hours && jump(known, measure).0 <= -LEAST_JUMP)
        });
        for turn in falls {
            let sum = words.currency.short(-jump(turn, measure));
            let mut what = words.say("turns.fall_on", &[("offer", &step.name), ("sum", &sum)])?;
            if let Some(trap) = step.line.traps.iter().find(|trap| trap.from == turn.at) {
                what.push(' ');
                what.push_str(&regained(words, step.line, trap)?);
            }
            let pay = words.currency.short(turn.pay);
            out.push(Candidate {
                rank: Rank::FallOnTheWay,
                away: (turn.hours.0 - range.0.0).abs(),
                at: turn.at,
                text: TurnText {
                    place: words.say("turns.place", &[("hours", &hours_text(turn.hours))])?,
                    pay: words.say("turns.pay", &[("sum", &pay)])?,
                    what,
                },
            });
        }
    }
    Ok(())
}
