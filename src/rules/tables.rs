//! Keyed tables, dense in their keys. In: a declared table with its rows. Out: its keys and values on a day; faults
//! for unknown keys, overlaps and gaps.

use super::amounts::{Row, TableRow, day_text, overlaps};
use super::pack::{Filled, Pack, TableDecl};
use crate::diag::{Diagnostic, nearest};
use crate::num::Fraction;
use crate::source::Span;
use std::collections::BTreeMap;

/// The most keys, all columns taken together.
const MOST_KEYS: usize = 100_000;

/// A table on one day: least value and number of values of each key, and the values with their rows, the last key fastest.
pub(super) struct Dense<'p> {
    pub keys: Vec<(i64, usize)>,
    pub values: Vec<Option<Fraction>>,
    pub rows: Vec<Option<&'p TableRow>>,
}

/// A table on one day; none where it has no rows or too many keys.
pub(super) fn dense<'p>(pack: &'p Pack, decl: &'p TableDecl, day: i64) -> Option<Dense<'p>> {
    let rows: Vec<(Vec<i64>, &TableRow)> = known(pack, decl)
        .filter(|(_, row)| row.row.from <= day && day <= row.row.to)
        .collect();
    if decl.filled != Filled::Pack {
        return dense_open(pack, decl, &rows);
    }
    let mut keys = Vec::new();
    for (at, key) in decl.keys.iter().enumerate() {
        let (low, high) = match key {
            Some(choice) => (0, pack.choices[*choice].words.len() as i64 - 1),
            None => (
                rows.iter().map(|(k, _)| k[at]).min()?,
                rows.iter().map(|(k, _)| k[at]).max()?,
            ),
        };
        keys.push((
            low,
            usize::try_from(high.checked_sub(low)?.checked_add(1)?).ok()?,
        ));
    }
    let size = keys
        .iter()
        .try_fold(1usize, |size, (_, n)| size.checked_mul(*n))
        .filter(|size| *size <= MOST_KEYS)?;
    let mut found = vec![None; size];
    for (key, row) in rows {
        found[position(&key, &keys)] = Some(row);
    }
    Some(Dense {
        keys,
        values: found
            .iter()
            .map(|row| row.and_then(|row| row.row.value))
            .collect(),
        rows: found,
    })
}

fn position(key: &[i64], keys: &[(i64, usize)]) -> usize {
    key.iter()
        .zip(keys)
        .fold(0, |index, (k, (low, n))| index * n + (k - low) as usize)
}

/// A table that local files fill. Each word of the first key stands for itself: a count outside its own rows takes the nearest end, a
/// word without rows on the day gives nothing.
fn dense_open<'p>(
    pack: &Pack,
    decl: &TableDecl,
    rows: &[(Vec<i64>, &'p TableRow)],
) -> Option<Dense<'p>> {
    let mut keys = Vec::new();
    for (at, key) in decl.keys.iter().enumerate() {
        let counts = || rows.iter().map(|(k, _)| k[at]);
        let (low, high) = match key {
            Some(choice) => (0, pack.choices[*choice].words.len() as i64 - 1),
            None => (counts().min().unwrap_or(0), counts().max().unwrap_or(0)),
        };
        keys.push((low, usize::try_from(high - low + 1).ok()?));
    }
    let size = keys
        .iter()
        .try_fold(1usize, |size, (_, n)| size.checked_mul(*n))
        .filter(|size| *size <= MOST_KEYS)?;
    let words = |key: &[i64]| -> Vec<i64> {
        key.iter()
            .zip(&decl.keys)
            .filter_map(|(k, of)| of.map(|_| *k))
            .collect()
    };
    let mut groups: BTreeMap<Vec<i64>, Vec<(&[i64], &'p TableRow)>> = BTreeMap::new();
    for (key, row) in rows {
        groups.entry(words(key)).or_default().push((key, row));
    }
    let is_own = |word: i64| is_own(pack, decl, word);
    let of_pack: Vec<&[i64]> = rows
        .iter()
        .map(|(key, _)| key.as_slice())
        .filter(|key| is_own(key[0]))
        .collect();
    let (mut values, mut found) = (vec![None; size], vec![None; size]);
    for at in 0..size {
        let key = key_at(at, &keys);
        let own = is_own(key[0]);
        match groups.get(&words(&key)) {
            Some(group) => {
                let of_word: Vec<&[i64]> = group.iter().map(|(k, _)| *k).collect();
                // The pack's own words have the same counts, as in any table.
                let beside = if own { &of_pack } else { &of_word };
                let clamped: Vec<i64> = (0..key.len())
                    .map(|place| {
                        let counts = || beside.iter().map(|k| k[place]);
                        let (low, high) = (counts().min(), counts().max());
                        key[place].clamp(low.unwrap_or(0), high.unwrap_or(0))
                    })
                    .collect();
                let row = group.iter().find(|(k, _)| *k == clamped.as_slice());
                found[at] = row.map(|(_, row)| *row);
                values[at] = found[at].and_then(|row: &TableRow| row.row.value);
            }
            None if own && decl.filled == Filled::Both => {}
            None => values[at] = Some(Fraction::ZERO),
        }
    }
    Some(Dense {
        keys,
        values,
        rows: found,
    })
}

/// Whether a word of the first key is the pack's own.
fn is_own(pack: &Pack, decl: &TableDecl, word: i64) -> bool {
    decl.keys
        .first()
        .copied()
        .flatten()
        .is_some_and(|choice| word < pack.choices[choice].own as i64)
}

/// The least and the largest count of one key in the pack's own rows.
pub(super) fn own_ends(pack: &Pack, decl: &TableDecl, at: usize) -> Option<(i64, i64)> {
    let counts = || {
        known(pack, decl)
            .filter(|(key, _)| is_own(pack, decl, key[0]))
            .map(|(key, _)| key[at])
    };
    Some((counts().min()?, counts().max()?))
}

/// The key at a position of the values.
fn key_at(at: usize, keys: &[(i64, usize)]) -> Vec<i64> {
    let mut rest = at;
    let mut key = Vec::new();
    for (low, n) in keys.iter().rev() {
        key.insert(0, low + (rest % n) as i64);
        rest /= n;
    }
    key
}

/// Rows whose keys are known, with the keys as numbers: the position of a word, or the count itself.
fn known<'a>(
    pack: &'a Pack,
    decl: &'a TableDecl,
) -> impl Iterator<Item = (Vec<i64>, &'a TableRow)> {
    decl.rows.iter().filter_map(|row| {
        let number = |(text, key): (&String, &Option<usize>)| match key {
            Some(choice) => pack.choices[*choice]
                .words
                .iter()
                .position(|w| w == text)
                .map(|p| p as i64),
            None => text.parse::<u32>().ok().map(i64::from),
        };
        Some((
            row.keys
                .iter()
                .zip(&decl.keys)
                .map(number)
                .collect::<Option<_>>()?,
            row,
        ))
    })
}

/// Reports unknown keys, rows that overlap, and keys without a value on a day that the pack covers.
pub(super) fn check(pack: &Pack, decl: &TableDecl, faults: &mut Vec<Diagnostic>) {
    let before = faults.len();
    for row in &decl.rows {
        for (text, key) in row.keys.iter().zip(&decl.keys) {
            match key {
                Some(choice) if !pack.choices[*choice].words.contains(text) => {
                    let words = &pack.choices[*choice].words;
                    let fault = Diagnostic::fault(
                        row.row.span,
                        format!("`{text}` is not a word of `{}`", pack.choices[*choice].name),
                    );
                    let fault = fault.expected(format!("one of {}", words.join(", ")));
                    faults.push(super::declare::with_near(
                        fault,
                        nearest(text, words.iter().map(String::as_str)),
                    ));
                }
                None if text.parse::<u32>().is_err() => {
                    faults.push(
                        Diagnostic::fault(row.row.span, format!("`{text}` is not a count"))
                            .expected("a whole number from 0 up"),
                    );
                }
                Some(_) | None => {}
            }
        }
    }
    let mut by_key: BTreeMap<Vec<i64>, Vec<Row>> = BTreeMap::new();
    for (key, row) in known(pack, decl) {
        by_key.entry(key).or_default().push(row.row.clone());
    }
    for (key, rows) in &mut by_key {
        overlaps(&format!("`{}`", words_of(pack, decl, key)), rows, faults);
    }
    // An unknown key leaves a gap, which would only echo it.
    if faults.len() == before && decl.filled != Filled::Local {
        gaps(pack, decl, &by_key, faults);
    }
}

fn gaps(
    pack: &Pack,
    decl: &TableDecl,
    by_key: &BTreeMap<Vec<i64>, Vec<Row>>,
    faults: &mut Vec<Diagnostic>,
) {
    let header = Span {
        file: decl.file,
        start: 0,
        end: decl.header,
    };
    for day in days(pack, decl) {
        let Some(Dense { keys, values, .. }) = dense(pack, decl, day) else {
            let empty = !decl
                .rows
                .iter()
                .any(|r| r.row.from <= day && day <= r.row.to);
            faults.push(if empty {
                Diagnostic::fault(
                    header,
                    format!("`{}` has no row on {}", decl.name, day_text(day)),
                )
                .expected(all_days(pack))
            } else {
                Diagnostic::fault(header, format!("`{}` has too many keys", decl.name)).expected(
                    format!(
                        "at most {MOST_KEYS}, every count between the least and the largest taken"
                    ),
                )
            });
            return;
        };
        let missing: Vec<usize> = (0..values.len())
            .filter(|at| values[*at].is_none())
            .collect();
        if let Some(first) = missing.first() {
            let key = key_at(*first, &keys);
            let others = match missing.len() - 1 {
                0 => String::new(),
                1 => ", and for one more key".to_owned(),
                n => format!(", and for {n} more keys"),
            };
            let place = by_key
                .get(&key)
                .and_then(|rows| rows.iter().rev().find(|row| row.from <= day))
                .map_or(header, |row| row.span);
            faults.push(
                Diagnostic::fault(
                    place,
                    format!(
                        "`{}` has no value for `{}` on {}{others}",
                        decl.name,
                        words_of(pack, decl, &key),
                        day_text(day)
                    ),
                )
                .expected(all_days(pack)),
            );
            return;
        }
    }
}

fn all_days(pack: &Pack) -> String {
    format!(
        "a value for every key and every day from {} to {}",
        day_text(pack.manifest.from),
        day_text(pack.manifest.to)
    )
}

/// The days on which a table may change, the first day covered among them.
pub(super) fn days(pack: &Pack, decl: &TableDecl) -> Vec<i64> {
    let mut days = vec![pack.manifest.from];
    for row in &decl.rows {
        days.extend(
            [row.row.from, row.row.to.saturating_add(1)]
                .into_iter()
                .filter(|d| *d > pack.manifest.from && *d <= pack.manifest.to),
        );
    }
    days.sort_unstable();
    days.dedup();
    days
}

fn words_of(pack: &Pack, decl: &TableDecl, key: &[i64]) -> String {
    let word = |(at, key): (&i64, &Option<usize>)| match key {
        Some(choice) => usize::try_from(*at)
            .ok()
            .and_then(|at| pack.choices[*choice].words.get(at))
            .cloned()
            .unwrap_or_default(),
        None => at.to_string(),
    };
    key.iter()
        .zip(&decl.keys)
        .map(word)
        .collect::<Vec<_>>()
        .join(", ")
}
