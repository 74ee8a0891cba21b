//! Files that are written aside and renamed when whole, readable by their owner only where the system has owners.

use super::Error;
use std::fs::{self, File, OpenOptions};
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

/// Ending of a file that is not whole yet.
pub(super) const UNFINISHED: &str = ".unfinished";

/// Whether a finished file is forced to the disk before it gets its name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Forced {
    /// Yes: tables and records, of which there are few.
    ToDisk,
    /// No: statements, which `statements.csv` lists with their hashes.
    No,
}

/// A file in the making. Dropped before [`Aside::finish`], it leaves nothing behind.
#[derive(Debug)]
pub struct Aside {
    name: PathBuf,
    aside: PathBuf,
    file: Option<BufWriter<File>>,
}

impl Aside {
    /// Starts the file that shall have this name.
    ///
    /// # Errors
    /// Where the file cannot be created beside it.
    pub fn create(name: &Path) -> Result<Aside, Error> {
        let mut aside = name.as_os_str().to_owned();
        aside.push(UNFINISHED);
        let aside = PathBuf::from(aside);
        let file = fresh_file(&aside).map_err(Error::write(&aside))?;
        Ok(Aside {
            name: name.to_owned(),
            aside,
            file: Some(BufWriter::with_capacity(64 << 10, file)),
        })
    }

    /// Adds bytes.
    ///
    /// # Errors
    /// Where the disk refuses.
    pub fn add(&mut self, bytes: &[u8]) -> Result<(), Error> {
        match &mut self.file {
            Some(file) => file.write_all(bytes).map_err(Error::write(&self.aside)),
            None => Ok(()),
        }
    }

    /// Gives the whole file its name.
    ///
    /// # Errors
    /// Where the disk refuses; the name then still stands for what it stood for before.
    pub fn finish(mut self, forced: Forced) -> Result<(), Error> {
        if let Some(file) = self.file.take() {
            let file = file
                .into_inner()
                .map_err(|error| error.into_error())
                .map_err(Error::write(&self.aside))
                .inspect_err(|_| self.forget())?;
            let settled = match forced {
                Forced::ToDisk => file.sync_all(),
                Forced::No => Ok(()),
            };
            drop(file);
            settled
                .and_then(|()| fs::rename(&self.aside, &self.name))
                .map_err(Error::write(&self.name))
                .inspect_err(|_| self.forget())?;
        }
        Ok(())
    }

    fn forget(&self) {
        let _ = fs::remove_file(&self.aside);
    }
}

impl Drop for Aside {
    fn drop(&mut self) {
        if self.file.take().is_some() {
            self.forget();
        }
    }
}

/// Writes a whole file aside and renames it.
pub(super) fn write_whole(name: &Path, bytes: &[u8], forced: Forced) -> Result<(), Error> {
    let mut file = Aside::create(name)?;
    file.add(bytes)?;
    file.finish(forced)
}

/// A new file that only its owner can read and write. Whatever an earlier run left under the name is removed first, so that neither its
/// permissions nor a link planted there decide where the new one lies and who can read it.
pub(super) fn fresh_file(path: &Path) -> io::Result<File> {
    match fs::remove_file(path) {
        Ok(()) => {}
        Err(cause) if cause.kind() == io::ErrorKind::NotFound => {}
        Err(cause) => return Err(cause),
    }
    let mut options = OpenOptions::new();
    options.write(true).create_new(true);
    #[cfg(unix)]
    std::os::unix::fs::OpenOptionsExt::mode(&mut options, 0o600);
    options.open(path)
}

/// A new or emptied file that only its owner can read and write.
pub(super) fn private_file(path: &Path) -> io::Result<File> {
    let mut options = OpenOptions::new();
    options.write(true).create(true).truncate(true);
    #[cfg(unix)]
    std::os::unix::fs::OpenOptionsExt::mode(&mut options, 0o600);
    options.open(path)
}

/// Takes a folder that somebody else made away from everybody but its owner.
#[cfg(unix)]
pub(super) fn close_folder(path: &Path) -> io::Result<()> {
    use std::os::unix::fs::PermissionsExt;
    fs::set_permissions(path, fs::Permissions::from_mode(0o700))
}

/// The system's own permissions hold.
#[cfg(not(unix))]
pub(super) fn close_folder(_path: &Path) -> io::Result<()> {
    Ok(())
}

/// A folder, with those above it, that only its owner can enter.
pub(super) fn private_folder(path: &Path) -> io::Result<()> {
    let mut builder = fs::DirBuilder::new();
    builder.recursive(true);
    #[cfg(unix)]
    std::os::unix::fs::DirBuilderExt::mode(&mut builder, 0o700);
    builder.create(path)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_unfinished_file_leaves_nothing_and_the_old_one_stands() {
        let folder = tempfile::tempdir().unwrap();
        let name = folder.path().join("results.csv");
        write_whole(&name, b"old", Forced::ToDisk).unwrap();
        let mut file = Aside::create(&name).unwrap();
        file.add(b"new").unwrap();
        drop(file);
        assert_eq!(fs::read(&name).unwrap(), b"old");
        assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1);
        let mut file = Aside::create(&name).unwrap();
        file.add(b"new").unwrap();
        assert_eq!(fs::read(&name).unwrap(), b"old");
        file.finish(Forced::No).unwrap();
        assert_eq!(fs::read(&name).unwrap(), b"new");
        assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1);
    }

    #[cfg(unix)]
    #[test]
    fn what_lies_under_the_name_decides_nothing() {
        use std::os::unix::fs::PermissionsExt;
        let folder = tempfile::tempdir().unwrap();
        let name = folder.path().join("x.csv");
        let aside = folder.path().join("x.csv.unfinished");
        fs::write(&aside, "left behind").unwrap();
        fs::set_permissions(&aside, fs::Permissions::from_mode(0o644)).unwrap();
        write_whole(&name, b"x", Forced::No).unwrap();
        assert_eq!(
            fs::metadata(&name).unwrap().permissions().mode() & 0o777,
            0o600
        );
        let elsewhere = folder.path().join("elsewhere");
        fs::write(&elsewhere, "mine").unwrap();
        std::os::unix::fs::symlink(&elsewhere, &aside).unwrap();
        write_whole(&name, b"y", Forced::No).unwrap();
        assert_eq!(fs::read(&elsewhere).unwrap(), b"mine");
        assert_eq!(fs::read(&name).unwrap(), b"y");
    }

    #[cfg(unix)]
    #[test]
    fn files_and_folders_are_private() {
        use std::os::unix::fs::PermissionsExt;
        let folder = tempfile::tempdir().unwrap();
        let inner = folder.path().join("a/b");
        private_folder(&inner).unwrap();
        let name = inner.join("x.csv");
        write_whole(&name, b"x", Forced::No).unwrap();
        let mode = |path: &Path| fs::metadata(path).unwrap().permissions().mode() & 0o777;
        assert_eq!(mode(&name), 0o600);
        assert_eq!(mode(&inner), 0o700);
        assert_eq!(mode(&folder.path().join("a")), 0o700);
    }
}
