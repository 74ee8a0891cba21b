//! From an assessment and its evidence to payroll pages: one employee, pay and what comes off it. Benefits come last, and in figures only
//! where the household has them. A tax that is not taken from pay is named and never taken off.

mod around;
mod facts;
mod hours;
mod table;

use super::steps::{Step, steps};
use super::words::{Words, hours_text};
use super::{Detail, leading_first, what_if};
use crate::measures::{Assessment, BudgetLine, EarnerResult, ItemKind, Point};
use crate::num::Money;
use crate::statement::context::{LetterContext, LetterDelivery};
use crate::statement::error::StatementError;
use crate::statement::evidence::Evidence;
use crate::statement::pay_view::PayView;
use crate::statement::view::{Answer, AnswerWeight, Particular};
use table::Amounts;

/// Whether the employer's cost is shown.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, serde::Serialize, serde::Deserialize)]
pub enum EmployerCost {
    /// Not asked for.
    #[default]
    LeftOut,
    /// Shown beside the page's sums.
    Shown,
}

/// Everything that the parts of a page need.
struct Page<'a> {
    words: Words<'a>,
    evidence: &'a Evidence,
    earner: &'a EarnerResult,
    steps: Vec<Step<'a>>,
}

/// Builds one page for each employee that the statement is for, with the position of the adult.
///
/// # Errors
/// Where a text is missing from the language file.
pub fn pay_views(
    assessment: &Assessment,
    context: &LetterContext,
    evidence: &Evidence,
    employer: EmployerCost,
) -> Result<Vec<(usize, PayView)>, StatementError> {
    // No address and nothing of it: a name or a reference is enough.
    let context = LetterContext {
        delivery: LetterDelivery {
            address: vec![],
            ..context.delivery.clone()
        },
        ..context.clone()
    };
    let earners = leading_first(assessment, &context);
    let mut views = vec![];
    for earner in &earners {
        let words = Words::new(assessment, &context, Detail::Full, &[earner])?;
        let steps = steps(&words, earner)?;
        let page = Page {
            words,
            evidence,
            earner,
            steps,
        };
        views.push((earner.adult, view(&page, employer)?));
    }
    Ok(views)
}

fn view(page: &Page<'_>, employer: EmployerCost) -> Result<PayView, StatementError> {
    let (words, context) = (&page.words, page.words.context);
    let (tables, period_note) = table::tables(page)?;
    let mut parts = vec![];
    parts.extend(facts::contract(page)?);
    parts.extend(hours::part(page)?);
    if employer == EmployerCost::Shown {
        parts.extend(around::employer(page)?);
    }
    parts.push(around::benefits(page)?);
    parts.extend(super::closing::notes(words)?);
    let who = match page.earner.name.as_str() {
        "" => words.assessment.reference.as_str(),
        name => name,
    };
    let starred = tables
        .iter()
        .flat_map(|table| &table.rows)
        .any(|row| row.name.ends_with(super::marks::STAR));
    Ok(PayView {
        language: context.texts.language().to_owned(),
        paper: context.delivery.paper.clone(),
        print_size: context.delivery.print_size.max(12),
        close: 0,
        title: words.plain("payslip.title")?,
        number: context.number.clone(),
        office: context.office.name.clone(),
        whose: words.say("for", &[("who", who)])?,
        particulars: particulars(words)?,
        answers: answers(page)?,
        tables,
        period_note,
        star_note: if starred {
            words.plain("table.star")?
        } else {
            String::new()
        },
        facts_heading: words.plain("payslip.facts")?,
        facts: facts::facts(page)?,
        facts_notes: facts::notes(page),
        purposes_heading: words.plain("payslip.purposes")?,
        purposes: table::purposes(page)?,
        parts,
        what_if: what_if(words)?,
        estimate: vec![
            words.say(
                "payslip.estimate.day",
                &[("assessed", &words.day(context.assessed)?)],
            )?,
            words.plain("payslip.estimate.pence")?,
        ],
        caution: words.plain("payslip.caution")?,
    })
}

/// Number, days and rules, in few lines.
fn particulars(words: &Words<'_>) -> Result<Vec<Particular>, StatementError> {
    let context = words.context;
    let rules = match words.label("title") {
        Some(title) => title,
        None => words.own("title", &context.rules_title)?,
    };
    let until = words.day(words.rules_until())?;
    let rules = words.say("payslip.rules", &[("rules", &rules), ("until", &until)])?;
    let rows = [
        ("issued", words.day(context.issued)?),
        ("assessed", words.day(context.assessed)?),
        ("rules", rules),
    ];
    let rows = rows.into_iter().map(|(key, value)| {
        let name = words.plain(&format!("head.{key}"))?;
        Ok(Particular { name, value })
    });
    rows.collect()
}

/// What reaches the person, one answer a step.
fn answers(page: &Page<'_>) -> Result<Vec<Answer>, StatementError> {
    let words = &page.words;
    let now = page
        .today()
        .map(|(line, point)| Amounts::new(page, line, point));
    let mut answers = vec![];
    for step in page.shown() {
        let to = Amounts::new(page, step.line, step.to);
        let change = now.as_ref().map(|now| to.net() - now.net());
        let sum = |sum: Money| words.currency.short(Money(sum.0.abs()));
        let kept = match change {
            None => words.say("payslip.answer.start", &[("sum", &sum(to.net()))])?,
            Some(Money(0)) => words.plain("payslip.answer.same")?,
            Some(change) if change.0 > 0 => {
                words.say("payslip.answer.more", &[("sum", &sum(change))])?
            }
            Some(change) => words.say("payslip.answer.less", &[("sum", &sum(change))])?,
        };
        answers.push(Answer {
            step: step.name.clone(),
            about: step.about.clone(),
            kept,
            detail: detail(page, step, now.as_ref().map(Amounts::gross), to.gross())?,
            weight: if answers.is_empty() {
                AnswerWeight::Lead
            } else {
                AnswerWeight::Beside
            },
        });
    }
    Ok(answers)
}

/// Hours, rates and gross pay of a step against today's.
fn detail(
    page: &Page<'_>,
    step: &Step<'_>,
    now: Option<Money>,
    gross: Money,
) -> Result<String, StatementError> {
    let words = &page.words;
    let hours = hours_text(step.to.hours);
    let wage = words.currency.wage(step.line.terms.wage);
    let sum = |sum: Money| words.currency.short(Money(sum.0.abs()));
    let Some(((line, point), now)) = page.today().zip(now) else {
        let values = [
            ("to", hours.as_str()),
            ("wage", &wage),
            ("pay", &sum(gross)),
        ];
        return words.say("payslip.detail.start", &values);
    };
    let (from, old) = (
        hours_text(point.hours),
        words.currency.wage(line.terms.wage),
    );
    let mut said = vec![if from == hours {
        words.say("payslip.detail.hours_same", &[("to", &hours)])?
    } else {
        words.say("payslip.detail.hours", &[("to", &hours), ("from", &from)])?
    }];
    if old != wage {
        said.push(words.say("payslip.detail.wage", &[("wage", &wage), ("old", &old)])?);
    }
    let change = gross - now;
    let key = match change.0 {
        0 => "payslip.detail.gross_same",
        1.. => "payslip.detail.gross_up",
        _ => "payslip.detail.gross_down",
    };
    said.push(words.say(key, &[("pay", &sum(change))])?);
    Ok(said.join(" "))
}

impl<'a> Page<'a> {
    /// Today's line and point; none for somebody without a job.
    fn today(&self) -> Option<(&'a BudgetLine, &'a Point)> {
        let line = self.earner.lines.first().filter(|_| self.earner.has_job)?;
        Some((line, &line.grid[line.own]))
    }

    /// The steps that are tabulated: the offers, else four hours more.
    fn shown(&self) -> impl Iterator<Item = &Step<'a>> {
        let asked = self.steps.iter().any(|step| step.offer.is_some());
        let steps = self.steps.iter();
        steps.filter(move |step| step.offer.is_some() || !asked)
    }

    /// Whether an item is part of take-home pay and still not taken from pay.
    fn apart(&self, item: usize) -> bool {
        let name = &self.words.assessment.items[item].name;
        let key = format!("apart.{name}");
        let context = self.words.context;
        // What is taken from pay does not hang on a language's words.
        context.labels.contains_key(&key) || context.english.contains_key(&key)
    }

    /// Positions of the earner's items that are taken from pay, of some kinds.
    fn taken(&self, kinds: &[ItemKind]) -> Vec<usize> {
        let items = self.words.assessment.items.iter().enumerate();
        items
            .filter(|(place, item)| {
                kinds.contains(&item.kind)
                    && item.adult == Some(self.earner.adult)
                    && !self.apart(*place)
            })
            .map(|(place, _)| place)
            .collect()
    }
}
