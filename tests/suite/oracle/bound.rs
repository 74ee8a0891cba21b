//! How far the law's roundings can take an item from the walk. In: a program, facts, hours. Out: for each item its value with roundings
//! smoothed, and the most by which the law's value can differ from it.
//!
//! The error of a register is summed through the steps: nothing for what does not vary; for a rounding that the walk leaves out one
//! unit (half a unit where it goes to the nearest) more than its operand's; for sums, products, limits what arithmetic makes of it.
//! A comparison of two registers that lie no further apart than their errors together is unsure, and so is a stair
//! whose operand lies within its error of an edge: these are the windows. What a choice then may take instead counts in full.

use super::text::{Q, full_years, q, whole};
use hourworth::num::{Direction, Fraction};
use hourworth::program::{Manner, Op, Program, Reg};
use num_traits::{Signed, ToPrimitive, Zero};

/// A register in the walk and how far from it the law's value may lie.
#[derive(Clone, Debug)]
pub struct Bounded {
    pub smooth: Q,
    pub error: Q,
    /// Whether an unsure comparison or stair went in.
    pub window: bool,
}

/// A fraction of the product as a number of any size.
pub fn of(value: Fraction) -> Q {
    q(value.numerator(), value.denominator())
}

fn rounded(units: &Q, direction: Direction) -> Q {
    let half = q(1, 2);
    match direction {
        Direction::Up => units.ceil(),
        Direction::Down => units.floor(),
        Direction::HalfUp => (units + half).floor(),
        Direction::HalfDown => (units - half).ceil(),
        Direction::HalfEven => {
            let (low, high) = ((units - &half).ceil(), (units + &half).floor());
            if (&low / whole(2)).is_integer() {
                low
            } else {
                high
            }
        }
    }
}

/// The most that a rounding to whole numbers can add or take.
fn most(direction: Direction) -> Q {
    match direction {
        Direction::Up | Direction::Down => whole(1),
        Direction::HalfUp | Direction::HalfDown | Direction::HalfEven => q(1, 2),
    }
}

/// All registers at these hours.
pub fn bounds(program: &Program, facts: &[i64], hours: &Q) -> Vec<Bounded> {
    let mut v: Vec<Bounded> = Vec::with_capacity(program.steps.len());
    for (_, step) in program.steps.iter_with_id() {
        let get = |reg: &Reg| &v[reg.position()];
        let sure = |smooth: Q| Bounded {
            smooth,
            error: Q::zero(),
            window: false,
        };
        // The result of an operation on two registers.
        let both = |a: &Reg, b: &Reg, smooth: Q, error: Q| Bounded {
            smooth,
            error,
            window: get(a).window || get(b).window,
        };
        let compared = |a: &Reg, b: &Reg, test: &dyn Fn(&Q, &Q) -> bool| {
            let (x, y) = (get(a), get(b));
            let reach = &x.error + &y.error;
            let unsure = !reach.is_zero() && (&x.smooth - &y.smooth).abs() <= reach;
            Bounded {
                smooth: whole(i128::from(test(&x.smooth, &y.smooth))),
                error: whole(i128::from(unsure)),
                window: unsure || x.window || y.window,
            }
        };
        let stairs = |of: &Reg, by: Q, unit: Fraction, direction: Direction| {
            let x = get(of);
            let units =
                |value: Q| rounded(&(value / &by / self::of(unit)), direction) * self::of(unit);
            let smooth = units(x.smooth.clone());
            let error = [units(&x.smooth - &x.error), units(&x.smooth + &x.error)]
                .into_iter()
                .map(|end| (end - &smooth).abs())
                .max()
                .expect("two ends");
            Bounded {
                window: x.window || !error.is_zero(),
                smooth,
                error,
            }
        };
        v.push(match &step.op {
            Op::Constant(value) => sure(of(*value)),
            Op::Fact(input) => {
                let input_at = &program.inputs[*input];
                sure(q(
                    i128::from(facts[input.position()]),
                    i128::from(input_at.units),
                ))
            }
            Op::Hours => sure(hours.clone()),
            Op::Add(a, b) => both(
                a,
                b,
                &get(a).smooth + &get(b).smooth,
                &get(a).error + &get(b).error,
            ),
            Op::Subtract(a, b) => both(
                a,
                b,
                &get(a).smooth - &get(b).smooth,
                &get(a).error + &get(b).error,
            ),
            Op::Multiply(a, b) => {
                let (x, y) = (get(a), get(b));
                let error =
                    x.smooth.abs() * &y.error + y.smooth.abs() * &x.error + &x.error * &y.error;
                both(a, b, &x.smooth * &y.smooth, error)
            }
            Op::Times(a, by) => {
                let by = of(*by);
                Bounded {
                    smooth: &get(a).smooth * &by,
                    error: &get(a).error * by.abs(),
                    window: get(a).window,
                }
            }
            Op::Smaller(a, b) | Op::Larger(a, b) => {
                let (x, y) = (get(a), get(b));
                let smaller = matches!(step.op, Op::Smaller(..));
                let a_wins = if smaller {
                    x.smooth <= y.smooth
                } else {
                    x.smooth >= y.smooth
                };
                let winner = if a_wins { x } else { y };
                let apart = (&x.smooth - &y.smooth).abs();
                // The other one counts only where it could win.
                let close = apart <= &x.error + &y.error;
                Bounded {
                    smooth: winner.smooth.clone(),
                    error: if close {
                        x.error.clone().max(y.error.clone())
                    } else {
                        winner.error.clone()
                    },
                    window: if close {
                        x.window || y.window
                    } else {
                        winner.window
                    },
                }
            }
            Op::Choose {
                when,
                then,
                otherwise,
            } => {
                let (taken, left) = if get(when).smooth.is_zero() {
                    (get(otherwise), get(then))
                } else {
                    (get(then), get(otherwise))
                };
                if get(when).error.is_zero() {
                    taken.clone()
                } else {
                    let other = (&left.smooth - &taken.smooth).abs() + &left.error;
                    Bounded {
                        smooth: taken.smooth.clone(),
                        error: other.max(taken.error.clone()),
                        window: true,
                    }
                }
            }
            Op::Round {
                of: a,
                unit,
                direction,
                manner,
            } => match manner {
                Manner::Minor | Manner::Slope if step.varies => {
                    let x = get(a);
                    Bounded {
                        smooth: x.smooth.clone(),
                        error: &x.error + most(*direction) * of(*unit),
                        window: x.window,
                    }
                }
                Manner::Minor | Manner::Slope | Manner::Steps => {
                    stairs(a, whole(1), *unit, *direction)
                }
            },
            Op::Divide {
                of: a,
                by,
                unit,
                direction,
            } => stairs(a, get(by).smooth.clone(), *unit, *direction),
            Op::AtLeast(a, b) => compared(a, b, &|x, y| x >= y),
            Op::Above(a, b) => compared(a, b, &|x, y| x > y),
            Op::Same(a, b) => compared(a, b, &|x, y| x == y),
            Op::Both(a, b) | Op::Either(a, b) => {
                let decides = whole(i128::from(matches!(step.op, Op::Either(..))));
                let (x, y) = (get(a), get(b));
                let settles = |c: &Bounded| c.error.is_zero() && c.smooth == decides;
                let smooth = if x.smooth == decides || y.smooth == decides {
                    decides.clone()
                } else {
                    whole(1) - &decides
                };
                match (settles(x), settles(y)) {
                    (true, _) => x.clone(),
                    (_, true) => y.clone(),
                    (false, false) => both(a, b, smooth, x.error.clone().max(y.error.clone())),
                }
            }
            Op::Not(a) => Bounded {
                smooth: whole(1) - &get(a).smooth,
                ..get(a).clone()
            },
            Op::Lookup { table, keys } => {
                let table = &program.tables[*table];
                let index =
                    keys.iter()
                        .zip(&table.keys)
                        .fold(0usize, |index, (key, (low, many))| {
                            let place = get(key).smooth.to_integer().to_i64().expect("a key") - low;
                            index * many
                                + usize::try_from(place.clamp(0, *many as i64 - 1))
                                    .expect("a position")
                        });
                sure(of(table.values[index]))
            }
            Op::Years { from, to } => {
                let day = |reg: &Reg| get(reg).smooth.to_integer().to_i64().expect("a day");
                sure(whole(i128::from(full_years(day(from), day(to)))))
            }
        });
    }
    v
}
