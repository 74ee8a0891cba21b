//! Tokens to statements. One token of lookahead; after a fault it goes on at the next statement, so
//! that one reading reports every fault. Expressions are in `expressions`.

use super::ast::{
    Band, ExprKind, FactStatement, Ident, Part, ScaleStep, Statement, StatementKind, StepLimit,
    TypeName,
};
use super::token::{STATEMENTS, Token, TokenKind, can_name};
use crate::diag::{Diagnostic, nearest};
use crate::num::Fraction;
use crate::program::ItemKind;
use crate::source::{FileId, Span};

/// A fault was reported; the statement is given up.
#[derive(Debug)]
pub(super) struct GaveUp;
pub(super) type Parsed<T> = Result<T, GaveUp>;

pub(super) struct Parser<'a> {
    tokens: Vec<Token>,
    /// Where signs stand that are no tokens: a statement that holds one is reported once.
    unread: Vec<u32>,
    at: usize,
    pub(super) faults: &'a mut Vec<Diagnostic>,
    /// How many values are open inside each other, bounded so that no text can exhaust the stack.
    pub(super) depth: usize,
}

/// Reads one file.
pub(super) fn parse(file: FileId, text: &str, faults: &mut Vec<Diagnostic>) -> Part {
    let before = faults.len();
    let tokens = super::lexer::tokens(file, text, faults);
    let unread = faults[before..]
        .iter()
        .filter_map(|f| f.span.map(|s| s.start))
        .collect();
    Parser {
        tokens,
        unread,
        at: 0,
        faults,
        depth: 0,
    }
    .part(file)
}

impl Parser<'_> {
    pub(super) fn peek(&self) -> &Token {
        &self.tokens[self.at]
    }

    pub(super) fn next(&mut self) -> Token {
        let token = self.tokens[self.at].clone();
        if self.at + 1 < self.tokens.len() {
            self.at += 1;
        }
        token
    }

    /// The span of the token before the one at hand.
    pub(super) fn previous_span(&self) -> Span {
        self.tokens[self.at.saturating_sub(1)].span
    }

    pub(super) fn peek_word(&self) -> Option<&str> {
        match &self.peek().kind {
            TokenKind::Word(word) => Some(word),
            _ => None,
        }
    }

    pub(super) fn at_word(&self, word: &str) -> bool {
        self.peek_word() == Some(word)
    }

    pub(super) fn take_word(&mut self, word: &str) -> bool {
        let found = self.at_word(word);
        if found {
            self.next();
        }
        found
    }

    pub(super) fn at_sign(&self, sign: char) -> bool {
        self.peek().kind == TokenKind::Sign(sign)
    }

    pub(super) fn take_sign(&mut self, sign: char) -> bool {
        let found = self.at_sign(sign);
        if found {
            self.next();
        }
        found
    }

    /// Reports the token at hand and gives the statement up.
    pub(super) fn unexpected<T>(&mut self, expected: &str) -> Parsed<T> {
        let token = self.peek();
        let ends = token.kind == TokenKind::End
            || token.first && self.peek_word().is_some_and(|w| STATEMENTS.contains(&w));
        let fault = if ends && self.at > 0 {
            Diagnostic::fault(self.previous_span(), "the statement ends here")
                .expected(format!("{expected} after it"))
        } else {
            Diagnostic::fault(token.span, format!("found {}", token.kind.shown()))
                .expected(expected)
        };
        self.faults.push(fault);
        Err(GaveUp)
    }

    pub(super) fn word(&mut self, word: &str) -> Parsed<Span> {
        if self.at_word(word) {
            Ok(self.next().span)
        } else {
            self.unexpected(&format!("`{word}`"))
        }
    }

    pub(super) fn sign(&mut self, sign: char) -> Parsed<Span> {
        if self.at_sign(sign) {
            Ok(self.next().span)
        } else {
            self.unexpected(&format!("`{sign}`"))
        }
    }

    /// Any word, keywords included: kinds, periods, choice words and references.
    pub(super) fn any_word(&mut self, what: &str) -> Parsed<Ident> {
        match &self.peek().kind {
            TokenKind::Word(word) => {
                let ident = Ident {
                    text: word.clone(),
                    span: self.peek().span,
                };
                self.next();
                Ok(ident)
            }
            _ => self.unexpected(what),
        }
    }

    /// A new name.
    fn name(&mut self, what: &str) -> Parsed<Ident> {
        let ident = self.any_word(what)?;
        if !can_name(&ident.text) {
            self.faults.push(
                Diagnostic::fault(
                    ident.span,
                    format!("`{}` is a word of the language", ident.text),
                )
                .expected(what)
                .hint("choose another name"),
            );
        }
        Ok(ident)
    }

    fn text(&mut self, what: &str) -> Parsed<String> {
        match &self.peek().kind {
            TokenKind::Text(text) => {
                let text = text.clone();
                let span = self.next().span;
                if text.trim().is_empty() {
                    self.faults
                        .push(Diagnostic::fault(span, "this text is empty").expected(what));
                }
                Ok(text)
            }
            _ => self.unexpected(what),
        }
    }

    pub(super) fn number(&mut self) -> Parsed<Fraction> {
        match self.peek().kind {
            TokenKind::Number(value) => {
                self.next();
                Ok(value)
            }
            _ => self.unexpected("a number"),
        }
    }

    fn signed(&mut self) -> Parsed<Fraction> {
        let minus = self.take_sign('-');
        let value = self.number()?;
        let percent = self.take_sign('%');
        let value = if percent {
            value / Fraction::whole(100)
        } else {
            value
        };
        Ok(if minus { -value } else { value })
    }

    /// Skips to the next statement.
    fn recover(&mut self) {
        while self.peek().kind != TokenKind::End {
            let starts =
                self.peek().first && self.peek_word().is_some_and(|w| STATEMENTS.contains(&w));
            if starts {
                return;
            }
            self.next();
        }
    }

    fn part(mut self, file: FileId) -> Part {
        let start = Span {
            file,
            start: 0,
            end: 0,
        };
        let mut part = Part {
            title: String::new(),
            title_span: start,
            dated: None,
            law: String::new(),
            statements: Vec::new(),
            broken: Vec::new(),
        };
        let mut per = None;
        while self.peek().kind != TokenKind::End {
            let token = self.peek().clone();
            let keyword = match &token.kind {
                TokenKind::Word(word) if STATEMENTS.contains(&word.as_str()) => word.clone(),
                TokenKind::Word(word) => {
                    let mut fault =
                        Diagnostic::fault(token.span, format!("found {}", token.kind.shown()))
                            .expected("a keyword that starts a statement");
                    if let Some(near) = nearest(word, STATEMENTS) {
                        fault = fault.hint(format!("did you mean `{near}`?"));
                    }
                    self.faults.push(fault);
                    self.next();
                    self.recover();
                    continue;
                }
                _ => {
                    let _ = self.unexpected::<()>("a keyword that starts a statement");
                    self.next();
                    self.recover();
                    continue;
                }
            };
            if !token.first {
                self.faults.push(
                    Diagnostic::fault(token.span, format!("`{keyword}` does not start its line"))
                        .expected("one statement per line"),
                );
            }
            self.next();
            let named = self.peek_word().map(str::to_owned);
            let before = self.faults.len();
            if self
                .statement(&keyword, token.span, &mut per, &mut part)
                .is_err()
            {
                let read = token.span.start..=self.peek().span.start;
                if self.unread.iter().any(|at| read.contains(at)) {
                    self.faults.truncate(before);
                }
                if !["part", "law", "per", "band", "step", "hold"].contains(&keyword.as_str()) {
                    part.broken.extend(named);
                }
                self.recover();
            }
        }
        part
    }

    fn statement(
        &mut self,
        keyword: &str,
        start: Span,
        per: &mut Option<Ident>,
        part: &mut Part,
    ) -> Parsed<()> {
        let what = match keyword {
            "part" => {
                if !part.title.is_empty() {
                    self.twice(start, "part", "instrument");
                }
                part.title_span = self.peek().span;
                part.title = self.text("the instrument's title as a text")?;
                self.word("dated")?;
                self.word("by")?;
                part.dated = Some(self.any_word("the name of a date of `pack.toml`")?);
                return Ok(());
            }
            "law" => {
                if !part.law.is_empty() {
                    self.twice(start, "law", "law");
                }
                part.law = self.text("the law's name as a text")?;
                return Ok(());
            }
            "per" => {
                *per = Some(self.any_word("a kind such as `household` or `adult`")?);
                return Ok(());
            }
            "band" | "step" => return self.band_or_step(keyword, start, part),
            "record" => {
                let name = self.name("a name for the kind of record")?;
                self.word("of")?;
                StatementKind::Record {
                    name,
                    owner: self.any_word("the kind that it belongs to")?,
                }
            }
            "choice" => {
                let name = self.name("a name for the choice")?;
                self.sign('=')?;
                let mut words = vec![self.any_word("a word to choose")?];
                while self.take_sign(',') {
                    words.push(self.any_word("a word to choose")?);
                }
                StatementKind::Choice { name, words }
            }
            "fact" => self.fact()?,
            "conversion" => self.conversion()?,
            "table" => {
                let name = self.name("a name for the table")?;
                self.word("by")?;
                let mut keys = vec![self.any_word("a choice or `count`")?];
                while self.take_sign(',') {
                    keys.push(self.any_word("a choice or `count`")?);
                }
                self.word("gives")?;
                StatementKind::Table {
                    name,
                    keys,
                    gives: self.type_name()?,
                }
            }
            "bands" => {
                let name = self.name("a name for the bands")?;
                self.word("of")?;
                StatementKind::Bands {
                    name,
                    of: self.type_name()?,
                    bands: Vec::new(),
                }
            }
            "scale" => {
                let name = self.name("a name for the scale")?;
                self.word("of")?;
                let of = self.type_name()?;
                self.word("gives")?;
                StatementKind::Scale {
                    name,
                    of,
                    gives: self.type_name()?,
                    steps: Vec::new(),
                }
            }
            "figure" => {
                let name = self.name("a name for the figure")?;
                self.sign(':')?;
                let ty = self.type_name()?;
                self.sign('=')?;
                let expr = self.expression()?;
                let law = if self.take_word("see") {
                    Some(self.text("a law reference as a text")?)
                } else {
                    None
                };
                StatementKind::Figure {
                    name,
                    ty,
                    expr,
                    law,
                }
            }
            "item" => self.item()?,
            "hold" => {
                self.word("where")?;
                let when = self.expression()?;
                self.word("because")?;
                StatementKind::Hold {
                    when,
                    because: self.text("the reason as a text")?,
                }
            }
            _ => {
                let name = self.name("a name for the note")?;
                self.word("where")?;
                StatementKind::Note {
                    name,
                    when: self.expression()?,
                }
            }
        };
        let end = self.previous_span();
        part.statements.push(Statement {
            per: per.clone(),
            what,
            span: start.to(end),
        });
        Ok(())
    }

    fn twice(&mut self, start: Span, keyword: &str, what: &str) {
        self.faults.push(
            Diagnostic::fault(start, format!("this file names its {what} already"))
                .expected(format!("one `{keyword}` in a file"))
                .hint("begin another file, and name it in `order.txt`"),
        );
    }

    fn fact(&mut self) -> Parsed<StatementKind> {
        let name = self.name("a name for the fact")?;
        self.word("of")?;
        let of = self.any_word("a kind such as `household` or `adult`")?;
        self.sign(':')?;
        let ty = self.type_name()?;
        let range = if self.at_word("from") {
            let start = self.next().span;
            let low = self.signed()?;
            self.word("to")?;
            let high = self.signed()?;
            Some((low, high, start))
        } else {
            None
        };
        let default = if self.take_word("required") {
            None
        } else if self.take_word("default") {
            Some(self.default()?)
        } else {
            return self.unexpected("`required` or `default`");
        };
        let settles = if self.take_word("settles") {
            self.word("to")?;
            Some(self.value()?)
        } else {
            None
        };
        self.word("ask")?;
        let ask = self.text("the question as a text")?;
        Ok(StatementKind::Fact(Box::new(FactStatement {
            name,
            of,
            ty,
            range,
            default,
            settles,
            ask,
        })))
    }

    /// A literal, which may be below zero, or a word of a choice.
    fn default(&mut self) -> Parsed<super::ast::Expr> {
        if !self.at_sign('-') {
            return self.value();
        }
        let start = self.next().span;
        let value = -self.number()?;
        let percent = self.take_sign('%');
        let kind = if percent {
            ExprKind::Percent(value / Fraction::whole(100))
        } else {
            ExprKind::Number(value)
        };
        let span = start.to(self.previous_span());
        self.made(kind, span)
    }

    fn conversion(&mut self) -> Parsed<StatementKind> {
        let name = self.name("a name for the conversion")?;
        self.word("from")?;
        let from = self.any_word("a period")?;
        self.word("to")?;
        let to = self.any_word("a period")?;
        self.word("times")?;
        let span = self.peek().span;
        let mut times = self.number()?;
        if self.take_sign('/') {
            let by = self.number()?;
            if by.is_zero() {
                self.faults.push(
                    Diagnostic::fault(span, "a conversion divides by nothing")
                        .expected("a number above zero"),
                );
                return Err(GaveUp);
            }
            times = times / by;
        }
        self.word("see")?;
        // The reference is for whoever reads the pack.
        self.text("a law reference as a text")?;
        Ok(StatementKind::Conversion {
            name,
            from,
            to,
            times,
        })
    }

    fn item(&mut self) -> Parsed<StatementKind> {
        let name = self.name("a name for the item")?;
        self.sign(':')?;
        let word = self.any_word("a kind of item")?;
        let Some(kind) = ItemKind::from_word(&word.text) else {
            let mut fault =
                Diagnostic::fault(word.span, format!("`{}` is not a kind of item", word.text))
                    .expected(format!("one of {}", ItemKind::WORDS.join(", ")));
            if let Some(near) = nearest(&word.text, ItemKind::WORDS) {
                fault = fault.hint(format!("did you mean `{near}`?"));
            }
            self.faults.push(fault);
            return Err(GaveUp);
        };
        self.sign('=')?;
        let expr = self.expression()?;
        let claimed = if self.take_word("claimed") {
            self.word("where")?;
            Some(self.expression()?)
        } else {
            None
        };
        let ends = self.peek().kind == TokenKind::End || self.peek().first;
        if !self.at_word("see") && !ends {
            return self.unexpected("`see \"…\"`");
        }
        if !self.at_word("see") {
            self.faults.push(
                Diagnostic::fault(
                    name.span,
                    format!("the item `{}` has no law reference", name.text),
                )
                .expected("`see \"…\"` at the end")
                .hint("name the section that it comes from"),
            );
            return Err(GaveUp);
        }
        self.next();
        let law = self.text("a law reference as a text")?;
        Ok(StatementKind::Item {
            name,
            kind,
            expr,
            claimed,
            law,
        })
    }

    /// `band` and `step` lines belong to the `bands` or `scale` right above them.
    fn band_or_step(&mut self, keyword: &str, start: Span, part: &mut Part) -> Parsed<()> {
        let value = self.sum_expression()?;
        let (mut limit, mut below) = (None, false);
        if self.take_word("up") {
            self.word("to")?;
            limit = Some(self.sum_expression()?);
        } else if keyword == "step" && self.take_word("below") {
            below = true;
            limit = Some(self.sum_expression()?);
        } else if !self.take_word("beyond") {
            return self.unexpected(if keyword == "band" {
                "`up to` or `beyond`"
            } else {
                "`up to`, `below` or `beyond`"
            });
        }
        match (keyword, part.statements.last_mut().map(|s| &mut s.what)) {
            ("band", Some(StatementKind::Bands { bands, .. })) => bands.push(Band {
                rate: value,
                up_to: limit,
                span: start,
            }),
            ("step", Some(StatementKind::Scale { steps, .. })) => {
                let limit = match (limit, below) {
                    (Some(limit), true) => StepLimit::Below(limit),
                    (Some(limit), false) => StepLimit::UpTo(limit),
                    (None, _) => StepLimit::Beyond,
                };
                steps.push(ScaleStep {
                    value,
                    limit,
                    span: start,
                });
            }
            _ => {
                let above = if keyword == "band" { "bands" } else { "scale" };
                self.faults.push(
                    Diagnostic::fault(start, format!("this `{keyword}` stands under no `{above}`"))
                        .expected(format!("a `{above}` statement above it")),
                );
            }
        }
        Ok(())
    }

    fn type_name(&mut self) -> Parsed<TypeName> {
        let word = self.any_word("a type")?;
        let period = if self.take_word("a") || self.take_word("an") {
            Some(self.any_word("a period")?)
        } else {
            None
        };
        Ok(TypeName { word, period })
    }
}
