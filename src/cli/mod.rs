//! The thin front: arguments become a checked request, and everything that is printed is printed here.
//!
//! In: command-line arguments. Out: an exit status, data on standard output, messages on standard error.
//! Messages carry references, never names. May import every other folder.

mod args;
mod chart;
mod exit;
mod form;
mod json;
mod one;
mod print;
mod progress;
mod prove;
mod show;
mod vet;
mod working;

use args::{Cli, Command};
use clap::Parser;
use exit::{Exit, Failure};
use std::ffi::OsString;
use std::io::ErrorKind;
use std::process::ExitCode;

/// Carries a command out.
pub fn run(args: impl IntoIterator<Item = OsString>) -> ExitCode {
    let cli = match Cli::try_parse_from(args) {
        Ok(cli) => cli,
        Err(error) => {
            let _ = error.print();
            return if error.use_stderr() {
                Exit::NotCarriedOut.into()
            } else {
                Exit::Done.into()
            };
        }
    };
    let done = match cli.command {
        Command::Print(args) => print::print(&args),
        Command::Show(args) => one::show(&args),
        Command::Working(args) => one::working(&args),
        Command::Vet(args) => vet::vet(&args),
        Command::Prove(args) => prove::prove(&args),
        Command::Form(args) => form::form(&args),
        Command::Worker => return crate::batch::serve(crate::batch::work),
    };
    match done {
        Ok(exit) => exit.into(),
        // Whoever read the output has enough.
        Err(Failure::Output(error)) if error.kind() == ErrorKind::BrokenPipe => Exit::Done.into(),
        Err(failure) => {
            eprintln!("hourworth: {failure}");
            failure.exit().into()
        }
    }
}
