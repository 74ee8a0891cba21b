//! The blank files of a pack.

use super::{read, schema};
use hourworth::case::{ListSettings, form};

fn file(name: &str) -> String {
    let files = form(&schema(), "small", "A small pack");
    let found = files.into_iter().find(|(file, _)| file == name);
    found.unwrap_or_else(|| panic!("no {name}")).1
}

#[test]
fn the_names_of_the_files() {
    let names: Vec<String> = form(&schema(), "small", "A small pack")
        .into_iter()
        .map(|(name, _)| name)
        .collect();
    assert_eq!(
        names,
        [
            "list.toml",
            "households.csv",
            "members.csv",
            "jobs.csv",
            "loans.csv",
            "incomes.csv",
            "nurserys.csv",
            "trips.csv",
            "facts.csv",
            "facts.md"
        ]
    );
}

#[test]
fn the_blank_files_can_be_filled_in() {
    let list = file("list.toml");
    let faults = ListSettings::parse("list.toml", &list).expect_err("the date is still missing");
    assert_eq!(faults.len(), 1, "{faults:?}");
    let list = list.replace("# date = ", "date = ");
    assert!(ListSettings::parse("list.toml", &list).is_ok());
    let row = |name: &str, cells: &[(&str, &str)]| {
        let header = file(name);
        let columns = header.trim_end().split(',');
        let cells: Vec<&str> = columns
            .map(|column| {
                cells
                    .iter()
                    .find(|(own, _)| *own == column)
                    .map_or("", |(_, value)| value)
            })
            .collect();
        format!("{header}{}\n", cells.join(","))
    };
    let home = read(
        &list,
        &[
            (
                "households.csv",
                &row(
                    "households.csv",
                    &[("household", "A1"), ("savings", "5"), ("address_2", "x")],
                ),
            ),
            (
                "members.csv",
                &row(
                    "members.csv",
                    &[
                        ("household", "A1"),
                        ("ref", "a"),
                        ("role", "adult"),
                        ("birth", "1990-01-01"),
                    ],
                ),
            ),
            (
                "jobs.csv",
                &row(
                    "jobs.csv",
                    &[
                        ("household", "A1"),
                        ("member", "a"),
                        ("status", "offer"),
                        ("hours", "5"),
                        ("wage", "6"),
                    ],
                ),
            ),
            (
                "loans.csv",
                &row(
                    "loans.csv",
                    &[("household", "A1"), ("member", "a"), ("plan", "one")],
                ),
            ),
            ("trips.csv", &file("trips.csv")),
        ],
    )
    .household();
    assert_eq!(home.offers.len(), 1);
    assert_eq!(home.delivery.address, ["x"]);
}

#[test]
fn a_header_has_every_column() {
    assert_eq!(
        file("members.csv"),
        "household,ref,role,name,birth,birth_known,carer,carer_known,pension,pension_known,disabled,disabled_known,pays,pays_known\n"
    );
    assert_eq!(
        file("loans.csv"),
        "household,member,ref,plan,plan_known,since,since_known\n"
    );
    assert_eq!(file("trips.csv"), "household,job,ref,fare,fare_known\n");
}

#[test]
fn each_fact_with_question_type_range_and_default() {
    let csv = file("facts.csv");
    for line in [
        "file,of,column,question,type,least,most,default",
        "households.csv,household,rent,what is the rent?,\"money a month, such as 1234.50\",0.00,5000.00,0.00",
        "households.csv,household,tenure,what is the tenure?,\"none, private or social\",,,none",
        "members.csv,adult,pension,what is the pension?,\"a percentage, such as 5 or 5.5%\",0,100,0",
        "members.csv,child,birth,what is the birth?,a day as year-month-day,1900-01-01,2099-12-31,required",
        "jobs.csv,job,weeks_paid,what is the weeks_paid?,\"a number, such as 2.5\",1,53,52",
    ] {
        assert!(csv.lines().any(|own| own == line), "{line}\n{csv}");
    }
    let page = file("facts.md");
    assert!(
        page.contains(
            "| `tenure` | household | what is the tenure? | none, private or social |  |  | none |"
        ),
        "{page}"
    );
}
