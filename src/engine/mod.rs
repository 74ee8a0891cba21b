//! The engine: a program and a household in; points, the walk along the budget line and workings out.
//!
//! In: a flat [`Program`](crate::program::Program) and the facts of a household. Out: exact values of
//! every item at any hours, the pieces and bends of the budget line, and the working of a point. Refuses nothing: a
//! checked program always has a result. Knows no rule text and no file. Imports `program`, `case`, `num`.

mod curve;
mod exact;
mod lanes;
mod machine;
mod setting;
mod used;
mod walk;
mod working;

pub use crate::program::ItemKind;
pub use curve::Curve;
pub use machine::{Machine, Points, Special, Standing};
pub use setting::{JobChoice, Setting, fact_text, shape_of};
pub use used::Used;
pub use walk::{Bend, Piece, Walk};
pub use working::{Worked, working};
