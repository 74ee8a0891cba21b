//! Documents that are true: paths that they name exist, files stay short, and no text says what it should not.

use std::fs;
use std::path::Path;

const DOCUMENTS: [&str; 3] = ["README.md", "DEVELOPERS.md", "rules/README.md"];
/// Folders that a path in a document starts with.
const TOPS: [&str; 7] = [
    "src/",
    "tests/",
    "templates/",
    "rules/",
    "demo_cases/",
    "benches/",
    ".ci/",
];
/// Words of other tools. The page of words in the design says what to write in their place.
const FORBIDDEN: [&str; 8] = [
    "baseline",
    "reform",
    "scenario",
    "policy",
    "entity",
    "variable",
    "parameter",
    "better off",
];
/// Proper names that hold such a word.
const NAMES: [&str; 2] = ["Welfare Reform Act", "Welfare Reform and Work Act"];

/// Every text file of the tree, with its path below the top; not what is built, and nothing hidden but `.ci`.
fn tree() -> Vec<(String, String)> {
    fn gather(folder: &Path, out: &mut Vec<(String, String)>) {
        for entry in fs::read_dir(folder).expect("a folder of the tree") {
            let path = entry.expect("an entry").path();
            let name = path
                .strip_prefix(".")
                .unwrap_or(&path)
                .to_string_lossy()
                .replace('\\', "/");
            let hidden = name.starts_with('.') && !name.starts_with(".ci");
            if hidden || ["target", "out", "Cargo.lock"].contains(&name.as_str()) {
                continue;
            }
            if path.is_dir() {
                gather(&path, out);
            } else if let Ok(text) = fs::read_to_string(&path) {
                out.push((name, text));
            }
        }
    }
    let mut out = vec![];
    gather(Path::new("."), &mut out);
    out
}

/// Paths in backticks. Words with a placeholder (`NAME`, `*`, `<…>`, `…`) name no file.
fn paths(text: &str) -> Vec<&str> {
    let mut out = vec![];
    let mut fenced = false;
    for line in text.lines() {
        if line.trim_start().starts_with("```") {
            fenced = !fenced;
        } else if !fenced {
            out.extend(line.split('`').skip(1).step_by(2));
        }
    }
    let placeholder = |path: &str| {
        path.contains(['*', '<', '…', ' ']) || path.contains("NAME") || path.contains("PACK")
    };
    let root = |path: &str| {
        [
            "README.md",
            "DEVELOPERS.md",
            "Cargo.toml",
            "Cargo.lock",
            "clippy.toml",
        ]
        .contains(&path)
    };
    out.retain(|path| {
        !placeholder(path) && (root(path) || TOPS.iter().any(|top| path.starts_with(top)))
    });
    out
}

#[test]
fn every_path_that_a_document_names_exists() {
    let mut named = 0;
    for document in DOCUMENTS {
        let Ok(text) = fs::read_to_string(document) else {
            continue;
        };
        for path in paths(&text) {
            named += 1;
            assert!(
                Path::new(path).exists(),
                "{document} names `{path}`, which does not exist"
            );
        }
    }
    assert!(named > 10, "only {named} paths were found");
}

#[test]
fn paths_are_found_in_backticks_alone() {
    let text = "see `src/rules/ast.rs`, src/none and `rules/uk`\n```sh\n`src/not`\n```\n`src/NAME.rs` `tests/*.rs` `Cargo.toml` `x = 1`";
    assert_eq!(paths(text), ["src/rules/ast.rs", "rules/uk", "Cargo.toml"]);
}

#[test]
fn source_files_stay_below_800_lines() {
    for (name, text) in tree() {
        if name.starts_with("src/") && name.ends_with(".rs") {
            assert!(
                text.lines().count() < 800,
                "{name} has {} lines: split it",
                text.lines().count()
            );
        }
    }
}

/// Places of one machine, which mean nothing to anybody else.
fn machine_path(text: &str) -> Option<&str> {
    // Put together here, so that this file does not find itself.
    let folders = ["work", "tmp", "home", "root", "Users", "mnt"].map(|name| format!("/{name}/"));
    text.lines().find(|line| {
        folders.iter().any(|folder| {
            // `https://example.org/home/` and `a/tmp/b` are no such places.
            line.match_indices(folder.as_str()).any(|(at, _)| {
                !line[..at].ends_with(|c: char| c.is_alphanumeric() || ".-_})".contains(c))
            })
        })
    })
}

#[test]
fn no_file_names_a_place_of_one_machine() {
    for (name, text) in tree() {
        if let Some(line) = machine_path(&text) {
            panic!("{name}: {line}");
        }
    }
    assert!(machine_path(&format!("see {}work/x", '/')).is_some());
    assert!(machine_path("https://example.org/home/x and src/tmp/y").is_none());
}

/// The forbidden words of a text, in any of their forms, with the line.
fn forbidden(text: &str) -> Vec<String> {
    let mut out = vec![];
    for line in text.lines() {
        let mut line = line.to_owned();
        for name in NAMES {
            line = line.replace(name, "");
        }
        let lower = line.to_lowercase();
        for word in FORBIDDEN {
            let stem = word.strip_suffix('y').unwrap_or(word);
            let found = lower.match_indices(stem).any(|(at, _)| {
                let starts = !lower[..at].ends_with(|c: char| c.is_alphanumeric());
                let rest: String = lower[at + stem.len()..]
                    .chars()
                    .take_while(|c| c.is_alphanumeric())
                    .collect();
                let ends = if stem == word {
                    ["", "s", "ed", "s’"].contains(&rest.as_str())
                } else {
                    ["y", "ies"].contains(&rest.as_str())
                };
                starts && ends
            });
            if found {
                out.push(format!("`{word}` in: {}", line.trim()));
            }
        }
    }
    out
}

/// Texts that people read who never saw the code: letters, labels, rules, the reference, help and messages.
fn is_for_users(name: &str) -> bool {
    let folder = |top: &str| name.starts_with(top);
    // Titles of sources in amounts and examples are quoted as published.
    let quoted = folder("rules/") && (name.contains("/examples/") || name.ends_with("amounts.csv"));
    let own =
        folder("templates/") || folder("rules/") || folder("demo_cases/") || folder("src/cli/");
    (own && !quoted) || DOCUMENTS.contains(&name)
}

#[test]
fn no_text_for_users_has_a_forbidden_word() {
    let wrong: Vec<String> = tree()
        .iter()
        .filter(|(name, _)| is_for_users(name))
        .flat_map(|(name, text)| {
            forbidden(text)
                .into_iter()
                .map(move |what| format!("{name}: {what}"))
        })
        .collect();
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    assert!(
        is_for_users("templates/text/en.toml")
            && is_for_users("rules/uk/labels.en.csv")
            && !is_for_users("rules/uk/amounts.csv")
    );
}

#[test]
fn forbidden_words_are_found_in_every_form() {
    let count = |text: &str| forbidden(text).len();
    assert_eq!(
        count("Policies, a policy; variables; you are better off"),
        3
    );
    assert_eq!(count("Welfare Reform Act 2012 s.96"), 0);
    assert_eq!(
        count("an invariable informality, identities and reformation"),
        0
    );
    assert_eq!(count("the Reformed baseline"), 2);
}
