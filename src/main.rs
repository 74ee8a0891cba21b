//! The thin front door: everything is in the library.

use std::process::ExitCode;

fn main() -> ExitCode {
    hourworth::cli::run(std::env::args_os())
}
