//! Exact evaluation at hours that are no whole hundredth, such as those of a whole-penny pay.

use super::machine::Special;
use crate::index::Id;
use crate::num::{Fraction, Money, divide_rounded};
use crate::program::{ItemKind, Op};

impl Special<'_> {
    /// Amounts of all items at any hours, in minor units, with the law's roundings.
    pub fn exactly_at(&self, hours: Fraction) -> Vec<Money> {
        let values = self.fractions_at(hours);
        let program = self.program();
        program
            .items
            .iter()
            .map(|item| {
                let value = values[item.reg.position()];
                let scaled = if item.kind == ItemKind::Passport { value } else { value * Fraction::whole(100) };
                // Every item ends rounded to the minor unit, so this is whole.
                Money(i64::try_from(scaled.floor()).expect("an item is bounded"))
            })
            .collect()
    }

    /// All registers at any hours as fractions, with the law's roundings.
    pub(super) fn fractions_at(&self, hours: Fraction) -> Vec<Fraction> {
        let machine = self.machine;
        let program = &machine.program;
        let mut v: Vec<Fraction> =
            self.values.iter().zip(program.steps.iter()).map(|(n, step)| Fraction::new(*n, step.scale.exact)).collect();
        let truth = |yes: bool| Fraction::whole(i128::from(yes));
        for at in &machine.varying {
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
                Op::Choose { when, then, otherwise } => if get(when).is_zero() { get(otherwise) } else { get(then) },
                Op::Round { of, unit, direction, .. } => {
                    let x = get(of) / *unit;
                    Fraction::whole(divide_rounded(x.numerator(), x.denominator(), *direction)) * *unit
                }
                Op::Divide { of, by, unit, direction } => {
                    let x = get(of) / get(by) / *unit;
                    Fraction::whole(divide_rounded(x.numerator(), x.denominator(), *direction)) * *unit
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
