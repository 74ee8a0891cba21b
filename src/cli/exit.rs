//! Exit statuses and what goes wrong with a command.

use std::process::ExitCode;

/// How a command ends.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Exit {
    /// Done and balanced.
    Done,
    /// Rejects, faults found, or failed examples.
    Found,
    /// The request could not be carried out.
    NotCarriedOut,
    /// Interrupted.
    Interrupted,
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> ExitCode {
        ExitCode::from(match exit {
            Exit::Done => 0,
            Exit::Found => 1,
            Exit::NotCarriedOut => 2,
            Exit::Interrupted => 3,
        })
    }
}

/// Why a command could not be carried out.
#[derive(Debug, thiserror::Error)]
pub(super) enum Failure {
    /// Something could not be read, or has faults.
    #[error(transparent)]
    Load(#[from] crate::load::Error),
    /// A run failed.
    #[error(transparent)]
    Batch(#[from] crate::batch::Error),
    /// What was asked for does not exist.
    #[error("{0}")]
    Request(String),
    /// Output could not be written.
    #[error("the output cannot be written: {0}")]
    Output(#[from] std::io::Error),
}

impl Failure {
    /// The status that it ends with.
    pub(super) fn exit(&self) -> Exit {
        match self {
            Failure::Batch(crate::batch::Error::Interrupted(_)) => Exit::Interrupted,
            Failure::Load(_) | Failure::Batch(_) | Failure::Request(_) | Failure::Output(_) => {
                Exit::NotCarriedOut
            }
        }
    }
}
