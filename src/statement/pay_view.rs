//! What a payroll page says, as plain values. Templates see exactly this.

use super::view::{Answer, Column, Line, Part, Particular, Row};
use serde::Serialize;

/// Everything that the template of the payroll page gets: one employee.
#[derive(Clone, Debug, Serialize)]
pub struct PayView {
    /// Language tag.
    pub language: String,
    /// `a4` or `us-letter`.
    pub paper: String,
    /// Size of print in points.
    pub print_size: u8,
    /// 1 where lines stand closer, because the page would not hold them otherwise; else 0.
    pub close: u8,
    /// Title of the document.
    pub title: String,
    /// Statement number, on every page.
    pub number: String,
    /// Name of the office; may be empty.
    pub office: String,
    /// Whose page it is: a name, else the reference.
    pub whose: String,
    /// Number, days, place and rules.
    pub particulars: Vec<Particular>,
    /// What reaches the person, one answer a step.
    pub answers: Vec<Answer>,
    /// The tables: one a step, in large print one a period.
    pub tables: Vec<PayTable>,
    /// How the sums for a pay period come about, where it is not the statement's; may be empty.
    pub period_note: String,
    /// What the star means; may be empty.
    pub star_note: String,
    /// Heading of the facts.
    pub facts_heading: String,
    /// Pay frequency, contribution category, pension and the like.
    pub facts: Vec<PayFact>,
    /// What stands below the facts; may be empty.
    pub facts_notes: Vec<String>,
    /// Heading of the purposes.
    pub purposes_heading: String,
    /// What each deduction is for; empty for none.
    pub purposes: Vec<Line>,
    /// The parts below, in order.
    pub parts: Vec<Part>,
    /// Changed amounts of a what-if with the reasons; empty for none.
    pub what_if: Vec<String>,
    /// That it is an estimate and may differ from a payslip by pence.
    pub estimate: Vec<String>,
    /// What defers to the offices and advisers.
    pub caution: String,
}

/// A fact of the job.
#[derive(Clone, Debug, Serialize)]
pub struct PayFact {
    /// What it is.
    pub name: String,
    /// Its value.
    pub value: String,
    /// 1 where it needs more than half the width of the page, else 0.
    pub wide: u8,
}

/// Gross pay, what comes off, and what reaches the person.
#[derive(Clone, Debug, Serialize)]
pub struct PayTable {
    /// What the table is, for readers who do not see it.
    pub summary: String,
    /// Groups of columns: a pay period, a year.
    pub groups: Vec<PayGroup>,
    /// Rows in order; each total is the sum of all plain rows above it.
    pub rows: Vec<Row>,
}

/// Columns of one period.
#[derive(Clone, Debug, Serialize)]
pub struct PayGroup {
    /// `A month`, `A year`.
    pub name: String,
    /// Today, the step, the change.
    pub columns: Vec<Column>,
}
