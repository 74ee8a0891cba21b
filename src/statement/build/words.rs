//! Names and numbers as a letter says them.

use super::Detail;
use super::marks::Marks;
use crate::measures::{Assessment, EarnerResult, ItemKind, Point, Segment};
use crate::num::{Fraction, Hours, Money};
use crate::statement::context::{LetterContext, LocalRules};
use crate::statement::error::StatementError;
use crate::statement::money::{Currency, capital, day, readable};
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

/// Of what a rate is told.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Told {
    /// Of the rise in pay that was just named; a clause behind a colon.
    OfThis,
    /// From a turning point on; a sentence.
    FromHere,
    /// From the hours of an offer on; a sentence.
    FromThere,
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
    /// The labels of the items that are folded, in lower case, in the letter's language and in English.
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
        let currency = Currency::of(&context.currency, texts)?;
        let key = format!("period.{}", context.period);
        let folded = context.delivery.fold.iter();
        let hidden = folded.flat_map(|name| {
            let key = format!("item.{name}");
            let both = [&context.labels, &context.english];
            both.into_iter().filter_map(move |labels| labels.get(&key))
        });
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

    /// What is kept of ten currency units, as a clause of its own: `you keep £3.24 of each extra £10`; or as a sentence.
    pub fn rate(&self, told: Told, kept: Money) -> Result<String, StatementError> {
        let group = match told {
            Told::OfThis => "rate",
            Told::FromHere => "rate_here",
            Told::FromThere => "rate_there",
        };
        let key = match kept.0 {
            ..0 => "lost",
            0 => "nothing",
            1000 => "all",
            1..1000 => "kept",
            _ => "more",
        };
        let ten = self.currency.short(Money(kept.0.abs()));
        self.say(&format!("{group}.{key}"), &[("ten", &ten)])
    }

    /// A label of the pack, if it has one that gives no folded item away.
    pub fn label(&self, key: &str) -> Option<String> {
        self.context
            .labels
            .get(key)
            .filter(|text| !text.is_empty() && !self.gives_away(key))
            .cloned()
    }

    /// A label of the pack for a name of the code. English has the name itself where the pack has none; another language has
    /// nothing to say it with.
    ///
    /// # Errors
    /// Where the letter is in another language and the pack has no label.
    pub fn named(&self, key: &str, name: &str) -> Result<String, StatementError> {
        if let Some(text) = self.label(key) {
            return Ok(text);
        }
        if self.gives_away(key) {
            return self.plain("sum.folded");
        }
        self.own(key, &readable(name))
    }

    /// Words of the pack's rules, which are English.
    ///
    /// # Errors
    /// Where the letter is in another language: it needs the label with this key.
    pub fn own(&self, key: &str, words: &str) -> Result<String, StatementError> {
        let language = self.context.texts.language();
        if is_english(language) {
            return Ok(words.to_owned());
        }
        Err(StatementError::Label {
            language: language.to_owned(),
            key: key.to_owned(),
        })
    }

    /// Whether the label with this key names an item that is folded for safety, in the letter's language or in English: a name
    /// can change its first letter inside a sentence, as in Welsh.
    pub fn gives_away(&self, key: &str) -> bool {
        let both = [&self.context.labels, &self.context.english];
        let mut found = both.into_iter().filter_map(|labels| labels.get(key));
        found.any(|text| self.reveals(text))
    }

    /// The instrument with this name, which is a part of the rules.
    ///
    /// # Errors
    /// As for [`Words::own`].
    pub fn instrument(&self, name: &str) -> Result<String, StatementError> {
        let key = format!("part.{name}");
        match self.label(&key) {
            Some(text) => Ok(text),
            None => self.own(&key, name),
        }
    }

    /// A number that is given as plain text, as the language writes it; a text that is none as it stands.
    pub fn number(&self, plain: &str) -> String {
        let speech = self.context.texts.speech();
        speech.number(plain).unwrap_or_else(|| plain.to_owned())
    }

    /// Names in one line.
    pub fn enumerated(&self, parts: &[String]) -> String {
        self.context.texts.speech().list(parts)
    }

    /// Parts that may hold commas, in one line.
    pub fn listed(&self, parts: &[String]) -> Result<String, StatementError> {
        let mut parts = parts.iter();
        let mut line = parts.next().cloned().unwrap_or_default();
        for next in parts {
            line = self.say("write.parts", &[("first", &line), ("next", next)])?;
        }
        Ok(line)
    }

    /// A text as a sentence of its own: with a large first letter and one full stop.
    pub fn sentence(&self, text: &str) -> Result<String, StatementError> {
        self.ended(&capital(text))
    }

    /// A text with one full stop.
    pub fn ended(&self, text: &str) -> Result<String, StatementError> {
        self.say("write.sentence", &[("text", text.trim_end_matches('.'))])
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
    pub fn day(&self, date: NaiveDate) -> Result<String, StatementError> {
        day(date, &self.context.texts)
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
        self.named(&format!("item.{name}"), name)
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

/// Hours as plain text, for the numbers of the fixed texts.
pub(super) fn hours_text(hours: Hours) -> String {
    hours.plain()
}

/// Whether a language is English.
fn is_english(language: &str) -> bool {
    language == "en" || language.starts_with("en-")
}
