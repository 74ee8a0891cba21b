//! Builds a program step by step, working out scales, bounds and degrees, and folding what is fixed.

use super::{
    Amount, Guard, Input, Item, Line, Manner, Note, Op, Program, Reg, Scales, Shape, Step, Table,
};
use crate::index::{Id, IdVec};
use crate::num::{Direction, Fraction, divide_rounded};
use std::collections::HashMap;

/// The most hours a week that a program is made for.
pub const MOST_HOURS: u128 = 168;
/// Scaled values stay below two to this power, so that sums and comparisons of them fit into 127 bits.
const BITS: u32 = 112;

/// A register could hold a number that does not fit.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TooLarge {
    /// The line that it belongs to.
    pub line: Option<Id<Line>>,
}

/// A program in the making.
pub struct Builder {
    program: Program,
    line: Option<Id<Line>>,
    constants: HashMap<Fraction, Reg>,
    facts: HashMap<super::FactRef, Reg>,
    hours: Option<Reg>,
    too_large: Option<TooLarge>,
}

fn common(a: i128, b: i128) -> Option<i128> {
    (a / crate::num::gcd(a, b)).checked_mul(b)
}

/// A size in the whole numbers of a scale.
fn scaled(limit: u128, scale: i128) -> Option<u128> {
    limit.max(1).checked_mul(scale.unsigned_abs())
}

fn size(value: Fraction) -> u128 {
    value
        .numerator()
        .unsigned_abs()
        .div_ceil(value.denominator().unsigned_abs())
}

impl Builder {
    /// An empty program for a shape.
    pub fn new(shape: Shape) -> Self {
        Builder {
            program: Program {
                shape,
                steps: IdVec::new(),
                inputs: IdVec::new(),
                lines: IdVec::new(),
                items: Vec::new(),
                guards: Vec::new(),
                notes: Vec::new(),
                amounts: IdVec::new(),
                tables: IdVec::new(),
            },
            line: None,
            constants: HashMap::new(),
            facts: HashMap::new(),
            hours: None,
            too_large: None,
        }
    }

    /// The finished program.
    ///
    /// # Errors
    /// Where a register could hold a number that does not fit into 128 bits.
    pub fn finish(self) -> Result<Program, TooLarge> {
        match self.too_large {
            Some(fault) => Err(fault),
            None => Ok(self.program),
        }
    }

    /// The program so far.
    pub fn program(&self) -> &Program {
        &self.program
    }

    /// Opens a line: the steps that follow belong to it. Returns the line that was open before.
    pub fn open(&mut self, line: Line) -> (Id<Line>, Option<Id<Line>>) {
        let id = self.program.lines.push(line);
        (id, self.line.replace(id))
    }

    /// Closes a line with its register and opens the one before again.
    pub fn close(&mut self, line: Id<Line>, reg: Reg, before: Option<Id<Line>>) {
        self.program.lines[line].reg = Some(reg);
        self.line = before;
    }

    /// Notes that a named value went into the open line.
    pub fn went_in(&mut self, entered: super::Entered) {
        if let Some(line) = self.line {
            let inputs = &mut self.program.lines[line].inputs;
            if !inputs.contains(&entered) {
                inputs.push(entered);
            }
        }
    }

    /// Notes that an amount went into the open line.
    pub fn amount_went_in(&mut self, amount: Id<Amount>) {
        if let Some(line) = self.line {
            let amounts = &mut self.program.lines[line].amounts;
            if !amounts.contains(&amount) {
                amounts.push(amount);
            }
        }
    }

    /// Adds an amount.
    pub fn amount(&mut self, amount: Amount) -> Id<Amount> {
        self.program.amounts.push(amount)
    }

    /// Adds a table.
    pub fn table(&mut self, table: Table) -> Id<Table> {
        self.program.tables.push(table)
    }

    /// Adds an item.
    pub fn item(&mut self, item: Item) {
        self.program.items.push(item);
    }

    /// Adds a reason to hold.
    pub fn guard(&mut self, guard: Guard) {
        self.program.guards.push(guard);
    }

    /// Adds a note.
    pub fn note(&mut self, note: Note) {
        self.program.notes.push(note);
    }

    fn step(&self, reg: Reg) -> &Step {
        &self.program.steps[reg]
    }

    /// The value of a register that is a fixed number.
    pub fn fixed_value(&self, reg: Reg) -> Option<Fraction> {
        self.fixed(reg)
    }

    fn fixed(&self, reg: Reg) -> Option<Fraction> {
        match &self.step(reg).op {
            Op::Constant(value) => Some(*value),
            _ => None,
        }
    }

    /// Whether a register is a fixed number.
    pub fn is_fixed(&self, reg: Reg) -> bool {
        self.fixed(reg).is_some()
    }

    /// Whether a register varies with the earner's hours.
    pub fn varies(&self, reg: Reg) -> bool {
        self.step(reg).varies
    }

    fn push(
        &mut self,
        op: Op,
        scale: Option<Scales>,
        limit: Option<u128>,
        degree: u8,
        varies: bool,
    ) -> Reg {
        let fits = match (scale, limit) {
            (Some(scale), Some(limit)) => [scale.exact, scale.smooth]
                .iter()
                .all(|s| scaled(limit, *s).is_some_and(|v| v >> BITS == 0)),
            _ => false,
        };
        if !fits {
            self.overflow();
        }
        let scale = scale.unwrap_or(Scales {
            exact: 1,
            smooth: 1,
        });
        let shared = matches!(op, Op::Constant(_) | Op::Fact(_) | Op::Hours);
        let line = if shared { None } else { self.line };
        self.program.steps.push(Step {
            op,
            scale,
            limit: limit.unwrap_or(0),
            degree,
            varies,
            line,
            factor: None,
        })
    }

    /// A fixed number that was worked out; none where it did not fit.
    fn worked_out(&mut self, value: Option<Fraction>) -> Reg {
        if value.is_none() {
            self.overflow();
        }
        self.constant(value.unwrap_or(Fraction::ZERO))
    }

    /// Notes that a number of the open line does not fit.
    pub fn overflow(&mut self) {
        self.too_large.get_or_insert(TooLarge { line: self.line });
    }

    /// The largest size that a register may have.
    pub fn limit(&self, reg: Reg) -> u128 {
        self.step(reg).limit
    }

    /// A fixed number.
    pub fn constant(&mut self, value: Fraction) -> Reg {
        if let Some(reg) = self.constants.get(&value) {
            return *reg;
        }
        let scale = value.denominator();
        let reg = self.push(
            Op::Constant(value),
            Some(Scales {
                exact: scale,
                smooth: scale,
            }),
            Some(size(value)),
            0,
            false,
        );
        self.constants.insert(value, reg);
        reg
    }

    /// A fixed yes or no.
    pub fn yes_no(&mut self, value: bool) -> Reg {
        self.constant(Fraction::whole(i128::from(value)))
    }

    /// A fact of the household; `limit` is the largest size that its range allows.
    pub fn fact(&mut self, fact: super::FactRef, units: i64, limit: u128) -> Reg {
        if let Some(reg) = self.facts.get(&fact) {
            return *reg;
        }
        let id = self.program.inputs.push(Input {
            fact,
            units,
            reg: Id::new(0),
        });
        let scale = i128::from(units);
        let reg = self.push(
            Op::Fact(id),
            Some(Scales {
                exact: scale,
                smooth: scale,
            }),
            Some(limit),
            0,
            false,
        );
        self.program.inputs[id].reg = reg;
        self.facts.insert(fact, reg);
        reg
    }

    /// The hours of the varied job.
    pub fn hours(&mut self) -> Reg {
        if let Some(reg) = self.hours {
            return reg;
        }
        let reg = self.push(
            Op::Hours,
            Some(Scales {
                exact: 100,
                smooth: 100,
            }),
            Some(MOST_HOURS),
            1,
            true,
        );
        self.hours = Some(reg);
        reg
    }

    fn joint_scale(&self, a: Reg, b: Reg) -> Option<Scales> {
        let (a, b) = (self.step(a).scale, self.step(b).scale);
        Some(Scales {
            exact: common(a.exact, b.exact)?,
            smooth: common(a.smooth, b.smooth)?,
        })
    }

    fn pair(&mut self, op: Op, a: Reg, b: Reg, limit: impl Fn(u128, u128) -> Option<u128>) -> Reg {
        let scale = self.joint_scale(a, b);
        let (x, y) = (self.step(a), self.step(b));
        let (degree, varies) = (x.degree.max(y.degree), x.varies || y.varies);
        let limit = limit(x.limit, y.limit);
        self.push(op, scale, limit, degree, varies)
    }

    fn truth(&mut self, op: Op, regs: &[Reg]) -> Reg {
        let varies = regs.iter().any(|r| self.step(*r).varies);
        // The operands of a comparison must also fit when brought to one scale.
        let scale = match op {
            Op::AtLeast(a, b) | Op::Above(a, b) | Op::Same(a, b) => {
                let joint = self.joint_scale(a, b);
                let limit = self.step(a).limit.max(self.step(b).limit).max(1);
                joint.filter(|s| {
                    [s.exact, s.smooth].iter().all(|s| {
                        limit
                            .checked_mul(s.unsigned_abs())
                            .is_some_and(|v| v >> BITS == 0)
                    })
                })
            }
            _ => Some(Scales {
                exact: 1,
                smooth: 1,
            }),
        };
        let scale = scale.map(|_| Scales {
            exact: 1,
            smooth: 1,
        });
        self.push(op, scale, Some(1), 0, varies)
    }

    /// The sum.
    pub fn add(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), Some(y)) => self.worked_out(x.checked_add(y)),
            (Some(x), None) if x.is_zero() => b,
            (None, Some(y)) if y.is_zero() => a,
            _ => self.pair(Op::Add(a, b), a, b, u128::checked_add),
        }
    }

    /// The difference.
    pub fn subtract(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), Some(y)) => self.worked_out(x.checked_add(-y)),
            (None, Some(y)) if y.is_zero() => a,
            _ => self.pair(Op::Subtract(a, b), a, b, u128::checked_add),
        }
    }

    /// The product.
    pub fn multiply(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), _) => self.times_fixed(b, x, a),
            (None, Some(y)) => self.times_fixed(a, y, b),
            (None, None) => {
                let (x, y) = (self.step(a), self.step(b));
                let scale = (|| {
                    Some(Scales {
                        exact: x.scale.exact.checked_mul(y.scale.exact)?,
                        smooth: x.scale.smooth.checked_mul(y.scale.smooth)?,
                    })
                })();
                let limit = x.limit.checked_mul(y.limit);
                let (degree, varies) = (x.degree + y.degree, x.varies || y.varies);
                if degree > 2 {
                    self.overflow();
                }
                self.push(Op::Multiply(a, b), scale, limit, degree, varies)
            }
        }
    }

    /// The product with a fixed number that stands in a register.
    fn times_fixed(&mut self, a: Reg, by: Fraction, factor: Reg) -> Reg {
        let before = self.program.steps.len();
        let reg = self.times(a, by);
        if self.program.steps.len() > before && matches!(self.step(reg).op, Op::Times(..)) {
            self.program.steps[reg].factor = Some(factor);
        }
        reg
    }

    /// The product with a fixed number.
    pub fn times(&mut self, a: Reg, by: Fraction) -> Reg {
        if let Some(value) = self.fixed(a) {
            return self.worked_out(value.checked_mul(by));
        }
        if by == Fraction::ONE {
            return a;
        }
        if by.is_zero() {
            return self.constant(Fraction::ZERO);
        }
        let step = self.step(a);
        let shrunk = |scale: i128| {
            let common = crate::num::gcd(by.numerator(), scale);
            (scale / common).checked_mul(by.denominator())
        };
        let scale = (|| {
            Some(Scales {
                exact: shrunk(step.scale.exact)?,
                smooth: shrunk(step.scale.smooth)?,
            })
        })();
        let limit = step
            .limit
            .checked_mul(by.numerator().unsigned_abs())
            .map(|l| l.div_ceil(by.denominator().unsigned_abs()));
        let (degree, varies) = (step.degree, step.varies);
        self.push(Op::Times(a, by), scale, limit, degree, varies)
    }

    /// The smaller of two.
    pub fn smaller(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), Some(y)) => self.constant(x.min(y)),
            _ if a == b => a,
            _ => self.pair(Op::Smaller(a, b), a, b, |x, y| Some(x.max(y))),
        }
    }

    /// The larger of two.
    pub fn larger(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), Some(y)) => self.constant(x.max(y)),
            _ if a == b => a,
            _ => self.pair(Op::Larger(a, b), a, b, |x, y| Some(x.max(y))),
        }
    }

    /// One of two, by a yes or no.
    pub fn choose(&mut self, when: Reg, then: Reg, otherwise: Reg) -> Reg {
        if let Some(known) = self.fixed(when) {
            return if known.is_zero() { otherwise } else { then };
        }
        if then == otherwise {
            return then;
        }
        let scale = self.joint_scale(then, otherwise);
        let (w, x, y) = (self.step(when), self.step(then), self.step(otherwise));
        let limit = x.limit.max(y.limit);
        let (degree, varies) = (x.degree.max(y.degree), w.varies || x.varies || y.varies);
        self.push(
            Op::Choose {
                when,
                then,
                otherwise,
            },
            scale,
            Some(limit),
            degree,
            varies,
        )
    }

    /// The multiple of a unit.
    pub fn round(&mut self, of: Reg, unit: Fraction, direction: Direction, manner: Manner) -> Reg {
        if let Some(value) = self.fixed(of) {
            let rounded = value.checked_mul(Fraction::ONE / unit).and_then(|scaled| {
                let whole = divide_rounded(scaled.numerator(), scaled.denominator(), direction);
                Fraction::whole(whole).checked_mul(unit)
            });
            return self.worked_out(rounded);
        }
        let step = self.step(of);
        let already = |scale: i128| {
            // Every value of this scale is a multiple of the unit.
            unit.numerator() == 1 && unit.denominator() % scale == 0
        };
        if !step.varies && already(step.scale.exact) {
            return of;
        }
        let smooth = match manner {
            Manner::Steps => unit.denominator(),
            Manner::Minor | Manner::Slope if step.varies => step.scale.smooth,
            Manner::Minor | Manner::Slope => unit.denominator(),
        };
        let scale = Some(Scales {
            exact: unit.denominator(),
            smooth,
        });
        // What is rounded is first brought to the unit, and must fit there too.
        let units = [step.scale.exact, step.scale.smooth].iter().all(|scale| {
            let common = crate::num::gcd(unit.denominator(), *scale).unsigned_abs();
            let by = unit.denominator().unsigned_abs() / common;
            let below =
                (scale.unsigned_abs() / common).checked_mul(unit.numerator().unsigned_abs());
            below.is_some_and(|b| b >> BITS == 0)
                && scaled(step.limit, *scale)
                    .and_then(|n| n.checked_mul(by))
                    .is_some_and(|n| n >> BITS == 0)
        });
        let limit = step.limit.checked_add(size(unit)).filter(|_| units);
        let degree = if manner == Manner::Steps {
            0
        } else {
            step.degree
        };
        let varies = step.varies;
        self.push(
            Op::Round {
                of,
                unit,
                direction,
                manner,
            },
            scale,
            limit,
            degree,
            varies,
        )
    }

    /// A quotient rounded at once. The divisor is above zero and does not vary with hours.
    pub fn divide(&mut self, of: Reg, by: Reg, unit: Fraction, direction: Direction) -> Reg {
        let scale = Some(Scales {
            exact: unit.denominator(),
            smooth: unit.denominator(),
        });
        // A divisor above zero is at least one of its smallest units.
        let (of_step, by_step) = (self.step(of), self.step(by));
        let units = (|| {
            let above = by_step
                .scale
                .exact
                .unsigned_abs()
                .checked_mul(unit.denominator().unsigned_abs())?;
            let below = of_step
                .scale
                .exact
                .unsigned_abs()
                .checked_mul(unit.numerator().unsigned_abs())?;
            let fits = |limit: u128, scale: i128, by: u128| {
                scaled(limit, scale)
                    .and_then(|n| n.checked_mul(by))
                    .filter(|n| n >> BITS == 0)
            };
            fits(of_step.limit, of_step.scale.exact, above)?;
            fits(by_step.limit, by_step.scale.exact, below)
        })();
        let limit = of_step
            .limit
            .checked_mul(by_step.scale.exact.unsigned_abs())
            .and_then(|l| l.checked_add(size(unit)));
        let limit = limit.filter(|_| units.is_some());
        let varies = self.varies(of);
        self.push(
            Op::Divide {
                of,
                by,
                unit,
                direction,
            },
            scale,
            limit,
            0,
            varies,
        )
    }

    /// Whether the left is at least the right.
    pub fn at_least(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), Some(y)) => self.yes_no(x >= y),
            _ => self.truth(Op::AtLeast(a, b), &[a, b]),
        }
    }

    /// Whether the left is above the right.
    pub fn above(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), Some(y)) => self.yes_no(x > y),
            _ => self.truth(Op::Above(a, b), &[a, b]),
        }
    }

    /// Whether both are the same.
    pub fn same(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), Some(y)) => self.yes_no(x == y),
            _ => self.truth(Op::Same(a, b), &[a, b]),
        }
    }

    /// Whether both are yes.
    pub fn both(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), _) => {
                if x.is_zero() {
                    a
                } else {
                    b
                }
            }
            (None, Some(y)) => {
                if y.is_zero() {
                    b
                } else {
                    a
                }
            }
            (None, None) => self.truth(Op::Both(a, b), &[a, b]),
        }
    }

    /// Whether one is yes.
    pub fn either(&mut self, a: Reg, b: Reg) -> Reg {
        match (self.fixed(a), self.fixed(b)) {
            (Some(x), _) => {
                if x.is_zero() {
                    b
                } else {
                    a
                }
            }
            (None, Some(y)) => {
                if y.is_zero() {
                    a
                } else {
                    b
                }
            }
            (None, None) => self.truth(Op::Either(a, b), &[a, b]),
        }
    }

    /// Yes where no, no where yes.
    pub fn not(&mut self, a: Reg) -> Reg {
        match self.fixed(a) {
            Some(x) => self.yes_no(x.is_zero()),
            None => self.truth(Op::Not(a), &[a]),
        }
    }

    /// A value of a table.
    pub fn lookup(&mut self, table: Id<Table>, keys: Vec<Reg>) -> Reg {
        let values = &self.program.tables[table].values;
        let scale = values
            .iter()
            .try_fold(1i128, |s, v| common(s, v.denominator()));
        let limit = values.iter().map(|v| size(*v)).max();
        self.push(
            Op::Lookup { table, keys },
            scale.map(|s| Scales {
                exact: s,
                smooth: s,
            }),
            limit.or(Some(0)),
            0,
            false,
        )
    }

    /// Full years from one day to another.
    pub fn years(&mut self, from: Reg, to: Reg) -> Reg {
        self.push(
            Op::Years { from, to },
            Some(Scales {
                exact: 1,
                smooth: 1,
            }),
            Some(10_000),
            0,
            false,
        )
    }
}
