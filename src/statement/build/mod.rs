//! From an assessment to the view of a letter: which numbers are said, in which words, in which order.
//! Works nothing out that the measures hold; only takes differences of printed sums.

mod answers;
mod closing;
mod copy;
mod facts;
mod figure;
mod head;
mod later;
mod marks;
mod pay;
mod section;
mod steps;
mod table;
mod turn_words;
mod turns;
mod words;

use super::context::LetterContext;
use super::error::StatementError;
use super::money::{Decimals, capital};
use super::room::first_page_holds_caution;
use super::view::{LetterView, Section};
use crate::measures::{Assessment, EarnerResult};
use words::{Answers, Words};

pub use copy::copy_view;
pub(super) use figure::text_width;
pub use pay::{EmployerCost, pay_views};

/// How much a letter says; each says less than the one before.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Detail {
    /// Everything.
    Full,
    /// Without the words explained, and with fewer names among the facts that were assumed to be none.
    Plain,
    /// Also without the bars and without turning points that lie beyond the steps, where there are others.
    Short,
    /// Also without an answer to four hours more beside an offer, without the sums of an hour less and more, and without a word
    /// on further turning points.
    Bare,
    /// Also the chart of the leading person alone, and three turning points a person.
    Brief,
}

/// Builds the view of a client letter.
///
/// # Errors
/// Where a text is missing from the language file, or the address or a word that somebody typed has no room.
pub fn letter_view(
    assessment: &Assessment,
    context: &LetterContext,
    detail: Detail,
) -> Result<LetterView, StatementError> {
    head::check_address(&context.delivery.address)?;
    head::check_words(assessment, context)?;
    let earners = leading_first(assessment, context);
    let mut words = Words::new(assessment, context, detail, &earners)?;
    let sections = sections(&words, &earners)?;
    let assessed = words.day(context.assessed)?;
    let mut estimate = vec![
        words.say("estimate.first", &[("assessed", &assessed)])?,
        words.plain("estimate.change")?,
    ];
    if !words.marks.instruments.is_empty() {
        estimate.push(words.plain("estimate.star")?);
    }
    let (office_lines, office_more) = head::office_lines(&words);
    let mut view = LetterView {
        language: context.texts.language().to_owned(),
        paper: context.delivery.paper.clone(),
        print_size: context.delivery.print_size.max(12),
        title: words.plain(if words.couple() {
            "title_couple"
        } else {
            "title"
        })?,
        number: context.number.clone(),
        office: context.office.name.clone(),
        office_lines,
        office_more,
        address: context.delivery.address.clone(),
        whose: head::whose(&words, &earners)?,
        particulars: head::particulars(&words)?,
        estimate,
        caution: words.plain("caution.text")?,
        caution_first: 0,
        what_if: what_if(&words)?,
        notes: closing::notes(&words)?,
        period: words.period.clone(),
        named: words.couple(),
        sections,
        closing: closing::parts(&words)?,
    };
    if !first_page_holds_caution(&view) {
        view.caution_first = 1;
    }
    // Large print: what is asked, the estimate and the caution before everything else.
    if !first_page_holds_caution(&view) && words.answers == Answers::All {
        words.answers = Answers::Asked;
        view.sections = self::sections(&words, &earners)?;
    }
    Ok(view)
}

/// One section an earner.
fn sections(words: &Words<'_>, earners: &[&EarnerResult]) -> Result<Vec<Section>, StatementError> {
    let numbered = earners.iter().enumerate();
    numbered
        .map(|(place, earner)| section::section(words, earner, place))
        .collect()
}

/// The earners that are printed: the first with an offer leads, else the first with a job.
fn leading_first<'a>(assessment: &'a Assessment, context: &LetterContext) -> Vec<&'a EarnerResult> {
    let mut earners: Vec<&EarnerResult> = assessment
        .earners
        .iter()
        .filter(|earner| {
            context
                .delivery
                .only
                .is_none_or(|only| only == earner.adult)
        })
        .filter(|earner| !earner.lines.is_empty())
        .collect();
    earners.sort_by_key(|earner| (earner.offers.is_empty(), !earner.has_job));
    earners
}

/// One sentence for each amount that a what-if changed.
fn what_if(words: &Words<'_>) -> Result<Vec<String>, StatementError> {
    let changed = words
        .assessment
        .amounts
        .iter()
        .filter(|amount| !amount.changed_because.is_empty());
    changed
        .map(|amount| {
            let name = words.named(&format!("amount.{}", amount.name), &amount.name)?;
            words.say(
                "what_if.line",
                &[
                    ("amount", &capital(&name)),
                    ("value", &amount_value(words, &amount.value)?),
                    ("reason", amount.changed_because.trim_end_matches('.')),
                ],
            )
        })
        .collect()
}

/// The value of an amount as a letter writes it: `1048 GBP a month` is `£1,048 a month`, `60 percent` is `60%`.
fn amount_value(words: &Words<'_>, value: &str) -> Result<String, StatementError> {
    let mut parts = value.splitn(3, ' ');
    let (figure, unit) = (parts.next().unwrap_or_default(), parts.next());
    let period = parts.next().and_then(|rest| rest.strip_prefix("a "));
    let period = period.map(|period| period.strip_prefix("n ").unwrap_or(period));
    let sum = words.currency.typed(figure, Decimals::WhereNeeded);
    match (unit, sum) {
        (Some("percent"), _) => words.say("write.percent", &[("number", figure)]),
        (Some(unit), Some(sum)) if unit == words.context.currency => match period {
            Some(period) => words.say(&format!("per.{period}"), &[("sum", &sum)]),
            None => Ok(sum),
        },
        (Some("hours"), Some(_)) => words.say("facts.hours", &[("hours", figure)]),
        (Some("count" | "number"), _) => Ok(words.number(figure)),
        (Some(_) | None, _) => Ok(value.to_owned()),
    }
}
