//! `hourworth form`: blank input files for a pack.

use super::args::FormArgs;
use super::exit::{Exit, Failure};
use crate::batch::checked;
use crate::load::{lay_local, read_pack, schema_of};
use std::fs::OpenOptions;
use std::io::Write;

/// Writes the files; one that is there already is left as it is, and nothing is written then.
pub(super) fn form(args: &FormArgs) -> Result<Exit, Failure> {
    let mut files = read_pack(&args.pack, None)?;
    lay_local(&mut files, &[], None, &args.laid.local)?;
    let pack = checked(&files)?;
    let blank = crate::case::form(&schema_of(&pack), &files.name, &pack.manifest.title);
    let there: Vec<String> = blank
        .iter()
        .map(|(name, _)| args.to.join(name))
        .filter(|path| path.exists())
        .map(|path| format!("`{}`", path.display()))
        .collect();
    if !there.is_empty() {
        return Err(Failure::Request(format!(
            "{} exists already; choose another folder, nothing was written",
            there.join(", ")
        )));
    }
    let fail = |path: &std::path::Path, cause: std::io::Error| {
        Failure::Request(format!("`{}` cannot be written: {cause}", path.display()))
    };
    std::fs::create_dir_all(&args.to).map_err(|cause| fail(&args.to, cause))?;
    let mut out = std::io::stdout().lock();
    for (name, text) in blank {
        let path = args.to.join(name);
        OpenOptions::new()
            .write(true)
            .create_new(true)
            .open(&path)
            .and_then(|mut file| file.write_all(text.as_bytes()))
            .map_err(|cause| fail(&path, cause))?;
        writeln!(out, "{}", path.display())?;
    }
    Ok(Exit::Done)
}
