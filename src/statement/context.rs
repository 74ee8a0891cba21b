//! What a letter needs besides the assessment: numbers, days, the office, the pack's labels, the texts.

use super::texts::Texts;
use chrono::NaiveDate;
use std::collections::BTreeMap;
use std::sync::Arc;

/// Everything about the run, the pack and the delivery that a letter prints.
#[derive(Clone, Debug)]
pub struct LetterContext {
    /// The statement's number, on every page.
    pub number: String,
    /// The day on which it is issued.
    pub issued: NaiveDate,
    /// The day that it is worked out for.
    pub assessed: NaiveDate,
    /// Title of the rule pack.
    pub rules_title: String,
    /// The place whose rules they are.
    pub area: String,
    /// The last day that the rules cover.
    pub rules_until: NaiveDate,
    /// ISO 4217 code of the currency.
    pub currency: String,
    /// The statement period: `week`, `month`, `year`.
    pub period: String,
    /// The office that sends the letter.
    pub office: Office,
    /// The pack's labels by key. Read here, all but the first two optional:
    ///
    /// * `item.NAME` an item's name, `fact.NAME` a fact's;
    /// * `title` the rules, `area` their place, `part.NAME` an instrument (all three and `item`, `fact`, `word` are needed where the
    ///   letter is not in English);
    /// * `kind.KIND` a kind of item, `what.NAME` what an item is, in a sentence;
    /// * `turn.NAME.starts` (or `ends`, `more`, `less`), else `turn.NAME`: what happens when the rule of a figure or item
    ///   turns; `more` and `less` are what it adds to net income for each further unit of pay;
    /// * `said.NAME` a fact with its `{value}`; `word.NAME.VALUE`, else `word.VALUE`, a value in words; `none.NAME` what is not
    ///   there where a fact was assumed to be no, none or nothing, `none.NAME.VALUE` where this value says as much; `-` is not
    ///   worth a word;
    /// * `amount.NAME` an amount of the law, `note.NAME` a note;
    /// * `office.NAME` who runs an item, `report.NAME` what to tell it by when;
    /// * `left_out.NUMBER`, or `left_out.NAME.NUMBER` where the household has the item: what the sum leaves out;
    /// * for payroll pages `payslip.NAME` a fact of the job or a figure, `payslip_told.NAME` a fact only where it was told,
    ///   `payslip_unsaid.NAME` what stands in place of a value that nobody told, `payslip_said.NUMBER` a sentence, `apart.NAME`
    ///   and `named.NAME` an item that is not taken from pay.
    pub labels: BTreeMap<String, String>,
    /// The pack's English labels, where the letter is in another language; by them an item that is folded is found in every
    /// language. Empty for an English letter.
    pub english: Arc<BTreeMap<String, String>>,
    /// How the pack's facts are written, by `KIND.NAME`; one that is not named here is printed as it stands.
    pub facts: BTreeMap<String, FactShape>,
    /// Local files over the pack: each concerns a household with a fact that has its word.
    pub locals: Vec<LocalRules>,
    /// The fixed words.
    pub texts: Arc<Texts>,
    /// How the letter reaches its reader.
    pub delivery: LetterDelivery,
}

/// One place's own scheme or table over a pack.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LocalRules {
    /// Its title.
    pub title: String,
    /// Where it was published.
    pub source: String,
    /// Facts that choose it, and their word.
    pub facts: Vec<String>,
    /// The word.
    pub word: String,
    /// Items that its own office runs.
    pub items: Vec<String>,
    /// That office in the letter's language; empty where it is not named.
    pub office: String,
    /// The last day on which it holds.
    pub until: NaiveDate,
}

/// What the text of a fact holds.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum FactShape {
    /// A sum in currency units, for this period (`hour`, `month`); an empty period for a sum that has none.
    Money(String),
    /// Hours a week.
    Hours,
    /// A day, year first.
    Date,
    /// `yes` or `no`.
    YesNo,
    /// A word of a choice.
    Word,
    /// A number, a rate: printed as it stands.
    Plain,
}

/// The office that sends letters.
#[derive(Clone, Debug, Default)]
pub struct Office {
    /// Its name; may be empty.
    pub name: String,
    /// Address, telephone, opening hours: lines as they are printed.
    pub lines: Vec<String>,
    /// Next steps of the office's own, after the fixed ones.
    pub next_steps: Vec<String>,
}

/// How a letter reaches its reader.
#[derive(Clone, Debug)]
pub struct LetterDelivery {
    /// Lines of name and address; empty for none.
    pub address: Vec<String>,
    /// `a4` or `us-letter`.
    pub paper: String,
    /// Size of print in points, 12 or more.
    pub print_size: u8,
    /// Position of the one adult whose statement it is; none for all.
    pub only: Option<usize>,
    /// Names of items that are printed as `other items`, for safety.
    pub fold: Vec<String>,
}

impl Default for LetterDelivery {
    fn default() -> Self {
        LetterDelivery {
            address: vec![],
            paper: "a4".to_owned(),
            print_size: 12,
            only: None,
            fold: vec![],
        }
    }
}

/// Which label keys an assessment needs and the pack lacks, in order.
///
/// Any `turn.NAME.…` counts as `turn.NAME`; what an item is, the kinds, and how facts are said are optional.
pub fn missing_labels(
    assessment: &crate::measures::Assessment,
    labels: &BTreeMap<String, String>,
) -> Vec<String> {
    let mut wanted: Vec<String> = vec![];
    wanted.extend(
        assessment
            .items
            .iter()
            .map(|item| format!("item.{}", item.name)),
    );
    wanted.extend(assessment.notes.iter().map(|note| format!("note.{note}")));
    wanted.extend(
        assessment
            .facts
            .iter()
            .map(|fact| format!("fact.{}", fact.name)),
    );
    wanted.extend(
        assessment
            .amounts
            .iter()
            .filter(|amount| !amount.changed_because.is_empty())
            .map(|amount| format!("amount.{}", amount.name)),
    );
    for earner in &assessment.earners {
        for turn in earner.lines.iter().flat_map(|line| &line.turns) {
            wanted.extend(
                turn.causes
                    .iter()
                    .map(|cause| format!("turn.{}", cause.line)),
            );
        }
    }
    wanted.sort();
    wanted.dedup();
    let starts = |start: &str| labels.keys().any(|key| key.starts_with(start));
    wanted.retain(|key| {
        !(labels.contains_key(key) || key.starts_with("turn.") && starts(&format!("{key}.")))
    });
    for group in ["left_out", "office.", "report."] {
        if !starts(group) {
            wanted.push(format!("{group}*"));
        }
    }
    wanted
}
