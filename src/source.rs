//! Source texts and places in them. In: named texts. Out: spans, and the line and column of a span.
//! Reads no file. Imports only `index`.

use crate::index::{Id, IdVec};

/// One text with the name that messages show.
#[derive(Clone, Debug)]
pub struct SourceText {
    /// Name shown in messages, usually a path below the pack.
    pub name: String,
    /// The whole text.
    pub text: String,
}

/// The index of a text in [`Sources`].
pub type FileId = Id<SourceText>;

/// A place in a text, in bytes: from `start` up to, not including, `end`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Span {
    /// Which text.
    pub file: FileId,
    /// First byte.
    pub start: u32,
    /// Byte after the last.
    pub end: u32,
}

impl Span {
    /// The span from the start of this one to the end of the other, in one file.
    pub fn to(self, other: Span) -> Span {
        Span {
            file: self.file,
            start: self.start.min(other.start),
            end: self.end.max(other.end),
        }
    }
}

/// All texts of one reading.
#[derive(Clone, Debug, Default)]
pub struct Sources {
    texts: IdVec<SourceText>,
}

impl Sources {
    /// No texts yet.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a text under the name that messages will show.
    pub fn add(&mut self, name: impl Into<String>, text: impl Into<String>) -> FileId {
        self.texts.push(SourceText {
            name: name.into(),
            text: text.into(),
        })
    }

    /// The text with this index.
    pub fn get(&self, file: FileId) -> &SourceText {
        &self.texts[file]
    }

    /// All texts with their indices.
    pub fn iter(&self) -> impl Iterator<Item = (FileId, &SourceText)> {
        self.texts.iter_with_id()
    }

    /// The words that a span covers.
    pub fn slice(&self, span: Span) -> &str {
        &self.texts[span.file].text[span.start as usize..span.end as usize]
    }

    /// Line and column of a byte, both counted from 1; columns count characters.
    pub fn line_column(&self, file: FileId, byte: u32) -> (usize, usize) {
        let text = &self.texts[file].text;
        let before = &text[..byte as usize];
        let line = before.bytes().filter(|b| *b == b'\n').count() + 1;
        let start = before.rfind('\n').map_or(0, |at| at + 1);
        (line, before[start..].chars().count() + 1)
    }
}
