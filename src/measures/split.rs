//! Measures between lines: rise split, holding hours, target hours.

use super::line::Worked;
use super::points::{Stretch, Sums};
use super::types::{PaySplit, RiseSplit, TargetHours};
use crate::engine::Points;
use crate::num::{Fraction, Hours, Money};

/// How many quarter hours are worked out together.
const BLOCK: usize = 16;

/// What is left after costs of working (net income where there are none) at quarter hours of a line, worked out when it is asked for. Payable hours are quarter hours (design section 2).
pub(super) struct Quarters<'a, 's, 'm> {
    points: &'a mut Points<'s, 'm>,
    sums: &'a Sums,
    /// How many quarters the line has.
    last: i64,
    /// What was worked out so far, by quarter.
    known: Vec<Option<Left>>,
}

/// What is left at a quarter hour.
#[derive(Clone, Copy)]
struct Left {
    /// Net income after costs of working.
    after_costs: Money,
    /// The pay that reaches the person.
    pay: Money,
}

impl<'a, 's, 'm> Quarters<'a, 's, 'm> {
    pub(super) fn new(points: &'a mut Points<'s, 'm>, sums: &'a Sums, up_to: Hours) -> Self {
        Quarters {
            points,
            sums,
            last: up_to.0 / 25,
            known: vec![None; usize::try_from(up_to.0 / 25 + 1).unwrap_or(0)],
        }
    }

    fn left(&mut self, quarter: i64) -> Left {
        let at = usize::try_from(quarter).expect("quarters count from zero");
        if let Some(left) = self.known[at] {
            return left;
        }
        // Neighbours are asked for next, and many points at once cost little more than one.
        let from = at / BLOCK * BLOCK;
        let block = from..(from + BLOCK).min(self.known.len());
        let hours: Vec<Hours> = block.clone().map(|at| Hours(at as i64 * 25)).collect();
        for (at, items) in block.zip(self.points.many(&hours)) {
            self.known[at] = Some(Left {
                after_costs: self.sums.totals(&items).after_costs,
                pay: self.sums.reaches(&items),
            });
        }
        self.known[at].expect("the block was worked out")
    }

    /// The fewest quarter hours from which at least this pay reaches the person, to the end of the line.
    pub(super) fn pay_stays(&mut self, pay: Money) -> Option<Hours> {
        let below = (0..=self.last)
            .rev()
            .find(|quarter| self.left(*quarter).pay < pay)
            .map_or(0, |at| at + 1);
        (below <= self.last).then_some(Hours(below * 25))
    }

    /// The fewest quarter hours from which a sum stays reached to the end of the line; for what is left today they are the holding hours.
    pub(super) fn stays(&mut self, sum: Money) -> Option<Hours> {
        let below = (0..=self.last)
            .rev()
            .find(|quarter| self.left(*quarter).after_costs < sum)
            .map_or(0, |at| at + 1);
        (below <= self.last).then_some(Hours(below * 25))
    }

    /// Target hours for a sum.
    pub(super) fn target(&mut self, sum: Money) -> TargetHours {
        let first = (0..=self.last)
            .find(|quarter| self.left(*quarter).after_costs >= sum)
            .map(|at| Hours(at * 25));
        TargetHours {
            sum,
            first,
            stays: self.stays(sum),
        }
    }
}

fn stretch_at(stretches: &[Stretch], at: Fraction) -> Option<&Stretch> {
    stretches.iter().rfind(|s| s.from <= at && at < s.to)
}

/// The rise split at today's hours: price part, the hourly return new less old to the right; income part, net income new less old
/// (methods section 10.3 gives κ; no behaviour is predicted).
pub(super) fn rise(old: &Worked, new: &Worked, today: Hours) -> Option<RiseSplit> {
    let at = today.as_fraction();
    let (before, after) = (
        stretch_at(&old.stretches, at)?,
        stretch_at(&new.stretches, at)?,
    );
    let net = |worked: &Worked| {
        worked
            .line
            .grid
            .iter()
            .find(|p| p.hours == today)
            .map(|p| p.net)
    };
    Some(RiseSplit {
        price: after.net.slope(at) - before.net.slope(at),
        income: net(new)? - net(old)?,
        fragile: fragile(old, new, at),
    })
}

/// Whether hours sit on a turning point of either line.
fn fragile(old: &Worked, new: &Worked, at: Fraction) -> bool {
    let near = Fraction::new(1, 100);
    let mut turns = old.line.turns.iter().chain(&new.line.turns);
    turns.any(|turn| turn.at - at <= near && at - turn.at <= near)
}

/// The rise split of the pay that reaches the person: hourly return on both terms and the income part at today's hours, and the hours that
/// hold today's pay. `quarters` are those of the new line.
pub(super) fn pay_split(
    (old, new): (&Worked, &Worked),
    today: Hours,
    sums: &Sums,
    quarters: &mut Quarters<'_, '_, '_>,
) -> Option<PaySplit> {
    let at = today.as_fraction();
    let (before, after) = (
        stretch_at(&old.stretches, at)?,
        stretch_at(&new.stretches, at)?,
    );
    let reaches = |worked: &Worked| {
        let mut grid = worked.line.grid.iter();
        let point = grid.find(|point| point.hours == today)?;
        Some(sums.reaches(&point.items))
    };
    let now = reaches(old)?;
    Some(PaySplit {
        hour_before: before.reaches.slope(at),
        hour_after: after.reaches.slope(at),
        income: reaches(new)? - now,
        fragile: fragile(old, new, at),
        holding: quarters.pay_stays(now),
    })
}
