//! Case lists: text in, checked households out, every fault at once.
//!
//! In: the texts of a list (CSV tables or one TOML household) and a [`Schema`] that says which facts
//! exist. Out: [`Household`]s with how each fact is known, and [`Fault`]s with file, row, column,
//! value and what was expected. Refuses to guess: a value is given, defaulted by the schema, or a fault.
//! Knows no rule and reads no file. Imports `source`, `diag`, `num`.

mod household;
mod schema;

pub use household::{Delivery, Household, Instance, JobRole, Known};
pub use schema::{ADULT, CHILD, FactSpec, FactType, HOUSEHOLD, JOB, KindSpec, Need, OTHER, Schema};
