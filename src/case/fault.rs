//! A fault of a list: where, whose, what was written and what is wrong with it. Holds no wording. Imports nothing outside `case`.

use super::problem::Problem;
use std::fmt;

/// Where a fault is in its file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Place {
    /// The whole file.
    File,
    /// A row, counted as a spreadsheet counts: the header is row 1, blank rows count, a line break inside a cell does not.
    Row(u64),
    /// One cell of a table.
    Cell {
        /// Row, counted as in [`Place::Row`].
        row: u64,
        /// Name of the column.
        column: String,
    },
    /// A column of the header.
    Column(String),
    /// A place in a TOML text, both counted from 1; columns count characters.
    Text {
        /// Line.
        line: usize,
        /// Character in the line.
        column: usize,
        /// The key that is meant; may be empty.
        key: String,
    },
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Place::File => Ok(()),
            Place::Row(row) => write!(f, "row {row}"),
            Place::Cell { row, column } => write!(f, "row {row}, column {column}"),
            Place::Column(column) => write!(f, "column {column}"),
            Place::Text { line, column, key } => {
                write!(f, "line {line}, column {column}")?;
                if key.is_empty() {
                    Ok(())
                } else {
                    write!(f, ", key {key}")
                }
            }
        }
    }
}

/// One fault of a list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fault {
    /// Name of the file, as given.
    pub file: String,
    /// Where in it.
    pub place: Place,
    /// Reference of the household as written; empty for a fault of the whole list.
    pub reference: String,
    /// What was written there; empty where nothing was.
    pub value: String,
    /// What is wrong.
    pub problem: Problem,
}

impl Fault {
    /// A fault of a whole file.
    pub fn of_file(file: &str, problem: Problem) -> Fault {
        Fault {
            file: file.into(),
            place: Place::File,
            reference: String::new(),
            value: String::new(),
            problem,
        }
    }

    /// The row or line; 0 for a whole file or column.
    pub fn row(&self) -> u64 {
        match &self.place {
            Place::Row(row) | Place::Cell { row, .. } => *row,
            Place::Text { line, .. } => *line as u64,
            Place::File | Place::Column(_) => 0,
        }
    }

    /// The column of a table or the key of a TOML text; may be empty.
    pub fn column(&self) -> &str {
        match &self.place {
            Place::Cell { column, .. } | Place::Column(column) => column,
            Place::Text { key, .. } => key,
            Place::File | Place::Row(_) => "",
        }
    }

    /// What was found, what was expected and what to do, without the place.
    pub fn message(&self) -> String {
        let mut out = self.problem.found(&self.value);
        out.push_str("; expected ");
        out.push_str(&self.problem.expected());
        let hint = self.problem.hint();
        if !hint.is_empty() {
            out.push_str("; ");
            out.push_str(&hint);
        }
        out
    }
}

impl fmt::Display for Fault {
    /// One line: `members.csv row 7, column birth: found …; expected …`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.file)?;
        if self.place != Place::File {
            write!(f, " {}", self.place)?;
        }
        write!(f, ": {}", self.message())
    }
}

/// A household that cannot be used, with every fault that was found in it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct RejectedHousehold {
    /// Reference as written; may be malformed or empty.
    pub reference: String,
    /// Row of the household in its file; 0 where rows of other tables name a household that the list does not have, and
    /// for a single household.
    pub row: u64,
    /// Every fault, at least one.
    pub faults: Vec<Fault>,
}
