//! What people see: the listing of a program, and faults with the lines they mean. Snapshots keep their input.

use super::section::{Section, sections};
use hourworth::engine::{JobChoice, Setting};
use hourworth::load::schema_of;

const TAX: &str = r#"--- tax ---
# amount: personal_allowance = 12570 GBP a year
# amount: basic_rate = 20 percent
part "Income Tax" dated by day
law "Harrowmere Tax Act 2001"
conversion week_to_year from week to year times 52 see "s.3"
conversion year_to_month from year to month times 1/12 see "s.3"
per job
figure pay_year: money a year = wage * hours converted by week_to_year
item pay: pay = pay_year converted by year_to_month see "s.1"
per adult
figure taxable: money a year = sum over job of pay_year beyond personal_allowance rounded down to 1 as a slope see "s.2"
item tax: tax = taxable * basic_rate converted by year_to_month see "s.3"
"#;

const HELP: &str = r#"--- help ---
part "Help" dated by day
law "Harrowmere Help Act 2002"
fact disabled of child: yesno default no ask "Is this child disabled?"
per child
figure rate_of: money a month = where disabled give money 90 a month otherwise where place by birth is 1 give money 50 a month otherwise money 30 a month
per household
figure limit: hours = largest_week limited to 30 hours
figure largest_week: hours = first adult by birth give week_of failing 0
per adult
figure week_of: hours = sum over job of hours
per household
item help: benefit = where limit below 16 hours give sum over child of rate_of otherwise 0 see "s.4"
item meals: passport = any child with (years from birth to day below 18) see "s.5"
note long_week where largest_week above 48 hours
child: birth = 2015-01-01
child: birth = 2017-01-01
"#;

fn listing(text: &str) -> String {
    let section: Section = sections(text).remove(0);
    let pack = section
        .check()
        .unwrap_or_else(|(sources, faults)| panic!("{}", faults[0].line(&sources)));
    let household = super::bench::household(&schema_of(&pack), &section.records);
    let setting = Setting::new(&household, 0, JobChoice::Today).expect("the first adult");
    pack.program(&[20_500], &[], &setting.shape)
        .expect("a program")
        .to_string()
}

#[test]
fn the_listing_of_a_tax() {
    insta::with_settings!({ description => TAX, omit_expression => true }, { insta::assert_snapshot!(listing(TAX)) });
}

#[test]
fn the_listing_of_a_benefit() {
    insta::with_settings!({ description => HELP, omit_expression => true }, { insta::assert_snapshot!(listing(HELP)) });
}

#[test]
fn five_faults_with_their_lines() {
    let text = r#"--- refuses-five ---
amount: limit = 100 GBP a month to 2026-03-31
fact income of household: money a week default 0 ask "How much is the income?"
conversion week_to_month from week to month times 52/12 see "s.1"
item help: benefit = money 400 a month - (incom converted by week_to_month) see "s.2"
item tax: tax = income * 20% see "s.3"
item fee: cost = money 5 a month
figure x: count = 3 beyond
bands tax_bands of money a month
"#;
    let section = sections(text).remove(0);
    let (sources, faults) = section.check().expect_err("five faults");
    let shown: Vec<String> = faults
        .iter()
        .map(|fault| fault.render(&sources, false))
        .collect();
    assert_eq!(shown.len(), 5, "{}", shown.join("\n\n"));
    insta::with_settings!({ description => text, omit_expression => true }, { insta::assert_snapshot!(shown.join("\n\n")) });
}
