//! Local files beside a pack's own. In: the files that a list names and those that somebody gives. Out: a pack's files with
//! theirs below `local/`. A list names files of its own folder alone.

use super::files::{Files, read_text};
use super::{Error, PackFiles};
use std::path::{Component, Path, PathBuf};

/// Where local files stand among a pack's files.
pub const LOCAL: &str = "local/";

/// Lays local files over a pack: first those that a list names, from its folder on, then those that were given.
///
/// # Errors
/// Where a file cannot be read, a list names one outside its folder, or two have one name.
pub fn lay_local(
    pack: &mut PackFiles,
    listed: &[String],
    folder: Option<&Path>,
    given: &[PathBuf],
) -> Result<(), Error> {
    for name in listed {
        let path = Path::new(name);
        let inside = path
            .components()
            .all(|part| matches!(part, Component::Normal(_)));
        if !inside {
            return Err(Error::Findings(vec![format!(
                "`list.toml`: `local` names `{name}`; expected a file in the list\'s folder or below it; give others with `--local`"
            )]));
        }
        let path = folder.unwrap_or(Path::new("")).join(path);
        add(&mut pack.files, &path, name.replace('\\', "/"))?;
    }
    for path in given {
        let name = path.file_name().unwrap_or(path.as_os_str());
        add(&mut pack.files, path, name.to_string_lossy().into_owned())?;
    }
    Ok(())
}

fn add(files: &mut Files, path: &Path, name: String) -> Result<(), Error> {
    let mut file = read_text(path)?;
    file.name = format!("{LOCAL}{name}");
    if files.text(&file.name).is_some() {
        return Err(Error::unfit(
            path,
            format!("is a second local file with the name `{name}`, expected names that differ"),
        ));
    }
    files.0.push(file);
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_list_names_files_of_its_own_folder_alone() {
        let folder = tempfile::tempdir().unwrap();
        std::fs::create_dir(folder.path().join("councils")).unwrap();
        std::fs::write(folder.path().join("councils/a.toml"), "word = \"a\"").unwrap();
        let lay = |names: &[&str], given: &[&str]| {
            let mut pack = PackFiles {
                name: "ours".to_owned(),
                files: Files::default(),
            };
            let listed: Vec<String> = names.iter().map(|name| (*name).to_owned()).collect();
            let given: Vec<PathBuf> = given.iter().map(|name| folder.path().join(name)).collect();
            let laid = lay_local(&mut pack, &listed, Some(folder.path()), &given);
            laid.map(|()| {
                pack.files
                    .0
                    .into_iter()
                    .map(|file| file.name)
                    .collect::<Vec<_>>()
            })
            .map_err(|error| error.to_string())
        };
        assert_eq!(
            lay(&["councils/a.toml"], &[]).unwrap(),
            ["local/councils/a.toml"]
        );
        assert_eq!(lay(&[], &["councils/a.toml"]).unwrap(), ["local/a.toml"]);
        for outside in ["../a.toml", "/etc/a.toml", "./councils/../../a.toml"] {
            let error = lay(&[outside], &[]).unwrap_err();
            assert!(
                error.contains("in the list\'s folder or below it"),
                "{error}"
            );
        }
        let twice = lay(&[], &["councils/a.toml", "councils/a.toml"]).unwrap_err();
        assert!(
            twice.contains("second local file with the name `a.toml`"),
            "{twice}"
        );
        assert!(lay(&["none.toml"], &[]).is_err());
    }
}
