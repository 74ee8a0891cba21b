//! Parts to a pack: declares every name first, then looks up and types every expression.

use super::amounts::AmountDecl;
use super::ast::{Expr, ExprKind, FactStatement, Ident, Part, StatementKind, StepLimit, TypeName};
use super::check::{Context, Names};
use super::manifest::Manifest;
use super::pack::{ADULT, CHILD, ChoiceDecl, ConversionDecl, FactDecl, FactKind, HOUSEHOLD, JOB, KindDecl, OTHER, Pack, TableDecl};
use super::tree::{BandsDecl, Condition, Definition, Limit, ScaleDecl};
use super::types::{Period, Ty};
use crate::diag::{Diagnostic, nearest};
use crate::num::Fraction;
use crate::program::ItemKind;
use crate::source::{FileId, Sources, Span};
use std::collections::{BTreeMap, BTreeSet, HashMap, HashSet};

/// The kinds that a `per` or `of` word stands for.
pub(super) fn kinds_of_word(kinds: &[KindDecl], word: &str) -> Vec<usize> {
    match word {
        "unit" => vec![HOUSEHOLD],
        "member" => vec![ADULT, CHILD, OTHER],
        _ => kinds.iter().position(|k| k.name == word).into_iter().collect(),
    }
}

struct Declarer<'a> {
    pack: Pack,
    faults: &'a mut Vec<Diagnostic>,
    spans: HashMap<String, Span>,
    /// Names whose declarations have faults: what uses them is not reported again.
    broken: HashSet<String>,
}

/// Builds the pack. Definitions with faults keep an empty body.
pub(super) fn declare(
    manifest: Manifest,
    parts: Vec<Part>,
    amounts: Vec<AmountDecl>,
    labels: BTreeMap<String, BTreeMap<String, String>>,
    table_texts: &[(String, FileId, String)],
    broken: BTreeSet<String>,
    faults: &mut Vec<Diagnostic>,
) -> Pack {
    let kind = |name: &str, owner| KindDecl { name: name.to_owned(), owner, facts: Vec::new(), span: None };
    let pack = Pack {
        manifest,
        kinds: vec![kind("household", None), kind("adult", Some(0)), kind("child", Some(0)), kind("other", Some(0)), kind("job", Some(ADULT))],
        labels,
        sources: Sources::new(),
        warnings: Vec::new(),
        parts: parts.iter().map(|p| (p.title.clone(), p.law.clone())).collect(),
        choices: Vec::new(),
        conversions: Vec::new(),
        amounts,
        tables: Vec::new(),
        bands: Vec::new(),
        scales: Vec::new(),
        definitions: Vec::new(),
        holds: Vec::new(),
        notes: Vec::new(),
    };
    let broken = parts.iter().flat_map(|p| p.broken.iter().cloned()).chain(broken).collect();
    let mut declarer = Declarer { pack, faults, spans: HashMap::new(), broken };
    declarer.built_in_facts();
    for part in &parts {
        declarer.kinds_and_choices(part);
    }
    for part in &parts {
        declarer.facts_and_tables(part, table_texts);
    }
    let mut bodies = Vec::new();
    for (at, part) in parts.iter().enumerate() {
        declarer.heads(at, part, &mut bodies);
    }
    declarer.bodies(&parts, bodies);
    declarer.pack
}

impl Declarer<'_> {
    fn built_in_facts(&mut self) {
        let fact = |name: &str, kind, range: (i128, i128), ask: &str, ty| FactDecl {
            name: name.to_owned(),
            kind,
            range: (Fraction::whole(range.0), Fraction::whole(range.1)),
            default: None,
            ask: ask.to_owned(),
            ty,
            span: None,
        };
        for member in [ADULT, CHILD, OTHER] {
            self.pack.kinds[member].facts.push(fact("birth", FactKind::Date, (-40_000, 60_000), "What is the date of birth?", Ty::Date));
        }
        let job = &mut self.pack.kinds[JOB].facts;
        job.push(fact("hours", FactKind::Hours, (0, 168), "How many hours a week are paid?", Ty::Hours));
        job.push(fact("wage", FactKind::Money(Some(Period::Hour)), (0, 2000), "What is the basic pay an hour?", Ty::Money(Some(Period::Hour))));
    }

    /// Reports a name that is already taken.
    fn fresh(&mut self, space: &str, name: &Ident) -> bool {
        let key = format!("{space}:{}", name.text);
        if self.spans.insert(key, name.span).is_some() {
            self.faults.push(Diagnostic::fault(name.span, format!("`{}` is declared twice", name.text)).expected("a name of its own"));
            return false;
        }
        true
    }

    fn kinds_and_choices(&mut self, part: &Part) {
        if part.title.is_empty() {
            self.faults.push(Diagnostic::fault(part.title_span, "this file names no instrument").expected("`part \"…\" dated by …` at its start"));
        }
        for statement in &part.statements {
            match &statement.what {
                StatementKind::Record { name, owner } if self.fresh("kind", name) => {
                    let taken = self.pack.kinds.iter().any(|k| k.name == name.text) || ["unit", "member"].contains(&name.text.as_str());
                    if taken {
                        self.faults.push(Diagnostic::fault(name.span, format!("`{}` is a kind already", name.text)).expected("a name of its own"));
                    } else if let Some(at) = self.owner(owner) {
                        self.pack.kinds.push(KindDecl { name: name.text.clone(), owner: Some(at), facts: Vec::new(), span: Some(name.span) });
                    } else {
                        self.broken.insert(name.text.clone());
                    }
                }
                StatementKind::Choice { name, words } if self.fresh("choice", name) => {
                    if Ty::WORDS.contains(&name.text.as_str()) {
                        self.faults.push(Diagnostic::fault(name.span, format!("`{}` is a type already", name.text)).expected("a name of its own"));
                    }
                    for (at, word) in words.iter().enumerate() {
                        if words[..at].iter().any(|before| before.text == word.text) {
                            self.faults.push(Diagnostic::fault(word.span, format!("`{}` stands twice", word.text)).expected("each word once"));
                        }
                    }
                    let words = words.iter().map(|w| w.text.clone()).collect();
                    self.pack.choices.push(ChoiceDecl { name: name.text.clone(), span: name.span, words });
                }
                _ => {}
            }
        }
    }

    /// The one kind that a record belongs to.
    fn owner(&mut self, word: &Ident) -> Option<usize> {
        match kinds_of_word(&self.pack.kinds, &word.text).as_slice() {
            [one] => Some(*one),
            [] => {
                self.unknown_kind(word);
                None
            }
            [..] => {
                self.faults.push(several(word, "one kind that it belongs to"));
                None
            }
        }
    }

    fn unknown_kind(&mut self, word: &Ident) {
        if self.broken.contains(&word.text) {
            return;
        }
        let mut known: Vec<&str> = self.pack.kinds.iter().map(|k| k.name.as_str()).collect();
        known.extend(["unit", "member"]);
        let mut fault = Diagnostic::fault(word.span, format!("`{}` is not a kind", word.text)).expected(format!("one of {}", known.join(", ")));
        if let Some(near) = nearest(&word.text, known) {
            fault = fault.hint(format!("did you mean `{near}`?"));
        }
        self.faults.push(fault);
    }

    fn ty(&mut self, written: &TypeName) -> Option<Ty> {
        let word = written.word.text.as_str();
        let ty = match (word, &written.period) {
            ("money", None) => Ty::Money(None),
            ("money", Some(period)) => match Period::from_word(&period.text) {
                Some(found) => Ty::Money(Some(found)),
                None => {
                    self.faults.push(
                        Diagnostic::fault(period.span, format!("`{}` is not a period", period.text)).expected(format!("one of {}", Period::WORDS.join(", "))),
                    );
                    return None;
                }
            },
            ("rate", _) => Ty::Rate,
            ("hours", _) => Ty::Hours,
            ("number", _) => Ty::Number,
            ("count", _) => Ty::Count,
            ("date", _) => Ty::Date,
            ("yesno", _) => Ty::YesNo,
            _ => match self.pack.choices.iter().position(|c| c.name == word) {
                Some(at) => Ty::Choice(at),
                None if self.broken.contains(word) => return None,
                None => {
                    let mut known: Vec<&str> = Ty::WORDS.to_vec();
                    known.extend(self.pack.choices.iter().map(|c| c.name.as_str()));
                    let mut fault = Diagnostic::fault(written.word.span, format!("`{word}` is not a type")).expected("a type or the name of a choice");
                    if let Some(near) = nearest(word, known) {
                        fault = fault.hint(format!("did you mean `{near}`?"));
                    }
                    self.faults.push(fault);
                    return None;
                }
            },
        };
        Some(ty)
    }

    fn facts_and_tables(&mut self, part: &Part, table_texts: &[(String, FileId, String)]) {
        for statement in &part.statements {
            match &statement.what {
                StatementKind::Fact(fact) => self.fact(fact),
                StatementKind::Conversion { name, from, to, times } if self.fresh("conversion", name) => {
                    let periods = [from, to].map(|word| {
                        let found = Period::from_word(&word.text);
                        if found.is_none() {
                            self.faults.push(
                                Diagnostic::fault(word.span, format!("`{}` is not a period", word.text)).expected(format!("one of {}", Period::WORDS.join(", "))),
                            );
                        }
                        found
                    });
                    if let [Some(from), Some(to)] = periods {
                        self.pack.conversions.push(ConversionDecl { name: name.text.clone(), span: name.span, from, to, times: *times });
                    } else {
                        self.broken.insert(name.text.clone());
                    }
                }
                StatementKind::Table { name, keys, gives } if self.fresh("table", name) => {
                    self.broken.insert(name.text.clone());
                    let Some(gives) = self.ty(gives) else { continue };
                    let mut found = Vec::new();
                    for key in keys {
                        match self.pack.choices.iter().position(|c| c.name == key.text) {
                            Some(at) => found.push(Some(at)),
                            None if key.text == "count" => found.push(None),
                            None if self.broken.contains(&key.text) => {}
                            None => {
                                let near = nearest(&key.text, self.pack.choices.iter().map(|c| c.name.as_str()));
                                let fault = Diagnostic::fault(key.span, format!("`{}` cannot be a key", key.text));
                                self.faults.push(with_near(fault.expected("the name of a choice, or `count`"), near));
                            }
                        }
                    }
                    match table_texts.iter().find(|(table, ..)| *table == name.text) {
                        Some((_, file, text)) if found.len() == keys.len() => {
                            let words = match gives {
                                Ty::Choice(at) => self.pack.choices[at].words.clone(),
                                _ => Vec::new(),
                            };
                            let rows = super::amounts::read_table(*file, text, keys.len(), gives, &words, self.faults);
                            self.broken.remove(&name.text);
                            let header = text.lines().next().map_or(0, str::len) as u32;
                            self.pack.tables.push(TableDecl { name: name.text.clone(), span: name.span, file: *file, header, keys: found, gives, rows });
                        }
                        Some(_) => {}
                        None => self.faults.push(
                            Diagnostic::fault(name.span, format!("the table `{}` has no file", name.text)).expected(format!("`tables/{}.csv`", name.text)),
                        ),
                    }
                }
                _ => {}
            }
        }
    }

    fn fact(&mut self, fact: &FactStatement) {
        let before = self.faults.len();
        if self.fact_of(fact, before).is_none() {
            self.broken.insert(fact.name.text.clone());
        }
    }

    fn fact_of(&mut self, fact: &FactStatement, before: usize) -> Option<()> {
        let ty = self.ty(&fact.ty)?;
        let kinds = kinds_of_word(&self.pack.kinds, &fact.of.text);
        if kinds.is_empty() {
            self.unknown_kind(&fact.of);
        }
        let (kind, widest) = match ty {
            Ty::Money(period) => (FactKind::Money(period), (Fraction::ZERO, Fraction::whole(10_000_000))),
            Ty::Rate => (FactKind::Rate, (Fraction::ZERO, Fraction::ONE)),
            Ty::Hours => (FactKind::Hours, (Fraction::ZERO, Fraction::whole(168))),
            Ty::Number => (FactKind::Number, (Fraction::ZERO, Fraction::whole(1_000_000))),
            Ty::Count => (FactKind::Count, (Fraction::ZERO, Fraction::whole(10_000))),
            Ty::Date => (FactKind::Date, (Fraction::whole(-40_000), Fraction::whole(60_000))),
            Ty::YesNo => (FactKind::YesNo, (Fraction::ZERO, Fraction::ONE)),
            Ty::Choice(at) => {
                let words = self.pack.choices[at].words.clone();
                let last = Fraction::whole(words.len() as i128 - 1);
                (FactKind::Choice(words), (Fraction::ZERO, last))
            }
        };
        let range = match fact.range {
            Some((low, high, span)) if low > high => {
                self.faults.push(
                    Diagnostic::fault(span, format!("the range goes from {} to {}", shown(low, ty), shown(high, ty))).expected("the smaller number first"),
                );
                widest
            }
            Some((_, _, span)) if !ty.is_quantity() => {
                self.faults.push(Diagnostic::fault(span, format!("a {ty} has no range")).expected("`from … to …` only for numbers"));
                widest
            }
            Some((low, high, _)) => (low, high),
            None => widest,
        };
        let default = match &fact.default {
            None => None,
            Some(expr) => match self.default_value(expr, ty) {
                Some(value) if ty.is_quantity() && (value < range.0 || value > range.1) => {
                    self.faults.push(
                        Diagnostic::fault(expr.span, format!("the default {} is outside the range", shown(value, ty)))
                            .expected(format!("a value from {} to {}", shown(range.0, ty), shown(range.1, ty))),
                    );
                    Some(value)
                }
                Some(value) => Some(value),
                None => {
                    self.faults.push(Diagnostic::fault(expr.span, "this cannot be the default").expected(self.shown(ty)));
                    None
                }
            },
        };
        let finest = kind.units();
        for (value, span) in [(Some(range.0), fact.range), (Some(range.1), fact.range), (default, None)] {
            let span = span.map(|(.., span)| span).or(fact.default.as_ref().map(|e| e.span));
            if let (Some(value), Some(span)) = (value, span)
                && (value * Fraction::whole(i128::from(finest))).denominator() != 1
            {
                self.faults.push(
                    Diagnostic::fault(span, format!("a list cannot hold {}", shown(value, ty))).expected(decimals(&kind)),
                );
                break;
            }
        }
        let name = &fact.name;
        self.clash(name, "fact");
        if self.faults.len() > before || kinds.is_empty() {
            return None;
        }
        for of in kinds {
            if self.pack.kinds[of].facts.iter().any(|f| f.name == name.text) {
                self.faults.push(
                    Diagnostic::fault(name.span, format!("`{}` is a fact of `{}` already", name.text, self.pack.kinds[of].name)).expected("a name of its own"),
                );
            } else if self.fresh(&format!("{of}"), name) {
                self.pack.kinds[of].facts.push(FactDecl {
                    name: name.text.clone(),
                    kind: kind.clone(),
                    range,
                    default,
                    ask: fact.ask.clone(),
                    ty,
                    span: Some(name.span),
                });
            }
        }
        Some(())
    }

    /// Reports a name that an amount or a date has: the two could not be told apart.
    fn clash(&mut self, name: &Ident, what: &str) {
        let taken = if self.pack.amounts.iter().any(|a| a.name == name.text) {
            "an amount"
        } else if name.text == "date" || self.pack.manifest.dates.iter().any(|(date, _)| *date == name.text) {
            "a date of the list"
        } else {
            return;
        };
        self.faults.push(Diagnostic::fault(name.span, format!("`{}` is {taken} already", name.text)).expected(format!("a name of its own for the {what}")));
    }

    fn shown(&self, ty: Ty) -> String {
        match ty {
            Ty::Choice(at) => format!("one of {}", self.pack.choices[at].words.join(", ")),
            other => format!("a value of type {other}"),
        }
    }

    fn default_value(&self, expr: &Expr, ty: Ty) -> Option<Fraction> {
        match (&expr.kind, ty) {
            (ExprKind::Number(value), t) if t.is_quantity() => Some(*value),
            (ExprKind::Percent(value), Ty::Rate) => Some(*value),
            (ExprKind::HoursLiteral(value), Ty::Hours) => Some(*value),
            (ExprKind::Money(value, _), Ty::Money(_)) => Some(*value),
            (ExprKind::Day(day), Ty::Date) => Some(Fraction::whole(i128::from(*day))),
            (ExprKind::YesNo(value), Ty::YesNo) => Some(Fraction::whole(i128::from(*value))),
            (ExprKind::Name(word), Ty::Choice(at)) => {
                self.pack.choices[at].words.iter().position(|w| *w == word.text).map(|at| Fraction::whole(at as i128))
            }
            _ => None,
        }
    }

    /// Declares figures, items, bands and scales, without their expressions. Remembers which statement each came from.
    fn heads(&mut self, at: usize, part: &Part, bodies: &mut Vec<Body>) {
        for (position, statement) in part.statements.iter().enumerate() {
            let household = Ident { text: "household".to_owned(), span: statement.span };
            let per = statement.per.as_ref().unwrap_or(&household);
            let kinds = kinds_of_word(&self.pack.kinds, &per.text);
            let place = (at, position);
            match &statement.what {
                StatementKind::Figure { name, ty, law, .. } => {
                    let Some(ty) = self.ty(ty) else {
                        self.broken.insert(name.text.clone());
                        continue;
                    };
                    let law = law.as_deref().map_or_else(String::new, |law| in_law(part, law));
                    self.definition(name, &kinds, per, ty, &law, None, place, bodies, statement.span);
                }
                StatementKind::Item { name, kind, law, .. } => {
                    let ty = if *kind == ItemKind::Passport { Ty::YesNo } else { Ty::Money(Some(self.pack.manifest.period)) };
                    let law = in_law(part, law);
                    self.definition(name, &kinds, per, ty, &law, Some(*kind), place, bodies, statement.span);
                }
                StatementKind::Bands { name, of, .. } if self.fresh("bands", name) => {
                    if let (Some(ty), Some(kind)) = (self.ty(of), self.one_kind(per, &kinds)) {
                        bodies.push(Body { place, what: BodyOf::Bands(self.pack.bands.len()) });
                        self.pack.bands.push(BandsDecl { name: name.text.clone(), span: name.span, kind, ty, bands: Vec::new() });
                    } else {
                        self.broken.insert(name.text.clone());
                    }
                }
                StatementKind::Scale { name, of, gives, .. } if self.fresh("scale", name) => {
                    if let (Some(ty), Some(gives), Some(kind)) = (self.ty(of), self.ty(gives), self.one_kind(per, &kinds)) {
                        bodies.push(Body { place, what: BodyOf::Scale(self.pack.scales.len()) });
                        self.pack.scales.push(ScaleDecl { name: name.text.clone(), span: name.span, kind, ty, gives, steps: Vec::new() });
                    } else {
                        self.broken.insert(name.text.clone());
                    }
                }
                StatementKind::Hold { .. } | StatementKind::Note { .. } => {
                    if kinds.is_empty() {
                        self.unknown_kind(per);
                    }
                    for kind in kinds {
                        bodies.push(Body { place, what: BodyOf::Condition(kind) });
                    }
                }
                _ => {}
            }
        }
    }

    /// The kind that bands or a scale are worked out per.
    fn one_kind(&mut self, per: &Ident, kinds: &[usize]) -> Option<usize> {
        match kinds {
            [one] => Some(*one),
            [] => {
                self.unknown_kind(per);
                None
            }
            [..] => {
                self.faults.push(several(per, "one kind to work bands and scales out for"));
                None
            }
        }
    }

    #[expect(clippy::too_many_arguments, reason = "one call each for figures and items")]
    fn definition(
        &mut self,
        name: &Ident,
        kinds: &[usize],
        per: &Ident,
        ty: Ty,
        law: &str,
        item: Option<ItemKind>,
        place: (usize, usize),
        bodies: &mut Vec<Body>,
        span: Span,
    ) {
        if kinds.is_empty() {
            self.unknown_kind(per);
            self.broken.insert(name.text.clone());
        }
        self.clash(name, if item.is_some() { "item" } else { "figure" });
        for kind in kinds {
            let is_fact = self.pack.kinds[*kind].facts.iter().any(|f| f.name == name.text);
            if is_fact {
                self.faults.push(Diagnostic::fault(name.span, format!("`{}` is a fact already", name.text)).expected("a name of its own"));
            } else if self.fresh(&format!("{kind}"), name) {
                bodies.push(Body { place, what: BodyOf::Definition(self.pack.definitions.len()) });
                self.pack.definitions.push(Definition {
                    name: name.text.clone(),
                    kind: *kind,
                    ty,
                    part: place.0,
                    law: law.to_owned(),
                    item,
                    span,
                    name_span: name.span,
                    body: None,
                });
            }
        }
    }

    /// Looks up and types every expression.
    fn bodies(&mut self, parts: &[Part], bodies: Vec<Body>) {
        let dated: Vec<Option<usize>> = parts.iter().map(|part| self.dated(part)).collect();
        let names = Names::new(&self.pack, std::mem::take(&mut self.broken));
        let mut done = Vec::new();
        for body in bodies {
            let (part, position) = body.place;
            let statement = &parts[part].statements[position];
            let context = |kind| Context::new(&self.pack, &names, kind, dated[part]);
            let mut faults = Vec::new();
            match (&statement.what, body.what) {
                (StatementKind::Figure { expr, .. } | StatementKind::Item { expr, .. }, BodyOf::Definition(at)) => {
                    let definition = &self.pack.definitions[at];
                    let node = context(definition.kind).wanted(expr, definition.ty, &mut faults);
                    done.push(Done::Definition(at, node));
                }
                (StatementKind::Bands { bands, name, .. }, BodyOf::Bands(at)) => {
                    let decl = &self.pack.bands[at];
                    let mut out = Vec::new();
                    for band in bands {
                        let rate = context(decl.kind).in_list().wanted(&band.rate, Ty::Rate, &mut faults);
                        let limit = match &band.up_to {
                            Some(limit) => context(decl.kind).in_list().wanted(limit, decl.ty, &mut faults).map(Some),
                            None => Some(None),
                        };
                        if let (Some(rate), Some(limit)) = (rate, limit) {
                            out.push((rate, limit));
                        }
                    }
                    ends_beyond(name, bands.iter().map(|b| (b.up_to.is_none(), b.span)), &mut faults);
                    done.push(Done::Bands(at, out));
                }
                (StatementKind::Scale { steps, name, .. }, BodyOf::Scale(at)) => {
                    let decl = &self.pack.scales[at];
                    let mut out = Vec::new();
                    for step in steps {
                        let value = context(decl.kind).in_list().wanted(&step.value, decl.gives, &mut faults);
                        let limit = match &step.limit {
                            StepLimit::UpTo(limit) => context(decl.kind).in_list().wanted(limit, decl.ty, &mut faults).map(Limit::UpTo),
                            StepLimit::Below(limit) => context(decl.kind).in_list().wanted(limit, decl.ty, &mut faults).map(Limit::Below),
                            StepLimit::Beyond => Some(Limit::Beyond),
                        };
                        if let (Some(value), Some(limit)) = (value, limit) {
                            out.push((value, limit));
                        }
                    }
                    ends_beyond(name, steps.iter().map(|s| (matches!(s.limit, StepLimit::Beyond), s.span)), &mut faults);
                    done.push(Done::Scale(at, out));
                }
                (StatementKind::Hold { when, because: text } | StatementKind::Note { when, name: Ident { text, .. } }, BodyOf::Condition(kind)) => {
                    if let Some(when) = context(kind).wanted(when, Ty::YesNo, &mut faults) {
                        let hold = matches!(statement.what, StatementKind::Hold { .. });
                        done.push(Done::Condition { hold, condition: Condition { kind, when, text: text.clone(), part } });
                    }
                }
                _ => {}
            }
            self.faults.append(&mut faults);
        }
        drop(names);
        for one in done {
            match one {
                Done::Definition(at, node) => self.pack.definitions[at].body = node,
                Done::Bands(at, bands) => self.pack.bands[at].bands = bands,
                Done::Scale(at, steps) => self.pack.scales[at].steps = steps,
                Done::Condition { hold: true, condition } => self.pack.holds.push(condition),
                Done::Condition { hold: false, condition } => self.pack.notes.push(condition),
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
            let mut fault =
                Diagnostic::fault(word.span, format!("`{}` is not a date of `pack.toml`", word.text)).expected(format!("one of {}", known.join(", ")));
            if let Some(near) = nearest(&word.text, known) {
                fault = fault.hint(format!("did you mean `{near}`?"));
            }
            self.faults.push(fault);
        }
        found
    }
}

struct Body {
    /// Part and statement.
    place: (usize, usize),
    what: BodyOf,
}

#[derive(Clone, Copy)]
enum BodyOf {
    Definition(usize),
    Bands(usize),
    Scale(usize),
    Condition(usize),
}

enum Done {
    Definition(usize, Option<super::tree::Node>),
    Bands(usize, Vec<(super::tree::Node, Option<super::tree::Node>)>),
    Scale(usize, Vec<(super::tree::Node, Limit)>),
    Condition { hold: bool, condition: Condition },
}

/// The last band or step, and only it, goes beyond every limit: otherwise there is a gap or an overlap.
fn ends_beyond(name: &Ident, lines: impl Iterator<Item = (bool, Span)>, faults: &mut Vec<Diagnostic>) {
    let lines: Vec<(bool, Span)> = lines.collect();
    if !lines.last().is_some_and(|(beyond, _)| *beyond) {
        faults.push(Diagnostic::fault(name.span, format!("`{}` has a gap above its last limit", name.text)).expected("a last line with `beyond`"));
    }
    for (beyond, span) in lines.iter().rev().skip(1) {
        if *beyond {
            faults.push(Diagnostic::fault(*span, "this line overlaps the ones after it").expected("`beyond` only in the last line"));
        }
    }
}

/// The law of a file before a reference to it.
fn in_law(part: &Part, see: &str) -> String {
    if part.law.is_empty() { see.to_owned() } else { format!("{}, {see}", part.law) }
}

fn several(word: &Ident, expected: &str) -> Diagnostic {
    Diagnostic::fault(word.span, format!("`{}` stands for several kinds", word.text)).expected(expected)
}

pub(super) fn with_near(fault: Diagnostic, near: Option<&str>) -> Diagnostic {
    match near {
        Some(near) => fault.hint(format!("did you mean `{near}`?")),
        None => fault,
    }
}

fn shown(value: Fraction, ty: Ty) -> String {
    let (value, sign) = if ty == Ty::Rate { (value * Fraction::whole(100), "%") } else { (value, "") };
    let text = value.decimal(6);
    format!("{}{sign}", text.trim_end_matches('0').trim_end_matches('.'))
}

/// How finely a list writes a fact.
fn decimals(kind: &FactKind) -> &'static str {
    match kind {
        FactKind::Money(Some(Period::Hour)) => "at most 4 decimals",
        FactKind::Money(_) | FactKind::Hours | FactKind::Number => "at most 2 decimals",
        FactKind::Rate => "a percentage with at most 2 decimals",
        FactKind::Count | FactKind::Date | FactKind::YesNo | FactKind::Choice(_) => "a whole number",
    }
}
