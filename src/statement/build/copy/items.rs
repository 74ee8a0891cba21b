//! Every item of one earner's household: not in work, today, at each step; the sums line by line, and the rates.

use super::{Copy, Side, percent, signed, today};
use crate::measures::{EarnerResult, ItemKind, Point};
use crate::num::{Fraction, Hours, Money};
use crate::statement::build::steps::{Step, steps};
use crate::statement::build::words::hours_text;
use crate::statement::copy_view::{CopyPart, CopySection, LongRow};
use crate::statement::error::StatementError;
use crate::statement::view::Line;

/// Width that the names of items get at least, in sizes of print.
const NAMES: f64 = 11.0;

/// Kinds above net income, in the order of the table.
const ABOVE_NET: [ItemKind; 7] = [
    ItemKind::Pay,
    ItemKind::Tax,
    ItemKind::Contribution,
    ItemKind::Pension,
    ItemKind::Loan,
    ItemKind::Benefit,
    ItemKind::Income,
];

/// A column: its head and its point.
struct Column<'a> {
    head: String,
    point: &'a Point,
}

pub(super) fn section(
    copy: &Copy<'_>,
    earner: &EarnerResult,
) -> Result<CopySection, StatementError> {
    let steps = asked(steps(&copy.words, earner)?);
    let columns = columns(copy, earner, &steps)?;
    let mut parts = vec![
        items(copy, &columns)?,
        rates(copy, earner, &columns)?,
        between(copy, earner, &steps)?,
    ];
    parts.extend(settled(copy, earner)?);
    Ok(CopySection {
        heading: copy.of_earner("copy.items.heading", earner)?,
        parts,
    })
}

/// The same items once facts about past periods have settled, where anything differs then.
fn settled(copy: &Copy<'_>, earner: &EarnerResult) -> Result<Vec<CopyPart>, StatementError> {
    let words = &copy.words;
    let Some(settled) = &words.assessment.settled else {
        return Ok(vec![]);
    };
    let names: Vec<String> = settled
        .facts
        .iter()
        .map(|fact| words.named(&format!("fact.{fact}"), fact))
        .collect::<Result<_, _>>()?;
    let mut lead = words.say("copy.settled.lead", &[("list", &words.enumerated(&names))])?;
    if !settled.held.is_empty() {
        lead.push(' ');
        let reasons = settled.held.join(" ");
        lead.push_str(&words.say("copy.settled.held", &[("reasons", &reasons)])?);
    }
    let later = settled.earners.iter().find(|one| one.adult == earner.adult);
    let mut part = match later {
        Some(later) => {
            let steps = asked(steps(words, later)?);
            items(copy, &columns(copy, later, &steps)?)?
        }
        None => CopyPart {
            heading: String::new(),
            lines: vec![],
            tables: vec![],
        },
    };
    part.heading = words.plain("copy.settled.title")?;
    part.lines.insert(0, lead.into());
    Ok(vec![part])
}

/// The offers, else four hours more.
fn asked(steps: Vec<Step<'_>>) -> Vec<Step<'_>> {
    let offered = steps.iter().any(|step| step.offer.is_some());
    let steps = steps.into_iter();
    steps
        .filter(|step| step.offer.is_some() || !offered)
        .collect()
}

/// Not in work, today, each step.
fn columns<'a>(
    copy: &Copy<'_>,
    earner: &'a EarnerResult,
    steps: &[Step<'a>],
) -> Result<Vec<Column<'a>>, StatementError> {
    let words = &copy.words;
    let mut columns = vec![];
    let key = if earner.has_job {
        "table.no_work"
    } else {
        "table.today_no_work"
    };
    columns.push(Column {
        head: words.plain(key)?,
        point: &earner.not_in_work,
    });
    let headed = |name: &str, hours: Hours| {
        let hours = hours_text(hours);
        words.say("copy.items.column", &[("name", name), ("hours", &hours)])
    };
    if earner.has_job {
        let point = today(earner);
        let name = words.plain("table.today")?;
        columns.push(Column {
            head: headed(&name, point.hours)?,
            point,
        });
    }
    for step in steps {
        columns.push(Column {
            head: headed(&step.name, step.to.hours)?,
            point: step.to,
        });
    }
    Ok(columns)
}

/// The table of items with its totals; deductions have their sign, so that each total is the sum of the rows above it.
fn items(copy: &Copy<'_>, columns: &[Column<'_>]) -> Result<CopyPart, StatementError> {
    let words = &copy.words;
    let mut rows = vec![];
    let mut nothing = vec![];
    for kind in ABOVE_NET {
        of_kind(copy, columns, kind, (&mut rows, &mut nothing))?;
    }
    total(copy, &mut rows, "table.net", columns, |point| point.net)?;
    of_kind(copy, columns, ItemKind::Cost, (&mut rows, &mut nothing))?;
    total(copy, &mut rows, "table.after_costs", columns, |point| {
        point.after_costs
    })?;
    of_kind(copy, columns, ItemKind::Housing, (&mut rows, &mut nothing))?;
    total(copy, &mut rows, "table.after_housing", columns, |point| {
        point.after_housing
    })?;
    let mut beside = vec![];
    for kind in [ItemKind::Passport, ItemKind::Employer] {
        of_kind(copy, columns, kind, (&mut beside, &mut nothing))?;
    }
    if !beside.is_empty() {
        rows.push(LongRow::group(words.plain("copy.items.beside")?));
        rows.extend(beside);
    }
    let mut lines = vec![Line::from(words.plain("copy.items.lead")?)];
    if !nothing.is_empty() {
        lines.push(Line {
            lead: words.plain("copy.items.nothing_lead")?,
            text: words.say(
                "copy.items.nothing",
                &[("list", &words.enumerated(&nothing))],
            )?,
        });
    }
    for due in &words.assessment.unclaimed {
        let name = copy.item(due.item)?;
        let sum = words.currency.exact(due.due);
        lines.push(Line {
            lead: words.say("unclaimed.lead", &[("name", &name)])?,
            text: words.say("copy.items.unclaimed", &[("sum", &sum)])?,
        });
    }
    let mut heads = vec![words.say("table.per", &[])?];
    heads.extend(columns.iter().map(|column| column.head.clone()));
    let summary = words.plain("copy.items.summary")?;
    Ok(CopyPart {
        heading: words.plain("copy.items.title")?,
        lines,
        tables: vec![
            copy.room
                .whole(&summary, &heads, rows, (1, NAMES), Side::Figures),
        ],
    })
}

/// The rows of one kind; items that are nothing in every column are named apart.
fn of_kind(
    copy: &Copy<'_>,
    columns: &[Column<'_>],
    kind: ItemKind,
    (rows, nothing): (&mut Vec<LongRow>, &mut Vec<String>),
) -> Result<(), StatementError> {
    let words = &copy.words;
    for (position, item) in words.assessment.items.iter().enumerate() {
        if item.kind != kind {
            continue;
        }
        let name = copy.item(position)?;
        if columns
            .iter()
            .all(|column| column.point.items[position].0 == 0)
        {
            nothing.push(name);
            continue;
        }
        let mut cells = vec![format!(
            "{name}{}",
            words.marks.of_points(
                &columns
                    .iter()
                    .map(|column| column.point)
                    .collect::<Vec<_>>(),
                |one| one == position,
            )
        )];
        for column in columns {
            let sum = column.point.items[position];
            cells.push(match kind {
                ItemKind::Passport if sum.0 == 0 => words.plain("facts.no")?,
                ItemKind::Passport => words.plain("facts.yes")?,
                ItemKind::Pay | ItemKind::Income | ItemKind::Benefit | ItemKind::Employer => {
                    words.currency.exact(sum)
                }
                ItemKind::Tax
                | ItemKind::Contribution
                | ItemKind::Pension
                | ItemKind::Loan
                | ItemKind::Cost
                | ItemKind::Housing => words.currency.exact(-sum),
            });
        }
        rows.push(LongRow {
            under: vec![Line {
                lead: words.plain("copy.law")?,
                text: item.law.clone(),
            }],
            ..LongRow::plain(cells)
        });
    }
    Ok(())
}

/// A total of what stands above it.
fn total(
    copy: &Copy<'_>,
    rows: &mut Vec<LongRow>,
    key: &str,
    columns: &[Column<'_>],
    of: impl Fn(&Point) -> Money,
) -> Result<(), StatementError> {
    let mut cells = vec![copy.words.plain(key)?];
    let sums = columns.iter();
    cells.extend(sums.map(|column| copy.words.currency.exact(of(column.point))));
    rows.push(LongRow::total(cells));
    Ok(())
}

/// Pay, take-home pay, and every rate with its formula.
fn rates(
    copy: &Copy<'_>,
    earner: &EarnerResult,
    columns: &[Column<'_>],
) -> Result<CopyPart, StatementError> {
    let words = &copy.words;
    let costs = earner.lines.iter().any(|line| line.has_costs);
    let mut rows = vec![];
    let mut add = |key: &str, cell: &dyn Fn(&Point) -> String| -> Result<(), StatementError> {
        let mut cells = vec![words.plain(&format!("copy.rates.{key}"))?];
        cells.extend(columns.iter().map(|column| cell(column.point)));
        let formula = words.plain(&format!("copy.rates.{key}_formula"))?;
        rows.push(LongRow {
            under: vec![Line::from(formula)],
            ..LongRow::plain(cells)
        });
        Ok(())
    };
    add("pay", &|point| words.currency.exact(point.pay))?;
    add("take_home", &|point| words.currency.exact(point.take_home))?;
    add("ptr", &|point| percent(point.ptr))?;
    if costs {
        add("ptr_after_costs", &|point| percent(point.ptr_after_costs))?;
    }
    add("metr", &|point| percent(point.metr_here))?;
    if costs {
        add("metr_after_costs", &|point| {
            percent(point.metr_here_after_costs)
        })?;
    }
    add("replacement", &|point| percent(point.replacement))?;
    let mut heads = vec![words.say("table.per", &[])?];
    heads.extend(columns.iter().map(|column| column.head.clone()));
    let summary = words.plain("copy.rates.summary")?;
    Ok(CopyPart {
        heading: words.plain("copy.rates.title")?,
        lines: vec![],
        tables: vec![
            copy.room
                .whole(&summary, &heads, rows, (1, NAMES), Side::Figures),
        ],
    })
}

/// What holds between today and an offer, and the sum to reach.
fn between(
    copy: &Copy<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
) -> Result<CopyPart, StatementError> {
    let words = &copy.words;
    let exact = |sum: Money| words.currency.exact(sum);
    let per_hour = |units: Fraction| signed(&units.decimal(4));
    let mut lines = vec![];
    if let Some(line) = earner.lines.first() {
        let sum = exact(line.first_minute);
        lines.push(Line::from(
            words.say("copy.between.first_minute", &[("sum", &sum)])?,
        ));
    }
    for step in steps {
        let Some(offer) = step.offer else { continue };
        let mut said = vec![match offer.holding {
            Some(hours) => words.say("copy.between.holding", &[("hours", &hours_text(hours))])?,
            None => words.plain("copy.between.holding_none")?,
        }];
        if let Some(rise) = &offer.rise {
            let (price, income) = (per_hour(rise.price), exact(rise.income));
            said.push(words.say(
                "copy.between.rise",
                &[("price", &price), ("income", &income)],
            )?);
            if rise.fragile {
                said.push(words.plain("copy.between.fragile")?);
            }
        }
        lines.push(Line {
            lead: words.say(
                "copy.between.lead",
                &[("name", &step.name), ("about", &step.about)],
            )?,
            text: said.join(" "),
        });
    }
    if let Some(target) = &earner.target {
        let hours = |hours: Option<Hours>| match hours {
            Some(hours) => words.say("facts.hours", &[("hours", &hours_text(hours))]),
            None => words.plain("copy.between.never"),
        };
        let (sum, first, stays) = (
            exact(target.sum),
            hours(target.first)?,
            hours(target.stays)?,
        );
        let values = [("sum", sum.as_str()), ("first", &first), ("stays", &stays)];
        lines.push(Line::from(words.say("copy.between.target", &values)?));
    }
    Ok(CopyPart {
        heading: words.plain("copy.between.title")?,
        lines,
        tables: vec![],
    })
}
