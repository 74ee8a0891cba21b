//! Rule text in, a checked pack out; from a pack, one flat program for a date and a shape of household.
//!
//! In: the texts of a pack. Out: [`Pack`], or every fault of the texts with its place. Refuses, before
//! anything is run: unknown and unused names, wrong types and periods, circles, dates without an amount, gaps and
//! overlaps, items without a law reference, divisions by what varies with hours, degrees above two, and
//! numbers that could overflow. Knows no household, file or template. Imports `index`, `source`, `diag`, `num`, `program`.

mod amounts;
mod ast;
mod bodies;
mod check;
mod declare;
mod expressions;
mod facts;
mod graph;
mod labels;
mod lexer;
mod local;
mod local_gaps;
mod local_text;
mod lower;
mod lower_expr;
mod manifest;
mod names;
mod pack;
mod parser;
mod tables;
mod token;
mod tree;
mod types;
mod used;

pub use crate::program::Moment;
pub use amounts::{day, day_text, decimal};
pub use labels::ENGLISH;
pub use local::Local;
pub use manifest::Manifest;
pub use pack::{Change, FactDecl, FactKind, KindDecl, Pack, PackTexts, check};
pub use types::Period;
