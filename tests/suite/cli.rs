//! The commands as somebody types them: standard output, standard error and exit status.

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

/// A folder with a small list of invented households: one to print, one couple, one held, one with a fault.
struct Desk {
    outer: tempfile::TempDir,
}

const LIST: &str = "\
title = \"First list\"
pack = \"uk\"
date = 2026-05-04
[dates]
payment = 2026-05-29
";
const HOUSEHOLDS: &str = "\
household,address_1,nation,tenure,rent,rent_known,lha_month,claims_universal_credit,claims_child_benefit,hold
HA-01,Ash Cottage,england,private,900,seen,850,yes,yes,
HA-02,Birch Cottage,scotland,none,,,,no,no,
HA-03,Elm Cottage,england,private,750,told,700,yes,no,the client asked to wait
HA-04,Oak Cottage,england,castle,750,told,700,yes,no,
";
const MEMBERS: &str = "\
household,ref,role,name,birth,childcare_month
HA-01,A,adult,Alva Quill,1990-02-03,
HA-01,C,child,Bo Quill,2021-06-01,400
HA-02,A,adult,Cato Fenn,1985-01-01,
HA-03,A,adult,Eke Moss,1999-01-01,
HA-04,A,adult,Fay Moss,1999-01-01,
HA-09,A,adult,Gil Moss,1999-01-01,
";
const JOBS: &str = "\
household,member,ref,status,offer,hours,wage
HA-01,A,J1,today,,16,12.71
HA-01,A,shift,offer,more hours at the bakery,30,13.20
HA-02,A,J1,today,,37.5,31
HA-03,A,J1,today,,10,12.71
HA-04,A,J1,today,,10,12.71
";

struct Said {
    status: i32,
    out: String,
    err: String,
}

impl Desk {
    fn new() -> Desk {
        let desk = Desk {
            outer: tempfile::tempdir().unwrap(),
        };
        fs::create_dir(desk.path("cases")).unwrap();
        desk.write("cases/list.toml", LIST);
        desk.write("cases/households.csv", HOUSEHOLDS);
        desk.write("cases/members.csv", MEMBERS);
        desk.write("cases/jobs.csv", JOBS);
        desk
    }

    /// The same without the household and the member that have faults.
    fn sound() -> Desk {
        let desk = Desk::new();
        let without = |text: &str, reference: &str| -> String {
            let lines = text.lines().filter(|line| !line.starts_with(reference));
            lines.map(|line| format!("{line}\n")).collect()
        };
        desk.write("cases/households.csv", &without(HOUSEHOLDS, "HA-04"));
        desk.write(
            "cases/members.csv",
            &without(&without(MEMBERS, "HA-04"), "HA-09"),
        );
        desk.write("cases/jobs.csv", &without(JOBS, "HA-04"));
        desk
    }

    fn path(&self, name: &str) -> PathBuf {
        self.outer.path().join(name)
    }

    fn write(&self, name: &str, text: &str) {
        fs::write(self.path(name), text).unwrap();
    }

    fn read(&self, name: &str) -> String {
        fs::read_to_string(self.path(name)).unwrap()
    }

    fn say(&self, words: &str) -> Said {
        let output = Command::new(env!("CARGO_BIN_EXE_hourworth"))
            .args(words.split_whitespace())
            .current_dir(self.outer.path())
            .output()
            .unwrap();
        Said {
            status: output.status.code().unwrap(),
            out: String::from_utf8(output.stdout).unwrap(),
            err: String::from_utf8(output.stderr).unwrap(),
        }
    }
}

/// Run id and time taken, which no snapshot can know.
fn steady(text: &str) -> String {
    let mut out = String::new();
    for line in text.lines() {
        let mut line = line.to_owned();
        if let Some(rest) = line.strip_prefix("run ") {
            line = format!("run <run>{}", &rest[rest.find(',').unwrap()..]);
        }
        if let (Some(from), Some(to)) = (line.find(" in "), line.find(" seconds")) {
            line.replace_range(from + 4..to, "<time>");
        }
        out.push_str(&line);
        out.push('\n');
    }
    out
}

fn contents(folder: &Path) -> BTreeMap<PathBuf, Vec<u8>> {
    let mut all = BTreeMap::new();
    let mut folders = vec![folder.to_owned()];
    while let Some(next) = folders.pop() {
        for entry in fs::read_dir(next).unwrap() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                folders.push(path);
            } else if !path.ends_with("timings.json") && !path.ends_with(".hourworth-lock") {
                all.insert(
                    path.strip_prefix(folder).unwrap().to_owned(),
                    fs::read(path).unwrap(),
                );
            }
        }
    }
    all
}

#[test]
fn printing_balances_and_says_so() {
    let desk = Desk::new();
    let said = desk.say("print cases --to run --issued 2026-05-05");
    assert_eq!((said.status, said.out.as_str()), (1, ""));
    insta::assert_snapshot!(steady(&said.err), @r"
    run <run>, issued 2026-05-05: 4 households = 2 printed + 1 held + 1 rejected
    2 statements in <time> seconds, in `run`
    held: the reasons are in `held.csv`
    rejected: every fault is in `rejects.csv`
    of no household of the list: 1 fault
    ");
    insta::assert_snapshot!(desk.read("run/held.csv"), @r"
    household,reason
    HA-03,the client asked to wait
    ");
    insta::assert_snapshot!(desk.read("run/rejects.csv"), @r#"
    household,stage,file,row,column,value,fault,expected
    HA-04,reading,households.csv,5,tenure,castle,"found `castle`, an unknown tenure","`none`, `owner`, `private` or `social`"
    ,reading,members.csv,7,household,HA-09,"found `HA-09`, a household that is not in the list","a household that `households.csv` names; add the household, or take the row out"
    "#);
    let statements = contents(&desk.path("run/statements"));
    let names: Vec<_> = statements
        .keys()
        .map(|name| name.to_str().unwrap())
        .collect();
    assert_eq!(names, ["HA-01.client.pdf", "HA-02.client.pdf"]);
    assert!(statements.values().all(|pdf| pdf.starts_with(b"%PDF-")));
    // No name and no address in what a log could hold.
    assert!(!said.err.contains("Quill") && !said.err.contains("Cottage"));
    // Once more: refused, then replaced, and rejects allowed.
    let again = desk.say("print cases --to run --issued 2026-05-05");
    assert_eq!(again.status, 2);
    insta::assert_snapshot!(again.err, @"hourworth: `run` holds a run already; give `--replace` to make it again, or choose another folder");
    let before = contents(&desk.path("run"));
    let replaced = desk.say("print cases --to run --issued 2026-05-05 --replace --allow-rejects");
    assert_eq!(replaced.status, 0);
    assert!(contents(&desk.path("run")) == before);
}

#[test]
fn same_input_same_bytes_whatever_the_workers() {
    let desk = Desk::sound();
    let one = desk.say("print cases --to one --zip one.zip --issued 2026-05-05 --workers 1 --grid");
    let two = desk.say("print cases --to two --zip two.zip --issued 2026-05-05 --workers 2 --grid");
    assert_eq!((one.status, two.status), (0, 0), "{}{}", one.err, two.err);
    assert!(contents(&desk.path("one")) == contents(&desk.path("two")));
    assert!(fs::read(desk.path("one.zip")).unwrap() == fs::read(desk.path("two.zip")).unwrap());
}

#[test]
fn a_list_out_of_order_gives_the_same_tables() {
    let desk = Desk::sound();
    let said = desk.say("print cases --to in-order --no-statements --issued 2026-05-05");
    assert_eq!(said.status, 0, "{}", said.err);
    for table in ["households", "members", "jobs"] {
        let name = format!("cases/{table}.csv");
        let text = desk.read(&name);
        let (header, rows) = text.split_once('\n').unwrap();
        let mut rows: Vec<&str> = rows.lines().collect();
        // Households turned round, rows of one household kept in their order.
        rows.sort_by_key(|row| std::cmp::Reverse(row[..5].to_owned()));
        desk.write(&name, &format!("{header}\n{}\n", rows.join("\n")));
    }
    let said = desk.say("print cases --to turned --no-statements --issued 2026-05-05");
    assert_eq!(said.status, 0, "{}", said.err);
    for table in ["results.csv", "turning_points.csv", "held.csv"] {
        assert_eq!(
            desk.read(&format!("in-order/{table}")),
            desk.read(&format!("turned/{table}")),
            "{table}"
        );
    }
    assert!(!desk.path("turned/sorting").exists());
    assert!(
        !desk
            .path("turned/statements")
            .read_dir()
            .unwrap()
            .any(|_| true)
    );
}

#[test]
fn one_household_is_shown() {
    let desk = Desk::new();
    let said = desk.say("show cases --household ha-01");
    assert_eq!((said.status, said.err.as_str()), (0, ""));
    assert!(said.out.starts_with("household HA-01\n"), "{}", said.out);
    for part in [
        "turning points:",
        "> 16",
        "offer shift: 30 hours",
        "holding hours:",
        "T today, 1 shift",
    ] {
        assert!(said.out.contains(part), "{part}: {}", said.out);
    }
    assert!(!said.out.contains("Quill"));
    let json = desk.say("show cases --household HA-01 --format json");
    let value: serde_json::Value = serde_json::from_str(&json.out).unwrap();
    assert_eq!(value["household"], "HA-01");
    assert_eq!(value["earners"][0]["lines"][1]["line"], "shift");
    let faulty = desk.say("show cases --household HA-04");
    assert_eq!((faulty.status, faulty.out.as_str()), (1, ""));
    insta::assert_snapshot!(faulty.err, @r"
    household `HA-04` has faults:
      households.csv row 5, column tenure: found `castle`, an unknown tenure; expected `none`, `owner`, `private` or `social`
    ");
    let unknown = desk.say("show cases --household HA-77");
    assert_eq!(unknown.status, 2);
    insta::assert_snapshot!(unknown.err, @"hourworth: the list has no household `HA-77`, found 4 others");
}

#[test]
fn the_working_is_numbered_and_an_unknown_offer_is_refused() {
    let desk = Desk::new();
    let said = desk.say("working cases --household HA-01 --hours 22.5 --offer shift");
    assert_eq!(said.status, 0, "{}", said.err);
    assert!(said.out.contains("hours = 22.5 hours"), "{}", said.out);
    assert!(said.out.contains("wage = 13.2"), "{}", said.out);
    let json = desk.say("working cases --household HA-01 --hours 16 --format json");
    let lines: Vec<serde_json::Value> = serde_json::from_str(&json.out).unwrap();
    let pay = lines.iter().find(|line| line["name"] == "pay").unwrap();
    // 16 hours at 12.71 for 52 weeks, by the twelfth: 881.2266…
    assert_eq!(pay["value"], "881.23 a month");
    let unknown = desk.say("working cases --household HA-01 --hours 16 --offer night");
    assert_eq!(unknown.status, 2);
    insta::assert_snapshot!(unknown.err, @"hourworth: adult 1 of `HA-01` has no offer `night`, expected one of `shift`");
    let nobody = desk.say("working cases --household HA-01 --hours 16 --earner 2");
    assert_eq!(nobody.status, 2);
    insta::assert_snapshot!(nobody.err, @"hourworth: `HA-01` has no adult 2, expected 1 to 1");
}

#[test]
fn vetting_prints_every_fault() {
    let desk = Desk::new();
    desk.write(
        "office.toml",
        "name = \"Harrowmere Advice Rooms\"\ntelefone = \"1\"\n",
    );
    let said = desk.say("vet cases uk office.toml");
    assert_eq!((said.status, said.err.as_str()), (1, ""));
    insta::assert_snapshot!(said.out, @r"
    households.csv row 5, column tenure: found `castle`, an unknown tenure; expected `none`, `owner`, `private` or `social`
    members.csv row 7, column household: found `HA-09`, a household that is not in the list; expected a household that `households.csv` names; add the household, or take the row out
    case list `cases`: 2 faults, 4 households, 1 of them faulty
    rule pack `uk`: no fault
    `office.toml` line 2, column 1: unknown field `telefone`, expected one of `name`, `address`, `phone`, `email`, `hours`, `accreditation`, `signatory`, `privacy`, `complaints`, `hold`
    office file `office.toml`: 1 fault
    ");
    let nothing = desk.say("vet nowhere");
    assert_eq!(nothing.status, 2);
    insta::assert_snapshot!(nothing.err, @"hourworth: `nowhere` is nothing to check, expected a folder with `pack.toml`, `list.toml` or templates, a `.toml` file, or one of the built-in packs: uk");
}

#[test]
fn faults_of_the_settings_stop_a_run_before_it_starts() {
    let desk = Desk::new();
    desk.write(
        "cases/list.toml",
        "pack = \"uk\"\ndate = 2031-05-04\n[dates]\npaiment = 2026-05-29\n[[changed]]\namount = \"personal_alowance\"\nvalue = \"1\"\nbecause = \"x\"\n",
    );
    let said = desk.say("print cases --to run");
    assert_eq!(said.status, 2);
    insta::assert_snapshot!(said.err, @r"
    hourworth: `list.toml`: the pack has no date `paiment`; expected one of assessment, payment; did you mean `payment`?
    `list.toml`: the date `payment` is missing; expected day on which the pay is paid; write `payment = …` below `[dates]`
    ");
    desk.write(
        "cases/list.toml",
        "pack = \"uk\"\ndate = 2031-05-04\n[dates]\npayment = 2026-05-29\n",
    );
    let said = desk.say("print cases --to run");
    assert_eq!(said.status, 2);
    insta::assert_snapshot!(said.err, @"hourworth: the date `assessment` is 2031-05-04; expected a day from 2024-04-08 to 2027-03-31, which the pack covers");
    assert!(!desk.path("run").exists());
}

#[test]
fn the_office_holds_what_it_has_not_seen() {
    let desk = Desk::sound();
    desk.write(
        "office.toml",
        "name = \"Harrowmere Advice Rooms\"\n[hold]\nmust_be_seen = [\"rent\"]\nwithout_address = true\n",
    );
    let said =
        desk.say("print cases --to run --office office.toml --no-statements --issued 2026-05-05");
    assert_eq!(said.status, 0, "{}", said.err);
    insta::assert_snapshot!(desk.read("run/held.csv"), @r#"
    household,reason
    HA-02,"`rent` is assumed, the office wants it seen"
    HA-03,the client asked to wait
    HA-03,"`rent` is told, the office wants it seen"
    "#);
    desk.write("office.toml", "[hold]\nmust_be_seen = [\"rnt\"]\n");
    let said = desk.say("print cases --to other --office office.toml");
    assert_eq!(said.status, 2);
    insta::assert_snapshot!(said.err, @"hourworth: `office.toml`: `must_be_seen` names `rnt`, expected a fact of the pack; did you mean `rent`?");
}

#[test]
fn the_results_explain_themselves() {
    let desk = Desk::sound();
    desk.say("print cases --to run --no-statements --issued 2026-05-05");
    let mut reader = csv::Reader::from_path(desk.path("run/results.csv")).unwrap();
    let header = reader.headers().unwrap().clone();
    let rows: Vec<BTreeMap<String, String>> = reader
        .records()
        .map(|row| {
            let row = row.unwrap();
            header
                .iter()
                .map(str::to_owned)
                .zip(row.iter().map(str::to_owned))
                .collect()
        })
        .collect();
    let points: Vec<_> = rows
        .iter()
        .map(|row| {
            (
                row["household"].as_str(),
                row["line"].as_str(),
                row["point"].as_str(),
            )
        })
        .collect();
    assert_eq!(
        points,
        [
            ("HA-01", "today", "not_in_work"),
            ("HA-01", "today", "today"),
            ("HA-01", "today", "step"),
            ("HA-01", "shift", "not_in_work"),
            ("HA-01", "shift", "offer"),
            ("HA-02", "today", "not_in_work"),
            ("HA-02", "today", "today"),
            ("HA-02", "today", "step"),
        ]
    );
    assert_eq!(rows[0]["ptr"], "");
    assert_eq!(rows[0]["item:free_prescriptions"], "1");
    assert_eq!(rows[1]["pay"], "881.23");
    // What a row says of the step must follow from the sums of the two rows.
    let pennies = |row: &BTreeMap<String, String>, name: &str| -> i64 {
        row[name].replace('.', "").parse().unwrap()
    };
    let kept = pennies(&rows[2], "net") - pennies(&rows[1], "net");
    let paid = pennies(&rows[2], "pay") - pennies(&rows[1], "pay");
    let rate = 10_000 - (kept * 20_000 + paid) / (2 * paid);
    assert_eq!(rows[1]["metr_step"], format!("0.{rate:04}"));
}

#[test]
fn a_form_is_written_once_and_never_over_a_file() {
    let desk = Desk::new();
    let said = desk.say("form uk --to blank");
    assert_eq!((said.status, said.err.as_str()), (0, ""));
    assert!(
        said.out
            .lines()
            .any(|line| line.replace('\\', "/") == "blank/households.csv"),
        "{}",
        said.out
    );
    desk.write("blank/jobs.csv", "mine");
    let again = desk.say("form uk --to blank");
    assert_eq!((again.status, again.out.as_str()), (2, ""));
    assert_eq!(desk.read("blank/jobs.csv"), "mine");
}

#[test]
fn the_published_examples_are_run() {
    let desk = Desk::new();
    let said = desk.say("prove uk");
    let last = said.out.lines().last().unwrap();
    assert!(last.contains(" examples: "), "{last}");
    let failed: Vec<&str> = said
        .out
        .lines()
        .filter(|line| line.starts_with("not met"))
        .collect();
    assert_eq!(said.status, i32::from(!failed.is_empty()));
    assert!(failed.is_empty(), "{}", failed.join("\n"));
    assert!(
        said.out
            .lines()
            .filter(|line| line.starts_with("met"))
            .count()
            > 50
    );
}

#[test]
fn help_and_wrong_arguments() {
    let desk = Desk::new();
    let help = desk.say("--help");
    assert_eq!(help.status, 0);
    assert!(
        !help.out.contains("worker\n") && !help.out.contains("  worker"),
        "{}",
        help.out
    );
    let wrong = desk.say("working cases --household HA-01 --hours 1,5");
    assert_eq!((wrong.status, wrong.out.as_str()), (2, ""));
    assert!(
        wrong
            .err
            .contains("found `1,5`, expected hours from 0 to 168"),
        "{}",
        wrong.err
    );
}

/// A line of jobs for the first household with what its job and offer say of two columns beside the usual ones.
fn jobs_with(columns: &str, today: &str, offer: &str) -> String {
    format!(
        "household,member,ref,status,offer,hours,wage,{columns}\nHA-01,A,J1,today,,16,12.71,{today}\nHA-01,A,shift,offer,more hours at the bakery,30,13.20,{offer}\n"
    )
}

#[test]
fn an_offer_that_the_rules_do_not_cover_holds_the_household() {
    let desk = Desk::sound();
    let run = |to: &str| {
        desk.say(&format!(
            "print cases --to {to} --no-statements --issued 2026-05-05"
        ))
    };
    desk.write(
        "cases/jobs.csv",
        &jobs_with("ni_category", "", "category_a"),
    );
    run("covered");
    assert!(!desk.read("covered/held.csv").contains("HA-01"));
    desk.write(
        "cases/jobs.csv",
        &jobs_with("ni_category", "", "other_category"),
    );
    run("other");
    let held = desk.read("other/held.csv");
    assert!(
        held.contains("HA-01,\"A job has a National Insurance category"),
        "{held}"
    );
    // A note that holds for the offer alone is a note of the household.
    desk.write(
        "cases/jobs.csv",
        &jobs_with("pay_frequency", "month", "week"),
    );
    let said = desk.say("show cases --household HA-01");
    assert!(said.out.contains("note: pay_not_monthly"), "{}", said.out);
}

#[test]
fn nothing_is_printed_where_there_is_nothing_to_compare() {
    let desk = Desk::sound();
    desk.write(
        "cases/jobs.csv",
        "household,member,ref,status,offer,hours,wage\nHA-02,A,J1,today,,37.5,0\n",
    );
    let said = desk.say("print cases --to run --no-statements --issued 2026-05-05");
    assert_eq!(said.status, 0, "{}", said.err);
    insta::assert_snapshot!(desk.read("run/held.csv"), @r#"
    household,reason
    HA-01,"no adult has a job of today with hours and a wage, or an offer, so there is nothing to compare"
    HA-02,"no adult has a job of today with hours and a wage, or an offer, so there is nothing to compare"
    HA-03,the client asked to wait
    HA-03,"no adult has a job of today with hours and a wage, or an offer, so there is nothing to compare"
    "#);
}

#[test]
fn an_item_that_cannot_be_folded_holds_the_household() {
    let desk = Desk::sound();
    let with = |name: &str| {
        let lines = desk.read("cases/households.csv");
        let mut out = String::new();
        for line in lines.lines() {
            let cell = match line {
                line if line.starts_with("household,") => "fold",
                line if line.starts_with("HA-01") => name,
                _ => "",
            };
            out.push_str(&format!("{line},{cell}\n"));
        }
        out
    };
    let (good, bad) = (with("universal_credit"), with("universal_credits"));
    desk.write("cases/households.csv", &good);
    desk.say("print cases --to good --no-statements --issued 2026-05-05");
    assert!(!desk.read("good/held.csv").contains("HA-01"));
    desk.write("cases/households.csv", &bad);
    desk.say("print cases --to bad --no-statements --issued 2026-05-05");
    let held = desk.read("bad/held.csv");
    assert!(
        held.contains("HA-01,\"`fold` names `universal_credits`, expected an item of the rules; did you mean `universal_credit`?\""),
        "{held}"
    );
}

#[test]
fn an_adult_without_a_job_has_nothing_that_could_be_seen() {
    let desk = Desk::sound();
    let members = desk.read("cases/members.csv");
    desk.write(
        "cases/members.csv",
        &members.replace("HA-01,C,", "HA-01,B,adult,Ida Quill,1991-02-03,\nHA-01,C,"),
    );
    desk.write(
        "cases/jobs.csv",
        "household,member,ref,status,offer,hours,wage,wage_known\nHA-01,A,J1,today,,16,12.71,seen\nHA-02,A,J1,today,,37.5,31,told\n",
    );
    desk.write("office.toml", "[hold]\nmust_be_seen = [\"wage\"]\n");
    desk.say("print cases --to run --office office.toml --no-statements --issued 2026-05-05");
    let held = desk.read("run/held.csv");
    assert!(!held.contains("HA-01"), "{held}");
    assert!(held.contains("HA-02,\"`wage` is told"), "{held}");
}

#[test]
fn a_target_is_reached_when_the_costs_of_working_are_paid() {
    let desk = Desk::sound();
    let single = |costs: &str| {
        format!(
            "pack = \"uk\"\ndate = 2026-05-04\nreference = \"HA-9\"\n[dates]\npayment = 2026-05-29\n[household]\nnation = \"england\"\n\
             tenure = \"none\"\nclaims_universal_credit = false\nclaims_child_benefit = false\ntarget_month = 550\n\
             [[member]]\nref = \"a\"\nrole = \"adult\"\nbirth = 1990-01-01\n\
             [[job]]\nmember = \"a\"\nstatus = \"today\"\nhours = 10\nwage = 12\n{costs}"
        )
    };
    let told = |costs: &str| {
        desk.write("one.toml", &single(costs));
        let said = desk.say("show one.toml --household HA-9");
        let line = said.out.lines().find(|line| line.starts_with("for 550.00"));
        line.unwrap_or(&said.err).to_owned()
    };
    // 12 × 52/12 is 52.00 a month for each weekly hour, and below the thresholds of tax and contributions all of it is kept: 10.75 hours
    // bring 559.00 and 10.5 hours 546.00. With costs of 100 a month 12.5 hours are needed for 650.00.
    assert_eq!(
        told(""),
        "for 550.00 after costs of working: first reached at 10.75 hours, stays reached from 10.75 hours"
    );
    assert_eq!(
        told("work_costs_month = 100\n"),
        "for 550.00 after costs of working: first reached at 12.5 hours, stays reached from 12.5 hours"
    );
}

#[test]
fn a_changed_amount_that_upsets_the_rules_is_told_before_the_run() {
    let desk = Desk::sound();
    let changed = |changes: &[(&str, &str)]| {
        let mut text = LIST.to_owned();
        for (amount, value) in changes {
            text.push_str(&format!(
                "[[changed]]\namount = \"{amount}\"\nvalue = \"{value}\"\nbecause = \"x\"\n"
            ));
        }
        desk.write("cases/list.toml", &text);
        let said = desk.say("print cases --to run --no-statements");
        assert_eq!(said.status, 2, "{}", said.err);
        assert!(!desk.path("run").exists());
        said.err
    };
    assert_eq!(
        changed(&[
            ("child_benefit_weeks", "52.5"),
            ("relief_at_source_gross_in_uc", "2")
        ]),
        "hourworth: `child_benefit_weeks` is count and the list changes it to 52.5; expected a whole number\n\
         `relief_at_source_gross_in_uc` is yesno and the list changes it to 2; expected 1 for yes or 0 for no\n"
    );
    let falls = changed(&[("basic_rate_limit", "999999")]);
    assert!(falls.contains("is not above the one before"), "{falls}");
}

#[test]
fn a_broken_list_costs_no_earlier_run_and_a_zip_takes_no_file_away() {
    let desk = Desk::sound();
    desk.say("print cases --to run --no-statements --issued 2026-05-05");
    let before = contents(&desk.path("run"));
    desk.write("cases/members.csv", "household,ref,ref\n");
    let said = desk.say("print cases --to run --no-statements --replace");
    assert_eq!(said.status, 2, "{}", said.err);
    assert!(before == contents(&desk.path("run")));
    let desk = Desk::sound();
    desk.write("letter.odt", "mine");
    let said = desk.say("print cases --to run --no-statements --zip letter.odt");
    assert_eq!(said.status, 2);
    assert_eq!(
        said.err,
        "hourworth: `letter.odt` exists already; choose another name for the ZIP file, or give `--replace`\n"
    );
    assert_eq!(desk.read("letter.odt"), "mine");
    let said = desk.say("print cases --to other --no-statements --zip nowhere/all.zip");
    assert_eq!(
        said.err,
        "hourworth: there is no folder `nowhere` for the ZIP file; make it first\n"
    );
    let said = desk.say("print cases --to inside --no-statements --zip inside/all.zip");
    assert_eq!(said.status, 0, "{}", said.err);
}

#[test]
fn where_a_list_lies_changes_no_number() {
    let desk = Desk::sound();
    let from = Path::new(env!("CARGO_MANIFEST_DIR")).join("rules/uk");
    for (name, bytes) in contents(&from) {
        let to = desk.path("cases/ours").join(name);
        fs::create_dir_all(to.parent().unwrap()).unwrap();
        fs::write(to, bytes).unwrap();
    }
    desk.write("cases/list.toml", &LIST.replace("\"uk\"", "\"ours\""));
    for (list, to) in [("cases", "a"), ("./cases/", "b")] {
        let said = desk.say(&format!(
            "print {list} --to {to} --no-statements --issued 2026-05-05"
        ));
        assert_eq!(said.status, 0, "{}", said.err);
    }
    assert_eq!(desk.read("a/run.json"), desk.read("b/run.json"));
}
