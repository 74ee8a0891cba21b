//! The run's folder: who may use it, what lies where.
//!
//! A folder is used when it is new or empty, or when it holds a run and the request says to replace it. A folder with
//! anything else in it is refused, so that nothing is ever removed that this program did not write.

use super::Error;
use super::aside::{Forced, UNFINISHED, close_folder, private_file, private_folder, write_whole};
use std::fs::{self, File, TryLockError};
use std::path::{Path, PathBuf};

/// The file that marks a folder as a run's and that a running process holds locked.
const LOCK: &str = ".hourworth-lock";
/// Everything that a run writes into its folder, beside the lock.
pub(super) const RESULTS: &str = "results.csv";
pub(super) const TURNS: &str = "turning_points.csv";
pub(super) const HELD: &str = "held.csv";
pub(super) const REJECTS: &str = "rejects.csv";
pub(super) const STATEMENTS_LIST: &str = "statements.csv";
pub(super) const RECORD: &str = "run.json";
pub(super) const TIMINGS: &str = "timings.json";
pub(super) const STATEMENTS: &str = "statements";
/// Where a list is sorted, if it must be.
const SORTING: &str = "sorting";

/// How many statements' households share a subfolder.
pub(super) const PER_SUBFOLDER: u64 = 5_000;

/// What to do with a run that the folder holds already.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Existing {
    /// Refuse.
    Refuse,
    /// Remove what that run wrote, then write anew.
    Replace,
}

/// A folder that this process alone may write to.
#[derive(Debug)]
pub struct RunFolder {
    path: PathBuf,
    /// It holds an earlier run, which goes when the new one begins.
    holds: bool,
    _lock: File,
}

impl RunFolder {
    /// Takes the folder: makes it where it is missing and locks it. An earlier run in it stays until `begin` is called.
    ///
    /// # Errors
    /// Where the folder holds something else, holds a run that nobody asked to replace, is in use, or cannot be written.
    pub fn take(path: &Path, existing: Existing) -> Result<RunFolder, Error> {
        private_folder(path).map_err(Error::write(path))?;
        let lock_path = path.join(LOCK);
        let marked = lock_path.exists();
        let holds = fs::read_dir(path)
            .map_err(Error::write(path))?
            .filter_map(Result::ok)
            .any(|entry| entry.file_name() != LOCK && entry.file_name() != SORTING);
        if holds && !marked {
            return Err(Error::ForeignFolder(path.to_owned()));
        }
        let lock = private_file(&lock_path).map_err(Error::write(&lock_path))?;
        match lock.try_lock() {
            Ok(()) => {}
            Err(TryLockError::WouldBlock) => return Err(Error::Busy(path.to_owned())),
            Err(TryLockError::Error(cause)) => {
                return Err(Error::Write {
                    path: lock_path,
                    cause,
                });
            }
        }
        match existing {
            Existing::Refuse if holds => return Err(Error::HoldsRun(path.to_owned())),
            Existing::Refuse | Existing::Replace => {}
        }
        close_folder(path).map_err(Error::write(path))?;
        Ok(RunFolder {
            path: path.to_owned(),
            holds,
            _lock: lock,
        })
    }

    /// Removes the earlier run, where there is one.
    ///
    /// # Errors
    /// Where the disk refuses.
    pub(super) fn begin(&self) -> Result<(), Error> {
        if self.holds { self.clear() } else { Ok(()) }
    }

    /// Removes what a run writes, finished or not, and nothing else.
    fn clear(&self) -> Result<(), Error> {
        // The record goes first: a folder that was cleared half way claims nothing.
        for name in [
            RECORD,
            RESULTS,
            TURNS,
            HELD,
            REJECTS,
            STATEMENTS_LIST,
            TIMINGS,
        ] {
            for name in [name.to_owned(), format!("{name}{UNFINISHED}")] {
                let file = self.path.join(name);
                if file.exists() {
                    fs::remove_file(&file).map_err(Error::write(&file))?;
                }
            }
        }
        let folder = self.path.join(STATEMENTS);
        if folder.exists() {
            fs::remove_dir_all(&folder).map_err(Error::write(&folder))?;
        }
        Ok(())
    }

    /// The folder itself.
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// A private folder for sorting a list, made when first asked for.
    ///
    /// # Errors
    /// Where it cannot be made.
    pub fn sorting(&self) -> Result<PathBuf, Error> {
        let folder = self.path.join(SORTING);
        private_folder(&folder).map_err(Error::write(&folder))?;
        Ok(folder)
    }

    /// Where a file of the run lies.
    pub(super) fn file(&self, name: &str) -> PathBuf {
        self.path.join(name)
    }

    /// Writes a whole file of the run.
    pub(super) fn write(&self, name: &str, bytes: &[u8], forced: Forced) -> Result<(), Error> {
        write_whole(&self.path.join(name), bytes, forced)
    }

    /// Makes a folder of the run.
    pub(super) fn make(&self, name: &str) -> Result<(), Error> {
        let folder = self.path.join(name);
        private_folder(&folder).map_err(Error::write(&folder))
    }
}

impl Drop for RunFolder {
    /// Sorted copies of a list do not outlive the run.
    fn drop(&mut self) {
        let _ = fs::remove_dir_all(self.path.join(SORTING));
    }
}

/// The folder of a household's statements, below the run's, with `/` on every system: `statements`, or a numbered one
/// inside it where the list is long. `place` counts the households of the list from 0.
pub(super) fn statements_folder(place: u64, households: u64) -> String {
    if households <= PER_SUBFOLDER {
        STATEMENTS.to_owned()
    } else {
        format!("{STATEMENTS}/{:03}", place / PER_SUBFOLDER)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_foreign_folder_is_refused_even_with_replace() {
        let folder = tempfile::tempdir().unwrap();
        fs::write(folder.path().join("letter.odt"), "mine").unwrap();
        for existing in [Existing::Refuse, Existing::Replace] {
            let taken = RunFolder::take(folder.path(), existing);
            assert!(matches!(taken, Err(Error::ForeignFolder(_))));
        }
        assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1);
    }

    #[test]
    fn a_run_is_replaced_only_when_asked_and_other_files_stay() {
        let outer = tempfile::tempdir().unwrap();
        let path = outer.path().join("run");
        let first = RunFolder::take(&path, Existing::Refuse).unwrap();
        first.make("statements/000").unwrap();
        first
            .write("statements/000/a.pdf", b"a", Forced::No)
            .unwrap();
        first.write(RECORD, b"{}", Forced::No).unwrap();
        fs::write(path.join("note.txt"), "mine").unwrap();
        drop(first);
        assert!(matches!(
            RunFolder::take(&path, Existing::Refuse),
            Err(Error::HoldsRun(_))
        ));
        let again = RunFolder::take(&path, Existing::Replace).unwrap();
        // What stops the new run before it begins must not cost the old one.
        assert!(path.join(RECORD).exists());
        again.begin().unwrap();
        assert!(!path.join(STATEMENTS).exists() && !path.join(RECORD).exists());
        assert!(path.join("note.txt").exists());
    }

    #[cfg(unix)]
    #[test]
    fn a_folder_that_was_there_before_is_closed_to_others() {
        use std::os::unix::fs::PermissionsExt;
        let outer = tempfile::tempdir().unwrap();
        let path = outer.path().join("run");
        fs::create_dir(&path).unwrap();
        fs::set_permissions(&path, fs::Permissions::from_mode(0o755)).unwrap();
        let _folder = RunFolder::take(&path, Existing::Refuse).unwrap();
        let mode = fs::metadata(&path).unwrap().permissions().mode();
        assert_eq!(mode & 0o777, 0o700);
    }

    #[test]
    fn two_runs_on_one_folder_are_refused() {
        let outer = tempfile::tempdir().unwrap();
        let first = RunFolder::take(outer.path(), Existing::Refuse).unwrap();
        let second = RunFolder::take(outer.path(), Existing::Replace);
        assert!(matches!(second, Err(Error::Busy(_))));
        drop(first);
        RunFolder::take(outer.path(), Existing::Refuse).unwrap();
    }

    #[test]
    fn long_lists_get_subfolders() {
        assert_eq!(statements_folder(4_999, 5_000), "statements");
        assert_eq!(statements_folder(4_999, 5_001), "statements/000");
        assert_eq!(statements_folder(5_000, 5_001), "statements/001");
    }
}
