//! The named steps of an earner: to each offer, and to four hours more.

use super::words::{Words, hours_text};
use crate::measures::{BudgetLine, EarnerResult, OfferMeasures, Point};
use crate::num::{Fraction, Hours};
use crate::statement::error::StatementError;
use crate::statement::money::{capital, readable};

/// A named step: from today to a point of a line.
pub(super) struct Step<'a> {
    /// The line that it lies on.
    pub line: &'a BudgetLine,
    /// The point that it leads to.
    pub to: &'a Point,
    /// The offer; none for four hours more.
    pub offer: Option<&'a OfferMeasures>,
    /// What the step is called everywhere in the letter, in one or two words.
    pub name: String,
    /// The offer's own words; may be empty.
    pub about: String,
}

impl Step<'_> {
    /// Whether longer hours are paid at a premium on the way to the step.
    pub fn has_premium(&self) -> bool {
        let slope = |from: Fraction, to: Fraction, pay: (Fraction, Fraction)| {
            (to > from).then(|| (pay.1 - pay.0) / (to - from))
        };
        let end = self.to.hours.as_fraction();
        let mut slopes = self
            .line
            .segments
            .iter()
            .filter(|segment| segment.from < end)
            .filter_map(|s| slope(s.from, s.to, (s.pay_from, s.pay_to)));
        match slopes.next() {
            Some(first) => slopes.any(|other| other > first),
            None => false,
        }
    }
}

/// All named steps of an earner: four hours more first, unless there are several offers or one that is the same.
pub(super) fn steps<'a>(
    words: &Words<'_>,
    earner: &'a EarnerResult,
) -> Result<Vec<Step<'a>>, StatementError> {
    let mut steps = vec![];
    let offers: Vec<(&OfferMeasures, &BudgetLine)> = earner
        .offers
        .iter()
        .filter_map(|offer| Some((offer, earner.lines.get(offer.line)?)))
        .collect();
    if let (true, Some(line)) = (earner.has_job, earner.lines.first())
        && line.step_to != line.own
        && offers.len() < 2
    {
        let to = &line.grid[line.step_to];
        let same = |(_, other): &(&OfferMeasures, &BudgetLine)| {
            let point = &other.grid[other.step_to];
            point.hours == to.hours && point.items == to.items
        };
        let more = Hours(to.hours.0 - line.grid[line.own].hours.0);
        if !offers.iter().any(same) {
            steps.push(Step {
                line,
                to,
                offer: None,
                name: words.say("step.more", &[("hours", &hours_text(more))])?,
                about: String::new(),
            });
        }
    }
    let several = offers.len() > 1;
    for (position, (offer, line)) in offers.into_iter().enumerate() {
        let name = if several {
            words.say("step.offer_of", &[("letter", &letter(position))])?
        } else {
            words.plain("step.offer")?
        };
        let about = match line.terms.offer.as_str() {
            "" => readable(&line.terms.reference),
            given => given.to_owned(),
        };
        steps.push(Step {
            line,
            to: &line.grid[line.step_to],
            offer: Some(offer),
            name,
            about: capital(&about),
        });
    }
    Ok(steps)
}

/// `A`, `B`, …, then numbers.
fn letter(position: usize) -> String {
    match u8::try_from(position) {
        Ok(place @ 0..26) => char::from(b'A' + place).to_string(),
        Ok(_) | Err(_) => (position + 1).to_string(),
    }
}
