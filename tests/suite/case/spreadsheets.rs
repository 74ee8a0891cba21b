//! What spreadsheets write: all of it must read like the plain text.

use super::{HOUSEHOLDS, JOBS, LIST, MEMBERS, read, read_bytes};

fn plain() -> hourworth::case::Household {
    read(LIST, &[]).household()
}

#[test]
fn the_usual_oddities_change_nothing() {
    let t = |what: &str, households: &str| {
        let mut home = read(LIST, &[("households.csv", households)]).household();
        home.row = 2;
        assert_eq!(home, plain(), "{what}");
    };
    t("byte order mark", &format!("\u{feff}{HOUSEHOLDS}"));
    t("semicolons", &HOUSEHOLDS.replace(',', ";"));
    t("tabs", &HOUSEHOLDS.replace(',', "\t"));
    t("CRLF", &HOUSEHOLDS.replace('\n', "\r\n"));
    t("CR alone", &HOUSEHOLDS.replace('\n', "\r"));
    t("no line end at the end", HOUSEHOLDS.trim_end());
    t("blank lines", &HOUSEHOLDS.replace('\n', "\n\n \n"));
    t(
        "blank rows of commas",
        &format!("{HOUSEHOLDS},,,\n\"\",,,\n"),
    );
    t("a blank line first", &format!("\n{HOUSEHOLDS}"));
    t("trailing empty columns", &HOUSEHOLDS.replace('\n', ",,,\n"));
    t(
        "trailing empty cells only in rows",
        &HOUSEHOLDS.replace("private", "private,,"),
    );
    t(
        "capital column names",
        &HOUSEHOLDS
            .replace("savings", "SAVINGS")
            .replace("rent", "Rent"),
    );
    t("spaces around cells", &HOUSEHOLDS.replace(',', " , "));
    t(
        "fixed spaces around cells",
        &HOUSEHOLDS.replace(",650.50,", ",\u{a0}650.50 ,"),
    );
    t(
        "quoted cells",
        "\"household\",\"savings\",\"rent\",\"tenure\"\n\"A1\",\"0\",\"650.50\",\"private\"\n",
    );
    t(
        "a row that names the sign",
        &format!("sep=;\r\n{}", HOUSEHOLDS.replace(',', ";")),
    );
    t(
        "other order",
        "tenure,rent,household,savings\nprivate,650.5,A1,0.00\n",
    );
    t(
        "a word in capitals",
        &HOUSEHOLDS.replace("private", "PRIVATE"),
    );
}

#[test]
fn a_reference_joins_tables_whatever_its_case() {
    let mut home = read(LIST, &[("members.csv", &MEMBERS.replace("A1,", "a1,"))]).household();
    home.row = 2;
    assert_eq!(home, plain());
}

#[test]
fn file_names_may_have_capitals() {
    let outcome = read_bytes(
        LIST,
        &[
            ("Households.CSV", HOUSEHOLDS.as_bytes()),
            ("MEMBERS.csv", MEMBERS.as_bytes()),
            ("jobs.csv", JOBS.replace("16,", "200,").as_bytes()),
        ],
    );
    assert_eq!(outcome.faults().len(), 1);
}

#[test]
fn decimal_commas_and_days_as_declared() {
    let list = "pack = \"small\"\ndate = \"04/05/2026\"\n[format]\ndates = \"day/month/year\"\ndecimals = \"comma\"\n";
    let households = "household;savings;rent;tenure\nA1;0;650,50;private\n";
    let members = MEMBERS.replace("1990-02-03", "3/2/1990");
    let jobs = JOBS.replace(',', ";").replace("12.71", "12,71");
    let texts = [
        ("households.csv", households),
        ("members.csv", members.as_str()),
        ("jobs.csv", jobs.as_str()),
    ];
    assert_eq!(read(list, &texts).household(), plain());
}

#[test]
fn rows_are_counted_as_a_spreadsheet_counts_them() {
    // A quoted line break is inside row 2; row 3 is blank; so the fault is in row 4.
    let households = "household,savings,address,rent\r\n\
        A1,0,\"one\r\ntwo\r\nthree\",1\r\n\
        \r\n\
        A2,0,\"one\",-1\r\n";
    let members = "household,ref,role,birth\nA1,a,adult,1990-01-01\nA2,a,adult,1990-01-01\n";
    let outcome = read(
        LIST,
        &[
            ("households.csv", households),
            ("members.csv", members),
            ("jobs.csv", "household,member,status,hours,wage\n"),
        ],
    );
    assert_eq!(outcome.accepted(), ["A1"]);
    let first = outcome.readings[0].as_ref().expect("A1 is right");
    assert_eq!(first.delivery.address, ["one", "two", "three"]);
    assert_eq!(
        outcome.faults(),
        ["households.csv row 4, column rent: found `-1`, negative money; expected nothing or more"]
    );
}

#[test]
fn address_lines_may_have_columns_of_their_own() {
    let households =
        "household,savings,address_1,address_2,address_6\nA1,0,Orla,\" 3, Tallow Row \",HZ1 4QX\n";
    let home = read(LIST, &[("households.csv", households)]).household();
    assert_eq!(home.delivery.address, ["Orla", "3, Tallow Row", "HZ1 4QX"]);
}

#[test]
fn any_name_goes() {
    for name in [
        "Zoë \"Zo\" O'Brannoch",
        "#set page(width: 1pt)",
        "{{ x }}",
        "محمد",
        "李 \u{1F600}",
        "=1+1",
    ] {
        let members = format!(
            "household,ref,role,name,birth\nA1,a,adult,\"{}\",1990-02-03\n",
            name.replace('"', "\"\"")
        );
        let home = read(LIST, &[("members.csv", &members)]).household();
        assert_eq!(home.instances[1][0].label, name);
    }
}

#[test]
fn a_row_longer_than_every_buffer_is_read() {
    let name = "long ".repeat(40_000);
    let members = format!("household,ref,role,name,birth\nA1,a,adult,\"{name}\",1990-02-03\n");
    let home = read(LIST, &[("members.csv", &members)]).household();
    assert_eq!(home.instances[1][0].label, name.trim_end());
}

#[test]
fn yes_and_no_as_spreadsheets_write_them() {
    for (word, value) in [
        ("yes", 1),
        ("Y", 1),
        ("TRUE", 1),
        ("no", 0),
        ("n", 0),
        ("False", 0),
    ] {
        let members = format!("household,ref,role,birth,carer\nA1,a,adult,1990-02-03,{word}\n");
        let home = read(LIST, &[("members.csv", &members)]).household();
        assert_eq!(home.instances[1][0].values[1], value, "{word}");
    }
}
