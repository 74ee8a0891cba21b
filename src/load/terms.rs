//! What a list says to a pack: its dates in the pack's order and its changed amounts. In: settings and a checked pack.
//! Out: [`Terms`], or every fault. Guesses no date: a pack with two dates needs both.

use crate::case::{Decimals, ListSettings, days_since_1970};
use crate::diag::{Diagnostic, nearest};
use crate::num::Hours;
use crate::rules::{Change, Pack, decimal};

/// Dates and changed amounts, checked against the pack.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Terms {
    /// In the order of the pack's dates, in days since 1970-01-01.
    pub dates: Vec<i64>,
    /// Changed amounts.
    pub changes: Vec<Change>,
    /// Last hours of the grid, where the list says.
    pub grid_to: Option<Hours>,
    /// Step of the grid, where the list says.
    pub grid_step: Option<Hours>,
}

/// The dates and changed amounts of a list.
///
/// # Errors
/// Every fault: a date that the pack does not have, one that the list does not give or the pack does not cover, a changed amount that
/// is no number or that the pack does not know.
pub fn terms_of(settings: &ListSettings, pack: &Pack) -> Result<Terms, Vec<Diagnostic>> {
    let mut faults = vec![];
    let known: Vec<&str> = pack
        .manifest
        .dates
        .iter()
        .map(|(n, _)| n.as_str())
        .collect();
    for (name, _) in &settings.dates {
        if !known.contains(&name.as_str()) {
            let fault = Diagnostic::general(format!("`list.toml`: the pack has no date `{name}`"))
                .expected(format!("one of {}", known.join(", ")));
            faults.push(match nearest(name, known.iter().copied()) {
                Some(near) => fault.hint(format!("did you mean `{near}`?")),
                None => fault,
            });
        }
    }
    let mut dates = vec![];
    for (place, (name, meaning)) in pack.manifest.dates.iter().enumerate() {
        let given = settings.dates.iter().find(|(given, _)| given == name);
        match given {
            Some((_, day)) => dates.push(days_since_1970(*day)),
            None if place == 0 => dates.push(days_since_1970(settings.date)),
            None => faults.push(
                Diagnostic::general(format!("`list.toml`: the date `{name}` is missing"))
                    .expected(meaning.clone())
                    .hint(format!("write `{name} = …` below `[dates]`")),
            ),
        }
    }
    let mut changes = vec![];
    for change in &settings.changed {
        let text = match settings.format.decimals {
            Decimals::Point => change.value.clone(),
            Decimals::Comma => change.value.replace(',', "."),
        };
        match decimal(text.trim_end_matches('%')) {
            Some(value) => changes.push(Change {
                amount: change.amount.clone(),
                value,
                because: change.because.clone(),
            }),
            None => faults.push(
                Diagnostic::general(format!(
                    "`list.toml` line {}: the value of `{}` is `{}`",
                    change.line, change.amount, change.value
                ))
                .expected("a number"),
            ),
        }
    }
    if settings.grid.from.is_some_and(|from| from != Hours(0)) {
        faults.push(
            Diagnostic::general("`list.toml`: the grid starts above 0 hours")
                .expected("a grid from 0 hours, which every rate is measured from")
                .hint("take `from` away"),
        );
    }
    if faults.is_empty() {
        match pack.accepts(&dates, &changes) {
            Ok(()) => {
                return Ok(Terms {
                    dates,
                    changes,
                    grid_to: settings.grid.to,
                    grid_step: settings.grid.step,
                });
            }
            Err(more) => faults.extend(more),
        }
    }
    Err(faults)
}
