//! Looks up the names of expressions: figures, facts, amounts, owners, partners, tables, and the records that a sum goes over.

use super::ast::{Expr, Ident};
use super::check::{Context, Faults};
use super::declare::{kinds_of_word, with_near};
use super::facts::shown;
use super::pack::{ADULT, Pack};
use super::tree::{Changed, Node, Over, Target, What};
use super::types::Ty;
use crate::diag::{Diagnostic, nearest};
use crate::num::Fraction;
use crate::source::Span;
use std::collections::{HashMap, HashSet};

/// Every figure, item and fact by kind and name.
pub(super) struct Names {
    pub(super) by_kind: Vec<HashMap<String, (Target, Ty)>>,
    pub(super) amounts: HashMap<String, usize>,
    /// Names whose declarations have faults.
    pub(super) broken: HashSet<String>,
}

impl Names {
    pub(super) fn new(pack: &Pack, broken: HashSet<String>) -> Names {
        let mut by_kind: Vec<HashMap<String, (Target, Ty)>> =
            vec![HashMap::new(); pack.kinds.len()];
        for (kind, decl) in pack.kinds.iter().enumerate() {
            for (fact, f) in decl.facts.iter().enumerate() {
                by_kind[kind].insert(f.name.clone(), (Target::Fact { kind, fact }, f.ty));
            }
        }
        let named = pack.definitions.iter().enumerate();
        for (at, definition) in named.filter(|(_, d)| d.settles.is_none()) {
            by_kind[definition.kind]
                .insert(definition.name.clone(), (Target::Figure(at), definition.ty));
        }
        let amounts = pack
            .amounts
            .iter()
            .enumerate()
            .map(|(at, a)| (a.name.clone(), at))
            .collect();
        Names {
            by_kind,
            amounts,
            broken,
        }
    }
}

impl Context<'_> {
    /// Reports a name of something that the pack does not declare.
    pub(super) fn absent<'n, T>(
        &self,
        name: &Ident,
        what: &str,
        expected: &str,
        known: impl Iterator<Item = &'n str>,
        faults: &mut Faults,
    ) -> Option<T> {
        if !self.names.broken.contains(&name.text) {
            let fault =
                Diagnostic::fault(name.span, format!("`{}` {what}", name.text)).expected(expected);
            faults.push(with_near(fault, nearest(&name.text, known)));
        }
        None
    }

    /// The date of the instrument that picks its amounts.
    pub(super) fn picked(&self, span: Span, faults: &mut Faults) -> Option<usize> {
        if self.dated.is_none() {
            faults.push(
                Diagnostic::fault(span, "an amount is used, but no date picks it")
                    .expected("`part \"…\" dated by …` at the start of the file"),
            );
        }
        self.dated
    }

    /// Finds a name from the innermost scope outward.
    fn find(&self, name: &str) -> Option<(usize, usize, Target, Ty)> {
        for (level, start) in self.scopes.iter().enumerate().rev() {
            let mut kind = Some(*start);
            while let Some(at) = kind {
                if let Some((target, ty)) = self.names.by_kind[at].get(name) {
                    return Some((level, at, *target, *ty));
                }
                kind = self.pack.kinds[at].owner;
            }
        }
        None
    }

    pub(super) fn name(&self, name: &Ident, hint: Option<Ty>, faults: &mut Faults) -> Option<Node> {
        let span = name.span;
        if let Some((level, kind, target, ty)) = self.find(&name.text) {
            return Some(Node {
                ty,
                span,
                what: What::Name {
                    target,
                    kind,
                    level,
                    text: name.text.clone(),
                },
            });
        }
        if let Some(Ty::Choice(at)) = hint
            && let Some(word) = self.pack.choices[at]
                .words
                .iter()
                .position(|w| *w == name.text)
        {
            return Some(Node {
                ty: Ty::Choice(at),
                span,
                what: What::Fixed(Fraction::whole(word as i128)),
            });
        }
        if let Some(at) = self.names.amounts.get(&name.text) {
            let dated = self.picked(span, faults)?;
            return Some(Node {
                ty: self.pack.amounts[*at].ty,
                span,
                what: What::Amount { amount: *at, dated },
            });
        }
        if let Some(at) = self
            .pack
            .manifest
            .dates
            .iter()
            .position(|(date, _)| *date == name.text)
            .or((name.text == "date").then_some(0))
        {
            return Some(Node {
                ty: Ty::Date,
                span,
                what: What::Dated(at),
            });
        }
        self.unknown(name, hint, faults);
        None
    }

    fn unknown(&self, name: &Ident, hint: Option<Ty>, faults: &mut Faults) {
        if self.names.broken.contains(&name.text) {
            return;
        }
        let mut known: Vec<&str> = Vec::new();
        let mut reachable = vec![false; self.pack.kinds.len()];
        for start in &self.scopes {
            let mut kind = Some(*start);
            while let Some(at) = kind {
                reachable[at] = true;
                kind = self.pack.kinds[at].owner;
            }
        }
        for (kind, names) in self.names.by_kind.iter().enumerate() {
            if reachable[kind] {
                known.extend(names.keys().map(String::as_str));
            }
        }
        known.extend(self.names.amounts.keys().map(String::as_str));
        known.extend(
            self.pack
                .manifest
                .dates
                .iter()
                .map(|(name, _)| name.as_str()),
        );
        let mut expected = "a figure, fact or amount".to_owned();
        if let Some(Ty::Choice(at)) = hint {
            known.extend(self.pack.choices[at].words.iter().map(String::as_str));
            expected = format!("one of {}", self.pack.choices[at].words.join(", "));
        }
        let mut fault = Diagnostic::fault(name.span, format!("`{}` is not known here", name.text))
            .expected(expected);
        let elsewhere = self
            .names
            .by_kind
            .iter()
            .position(|names| names.contains_key(&name.text));
        if let Some(kind) = elsewhere {
            fault = fault.hint(format!(
                "it belongs to `{}`; say it under `per {0}`, or sum over it",
                self.pack.kinds[kind].name
            ));
        } else {
            fault = with_near(fault, nearest(&name.text, known));
        }
        faults.push(fault);
    }

    pub(super) fn of(
        &mut self,
        name: &Ident,
        whose: &Ident,
        failing: Option<&Expr>,
        span: Span,
        faults: &mut Faults,
    ) -> Option<Node> {
        let kind = if whose.text == "partner" {
            ADULT
        } else {
            match kinds_of_word(&self.pack.kinds, &whose.text).as_slice() {
                [one] => *one,
                [] => {
                    let known = self
                        .pack
                        .kinds
                        .iter()
                        .map(|k| k.name.as_str())
                        .chain(["partner"]);
                    return self.absent(
                        whose,
                        "is not a kind",
                        "`partner`, or the kind of an owner",
                        known,
                        faults,
                    );
                }
                [..] => {
                    faults.push(
                        Diagnostic::fault(
                            whose.span,
                            format!("`{}` stands for several kinds", whose.text),
                        )
                        .expected("`partner`, or the kind of an owner"),
                    );
                    return None;
                }
            }
        };
        let level = self
            .scopes
            .iter()
            .enumerate()
            .rev()
            .find(|(_, start)| self.climbs(**start, kind))
            .map(|(level, _)| level);
        let Some(level) = level else {
            faults.push(
                Diagnostic::fault(whose.span, format!("there is no `{}` here", whose.text))
                    .expected(format!(
                        "a place under `per {}`",
                        self.pack.kinds[kind].name
                    )),
            );
            return None;
        };
        let Some((target, ty)) = self.names.by_kind[kind].get(&name.text).copied() else {
            if self.names.broken.contains(&name.text) {
                return None;
            }
            let near = nearest(
                &name.text,
                self.names.by_kind[kind].keys().map(String::as_str),
            );
            let fault = Diagnostic::fault(
                name.span,
                format!(
                    "`{}` is not known of `{}`",
                    name.text, self.pack.kinds[kind].name
                ),
            );
            faults.push(with_near(
                fault.expected("one of its figures or facts"),
                near,
            ));
            return None;
        };
        if whose.text != "partner" {
            if let Some(failing) = failing {
                faults.push(
                    Diagnostic::fault(
                        failing.span,
                        format!("`failing` stands after `of {}`", whose.text),
                    )
                    .expected("`failing` only after `of partner`, as an owner is always there"),
                );
                return None;
            }
            return Some(Node {
                ty,
                span,
                what: What::Name {
                    target,
                    kind,
                    level,
                    text: name.text.clone(),
                },
            });
        }
        let failing = match failing {
            Some(expr) => {
                let node = self.node(expr, Some(ty), faults)?;
                Some(Box::new(self.fit(node, ty, faults)?))
            }
            None => {
                faults.push(
                    Diagnostic::fault(span, "nothing stands in where there is no partner")
                        .expected(format!("`{} of partner failing …`", name.text)),
                );
                return None;
            }
        };
        Some(Node {
            ty,
            span,
            what: What::Partner {
                target,
                level,
                failing,
                text: name.text.clone(),
            },
        })
    }

    /// Whether `kind` is `start` or one of its owners.
    fn climbs(&self, start: usize, kind: usize) -> bool {
        let mut at = Some(start);
        while let Some(here) = at {
            if here == kind {
                return true;
            }
            at = self.pack.kinds[here].owner;
        }
        false
    }

    /// Bands and scales must be said where their own kind can be reached.
    pub(super) fn reaches(&self, kind: usize, name: &Ident, faults: &mut Faults) -> Option<()> {
        if self
            .scopes
            .last()
            .is_some_and(|here| self.climbs(*here, kind))
        {
            return Some(());
        }
        faults.push(
            Diagnostic::fault(
                name.span,
                format!(
                    "`{}` is declared per {}",
                    name.text, self.pack.kinds[kind].name
                ),
            )
            .expected(format!(
                "a place under `per {}`",
                self.pack.kinds[kind].name
            )),
        );
        None
    }

    /// The place of `yes` or `no` among the words of a choice that is wanted here.
    pub(super) fn yes_no_word(&self, value: bool, hint: Option<Ty>) -> Option<usize> {
        let Some(Ty::Choice(at)) = hint else {
            return None;
        };
        self.pack.choices[at]
            .words
            .iter()
            .position(|w| w == if value { "yes" } else { "no" })
    }

    /// A figure once more under changed facts.
    pub(super) fn as_if(
        &mut self,
        name: &Ident,
        changes: &[(Ident, Expr)],
        span: Span,
        faults: &mut Faults,
    ) -> Option<Node> {
        let mut changed = Vec::new();
        let mut whole = true;
        for (fact, value) in changes {
            match self.find(&fact.text) {
                Some((level, _, Target::Fact { kind, fact: at }, _)) => {
                    match self.stands_for((kind, at), value, faults) {
                        Some(value) => changed.push(Changed {
                            kind,
                            fact: at,
                            level,
                            value,
                        }),
                        None => whole = false,
                    }
                }
                Some((_, _, Target::Figure(_), _)) => {
                    faults.push(
                        Diagnostic::fault(fact.span, format!("`{}` is a figure", fact.text))
                            .expected("a fact to change"),
                    );
                    whole = false;
                }
                None => {
                    self.unknown(fact, None, faults);
                    whole = false;
                }
            }
        }
        match self.find(&name.text) {
            Some((level, kind, Target::Figure(figure), ty)) if whole => Some(Node {
                ty,
                span,
                what: What::AsIf {
                    figure,
                    kind,
                    level,
                    changes: changed,
                    text: name.text.clone(),
                },
            }),
            Some((_, _, Target::Figure(_), _)) => None,
            Some((_, _, Target::Fact { .. }, _)) => {
                faults.push(
                    Diagnostic::fault(name.span, format!("`{}` is a fact", name.text))
                        .expected("a figure or item to work out once more"),
                );
                None
            }
            None => {
                self.unknown(name, None, faults);
                None
            }
        }
    }

    /// A value that stands for a fact: of its type and in its range.
    pub(super) fn stands_for(
        &mut self,
        (kind, at): (usize, usize),
        value: &Expr,
        faults: &mut Faults,
    ) -> Option<Node> {
        let fact = &self.pack.kinds[kind].facts[at];
        let node = self.wanted(value, fact.ty, faults)?;
        if self.in_range(kind, at, &node) {
            return Some(node);
        }
        let (low, high) = fact.range;
        faults.push(
            Diagnostic::fault(
                node.span,
                format!("this may lie outside the range of `{}`", fact.name),
            )
            .expected(format!(
                "a value from {} to {}",
                shown(low, fact.ty),
                shown(high, fact.ty)
            )),
        );
        None
    }

    /// Whether a value may stand for a fact: a fixed number lies in its range, and what stands for something above nothing is above nothing.
    fn in_range(&self, kind: usize, fact: usize, value: &Node) -> bool {
        let (low, high) = self.pack.kinds[kind].facts[fact].range;
        match &value.what {
            _ if !value.ty.is_quantity() => true,
            What::Fixed(number) => low <= *number && *number <= high,
            // An amount above nothing is one on every date: that is seen when it divides.
            What::Amount { .. } => true,
            _ => low <= Fraction::ZERO || self.above_zero(value),
        }
    }

    pub(super) fn lookup(
        &mut self,
        table: &Ident,
        keys: &[Expr],
        span: Span,
        faults: &mut Faults,
    ) -> Option<Node> {
        let Some(at) = self.pack.tables.iter().position(|t| t.name == table.text) else {
            let known = self.pack.tables.iter().map(|t| t.name.as_str());
            return self.absent(
                table,
                "is not a table",
                "the name of a `table`",
                known,
                faults,
            );
        };
        let dated = self.picked(span, faults)?;
        let decl = &self.pack.tables[at];
        if decl.keys.len() != keys.len() {
            faults.push(
                Diagnostic::fault(
                    span,
                    format!("`{}` is looked up by {}", table.text, count_of(keys.len())),
                )
                .expected(count_of(decl.keys.len())),
            );
            return None;
        }
        let wanted: Vec<Ty> = decl
            .keys
            .iter()
            .map(|k| k.map_or(Ty::Count, Ty::Choice))
            .collect();
        let gives = decl.gives;
        let nodes: Vec<Option<Node>> = keys
            .iter()
            .zip(wanted)
            .map(|(e, ty)| self.wanted(e, ty, faults))
            .collect();
        Some(Node {
            ty: gives,
            span,
            what: What::Lookup {
                table: at,
                dated,
                keys: nodes.into_iter().collect::<Option<_>>()?,
            },
        })
    }

    /// The kinds that a sum goes over, each with its own reading of condition and body.
    pub(super) fn over(
        &mut self,
        kind: &Ident,
        with: Option<&Expr>,
        body: Option<(&Expr, Option<Ty>)>,
        by: Option<&Ident>,
        faults: &mut Faults,
    ) -> Option<Vec<Over>> {
        if self.scopes.len() > MOST_LOOPS {
            faults.push(
                Diagnostic::fault(kind.span, "this goes over records inside records")
                    .expected(format!("at most {MOST_LOOPS} inside each other"))
                    .hint("give the inner part a `figure` of its own"),
            );
            return None;
        }
        let kinds = kinds_of_word(&self.pack.kinds, &kind.text);
        if kinds.is_empty() {
            let known = self.pack.kinds.iter().map(|k| k.name.as_str());
            return self.absent(
                kind,
                "is not a kind",
                "a kind such as `child` or `job`",
                known,
                faults,
            );
        }
        let mut out = Vec::new();
        let mut whole = true;
        for kind in kinds {
            self.scopes.push(kind);
            let condition = with.map(|e| self.wanted(e, Ty::YesNo, faults));
            let inner = body.map(|(e, hint)| self.node(e, hint, faults));
            let key = by.map(|name| self.name(name, None, faults));
            self.scopes.pop();
            whole &= condition.as_ref().is_none_or(Option::is_some)
                && inner.as_ref().is_none_or(Option::is_some)
                && key.as_ref().is_none_or(Option::is_some);
            out.push(Over {
                kind,
                with: condition.flatten(),
                body: inner.flatten(),
                by: key.flatten(),
            });
        }
        whole.then_some(out)
    }

    pub(super) fn one_kind(
        &self,
        kind: &Ident,
        over: &mut Vec<Over>,
        faults: &mut Faults,
    ) -> Option<Over> {
        if over.len() == 1 {
            return over.pop();
        }
        faults.push(
            Diagnostic::fault(
                kind.span,
                format!("`{}` stands for several kinds", kind.text),
            )
            .expected("one kind to put in order"),
        );
        None
    }
}

/// How many records inside records one expression goes over.
const MOST_LOOPS: usize = 3;

fn count_of(keys: usize) -> String {
    if keys == 1 {
        "1 key".to_owned()
    } else {
        format!("{keys} keys")
    }
}
