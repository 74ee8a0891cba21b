//! What became of every household: the counts, and whether they balance.

use super::Error;
use serde::Serialize;

/// Counts of a run. A household is printed, held or rejected; the failed ones are among the rejected.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize)]
pub struct Ledger {
    /// Households counted in the list before the run.
    pub households: u64,
    /// Households worked out (and printed, where statements were asked for).
    pub printed: u64,
    /// Households held back on purpose.
    pub held: u64,
    /// Households that could not be read or worked out.
    pub rejected: u64,
    /// Those of the rejected that were read but could not be worked out or typeset.
    pub failed: u64,
    /// Faults of the list that belong to none of its households.
    pub stray_faults: u64,
    /// Statements written: apart from the balance, because a household can have several or none.
    pub pieces: u64,
    /// Pages of all statements, where the typesetter says.
    pub pages: u64,
    /// Rows of `results.csv`.
    pub result_rows: u64,
    /// Rows of `turning_points.csv`.
    pub turning_point_rows: u64,
    /// Kinks found.
    pub kinks: u64,
    /// Cliffs found.
    pub cliffs: u64,
}

impl Ledger {
    /// Whether households in = printed + held + rejected.
    pub fn balances(&self) -> bool {
        self.households == self.printed + self.held + self.rejected
    }

    /// Refuses a run that does not balance.
    pub(super) fn check(&self) -> Result<(), Error> {
        if self.balances() {
            return Ok(());
        }
        Err(Error::Unbalanced {
            expected: self.households,
            printed: self.printed,
            held: self.held,
            rejected: self.rejected,
        })
    }
}
