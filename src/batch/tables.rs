//! The rows of `results.csv` and `turning_points.csv` from one household's results.
//!
//! Money has two decimals, rates four (0.6300 is 63%), hours no needless zeros. A cell is empty where the value does not
//! exist: a participation rate without pay, a rate after the last row. Text that came from a list and that a spreadsheet
//! would take for a formula gets an apostrophe in front.

use crate::measures::{
    Assessment, BudgetLine, EarnerResult, Effect, ItemKind, Point, Turn, TurnKind,
};
use crate::num::{Fraction, Hours, Money};
use serde::{Deserialize, Serialize};

/// Rows of a CSV table, already written out.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Table {
    /// The rows as text, each with its line end.
    #[serde(with = "super::frame::bytes")]
    pub bytes: Vec<u8>,
    /// How many rows.
    pub rows: u64,
}

impl Table {
    /// Adds a row.
    pub fn push(&mut self, cells: &[String]) {
        for (place, cell) in cells.iter().enumerate() {
            if place > 0 {
                self.bytes.push(b',');
            }
            let quoted =
                cell.contains([',', '"', '\n', '\r']) || (cells.len() == 1 && cell.is_empty());
            if quoted {
                self.bytes.push(b'"');
                self.bytes.extend(cell.replace('"', "\"\"").bytes());
                self.bytes.push(b'"');
            } else {
                self.bytes.extend(cell.bytes());
            }
        }
        self.bytes.push(b'\n');
        self.rows += 1;
    }

    /// A table of these rows.
    pub fn from_rows(rows: impl IntoIterator<Item = Vec<String>>) -> Table {
        let mut table = Table::default();
        for row in rows {
            table.push(&row);
        }
        table
    }
}

/// Text for a cell: an apostrophe goes before what a spreadsheet would take for a formula.
pub(super) fn text_cell(text: &str) -> String {
    if text.starts_with(['=', '+', '-', '@', '\t', '\r']) {
        format!("'{text}")
    } else {
        text.to_owned()
    }
}

/// Which points of a line become rows.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum GridRows {
    /// Not in work, the job's own hours, the end of the named step.
    Named,
    /// Those and every other point of the grid.
    All,
}

/// Column names of `results.csv` for a pack with these items.
///
/// * `household`, `earner` (1 for the first adult), `line` (`today`, or the offer's reference), `wage` (an hour)
/// * `when`: `now`, or `once_settled` for the rows of a household to which facts about past periods will make a difference: all its rows once
///   more, as they will be when those facts have settled
/// * `point`: `not_in_work` (all jobs of the earner ended), `today` or `offer` (the job's own hours), `step` (four hours more than
///   today), `grid`
/// * `hours` (a week), `pay` (E, all jobs of the earner)
/// * `item:NAME`: one column an item of the pack, summed over the household's members; a passport is a count
/// * `take_home`, `net` (Y), `after_costs`, `after_housing`
/// * `ptr`: 1 − [Y(h) − Y(0)] / E(h); empty without pay; `ptr_after_costs` likewise
/// * `metr_here`: 1 − dY/dE to the right, roundings smoothed; `metr_here_after_costs` likewise
/// * `metr_step`: 1 − ΔY/ΔE to the next row of the same line, from the rounded sums; empty on the last row and where pay does not
///   change; `metr_step_after_costs` likewise
/// * `kept_of_next_hour`: net income one hour further on, less net income here; empty where the grid has no such hour, and on
///   `not_in_work` where the earner has further jobs;
///   `kept_of_next_hour_after_costs` likewise
/// * `replacement`: Y(0) / Y(h)
pub fn results_header(items: &[String]) -> Vec<String> {
    let front = [
        "household",
        "earner",
        "line",
        "wage",
        "when",
        "point",
        "hours",
        "pay",
    ];
    let back = [
        "take_home",
        "net",
        "after_costs",
        "after_housing",
        "ptr",
        "ptr_after_costs",
        "metr_here",
        "metr_here_after_costs",
        "metr_step",
        "metr_step_after_costs",
        "kept_of_next_hour",
        "kept_of_next_hour_after_costs",
        "replacement",
    ];
    front
        .into_iter()
        .map(str::to_owned)
        .chain(items.iter().map(|item| format!("item:{item}")))
        .chain(back.into_iter().map(str::to_owned))
        .collect()
}

/// The rows of `results.csv` for one household: for each earner and line, not in work first, then by hours; then all of it once settled,
/// where that makes a difference.
/// `items` are the columns, in the order of [`results_header`]; an item that occurs several times is summed.
pub fn results(assessment: &Assessment, items: &[String], grid: GridRows) -> Table {
    let columns: Vec<Vec<usize>> = items
        .iter()
        .map(|name| {
            (0..assessment.items.len())
                .filter(|i| assessment.items[*i].name == *name)
                .collect()
        })
        .collect();
    let mut table = Table::default();
    for (when, earner) in moments(assessment) {
        for line in &earner.lines {
            let rows = chosen(earner, line, grid);
            for (place, (name, point)) in rows.iter().enumerate() {
                let next = rows.get(place + 1).map(|(_, point)| *point);
                // The line's hours are those of one job. Where others go on beside it, its first hour is no next hour of somebody who has
                // ended all jobs.
                let same_line =
                    place > 0 || line.grid.first().is_none_or(|first| first.pay == point.pay);
                let hour = line
                    .grid
                    .iter()
                    .find(|other| same_line && other.hours == Hours(point.hours.0 + 100));
                let mut cells = vec![
                    assessment.reference.clone(),
                    (earner.adult + 1).to_string(),
                    line_name(line),
                    wage(line.terms.wage),
                    when.to_owned(),
                    (*name).to_owned(),
                    point.hours.plain(),
                    point.pay.plain(),
                ];
                cells.extend(columns.iter().map(|places| item(assessment, places, point)));
                cells.extend([
                    point.take_home.plain(),
                    point.net.plain(),
                    point.after_costs.plain(),
                    point.after_housing.plain(),
                    rate(point.ptr),
                    rate(point.ptr_after_costs),
                    rate(point.metr_here),
                    rate(point.metr_here_after_costs),
                    rate(step_rate(point, next, |p| p.net)),
                    rate(step_rate(point, next, |p| p.after_costs)),
                    money(hour.map(|next| next.net - point.net)),
                    money(hour.map(|next| next.after_costs - point.after_costs)),
                    rate(point.replacement),
                ]);
                table.push(&cells);
            }
        }
    }
    table
}

/// The results of each earner now, then once settled where that makes a difference, each with the word of its moment.
fn moments(assessment: &Assessment) -> impl Iterator<Item = (&'static str, &EarnerResult)> {
    let settled = assessment.settled.iter().flat_map(|s| &s.earners);
    let now = assessment.earners.iter().map(|earner| ("now", earner));
    now.chain(settled.map(|earner| ("once_settled", earner)))
}

/// The sum of an item over its instances; a passport is the number of those who have it. Empty where the household has no
/// such item.
fn item(assessment: &Assessment, places: &[usize], point: &Point) -> String {
    let sum: Money = places.iter().map(|i| point.items[*i]).sum();
    match places.first() {
        None => String::new(),
        Some(first) if assessment.items[*first].kind == ItemKind::Passport => sum.0.to_string(),
        Some(_) => sum.plain(),
    }
}

/// The points of a line that become rows, each with its word.
fn chosen<'a>(
    earner: &'a EarnerResult,
    line: &'a BudgetLine,
    grid: GridRows,
) -> Vec<(&'static str, &'a Point)> {
    let own = if line.terms.reference.is_empty() {
        "today"
    } else {
        "offer"
    };
    let mut rows = vec![("not_in_work", &earner.not_in_work)];
    for (place, point) in line.grid.iter().enumerate() {
        let word = match grid {
            _ if place == line.own => own,
            _ if place == line.step_to => "step",
            GridRows::All => "grid",
            GridRows::Named => continue,
        };
        rows.push((word, point));
    }
    rows
}

/// 1 − ΔY/ΔE from one row to the next, from rounded sums; none where pay does not change.
fn step_rate(from: &Point, to: Option<&Point>, sum: impl Fn(&Point) -> Money) -> Option<Fraction> {
    let to = to?;
    let pay = to.pay - from.pay;
    if pay == Money::ZERO {
        return None;
    }
    let kept = sum(to) - sum(from);
    Some(Fraction::ONE - Fraction::new(i128::from(kept.0), i128::from(pay.0)))
}

/// Column names of `turning_points.csv`.
///
/// * `household`, `earner`, `line`, `wage`, `when` as in `results.csv`
/// * `kind`: `kink`, `cliff_down`, `cliff_up`, `passport`, `trap`, `no_gain`
/// * `hours`: where it lies, or where a trap or a stretch starts; `until_hours`: where a trap or a stretch ends, empty where a trap
///   is not regained
/// * `pay`: E there; for a cliff the first payable pay from which the new branch stays
/// * `net_before`, `net_after`, `size`: exact sums at the point; for a trap its highest net income before, its lowest inside, and
///   what is lost at most; a trap of a line with costs of working is one of what is left after them and stands in the `after_costs` columns
/// * `after_costs_before`, `after_costs_after`, `metr_before`, `metr_after`
/// * `causes`: the rules that turned; `effects`: what changed for each item, adding up to the whole
pub fn turning_points_header() -> Vec<String> {
    [
        "household",
        "earner",
        "line",
        "wage",
        "when",
        "kind",
        "hours",
        "until_hours",
        "pay",
        "net_before",
        "net_after",
        "size",
        "after_costs_before",
        "after_costs_after",
        "metr_before",
        "metr_after",
        "causes",
        "effects",
    ]
    .map(str::to_owned)
    .to_vec()
}

/// The rows of `turning_points.csv` for one household: kinks, cliffs and passport changes of each line by hours, then its
/// traps and no-gain stretches.
pub fn turning_points(assessment: &Assessment) -> Table {
    let mut table = Table::default();
    for (when, earner) in moments(assessment) {
        for line in &earner.lines {
            let front = |kind: &str| {
                vec![
                    assessment.reference.clone(),
                    (earner.adult + 1).to_string(),
                    line_name(line),
                    wage(line.terms.wage),
                    when.to_owned(),
                    kind.to_owned(),
                ]
            };
            for turn in &line.turns {
                let mut cells = front(turn_word(turn));
                cells.extend(turn_cells(assessment, turn));
                table.push(&cells);
            }
            for trap in &line.traps {
                let mut cells = front("trap");
                let sums = [trap.peak.plain(), (trap.peak - trap.depth).plain()];
                let none = [String::new(), String::new()];
                let (net, after_costs) = if line.has_costs {
                    (none, sums)
                } else {
                    (sums, none)
                };
                cells.extend([
                    trap.from.decimal(2),
                    trap.to.map(|to| to.decimal(2)).unwrap_or_default(),
                    String::new(),
                ]);
                cells.extend(net);
                cells.push((-trap.depth).plain());
                cells.extend(after_costs);
                cells.resize(turning_points_header().len(), String::new());
                table.push(&cells);
            }
            for stretch in &line.no_gain {
                let mut cells = front("no_gain");
                cells.extend([stretch.from.decimal(2), stretch.to.decimal(2)]);
                cells.resize(turning_points_header().len(), String::new());
                table.push(&cells);
            }
        }
    }
    table
}

fn turn_word(turn: &Turn) -> &'static str {
    match turn.kind {
        TurnKind::Kink => "kink",
        TurnKind::Cliff if turn.size < Money::ZERO => "cliff_down",
        TurnKind::Cliff => "cliff_up",
        TurnKind::CostStep => "cost_step",
        TurnKind::Passport => "passport",
    }
}

fn turn_cells(assessment: &Assessment, turn: &Turn) -> Vec<String> {
    let causes: Vec<String> = turn
        .causes
        .iter()
        .map(|cause| format!("{}: {}", cause.part, cause.line))
        .collect();
    let effects: Vec<String> = turn
        .effects
        .iter()
        .map(|effect| effect_words(assessment, effect))
        .collect();
    vec![
        turn.hours.plain(),
        String::new(),
        turn.pay.plain(),
        turn.net_before.plain(),
        turn.net_after.plain(),
        turn.size.plain(),
        turn.after_costs_before.plain(),
        turn.after_costs_after.plain(),
        rate(turn.metr_before),
        rate(turn.metr_after),
        text_cell(&causes.join("; ")),
        text_cell(&effects.join("; ")),
    ]
}

/// `income_tax of adult 1: jump -12.00, slope -0.2000`, with what is zero left out.
fn effect_words(assessment: &Assessment, effect: &Effect) -> String {
    let item = &assessment.items[effect.item];
    let whose = match item.adult {
        Some(adult) => format!("{} of adult {}", item.name, adult + 1),
        None => item.name.clone(),
    };
    if item.kind == ItemKind::Passport {
        let what = if effect.jump < Money::ZERO {
            "lost"
        } else {
            "won"
        };
        return format!("{whose}: {what}");
    }
    let mut parts = Vec::new();
    if effect.jump != Money::ZERO {
        parts.push(format!("jump {}", effect.jump.plain()));
    }
    if !effect.slope.is_zero() {
        parts.push(format!("slope {}", effect.slope.decimal(4)));
    }
    format!("{whose}: {}", parts.join(", "))
}

/// `today`, or the offer's reference.
fn line_name(line: &BudgetLine) -> String {
    if line.terms.reference.is_empty() {
        "today".to_owned()
    } else {
        text_cell(&line.terms.reference)
    }
}

/// A wage in ten-thousandths as text with two decimals, or more where it has them.
pub(crate) fn wage(ten_thousandths: i64) -> String {
    let text = Fraction::new(i128::from(ten_thousandths), 10_000).decimal(4);
    let cut = text.strip_suffix("00").unwrap_or(&text);
    cut.to_owned()
}

fn rate(value: Option<Fraction>) -> String {
    value.map(|rate| rate.decimal(4)).unwrap_or_default()
}

fn money(value: Option<Money>) -> String {
    value.map(Money::plain).unwrap_or_default()
}

#[cfg(test)]
#[path = "tables_tests.rs"]
mod tests;
