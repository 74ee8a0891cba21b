//! The measures of an assessed household: points, turning points, traps, rates, targets.
//!
//! In: grid and walk of the engine. Out: [`Assessment`]. Knows no file, text or layout.
//! Imports `engine`, `num` (and `program` types through `engine`).

mod types;

pub use types::*;
