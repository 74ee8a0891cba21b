//! Facts: those that are always there, and those that a pack declares, with their ranges and defaults.

use super::ast::{Expr, ExprKind, FactStatement};
use super::declare::{Declarer, kinds_of_word};
use super::pack::{ADULT, CHILD, FactDecl, FactKind, JOB, OTHER};
use super::types::{Period, Ty};
use crate::diag::Diagnostic;
use crate::num::Fraction;

impl Declarer<'_> {
    pub(super) fn built_in_facts(&mut self) {
        let fact = |name: &str, kind, range: (i128, i128), ask: &str, ty| FactDecl {
            name: name.to_owned(),
            kind,
            range: (Fraction::whole(range.0), Fraction::whole(range.1)),
            default: None,
            ask: ask.to_owned(),
            ty,
            settles: None,
            span: None,
        };
        for member in [ADULT, CHILD, OTHER] {
            self.pack.kinds[member].facts.push(fact(
                "birth",
                FactKind::Date,
                (-40_000, 60_000),
                "What is the date of birth?",
                Ty::Date,
            ));
        }
        let job = &mut self.pack.kinds[JOB].facts;
        job.push(fact(
            "hours",
            FactKind::Hours,
            (0, 168),
            "How many hours a week are paid?",
            Ty::Hours,
        ));
        job.push(fact(
            "wage",
            FactKind::Money(Some(Period::Hour)),
            (0, 2000),
            "What is the basic pay an hour?",
            Ty::Money(Some(Period::Hour)),
        ));
    }

    pub(super) fn fact(&mut self, fact: &FactStatement) {
        let before = self.faults.len();
        if self.fact_of(fact, before).is_none() {
            self.broken.insert(fact.name.text.clone());
        }
    }

    fn fact_of(&mut self, fact: &FactStatement, before: usize) -> Option<()> {
        let ty = self.ty(&fact.ty)?;
        let kinds = kinds_of_word(&self.pack.kinds, &fact.of.text);
        if kinds.is_empty() {
            self.unknown_kind(&fact.of);
        }
        let (kind, widest) = match ty {
            Ty::Money(period) => (
                FactKind::Money(period),
                (Fraction::ZERO, Fraction::whole(10_000_000)),
            ),
            Ty::Rate => (FactKind::Rate, (Fraction::ZERO, Fraction::ONE)),
            Ty::Hours => (FactKind::Hours, (Fraction::ZERO, Fraction::whole(168))),
            Ty::Number => (
                FactKind::Number,
                (Fraction::ZERO, Fraction::whole(1_000_000)),
            ),
            Ty::Count => (FactKind::Count, (Fraction::ZERO, Fraction::whole(10_000))),
            Ty::Date => (
                FactKind::Date,
                (Fraction::whole(-40_000), Fraction::whole(60_000)),
            ),
            Ty::YesNo => (FactKind::YesNo, (Fraction::ZERO, Fraction::ONE)),
            Ty::Choice(at) => {
                let words = self.pack.choices[at].words.clone();
                let last = Fraction::whole(words.len() as i128 - 1);
                (FactKind::Choice(words), (Fraction::ZERO, last))
            }
        };
        let range = match fact.range {
            Some((low, high, span)) if low > high => {
                self.faults.push(
                    Diagnostic::fault(
                        span,
                        format!(
                            "the range goes from {} to {}",
                            shown(low, ty),
                            shown(high, ty)
                        ),
                    )
                    .expected("the smaller number first"),
                );
                widest
            }
            Some((_, _, span)) if !ty.is_quantity() => {
                self.faults.push(
                    Diagnostic::fault(span, format!("{} has no range", ty.words()))
                        .expected("`from … to …` only for money, rates, hours and numbers"),
                );
                widest
            }
            Some((low, high, _)) => (low, high),
            None => widest,
        };
        let default = match &fact.default {
            None => None,
            Some(expr) => match self.default_value(expr, ty) {
                Some(value) if ty.is_quantity() && (value < range.0 || value > range.1) => {
                    self.faults.push(
                        Diagnostic::fault(
                            expr.span,
                            format!("the default {} is outside the range", shown(value, ty)),
                        )
                        .expected(format!(
                            "a value from {} to {}",
                            shown(range.0, ty),
                            shown(range.1, ty)
                        )),
                    );
                    Some(value)
                }
                Some(value) => Some(value),
                None => {
                    self.faults.push(
                        Diagnostic::fault(expr.span, "this cannot be the default")
                            .expected(self.shown(ty)),
                    );
                    None
                }
            },
        };
        let finest = kind.units();
        for (value, span) in [
            (Some(range.0), fact.range),
            (Some(range.1), fact.range),
            (default, None),
        ] {
            let span = span
                .map(|(.., span)| span)
                .or(fact.default.as_ref().map(|e| e.span));
            if let (Some(value), Some(span)) = (value, span)
                && (value * Fraction::whole(i128::from(finest))).denominator() != 1
            {
                self.faults.push(
                    Diagnostic::fault(span, format!("a list cannot hold {}", shown(value, ty)))
                        .expected(decimals(&kind)),
                );
                break;
            }
        }
        let name = &fact.name;
        self.clash(name, "fact");
        if self.faults.len() > before || kinds.is_empty() {
            return None;
        }
        for of in kinds {
            if self.pack.kinds[of]
                .facts
                .iter()
                .any(|f| f.name == name.text)
            {
                self.faults.push(
                    Diagnostic::fault(
                        name.span,
                        format!(
                            "`{}` is a fact of `{}` already",
                            name.text, self.pack.kinds[of].name
                        ),
                    )
                    .expected("a name of its own"),
                );
            } else if self.fresh(&format!("{of}"), name) {
                self.pack.kinds[of].facts.push(FactDecl {
                    name: name.text.clone(),
                    kind: kind.clone(),
                    range,
                    default,
                    ask: fact.ask.clone(),
                    ty,
                    settles: None,
                    span: Some(name.span),
                });
            }
        }
        Some(())
    }

    fn default_value(&self, expr: &Expr, ty: Ty) -> Option<Fraction> {
        match (&expr.kind, ty) {
            (ExprKind::Number(value), t) if t.is_quantity() => Some(*value),
            (ExprKind::Percent(value), Ty::Rate) => Some(*value),
            (ExprKind::HoursLiteral(value), Ty::Hours) => Some(*value),
            (ExprKind::Money(value, _), Ty::Money(_)) => Some(*value),
            (ExprKind::Day(day), Ty::Date) => Some(Fraction::whole(i128::from(*day))),
            (ExprKind::YesNo(value), Ty::YesNo) => Some(Fraction::whole(i128::from(*value))),
            (ExprKind::Name(word), Ty::Choice(at)) => self.pack.choices[at]
                .words
                .iter()
                .position(|w| *w == word.text)
                .map(|at| Fraction::whole(at as i128)),
            _ => None,
        }
    }

    fn shown(&self, ty: Ty) -> String {
        match ty {
            Ty::Choice(at) => format!("one of {}", self.pack.choices[at].words.join(", ")),
            other => other.words(),
        }
    }
}

/// A number as the rule text writes it.
pub(super) fn shown(value: Fraction, ty: Ty) -> String {
    let (value, sign) = if ty == Ty::Rate {
        (value * Fraction::whole(100), "%")
    } else {
        (value, "")
    };
    let text = value.decimal(6);
    format!("{}{sign}", text.trim_end_matches('0').trim_end_matches('.'))
}

/// How finely a list writes a fact.
fn decimals(kind: &FactKind) -> &'static str {
    match kind {
        FactKind::Money(Some(Period::Hour)) => "at most 4 decimals",
        FactKind::Money(_) | FactKind::Hours | FactKind::Number => "at most 2 decimals",
        FactKind::Rate => "a percentage with at most 2 decimals",
        FactKind::Count | FactKind::Date | FactKind::YesNo | FactKind::Choice(_) => {
            "a whole number"
        }
    }
}
