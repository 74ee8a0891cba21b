//! Local files over the United Kingdom pack: councils' published examples, the demo's councils, what is refused, and what a run
//! records of them.

use hourworth::batch::{Proof, prove};
use hourworth::load::{Asks, Files, check_pack, lay_local, read_examples, read_pack};
use hourworth::rules::Pack;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

/// The pack with the local files of a folder, by name.
fn laid(folder: &str, names: &[&str]) -> Pack {
    let mut files = read_pack("uk", None).expect("the pack is built in");
    let paths: Vec<PathBuf> = names
        .iter()
        .map(|name| Path::new(folder).join(format!("{name}.toml")))
        .collect();
    lay_local(&mut files, &[], None, &paths).expect("the files are there");
    check_pack(&files).unwrap_or_else(|(sources, faults)| {
        let lines: Vec<String> = faults.iter().map(|fault| fault.line(&sources)).collect();
        panic!("{}", lines.join("\n"))
    })
}

#[test]
fn councils_published_examples_are_met() {
    let pack = laid(
        "tests/local",
        &[
            "manchester_2024",
            "manchester_2017",
            "ealing_2024",
            "ealing_2021",
        ],
    );
    let text = fs::read_to_string("tests/local/examples.toml").expect("the examples");
    let files = Files::of_texts([("examples/local.toml", text.as_str())].into_iter());
    let examples = read_examples(&files).expect("the examples are sound");
    let (mut met, mut wrong) = (0, vec![]);
    for example in &examples {
        let Asks::Values(case) = &example.asks else {
            panic!("{} asks nothing", example.id)
        };
        for (expect, proof) in case.expects.iter().zip(prove(&pack, case)) {
            match proof {
                Proof::Met(_) => met += 1,
                other => wrong.push(format!("{}: {:?}: {other:?}", example.id, expect.quoted)),
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    assert_eq!((examples.len(), met), (12, 23));
}

fn hourworth(args: &[&str]) -> (i32, String, String) {
    let said = Command::new(env!("CARGO_BIN_EXE_hourworth"))
        .args(args)
        .output()
        .expect("the program starts");
    let text = |bytes| String::from_utf8(bytes).expect("text");
    (
        said.status.code().unwrap_or(-1),
        text(said.stdout),
        text(said.stderr),
    )
}

#[test]
fn vet_finds_out_what_a_local_file_is() {
    let (status, out, _) = hourworth(&["vet", "demo_cases/councils/harrowmere.toml"]);
    assert_eq!(
        out,
        "local file `demo_cases/councils/harrowmere.toml`: no fault, adds `harrowmere` to council_tax_scheme, laid over `United Kingdom`\n"
    );
    assert_eq!(status, 0);
    let (status, out, _) = hourworth(&[
        "vet",
        "uk",
        "--local",
        "demo_cases/councils/pennickmoor.toml",
        "--local",
        "demo_cases/councils/sallowby_vale.toml",
    ]);
    assert_eq!(out, "rule pack `uk`: no fault, with 2 local files\n");
    assert_eq!(status, 0);
}

#[test]
fn the_local_file_of_the_readme_is_sound() {
    let readme = fs::read_to_string("README.md").expect("the document");
    let start = readme
        .find("# Everything here is invented.")
        .expect("the example");
    let text = readme[start..].split("```").next().expect("its end");
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("otterham.toml");
    fs::write(&path, text).expect("written");
    let (status, out, _) = hourworth(&["vet", &path.to_string_lossy()]);
    assert!(
        out.contains("no fault, adds `otterham` to council_tax_scheme"),
        "{out}"
    );
    assert_eq!(status, 0);
    // Every table that the pack opens has its line in the table below the example.
    let manifest = fs::read_to_string("rules/uk/pack.toml").expect("the pack");
    let opened: Vec<&str> = manifest
        .split('"')
        .filter(|word| word.starts_with("local_"))
        .collect();
    assert!(opened.len() > 10, "{opened:?}");
    for table in opened {
        assert!(
            readme.contains(&format!("`{table}`")),
            "README.md lacks `{table}`"
        );
    }
}

#[test]
fn a_faulty_local_file_gives_its_messages() {
    let (status, out, _) = hourworth(&["vet", "demo_cases/faulty/local_file.toml"]);
    let expected =
        fs::read_to_string("demo_cases/faulty/local_file.messages.txt").expect("messages");
    assert_eq!(out, expected);
    assert_eq!(status, 1);
}

#[test]
fn a_list_outside_the_days_of_a_local_file_is_refused() {
    let (status, _, err) = hourworth(&[
        "show",
        "demo_cases/harrowmere_march",
        "--household",
        "HM-01",
        "--local",
        "demo_cases/councils/harrowmere.toml",
    ]);
    assert_eq!(status, 2);
    assert!(
        err.contains(
            "`harrowmere.toml` does not hold on 2026-03-06, which is the date `assessment`"
        ),
        "{err}"
    );
    assert!(err.contains("a day from 2026-04-01 to 2027-03-31"), "{err}");
}

#[test]
fn a_run_records_its_local_files_and_the_letter_names_them() {
    let to = tempfile::tempdir().expect("a folder");
    let folder = to.path().join("run");
    let (status, _, err) = hourworth(&[
        "print",
        "demo_cases/councils",
        "--to",
        &folder.to_string_lossy(),
        "--issued",
        "2026-05-06",
    ]);
    assert_eq!(status, 0, "{err}");
    assert!(
        err.contains("9 households = 9 printed + 0 held + 0 rejected"),
        "{err}"
    );
    let record: serde_json::Value =
        serde_json::from_str(&fs::read_to_string(folder.join("run.json")).expect("a record"))
            .expect("json");
    let local = record["local"].as_object().expect("an object");
    assert_eq!(local.len(), 4);
    for (name, hash) in local {
        let path = Path::new("demo_cases/councils").join(name);
        let own = hourworth::load::hash_file(&path).expect("a hash");
        assert_eq!(hash.as_str(), Some(own.as_str()), "{name}");
    }
    let rules = record["rules"].as_object().expect("an object");
    assert!(rules.keys().all(|name| !name.starts_with("local/")));
    // Every cliff at a band's edge is named by its cause.
    let turns = fs::read_to_string(folder.join("turning_points.csv")).expect("turning points");
    let edges = turns
        .lines()
        .filter(|line| line.starts_with("HC-01,") && line.contains(",cliff_down,"))
        .filter(|line| line.contains("local_share_of_bill"))
        .count();
    assert!(edges >= 4, "{edges} edges of bands");
    assert!(
        turns.lines().any(|line| line.starts_with("HC-04,")
            && line.contains(",cliff_down,")
            && line.contains("local_award")),
        "the least award makes a cliff"
    );
}

#[test]
fn a_changed_figure_of_a_local_file_changes_the_run() {
    let outer = tempfile::tempdir().expect("a folder");
    let list = outer.path().join("list");
    fs::create_dir(&list).expect("a folder");
    for entry in fs::read_dir("demo_cases/councils").expect("the list") {
        let path = entry.expect("an entry").path();
        fs::copy(&path, list.join(path.file_name().expect("a name"))).expect("a copy");
    }
    let run = |name: &str| {
        let to = outer.path().join(name);
        let (status, _, err) = hourworth(&[
            "print",
            &list.to_string_lossy(),
            "--to",
            &to.to_string_lossy(),
            "--issued",
            "2026-05-06",
            "--no-statements",
        ]);
        assert_eq!(status, 0, "{err}");
        (
            fs::read_to_string(to.join("results.csv")).expect("results"),
            err.lines().next().unwrap_or_default().to_owned(),
        )
    };
    let (before, id) = run("before");
    let path = list.join("harrowmere.toml");
    let text = fs::read_to_string(&path).expect("the file");
    assert!(text.contains("[\"all\", 1, 90]"));
    fs::write(&path, text.replace("[\"all\", 1, 90]", "[\"all\", 1, 95]")).expect("written");
    let (after, other) = run("after");
    assert_ne!(id, other, "the run's id hangs on its local files");
    let rows = |text: &str, household: &str| -> Vec<String> {
        text.lines()
            .filter(|line| line.starts_with(household))
            .map(str::to_owned)
            .collect()
    };
    assert_ne!(rows(&before, "HC-02"), rows(&after, "HC-02"));
    assert_eq!(
        rows(&before, "HC-04"),
        rows(&after, "HC-04"),
        "the other council"
    );
    // Bands that fall hold the households whose family they are for.
    assert!(text.contains("[\"single\", 2, 180]"));
    fs::write(
        &path,
        text.replace("[\"single\", 2, 180]", "[\"single\", 2, 120]"),
    )
    .expect("written");
    let (_, told) = run("falling");
    assert!(told.contains("8 printed + 1 held"), "{told}");
    let held = fs::read_to_string(outer.path().join("falling/held.csv")).expect("held");
    assert!(
        held.contains("HC-01,The limits of the bands in the local file"),
        "{held}"
    );
}
