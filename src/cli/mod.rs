//! The thin front: arguments become a checked request, and everything that is printed is printed here.
//!
//! In: command-line arguments. Out: an exit status, data on standard output, messages on standard error.
//! Messages carry references, never names. May import every other folder.

mod args;
mod chart;
mod json;
mod progress;
mod show;
mod working;

pub use show::{Terms, show};
use std::ffi::OsString;
use std::process::ExitCode;
/// in work
pub fn run(_args: impl IntoIterator<Item = OsString>) -> ExitCode {
    ExitCode::SUCCESS
}
