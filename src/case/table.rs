//! One table of a list as a stream of records. In: bytes and the table's layout. Out: the faults of its header, then one record a row
//! with the household that it belongs to. Holds one row at a time. Imports nothing outside `case`.

use super::fault::{Fault, Place};
use super::format::near;
use super::gather::{Gatherer, Trouble};
use super::layout::{Holds, Layout};
use super::problem::Problem;
use super::record::{Record, Standing};
use super::schema::{Need, Schema};
use super::settings::Delimiter;
use csv::ByteRecord;
use std::io::{self, Read};
use std::sync::Arc;

/// How the rows of a table are numbered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Numbering {
    /// By counting.
    Counted,
    /// By the first column, which [`sort_table`] has put there.
    FirstColumn,
}

/// A table of a list with its name and its bytes.
pub struct Table<'a> {
    pub(super) name: String,
    bytes: Box<dyn Read + Send + 'a>,
    numbering: Numbering,
}

impl<'a> Table<'a> {
    /// A table as it was written. The name is that of its file, without folder: `members.csv`.
    pub fn new(name: impl Into<String>, bytes: impl Read + Send + 'a) -> Table<'a> {
        Table {
            name: name.into(),
            bytes: Box::new(bytes),
            numbering: Numbering::Counted,
        }
    }

    /// A table that [`sort_table`] has written. The name is that of the file as its writer knows it: faults name it and the rows there.
    pub fn sorted(name: impl Into<String>, bytes: impl Read + Send + 'a) -> Table<'a> {
        Table {
            numbering: Numbering::FirstColumn,
            ..Table::new(name, bytes)
        }
    }
}

/// One row with the household it belongs to.
pub(super) struct Row {
    /// The reference in lower case: what the tables are joined by.
    pub(super) key: String,
    pub(super) record: Record,
}

/// A table while it is read.
pub(super) struct TableReader<'a> {
    pub(super) file: String,
    csv: csv::Reader<Gatherer<'a>>,
    numbering: Numbering,
    household: usize,
    /// For each cell of a row, the column of the layout.
    columns: Vec<Option<usize>>,
    names: Vec<String>,
    /// Columns that the header should have but has not.
    absent: Arc<Vec<usize>>,
}

/// Why a table cannot be read on.
#[derive(Debug)]
pub(super) enum Broken {
    Text(Box<Fault>),
    Stream(io::Error),
}

fn broken(file: &str, trouble: Trouble) -> Broken {
    match trouble {
        Trouble::Text(row, problem) => Broken::Text(Box::new(Fault {
            place: Place::Row(row),
            ..Fault::of_file(file, problem)
        })),
        Trouble::Stream(error) => Broken::Stream(error),
    }
}

impl<'a> TableReader<'a> {
    /// Opens a table and reads its header. Faults of the header go to `faults`; no reader where the rows cannot be told apart.
    pub(super) fn open(
        table: Table<'a>,
        layout: &Layout,
        schema: &Schema,
        delimiter: Option<Delimiter>,
        faults: &mut Vec<Fault>,
    ) -> Result<Option<TableReader<'a>>, Broken> {
        let file = table.name;
        let fault = |place, value: &str, problem| Fault {
            place,
            value: value.into(),
            ..Fault::of_file(&file, problem)
        };
        let (mut csv, header) = open_csv(&file, table.bytes, delimiter)?;
        if header.is_empty() {
            faults.push(fault(Place::File, "", Problem::EmptyTable));
            return Ok(None);
        }
        let mut columns = vec![];
        let mut names = vec![];
        for (place, cell) in header.iter().enumerate() {
            let written = String::from_utf8_lossy(cell).trim().to_string();
            let name = written.to_lowercase();
            let column = layout.by_name.get(&name).copied();
            if place == 0 && table.numbering == Numbering::FirstColumn {
                columns.push(None);
            } else if column.is_some() && columns.contains(&column) {
                faults.push(fault(
                    Place::Column(written.clone()),
                    &written,
                    Problem::SecondColumn,
                ));
                columns.push(None);
            } else {
                if column.is_none() && !name.is_empty() {
                    let nearest = near(&name, layout.by_name.keys().map(String::as_str));
                    let problem = Problem::UnknownColumn(nearest);
                    faults.push(fault(Place::Column(written.clone()), &written, problem));
                }
                columns.push(column);
            }
            names.push(written);
        }
        let mut absent = vec![];
        for (column, needed) in layout.columns.iter().enumerate() {
            if needs(layout, schema, column) && !columns.contains(&Some(column)) {
                absent.push(column);
                let problem = Problem::MissingColumn(needed.name.clone());
                faults.push(fault(Place::File, "", problem));
            }
        }
        let household = layout.holding(Holds::Household).map(Some);
        let Some(household) =
            household.and_then(|wanted| columns.iter().position(|c| *c == wanted))
        else {
            return Ok(None);
        };
        csv.get_mut().trouble = None;
        Ok(Some(TableReader {
            file,
            csv,
            numbering: table.numbering,
            household,
            columns,
            names,
            absent: Arc::new(absent),
        }))
    }

    fn standing(&self, row: u64) -> Standing {
        Standing::Row {
            row,
            absent: Arc::clone(&self.absent),
        }
    }

    /// The next row; none at the end.
    pub(super) fn next(&mut self, layout: &Layout) -> Result<Option<Row>, Broken> {
        let mut cells = ByteRecord::new();
        if !read_row(&mut self.csv, &self.file, &mut cells)? {
            return Ok(None);
        }
        let mut record = Record {
            standing: self.standing(self.csv.get_ref().row()),
            cells: vec![String::new(); layout.columns.len()],
            faults: vec![],
        };
        let mut key = String::new();
        for (place, cell) in cells.iter().enumerate() {
            let cell = cell.trim_ascii();
            if place == 0 && self.numbering == Numbering::FirstColumn {
                match std::str::from_utf8(cell)
                    .ok()
                    .and_then(|text| text.parse().ok())
                {
                    Some(row) => record.standing = self.standing(row),
                    None => {
                        let value = String::from_utf8_lossy(cell).into_owned();
                        record
                            .faults
                            .push((record.whole(), value, Problem::BadRowNumber));
                    }
                }
                continue;
            }
            if cell.is_empty() {
                continue;
            }
            let text = String::from_utf8_lossy(cell);
            let text = text.trim_matches(|sign: char| sign.is_whitespace() || sign == '\u{feff}');
            let name = self.names.get(place);
            let column = |name: &str| Place::Cell {
                row: record.row(),
                column: name.into(),
            };
            if !text.is_empty() && name.is_none_or(String::is_empty) {
                let place = column(&format!("number {}", place + 1));
                record
                    .faults
                    .push((place, String::new(), Problem::ExtraCell));
            } else if let (Err(_), Some(name)) = (std::str::from_utf8(cell), name) {
                record
                    .faults
                    .push((column(name), String::new(), Problem::NotUtf8));
            }
            if let Some(Some(column)) = self.columns.get(place) {
                record.cells[*column] = text.into();
                if place == self.household {
                    key = text.to_ascii_lowercase();
                }
            }
        }
        Ok(Some(Row { key, record }))
    }
}

/// Whether a table cannot do without a column: its references, and the facts that all its kinds require.
fn needs(layout: &Layout, schema: &Schema, column: usize) -> bool {
    match layout.columns[column].holds {
        Holds::Household | Holds::Owner | Holds::Role | Holds::Status => true,
        Holds::Reference => layout.key == "member",
        Holds::Fact => {
            let owners = layout.owners(schema, column);
            owners.len() == layout.kinds.len()
                && owners.iter().all(|(_, fact)| fact.need == Need::Required)
        }
        Holds::Label
        | Holds::Language
        | Holds::Paper
        | Holds::PrintSize
        | Holds::Address
        | Holds::AddressLine
        | Holds::Only
        | Holds::Fold
        | Holds::Hold
        | Holds::Target
        | Holds::Known => false,
    }
}

fn open_csv<'a>(
    file: &str,
    bytes: Box<dyn Read + Send + 'a>,
    delimiter: Option<Delimiter>,
) -> Result<(csv::Reader<Gatherer<'a>>, ByteRecord), Broken> {
    let gatherer = Gatherer::open(bytes, delimiter).map_err(|trouble| broken(file, trouble))?;
    let mut csv = csv::ReaderBuilder::new()
        .has_headers(false)
        .flexible(true)
        .delimiter(gatherer.delimiter())
        .from_reader(gatherer);
    let mut header = ByteRecord::new();
    read_row(&mut csv, file, &mut header)?;
    Ok((csv, header))
}

fn read_row(
    csv: &mut csv::Reader<Gatherer<'_>>,
    file: &str,
    cells: &mut ByteRecord,
) -> Result<bool, Broken> {
    match csv.read_byte_record(cells) {
        Ok(more) => Ok(more),
        Err(error) => Err(match csv.get_mut().trouble.take() {
            Some(trouble) => broken(file, trouble),
            None => Broken::Stream(io::Error::other(error)),
        }),
    }
}

/// Sorts the rows of a table by the reference of their household, whatever its case; rows of one household keep their order.
/// The result starts with a column of the rows' numbers in the original: read it with [`Table::sorted`].
///
/// # Errors
/// A fault where the table has no header with `household`, or a row cannot be read.
pub fn sort_table(
    file: &str,
    text: &[u8],
    delimiter: Option<Delimiter>,
) -> Result<Vec<u8>, Box<Fault>> {
    let as_fault = |broken: Broken| match broken {
        Broken::Text(fault) => fault,
        Broken::Stream(error) => Box::new(Fault::of_file(file, Problem::Syntax(error.to_string()))),
    };
    let (mut csv, header) = open_csv(file, Box::new(text), delimiter).map_err(as_fault)?;
    let is_household = |cell: &[u8]| cell.trim_ascii().eq_ignore_ascii_case(b"household");
    let Some(household) = header.iter().position(is_household) else {
        let problem = Problem::MissingColumn("household".into());
        return Err(Box::new(Fault::of_file(file, problem)));
    };
    let mut rows: Vec<(Vec<u8>, u64, ByteRecord)> = vec![];
    let mut cells = ByteRecord::new();
    while read_row(&mut csv, file, &mut cells).map_err(as_fault)? {
        let key = cells.get(household).unwrap_or_default();
        let key = String::from_utf8_lossy(key).trim().to_ascii_lowercase();
        rows.push((key.into_bytes(), csv.get_ref().row(), cells.clone()));
    }
    rows.sort_by(|a, b| a.0.cmp(&b.0));
    let mut out = csv::WriterBuilder::new().flexible(true).from_writer(vec![]);
    let into_memory = "writing into memory does not fail";
    let numbered = |number: &[u8], cells: &ByteRecord| {
        let mut row = ByteRecord::new();
        row.push_field(number);
        cells.iter().for_each(|cell| row.push_field(cell));
        row
    };
    out.write_byte_record(&numbered(b"row", &header))
        .expect(into_memory);
    for (_, number, cells) in &rows {
        out.write_byte_record(&numbered(number.to_string().as_bytes(), cells))
            .expect(into_memory);
    }
    Ok(out.into_inner().expect(into_memory))
}
