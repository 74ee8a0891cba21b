//! Rows as they were written, before anything is checked: what the readers of tables and of TOML texts hand to the checks.
//! Imports nothing outside `case`.

use super::fault::Place;
use super::layout::{Holds, Layout};
use super::problem::Problem;
use std::sync::Arc;

/// Who wrote a value, and so how it is read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Written {
    /// As text, in the form that the list declares.
    AsDeclared,
    /// As a number, day or truth value of TOML.
    AsToml,
    /// In a shape that cannot be read; that has been said.
    Unreadable,
}

/// The place of a value in a TOML text.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Spot {
    pub(super) line: usize,
    pub(super) column: usize,
    pub(super) written: Written,
}

/// Where a record stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Standing {
    /// A row of a table, and the columns that its header should have but has not; that has been said.
    Row { row: u64, absent: Arc<Vec<usize>> },
    /// A table of a TOML text: its own place, and the place of each value that it has.
    Toml { own: Spot, cells: Vec<Option<Spot>> },
}

/// One row: a cell for every column of the layout, trimmed, empty where nothing was written.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Record {
    pub(super) standing: Standing,
    pub(super) cells: Vec<String>,
    /// What the reader found wrong: the column of the layout or a name of its own, the value, the problem.
    pub(super) faults: Vec<(Place, String, Problem)>,
}

impl Record {
    /// The cell of a column.
    pub(super) fn cell(&self, column: usize) -> &str {
        &self.cells[column]
    }

    /// The place of a column, or of the record where the column was not written.
    pub(super) fn place(&self, layout: &Layout, column: usize) -> Place {
        let meant = &layout.columns[column];
        let name = meant.name.clone();
        match &self.standing {
            Standing::Row { row, .. } => Place::Cell {
                row: *row,
                column: name,
            },
            Standing::Toml { own, cells } => {
                let spot = cells[column].unwrap_or(*own);
                Place::Text {
                    line: spot.line,
                    column: spot.column,
                    key: if meant.holds == Holds::Household {
                        "reference".into()
                    } else {
                        name
                    },
                }
            }
        }
    }

    /// The place of the whole record.
    pub(super) fn whole(&self) -> Place {
        match &self.standing {
            Standing::Row { row, .. } => Place::Row(*row),
            Standing::Toml { own, .. } => Place::Text {
                line: own.line,
                column: own.column,
                key: String::new(),
            },
        }
    }

    /// The row or line, in words.
    pub(super) fn row_words(&self) -> String {
        match &self.standing {
            Standing::Row { row, .. } => format!("row {row}"),
            Standing::Toml { own, .. } => format!("line {}", own.line),
        }
    }

    /// The row; 0 in a TOML text.
    pub(super) fn row(&self) -> u64 {
        match &self.standing {
            Standing::Row { row, .. } => *row,
            Standing::Toml { .. } => 0,
        }
    }

    /// How the value of a column is written.
    pub(super) fn written(&self, column: usize) -> Written {
        match &self.standing {
            Standing::Row { absent, .. } if absent.contains(&column) => Written::Unreadable,
            Standing::Row { .. } => Written::AsDeclared,
            Standing::Toml { cells, .. } => {
                cells[column].map_or(Written::AsDeclared, |spot| spot.written)
            }
        }
    }
}

/// All rows of one household.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Draft {
    /// The row in the table of households.
    pub(super) household: Record,
    /// The rows of the other tables, by the position of their layout; the first entry stays empty.
    pub(super) rows: Vec<Vec<Record>>,
    /// Rows of the households that share this one's reference; empty where it is alone.
    pub(super) shared: Vec<u64>,
}
