//! Each fault has its own message. One line a case: a change of the usual list, and the whole message.

use super::{HOUSEHOLDS, JOBS, LIST, MEMBERS, read, read_bytes};

/// Checks the faults of the households of a list with one table changed.
fn t(file: &str, text: &str, expected: &[&str]) {
    let outcome = read(LIST, &[(file, text)]);
    assert_eq!(outcome.list, Vec::<String>::new(), "{text}");
    assert!(outcome.stop.is_none(), "{text}");
    assert_eq!(outcome.faults(), expected, "{text}");
}

fn households(row: &str, expected: &str) {
    let text = format!("household,savings,rent,tenure,rooms\n{row}\n");
    t(
        "households.csv",
        &text,
        &[&format!("households.csv row 2, {expected}")],
    );
}

fn members(rows: &str, expected: &[&str]) {
    let text = format!("household,ref,role,birth,carer,disabled,pension,pays\n{rows}\n");
    t("members.csv", &text, expected);
}

fn jobs(rows: &str, expected: &[&str]) {
    let text =
        format!("household,member,ref,status,offer,hours,wage,premium_wage,weeks_paid\n{rows}\n");
    t("jobs.csv", &text, expected);
}

#[test]
fn values() {
    let h = households;
    h(
        "A1,,1,none,",
        "column savings: found nothing; expected money, such as 1234.50; what is the savings?",
    );
    h(
        "A1,0,-650,none,",
        "column rent: found `-650`, negative money; expected nothing or more",
    );
    h(
        "A1,0,6000,none,",
        "column rent: found `6000`, too large a value; expected at most 5000.00",
    );
    h(
        "A1,0,1,none,0",
        "column rooms: found `0`, too small a value; expected at least 1",
    );
    h(
        "A1,0,1,none,2.5",
        "column rooms: found `2.5`, a number with too many decimals; expected a whole number",
    );
    h(
        "A1,0,1,privat,",
        "column tenure: found `privat`, an unknown tenure; expected `none`, `private` or `social`; did you mean `private`?",
    );
    h(
        "A1,0,1,castle,",
        "column tenure: found `castle`, an unknown tenure; expected `none`, `private` or `social`",
    );
    h(
        "A1,0,£650,none,",
        "column rent: found `£650`, a number with a currency sign; expected money a month, such as 1234.50; leave the currency sign out",
    );
    h(
        "A1,0,650 €,none,",
        "column rent: found `650 €`, a number with a currency sign; expected money a month, such as 1234.50; leave the currency sign out",
    );
    h(
        "A1,0,\"1,650.00\",none,",
        "column rent: found `1,650.00`, a number with signs that group its digits; expected money a month, such as 1234.50; write the digits without signs or spaces between",
    );
    h(
        "A1,0,\"1,650\",none,",
        "column rent: found `1,650`, a number with signs that group its digits; expected money a month, such as 1234.50; write the digits without signs or spaces between",
    );
    h(
        "A1,0,1 650,none,",
        "column rent: found `1 650`, a number with signs that group its digits; expected money a month, such as 1234.50; write the digits without signs or spaces between",
    );
    h(
        "A1,0,1.650.00,none,",
        "column rent: found `1.650.00`, a number with signs that group its digits; expected money a month, such as 1234.50; write the digits without signs or spaces between",
    );
    h(
        "A1,0,\"650,50\",none,",
        "column rent: found `650,50`, a number with another decimal sign; expected money a month, such as 1234.50; write a decimal point, or change `decimals` under `[format]`",
    );
    h(
        "A1,0,650.505,none,",
        "column rent: found `650.505`, a number with too many decimals; expected money a month, such as 1234.50, with at most 2 decimals",
    );
    h(
        "A1,0,about 650,none,",
        "column rent: found `about 650`; expected money a month, such as 1234.50",
    );
    h(
        "A1,0,6e2,none,",
        "column rent: found `6e2`; expected money a month, such as 1234.50",
    );
    h(
        "A1,0,.5,none,",
        "column rent: found `.5`; expected money a month, such as 1234.50",
    );
    h(
        "A1,0,99999999999999999999,none,",
        "column rent: found `99999999999999999999`, too large a value; expected at most 999999999999",
    );
}

#[test]
fn days() {
    let m = |birth: &str, expected: &str| {
        let row = format!("A1,a,adult,{birth},,,,");
        members(
            &row,
            &[&format!("members.csv row 2, column birth: {expected}")],
        );
    };
    let write = "write days in the form that `dates` under `[format]` declares";
    m(
        "31.02.2020",
        &format!(
            "found `31.02.2020`, a day in another form; expected a day as year-month-day; {write}"
        ),
    );
    m(
        "03/02/1990",
        &format!(
            "found `03/02/1990`, a day in another form; expected a day as year-month-day; {write}"
        ),
    );
    m(
        "1990/02/03",
        &format!(
            "found `1990/02/03`, a day in another form; expected a day as year-month-day; {write}"
        ),
    );
    m(
        "03-02-1990",
        &format!(
            "found `03-02-1990`, a day in another form; expected a day as year-month-day; {write}"
        ),
    );
    m(
        "1990-02-30",
        "found `1990-02-30`, a day that does not exist; expected a day as year-month-day",
    );
    m(
        "1990-13-01",
        "found `1990-13-01`, a day that does not exist; expected a day as year-month-day",
    );
    m(
        "90-02-03",
        "found `90-02-03`, a year of two digits; expected a day as year-month-day; write the year with four digits",
    );
    m(
        "3 Feb 1990",
        &format!("found `3 Feb 1990`; expected a day as year-month-day; {write}"),
    );
    m(
        "1990-02-03 00:00",
        &format!("found `1990-02-03 00:00`; expected a day as year-month-day; {write}"),
    );
    m(
        "32907",
        &format!("found `32907`; expected a day as year-month-day; {write}"),
    );
    m(
        "1890-02-03",
        "found `1890-02-03`, too small a value; expected at least 1900-01-01",
    );
    m(
        "2026-05-05",
        "found `2026-05-05`, a birth after the date of the list; expected a birth up to 2026-05-04",
    );
    m(
        "",
        "found nothing; expected a day as year-month-day; what is the birth?",
    );
}

#[test]
fn a_day_is_never_guessed() {
    let list =
        |form: &str| format!("pack = \"x\"\ndate = 2026-05-04\n[format]\ndates = \"{form}\"\n");
    let t = |form: &str, birth: &str, expected: &str| {
        let text = format!("household,ref,role,birth\nA1,a,adult,{birth}\n");
        let found = read(&list(form), &[("members.csv", &text)]).faults();
        let found: Vec<&str> = found
            .iter()
            .map(|line| line.split("; ").next().unwrap_or_default())
            .collect();
        assert_eq!(
            found,
            [format!(
                "members.csv row 2, column birth: found `{birth}`, {expected}"
            )],
            "{form}"
        );
    };
    t("day/month/year", "02/13/1990", "a day that does not exist");
    t("month/day/year", "13/02/1990", "a day that does not exist");
    t("day/month/year", "1990-02-03", "a day in another form");
    t("day/month/year", "3.2.1990", "a day in another form");
    t("day/month/year", "1990/02/03", "a day in another form");
    t("month/day/year", "02/03/90", "a year of two digits");
}

#[test]
fn members_and_roles() {
    let a = "A1,a,adult,1990-02-03,,,,";
    members(
        "A1,a,adult,1990-02-03,,yes,,\nA1,c,child,2020-01-01,,,5,",
        &[
            "members.csv row 2, column disabled: found `yes`, a fact that the role `adult` does not have; expected an empty cell: only `child` has it",
            "members.csv row 3, column pension: found `5`, a fact that the role `child` does not have; expected an empty cell: only `adult` has it",
        ],
    );
    members(
        "A1,a,adult,1990-02-03,perhaps,,101,",
        &[
            "members.csv row 2, column carer: found `perhaps`; expected `yes` or `no`",
            "members.csv row 2, column pension: found `101`, too large a value; expected at most 100",
        ],
    );
    members(
        &format!("{a}\nA1,A,other,1990-02-03,,,,"),
        &[
            "members.csv row 3, column ref: found `A`, a reference that the member in row 2 has already; expected each reference once in a household, whatever the case",
        ],
    );
    members(
        "A1,a,adlt,1990-02-03,,,,",
        &[
            "members.csv row 2, column role: found `adlt`, an unknown role; expected `adult`, `child` or `other`; did you mean `adult`?",
        ],
    );
    members(
        &format!("{a}\nA1,,,2020-01-01,,,,"),
        &[
            "members.csv row 3, column ref: found nothing; expected a reference of letters, digits, `_` and `-`",
            "members.csv row 3, column role: found nothing; expected `adult`, `child` or `other`",
        ],
    );
    members(
        &format!("{a}\nA1,b,adult,1991-02-03,,,,\nA1,c,adult,1992-02-03,,,,"),
        &[
            "members.csv row 4, column role: found a third adult of the unit; expected at most two members with the role `adult`",
        ],
    );
    members(
        "A1,a b,adult,1990-02-03,,,,",
        &[
            "members.csv row 2, column ref: found `a b`, a malformed reference; expected letters A to Z, digits, `_` and `-`",
            "jobs.csv row 2, column member: found `a`, a member who is not in this household; expected `a b`",
        ],
    );
}

#[test]
fn a_household_needs_an_adult() {
    let text = "household,ref,role,birth\nA1,c,child,2020-01-01\n";
    let jobs = "household,member,status,hours,wage\n";
    let outcome = read(LIST, &[("members.csv", text), ("jobs.csv", jobs)]);
    assert_eq!(
        outcome.faults(),
        [
            "households.csv row 2: found no adult in this household; expected one or two members with the role `adult`"
        ]
    );
}

#[test]
fn a_child_older_than_its_parent() {
    let adults = "A1,a,adult,1990-02-03,,,,\nA1,b,adult,1985-02-03,,,,\n";
    let t = |birth: &str, parents: &[&str]| {
        let expected: Vec<String> = parents
            .iter()
            .map(|parent| format!("members.csv row 4, column birth: found `{birth}`, a child older than its parent: `{parent}` was not born before; expected a child born after every adult of its unit"))
            .collect();
        let expected: Vec<&str> = expected.iter().map(String::as_str).collect();
        members(&format!("{adults}A1,c,child,{birth},,,,"), &expected);
    };
    t("1984-01-01", &["a"]);
    t("1990-02-03", &["a"]);
    t("1990-02-02", &["a"]);
    t("1990-02-04", &[]);
}

#[test]
fn jobs_and_offers() {
    jobs(
        "A1,a,,today,,169,12,,",
        &[
            "jobs.csv row 2, column hours: found `169`, more hours than a week has; expected at most 168 hours a week",
        ],
    );
    jobs(
        "A1,a,,today,,-1,12,,",
        &["jobs.csv row 2, column hours: found `-1`, too small a value; expected at least 0"],
    );
    jobs(
        "A1,a,,today,,100,12,,\nA1,a,,further,,68.25,12,,",
        &[
            "jobs.csv row 2, column hours: found 168.25 hours in the jobs of `a` together, more than a week has; expected at most 168 hours a week",
        ],
    );
    jobs("A1,a,,today,,100,12,,\nA1,a,,further,,68,12,,", &[]);
    jobs(
        "A1,a,,today,,1,12,,\nA1,a,,further,,100,12,,\nA1,a,,offer,,69,12,,",
        &[
            "jobs.csv row 4, column hours: found 169 hours in the jobs of `a` together, more than a week has; expected at most 168 hours a week",
        ],
    );
    jobs(
        "A1,a,,today,,16,12,11.99,",
        &[
            "jobs.csv row 2, column premium_wage: found `11.99`, a premium below the basic wage; expected 0 for none, or at least the wage of 12.00",
        ],
    );
    jobs("A1,a,,today,,16,12.7123,0,", &[]);
    jobs("A1,a,,today,,16,12.71,12.71,", &[]);
    jobs(
        "A1,a,,today,,16,12,,\nA1,a,,today,,16,12,,",
        &[
            "jobs.csv row 3, column status: found a second job of today for one adult, beside the one in row 2; expected one job of today for each adult",
        ],
    );
    jobs(
        "A1,a,,further,,16,12,,",
        &[
            "jobs.csv row 2, column status: found a further job of an adult without a job of today; expected a job with the status `today` for the same adult",
        ],
    );
    jobs(
        "A1,a,,offer,bakery,16,,,",
        &[
            "jobs.csv row 2, column wage: found an offer without a wage; expected the money an hour that the offer pays",
        ],
    );
    jobs(
        "A1,a,,offer,bakery,16,0,,",
        &[
            "jobs.csv row 2, column wage: found an offer without a wage; expected the money an hour that the offer pays",
        ],
    );
    jobs(
        "A1,a,,today,,16,,,",
        &[
            "jobs.csv row 2, column wage: found nothing; expected money an hour, such as 12.71; what is the wage?",
        ],
    );
    jobs(
        "A1,a,,today,,16,12.71234,,",
        &[
            "jobs.csv row 2, column wage: found `12.71234`, a number with too many decimals; expected money an hour, such as 12.71, with at most 4 decimals",
        ],
    );
    jobs(
        "A1,a,,todya,,16,12,,",
        &[
            "jobs.csv row 2, column status: found `todya`, an unknown status; expected `today`, `further` or `offer`; did you mean `today`?",
        ],
    );
    jobs(
        "A1,a,,,,16,12,,",
        &["jobs.csv row 2, column status: found nothing; expected `today`, `further` or `offer`"],
    );
    jobs(
        "A1,,,today,,16,12,,",
        &["jobs.csv row 2, column member: found nothing; expected the reference of a member"],
    );
    jobs(
        "A1,z,,today,,16,12,,",
        &[
            "jobs.csv row 2, column member: found `z`, a member who is not in this household; expected `a`",
        ],
    );
    jobs(
        "A1,a,m,today,,16,12,,\nA1,a,M,offer,,16,12,,",
        &[
            "jobs.csv row 3, column ref: found `M`, a reference that the job in row 2 has already; expected each reference once in a household, whatever the case",
        ],
    );
    jobs(
        "A2,a,,today,,16,12,,",
        &[
            "jobs.csv row 2, column household: found `A2`, a household that is not in the list; expected a household that `households.csv` names; add the household, or take the row out",
        ],
    );
}

#[test]
fn jobs_belong_to_adults() {
    let members = "household,ref,role,birth\nA1,b,adult,1990-02-03\nA1,a,child,2020-01-01\n";
    t(
        "members.csv",
        members,
        &[
            "jobs.csv row 2, column member: found a job of `a`, whose role is `child`; expected jobs of members with the role `adult` only",
        ],
    );
}

#[test]
fn records_and_their_owners() {
    t(
        "loans.csv",
        "household,member,plan\nA1,z,one\n",
        &[
            "loans.csv row 2, column member: found `z`, a member who is not in this household; expected `a`",
        ],
    );
    t(
        "loans.csv",
        "household,member,plan\nA1,a,three\n",
        &["loans.csv row 2, column plan: found `three`, an unknown plan; expected `one` or `two`"],
    );
    t(
        "loans.csv",
        "household,member,plan\nB1,a,one\n",
        &[
            "loans.csv row 2, column household: found `B1`, a household that is not in the list; expected a household that `households.csv` names; add the household, or take the row out",
        ],
    );
    t(
        "nurserys.csv",
        "household,member,charge\nA1,a,5\n",
        &[
            "nurserys.csv row 2, column member: found a record of `a`, whose role is `adult`; expected a member with the role `child`",
        ],
    );
    t(
        "trips.csv",
        "household,job,fare\nA1,m,5\n",
        &[
            "trips.csv row 2, column job: found `m`, a job that is not in this household; expected one that the household has; it has none",
        ],
    );
    t(
        "trips.csv",
        "household,job,fare\nA1,,5\n",
        &["trips.csv row 2, column job: found nothing; expected the reference of a job"],
    );
    t(
        "incomes.csv",
        "household,ref,sum\nA1,x,-5\nA1,x,6\n",
        &[
            "incomes.csv row 3, column ref: found `x`, a reference that the income in row 2 has already; expected each reference once in a household, whatever the case",
        ],
    );
}

#[test]
fn delivery() {
    let d = |columns: &str, row: &str, expected: &str| {
        t(
            "households.csv",
            &format!("household,savings,{columns}\nA1,0,{row}\n"),
            &[&format!("households.csv row 2, {expected}")],
        );
    };
    d(
        "language",
        "cy",
        "column language: found `cy`, an unknown language; expected `en`",
    );
    d(
        "paper",
        "a5",
        "column paper: found `a5`, an unknown paper; expected `a4` or `us-letter`; did you mean `a4`?",
    );
    d(
        "print_size",
        "14",
        "column print_size: found `14`, an unknown size of print; expected `12`, `16`, `18` or `20`; did you mean `12`?",
    );
    d(
        "only",
        "z",
        "column only: found `z`, a member who is not an adult of this household; expected `a`",
    );
    d(
        "address,address_1",
        "x,y",
        "column address: found an address in one cell and in several; expected either `address` or `address_1` to `address_6`",
    );
    d(
        "address",
        "\"1\n2\n3\n4\n5\n6\n7\n8\n9\"",
        "column address: found an address of 9 lines; expected at most 8 lines",
    );
    d(
        "target_month",
        "0",
        "column target_month: found `0`, a target that is not above nothing; expected a sum above nothing, or an empty cell",
    );
    d(
        "target_month",
        "£5",
        "column target_month: found `£5`, a number with a currency sign; expected a sum of money; leave the currency sign out",
    );
    d(
        "rent,rent_known",
        ",seen",
        "column rent_known: found `seen`, but `rent` itself is empty; expected a value in `rent`",
    );
    d(
        "rent,rent_known",
        "1,sen",
        "column rent_known: found `sen`, an unknown word for how a fact is known; expected `seen` or `told`; did you mean `seen`?",
    );
}

#[test]
fn references_of_households() {
    let t = |reference: &str, expected: &str| {
        let households = HOUSEHOLDS.replace("A1", reference);
        let members = MEMBERS.replace("A1", reference);
        let jobs = JOBS.replace("A1", reference);
        let texts = [
            ("households.csv", households.as_str()),
            ("members.csv", &members),
            ("jobs.csv", &jobs),
        ];
        assert_eq!(read(LIST, &texts).faults(), [expected]);
    };
    t(
        "A/1",
        "households.csv row 2, column household: found `A/1`, a malformed reference; expected letters A to Z, digits, `_` and `-`",
    );
    t(
        "Ä1",
        "households.csv row 2, column household: found `Ä1`, a malformed reference; expected letters A to Z, digits, `_` and `-`",
    );
    let long = "x".repeat(41);
    t(
        &long,
        &format!(
            "households.csv row 2, column household: found `{long}`, a reference of 41 characters; expected at most 40 characters"
        ),
    );
}

#[test]
fn two_households_with_one_reference_are_both_rejected() {
    let households =
        "household,savings\nA1,0\nB1,0\na1,0\nC1,0\n".replace("B1,0\na1,0\n", "a1,0\nB1,0\n");
    let members = "household,ref,role,birth\nA1,a,adult,1990-01-01\nB1,a,adult,1990-01-01\nC1,a,adult,1990-01-01\n";
    let outcome = read(
        LIST,
        &[("households.csv", &households), ("members.csv", members)],
    );
    assert_eq!(outcome.accepted(), ["B1", "C1"]);
    let share = "a reference that the households in rows 2 and 3 share; expected each reference once, whatever the case";
    assert_eq!(
        outcome.faults(),
        [
            format!("households.csv row 2, column household: found `A1`, {share}"),
            format!("households.csv row 3, column household: found `a1`, {share}"),
        ]
    );
    assert_eq!(outcome.readings.len(), 4, "each row of a household counts");
}

#[test]
fn rows_without_a_household_do_not_disturb_the_others() {
    let members = "household,ref,role,birth\nA1,a,adult,1990-01-01\n,c,child,2020-01-01\nA1,d,child,2021-01-01\n";
    let outcome = read(LIST, &[("members.csv", members)]);
    assert_eq!(outcome.accepted(), ["A1"]);
    let home = outcome
        .readings
        .iter()
        .find_map(|reading| reading.as_ref().ok())
        .expect("A1");
    assert_eq!(home.instances[2].len(), 1);
    assert_eq!(
        outcome.faults(),
        [
            "members.csv row 3, column household: found no reference of a household; expected the household that the row belongs to"
        ]
    );
}

#[test]
fn every_fault_in_one_reading_and_the_rest_goes_on() {
    let households = "household,savings,rent\nA1,x,-1\nA2,0,0\nA3,0,-2\n";
    let members = "household,ref,role,birth\nA0,a,adult,1990-01-01\nA1,a,adult,1990-01-01\nA2,a,adult,1990-01-01\nA3,a,adult,soon\n";
    let jobs = "household,member,status,hours,wage\nA3,a,today,1,1\nA9,a,today,1,1\n";
    let outcome = read(
        LIST,
        &[
            ("households.csv", households),
            ("members.csv", members),
            ("jobs.csv", jobs),
        ],
    );
    assert_eq!(outcome.accepted(), ["A2"]);
    let places: Vec<String> = outcome
        .faults()
        .iter()
        .map(|line| line.split(": ").next().unwrap_or_default().to_string())
        .collect();
    assert_eq!(
        places,
        [
            "members.csv row 2, column household",
            "households.csv row 2, column rent",
            "households.csv row 2, column savings",
            "members.csv row 5, column birth",
            "households.csv row 4, column rent",
            "jobs.csv row 3, column household",
        ]
    );
    let references: Vec<(&str, u64)> = outcome
        .readings
        .iter()
        .filter_map(|reading| reading.as_ref().err())
        .map(|rejected| (rejected.reference.as_str(), rejected.row))
        .collect();
    assert_eq!(references, [("A0", 0), ("A1", 2), ("A3", 4), ("A9", 0)]);
}

#[test]
fn faults_of_the_whole_list() {
    let t =
        |texts: &[(&str, &str)], expected: &[&str]| assert_eq!(read(LIST, texts).list, expected);
    t(
        &[("households.csv", "household,savings,renntt\nA1,0,\n")],
        &[
            "households.csv column renntt: found `renntt`, an unknown column; expected a column of this table; did you mean `rent`?",
        ],
    );
    t(
        &[("households.csv", "household,savings,Savings\nA1,0,\n")],
        &[
            "households.csv column Savings: found `Savings`, a column that is there already; expected each column once; take one of them out",
        ],
    );
    t(
        &[("households.csv", "household,rent\nA1,0\n")],
        &["households.csv: found no column `savings`; expected this column in the header"],
    );
    t(
        &[("members.csv", "household,role,name\nA1,adult,x\n")],
        &[
            "members.csv: found no column `ref`; expected this column in the header",
            "members.csv: found no column `birth`; expected this column in the header",
        ],
    );
    t(
        &[("households.csv", "")],
        &["households.csv: found an empty file; expected a header row"],
    );
    t(
        &[("lones.csv", "household\n")],
        &[
            "lones.csv: found a table that the rule pack does not have; expected only tables of the rule pack; did you mean `loans.csv`?",
        ],
    );
    t(
        &[("Jobs.csv", "household\n")],
        &["jobs.csv: found this table a second time; expected each table once"]
            .map(|_| "Jobs.csv: found this table a second time; expected each table once"),
    );
    let outcome = read_bytes(
        LIST,
        &[
            ("households.csv", HOUSEHOLDS.as_bytes()),
            ("members.csv", MEMBERS.as_bytes()),
        ],
    );
    assert_eq!(
        outcome.list,
        ["jobs.csv: found no such file; expected this file in the list"]
    );
    assert!(outcome.readings.is_empty());
}

#[test]
fn a_bad_header_is_said_once_and_the_rest_is_still_checked() {
    let households = "household,rent\nA1,-1\nB1,0\n";
    let members = format!("{MEMBERS}B1,a,adult,,soon\n");
    let outcome = read(
        LIST,
        &[("households.csv", households), ("members.csv", &members)],
    );
    assert_eq!(outcome.list.len(), 1, "{:?}", outcome.list);
    let faults = outcome.faults();
    assert_eq!(faults.len(), 2, "{faults:?}");
    assert!(
        faults[0].starts_with("households.csv row 2, column rent: found `-1`"),
        "{faults:?}"
    );
    assert!(
        faults[1].starts_with("members.csv row 3, column birth: found `soon`"),
        "{faults:?}"
    );
}

#[test]
fn bytes_that_are_no_text() {
    let members = b"household,ref,role,name,birth\nA1,a,adult,Zo\xeb,1990-02-03\n";
    let outcome = read_bytes(
        LIST,
        &[
            ("households.csv", HOUSEHOLDS.as_bytes()),
            ("members.csv", members),
            ("jobs.csv", JOBS.as_bytes()),
        ],
    );
    assert_eq!(
        outcome.faults(),
        [
            "members.csv row 2, column name: found bytes that are no UTF-8 text; expected UTF-8 text; save the table as CSV in UTF-8"
        ]
    );
    let wide: Vec<u8> = HOUSEHOLDS.bytes().flat_map(|byte| [byte, 0]).collect();
    let marked = [&[0xff, 0xfe], wide.as_slice()].concat();
    for bytes in [wide, marked] {
        let outcome = read_bytes(
            LIST,
            &[
                ("households.csv", &bytes),
                ("members.csv", MEMBERS.as_bytes()),
                ("jobs.csv", JOBS.as_bytes()),
            ],
        );
        assert_eq!(
            outcome.list,
            [
                "households.csv row 1: found a file in UTF-16; expected UTF-8 text; save the table as CSV in UTF-8"
            ]
        );
    }
}

#[test]
fn a_quotation_mark_left_open_stops_the_table_where_it_opens() {
    let text = format!(
        "{MEMBERS}A1,c,child,\"Tam,2020-01-01\n{}",
        "A1,d,child,x,2020-01-01\n".repeat(3)
    );
    let outcome = read(LIST, &[("members.csv", &text)]);
    let stop = outcome.stop.map(|stop| stop.to_string());
    assert_eq!(
        stop.as_deref(),
        Some(
            "members.csv row 3: found a quotation mark that is never closed; expected a closing quotation mark; close it, or write two marks for one that is meant"
        )
    );
}

#[test]
fn a_cell_too_many() {
    let text = "household,ref,role,name,birth\nA1,a,adult,Orla, Fennimarsh,1990-02-03\n";
    let outcome = read(LIST, &[("members.csv", text)]);
    assert_eq!(
        outcome.faults()[0],
        "members.csv row 2, column number 6: found a cell beyond the last column; expected no more cells than the header has; put a cell that holds the separating sign in quotation marks"
    );
}

#[test]
fn names_and_addresses_appear_in_no_message() {
    let households = "household,savings,address,address_1,hold\nA1,0,3 Tallow Row,Secret,\n";
    let members = "household,ref,role,name,birth\nA1,a,adult,Orla Fennimarsh,bad,Secret\n";
    let faults = read(
        LIST,
        &[("households.csv", households), ("members.csv", members)],
    )
    .faults()
    .join("\n");
    assert_eq!(faults.lines().count(), 3, "{faults}");
    for word in ["Orla", "Tallow", "Secret"] {
        assert!(!faults.contains(word), "{faults}");
    }
}

#[test]
fn control_signs_in_a_value_are_shown_and_long_values_cut() {
    let long = "y".repeat(100);
    let text = format!("household,savings,rent,tenure\nA1,0,\"6\u{1b}[31m\n5\",{long}\n");
    let faults = read(LIST, &[("households.csv", &text)]).faults();
    assert!(
        faults[0].contains("found `6\\u{1b}[31m\\n5`"),
        "{}",
        faults[0]
    );
    assert!(
        faults[1].contains(&format!("found `{}…`", &long[..60])),
        "{}",
        faults[1]
    );
}
