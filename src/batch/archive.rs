//! All outputs of a run in one ZIP file: the same bytes for the same input, beyond 4 GB and 65,535 files where needed.

use super::aside::fresh_file;
use super::folder::{HELD, RECORD, REJECTS, RESULTS, RunFolder, STATEMENTS_LIST, TURNS};
use super::{Error, aside};
use std::fs::File;
use std::io::{self, BufWriter};
use std::path::Path;
use zip::write::SimpleFileOptions;
use zip::{CompressionMethod, DateTime, ZipWriter};

/// Writes the outputs of a finished run into one ZIP file, in a fixed order with fixed times. `timings.json` is left
/// out because it differs from run to run. Statements are stored as they are, tables are compressed.
///
/// # Errors
/// Where a file of the run cannot be read or the ZIP file cannot be written; nothing half written is left.
pub fn pack_folder(folder: &RunFolder, zip: &Path) -> Result<(), Error> {
    let mut unfinished = zip.as_os_str().to_owned();
    unfinished.push(aside::UNFINISHED);
    let unfinished = Path::new(&unfinished).to_owned();
    let written = write(folder, &unfinished);
    match written {
        Ok(()) => std::fs::rename(&unfinished, zip).map_err(Error::write(zip)),
        Err(error) => {
            let _ = std::fs::remove_file(&unfinished);
            Err(error)
        }
    }
}

fn write(folder: &RunFolder, path: &Path) -> Result<(), Error> {
    let file = fresh_file(path).map_err(Error::write(path))?;
    let mut zip = ZipWriter::new(BufWriter::with_capacity(1 << 20, file));
    let plain = SimpleFileOptions::default()
        .last_modified_time(DateTime::default())
        .unix_permissions(0o600)
        .compression_method(CompressionMethod::Stored);
    let packed = plain.compression_method(CompressionMethod::Deflated);
    for name in [RECORD, RESULTS, TURNS, HELD, REJECTS, STATEMENTS_LIST] {
        add(&mut zip, folder, name, packed, path)?;
    }
    let list = folder.file(STATEMENTS_LIST);
    let mut rows = csv::Reader::from_path(&list)
        .map_err(io::Error::other)
        .map_err(Error::write(&list))?;
    for row in rows.records() {
        let row = row.map_err(io::Error::other).map_err(Error::write(&list))?;
        let file = row
            .get(super::run::STATEMENTS_FILE_COLUMN)
            .unwrap_or_default();
        add(&mut zip, folder, file, plain, path)?;
    }
    zip.finish()
        .map_err(io::Error::other)
        .and_then(|file| file.into_inner().map_err(|error| error.into_error()))
        .and_then(|file| file.sync_all())
        .map_err(Error::write(path))
}

fn add(
    zip: &mut ZipWriter<BufWriter<File>>,
    folder: &RunFolder,
    name: &str,
    options: SimpleFileOptions,
    path: &Path,
) -> Result<(), Error> {
    let from = folder.file(name);
    let mut file = File::open(&from).map_err(Error::write(&from))?;
    zip.start_file(name, options)
        .map_err(io::Error::other)
        .map_err(Error::write(path))?;
    io::copy(&mut file, zip).map_err(Error::write(path))?;
    Ok(())
}
