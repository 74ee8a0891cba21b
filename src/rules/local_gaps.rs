//! What a local file lacks: tables that it must fill, keys and days without a value. In: a pack with the file's rows. Out: faults.

use super::amounts::{Row, TableRow, day_text, overlaps};
use super::local::places;
use super::local_text::{LocalText, Readable};
use super::manifest::Open;
use super::pack::{Pack, TableDecl};
use super::types::Ty;
use crate::diag::Diagnostic;
use std::collections::{BTreeMap, BTreeSet};

/// Reports tables that the file must fill and does not, and those that do not go with what it says.
pub(super) fn lacking(
    pack: &Pack,
    open: &Open,
    text: &LocalText,
    given: &BTreeSet<String>,
    readable: &BTreeMap<String, Readable>,
    faults: &mut Vec<Diagnostic>,
) {
    let has = |name: &str| readable.contains_key(name);
    let missing = |name: &str, why: &str| {
        let decl = pack.tables.iter().find(|table| table.name == name)?;
        Some(
            Diagnostic::fault(
                text.whole,
                format!("this file has no rows for `{name}`{why}"),
            )
            .expected(format!(
                "a table `[[table]]` with the name `{name}`, each row {}",
                places(pack, decl)
            )),
        )
    };
    for (name, _) in open.fills.iter().chain(&open.adds_to) {
        if !has(name) {
            faults.extend(missing(name, ""));
        }
    }
    // A table of words that could not be read leaves open what goes with it.
    let unsure = readable.iter().any(|(name, how)| {
        let table = pack.tables.iter().find(|table| table.name == *name);
        *how == Readable::InPart && table.is_some_and(|table| matches!(table.gives, Ty::Choice(_)))
    });
    if unsure {
        return;
    }
    for ((when, _), tables) in &open.fills_where {
        for (name, _) in tables {
            let also = open.fills_where.iter().any(|((other, _), tables)| {
                given.contains(other) && tables.iter().any(|(table, _)| table == name)
            });
            if given.contains(when) && !has(name) {
                faults.extend(missing(name, &format!(", which goes with `{when}`")));
            } else if !given.contains(when) && !also && has(name) {
                let place = text.tables.iter().find(|block| block.table.0 == *name);
                faults.push(
                    Diagnostic::fault(
                        place.map_or(text.whole, |block| block.table.1),
                        format!("`{name}` goes with `{when}`, which this file does not give"),
                    )
                    .expected("no rows for it"),
                );
            }
        }
    }
}

/// Reports keys that the file gives no value for on a day on which it holds, and keys with two.
pub(super) fn gaps(pack: &Pack, decl: &TableDecl, text: &LocalText, faults: &mut Vec<Diagnostic>) {
    let own: Vec<&TableRow> = decl
        .rows
        .iter()
        .filter(|row| row.keys.first() == Some(&text.word.0))
        .collect();
    let mut by_key: BTreeMap<&[String], Vec<Row>> = BTreeMap::new();
    for row in &own {
        by_key
            .entry(&row.keys[1..])
            .or_default()
            .push(row.row.clone());
    }
    let before = faults.len();
    for (key, rows) in &mut by_key {
        let of = if key.is_empty() {
            String::new()
        } else {
            format!(" for `{}`", key.join(", "))
        };
        overlaps(&format!("`{}`{of}", decl.name), rows, faults);
    }
    if faults.len() > before {
        return;
    }
    let mut days: Vec<i64> = vec![text.from];
    days.extend(own.iter().flat_map(|row| [row.row.from, row.row.to + 1]));
    days.retain(|day| *day >= text.from && *day <= text.to);
    days.sort_unstable();
    days.dedup();
    let place = text
        .tables
        .iter()
        .find(|block| block.table.0 == decl.name)
        .map_or(text.whole, |block| block.table.1);
    for day in days {
        let on: Vec<&[String]> = own
            .iter()
            .filter(|row| row.row.from <= day && day <= row.row.to)
            .map(|row| &row.keys[1..])
            .collect();
        let missing = missing_keys(pack, decl, &on);
        let Some(first) = missing.first() else {
            continue;
        };
        let others = match missing.len() - 1 {
            0 => String::new(),
            1 => ", and for one more key".to_owned(),
            n => format!(", and for {n} more keys"),
        };
        let of = if first.is_empty() {
            String::new()
        } else {
            format!(" for `{}`", first.join(", "))
        };
        faults.push(
            Diagnostic::fault(
                place,
                format!(
                    "`{}` has no value{of} on {}{others}",
                    decl.name,
                    day_text(day)
                ),
            )
            .expected(format!(
                "a value for every key and every day from {} to {}, for which the file holds",
                day_text(text.from),
                day_text(text.to)
            )),
        );
        return;
    }
}

/// Keys without a row: every word of a choice needs one, and every count between the least and the largest beside the same words;
/// in a table of the pack, every count that the pack's own rows have.
fn missing_keys(pack: &Pack, decl: &TableDecl, on: &[&[String]]) -> Vec<Vec<String>> {
    let keys = &decl.keys[1..];
    let mut wanted: Vec<Vec<String>> = vec![vec![]];
    for (at, key) in keys.iter().enumerate() {
        wanted = wanted
            .into_iter()
            .flat_map(|start| {
                let next: Vec<String> = match key {
                    Some(choice) => pack.choices[*choice].words.clone(),
                    None => {
                        let beside = on.iter().filter(|row| {
                            keys.iter()
                                .zip(row.iter().zip(&start))
                                .all(|(key, (a, b))| key.is_none() || a == b)
                        });
                        let counts = beside.filter_map(|row| row[at].parse::<i64>().ok());
                        let ends = super::tables::own_ends(pack, decl, at + 1);
                        let all: Vec<i64> = counts
                            .chain(ends.into_iter().flat_map(|(low, high)| [low, high]))
                            .collect();
                        match (all.iter().min(), all.iter().max()) {
                            (Some(low), Some(high)) => {
                                (*low..=*high).map(|n| n.to_string()).collect()
                            }
                            _ => vec!["1".to_owned()],
                        }
                    }
                };
                next.into_iter().map(move |word| {
                    let mut whole = start.clone();
                    whole.push(word);
                    whole
                })
            })
            .collect();
    }
    wanted.retain(|key| !on.contains(&key.as_slice()));
    wanted
}
