//! A case list on the disk: a folder of tables, or one household as TOML. In: a path. Out: its settings, hashes and readings.
//!
//! A list whose tables are sorted by household is streamed. Otherwise each table is sorted first, one at a time and in
//! memory, into a folder that the caller names, or kept in memory.

use super::Error;
use super::files::{hash_file, read_text};
use crate::case::{
    Fault, ListReader, ListSettings, ReadOptions, Reading, Schema, Stop, Table, read_single,
    sort_table,
};
use std::fs::{self, File};
use std::io::Write;
use std::path::{Path, PathBuf};

/// The file that makes a folder a case list.
pub const LIST_FILE: &str = "list.toml";

/// A case list that was found and whose settings were read.
#[derive(Clone, Debug)]
pub struct CaseList {
    /// Where it is.
    pub path: PathBuf,
    /// What holds for the whole list.
    pub settings: ListSettings,
    /// File names and SHA-256, for a run's record.
    pub hashes: Vec<(String, String)>,
    form: Form,
}

#[derive(Clone, Debug)]
enum Form {
    /// Name and path of each table.
    Tables(Vec<(String, PathBuf)>),
    /// A household's file name and text.
    Single(String, String),
}

/// Where the rows of a list are read from.
#[derive(Clone, Debug)]
pub enum Rows {
    /// The tables as somebody wrote them.
    AsWritten,
    /// Sorted copies on the disk, by table.
    SortedFiles(Vec<(String, PathBuf)>),
    /// Sorted copies in memory, by table.
    SortedTexts(Vec<(String, Vec<u8>)>),
}

/// What a first reading of a whole list found.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Survey {
    /// Households in the list, faulty ones included.
    pub households: u64,
    /// Those with faults.
    pub rejected: u64,
    /// Faults of the whole list: where there is one, no household should be printed.
    pub list_faults: Vec<Fault>,
    /// Whether the tables must be sorted; nothing was counted then.
    pub sorting: Sorting,
}

/// Whether a list's tables are in order.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Sorting {
    /// They are.
    #[default]
    InOrder,
    /// They must be sorted first.
    Needed,
}

/// The readings of a list, one household after another.
pub type Readings<'a> = Box<dyn Iterator<Item = Result<Reading, Error>> + Send + 'a>;

impl CaseList {
    /// Finds a list and reads its settings.
    ///
    /// # Errors
    /// Where there is no list, a file cannot be read, or the settings have faults.
    pub fn open(path: &Path) -> Result<CaseList, Error> {
        if path.is_dir() {
            return CaseList::open_folder(path);
        }
        let file = read_text(path)?;
        if !file.name.ends_with(".toml") {
            return Err(Error::unfit(
                path,
                "is no case list, expected a folder with `list.toml`, or one household as a `.toml` file",
            ));
        }
        let settings = ListSettings::parse_single(&file.name, &file.text).map_err(Error::Faults)?;
        Ok(CaseList {
            path: path.to_owned(),
            settings,
            hashes: vec![(file.name.clone(), file.sha256)],
            form: Form::Single(file.name, file.text),
        })
    }

    fn open_folder(path: &Path) -> Result<CaseList, Error> {
        let list = path.join(LIST_FILE);
        if !list.is_file() {
            return Err(Error::unfit(
                path,
                format!("holds no `{LIST_FILE}`, expected a folder with a case list"),
            ));
        }
        let file = read_text(&list)?;
        let settings = ListSettings::parse(&file.name, &file.text).map_err(Error::Faults)?;
        let mut tables = vec![];
        for entry in fs::read_dir(path).map_err(|cause| Error::read(path, cause))? {
            let entry = entry.map_err(|cause| Error::read(path, cause))?;
            let name = entry.file_name().to_string_lossy().into_owned();
            // `facts.csv` is the list of questions that `form` writes.
            let is_table = name.to_lowercase().ends_with(".csv")
                && !name.starts_with('.')
                && !name.eq_ignore_ascii_case("facts.csv");
            if is_table && entry.path().is_file() {
                tables.push((name, entry.path()));
            }
        }
        tables.sort();
        let mut hashes = vec![(file.name, file.sha256)];
        for (name, table) in &tables {
            hashes.push((name.clone(), hash_file(table)?));
        }
        Ok(CaseList {
            path: path.to_owned(),
            settings,
            hashes,
            form: Form::Tables(tables),
        })
    }

    /// The folder that paths in the list are meant from.
    pub fn folder(&self) -> Option<&Path> {
        match &self.form {
            Form::Tables(_) => Some(&self.path),
            Form::Single(..) => self.path.parent(),
        }
    }

    /// Whether it is a single household.
    pub fn is_single(&self) -> bool {
        match &self.form {
            Form::Tables(_) => false,
            Form::Single(..) => true,
        }
    }

    /// Reads the whole list once: counts its households, finds the faults of the list, and whether it must be sorted.
    ///
    /// # Errors
    /// Where a table cannot be read to its end.
    pub fn survey(
        &self,
        schema: &Schema,
        options: &ReadOptions,
        rows: &Rows,
    ) -> Result<Survey, Error> {
        let mut survey = Survey::default();
        let (list_faults, readings) = self.read(schema, options, rows)?;
        survey.list_faults = list_faults;
        for reading in readings {
            match reading {
                Ok(Ok(_)) => survey.households += 1,
                Ok(Err(rejected)) if rejected.row == 0 && !self.is_single() => {}
                Ok(Err(_)) => {
                    survey.households += 1;
                    survey.rejected += 1;
                }
                Err(Error::Unsorted { .. }) => {
                    return Ok(Survey {
                        sorting: Sorting::Needed,
                        list_faults: survey.list_faults,
                        ..Survey::default()
                    });
                }
                Err(error) => return Err(error),
            }
        }
        Ok(survey)
    }

    /// Opens the tables and returns the faults of the whole list with its households, one at a time.
    ///
    /// # Errors
    /// Where a table cannot be opened.
    pub fn read<'a>(
        &'a self,
        schema: &'a Schema,
        options: &'a ReadOptions,
        rows: &'a Rows,
    ) -> Result<(Vec<Fault>, Readings<'a>), Error> {
        let tables = match (&self.form, rows) {
            (Form::Single(name, text), _) => {
                let reading = read_single(name, text, schema, &self.settings, options);
                return Ok((vec![], Box::new(std::iter::once(Ok(reading)))));
            }
            (Form::Tables(tables), Rows::AsWritten) => tables
                .iter()
                .map(|(name, path)| Ok(Table::new(name, open(path)?)))
                .collect::<Result<Vec<_>, Error>>()?,
            (Form::Tables(_), Rows::SortedFiles(tables)) => tables
                .iter()
                .map(|(name, path)| Ok(Table::sorted(name, open(path)?)))
                .collect::<Result<Vec<_>, Error>>()?,
            (Form::Tables(_), Rows::SortedTexts(tables)) => tables
                .iter()
                .map(|(name, bytes)| Table::sorted(name, &bytes[..]))
                .collect(),
        };
        let reader = ListReader::open(tables, schema, &self.settings, options);
        let faults = reader.list_faults().to_vec();
        let readings = reader.map(|reading| reading.map_err(Error::from_stop));
        Ok((faults, Box::new(readings)))
    }

    /// Sorts each table and writes it into a folder.
    ///
    /// # Errors
    /// Where a table has no column for the household, or a file cannot be read or written.
    pub fn sort_into(&self, folder: &Path) -> Result<Rows, Error> {
        let mut sorted = vec![];
        for (name, path) in self.tables() {
            let copy = folder.join(format!("sorted-{name}"));
            let bytes = self.sort(name, path)?;
            private_file(&copy)
                .and_then(|mut file| file.write_all(&bytes))
                .map_err(|cause| Error::Sort {
                    path: copy.clone(),
                    cause,
                })?;
            sorted.push((name.clone(), copy));
        }
        Ok(Rows::SortedFiles(sorted))
    }

    /// Sorts each table and keeps it in memory.
    ///
    /// # Errors
    /// Where a table has no column for the household, or a file cannot be read.
    pub fn sort_in_memory(&self) -> Result<Rows, Error> {
        let mut sorted = vec![];
        for (name, path) in self.tables() {
            sorted.push((name.clone(), self.sort(name, path)?));
        }
        Ok(Rows::SortedTexts(sorted))
    }

    fn tables(&self) -> &[(String, PathBuf)] {
        match &self.form {
            Form::Tables(tables) => tables,
            Form::Single(..) => &[],
        }
    }

    fn sort(&self, name: &str, path: &Path) -> Result<Vec<u8>, Error> {
        let bytes = fs::read(path).map_err(|cause| Error::read(path, cause))?;
        sort_table(name, &bytes, self.settings.delimiter)
            .map_err(|fault| Error::Faults(vec![*fault]))
    }
}

fn open(path: &Path) -> Result<File, Error> {
    File::open(path).map_err(|cause| Error::read(path, cause))
}

/// A new file that only its owner can read.
fn private_file(path: &Path) -> std::io::Result<File> {
    let mut options = fs::OpenOptions::new();
    options.write(true).create(true).truncate(true);
    #[cfg(unix)]
    std::os::unix::fs::OpenOptionsExt::mode(&mut options, 0o600);
    options.open(path)
}

impl Error {
    fn from_stop(stop: Stop) -> Error {
        match stop {
            Stop::Unsorted {
                file,
                row,
                reference,
            } => Error::Unsorted {
                file,
                row,
                reference,
            },
            Stop::Fault(fault) => Error::Faults(vec![*fault]),
            Stop::Stream { file, error } => Error::Read {
                path: file.into(),
                cause: error,
            },
        }
    }
}
