//! What nothing needs, and the days on which an amount that is needed has no value.
//!
//! Starts from items, holds and notes: a figure that only an unused figure needs is not used either.

use super::amounts::{AmountDecl, day_text};
use super::pack::Pack;
use super::tree::{Node, Target, What};
use super::types::Ty;
use crate::diag::Diagnostic;
use crate::source::Span;
use std::collections::{BTreeSet, HashMap};

#[derive(Default)]
struct Used {
    figures: BTreeSet<usize>,
    facts: BTreeSet<(usize, usize)>,
    amounts: BTreeSet<usize>,
    guarded: BTreeSet<usize>,
    tables: BTreeSet<usize>,
    conversions: BTreeSet<usize>,
    bands: BTreeSet<usize>,
    scales: BTreeSet<usize>,
    dates: BTreeSet<usize>,
    kinds: BTreeSet<usize>,
}

/// What a list holds, the positions that are used, and the declarations.
type List<'a> = (&'a str, &'a BTreeSet<usize>, Vec<(Span, &'a str)>);

pub(super) fn check(pack: &Pack, faults: &mut Vec<Diagnostic>) {
    if pack.definitions.iter().all(|d| d.item.is_none()) {
        faults.push(
            Diagnostic::general("the pack has no item")
                .expected("at least one `item`, as a statement consists of them"),
        );
        return;
    }
    let used = reached(pack);
    let mut report = |span: Option<Span>, what: &str, name: &str| {
        let fault = Diagnostic {
            span,
            ..Diagnostic::general(format!("nothing needs the {what} `{name}`"))
        };
        faults.push(
            fault
                .expected("an item, hold or note that does")
                .hint("use it, or remove it"),
        );
    };
    for (at, definition) in pack.definitions.iter().enumerate() {
        // What a fact settles to is used where the fact is.
        if definition.settles.is_none() && !used.figures.contains(&at) {
            report(Some(definition.name_span), "figure", &definition.name);
        }
    }
    for (kind, decl) in pack.kinds.iter().enumerate() {
        for (fact, f) in decl.facts.iter().enumerate() {
            // A fact of every member is used where it is used of one.
            let used_elsewhere = || {
                used.facts
                    .iter()
                    .any(|(k, i)| pack.kinds[*k].facts[*i].span == f.span)
            };
            if f.span.is_some() && !used.facts.contains(&(kind, fact)) && !used_elsewhere() {
                report(f.span, "fact", &f.name);
            }
        }
        let owns = pack.kinds.iter().any(|k| k.owner == Some(kind));
        if decl.span.is_some() && decl.facts.is_empty() && !owns && !used.kinds.contains(&kind) {
            report(decl.span, "record", &decl.name);
        }
    }
    for (at, amount) in pack.amounts.iter().enumerate() {
        if !used.amounts.contains(&at) && !used.guarded.contains(&at) {
            report(Some(amount.rows[0].span), "amount", &amount.name);
        }
    }
    let lists: [List<'_>; 4] = [
        (
            "table",
            &used.tables,
            pack.tables
                .iter()
                .map(|t| (t.span, t.name.as_str()))
                .collect(),
        ),
        (
            "conversion",
            &used.conversions,
            pack.conversions
                .iter()
                .map(|c| (c.span, c.name.as_str()))
                .collect(),
        ),
        (
            "bands",
            &used.bands,
            pack.bands
                .iter()
                .map(|b| (b.span, b.name.as_str()))
                .collect(),
        ),
        (
            "scale",
            &used.scales,
            pack.scales
                .iter()
                .map(|s| (s.span, s.name.as_str()))
                .collect(),
        ),
    ];
    for (what, used, decls) in lists {
        for (at, (span, name)) in decls.into_iter().enumerate() {
            if !used.contains(&at) {
                report(Some(span), what, name);
            }
        }
    }
    let choices = choices(pack);
    for (at, choice) in pack.choices.iter().enumerate() {
        if !choices.contains(&at) {
            report(Some(choice.span), "choice", &choice.name);
        }
    }
    for (at, (name, _)) in pack.manifest.dates.iter().enumerate().skip(1) {
        if !used.dates.contains(&at) {
            report(pack.manifest.date_spans.get(at).copied(), "date", name);
        }
    }
    for at in &used.amounts {
        dates(pack, &pack.amounts[*at], used.guarded.contains(at), faults);
    }
    for table in &pack.tables {
        super::tables::check(pack, table, faults);
    }
}

/// Choices that a fact, figure, table or scale has as its type or key.
fn choices(pack: &Pack) -> BTreeSet<usize> {
    let types = (pack.kinds.iter().flat_map(|k| &k.facts).map(|f| f.ty))
        .chain(pack.definitions.iter().map(|d| d.ty))
        .chain(pack.tables.iter().map(|t| t.gives))
        .chain(pack.scales.iter().flat_map(|s| [s.ty, s.gives]));
    let of_type = types.filter_map(|ty| match ty {
        Ty::Choice(at) => Some(at),
        Ty::Money(_) | Ty::Rate | Ty::Hours | Ty::Number | Ty::Count | Ty::Date | Ty::YesNo => None,
    });
    of_type
        .chain(
            pack.tables
                .iter()
                .flat_map(|t| t.keys.iter().flatten().copied()),
        )
        .collect()
}

/// Everything that items, holds and notes need.
fn reached(pack: &Pack) -> Used {
    let mut used = Used::default();
    let mut by_span: HashMap<Span, Vec<usize>> = HashMap::new();
    for (at, definition) in pack.definitions.iter().enumerate() {
        by_span.entry(definition.span).or_default().push(at);
    }
    let mut waiting: Vec<usize> = (0..pack.definitions.len())
        .filter(|at| pack.definitions[*at].item.is_some())
        .collect();
    for condition in pack.holds.iter().chain(&pack.notes) {
        used.kinds.insert(condition.kind);
        note(pack, &condition.when, &mut used, &mut waiting);
    }
    while let Some(at) = waiting.pop() {
        if !used.figures.insert(at) {
            continue;
        }
        let definition = &pack.definitions[at];
        used.kinds.insert(definition.kind);
        // A figure of every member is used where it is used of one.
        waiting.extend(&by_span[&definition.span]);
        for node in definition.body.iter().chain(&definition.claimed) {
            note(pack, node, &mut used, &mut waiting);
        }
    }
    used
}

fn note(pack: &Pack, node: &Node, used: &mut Used, waiting: &mut Vec<usize>) {
    let mut inner: Vec<&Node> = Vec::new();
    node.visit(&mut |node| match &node.what {
        What::Name { target, .. } | What::Partner { target, .. } => match target {
            Target::Figure(at) => waiting.push(*at),
            Target::Fact { kind, fact } => {
                used.facts.insert((*kind, *fact));
                waiting.extend(pack.kinds[*kind].facts[*fact].settles);
            }
        },
        What::AsIf {
            figure, changes, ..
        } => {
            waiting.push(*figure);
            for changed in changes {
                used.facts.insert((changed.kind, changed.fact));
                waiting.extend(pack.kinds[changed.kind].facts[changed.fact].settles);
            }
        }
        What::Amount { amount, dated } => {
            used.amounts.insert(*amount);
            used.dates.insert(*dated);
        }
        What::Missing { amount, dated } => {
            used.guarded.insert(*amount);
            used.dates.insert(*dated);
        }
        What::Dated(at) => {
            used.dates.insert(*at);
        }
        What::Lookup { table, dated, .. } => {
            used.tables.insert(*table);
            used.dates.insert(*dated);
        }
        What::Convert { conversion, .. } => {
            used.conversions.insert(*conversion);
        }
        What::Charge { bands, .. } => {
            if used.bands.insert(*bands) {
                inner.extend(pack.bands[*bands].nodes());
            }
        }
        What::PlaceOn { scale, .. } => {
            if used.scales.insert(*scale) {
                inner.extend(pack.scales[*scale].nodes());
            }
        }
        What::Sum(over) | What::Count(over) | What::Any { over, .. } => {
            used.kinds.extend(over.iter().map(|o| o.kind))
        }
        What::First { over, .. } | What::Place { over, .. } => {
            used.kinds.insert(over.kind);
        }
        What::Fixed(_)
        | What::Where { .. }
        | What::Extreme { .. }
        | What::Years { .. }
        | What::Binary { .. }
        | What::Round { .. }
        | What::DivideRounded { .. }
        | What::Compare { .. }
        | What::Not(_)
        | What::Both(..)
        | What::Either(..) => {}
    });
    for node in inner {
        note(pack, node, used, waiting);
    }
}

/// Every day that the pack covers has a row; an absent one is asked for with `missing`.
fn dates(pack: &Pack, amount: &AmountDecl, guarded: bool, faults: &mut Vec<Diagnostic>) {
    let mut next = pack.manifest.from;
    for row in &amount.rows {
        if row.to < next {
            continue;
        }
        if row.from > next {
            break;
        }
        if row.value.is_none() && !guarded {
            faults.push(
                Diagnostic::fault(
                    row.span,
                    format!("`{}` is absent from {}", amount.name, day_text(row.from)),
                )
                .expected(format!("a `hold where … missing {}`", amount.name)),
            );
        }
        next = row.to.saturating_add(1);
        if next > pack.manifest.to {
            return;
        }
    }
    if next <= pack.manifest.to {
        let place = amount
            .rows
            .iter()
            .rev()
            .find(|row| row.from <= next)
            .unwrap_or(&amount.rows[0]);
        faults.push(
            Diagnostic::fault(
                place.span,
                format!("`{}` has no value on {}", amount.name, day_text(next)),
            )
            .expected(format!(
                "a value for every day from {} to {}",
                day_text(pack.manifest.from),
                day_text(pack.manifest.to)
            )),
        );
    }
}
