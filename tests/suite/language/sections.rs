//! Runs every section of `tests/language/*.txt`.

use super::bench::differences;
use super::section::{Section, sections};
use std::fs;

fn all() -> Vec<(String, Vec<Section>)> {
    let mut files: Vec<_> = fs::read_dir("tests/language")
        .expect("the sections")
        .map(|e| e.expect("a file").path())
        .collect();
    files.sort();
    files
        .into_iter()
        .filter(|path| path.extension().is_some_and(|e| e == "txt"))
        .map(|path| {
            (
                path.display().to_string(),
                sections(&fs::read_to_string(&path).expect("a text")),
            )
        })
        .collect()
}

/// What is wrong with a section, or nothing.
fn judged(section: &Section) -> Vec<String> {
    let mut out = vec![];
    let mut found = section.found();
    let mut wanted = section.faults.clone();
    found.sort();
    wanted.sort();
    for fault in found.iter().filter(|f| !wanted.contains(f)) {
        out.push(format!(
            "  found    {}:{} # Fault: {}",
            fault.0, fault.1, fault.2
        ));
    }
    for fault in wanted.iter().filter(|f| !found.contains(f)) {
        out.push(format!(
            "  expected {}:{} # Fault: {}",
            fault.0, fault.1, fault.2
        ));
    }
    if section.name.starts_with("refuses-") == wanted.is_empty() {
        out.push("  a section that is refused, and only that, has fault lines and a name with `refuses-`".into());
    }
    match section.check() {
        Ok(pack) => out.extend(
            differences(section, &pack)
                .into_iter()
                .map(|d| format!("  {d}")),
        ),
        Err(_) if wanted.is_empty() => out.push("  refused".into()),
        Err(_) => {}
    }
    if wanted.is_empty() && section.expects.is_empty() {
        out.push("  the section expects nothing".into());
    }
    out
}

#[test]
fn every_section_gives_what_it_says() {
    let mut wrong = vec![];
    let mut names = vec![];
    for (file, sections) in all() {
        for section in sections {
            let found = judged(&section);
            if !found.is_empty() {
                wrong.push(format!("{file}, {}\n{}", section.name, found.join("\n")));
            }
            assert!(
                !names.contains(&section.name),
                "two sections are named `{}`",
                section.name
            );
            names.push(section.name);
        }
    }
    assert!(
        names.len() > 220,
        "only {} sections were found",
        names.len()
    );
    assert!(
        wrong.is_empty(),
        "{} of {} sections:\n{}",
        wrong.len(),
        names.len(),
        wrong.join("\n")
    );
}

#[test]
fn a_wrong_section_is_noticed() {
    let judged_of = |text: &str| judged(&sections(text)[0]);
    let item = "item pay: pay = money 5 a month see \"s.1\"\n";
    assert_eq!(
        judged_of(&format!("--- a ---\n{item}expect: pay = 5.00 a month\n")),
        [""; 0]
    );
    assert_eq!(
        judged_of(&format!("--- a ---\n{item}expect: pay = 6.00 a month\n")),
        ["  pay = 5.00 a month, expected 6.00 a month"]
    );
    assert_eq!(
        judged_of(&format!("--- a ---\n{item}")),
        ["  the section expects nothing"]
    );
    assert_eq!(
        judged_of(&format!("--- refuses-a ---\n{item}# Fault: 1-2 no\n")),
        ["  expected test.rules:3 # Fault: 1-2 no"]
    );
    assert!(
        !judged_of(
            "--- a ---\nitem pay: pay = money 5 a week see \"s.1\"\nexpect: pay = 5.00 a week\n"
        )
        .is_empty()
    );
}
