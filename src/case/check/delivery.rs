//! How a statement reaches its reader, and the sum that a household must have. Imports `num`.

use super::Work;
use super::members::Members;
use crate::case::format::{read_decimal, read_word};
use crate::case::household::Delivery;
use crate::case::layout::{ADDRESS_LINES, HOUSEHOLDS, Holds};
use crate::case::problem::Problem;
use crate::case::record::Record;
use crate::case::schema::ADULT;
use crate::num::Money;

/// The papers, the usual one first.
const PAPERS: [&str; 2] = ["a4", "us-letter"];
/// The sizes of print in points, the usual one first.
const SIZES: [u8; 4] = [12, 16, 18, 20];

impl Work<'_> {
    /// Reads the columns of delivery.
    pub(super) fn delivery(&mut self, record: &Record, members: &Members) -> Delivery {
        let languages = self.checks.options.languages.clone();
        let language = self.choice(record, Holds::Language, "language", &languages);
        let papers = PAPERS.map(String::from);
        let paper = self.choice(record, Holds::Paper, "paper", &papers);
        let sizes = SIZES.map(|size| size.to_string());
        let size = self.choice(record, Holds::PrintSize, "size of print", &sizes);
        let fold = record.cell(self.column(HOUSEHOLDS, Holds::Fold));
        let fold = fold.split(|sign: char| sign.is_whitespace() || matches!(sign, ',' | ';' | '|'));
        Delivery {
            address: self.address(record),
            language: languages.get(language).cloned().unwrap_or_default(),
            paper: papers[paper].clone(),
            print_size: SIZES[size],
            only: self.only(record, members),
            fold: fold
                .filter(|item| !item.is_empty())
                .map(Into::into)
                .collect(),
            hold: record.cell(self.column(HOUSEHOLDS, Holds::Hold)).into(),
        }
    }

    /// The position of a word; the first for an empty cell.
    fn choice(&mut self, record: &Record, holds: Holds, what: &str, words: &[String]) -> usize {
        let column = self.column(HOUSEHOLDS, holds);
        let text = record.cell(column);
        if text.is_empty() {
            return 0;
        }
        read_word(what, text, words).unwrap_or_else(|problem| {
            self.fault(HOUSEHOLDS, record, column, problem);
            0
        })
    }

    fn address(&mut self, record: &Record) -> Vec<String> {
        let layout = &self.checks.layouts[HOUSEHOLDS];
        let whole = self.column(HOUSEHOLDS, Holds::Address);
        let place = record.place(layout, whole);
        let lines_of = |text: &str| -> Vec<String> {
            let lines = text.split(['\n', '\r']).map(str::trim);
            lines
                .filter(|line| !line.is_empty())
                .map(Into::into)
                .collect()
        };
        let one_by_one = (0..layout.columns.len())
            .filter(|column| layout.columns[*column].holds == Holds::AddressLine)
            .flat_map(|column| lines_of(record.cell(column)));
        let mut lines = lines_of(record.cell(whole));
        let one_by_one: Vec<String> = one_by_one.collect();
        // The value stays out of the message: addresses appear in no log.
        if !lines.is_empty() && !one_by_one.is_empty() {
            self.fault_at(HOUSEHOLDS, place, "", Problem::AddressTwice);
            return lines;
        }
        lines.extend(one_by_one);
        if lines.len() > ADDRESS_LINES {
            self.fault_at(HOUSEHOLDS, place, "", Problem::LongAddress(lines.len()));
        }
        lines
    }

    /// The reference of the one adult whose statement it is, as the table of members writes it.
    fn only(&mut self, record: &Record, members: &Members) -> String {
        let column = self.column(HOUSEHOLDS, Holds::Only);
        let text = record.cell(column);
        if text.is_empty() {
            return String::new();
        }
        let adults = members.references(ADULT);
        if let Some(reference) = adults
            .iter()
            .find(|reference| reference.eq_ignore_ascii_case(text))
        {
            return reference.clone();
        }
        if !members.some_role_unknown {
            self.fault(HOUSEHOLDS, record, column, Problem::OnlyUnknown(adults));
        }
        String::new()
    }

    /// The net income that the household must have, if it names one.
    pub(super) fn target(&mut self, record: &Record) -> Option<Money> {
        let column = self.column(HOUSEHOLDS, Holds::Target);
        let text = record.cell(column);
        if text.is_empty() {
            return None;
        }
        let decimals = self.form(record, column).decimals;
        let read = read_decimal(text, 2, decimals, &|| "a sum of money".into());
        match read.and_then(|sum| {
            if sum > 0 {
                Ok(sum)
            } else {
                Err(Problem::TargetNotAbove)
            }
        }) {
            Ok(sum) => Some(Money(sum)),
            Err(problem) => {
                self.fault(HOUSEHOLDS, record, column, problem);
                None
            }
        }
    }
}
