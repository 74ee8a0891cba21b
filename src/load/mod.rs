//! The only reader of the disk: rule packs, case lists, templates and office files, each with its SHA-256.
//!
//! In: paths. Out: texts in memory and readers over tables. Refuses what is not there, is not UTF-8 or
//! lacks what it must hold. Imports `rules`, `case`, `diag`, `source`.

mod error;

pub use error::Error;
