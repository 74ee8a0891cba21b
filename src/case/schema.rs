//! Which kinds of record a list may hold and which facts each has. Built by `load` from a rule pack.

use serde::{Deserialize, Serialize};

/// Position of the household itself in [`Schema::kinds`].
pub const HOUSEHOLD: usize = 0;
/// Position of the adults of the unit (one or two) in [`Schema::kinds`].
pub const ADULT: usize = 1;
/// Position of the children in [`Schema::kinds`].
pub const CHILD: usize = 2;
/// Position of other adults at the address in [`Schema::kinds`].
pub const OTHER: usize = 3;
/// Position of jobs in [`Schema::kinds`]; a job belongs to an adult.
pub const JOB: usize = 4;

/// All kinds of record: the five above, then those that the pack declares.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Schema {
    /// The kinds, in the order of the constants of this module.
    pub kinds: Vec<KindSpec>,
}

/// One kind of record.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct KindSpec {
    /// `household`, `adult`, `child`, `other`, `job`, or the pack's own word (its file is `<name>s.csv`).
    pub name: String,
    /// The kind that a record of this kind belongs to (jobs: [`ADULT`]); none for the household.
    pub owner: Option<usize>,
    /// The facts, in the order of the pack. `birth` comes first for members, `hours` and `wage` for jobs.
    pub facts: Vec<FactSpec>,
}

/// One fact of a kind of record.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct FactSpec {
    /// Column or key name.
    pub name: String,
    /// What it may hold.
    pub ty: FactType,
    /// Least value allowed, in the scaled unit of the type.
    pub min: i64,
    /// Largest value allowed, in the scaled unit of the type.
    pub max: i64,
    /// Whether it may be left out.
    pub need: Need,
    /// The one-line question that asks for it.
    pub ask: String,
}

/// What a fact may hold. A value is kept as a whole number of the unit said here.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum FactType {
    /// Money; the word is the period (`month`), `hour` for a wage, empty for a sum. Unit: a ten-thousandth of the currency for
    /// money an hour, else a hundredth.
    Money(String),
    /// A rate. Written as a percentage; unit: a hundredth of a percent (5% is 500).
    Rate,
    /// Hours a week. Unit: a hundredth of an hour.
    Hours,
    /// A number with up to two decimals. Unit: a hundredth.
    Number,
    /// A whole number.
    Count,
    /// A day. Unit: days since 1970-01-01.
    Date,
    /// 1 for yes, 0 for no.
    YesNo,
    /// One of these words; the value is its position.
    Choice(Vec<String>),
}

impl FactType {
    /// How many units make one: 100 for money, 1 for a count.
    pub fn units(&self) -> i64 {
        match self {
            FactType::Money(period) if period == "hour" => 10_000,
            FactType::Rate => 10_000,
            FactType::Money(_) | FactType::Hours | FactType::Number => 100,
            FactType::Count | FactType::Date | FactType::YesNo | FactType::Choice(_) => 1,
        }
    }
}

/// Whether a fact may be left out of a list.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Need {
    /// Leaving it out is a fault.
    Required,
    /// Left out, it is this value, and the statement says that it was assumed.
    Default(i64),
}
