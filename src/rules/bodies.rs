//! Looks up and types every expression of a pack, once every name is declared.

use super::ast::{Ident, Part, StatementKind, StepLimit};
use super::check::Context;
use super::declare::Declarer;
use super::names::Names;
use super::tree::{Condition, Limit};
use super::types::Ty;
use crate::diag::{Diagnostic, nearest};
use crate::source::Span;

pub(super) struct Body {
    /// Part and statement.
    pub(super) place: (usize, usize),
    pub(super) what: BodyOf,
}

#[derive(Clone, Copy)]
pub(super) enum BodyOf {
    Definition(usize),
    Bands(usize),
    Scale(usize),
    Condition(usize),
}

enum Done {
    Definition(usize, Option<super::tree::Node>, Option<super::tree::Node>),
    Bands(usize, Vec<(super::tree::Node, Option<super::tree::Node>)>),
    Scale(usize, Vec<(super::tree::Node, Limit)>),
    Condition { hold: bool, condition: Condition },
}

/// The last band or step, and only it, goes beyond every limit: otherwise there is a gap or an overlap.
fn ends_beyond(
    name: &Ident,
    lines: impl Iterator<Item = (bool, Span)>,
    faults: &mut Vec<Diagnostic>,
) {
    let lines: Vec<(bool, Span)> = lines.collect();
    if !lines.last().is_some_and(|(beyond, _)| *beyond) {
        faults.push(
            Diagnostic::fault(
                name.span,
                format!("`{}` has a gap above its last limit", name.text),
            )
            .expected("a last line with `beyond`"),
        );
    }
    for (beyond, span) in lines.iter().rev().skip(1) {
        if *beyond {
            faults.push(
                Diagnostic::fault(*span, "this line overlaps the ones after it")
                    .expected("`beyond` only in the last line"),
            );
        }
    }
}

impl Declarer<'_> {
    /// Looks up and types every expression.
    pub(super) fn bodies(&mut self, parts: &[Part], bodies: Vec<Body>) {
        let dated: Vec<Option<usize>> = parts.iter().map(|part| self.dated(part)).collect();
        let names = Names::new(&self.pack, std::mem::take(&mut self.broken));
        let mut done = Vec::new();
        for body in bodies {
            let (part, position) = body.place;
            let statement = &parts[part].statements[position];
            let context = |kind| Context::new(&self.pack, &names, kind, dated[part]);
            let mut faults = Vec::new();
            match (&statement.what, body.what) {
                (
                    StatementKind::Figure { expr, .. } | StatementKind::Item { expr, .. },
                    BodyOf::Definition(at),
                ) => {
                    let definition = &self.pack.definitions[at];
                    let node = context(definition.kind).wanted(expr, definition.ty, &mut faults);
                    let claimed = match &statement.what {
                        StatementKind::Item {
                            claimed: Some(claimed),
                            ..
                        } => context(definition.kind).wanted(claimed, Ty::YesNo, &mut faults),
                        _ => None,
                    };
                    done.push(Done::Definition(at, node, claimed));
                }
                (StatementKind::Fact(fact), BodyOf::Definition(at)) => {
                    let definition = &self.pack.definitions[at];
                    let (kind, of) = (definition.kind, definition.settles);
                    let node = fact.settles.as_ref().zip(of).and_then(|(value, of)| {
                        context(kind).stands_for((kind, of), value, &mut faults)
                    });
                    done.push(Done::Definition(at, node, None));
                }
                (StatementKind::Bands { bands, name, .. }, BodyOf::Bands(at)) => {
                    let decl = &self.pack.bands[at];
                    let mut out = Vec::new();
                    for band in bands {
                        let rate =
                            context(decl.kind)
                                .in_list()
                                .wanted(&band.rate, Ty::Rate, &mut faults);
                        let limit = match &band.up_to {
                            Some(limit) => context(decl.kind)
                                .in_list()
                                .wanted(limit, decl.ty, &mut faults)
                                .map(Some),
                            None => Some(None),
                        };
                        if let (Some(rate), Some(limit)) = (rate, limit) {
                            out.push((rate, limit));
                        }
                    }
                    ends_beyond(
                        name,
                        bands.iter().map(|b| (b.up_to.is_none(), b.span)),
                        &mut faults,
                    );
                    done.push(Done::Bands(at, out));
                }
                (StatementKind::Scale { steps, name, .. }, BodyOf::Scale(at)) => {
                    let decl = &self.pack.scales[at];
                    let mut out = Vec::new();
                    for step in steps {
                        let value = context(decl.kind).in_list().wanted(
                            &step.value,
                            decl.gives,
                            &mut faults,
                        );
                        let limit = match &step.limit {
                            StepLimit::UpTo(limit) => context(decl.kind)
                                .in_list()
                                .wanted(limit, decl.ty, &mut faults)
                                .map(Limit::UpTo),
                            StepLimit::Below(limit) => context(decl.kind)
                                .in_list()
                                .wanted(limit, decl.ty, &mut faults)
                                .map(Limit::Below),
                            StepLimit::Beyond => Some(Limit::Beyond),
                        };
                        if let (Some(value), Some(limit)) = (value, limit) {
                            out.push((value, limit));
                        }
                    }
                    ends_beyond(
                        name,
                        steps
                            .iter()
                            .map(|s| (matches!(s.limit, StepLimit::Beyond), s.span)),
                        &mut faults,
                    );
                    done.push(Done::Scale(at, out));
                }
                (
                    StatementKind::Hold {
                        when,
                        because: text,
                    }
                    | StatementKind::Note {
                        when,
                        name: Ident { text, .. },
                    },
                    BodyOf::Condition(kind),
                ) => {
                    if let Some(when) = context(kind).wanted(when, Ty::YesNo, &mut faults) {
                        let hold = matches!(statement.what, StatementKind::Hold { .. });
                        done.push(Done::Condition {
                            hold,
                            condition: Condition {
                                kind,
                                when,
                                text: text.clone(),
                                part,
                            },
                        });
                    }
                }
                _ => {}
            }
            self.faults.append(&mut faults);
        }
        drop(names);
        for one in done {
            match one {
                Done::Definition(at, node, claimed) => {
                    self.pack.definitions[at].body = node;
                    self.pack.definitions[at].claimed = claimed;
                }
                Done::Bands(at, bands) => self.pack.bands[at].bands = bands,
                Done::Scale(at, steps) => self.pack.scales[at].steps = steps,
                Done::Condition {
                    hold: true,
                    condition,
                } => self.pack.holds.push(condition),
                Done::Condition {
                    hold: false,
                    condition,
                } => self.pack.notes.push(condition),
            }
        }
    }

    /// The date of `pack.toml` that picks a part's amounts.
    fn dated(&mut self, part: &Part) -> Option<usize> {
        let word = part.dated.as_ref()?;
        let dates = &self.pack.manifest.dates;
        let found = dates.iter().position(|(name, _)| *name == word.text);
        if found.is_none() {
            let known: Vec<&str> = dates.iter().map(|(name, _)| name.as_str()).collect();
            let mut fault = Diagnostic::fault(
                word.span,
                format!("`{}` is not a date of `pack.toml`", word.text),
            )
            .expected(format!("one of {}", known.join(", ")));
            if let Some(near) = nearest(&word.text, known) {
                fault = fault.hint(format!("did you mean `{near}`?"));
            }
            self.faults.push(fault);
        }
        found
    }
}
