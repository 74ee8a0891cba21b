//! From an assessment to the view of a letter: which numbers are said, in which words, in which order.
//! Works nothing out that the measures hold; only takes differences of printed sums.

mod closing;
mod figure;
mod section;
mod table;
mod turns;
mod words;

use super::context::LetterContext;
use super::error::StatementError;
use super::money::{capital, readable};
use super::view::{LetterView, Particular};
use crate::measures::{Assessment, EarnerResult};
use words::Words;

/// How much a letter says.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Detail {
    /// Everything.
    Full,
    /// For letters that would be too long: the chart of the leading person alone, no bars, three turning points
    /// a person, and of the facts that were assumed to be none only how many they are.
    Brief,
}

/// Builds the view of a client letter.
///
/// # Errors
/// Where a text is missing from the language file.
pub fn letter_view(
    assessment: &Assessment,
    context: &LetterContext,
    detail: Detail,
) -> Result<LetterView, StatementError> {
    let words = Words::new(assessment, context, detail)?;
    let earners = leading_first(assessment, context);
    let mut sections = vec![];
    for (place, earner) in earners.iter().enumerate() {
        sections.push(section::section(&words, earner, place)?);
    }
    let until = words.day(context.rules_until);
    let assessed = words.day(context.assessed);
    let particulars = [
        ("number", context.number.clone()),
        ("issued", words.day(context.issued)),
        ("assessed", assessed.clone()),
        ("area", context.area.clone()),
        ("rules", context.rules_title.clone()),
        ("rules_until", until.clone()),
    ];
    let mut rows = vec![];
    for (key, value) in particulars {
        rows.push(Particular {
            name: words.say(&format!("head.{key}"), &[])?,
            value,
        });
    }
    let title = match earners.len() {
        0 | 1 => words.say("title", &[])?,
        _ => words.say("title_couple", &[])?,
    };
    let names: Vec<&str> = earners
        .iter()
        .map(|earner| earner.name.as_str())
        .filter(|name| !name.is_empty())
        .collect();
    let whose = match names.as_slice() {
        [] => assessment.reference.clone(),
        names => names.join(", "),
    };
    Ok(LetterView {
        language: context.texts.language().to_owned(),
        paper: context.delivery.paper.clone(),
        print_size: context.delivery.print_size.max(12),
        title,
        number: context.number.clone(),
        office: context.office.name.clone(),
        office_lines: context.office.lines.clone(),
        address: context.delivery.address.clone(),
        whose: words.say("for", &[("who", &whose)])?,
        particulars: rows,
        estimate: vec![
            words.say("estimate.first", &[("assessed", &assessed)])?,
            words.say("estimate.change", &[])?,
        ],
        caution: words.say("caution.text", &[])?,
        what_if: what_if(&words)?,
        period: words.period.clone(),
        named: sections.len() > 1,
        sections,
        closing: closing::parts(&words)?,
    })
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
            let name = words
                .label(&format!("amount.{}", amount.name))
                .unwrap_or_else(|| readable(&amount.name));
            words.say(
                "what_if.line",
                &[
                    ("amount", &capital(&name)),
                    ("value", &amount.value),
                    ("reason", amount.changed_because.trim_end_matches('.')),
                ],
            )
        })
        .collect()
}
