//! The same texts through the whole tool: written into a list as a spreadsheet would, read, printed by the program itself.

use super::list::{NASTY, TERMINAL};
use std::path::{Path, PathBuf};
use std::process::Command;

/// The household of the demo list that is copied.
const MODEL: &str = "HW-08";

fn table(path: &Path) -> (csv::StringRecord, Vec<csv::StringRecord>) {
    let mut reader = csv::ReaderBuilder::new()
        .flexible(true)
        .from_path(path)
        .expect("a table");
    let head = reader.headers().expect("a head").clone();
    (
        head,
        reader.records().map(|row| row.expect("a row")).collect(),
    )
}

/// A list with one household for each text: `N…` has it in name, address and offer; `H…` as the reason to hold it.
fn list(folder: &Path, texts: &[&str]) {
    let demo = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("demo_cases/harrowmere");
    std::fs::copy(demo.join("list.toml"), folder.join("list.toml")).expect("copied");
    for name in ["households.csv", "members.csv", "jobs.csv"] {
        let (head, rows) = table(&demo.join(name));
        let mut out = csv::WriterBuilder::new()
            .flexible(true)
            .from_path(folder.join(name))
            .expect("a file");
        out.write_record(&head).expect("written");
        for start in ["H", "N"] {
            for (at, text) in texts.iter().enumerate() {
                for row in rows.iter().filter(|row| &row[0] == MODEL) {
                    let cells = head.iter().zip(row).map(|(column, cell)| match column {
                        "household" => format!("{start}{at:03}"),
                        "hold" if start == "H" => (*text).to_owned(),
                        "address" | "name" if start == "N" => (*text).to_owned(),
                        "offer" if start == "N" && !cell.is_empty() => (*text).to_owned(),
                        _ => cell.to_owned(),
                    });
                    out.write_record(cells.collect::<Vec<_>>())
                        .expect("written");
                }
            }
        }
        out.flush().expect("written");
    }
}

#[test]
fn the_program_prints_holds_or_rejects_each_household_and_says_why() {
    let texts: Vec<&str> = NASTY.into_iter().chain(TERMINAL).collect();
    let folder = tempfile::tempdir().expect("a folder");
    let cases = folder.path().join("cases");
    std::fs::create_dir(&cases).expect("a folder");
    list(&cases, &texts);
    let to = folder.path().join("run");
    let output = Command::new(env!("CARGO_BIN_EXE_hourworth"))
        .args(["print", "--allow-rejects", "--issued", "2026-05-06", "--to"])
        .arg(&to)
        .arg(&cases)
        .output()
        .expect("it runs");
    let said = [output.stdout, output.stderr].map(|bytes| String::from_utf8(bytes).expect("UTF-8"));
    assert_eq!(output.status.code(), Some(0), "{said:?}");
    for part in &said {
        let sent = part.chars().find(|c| c.is_control() && *c != '\n');
        assert_eq!(sent, None, "sent to the terminal: {part:?}");
    }
    let (_, printed) = table(&to.join("statements.csv"));
    let (_, held) = table(&to.join("held.csv"));
    let (_, rejected) = table(&to.join("rejects.csv"));
    let is = |rows: &[csv::StringRecord], name: &str| -> Vec<String> {
        let of = rows
            .iter()
            .filter(|row| row.iter().any(|cell| cell == name));
        of.map(|row| row.iter().collect::<Vec<_>>().join(" | "))
            .collect()
    };
    for (at, text) in texts.iter().enumerate() {
        // A reason to hold is kept as typed; an apostrophe stands before what a spreadsheet would work out.
        let name = format!("H{at:03}");
        let (kept, refused) = (is(&held, &name), is(&rejected, &name));
        assert!(is(&printed, &name).is_empty(), "{text:?} does not hold");
        // Spaces and byte order marks at the ends of a cell do not count.
        let cell = text.trim_matches(|sign: char| sign.is_whitespace() || sign == '\u{feff}');
        let as_typed = kept.iter().any(|row| row.contains(cell));
        let named = refused.iter().any(|row| row.contains("hold"));
        assert!(as_typed || named, "{text:?}: {kept:?} {refused:?}");
        if text.starts_with(['=', '+', '-', '@']) {
            assert!(kept[0].contains(&format!("'{text}")), "{kept:?}");
        }
        // In the other fields it is printed, or a row says which field has which fault.
        let name = format!("N{at:03}");
        let why = [is(&held, &name), is(&rejected, &name)].concat();
        match is(&printed, &name).len() {
            0 => {
                assert!(!why.is_empty(), "{text:?} is nowhere");
                let fields = [
                    "`whose`",
                    "`address",
                    "`sections",
                    "`title`",
                    "`closing",
                    "name",
                    "offer",
                ];
                assert!(
                    why.iter()
                        .any(|row| fields.iter().any(|field| row.contains(field))),
                    "{text:?}: {why:?}"
                );
            }
            _ => assert!(why.is_empty(), "{text:?} is printed and {why:?}"),
        }
    }
    assert!(printed.len() >= 40, "{} printed", printed.len());
}
