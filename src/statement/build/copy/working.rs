//! The working of all points side by side: each figure once, numbered in the order of the law, with its rule, what went in and its law.

use super::{Copy, Side};
use crate::measures::WorkingLine;
use crate::statement::build::steps::steps;
use crate::statement::copy_view::{CopyPart, CopySection, LongRow, LongWeight};
use crate::statement::error::StatementError;
use crate::statement::evidence::{PointPlace, WorkedPoint};
use crate::statement::money::NONE;
use crate::statement::view::Line;

/// Width that the names of figures get at least, in sizes of print.
const NAMES: f64 = 14.0;

/// One figure at all points.
type Figure<'a> = Vec<Option<&'a WorkingLine>>;

pub(super) fn section(copy: &Copy<'_>) -> Result<CopySection, StatementError> {
    let words = &copy.words;
    let points = &copy.evidence.points;
    let mut rows = vec![];
    let mut part = "";
    let mut figures = merged(points);
    // What stands in a branch that was taken at none of the points changed nothing.
    figures.retain(|figure| figure.iter().flatten().any(|line| line.counts));
    for (place, figure) in figures.iter().enumerate() {
        let Some(line) = figure.iter().flatten().next() else {
            continue;
        };
        if line.part != part {
            part = &line.part;
            let mut lines = figures
                .iter()
                .filter_map(|figure| figure.iter().flatten().next());
            let law = lines.find_map(|other| law_of(other).filter(|_| other.part == part));
            rows.push(LongRow::group(match law {
                Some(law) => words.say("copy.working.part", &[("part", part), ("law", law)])?,
                None => part.to_owned(),
            }));
        }
        rows.push(row(copy, (&figures, place), line)?);
    }
    let mut heads = vec![
        words.plain("copy.working.number")?,
        words.plain("copy.working.figure")?,
    ];
    for point in points {
        heads.push(name(copy, point)?);
    }
    let summary = words.plain("copy.working.summary")?;
    let mut lines = vec![];
    for key in words.context.texts.keys("copy.working.lead.") {
        lines.push(Line::from(words.plain(key)?));
    }
    Ok(CopySection {
        heading: words.plain("copy.working.heading")?,
        parts: vec![CopyPart {
            heading: String::new(),
            lines,
            tables: vec![
                copy.room
                    .whole(&summary, &heads, rows, (2, NAMES), Side::Figures),
            ],
        }],
    })
}

/// The name of a point, as the tables of items have it.
fn name(copy: &Copy<'_>, point: &WorkedPoint) -> Result<String, StatementError> {
    let words = &copy.words;
    let earner = copy.earners.iter().find(|one| one.adult == point.adult);
    let of = |name: String| match earner {
        Some(earner) if words.couple() && !earner.name.is_empty() => {
            words.say("copy.item_of", &[("name", &name), ("who", &earner.name)])
        }
        Some(_) | None => Ok(name),
    };
    match point.place {
        PointPlace::NotInWork => of(words.plain("table.no_work")?),
        PointPlace::Today => words.plain("table.today"),
        PointPlace::Offer(_) | PointPlace::More(_) => {
            let Some(earner) = earner else {
                return Ok(String::new());
            };
            let steps = steps(words, earner)?;
            let found = steps.iter().find(|step| match (point.place, step.offer) {
                (PointPlace::Offer(line), Some(offer)) => offer.line == line,
                (PointPlace::More(_), None) => true,
                (PointPlace::Offer(_) | PointPlace::NotInWork | PointPlace::Today, _)
                | (PointPlace::More(_), Some(_)) => false,
            });
            of(found.map(|step| step.name.clone()).unwrap_or_default())
        }
    }
}

/// The lines of all points: those of one figure together, in the order of the law.
fn merged(points: &[WorkedPoint]) -> Vec<Figure<'_>> {
    let mut figures: Vec<Figure<'_>> = vec![];
    for (column, point) in points.iter().enumerate() {
        let mut next = 0;
        for line in &point.lines {
            let same = |figure: &Figure<'_>| {
                let known = figure.iter().flatten().next();
                known.is_some_and(|known| {
                    (&known.part, &known.name, &known.of) == (&line.part, &line.name, &line.of)
                        && figure.get(column).copied().flatten().is_none()
                })
            };
            let found = figures[next..]
                .iter()
                .position(same)
                .map(|at| next + at)
                .or_else(|| figures[..next].iter().position(same));
            let at = match found {
                Some(at) => at,
                None => {
                    figures.insert(next, vec![None; points.len()]);
                    next
                }
            };
            figures[at][column] = Some(line);
            next = at + 1;
        }
    }
    figures
}

fn row(
    copy: &Copy<'_>,
    (figures, place): (&[Figure<'_>], usize),
    line: &WorkingLine,
) -> Result<LongRow, StatementError> {
    let words = &copy.words;
    let figure = &figures[place];
    let values: Vec<&str> = figure
        .iter()
        .map(|line| line.map_or(NONE, |line| line.value.as_str()))
        .collect();
    let (unit, values) = common_unit(&values);
    let mut title = match line.of.as_str() {
        "" => line.name.clone(),
        of => words.say("copy.working.of", &[("name", &line.name), ("of", of)])?,
    };
    if !unit.is_empty() {
        title = words.say("copy.working.unit", &[("name", &title), ("unit", unit)])?;
    }
    let mut under = vec![];
    let item = words.assessment.items.iter();
    if let Some(item) = item
        .into_iter()
        .position(|item| item.name == line.name && item.part == line.part)
        && line.formula.starts_with("item ")
    {
        under.push(Line {
            lead: words.plain("copy.working.item")?,
            text: crate::statement::money::capital(&words.item(item)?),
        });
    }
    let mut push = |key: &str, text: String| -> Result<(), StatementError> {
        if !text.is_empty() {
            under.push(Line {
                lead: words.plain(key)?,
                text,
            });
        }
        Ok(())
    };
    push("copy.working.rule", line.formula.clone())?;
    push("copy.working.with", inputs(figures, figure))?;
    let mut cells = vec![(place + 1).to_string(), title];
    cells.extend(values);
    Ok(LongRow {
        weight: LongWeight::Worked,
        cells,
        under,
    })
}

/// The law of a part: what stands before a figure's own reference.
fn law_of(line: &WorkingLine) -> Option<&str> {
    let (_, see) = line.formula.rsplit_once(" see \"")?;
    let law = line.law.strip_suffix(see.strip_suffix('"')?)?;
    Some(law.trim_end_matches(", "))
}

/// The unit that all values share, and the values without it.
fn common_unit<'v>(values: &[&'v str]) -> (&'v str, Vec<String>) {
    let split = |value: &'v str| {
        let (figure, unit) = value.split_once(' ')?;
        let number = figure
            .chars()
            .all(|sign| sign.is_ascii_digit() || matches!(sign, '.' | '-'));
        number.then_some((figure, unit))
    };
    let known: Vec<&str> = values
        .iter()
        .copied()
        .filter(|value| *value != NONE)
        .collect();
    let units: Option<Vec<&'v str>> = known
        .iter()
        .map(|value| split(value).map(|(_, unit)| unit))
        .collect();
    let unit = match units.as_deref() {
        Some([first, rest @ ..]) if rest.iter().all(|unit| unit == first) => *first,
        Some(_) | None => "",
    };
    let plain = |value: &&'v str| {
        let figure = match split(value) {
            Some((figure, _)) if !unit.is_empty() => figure,
            Some(_) | None => value,
        };
        super::signed(figure)
    };
    (unit, values.iter().map(plain).collect())
}

/// What went in: a figure of the working by its number, a fact or an amount with its value. Values that differ between the points follow one
/// another in the order of the columns.
fn inputs(figures: &[Figure<'_>], figure: &Figure<'_>) -> String {
    let lines: Vec<&WorkingLine> = figure.iter().flatten().copied().collect();
    let most = lines.iter().map(|line| line.inputs.len()).max();
    let mut said: Vec<String> = vec![];
    for place in 0..most.unwrap_or(0) {
        let entered: Vec<Option<(&str, &str)>> = lines
            .iter()
            .map(|line| line.inputs.get(place)?.split_once(" = "))
            .collect();
        let Some((name, first)) = entered.iter().flatten().next().copied() else {
            continue;
        };
        if let Some(number) = number(figures, lines[0], (name, first), place) {
            let text = format!("{name} [{number}]");
            if !said.contains(&text) {
                said.push(text);
            }
            continue;
        }
        let unconfirmed = lines.iter().any(|line| {
            let mut amounts = line.amounts.iter();
            amounts.any(|amount| amount.name == name && !amount.confirmed)
        });
        let star = if unconfirmed { "*" } else { "" };
        let same = entered.iter().all(|one| *one == Some((name, first)));
        let values = if same {
            first.to_owned()
        } else {
            let all = entered
                .iter()
                .map(|one| one.map_or(NONE, |(_, value)| value));
            all.collect::<Vec<_>>().join(" | ")
        };
        said.push(format!("{name}{star} = {values}"));
    }
    said.join("; ")
}

/// The number of the figure that an input stands for: its own record's, else the one of the household or of the owner; where a rule takes
/// several records together, one after another in the order of the records. None for a fact or an amount.
fn number(
    figures: &[Figure<'_>],
    line: &WorkingLine,
    (name, value): (&str, &str),
    place: usize,
) -> Option<usize> {
    let plain = name.trim_end_matches(" of partner");
    let of_partner = plain != name;
    let named: Vec<(usize, &WorkingLine)> = figures
        .iter()
        .enumerate()
        .filter_map(|(at, figure)| Some((at + 1, figure.iter().flatten().next().copied()?)))
        .filter(|(_, other)| other.name == plain)
        .collect();
    let own = named
        .iter()
        .find(|(_, other)| (other.of == line.of) != of_partner && other.value == value);
    let earlier = line.inputs.iter().take(place);
    let before = earlier
        .filter(|input| {
            input
                .split_once(" = ")
                .is_some_and(|(other, _)| other == name)
        })
        .count();
    let same = |(_, other): &&(usize, &WorkingLine)| other.value == value;
    let found = match named.as_slice() {
        [] => None,
        [one] => Some(one),
        several => own
            .or_else(|| several.get(before).filter(same))
            .or_else(|| several.iter().find(same)),
    };
    found.map(|(at, _)| *at)
}
