//! A program made ready to run: multipliers worked out once, fixed registers filled once, and for one
//! household everything that does not vary with the earner's hours worked out once.

use crate::index::Id;
use crate::num::{Direction, Fraction, Hours, Money, divide_rounded, gcd};
use crate::program::{Item, Manner, Op, Program, Scales, Table};

/// A step with everything that can be known beforehand. Registers are positions.
#[derive(Clone, Debug)]
pub(super) enum Code {
    Constant(i128),
    Fact(usize),
    Hours,
    Add {
        a: usize,
        by_a: i128,
        b: usize,
        by_b: i128,
    },
    Subtract {
        a: usize,
        by_a: i128,
        b: usize,
        by_b: i128,
    },
    Multiply {
        a: usize,
        b: usize,
    },
    Times {
        a: usize,
        by: i128,
    },
    Smaller {
        a: usize,
        by_a: i128,
        b: usize,
        by_b: i128,
    },
    Larger {
        a: usize,
        by_a: i128,
        b: usize,
        by_b: i128,
    },
    Choose {
        when: usize,
        then: usize,
        by_then: i128,
        otherwise: usize,
        by_otherwise: i128,
    },
    /// The result is `units × unit` where units = a × numerator / denominator, rounded.
    Round {
        a: usize,
        numerator: i128,
        denominator: i128,
        unit: i128,
        direction: Direction,
        manner: Manner,
    },
    /// The same for a quotient: units = a × numerator / (b × denominator).
    Divide {
        a: usize,
        b: usize,
        numerator: i128,
        denominator: i128,
        unit: i128,
        direction: Direction,
    },
    AtLeast {
        a: usize,
        by_a: i128,
        b: usize,
        by_b: i128,
    },
    Above {
        a: usize,
        by_a: i128,
        b: usize,
        by_b: i128,
    },
    Same {
        a: usize,
        by_a: i128,
        b: usize,
        by_b: i128,
    },
    Both {
        a: usize,
        b: usize,
    },
    Either {
        a: usize,
        b: usize,
    },
    Not {
        a: usize,
    },
    Lookup {
        table: Id<Table>,
        keys: Vec<usize>,
        scale: i128,
    },
    Years {
        from: usize,
        to: usize,
    },
}

/// A program ready to run for any household of its shape.
#[derive(Clone, Debug)]
pub struct Machine {
    pub(super) program: Program,
    /// With the law's roundings.
    pub(super) exact: Vec<Code>,
    /// For the walk. Only the varying steps are used.
    pub(super) smooth: Vec<Code>,
    /// Steps that vary with the earner's hours, in order.
    pub(super) varying: Vec<usize>,
    /// Steps that do not.
    pub(super) steady: Vec<usize>,
    /// At hours p/q a register holds whole numbers of 1 / (scale × q to this power), with the law's roundings.
    pub(super) powers: Vec<u32>,
    /// The registers that each step reads; where there are fewer than three, a register that never changes.
    pub(super) reads: Vec<[usize; 3]>,
    /// Registers that some step reads, or that are the fixed factor of one.
    pub(super) read: Vec<bool>,
}

fn code(program: &Program, at: usize, scale_of: impl Fn(Scales) -> i128) -> Code {
    let step = &program.steps[Id::new(at)];
    let scale = |reg: crate::program::Reg| scale_of(program.steps[reg].scale);
    let own = scale_of(step.scale);
    let p = |reg: crate::program::Reg| reg.position();
    let pair = |a, b| {
        let joint = scale(a) / gcd(scale(a), scale(b)) * scale(b);
        (p(a), joint / scale(a), p(b), joint / scale(b))
    };
    match &step.op {
        Op::Constant(value) => Code::Constant(value.numerator() * (own / value.denominator())),
        Op::Fact(input) => Code::Fact(input.position()),
        Op::Hours => Code::Hours,
        Op::Add(a, b) => {
            let (a, by_a, b, by_b) = pair(*a, *b);
            Code::Add { a, by_a, b, by_b }
        }
        Op::Subtract(a, b) => {
            let (a, by_a, b, by_b) = pair(*a, *b);
            Code::Subtract { a, by_a, b, by_b }
        }
        Op::Multiply(a, b) => Code::Multiply { a: p(*a), b: p(*b) },
        Op::Times(a, by) => Code::Times {
            a: p(*a),
            by: by.numerator() / gcd(by.numerator(), scale(*a)),
        },
        Op::Smaller(a, b) => {
            let (a, by_a, b, by_b) = pair(*a, *b);
            Code::Smaller { a, by_a, b, by_b }
        }
        Op::Larger(a, b) => {
            let (a, by_a, b, by_b) = pair(*a, *b);
            Code::Larger { a, by_a, b, by_b }
        }
        Op::Choose {
            when,
            then,
            otherwise,
        } => {
            let (then, by_then, otherwise, by_otherwise) = pair(*then, *otherwise);
            Code::Choose {
                when: p(*when),
                then,
                by_then,
                otherwise,
                by_otherwise,
            }
        }
        Op::Round {
            of,
            unit,
            direction,
            manner,
        } => {
            let ratio = Fraction::new(unit.denominator(), scale(*of) * unit.numerator());
            Code::Round {
                a: p(*of),
                numerator: ratio.numerator(),
                denominator: ratio.denominator(),
                unit: unit.numerator() * (own / unit.denominator()).max(1),
                direction: *direction,
                manner: *manner,
            }
        }
        Op::Divide {
            of,
            by,
            unit,
            direction,
        } => {
            let ratio = Fraction::new(
                scale(*by) * unit.denominator(),
                scale(*of) * unit.numerator(),
            );
            Code::Divide {
                a: p(*of),
                b: p(*by),
                numerator: ratio.numerator(),
                denominator: ratio.denominator(),
                unit: unit.numerator(),
                direction: *direction,
            }
        }
        Op::AtLeast(a, b) => {
            let (a, by_a, b, by_b) = pair(*a, *b);
            Code::AtLeast { a, by_a, b, by_b }
        }
        Op::Above(a, b) => {
            let (a, by_a, b, by_b) = pair(*a, *b);
            Code::Above { a, by_a, b, by_b }
        }
        Op::Same(a, b) => {
            let (a, by_a, b, by_b) = pair(*a, *b);
            Code::Same { a, by_a, b, by_b }
        }
        Op::Both(a, b) => Code::Both { a: p(*a), b: p(*b) },
        Op::Either(a, b) => Code::Either { a: p(*a), b: p(*b) },
        Op::Not(a) => Code::Not { a: p(*a) },
        Op::Lookup { table, keys } => Code::Lookup {
            table: *table,
            keys: keys.iter().map(|k| p(*k)).collect(),
            scale: own,
        },
        Op::Years { from, to } => Code::Years {
            from: p(*from),
            to: p(*to),
        },
    }
}

impl Machine {
    /// Makes a program ready.
    pub fn new(program: Program) -> Machine {
        let all = 0..program.steps.len();
        let exact = all
            .clone()
            .map(|at| code(&program, at, |s| s.exact))
            .collect();
        let smooth: Vec<Code> = all
            .clone()
            .map(|at| code(&program, at, |s| s.smooth))
            .collect();
        let (varying, steady) = all.partition(|at| program.steps[Id::new(*at)].varies);
        let exact: Vec<Code> = exact;
        let powers = super::exact::powers(&exact);
        let mut read = vec![false; exact.len()];
        for (code, step) in exact.iter().zip(program.steps.iter()) {
            super::walk::operands(code, &mut |reg| read[reg] = true);
            if let Some(factor) = step.factor {
                read[factor.position()] = true;
            }
        }
        let reads = smooth
            .iter()
            .map(|code: &Code| {
                let mut regs = [exact.len(); 3];
                let mut used = 0;
                super::walk::operands(code, &mut |reg| {
                    // Only a table has more, and its keys do not vary.
                    if let Some(place) = regs.get_mut(used) {
                        *place = reg;
                    }
                    used += 1;
                });
                regs
            })
            .collect();
        Machine {
            program,
            reads,
            exact,
            smooth,
            varying,
            steady,
            powers,
            read,
        }
    }

    /// The program.
    pub fn program(&self) -> &Program {
        &self.program
    }

    /// Works out everything that does not vary for a household; `facts` holds one value an input of the program, in the units of
    /// the list.
    pub fn special(&self, facts: &[i64]) -> Special<'_> {
        let mut values = vec![0i128; self.exact.len()];
        for at in &self.steady {
            values[*at] = self.run(*at, |reg| values[reg], facts, 0);
        }
        let live = self.live(&values);
        Special {
            machine: self,
            values,
            live,
        }
    }

    /// The varying steps that the items need, in order, once everything steady is known: what lies behind a choice that is already
    /// made the other way is left out.
    fn live(&self, values: &[i128]) -> Vec<usize> {
        let steps = &self.program.steps;
        let mut wanted = vec![false; steps.len()];
        for item in &self.program.items {
            wanted[item.reg.position()] = true;
        }
        let mut live = Vec::with_capacity(self.varying.len());
        for at in self.varying.iter().rev() {
            if !wanted[*at] {
                continue;
            }
            live.push(*at);
            let known = |reg: &usize| !steps[Id::new(*reg)].varies;
            match &self.exact[*at] {
                Code::Choose {
                    when,
                    then,
                    otherwise,
                    ..
                } if known(when) => {
                    wanted[if values[*when] != 0 {
                        *then
                    } else {
                        *otherwise
                    }] = true
                }
                other => super::walk::operands(other, &mut |reg| wanted[reg] = true),
            }
        }
        live.reverse();
        live
    }

    /// One step with the law's roundings. `hours` are hundredths.
    ///
    /// The builder has proved that no register and no operand at its common scale reaches 112 bits, so sums and products here cannot wrap; not
    /// checking them again makes the grid several times faster.
    pub(super) fn run(
        &self,
        at: usize,
        v: impl Fn(usize) -> i128,
        facts: &[i64],
        hours: i128,
    ) -> i128 {
        match &self.exact[at] {
            Code::Constant(value) => *value,
            Code::Fact(input) => i128::from(facts[*input]),
            Code::Hours => hours,
            Code::Add { a, by_a, b, by_b } => v(*a)
                .wrapping_mul(*by_a)
                .wrapping_add(v(*b).wrapping_mul(*by_b)),
            Code::Subtract { a, by_a, b, by_b } => v(*a)
                .wrapping_mul(*by_a)
                .wrapping_sub(v(*b).wrapping_mul(*by_b)),
            Code::Multiply { a, b } => v(*a).wrapping_mul(v(*b)),
            Code::Times { a, by } => v(*a).wrapping_mul(*by),
            Code::Smaller { a, by_a, b, by_b } => {
                v(*a).wrapping_mul(*by_a).min(v(*b).wrapping_mul(*by_b))
            }
            Code::Larger { a, by_a, b, by_b } => {
                v(*a).wrapping_mul(*by_a).max(v(*b).wrapping_mul(*by_b))
            }
            Code::Choose {
                when,
                then,
                by_then,
                otherwise,
                by_otherwise,
            } => {
                if v(*when) != 0 {
                    v(*then).wrapping_mul(*by_then)
                } else {
                    v(*otherwise).wrapping_mul(*by_otherwise)
                }
            }
            Code::Round {
                a,
                numerator,
                denominator,
                unit,
                direction,
                ..
            } => divide_rounded(v(*a) * numerator, *denominator, *direction) * unit,
            Code::Divide {
                a,
                b,
                numerator,
                denominator,
                unit,
                direction,
            } => divide_rounded(v(*a) * numerator, (v(*b) * denominator).max(1), *direction) * unit,
            Code::AtLeast { a, by_a, b, by_b } => {
                i128::from(v(*a).wrapping_mul(*by_a) >= v(*b).wrapping_mul(*by_b))
            }
            Code::Above { a, by_a, b, by_b } => {
                i128::from(v(*a).wrapping_mul(*by_a) > v(*b).wrapping_mul(*by_b))
            }
            Code::Same { a, by_a, b, by_b } => {
                i128::from(v(*a).wrapping_mul(*by_a) == v(*b).wrapping_mul(*by_b))
            }
            Code::Both { a, b } => v(*a) & v(*b),
            Code::Either { a, b } => v(*a) | v(*b),
            Code::Not { a } => 1 - v(*a),
            Code::Lookup { table, keys, scale } => {
                let value = self.looked_up(*table, keys.iter().map(|k| v(*k)));
                value.numerator() * (scale / value.denominator())
            }
            Code::Years { from, to } => full_years(v(*from), v(*to)),
        }
    }

    /// A value of a table; a key outside takes the nearest end.
    pub(super) fn looked_up(&self, table: Id<Table>, keys: impl Iterator<Item = i128>) -> Fraction {
        let table = &self.program.tables[table];
        table.values[position(table, keys)]
    }
}

/// Position of a table's value; a key outside takes the nearest end.
pub(super) fn position(table: &Table, keys: impl Iterator<Item = i128>) -> usize {
    keys.zip(&table.keys)
        .fold(0usize, |index, (key, (low, n))| {
            let place = (key - i128::from(*low)).clamp(0, *n as i128 - 1);
            index * n + usize::try_from(place).expect("a clamped key is a position")
        })
}

/// Full years from one day to another (days since 1970-01-01), at least zero. Somebody born on 29 February is a year older on 1 March.
pub(super) fn full_years(from: i128, to: i128) -> i128 {
    use chrono::{Datelike, NaiveDate};
    let date = |days: i128| {
        i32::try_from(days)
            .ok()
            .and_then(NaiveDate::from_epoch_days)
            .unwrap_or_default()
    };
    let (from, to) = (date(from), date(to));
    let years =
        to.year() - from.year() - i32::from((to.month(), to.day()) < (from.month(), from.day()));
    i128::from(years.max(0))
}

/// A machine with one household's facts in it.
pub struct Special<'m> {
    pub(super) machine: &'m Machine,
    /// Registers; those that vary hold nothing yet.
    pub(super) values: Vec<i128>,
    /// The varying steps that the items of this household need.
    pub(super) live: Vec<usize>,
}

/// Points of one household's line, one after another in the same registers.
pub struct Points<'s, 'm> {
    pub(super) special: &'s Special<'m>,
    pub(super) values: Vec<i128>,
    /// For many points at once.
    pub(super) lanes: Option<super::lanes::Lanes>,
}

impl<'m> Points<'_, 'm> {
    /// The program.
    pub fn program(&self) -> &'m Program {
        self.special.program()
    }

    /// Walks from zero hours to `up_to`.
    pub fn walk(&self, up_to: Fraction) -> super::walk::Walk {
        self.special.walk(up_to)
    }

    /// Amounts of all items at these hours, in minor units (a passport is 1 or 0), exact with the law's roundings.
    pub fn at(&mut self, hours: Hours) -> Vec<Money> {
        let special = self.special;
        for at in &special.live {
            self.values[*at] =
                special
                    .machine
                    .run(*at, |reg| self.values[reg], &[], i128::from(hours.0));
        }
        special.items(&self.values)
    }
}

/// What holds at one point.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Standing {
    /// Reasons to hold the household.
    pub holds: Vec<String>,
    /// Names of the notes.
    pub notes: Vec<String>,
    /// Items that would be due and are not claimed: position and sum.
    pub unclaimed: Vec<(usize, Money)>,
}

impl<'m> Special<'m> {
    /// The program.
    pub fn program(&self) -> &'m Program {
        &self.machine.program
    }

    /// Works out all registers at these hours, with the law's roundings, in place.
    pub(super) fn fill(&self, hours: Hours, values: &mut Vec<i128>) {
        values.clone_from(&self.values);
        for at in &self.machine.varying {
            values[*at] = self
                .machine
                .run(*at, |reg| values[reg], &[], i128::from(hours.0));
        }
    }

    /// How many varying steps the items of this household need.
    pub fn live_steps(&self) -> usize {
        self.live.len()
    }

    /// Registers for points of this household.
    pub fn points(&self) -> Points<'_, 'm> {
        Points {
            special: self,
            values: self.values.clone(),
            lanes: None,
        }
    }

    pub(super) fn items(&self, values: &[i128]) -> Vec<Money> {
        let program = &self.machine.program;
        program
            .items
            .iter()
            .map(|item| {
                item_money(
                    item,
                    values[item.reg.position()],
                    program.steps[item.reg].scale.exact,
                )
            })
            .collect()
    }

    /// What holds at these hours: reasons to hold, notes, and what is due and not claimed.
    pub fn standing(&self, hours: Hours) -> Standing {
        let mut values = Vec::new();
        self.fill(hours, &mut values);
        let program = &self.machine.program;
        let money = |item: &Item, reg: crate::program::Reg| {
            item_money(item, values[reg.position()], program.steps[reg].scale.exact)
        };
        let yes = |reg: crate::program::Reg| values[reg.position()] != 0;
        let items = program.items.iter().enumerate();
        Standing {
            holds: (program.guards.iter().filter(|g| yes(g.reg)))
                .map(|g| g.because.clone())
                .collect(),
            notes: (program.notes.iter().filter(|n| yes(n.reg)))
                .map(|n| n.name.clone())
                .collect(),
            unclaimed: items
                .filter_map(|(at, item)| Some((at, money(item, item.due?), money(item, item.reg))))
                .filter(|(_, due, counted)| due.0 > 0 && counted.0 == 0)
                .map(|(at, due, _)| (at, due))
                .collect(),
        }
    }
}

pub(super) fn item_money(item: &Item, value: i128, scale: i128) -> Money {
    let scaled = if item.kind == crate::program::ItemKind::Passport {
        value
    } else {
        value * 100 / scale
    };
    Money(i64::try_from(scaled).expect("an item is bounded"))
}
