//! The reference in `rules/README.md`: every example marked `rules` is checked and gives what stands beside it, and every word of
//! the grammar occurs in one.

use super::bench::differences;
use super::section::Section;
use std::collections::BTreeSet;
use std::fs;

/// Fenced blocks with this mark, each with the number of its first line.
fn blocks(text: &str, mark: &str) -> Vec<(usize, String)> {
    let mut out: Vec<(usize, String)> = vec![];
    let mut inside = None;
    for (at, line) in text.lines().enumerate() {
        match (line.strip_prefix("```"), inside) {
            (Some(_), Some(_)) => inside = None,
            (Some(found), None) => {
                inside = Some(found == mark);
                if found == mark {
                    out.push((at + 2, String::new()));
                }
            }
            (None, Some(true)) => {
                let (_, body) = out.last_mut().expect("an open block");
                body.push_str(line);
                body.push('\n');
            }
            (None, Some(false) | None) => {}
        }
    }
    out
}

fn reference() -> String {
    fs::read_to_string("rules/README.md").expect("the reference")
}

#[test]
fn every_example_gives_what_stands_beside_it() {
    let mut wrong = vec![];
    let blocks = blocks(&reference(), "rules");
    assert!(blocks.len() >= 12, "only {} examples", blocks.len());
    for (line, body) in blocks {
        let section = Section::new(format!("line {line}"), &body);
        assert!(
            !section.expects.is_empty(),
            "the example at line {line} expects nothing"
        );
        match section.check() {
            Ok(pack) => wrong.extend(
                differences(&section, &pack)
                    .into_iter()
                    .map(|d| format!("{}: {d}", section.name)),
            ),
            Err(_) => wrong.extend(
                section
                    .found()
                    .into_iter()
                    .map(|f| format!("{}: {}:{} {}", section.name, f.0, f.1, f.2)),
            ),
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// The words in quotes of the grammar.
fn grammar_words() -> BTreeSet<String> {
    let grammar = blocks(&reference(), "")
        .into_iter()
        .find(|(_, body)| body.starts_with("file "))
        .expect("the grammar")
        .1;
    let quoted = grammar.split('"').skip(1).step_by(2);
    quoted
        .filter(|word| word.chars().all(|c| c.is_ascii_lowercase()))
        .map(str::to_owned)
        .collect()
}

fn words_of(text: &str) -> BTreeSet<String> {
    let lines = text.lines().map(|l| l.split('#').next().unwrap_or(""));
    lines
        .flat_map(|l| l.split(|c: char| !c.is_ascii_alphanumeric() && c != '_'))
        .map(str::to_owned)
        .collect()
}

#[test]
fn every_word_of_the_grammar_has_an_example() {
    let examples: String = blocks(&reference(), "rules")
        .into_iter()
        .map(|(_, body)| body)
        .collect();
    let known = words_of(&examples);
    let without: Vec<String> = grammar_words()
        .into_iter()
        .filter(|word| !known.contains(word))
        .collect();
    assert!(without.is_empty(), "no example of {}", without.join(", "));
}

#[test]
fn every_word_of_the_grammar_has_a_section_that_is_worked_out() {
    let texts: String = ["values", "rounding", "kinds", "law", "again", "settles"]
        .map(|name| fs::read_to_string(format!("tests/language/{name}.txt")).expect("the sections"))
        .concat();
    let known = words_of(&texts);
    let without: Vec<String> = grammar_words()
        .into_iter()
        .filter(|word| !known.contains(word))
        .collect();
    assert!(without.is_empty(), "no section with {}", without.join(", "));
    assert!(grammar_words().len() > 70);
}
