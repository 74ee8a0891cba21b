//! The kinds of statement: who each is for, what it is called, and its template.

use serde::{Deserialize, Serialize};

/// A kind of statement.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub enum Kind {
    /// The letter to the household.
    Client,
    /// One page an employee on pay and what comes off it.
    Payroll,
    /// The file copy, from which a second person can work every figure out again.
    Caseworker,
}

impl Kind {
    /// All kinds, the client's first.
    pub const ALL: [Kind; 3] = [Kind::Client, Kind::Payroll, Kind::Caseworker];

    /// Its word: in commands, in file names, and the folder of its templates.
    pub fn word(self) -> &'static str {
        match self {
            Kind::Client => "client",
            Kind::Payroll => "payroll",
            Kind::Caseworker => "caseworker",
        }
    }

    /// The kind with this word.
    pub fn from_word(word: &str) -> Option<Kind> {
        Kind::ALL.into_iter().find(|kind| kind.word() == word)
    }

    /// Its template in a set.
    pub const fn template(self) -> &'static str {
        match self {
            Kind::Client => "client/letter.typ",
            Kind::Payroll => "payroll/page.typ",
            Kind::Caseworker => "caseworker/copy.typ",
        }
    }
}
