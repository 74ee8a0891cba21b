//! The working of a point: every figure and item as a line, in the order of the law.

use super::machine::Special;
use crate::num::{Fraction, Hours};
use crate::program::{Line, Reg};
use std::collections::{BTreeSet, HashMap};

/// One line of a working.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Worked {
    /// Title of the instrument.
    pub part: String,
    /// Name of the figure or item.
    pub name: String,
    /// Kind that it is worked out per (its position in the schema), and the record.
    pub of: (usize, usize),
    /// The exact value.
    pub exact: Fraction,
    /// The value as text with its unit.
    pub value: String,
    /// Where its rule stands in the pack's text.
    pub span: crate::source::Span,
    /// The values that went in, `name = value`.
    pub inputs: Vec<String>,
    /// Law reference; may be empty for a figure.
    pub law: String,
    /// Positions of the amounts that went in, among the program's.
    pub amounts: Vec<usize>,
    /// Whether the figure could have changed an item here: not so where it stands in a branch that was not taken.
    pub counts: bool,
}

/// All lines that the items need, at these hours.
pub fn working(special: &Special<'_>, hours: Hours) -> Vec<Worked> {
    let mut values = Vec::new();
    special.fill(hours, &mut values);
    let program = special.program();
    let needed = needed(special);
    let rows = special.rows_reached(&values);
    let deciding = special.deciding(&values);
    let counting: BTreeSet<usize> = program
        .steps
        .iter_with_id()
        .filter(|(reg, _)| deciding[reg.position()])
        .filter_map(|(_, step)| step.line.map(crate::index::Id::position))
        .collect();
    let mut lines: Vec<(usize, &Line)> = program
        .lines
        .iter_with_id()
        .filter(|(id, _)| needed.contains(&id.position()))
        .map(|(id, l)| (id.position(), l))
        .collect();
    lines.sort_by_key(|(_, l)| (l.order, l.instance));
    let exact = |reg: Reg| Fraction::new(values[reg.position()], program.steps[reg].scale.exact);
    lines
        .iter()
        .filter_map(|(at, line)| {
            let reg = line.reg?;
            let mut amounts: Vec<usize> = line.amounts.iter().map(|a| a.position()).collect();
            for (_, row) in rows.iter().filter(|(line, _)| line == at) {
                if !amounts.contains(row) {
                    amounts.push(*row);
                }
            }
            Some(Worked {
                part: line.part.clone(),
                name: if line.as_if {
                    format!("{} as if", line.name)
                } else {
                    line.name.clone()
                },
                of: (line.kind as usize, line.instance as usize),
                exact: exact(reg),
                value: shown(exact(reg), &line.unit, &line.words),
                span: line.span,
                inputs: line
                    .inputs
                    .iter()
                    .map(|e| format!("{} = {}", e.name, shown(exact(e.reg), &e.unit, &e.words)))
                    .collect(),
                law: line.law.clone(),
                amounts,
                counts: counting.contains(at) || deciding[reg.position()],
            })
        })
        .collect()
}

/// Lines whose registers the items depend on.
fn needed(special: &Special<'_>) -> BTreeSet<usize> {
    let program = special.program();
    let mut wanted = vec![false; program.steps.len()];
    for item in &program.items {
        wanted[item.reg.position()] = true;
        if let Some(reg) = program.lines[item.line].reg {
            wanted[reg.position()] = true;
        }
    }
    let mut lines = BTreeSet::new();
    for (reg, step) in program
        .steps
        .iter_with_id()
        .collect::<Vec<_>>()
        .into_iter()
        .rev()
    {
        if !wanted[reg.position()] {
            continue;
        }
        if let Some(line) = step.line {
            lines.insert(line.position());
        }
        super::walk::operands(&special.machine.exact[reg.position()], &mut |r| {
            wanted[r] = true
        });
    }
    // A line whose register was folded into a constant or is another line's belongs to nobody's steps; it is needed where a
    // needed line names it.
    lines.extend(program.items.iter().map(|item| item.line.position()));
    let mut by_name: HashMap<(usize, &str), Vec<usize>> = HashMap::new();
    for (id, line) in program.lines.iter_with_id() {
        if let Some(reg) = line.reg {
            let key = (reg.position(), line.name.as_str());
            by_name.entry(key).or_default().push(id.position());
        }
    }
    let mut open: Vec<usize> = lines.iter().copied().collect();
    while let Some(at) = open.pop() {
        for entered in &program.lines[crate::index::Id::new(at)].inputs {
            let plain = entered.name.trim_end_matches(" of partner");
            for named in by_name
                .get(&(entered.reg.position(), plain))
                .into_iter()
                .flatten()
            {
                if lines.insert(*named) {
                    open.push(*named);
                }
            }
        }
    }
    lines
}

/// A value with its unit: `1,048.00 a month` is written `1048.00 a month`.
fn shown(value: Fraction, unit: &str, words: &[String]) -> String {
    if !words.is_empty() {
        return usize::try_from(value.floor())
            .ok()
            .and_then(|at| words.get(at))
            .cloned()
            .unwrap_or_default();
    }
    let trimmed = |places: u32| {
        let text = value.decimal(places);
        if text.contains('.') {
            text.trim_end_matches('0').trim_end_matches('.').to_owned()
        } else {
            text
        }
    };
    match unit {
        "date" => super::fact_text(
            &crate::case::FactType::Date,
            i64::try_from(value.floor()).unwrap_or(0),
        ),
        "yesno" => if value.is_zero() { "no" } else { "yes" }.to_owned(),
        "rate" => {
            let percent = value * Fraction::whole(100);
            let text = percent.decimal(4);
            format!("{}%", text.trim_end_matches('0').trim_end_matches('.'))
        }
        "hours" => format!("{} hours", trimmed(4)),
        "money" => value.decimal(2),
        _ if unit.starts_with("money") => {
            let exact_pennies = (value * Fraction::whole(100)).denominator() == 1;
            format!(
                "{} {}",
                value.decimal(if exact_pennies { 2 } else { 6 }),
                &unit[6..]
            )
        }
        _ => trimmed(6),
    }
}
