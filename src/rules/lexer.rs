//! Rule text to tokens. In: one text. Out: tokens with spans and every fault of spelling.

use super::token::{Token, TokenKind};
use crate::diag::Diagnostic;
use crate::num::Fraction;
use crate::source::{FileId, Span};

/// All tokens of a text, the last of them [`TokenKind::End`].
pub(super) fn tokens(file: FileId, text: &str, faults: &mut Vec<Diagnostic>) -> Vec<Token> {
    Lexer {
        file,
        text,
        at: 0,
        line_start: true,
        out: Vec::new(),
    }
    .run(faults)
}

struct Lexer<'a> {
    file: FileId,
    text: &'a str,
    at: usize,
    line_start: bool,
    out: Vec<Token>,
}

impl Lexer<'_> {
    fn run(mut self, faults: &mut Vec<Diagnostic>) -> Vec<Token> {
        while let Some(c) = self.peek() {
            let start = self.at;
            match c {
                '\n' => {
                    self.at += 1;
                    self.line_start = true;
                }
                c if c.is_whitespace() || c == '\u{feff}' => self.at += c.len_utf8(),
                '#' => self.skip_while(|c| c != '\n'),
                'a'..='z' | 'A'..='Z' => self.word(start, faults),
                '0'..='9' => self.number(start, faults),
                '"' => self.text_literal(start, faults),
                '+' | '-' | '*' | '/' | '(' | ')' | '[' | ']' | ',' | ':' | '=' | '%' => {
                    self.at += 1;
                    self.push(TokenKind::Sign(c), start);
                }
                other => {
                    self.at += other.len_utf8();
                    faults.push(
                        Diagnostic::fault(self.span(start), format!("`{}` is not a sign of the language", other.escape_debug()))
                            .expected("a word in lower case, a number, a text or one of + - * / ( ) [ ] , : = %"),
                    );
                }
            }
        }
        let end = self.at;
        self.push(TokenKind::End, end);
        self.out
    }

    fn peek(&self) -> Option<char> {
        self.text[self.at..].chars().next()
    }

    fn span(&self, start: usize) -> Span {
        Span {
            file: self.file,
            start: start as u32,
            end: self.at as u32,
        }
    }

    fn push(&mut self, kind: TokenKind, start: usize) {
        let first = std::mem::replace(&mut self.line_start, false);
        self.out.push(Token {
            kind,
            span: self.span(start),
            first,
        });
    }

    fn skip_while(&mut self, keep: impl Fn(char) -> bool) {
        while let Some(c) = self.peek() {
            if !keep(c) {
                break;
            }
            self.at += c.len_utf8();
        }
    }

    fn word(&mut self, start: usize, faults: &mut Vec<Diagnostic>) {
        self.skip_while(|c| c.is_ascii_alphanumeric() || c == '_');
        let word = &self.text[start..self.at];
        let lower = word.to_ascii_lowercase();
        if lower != word {
            let fault = Diagnostic::fault(self.span(start), format!("`{word}` has capitals"))
                .expected("lower case letters, digits and `_`");
            faults.push(fault.hint(format!("write `{lower}`")));
        }
        self.push(TokenKind::Word(lower), start);
    }

    /// A number (`12570`, `0.55`) or a day (`2026-04-06`).
    fn number(&mut self, start: usize, faults: &mut Vec<Diagnostic>) {
        self.skip_while(|c| c.is_ascii_digit());
        let rest = &self.text.as_bytes()[self.at..];
        if self.at - start == 4
            && rest.first() == Some(&b'-')
            && rest.get(1).is_some_and(u8::is_ascii_digit)
        {
            self.skip_while(|c| c.is_ascii_digit() || c == '-');
            let words = &self.text[start..self.at];
            match super::amounts::day(words) {
                Some(day) => self.push(TokenKind::Day(day), start),
                None => {
                    faults.push(
                        Diagnostic::fault(self.span(start), format!("`{words}` is not a day"))
                            .expected("a day as year-month-day, such as 2026-04-06, or a blank before a minus"),
                    );
                    self.push(TokenKind::Day(0), start);
                }
            }
            return;
        }
        if rest.first() == Some(&b'.') && rest.get(1).is_some_and(u8::is_ascii_digit) {
            self.at += 1;
            self.skip_while(|c| c.is_ascii_digit());
        }
        let words = &self.text[start..self.at];
        match super::amounts::decimal(words) {
            Some(value) => self.push(TokenKind::Number(value), start),
            None => {
                faults.push(
                    Diagnostic::fault(self.span(start), format!("`{words}` is too long"))
                        .expected("a number of at most 18 digits"),
                );
                self.push(TokenKind::Number(Fraction::ONE), start);
            }
        }
    }

    fn text_literal(&mut self, start: usize, faults: &mut Vec<Diagnostic>) {
        self.at += 1;
        self.skip_while(|c| c != '"' && c != '\n');
        let inside = self.text[start + 1..self.at].to_owned();
        if self.peek() == Some('"') {
            self.at += 1;
        } else {
            faults.push(
                Diagnostic::fault(self.span(start), "this text is not closed")
                    .expected("a `\"` on the same line"),
            );
        }
        self.push(TokenKind::Text(inside), start);
    }
}
