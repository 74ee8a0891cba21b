//! Whatever the bytes, there is an answer; and an answer that is right comes back from its own writing.

use super::{LIST, read_bytes, schema, settings};
use hourworth::case::{
    DateForm, Decimals, FactType, Format, ListSettings, ReadOptions, day_of, days_since_1970, form,
    from_bytes, read_single, sort_table, write_value,
};
use proptest::prelude::*;

/// Bytes that look enough like a table to get past the header.
fn tableish() -> impl Strategy<Value = Vec<u8>> {
    let piece = prop_oneof![
        Just("household".to_string()),
        Just("member".to_string()),
        Just("ref".to_string()),
        Just("role".to_string()),
        Just("status".to_string()),
        Just("birth".to_string()),
        Just("savings".to_string()),
        Just("hours".to_string()),
        Just("wage".to_string()),
        Just("A1".to_string()),
        Just("a".to_string()),
        Just("adult".to_string()),
        Just("today".to_string()),
        Just("1990-01-01".to_string()),
        Just("12.5".to_string()),
        Just("\"".to_string()),
        Just("\r".to_string()),
        Just("\u{feff}".to_string()),
        "[0-9.,/ -]{0,12}",
        "\\PC{0,4}",
    ];
    let cell = (
        piece,
        prop_oneof![4 => Just(","), 1 => Just("\n"), 1 => Just(";")],
    );
    prop::collection::vec(cell, 0..60).prop_map(|cells| {
        cells
            .into_iter()
            .map(|(piece, end)| piece + end)
            .collect::<String>()
            .into_bytes()
    })
}

const HEADS: [&str; 3] = [
    "household,savings,rent\n",
    "household,ref,role,birth\n",
    "household,member,ref,status,hours,wage\n",
];

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    #[test]
    fn bytes_never_panic(a in prop::collection::vec(any::<u8>(), 0..300), b in tableish(), c in tableish(), d in tableish()) {
        read_bytes(LIST, &[("households.csv", &a), ("members.csv", &b), ("jobs.csv", &c), ("loans.csv", &d)]);
        let headed: Vec<Vec<u8>> =
            HEADS.iter().zip([&b, &c, &d]).map(|(head, body)| [head.as_bytes(), body].concat()).collect();
        let outcome = read_bytes(
            LIST,
            &[("households.csv", &headed[0]), ("members.csv", &headed[1]), ("jobs.csv", &headed[2])],
        );
        for fault in outcome.faults() {
            prop_assert!(!fault.contains('\n'), "one line: {fault}");
        }
        let _ = sort_table("jobs.csv", &a, None);
        let _ = sort_table("jobs.csv", &b, None);
        let _ = from_bytes(&a);
    }

    #[test]
    fn toml_never_panics(text in "\\PC{0,200}", tail in "(pack|date|reference|household|\\[\\[|\\]\\]|member|changed|grid|=|\\.|\"|[0-9\\-]|\n| ){0,60}") {
        let settings = settings(LIST);
        for text in [text, tail.clone(), format!("{LIST}reference = \"A1\"\n{tail}")] {
            let _ = ListSettings::parse("list.toml", &text);
            let _ = ListSettings::parse_single("one.toml", &text);
            let _ = read_single("one.toml", &text, &schema(), &settings, &ReadOptions::default());
        }
    }

    #[test]
    fn a_sorted_table_keeps_every_cell(rows in prop::collection::vec(("[a-cA-C]{1,2}", "\\PC{0,6}[\n\"]?"), 0..20)) {
        let mut writer = csv::Writer::from_writer(vec![]);
        writer.write_record(["household", "x"]).expect("memory");
        for (reference, cell) in &rows {
            writer.write_record([reference, cell]).expect("memory");
        }
        let text = writer.into_inner().expect("memory");
        let sorted = sort_table("x.csv", &text, Some(hourworth::case::Delimiter::Comma)).expect("a table");
        let mut reader = csv::Reader::from_reader(sorted.as_slice());
        let found: Vec<Vec<String>> = reader
            .records()
            .map(|row| row.expect("a row").iter().map(String::from).collect())
            .collect();
        let mut expected: Vec<(String, String)> = rows;
        expected.sort_by_key(|(reference, _)| reference.to_lowercase());
        let found: Vec<(String, String)> = found.into_iter().map(|row| (row[1].clone(), row[2].clone())).collect();
        prop_assert_eq!(found, expected);
    }

    #[test]
    fn a_written_value_reads_as_itself(wage in 0i64..10_000_000, rent in 0i64..500_000, days in -25_567i64..20_000, comma in any::<bool>(), order in 0usize..3) {
        let dates = DateForm::ALL[order];
        let decimals = if comma { Decimals::Comma } else { Decimals::Point };
        let format = Format { dates, decimals };
        let list = format!("pack = \"x\"\ndate = 2026-05-04\n[format]\ndates = \"{}\"\ndecimals = \"{}\"\ndelimiter = \"semicolon\"\n",
            dates.words(), if comma { "comma" } else { "point" });
        let rent_text = write_value(&FactType::Money("month".into()), rent, format);
        let wage_text = write_value(&FactType::Money("hour".into()), wage, format);
        let birth_text = write_value(&FactType::Date, days, format);
        let households = format!("household;savings;rent\nA1;0;{rent_text}\n");
        let members = format!("household;ref;role;birth\nA1;a;adult;{birth_text}\n");
        let jobs = format!("household;member;status;hours;wage\nA1;a;today;16;{wage_text}\n");
        let home = read_bytes(&list, &[
            ("households.csv", households.as_bytes()), ("members.csv", members.as_bytes()), ("jobs.csv", jobs.as_bytes()),
        ]).household();
        prop_assert_eq!(home.instances[0][0].values[0], rent);
        prop_assert_eq!(home.instances[1][0].values[0], days);
        prop_assert_eq!(home.instances[4][0].values[1], wage);
    }
}

#[test]
fn days_are_counted_from_1970() {
    let t = |text: &str, days: i64| {
        let day: chrono::NaiveDate = text.parse().expect("a day");
        assert_eq!(days_since_1970(day), days);
        assert_eq!(day_of(days), Some(day));
    };
    t("1970-01-01", 0);
    t("1969-12-31", -1);
    t("2000-03-01", 11_017);
    assert_eq!(day_of(i64::MAX), None);
}

#[test]
fn blank_forms_are_the_same_each_time() {
    assert_eq!(form(&schema(), "small", "x"), form(&schema(), "small", "x"));
}
