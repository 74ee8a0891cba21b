//! What hours and a rise do to the pay that reaches the person: what each hour now adds, what today's hours now bring, and the hours that
//! keep today's pay. No benefits, and nothing is said about what anybody would do.

use super::Page;
use crate::measures::{BudgetLine, ItemKind};
use crate::num::{Fraction, Hours, Money};
use crate::statement::build::words::hours_text;
use crate::statement::error::StatementError;
use crate::statement::money::money;
use crate::statement::view::{Line, Part, PartKind};

pub(super) fn part(page: &Page<'_>) -> Result<Option<Part>, StatementError> {
    let words = &page.words;
    let sum = |sum: Money| words.currency.exact(Money(sum.0.abs()));
    let mut lines: Vec<Line> = vec![];
    if let Some((line, point)) = page.today()
        && page
            .shown()
            .all(|step| step.offer.is_none_or(|offer| offer.pay.is_none()))
        && let Some(hour) = hour_adds(page, line, point.hours)
    {
        let values = [
            ("hours", hours_text(point.hours)),
            ("sum", sum(money(hour))),
        ];
        let values = values
            .each_ref()
            .map(|(name, value)| (*name, value.as_str()));
        lines.push(words.say("payslip.hours.today", &values)?.into());
    }
    let several = page.shown().count() > 1;
    for step in page.shown() {
        let mut said = vec![];
        if let (Some(split), Some((_, today))) = (
            step.offer.and_then(|offer| offer.pay.as_ref()),
            page.today(),
        ) {
            let hours = hours_text(today.hours);
            let (before, after) = (money(split.hour_before), money(split.hour_after));
            let values = [
                ("hours", hours.as_str()),
                ("before", &sum(before)),
                ("after", &sum(after)),
            ];
            let same = before == after && split.income.0 == 0;
            let key = if before == after { "each_same" } else { "each" };
            said.push(words.say(&format!("payslip.hours.{key}"), &values)?);
            let key = match split.income.0 {
                0 => "brings_same",
                1.. => "brings_more",
                _ => "brings_less",
            };
            let values = [("hours", hours.as_str()), ("sum", &sum(split.income))];
            // On the same terms today's hours bring what they bring today, and nothing needs saying.
            if !same {
                said.push(words.say(&format!("payslip.hours.{key}"), &values)?);
                said.push(match split.holding {
                    Some(held) => {
                        words.say("payslip.hours.holding", &[("hours", &hours_text(held))])?
                    }
                    None => words.plain("payslip.hours.holding_none")?,
                });
            }
            if split.fragile {
                said.push(words.plain("payslip.hours.fragile")?);
            }
        }
        if let Some(hour) = hour_adds(page, step.line, step.to.hours) {
            let (hours, sum) = (hours_text(step.to.hours), sum(money(hour)));
            let values = [("hours", hours.as_str()), ("sum", &sum)];
            said.push(words.say("payslip.hours.beyond", &values)?);
        }
        if said.is_empty() {
            continue;
        }
        lines.push(Line {
            lead: if several {
                words.say("payslip.hours.lead", &[("name", &step.name)])?
            } else {
                String::new()
            },
            text: said.join(" "),
        });
    }
    if lines.is_empty() {
        return Ok(None);
    }
    words
        .part("payslip.hours.heading", PartKind::Paragraphs, lines)
        .map(Some)
}

/// What one more weekly hour adds to the pay that reaches the person at some hours, to the right, in currency units of the statement
/// period: the slope of pay there, times what is left of each further unit of it.
fn hour_adds(page: &Page<'_>, line: &BudgetLine, hours: Hours) -> Option<Fraction> {
    let at = hours.as_fraction();
    let mut segments = line.segments.iter();
    let segment = segments.find(|segment| segment.from <= at && at < segment.to)?;
    let slope = (segment.pay_to - segment.pay_from) / (segment.to - segment.from);
    let kinds = [
        ItemKind::Pay,
        ItemKind::Tax,
        ItemKind::Contribution,
        ItemKind::Pension,
        ItemKind::Loan,
    ];
    let items = page.taken(&kinds).into_iter();
    let left = items.fold(Fraction::ZERO, |left, item| left + segment.shares[item]);
    Some(slope * left)
}
