//! The short table: not in work, today, and each step; few rows, every sum exact to the minor unit.

use super::section::Step;
use super::words::{Words, hours_text};
use crate::measures::{EarnerResult, ItemKind, Point};
use crate::num::Money;
use crate::statement::error::StatementError;
use crate::statement::fonts::{Weight, width};
use crate::statement::money::NONE;
use crate::statement::view::{Column, Row, RowWeight, Table};

/// What a row holds.
struct Source {
    key: &'static str,
    kinds: &'static [ItemKind],
    sign: Sign,
}

/// How a row enters the sum below it.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Sign {
    Adds,
    ComesOff,
}

const ABOVE_NET: [Source; 6] = [
    Source {
        key: "pay",
        kinds: &[ItemKind::Pay],
        sign: Sign::Adds,
    },
    Source {
        key: "off",
        kinds: &[ItemKind::Tax, ItemKind::Contribution],
        sign: Sign::ComesOff,
    },
    Source {
        key: "pension",
        kinds: &[ItemKind::Pension],
        sign: Sign::ComesOff,
    },
    Source {
        key: "loan",
        kinds: &[ItemKind::Loan],
        sign: Sign::ComesOff,
    },
    Source {
        key: "benefits",
        kinds: &[ItemKind::Benefit],
        sign: Sign::Adds,
    },
    Source {
        key: "income",
        kinds: &[ItemKind::Income],
        sign: Sign::Adds,
    },
];

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
    let most = most_columns(words);
    let mut tables = vec![];
    let pieces = columns.len().div_ceil(most);
    let each = columns.len().div_ceil(pieces.max(1));
    for piece in columns.chunks(each.max(1)) {
        tables.push(table(words, piece)?);
    }
    Ok(tables)
}

/// How many columns of sums fit beside the names.
fn most_columns(words: &Words<'_>) -> usize {
    let size = f64::from(words.context.delivery.print_size.max(12));
    let cell = width("£1,234.56", Weight::Bold, size) + size;
    let names = size * 11.5;
    let paper = super::figure::text_width(&words.context.delivery.paper);
    (((paper - names) / cell) as usize).clamp(1, 5)
}

/// One piece of the table.
fn table(words: &Words<'_>, columns: &[(Column, &Point)]) -> Result<Table, StatementError> {
    let mut rows = vec![];
    for source in &ABOVE_NET {
        let sums: Vec<Money> = columns
            .iter()
            .map(|(_, point)| words.total(point, source.kinds))
            .collect();
        push(words, &mut rows, source.key, &sums, source.sign)?;
    }
    total(
        words,
        &mut rows,
        "net",
        columns.iter().map(|(_, point)| point.net),
    )?;
    let costs: Vec<Money> = columns
        .iter()
        .map(|(_, point)| point.net - point.after_costs)
        .collect();
    if costs.iter().any(|sum| sum.0 != 0) {
        push(words, &mut rows, "costs", &costs, Sign::ComesOff)?;
        let sums = columns.iter().map(|(_, point)| point.after_costs);
        total(words, &mut rows, "after_costs", sums)?;
    }
    let housing: Vec<Money> = columns
        .iter()
        .map(|(_, point)| point.after_costs - point.after_housing)
        .collect();
    if housing.iter().any(|sum| sum.0 != 0) {
        push(words, &mut rows, "housing", &housing, Sign::ComesOff)?;
        let sums = columns.iter().map(|(_, point)| point.after_housing);
        total(words, &mut rows, "after_housing", sums)?;
    }
    let names: Vec<&str> = columns
        .iter()
        .map(|(column, _)| column.name.as_str())
        .collect();
    Ok(Table {
        summary: words.say("table.summary", &[("columns", &names.join("; "))])?,
        columns: columns.iter().map(|(column, _)| column.clone()).collect(),
        rows,
    })
}

/// Adds a row unless it is empty everywhere; pay always stands.
fn push(
    words: &Words<'_>,
    rows: &mut Vec<Row>,
    key: &str,
    sums: &[Money],
    sign: Sign,
) -> Result<(), StatementError> {
    if key != "pay" && sums.iter().all(|sum| sum.0 == 0) {
        return Ok(());
    }
    let cells = sums.iter().map(|sum| match (sum.0, sign) {
        (0, _) => NONE.to_owned(),
        (_, Sign::Adds) => words.currency.exact(*sum),
        (_, Sign::ComesOff) => words.currency.exact(-*sum),
    });
    rows.push(Row {
        name: words.plain(&format!("table.{key}"))?,
        cells: cells.collect(),
        weight: RowWeight::Plain,
    });
    Ok(())
}

/// Adds a total.
fn total(
    words: &Words<'_>,
    rows: &mut Vec<Row>,
    key: &str,
    sums: impl Iterator<Item = Money>,
) -> Result<(), StatementError> {
    rows.push(Row {
        name: words.plain(&format!("table.{key}"))?,
        cells: sums.map(|sum| words.currency.exact(sum)).collect(),
        weight: RowWeight::Total,
    });
    Ok(())
}
