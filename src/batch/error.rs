//! What can go wrong with a run as a whole. A household's own failure is a row, never one of these.

use std::io;
use std::path::{Path, PathBuf};

/// Why a run could not be carried out.
#[derive(Debug, thiserror::Error)]
pub enum Error {
    /// A file or folder of the run could not be written.
    #[error("`{path}` cannot be written: {cause}")]
    Write {
        /// The file or folder.
        path: PathBuf,
        /// What the system said.
        cause: io::Error,
    },
    /// The folder holds something that is not a run.
    #[error("`{0}` is not empty and holds no run of this program; choose an empty or a new folder")]
    ForeignFolder(PathBuf),
    /// The folder holds a run and nobody asked to replace it.
    #[error(
        "`{0}` holds a run already; give `--replace` to make it again, or choose another folder"
    )]
    HoldsRun(PathBuf),
    /// Another process works in the folder.
    #[error("another run is writing to `{0}`; wait for it to end, or choose another folder")]
    Busy(PathBuf),
    /// The list could not be read to its end.
    #[error(transparent)]
    List(#[from] crate::load::Error),
    /// A worker could not be started, or refused its setup.
    #[error("a worker could not start: {0}")]
    Worker(String),
    /// The sums do not agree.
    #[error(
        "the run does not balance: {expected} households in the list, but {printed} printed, {held} held and {rejected} rejected"
    )]
    Unbalanced {
        /// Households counted in the list before the run.
        expected: u64,
        /// Households printed.
        printed: u64,
        /// Households held.
        held: u64,
        /// Households rejected.
        rejected: u64,
    },
    /// Somebody stopped the run.
    #[error("the run was interrupted after {0} households")]
    Interrupted(u64),
}

impl Error {
    /// Adds the path to what the system said; for `map_err`.
    pub(super) fn write(path: &Path) -> impl FnOnce(io::Error) -> Error + '_ {
        move |cause| Error::Write {
            path: path.to_owned(),
            cause,
        }
    }
}
