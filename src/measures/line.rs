//! One earner's budget line at one wage.

use super::points::{Stretch, Sums, Totals, point};
use super::traps::{no_gain, traps};
use super::turns::{minor, turns};
use super::types::{BudgetLine, ItemKind, JobTerms, Segment};
use crate::engine::{Points, Walk};
use crate::num::{Fraction, Hours, Money};

/// A line with what the measures between lines need.
pub(super) struct Worked {
    pub line: BudgetLine,
    pub stretches: Vec<Stretch>,
}

/// What a line is asked for.
pub(super) struct Asked<'a> {
    pub terms: JobTerms,
    /// Hours of the grid, in order, the job's own and the step's included.
    pub grid: &'a [Hours],
    pub step_to: Hours,
    pub up_to: Hours,
    /// Y(0): not in work.
    pub at_zero: &'a Totals,
}

pub(super) fn work_out(points: &mut Points<'_, '_>, sums: &Sums, asked: Asked<'_>) -> Worked {
    let walk = points.walk(asked.up_to.as_fraction());
    let stretches: Vec<Stretch> = walk
        .pieces
        .iter()
        .map(|piece| Stretch::new(sums, piece))
        .collect();
    let mut at = 0;
    let mut grid = Vec::with_capacity(asked.grid.len());
    let mut has_costs = false;
    let many = points.many(asked.grid);
    for (hours, items) in asked.grid.iter().zip(many) {
        let here = hours.as_fraction();
        while at + 1 < stretches.len() && stretches[at + 1].from <= here {
            at += 1;
        }
        has_costs |= sums.has(ItemKind::Cost, &items);
        let stretch = stretches.get(at).filter(|s| here < s.to);
        grid.push(point(sums, *hours, items, asked.at_zero, stretch));
    }
    let place = |hours: Hours| {
        asked
            .grid
            .iter()
            .position(|h| *h == hours)
            .expect("the grid holds the job's own hours")
    };
    let (own, step_to) = (place(asked.terms.hours), place(asked.step_to));
    let first = stretches.first();
    let leading = |s: &Stretch| if has_costs { s.after_costs } else { s.net };
    let zero = grid.first().map_or(Fraction::ZERO, |p| {
        if has_costs {
            p.after_costs.in_units()
        } else {
            p.net.in_units()
        }
    });
    let line = BudgetLine {
        first_minute: first.map_or(Money::ZERO, |s| minor(s.net.at(s.from))),
        turns: turns(points, sums, &walk, &stretches),
        segments: segments(sums, &walk, &stretches),
        traps: traps(&stretches, leading, zero),
        no_gain: no_gain(&stretches, leading),
        terms: asked.terms,
        grid,
        own,
        step_to,
        up_to: asked.up_to,
        has_costs,
    };
    Worked { line, stretches }
}

fn segments(sums: &Sums, walk: &Walk, stretches: &[Stretch]) -> Vec<Segment> {
    walk.pieces
        .iter()
        .zip(stretches)
        .map(|(piece, s)| {
            let slope = s.pay.slope(s.from);
            let share = |value: Fraction| if slope.is_zero() { Fraction::ZERO } else { value / slope };
            Segment {
                from: s.from,
                to: s.to,
                pay_from: s.pay.at(s.from),
                pay_to: s.pay.at(s.to),
                net_from: s.net.at(s.from),
                net_to: s.net.at(s.to),
                after_costs_from: s.after_costs.at(s.from),
                after_costs_to: s.after_costs.at(s.to),
                metr: s.metr(&s.net, s.from),
                metr_after_costs: s.metr(&s.after_costs, s.from),
                pension_share: share(s.pension.slope(s.from)),
                shares: piece
                    .items
                    .iter()
                    .enumerate()
                    .map(|(item, c)| if c.c[1] == 0 && c.c[2] == 0 { Fraction::ZERO } else { share(c.slope(s.from)) } * Fraction::whole(i128::from(sums.sign(item))))
                    .collect(),
                // V = Y(h) − ω h at the start of the segment (methods section 8); of the second degree, that of the tangent there.
                virtual_income: s.net.intercept(s.from),
            }
        })
        .collect()
}
