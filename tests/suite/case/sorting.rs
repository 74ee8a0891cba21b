//! Lists that are sorted stream; others say so, and are the same once sorted.

use super::{LIST, read, schema, settings};
use hourworth::case::{ListReader, ReadOptions, Reading, Stop, Table, sort_table};
use std::io::Read;

const HOUSEHOLDS: &str = "household,savings,rent,address\nB2,0,1,\"x\ny\"\nA1,0,2,\nc3,0,bad,\n";
const MEMBERS: &str = "household;ref;role;birth\nc3;a;adult;1990-01-01\nB2;k;child;2020-01-01\n\nA1;a;adult;1990-01-01\nB2;a;adult;1990-01-01\nB2;l;child;2019-01-01\n";
const JOBS: &str = "household,member,status,hours,wage\nC3,a,today,1,1\nA1,a,today,2,2\n";

#[test]
fn an_unsorted_table_says_so() {
    let outcome = read(
        LIST,
        &[
            ("households.csv", HOUSEHOLDS),
            ("members.csv", MEMBERS),
            ("jobs.csv", JOBS),
        ],
    );
    assert!(outcome.readings.is_empty());
    let stop = outcome.stop.expect("it is not sorted");
    assert_eq!(
        stop.to_string(),
        "households.csv row 3: found `A1` after a later reference; expected rows in the order of `household`"
    );
    assert!(matches!(stop, Stop::Unsorted { row: 3, .. }));
}

#[test]
fn sorted_tables_read_the_same_with_the_rows_of_the_original() {
    let (schema, settings, options) = (schema(), settings(LIST), ReadOptions::default());
    let sorted =
        |name: &str, text: &str| sort_table(name, text.as_bytes(), None).expect("it can be sorted");
    let texts = [
        ("households.csv", sorted("households.csv", HOUSEHOLDS)),
        ("members.csv", sorted("members.csv", MEMBERS)),
        ("jobs.csv", sorted("jobs.csv", JOBS)),
    ];
    let tables = texts
        .iter()
        .map(|(name, text)| Table::sorted(*name, text.as_slice()))
        .collect();
    let reader = ListReader::open(tables, &schema, &settings, &options);
    assert_eq!(reader.list_faults(), []);
    let readings: Vec<Reading> = reader
        .map(|reading| reading.expect("it is sorted"))
        .collect();
    let [Ok(a1), Ok(b2), Err(c3)] = &readings[..] else {
        panic!("{readings:#?}");
    };
    assert_eq!((a1.reference.as_str(), a1.row), ("A1", 3));
    assert_eq!((b2.reference.as_str(), b2.row), ("B2", 2));
    assert_eq!(b2.delivery.address, ["x", "y"]);
    let children: Vec<&str> = b2.instances[2]
        .iter()
        .map(|child| child.reference.as_str())
        .collect();
    assert_eq!(
        children,
        ["k", "l"],
        "rows of one household keep their order"
    );
    assert_eq!(c3.row, 4);
    assert!(super::lines(c3)[0].starts_with("households.csv row 4, column rent: found `bad`"));
}

#[test]
fn a_table_that_cannot_be_sorted_says_why() {
    let t = |text: &str, expected: &str| {
        let fault = sort_table("jobs.csv", text.as_bytes(), None).expect_err("it cannot be sorted");
        assert_eq!(fault.to_string(), expected);
    };
    t(
        "ref,hours\n",
        "jobs.csv: found no column `household`; expected this column in the header",
    );
    t(
        "household\nA\n\"B\n",
        "jobs.csv row 3: found a quotation mark that is never closed; expected a closing quotation mark; close it, or write two marks for one that is meant",
    );
}

/// A table that is made while it is read, and counts what was taken.
struct Made<'a> {
    header: &'static str,
    row: fn(u32) -> String,
    next: u32,
    last: u32,
    pending: Vec<u8>,
    taken: &'a std::sync::atomic::AtomicU64,
}

impl Read for Made<'_> {
    fn read(&mut self, out: &mut [u8]) -> std::io::Result<usize> {
        if self.pending.is_empty() && self.next <= self.last {
            let line = if self.next == 0 {
                self.header.into()
            } else {
                (self.row)(self.next)
            };
            self.pending = line.into_bytes();
            self.next += 1;
        }
        let count = self.pending.len().min(out.len());
        out[..count].copy_from_slice(&self.pending[..count]);
        self.pending.drain(..count);
        self.taken
            .fetch_add(count as u64, std::sync::atomic::Ordering::Relaxed);
        Ok(count)
    }
}

#[test]
fn fifty_thousand_households_stream_one_at_a_time() {
    use std::sync::atomic::{AtomicU64, Ordering::Relaxed};
    let (schema, settings, options) = (schema(), settings(LIST), ReadOptions::default());
    let taken = AtomicU64::new(0);
    let made = |header, row| Made {
        header,
        row,
        next: 0,
        last: 50_000,
        pending: vec![],
        taken: &taken,
    };
    let tables = vec![
        Table::new(
            "households.csv",
            made("household,savings\n", |n| format!("H{n:05},{n}\n")),
        ),
        Table::new(
            "members.csv",
            made("household,ref,role,birth\n", |n| {
                format!("H{n:05},a,adult,1990-01-01\nH{n:05},c,child,2020-01-01\n")
            }),
        ),
        Table::new(
            "jobs.csv",
            made("household,member,status,hours,wage\n", |n| {
                format!("H{n:05},a,today,16,12.71\n")
            }),
        ),
    ];
    let mut reader = ListReader::open(tables, &schema, &settings, &options);
    let first = reader
        .next()
        .expect("there is one")
        .expect("sorted")
        .expect("right");
    assert_eq!(first.reference, "H00001");
    assert!(
        taken.load(Relaxed) < 1_000,
        "only what the first household needs is read: {}",
        taken.load(Relaxed)
    );
    let mut count = 1;
    for reading in reader {
        let home = reading.expect("sorted").expect("right");
        count += 1;
        assert_eq!(home.instances[0][0].values[2], 100 * count);
    }
    assert_eq!(count, 50_000);
}

#[test]
fn a_stream_that_fails_is_no_end_of_the_list() {
    struct Failing;
    impl Read for Failing {
        fn read(&mut self, _: &mut [u8]) -> std::io::Result<usize> {
            Err(std::io::Error::other("the disk is gone"))
        }
    }
    let (schema, settings, options) = (schema(), settings(LIST), ReadOptions::default());
    let head: &[u8] = b"household,savings\nA1,0\n";
    let tables = vec![
        Table::new("households.csv", head.chain(Failing)),
        Table::new("members.csv", super::MEMBERS.as_bytes()),
        Table::new("jobs.csv", super::JOBS.as_bytes()),
    ];
    let mut reader = ListReader::open(tables, &schema, &settings, &options);
    let stop = reader.find_map(Result::err).expect("it failed");
    assert_eq!(stop.to_string(), "households.csv: the disk is gone");
}
