//! The client letter, from hand-made assessments to PDF bytes. All households, amounts and labels are
//! invented; what is tested is how results are said and set.

#[path = "statement/chart.rs"]
mod chart;
#[path = "statement/colours.rs"]
mod colours;
#[path = "statement/invented.rs"]
mod invented;
#[path = "statement/kinds.rs"]
mod kinds;
#[path = "statement/languages.rs"]
mod languages;
#[path = "statement/letter.rs"]
mod letter;
#[path = "statement/nasty.rs"]
mod nasty;
#[path = "statement/readable.rs"]
mod readable;
#[path = "statement/real.rs"]
mod real;
#[path = "statement/templates.rs"]
mod templates;
