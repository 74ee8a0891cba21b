//! Imports between the folders of `src` run one way: each may use only what the table below allows.
//!
//! The table is the one of the design, with what its types bring along: a program holds indices, spans and numbers, so whoever
//! takes one may name them too; `measures` gets its inputs as `case` and `program` have them; `load` turns what `rules`
//! exports into a `case::Schema`, whose bounds are numbers, and reads texts into sources. `batch` and `cli` may use all.

use std::fs;
use std::path::Path;

const ALLOWED: [(&str, &[&str]); 13] = [
    ("index", &[]),
    ("source", &["index"]),
    ("diag", &["index", "source"]),
    ("num", &[]),
    ("program", &["index", "source", "num"]),
    ("rules", &["index", "source", "num", "program", "diag"]),
    ("case", &["source", "num", "diag"]),
    ("engine", &["index", "source", "num", "program", "case"]),
    ("measures", &["source", "num", "program", "case", "engine"]),
    ("statement", &["num", "diag", "measures"]),
    ("load", &["source", "num", "diag", "rules", "case"]),
    (
        "batch",
        &[
            "index",
            "source",
            "num",
            "program",
            "rules",
            "case",
            "engine",
            "measures",
            "statement",
            "load",
            "diag",
        ],
    ),
    (
        "cli",
        &[
            "index",
            "source",
            "num",
            "program",
            "rules",
            "case",
            "engine",
            "measures",
            "statement",
            "load",
            "diag",
            "batch",
        ],
    ),
];

/// Code without comments. Texts stay: nothing in one looks like a path into the crate.
fn code(text: &str) -> String {
    let without = text.lines().map(|line| match line.find("//") {
        // An address in a text is no comment.
        Some(at) if line[..at].ends_with(':') => line,
        Some(at) => &line[..at],
        None => line,
    });
    without.collect::<Vec<_>>().join("\n")
}

/// Folders of the crate that a file names: in paths that start with `crate::`, `hourworth::`, or as many `super::` as lead to the
/// top.
fn named(file: &str, text: &str) -> Vec<String> {
    let code = code(text);
    let inside = file.trim_end_matches(".rs").trim_end_matches("/mod");
    let depth = inside.split('/').count();
    let mut out = vec![];
    let to_the_top = "super::".repeat(depth);
    for start in ["crate::", "hourworth::", to_the_top.as_str()] {
        for (at, _) in code.match_indices(start) {
            let before = code[..at].chars().next_back();
            // `super::super::super::` is found once, and `my_crate::` is another crate.
            if before.is_some_and(|c| c.is_alphanumeric() || c == '_' || c == ':') {
                continue;
            }
            out.extend(heads(&code[at + start.len()..]));
        }
    }
    out
}

/// First words of a path, or of each path in a group `{a::b, c}`.
fn heads(path: &str) -> Vec<String> {
    let word = |text: &str| {
        text.trim_start()
            .chars()
            .take_while(|c| c.is_alphanumeric() || *c == '_')
            .collect::<String>()
    };
    let Some(group) = path.strip_prefix('{') else {
        return vec![word(path)];
    };
    let (mut depth, mut out, mut start) = (0, vec![], 0);
    for (at, c) in group.char_indices() {
        match c {
            '{' => depth += 1,
            '}' if depth > 0 => depth -= 1,
            ',' | '}' if depth == 0 => {
                out.push(word(&group[start..at]));
                start = at + 1;
                if c == '}' {
                    break;
                }
            }
            _ => {}
        }
    }
    out.retain(|word| !word.is_empty());
    out
}

/// What a file of `src` imports against the table; one line each. `file` is its path below `src`, with `/`.
fn forbidden(file: &str, text: &str) -> Vec<String> {
    let folder = file.split('/').next().unwrap_or("").trim_end_matches(".rs");
    if ["lib", "main"].contains(&folder) {
        return vec![];
    }
    let Some((_, allowed)) = ALLOWED.iter().find(|(name, _)| *name == folder) else {
        return vec![format!("{file}: `{folder}` stands in no row of the table")];
    };
    let known = |name: &str| ALLOWED.iter().any(|(n, _)| *n == name);
    let wrong = named(file, text)
        .into_iter()
        .filter(|name| known(name) && name != folder && !allowed.contains(&name.as_str()));
    wrong
        .map(|name| {
            format!(
                "{file}: `{folder}` imports `{name}`, expected only {}",
                allowed.join(", ")
            )
        })
        .collect()
}

fn files(folder: &Path, out: &mut Vec<(String, String)>) {
    for entry in fs::read_dir(folder).expect("a folder of the source") {
        let path = entry.expect("a file").path();
        if path.is_dir() {
            files(&path, out);
        } else if path.extension().is_some_and(|e| e == "rs") {
            let name = path.strip_prefix("src").expect("below src").components();
            let name: Vec<_> = name
                .map(|c| c.as_os_str().to_string_lossy().into_owned())
                .collect();
            out.push((
                name.join("/"),
                fs::read_to_string(&path).expect("a source file"),
            ));
        }
    }
}

#[test]
fn every_import_is_allowed() {
    let mut found = vec![];
    files(Path::new("src"), &mut found);
    let wrong: Vec<String> = found
        .iter()
        .flat_map(|(file, text)| forbidden(file, text))
        .collect();
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    // The reading finds something at all: these imports are known to be there.
    let of = |folder: &str| {
        found
            .iter()
            .filter(|(f, _)| f.starts_with(folder))
            .flat_map(|(f, t)| named(f, t))
            .collect::<Vec<_>>()
    };
    assert!(
        of("engine/").iter().any(|n| n == "program") && of("load/").iter().any(|n| n == "rules")
    );
}

#[test]
fn the_table_runs_one_way() {
    // The rows stand in an order in which each names only rows before it, `diag` and `num` apart.
    for (at, (name, allowed)) in ALLOWED.iter().enumerate() {
        for other in *allowed {
            let place = ALLOWED
                .iter()
                .position(|(n, _)| n == other)
                .expect("a row of the table");
            assert!(place < at, "`{name}` names `{other}`");
        }
    }
}

#[test]
fn a_wrong_import_is_found_however_it_is_written() {
    let wrong = |file: &str, text: &str| forbidden(file, text).len();
    assert_eq!(wrong("rules/check.rs", "use crate::case::Schema;"), 1);
    assert_eq!(
        wrong(
            "rules/check.rs",
            "use crate::{diag::Diagnostic, case::{Schema, Known}, engine};"
        ),
        2
    );
    assert_eq!(
        wrong(
            "rules/check.rs",
            "fn f() -> crate::load::Error { hourworth::cli::run() }"
        ),
        2
    );
    assert_eq!(
        wrong(
            "rules/deep/check.rs",
            "use super::super::super::load::Error;"
        ),
        1
    );
    assert_eq!(wrong("rules/mod.rs", "use super::load::Error;"), 1);
    assert_eq!(
        wrong(
            "num/money.rs",
            "use crate::num::Fraction; use super::Fraction;"
        ),
        0
    );
    assert_eq!(wrong("num/money.rs", "use crate::index::Id;"), 1);
    assert_eq!(
        wrong(
            "rules/check.rs",
            "// use crate::case::Schema;\nuse other_crate::case::Schema;"
        ),
        0
    );
    assert_eq!(wrong("cli/mod.rs", "use crate::batch::Places;"), 0);
    assert_eq!(wrong("elsewhere/mod.rs", ""), 1);
}
