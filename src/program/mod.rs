//! The flat program: the contract between rules and engine.
//!
//! A program is a straight line of steps for one date, one shape of household and one earner. Each
//! step fills one register; no step jumps. Loops over children or jobs were unrolled when it was made.
//! Registers hold scaled whole numbers, so that arithmetic is exact without reducing fractions: the
//! scale of each was worked out beforehand, once for values with the law's roundings (`exact`) and once
//! for the polynomials of the walk, where roundings of the varying part are left out (`smooth`).
//! Knows no rule text and no household. Imports `index`, `source`, `num`.

mod build;
mod kinds;
mod listing;
mod step;

pub use build::{Builder, MOST_HOURS, TooLarge};
pub use kinds::{ItemKind, Moment, Settling, Shape};
pub use step::{
    Amount, Entered, FactRef, Guard, Input, Item, Line, Manner, Note, Op, Program, Reg, Scales,
    Step, Table,
};
