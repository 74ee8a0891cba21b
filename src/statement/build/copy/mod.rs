//! From an assessment and its evidence to the view of a file copy. Everything is shown: what the letter folds or leaves out for
//! somebody's safety stands here, so the copy says that it must not be handed out.

mod amounts;
mod facts;
mod fit;
mod items;
mod line;
mod rules;
mod working;

use super::words::Words;
use super::{Detail, closing, head, leading_first, what_if};
use crate::measures::{Assessment, EarnerResult, Point};
use crate::num::{Fraction, Money};
use crate::statement::context::{LetterContext, LetterDelivery};
use crate::statement::copy_view::{CopyView, SignOff};
use crate::statement::error::StatementError;
use crate::statement::evidence::Evidence;
use crate::statement::money::NONE;
use fit::{Room, Side};

/// The sign before a rate below nothing.
const MINUS: char = '\u{2212}';

/// Everything that the sections of a copy need.
struct Copy<'a> {
    words: Words<'a>,
    evidence: &'a Evidence,
    earners: Vec<&'a EarnerResult>,
    room: Room,
}

/// Builds the view of a file copy, in ordinary print unless `context` asks for large print. Its words are there in English alone, so
/// `context` is an English one, whatever the household's language is.
///
/// # Errors
/// Where a text is missing from the language file, as in every language but English.
pub fn copy_view(
    assessment: &Assessment,
    context: &LetterContext,
    evidence: &Evidence,
) -> Result<CopyView, StatementError> {
    let guarded = context.delivery.only.is_some() || !context.delivery.fold.is_empty();
    let open = LetterContext {
        delivery: LetterDelivery {
            only: None,
            fold: vec![],
            address: vec![],
            ..context.delivery.clone()
        },
        ..context.clone()
    };
    let earners = leading_first(assessment, &open);
    let words = Words::new(assessment, &open, Detail::Full, &earners)?;
    let size = open.delivery.print_size.max(12);
    let room = Room {
        paper: super::text_width(&open.delivery.paper),
        size: f64::from(size),
    };
    let copy = Copy {
        words,
        evidence,
        earners,
        room,
    };
    let words = &copy.words;
    let mut intro = vec![];
    for key in open.texts.keys("copy.intro.") {
        intro.push(words.plain(key)?);
    }
    let mut sections = vec![facts::section(&copy)?];
    for earner in &copy.earners {
        sections.push(items::section(&copy, earner)?);
    }
    sections.extend(line::couple(&copy)?);
    sections.push(working::section(&copy)?);
    for earner in &copy.earners {
        sections.push(line::section(&copy, earner)?);
    }
    sections.push(amounts::section(&copy)?);
    sections.push(rules::section(&copy)?);
    let names: Vec<String> = copy
        .earners
        .iter()
        .map(|earner| earner.name.clone())
        .filter(|name| !name.is_empty())
        .collect();
    let reference = assessment.reference.as_str();
    let mut whose = vec![reference.to_owned()];
    whose.extend(names);
    Ok(CopyView {
        language: open.texts.language().to_owned(),
        paper: open.delivery.paper.clone(),
        print_size: size,
        title: words.plain("copy.title")?,
        number: open.number.clone(),
        running: words.say("copy.running", &[("reference", reference)])?,
        office: open.office.name.clone(),
        whose: words.say("copy.whose", &[("who", &words.enumerated(&whose))])?,
        particulars: head::particulars(words)?,
        intro,
        guard: if guarded {
            words.plain("copy.guard")?
        } else {
            String::new()
        },
        caution: words.plain("copy.caution")?,
        what_if: what_if(words)?,
        notes: closing::notes(words)?,
        sign: sign(words)?,
        sections,
    })
}

/// Room for the reviewer.
fn sign(words: &Words<'_>) -> Result<SignOff, StatementError> {
    let all = |start: &str| -> Result<Vec<String>, StatementError> {
        let keys = words.context.texts.keys(start);
        keys.map(|key| words.plain(key)).collect()
    };
    Ok(SignOff {
        heading: words.plain("copy.sign.heading")?,
        summary: words.plain("copy.sign.summary")?,
        heads: all("copy.sign.head.")?,
        checks: all("copy.sign.check.")?,
        fields: all("copy.sign.field.")?,
    })
}

impl Copy<'_> {
    /// The heading of an earner's section.
    fn of_earner(&self, key: &str, earner: &EarnerResult) -> Result<String, StatementError> {
        let number = (earner.adult + 1).to_string();
        let name = if earner.name.is_empty() {
            self.words.say("copy.adult", &[("number", &number)])?
        } else {
            earner.name.clone()
        };
        self.words.say(key, &[("name", &name)])
    }

    /// A sum as figures alone: the currency is said above the table.
    fn figure(&self, sum: Money) -> String {
        let written = self.words.currency.exact(sum);
        let kept = written
            .chars()
            .filter(|sign| sign.is_ascii_digit() || matches!(sign, ',' | '.' | &MINUS));
        kept.collect()
    }

    /// An item's name, with whose it is where there are two adults.
    fn item(&self, position: usize) -> Result<String, StatementError> {
        let words = &self.words;
        let name = crate::statement::money::capital(&words.item(position)?);
        let Some(adult) = words.assessment.items[position].adult else {
            return Ok(name);
        };
        if !words.couple() {
            return Ok(name);
        }
        let earner = words
            .assessment
            .earners
            .iter()
            .find(|one| one.adult == adult);
        let who = match earner.filter(|one| !one.name.is_empty()) {
            Some(earner) => earner.name.clone(),
            None => {
                let number = (adult + 1).to_string();
                words.say("copy.adult", &[("number", &number)])?
            }
        };
        words.say("copy.item_of", &[("name", &name), ("who", &who)])
    }
}

/// A rate in percent with two decimals; a dash where there is none.
fn percent(rate: Option<Fraction>) -> String {
    rate.map_or_else(
        || NONE.to_owned(),
        |rate| signed(&format!("{}%", (rate * Fraction::whole(100)).decimal(2))),
    )
}

/// A number with its sign as it is printed.
fn signed(text: &str) -> String {
    match text.strip_prefix('-') {
        Some(size) => format!("{MINUS}{size}"),
        None => text.to_owned(),
    }
}

/// Today's point, or not in work.
fn today(earner: &EarnerResult) -> &Point {
    Words::today(earner)
}
