//! Turning points: kinks, cliffs, steps of cost and passport changes, with causes and effects.

use super::points::{Stretch, Sums};
use super::types::{Cause, Effect, ItemKind, Turn, TurnKind};
use crate::engine::{Bend, Points, Walk};
use crate::num::{Fraction, Hours, Money};

/// All turning points of a walk.
pub(super) fn turns(
    points: &mut Points<'_, '_>,
    sums: &Sums,
    walk: &Walk,
    stretches: &[Stretch],
) -> Vec<Turn> {
    walk.bends
        .iter()
        .filter_map(|bend| turn(points, sums, walk, stretches, bend))
        .collect()
}

/// A sum in currency units as whole minor units, half up.
pub(super) fn minor(value: Fraction) -> Money {
    Money(i64::try_from(value.rounded(100)).expect("a sum is bounded"))
}

/// Hours rounded up to a hundredth.
pub(super) fn hours_up(at: Fraction) -> Hours {
    Hours(i64::try_from((at * Fraction::whole(100)).ceil()).expect("hours are bounded"))
}

fn turn(
    points: &mut Points<'_, '_>,
    sums: &Sums,
    walk: &Walk,
    stretches: &[Stretch],
    bend: &Bend,
) -> Option<Turn> {
    let at = bend.at;
    let right_at = walk.pieces.iter().position(|p| p.from == at)?;
    let (right, right_piece) = (&stretches[right_at], &walk.pieces[right_at]);
    let left = right_at
        .checked_sub(1)
        .map(|l| (&stretches[l], &walk.pieces[l]));
    let mut effects = Vec::new();
    let (mut jump_net, mut jump_costs) = (Fraction::ZERO, Fraction::ZERO);
    let same_pay = left.is_some_and(|(s, _)| s.pay.slope(at) == right.pay.slope(at));
    for item in 0..right_piece.items.len() {
        let kind = sums.kind(item);
        // What the employer pays is no part of what the household keeps.
        if kind == ItemKind::Employer {
            continue;
        }
        let sign = Fraction::whole(i128::from(sums.sign(item)));
        let after = right_piece.items[item];
        if same_pay && left.is_some_and(|(_, piece)| piece.items[item] == after) {
            continue;
        }
        let before_value = match left {
            Some((_, piece)) => piece.items[item].at(at),
            None => bend
                .before
                .as_ref()
                .map_or(after.at(at), |values| values[item]),
        };
        let jump = after.at(at) - before_value;
        if kind == ItemKind::Passport {
            if !jump.is_zero() {
                effects.push(Effect {
                    item,
                    jump: Money(if jump.is_negative() { -1 } else { 1 }),
                    slope: Fraction::ZERO,
                });
            }
            continue;
        }
        let per_pay = |stretch: &Stretch, slope: Fraction| {
            let pay = stretch.pay.slope(at);
            if pay.is_zero() {
                Fraction::ZERO
            } else {
                slope / pay
            }
        };
        let slope = match left {
            Some((stretch, piece)) => {
                per_pay(right, after.slope(at)) - per_pay(stretch, piece.items[item].slope(at))
            }
            None => Fraction::ZERO,
        };
        match kind {
            ItemKind::Cost => jump_costs = jump_costs + jump,
            ItemKind::Housing | ItemKind::Passport | ItemKind::Employer => {}
            ItemKind::Pay
            | ItemKind::Income
            | ItemKind::Tax
            | ItemKind::Contribution
            | ItemKind::Pension
            | ItemKind::Loan
            | ItemKind::Benefit => jump_net = jump_net + jump * sign,
        }
        if !jump.is_zero() || !slope.is_zero() {
            effects.push(Effect {
                item,
                jump: minor(jump * sign),
                slope: slope * sign,
            });
        }
    }
    let half_minor = Fraction::new(1, 200);
    let jumps = |value: Fraction| value > half_minor || value < -half_minor;
    let (metr_before, metr_after) = (
        left.and_then(|(s, _)| s.metr(&s.net, at)),
        right.metr(&right.net, at),
    );
    let costs_slope =
        left.is_some_and(|(s, _)| s.metr(&s.after_costs, at) != right.metr(&right.after_costs, at));
    let passport = effects
        .iter()
        .any(|e| sums.kind(e.item) == ItemKind::Passport);
    let kind = if jumps(jump_net) {
        TurnKind::Cliff
    } else if jumps(jump_costs) {
        TurnKind::CostStep
    } else if left.is_some() && (metr_before != metr_after || costs_slope) {
        TurnKind::Kink
    } else if passport {
        TurnKind::Passport
    } else {
        return None;
    };
    let program = points.program();
    let mut causes: Vec<Cause> = bend
        .causes
        .iter()
        .map(|line| Cause {
            part: program.lines[*line].part.clone(),
            line: program.lines[*line].name.clone(),
        })
        .collect();
    causes.sort();
    causes.dedup();
    let left_stretch = left.map(|(s, _)| s);
    let print = printed(points, sums, bend, left_stretch, right, kind);
    Some(Turn {
        kind,
        at,
        hours: print.hours,
        pay: print.pay,
        net_before: print.before.0,
        net_after: print.after.0,
        after_costs_before: print.before.1,
        after_costs_after: print.after.1,
        size: if kind == TurnKind::Cliff {
            print.after.0 - print.before.0
        } else {
            Money::ZERO
        },
        metr_before,
        metr_after,
        causes,
        effects,
    })
}

struct Printed {
    hours: Hours,
    pay: Money,
    /// Net and after costs.
    before: (Money, Money),
    after: (Money, Money),
}

/// How far from the smoothed place the first payable pay of the new branch is looked for, in minor units of pay.
const WINDOW: i128 = 400;

/// What is printed of a turning point, from exact evaluations. A jump is printed at the first payable whole-penny pay from which the
/// new branch stays: from there on exact values are nearer to the right curve than to the left one.
fn printed(
    points: &mut Points<'_, '_>,
    sums: &Sums,
    bend: &Bend,
    left: Option<&Stretch>,
    right: &Stretch,
    kind: TurnKind,
) -> Printed {
    let at = bend.at;
    let smooth = || {
        let before = left.map_or((right.net.at(at), right.after_costs.at(at)), |s| {
            (s.net.at(at), s.after_costs.at(at))
        });
        Printed {
            hours: hours_up(at),
            pay: minor(right.pay.at(at)),
            before: (minor(before.0), minor(before.1)),
            after: (minor(right.net.at(at)), minor(right.after_costs.at(at))),
        }
    };
    let slope = right.pay.slope(at);
    let start = Fraction::new(right.pay.c[0], right.pay.scale);
    // Pay is a straight line in hours except where a pack makes it of the second degree.
    if slope.is_zero()
        || right.pay.c[2] != 0
        || left.is_some_and(|s| s.pay.at(at) != right.pay.at(at))
    {
        return smooth();
    }
    let before_at_zero = left.is_none().then(|| {
        let t = sums.totals(&points.exactly_at(at));
        (t.net, t.after_costs)
    });
    let mut exact = |pence: i128| -> Option<(Fraction, (Money, Money))> {
        let pay = Fraction::new(pence, 100);
        let line = left.filter(|s| s.pay.at(at) > pay && !s.pay.slope(at).is_zero());
        let hours = match line {
            Some(s) => (pay - Fraction::new(s.pay.c[0], s.pay.scale)) / s.pay.slope(at),
            None => (pay - start) / slope,
        };
        if hours.is_negative() {
            return None;
        }
        let t = sums.totals(&points.exactly_at(hours));
        Some((hours, (t.net, t.after_costs)))
    };
    let place = (right.pay.at(at) * Fraction::whole(100)).ceil();
    if kind == TurnKind::Kink || kind == TurnKind::Passport {
        return match exact(place) {
            Some((hours, sums)) => Printed {
                hours: hours_up(hours),
                pay: Money(place as i64),
                before: sums,
                after: sums,
            },
            None => smooth(),
        };
    }
    let measured = |t: (Money, Money)| if kind == TurnKind::CostStep { t.1 } else { t.0 };
    let mut is_new = |pence: i128| -> bool {
        let Some((hours, found)) = exact(pence) else {
            return false;
        };
        let curve = |s: &Stretch| {
            if kind == TurnKind::CostStep {
                s.after_costs.at(hours)
            } else {
                s.net.at(hours)
            }
        };
        let value = measured(found).in_units();
        let distance = |other: Fraction| {
            if value > other {
                value - other
            } else {
                other - value
            }
        };
        let old = match (left, before_at_zero) {
            (Some(s), _) => curve(s),
            (None, Some(zero)) => measured(zero).in_units(),
            (None, None) => return true,
        };
        distance(curve(right)) < distance(old)
    };
    let mut pence = place - 2;
    if left.is_none() {
        pence = place.max(1);
    }
    while pence > 0 && pence > place - WINDOW && is_new(pence - 1) {
        pence -= 1;
    }
    let mut tries = 0;
    while !(is_new(pence) && is_new(pence + 1) && is_new(pence + 2)) {
        pence += 1;
        tries += 1;
        if i128::from(tries) > WINDOW {
            return smooth();
        }
    }
    match (exact(pence), before_at_zero, exact(pence - 1)) {
        (Some((hours, after)), Some(before), _)
        | (Some((hours, after)), None, Some((_, before))) => Printed {
            hours: hours_up(hours),
            pay: Money(pence as i64),
            before,
            after,
        },
        _ => smooth(),
    }
}
