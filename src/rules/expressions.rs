//! Expressions of the rule language, loosest binding first.

use super::ast::{BinaryOp, CompareOp, Expr, ExprKind, Ident};
use super::parser::{GaveUp, Parsed, Parser};
use super::token::TokenKind;
use crate::diag::Diagnostic;
use crate::num::{Direction, Fraction};
use crate::program::Manner;
use crate::source::Span;

/// How many values may be open inside each other.
const DEEPEST: usize = 60;
/// How many expressions may stand inside each other, those that follow each other without brackets included.
const HIGHEST: u16 = 100;

impl Parser<'_> {
    /// `expr` of the grammar.
    pub(super) fn expression(&mut self) -> Parsed<Expr> {
        self.either()
    }

    /// The expression, unless it is too high for whoever walks over it.
    pub(super) fn made(&mut self, kind: ExprKind, span: Span) -> Parsed<Expr> {
        let mut height = 0;
        kind.inner(&mut |inner| height = height.max(inner.height));
        if height >= HIGHEST {
            self.faults.push(
                Diagnostic::fault(span, "this has too many parts")
                    .expected(format!(
                        "at most {HIGHEST} operators that follow or hold each other"
                    ))
                    .hint("give a part a `figure` of its own"),
            );
            return Err(GaveUp);
        }
        Ok(Expr {
            kind,
            span,
            height: height + 1,
        })
    }

    fn either(&mut self) -> Parsed<Expr> {
        let mut left = self.both()?;
        while self.take_word("or") {
            let right = self.both()?;
            let span = left.span.to(right.span);
            left = self.made(ExprKind::Either(Box::new(left), Box::new(right)), span)?;
        }
        Ok(left)
    }

    fn both(&mut self) -> Parsed<Expr> {
        let mut left = self.denial()?;
        while self.take_word("and") {
            let right = self.denial()?;
            let span = left.span.to(right.span);
            left = self.made(ExprKind::Both(Box::new(left), Box::new(right)), span)?;
        }
        Ok(left)
    }

    fn denial(&mut self) -> Parsed<Expr> {
        let mut starts = Vec::new();
        while self.at_word("not") {
            starts.push(self.next().span);
        }
        let mut inner = self.compared()?;
        for start in starts.into_iter().rev() {
            let span = start.to(inner.span);
            inner = self.made(ExprKind::Not(Box::new(inner)), span)?;
        }
        Ok(inner)
    }

    fn compared(&mut self) -> Parsed<Expr> {
        let left = self.shaped()?;
        let op = if self.take_word("above") {
            CompareOp::Above
        } else if self.take_word("below") {
            CompareOp::Below
        } else if self.take_word("at") {
            if self.take_word("least") {
                CompareOp::AtLeast
            } else if self.take_word("most") {
                CompareOp::AtMost
            } else {
                return self.unexpected("`least` or `most`");
            }
        } else if self.take_word("is") {
            if self.take_word("not") {
                CompareOp::IsNot
            } else {
                CompareOp::Is
            }
        } else {
            return Ok(left);
        };
        let right = self.shaped()?;
        let span = left.span.to(right.span);
        self.made(
            ExprKind::Compare {
                op,
                left: Box::new(left),
                right: Box::new(right),
            },
            span,
        )
    }

    fn shaped(&mut self) -> Parsed<Expr> {
        let mut left = self.sum_expression()?;
        loop {
            let op = match self.peek_word() {
                Some("beyond") => BinaryOp::Beyond,
                Some("limited") => BinaryOp::LimitedTo,
                Some("raised") => BinaryOp::RaisedTo,
                Some("rounded") => {
                    left = self.rounded(left)?;
                    continue;
                }
                Some("converted" | "charged") => {
                    let convert = self.at_word("converted");
                    self.next();
                    self.word("by")?;
                    let by = self.any_word(if convert {
                        "the name of a conversion"
                    } else {
                        "the name of bands"
                    })?;
                    let span = left.span.to(by.span);
                    let of = Box::new(left);
                    left = self.made(
                        if convert {
                            ExprKind::Convert { of, by }
                        } else {
                            ExprKind::Charge { of, by }
                        },
                        span,
                    )?;
                    continue;
                }
                Some("placed") => {
                    self.next();
                    self.word("on")?;
                    let on = self.any_word("the name of a scale")?;
                    let span = left.span.to(on.span);
                    left = self.made(
                        ExprKind::PlaceOn {
                            of: Box::new(left),
                            on,
                        },
                        span,
                    )?;
                    continue;
                }
                _ => return Ok(left),
            };
            self.next();
            if op != BinaryOp::Beyond {
                self.word("to")?;
            }
            let right = self.sum_expression()?;
            left = self.binary(op, left, right)?;
        }
    }

    fn rounded(&mut self, of: Expr) -> Parsed<Expr> {
        self.next();
        let direction = if self.take_word("up") {
            Direction::Up
        } else if self.take_word("down") {
            Direction::Down
        } else if self.take_word("half") {
            if self.take_word("up") {
                Direction::HalfUp
            } else if self.take_word("down") {
                Direction::HalfDown
            } else if self.take_word("even") {
                Direction::HalfEven
            } else {
                return self.unexpected("`up`, `down` or `even`");
            }
        } else {
            return self.unexpected("`up`, `down` or `half`");
        };
        self.word("to")?;
        let at = self.peek().span;
        let mut unit = self.number()?;
        if self.take_sign('%') {
            unit = unit / Fraction::whole(100);
        }
        if unit.is_zero() {
            self.faults.push(
                Diagnostic::fault(at, "a rounding needs a unit above zero")
                    .expected("a number such as 1 or 0.01"),
            );
            unit = Fraction::ONE;
        }
        let mut end = at;
        let manner = if self.take_word("as") {
            if self.at_word("steps") {
                end = self.next().span;
                Some(Manner::Steps)
            } else if self.take_word("a") {
                end = self.word("slope")?;
                Some(Manner::Slope)
            } else {
                return self.unexpected("`steps` or `a slope`");
            }
        } else {
            None
        };
        let span = of.span.to(end);
        self.made(
            ExprKind::Round {
                of: Box::new(of),
                direction,
                unit,
                manner,
            },
            span,
        )
    }

    pub(super) fn sum_expression(&mut self) -> Parsed<Expr> {
        let mut left = self.product()?;
        loop {
            let op = match self.peek().kind {
                TokenKind::Sign('+') => BinaryOp::Add,
                TokenKind::Sign('-') => BinaryOp::Subtract,
                _ => return Ok(left),
            };
            self.next();
            let right = self.product()?;
            left = self.binary(op, left, right)?;
        }
    }

    fn product(&mut self) -> Parsed<Expr> {
        let mut left = self.value()?;
        loop {
            let op = match self.peek().kind {
                TokenKind::Sign('*') => BinaryOp::Multiply,
                TokenKind::Sign('/') => BinaryOp::Divide,
                _ => return Ok(left),
            };
            self.next();
            let right = self.value()?;
            left = self.binary(op, left, right)?;
        }
    }

    pub(super) fn value(&mut self) -> Parsed<Expr> {
        self.depth += 1;
        let result = if self.depth > DEEPEST {
            let fault = Diagnostic::fault(self.peek().span, "this is nested too deep")
                .expected(format!("at most {DEEPEST} values inside each other"));
            self.faults
                .push(fault.hint("give the inner part a `figure` of its own"));
            Err(GaveUp)
        } else {
            self.inner_value()
        };
        self.depth -= 1;
        result
    }

    fn inner_value(&mut self) -> Parsed<Expr> {
        let token = self.peek().clone();
        let span = token.span;
        let kind = match token.kind {
            TokenKind::Number(value) => {
                self.next();
                if self.take_sign('%') {
                    ExprKind::Percent(value / Fraction::whole(100))
                } else if self.take_word("hours") {
                    ExprKind::HoursLiteral(value)
                } else {
                    ExprKind::Number(value)
                }
            }
            TokenKind::Day(day) => {
                self.next();
                ExprKind::Day(day)
            }
            TokenKind::Sign('(') => {
                self.next();
                let inner = self.expression()?;
                let end = self.sign(')')?;
                return Ok(Expr {
                    span: span.to(end),
                    ..inner
                });
            }
            TokenKind::Word(word) => return self.word_value(&word),
            TokenKind::Text(_) | TokenKind::Sign(_) | TokenKind::End => {
                return self.unexpected("a value");
            }
        };
        self.made(kind, span)
    }

    fn word_value(&mut self, word: &str) -> Parsed<Expr> {
        let start = self.peek().span;
        let kind = match word {
            "yes" | "no" => {
                self.next();
                ExprKind::YesNo(word == "yes")
            }
            "money" => {
                self.next();
                let minus = self.take_sign('-');
                let value = self.number()?;
                let value = if minus { -value } else { value };
                let period = if self.take_word("a") || self.take_word("an") {
                    Some(self.any_word("a period")?)
                } else {
                    None
                };
                ExprKind::Money(value, period)
            }
            "where" => {
                self.next();
                let when = Box::new(self.expression()?);
                self.word("give")?;
                let give = Box::new(self.expression()?);
                self.word("otherwise")?;
                let otherwise = Box::new(self.expression()?);
                let span = start.to(otherwise.span);
                return self.made(
                    ExprKind::Where {
                        when,
                        give,
                        otherwise,
                    },
                    span,
                );
            }
            "larger" | "smaller" => {
                self.next();
                self.word("of")?;
                self.sign('(')?;
                let mut list = vec![self.expression()?];
                while self.take_sign(',') {
                    list.push(self.expression()?);
                }
                let end = self.sign(')')?;
                return self.made(
                    ExprKind::Extreme {
                        larger: word == "larger",
                        list,
                    },
                    start.to(end),
                );
            }
            "sum" => {
                self.next();
                self.word("over")?;
                let kind = self.any_word("a kind")?;
                let with = self.with()?;
                self.word("of")?;
                let body = self.value()?;
                let span = start.to(body.span);
                return self.made(
                    ExprKind::SumOver {
                        kind,
                        with,
                        body: Box::new(body),
                    },
                    span,
                );
            }
            "count" => {
                self.next();
                self.word("of")?;
                let kind = self.any_word("a kind")?;
                ExprKind::CountOf {
                    kind,
                    with: self.with()?,
                }
            }
            "any" | "every" => {
                self.next();
                let kind = self.any_word("a kind")?;
                match self.with()? {
                    Some(with) => ExprKind::AnyEvery {
                        every: word == "every",
                        kind,
                        with,
                    },
                    None => return self.unexpected("`with (…)`"),
                }
            }
            "first" => {
                self.next();
                let kind = self.any_word("a kind")?;
                let (by, down) = self.order()?;
                let with = self.with()?;
                self.word("give")?;
                let give = Box::new(self.value()?);
                self.word("failing")?;
                let failing = Box::new(self.value()?);
                ExprKind::First {
                    kind,
                    by,
                    down,
                    with,
                    give,
                    failing,
                }
            }
            "place" => {
                self.next();
                let (by, down) = self.order()?;
                ExprKind::Place {
                    by,
                    down,
                    with: self.with()?,
                }
            }
            "years" => {
                self.next();
                self.word("from")?;
                let from = Box::new(self.value()?);
                self.word("to")?;
                ExprKind::Years {
                    from,
                    to: Box::new(self.value()?),
                }
            }
            "missing" => {
                self.next();
                ExprKind::Missing(self.any_word("the name of an amount")?)
            }
            _ => return self.named(),
        };
        let end = self.previous_span();
        self.made(kind, start.to(end))
    }

    /// A name, with `of …` or `[…]` behind it.
    fn named(&mut self) -> Parsed<Expr> {
        let is_name = self
            .peek_word()
            .is_some_and(|w| w == "hours" || super::token::can_name(w));
        if !is_name {
            return self.unexpected("a value");
        }
        let name = self.any_word("a value")?;
        let start = name.span;
        let kind = if self.take_word("of") {
            let whose = self.any_word("`partner` or a kind")?;
            let failing = if self.take_word("failing") {
                Some(Box::new(self.value()?))
            } else {
                None
            };
            ExprKind::Of {
                name,
                whose,
                failing,
            }
        } else if self.take_sign('[') {
            let mut keys = vec![self.expression()?];
            while self.take_sign(',') {
                keys.push(self.expression()?);
            }
            self.sign(']')?;
            ExprKind::Lookup { table: name, keys }
        } else if self.take_word("as") {
            self.word("if")?;
            self.sign('(')?;
            let mut changes = Vec::new();
            loop {
                let fact = self.any_word("the fact to change")?;
                self.word("is")?;
                changes.push((fact, self.value()?));
                if !self.take_word("and") {
                    break;
                }
            }
            self.sign(')')?;
            ExprKind::AsIf { name, changes }
        } else {
            ExprKind::Name(name)
        };
        let end = self.previous_span();
        self.made(kind, start.to(end))
    }

    fn with(&mut self) -> Parsed<Option<Box<Expr>>> {
        if !self.take_word("with") {
            return Ok(None);
        }
        self.sign('(')?;
        let inner = self.expression()?;
        self.sign(')')?;
        Ok(Some(Box::new(inner)))
    }

    fn order(&mut self) -> Parsed<(Ident, bool)> {
        self.word("by")?;
        let by = self.any_word("the figure or fact to order by")?;
        Ok((by, self.take_word("down")))
    }

    fn binary(&mut self, op: BinaryOp, left: Expr, right: Expr) -> Parsed<Expr> {
        let span = left.span.to(right.span);
        self.made(
            ExprKind::Binary {
                op,
                left: Box::new(left),
                right: Box::new(right),
            },
            span,
        )
    }
}
