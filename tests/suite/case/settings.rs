//! `list.toml`: what it may say, and each fault of it.

use hourworth::case::{DateForm, Decimals, Delimiter, ListSettings};
use hourworth::num::Hours;

fn t(text: &str, expected: &[&str]) {
    let found = match ListSettings::parse("list.toml", text) {
        Ok(settings) => panic!("{text}: {settings:?}"),
        Err(faults) => faults,
    };
    let found: Vec<String> = found.iter().map(ToString::to_string).collect();
    assert_eq!(found, expected, "{text}");
}

#[test]
fn everything_a_list_may_say() {
    let text = "\u{feff}title = \"Spring round\"\r\npack = 'uk'\r\ndate = 2026-05-04\r\n\
        [dates]\npayment = \"29/05/2026\"\nother = 2026-06-01\n\
        [format]\ndates = \"Day/Month/Year\"\ndecimals = \"comma\"\ndelimiter = \"tab\"\n\
        [grid]\nfrom = 8\nto = 40.5\nstep = \"0,5\"\n\
        [[changed]]\namount = \"taper\"\nvalue = 55.0\nbecause = \"a plan\"\n\
        [[changed]]\namount = \"cap\"\nvalue = \"1000\"\nbecause = \"another\"\n";
    let settings = ListSettings::parse("list.toml", text).expect("it is right");
    assert_eq!(
        (settings.title.as_str(), settings.pack.as_str()),
        ("Spring round", "uk")
    );
    assert_eq!(settings.date.to_string(), "2026-05-04");
    let dates: Vec<String> = settings
        .dates
        .iter()
        .map(|(name, day)| format!("{name} {day}"))
        .collect();
    assert_eq!(dates, ["payment 2026-05-29", "other 2026-06-01"]);
    assert_eq!(settings.format.dates, DateForm::DayMonthYear);
    assert_eq!(settings.format.decimals, Decimals::Comma);
    assert_eq!(settings.delimiter, Some(Delimiter::Tab));
    let grid = settings.grid;
    assert_eq!(
        (grid.from, grid.to, grid.step),
        (Some(Hours(800)), Some(Hours(4050)), Some(Hours(50)))
    );
    let changed: Vec<(&str, &str, usize)> = settings
        .changed
        .iter()
        .map(|one| (one.amount.as_str(), one.value.as_str(), one.line))
        .collect();
    assert_eq!(changed, [("taper", "55.0", 15), ("cap", "1000", 19)]);
}

#[test]
fn faults() {
    let ok = "pack = \"uk\"\ndate = 2026-05-04\n";
    t(
        "",
        &[
            "list.toml line 1, column 1, key pack: found nothing; expected the name or path of a rule pack, such as `pack = \"uk\"`",
            "list.toml line 1, column 1, key date: found nothing; expected the date of the list as year-month-day",
        ],
    );
    t(
        "pack = \"\"\ndate = 2026-05-04\n",
        &[
            "list.toml line 1, column 1, key pack: found nothing; expected the name or path of a rule pack",
        ],
    );
    t(
        &format!("{ok}titel = \"x\"\n"),
        &[
            "list.toml line 3, column 1: found `titel`, an unknown key; expected a key that exists here; did you mean `title`?",
        ],
    );
    t(
        "pack = \"uk\"\ndate = \"04/05/2026\"\n",
        &[
            "list.toml line 2, column 8, key date: found `04/05/2026`, a day in another form; expected a day as year-month-day; write days in the form that `dates` under `[format]` declares",
        ],
    );
    t(
        "pack = \"uk\"\ndate = 2026-05-04T10:00:00\n",
        &[
            "list.toml line 2, column 8, key date: found `2026-05-04T10:00:00`; expected a day as year-month-day; write days in the form that `dates` under `[format]` declares",
        ],
    );
    t(
        &format!("{ok}[format]\ndates = \"day-month-year\"\n"),
        &[
            "list.toml line 4, column 9, key dates: found `day-month-year`, an unknown form of days; expected `year-month-day`, `day/month/year` or `month/day/year`; did you mean `day/month/year`?",
        ],
    );
    t(
        &format!("{ok}[format]\ndecimals = \"dot\"\n"),
        &[
            "list.toml line 4, column 12, key decimals: found `dot`, an unknown decimal sign; expected `point` or `comma`",
        ],
    );
    t(
        &format!("{ok}format = 3\n"),
        &[
            "list.toml line 3, column 10, key format: found `3`; expected a table with `dates` and `decimals`",
        ],
    );
    t(
        &format!("{ok}[[changed]]\namount = \"x\"\n"),
        &[
            "list.toml line 3, column 1, key value: found nothing; expected the value in its place",
            "list.toml line 3, column 1, key because: found nothing; expected the reason, in words that every statement can print",
        ],
    );
    t(
        &format!(
            "{ok}[[changed]]\namount = \"x\"\nvalue = 1\nbecause = \"y\"\n[[changed]]\namount = \"x\"\nvalue = 2\nbecause = \"y\"\n"
        ),
        &[
            "list.toml line 7, column 1, key amount: found `x`, an entry that is there already; expected each entry once",
        ],
    );
    t(
        &format!("{ok}[grid]\nfrom = 20\nto = 10\n"),
        &[
            "list.toml line 3, column 1, key grid: found a grid whose `from` is 20, `to` is 10, `step` is 1; expected 0 <= `from` < `to` <= 168, `step` above 0, at most 2000 steps",
        ],
    );
    t(
        &format!("{ok}[grid]\nstep = 0.001\n"),
        &[
            "list.toml line 4, column 8, key step: found `0.001`, a number with too many decimals; expected hours a week, such as 48, with at most 2 decimals",
        ],
    );
    t(
        &format!("{ok}[grid]\nto = 168\nstep = 0.05\n"),
        &[
            "list.toml line 3, column 1, key grid: found a grid whose `from` is 0, `to` is 168, `step` is 0.05; expected 0 <= `from` < `to` <= 168, `step` above 0, at most 2000 steps",
        ],
    );
    t(
        &format!("{ok}[grid]\nto = 1e1\n"),
        &["list.toml line 4, column 6, key to: found `1e1`; expected hours a week, such as 48"],
    );
}

#[test]
fn a_text_that_is_not_toml() {
    let faults = ListSettings::parse("list.toml", "pack = uk\ndate = 2026-05-04\n")
        .expect_err("uk needs marks");
    let line = faults[0].to_string();
    assert!(line.starts_with("list.toml line 1, column 8: "), "{line}");
    assert!(line.ends_with("; expected TOML text"), "{line}");
}
