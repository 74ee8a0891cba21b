//! Names and numbers as a letter says them.

use super::Detail;
use super::marks::Marks;
use crate::measures::{Assessment, EarnerResult, ItemKind, Point, Segment};
use crate::num::{Fraction, Hours, Money};
use crate::statement::context::{LetterContext, LocalRules};
use crate::statement::error::StatementError;
use crate::statement::money::{Currency, day, readable};
use crate::statement::view::{Line, Part, PartKind};
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

/// Which answers a section gives.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Answers {
    /// To every step, and what an hour less and more would do.
    All,
    /// Only to what the household asks.
    Asked,
}

/// Everything that the parts of a letter need to speak.
pub(super) struct Words<'a> {
    /// The results.
    pub assessment: &'a Assessment,
    /// The run, the pack and the delivery.
    pub context: &'a LetterContext,
    /// How much is said.
    pub detail: Detail,
    /// Which answers are given.
    pub answers: Answers,
    /// How sums are written.
    pub currency: Currency,
    /// The word for the statement period.
    pub period: String,
    /// Which items concern this household, and which rest on unconfirmed amounts.
    pub marks: Marks,
    /// Ten currency units, as the letter speaks of them: `£10`.
    each: String,
    months: Vec<String>,
    /// The labels of the items that are folded, in lower case.
    hidden: Vec<String>,
}

impl<'a> Words<'a> {
    /// Gathers the words.
    pub fn new(
        assessment: &'a Assessment,
        context: &'a LetterContext,
        detail: Detail,
        earners: &[&EarnerResult],
    ) -> Result<Words<'a>, StatementError> {
        let texts = &context.texts;
        let currency = Currency::of(&context.currency);
        let key = format!("period.{}", context.period);
        let months = (1..=12)
            .map(|month| texts.say(&format!("month.{month}"), &[]))
            .collect::<Result<_, _>>()?;
        let folded = context.delivery.fold.iter();
        let hidden = folded.filter_map(|name| context.labels.get(&format!("item.{name}")));
        Ok(Words {
            assessment,
            context,
            detail,
            answers: match detail {
                Detail::Full | Detail::Plain | Detail::Short | Detail::Brief => Answers::All,
                Detail::Bare => Answers::Asked,
            },
            period: texts.say(&key, &[])?,
            marks: Marks::new(assessment, earners),
            each: currency.short(Money(1000)),
            months,
            hidden: hidden.map(|label| label.to_lowercase()).collect(),
            currency,
        })
    }

    /// The local files that concern this household.
    pub fn locals(&self) -> impl Iterator<Item = &'a LocalRules> {
        let facts = &self.assessment.facts;
        self.context.locals.iter().filter(|local| {
            facts
                .iter()
                .any(|fact| fact.value == local.word && local.facts.contains(&fact.name))
        })
    }

    /// The last day on which all rules of this household hold.
    pub fn rules_until(&self) -> NaiveDate {
        self.locals()
            .map(|local| local.until)
            .chain([self.context.rules_until])
            .min()
            .unwrap_or(self.context.rules_until)
    }

    /// A fixed text with its values; `period` and `each` (ten currency units) are always known.
    pub fn say(&self, key: &str, values: &[(&str, &str)]) -> Result<String, StatementError> {
        let mut all = values.to_vec();
        all.push(("period", &self.period));
        all.push(("each", &self.each));
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
        lines: Vec<Line>,
    ) -> Result<Part, StatementError> {
        let size = self.context.delivery.print_size.max(12);
        Ok(Part::new(self.plain(heading)?, kind, lines, size))
    }

    /// What is kept of ten currency units, as a clause: `you keep £3.24 of each extra £10`.
    pub fn rate(&self, kept: Money) -> Result<String, StatementError> {
        let key = match kept.0 {
            ..0 => "rate.lost",
            0 => "rate.nothing",
            1000 => "rate.all",
            1..1000 => "rate.kept",
            _ => "rate.more",
        };
        let ten = self.currency.short(Money(kept.0.abs()));
        self.say(key, &[("ten", &ten)])
    }

    /// A label of the pack, if it has one that gives no folded item away.
    pub fn label(&self, key: &str) -> Option<String> {
        self.context
            .labels
            .get(key)
            .filter(|text| !text.is_empty() && !self.reveals(text))
            .cloned()
    }

    /// Whether a text names an item that is folded for safety.
    pub fn reveals(&self, text: &str) -> bool {
        if self.hidden.is_empty() {
            return false;
        }
        let text = text.to_lowercase();
        self.hidden.iter().any(|label| text.contains(label))
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

    /// The pack's word for a kind of item, else the fixed one.
    pub fn kind(&self, kind: ItemKind) -> Result<String, StatementError> {
        let key = match kind {
            ItemKind::Pay => "kind.pay",
            ItemKind::Income => "kind.income",
            ItemKind::Tax => "kind.tax",
            ItemKind::Contribution => "kind.contribution",
            ItemKind::Pension => "kind.pension",
            ItemKind::Loan => "kind.loan",
            ItemKind::Benefit => "kind.benefit",
            ItemKind::Passport => "kind.passport",
            ItemKind::Cost => "kind.cost",
            ItemKind::Housing => "kind.housing",
            ItemKind::Employer => "kind.employer",
        };
        match self.label(key) {
            Some(word) => Ok(word),
            None => self.plain(key),
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

    /// Which income is spoken of: after costs where a line has costs of working, as for its traps.
    pub fn measure(earner: &EarnerResult) -> Measure {
        if earner.lines.iter().any(|line| line.has_costs) {
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

    /// Whether there are two adults.
    pub fn couple(&self) -> bool {
        let adults = self.assessment.items.iter().filter_map(|item| item.adult);
        let earners = self.assessment.earners.iter().map(|earner| earner.adult);
        adults.chain(earners).max().unwrap_or(0) > 0
    }
}

/// Hours as text.
pub(super) fn hours_text(hours: Hours) -> String {
    hours.plain()
}

/// Parts that may hold commas, in one line.
pub(super) fn listed(parts: &[String]) -> String {
    parts.join("; ")
}

/// Names in one line.
pub(super) fn enumerated(parts: &[String]) -> String {
    parts.join(", ")
}
