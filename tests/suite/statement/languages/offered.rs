//! Which languages a list may ask for, and what is told where one is not there.

use super::*;
use hourworth::load::Error;
use std::fs;
use std::process::Command;

/// A copy of the pack and the list.
struct Desk(tempfile::TempDir);

impl Desk {
    fn new() -> Desk {
        let desk = Desk(tempfile::tempdir().expect("a folder"));
        for part in ["pack", "list"] {
            fs::create_dir(desk.path(part)).expect("a folder");
            for entry in fs::read_dir(folder(part)).expect("the folder") {
                let from = entry.expect("a file").path();
                let to = desk.path(part).join(from.file_name().expect("a name"));
                fs::copy(from, to).expect("a copy");
            }
        }
        desk
    }

    fn path(&self, name: &str) -> PathBuf {
        self.0.path().join(name)
    }

    fn change(&self, name: &str, from: &str, to: &str) {
        let text = fs::read_to_string(self.path(name)).expect(name);
        assert!(text.contains(from), "{name} has no {from}");
        fs::write(self.path(name), text.replace(from, to)).expect(name);
    }

    fn vet(&self, name: &str) -> (i32, String) {
        let output = Command::new(env!("CARGO_BIN_EXE_hourworth"))
            .args(["vet", name])
            .current_dir(self.0.path())
            .output()
            .expect("it runs");
        let status = output.status.code().expect("a status");
        (status, String::from_utf8(output.stdout).expect("text"))
    }
}

#[test]
fn a_label_that_a_language_lacks_is_a_fault_with_its_key() {
    let desk = Desk::new();
    assert_eq!(desk.vet("pack"), (0, "rule pack `pack`: no fault\n".into()));
    desk.change(
        "pack/labels.cy.csv",
        "turn.income_tax,Mae treth incwm yn dechrau\n",
        "",
    );
    desk.change("pack/labels.cy.csv", "area,Ynys ddychmygol\n", "");
    desk.change("pack/labels.es.csv", ",alquiler {value}", ",alquiler");
    desk.change("pack/labels.de.csv", "left_out.2,", "left_out.3,");
    let (status, out) = desk.vet("pack");
    assert_eq!(status, 1);
    let expected = [
        "`labels.cy.csv` has no text for `area`; expected a row with this key",
        "`labels.cy.csv` has no text for `turn.income_tax`; expected what `labels.en.csv` has as `Income tax starts`",
        "`labels.de.csv` has no text for `left_out.2`; expected what `labels.en.csv` has as `one-off payments`",
        "`labels.de.csv` has the key `left_out.3`; expected a key that `labels.en.csv` has",
        "`labels.es.csv` has or lacks `{value}` at `said.rent`; expected the same as in English",
        "rule pack `pack`: 5 faults",
    ];
    assert_eq!(out.lines().collect::<Vec<_>>(), expected);
}

#[test]
fn a_language_without_complete_labels_is_not_offered() {
    let desk = Desk::new();
    desk.change("pack/labels.es.csv", "area,Isla inventada\n", "");
    let (status, out) = desk.vet("list");
    assert_eq!(status, 1);
    let lines: Vec<&str> = out.lines().collect();
    assert_eq!(
        lines[0],
        "households.csv row 4, column language: found `es`, an unknown language; \
         expected `cy`, `en` or `de`; did you mean `en`?"
    );
    assert_eq!(lines.len(), 3, "{out}");
}

#[test]
fn an_unknown_language_of_the_list_stops_it_with_its_place() {
    let desk = Desk::new();
    desk.change("list/list.toml", "language = \"cy\"", "language = \"cz\"");
    let fault = match prepare(&desk.path("list"), &Places::default()) {
        Err(Error::Faults(faults)) => faults.iter().map(ToString::to_string).collect::<Vec<_>>(),
        Err(other) => panic!("{other}"),
        Ok(_) => panic!("a language that does not exist"),
    };
    assert_eq!(
        fault,
        [
            "list.toml line 5, column 12, key language: found `cz`, an unknown language; \
             expected `en`, `cy`, `de` or `es`; did you mean `cy`?"
        ]
    );
}

#[test]
fn a_word_that_has_no_label_in_the_language_holds_the_household() {
    let prepared = prepare(&folder("list"), &Places::default()).expect("the list can be read");
    let mut books = Books::new(prepared.pack.clone(), prepared.terms.clone());
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    let household = households(&prepared).swap_remove(0);
    let Ok(Verdict::Assessed(assessment)) = books.assess(&household) else {
        panic!("it is assessed");
    };
    let context = press(&prepared)
        .context(&household)
        .expect("a context")
        .clone();
    for key in [
        "item.childcare",
        "part.Household support",
        "title",
        "fact.rent",
    ] {
        let mut context = context.clone();
        context.labels.remove(key);
        if key == "fact.rent" {
            context.labels.remove("said.rent");
        }
        let fault = typeset_with_view(&mut typesetter, &assessment, &context).map(|_| ());
        let expected = StatementError::Label {
            language: "cy".into(),
            key: key.into(),
        };
        assert_eq!(fault, Err(expected));
    }
}
