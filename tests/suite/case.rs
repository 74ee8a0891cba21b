//! Case lists against a small made-up schema: what spreadsheets write, every fault's own message, order, single households, blank forms.

mod demo;
mod faults;
mod forms;
mod properties;
mod settings;
mod single;
mod sorting;
mod spreadsheets;

use hourworth::case::{
    FactSpec, FactType, Household, KindSpec, ListReader, ListSettings, Need, ReadOptions, Reading,
    RejectedHousehold, Schema, Stop, Table,
};

fn fact(name: &str, ty: FactType, min: i64, max: i64, need: Need) -> FactSpec {
    FactSpec {
        name: name.into(),
        ty,
        min,
        max,
        need,
        ask: format!("what is the {name}?"),
    }
}

fn words(words: &[&str]) -> FactType {
    FactType::Choice(words.iter().map(|word| word.to_string()).collect())
}

fn month() -> FactType {
    FactType::Money("month".into())
}

/// Days from 1900 to 2100.
fn day(name: &str) -> FactSpec {
    fact(name, FactType::Date, -25_567, 47_481, Need::Required)
}

fn kind(name: &str, owner: Option<usize>, facts: Vec<FactSpec>) -> KindSpec {
    KindSpec {
        name: name.into(),
        owner,
        facts,
    }
}

/// A small pack's facts, one of each type, with records of the household, of adults, of children, of jobs and of records.
pub fn schema() -> Schema {
    use FactType::*;
    let zero = Need::Default(0);
    Schema {
        kinds: vec![
            kind(
                "household",
                None,
                vec![
                    fact("rent", month(), 0, 500_000, zero),
                    fact("tenure", words(&["none", "private", "social"]), 0, 2, zero),
                    fact(
                        "savings",
                        Money(String::new()),
                        0,
                        100_000_000,
                        Need::Required,
                    ),
                    fact("rooms", Count, 1, 9, Need::Default(1)),
                ],
            ),
            kind(
                "adult",
                Some(0),
                vec![
                    day("birth"),
                    fact("carer", YesNo, 0, 1, zero),
                    fact("pension", Rate, 0, 10_000, zero),
                ],
            ),
            kind(
                "child",
                Some(0),
                vec![day("birth"), fact("disabled", YesNo, 0, 1, zero)],
            ),
            kind(
                "other",
                Some(0),
                vec![
                    day("birth"),
                    fact("pays", Money("week".into()), 0, 50_000, zero),
                ],
            ),
            kind(
                "job",
                Some(1),
                vec![
                    fact("hours", Hours, 0, 16_800, Need::Required),
                    fact("wage", Money("hour".into()), 0, 10_000_000, Need::Required),
                    fact("premium_wage", Money("hour".into()), 0, 10_000_000, zero),
                    fact("weeks_paid", Number, 100, 5_300, Need::Default(5_200)),
                ],
            ),
            kind(
                "loan",
                Some(1),
                vec![
                    fact("plan", words(&["one", "two"]), 0, 1, Need::Required),
                    fact("since", Date, -25_567, 47_481, zero),
                ],
            ),
            kind(
                "income",
                Some(0),
                vec![fact("sum", month(), -500_000, 500_000, Need::Required)],
            ),
            kind(
                "nursery",
                Some(2),
                vec![fact("charge", month(), 0, 300_000, Need::Required)],
            ),
            kind(
                "trip",
                Some(4),
                vec![fact("fare", Money("day".into()), 0, 10_000, Need::Required)],
            ),
        ],
    }
}

pub const LIST: &str = "pack = \"small\"\ndate = 2026-05-04\n";
pub const HOUSEHOLDS: &str = "household,savings,rent,tenure\nA1,0,650.50,private\n";
pub const MEMBERS: &str = "household,ref,role,name,birth\nA1,a,adult,Orla Fennimarsh,1990-02-03\n";
pub const JOBS: &str = "household,member,ref,status,offer,hours,wage\nA1,a,,today,,16,12.71\n";

pub fn settings(text: &str) -> ListSettings {
    ListSettings::parse("list.toml", text).expect("the settings of this test are right")
}

/// What came of a list: faults of the whole list, readings, and why it stopped.
pub struct Outcome {
    pub list: Vec<String>,
    pub readings: Vec<Reading>,
    pub stop: Option<Stop>,
}

impl Outcome {
    /// The only household, which must be right.
    pub fn household(self) -> Household {
        assert_eq!(self.list, Vec::<String>::new());
        assert!(self.stop.is_none());
        let mut readings = self.readings.into_iter();
        let only = readings.next().expect("one household");
        assert!(readings.next().is_none());
        only.unwrap_or_else(|rejected| panic!("{:#?}", lines(&rejected)))
    }

    /// The lines of all faults of all households.
    pub fn faults(&self) -> Vec<String> {
        let rejected = self
            .readings
            .iter()
            .filter_map(|reading| reading.as_ref().err());
        rejected.flat_map(lines).collect()
    }

    /// The references of the households that are right.
    pub fn accepted(&self) -> Vec<&str> {
        let right = self
            .readings
            .iter()
            .filter_map(|reading| reading.as_ref().ok());
        right
            .map(|household| household.reference.as_str())
            .collect()
    }
}

pub fn lines(rejected: &RejectedHousehold) -> Vec<String> {
    rejected.faults.iter().map(ToString::to_string).collect()
}

/// Reads a list of these tables.
pub fn read_bytes(list: &str, tables: &[(&str, &[u8])]) -> Outcome {
    let (schema, settings, options) = (schema(), settings(list), ReadOptions::default());
    let tables = tables
        .iter()
        .map(|(name, bytes)| Table::new(*name, *bytes))
        .collect();
    let mut reader = ListReader::open(tables, &schema, &settings, &options);
    let (mut readings, mut stop) = (vec![], None);
    for reading in reader.by_ref() {
        match reading {
            Ok(reading) => readings.push(reading),
            Err(why) => stop = Some(why),
        }
    }
    Outcome {
        list: reader
            .list_faults()
            .iter()
            .map(ToString::to_string)
            .collect(),
        readings,
        stop,
    }
}

/// Reads a list of these texts; the usual households, members and jobs stand in for those that are not given.
pub fn read(list: &str, texts: &[(&str, &str)]) -> Outcome {
    let mut tables: Vec<(&str, &[u8])> = vec![];
    for (name, usual) in [
        ("households.csv", HOUSEHOLDS),
        ("members.csv", MEMBERS),
        ("jobs.csv", JOBS),
    ] {
        if texts.iter().all(|(given, _)| *given != name) {
            tables.push((name, usual.as_bytes()));
        }
    }
    tables.extend(texts.iter().map(|(name, text)| (*name, text.as_bytes())));
    read_bytes(list, &tables)
}

#[test]
fn a_plain_list_becomes_a_household() {
    use hourworth::case::{ADULT, HOUSEHOLD, JOB, JobRole, Known, days_since_1970};
    use hourworth::num::Money;
    let households = "household,savings,rent,rent_known,tenure,target_month,only,fold,address,language,paper,print_size,hold\n\
        A1,5999.99,650.50,seen,private,1500,a,\"child_benefit, rent\",\"Orla Fennimarsh\n3 Tallow Row\nHarrowmere\",en,us-letter,18,waits for a letter\n";
    let members = "household,ref,role,name,birth,carer,disabled,pension,pays\n\
        A1,a,adult,Orla Fennimarsh,1990-02-03,yes,,4.5%,\n\
        A1,c,child,Tam,2018-01-31,,no,,\n\
        A1,b,adult,,1988-12-01,,,,\n\
        A1,o,other,Gus,1999-01-01,,,,20\n";
    let jobs = "household,member,ref,status,offer,hours,wage,premium_wage,weeks_paid\n\
        A1,b,s,offer,night shifts,37.5,12.7135,15,\n\
        A1,a,x,further,,2.25,11,,\n\
        A1,a,m,today,Tallow Bakery,16,12.71,,52.14\n";
    let loans = "household,member,plan,since\nA1,b,two,2010-09-01\nA1,a,One,\n";
    let trips = "household,job,ref,fare\nA1,x,,3.20\n";
    let nursery = "household,member,charge\nA1,C,400\n";
    let home = read(
        LIST,
        &[
            ("households.csv", households),
            ("members.csv", members),
            ("jobs.csv", jobs),
            ("loans.csv", loans),
            ("trips.csv", trips),
            ("nurserys.csv", nursery),
        ],
    )
    .household();
    assert_eq!((home.reference.as_str(), home.row), ("A1", 2));
    assert_eq!(home.target, Some(Money(150_000)));
    let delivery = &home.delivery;
    assert_eq!(
        delivery.address,
        ["Orla Fennimarsh", "3 Tallow Row", "Harrowmere"]
    );
    assert_eq!(
        (
            delivery.paper.as_str(),
            delivery.print_size,
            delivery.language.as_str()
        ),
        ("us-letter", 18, "en")
    );
    assert_eq!(
        (delivery.only.as_str(), delivery.hold.as_str()),
        ("a", "waits for a letter")
    );
    assert_eq!(delivery.fold, ["child_benefit", "rent"]);
    let own = &home.instances[HOUSEHOLD][0];
    assert_eq!(own.values, [65_050, 1, 599_999, 1]);
    assert_eq!(
        own.known,
        [Known::Seen, Known::Told, Known::Told, Known::Assumed]
    );
    let adults = &home.instances[ADULT];
    let birth = chrono::NaiveDate::from_ymd_opt(1990, 2, 3).map(days_since_1970);
    assert_eq!(adults[0].values, [birth.expect("a day"), 1, 450]);
    assert_eq!(
        (adults[0].label.as_str(), adults[1].reference.as_str()),
        ("Orla Fennimarsh", "b")
    );
    assert_eq!(home.instances[3][0].values[1], 2_000, "20 a week");
    // By adult, today's first; the second adult has a blank one.
    let jobs = &home.instances[JOB];
    let owners: Vec<usize> = jobs.iter().map(|job| job.owner).collect();
    assert_eq!(owners, [0, 0, 1]);
    assert_eq!(
        home.job_roles,
        [JobRole::Today, JobRole::Further, JobRole::Today]
    );
    assert_eq!(jobs[0].values, [1_600, 127_100, 0, 5_214]);
    assert_eq!(jobs[0].label, "Tallow Bakery");
    assert_eq!(jobs[1].values, [225, 110_000, 0, 5_200]);
    assert_eq!(jobs[2].values, [0, 0, 0, 5_200]);
    assert_eq!(home.offers.len(), 1);
    assert_eq!(home.offers[0].values, [3_750, 127_135, 150_000, 5_200]);
    assert_eq!(
        (home.offers[0].owner, home.offers[0].label.as_str()),
        (1, "night shifts")
    );
    // Records in the order of their table.
    assert_eq!(
        (home.instances[5][0].owner, home.instances[5][1].owner),
        (1, 0)
    );
    assert_eq!(home.instances[7][0].owner, 0);
    assert_eq!(
        home.instances[8][0].owner, 1,
        "the fare is of the further job"
    );
}

#[test]
fn bytes_come_back_and_the_row_does_not_change_the_digest() {
    use hourworth::case::{digest, from_bytes, to_bytes};
    let home = read(LIST, &[]).household();
    let bytes = to_bytes(&home);
    assert_eq!(from_bytes(&bytes).expect("the same household"), home);
    assert!(from_bytes(&bytes[..bytes.len() - 1]).is_err());
    let mut longer = bytes.clone();
    longer.push(0);
    assert!(from_bytes(&longer).is_err());
    let mut moved = home.clone();
    moved.row = 77;
    assert_eq!(digest(&moved), digest(&home));
    moved.instances[0][0].values[0] += 1;
    assert_ne!(digest(&moved), digest(&home));
}
