//! One household as read from a list.

use crate::num::Money;
use serde::{Deserialize, Serialize};

/// How a fact is known.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Known {
    /// Evidence was checked.
    Seen,
    /// The client said so; also where the list does not say.
    Told,
    /// Left out of the list: the pack's default.
    Assumed,
}

/// What a job is in the list.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum JobRole {
    /// The job that is varied: one per adult; a blank one with no hours where the adult has none.
    Today,
    /// A further job that the adult keeps beside it.
    Further,
    /// A job that could be taken in place of today's.
    Offer,
}

/// One record: the household itself, a member, a job or a record that the pack declares.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Instance {
    /// A member's name for the letter, an offer's words; may be empty.
    pub label: String,
    /// The member's, job's or record's own reference in the list; may be empty for records.
    pub reference: String,
    /// Position of the owner among the instances of the owning kind; 0 where the household owns it.
    pub owner: usize,
    /// Values in the order of the kind's facts, in the unit of each fact's type.
    pub values: Vec<i64>,
    /// How each value is known.
    pub known: Vec<Known>,
}

/// How the statement reaches its reader.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Delivery {
    /// The lines of the name and address; empty where none was given.
    pub address: Vec<String>,
    /// Language of the statement, a BCP 47 tag such as `en`.
    pub language: String,
    /// Paper: `a4` or `us-letter`.
    pub paper: String,
    /// Size of print in points: 12, 16, 18 or 20.
    pub print_size: u8,
    /// Reference of the one member whose statement it is, or empty for all.
    pub only: String,
    /// Items to fold together for safety, by name; empty for none.
    pub fold: Vec<String>,
    /// Why the statement is to be held back; empty where it is not.
    pub hold: String,
}

/// One household as read: facts checked against the schema, nothing worked out yet.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Household {
    /// `[A-Za-z0-9_-]{1,40}`; the file name and the word in logs.
    pub reference: String,
    /// How the statement reaches its reader.
    pub delivery: Delivery,
    /// The net income in the statement period that the household must have, if it names one.
    pub target: Option<Money>,
    /// Instances by kind (the positions of [`Schema::kinds`](super::Schema)). Jobs here are today's and further ones, ordered by
    /// adult, today's first: each adult has exactly one job with the role `Today`.
    pub instances: Vec<Vec<Instance>>,
    /// The role of each job in `instances[JOB]`.
    pub job_roles: Vec<JobRole>,
    /// Jobs on offer; `owner` is the adult. They are not among the instances. One without a reference in the list is given `offer-1` and
    /// so on.
    pub offers: Vec<Instance>,
    /// Row of the household in its file, counted from 1 with the header; 0 for a single household.
    pub row: u64,
}
