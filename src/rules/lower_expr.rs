//! Expressions to steps.

use super::ast::{BinaryOp, CompareOp};
use super::lower::Lowering;
use super::pack::ADULT;
use super::tree::{Limit, Node, Over, Target, What};
use super::types::Ty;
use crate::diag::Diagnostic;
use crate::num::Fraction;
use crate::program::{Entered, Manner, Reg};
use crate::source::Span;

/// The records at hand: kind and position, the innermost last.
type Scopes = Vec<(usize, usize)>;

impl Lowering<'_> {
    /// The register of an expression for the records at hand.
    pub(super) fn node(&mut self, node: &Node, scopes: &mut Scopes) -> Reg {
        match &node.what {
            What::Fixed(value) => self.builder.constant(*value),
            What::Amount { amount, dated } => {
                let reg = self.amount(*amount, *dated);
                let name = self.pack.amounts[*amount].name.clone();
                self.went_in(name, reg, node.ty);
                reg
            }
            What::Missing { amount, dated } => {
                let missing = self.is_missing(*amount, *dated);
                self.builder.yes_no(missing)
            }
            What::Dated(at) => self
                .builder
                .constant(Fraction::whole(i128::from(self.dates[*at]))),
            What::Name {
                target,
                kind,
                level,
                text,
            } => {
                let (from, instance) = scopes[*level];
                let instance = self
                    .climb(from, instance, *kind)
                    .expect("a checked name can be reached");
                let reg = self.target(*target, *kind, instance);
                self.went_in(text.clone(), reg, node.ty);
                reg
            }
            What::Partner {
                target,
                level,
                failing,
                text,
            } => {
                let (from, instance) = scopes[*level];
                let adult = self
                    .climb(from, instance, ADULT)
                    .expect("a checked partner can be reached");
                let other = (0..self.count(ADULT)).find(|a| *a != adult);
                let reg = match (other, failing) {
                    (Some(other), _) => self.target(*target, ADULT, other),
                    (None, Some(failing)) => self.node(failing, scopes),
                    (None, None) => self.builder.constant(Fraction::ZERO),
                };
                self.went_in(format!("{text} of partner"), reg, node.ty);
                reg
            }
            What::AsIf {
                figure,
                kind,
                level,
                changes,
                text,
            } => {
                let changes = changes
                    .iter()
                    .map(|change| {
                        let (from, instance) = scopes[change.level];
                        let record = self
                            .climb(from, instance, change.kind)
                            .expect("a checked fact can be reached");
                        (
                            (change.kind, record, change.fact),
                            self.node(&change.value, scopes),
                        )
                    })
                    .collect();
                let (from, instance) = scopes[*level];
                let instance = self
                    .climb(from, instance, *kind)
                    .expect("a checked figure can be reached");
                let changed = self.changed(changes);
                let before = std::mem::replace(&mut self.world, changed);
                let reg = self.figure(*figure, instance);
                self.world = before;
                self.went_in(format!("{text} as if"), reg, node.ty);
                reg
            }
            What::Lookup { table, dated, keys } => {
                let keys = keys.iter().map(|key| self.node(key, scopes)).collect();
                let id = self.table(*table, *dated);
                self.builder.lookup(id, keys)
            }
            What::Where {
                when,
                give,
                otherwise,
            } => {
                let when = self.node(when, scopes);
                if self.builder.is_fixed(when) {
                    // The other branch is not needed, so that nothing unused is worked out.
                    let yes = self.builder.yes_no(true);
                    return self.node(if when == yes { give } else { otherwise }, scopes);
                }
                let (give, otherwise) = (self.node(give, scopes), self.node(otherwise, scopes));
                self.builder.choose(when, give, otherwise)
            }
            What::Extreme { larger, list } => {
                let regs: Vec<Reg> = list.iter().map(|n| self.node(n, scopes)).collect();
                regs.into_iter()
                    .reduce(|a, b| {
                        if *larger {
                            self.builder.larger(a, b)
                        } else {
                            self.builder.smaller(a, b)
                        }
                    })
                    .expect("a list has an entry")
            }
            What::Sum(over) => {
                let mut total = self.builder.constant(Fraction::ZERO);
                for part in over {
                    for instance in self.among(part.kind, scopes) {
                        let value = self.counted(part, instance, scopes, |me, inner| {
                            let body = part.body.as_ref().expect("a sum has a body");
                            me.node(body, inner)
                        });
                        total = self.builder.add(total, value);
                    }
                }
                total
            }
            What::Count(over) => {
                let mut total = self.builder.constant(Fraction::ZERO);
                for part in over {
                    for instance in self.among(part.kind, scopes) {
                        let one = self.counted(part, instance, scopes, |me, _| {
                            me.builder.constant(Fraction::ONE)
                        });
                        total = self.builder.add(total, one);
                    }
                }
                total
            }
            What::Any { every, over } => {
                let mut all = self.builder.yes_no(*every);
                for part in over {
                    for instance in self.among(part.kind, scopes) {
                        let condition = self.condition(part, instance, scopes);
                        all = if *every {
                            self.builder.both(all, condition)
                        } else {
                            self.builder.either(all, condition)
                        };
                    }
                }
                all
            }
            What::First {
                down,
                over,
                failing,
            } => self.first(*down, over, failing, scopes),
            What::Place { down, over } => {
                let (kind, me) = *scopes.last().expect("a place is said of a record");
                let others: Vec<usize> = (0..self.count(kind)).filter(|i| *i != me).collect();
                let mut place = self.builder.constant(Fraction::ONE);
                for other in others {
                    let eligible = self.condition(over, other, scopes);
                    let ahead = self.ahead(over, other, me, *down, scopes);
                    let counts = self.builder.both(eligible, ahead);
                    let (one, none) = (
                        self.builder.constant(Fraction::ONE),
                        self.builder.constant(Fraction::ZERO),
                    );
                    let one = self.builder.choose(counts, one, none);
                    place = self.builder.add(place, one);
                }
                place
            }
            What::Years { from, to } => {
                let (from, to) = (self.node(from, scopes), self.node(to, scopes));
                self.builder.years(from, to)
            }
            What::Binary { op, left, right } => {
                let (left, right) = (self.node(left, scopes), self.node(right, scopes));
                self.binary(*op, left, right, node)
            }
            What::Convert { of, conversion } => {
                let of = self.node(of, scopes);
                let times = self.pack.conversions[*conversion].times;
                self.builder.times(of, times)
            }
            What::Round {
                of,
                direction,
                unit,
                manner,
            } => {
                let minor = matches!(node.ty, Ty::Money(_)) && *unit == Fraction::new(1, 100);
                let of = self.node(of, scopes);
                let manner = manner.unwrap_or(if minor { Manner::Minor } else { Manner::Slope });
                self.builder.round(of, *unit, *direction, manner)
            }
            What::DivideRounded {
                of,
                by,
                direction,
                unit,
                ..
            } => {
                let (of, divisor) = (self.node(of, scopes), self.node(by, scopes));
                if self
                    .builder
                    .fixed_value(divisor)
                    .is_some_and(|value| value <= Fraction::ZERO)
                {
                    self.faults.push(
                        Diagnostic::fault(by.span, "this divides by nothing")
                            .expected("an amount above zero"),
                    );
                    return of;
                }
                self.builder.divide(of, divisor, *unit, *direction)
            }
            What::Charge { of, bands } => self.charge(of, *bands, scopes),
            What::PlaceOn { of, scale } => self.place_on(of, *scale, scopes),
            What::Compare { op, left, right } => {
                let (left, right) = (self.node(left, scopes), self.node(right, scopes));
                match op {
                    CompareOp::Above => self.builder.above(left, right),
                    CompareOp::Below => self.builder.above(right, left),
                    CompareOp::AtLeast => self.builder.at_least(left, right),
                    CompareOp::AtMost => self.builder.at_least(right, left),
                    CompareOp::Is => self.builder.same(left, right),
                    CompareOp::IsNot => {
                        let same = self.builder.same(left, right);
                        self.builder.not(same)
                    }
                }
            }
            What::Not(inner) => {
                let inner = self.node(inner, scopes);
                self.builder.not(inner)
            }
            // Where the left side settles it, the right one is not needed.
            What::Both(left, right) => {
                let left = self.node(left, scopes);
                if left == self.builder.yes_no(false) {
                    return left;
                }
                let right = self.node(right, scopes);
                self.builder.both(left, right)
            }
            What::Either(left, right) => {
                let left = self.node(left, scopes);
                if left == self.builder.yes_no(true) {
                    return left;
                }
                let right = self.node(right, scopes);
                self.builder.either(left, right)
            }
        }
    }

    fn went_in(&mut self, name: String, reg: Reg, ty: Ty) {
        let words = match ty {
            Ty::Choice(choice) => self.pack.choices[choice].words.clone(),
            _ => Vec::new(),
        };
        self.builder.went_in(Entered {
            name,
            reg,
            unit: ty.to_string(),
            words,
        });
    }

    fn target(&mut self, target: Target, kind: usize, instance: usize) -> Reg {
        match target {
            Target::Figure(at) => self.figure(at, instance),
            Target::Fact { fact, .. } => self.fact(kind, instance, fact),
        }
    }

    /// The records that a sum goes over: those that belong to the record at hand, else all of the kind.
    fn among(&self, kind: usize, scopes: &Scopes) -> Vec<usize> {
        let (here, at) = *scopes.last().expect("an expression is said of a record");
        let below = kind != here
            && self.pack.kinds[kind]
                .owner
                .is_some_and(|owner| self.below(owner, here));
        (0..self.count(kind))
            .filter(|i| !below || self.climb(kind, *i, here) == Some(at))
            .collect()
    }

    fn below(&self, kind: usize, here: usize) -> bool {
        let mut at = Some(kind);
        while let Some(k) = at {
            if k == here {
                return true;
            }
            at = self.pack.kinds[k].owner;
        }
        false
    }

    fn condition(&mut self, over: &Over, instance: usize, scopes: &mut Scopes) -> Reg {
        match &over.with {
            None => self.builder.yes_no(true),
            Some(with) => {
                scopes.push((over.kind, instance));
                let reg = self.node(with, scopes);
                scopes.pop();
                reg
            }
        }
    }

    /// A value of one record, or nothing where its condition does not hold.
    fn counted(
        &mut self,
        over: &Over,
        instance: usize,
        scopes: &mut Scopes,
        value: impl FnOnce(&mut Self, &mut Scopes) -> Reg,
    ) -> Reg {
        let condition = self.condition(over, instance, scopes);
        let none = self.builder.constant(Fraction::ZERO);
        if condition == self.builder.yes_no(false) {
            return none;
        }
        scopes.push((over.kind, instance));
        let value = value(self, scopes);
        scopes.pop();
        self.builder.choose(condition, value, none)
    }

    fn key(&mut self, over: &Over, instance: usize, scopes: &mut Scopes) -> Reg {
        scopes.push((over.kind, instance));
        let reg = self.node(over.by.as_ref().expect("an order has a key"), scopes);
        scopes.pop();
        reg
    }

    /// Whether `a` stands before `b` in an order; ties keep the order of the list.
    fn ahead(&mut self, over: &Over, a: usize, b: usize, down: bool, scopes: &mut Scopes) -> Reg {
        let (x, y) = (self.key(over, a, scopes), self.key(over, b, scopes));
        let (x, y) = if down { (y, x) } else { (x, y) };
        // The smaller key is ahead; the earlier record wins a tie.
        if a < b {
            self.builder.at_least(y, x)
        } else {
            self.builder.above(y, x)
        }
    }

    fn first(&mut self, down: bool, over: &Over, failing: &Node, scopes: &mut Scopes) -> Reg {
        let among = self.among(over.kind, scopes);
        let mut result = self.node(failing, scopes);
        for one in among.iter().rev() {
            let mut leads = self.condition(over, *one, scopes);
            for other in among.iter().filter(|o| *o != one) {
                let eligible = self.condition(over, *other, scopes);
                let ahead = self.ahead(over, *other, *one, down, scopes);
                let beaten = self.builder.both(eligible, ahead);
                let stays = self.builder.not(beaten);
                leads = self.builder.both(leads, stays);
            }
            scopes.push((over.kind, *one));
            let value = self.node(over.body.as_ref().expect("a search gives a value"), scopes);
            scopes.pop();
            result = self.builder.choose(leads, value, result);
        }
        result
    }

    fn binary(&mut self, op: BinaryOp, left: Reg, right: Reg, node: &Node) -> Reg {
        match op {
            BinaryOp::Add => self.builder.add(left, right),
            BinaryOp::Subtract => self.builder.subtract(left, right),
            BinaryOp::Multiply => self.builder.multiply(left, right),
            BinaryOp::LimitedTo => self.builder.smaller(left, right),
            BinaryOp::RaisedTo => self.builder.larger(left, right),
            BinaryOp::Beyond => {
                let over = self.builder.subtract(left, right);
                let none = self.builder.constant(Fraction::ZERO);
                self.builder.larger(over, none)
            }
            BinaryOp::Divide => match self.builder.fixed_value(right) {
                Some(value) if !value.is_zero() => self.builder.times(left, Fraction::ONE / value),
                _ => {
                    self.faults.push(
                        Diagnostic::fault(node.span, "this divides by nothing")
                            .expected("a divisor other than zero"),
                    );
                    left
                }
            },
        }
    }

    /// Each band's rate on what lies inside it.
    fn charge(&mut self, of: &Node, bands: usize, scopes: &mut Scopes) -> Reg {
        let pack = self.pack;
        let decl = &pack.bands[bands];
        let none = self.builder.constant(Fraction::ZERO);
        let of = self.node(of, scopes);
        let of = self.builder.larger(of, none);
        let (from, at) = *scopes.last().expect("bands are said of a record");
        let own = self
            .climb(from, at, decl.kind)
            .expect("checked bands can be reached");
        let mut inner = vec![(decl.kind, own)];
        let mut low = none;
        let mut total = none;
        for (at, (rate, limit)) in decl.bands.iter().enumerate() {
            let rate = self.node(rate, &mut inner);
            let high = match limit {
                None => None,
                Some(limit) => {
                    let high = self.node(limit, &mut inner);
                    if let (Some(before), Some(value)) = (
                        self.builder.fixed_value(low),
                        self.builder.fixed_value(high),
                    ) && (value < before || value == before && at > 0)
                    {
                        self.faults.push(falls(limit.span, &decl.name));
                    }
                    // A limit that only this household's facts bring below the one before leaves its band empty.
                    Some(self.builder.larger(high, low))
                }
            };
            let upper = high.map_or(of, |high| self.builder.smaller(of, high));
            let inside = self.builder.subtract(upper, low);
            let inside = if at == 0 {
                inside
            } else {
                self.builder.larger(inside, none)
            };
            let share = self.builder.multiply(inside, rate);
            total = self.builder.add(total, share);
            low = high.unwrap_or(low);
        }
        total
    }

    /// The value of the first step whose limit holds.
    fn place_on(&mut self, of: &Node, scale: usize, scopes: &mut Scopes) -> Reg {
        let pack = self.pack;
        let decl = &pack.scales[scale];
        let of = self.node(of, scopes);
        let (from, at) = *scopes.last().expect("a scale is said of a record");
        let own = self
            .climb(from, at, decl.kind)
            .expect("a checked scale can be reached");
        let mut inner = vec![(decl.kind, own)];
        let mut result: Option<Reg> = None;
        // The limit after the one at hand, whether it is included, and where it stands.
        let mut above: Option<(Fraction, bool, Span)> = None;
        for (value, limit) in decl.steps.iter().rev() {
            let value = self.node(value, &mut inner);
            let (limit, holds, included, span) = match limit {
                Limit::Beyond => {
                    result = Some(value);
                    continue;
                }
                Limit::UpTo(node) => {
                    let limit = self.node(node, &mut inner);
                    (limit, self.builder.at_least(limit, of), true, node.span)
                }
                Limit::Below(node) => {
                    let limit = self.node(node, &mut inner);
                    (limit, self.builder.above(limit, of), false, node.span)
                }
            };
            if let Some(fixed) = self.builder.fixed_value(limit) {
                if let Some((next, next_included, place)) = above {
                    // `below 80` and then `up to 80` leaves 80 itself to the second.
                    let rises = fixed < next || fixed == next && !included && next_included;
                    if !rises {
                        self.faults.push(falls(place, &decl.name));
                    }
                }
                above = Some((fixed, included, span));
            }
            result = Some(result.map_or(value, |rest| self.builder.choose(holds, value, rest)));
        }
        result.expect("a checked scale has a last step")
    }
}

fn falls(span: Span, name: &str) -> Diagnostic {
    Diagnostic::fault(
        span,
        format!("this limit of `{name}` is not above the one before"),
    )
    .expected("limits that rise, so that nothing lies in two lines")
}
