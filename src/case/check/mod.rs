//! From rows as written to a household that fits the schema. In: the rows of one household. Out: the household, or every fault of it.
//! Guesses nothing: a fact is given, or the pack's default, or a fault. Imports `num`.

mod delivery;
mod facts;
mod jobs;
mod members;
mod records;

use super::fault::{Fault, Place, RejectedHousehold};
use super::household::Household;
use super::layout::{HOUSEHOLDS, Holds, Layout};
use super::list::{ReadOptions, Reading};
use super::problem::Problem;
use super::record::{Draft, Record, Written};
use super::schema::{HOUSEHOLD, Schema};
use super::settings::ListSettings;

/// What every household of a list is checked against.
pub(super) struct Checks<'a> {
    pub(super) schema: &'a Schema,
    pub(super) layouts: &'a [Layout],
    /// The name of each layout's file, as messages show it.
    files: &'a [String],
    pub(super) settings: &'a ListSettings,
    options: &'a ReadOptions,
}

impl<'a> Checks<'a> {
    pub(super) fn new(
        schema: &'a Schema,
        layouts: &'a [Layout],
        files: &'a [String],
        settings: &'a ListSettings,
        options: &'a ReadOptions,
    ) -> Checks<'a> {
        Checks {
            schema,
            layouts,
            files,
            settings,
            options,
        }
    }

    /// Rejects a household whose reference an earlier one has.
    pub(super) fn second_household(&self, draft: Draft) -> RejectedHousehold {
        let mut work = Work::new(self, &draft);
        work.household(&draft);
        work.reject(&draft)
    }
}

/// Checks the rows of one household.
pub(super) fn check(checks: &Checks<'_>, draft: Draft) -> Reading {
    let mut work = Work::new(checks, &draft);
    work.household(&draft);
    let members = work.members(&draft);
    let delivery = work.delivery(&draft.household, &members);
    let target = work.target(&draft.household);
    let facts = work.facts(HOUSEHOLDS, &draft.household, HOUSEHOLD, "");
    let jobs = work.jobs(&draft, &members);
    let records = work.records(&draft, &members, &jobs);
    if !work.faults.is_empty() {
        return Err(work.reject(&draft));
    }
    let mut instances = vec![vec![facts.instance(String::new(), String::new(), 0)]];
    instances.extend(members.instances);
    instances.push(jobs.instances);
    instances.extend(records);
    Ok(Household {
        reference: work.reference,
        delivery,
        target,
        instances,
        job_roles: jobs.roles,
        offers: jobs.offers,
        row: draft.household.row(),
    })
}

/// One household while it is checked.
struct Work<'c> {
    checks: &'c Checks<'c>,
    reference: String,
    faults: Vec<Fault>,
}

impl<'c> Work<'c> {
    fn new(checks: &'c Checks<'c>, draft: &Draft) -> Work<'c> {
        let column = checks.layouts[HOUSEHOLDS].by_name["household"];
        Work {
            checks,
            reference: draft.household.cell(column).to_string(),
            faults: vec![],
        }
    }

    fn reject(self, draft: &Draft) -> RejectedHousehold {
        RejectedHousehold {
            reference: self.reference,
            row: draft.household.row(),
            faults: self.faults,
        }
    }

    /// Notes a fault with the value of its cell, unless it has been said that the cell cannot be read.
    fn fault(&mut self, table: usize, record: &Record, column: usize, problem: Problem) {
        if record.written(column) == Written::Unreadable {
            return;
        }
        let place = record.place(&self.checks.layouts[table], column);
        self.fault_at(table, place, record.cell(column), problem);
    }

    /// Notes a fault at any place.
    fn fault_at(&mut self, table: usize, place: Place, value: &str, problem: Problem) {
        self.faults.push(Fault {
            file: self.checks.files[table].clone(),
            place,
            reference: self.reference.clone(),
            value: value.into(),
            problem,
        });
    }

    /// Takes over what the reader of the row found.
    fn reader_faults(&mut self, table: usize, record: &Record) {
        for (place, value, problem) in &record.faults {
            self.fault_at(table, place.clone(), value, problem.clone());
        }
    }

    /// The household's own reference, and whether others share it.
    fn household(&mut self, draft: &Draft) {
        let record = &draft.household;
        self.reader_faults(HOUSEHOLDS, record);
        let column = self.column(HOUSEHOLDS, Holds::Household);
        self.reference_of(HOUSEHOLDS, record, column, Need::Required);
        if !draft.shared.is_empty() {
            let problem = Problem::SecondHousehold(draft.shared.clone());
            self.fault(HOUSEHOLDS, record, column, problem);
        }
    }

    /// Checks how a reference is written.
    fn reference_of(&mut self, table: usize, record: &Record, column: usize, need: Need) {
        let text = record.cell(column);
        let length = text.chars().count();
        let plain = |byte: u8| byte.is_ascii_alphanumeric() || byte == b'_' || byte == b'-';
        if text.is_empty() {
            match need {
                Need::Required => {
                    let problem = Problem::Missing {
                        expected: "a reference of letters, digits, `_` and `-`".into(),
                        ask: String::new(),
                    };
                    self.fault(table, record, column, problem);
                }
                Need::Free => {}
            }
        } else if !text.bytes().all(plain) {
            self.fault(table, record, column, Problem::BadReference);
        } else if length > 40 {
            self.fault(table, record, column, Problem::LongReference(length));
        }
    }

    /// The column of a table that holds this; tables have every column that is asked for here.
    fn column(&self, table: usize, holds: Holds) -> usize {
        self.checks.layouts[table]
            .holding(holds)
            .expect("the layout of the table has this column")
    }
}

/// Whether a cell may be empty.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Need {
    Required,
    Free,
}
