//! What can go wrong with a file that should be read.

use crate::case::Fault;
use std::io;
use std::path::{Path, PathBuf};

/// Why a file or folder could not be used.
#[derive(Debug, thiserror::Error)]
pub enum Error {
    /// The system refused.
    #[error("`{path}` cannot be read: {cause}")]
    Read {
        /// The file or folder.
        path: PathBuf,
        /// What the system said.
        cause: io::Error,
    },
    /// It is not UTF-8.
    #[error("`{path}` is not UTF-8 text: byte {at} cannot be read; save it as UTF-8")]
    NotText {
        /// The file.
        path: PathBuf,
        /// Position of the first bad byte, from 0.
        at: usize,
    },
    /// It lacks what it should hold.
    #[error("`{path}` {what}")]
    Unfit {
        /// The file or folder.
        path: PathBuf,
        /// What is wrong, with what was expected.
        what: String,
    },
    /// No pack, neither built in nor a folder.
    #[error("no rule pack `{name}` is built in and no such folder exists; built in: {known}")]
    NoPack {
        /// What was asked for.
        name: String,
        /// The packs that are built in.
        known: String,
    },
    /// A list, or its settings, with faults.
    #[error("{}", lines(.0))]
    Faults(Vec<Fault>),
    /// A rule pack or a list's terms with faults, ready to be printed.
    #[error("{}", .0.join("\n"))]
    Findings(Vec<String>),
    /// A table that is not in the order of its households.
    #[error(
        "`{file}` row {row}: found `{reference}` after a later reference, expected rows in the order of `household`"
    )]
    Unsorted {
        /// The table.
        file: String,
        /// The first row that comes too late.
        row: u64,
        /// Its household.
        reference: String,
    },
    /// A sorted copy could not be written.
    #[error("`{path}` cannot be written: {cause}")]
    Sort {
        /// The copy.
        path: PathBuf,
        /// What the system said.
        cause: io::Error,
    },
}

impl Error {
    /// What the system said about a path.
    pub(super) fn read(path: &Path, cause: io::Error) -> Error {
        Error::Read {
            path: path.to_owned(),
            cause,
        }
    }

    /// What is wrong with what a path holds.
    pub(super) fn unfit(path: &Path, what: impl Into<String>) -> Error {
        Error::Unfit {
            path: path.to_owned(),
            what: what.into(),
        }
    }
}

/// One line a fault.
fn lines(faults: &[Fault]) -> String {
    let lines: Vec<String> = faults.iter().map(ToString::to_string).collect();
    lines.join("\n")
}
