//! A stream of bytes as rows. In: whatever a spreadsheet wrote. Out: one row after another with its number as the spreadsheet counts
//! it, blank rows left out. Refuses rows of more than a million bytes, so that a forgotten quotation mark does not swallow a file.
//! Imports nothing outside `case`.

use super::problem::Problem;
use super::settings::Delimiter;
use std::io::{self, BufRead, BufReader, Read};

/// The most bytes of one row.
const MOST: usize = 1_000_000;

/// Why no more rows come.
#[derive(Debug)]
pub(super) enum Trouble {
    /// The text is wrong; the row where it starts.
    Text(u64, Problem),
    /// The stream failed.
    Stream(io::Error),
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum At {
    CellStart,
    Bare,
    Quoted,
    /// After a quotation mark inside a quoted cell: the end of the cell, or the first of two marks.
    Mark,
}

/// A reader that hands out one row a call, ended by a line feed. The csv reader above it so never holds more than one row, and
/// [`Gatherer::row`] is the number of the row that it has just read.
pub(super) struct Gatherer<'a> {
    bytes: BufReader<Box<dyn Read + Send + 'a>>,
    /// The sign between cells; none until the header has told.
    delimiter: Option<u8>,
    row: u64,
    next_row: u64,
    pending: Vec<u8>,
    given: usize,
    after_return: bool,
    pub(super) trouble: Option<Trouble>,
}

impl<'a> Gatherer<'a> {
    /// Opens a table: skips a byte order mark, finds out the sign between cells and keeps the header ready.
    pub(super) fn open(
        bytes: Box<dyn Read + Send + 'a>,
        delimiter: Option<Delimiter>,
    ) -> Result<Gatherer<'a>, Trouble> {
        let mut gatherer = Gatherer {
            bytes: BufReader::with_capacity(1 << 16, bytes),
            delimiter: delimiter.map(Delimiter::byte),
            row: 0,
            next_row: 1,
            pending: vec![],
            given: 0,
            after_return: false,
            trouble: None,
        };
        gatherer.skip_mark()?;
        gatherer.gather()?;
        // Some spreadsheets write the sign between cells into a first row of its own.
        if let [b's' | b'S', b'e' | b'E', b'p' | b'P', b'=', sign, b'\n'] = gatherer.pending[..]
            && Delimiter::ALL
                .iter()
                .any(|delimiter| delimiter.byte() == sign)
        {
            gatherer.delimiter = Some(sign);
            gatherer.gather()?;
        }
        if gatherer.pending.contains(&0) {
            return Err(Trouble::Text(1, Problem::Utf16));
        }
        if gatherer.delimiter.is_none() {
            gatherer.delimiter = Some(most_frequent(&gatherer.pending));
        }
        Ok(gatherer)
    }

    /// The sign between cells.
    pub(super) fn delimiter(&self) -> u8 {
        self.delimiter.unwrap_or(b',')
    }

    /// The number of the row that was handed out last.
    pub(super) fn row(&self) -> u64 {
        self.row
    }

    fn skip_mark(&mut self) -> Result<(), Trouble> {
        let start = self.bytes.fill_buf().map_err(Trouble::Stream)?;
        if start.starts_with(&[0xff, 0xfe]) || start.starts_with(&[0xfe, 0xff]) {
            return Err(Trouble::Text(1, Problem::Utf16));
        }
        if start.starts_with(&[0xef, 0xbb, 0xbf]) {
            self.bytes.consume(3);
        }
        Ok(())
    }

    /// Collects the next row that is not blank; an empty `pending` at the end of the stream.
    fn gather(&mut self) -> Result<(), Trouble> {
        self.pending.clear();
        self.given = 0;
        while self.collect()? {
            self.row = self.next_row;
            self.next_row += 1;
            let delimiter = self.delimiter;
            let empty = |byte: &u8| match delimiter {
                Some(delimiter) => matches!(byte, b' ' | b'\t' | b'"') || *byte == delimiter,
                None => matches!(byte, b' ' | b'\t' | b'"' | b',' | b';'),
            };
            if !self.pending.iter().all(empty) {
                self.pending.push(b'\n');
                return Ok(());
            }
            self.pending.clear();
        }
        Ok(())
    }

    /// Adds one row without its end to `pending`; false at the end of the stream.
    fn collect(&mut self) -> Result<bool, Trouble> {
        let mut at = At::CellStart;
        let mut any = false;
        loop {
            let buffer = self.bytes.fill_buf().map_err(Trouble::Stream)?;
            if buffer.is_empty() {
                return match at {
                    At::Quoted => Err(Trouble::Text(self.next_row, Problem::OpenQuote)),
                    At::CellStart | At::Bare | At::Mark => Ok(any),
                };
            }
            let mut used = 0;
            let mut ended = false;
            for byte in buffer {
                used += 1;
                if std::mem::take(&mut self.after_return) && *byte == b'\n' {
                    continue;
                }
                any = true;
                if at != At::Quoted && matches!(byte, b'\n' | b'\r') {
                    self.after_return = *byte == b'\r';
                    ended = true;
                    break;
                }
                let is_delimiter = match self.delimiter {
                    Some(delimiter) => *byte == delimiter,
                    None => Delimiter::ALL
                        .iter()
                        .any(|delimiter| delimiter.byte() == *byte),
                };
                at = match (at, *byte) {
                    (At::CellStart | At::Mark, b'"') => At::Quoted,
                    (At::Quoted, b'"') => At::Mark,
                    (At::Quoted, _) => At::Quoted,
                    (At::CellStart | At::Bare | At::Mark, _) if is_delimiter => At::CellStart,
                    (At::CellStart | At::Bare | At::Mark, _) => At::Bare,
                };
                self.pending.push(*byte);
            }
            self.bytes.consume(used);
            if ended {
                return Ok(true);
            }
            if self.pending.len() > MOST {
                let problem = match at {
                    At::Quoted => Problem::OpenQuote,
                    At::CellStart | At::Bare | At::Mark => Problem::LongRow,
                };
                return Err(Trouble::Text(self.next_row, problem));
            }
        }
    }
}

impl Read for Gatherer<'_> {
    fn read(&mut self, out: &mut [u8]) -> io::Result<usize> {
        if self.given == self.pending.len()
            && let Err(trouble) = self.gather()
        {
            self.pending.clear();
            self.given = 0;
            self.trouble = Some(trouble);
            return Err(io::Error::other("the table cannot be read on"));
        }
        let rest = &self.pending[self.given..];
        let count = rest.len().min(out.len());
        out[..count].copy_from_slice(&rest[..count]);
        self.given += count;
        Ok(count)
    }
}

/// The delimiter that a header has most of outside quotation marks; a comma where it has none.
fn most_frequent(header: &[u8]) -> u8 {
    let mut quoted = false;
    let mut counts = [0usize; 3];
    for byte in header {
        if *byte == b'"' {
            quoted = !quoted;
        } else if !quoted
            && let Some(place) = Delimiter::ALL
                .iter()
                .position(|delimiter| delimiter.byte() == *byte)
        {
            counts[place] += 1;
        }
    }
    let mut best = 0;
    for place in 1..counts.len() {
        if counts[place] > counts[best] {
            best = place;
        }
    }
    Delimiter::ALL[best].byte()
}
