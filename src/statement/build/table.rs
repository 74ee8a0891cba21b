//! The short table: not in work, today, and each step; few rows, every sum exact to the minor unit.

use super::marks::STAR;
use super::steps::Step;
use super::words::{Words, hours_text};
use crate::measures::{EarnerResult, ItemKind, Point};
use crate::num::Money;
use crate::statement::error::StatementError;
use crate::statement::fonts::{Weight, width};
use crate::statement::money::{NONE, capital};
use crate::statement::view::{Column, Row, RowWeight, Table};

/// Letters that the name of a single item may have to stand for its row.
const LONGEST_NAME: usize = 23;

/// What a row holds.
struct Source {
    kinds: &'static [ItemKind],
    sign: Sign,
}

/// How a row enters the sum below it.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Sign {
    Adds,
    ComesOff,
}

/// Rows above net income.
const ABOVE_NET: [Source; 6] = [
    Source {
        kinds: &[ItemKind::Pay],
        sign: Sign::Adds,
    },
    Source {
        kinds: &[ItemKind::Tax, ItemKind::Contribution],
        sign: Sign::ComesOff,
    },
    Source {
        kinds: &[ItemKind::Pension],
        sign: Sign::ComesOff,
    },
    Source {
        kinds: &[ItemKind::Loan],
        sign: Sign::ComesOff,
    },
    Source {
        kinds: &[ItemKind::Benefit],
        sign: Sign::Adds,
    },
    Source {
        kinds: &[ItemKind::Income],
        sign: Sign::Adds,
    },
];
/// The row below net income.
const COSTS: Source = Source {
    kinds: &[ItemKind::Cost],
    sign: Sign::ComesOff,
};
/// The row below what is left after costs.
const HOUSING: Source = Source {
    kinds: &[ItemKind::Housing],
    sign: Sign::ComesOff,
};

/// The table in as many pieces as fit side by side.
pub(super) fn tables(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
) -> Result<Vec<Table>, StatementError> {
    let mut columns: Vec<(Column, &Point)> = vec![];
    let today = Words::today(earner);
    if earner.has_job {
        let name = words.plain("table.no_work")?;
        columns.push((
            Column {
                name,
                hours: String::new(),
            },
            &earner.not_in_work,
        ));
        let hours = words.say("table.hours", &[("hours", &hours_text(today.hours))])?;
        let name = words.plain("table.today")?;
        columns.push((Column { name, hours }, today));
    } else {
        let name = words.plain("table.today_no_work")?;
        columns.push((
            Column {
                name,
                hours: String::new(),
            },
            today,
        ));
    }
    for step in steps {
        let hours = words.say("table.hours", &[("hours", &hours_text(step.to.hours))])?;
        let name = step.name.clone();
        columns.push((Column { name, hours }, step.to));
    }
    let points: Vec<&Point> = columns.iter().map(|(_, point)| *point).collect();
    let most = most_columns(words, &points)?;
    let mut tables = vec![];
    let pieces = columns.len().div_ceil(most);
    let each = columns.len().div_ceil(pieces.max(1));
    for piece in columns.chunks(each.max(1)) {
        tables.push(table(words, piece)?);
    }
    // The meaning of the star stands once, below the last piece.
    let note = tables.iter_mut().fold(String::new(), |note, table| {
        let own = std::mem::take(&mut table.note);
        if own.is_empty() { note } else { own }
    });
    if let Some(last) = tables.last_mut() {
        last.note = note;
    }
    Ok(tables)
}

/// How many columns of sums fit beside the names.
fn most_columns(words: &Words<'_>, points: &[&Point]) -> Result<usize, StatementError> {
    let size = f64::from(words.context.delivery.print_size.max(12));
    let sample = words.currency.exact(Money(123_456));
    let cell = width(&sample, Weight::Bold, size) + 0.8 * size;
    let mut names = 0.0f64;
    for source in ABOVE_NET.iter().chain([&COSTS, &HOUSING]) {
        if points
            .iter()
            .any(|point| words.total(point, source.kinds).0 != 0)
        {
            let name = format!("{}{STAR}", name(words, source, points)?);
            names = names.max(width(&name, Weight::Regular, size));
        }
    }
    for total in ["table.net", "table.after_costs", "table.after_housing"] {
        names = names.max(width(&words.plain(total)?, Weight::Bold, size));
    }
    let paper = super::figure::text_width(&words.context.delivery.paper);
    Ok((((paper - names) / cell) as usize).clamp(1, 5))
}

/// One piece of the table.
fn table(words: &Words<'_>, columns: &[(Column, &Point)]) -> Result<Table, StatementError> {
    let points: Vec<&Point> = columns.iter().map(|(_, point)| *point).collect();
    let mut rows = vec![];
    for source in &ABOVE_NET {
        push(words, &mut rows, source, &points)?;
    }
    total(
        words,
        &mut rows,
        "table.net",
        points.iter().map(|point| point.net),
    )?;
    if push(words, &mut rows, &COSTS, &points)? {
        let sums = points.iter().map(|point| point.after_costs);
        total(words, &mut rows, "table.after_costs", sums)?;
    }
    if push(words, &mut rows, &HOUSING, &points)? {
        let sums = points.iter().map(|point| point.after_housing);
        total(words, &mut rows, "table.after_housing", sums)?;
    }
    let names: Vec<String> = columns
        .iter()
        .map(|(column, _)| column.name.clone())
        .collect();
    let starred = rows.iter().any(|row| row.name.ends_with(STAR));
    Ok(Table {
        summary: words.say("table.summary", &[("columns", &words.listed(&names)?)])?,
        columns: columns.iter().map(|(column, _)| column.clone()).collect(),
        rows,
        note: if starred {
            words.plain("table.star")?
        } else {
            String::new()
        },
    })
}

/// Adds a row unless it is empty everywhere; pay always stands. Returns whether there is a row.
fn push(
    words: &Words<'_>,
    rows: &mut Vec<Row>,
    source: &Source,
    points: &[&Point],
) -> Result<bool, StatementError> {
    let sums: Vec<Money> = points
        .iter()
        .map(|point| words.total(point, source.kinds))
        .collect();
    if source.kinds != [ItemKind::Pay] && sums.iter().all(|sum| sum.0 == 0) {
        return Ok(false);
    }
    let cells = sums.iter().map(|sum| match (sum.0, source.sign) {
        (0, _) => NONE.to_owned(),
        (_, Sign::Adds) => words.currency.exact(*sum),
        (_, Sign::ComesOff) => words.currency.exact(-*sum),
    });
    let of_row = |item: usize| source.kinds.contains(&words.assessment.items[item].kind);
    let star = words.marks.of_points(points, of_row);
    rows.push(Row {
        name: format!("{}{star}", capital(&name(words, source, points)?)),
        cells: cells.collect(),
        weight: RowWeight::Plain,
    });
    Ok(true)
}

/// The name of a row: the one item's own where there is only one, else its kinds'.
fn name(words: &Words<'_>, source: &Source, points: &[&Point]) -> Result<String, StatementError> {
    let mut names: Vec<String> = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        let due = points.iter().any(|point| point.items[position].0 != 0);
        if due && source.kinds.contains(&item.kind) {
            let name = words.item(position)?;
            if !names.contains(&name) {
                names.push(name);
            }
        }
    }
    let name = match (names.as_slice(), source.kinds) {
        ([one], _) if one.chars().count() <= LONGEST_NAME => one.clone(),
        (_, [first, second]) => {
            let (first, second) = (words.kind(*first)?, words.kind(*second)?);
            words.say("table.two_kinds", &[("first", &first), ("second", &second)])?
        }
        (_, [first, ..]) => words.kind(*first)?,
        (_, []) => String::new(),
    };
    if words.couple() && source.kinds == [ItemKind::Pay] {
        return words.say("table.both", &[("name", &name)]);
    }
    Ok(name)
}

/// Adds a total.
fn total(
    words: &Words<'_>,
    rows: &mut Vec<Row>,
    key: &str,
    sums: impl Iterator<Item = Money>,
) -> Result<(), StatementError> {
    rows.push(Row {
        name: words.plain(key)?,
        cells: sums.map(|sum| words.currency.exact(sum)).collect(),
        weight: RowWeight::Total,
    });
    Ok(())
}
