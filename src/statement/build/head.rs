//! The head of the letter: whose it is, its particulars, the office; and whether all of it has room.

use super::words::Words;
use crate::measures::{Assessment, EarnerResult};
use crate::statement::chart::wrapped;
use crate::statement::context::LetterContext;
use crate::statement::error::StatementError;
use crate::statement::fonts::{Weight, width};
use crate::statement::view::Particular;

/// Size of print of the address and of the office's lines, in points, whatever the size of the rest.
const SIZE: f64 = 12.0;
/// Width of the address in points: 84 mm, what the window of an envelope shows.
const WIDE: f64 = 84.0 * 72.0 / 25.4;
/// Lines of an address that the window shows: common practice, no source.
const ADDRESS_LINES: usize = 6;
/// Sizes of print above this one are large, in points.
const LARGE: u8 = 14;
/// Lines of the office above the address, its name among them.
const OFFICE_LINES: usize = 6;

/// Number, days, place and rules.
pub(super) fn particulars(words: &Words<'_>) -> Result<Vec<Particular>, StatementError> {
    let context = words.context;
    let rules = match words.label("title") {
        Some(title) => title,
        None => words.own("title", &context.rules_title)?,
    };
    let area = match words.label("area") {
        Some(area) => area,
        None => words.own("area", &context.area)?,
    };
    // In large print the place is not said twice.
    let said = context.delivery.print_size > LARGE && rules.contains(&area);
    [
        ("issued", words.day(context.issued)?),
        ("assessed", words.day(context.assessed)?),
        ("area", area),
        ("rules", rules),
        ("rules_until", words.day(words.rules_until())?),
    ]
    .into_iter()
    .filter(|(key, _)| *key != "area" || !said)
    .map(|(key, value)| {
        Ok(Particular {
            name: words.plain(&format!("head.{key}"))?,
            value,
        })
    })
    .collect()
}

/// Whose statement it is.
pub(super) fn whose(
    words: &Words<'_>,
    earners: &[&EarnerResult],
) -> Result<String, StatementError> {
    let names: Vec<String> = earners
        .iter()
        .map(|earner| earner.name.clone())
        .filter(|name| !name.is_empty())
        .collect();
    let whose = match names.as_slice() {
        [] => words.assessment.reference.clone(),
        names => words.enumerated(names),
    };
    words.say("for", &[("who", &whose)])
}

/// Checks that the window of an envelope shows the whole address.
///
/// # Errors
/// Where it has too many lines, or a word that is wider than the window.
pub(super) fn check_address(address: &[String]) -> Result<(), StatementError> {
    let mut lines = 0;
    for (position, line) in address.iter().enumerate() {
        let rows = wrapped(line, Weight::Regular, SIZE, WIDE);
        if let Some(word) = rows
            .iter()
            .find(|row| width(row, Weight::Regular, SIZE) > WIDE)
        {
            return Err(StatementError::Room {
                field: format!("address[{position}]"),
                found: format!("more than 84 mm for `{word}`"),
                expected: "words that fit into the window of an envelope".to_owned(),
            });
        }
        lines += rows.len();
    }
    if lines > ADDRESS_LINES {
        return Err(StatementError::Room {
            field: "address".to_owned(),
            found: format!("{lines} lines"),
            expected: format!("at most {ADDRESS_LINES}, which the window of an envelope shows"),
        });
    }
    Ok(())
}

/// Widest word of a name, an offer or a line of the office, in points: 82 mm, the narrowest column that one of them may stand in.
const WORD: f64 = 82.0 * 72.0 / 25.4;
/// Widest word of the office's own next steps, in points: 150 mm, the whole width less the numbers in large print.
const STEP_WORD: f64 = 150.0 * 72.0 / 25.4;

/// Checks that each word that somebody typed fits on a line: a word that does not would cover its neighbours or leave the sheet.
///
/// # Errors
/// Where one does not: its field and the word.
pub(super) fn check_words(
    assessment: &Assessment,
    context: &LetterContext,
) -> Result<(), StatementError> {
    let size = f64::from(context.delivery.print_size.max(12));
    let fits = |field: &str, text: &str, wide: f64| {
        let pieces = unbroken(text);
        let mut words = pieces.iter();
        match words.find(|word| width(word.as_str(), Weight::Bold, size) > wide) {
            None => Ok(()),
            Some(word) => Err(StatementError::Room {
                field: field.to_owned(),
                found: format!("more than {:.0} mm for `{word}`", wide * 25.4 / 72.0),
                expected: "words that fit on a line".to_owned(),
            }),
        }
    };
    for earner in &assessment.earners {
        fits("name", &earner.name, WORD)?;
        for line in &earner.lines {
            fits("offer", &line.terms.offer, WORD)?;
        }
    }
    for fact in &assessment.facts {
        fits("name", &fact.of, WORD)?;
    }
    let office = &context.office;
    fits("office.name", &office.name, WORD)?;
    for line in &office.lines {
        fits("office.lines", line, WORD)?;
    }
    for step in &office.next_steps {
        fits("office.next_steps", step, STEP_WORD)?;
    }
    Ok(())
}

/// What stays on one line: a line may end at a space, and after a hyphen, a dash or a slash; but not after an opening sign or before a
/// closing one, whatever spaces stand there.
fn unbroken(text: &str) -> Vec<String> {
    const OPENING: [char; 7] = ['(', '[', '{', '"', '\'', '“', '‘'];
    const CLOSING: [char; 14] = [
        ')', ']', '}', '!', '?', ':', ';', ',', '.', '/', '"', '\'', '”', '’',
    ];
    let mut out: Vec<String> = vec![];
    for word in text.split_whitespace() {
        let mut start = true;
        for piece in word.split_inclusive(['-', '–', '—', '/']) {
            match out.last_mut() {
                Some(last) if start && (last.ends_with(OPENING) || piece.starts_with(CLOSING)) => {
                    last.push(' ');
                    last.push_str(piece);
                }
                Some(_) | None => out.push(piece.to_owned()),
            }
            start = false;
        }
    }
    out
}

/// The office's lines: those that stand above the address, and those that stand beside it.
pub(super) fn office_lines(words: &Words<'_>) -> (Vec<String>, Vec<String>) {
    let lines = &words.context.office.lines;
    if words.context.delivery.address.is_empty() {
        return (lines.clone(), vec![]);
    }
    let mut used = wrapped(&words.context.office.name, Weight::Bold, SIZE, WIDE).len();
    let above = lines
        .iter()
        .take_while(|line| {
            used += wrapped(line, Weight::Regular, SIZE, WIDE).len();
            used <= OFFICE_LINES
        })
        .count();
    (lines[..above].to_vec(), lines[above..].to_vec())
}
