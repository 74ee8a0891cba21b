//! Works out the type of one expression. `names` looks up what it names.

use super::ast::{BinaryOp, CompareOp, Expr, ExprKind, Ident};
use super::names::Names;
use super::pack::Pack;
use super::tree::{Node, Target, What};
use super::types::{Period, Ty};
use crate::diag::Diagnostic;
use crate::num::{Direction, Fraction};
use crate::program::Manner;
use crate::source::Span;

pub(super) struct Context<'a> {
    pub(super) pack: &'a Pack,
    pub(super) names: &'a Names,
    /// Kinds of the records at hand, the innermost last.
    pub(super) scopes: Vec<usize>,
    pub(super) dated: Option<usize>,
    /// Whether it stands in bands or a scale.
    in_list: bool,
}

pub(super) type Faults = Vec<Diagnostic>;

impl<'a> Context<'a> {
    pub(super) fn new(pack: &'a Pack, names: &'a Names, kind: usize, dated: Option<usize>) -> Self {
        Context {
            pack,
            names,
            scopes: vec![kind],
            dated,
            in_list: false,
        }
    }

    /// The same for an expression of bands or a scale.
    pub(super) fn in_list(self) -> Self {
        Context {
            in_list: true,
            ..self
        }
    }

    /// The checked tree of an expression that must have a type.
    pub(super) fn wanted(&mut self, expr: &Expr, ty: Ty, faults: &mut Faults) -> Option<Node> {
        let node = self.node(expr, Some(ty), faults)?;
        if let (Ty::Rate, What::Fixed(value), true) = (ty, &node.what, node.ty != Ty::Rate)
            && node.ty.is_scalar()
            && *value > Fraction::ONE
        {
            let (whole, percent) = (value.decimal(0), (*value * Fraction::whole(100)).decimal(0));
            faults.push(
                Diagnostic::fault(expr.span, format!("as a rate this is {percent}%"))
                    .expected(format!("a percentage such as `{whole}%`")),
            );
            return None;
        }
        if node.ty.fits(ty) || (node.is_zero() && ty.is_quantity()) {
            Some(Node { ty, ..node })
        } else {
            let mut fault =
                Diagnostic::fault(expr.span, format!("this is {}", self.shown(node.ty)))
                    .expected(self.shown(ty));
            if let (Ty::Money(Some(from)), Ty::Money(Some(to))) = (node.ty, ty) {
                fault = self.conversion_hint(fault, from, to);
            }
            faults.push(fault);
            None
        }
    }

    fn conversion_hint(&self, fault: Diagnostic, from: Period, to: Period) -> Diagnostic {
        match self
            .pack
            .conversions
            .iter()
            .find(|c| c.from == from && c.to == to)
        {
            Some(conversion) => fault.hint(format!("write `converted by {}`", conversion.name)),
            None => fault.hint(format!(
                "declare a `conversion` from {} to {}",
                from.word(),
                to.word()
            )),
        }
    }

    pub(super) fn shown(&self, ty: Ty) -> String {
        match ty {
            Ty::Choice(at) => format!("the choice `{}`", self.pack.choices[at].name),
            other => other.words(),
        }
    }

    pub(super) fn node(
        &mut self,
        expr: &Expr,
        hint: Option<Ty>,
        faults: &mut Faults,
    ) -> Option<Node> {
        let span = expr.span;
        let make = |ty, what| Some(Node { ty, span, what });
        match &expr.kind {
            ExprKind::Number(value) => {
                let ty = if value.denominator() == 1 {
                    Ty::Count
                } else {
                    Ty::Number
                };
                make(ty, What::Fixed(*value))
            }
            ExprKind::Percent(value) => make(Ty::Rate, What::Fixed(*value)),
            ExprKind::HoursLiteral(value) => make(Ty::Hours, What::Fixed(*value)),
            ExprKind::Money(value, period) => {
                let period = match period {
                    None => None,
                    Some(word) => match Period::from_word(&word.text) {
                        Some(found) => Some(found),
                        None => {
                            faults.push(
                                Diagnostic::fault(
                                    word.span,
                                    format!("`{}` is not a period", word.text),
                                )
                                .expected(format!("one of {}", Period::WORDS.join(", "))),
                            );
                            return None;
                        }
                    },
                };
                make(Ty::Money(period), What::Fixed(*value))
            }
            ExprKind::Day(day) => make(Ty::Date, What::Fixed(Fraction::whole(i128::from(*day)))),
            ExprKind::YesNo(value) if self.yes_no_word(*value, hint).is_some() => {
                let word = self.yes_no_word(*value, hint)?;
                make(hint?, What::Fixed(Fraction::whole(word as i128)))
            }
            ExprKind::YesNo(value) => {
                make(Ty::YesNo, What::Fixed(Fraction::whole(i128::from(*value))))
            }
            ExprKind::Name(name) => self.name(name, hint, faults),
            ExprKind::Of {
                name,
                whose,
                failing,
            } => self.of(name, whose, failing.as_deref(), span, faults),
            ExprKind::Lookup { table, keys } => self.lookup(table, keys, span, faults),
            ExprKind::Where {
                when,
                give,
                otherwise,
            } => {
                let when = self.wanted(when, Ty::YesNo, faults);
                let (give, otherwise, ty) = self.joined(give, otherwise, hint, faults)?;
                make(
                    ty,
                    What::Where {
                        when: Box::new(when?),
                        give: Box::new(give),
                        otherwise: Box::new(otherwise),
                    },
                )
            }
            ExprKind::Extreme { larger, list } => {
                let nodes: Vec<Option<Node>> =
                    list.iter().map(|e| self.node(e, hint, faults)).collect();
                let nodes: Vec<Node> = nodes.into_iter().collect::<Option<_>>()?;
                let first = nodes
                    .iter()
                    .find(|n| !n.is_zero())
                    .map_or(Ty::Count, |n| n.ty);
                let mut ty = first;
                for node in &nodes {
                    match ty.join(node.ty) {
                        Some(joint) if joint.is_quantity() => ty = joint,
                        _ if node.is_zero() && ty.is_quantity() => {}
                        _ => {
                            faults.push(self.mismatch(node, ty));
                            return None;
                        }
                    }
                }
                make(
                    ty,
                    What::Extreme {
                        larger: *larger,
                        list: nodes,
                    },
                )
            }
            ExprKind::SumOver { kind, with, body } => {
                let over = self.over(kind, with.as_deref(), Some((body, None)), None, faults)?;
                let ty = over[0].body.as_ref().map_or(Ty::Number, |b| b.ty);
                if !ty.is_quantity() {
                    faults.push(
                        Diagnostic::fault(body.span, format!("this is {}", self.shown(ty)))
                            .expected("something that can be added"),
                    );
                    return None;
                }
                make(ty, What::Sum(over))
            }
            ExprKind::CountOf { kind, with } => {
                let over = self.over(kind, with.as_deref(), None, None, faults)?;
                make(Ty::Count, What::Count(over))
            }
            ExprKind::AnyEvery { every, kind, with } => {
                let over = self.over(kind, Some(with), None, None, faults)?;
                make(
                    Ty::YesNo,
                    What::Any {
                        every: *every,
                        over,
                    },
                )
            }
            ExprKind::First {
                kind,
                by,
                down,
                with,
                give,
                failing,
            } => {
                let over = self.over(kind, with.as_deref(), Some((give, hint)), Some(by), faults);
                let failing = self.node(failing, hint, faults);
                let (mut over, failing) = (over?, failing?);
                let only = self.one_kind(kind, &mut over, faults)?;
                let ty = only.body.as_ref().map_or(Ty::Number, |b| b.ty);
                let failing = self.fit(failing, ty, faults)?;
                make(
                    ty,
                    What::First {
                        down: *down,
                        over: Box::new(only),
                        failing: Box::new(failing),
                    },
                )
            }
            ExprKind::Place { by, down, with } => {
                let here = *self.scopes.last()?;
                let kind = Ident {
                    text: self.pack.kinds[here].name.clone(),
                    span: by.span,
                };
                let mut over = self.over(&kind, with.as_deref(), None, Some(by), faults)?;
                let only = self.one_kind(&kind, &mut over, faults)?;
                make(
                    Ty::Count,
                    What::Place {
                        down: *down,
                        over: Box::new(only),
                    },
                )
            }
            ExprKind::Years { from, to } => {
                let (from, to) = (
                    self.wanted(from, Ty::Date, faults),
                    self.wanted(to, Ty::Date, faults),
                );
                make(
                    Ty::Count,
                    What::Years {
                        from: Box::new(from?),
                        to: Box::new(to?),
                    },
                )
            }
            ExprKind::Missing(name) => match self.names.amounts.get(&name.text) {
                Some(amount) => make(
                    Ty::YesNo,
                    What::Missing {
                        amount: *amount,
                        dated: self.picked(span, faults)?,
                    },
                ),
                None => {
                    let known = self.names.amounts.keys().map(String::as_str);
                    self.absent(
                        name,
                        "is not an amount",
                        "a name of `amounts.csv`",
                        known,
                        faults,
                    )
                }
            },
            ExprKind::AsIf { name, changes } => self.as_if(name, changes, span, faults),
            ExprKind::Binary { op, left, right } => self.binary(*op, left, right, span, faults),
            ExprKind::Round {
                of,
                direction,
                unit,
                manner,
            } => {
                if let ExprKind::Binary {
                    op: BinaryOp::Divide,
                    left,
                    right,
                } = &of.kind
                {
                    let (left, right) = (
                        self.node(left, None, faults)?,
                        self.node(right, None, faults)?,
                    );
                    if !right.is_fixed() {
                        return self.divide_rounded(
                            left,
                            right,
                            (*direction, *unit, *manner),
                            span,
                            faults,
                        );
                    }
                }
                let of = self.node(of, hint, faults)?;
                if !of.ty.is_quantity() {
                    faults.push(
                        Diagnostic::fault(of.span, format!("this is {}", self.shown(of.ty)))
                            .expected("a quantity to round"),
                    );
                    return None;
                }
                let whole = unit.denominator() == 1 && of.ty.is_scalar() && of.ty != Ty::Rate;
                let ty = if whole { Ty::Count } else { of.ty };
                make(
                    ty,
                    What::Round {
                        of: Box::new(of),
                        direction: *direction,
                        unit: *unit,
                        manner: *manner,
                    },
                )
            }
            ExprKind::Convert { of, by } => {
                let of = self.node(of, None, faults)?;
                let Some(at) = self.pack.conversions.iter().position(|c| c.name == by.text) else {
                    let known = self.pack.conversions.iter().map(|c| c.name.as_str());
                    return self.absent(
                        by,
                        "is not a conversion",
                        "the name of a `conversion`",
                        known,
                        faults,
                    );
                };
                let conversion = &self.pack.conversions[at];
                if of.ty != Ty::Money(Some(conversion.from)) {
                    faults.push(
                        Diagnostic::fault(of.span, format!("this is {}", self.shown(of.ty)))
                            .expected(format!("{}", Ty::Money(Some(conversion.from)))),
                    );
                    return None;
                }
                make(
                    Ty::Money(Some(conversion.to)),
                    What::Convert {
                        of: Box::new(of),
                        conversion: at,
                    },
                )
            }
            ExprKind::Charge { by: name, .. } | ExprKind::PlaceOn { on: name, .. }
                if self.in_list =>
            {
                faults.push(
                    Diagnostic::fault(name.span, "bands and scales do not stand inside others")
                        .expected("a sum, facts, amounts and figures")
                        .hint("give it a `figure` of its own"),
                );
                None
            }
            ExprKind::Charge { of, by } => {
                let of = self.node(of, None, faults)?;
                let Some(at) = self.pack.bands.iter().position(|b| b.name == by.text) else {
                    let known = self.pack.bands.iter().map(|b| b.name.as_str());
                    return self.absent(by, "are not bands", "the name of `bands`", known, faults);
                };
                let (ty, kind) = (self.pack.bands[at].ty, self.pack.bands[at].kind);
                let of = self.fit(of, ty, faults)?;
                self.reaches(kind, by, faults)?;
                make(
                    ty,
                    What::Charge {
                        of: Box::new(of),
                        bands: at,
                    },
                )
            }
            ExprKind::PlaceOn { of, on } => {
                let of = self.node(of, None, faults)?;
                let Some(at) = self.pack.scales.iter().position(|s| s.name == on.text) else {
                    let known = self.pack.scales.iter().map(|s| s.name.as_str());
                    return self.absent(
                        on,
                        "is not a scale",
                        "the name of a `scale`",
                        known,
                        faults,
                    );
                };
                let (ty, gives, kind) = (
                    self.pack.scales[at].ty,
                    self.pack.scales[at].gives,
                    self.pack.scales[at].kind,
                );
                let of = self.fit(of, ty, faults)?;
                self.reaches(kind, on, faults)?;
                make(
                    gives,
                    What::PlaceOn {
                        of: Box::new(of),
                        scale: at,
                    },
                )
            }
            ExprKind::Compare { op, left, right } => {
                let equality = matches!(op, CompareOp::Is | CompareOp::IsNot);
                let left = self.node(left, None, faults)?;
                let right = self.node(right, Some(left.ty), faults)?;
                let fits = left.ty.join(right.ty).is_some()
                    || (left.is_zero() && right.ty.is_quantity())
                    || (right.is_zero() && left.ty.is_quantity());
                if !fits {
                    faults.push(self.mismatch(&right, left.ty));
                    return None;
                }
                let ordered = left.ty.is_quantity() || left.ty == Ty::Date || left.is_zero();
                if !equality && !ordered {
                    faults.push(
                        Diagnostic::fault(
                            left.span,
                            format!("{} has no order", self.shown(left.ty)),
                        )
                        .expected("`is` or `is not`"),
                    );
                    return None;
                }
                make(
                    Ty::YesNo,
                    What::Compare {
                        op: *op,
                        left: Box::new(left),
                        right: Box::new(right),
                    },
                )
            }
            ExprKind::Not(inner) => {
                let inner = self.wanted(inner, Ty::YesNo, faults)?;
                make(Ty::YesNo, What::Not(Box::new(inner)))
            }
            ExprKind::Both(left, right) | ExprKind::Either(left, right) => {
                let both = matches!(expr.kind, ExprKind::Both(..));
                let (left, right) = (
                    self.wanted(left, Ty::YesNo, faults),
                    self.wanted(right, Ty::YesNo, faults),
                );
                let (left, right) = (Box::new(left?), Box::new(right?));
                make(
                    Ty::YesNo,
                    if both {
                        What::Both(left, right)
                    } else {
                        What::Either(left, right)
                    },
                )
            }
        }
    }

    fn mismatch(&self, node: &Node, wanted: Ty) -> Diagnostic {
        let fault = Diagnostic::fault(node.span, format!("this is {}", self.shown(node.ty)))
            .expected(self.shown(wanted));
        match (node.ty, wanted) {
            (Ty::Money(Some(from)), Ty::Money(Some(to))) if from != to => {
                self.conversion_hint(fault, from, to)
            }
            _ => fault,
        }
    }

    pub(super) fn fit(&self, node: Node, ty: Ty, faults: &mut Faults) -> Option<Node> {
        if node.ty.fits(ty) || (node.is_zero() && ty.is_quantity()) {
            return Some(Node { ty, ..node });
        }
        faults.push(self.mismatch(&node, ty));
        None
    }

    fn joined(
        &mut self,
        give: &Expr,
        otherwise: &Expr,
        hint: Option<Ty>,
        faults: &mut Faults,
    ) -> Option<(Node, Node, Ty)> {
        let give = self.node(give, hint, faults);
        let otherwise = self.node(otherwise, hint.or(give.as_ref().map(|g| g.ty)), faults);
        let (give, otherwise) = (give?, otherwise?);
        let ty = match give.ty.join(otherwise.ty) {
            Some(ty) => ty,
            None if give.is_zero() && otherwise.ty.is_quantity() => otherwise.ty,
            None if otherwise.is_zero() && give.ty.is_quantity() => give.ty,
            None => {
                faults.push(self.mismatch(&otherwise, give.ty));
                return None;
            }
        };
        Some((give, otherwise, ty))
    }

    fn binary(
        &mut self,
        op: BinaryOp,
        left: &Expr,
        right: &Expr,
        span: Span,
        faults: &mut Faults,
    ) -> Option<Node> {
        let (left, right) = (
            self.node(left, None, faults),
            self.node(right, None, faults),
        );
        let (left, right) = (left?, right?);
        let ty = match op {
            BinaryOp::Add
            | BinaryOp::Subtract
            | BinaryOp::Beyond
            | BinaryOp::LimitedTo
            | BinaryOp::RaisedTo => {
                let joint = match left.ty.join(right.ty) {
                    Some(ty) if ty.is_quantity() => Some(ty),
                    _ if left.is_zero() && right.ty.is_quantity() => Some(right.ty),
                    _ if right.is_zero() && left.ty.is_quantity() => Some(left.ty),
                    _ => None,
                };
                match joint {
                    Some(ty) => ty,
                    None if !left.ty.is_quantity() => {
                        faults.push(
                            Diagnostic::fault(
                                left.span,
                                format!("this is {}", self.shown(left.ty)),
                            )
                            .expected(format!("a quantity before `{}`", op.word())),
                        );
                        return None;
                    }
                    None => {
                        faults.push(self.mismatch(&right, left.ty));
                        return None;
                    }
                }
            }
            BinaryOp::Multiply => match (left.ty, right.ty) {
                (Ty::Money(Some(Period::Hour)), Ty::Hours)
                | (Ty::Hours, Ty::Money(Some(Period::Hour))) => Ty::Money(Some(Period::Week)),
                (a, b) if a.is_scalar() && b.is_scalar() => a.join(b).unwrap_or(Ty::Number),
                (a, b) if a.is_quantity() && b.is_scalar() => a,
                (a, b) if a.is_scalar() && b.is_quantity() => b,
                (a, b) => {
                    faults.push(
                        Diagnostic::fault(
                            span,
                            format!("{} times {}", self.shown(a), self.shown(b)),
                        )
                        .expected("a quantity times a number, or money an hour times hours"),
                    );
                    return None;
                }
            },
            BinaryOp::Divide => {
                if !right.is_fixed() {
                    faults.push(
                        Diagnostic::fault(right.span, "this is not a fixed number")
                            .expected("a number or an amount")
                            .hint("multiply out, or round the quotient at once: `(a / b rounded half up to 0.01)`"),
                    );
                    return None;
                }
                match (left.ty, right.ty) {
                    (a, b) if a.is_quantity() && b.is_scalar() => {
                        if a == Ty::Count {
                            Ty::Number
                        } else {
                            a
                        }
                    }
                    (a, b) if a == b && a.is_quantity() => Ty::Number,
                    (_, _) => {
                        faults.push(self.mismatch(&right, left.ty));
                        return None;
                    }
                }
            }
        };
        Some(Node {
            ty,
            span,
            what: What::Binary {
                op,
                left: Box::new(left),
                right: Box::new(right),
            },
        })
    }

    /// Whether a value is surely above nothing.
    pub(super) fn above_zero(&self, node: &Node) -> bool {
        match &node.what {
            What::Name {
                target: Target::Fact { kind, fact },
                ..
            } => self.pack.kinds[*kind].facts[*fact].range.0 > Fraction::ZERO,
            What::Binary {
                op: BinaryOp::RaisedTo,
                right,
                ..
            } => matches!(right.what, What::Fixed(value) if value > Fraction::ZERO),
            _ => false,
        }
    }

    fn divide_rounded(
        &mut self,
        of: Node,
        by: Node,
        (direction, unit, manner): (Direction, Fraction, Option<Manner>),
        span: Span,
        faults: &mut Faults,
    ) -> Option<Node> {
        if !self.above_zero(&by) {
            faults.push(
                Diagnostic::fault(by.span, "this could be nothing").expected(
                    "a fact whose range starts above zero, or `… raised to` a number above zero",
                ),
            );
            return None;
        }
        let ty = match (of.ty, by.ty) {
            (a, b) if a.is_quantity() && b.is_scalar() => {
                if a.is_scalar() {
                    Ty::Number
                } else {
                    a
                }
            }
            (a, b) if a == b && a.is_quantity() => Ty::Number,
            (_, _) => {
                faults.push(self.mismatch(&by, of.ty));
                return None;
            }
        };
        let ty = if ty == Ty::Number && unit.denominator() == 1 {
            Ty::Count
        } else {
            ty
        };
        Some(Node {
            ty,
            span,
            what: What::DivideRounded {
                of: Box::new(of),
                by: Box::new(by),
                direction,
                unit,
                manner,
            },
        })
    }
}
