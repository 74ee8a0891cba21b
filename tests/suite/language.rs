//! The rule language: sections of rule text with what they give or why they are refused, the
//! reference's examples, screens, and texts that nobody meant.

mod bench;
mod reference;
mod screens;
mod section;
mod sections;
mod soups;
