//! `labels.<language>.csv`: the words that statements use for a pack's names. In: a text. Out: texts by key; faults for
//! keys that name nothing, and for items, notes and facts that settle without a text.

use super::pack::{FactDecl, Pack};
use crate::diag::{Diagnostic, nearest};
use crate::program::ItemKind;
use crate::source::{FileId, Sources, Span};
use std::collections::BTreeMap;

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
        _ => return None,
    })
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
