//! A folder of templates. In: a path. Out: its texts by name, with hashes.

use super::Error;
use super::files::{Files, read_folder};
use std::path::Path;

/// Endings of the files that belong to a template set.
const ENDINGS: [&str; 3] = [".typ", ".toml", ".txt"];

/// Reads a folder of templates.
///
/// # Errors
/// Where the folder or a file cannot be read, or it holds no template.
pub fn read_templates(folder: &Path) -> Result<Files, Error> {
    let files = read_folder(folder, &ENDINGS)?;
    if files.0.iter().any(|file| file.name.ends_with(".typ")) {
        Ok(files)
    } else {
        Err(Error::unfit(
            folder,
            "holds no template, expected files whose names end in `.typ`",
        ))
    }
}
