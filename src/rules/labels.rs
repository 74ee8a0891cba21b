//! `labels.<language>.csv`: the words that statements use for a pack's names. In: a text. Out: texts by key; faults for
//! keys that name nothing, for items, notes and facts that settle without a text, and gaps: what another language lacks that
//! English has.

use super::pack::{FactDecl, FactKind, Pack};
use crate::diag::{Diagnostic, nearest};
use crate::program::ItemKind;
use crate::source::{FileId, Sources, Span};
use std::collections::BTreeMap;

/// The language that the others are measured by. The rules themselves are written in it.
pub const ENGLISH: &str = "en";

/// Reads one language's labels: `key,text` and any further columns, which are for the pack's authors. None where the file
/// has other columns.
pub(super) fn read(
    file: FileId,
    text: &str,
    faults: &mut Vec<Diagnostic>,
) -> Option<BTreeMap<String, String>> {
    let inside = text.trim_start_matches('\u{feff}');
    let skipped = text.len() - inside.len();
    let mut reader = csv::ReaderBuilder::new()
        .flexible(true)
        .from_reader(inside.as_bytes());
    let whole = Span {
        file,
        start: 0,
        end: 0,
    };
    let mut out = BTreeMap::new();
    let header_is_right = reader
        .headers()
        .is_ok_and(|h| h.get(0) == Some("key") && h.get(1) == Some("text"));
    if !header_is_right {
        faults.push(
            Diagnostic::fault(whole, "these are not the columns of a label file")
                .expected("key,text"),
        );
        return None;
    }
    for record in reader.records() {
        let Ok(record) = record else {
            faults.push(Diagnostic::fault(whole, "not a readable table"));
            continue;
        };
        let start = record.position().map_or(0, |p| p.byte() as usize) + skipped;
        let start = text.len() - text[start..].trim_start_matches(['\r', '\n']).len();
        let end = text[start..].find('\n').map_or(text.len(), |at| start + at);
        let span = Span {
            file,
            start: start as u32,
            end: end as u32,
        };
        match (record.get(0).map(str::trim), record.get(1).map(str::trim)) {
            (Some(key), Some(words)) if !key.is_empty() && !words.is_empty() => {
                if out.insert(key.to_owned(), words.to_owned()).is_some() {
                    faults.push(
                        Diagnostic::fault(span, format!("`{key}` has two texts"))
                            .expected("one row a key"),
                    );
                }
            }
            (Some(""), _) | (None, _) => {}
            (Some(key), _) => faults.push(
                Diagnostic::fault(span, format!("`{key}` has no text"))
                    .expected("a text in the second column"),
            ),
        }
    }
    Some(out)
}

fn settling(pack: &Pack) -> impl Iterator<Item = &FactDecl> {
    let facts = pack.kinds.iter().flat_map(|k| &k.facts);
    facts.filter(|f| f.settles.is_some())
}

/// Groups of keys whose second half is a name of the pack.
fn names<'p>(pack: &'p Pack, group: &str) -> Option<Vec<&'p str>> {
    let figures = || {
        let named = pack.definitions.iter().filter(|d| d.settles.is_none());
        named.map(|d| d.name.as_str())
    };
    Some(match group {
        "item" | "what" => pack
            .definitions
            .iter()
            .filter(|d| d.item.is_some())
            .map(|d| d.name.as_str())
            .collect(),
        "turn" => figures().collect(),
        "note" => pack.notes.iter().map(|n| n.text.as_str()).collect(),
        "fact" => pack
            .kinds
            .iter()
            .flat_map(|k| &k.facts)
            .map(|f| f.name.as_str())
            .collect(),
        "settles" => settling(pack).map(|f| f.name.as_str()).collect(),
        "amount" => pack.amounts.iter().map(|a| a.name.as_str()).collect(),
        "record" => pack.kinds.iter().map(|k| k.name.as_str()).collect(),
        "kind" => ItemKind::WORDS.to_vec(),
        "part" => instruments(pack),
        _ => return None,
    })
}

/// The instruments: a part's title up to its first comma, each once.
fn instruments(pack: &Pack) -> Vec<&str> {
    let mut names: Vec<&str> = vec![];
    for (title, _) in &pack.parts {
        let name = title
            .split_once(", ")
            .map_or(title.as_str(), |(name, _)| name);
        if !names.contains(&name) {
            names.push(name);
        }
    }
    names
}

/// Where a label has its value.
const VALUE: &str = "{value}";
/// Groups of keys in which a language may have more than English, which has the names of the rules to fall back on.
const OWN: [&str; 8] = [
    "title", "area", "part", "fact", "word", "kind", "amount", "turn",
];

/// What each language other than English lacks: the keys of English; title, area and the instruments, which the rules themselves
/// say in English; facts and the words of choices. And what it has too much.
pub(super) fn gaps(pack: &Pack) -> Vec<(String, Diagnostic)> {
    let nothing = BTreeMap::new();
    let english = pack.labels.get(ENGLISH).unwrap_or(&nothing);
    let mut wanted: Vec<String> = english.keys().cloned().collect();
    wanted.extend(["title", "area"].map(str::to_owned));
    wanted.extend(instruments(pack).iter().map(|name| format!("part.{name}")));
    let items = pack.definitions.iter().filter(|d| d.item.is_some());
    wanted.extend(items.map(|d| format!("item.{}", d.name)));
    wanted.extend(pack.notes.iter().map(|n| format!("note.{}", n.text)));
    for fact in pack.kinds.iter().flat_map(|kind| &kind.facts) {
        wanted.push(format!("fact.{}", fact.name));
        if let FactKind::Choice(words) = &fact.kind {
            // A word may have a text for each fact that has it.
            let own = words
                .iter()
                .filter(|word| !english.contains_key(&format!("word.{}.{word}", fact.name)));
            wanted.extend(own.map(|word| format!("word.{word}")));
        }
    }
    // The words of local files are theirs: a household that has one without a name in its language is held.
    let of_local = |key: &String| {
        pack.locals.iter().any(|local| {
            let mut keys = local
                .facts
                .iter()
                .map(|fact| format!("word.{fact}.{}", local.word));
            keys.any(|known| known == *key) || *key == format!("word.{}", local.word)
        })
    };
    wanted.retain(|key| !of_local(key));
    wanted.sort();
    wanted.dedup();
    let mut gaps = vec![];
    for (language, labels) in &pack.labels {
        if language == ENGLISH {
            continue;
        }
        let file = format!("`labels.{language}.csv`");
        let mut gap = |message: String, expected: String| {
            let found = Diagnostic::general(message).expected(expected);
            gaps.push((language.clone(), found));
        };
        for key in wanted.iter().filter(|key| !labels.contains_key(*key)) {
            let expected = match english.get(key) {
                Some(text) => format!("what `labels.{ENGLISH}.csv` has as `{text}`"),
                None => "a row with this key".to_owned(),
            };
            gap(format!("{file} has no text for `{key}`"), expected);
        }
        for (key, text) in labels {
            let group = key.split('.').next().unwrap_or_default();
            match english.get(key) {
                None if wanted.contains(key) || OWN.contains(&group) => {}
                None => gap(
                    format!("{file} has the key `{key}`"),
                    format!("a key that `labels.{ENGLISH}.csv` has"),
                ),
                Some(other) if text.contains(VALUE) != other.contains(VALUE) => gap(
                    format!("{file} has or lacks `{VALUE}` at `{key}`"),
                    "the same as in English".to_owned(),
                ),
                Some(_) => {}
            }
        }
    }
    gaps
}

/// Reports keys that name nothing in the pack, and items, notes and facts that settle without a text.
pub(super) fn check(
    pack: &Pack,
    files: &[(String, FileId)],
    sources: &Sources,
    faults: &mut Vec<Diagnostic>,
) {
    for (language, file) in files {
        let Some(labels) = pack.labels.get(language) else {
            continue;
        };
        let text = &sources.get(*file).text;
        for key in labels.keys() {
            let Some((group, name)) = key.split_once('.') else {
                continue;
            };
            let Some(known) = names(pack, group) else {
                continue;
            };
            // What a turning point does may have words of its own.
            let name = match name.rsplit_once('.') {
                Some((name, "starts" | "ends" | "less" | "more")) if group == "turn" => name,
                _ => name,
            };
            if !known.contains(&name) {
                let start = text.find(&format!("\n{key},")).map_or(0, |at| at + 1);
                let end = if start == 0 { 0 } else { start + key.len() };
                let span = Span {
                    file: *file,
                    start: start as u32,
                    end: end as u32,
                };
                let fault = Diagnostic::fault(span, format!("`{key}` names nothing"))
                    .expected(format!("`{group}.` and a name of the pack"));
                faults.push(super::declare::with_near(fault, nearest(name, known)));
            }
        }
        if language != ENGLISH && pack.labels.contains_key(ENGLISH) {
            continue;
        }
        let missing = |key: String, span: Span| {
            (!labels.contains_key(&key)).then(|| {
                Diagnostic::fault(span, format!("`labels.{language}.csv` has no text for it"))
                    .expected(format!("a row with the key `{key}`"))
            })
        };
        let items = pack
            .definitions
            .iter()
            .filter(|d| d.item.is_some())
            .filter_map(|d| missing(format!("item.{}", d.name), d.name_span));
        let notes = pack
            .notes
            .iter()
            .filter_map(|n| missing(format!("note.{}", n.text), n.when.span));
        let settling =
            settling(pack).filter_map(|f| missing(format!("settles.{}", f.name), f.span?));
        faults.extend(items.chain(notes).chain(settling));
    }
}
