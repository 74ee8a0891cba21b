//! Many points of one household at once. In: hours. Out: the items at each, with the law's roundings, the same as one by one.
//!
//! A step is worked out for eight points before the next step is looked at. Sizes are bounded anew with this household's own facts, so that
//! almost every register fits into 64 bits; one that does not is worked out in 128. Imports `num` and the machine.

use super::machine::{Code, Points, Special, item_money};
use crate::num::{Direction, Hours, Money, divide_rounded};
use crate::program::MOST_HOURS;

/// How many points go together.
const LANES: usize = 8;
/// Registers and operands whose size stays below this are worked out in 64 bits; the sum of two still fits.
const NARROW: u128 = 1 << 62;

type Narrow = [i64; LANES];
type Wide = [i128; LANES];

/// How one live step is worked out.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Width {
    /// Operands and result in 64 bits.
    Narrow,
    /// In 128 bits, with a result that fits into 64.
    WideToNarrow,
    /// Operands and result in 128 bits.
    Wide,
}

/// The registers of eight points. A register stands in `narrow`, or in `wide` where its place there is not zero.
pub(super) struct Lanes {
    widths: Vec<Width>,
    narrow: Vec<Narrow>,
    /// Place of each register in `wide`, counted from one; 0 for those in 64 bits.
    place: Vec<u32>,
    wide: Vec<Wide>,
}

impl Lanes {
    /// Bounds every live register of a household, up to the most hours that a program is made for.
    fn new(special: &Special<'_>) -> Lanes {
        let steps = special.values.len();
        let mut sizes: Vec<u128> = special.values.iter().map(|v| v.unsigned_abs()).collect();
        let mut lanes = Lanes {
            widths: Vec::with_capacity(special.live.len()),
            narrow: vec![[0; LANES]; steps],
            place: vec![0; steps],
            wide: Vec::new(),
        };
        for at in &special.live {
            let (inside, size) = bound(&special.machine.exact[*at], &sizes, special);
            sizes[*at] = size;
            let width = match (inside < NARROW, size < NARROW) {
                (true, true) => Width::Narrow,
                (false, true) => Width::WideToNarrow,
                (_, false) => {
                    lanes.wide.push([0; LANES]);
                    lanes.place[*at] = lanes.wide.len() as u32;
                    Width::Wide
                }
            };
            lanes.widths.push(width);
            for reg in special.machine.reads[*at] {
                if reg < steps && !special.machine.program.steps[crate::index::Id::new(reg)].varies
                {
                    lanes.hold(reg, special.values[reg]);
                }
            }
        }
        lanes
    }

    /// Puts a register that does not vary in all lanes.
    fn hold(&mut self, reg: usize, value: i128) {
        match i64::try_from(value) {
            Ok(value) if value.unsigned_abs() < 1 << 62 => self.narrow[reg] = [value; LANES],
            _ if self.place[reg] == 0 => {
                self.wide.push([value; LANES]);
                self.place[reg] = self.wide.len() as u32;
            }
            _ => {}
        }
    }

    /// A register of one point.
    fn read(&self, reg: usize, lane: usize) -> i128 {
        match self.place[reg] {
            0 => i128::from(self.narrow[reg][lane]),
            place => self.wide[place as usize - 1][lane],
        }
    }

    /// Works out all live steps at these hours.
    fn fill(&mut self, special: &Special<'_>, hours: &Narrow) {
        for (at, width) in special.live.iter().zip(0..) {
            let code = &special.machine.exact[*at];
            match self.widths[width] {
                Width::Narrow => self.narrow[*at] = narrow(code, &self.narrow, hours),
                Width::WideToNarrow => {
                    for (lane, hours) in hours.iter().enumerate() {
                        let value = special.machine.run(
                            *at,
                            |reg| self.read(reg, lane),
                            &[],
                            i128::from(*hours),
                        );
                        self.narrow[*at][lane] = value as i64;
                    }
                }
                Width::Wide => {
                    let place = self.place[*at] as usize - 1;
                    for (lane, hours) in hours.iter().enumerate() {
                        self.wide[place][lane] = special.machine.run(
                            *at,
                            |reg| self.read(reg, lane),
                            &[],
                            i128::from(*hours),
                        );
                    }
                }
            }
        }
    }
}

impl Points<'_, '_> {
    /// The items at each of these hours, as [`Points::at`] gives them one by one.
    pub fn many(&mut self, hours: &[Hours]) -> Vec<Vec<Money>> {
        let special = self.special;
        let lanes = self.lanes.get_or_insert_with(|| Lanes::new(special));
        let program = special.program();
        let mut out = Vec::with_capacity(hours.len());
        for some in hours.chunks(LANES) {
            let here = std::array::from_fn(|k| some[k.min(some.len() - 1)].0);
            lanes.fill(special, &here);
            for k in 0..some.len() {
                let items = program.items.iter().map(|item| {
                    let at = item.reg.position();
                    let value = if program.steps[item.reg].varies {
                        lanes.read(at, k)
                    } else {
                        special.values[at]
                    };
                    item_money(item, value, program.steps[item.reg].scale.exact)
                });
                out.push(items.collect());
            }
        }
        out
    }
}

/// The largest size inside a step (its operands at their common scale, a dividend), and of its result.
fn bound(code: &Code, sizes: &[u128], special: &Special<'_>) -> (u128, u128) {
    let by = |reg: usize, factor: i128| sizes[reg].saturating_mul(factor.unsigned_abs());
    let pair = |a, by_a, b, by_b| (by(a, by_a), by(b, by_b));
    let fixed = |factor: i128| factor.unsigned_abs();
    match code {
        Code::Constant(value) => (fixed(*value), fixed(*value)),
        Code::Fact(_) | Code::Lookup { .. } | Code::Years { .. } => {
            unreachable!("facts, tables and days do not vary with hours")
        }
        Code::Hours => (MOST_HOURS * 100, MOST_HOURS * 100),
        Code::Add { a, by_a, b, by_b } | Code::Subtract { a, by_a, b, by_b } => {
            let (x, y) = pair(*a, *by_a, *b, *by_b);
            let size = x.saturating_add(y);
            (size.max(fixed(*by_a)).max(fixed(*by_b)), size)
        }
        Code::Multiply { a, b } => {
            let size = sizes[*a].saturating_mul(sizes[*b]);
            (size.max(sizes[*a]).max(sizes[*b]), size)
        }
        Code::Times { a, by: factor } => {
            let size = by(*a, *factor);
            (size.max(fixed(*factor)).max(sizes[*a]), size)
        }
        Code::Smaller { a, by_a, b, by_b } | Code::Larger { a, by_a, b, by_b } => {
            let (x, y) = pair(*a, *by_a, *b, *by_b);
            (x.max(y).max(fixed(*by_a)).max(fixed(*by_b)), x.max(y))
        }
        Code::Choose {
            when,
            then,
            by_then,
            otherwise,
            by_otherwise,
        } => {
            let known = !special.machine.program.steps[crate::index::Id::new(*when)].varies;
            let (x, y) = pair(*then, *by_then, *otherwise, *by_otherwise);
            let size = match (known, special.values[*when]) {
                (true, 0) => y,
                (true, _) => x,
                (false, _) => x.max(y),
            };
            // Both sides are read, the one that is not taken as well, and thrown away.
            (
                x.max(y).max(fixed(*by_then)).max(fixed(*by_otherwise)),
                size,
            )
        }
        Code::Round {
            a,
            numerator,
            denominator,
            unit,
            ..
        } => {
            let top = by(*a, *numerator);
            let size = (top / fixed(*denominator).max(1) + 1).saturating_mul(fixed(*unit));
            // Rounding half adds up to twice the dividend and the divisor.
            let inside =
                (top.saturating_mul(2)).saturating_add(fixed(*denominator).saturating_mul(2));
            (
                inside.max(fixed(*numerator)).max(fixed(*unit)).max(size),
                size,
            )
        }
        Code::Divide {
            a,
            b,
            numerator,
            denominator,
            unit,
            ..
        } => {
            let top = by(*a, *numerator);
            let below = by(*b, *denominator).max(1);
            let size = (top / below + 1).saturating_mul(fixed(*unit));
            let inside = (top.saturating_mul(2)).saturating_add(below.saturating_mul(2));
            (
                inside.max(fixed(*numerator)).max(fixed(*unit)).max(size),
                size,
            )
        }
        Code::AtLeast { a, by_a, b, by_b }
        | Code::Above { a, by_a, b, by_b }
        | Code::Same { a, by_a, b, by_b } => {
            let (x, y) = pair(*a, *by_a, *b, *by_b);
            (x.max(y).max(fixed(*by_a)).max(fixed(*by_b)), 1)
        }
        Code::Both { .. } | Code::Either { .. } | Code::Not { .. } => (1, 1),
    }
}

/// A quotient of 64 bits, rounded; the divisor is above zero.
fn rounded(dividend: i64, divisor: i64, direction: Direction) -> i64 {
    match direction {
        Direction::Down => dividend.div_euclid(divisor),
        Direction::Up => -(-dividend).div_euclid(divisor),
        Direction::HalfUp => (2 * dividend + divisor).div_euclid(2 * divisor),
        Direction::HalfDown => -(-2 * dividend + divisor).div_euclid(2 * divisor),
        Direction::HalfEven => {
            divide_rounded(i128::from(dividend), i128::from(divisor), direction) as i64
        }
    }
}

/// One step in 64 bits. [`bound`] has shown that nothing here wraps.
fn narrow(code: &Code, v: &[Narrow], hours: &Narrow) -> Narrow {
    match code {
        Code::Constant(value) => [*value as i64; LANES],
        Code::Fact(_) | Code::Lookup { .. } | Code::Years { .. } => {
            unreachable!("facts, tables and days do not vary with hours")
        }
        Code::Hours => *hours,
        Code::Add { a, by_a, b, by_b } => {
            let (x, y, p, q) = (&v[*a], &v[*b], *by_a as i64, *by_b as i64);
            std::array::from_fn(|k| x[k].wrapping_mul(p).wrapping_add(y[k].wrapping_mul(q)))
        }
        Code::Subtract { a, by_a, b, by_b } => {
            let (x, y, p, q) = (&v[*a], &v[*b], *by_a as i64, *by_b as i64);
            std::array::from_fn(|k| x[k].wrapping_mul(p).wrapping_sub(y[k].wrapping_mul(q)))
        }
        Code::Multiply { a, b } => {
            let (x, y) = (&v[*a], &v[*b]);
            std::array::from_fn(|k| x[k].wrapping_mul(y[k]))
        }
        Code::Times { a, by } => {
            let (x, p) = (&v[*a], *by as i64);
            std::array::from_fn(|k| x[k].wrapping_mul(p))
        }
        Code::Smaller { a, by_a, b, by_b } => {
            let (x, y, p, q) = (&v[*a], &v[*b], *by_a as i64, *by_b as i64);
            std::array::from_fn(|k| x[k].wrapping_mul(p).min(y[k].wrapping_mul(q)))
        }
        Code::Larger { a, by_a, b, by_b } => {
            let (x, y, p, q) = (&v[*a], &v[*b], *by_a as i64, *by_b as i64);
            std::array::from_fn(|k| x[k].wrapping_mul(p).max(y[k].wrapping_mul(q)))
        }
        Code::Choose {
            when,
            then,
            by_then,
            otherwise,
            by_otherwise,
        } => {
            let (w, x, y) = (&v[*when], &v[*then], &v[*otherwise]);
            let (p, q) = (*by_then as i64, *by_otherwise as i64);
            std::array::from_fn(|k| {
                if w[k] != 0 {
                    x[k].wrapping_mul(p)
                } else {
                    y[k].wrapping_mul(q)
                }
            })
        }
        Code::Round {
            a,
            numerator,
            denominator,
            unit,
            direction,
            ..
        } => {
            let (x, n, d, u) = (&v[*a], *numerator as i64, *denominator as i64, *unit as i64);
            std::array::from_fn(|k| rounded(x[k].wrapping_mul(n), d, *direction).wrapping_mul(u))
        }
        Code::Divide {
            a,
            b,
            numerator,
            denominator,
            unit,
            direction,
        } => {
            let (x, y) = (&v[*a], &v[*b]);
            let (n, d, u) = (*numerator as i64, *denominator as i64, *unit as i64);
            std::array::from_fn(|k| {
                let below = y[k].wrapping_mul(d).max(1);
                rounded(x[k].wrapping_mul(n), below, *direction).wrapping_mul(u)
            })
        }
        Code::AtLeast { a, by_a, b, by_b } => {
            let (x, y, p, q) = (&v[*a], &v[*b], *by_a as i64, *by_b as i64);
            std::array::from_fn(|k| i64::from(x[k].wrapping_mul(p) >= y[k].wrapping_mul(q)))
        }
        Code::Above { a, by_a, b, by_b } => {
            let (x, y, p, q) = (&v[*a], &v[*b], *by_a as i64, *by_b as i64);
            std::array::from_fn(|k| i64::from(x[k].wrapping_mul(p) > y[k].wrapping_mul(q)))
        }
        Code::Same { a, by_a, b, by_b } => {
            let (x, y, p, q) = (&v[*a], &v[*b], *by_a as i64, *by_b as i64);
            std::array::from_fn(|k| i64::from(x[k].wrapping_mul(p) == y[k].wrapping_mul(q)))
        }
        Code::Both { a, b } => {
            let (x, y) = (&v[*a], &v[*b]);
            std::array::from_fn(|k| x[k] & y[k])
        }
        Code::Either { a, b } => {
            let (x, y) = (&v[*a], &v[*b]);
            std::array::from_fn(|k| x[k] | y[k])
        }
        Code::Not { a } => {
            let x = &v[*a];
            std::array::from_fn(|k| 1 - x[k])
        }
    }
}
