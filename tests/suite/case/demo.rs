//! The lists below `demo_cases`, read with the United Kingdom pack: the good ones are without fault and touch every rule; each
//! faulty one gives the messages that stand beside it in `messages.txt`.

use hourworth::case::{
    ADULT, Household, ListReader, ListSettings, ReadOptions, Schema, Stop, Table, days_since_1970,
    read_single, sort_table,
};
use hourworth::engine::{JobChoice, Machine, Setting, working};
use hourworth::load::{check_pack, lay_local, read_pack, schema_of};
use hourworth::num::Hours;
use hourworth::rules::Pack;
use std::collections::BTreeSet;
use std::fs;
use std::io::Cursor;
use std::path::{Path, PathBuf};

fn pack() -> Pack {
    pack_with(&[])
}

/// The pack with local files of the councils' list laid over it.
fn pack_with(local: &[String]) -> Pack {
    let mut files = read_pack("uk", None).expect("the pack is built in");
    lay_local(&mut files, local, Some(&demo("councils")), &[]).expect("the local files are there");
    check_pack(&files).unwrap_or_else(|(_, faults)| panic!("the pack has {} faults", faults.len()))
}

fn demo(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("demo_cases")
        .join(name)
}

fn text(path: &Path) -> String {
    fs::read_to_string(path).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
}

/// The settings of a good list.
fn settings(name: &str) -> ListSettings {
    let list = text(&demo(name).join("list.toml"));
    ListSettings::parse("list.toml", &list).expect("it is right")
}

/// The tables of a folder by name, sorted where the list needs it.
fn tables(folder: &Path, sort: Option<&ListSettings>) -> Vec<Table<'static>> {
    let entries = fs::read_dir(folder).expect("the folder is there");
    let mut names: Vec<String> = entries
        .map(|entry| {
            entry
                .expect("an entry")
                .file_name()
                .into_string()
                .expect("a plain name")
        })
        .filter(|name| name.ends_with(".csv"))
        .collect();
    names.sort();
    let table = |name: String| {
        let bytes = fs::read(folder.join(&name)).expect("a table");
        match sort.map(|settings| sort_table(&name, &bytes, settings.delimiter)) {
            Some(Ok(sorted)) => Table::sorted(name, Cursor::new(sorted)),
            Some(Err(_)) | None => Table::new(name, Cursor::new(bytes)),
        }
    };
    names.into_iter().map(table).collect()
}

/// The households of a list that are right, and every message.
fn read(folder: &Path, schema: &Schema) -> (Vec<Household>, Vec<String>) {
    let settings = match ListSettings::parse("list.toml", &text(&folder.join("list.toml"))) {
        Ok(settings) => settings,
        Err(faults) => return (vec![], faults.iter().map(ToString::to_string).collect()),
    };
    let options = ReadOptions::default();
    for sort in [None, Some(&settings)] {
        let mut reader = ListReader::open(tables(folder, sort), schema, &settings, &options);
        let (mut right, mut messages, mut unsorted) = (vec![], vec![], false);
        for reading in reader.by_ref() {
            match reading {
                Ok(Ok(household)) => right.push(household),
                Ok(Err(rejected)) => {
                    messages.extend(rejected.faults.iter().map(ToString::to_string));
                }
                Err(Stop::Unsorted { .. }) => unsorted = true,
                Err(stop) => messages.push(stop.to_string()),
            }
        }
        if !unsorted {
            let mut all: Vec<String> = reader
                .list_faults()
                .iter()
                .map(ToString::to_string)
                .collect();
            all.extend(messages);
            return (right, all);
        }
    }
    panic!("{} is not sorted even after sorting", folder.display());
}

#[test]
fn the_good_lists_have_no_fault() {
    let schema = schema_of(&pack());
    let t = |name: &str, households: usize| {
        let (right, messages) = read(&demo(name), &schema);
        assert_eq!(messages, Vec::<String>::new(), "{name}");
        assert_eq!(right.len(), households, "{name}");
    };
    t("harrowmere", 51);
    t("harrowmere_march", 10);
    t("payroll", 16);
    t("what_if", 3);
    let councils = settings("councils");
    assert_eq!(councils.local.len(), 4);
    let schema = schema_of(&pack_with(&councils.local));
    let (right, messages) = read(&demo("councils"), &schema);
    assert_eq!(messages, Vec::<String>::new());
    assert_eq!(right.len(), 9);
    let one = text(&demo("one_household.toml"));
    let settings = ListSettings::parse_single("one_household.toml", &one).expect("it is right");
    let options = ReadOptions::default();
    let home = read_single("one_household.toml", &one, &schema, &settings, &options);
    assert_eq!(home.expect("it is right").reference, "HW-30");
}

#[test]
fn each_faulty_list_gives_its_messages() {
    let schema = schema_of(&pack());
    let mut folders = 0;
    for entry in fs::read_dir(demo("faulty")).expect("the folder is there") {
        let folder = entry.expect("an entry").path();
        if folder.is_dir() {
            let (_, messages) = read(&folder, &schema);
            let expected = text(&folder.join("messages.txt"));
            let expected: Vec<&str> = expected.lines().collect();
            assert_eq!(messages, expected, "{}", folder.display());
            assert!(!messages.is_empty());
            folders += 1;
        }
    }
    assert_eq!(folders, 10);
    let one = text(&demo("faulty/one_household.toml"));
    let settings =
        ListSettings::parse_single("one_household.toml", &one).expect("the top is right");
    let options = ReadOptions::default();
    let rejected = read_single("one_household.toml", &one, &schema, &settings, &options);
    let rejected = rejected.expect_err("it is faulty");
    let messages: Vec<String> = rejected.faults.iter().map(ToString::to_string).collect();
    let expected = text(&demo("faulty/one_household.messages.txt"));
    assert_eq!(messages, expected.lines().collect::<Vec<_>>());
}

#[test]
fn the_good_lists_together_touch_every_rule() {
    let (mut all, mut touched) = (BTreeSet::new(), BTreeSet::new());
    let mut held = vec![];
    for name in ["harrowmere", "harrowmere_march", "payroll", "councils"] {
        let settings = settings(name);
        let pack = pack_with(&settings.local);
        let schema = schema_of(&pack);
        let payment = settings.dates[0].1;
        let dates = [settings.date, payment].map(days_since_1970);
        for home in read(&demo(name), &schema).0 {
            let offers = (0..home.offers.len()).map(JobChoice::Offer);
            for choice in [JobChoice::Today].into_iter().chain(offers) {
                for adult in 0..home.instances[ADULT].len() {
                    let Some(setting) = Setting::new(&home, adult, choice) else {
                        continue;
                    };
                    let program = pack
                        .program(&dates, &[], &setting.shape)
                        .expect("a program");
                    let machine = Machine::new(program);
                    let special = machine.special(&setting.facts(machine.program()));
                    if !special.standing(setting.own_hours()).holds.is_empty() {
                        held.push(home.reference.clone());
                    }
                    for hours in [
                        Hours(0),
                        setting.own_hours(),
                        Hours::whole(16),
                        Hours::whole(48),
                    ] {
                        for line in working(&special, hours) {
                            let rule = format!("{}: {}", line.part, line.name);
                            if !line.exact.is_zero() {
                                touched.insert(rule.clone());
                            }
                            all.insert(rule);
                        }
                    }
                }
            }
        }
    }
    held.dedup();
    assert_eq!(held, ["HW-20"], "one household is not covered");
    let untouched: Vec<&String> = all.difference(&touched).collect();
    assert_eq!(untouched, Vec::<&String>::new());
    assert!(all.len() > 100, "{} rules", all.len());
}
