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
    /// The pack's labels by key. Read here: `item.NAME` an item's name, `what.NAME` the same in few words for the chart,
    /// `turn.NAME` what happens when the rule of a figure or item turns, `note.NAME` a note, `fact.NAME` a fact,
    /// `amount.NAME` an amount of the law, `office.NAME` an office and how to reach it, `report.NAME` what to report to
    /// whom by when, `left_out` what the sum leaves out.
    pub labels: BTreeMap<String, String>,
    /// The fixed words.
    pub texts: Arc<Texts>,
    /// How the letter reaches its reader.
    pub delivery: LetterDelivery,
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
/// `turn.NAME` counts as present where the figure's item has a name; `what.NAME` is optional.
pub fn missing_labels(
    assessment: &crate::measures::Assessment,
    labels: &BTreeMap<String, String>,
) -> Vec<String> {
    let mut wanted: Vec<String> = vec!["left_out".to_owned()];
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
            .filter(|amount| !amount.confirmed || !amount.changed_because.is_empty())
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
    wanted.retain(|key| !labels.contains_key(key));
    for group in ["office.", "report."] {
        if !labels.keys().any(|key| key.starts_with(group)) {
            wanted.push(format!("{group}*"));
        }
    }
    wanted
}
