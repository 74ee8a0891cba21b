//! One household as a TOML text: the same as the tables, and faults with line and column.

use super::{lines, read, schema};
use hourworth::case::{Household, ListSettings, ReadOptions, read_single};

const TOML: &str = r#"pack = "small"
date = 2026-05-04
reference = "A1"

[household]
savings = 5_999.99
rent = "650.50"
rent_known = "seen"
tenure = "private"
target_month = 1500
only = "a"
fold = ["child_benefit", "rent"]
address = ["Orla Fennimarsh", "3 Tallow Row", "Harrowmere"]
print_size = 18

[[member]]
ref = "a"
role = "adult"
name = "Orla Fennimarsh"
birth = 1990-02-03
carer = true
pension = 4.5

[[member]]
ref = "c"
role = "child"
birth = "2018-01-31"

[[job]]
member = "a"
ref = "m"
status = "today"
hours = 16
wage = 12.71

[[job]]
member = "a"
status = "offer"
offer = "night shifts"
hours = 37.5
wage = "12.7135"
premium_wage = 15

[[loan]]
member = "a"
plan = "two"
since = 2010-09-01

[[trip]]
job = "m"
fare = 3.2
"#;

fn single(text: &str) -> Result<Household, Vec<String>> {
    let settings = ListSettings::parse_single("A1.toml", text).expect("the settings are right");
    read_single(
        "A1.toml",
        text,
        &schema(),
        &settings,
        &ReadOptions::default(),
    )
    .map_err(|rejected| lines(&rejected))
}

#[test]
fn a_single_household_equals_the_tables() {
    let list = "pack = \"small\"\ndate = 2026-05-04\n";
    let households = "household,savings,rent,rent_known,tenure,target_month,only,fold,address,print_size\n\
        A1,5999.99,650.50,seen,private,1500,a,child_benefit rent,\"Orla Fennimarsh\n3 Tallow Row\nHarrowmere\",18\n";
    let members = "household,ref,role,name,birth,carer,pension\n\
        A1,a,adult,Orla Fennimarsh,1990-02-03,yes,4.5\nA1,c,child,,2018-01-31,,\n";
    let jobs = "household,member,ref,status,offer,hours,wage,premium_wage\n\
        A1,a,m,today,,16,12.71,\nA1,a,,offer,night shifts,37.5,12.7135,15\n";
    let mut home = read(
        list,
        &[
            ("households.csv", households),
            ("members.csv", members),
            ("jobs.csv", jobs),
            (
                "loans.csv",
                "household,member,plan,since\nA1,a,two,2010-09-01\n",
            ),
            ("trips.csv", "household,job,fare\nA1,m,3.20\n"),
        ],
    )
    .household();
    home.row = 0;
    assert_eq!(single(TOML), Ok(home));
}

#[test]
fn the_declared_form_holds_for_texts_and_tomls_own_for_the_rest() {
    let list = "pack = \"small\"\ndate = 2026-05-04\n[format]\ndates = \"day/month/year\"\ndecimals = \"comma\"\n";
    let text = TOML
        .replace("pack = \"small\"\ndate = 2026-05-04\n", "")
        .replace("\"650.50\"", "\"650,50\"")
        .replace("\"12.7135\"", "\"12,7135\"")
        .replace("\"2018-01-31\"", "\"31/01/2018\"");
    let (top, rest) = text.split_at(text.find("[household]").expect("it is there"));
    let (pack, format) = list.split_at(list.find("[format]").expect("it is there"));
    let text = format!("{pack}{top}{format}\n{rest}");
    assert_eq!(single(&text), single(TOML));
    assert!(single(&text).is_ok());
}

#[test]
fn faults_have_line_and_column() {
    let t = |from: &str, to: &str, expected: &[&str]| {
        assert!(TOML.contains(from), "{from}");
        assert_eq!(
            single(&TOML.replacen(from, to, 1)).expect_err(to),
            expected,
            "{to}"
        );
    };
    t(
        "rent = \"650.50\"",
        "rent = -1",
        &[
            "A1.toml line 7, column 8, key rent: found `-1`, negative money; expected nothing or more",
        ],
    );
    t(
        "rent = \"650.50\"",
        "rent = 6e2",
        &[
            "A1.toml line 7, column 8, key rent: found `6e2`; expected money a month, such as 1234.50",
        ],
    );
    t(
        "rent = \"650.50\"",
        "rent = nan",
        &[
            "A1.toml line 7, column 8, key rent: found `nan`; expected money a month, such as 1234.50",
        ],
    );
    t(
        "rent = \"650.50\"",
        "rent = 0x20",
        &[
            "A1.toml line 7, column 8, key rent: found `0x20`; expected money a month, such as 1234.50",
        ],
    );
    t(
        "rent = \"650.50\"",
        "rent = [1]",
        &["A1.toml line 7, column 8, key rent: found `array`; expected one value"],
    );
    t(
        "rent = ",
        "rennt = ",
        &[
            "A1.toml line 7, column 1: found `rennt`, an unknown key; expected a key that exists here; did you mean `rent`?",
            "A1.toml line 8, column 14, key rent_known: found `seen`, but `rent` itself is empty; expected a value in `rent`",
        ],
    );
    t(
        "[[loan]]",
        "[[loans]]",
        &[
            "A1.toml line 44, column 3: found `loans`, an unknown key; expected a key that exists here; did you mean `loan`?",
        ],
    );
    t(
        "savings = 5_999.99\n",
        "",
        &[
            "A1.toml line 1, column 1, key savings: found nothing; expected money, such as 1234.50; what is the savings?",
        ],
    );
    t(
        "birth = 1990-02-03",
        "birth = \"03/02/1990\"",
        &[
            "A1.toml line 20, column 9, key birth: found `03/02/1990`, a day in another form; expected a day as year-month-day; write days in the form that `dates` under `[format]` declares",
        ],
    );
    t(
        "birth = 1990-02-03\n",
        "",
        &[
            "A1.toml line 16, column 1, key birth: found nothing; expected a day as year-month-day; what is the birth?",
        ],
    );
    t(
        "ref = \"c\"",
        "ref = \"A\"",
        &[
            "A1.toml line 25, column 7, key ref: found `A`, a reference that the member in line 16 has already; expected each reference once in a household, whatever the case",
        ],
    );
    t(
        "reference = \"A1\"",
        "reference = \"A 1\"",
        &[
            "A1.toml line 3, column 13, key reference: found `A 1`, a malformed reference; expected letters A to Z, digits, `_` and `-`",
        ],
    );
    t(
        "premium_wage = 15",
        "premium_wage = 11",
        &[
            "A1.toml line 42, column 16, key premium_wage: found `11`, a premium below the basic wage; expected 0 for none, or at least the wage of 12.7135",
        ],
    );
    t(
        "[[job]]\nmember = \"a\"\nref",
        "[[job]]\nhousehold = \"A1\"\nmember = \"a\"\nref",
        &[
            "A1.toml line 30, column 1: found `household`, an unknown key; expected a key that exists here",
        ],
    );
}

#[test]
fn broken_texts() {
    let found = |text: &str| {
        let settings = ListSettings::parse_single("A1.toml", TOML).expect("the settings are right");
        let rejected = read_single(
            "A1.toml",
            text,
            &schema(),
            &settings,
            &ReadOptions::default(),
        );
        lines(&rejected.expect_err("it is broken"))
    };
    assert!(found("[household\n")[0].starts_with("A1.toml line 1, column "));
    assert_eq!(
        found("reference = \"A1\"\nmember = 3\nhousehold = 4\n"),
        [
            "A1.toml line 1, column 1: found no adult in this household; expected one or two members with the role `adult`",
            "A1.toml line 1, column 1, key savings: found nothing; expected money, such as 1234.50; what is the savings?",
            "A1.toml line 2, column 10, key member: found `3`; expected tables `[[member]]`",
            "A1.toml line 3, column 13, key household: found `4`; expected a table `[household]`",
        ]
    );
}
