//! Measures between lines: rise split, holding hours, target hours.

use super::line::Worked;
use super::points::{Stretch, Sums};
use super::types::{RiseSplit, TargetHours};
use crate::engine::Special;
use crate::num::{Fraction, Hours, Money};

/// Net income at every quarter hour from zero to the end of a line. Payable hours are quarter hours (design section 2).
pub(super) fn quarter_hours(special: &Special<'_>, sums: &Sums, up_to: Hours) -> Vec<Money> {
    let mut values = Vec::new();
    (0..=up_to.0 / 25).map(|quarter| sums.totals(&special.at(Hours(quarter * 25), &mut values)).net).collect()
}

/// The fewest quarter hours from which a sum stays reached to the end of the line.
fn stays(line: &[Money], sum: Money) -> Option<Hours> {
    let below = line.iter().rposition(|net| *net < sum).map_or(0, |at| at + 1);
    (below < line.len()).then(|| Hours(below as i64 * 25))
}

/// Target hours for a sum.
pub(super) fn target(line: &[Money], sum: Money) -> TargetHours {
    let first = line.iter().position(|net| *net >= sum).map(|at| Hours(at as i64 * 25));
    TargetHours { sum, first, stays: stays(line, sum) }
}

/// Holding hours: the fewest at a new wage from which today's net income is kept.
pub(super) fn holding(line: &[Money], today: Money) -> Option<Hours> {
    stays(line, today)
}

fn stretch_at(stretches: &[Stretch], at: Fraction) -> Option<&Stretch> {
    stretches.iter().rfind(|s| s.from <= at && at < s.to)
}

/// The rise split at today's hours: price part, the hourly return new less old to the right; income part, net income new less old
/// (methods section 10.3 gives κ; no behaviour is predicted).
pub(super) fn rise(old: &Worked, new: &Worked, today: Hours) -> Option<RiseSplit> {
    let at = today.as_fraction();
    let (before, after) = (stretch_at(&old.stretches, at)?, stretch_at(&new.stretches, at)?);
    let net = |worked: &Worked| worked.line.grid.iter().find(|p| p.hours == today).map(|p| p.net);
    let near = Fraction::new(1, 100);
    let fragile = old.line.turns.iter().chain(&new.line.turns).any(|t| t.at - at <= near && at - t.at <= near);
    Some(RiseSplit { price: after.net.slope(at) - before.net.slope(at), income: net(new)? - net(old)?, fragile })
}
