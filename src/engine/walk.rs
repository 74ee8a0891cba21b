//! The walk along a budget line: from turn to turn, without sampling.
//!
//! Every varying register is a polynomial in hours on a stretch. A pass works out all polynomials just
//! right of a place and deciding each branch there; each branch also says where it next turns; the walk
//! goes to the nearest turn. Roundings `as steps` turn at each of their steps; all other roundings of varying values
//! are left out.

use super::curve::{Curve, Poly, next_change, sign_at, sign_right};
use super::machine::{Code, Special};
use crate::index::Id;
use crate::num::{Direction, Fraction, gcd};
use crate::program::{ItemKind, Line, Manner};
use std::cmp::Ordering;

/// A stretch with one polynomial an item.
#[derive(Clone, Debug)]
pub struct Piece {
    /// First hours.
    pub from: Fraction,
    /// Last hours.
    pub to: Fraction,
    /// One curve an item, in currency units of the statement period (a passport is 1 or 0), in the order of the program.
    pub items: Vec<Curve>,
}

/// A place where some item's curve changes.
#[derive(Clone, Debug)]
pub struct Bend {
    /// Hours (the upper end of the isolating interval where the place is irrational).
    pub at: Fraction,
    /// At the start of the line alone: values of the items at zero hours itself, roundings smoothed, in currency units.
    pub before: Option<Vec<Fraction>>,
    /// The lines whose rules turned.
    pub causes: Vec<Id<Line>>,
}

/// A budget line: pieces without gaps, and the bends between them (and at the start, where the first minute differs from zero hours).
#[derive(Clone, Debug)]
pub struct Walk {
    /// Pieces in order.
    pub pieces: Vec<Piece>,
    /// Bends in order; each lies at the start of a piece.
    pub bends: Vec<Bend>,
    /// How many passes it took.
    pub passes: usize,
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Side {
    At,
    Right,
}

/// Polynomials of all registers, brought from turn to turn: a step is worked out again only where it turns or where one of its
/// operands has changed.
struct Walker<'s, 'm> {
    special: &'s Special<'m>,
    polys: Vec<Poly>,
    /// The pass in which each register last changed. The last entry stands for operands that a step does not have.
    changed: Vec<u32>,
    /// Where each step turns next, if it does before the end.
    turns: Vec<Option<Fraction>>,
    pass: u32,
    end: Fraction,
}

impl<'m> Special<'m> {
    /// Walks from zero hours to `up_to`.
    pub fn walk(&self, up_to: Fraction) -> Walk {
        Walker::new(self, up_to).run()
    }

    /// Values of the items at a place itself, roundings smoothed, in currency units.
    pub fn smooth_at(&self, at: Fraction) -> Vec<Fraction> {
        let mut walker = Walker::new(self, at);
        walker.all(at, Side::At);
        walker.curves().iter().map(|c| c.at(at)).collect()
    }
}

impl<'s, 'm> Walker<'s, 'm> {
    fn new(special: &'s Special<'m>, end: Fraction) -> Self {
        Walker {
            special,
            polys: special.values.iter().map(|v| [*v, 0, 0]).collect(),
            changed: vec![0; special.values.len() + 1],
            turns: vec![None; special.values.len()],
            pass: 0,
            end,
        }
    }

    fn run(&mut self) -> Walk {
        let mut here = Fraction::ZERO;
        self.all(here, Side::At);
        let first: Vec<Fraction> = self.curves().iter().map(|c| c.at(here)).collect();
        let turned = self.all(here, Side::Right);
        let mut walk = Walk {
            pieces: Vec::new(),
            bends: Vec::new(),
            passes: 1,
        };
        let curves = self.curves();
        let jumps: Vec<usize> = (0..curves.len())
            .filter(|k| curves[*k].at(here) != first[*k])
            .collect();
        if !jumps.is_empty() {
            walk.bends.push(Bend {
                at: here,
                before: Some(first),
                causes: self.causes(&turned, &jumps),
            });
        }
        let mut next = self.next();
        walk.pieces.push(Piece {
            from: here,
            to: next,
            items: curves,
        });
        while next < self.end {
            here = next;
            let turned = self.turn_at(here);
            walk.passes += 1;
            next = self.next();
            let items = &self.special.program().items;
            let changed: Vec<usize> = (0..items.len())
                .filter(|k| self.changed[items[*k].reg.position()] == self.pass)
                .collect();
            if changed.is_empty() {
                let piece = walk.pieces.last_mut().expect("the first piece");
                piece.to = next;
                continue;
            }
            walk.bends.push(Bend {
                at: here,
                before: None,
                causes: self.causes(&turned, &changed),
            });
            walk.pieces.push(Piece {
                from: here,
                to: next,
                items: self.curves(),
            });
        }
        walk
    }

    fn curves(&self) -> Vec<Curve> {
        let program = self.special.program();
        program
            .items
            .iter()
            .map(|item| {
                let scale = if item.kind == ItemKind::Passport {
                    1
                } else {
                    program.steps[item.reg].scale.smooth
                };
                Curve {
                    c: self.polys[item.reg.position()],
                    scale,
                }
            })
            .collect()
    }

    /// The lines of those turned steps that the changed items depend on through changed registers.
    fn causes(&self, turned: &[usize], changed: &[usize]) -> Vec<Id<Line>> {
        let program = self.special.program();
        let mut wanted = vec![false; self.polys.len()];
        for item in changed {
            wanted[program.items[*item].reg.position()] = true;
        }
        let mut lines = Vec::new();
        for at in self.special.live.iter().rev() {
            if !wanted[*at] || self.changed[*at] != self.pass {
                continue;
            }
            if turned.contains(at)
                && let Some(line) = program.steps[Id::new(*at)].line
                && is_branch(&self.special.machine.smooth[*at])
                && !lines.contains(&line)
            {
                lines.push(line);
            }
            operands(&self.special.machine.smooth[*at], &mut |reg| {
                wanted[reg] = true
            });
        }
        lines.sort();
        lines
    }

    /// The nearest turn, or the end.
    fn next(&self) -> Fraction {
        let turns = self.special.live.iter().filter_map(|at| self.turns[*at]);
        turns.min().map_or(self.end, |turn| turn.min(self.end))
    }

    /// Works out all varying polynomials at or right of a place; right of it also where each step turns. Returns the steps worked out.
    fn all(&mut self, here: Fraction, side: Side) -> Vec<usize> {
        self.pass += 1;
        let special = self.special;
        for at in &special.live {
            self.work_out(*at, here, side);
        }
        special.live.clone()
    }

    /// Goes on right of a place where some step turns. Returns the steps that turned there.
    fn turn_at(&mut self, here: Fraction) -> Vec<usize> {
        self.pass += 1;
        let special = self.special;
        let mut turned = Vec::new();
        for at in &special.live {
            let turns = self.turns[*at] == Some(here);
            if turns {
                turned.push(*at);
            }
            let reads = &special.machine.reads[*at];
            if turns || reads.iter().any(|reg| self.changed[*reg] == self.pass) {
                self.work_out(*at, here, Side::Right);
            }
        }
        turned
    }

    fn work_out(&mut self, at: usize, here: Fraction, side: Side) {
        self.turns[at] = None;
        let poly = self.step(at, &self.special.machine.smooth[at], here, side);
        if poly != self.polys[at] {
            self.polys[at] = poly;
            self.changed[at] = self.pass;
        }
    }

    /// The builder's bounds hold for the sum of the sizes of a polynomial's terms up to 168 hours, so nothing here can wrap.
    fn scaled(&self, reg: usize, by: i128) -> Poly {
        let p = &self.polys[reg];
        if by == 1 {
            *p
        } else {
            p.map(|c| c.wrapping_mul(by))
        }
    }

    /// Sign of a difference at or right of the place, noting where it next changes.
    fn sign(&mut self, at: usize, difference: &Poly, here: Fraction, side: Side) -> Ordering {
        if side == Side::At {
            return sign_at(difference, here);
        }
        self.turn(at, difference, here);
        sign_right(difference, here)
    }

    fn turn(&mut self, at: usize, difference: &Poly, here: Fraction) {
        let end = self.turns[at].unwrap_or(self.end);
        if let Some(place) = next_change(difference, here, end) {
            self.turns[at] = Some(place);
        }
    }

    fn step(&mut self, at: usize, code: &Code, here: Fraction, side: Side) -> Poly {
        let truth = |yes: bool| [i128::from(yes), 0, 0];
        match code {
            Code::Constant(_) | Code::Fact(_) | Code::Lookup { .. } | Code::Years { .. } => {
                unreachable!("constants, facts, tables and days do not vary with hours")
            }
            Code::Hours => [0, 100, 0],
            Code::Add { a, by_a, b, by_b } => sum(&self.scaled(*a, *by_a), &self.scaled(*b, *by_b)),
            Code::Subtract { a, by_a, b, by_b } => {
                difference(&self.scaled(*a, *by_a), &self.scaled(*b, *by_b))
            }
            Code::Multiply { a, b } => product(&self.polys[*a], &self.polys[*b]),
            Code::Times { a, by } => self.scaled(*a, *by),
            Code::Smaller { a, by_a, b, by_b } => {
                let (x, y) = (self.scaled(*a, *by_a), self.scaled(*b, *by_b));
                if self.sign(at, &difference(&x, &y), here, side) == Ordering::Greater {
                    y
                } else {
                    x
                }
            }
            Code::Larger { a, by_a, b, by_b } => {
                let (x, y) = (self.scaled(*a, *by_a), self.scaled(*b, *by_b));
                if self.sign(at, &difference(&x, &y), here, side) == Ordering::Less {
                    y
                } else {
                    x
                }
            }
            Code::Choose {
                when,
                then,
                by_then,
                otherwise,
                by_otherwise,
            } => {
                if self.polys[*when][0] != 0 {
                    self.scaled(*then, *by_then)
                } else {
                    self.scaled(*otherwise, *by_otherwise)
                }
            }
            Code::Round {
                a,
                manner: Manner::Minor | Manner::Slope,
                ..
            } => self.polys[*a],
            Code::Round {
                a,
                numerator,
                denominator,
                unit,
                direction,
                manner: Manner::Steps,
            } => self.stairs(
                at,
                *a,
                *numerator,
                *denominator,
                *unit,
                *direction,
                here,
                side,
            ),
            Code::Divide {
                a,
                b,
                numerator,
                denominator,
                unit,
                direction,
            } => {
                let by = (self.special.values[*b] * denominator).max(1);
                self.stairs(at, *a, *numerator, by, *unit, *direction, here, side)
            }
            Code::AtLeast { a, by_a, b, by_b } => {
                let d = difference(&self.scaled(*a, *by_a), &self.scaled(*b, *by_b));
                truth(self.sign(at, &d, here, side) != Ordering::Less)
            }
            Code::Above { a, by_a, b, by_b } => {
                let d = difference(&self.scaled(*a, *by_a), &self.scaled(*b, *by_b));
                truth(self.sign(at, &d, here, side) == Ordering::Greater)
            }
            Code::Same { a, by_a, b, by_b } => {
                let d = difference(&self.scaled(*a, *by_a), &self.scaled(*b, *by_b));
                truth(self.sign(at, &d, here, side) == Ordering::Equal)
            }
            Code::Both { a, b } => truth(self.polys[*a][0] != 0 && self.polys[*b][0] != 0),
            Code::Either { a, b } => truth(self.polys[*a][0] != 0 || self.polys[*b][0] != 0),
            Code::Not { a } => truth(self.polys[*a][0] == 0),
        }
    }

    /// A staircase: the step that holds at or right of the place, turning at the next step either way.
    #[expect(clippy::too_many_arguments, reason = "the parts of one rounding")]
    fn stairs(
        &mut self,
        at: usize,
        a: usize,
        numerator: i128,
        denominator: i128,
        unit: i128,
        direction: Direction,
        here: Fraction,
        side: Side,
    ) -> Poly {
        // In units: x(h) = c(h) × numerator / (denominator × q²) with h = p/q.
        let c = self.polys[a];
        let x = Curve { c, scale: 1 }.at(here) * Fraction::new(numerator, denominator);
        let half = Fraction::new(1, 2);
        // Down: steps start at whole numbers. Half up: at halves. Up and half down: steps end there.
        let (shift, ends) = match direction {
            Direction::Down => (Fraction::ZERO, false),
            Direction::Up => (Fraction::ZERO, true),
            Direction::HalfUp | Direction::HalfEven => (half, false),
            Direction::HalfDown => (half, true),
        };
        let shifted = x + shift;
        let on_edge = shifted.denominator() == 1;
        let rising = {
            let first = sign_at(&[c[1], 2 * c[2], 0], here);
            if first == Ordering::Equal {
                c[2].cmp(&0)
            } else {
                first
            }
        };
        // The whole number k of the stair: values from k - shift to k + 1 - shift (or, where steps end there, from k - 1 to k).
        // What neither rises nor falls stays on the edge, on the side where the edge itself belongs.
        let stand = if rising == Ordering::Equal {
            Side::At
        } else {
            side
        };
        let k = match (on_edge, stand, ends) {
            (false, _, false) => shifted.floor(),
            (false, _, true) => shifted.ceil() - if shift.is_zero() { 0 } else { 1 },
            (true, Side::At, false) => {
                if direction == Direction::HalfEven && shifted.floor().rem_euclid(2) == 1 {
                    shifted.floor() - 1
                } else {
                    shifted.floor()
                }
            }
            (true, Side::At, true) => shifted.floor() - if shift.is_zero() { 0 } else { 1 },
            (true, Side::Right, false) => {
                if rising == Ordering::Less {
                    shifted.floor() - 1
                } else {
                    shifted.floor()
                }
            }
            (true, Side::Right, true) => {
                let top = if rising == Ordering::Greater {
                    shifted.floor() + 1
                } else {
                    shifted.floor()
                };
                top - if shift.is_zero() { 0 } else { 1 }
            }
        };
        if side == Side::Right {
            // Edges of the stair in units of x, below and above.
            let (low, high) = match (ends, shift.is_zero()) {
                (false, _) => (Fraction::whole(k) - shift, Fraction::whole(k + 1) - shift),
                (true, true) => (Fraction::whole(k - 1), Fraction::whole(k)),
                (true, false) => (Fraction::whole(k) - half, Fraction::whole(k) + half),
            };
            for edge in [low, high] {
                // c(h) × numerator / denominator − edge, brought to whole coefficients.
                let scaled = [
                    c[0] * numerator * edge.denominator() - edge.numerator() * denominator,
                    c[1] * numerator * edge.denominator(),
                    c[2] * numerator * edge.denominator(),
                ];
                let common = gcd(gcd(scaled[0], scaled[1]), scaled[2]).max(1);
                self.turn(at, &scaled.map(|v| v / common), here);
            }
        }
        [k * unit, 0, 0]
    }
}

fn sum(x: &Poly, y: &Poly) -> Poly {
    std::array::from_fn(|k| x[k].wrapping_add(y[k]))
}

fn difference(x: &Poly, y: &Poly) -> Poly {
    std::array::from_fn(|k| x[k].wrapping_sub(y[k]))
}

fn product(x: &Poly, y: &Poly) -> Poly {
    [
        x[0] * y[0],
        x[0] * y[1] + x[1] * y[0],
        x[0] * y[2] + x[1] * y[1] + x[2] * y[0],
    ]
}

/// Whether a step can turn.
fn is_branch(code: &Code) -> bool {
    match code {
        Code::Smaller { .. }
        | Code::Larger { .. }
        | Code::AtLeast { .. }
        | Code::Above { .. }
        | Code::Same { .. }
        | Code::Divide { .. } => true,
        Code::Round { manner, .. } => *manner == Manner::Steps,
        Code::Constant(_)
        | Code::Fact(_)
        | Code::Hours
        | Code::Add { .. }
        | Code::Subtract { .. }
        | Code::Multiply { .. }
        | Code::Times { .. }
        | Code::Choose { .. }
        | Code::Both { .. }
        | Code::Either { .. }
        | Code::Not { .. }
        | Code::Lookup { .. }
        | Code::Years { .. } => false,
    }
}

/// Calls back for each register that a step reads.
pub(super) fn operands(code: &Code, call: &mut dyn FnMut(usize)) {
    match code {
        Code::Constant(_) | Code::Fact(_) | Code::Hours => {}
        Code::Add { a, b, .. }
        | Code::Subtract { a, b, .. }
        | Code::Multiply { a, b }
        | Code::Smaller { a, b, .. }
        | Code::Larger { a, b, .. }
        | Code::Divide { a, b, .. }
        | Code::AtLeast { a, b, .. }
        | Code::Above { a, b, .. }
        | Code::Same { a, b, .. }
        | Code::Both { a, b }
        | Code::Either { a, b }
        | Code::Years { from: a, to: b } => {
            call(*a);
            call(*b);
        }
        Code::Times { a, .. } | Code::Round { a, .. } | Code::Not { a } => call(*a),
        Code::Choose {
            when,
            then,
            otherwise,
            ..
        } => {
            call(*when);
            call(*then);
            call(*otherwise);
        }
        Code::Lookup { keys, .. } => keys.iter().for_each(|k| call(*k)),
    }
}
