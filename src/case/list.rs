//! A whole list as a stream of households. In: the tables, the schema, the settings. Out: one household at a time, checked or with all
//! its faults. Needs every table sorted by household and says so where one is not; holds the rows of one household at a time.
//! Imports nothing outside `case`.

use super::check::{Checks, check};
use super::fault::{Fault, RejectedHousehold};
use super::format::near;
use super::household::Household;
use super::layout::{HOUSEHOLDS, JOBS, Layout, layouts};
use super::problem::Problem;
use super::record::{Draft, Record};
use super::schema::Schema;
use super::settings::ListSettings;
use super::table::{Broken, Row, Table, TableReader};
use std::collections::VecDeque;
use std::io;

/// A household of a list, or why it cannot be used.
pub type Reading = Result<Household, RejectedHousehold>;

/// What the caller can print, and so what a household may ask for.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReadOptions {
    /// Languages, BCP 47; the first is that of households which name none.
    pub languages: Vec<String>,
}

impl Default for ReadOptions {
    fn default() -> Self {
        ReadOptions {
            languages: vec!["en".into()],
        }
    }
}

/// Why a list cannot be read on.
#[derive(Debug)]
pub enum Stop {
    /// A table is not sorted by household. Sort all tables with [`sort_table`](super::sort_table) and read again.
    Unsorted {
        /// The table.
        file: String,
        /// The first row that comes too late.
        row: u64,
        /// Its household.
        reference: String,
    },
    /// A table is broken from here on.
    Fault(Box<Fault>),
    /// A stream failed.
    Stream {
        /// The table.
        file: String,
        /// What the system said.
        error: io::Error,
    },
}

impl std::fmt::Display for Stop {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Stop::Unsorted {
                file,
                row,
                reference,
            } => write!(
                f,
                "{file} row {row}: found `{reference}` after a later reference; expected rows in the order of `household`"
            ),
            Stop::Fault(fault) => fault.fmt(f),
            Stop::Stream { file, error } => write!(f, "{file}: {error}"),
        }
    }
}

impl std::error::Error for Stop {}

/// One table with the row that comes next.
struct Cursor<'a> {
    table: TableReader<'a>,
    next: Option<Row>,
    /// The largest key so far.
    last: String,
    /// Rows before `next` that name no household.
    strays: VecDeque<Record>,
}

/// Reads a list household by household.
pub struct ListReader<'a> {
    schema: &'a Schema,
    settings: &'a ListSettings,
    options: &'a ReadOptions,
    layouts: Vec<Layout>,
    files: Vec<String>,
    /// By the position of the layout; none for a table that the list does not have.
    cursors: Vec<Option<Cursor<'a>>>,
    faults: Vec<Fault>,
    state: State,
    /// Households still to be rejected because they share the reference of the one before.
    waiting: Vec<RejectedHousehold>,
}

enum State {
    Reading,
    /// Stopped before the first household.
    Stopped(Stop),
    Done,
}

/// The files that a list for this schema may have, with whether the list needs them.
pub fn tables_of(schema: &Schema) -> Vec<(String, Needed)> {
    let needed = |table| {
        if table <= JOBS {
            Needed::Always
        } else {
            Needed::WhereUsed
        }
    };
    let files = layouts(schema).into_iter().map(|layout| layout.file);
    files
        .enumerate()
        .map(|(table, file)| (file, needed(table)))
        .collect()
}

/// Whether a list must have a table.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Needed {
    /// Without it the list is faulty.
    Always,
    /// Without it there are no such records.
    WhereUsed,
}

/// How many other rows of one reference a message names.
const SHARED_ROWS: usize = 8;

impl<'a> ListReader<'a> {
    /// Opens the tables of a list and reads their headers. Faults of the whole list are in [`ListReader::list_faults`] from then on: a
    /// caller that prints stops there; a caller that only checks reads on for the faults of the households.
    pub fn open(
        tables: Vec<Table<'a>>,
        schema: &'a Schema,
        settings: &'a ListSettings,
        options: &'a ReadOptions,
    ) -> ListReader<'a> {
        let layouts = layouts(schema);
        let mut reader = ListReader {
            schema,
            settings,
            options,
            files: layouts.iter().map(|layout| layout.file.clone()).collect(),
            cursors: layouts.iter().map(|_| None).collect(),
            layouts,
            faults: vec![],
            state: State::Reading,
            waiting: vec![],
        };
        let mut present = vec![false; reader.layouts.len()];
        let mut whole = true;
        for table in tables {
            let name = table.name.to_lowercase();
            let Some(position) = reader.layouts.iter().position(|layout| layout.file == name)
            else {
                let nearest = near(
                    &name,
                    reader.layouts.iter().map(|layout| layout.file.as_str()),
                );
                reader
                    .faults
                    .push(Fault::of_file(&table.name, Problem::UnknownTable(nearest)));
                continue;
            };
            if std::mem::replace(&mut present[position], true) {
                reader
                    .faults
                    .push(Fault::of_file(&table.name, Problem::SecondTable));
                continue;
            }
            reader.files[position] = table.name.clone();
            let file = table.name.clone();
            let layout = &reader.layouts[position];
            match TableReader::open(
                table,
                layout,
                schema,
                settings.delimiter,
                &mut reader.faults,
            ) {
                Ok(Some(table)) => {
                    let mut cursor = Cursor {
                        table,
                        next: None,
                        last: String::new(),
                        strays: VecDeque::new(),
                    };
                    match cursor.advance(layout) {
                        Ok(_) => reader.cursors[position] = Some(cursor),
                        Err(stop) => reader.state = State::Stopped(stop),
                    }
                }
                Ok(None) => whole = false,
                Err(Broken::Text(fault)) => {
                    reader.faults.push(*fault);
                    whole = false;
                }
                Err(Broken::Stream(error)) => {
                    reader.state = State::Stopped(Stop::Stream { file, error })
                }
            }
        }
        for (position, there) in present.iter().enumerate().take(JOBS + 1) {
            if !there {
                let file = &reader.layouts[position].file;
                reader
                    .faults
                    .push(Fault::of_file(file, Problem::MissingTable));
                whole = false;
            }
        }
        if !whole && matches!(reader.state, State::Reading) {
            reader.state = State::Done;
        }
        reader
    }

    /// Faults of the whole list: missing tables, bad headers. Where there is one, no household should be printed.
    pub fn list_faults(&self) -> &[Fault] {
        &self.faults
    }

    /// The next household or rows without one; none at the end.
    fn read(&mut self) -> Result<Option<Reading>, Stop> {
        if let Some(rejected) = self.waiting.pop() {
            return Ok(Some(Err(rejected)));
        }
        for position in 0..self.cursors.len() {
            let stray = self.cursors[position]
                .as_mut()
                .and_then(|cursor| cursor.strays.pop_front());
            if let Some(stray) = stray {
                let mut rows: Vec<Vec<Record>> = self.layouts.iter().map(|_| vec![]).collect();
                rows[position].push(stray);
                return Ok(Some(Err(
                    self.without_household(rows, &Problem::NoHousehold)
                )));
            }
        }
        let keys = self.cursors.iter().flatten();
        let keys = keys.filter_map(|cursor| cursor.next.as_ref().map(|row| &row.key));
        let Some(key) = keys.min().cloned() else {
            return Ok(None);
        };
        let mut rows: Vec<Vec<Record>> = vec![];
        for (cursor, layout) in self.cursors.iter_mut().zip(&self.layouts) {
            let mut of_table = vec![];
            if let Some(cursor) = cursor {
                while cursor.next.as_ref().is_some_and(|row| row.key == key) {
                    of_table.extend(cursor.advance(layout)?.map(|row| row.record));
                }
            }
            rows.push(of_table);
        }
        let mut own = std::mem::take(&mut rows[HOUSEHOLDS]).into_iter();
        let Some(household) = own.next() else {
            return Ok(Some(Err(
                self.without_household(rows, &Problem::UnknownHousehold)
            )));
        };
        let others: Vec<Record> = own.collect();
        let mut shared = vec![];
        if !others.is_empty() {
            shared.push(household.row());
            // A message names a few of the rows; a broken list may repeat one reference thousands of times.
            shared.extend(others.iter().map(Record::row).take(SHARED_ROWS));
        }
        let checks = Checks::new(
            self.schema,
            &self.layouts,
            &self.files,
            self.settings,
            self.options,
        );
        for other in others.into_iter().rev() {
            let draft = Draft {
                household: other,
                rows: self.layouts.iter().map(|_| vec![]).collect(),
                shared: shared.clone(),
            };
            self.waiting.push(checks.second_household(draft));
        }
        Ok(Some(check(
            &checks,
            Draft {
                household,
                rows,
                shared,
            },
        )))
    }

    /// Rejects rows whose household the list does not have, or that name none.
    fn without_household(&self, rows: Vec<Vec<Record>>, problem: &Problem) -> RejectedHousehold {
        let mut faults = vec![];
        let mut reference = String::new();
        let mut row = 0;
        for (position, records) in rows.into_iter().enumerate() {
            for record in records {
                let layout = &self.layouts[position];
                let column = layout.by_name["household"];
                let written = record.cell(column).to_string();
                if position == HOUSEHOLDS {
                    row = record.row();
                }
                reference.clone_from(&written);
                let fault = |place, value, problem| Fault {
                    file: self.files[position].clone(),
                    place,
                    reference: written.clone(),
                    value,
                    problem,
                };
                faults.push(fault(
                    record.place(layout, column),
                    written.clone(),
                    problem.clone(),
                ));
                for (place, value, problem) in &record.faults {
                    faults.push(fault(place.clone(), value.clone(), problem.clone()));
                }
            }
        }
        RejectedHousehold {
            reference,
            row,
            faults,
        }
    }
}

impl Iterator for ListReader<'_> {
    type Item = Result<Reading, Stop>;

    fn next(&mut self) -> Option<Self::Item> {
        match std::mem::replace(&mut self.state, State::Done) {
            State::Done => None,
            State::Stopped(stop) => Some(Err(stop)),
            State::Reading => match self.read() {
                Ok(Some(reading)) => {
                    self.state = State::Reading;
                    Some(Ok(reading))
                }
                Ok(None) => None,
                Err(stop) => Some(Err(stop)),
            },
        }
    }
}

impl Cursor<'_> {
    /// Hands out the row that was next and reads the one after it.
    fn advance(&mut self, layout: &Layout) -> Result<Option<Row>, Stop> {
        let file = &self.table.file.clone();
        let following = loop {
            let following = self.table.next(layout).map_err(|broken| match broken {
                Broken::Text(fault) => Stop::Fault(fault),
                Broken::Stream(error) => Stop::Stream {
                    file: file.clone(),
                    error,
                },
            })?;
            match following {
                Some(row) if row.key.is_empty() => self.strays.push_back(row.record),
                other => break other,
            }
        };
        if let Some(row) = &following {
            if row.key < self.last {
                return Err(Stop::Unsorted {
                    file: file.clone(),
                    row: row.record.row(),
                    reference: row.record.cell(layout.by_name["household"]).into(),
                });
            }
            self.last.clone_from(&row.key);
        }
        Ok(std::mem::replace(&mut self.next, following))
    }
}
