//! Case lists: text in, checked households out, every fault at once.
//!
//! In: the texts of a list (CSV tables or one TOML household) and a [`Schema`] that says which facts
//! exist. Out: [`Household`]s with how each fact is known, and [`Fault`]s with file, row, column,
//! value and what was expected. Refuses to guess: a value is given, defaulted by the schema, or a fault.
//! Knows no rule and reads no file. Imports `source`, `diag`, `num`.

mod bytes;
mod check;
mod fault;
mod form;
mod format;
mod gather;
mod household;
mod layout;
mod list;
mod problem;
mod record;
mod schema;
mod settings;
mod single;
mod table;
mod toml_text;

pub use bytes::{digest, from_bytes, to_bytes};
pub use fault::{Fault, Place, RejectedHousehold};
pub use form::form;
pub use format::{DateForm, Decimals, Format, day_of, days_since_1970, write_value};
pub use household::{Delivery, Household, Instance, JobRole, Known};
pub use layout::RESERVED;
pub use list::{ListReader, Needed, ReadOptions, Reading, Stop, tables_of};
pub use problem::Problem;
pub use schema::{ADULT, CHILD, FactSpec, FactType, HOUSEHOLD, JOB, KindSpec, Need, OTHER, Schema};
pub use settings::{ChangedAmount, Delimiter, GridSettings, ListLanguage, ListSettings};
pub use single::read_single;
pub use table::{Table, sort_table};
