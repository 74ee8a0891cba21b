//! What a letter says, as plain values: finished words, whole numbers, and the drawing of the chart.
//! Templates see exactly this. All sums are already written out; lengths are hundredths of a point.

use serde::Serialize;

/// Everything that the letter template gets.
#[derive(Clone, Debug, Serialize)]
pub struct LetterView {
    /// Language tag.
    pub language: String,
    /// `a4` or `us-letter`.
    pub paper: String,
    /// Size of print in points.
    pub print_size: u8,
    /// Title of the document.
    pub title: String,
    /// Statement number, on every page.
    pub number: String,
    /// Name of the office; may be empty.
    pub office: String,
    /// Lines under the office's name.
    pub office_lines: Vec<String>,
    /// Lines of the office that stand beside the address, where there is no room above it.
    pub office_more: Vec<String>,
    /// Lines of name and address; empty where none was given.
    pub address: Vec<String>,
    /// Whose statement it is, where there is no address.
    pub whose: String,
    /// Number, days, place and rules.
    pub particulars: Vec<Particular>,
    /// The letter's main sentence on what it is.
    pub estimate: Vec<String>,
    /// What defers to the offices and advisers; on page one.
    pub caution: String,
    /// 1 where the caution stands above the chart, because it would not stand on page one below it; else 0.
    pub caution_first: u8,
    /// Changed amounts of a what-if with the reasons; empty for none.
    pub what_if: Vec<String>,
    /// The pack's notes that hold for this household, printed below the caution; at most one part.
    pub notes: Vec<Part>,
    /// The word for the statement period.
    pub period: String,
    /// Whether sections need the earner's name as a heading: wherever there are two adults.
    pub named: bool,
    /// One section an earner, the leading one first.
    pub sections: Vec<Section>,
    /// The closing parts, in order: each with its heading and paragraphs.
    pub closing: Vec<Part>,
}

/// A name and its value in the letter's head.
#[derive(Clone, Debug, Serialize)]
pub struct Particular {
    /// What it is.
    pub name: String,
    /// Its value.
    pub value: String,
}

/// A part with a heading.
#[derive(Clone, Debug, Serialize)]
pub struct Part {
    /// The heading.
    pub heading: String,
    /// How the lines are set.
    pub kind: PartKind,
    /// Paragraphs or points of a list.
    pub lines: Vec<Line>,
    /// 1 where the part is short enough to stay on one page, else 0.
    pub keep: u8,
}

/// A paragraph or point.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Line {
    /// Its first words, in bold: what it is about; may be empty.
    pub lead: String,
    /// The rest.
    pub text: String,
}

impl From<String> for Line {
    fn from(text: String) -> Line {
        Line {
            lead: String::new(),
            text,
        }
    }
}

impl Part {
    /// A part; it stays on one page where its words are few for their size of print.
    pub(super) fn new(heading: String, kind: PartKind, lines: Vec<Line>, print_size: u8) -> Part {
        let letters: usize = lines
            .iter()
            .map(|line| line.lead.chars().count() + line.text.chars().count() + 20)
            .sum();
        let keep = u8::from(letters * usize::from(print_size).pow(2) < 110_000);
        Part {
            heading,
            kind,
            lines,
            keep,
        }
    }
}

/// How the lines of a part are set.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum PartKind {
    /// One below the other.
    Paragraphs,
    /// Points with a mark.
    Points,
    /// Numbered steps.
    Steps,
}

/// What one earner's hours do.
#[derive(Clone, Debug, Serialize)]
pub struct Section {
    /// Heading of the section.
    pub heading: String,
    /// First answers, one a named step.
    pub answers: Vec<Answer>,
    /// What "you keep" means here: who "you" are, and what costs of working are taken off; may be empty.
    pub measure: String,
    /// The chart.
    pub chart: super::chart::Chart,
    /// Where the next ten units go.
    pub bars: super::bars::Bars,
    /// Heading of the turning points.
    pub turns_heading: String,
    /// Turning points in words, at most five.
    pub turns: Vec<TurnText>,
    /// That nothing turns between today and the steps; may be empty.
    pub turns_lead: String,
    /// That there are more; may be empty.
    pub turns_note: String,
    /// Help in kind that is won, lost or kept; at most one part.
    pub help: Vec<Part>,
    /// Heading of the table.
    pub table_heading: String,
    /// The short table, in as many pieces as fit side by side.
    pub tables: Vec<Table>,
    /// Further parts: if the job ends, and what changes once facts about past periods have settled.
    pub parts: Vec<Part>,
}

/// A first answer.
#[derive(Clone, Debug, Serialize)]
pub struct Answer {
    /// The named step: `4 hours more`, `Offer`, `Offer A`.
    pub step: String,
    /// The offer's own words; may be empty.
    pub about: String,
    /// What is kept.
    pub kept: String,
    /// The second sentence and the marginal one.
    pub detail: String,
    /// Whether it is set in large type.
    pub weight: AnswerWeight,
}

/// How heavy an answer is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum AnswerWeight {
    /// What the household asks first, in large type.
    Lead,
    /// An answer beside it.
    Beside,
}

/// A turning point in words.
#[derive(Clone, Debug, Serialize)]
pub struct TurnText {
    /// Where, in hours.
    pub place: String,
    /// Where, in pay; may be empty.
    pub pay: String,
    /// What happens.
    pub what: String,
}

/// A table with one column of names and a few of sums.
#[derive(Clone, Debug, Serialize)]
pub struct Table {
    /// Heads of the columns of sums.
    pub columns: Vec<Column>,
    /// Rows in order.
    pub rows: Vec<Row>,
    /// What the table is, for readers who do not see it.
    pub summary: String,
    /// What the star at a name means; may be empty.
    pub note: String,
}

/// Head of a column.
#[derive(Clone, Debug, Serialize)]
pub struct Column {
    /// `Today`, `4 hours more`, the offer.
    pub name: String,
    /// Its hours; may be empty.
    pub hours: String,
}

/// A row of sums.
#[derive(Clone, Debug, Serialize)]
pub struct Row {
    /// What it is.
    pub name: String,
    /// One sum a column.
    pub cells: Vec<String>,
    /// Whether it is a sum of the rows above.
    pub weight: RowWeight,
}

/// How heavy a row is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum RowWeight {
    /// An ordinary row.
    Plain,
    /// A total.
    Total,
}
