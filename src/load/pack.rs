//! Finding a rule pack: one that is built in, by its name, or a folder. In: a name or path. Out: its files.

use super::Error;
use super::files::{Files, read_folder, text_file};
use include_dir::{Dir, include_dir};
use std::path::{Path, PathBuf};

static BUILT_IN: Dir<'_> = include_dir!("$CARGO_MANIFEST_DIR/rules");

/// Endings of the files that belong to a pack.
const ENDINGS: [&str; 4] = [".toml", ".rules", ".csv", ".txt"];
/// The file that makes a folder a pack.
pub const PACK_FILE: &str = "pack.toml";

/// A rule pack's files.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PackFiles {
    /// How it was asked for: the built-in name, or the path.
    pub name: String,
    /// Its files, examples included.
    pub files: Files,
}

/// Names of the packs that are built in, in order.
pub fn built_in_packs() -> Vec<String> {
    let mut names: Vec<String> = BUILT_IN
        .dirs()
        .filter(|dir| dir.get_file(dir.path().join(PACK_FILE)).is_some())
        .map(|dir| dir.path().to_string_lossy().into_owned())
        .collect();
    names.sort();
    names
}

/// Reads a pack. A name without a path sign that is built in is taken from the program; anything else is a folder,
/// looked for below `beside` first where it is relative (the folder of the list that names it), then from the current
/// folder.
///
/// # Errors
/// Where there is no such pack, the folder holds no `pack.toml`, or a file cannot be read.
pub fn read_pack(name: &str, beside: Option<&Path>) -> Result<PackFiles, Error> {
    let path = PathBuf::from(name);
    let folder = beside
        .map(|beside| beside.join(&path))
        .filter(|folder| folder.is_dir())
        .or_else(|| path.is_dir().then_some(path.clone()));
    let plain = path.components().count() == 1;
    if plain && built_in_packs().iter().any(|known| known == name) {
        return built_in(name);
    }
    let Some(folder) = folder else {
        return Err(Error::NoPack {
            name: name.to_owned(),
            known: built_in_packs().join(", "),
        });
    };
    read_pack_folder(&folder)
}

/// Reads the pack in a folder.
///
/// # Errors
/// Where the folder holds no `pack.toml`, or a file cannot be read.
pub fn read_pack_folder(folder: &Path) -> Result<PackFiles, Error> {
    if !folder.join(PACK_FILE).is_file() {
        return Err(Error::unfit(
            folder,
            format!("holds no `{PACK_FILE}`, expected a folder with a rule pack"),
        ));
    }
    Ok(PackFiles {
        name: folder.to_string_lossy().into_owned(),
        files: read_folder(folder, &ENDINGS)?,
    })
}

fn built_in(name: &str) -> Result<PackFiles, Error> {
    let dir = BUILT_IN.get_dir(name).ok_or_else(|| Error::NoPack {
        name: name.to_owned(),
        known: built_in_packs().join(", "),
    })?;
    let mut files = vec![];
    gather(dir, dir.path(), &mut files)?;
    files.sort_by(|a: &super::TextFile, b| a.name.cmp(&b.name));
    Ok(PackFiles {
        name: name.to_owned(),
        files: Files(files),
    })
}

fn gather(dir: &Dir<'_>, top: &Path, files: &mut Vec<super::TextFile>) -> Result<(), Error> {
    for file in dir.files() {
        let name = file.path().strip_prefix(top).unwrap_or(file.path());
        let name = name.to_string_lossy().replace('\\', "/");
        if ENDINGS.iter().any(|ending| name.ends_with(ending)) {
            files.push(text_file(name, file.contents().to_vec(), file.path())?);
        }
    }
    for inner in dir.dirs() {
        gather(inner, top, files)?;
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_unknown_pack_names_the_known_ones() {
        let error = read_pack("nowhere", None).unwrap_err().to_string();
        assert!(
            error.starts_with("no rule pack `nowhere` is built in"),
            "{error}"
        );
    }

    #[test]
    fn a_folder_beside_the_list_is_found() {
        let list = tempfile::tempdir().unwrap();
        let pack = list.path().join("our-rules");
        std::fs::create_dir(&pack).unwrap();
        let error = read_pack("our-rules", Some(list.path())).unwrap_err();
        assert!(
            error.to_string().contains("holds no `pack.toml`"),
            "{error}"
        );
        std::fs::write(pack.join(PACK_FILE), "title = \"Ours\"").unwrap();
        let found = read_pack("our-rules", Some(list.path())).unwrap();
        assert_eq!(found.files.text(PACK_FILE), Some("title = \"Ours\""));
    }
}
