//! A section: a small pack in one text, with what is expected of it.
//!
//! Lines up to the first `@ FILE` line are the rules; each `@ FILE` line starts another file of the pack. Among them:
//! `amount: NAME = VALUE UNIT [a PERIOD] [from DAY] [to DAY]` is a row of `amounts.csv`; `household: FACT = VALUE, …`,
//! `adult: …`, `job of 2: …` add a record; `expect: …` says what comes out; `# Fault: FROM-TO MESSAGE` stands above the line
//! that is at fault (columns, both included) or says `nowhere`. The first four may stand behind a `#`.

use hourworth::diag::Diagnostic;
use hourworth::load::{Files, PackFiles, TextFile, check_pack};
use hourworth::rules::Pack;
use hourworth::source::Sources;

/// A record of the household: kind, position of the owner counted from 1, facts.
pub struct Record {
    pub kind: String,
    pub owner: usize,
    pub facts: Vec<(String, String)>,
}

pub struct Section {
    pub name: String,
    files: Vec<(String, String)>,
    pub records: Vec<Record>,
    pub expects: Vec<String>,
    /// File, line, and `FROM-TO MESSAGE`; line 0 for a fault without a place.
    pub faults: Vec<(String, usize, String)>,
}

const MANIFEST: &str = r#"title = "Test"
area = "Harrowmere"
currency = "GBP"
period = "month"
covers = { from = 2026-01-01, to = 2026-12-31 }
[dates]
day = "the day"
"#;
const RULES: &str = "test.rules";

/// All sections of a file: `--- name ---` starts each.
pub fn sections(text: &str) -> Vec<Section> {
    let mut out: Vec<(String, String)> = vec![];
    for line in text.lines() {
        match line
            .strip_prefix("--- ")
            .and_then(|l| l.strip_suffix(" ---"))
        {
            Some(name) => out.push((name.to_owned(), String::new())),
            None => {
                if let Some((_, body)) = out.last_mut() {
                    body.push_str(line);
                    body.push('\n');
                }
            }
        }
    }
    out.into_iter()
        .map(|(name, body)| Section::new(name, &body))
        .collect()
}

impl Section {
    pub fn new(name: String, body: &str) -> Section {
        let mut section = Section {
            name,
            files: vec![],
            records: vec![],
            expects: vec![],
            faults: vec![],
        };
        let (mut file, mut rows) = (RULES.to_owned(), vec![]);
        let mut text = String::new();
        if !body
            .lines()
            .take_while(|l| !l.starts_with("@ "))
            .any(|l| l.starts_with("part "))
        {
            text.push_str("part \"Test\" dated by day\n");
        }
        for line in body.lines() {
            if let Some(next) = line.strip_prefix("@ ") {
                section.files.push((
                    std::mem::replace(&mut file, next.to_owned()),
                    std::mem::take(&mut text),
                ));
            } else if let Some(fault) = line.strip_prefix("# Fault: ") {
                let at = if fault.starts_with("nowhere ") {
                    0
                } else {
                    text.lines().count() + 1
                };
                // Messages name a local file without its folder.
                let name = file.trim_start_matches("local/").to_owned();
                section.faults.push((name, at, fault.to_owned()));
            } else if file == RULES && section.header(line, &mut rows) {
            } else {
                text.push_str(line);
                text.push('\n');
            }
        }
        section.files.push((file, text));
        section.complete(rows);
        section
    }

    /// Takes a line that is not rule text.
    fn header(&mut self, line: &str, rows: &mut Vec<String>) -> bool {
        if let Some((before, expect)) = line.split_once("expect: ") {
            self.expects.push(expect.to_owned());
            // Rule text may stand before it.
            return matches!(before.trim(), "" | "#");
        }
        let Some((head, rest)) = line.trim_start_matches("# ").split_once(": ") else {
            return false;
        };
        let (kind, owner) = head.split_once(" of ").unwrap_or((head, "1"));
        let Ok(owner) = owner.parse() else {
            return false;
        };
        if kind.contains(' ') {
            return false;
        }
        if kind == "amount" {
            rows.push(amount_row(rest));
            return true;
        }
        let facts = rest
            .split(", ")
            .filter_map(|f| f.split_once(" = "))
            .map(|(a, b)| (a.to_owned(), b.to_owned()))
            .collect();
        self.records.push(Record {
            kind: kind.to_owned(),
            owner,
            facts,
        });
        true
    }

    /// Adds the files that the section does not give, and an item that needs each figure that is asked for.
    fn complete(&mut self, rows: Vec<String>) {
        let given = |files: &[(String, String)], name: &str| files.iter().any(|(n, _)| n == name);
        let rules = self
            .files
            .iter_mut()
            .find(|(n, _)| n == RULES)
            .expect("the first file");
        let mut shown = vec![];
        for expect in &self.expects {
            let head = expect.split_once(" = ").map_or("", |(head, _)| head);
            let (name, kind) = name_and_kind(head);
            if !["", "note", "held"].contains(&name)
                && !rules.1.contains(&format!("item {name}:"))
                && !shown.contains(&(name, kind))
            {
                rules.1.push_str(&format!(
                    "per {kind}\nitem shown_{name}: passport = {name} is {name} see \"shown\"\n"
                ));
                shown.push((name, kind));
            }
        }
        if !given(&self.files, "pack.toml") {
            self.files
                .push(("pack.toml".to_owned(), MANIFEST.to_owned()));
        }
        if !given(&self.files, "order.txt") {
            self.files
                .push(("order.txt".to_owned(), format!("{RULES}\n")));
        }
        if !rows.is_empty() {
            let header = "name,from,to,value,unit,period,source,locator,status\n";
            self.files.push((
                "amounts.csv".to_owned(),
                format!("{header}{}\n", rows.join("\n")),
            ));
        }
    }

    /// Checks the pack.
    pub fn check(&self) -> Result<Pack, (Sources, Vec<Diagnostic>)> {
        let file = |(name, text): &(String, String)| TextFile {
            name: name.clone(),
            text: text.clone(),
            sha256: String::new(),
        };
        check_pack(&PackFiles {
            name: self.name.clone(),
            files: Files(self.files.iter().map(file).collect()),
        })
    }

    /// What the fault lines of this pack would have to be.
    pub fn found(&self) -> Vec<(String, usize, String)> {
        let Err((sources, faults)) = self.check() else {
            return vec![];
        };
        faults.iter().map(|fault| place(fault, &sources)).collect()
    }
}

/// `pay of adult 1 at 10 hours` names `pay` and `adult`.
pub fn name_and_kind(head: &str) -> (&str, &str) {
    let mut words = head.split(' ');
    let name = words.next().unwrap_or("");
    (
        name,
        if words.next() == Some("of") {
            words.next().unwrap_or("household")
        } else {
            "household"
        },
    )
}

fn amount_row(text: &str) -> String {
    let (name, rest) = text
        .split_once(" = ")
        .expect("an amount says NAME = VALUE UNIT");
    let words: Vec<&str> = rest.split(' ').collect();
    let after = |word: &[&str]| {
        words
            .iter()
            .position(|w| word.contains(w))
            .map_or("", |at| words[at + 1])
    };
    let from = if after(&["from"]).is_empty() {
        "2020-01-01"
    } else {
        after(&["from"])
    };
    let (value, status) = if words[0] == "absent" {
        ("", "absent")
    } else {
        (words[0], "read")
    };
    format!(
        "{name},{from},{},{value},{},{},Harrowmere Gazette,p. 1,{status}",
        after(&["to"]),
        words[1],
        after(&["a", "an"])
    )
}

fn place(fault: &Diagnostic, sources: &Sources) -> (String, usize, String) {
    let words = Diagnostic {
        span: None,
        ..fault.clone()
    }
    .line(sources);
    let Some(span) = fault.span else {
        return (RULES.to_owned(), 0, format!("nowhere {words}"));
    };
    let (line, from) = sources.line_column(span.file, span.start);
    let covered = sources
        .slice(span)
        .lines()
        .next()
        .unwrap_or("")
        .trim_end()
        .chars()
        .count();
    (
        sources.get(span.file).name.clone(),
        line,
        format!("{from}-{} {words}", from + covered.max(1) - 1),
    )
}
