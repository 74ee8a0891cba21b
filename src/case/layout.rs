//! The columns of each table of a list, by the schema. In: a schema. Out: per table its name and every column that it may have.
//! Refuses nothing: names that a pack must not use for facts are in [`RESERVED`]. Imports nothing outside `case`.

use super::schema::{ADULT, CHILD, FactSpec, HOUSEHOLD, JOB, OTHER, Schema};
use std::collections::BTreeMap;

/// How many lines a name and address may have.
pub(super) const ADDRESS_LINES: usize = 8;

/// Column names that the list itself uses: a pack must not call a fact by one of them, nor end its name with `_known`.
pub const RESERVED: [&str; 23] = [
    "household",
    "member",
    "job",
    "ref",
    "reference",
    "role",
    "name",
    "status",
    "offer",
    "language",
    "paper",
    "print_size",
    "address",
    "address_1",
    "address_2",
    "address_3",
    "address_4",
    "address_5",
    "address_6",
    "only",
    "fold",
    "hold",
    "target_month",
];

/// The words for a member's role, in the order of the kinds [`ADULT`], [`CHILD`], [`OTHER`].
pub(super) const ROLES: [&str; 3] = ["adult", "child", "other"];

/// What a column holds.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Holds {
    /// The household of the row.
    Household,
    /// The owner of the row: a member, a job or a record.
    Owner,
    /// The row's own reference.
    Reference,
    /// A member's role.
    Role,
    /// A member's name, an offer's words.
    Label,
    /// Whether a job is today's, further or on offer.
    Status,
    Language,
    Paper,
    PrintSize,
    Address,
    /// One line of the address.
    AddressLine,
    Only,
    Fold,
    Hold,
    Target,
    /// A fact; which one is found through [`Layout::facts`].
    Fact,
    /// How a fact is known.
    Known,
}

/// One column that a table may have.
#[derive(Clone, Debug)]
pub(super) struct Column {
    pub(super) name: String,
    pub(super) holds: Holds,
}

/// The columns of a kind's facts.
#[derive(Clone, Copy, Debug)]
pub(super) struct FactColumns {
    pub(super) value: usize,
    pub(super) known: usize,
}

/// One table of a list.
#[derive(Clone, Debug)]
pub(super) struct Layout {
    /// `households.csv` …
    pub(super) file: String,
    /// The key of its records in a single household: `household`, `member`, `job` …
    pub(super) key: String,
    /// The kinds whose records the table holds.
    pub(super) kinds: Vec<usize>,
    pub(super) columns: Vec<Column>,
    /// Positions of the columns by name.
    pub(super) by_name: BTreeMap<String, usize>,
    /// For each of [`Layout::kinds`], the columns of its facts in the order of the schema.
    pub(super) facts: Vec<Vec<FactColumns>>,
}

/// Position of the table of households among [`layouts`].
pub(super) const HOUSEHOLDS: usize = 0;
/// Position of the table of members.
pub(super) const MEMBERS: usize = 1;
/// Position of the table of jobs.
pub(super) const JOBS: usize = 2;
/// Position of the first table of records that the pack declares; its kind is the position plus 2.
pub(super) const RECORDS: usize = 3;

/// All tables of a schema: households, members, jobs, then one for each kind that the pack declares.
pub(super) fn layouts(schema: &Schema) -> Vec<Layout> {
    let mut all = vec![
        Layout::new(
            schema,
            "households.csv",
            "household",
            vec![HOUSEHOLD],
            &[
                ("household", Holds::Household),
                ("language", Holds::Language),
                ("paper", Holds::Paper),
                ("print_size", Holds::PrintSize),
                ("address", Holds::Address),
                ("address_1", Holds::AddressLine),
                ("address_2", Holds::AddressLine),
                ("address_3", Holds::AddressLine),
                ("address_4", Holds::AddressLine),
                ("address_5", Holds::AddressLine),
                ("address_6", Holds::AddressLine),
                ("only", Holds::Only),
                ("fold", Holds::Fold),
                ("hold", Holds::Hold),
                ("target_month", Holds::Target),
            ],
        ),
        Layout::new(
            schema,
            "members.csv",
            "member",
            vec![ADULT, CHILD, OTHER],
            &[
                ("household", Holds::Household),
                ("ref", Holds::Reference),
                ("role", Holds::Role),
                ("name", Holds::Label),
            ],
        ),
        Layout::new(
            schema,
            "jobs.csv",
            "job",
            vec![JOB],
            &[
                ("household", Holds::Household),
                ("member", Holds::Owner),
                ("ref", Holds::Reference),
                ("status", Holds::Status),
                ("offer", Holds::Label),
            ],
        ),
    ];
    for kind in JOB + 1..schema.kinds.len() {
        let spec = &schema.kinds[kind];
        let mut columns = vec![("household", Holds::Household)];
        match spec.owner {
            None | Some(HOUSEHOLD) => {}
            Some(ADULT | CHILD | OTHER) => columns.push(("member", Holds::Owner)),
            Some(owner) => columns.push((&schema.kinds[owner].name, Holds::Owner)),
        }
        columns.push(("ref", Holds::Reference));
        let file = format!("{}s.csv", spec.name);
        all.push(Layout::new(schema, &file, &spec.name, vec![kind], &columns));
    }
    all
}

impl Layout {
    fn new(
        schema: &Schema,
        file: &str,
        key: &str,
        kinds: Vec<usize>,
        own: &[(&str, Holds)],
    ) -> Layout {
        let mut layout = Layout {
            file: file.into(),
            key: key.into(),
            kinds,
            columns: vec![],
            by_name: BTreeMap::new(),
            facts: vec![],
        };
        for (name, holds) in own {
            layout.column(name, *holds);
        }
        for kind in layout.kinds.clone() {
            let facts = schema.kinds[kind].facts.iter();
            let facts = facts
                .map(|fact| FactColumns {
                    value: layout.column(&fact.name, Holds::Fact),
                    known: layout.column(&format!("{}_known", fact.name), Holds::Known),
                })
                .collect();
            layout.facts.push(facts);
        }
        layout
    }

    /// The position of a column, which is added where it is new.
    fn column(&mut self, name: &str, holds: Holds) -> usize {
        if let Some(position) = self.by_name.get(name) {
            return *position;
        }
        self.columns.push(Column {
            name: name.into(),
            holds,
        });
        self.by_name.insert(name.into(), self.columns.len() - 1);
        self.columns.len() - 1
    }

    /// The first column that holds this.
    pub(super) fn holding(&self, holds: Holds) -> Option<usize> {
        self.columns.iter().position(|column| column.holds == holds)
    }

    /// The kinds that have a fact in this column, with the fact.
    pub(super) fn owners<'s>(
        &self,
        schema: &'s Schema,
        column: usize,
    ) -> Vec<(usize, &'s FactSpec)> {
        let mut found = vec![];
        for (slot, kind) in self.kinds.iter().enumerate() {
            for (place, fact) in self.facts[slot].iter().enumerate() {
                if fact.value == column || fact.known == column {
                    found.push((*kind, &schema.kinds[*kind].facts[place]));
                }
            }
        }
        found
    }
}
