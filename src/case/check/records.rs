//! The records that a pack declares, each with its owner. Imports nothing outside `case`.

use super::Work;
use super::jobs::Jobs;
use super::members::{Members, role_word};
use crate::case::household::Instance;
use crate::case::layout::{Holds, RECORDS};
use crate::case::problem::Problem;
use crate::case::record::{Draft, Record};
use crate::case::schema::{ADULT, CHILD, HOUSEHOLD, JOB, OTHER};
use std::collections::BTreeMap;

impl Work<'_> {
    /// Reads the records of every kind after the jobs, in the order of the kinds; each kind's in the order of its table.
    pub(super) fn records(
        &mut self,
        draft: &Draft,
        members: &Members,
        jobs: &Jobs,
    ) -> Vec<Vec<Instance>> {
        let mut all = vec![];
        for table in RECORDS..self.checks.layouts.len() {
            let kind = self.checks.layouts[table].kinds[0];
            let name = self.checks.schema.kinds[kind].name.clone();
            let mut firsts = BTreeMap::new();
            let mut instances = vec![];
            for record in &draft.rows[table] {
                self.reader_faults(table, record);
                self.own_reference(table, record, &name, &mut firsts);
                let owner = self
                    .owner(table, record, draft, members, jobs)
                    .unwrap_or_default();
                let reference = record
                    .cell(self.column(table, Holds::Reference))
                    .to_string();
                let facts = self.facts(table, record, kind, "");
                instances.push(facts.instance(String::new(), reference, owner));
            }
            all.push(instances);
        }
        all
    }

    /// The position of the owner among the instances of its kind.
    fn owner(
        &mut self,
        table: usize,
        record: &Record,
        draft: &Draft,
        members: &Members,
        jobs: &Jobs,
    ) -> Option<usize> {
        let checks = self.checks;
        let kind = checks.layouts[table].kinds[0];
        let owner = match checks.schema.kinds[kind].owner {
            None | Some(HOUSEHOLD) => return Some(0),
            Some(owner) => owner,
        };
        if matches!(owner, ADULT | CHILD | OTHER) {
            let wrong = |role| Problem::RecordOf {
                role,
                owner: role_word(owner),
            };
            return self.member_of(table, record, members, owner, wrong);
        }
        let references: Vec<String> = if owner == JOB {
            jobs.instances
                .iter()
                .map(|job| job.reference.clone())
                .collect()
        } else {
            let owner_table = owner - JOB + 2;
            let column = self.column(owner_table, Holds::Reference);
            draft.rows[owner_table]
                .iter()
                .map(|row| row.cell(column).to_string())
                .collect()
        };
        let column = self.column(table, Holds::Owner);
        let text = record.cell(column);
        let found = references
            .iter()
            .position(|reference| !text.is_empty() && reference.eq_ignore_ascii_case(text));
        if found.is_none() {
            let name = checks.schema.kinds[owner].name.clone();
            let problem = if text.is_empty() {
                Problem::Missing {
                    expected: format!("the reference of a {name}"),
                    ask: String::new(),
                }
            } else {
                Problem::UnknownRecord {
                    kind: name,
                    known: references
                        .into_iter()
                        .filter(|known| !known.is_empty())
                        .collect(),
                }
            };
            self.fault(table, record, column, problem);
        }
        found
    }
}
