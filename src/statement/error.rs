//! What can go wrong between a view and its bytes.

/// Why a statement could not be made.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum StatementError {
    /// A template cannot be read or filled.
    #[error("template `{template}`, line {line}: {message}")]
    Template {
        /// Name in the template set.
        template: String,
        /// Line in it, counted from 1; 0 where none is known.
        line: usize,
        /// What was found.
        message: String,
    },
    /// The filled template is not valid Typst, or does not typeset.
    #[error("typesetting failed: {}", .messages.join("; "))]
    Typesetting {
        /// One message a fault, with file and line where known.
        messages: Vec<String>,
    },
    /// A text holds a character that the shipped fonts cannot set: the household is held.
    #[error(
        "`{field}` has the character {}, found U+{:04X}, which the shipped fonts cannot set",
        shown(*.character),
        u32::from(*.character)
    )]
    Glyph {
        /// Where in the view: `address[1]`, `facts[0].text`.
        field: String,
        /// The character.
        character: char,
    },
    /// A text is too long for its place on the sheet: the household is held.
    #[error("`{field}` needs {found}, expected {expected}")]
    Room {
        /// Where in the view: `address`, `address[2]`.
        field: String,
        /// What it would take up.
        found: String,
        /// What there is.
        expected: String,
    },
    /// A text file is faulty or lacks a key.
    #[error("texts `{language}`: {message}")]
    Texts {
        /// Language of the file.
        language: String,
        /// What was found.
        message: String,
    },
    /// The pack has no label in the letter's language: the household is held.
    #[error(
        "the rules have no label `{key}` in `{language}`, expected a row of `labels.{language}.csv`"
    )]
    Label {
        /// Language of the letter.
        language: String,
        /// Key of the label.
        key: String,
    },
    /// The letter needs more pages than it may have.
    #[error("the letter has {pages} pages, found more than {limit}")]
    TooLong {
        /// Pages that it would have.
        pages: usize,
        /// Pages that it may have.
        limit: usize,
    },
}

/// A character as it can be shown: itself, or nothing where it has no shape.
fn shown(character: char) -> String {
    if character.is_control() || super::fonts::is_invisible(character) {
        "without a shape".to_owned()
    } else {
        format!("`{character}`")
    }
}
