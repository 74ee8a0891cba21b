//! Exact evaluation at hours that are no whole hundredth, such as those of a whole-penny pay.

use super::machine::{Code, Points, Special};
use crate::index::Id;
use crate::num::{Fraction, Money, divide_rounded};
use crate::program::{ItemKind, Op};

impl Points<'_, '_> {
    /// Amounts of all items at any hours, in minor units, with the law's roundings.
    pub fn exactly_at(&mut self, hours: Fraction) -> Vec<Money> {
        let special = self.special;
        if special.integers_at(hours, &mut self.values).is_some() {
            return special.items(&self.values);
        }
        let values = special.fractions_at(hours);
        let program = special.program();
        program
            .items
            .iter()
            .map(|item| {
                let value = values[item.reg.position()];
                let scaled = if item.kind == ItemKind::Passport {
                    value
                } else {
                    value * Fraction::whole(100)
                };
                // Every item ends rounded to the minor unit, so this is whole.
                Money(i64::try_from(scaled.floor()).expect("an item is bounded"))
            })
            .collect()
    }
}

impl Special<'_> {
    /// Fills the registers that the items need at hours p/q with whole numbers of 1 / (scale × q to a power); none where one
    /// does not fit. The steady registers are there already.
    fn integers_at(&self, hours: Fraction, v: &mut [i128]) -> Option<()> {
        let machine = self.machine;
        let (p, q) = (hours.numerator(), hours.denominator());
        let powers_of_q = [Some(1), Some(q), q.checked_mul(q)];
        let power = |at: usize| machine.powers[at] as usize;
        for at in &self.live {
            let up = |n: i128, by: i128, from: usize, to: usize| -> Option<i128> {
                n.checked_mul(by)?
                    .checked_mul((*powers_of_q.get(to - from)?)?)
            };
            let held = &*v;
            let pair = |a: usize, by_a: i128, b: usize, by_b: i128| -> Option<(i128, i128)> {
                let top = power(a).max(power(b));
                Some((
                    up(held[a], by_a, power(a), top)?,
                    up(held[b], by_b, power(b), top)?,
                ))
            };
            v[*at] = match &machine.exact[*at] {
                Code::Constant(value) => *value,
                Code::Fact(_) | Code::Lookup { .. } | Code::Years { .. } => return None,
                Code::Hours => p.checked_mul(100)?,
                Code::Add { a, by_a, b, by_b } => {
                    let (x, y) = pair(*a, *by_a, *b, *by_b)?;
                    x.checked_add(y)?
                }
                Code::Subtract { a, by_a, b, by_b } => {
                    let (x, y) = pair(*a, *by_a, *b, *by_b)?;
                    x.checked_sub(y)?
                }
                Code::Multiply { a, b } => v[*a].checked_mul(v[*b])?,
                Code::Times { a, by } => v[*a].checked_mul(*by)?,
                Code::Smaller { a, by_a, b, by_b } => {
                    let (x, y) = pair(*a, *by_a, *b, *by_b)?;
                    x.min(y)
                }
                Code::Larger { a, by_a, b, by_b } => {
                    let (x, y) = pair(*a, *by_a, *b, *by_b)?;
                    x.max(y)
                }
                Code::Choose {
                    when,
                    then,
                    by_then,
                    otherwise,
                    by_otherwise,
                } => {
                    let (x, y) = pair(*then, *by_then, *otherwise, *by_otherwise)?;
                    if v[*when] != 0 { x } else { y }
                }
                Code::Round {
                    a,
                    numerator,
                    denominator,
                    unit,
                    direction,
                    ..
                } => {
                    let below = denominator.checked_mul((*powers_of_q.get(power(*a))?)?)?;
                    divide_rounded(v[*a].checked_mul(*numerator)?, below, *direction) * unit
                }
                Code::Divide {
                    a,
                    b,
                    numerator,
                    denominator,
                    unit,
                    direction,
                } => {
                    let below = v[*b]
                        .checked_mul(*denominator)?
                        .max(1)
                        .checked_mul((*powers_of_q.get(power(*a))?)?)?;
                    divide_rounded(v[*a].checked_mul(*numerator)?, below, *direction) * unit
                }
                Code::AtLeast { a, by_a, b, by_b } => {
                    let (x, y) = pair(*a, *by_a, *b, *by_b)?;
                    i128::from(x >= y)
                }
                Code::Above { a, by_a, b, by_b } => {
                    let (x, y) = pair(*a, *by_a, *b, *by_b)?;
                    i128::from(x > y)
                }
                Code::Same { a, by_a, b, by_b } => {
                    let (x, y) = pair(*a, *by_a, *b, *by_b)?;
                    i128::from(x == y)
                }
                Code::Both { a, b } => v[*a] & v[*b],
                Code::Either { a, b } => v[*a] | v[*b],
                Code::Not { a } => 1 - v[*a],
            };
        }
        Some(())
    }

    /// All registers at any hours as fractions, with the law's roundings.
    pub(super) fn fractions_at(&self, hours: Fraction) -> Vec<Fraction> {
        let machine = self.machine;
        let program = &machine.program;
        let mut v: Vec<Fraction> = self
            .values
            .iter()
            .zip(program.steps.iter())
            .map(|(n, step)| Fraction::new(*n, step.scale.exact))
            .collect();
        let truth = |yes: bool| Fraction::whole(i128::from(yes));
        for at in &self.live {
            let step = &program.steps[Id::new(*at)];
            let get = |reg: &crate::program::Reg| v[reg.position()];
            v[*at] = match &step.op {
                Op::Constant(value) => *value,
                Op::Fact(_) | Op::Lookup { .. } | Op::Years { .. } => {
                    unreachable!("facts, tables and days do not vary with hours")
                }
                Op::Hours => hours,
                Op::Add(a, b) => get(a) + get(b),
                Op::Subtract(a, b) => get(a) - get(b),
                Op::Multiply(a, b) => get(a) * get(b),
                Op::Times(a, by) => get(a) * *by,
                Op::Smaller(a, b) => get(a).min(get(b)),
                Op::Larger(a, b) => get(a).max(get(b)),
                Op::Choose {
                    when,
                    then,
                    otherwise,
                } => {
                    if get(when).is_zero() {
                        get(otherwise)
                    } else {
                        get(then)
                    }
                }
                Op::Round {
                    of,
                    unit,
                    direction,
                    ..
                } => {
                    let x = get(of) / *unit;
                    Fraction::whole(divide_rounded(x.numerator(), x.denominator(), *direction))
                        * *unit
                }
                Op::Divide {
                    of,
                    by,
                    unit,
                    direction,
                } => {
                    let x = get(of) / get(by) / *unit;
                    Fraction::whole(divide_rounded(x.numerator(), x.denominator(), *direction))
                        * *unit
                }
                Op::AtLeast(a, b) => truth(get(a) >= get(b)),
                Op::Above(a, b) => truth(get(a) > get(b)),
                Op::Same(a, b) => truth(get(a) == get(b)),
                Op::Both(a, b) => truth(!get(a).is_zero() && !get(b).is_zero()),
                Op::Either(a, b) => truth(!get(a).is_zero() || !get(b).is_zero()),
                Op::Not(a) => truth(get(a).is_zero()),
            };
        }
        v
    }
}

/// The power of q that each register carries at hours p/q: one more for each factor of hours since the last rounding.
pub(super) fn powers(codes: &[Code]) -> Vec<u32> {
    let mut powers: Vec<u32> = Vec::with_capacity(codes.len());
    for code in codes {
        let power = match code {
            Code::Constant(_)
            | Code::Fact(_)
            | Code::Round { .. }
            | Code::Divide { .. }
            | Code::AtLeast { .. }
            | Code::Above { .. }
            | Code::Same { .. }
            | Code::Both { .. }
            | Code::Either { .. }
            | Code::Not { .. }
            | Code::Lookup { .. }
            | Code::Years { .. } => 0,
            Code::Hours => 1,
            Code::Add { a, b, .. }
            | Code::Subtract { a, b, .. }
            | Code::Smaller { a, b, .. }
            | Code::Larger { a, b, .. } => powers[*a].max(powers[*b]),
            Code::Choose {
                then, otherwise, ..
            } => powers[*then].max(powers[*otherwise]),
            Code::Multiply { a, b } => powers[*a] + powers[*b],
            Code::Times { a, .. } => powers[*a],
        };
        powers.push(power);
    }
    powers
}
