//! `labels.<language>.csv`: the words that statements use for a pack's names.

use crate::diag::Diagnostic;
use crate::source::{FileId, Span};
use std::collections::BTreeMap;

/// Reads one language's labels: `key,text` and any further columns, which are for the pack's authors.
pub(super) fn read(file: FileId, text: &str, faults: &mut Vec<Diagnostic>) -> BTreeMap<String, String> {
    let mut reader = csv::ReaderBuilder::new().flexible(true).from_reader(text.trim_start_matches('\u{feff}').as_bytes());
    let whole = Span { file, start: 0, end: 0 };
    let mut out = BTreeMap::new();
    let header_is_right = reader.headers().is_ok_and(|h| h.get(0) == Some("key") && h.get(1) == Some("text"));
    if !header_is_right {
        faults.push(Diagnostic::fault(whole, "these are not the columns of a label file").expected("key,text"));
        return out;
    }
    for record in reader.records() {
        let Ok(record) = record else {
            faults.push(Diagnostic::fault(whole, "not a readable table"));
            continue;
        };
        let start = record.position().map_or(0, |p| p.byte() as usize);
        let end = text[start.min(text.len())..].find('\n').map_or(text.len(), |at| start + at);
        let span = Span { file, start: start as u32, end: end as u32 };
        match (record.get(0).map(str::trim), record.get(1).map(str::trim)) {
            (Some(key), Some(words)) if !key.is_empty() && !words.is_empty() => {
                if out.insert(key.to_owned(), words.to_owned()).is_some() {
                    faults.push(Diagnostic::fault(span, format!("`{key}` has two texts")).expected("one row a key"));
                }
            }
            (Some(""), _) | (None, _) => {}
            (Some(key), _) => faults.push(Diagnostic::fault(span, format!("`{key}` has no text")).expected("a text in the second column")),
        }
    }
    out
}
