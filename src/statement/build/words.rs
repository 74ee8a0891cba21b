//! Names and numbers as a letter says them.

use super::Detail;
use crate::measures::{Assessment, EarnerResult, ItemKind, Point, Segment};
use crate::num::{Fraction, Hours, Money};
use crate::statement::context::LetterContext;
use crate::statement::error::StatementError;
use crate::statement::money::{Currency, day, readable};
use crate::statement::view::{Part, PartKind};
use chrono::NaiveDate;

/// Which income a section speaks of.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Measure {
    /// Net income.
    Net,
    /// Net income after costs of working.
    AfterCosts,
}

impl Measure {
    /// The sum at a point.
    pub fn at(self, point: &Point) -> Money {
        match self {
            Measure::Net => point.net,
            Measure::AfterCosts => point.after_costs,
        }
    }

    /// The smoothed sums at both ends of a segment, in currency units.
    pub fn ends(self, segment: &Segment) -> (Fraction, Fraction) {
        match self {
            Measure::Net => (segment.net_from, segment.net_to),
            Measure::AfterCosts => (segment.after_costs_from, segment.after_costs_to),
        }
    }

    /// The rate of a segment.
    pub fn rate(self, segment: &Segment) -> Option<Fraction> {
        match self {
            Measure::Net => segment.metr,
            Measure::AfterCosts => segment.metr_after_costs,
        }
    }

    /// The rate at a point, to the right.
    pub fn rate_at(self, point: &Point) -> Option<Fraction> {
        match self {
            Measure::Net => point.metr_here,
            Measure::AfterCosts => point.metr_here_after_costs,
        }
    }
}

/// Everything that the parts of a letter need to speak.
pub(super) struct Words<'a> {
    /// The results.
    pub assessment: &'a Assessment,
    /// The run, the pack and the delivery.
    pub context: &'a LetterContext,
    /// How much is said.
    pub detail: Detail,
    /// How sums are written.
    pub currency: Currency,
    /// The word for the statement period.
    pub period: String,
    months: Vec<String>,
}

impl<'a> Words<'a> {
    /// Gathers the words.
    pub fn new(
        assessment: &'a Assessment,
        context: &'a LetterContext,
        detail: Detail,
    ) -> Result<Words<'a>, StatementError> {
        let texts = &context.texts;
        let key = format!("period.{}", context.period);
        let months = (1..=12)
            .map(|month| texts.say(&format!("month.{month}"), &[]))
            .collect::<Result<_, _>>()?;
        Ok(Words {
            assessment,
            context,
            detail,
            currency: Currency::of(&context.currency),
            period: texts.say(&key, &[])?,
            months,
        })
    }

    /// A fixed text with its values; `period` is always known.
    pub fn say(&self, key: &str, values: &[(&str, &str)]) -> Result<String, StatementError> {
        let mut all = values.to_vec();
        all.push(("period", &self.period));
        self.context.texts.say(key, &all)
    }

    /// A fixed text without values.
    pub fn plain(&self, key: &str) -> Result<String, StatementError> {
        self.say(key, &[])
    }

    /// A part with a fixed heading.
    pub fn part(
        &self,
        heading: &str,
        kind: PartKind,
        lines: Vec<String>,
    ) -> Result<Part, StatementError> {
        let size = self.context.delivery.print_size.max(12);
        Ok(Part::new(self.plain(heading)?, kind, lines, size))
    }

    /// A label of the pack, if it has one.
    pub fn label(&self, key: &str) -> Option<String> {
        self.context
            .labels
            .get(key)
            .filter(|text| !text.is_empty())
            .cloned()
    }

    /// A day in words.
    pub fn day(&self, date: NaiveDate) -> String {
        day(date, &self.months)
    }

    /// Whether an item is folded for safety.
    pub fn folded(&self, name: &str) -> bool {
        self.context
            .delivery
            .fold
            .iter()
            .any(|folded| folded == name)
    }

    /// An item's name; what it is called when it is folded.
    pub fn item(&self, position: usize) -> Result<String, StatementError> {
        let name = &self.assessment.items[position].name;
        if self.folded(name) {
            return self.plain("sum.folded");
        }
        Ok(self
            .label(&format!("item.{name}"))
            .unwrap_or_else(|| readable(name)))
    }

    /// An item's short name for drawings.
    pub fn short_item(&self, position: usize) -> Result<String, StatementError> {
        let name = &self.assessment.items[position].name;
        match self.label(&format!("what.{name}")) {
            Some(short) if !self.folded(name) => Ok(short),
            Some(_) | None => self.item(position),
        }
    }

    /// The sum of all items of some kinds at a point.
    pub fn total(&self, point: &Point, kinds: &[ItemKind]) -> Money {
        self.assessment
            .items
            .iter()
            .zip(&point.items)
            .filter(|(item, _)| kinds.contains(&item.kind))
            .map(|(_, sum)| *sum)
            .sum()
    }

    /// Which income is spoken of: after costs where any cost of working is due anywhere on the lines.
    pub fn measure(&self, earner: &EarnerResult) -> Measure {
        let differs = std::iter::once(&earner.not_in_work)
            .chain(earner.lines.iter().flat_map(|line| &line.grid))
            .any(|point| point.net != point.after_costs);
        if differs {
            Measure::AfterCosts
        } else {
            Measure::Net
        }
    }

    /// Today's point: the job's own hours, or not in work.
    pub fn today(earner: &EarnerResult) -> &Point {
        match earner.lines.first() {
            Some(line) if earner.has_job => &line.grid[line.own],
            Some(_) | None => &earner.not_in_work,
        }
    }

    /// Whether the letter speaks to more than one adult by name.
    pub fn by_name(&self, earner: &EarnerResult) -> bool {
        let adults = self
            .assessment
            .items
            .iter()
            .filter_map(|item| item.adult)
            .chain(self.assessment.earners.iter().map(|earner| earner.adult))
            .max()
            .unwrap_or(0);
        adults > 0 && !earner.name.is_empty()
    }
}

/// Hours as text.
pub(super) fn hours_text(hours: Hours) -> String {
    hours.plain()
}

/// Parts in one line, each after `; `.
pub(super) fn listed(parts: &[String]) -> String {
    parts.join("; ")
}
