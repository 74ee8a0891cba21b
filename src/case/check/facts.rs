//! The facts of one record: each given, or the pack's default, or a fault. Imports nothing outside `case`.

use super::Work;
use crate::case::format::{Format, describe, read_fact, read_word};
use crate::case::household::{Instance, Known};
use crate::case::layout::FactColumns;
use crate::case::problem::Problem;
use crate::case::record::{Record, Written};
use crate::case::schema::{KindSpec, Need};
use crate::case::settings::form_of;

/// The facts of a record, in the order of its kind.
pub(super) struct Facts {
    pub(super) values: Vec<i64>,
    pub(super) known: Vec<Known>,
    /// Whether each value is what somebody wrote, and without fault.
    pub(super) written: Vec<bool>,
}

impl Facts {
    pub(super) fn instance(self, label: String, reference: String, owner: usize) -> Instance {
        Instance {
            label,
            reference,
            owner,
            values: self.values,
            known: self.known,
        }
    }

    /// The value of a fact that somebody wrote without fault.
    pub(super) fn written(&self, kind: &KindSpec, name: &str) -> Option<i64> {
        let place = kind.facts.iter().position(|fact| fact.name == name)?;
        self.written[place].then(|| self.values[place])
    }
}

impl Work<'_> {
    /// Reads the facts of a kind from its record. Where the fact `said` is missing, that has been said elsewhere.
    pub(super) fn facts(
        &mut self,
        table: usize,
        record: &Record,
        kind: usize,
        said: &str,
    ) -> Facts {
        let checks = self.checks;
        let layout = &checks.layouts[table];
        let slot = layout
            .kinds
            .iter()
            .position(|own| *own == kind)
            .unwrap_or_default();
        let mut facts = Facts {
            values: vec![],
            known: vec![],
            written: vec![],
        };
        for (fact, columns) in checks.schema.kinds[kind]
            .facts
            .iter()
            .zip(&layout.facts[slot])
        {
            let text = record.cell(columns.value);
            let known = self.known(table, record, *columns, &fact.name);
            let (value, known, written) = if text.is_empty() {
                match fact.need {
                    Need::Default(value) => (value, Known::Assumed, false),
                    Need::Required => {
                        if fact.name != said {
                            let problem = Problem::Missing {
                                expected: describe(&fact.ty, self.form(record, columns.value)),
                                ask: fact.ask.clone(),
                            };
                            self.fault(table, record, columns.value, problem);
                        }
                        (0, Known::Assumed, false)
                    }
                }
            } else {
                match read_fact(text, fact, self.form(record, columns.value)) {
                    Ok(value) => (value, known, true),
                    Err(problem) => {
                        self.fault(table, record, columns.value, problem);
                        (0, known, false)
                    }
                }
            };
            facts.values.push(value);
            facts.known.push(known);
            facts.written.push(written);
        }
        facts
    }

    fn known(&mut self, table: usize, record: &Record, columns: FactColumns, fact: &str) -> Known {
        let FactColumns {
            value,
            known: column,
        } = columns;
        let text = record.cell(column);
        if text.is_empty() {
            return Known::Told;
        }
        if record.cell(value).is_empty() && record.written(value) != Written::Unreadable {
            self.fault(
                table,
                record,
                column,
                Problem::KnownWithoutValue(fact.into()),
            );
        }
        match read_word(
            "word for how a fact is known",
            text,
            &["seen".into(), "told".into()],
        ) {
            Ok(0) => Known::Seen,
            Ok(_) => Known::Told,
            Err(problem) => {
                self.fault(table, record, column, problem);
                Known::Told
            }
        }
    }

    /// How the cell of a column is written.
    pub(super) fn form(&self, record: &Record, column: usize) -> Format {
        let written: Written = record.written(column);
        form_of(written, self.checks.settings.format)
    }
}
