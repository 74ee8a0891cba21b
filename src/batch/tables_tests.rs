use super::*;
use crate::batch::fixture::{assessment, settled};

fn items() -> Vec<String> {
    ["income_tax", "support", "elsewhere"]
        .map(String::from)
        .to_vec()
}

fn rows(header: Vec<String>, table: &Table) -> Vec<std::collections::BTreeMap<String, String>> {
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(false)
        .from_reader(&table.bytes[..]);
    let rows: Vec<_> = reader
        .records()
        .map(|row| {
            let row = row.unwrap();
            assert_eq!(row.len(), header.len());
            header
                .iter()
                .cloned()
                .zip(row.iter().map(str::to_owned))
                .collect()
        })
        .collect();
    assert_eq!(rows.len() as u64, table.rows);
    rows
}

fn column(rows: &[std::collections::BTreeMap<String, String>], name: &str) -> Vec<String> {
    rows.iter().map(|row| row[name].clone()).collect()
}

#[test]
fn the_named_points_of_each_line_become_rows() {
    let table = results(&assessment(), &items(), GridRows::Named);
    let rows = rows(results_header(&items()), &table);
    let is = |name: &str, wanted: [&str; 5]| assert_eq!(column(&rows, name), wanted, "{name}");
    is(
        "point",
        ["not_in_work", "today", "step", "not_in_work", "offer"],
    );
    is("line", ["today", "today", "today", "'=shift", "'=shift"]);
    is("wage", ["12.21", "12.21", "12.21", "12.2125", "12.2125"]);
    is("hours", ["0", "2", "3", "0", "3"]);
    is("pay", ["0.00", "20.00", "30.00", "0.00", "30.00"]);
    is("item:income_tax", ["0.00", "1.00", "2.00", "0.00", "2.00"]);
    is("item:elsewhere", ["", "", "", "", ""]);
    is("net", ["500.00", "514.00", "518.00", "500.00", "518.00"]);
    is("ptr", ["", "0.3333", "0.3333", "", "0.3333"]);
    is("metr_here_after_costs", ["", "", "", "", ""]);
    // From 500 to 514 while pay goes from 0 to 20: 1 - 14/20; from 514 to 518 while pay goes from 20 to 30: 1 - 4/10.
    is("metr_step", ["0.3000", "0.6000", "", "0.4000", ""]);
    is("kept_of_next_hour", ["10.00", "4.00", "", "10.00", ""]);
}

#[test]
fn the_whole_grid_keeps_the_words_of_the_named_points() {
    let table = results(&assessment(), &items(), GridRows::All);
    let rows = rows(results_header(&items()), &table);
    assert_eq!(
        column(&rows, "point")[..5],
        ["not_in_work", "grid", "grid", "today", "step"]
    );
    // Not in work and no hours have the same pay here: no step, so no rate.
    assert_eq!(column(&rows, "metr_step")[..3], ["", "0.0000", "0.6000"]);
}

#[test]
fn turning_points_come_in_words_and_figures() {
    let table = turning_points(&assessment());
    rows(turning_points_header(), &table);
    insta::assert_snapshot!(String::from_utf8(table.bytes).unwrap(), @r#"
    HA-1,1,today,12.21,now,cliff_down,1.5,,15.00,515.00,503.00,-12.00,505.00,493.00,0.0000,0.5500,Invented Benefit: work_limit,"support: jump -12.00, slope -0.5000; income_tax of adult 1: slope -0.1000"
    HA-1,1,today,12.21,now,trap,1.50,,,515.00,503.00,-12.00,,,,,,
    HA-1,1,today,12.21,now,no_gain,0.00,0.33,,,,,,,,,,
    "#);
}

#[test]
fn a_trap_after_costs_stands_in_the_columns_after_costs() {
    let mut assessment = assessment();
    assessment.earners[0].lines[0].has_costs = true;
    let table = turning_points(&assessment);
    let rows = rows(turning_points_header(), &table);
    let is = |name: &str, wanted: &str| assert_eq!(rows[1][name], wanted, "{name}");
    is("kind", "trap");
    is("net_before", "");
    is("net_after", "");
    is("size", "-12.00");
    is("after_costs_before", "515.00");
    is("after_costs_after", "503.00");
}

#[test]
fn the_first_hour_beside_further_jobs_is_no_next_hour_of_nobody_at_work() {
    let mut assessment = assessment();
    // Another job goes on at no hours of this one.
    assessment.earners[0].lines[0].grid[0].pay = Money(4000);
    let table = results(&assessment, &items(), GridRows::Named);
    let rows = rows(results_header(&items()), &table);
    assert_eq!(
        column(&rows, "kept_of_next_hour"),
        ["", "4.00", "", "10.00", ""]
    );
}

#[test]
fn cells_are_quoted_and_formulas_are_defused() {
    let mut table = Table::default();
    table.push(&[
        "a,b".into(),
        "say \"so\"".into(),
        "two\nlines".into(),
        String::new(),
    ]);
    assert_eq!(table.bytes, b"\"a,b\",\"say \"\"so\"\"\",\"two\nlines\",\n");
    for risky in ["=1+1", "+1", "-1", "@x", "\tx"] {
        assert_eq!(text_cell(risky), format!("'{risky}"));
    }
    assert_eq!(text_cell("a=b"), "a=b");
}

#[test]
fn a_household_that_settles_has_its_rows_twice() {
    let now = results(&assessment(), &items(), GridRows::All);
    let table = results(&settled(), &items(), GridRows::All);
    let both = rows(results_header(&items()), &table);
    assert_eq!(table.rows, 2 * now.rows);
    let half = usize::try_from(now.rows).unwrap();
    let when = column(&both, "when");
    assert!(when[..half].iter().all(|word| word == "now"));
    assert!(when[half..].iter().all(|word| word == "once_settled"));
    let net = column(&both, "net");
    assert_eq!((net[0].as_str(), net[half].as_str()), ("500.00", "450.00"));
    let turns = rows(turning_points_header(), &turning_points(&settled()));
    assert_eq!(
        column(&turns, "when"),
        ["now", "once_settled"]
            .map(|w| vec![w.to_owned(); turns.len() / 2])
            .concat()
    );
}
