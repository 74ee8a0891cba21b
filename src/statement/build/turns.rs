//! Turning points: which ones a letter prints, at most five, falls and traps between today and the steps first.

use super::Detail;
use super::steps::Step;
use super::turn_words::{on_offer, range_text, steps_of_cost, turn_text};
use super::words::{Measure, Words};
use crate::measures::{BudgetLine, EarnerResult, Trap, Turn, TurnKind};
use crate::num::{Fraction, Hours, Money};
use crate::statement::error::StatementError;
use crate::statement::view::TurnText;

/// Turning points that a letter prints at most.
const MOST: usize = 5;
/// Turning points of least weight are printed up to this many; and all of them, of the second person and in brief letters.
const FILL: usize = 3;
/// The least jump that is worth a line, in minor units.
pub(super) const LEAST_JUMP: i64 = 100;
/// A range behind a step of cost that is shorter than this, in hours, belongs to the step and is no trap of its own.
const SHORT: Fraction = Fraction::whole(2);

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
    /// Rises, passport changes and steps of cost there.
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
        (TurnKind::Kink | TurnKind::Passport, _) | (TurnKind::CostStep, Measure::Net) => {
            Money::ZERO
        }
        (TurnKind::Cliff, Measure::Net) => turn.size,
        (TurnKind::Cliff | TurnKind::CostStep, Measure::AfterCosts) => {
            turn.after_costs_after - turn.after_costs_before
        }
    }
}

/// The trap that a turn starts.
pub(super) fn trap_at<'a>(line: &'a BudgetLine, turn: &Turn) -> Option<&'a Trap> {
    line.traps.iter().find(|trap| trap.from == turn.at)
}

/// Whether a turn is a step of cost that more hours soon make up for, such as one more day's fare.
pub(super) fn is_cost_step(line: &BudgetLine, turn: &Turn, measure: Measure) -> bool {
    let short = |trap: &Trap| trap.to.is_some_and(|to| to - trap.from < SHORT);
    turn.kind == TurnKind::CostStep
        && jump(turn, measure).0 < 0
        && trap_at(line, turn).is_none_or(short)
}

/// The traps that are more than what follows a step of cost.
pub(super) fn own_traps(line: &BudgetLine, measure: Measure) -> Vec<&Trap> {
    let of_cost = |trap: &&Trap| {
        let turn = line.turns.iter().find(|turn| turn.at == trap.from);
        !turn.is_some_and(|turn| is_cost_step(line, turn, measure))
    };
    line.traps.iter().filter(of_cost).collect()
}

/// The turns in order; changes of slope that lie within a quarter of an hour of each other count as one.
fn together(turns: &[Turn]) -> impl Iterator<Item = &[Turn]> {
    turns.chunk_by(|one, next| {
        let kinks = one.kind == TurnKind::Kink && next.kind == TurnKind::Kink;
        kinks && (next.at - one.at) * Fraction::whole(4) <= Fraction::ONE
    })
}

/// Chooses and words the turning points of the section that has this place in the letter.
pub(super) fn turns(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
    (measure, place): (Measure, usize),
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
    let inside = |hours: Hours| hours >= range.0 && hours <= range.1;
    let mut candidates = vec![];
    let mut costs: Vec<&Turn> = vec![];
    let mut help_on_the_way = false;
    for near in together(&main.turns) {
        let Some(turn) = near.first() else { continue };
        if is_cost_step(main, turn, measure) {
            if inside(turn.hours) && turn.at > Fraction::ZERO {
                costs.push(turn);
            }
        } else if let Some((way, text)) = turn_text(words, main, near, measure)? {
            // Help in kind that is won or lost on the way to a step has a part of its own.
            if way == Way::Passport && inside(turn.hours) {
                help_on_the_way = true;
                continue;
            }
            candidates.push(Candidate {
                rank: rank(way, inside(turn.hours)),
                away: (turn.hours.0 - today.0).abs(),
                at: turn.at,
                text,
            });
        }
    }
    if let Some(first) = costs.first() {
        candidates.push(Candidate {
            rank: Rank::OtherOnTheWay,
            away: (first.hours.0 - today.0).abs(),
            at: first.at,
            text: steps_of_cost(words, main, &costs, measure)?,
        });
    }
    for (from, to, text) in range_text(words, main, measure)? {
        let (first, last) = (
            super::super::money::hours(from),
            super::super::money::hours(to),
        );
        candidates.push(Candidate {
            rank: rank(Way::Falls, first <= range.1 && last >= range.0),
            away: (first.0 - today.0).abs(),
            at: from,
            text,
        });
    }
    for (turn, text) in on_offer(words, main, steps, (range, measure))? {
        candidates.push(Candidate {
            rank: Rank::FallOnTheWay,
            away: (turn.hours.0 - range.0.0).abs(),
            at: turn.at,
            text,
        });
    }
    let all = candidates.len();
    candidates.sort_by_key(|found| (found.rank, found.away, found.at));
    candidates.truncate(match (words.detail, place) {
        (Detail::Full | Detail::Plain | Detail::Short | Detail::Bare, 0) => MOST,
        (_, _) => FILL,
    });
    let on_the_way = help_on_the_way
        || candidates
            .iter()
            .any(|found| found.rank <= Rank::SlopeOnTheWay);
    let fill = match (words.detail, place) {
        (Detail::Full | Detail::Plain, 0) => FILL,
        (Detail::Short | Detail::Bare | Detail::Brief, 0) => 1,
        // What lies beyond the steps of the second person is not worth a line.
        (_, _) => 0,
    };
    let mut position = 0;
    candidates.retain(|found| {
        position += 1;
        found.rank < Rank::FallBeyond || position <= fill
    });
    candidates.sort_by_key(|found| found.at);
    let lead = if on_the_way {
        String::new()
    } else {
        words.plain("turns.none")?
    };
    let note = match all - candidates.len() {
        _ if words.detail == Detail::Bare || place > 0 => String::new(),
        0 => String::new(),
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
pub(super) enum Way {
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
