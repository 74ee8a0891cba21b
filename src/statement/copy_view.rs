//! What a file copy says, as plain values. Templates see exactly this.

use super::view::{Line, Part, Particular};
use serde::Serialize;

/// Everything that the template of the file copy gets.
#[derive(Clone, Debug, Serialize)]
pub struct CopyView {
    /// Language tag.
    pub language: String,
    /// `a4` or `us-letter`.
    pub paper: String,
    /// Size of print in points.
    pub print_size: u8,
    /// Title of the document.
    pub title: String,
    /// Statement number, on every page.
    pub number: String,
    /// What stands at the head of every page: the reference, and that it is the file copy.
    pub running: String,
    /// Name of the office; may be empty.
    pub office: String,
    /// Whose copy it is: reference and names.
    pub whose: String,
    /// Number, days, place and rules.
    pub particulars: Vec<Particular>,
    /// What the copy is for and how it is read.
    pub intro: Vec<String>,
    /// That this copy shows what the letter folds or leaves out; may be empty.
    pub guard: String,
    /// What defers to the offices and advisers.
    pub caution: String,
    /// Changed amounts of a what-if with the reasons; empty for none.
    pub what_if: Vec<String>,
    /// What is due and not claimed, and the pack's notes; at most one part.
    pub notes: Vec<Part>,
    /// Room for the reviewer.
    pub sign: SignOff,
    /// The sections in order.
    pub sections: Vec<CopySection>,
}

/// Room for a second person's sign-off.
#[derive(Clone, Debug, Serialize)]
pub struct SignOff {
    /// The heading.
    pub heading: String,
    /// What the table is, for readers who do not see it.
    pub summary: String,
    /// Heads of its three columns: what is checked, done, remarks.
    pub heads: Vec<String>,
    /// What is to be checked.
    pub checks: Vec<String>,
    /// Name, date, signature: what stands before each line.
    pub fields: Vec<String>,
}

/// A section of the copy.
#[derive(Clone, Debug, Serialize)]
pub struct CopySection {
    /// The heading.
    pub heading: String,
    /// Its parts.
    pub parts: Vec<CopyPart>,
}

/// Lines and tables under one heading.
#[derive(Clone, Debug, Serialize)]
pub struct CopyPart {
    /// The heading; may be empty.
    pub heading: String,
    /// What stands before the tables.
    pub lines: Vec<Line>,
    /// The tables: several where one would be too wide.
    pub tables: Vec<LongTable>,
}

/// A table that may cross pages; its head is repeated.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct LongTable {
    /// What the table is, for readers who do not see it.
    pub summary: String,
    /// Its columns; the first names the row.
    pub columns: Vec<Head>,
    /// Its rows.
    pub rows: Vec<LongRow>,
}

/// Head of a column.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Head {
    /// What the column holds.
    pub name: String,
    /// 1 where its cells stand at the right, as figures do; else 0.
    pub right: u8,
    /// Width in hundredths of a point; 0 takes what is left.
    pub width: u32,
}

/// A row.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct LongRow {
    /// How it is set.
    pub weight: LongWeight,
    /// Its cells; one alone in a group's row.
    pub cells: Vec<String>,
    /// What stands below its cells, over the width of all but the first column.
    pub under: Vec<Line>,
}

/// How a row is set.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum LongWeight {
    /// An ordinary row.
    Plain,
    /// A total of rows above.
    Total,
    /// The name of the group of rows that follow.
    Group,
    /// A row that is looked for first, such as the job's own hours: bold.
    Marked,
    /// A numbered figure of the working: its name is bold.
    Worked,
}

impl LongRow {
    /// An ordinary row.
    pub(super) fn plain(cells: Vec<String>) -> LongRow {
        LongRow {
            weight: LongWeight::Plain,
            cells,
            under: vec![],
        }
    }

    /// A total.
    pub(super) fn total(cells: Vec<String>) -> LongRow {
        LongRow {
            weight: LongWeight::Total,
            ..LongRow::plain(cells)
        }
    }

    /// A row that is looked for first.
    pub(super) fn marked(cells: Vec<String>) -> LongRow {
        LongRow {
            weight: LongWeight::Marked,
            ..LongRow::plain(cells)
        }
    }

    /// The name of a group.
    pub(super) fn group(name: String) -> LongRow {
        LongRow {
            weight: LongWeight::Group,
            ..LongRow::plain(vec![name])
        }
    }
}
