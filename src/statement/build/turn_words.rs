//! Turning points in words: what turned, and what that does.

use super::steps::Step;
use super::turns::{LEAST_JUMP, Way, is_cost_step, jump, own_traps, trap_at};
use super::words::{Measure, Told, Words, hours_text};
use crate::measures::{BudgetLine, Cause, ItemKind, NoGain, Segment, Trap, Turn};
use crate::num::{Fraction, Hours, Money};
use crate::statement::error::StatementError;
use crate::statement::money::{hours, kept_of_ten, readable};
use crate::statement::view::TurnText;

/// Effects named at one turning point at most.
const EFFECTS: usize = 3;
/// The least change of what is kept of ten units that is worth a line, in minor units.
const LEAST_SLOPE: i64 = 5;

/// A turn in words, or several changes of slope that lie close together; none where it is too small to matter.
pub(super) fn turn_text(
    words: &Words<'_>,
    line: &BudgetLine,
    near: &[Turn],
    measure: Measure,
) -> Result<Option<(Way, TurnText)>, StatementError> {
    let (Some(turn), Some(last)) = (near.first(), near.last()) else {
        return Ok(None);
    };
    let size = jump(turn, measure);
    let slopes = (
        segment_before(line, turn).map_or(turn.metr_before, |segment| measure.rate(segment)),
        segment_after(line, last).map_or(last.metr_after, |segment| measure.rate(segment)),
    );
    let slopes = (slopes.0.map(kept_of_ten), slopes.1.map(kept_of_ten));
    let turned = match slopes {
        (Some(before), Some(after)) => (before.0 - after.0).abs() >= LEAST_SLOPE,
        (None, Some(_)) => true,
        (_, None) => false,
    };
    let help = |wanted: i64| -> Result<Vec<String>, StatementError> {
        let mut names = vec![];
        for effect in turn.effects.iter().filter(|effect| {
            words.assessment.items[effect.item].kind == ItemKind::Passport
                && effect.jump.0.signum() == wanted
        }) {
            let name = words.item(effect.item)?;
            if !names.contains(&name) {
                names.push(name);
            }
        }
        Ok(names)
    };
    let (lost, won) = (help(-1)?, help(1)?);
    let way = if size.0 <= -LEAST_JUMP {
        Way::Falls
    } else if size.0 >= LEAST_JUMP {
        Way::Rises
    } else if turn.at.is_zero() {
        // Work starts: what it brings from its first minute on is the first answer's business.
        return Ok(None);
    } else if !lost.is_empty() || !won.is_empty() {
        Way::Passport
    } else if turned {
        Way::Slope
    } else {
        return Ok(None);
    };
    let mut said = vec![];
    for turn in near {
        for cause in causes(words, line, turn)? {
            said.push(words.sentence(&cause)?);
        }
    }
    match way {
        Way::Falls | Way::Rises => {
            let (key, key_by, sum) = if way == Way::Falls {
                ("turns.fall", "turns.fall_by", -size)
            } else {
                ("turns.rise", "turns.rise_by", size)
            };
            let sum = words.currency.short(sum);
            let effects = effects(words, turn)?;
            said.push(if effects.len() > 1 {
                let list = words.listed(&effects)?;
                words.say(key_by, &[("sum", &sum), ("list", &list)])?
            } else {
                words.say(key, &[("sum", &sum)])?
            });
            if let Some(trap) = trap_at(line, turn) {
                said.push(regained(words, line, trap)?);
            }
        }
        Way::Passport => {}
        Way::Slope => said.push(slope(words, slopes)?),
    }
    for (key, names) in [("turns.help_lost", lost), ("turns.help_won", won)] {
        if !names.is_empty() {
            said.push(words.say(key, &[("name", &words.enumerated(&names))])?);
        }
    }
    let stars = near.iter().map(|turn| words.marks.of_turn(turn));
    let star = stars.max().unwrap_or_default();
    let (place, pay) = if turn.at.is_zero() {
        (words.plain("turns.start")?, String::new())
    } else {
        let place = words.say("turns.place", &[("hours", &hours_text(turn.hours))])?;
        (place, pay(words, turn)?)
    };
    let text = TurnText {
        place: format!("{place}{star}"),
        pay,
        what: said.join(" "),
    };
    Ok(Some((way, text)))
}

/// The pay at a turn.
fn pay(words: &Words<'_>, turn: &Turn) -> Result<String, StatementError> {
    words.say("turns.pay", &[("sum", &words.currency.short(turn.pay))])
}

/// What is kept before and after, in words.
fn slope(
    words: &Words<'_>,
    (before, after): (Option<Money>, Option<Money>),
) -> Result<String, StatementError> {
    let Some(after) = after else {
        return Ok(String::new());
    };
    let mut text = words.rate(Told::FromHere, after)?;
    if let Some(before) = before {
        let key = match before.0 {
            ..0 => "turns.before_lost",
            0 => "turns.before_nothing",
            1000 => "turns.before_all",
            1..1000 => "turns.before_kept",
            _ => "turns.before_more",
        };
        let ten = words.currency.short(Money(before.0.abs()));
        text.push(' ');
        text.push_str(&words.say(key, &[("ten", &ten)])?);
    }
    Ok(text)
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

/// The segment that ends at a turn; none where none meets it.
fn segment_before<'a>(line: &'a BudgetLine, turn: &Turn) -> Option<&'a Segment> {
    let meets = |segment: &&Segment| segment.to == turn.at && segment.from < segment.to;
    line.segments.iter().rev().find(meets)
}

/// The segment that starts at a turn; none where none meets it.
fn segment_after<'a>(line: &'a BudgetLine, turn: &Turn) -> Option<&'a Segment> {
    let meets = |segment: &&Segment| segment.from == turn.at && segment.from < segment.to;
    line.segments.iter().find(meets)
}

/// The causes of a turn in words; at most two. Help in kind is said as what it is, won or lost.
fn causes(
    words: &Words<'_>,
    line: &BudgetLine,
    turn: &Turn,
) -> Result<Vec<String>, StatementError> {
    let mut said: Vec<String> = vec![];
    for cause in &turn.causes {
        let help = words
            .assessment
            .items
            .iter()
            .any(|item| item.kind == ItemKind::Passport && item.name == cause.line);
        if help {
            continue;
        }
        let text = cause_text(words, line, turn, cause)?;
        if !said.contains(&text) {
            said.push(text);
        }
    }
    said.truncate(2);
    Ok(said)
}

/// One cause: the label for the way in which its instrument's items turn, else the label for any way.
pub(super) fn cause_text(
    words: &Words<'_>,
    line: &BudgetLine,
    turn: &Turn,
    cause: &Cause,
) -> Result<String, StatementError> {
    let key = format!("turn.{}", cause.line);
    let item = format!("item.{}", cause.line);
    let hides = words.folded(&cause.line)
        || [&key, &item].iter().any(|key| words.gives_away(key))
        || words.reveals(&cause.part);
    if hides {
        let name = words.plain("sum.folded")?;
        return words.say("turns.cause_plain", &[("name", &name)]);
    }
    let sides = (segment_before(line, turn), segment_after(line, turn));
    let variants = ways(words, turn, cause, sides);
    for variant in variants {
        if let Some(text) = words.label(&format!("{key}.{variant}")) {
            return Ok(text);
        }
    }
    if let Some(text) = words.label(&key) {
        return Ok(text);
    }
    let name = match words.label(&item) {
        Some(name) => name,
        None => words.own(&key, &format!("{}, {}", cause.part, readable(&cause.line)))?,
    };
    words.say("turns.cause_plain", &[("name", &name)])
}

/// How the items of a cause's instrument turn: `starts` or `ends` where what each further unit of pay does to them was or
/// becomes nothing, then `more` or `less` as what is kept goes.
fn ways(
    words: &Words<'_>,
    turn: &Turn,
    cause: &Cause,
    sides: (Option<&Segment>, Option<&Segment>),
) -> Vec<&'static str> {
    let of = |part: &str| part.split(", ").next().unwrap_or_default().to_owned();
    let instrument = of(&cause.part);
    let (mut before, mut after) = (Fraction::ZERO, Fraction::ZERO);
    let mut change = Fraction::ZERO;
    for effect in &turn.effects {
        let item = &words.assessment.items[effect.item];
        if item.kind == ItemKind::Passport || of(&item.part) != instrument {
            continue;
        }
        let share = |segment: Option<&Segment>| {
            segment.map_or(Fraction::ZERO, |segment| segment.shares[effect.item])
        };
        before = before + share(sides.0);
        after = after + share(sides.1);
        change = change + Fraction::new(i128::from(effect.jump.0), 100) + effect.slope;
    }
    let mut ways = vec![];
    match (before.is_zero(), after.is_zero()) {
        (true, false) => ways.push("starts"),
        (false, true) => ways.push("ends"),
        (true, true) | (false, false) => {}
    }
    if change > Fraction::ZERO {
        ways.push("more");
    } else if change < Fraction::ZERO {
        ways.push("less");
    }
    ways
}

/// The largest effects of a turn on sums, in words; those on an item of both adults as one.
fn effects(words: &Words<'_>, turn: &Turn) -> Result<Vec<String>, StatementError> {
    let items = &words.assessment.items;
    let mut sums: Vec<(usize, Money)> = vec![];
    for effect in &turn.effects {
        if items[effect.item].kind == ItemKind::Passport {
            continue;
        }
        let name = &items[effect.item].name;
        match sums.iter_mut().find(|(item, _)| items[*item].name == *name) {
            Some((_, sum)) => *sum += effect.jump,
            None => sums.push((effect.item, effect.jump)),
        }
    }
    sums.retain(|(_, jump)| jump.0 != 0);
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
            ItemKind::Pay
            | ItemKind::Income
            | ItemKind::Benefit
            | ItemKind::Passport
            | ItemKind::Employer => false,
        };
        let key = if (jump.0 < 0) == comes_off {
            "turns.effect_more"
        } else {
            "turns.effect_less"
        };
        let sum = words.currency.short(Money(jump.0.abs()));
        said.push(words.say(key, &[("name", &name), ("sum", &sum)])?);
    }
    Ok(said)
}

/// All steps of cost between today and the steps, as one.
pub(super) fn steps_of_cost(
    words: &Words<'_>,
    line: &BudgetLine,
    turns: &[&Turn],
    measure: Measure,
) -> Result<TurnText, StatementError> {
    let mut causes_said: Vec<String> = vec![];
    let mut places: Vec<String> = vec![];
    let mut last = String::new();
    let (mut most, mut away) = (Money::ZERO, Some(Fraction::ZERO));
    for turn in turns {
        for cause in causes(words, line, turn)? {
            let text = words.sentence(&cause)?;
            if !causes_said.contains(&text) {
                causes_said.push(text);
            }
        }
        // The last hours before the step: it lies at or just above them.
        let at = (turn.at * Fraction::whole(100)).floor();
        let at = Hours(i64::try_from(at).unwrap_or(turn.hours.0));
        last = hours_text(at);
        places.push(words.number(&last));
        most = most.max(-jump(turn, measure));
        let trap = trap_at(line, turn).and_then(|trap| trap.to.map(|to| to - trap.from));
        away = match (away, trap) {
            (Some(known), Some(more)) => Some(known.max(more)),
            (_, None) | (None, _) => None,
        };
    }
    let sum = words.currency.short(most);
    let place = if places.len() > 1 {
        places.pop();
        let list = words.enumerated(&places);
        words.say("turns.above_and", &[("list", &list), ("hours", &last)])?
    } else {
        words.say("turns.above", &[("hours", &last)])?
    };
    let one = turns.len() == 1;
    let costs = match (away, turns.first()) {
        (Some(away), Some(turn)) if one => {
            let back = hours_text(hours(turn.at + away));
            words.say("turns.cost_one", &[("sum", &sum), ("hours", &back)])?
        }
        (Some(away), _) => {
            let back = hours_text(hours(away));
            words.say("turns.cost_each", &[("sum", &sum), ("hours", &back)])?
        }
        (None, _) => words.say("turns.cost_plain", &[("sum", &sum)])?,
    };
    causes_said.push(costs);
    Ok(TurnText {
        place,
        pay: match turns {
            [turn] => pay(words, turn)?,
            _ => String::new(),
        },
        what: causes_said.join(" "),
    })
}

/// Traps that do not start with a fall, and no-gain stretches: from, to and the words.
pub(super) fn range_text(
    words: &Words<'_>,
    main: &BudgetLine,
    measure: Measure,
) -> Result<Vec<(Fraction, Fraction, TurnText)>, StatementError> {
    let mut out = vec![];
    let at_a_fall = |trap: &&Trap| {
        !main
            .turns
            .iter()
            .any(|turn| turn.at == trap.from && jump(turn, measure).0 <= -LEAST_JUMP)
    };
    for trap in own_traps(main, measure).into_iter().filter(at_a_fall) {
        let from = hours_text(hours(trap.from));
        let depth = words.currency.short(trap.depth);
        let mut what = if trap.from.is_zero() {
            words.say("turns.trap_start", &[("sum", &depth)])?
        } else {
            words.say("turns.trap", &[("sum", &depth), ("hours", &from)])?
        };
        what.push(' ');
        what.push_str(&regained(words, main, trap)?);
        let to = trap.to.unwrap_or(main.up_to.as_fraction());
        out.push((trap.from, to, stretch(words, (trap.from, to), what)?));
    }
    for NoGain { from, to } in &main.no_gain {
        let what = words.plain("turns.no_gain")?;
        out.push((*from, *to, stretch(words, (*from, *to), what)?));
    }
    Ok(out)
}

/// A range of hours.
fn stretch(
    words: &Words<'_>,
    (from, to): (Fraction, Fraction),
    what: String,
) -> Result<TurnText, StatementError> {
    let (from, to) = (hours_text(hours(from)), hours_text(hours(to)));
    Ok(TurnText {
        place: words.say("turns.range", &[("from", &from), ("to", &to)])?,
        pay: String::new(),
        what,
    })
}

/// Falls on the way to an offer at another wage.
pub(super) fn on_offer<'a>(
    words: &Words<'_>,
    main: &BudgetLine,
    steps: &'a [Step<'_>],
    (range, measure): ((Hours, Hours), Measure),
) -> Result<Vec<(&'a Turn, TurnText)>, StatementError> {
    let mut out = vec![];
    for step in steps
        .iter()
        .filter(|step| step.line.terms.wage != main.terms.wage)
    {
        let falls = step.line.turns.iter().filter(|turn| {
            jump(turn, measure).0 <= -LEAST_JUMP
                && !is_cost_step(step.line, turn, measure)
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
            if let Some(trap) = trap_at(step.line, turn) {
                what.push(' ');
                what.push_str(&regained(words, step.line, trap)?);
            }
            let text = TurnText {
                place: words.say("turns.place", &[("hours", &hours_text(turn.hours))])?,
                pay: pay(words, turn)?,
                what,
            };
            out.push((turn, text));
        }
    }
    Ok(out)
}
