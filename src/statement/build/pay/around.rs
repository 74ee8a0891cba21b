//! What stands beside the pay: what the employer pays on top, taxes that are not taken from pay, and what may happen to benefits.

use super::Page;
use crate::measures::{ItemKind, Point};
use crate::statement::error::StatementError;
use crate::statement::money::capital;
use crate::statement::view::{Line, Part, PartKind};

/// A sum of one item, today and at each step that is shown.
fn sums(page: &Page<'_>, item: usize) -> Result<String, StatementError> {
    let words = &page.words;
    let sum = |point: &Point| words.currency.exact(point.items[item]);
    let mut said = vec![];
    match page.today() {
        Some((_, point)) => {
            said.push(words.say("employer.today", &[("sum", &sum(point))])?);
        }
        None => {
            let point = &page.earner.not_in_work;
            said.push(words.say("employer.today", &[("sum", &sum(point))])?);
        }
    }
    for step in page.shown() {
        let values = [("step", step.name.as_str()), ("sum", &sum(step.to))];
        said.push(words.say("employer.step", &values)?);
    }
    words.ended(&words.listed(&said)?)
}

/// Whether an item is something at one of the points of the page.
fn present(page: &Page<'_>, item: usize) -> bool {
    let mut points = page.points().into_iter();
    points.any(|(_, point)| point.items[item].0 != 0)
        || (page.today().is_none() && page.earner.not_in_work.items[item].0 != 0)
}

/// What the employer pays on top; none where the rules hold nothing of it.
pub(super) fn employer(page: &Page<'_>) -> Result<Option<Part>, StatementError> {
    let words = &page.words;
    let mut lines = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        let theirs = item.adult.is_none_or(|adult| adult == page.earner.adult);
        if item.kind == ItemKind::Employer && theirs && present(page, position) {
            lines.push(Line {
                lead: words.say(
                    "employer.lead",
                    &[("name", &capital(&words.item(position)?))],
                )?,
                text: sums(page, position)?,
            });
        }
    }
    if lines.is_empty() {
        return Ok(None);
    }
    lines.push(words.plain("payslip.employer")?.into());
    let mut part = words.part("kind.employer", PartKind::Paragraphs, lines)?;
    part.heading = words.kind(ItemKind::Employer)?;
    Ok(Some(part))
}

/// Taxes that are not taken from pay, and benefits: in figures where the household has them, else in general words.
pub(super) fn benefits(page: &Page<'_>) -> Result<Part, StatementError> {
    let words = &page.words;
    let mut lines = vec![];
    let mut claimed = false;
    let mut general = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        if words.folded(&item.name) {
            continue;
        }
        let own = item.adult.is_none_or(|adult| adult == page.earner.adult);
        let due = present(page, position);
        if page.apart(position) && own {
            let label = words.label(&format!("apart.{}", item.name));
            let named = words.label(&format!("named.{}", item.name));
            if let (true, Some(label)) = (due, label) {
                lines.push(Line {
                    lead: words.say("glossary.lead", &[("name", &words.item(position)?)])?,
                    text: format!("{} {}", sums(page, position)?, label),
                });
            } else if let Some(text) = named {
                general.push(text);
            }
            continue;
        }
        if item.kind == ItemKind::Benefit && due {
            claimed = true;
            lines.push(Line {
                lead: words.say("glossary.lead", &[("name", &words.item(position)?)])?,
                text: sums(page, position)?,
            });
        }
    }
    let key = if claimed { "claimed" } else { "general" };
    general.push(words.plain(&format!("payslip.benefits.{key}"))?);
    lines.push(general.join(" ").into());
    words.part("payslip.benefits.heading", PartKind::Paragraphs, lines)
}
