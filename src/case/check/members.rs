//! The members of a household: who is there, in which role, born when. Imports nothing outside `case`.

use super::{Need, Work};
use crate::case::format::{day_of, days_since_1970, read_word};
use crate::case::household::Instance;
use crate::case::layout::{HOUSEHOLDS, Holds, MEMBERS, ROLES};
use crate::case::problem::Problem;
use crate::case::record::{Draft, Record};
use crate::case::schema::{ADULT, CHILD, OTHER};
use std::collections::BTreeMap;

/// Where a member is among the instances.
#[derive(Clone, Copy)]
pub(super) struct Member {
    /// The kind; none where the role is faulty.
    pub(super) kind: Option<usize>,
    pub(super) position: usize,
}

/// The members of a household.
pub(super) struct Members {
    /// The instances of the adults, the children, the others.
    pub(super) instances: Vec<Vec<Instance>>,
    /// By reference in lower case.
    pub(super) by_reference: BTreeMap<String, Member>,
    /// Whether some member's role is faulty, so that it may be any.
    pub(super) some_role_unknown: bool,
}

impl Members {
    /// The references of the members of a kind, as written.
    pub(super) fn references(&self, kind: usize) -> Vec<String> {
        let instances = &self.instances[kind - ADULT];
        instances
            .iter()
            .map(|member| member.reference.clone())
            .collect()
    }

    /// The member with this reference.
    pub(super) fn find(&self, reference: &str) -> Option<Member> {
        self.by_reference
            .get(&reference.to_ascii_lowercase())
            .copied()
    }
}

/// The word for a kind of member.
pub(super) fn role_word(kind: usize) -> String {
    ROLES[kind - ADULT].into()
}

impl Work<'_> {
    /// Reads all members.
    pub(super) fn members(&mut self, draft: &Draft) -> Members {
        let mut members = Members {
            instances: vec![vec![], vec![], vec![]],
            by_reference: BTreeMap::new(),
            some_role_unknown: false,
        };
        let mut firsts: BTreeMap<String, String> = BTreeMap::new();
        // Who was born when: the record, the kind and the day.
        let mut births: Vec<(&Record, usize, i64)> = vec![];
        let reference_column = self.column(MEMBERS, Holds::Reference);
        let label_column = self.column(MEMBERS, Holds::Label);
        for record in &draft.rows[MEMBERS] {
            self.reader_faults(MEMBERS, record);
            self.reference_of(MEMBERS, record, reference_column, Need::Required);
            let reference = record.cell(reference_column).to_string();
            let key = reference.to_ascii_lowercase();
            if let Some(first) = firsts.get(&key).filter(|_| !key.is_empty()) {
                let problem = Problem::SecondMember(first.clone());
                self.fault(MEMBERS, record, reference_column, problem);
            }
            firsts
                .entry(key.clone())
                .or_insert_with(|| record.row_words());
            let kind = self.role(record);
            let Some(kind) = kind else {
                members.some_role_unknown = true;
                members
                    .by_reference
                    .entry(key)
                    .or_insert(Member { kind, position: 0 });
                continue;
            };
            self.facts_of_other_roles(record, kind);
            let facts = self.facts(MEMBERS, record, kind, "");
            if let Some(birth) = facts.written(&self.checks.schema.kinds[kind], "birth") {
                births.push((record, kind, birth));
            }
            let instances = &mut members.instances[kind - ADULT];
            let position = instances.len();
            members.by_reference.entry(key).or_insert(Member {
                kind: Some(kind),
                position,
            });
            instances.push(facts.instance(record.cell(label_column).into(), reference, 0));
            if kind == ADULT && position == 2 {
                let column = self.column(MEMBERS, Holds::Role);
                self.fault(MEMBERS, record, column, Problem::ThirdAdult);
            }
        }
        if members.instances[0].is_empty() && !members.some_role_unknown {
            let place = draft.household.whole();
            self.fault_at(HOUSEHOLDS, place, "", Problem::NoAdult);
        }
        self.births(&births);
        members
    }

    fn role(&mut self, record: &Record) -> Option<usize> {
        let column = self.column(MEMBERS, Holds::Role);
        let text = record.cell(column);
        let problem = if text.is_empty() {
            Problem::Missing {
                expected: "`adult`, `child` or `other`".into(),
                ask: String::new(),
            }
        } else {
            match read_word("role", text, &ROLES.map(String::from)) {
                Ok(0) => return Some(ADULT),
                Ok(1) => return Some(CHILD),
                Ok(_) => return Some(OTHER),
                Err(problem) => problem,
            }
        };
        self.fault(MEMBERS, record, column, problem);
        None
    }

    /// A fact that only other roles have must be empty.
    fn facts_of_other_roles(&mut self, record: &Record, kind: usize) {
        let checks = self.checks;
        let layout = &checks.layouts[MEMBERS];
        for column in 0..layout.columns.len() {
            if record.cell(column).is_empty()
                || !matches!(layout.columns[column].holds, Holds::Fact | Holds::Known)
            {
                continue;
            }
            let owners = layout.owners(checks.schema, column);
            if owners.iter().all(|(own, _)| *own != kind) {
                let problem = Problem::OtherRole {
                    role: role_word(kind),
                    roles: owners.iter().map(|(own, _)| role_word(*own)).collect(),
                };
                self.fault(MEMBERS, record, column, problem);
            }
        }
    }

    /// Nobody is born after the list's date, and no child before an adult of the unit.
    fn births(&mut self, births: &[(&Record, usize, i64)]) {
        let checks = self.checks;
        let today = days_since_1970(checks.settings.date);
        let layout = &checks.layouts[MEMBERS];
        let Some(column) = layout.by_name.get("birth").copied() else {
            return;
        };
        let reference_column = self.column(MEMBERS, Holds::Reference);
        for (record, kind, birth) in births {
            if *birth > today {
                let form = self.form(record, column).dates;
                let date = day_of(today).map_or_else(String::new, |day| form.write(day));
                self.fault(MEMBERS, record, column, Problem::BornLater(date));
            }
            let elder = births
                .iter()
                .find(|(_, other, born)| *kind == CHILD && *other == ADULT && birth <= born);
            if let Some((parent, _, _)) = elder {
                let parent = parent.cell(reference_column).to_string();
                self.fault(MEMBERS, record, column, Problem::OlderThanParent(parent));
            }
        }
    }
}
