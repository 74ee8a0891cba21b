//! Hourworth: what a household keeps when somebody works more hours, takes an offer or gets a rise.
//!
//! A case list and a rule pack go in; exact budget lines, rates and one printed statement per
//! household come out. The modules below stand in the order in which they may import each other:
//! each one only what stands before it, by the table in `tests/suite/imports.rs`.
#![forbid(unsafe_code)]

pub mod batch;
pub mod case;
pub mod cli;
pub mod diag;
pub mod engine;
pub mod index;
pub mod load;
pub mod measures;
pub mod num;
pub mod program;
pub mod rules;
pub mod source;
pub mod statement;
