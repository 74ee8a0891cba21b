//! The tokens of rule text and its keywords.

use crate::num::Fraction;
use crate::source::Span;

/// One token.
#[derive(Clone, Debug)]
pub(super) struct Token {
    pub kind: TokenKind,
    pub span: Span,
    /// Whether it is the first of its line.
    pub first: bool,
}

#[derive(Clone, Debug, PartialEq)]
pub(super) enum TokenKind {
    Word(String),
    Number(Fraction),
    Day(i64),
    Text(String),
    Sign(char),
    End,
}

impl TokenKind {
    /// How a message names it.
    pub(super) fn shown(&self) -> String {
        match self {
            TokenKind::Word(word) => format!("`{word}`"),
            TokenKind::Number(value) => format!("the number {}", plain(*value)),
            TokenKind::Day(_) => "a day".to_owned(),
            TokenKind::Text(text) => format!("the text \"{text}\""),
            TokenKind::Sign(sign) => format!("`{sign}`"),
            TokenKind::End => "the end of the file".to_owned(),
        }
    }
}

fn plain(value: Fraction) -> String {
    let text = value.decimal(6);
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// The words that start a statement.
pub(super) const STATEMENTS: [&str; 16] = [
    "part",
    "law",
    "per",
    "record",
    "choice",
    "fact",
    "conversion",
    "table",
    "bands",
    "band",
    "scale",
    "step",
    "figure",
    "item",
    "hold",
    "note",
];

/// Words that cannot be names because the language uses them inside statements.
pub(super) const RESERVED: [&str; 45] = [
    "a",
    "above",
    "an",
    "and",
    "any",
    "as",
    "ask",
    "at",
    "because",
    "below",
    "beyond",
    "by",
    "charged",
    "claimed",
    "converted",
    "count",
    "dated",
    "default",
    "every",
    "failing",
    "first",
    "from",
    "give",
    "gives",
    "half",
    "if",
    "is",
    "larger",
    "limited",
    "missing",
    "money",
    "not",
    "of",
    "or",
    "otherwise",
    "over",
    "partner",
    "place",
    "placed",
    "raised",
    "required",
    "rounded",
    "settles",
    "where",
    "with",
];

/// Words that stand inside statements only where no name can stand, and yet are no names, so that text reads well.
const INSIDE: [&str; 15] = [
    "see", "smaller", "sum", "times", "to", "up", "down", "years", "yes", "no", "most", "least",
    "slope", "steps", "hours",
];

/// Whether a word may be the name of a figure, item, fact or record.
pub(super) fn can_name(word: &str) -> bool {
    !STATEMENTS.contains(&word) && !RESERVED.contains(&word) && !INSIDE.contains(&word)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_grammar_of_the_reference_has_every_word() {
        let reference = include_str!("../../rules/README.md");
        for word in STATEMENTS.iter().chain(&RESERVED).chain(&INSIDE) {
            assert!(
                reference.contains(&format!("\"{word}\"")),
                "`{word}` stands in no rule of the grammar"
            );
        }
    }
}
