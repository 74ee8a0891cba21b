//! What the page says about the job: hours and rates, how the pay is paid, contribution category, pension; and a change of contract.

use super::Page;
use super::table::{SACRIFICE, fact, premium, terms_of_premium};
use crate::measures::{BudgetLine, ItemKind, Point};
use crate::num::{Fraction, Hours};
use crate::statement::build::facts::value;
use crate::statement::build::words::hours_text;
use crate::statement::error::StatementError;
use crate::statement::evidence::PointPlace;
use crate::statement::fonts::{Weight, width};
use crate::statement::money::{capital, money};
use crate::statement::pay_view::PayFact;
use crate::statement::view::{Line, Part, PartKind};

/// Distance between two facts in sizes of print; that of `pairs` in `shared/ledger.typ`.
const GUTTER: f64 = 1.2;
/// The pack's group of labels for what a payroll page shows: facts of the job and figures of the working.
const GROUP: &str = "payslip.";
/// The pack's group of labels for facts of the job that are shown only where somebody told them.
const WHERE_TOLD: &str = "payslip_told.";
/// The pack's group of labels for what stands in place of a fact's value where nobody told the fact.
const UNSAID: &str = "payslip_unsaid.";
/// How the names of the facts on the pension start: without a pension only the method is said.
const PENSION: &str = "pension_";
/// The pack's sentences for a payroll page.
const SAID: &str = "payslip_said.";

/// The facts; how wide each is says whether it stands alone in its row.
pub(super) fn facts(page: &Page<'_>) -> Result<Vec<PayFact>, StatementError> {
    let delivery = &page.words.context.delivery;
    let size = f64::from(delivery.print_size.max(12));
    let half = (crate::statement::build::text_width(&delivery.paper) - GUTTER * size) / 2.0;
    let mut facts = all(page)?;
    for fact in &mut facts {
        let text = format!("{} {}", fact.name, fact.value);
        fact.wide = u8::from(width(&text, Weight::Regular, size) > half);
    }
    // What needs a row of its own comes last, so that no row is half empty.
    facts.sort_by_key(|fact| fact.wide);
    Ok(facts)
}

/// The facts, each with today's value and, where it is another, each step's.
fn all(page: &Page<'_>) -> Result<Vec<PayFact>, StatementError> {
    let words = &page.words;
    let mut facts = vec![PayFact {
        wide: 0,
        name: words.plain("payslip.rate.basic")?,
        value: across(page, |line, _| {
            words.say(
                "per.hour",
                &[("sum", &words.currency.wage(line.terms.wage))],
            )
        })?,
    }];
    let points = page.points();
    let beyond = |line: &BudgetLine, hours: Hours| premium(line, hours).is_some();
    if points.iter().any(|(line, point)| beyond(line, point.hours)) {
        facts.push(PayFact {
            wide: 0,
            name: words.plain("payslip.rate.premium")?,
            value: across(page, |line, _| match terms_of_premium(line) {
                Some((after, wage)) => {
                    let wage = wage * Fraction::whole(10_000);
                    let wage = i64::try_from(wage.floor()).unwrap_or(i64::MAX);
                    let (wage, after) = (words.currency.wage(wage), hours_text(after));
                    let values = [("wage", wage.as_str()), ("after", &after)];
                    words.say("payslip.rate.beyond", &values)
                }
                None => words.plain("payslip.rate.none"),
            })?,
        });
    }
    let Some((line, _)) = points.first() else {
        return Ok(facts);
    };
    for fact in &line.terms.facts {
        let always = words.label(&format!("{GROUP}{}", fact.name));
        let told = words
            .label(&format!("{WHERE_TOLD}{}", fact.name))
            .filter(|_| fact.known != 'a');
        let pension = fact.name.starts_with(PENSION) && fact.name != SACRIFICE.0;
        let Some(name) = always.or(told) else {
            continue;
        };
        if pension && !page.has(ItemKind::Pension) {
            continue;
        }
        facts.push(PayFact {
            wide: 0,
            name: capital(&name),
            value: across(page, |line, _| {
                let facts = &line.terms.facts;
                match facts.iter().find(|other| other.name == fact.name) {
                    Some(fact) => {
                        let unsaid = words.label(&format!("{UNSAID}{}", fact.name));
                        match unsaid.filter(|_| fact.known == 'a') {
                            Some(unsaid) => Ok(unsaid),
                            None => value(words, fact),
                        }
                    }
                    None => Ok(String::new()),
                }
            })?,
        });
    }
    facts.extend(figures(page)?);
    Ok(facts)
}

/// Figures of the working that the pack's labels name.
fn figures(page: &Page<'_>) -> Result<Vec<PayFact>, StatementError> {
    let words = &page.words;
    let adult = page.earner.adult;
    let shown: Vec<usize> = page
        .shown()
        .filter_map(|step| step.offer)
        .map(|offer| offer.line)
        .collect();
    let points: Vec<_> = page
        .evidence
        .points
        .iter()
        .filter(|point| point.adult == adult)
        .filter(|point| match point.place {
            PointPlace::Today => page.earner.has_job,
            PointPlace::Offer(line) => shown.contains(&line),
            PointPlace::More(_) => shown.is_empty(),
            PointPlace::NotInWork => false,
        })
        .collect();
    let Some(first) = points.first() else {
        return Ok(vec![]);
    };
    let whose = [first.job.clone(), format!("adult {}", adult + 1)];
    let mut facts = vec![];
    for line in &first.lines {
        let Some(name) = words.label(&format!("{GROUP}{}", line.name)) else {
            continue;
        };
        let item = words.assessment.items.iter();
        let pension = item
            .into_iter()
            .any(|item| item.part == line.part && item.kind == ItemKind::Pension);
        if !whose.contains(&line.of) || (pension && !page.has(ItemKind::Pension)) {
            continue;
        }
        let mut values: Vec<String> = vec![];
        for point in &points {
            let mut lines = point.lines.iter();
            let same = lines.find(|one| one.name == line.name && one.of == line.of);
            values.push(match same {
                Some(line) => written(page, &line.value)?,
                None => String::new(),
            });
        }
        facts.push(PayFact {
            wide: 0,
            name: capital(&name),
            value: joined(page, &values)?,
        });
    }
    Ok(facts)
}

/// A value of the working as a page writes it: `2634.666667 a month` is `£2,634.67 a month`.
fn written(page: &Page<'_>, text: &str) -> Result<String, StatementError> {
    let words = &page.words;
    let Some((figure, unit)) = text.split_once(" a ") else {
        return match text.split_once(' ') {
            Some((figure, "percent")) => words.say("write.percent", &[("number", figure)]),
            Some((figure, "hours")) => words.say("facts.hours", &[("hours", figure)]),
            Some(_) => Ok(text.to_owned()),
            None if text.starts_with(|sign: char| sign.is_ascii_digit()) => Ok(words.number(text)),
            None => words.named(&format!("word.{text}"), text),
        };
    };
    let (whole, part) = figure.split_once('.').unwrap_or((figure, ""));
    let digits = format!("{whole}{part}").parse::<i128>();
    let places = u32::try_from(part.len()).unwrap_or(0);
    match (digits, words.context.texts.has(&format!("per.{unit}"))) {
        (Ok(digits), true) => {
            let sum = money(Fraction::new(digits, 10i128.pow(places.min(20))));
            let sum = words.currency.exact(sum);
            words.say(&format!("per.{unit}"), &[("sum", &sum)])
        }
        (Ok(_) | Err(_), _) => Ok(text.to_owned()),
    }
}

/// A value today and at each step that is shown; once where all are the same.
fn across(
    page: &Page<'_>,
    of: impl Fn(&BudgetLine, &Point) -> Result<String, StatementError>,
) -> Result<String, StatementError> {
    let points = page.points();
    let values: Result<Vec<String>, _> =
        points.iter().map(|(line, point)| of(line, point)).collect();
    joined(page, &values?)
}

/// Values in the order of the columns; once where all are the same.
fn joined(page: &Page<'_>, values: &[String]) -> Result<String, StatementError> {
    let words = &page.words;
    let Some((first, rest)) = values.split_first() else {
        return Ok(String::new());
    };
    if rest.iter().all(|value| value == first) {
        return Ok(first.clone());
    }
    let mut names = vec![];
    if page.today().is_some() {
        names.push(words.plain("table.today")?);
    }
    names.extend(page.shown().map(|step| step.name.clone()));
    let mut said = vec![];
    for (name, value) in names.iter().zip(values) {
        said.push(words.say("payslip.rate.at", &[("name", name), ("value", value)])?);
    }
    words.listed(&said)
}

/// The pack's sentences below the facts.
pub(super) fn notes(page: &Page<'_>) -> Vec<String> {
    let labels = page.words.context.labels.range(SAID.to_owned()..);
    labels
        .take_while(|(key, _)| key.starts_with(SAID))
        .filter_map(|(key, _)| page.words.label(key))
        .collect()
}

/// Salary sacrifice as what it is: a change of contract; none where nothing is given up.
pub(super) fn contract(page: &Page<'_>) -> Result<Option<Part>, StatementError> {
    let words = &page.words;
    let points = page.points();
    let gives_up = |line: &BudgetLine| fact(line, SACRIFICE.0) == Some(SACRIFICE.1);
    if !points.iter().any(|(line, _)| gives_up(line)) {
        return Ok(None);
    }
    let line = Line::from(words.plain("payslip.contract.line")?);
    let mut lines = vec![line];
    if points.iter().any(|(line, _)| !gives_up(line)) {
        lines.push(words.plain("payslip.contract.new")?.into());
    }
    words
        .part("payslip.contract.heading", PartKind::Paragraphs, lines)
        .map(Some)
}

impl<'a> Page<'a> {
    /// Today, where there is a job, and the steps that are shown.
    pub(super) fn points(&self) -> Vec<(&'a BudgetLine, &'a Point)> {
        let mut points: Vec<(&BudgetLine, &Point)> = vec![];
        points.extend(self.today());
        points.extend(self.shown().map(|step| (step.line, step.to)));
        points
    }

    /// Whether an item of a kind is taken from pay at one of the points.
    pub(super) fn has(&self, kind: ItemKind) -> bool {
        let items = self.taken(&[kind]);
        let points = self.points();
        points
            .iter()
            .any(|(_, point)| items.iter().any(|item| point.items[*item].0 != 0))
    }
}
