//! What a worker does with one household, and what comes back. Plain data that crosses between processes.

use crate::case::Household;
use serde::{Deserialize, Serialize};

/// What a worker does with one household.
pub trait Assessor {
    /// Works one household out and typesets its statements. Must not depend on the households before it.
    fn assess(&mut self, household: &Household) -> Outcome;
}

/// What became of one household.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Outcome {
    /// Worked out, and typeset where statements were asked for.
    Printed(Box<Product>),
    /// Not printed on purpose.
    Held {
        /// Why, one sentence each.
        reasons: Vec<String>,
    },
    /// Could not be worked out or typeset.
    Failed {
        /// Why; carries no name.
        cause: String,
    },
}

/// Everything that is written for a printed household.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Product {
    /// Rows of `results.csv`, from [`results`](super::results).
    pub results: super::Table,
    /// Rows of `turning_points.csv`, from [`turning_points`](super::turning_points).
    pub turns: super::Table,
    /// The statements; empty where none were asked for.
    pub statements: Vec<StatementFile>,
    /// Kinks on all its lines.
    pub kinks: u64,
    /// Cliffs on all its lines.
    pub cliffs: u64,
}

/// One finished statement.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct StatementFile {
    /// Kind of statement: the name of its template folder.
    pub kind: String,
    /// Which of several, such as a partner's or a language; empty for the only one.
    pub variant: String,
    /// Pages, where the typesetter says.
    pub pages: Option<u32>,
    /// The whole file.
    #[serde(with = "super::frame::bytes")]
    pub pdf: Vec<u8>,
}

impl StatementFile {
    /// The file name below its folder: `<reference>.<kind>[.<variant>].pdf`.
    pub fn file_name(&self, reference: &str) -> String {
        if self.variant.is_empty() {
            format!("{reference}.{}.pdf", self.kind)
        } else {
            format!("{reference}.{}.{}.pdf", self.kind, self.variant)
        }
    }
}

/// The number that a household's statement carries: the run's id with the reference.
pub fn statement_number(run_id: &str, reference: &str) -> String {
    format!("{run_id}-{reference}")
}

/// One entry of a case list, in list order.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Entry {
    /// A household that can be worked out.
    Household(Box<Household>),
    /// A household with faults.
    Rejected(Reject),
    /// Faults that belong to no household of the list, such as a member of an unknown household.
    Stray(Vec<FaultRow>),
}

/// A household that could not be read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Reject {
    /// Its reference as written; may be empty or faulty.
    pub reference: String,
    /// Every fault found.
    pub faults: Vec<FaultRow>,
}

/// One fault of a case list, as `rejects.csv` shows it.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct FaultRow {
    /// File of the list.
    pub file: String,
    /// Row counted from 1 with the header; 0 where no row is meant.
    pub row: u64,
    /// Column or key; may be empty.
    pub column: String,
    /// The value as written; may be empty.
    pub value: String,
    /// What is wrong.
    pub message: String,
    /// What was expected; may be empty.
    pub expected: String,
}
