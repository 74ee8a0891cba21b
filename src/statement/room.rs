//! How many pages a letter will take, before it is typeset: lines are counted with the widths of the shipped fonts, and the
//! distances are those of `shared/page.typ`. An estimate: it only chooses how much a letter says, never what is true.

use super::chart::wrapped;
use super::fonts::Weight;
use super::view::{AnswerWeight, LetterView, Part, Section, Table};

/// A millimetre in points.
const MM: f64 = 72.0 / 25.4;
/// Height of a line, and the distance between lines, in sizes of print.
const LINE: (f64, f64) = (0.714, 0.52);
/// Width of the column of names and of the gutter beside it, in sizes of print.
const NAMES: (f64, f64) = (8.2, 0.8);
/// Sizes above this one are large print, set in one column.
const TWO_COLUMNS: f64 = 14.0;

/// Where the next thing goes.
struct Sheet {
    pages: usize,
    used: f64,
    high: f64,
    wide: f64,
    size: f64,
}

impl Sheet {
    /// Height of so many lines.
    fn lines(&self, count: usize) -> f64 {
        let count = count as f64;
        (count * LINE.0 + (count - 1.0).max(0.0) * LINE.1) * self.size
    }

    /// Height of a text in a column.
    fn text(&self, text: &str, wide: f64) -> f64 {
        self.lines(wrapped(text, Weight::Regular, self.size, wide).len())
    }

    /// Width of the column beside the names.
    fn beside(&self) -> f64 {
        if self.size > TWO_COLUMNS {
            self.wide
        } else {
            self.wide - (NAMES.0 + NAMES.1) * self.size
        }
    }

    /// Height of a name and what stands beside it.
    fn row(&self, name: f64, body: f64) -> f64 {
        if self.size > TWO_COLUMNS && name > 0.0 {
            name + 0.5 * self.size + body
        } else {
            name.max(body)
        }
    }

    /// Height of a rule and the heading under it.
    fn headed(&self) -> f64 {
        0.5 * self.size + self.lines(1) + 0.5 * self.size
    }

    /// Something that stays on one page, so many sizes of print below what stands before it.
    fn whole(&mut self, above: f64, high: f64) {
        if self.used > 0.0 && self.used + above * self.size + high > self.high {
            self.pages += 1;
            self.used = high;
        } else {
            self.used += high
                + if self.used > 0.0 {
                    above * self.size
                } else {
                    0.0
                };
        }
    }

    /// Something that may go on over the next page.
    fn flow(&mut self, above: f64, high: f64) {
        self.used += above * self.size + high;
        if self.used > self.high {
            self.pages += 1;
            self.used -= self.high;
        }
    }

    fn part(&mut self, part: &Part) {
        let wide = self.beside();
        let texts = part
            .lines
            .iter()
            .map(|line| self.text(&format!("{} {}", line.lead, line.text), wide));
        let body: f64 = texts.map(|high| high + 0.7 * self.size).sum();
        let high = 0.5 * self.size + self.row(self.lines(1), body - 0.7 * self.size);
        if part.keep == 1 {
            self.whole(0.7, high)
        } else {
            self.flow(0.7, high)
        }
    }

    fn table(&mut self, table: &Table) {
        let words = |text: &str| text.split(' ').count();
        let head = table
            .columns
            .iter()
            .map(|column| words(&column.name).div_ceil(3) + usize::from(!column.hours.is_empty()));
        let head = self.lines(head.max().unwrap_or(1)) + 0.6 * self.size;
        let rows = table.rows.len() as f64 * (LINE.0 + 0.6) * self.size;
        self.whole(0.4, head + rows);
        if !table.note.is_empty() {
            self.flow(0.5, self.lines(1));
        }
    }

    fn answers(&mut self, section: &Section) {
        let (wide, names) = (self.beside(), NAMES.0 * self.size);
        for answer in &section.answers {
            let (scale, gap, above) = match answer.weight {
                AnswerWeight::Lead if self.size > TWO_COLUMNS => (1.3, 0.62, 0.9),
                AnswerWeight::Lead => (1.6, 0.62, 0.9),
                AnswerWeight::Beside => (1.0, 0.5, 0.75),
            };
            let kept = wrapped(&answer.kept, Weight::Bold, self.size * scale, wide).len();
            let body = self.lines(kept) * scale + gap * self.size + self.text(&answer.detail, wide);
            let name = self.lines(1) + 0.45 * self.size;
            let about = self.text(&answer.about, names) + LINE.1 * self.size;
            let name = if answer.about.is_empty() {
                name
            } else {
                name + about
            };
            let high = self.row(name, body);
            self.whole(above, high);
        }
    }

    /// What follows the chart.
    fn section(&mut self, section: &Section) {
        let wide = self.beside();
        if section.bars.height > 0 {
            self.whole(0.7, self.headed() + section.bars.height as f64 / 100.0);
        }
        self.flow(0.7, self.headed());
        if !section.turns_lead.is_empty() {
            self.flow(0.0, self.text(&section.turns_lead, self.wide));
        }
        for turn in &section.turns {
            let place = self.text(&turn.place, NAMES.0 * self.size);
            let pay = if turn.pay.is_empty() {
                0.0
            } else {
                self.lines(2) - self.lines(1)
            };
            let high = self.row(place + pay, self.text(&turn.what, wide));
            self.whole(0.7, high);
        }
        if !section.turns_note.is_empty() {
            self.flow(0.6, self.text(&section.turns_note, self.wide));
        }
        for part in &section.help {
            self.part(part);
        }
        if !section.tables.is_empty() {
            self.flow(0.7, self.headed());
        }
        for table in &section.tables {
            self.table(table);
        }
        for part in &section.parts {
            self.part(part);
        }
    }
}

/// What is left free below the caution for it to count as on page one, in sizes of print.
const SAFE: f64 = 0.6;

/// Pages that a letter will probably fill, the last one by its part: 2.25 is two pages and a quarter of the third.
pub fn probable_length(view: &LetterView) -> f64 {
    let mut sheet = Sheet::new(view);
    for (place, section) in view.sections.iter().enumerate() {
        if place > 0 {
            sheet.answered(view, section);
            sheet.chart(section);
        } else {
            sheet.answers_and_estimate(view, section);
            if view.caution_first == 1 {
                sheet.caution(view);
            }
            sheet.chart(section);
            if view.caution_first == 0 {
                sheet.caution(view);
            }
            for part in &view.notes {
                sheet.part(part);
            }
        }
        sheet.section(section);
    }
    for part in &view.closing {
        let headed = sheet.headed();
        sheet.flow(0.7, headed);
        for line in &part.lines {
            let high = sheet.text(&format!("{} {}", line.lead, line.text), sheet.wide);
            sheet.flow(0.6, high);
        }
        // No distance before the first.
        sheet.used -= 0.6 * sheet.size;
    }
    sheet.pages as f64 - 1.0 + sheet.used / sheet.high
}

/// Whether page one will hold the caution, where the view puts it.
pub(super) fn first_page_holds_caution(view: &LetterView) -> bool {
    let mut sheet = Sheet::new(view);
    match view.sections.first() {
        Some(section) => {
            sheet.answers_and_estimate(view, section);
            if view.caution_first == 0 {
                sheet.chart(section);
            }
            sheet.caution(view);
            sheet.pages == 1 && sheet.used + SAFE * sheet.size <= sheet.high
        }
        None => true,
    }
}

impl Sheet {
    /// The first sheet with the letter's head on it.
    fn new(view: &LetterView) -> Sheet {
        let size = f64::from(view.print_size);
        let paper = if view.paper == "us-letter" {
            792.0
        } else {
            841.89
        };
        let mut sheet = Sheet {
            pages: 1,
            used: 0.0,
            high: paper - 27.0 * MM - size,
            wide: super::build::text_width(&view.paper),
            size,
        };
        let beside = (sheet.wide - 89.0 * MM).max(size);
        let mut details = sheet.lines(2);
        if size > TWO_COLUMNS {
            let number = wrapped(&view.number.replace('-', "- "), Weight::Bold, size, beside);
            details += sheet.lines(number.len());
            for row in &view.particulars {
                details += sheet.text(&format!("{} {}", row.name, row.value), beside) + 0.36 * size;
            }
        } else {
            details += sheet.lines(view.particulars.len());
        }
        details += view.office_more.len() as f64 * (LINE.0 + 0.36) * size;
        sheet.used = if view.address.is_empty() {
            let office = (view.office_lines.len() + 3) as f64 * (LINE.0 + 0.36) * size;
            details.max(office) + 1.1 * size
        } else {
            details.max(66.0 * MM) + 0.5 * size
        };
        let title = wrapped(&view.title, Weight::Bold, 1.2 * size, sheet.wide).len();
        sheet.used += 1.2 * sheet.lines(title);
        if !view.what_if.is_empty() {
            let texts = view
                .what_if
                .iter()
                .map(|line| sheet.text(line, sheet.beside()));
            let high: f64 = texts.map(|high| high + 0.7 * size).sum();
            sheet.flow(0.7, 0.5 * size + high + sheet.lines(2));
        }
        sheet
    }

    /// The heading and the answers of a section, and what "you keep" means.
    fn answered(&mut self, view: &LetterView, section: &Section) {
        if view.named {
            self.flow(1.2, 0.6 * self.size + self.lines(1) + 0.5 * self.size);
        }
        self.answers(section);
        if !section.measure.is_empty() {
            self.flow(0.6, self.text(&section.measure, self.beside()));
        }
    }

    /// The first section up to the estimate.
    fn answers_and_estimate(&mut self, view: &LetterView, section: &Section) {
        self.answered(view, section);
        let words = self.text(&view.estimate.join(" "), self.beside());
        self.flow(0.8, self.row(self.lines(1), words));
    }

    fn caution(&mut self, view: &LetterView) {
        let words = self.text(&view.caution, self.beside());
        self.whole(1.0, 0.6 * self.size + self.row(self.lines(1), words));
    }

    fn chart(&mut self, section: &Section) {
        if section.chart.height > 0 {
            let title = wrapped(&section.chart.title, Weight::Bold, self.size, self.wide).len();
            let heading = self.lines(title) - self.lines(1) + self.headed();
            self.whole(0.9, heading + section.chart.height as f64 / 100.0);
        }
    }
}
