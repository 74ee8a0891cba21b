//! The measures of an assessed household: points, turning points, traps, rates, targets.
//!
//! In: a household and programs for its shape. Out: [`Assessment`], or the reasons to hold the household.
//! Knows no file, text or layout. Imports `engine`, `case` and `num`, and program types through `engine`.

mod assess;
mod couple;
mod line;
mod points;
mod settled;
mod split;
mod traps;
mod turns;
mod types;

pub use assess::{Evidence, Programs, Request, Verdict, WorkedPoint, assess, working_at};
pub use points::participation_rate;
pub use types::*;
