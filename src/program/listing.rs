//! A readable listing of a program, for tests and for whoever doubts a pack.

use super::{Op, Program};
use std::fmt;

impl fmt::Display for Program {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut line = None;
        for (reg, step) in self.steps.iter_with_id() {
            if step.line.is_some() && step.line != line {
                line = step.line;
                if let Some(id) = line {
                    let l = &self.lines[id];
                    writeln!(f, "{} {} ({})", l.name, l.instance + 1, l.part)?;
                }
            }
            write!(f, "  r{reg:?} = ")?;
            match &step.op {
                Op::Constant(value) => write!(f, "{value:?}")?,
                Op::Fact(input) => {
                    let fact = self.inputs[*input].fact;
                    write!(f, "fact {}.{}.{}", fact.kind, fact.instance, fact.fact)?;
                }
                Op::Hours => write!(f, "hours")?,
                Op::Add(a, b) => write!(f, "r{a:?} + r{b:?}")?,
                Op::Subtract(a, b) => write!(f, "r{a:?} - r{b:?}")?,
                Op::Multiply(a, b) => write!(f, "r{a:?} * r{b:?}")?,
                Op::Times(a, by) => write!(f, "r{a:?} * {by:?}")?,
                Op::Smaller(a, b) => write!(f, "smaller of r{a:?}, r{b:?}")?,
                Op::Larger(a, b) => write!(f, "larger of r{a:?}, r{b:?}")?,
                Op::Choose {
                    when,
                    then,
                    otherwise,
                } => write!(f, "where r{when:?} give r{then:?} otherwise r{otherwise:?}")?,
                Op::Round {
                    of,
                    unit,
                    direction,
                    manner,
                } => write!(f, "r{of:?} rounded {direction:?} to {unit:?} as {manner:?}")?,
                Op::Divide {
                    of,
                    by,
                    unit,
                    direction,
                } => write!(f, "r{of:?} / r{by:?} rounded {direction:?} to {unit:?}")?,
                Op::AtLeast(a, b) => write!(f, "r{a:?} at least r{b:?}")?,
                Op::Above(a, b) => write!(f, "r{a:?} above r{b:?}")?,
                Op::Same(a, b) => write!(f, "r{a:?} is r{b:?}")?,
                Op::Both(a, b) => write!(f, "r{a:?} and r{b:?}")?,
                Op::Either(a, b) => write!(f, "r{a:?} or r{b:?}")?,
                Op::Not(a) => write!(f, "not r{a:?}")?,
                Op::Lookup { table, keys } => write!(f, "{}{keys:?}", self.tables[*table].name)?,
                Op::Years { from, to } => write!(f, "years from r{from:?} to r{to:?}")?,
            }
            writeln!(
                f,
                "   [scale {} / {}, degree {}]",
                step.scale.exact, step.scale.smooth, step.degree
            )?;
        }
        Ok(())
    }
}
