//! Files of a folder as texts, by name, each with its SHA-256. In: a path. Out: [`Files`]. Follows no hidden file.

use super::Error;
use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};
use std::fs;
use std::io::{self, Read};
use std::path::Path;

/// How deep folders are followed.
const DEPTH: usize = 6;

/// One text file that was read whole.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct TextFile {
    /// Name below its folder, with `/` on every system.
    pub name: String,
    /// The text without a byte order mark.
    pub text: String,
    /// SHA-256 of the bytes as they lie on the disk, in hexadecimal.
    pub sha256: String,
}

/// Text files in the order of their names.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Files(pub Vec<TextFile>);

impl Files {
    /// The text with this name.
    pub fn text(&self, name: &str) -> Option<&str> {
        self.0
            .iter()
            .find(|file| file.name == name)
            .map(|file| file.text.as_str())
    }

    /// Files of texts that are at hand.
    pub fn of_texts<'t>(texts: impl Iterator<Item = (&'t str, &'t str)>) -> Files {
        let file = |(name, text): (&str, &str)| TextFile {
            name: name.to_owned(),
            text: text.to_owned(),
            sha256: hex(&Sha256::digest(text)),
        };
        Files(texts.map(file).collect())
    }

    /// Names and hashes, for a run's record.
    pub fn hashes(&self) -> Vec<(String, String)> {
        self.0
            .iter()
            .map(|file| (file.name.clone(), file.sha256.clone()))
            .collect()
    }

    /// All names with their texts.
    pub fn texts(&self) -> impl Iterator<Item = (&str, &str)> {
        self.0
            .iter()
            .map(|file| (file.name.as_str(), file.text.as_str()))
    }
}

/// Reads a text file.
///
/// # Errors
/// Where it cannot be read or is not UTF-8.
pub fn read_text(path: &Path) -> Result<TextFile, Error> {
    let bytes = fs::read(path).map_err(|cause| Error::read(path, cause))?;
    let name = path.file_name().unwrap_or(path.as_os_str());
    text_file(name.to_string_lossy().into_owned(), bytes, path)
}

/// Turns bytes into a text file.
pub(super) fn text_file(name: String, bytes: Vec<u8>, path: &Path) -> Result<TextFile, Error> {
    let sha256 = hex(&Sha256::digest(&bytes));
    let mut text = String::from_utf8(bytes).map_err(|error| Error::NotText {
        path: path.to_owned(),
        at: error.utf8_error().valid_up_to(),
    })?;
    if text.starts_with('\u{feff}') {
        text.drain(..'\u{feff}'.len_utf8());
    }
    Ok(TextFile { name, text, sha256 })
}

/// Reads the files of a folder, and of those below it, whose names end in one of `endings`.
///
/// # Errors
/// Where a folder or file cannot be read, or a file is not UTF-8.
pub fn read_folder(path: &Path, endings: &[&str]) -> Result<Files, Error> {
    let mut files = vec![];
    gather(path, "", endings, DEPTH, &mut files)?;
    files.sort_by(|a, b| a.name.cmp(&b.name));
    Ok(Files(files))
}

fn gather(
    path: &Path,
    below: &str,
    endings: &[&str],
    depth: usize,
    files: &mut Vec<TextFile>,
) -> Result<(), Error> {
    let entries = fs::read_dir(path).map_err(|cause| Error::read(path, cause))?;
    for entry in entries {
        let entry = entry.map_err(|cause| Error::read(path, cause))?;
        let inner = entry.path();
        let name = entry.file_name().to_string_lossy().into_owned();
        if name.starts_with('.') {
            continue;
        }
        let name = format!("{below}{name}");
        if inner.is_dir() {
            if depth > 1 {
                gather(&inner, &format!("{name}/"), endings, depth - 1, files)?;
            }
        } else if endings.iter().any(|ending| name.ends_with(ending)) {
            let bytes = fs::read(&inner).map_err(|cause| Error::read(&inner, cause))?;
            files.push(text_file(name, bytes, &inner)?);
        }
    }
    Ok(())
}

/// SHA-256 of a file that is too large to hold, in hexadecimal.
///
/// # Errors
/// Where it cannot be read.
pub fn hash_file(path: &Path) -> Result<String, Error> {
    let mut file = fs::File::open(path).map_err(|cause| Error::read(path, cause))?;
    let mut hash = Sha256::new();
    let mut piece = vec![0u8; 64 << 10];
    loop {
        match file.read(&mut piece) {
            Ok(0) => return Ok(hex(&hash.finalize())),
            Ok(read) => hash.update(&piece[..read]),
            Err(cause) if cause.kind() == io::ErrorKind::Interrupted => {}
            Err(cause) => return Err(Error::read(path, cause)),
        }
    }
}

/// Bytes as hexadecimal digits.
pub fn hex(bytes: &[u8]) -> String {
    bytes.iter().map(|byte| format!("{byte:02x}")).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_folder_is_read_in_order_with_hashes_of_the_disk() {
        let folder = tempfile::tempdir().unwrap();
        let at = |name: &str| folder.path().join(name);
        fs::create_dir(at("text")).unwrap();
        fs::write(at("b.typ"), "b").unwrap();
        fs::write(at("text/en.toml"), "\u{feff}a = 1").unwrap();
        fs::write(at(".hidden.typ"), "no").unwrap();
        fs::write(at("picture.png"), [0xff]).unwrap();
        let files = read_folder(folder.path(), &[".typ", ".toml"]).unwrap();
        let names: Vec<_> = files.texts().collect();
        assert_eq!(names, [("b.typ", "b"), ("text/en.toml", "a = 1")]);
        // The mark belongs to the bytes on the disk, not to the text.
        assert_eq!(files.0[1].sha256, hash_file(&at("text/en.toml")).unwrap());
        // `printf b | sha256sum`
        assert_eq!(
            files.0[0].sha256,
            "3e23e8160039594a33894f6564e1b1348bbd7a0088d42c4acb73eeaed59c009d"
        );
    }

    #[test]
    fn bytes_that_are_no_text_are_refused_with_their_place() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("x.toml");
        fs::write(&path, b"a = \"\xe9\"").unwrap();
        let error = read_text(&path).unwrap_err().to_string();
        assert!(error.contains("byte 5"), "{error}");
    }
}
