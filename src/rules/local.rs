//! Local files laid over a pack: each adds one word to a choice that the pack leaves open, with rows for the tables that are keyed
//! by it. In: local files as written, and a pack that is being declared. Out: the pack with their words, rows and labels. A local
//! file changes nothing that is the pack's own: its words, amounts, rules and rows stay as they are.

use super::amounts::{Row, TableRow, day_text, typed};
use super::declare::{Declarer, with_near};
use super::local_gaps::{gaps, lacking};
use super::local_text::{Block, Cell, LocalText, Readable};
use super::manifest::{Manifest, Open, Word};
use super::pack::{Filled, Pack, TableDecl};
use super::tree::{Node, What};
use super::types::{Period, Ty};
use crate::diag::{Diagnostic, nearest};
use std::collections::{BTreeMap, BTreeSet};

/// A local file that is laid over a pack.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Local {
    /// The file, as messages name it.
    pub file: String,
    /// Title of the scheme or table.
    pub title: String,
    /// Where it was published.
    pub source: String,
    /// The place's word.
    pub word: String,
    /// Facts that choose it.
    pub facts: Vec<String>,
    /// Items that its own office runs.
    pub items: Vec<String>,
    /// That office, by language; empty where the file names none.
    pub offices: BTreeMap<String, String>,
    /// First day on which it holds, in days since 1970-01-01.
    pub from: i64,
    /// Last day.
    pub to: i64,
}

/// The word in a row that stands for every word of a key.
const ALL: &str = "all";

/// Who fills a table.
pub(super) fn filled(manifest: &Manifest, table: &str) -> Filled {
    let among = |list: &[Word]| list.iter().any(|(name, _)| name == table);
    let by_local = |open: &Open| {
        among(&open.fills)
            || among(&open.may_fill)
            || open.fills_where.iter().any(|(_, tables)| among(tables))
    };
    if manifest.open.iter().any(by_local) {
        Filled::Local
    } else if manifest.open.iter().any(|open| among(&open.adds_to)) {
        Filled::Both
    } else {
        Filled::Pack
    }
}

impl Open {
    /// Every table that a local file may hold.
    fn tables(&self) -> impl Iterator<Item = &Word> {
        let by_word = self.fills_where.iter().flat_map(|(_, tables)| tables);
        (self.fills.iter())
            .chain(&self.may_fill)
            .chain(by_word)
            .chain(&self.adds_to)
    }
}

/// A local file whose choice was found.
pub(super) struct Placed {
    text: LocalText,
    /// Position among what the pack leaves open.
    open: usize,
}

/// Adds the words of local files to their choices, before anything is looked up in them.
pub(super) fn add_words(declarer: &mut Declarer<'_>, locals: Vec<LocalText>) -> Vec<Placed> {
    open_choices(declarer);
    let mut placed: Vec<Placed> = vec![];
    for text in locals {
        let (choice, place) = &text.choice;
        let open = &declarer.pack.manifest.open;
        let Some(at) = open.iter().position(|open| open.choice.0 == *choice) else {
            let known: Vec<&str> = open.iter().map(|open| open.choice.0.as_str()).collect();
            let fault = Diagnostic::fault(
                *place,
                format!("the pack has no choice `{choice}` that local files may add to"),
            )
            .expected(match known.as_slice() {
                [] => "another pack: this one takes no local files".to_owned(),
                known => format!("one of {}", known.join(", ")),
            });
            declarer
                .faults
                .push(with_near(fault, nearest(choice, known)));
            continue;
        };
        let Some(decl) = declarer
            .pack
            .choices
            .iter_mut()
            .find(|decl| decl.name == *choice)
        else {
            continue;
        };
        let (word, place) = &text.word;
        let lower = word
            .bytes()
            .all(|b| b.is_ascii_lowercase() || b.is_ascii_digit() || b == b'_');
        let fault = if !lower
            || !word.starts_with(|c: char| c.is_ascii_lowercase())
            || !super::token::can_name(word)
            || word == ALL
        {
            Some(
                Diagnostic::fault(*place, format!("`{word}` cannot be the place's word")).expected(
                    "lower case letters, digits and `_`, a letter first, and no word of the language",
                ),
            )
        } else if decl.words[..decl.own].contains(word) {
            Some(
                Diagnostic::fault(
                    *place,
                    format!("`{word}` is a word of the pack's own in `{choice}`"),
                )
                .expected(
                    "a word of the place's own: a local file changes nothing that the pack has",
                ),
            )
        } else {
            let first = placed
                .iter()
                .find(|first| first.text.choice.0 == *choice && first.text.word.0 == *word);
            first.map(|first| {
                Diagnostic::fault(
                    *place,
                    format!("`{word}` stands in `{}` already", first.text.file_name),
                )
                .expected("one local file for each word")
            })
        };
        match fault {
            Some(fault) => declarer.faults.push(fault),
            None => {
                decl.words.push(word.clone());
                placed.push(Placed { text, open: at });
            }
        }
    }
    placed
}

/// Reports choices that `pack.toml` opens and the rules do not have.
fn open_choices(declarer: &mut Declarer<'_>) {
    let pack = &declarer.pack;
    for (at, open) in pack.manifest.open.iter().enumerate() {
        let (name, place) = &open.choice;
        if pack.manifest.open[..at]
            .iter()
            .any(|first| first.choice.0 == *name)
        {
            declarer.faults.push(
                Diagnostic::fault(*place, format!("`{name}` stands twice"))
                    .expected("each choice once"),
            );
        }
        if !pack.choices.iter().any(|choice| choice.name == *name)
            && !declarer.broken.contains(name)
        {
            let fault = Diagnostic::fault(*place, format!("`{name}` is no choice of the pack"))
                .expected("the name of a `choice`");
            let near = nearest(name, pack.choices.iter().map(|choice| choice.name.as_str()));
            declarer.faults.push(with_near(fault, near));
        }
    }
}

/// Adds the rows of local files to the tables, and reports what they lack.
pub(super) fn add_rows(declarer: &mut Declarer<'_>, locals: &[Placed]) {
    open_tables(declarer);
    for placed in locals {
        let open = declarer.pack.manifest.open[placed.open].clone();
        let mut added: BTreeSet<usize> = BTreeSet::new();
        let mut readable = placed.text.mentioned.clone();
        let mut given: BTreeSet<String> = BTreeSet::new();
        for block in &placed.text.tables {
            let Some(at) = table_of(declarer, &open, block) else {
                continue;
            };
            let before = declarer.faults.len();
            let rows = rows_of(
                &declarer.pack,
                &declarer.pack.tables[at],
                &placed.text,
                block,
                declarer.faults,
            );
            if declarer.faults.len() > before {
                readable.insert(block.table.0.clone(), Readable::InPart);
            }
            let decl = &mut declarer.pack.tables[at];
            if let Ty::Choice(_) = decl.gives {
                given.extend(rows.iter().map(|row| row.row.shown.clone()));
            }
            decl.rows.extend(rows);
            added.insert(at);
        }
        lacking(
            &declarer.pack,
            &open,
            &placed.text,
            &given,
            &readable,
            declarer.faults,
        );
        for at in added {
            let decl = &declarer.pack.tables[at];
            if readable.get(&decl.name) == Some(&Readable::Whole) {
                gaps(&declarer.pack, decl, &placed.text, declarer.faults);
            }
        }
    }
}

/// Reports tables that `pack.toml` opens and the rules do not have, or whose first key is another.
fn open_tables(declarer: &mut Declarer<'_>) {
    let pack = &declarer.pack;
    for open in &pack.manifest.open {
        let choice = pack
            .choices
            .iter()
            .position(|choice| choice.name == open.choice.0);
        for (name, place) in open.tables() {
            if declarer.broken.contains(name) {
                continue;
            }
            let fault = match pack.tables.iter().find(|table| table.name == *name) {
                None => Diagnostic::fault(*place, format!("`{name}` is no table of the pack")),
                Some(table) if choice.is_some() && table.keys.first() != Some(&choice) => {
                    Diagnostic::fault(
                        *place,
                        format!("the first key of `{name}` is not `{}`", open.choice.0),
                    )
                }
                Some(_) => continue,
            };
            let near = nearest(name, pack.tables.iter().map(|table| table.name.as_str()));
            declarer.faults.push(with_near(
                fault.expected(format!("a `table` by {}", open.choice.0)),
                near.filter(|near| near != name),
            ));
        }
    }
}

/// The table that a block fills, if it may.
fn table_of(declarer: &mut Declarer<'_>, open: &Open, block: &Block) -> Option<usize> {
    let (name, place) = &block.table;
    let pack = &declarer.pack;
    if open.tables().any(|(known, _)| known == name) {
        return pack.tables.iter().position(|table| table.name == *name);
    }
    let known: Vec<&str> = open.tables().map(|(known, _)| known.as_str()).collect();
    let found = if pack.amounts.iter().any(|amount| amount.name == *name) {
        format!("`{name}` is an amount of the pack, which no local file changes")
    } else if pack.tables.iter().any(|table| table.name == *name) {
        format!(
            "`{name}` is a table of the pack that is not open to `{}`",
            open.choice.0
        )
    } else {
        format!("the pack has no table `{name}`")
    };
    let fault = Diagnostic::fault(*place, found).expected(format!("one of {}", known.join(", ")));
    declarer.faults.push(with_near(fault, nearest(name, known)));
    None
}

/// How a unit is written for a type.
pub(super) fn unit(pack: &Pack, ty: Ty) -> String {
    let currency = &pack.manifest.currency;
    match ty {
        Ty::Money(None) => currency.clone(),
        Ty::Money(Some(Period::Hour)) => format!("{currency} an hour"),
        Ty::Money(Some(period)) => format!("{currency} a {}", period.word()),
        Ty::Rate => "percent".to_owned(),
        Ty::Hours => "hours".to_owned(),
        Ty::Number => "number".to_owned(),
        Ty::Count => "count".to_owned(),
        Ty::Date => "date".to_owned(),
        Ty::YesNo => "yesno".to_owned(),
        Ty::Choice(_) => "word".to_owned(),
    }
}

/// The rows of a block, those with faults left out.
fn rows_of(
    pack: &Pack,
    decl: &TableDecl,
    text: &LocalText,
    block: &Block,
    faults: &mut Vec<Diagnostic>,
) -> Vec<TableRow> {
    let wanted = unit(pack, decl.gives);
    if block.unit.0 != wanted {
        faults.push(
            Diagnostic::fault(
                block.unit.1,
                format!("the unit of `{}` is `{}`", decl.name, block.unit.0),
            )
            .expected(format!("`{wanted}`")),
        );
    }
    let words = match decl.gives {
        Ty::Choice(at) => pack.choices[at].words.clone(),
        Ty::Money(_) | Ty::Rate | Ty::Hours | Ty::Number | Ty::Count | Ty::Date | Ty::YesNo => {
            vec![]
        }
    };
    let mut out = vec![];
    for (span, cells) in &block.rows {
        if cells.len() != decl.keys.len() {
            faults.push(
                Diagnostic::fault(
                    *span,
                    format!("this row of `{}` has {} places", decl.name, cells.len()),
                )
                .expected(places(pack, decl)),
            );
            continue;
        }
        let (value, keys) = cells.split_last().expect("a table has a key");
        let before = faults.len();
        let mut all: Vec<Vec<String>> = vec![vec![text.word.0.clone()]];
        for (cell, key) in keys.iter().zip(&decl.keys[1..]) {
            let found = key_words(pack, *key, cell, faults);
            all = all
                .iter()
                .flat_map(|start| {
                    found.iter().map(|word| {
                        let mut whole = start.clone();
                        whole.push(word.clone());
                        whole
                    })
                })
                .collect();
        }
        let read = match value.words.as_slice() {
            [one] => typed(one, decl.gives, &words).map_err(|expected| (one.clone(), expected)),
            several => Err((several.join(", "), "one value".to_owned())),
        };
        match read {
            Err((found, expected)) => faults.push(
                Diagnostic::fault(value.span, format!("the value is `{found}`")).expected(expected),
            ),
            Ok(read) if faults.len() == before => {
                out.extend(all.into_iter().map(|keys| TableRow {
                    keys,
                    row: Row {
                        from: block.from,
                        to: block.to,
                        value: Some(read),
                        shown: value.words[0].clone(),
                        source: block.source.clone(),
                        locator: block.locator.clone(),
                        confirmed: block.confirmed,
                        span: *span,
                    },
                }))
            }
            Ok(_) => {}
        }
    }
    out
}

/// What a row of a table consists of, in words.
pub(super) fn places(pack: &Pack, decl: &TableDecl) -> String {
    let mut parts: Vec<String> = decl.keys[1..]
        .iter()
        .map(|key| match key {
            Some(choice) => format!("a word of `{}`", pack.choices[*choice].name),
            None => "a count".to_owned(),
        })
        .collect();
    parts.push(match decl.gives {
        Ty::Choice(at) => format!("the value: one of {}", pack.choices[at].words.join(", ")),
        Ty::YesNo => "the value: yes or no".to_owned(),
        Ty::Money(_) | Ty::Rate | Ty::Hours | Ty::Number | Ty::Count | Ty::Date => {
            format!("the value in {}", unit(pack, decl.gives))
        }
    });
    parts.join(", ")
}

/// The keys that a cell stands for.
fn key_words(
    pack: &Pack,
    key: Option<usize>,
    cell: &Cell,
    faults: &mut Vec<Diagnostic>,
) -> Vec<String> {
    let mut out = vec![];
    for word in &cell.words {
        match key {
            Some(choice) if word == ALL => out.extend(pack.choices[choice].words.iter().cloned()),
            Some(choice) if pack.choices[choice].words.contains(word) => out.push(word.clone()),
            Some(choice) => {
                let words = &pack.choices[choice].words;
                let fault = Diagnostic::fault(
                    cell.span,
                    format!("`{word}` is not a word of `{}`", pack.choices[choice].name),
                )
                .expected(format!("one of {}, or {ALL}", words.join(", ")));
                faults.push(with_near(
                    fault,
                    nearest(word, words.iter().map(String::as_str)),
                ));
            }
            None if word.parse::<u32>().is_ok() => out.push(word.clone()),
            None => faults.push(
                Diagnostic::fault(cell.span, format!("`{word}` is not a count"))
                    .expected("a whole number from 0 up"),
            ),
        }
    }
    out
}

/// Remembers the files, gives their words a label, and notes on which dates their tables are looked up.
pub(super) fn finish(declarer: &mut Declarer<'_>, locals: Vec<Placed>) {
    let pack = &mut declarer.pack;
    let names: Vec<String> = pack
        .item_names()
        .into_iter()
        .map(|(name, _)| name)
        .collect();
    for open in &pack.manifest.open {
        for (name, place) in &open.office_of {
            if !names.contains(name) && !declarer.broken.contains(name) {
                let fault = Diagnostic::fault(*place, format!("`{name}` is no item of the pack"))
                    .expected("the name of an `item`");
                let near = nearest(name, names.iter().map(String::as_str));
                declarer.faults.push(with_near(fault, near));
            }
        }
    }
    for Placed { text, open } in locals {
        let open = &pack.manifest.open[open];
        let choice = pack
            .choices
            .iter()
            .position(|choice| choice.name == open.choice.0);
        let facts: Vec<String> = pack
            .kinds
            .iter()
            .flat_map(|kind| &kind.facts)
            .filter(|fact| choice.is_some_and(|at| fact.ty == Ty::Choice(at)))
            .map(|fact| fact.name.clone())
            .collect();
        for (language, labels) in &mut pack.labels {
            // A household that asks for a language without a name here is held.
            let Some(name) = text.names.get(language) else {
                continue;
            };
            for fact in &facts {
                labels.insert(format!("word.{fact}.{}", text.word.0), name.clone());
            }
        }
        if let Some(place) = text.office_span
            && open.office_of.is_empty()
        {
            declarer.faults.push(
                Diagnostic::fault(
                    place,
                    format!(
                        "no item of the pack is run by an office of `{}`",
                        open.choice.0
                    ),
                )
                .expected("no `[office]`"),
            );
        }
        pack.locals.push(Local {
            file: text.file_name,
            title: text.title,
            source: text.source,
            word: text.word.0,
            facts,
            items: open
                .office_of
                .iter()
                .map(|(name, _)| name.clone())
                .collect(),
            offices: text.offices,
            from: text.from,
            to: text.to,
        });
    }
    pack.open_dates = open_dates(pack);
}

/// Dates of the list on which open tables are looked up.
fn open_dates(pack: &Pack) -> BTreeSet<usize> {
    let mut dates = BTreeSet::new();
    let mut note = |node: &Node| {
        node.visit(&mut |node| {
            if let What::Lookup { table, dated, .. } = &node.what
                && pack.tables[*table].filled != Filled::Pack
            {
                dates.insert(*dated);
            }
        });
    };
    for definition in &pack.definitions {
        definition
            .body
            .iter()
            .chain(&definition.claimed)
            .for_each(&mut note);
    }
    for condition in pack.holds.iter().chain(&pack.notes) {
        note(&condition.when);
    }
    pack.bands
        .iter()
        .flat_map(|bands| bands.nodes())
        .for_each(&mut note);
    pack.scales
        .iter()
        .flat_map(|scale| scale.nodes())
        .for_each(&mut note);
    dates
}

/// Refuses dates of a list on which a local file does not hold: last year's figure is never taken in silence.
pub(super) fn accepts(pack: &Pack, dates: &[i64]) -> Result<(), Vec<Diagnostic>> {
    let mut faults = vec![];
    for local in &pack.locals {
        for at in &pack.open_dates {
            let (Some(day), Some((name, _))) = (dates.get(*at), pack.manifest.dates.get(*at))
            else {
                continue;
            };
            if *day < local.from || *day > local.to {
                faults.push(
                    Diagnostic::general(format!(
                        "`{}` does not hold on {}, which is the date `{name}`",
                        local.file,
                        day_text(*day)
                    ))
                    .expected(format!(
                        "a day from {} to {}",
                        day_text(local.from),
                        day_text(local.to)
                    ))
                    .hint("take the local file for that day, or leave it out"),
                );
            }
        }
    }
    if faults.is_empty() {
        Ok(())
    } else {
        Err(faults)
    }
}
