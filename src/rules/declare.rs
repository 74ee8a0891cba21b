//! Parts to a pack: declares every name. Facts are in `facts`; `bodies` then looks up and types every expression.

use super::amounts::AmountDecl;
use super::ast::{FactStatement, Ident, Part, StatementKind, TypeName};
use super::bodies::{Body, BodyOf};
use super::local_text::LocalText;
use super::manifest::Manifest;
use super::pack::{
    ADULT, CHILD, ChoiceDecl, ConversionDecl, Filled, HOUSEHOLD, KindDecl, OTHER, Pack, TableDecl,
};
use super::tree::{BandsDecl, Definition, ScaleDecl};
use super::types::{Period, Ty};
use crate::diag::{Diagnostic, nearest};
use crate::program::ItemKind;
use crate::source::{FileId, Sources, Span};
use std::collections::{BTreeMap, BTreeSet, HashMap, HashSet};

/// The kinds that a `per` or `of` word stands for.
pub(super) fn kinds_of_word(kinds: &[KindDecl], word: &str) -> Vec<usize> {
    match word {
        "unit" => vec![HOUSEHOLD],
        "member" => vec![ADULT, CHILD, OTHER],
        _ => kinds
            .iter()
            .position(|k| k.name == word)
            .into_iter()
            .collect(),
    }
}

pub(super) struct Declarer<'a> {
    pub(super) pack: Pack,
    pub(super) faults: &'a mut Vec<Diagnostic>,
    spans: HashMap<String, Span>,
    /// Names whose declarations have faults: what uses them is not reported again.
    pub(super) broken: HashSet<String>,
}

/// Where the rows of tables come from.
pub(super) struct Rows {
    /// `tables/NAME.csv`, by name.
    pub tables: Vec<(String, FileId, String)>,
    /// Local files.
    pub locals: Vec<LocalText>,
}

/// Builds the pack. Definitions with faults keep an empty body.
pub(super) fn declare(
    manifest: Manifest,
    parts: Vec<Part>,
    amounts: Vec<AmountDecl>,
    labels: BTreeMap<String, BTreeMap<String, String>>,
    rows: Rows,
    broken: BTreeSet<String>,
    faults: &mut Vec<Diagnostic>,
) -> Pack {
    let Rows { tables, locals } = rows;
    let kind = |name: &str, owner| KindDecl {
        name: name.to_owned(),
        owner,
        facts: Vec::new(),
        span: None,
    };
    let pack = Pack {
        manifest,
        kinds: vec![
            kind("household", None),
            kind("adult", Some(0)),
            kind("child", Some(0)),
            kind("other", Some(0)),
            kind("job", Some(ADULT)),
        ],
        labels,
        gaps: vec![],
        sources: Sources::new(),
        warnings: Vec::new(),
        parts: parts
            .iter()
            .map(|p| (p.title.clone(), p.law.clone()))
            .collect(),
        choices: Vec::new(),
        conversions: Vec::new(),
        amounts,
        tables: Vec::new(),
        bands: Vec::new(),
        scales: Vec::new(),
        definitions: Vec::new(),
        holds: Vec::new(),
        notes: Vec::new(),
        locals: Vec::new(),
        open_dates: BTreeSet::new(),
    };
    let broken = parts
        .iter()
        .flat_map(|p| p.broken.iter().cloned())
        .chain(broken)
        .collect();
    let mut declarer = Declarer {
        pack,
        faults,
        spans: HashMap::new(),
        broken,
    };
    declarer.built_in_facts();
    for part in &parts {
        declarer.kinds_and_choices(part);
    }
    let locals = super::local::add_words(&mut declarer, locals);
    for part in &parts {
        declarer.facts_and_tables(part, &tables);
    }
    super::local::add_rows(&mut declarer, &locals);
    let mut bodies = Vec::new();
    for (at, part) in parts.iter().enumerate() {
        declarer.heads(at, part, &mut bodies);
    }
    declarer.bodies(&parts, bodies);
    super::local::finish(&mut declarer, locals);
    declarer.pack
}

impl Declarer<'_> {
    /// Reports a name that is already taken.
    pub(super) fn fresh(&mut self, space: &str, name: &Ident) -> bool {
        let key = format!("{space}:{}", name.text);
        if self.spans.insert(key, name.span).is_some() {
            self.faults.push(
                Diagnostic::fault(name.span, format!("`{}` is declared twice", name.text))
                    .expected("a name of its own"),
            );
            return false;
        }
        true
    }

    fn kinds_and_choices(&mut self, part: &Part) {
        if part.title.is_empty() {
            self.faults.push(
                Diagnostic::fault(part.title_span, "this file names no instrument")
                    .expected("`part \"…\" dated by …` at its start"),
            );
        }
        for statement in &part.statements {
            match &statement.what {
                StatementKind::Record { name, owner } if self.fresh("kind", name) => {
                    let taken = self.pack.kinds.iter().any(|k| k.name == name.text)
                        || ["unit", "member"].contains(&name.text.as_str());
                    if taken {
                        self.faults.push(
                            Diagnostic::fault(
                                name.span,
                                format!("`{}` is a kind already", name.text),
                            )
                            .expected("a name of its own"),
                        );
                    } else if let Some(at) = self.owner(owner) {
                        self.pack.kinds.push(KindDecl {
                            name: name.text.clone(),
                            owner: Some(at),
                            facts: Vec::new(),
                            span: Some(name.span),
                        });
                    } else {
                        self.broken.insert(name.text.clone());
                    }
                }
                StatementKind::Choice { name, words } if self.fresh("choice", name) => {
                    if Ty::WORDS.contains(&name.text.as_str()) {
                        self.faults.push(
                            Diagnostic::fault(
                                name.span,
                                format!("`{}` is a type already", name.text),
                            )
                            .expected("a name of its own"),
                        );
                    }
                    for (at, word) in words.iter().enumerate() {
                        if words[..at].iter().any(|before| before.text == word.text) {
                            self.faults.push(
                                Diagnostic::fault(
                                    word.span,
                                    format!("`{}` stands twice", word.text),
                                )
                                .expected("each word once"),
                            );
                        }
                    }
                    let words: Vec<String> = words.iter().map(|w| w.text.clone()).collect();
                    self.pack.choices.push(ChoiceDecl {
                        name: name.text.clone(),
                        span: name.span,
                        own: words.len(),
                        words,
                    });
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
                self.faults
                    .push(several(word, "one kind that it belongs to"));
                None
            }
        }
    }

    pub(super) fn unknown_kind(&mut self, word: &Ident) {
        if self.broken.contains(&word.text) {
            return;
        }
        let mut known: Vec<&str> = self.pack.kinds.iter().map(|k| k.name.as_str()).collect();
        known.extend(["unit", "member"]);
        let mut fault = Diagnostic::fault(word.span, format!("`{}` is not a kind", word.text))
            .expected(format!("one of {}", known.join(", ")));
        if let Some(near) = nearest(&word.text, known) {
            fault = fault.hint(format!("did you mean `{near}`?"));
        }
        self.faults.push(fault);
    }

    pub(super) fn ty(&mut self, written: &TypeName) -> Option<Ty> {
        let word = written.word.text.as_str();
        let ty = match (word, &written.period) {
            ("money", None) => Ty::Money(None),
            ("money", Some(period)) => match Period::from_word(&period.text) {
                Some(found) => Ty::Money(Some(found)),
                None => {
                    self.faults.push(
                        Diagnostic::fault(
                            period.span,
                            format!("`{}` is not a period", period.text),
                        )
                        .expected(format!("one of {}", Period::WORDS.join(", "))),
                    );
                    return None;
                }
            },
            (_, Some(period))
                if Ty::WORDS.contains(&word)
                    || self.pack.choices.iter().any(|c| c.name == word) =>
            {
                self.faults.push(
                    Diagnostic::fault(period.span, format!("`{word}` has no period"))
                        .expected("a period only after `money a`"),
                );
                return None;
            }
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
                    let mut fault =
                        Diagnostic::fault(written.word.span, format!("`{word}` is not a type"))
                            .expected("a type or the name of a choice");
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
                StatementKind::Conversion {
                    name,
                    from,
                    to,
                    times,
                } if self.fresh("conversion", name) => {
                    let periods = [from, to].map(|word| {
                        let found = Period::from_word(&word.text);
                        if found.is_none() {
                            self.faults.push(
                                Diagnostic::fault(
                                    word.span,
                                    format!("`{}` is not a period", word.text),
                                )
                                .expected(format!("one of {}", Period::WORDS.join(", "))),
                            );
                        }
                        found
                    });
                    if let [Some(from), Some(to)] = periods {
                        self.pack.conversions.push(ConversionDecl {
                            name: name.text.clone(),
                            span: name.span,
                            from,
                            to,
                            times: *times,
                        });
                    } else {
                        self.broken.insert(name.text.clone());
                    }
                }
                StatementKind::Table { name, keys, gives } if self.fresh("table", name) => {
                    self.broken.insert(name.text.clone());
                    let Some(gives) = self.ty(gives) else {
                        continue;
                    };
                    let mut found = Vec::new();
                    for key in keys {
                        match self.pack.choices.iter().position(|c| c.name == key.text) {
                            Some(at) => found.push(Some(at)),
                            None if key.text == "count" => found.push(None),
                            None if self.broken.contains(&key.text) => {}
                            None => {
                                let near = nearest(
                                    &key.text,
                                    self.pack.choices.iter().map(|c| c.name.as_str()),
                                );
                                let fault = Diagnostic::fault(
                                    key.span,
                                    format!("`{}` cannot be a key", key.text),
                                );
                                self.faults.push(with_near(
                                    fault.expected("the name of a choice, or `count`"),
                                    near,
                                ));
                            }
                        }
                    }
                    let filled = super::local::filled(&self.pack.manifest, &name.text);
                    let text = table_texts.iter().find(|(table, ..)| *table == name.text);
                    match text {
                        Some((_, file, _)) if filled == Filled::Local => {
                            let whole = Span {
                                file: *file,
                                start: 0,
                                end: 0,
                            };
                            self.faults.push(
                                Diagnostic::fault(whole, format!("local files alone fill `{}`", name.text))
                                    .expected("no file of the pack for it, or its name under `adds_to` in `pack.toml`"),
                            );
                        }
                        None if filled == Filled::Local => {
                            if found.len() == keys.len() {
                                self.broken.remove(&name.text);
                                self.pack.tables.push(TableDecl {
                                    name: name.text.clone(),
                                    span: name.span,
                                    file: name.span.file,
                                    header: 0,
                                    keys: found,
                                    gives,
                                    rows: Vec::new(),
                                    filled,
                                });
                            }
                        }
                        Some((_, file, text)) if found.len() == keys.len() => {
                            let words = match gives {
                                Ty::Choice(at) => self.pack.choices[at].words.clone(),
                                _ => Vec::new(),
                            };
                            let rows = super::amounts::read_table(
                                *file,
                                text,
                                keys.len(),
                                gives,
                                &words,
                                self.faults,
                            );
                            self.broken.remove(&name.text);
                            let header = text.lines().next().map_or(0, str::len) as u32;
                            self.pack.tables.push(TableDecl {
                                name: name.text.clone(),
                                span: name.span,
                                file: *file,
                                header,
                                keys: found,
                                gives,
                                rows,
                                filled,
                            });
                        }
                        Some(_) => {}
                        None => self.faults.push(
                            Diagnostic::fault(
                                name.span,
                                format!("the table `{}` has no file", name.text),
                            )
                            .expected(format!("`tables/{}.csv`", name.text)),
                        ),
                    }
                }
                _ => {}
            }
        }
    }

    /// Reports a name that an amount or a date has: the two could not be told apart.
    pub(super) fn clash(&mut self, name: &Ident, what: &str) {
        let taken = if self.pack.amounts.iter().any(|a| a.name == name.text) {
            "an amount"
        } else if name.text == "date"
            || self
                .pack
                .manifest
                .dates
                .iter()
                .any(|(date, _)| *date == name.text)
        {
            "a date of the list"
        } else {
            return;
        };
        self.faults.push(
            Diagnostic::fault(name.span, format!("`{}` is {taken} already", name.text))
                .expected(format!("a name of its own for the {what}")),
        );
    }

    /// Declares figures, items, bands and scales, without their expressions. Remembers which statement each came from.
    fn heads(&mut self, at: usize, part: &Part, bodies: &mut Vec<Body>) {
        for (position, statement) in part.statements.iter().enumerate() {
            let household = Ident {
                text: "household".to_owned(),
                span: statement.span,
            };
            let per = statement.per.as_ref().unwrap_or(&household);
            let kinds = kinds_of_word(&self.pack.kinds, &per.text);
            let place = (at, position);
            match &statement.what {
                StatementKind::Figure { name, ty, law, .. } => {
                    let Some(ty) = self.ty(ty) else {
                        self.broken.insert(name.text.clone());
                        continue;
                    };
                    let law = law
                        .as_deref()
                        .map_or_else(String::new, |law| in_law(part, law));
                    self.definition(
                        name,
                        &kinds,
                        per,
                        ty,
                        &law,
                        None,
                        place,
                        bodies,
                        statement.span,
                    );
                }
                StatementKind::Item {
                    name, kind, law, ..
                } => {
                    let ty = if *kind == ItemKind::Passport {
                        Ty::YesNo
                    } else {
                        Ty::Money(Some(self.pack.manifest.period))
                    };
                    let law = in_law(part, law);
                    self.definition(
                        name,
                        &kinds,
                        per,
                        ty,
                        &law,
                        Some(*kind),
                        place,
                        bodies,
                        statement.span,
                    );
                }
                StatementKind::Bands { name, of, .. } if self.fresh("bands", name) => {
                    if let (Some(ty), Some(kind)) = (self.ty(of), self.one_kind(per, &kinds)) {
                        bodies.push(Body {
                            place,
                            what: BodyOf::Bands(self.pack.bands.len()),
                        });
                        self.pack.bands.push(BandsDecl {
                            name: name.text.clone(),
                            span: name.span,
                            kind,
                            ty,
                            bands: Vec::new(),
                        });
                    } else {
                        self.broken.insert(name.text.clone());
                    }
                }
                StatementKind::Scale {
                    name, of, gives, ..
                } if self.fresh("scale", name) => {
                    if let (Some(ty), Some(gives), Some(kind)) =
                        (self.ty(of), self.ty(gives), self.one_kind(per, &kinds))
                    {
                        bodies.push(Body {
                            place,
                            what: BodyOf::Scale(self.pack.scales.len()),
                        });
                        self.pack.scales.push(ScaleDecl {
                            name: name.text.clone(),
                            span: name.span,
                            kind,
                            ty,
                            gives,
                            steps: Vec::new(),
                        });
                    } else {
                        self.broken.insert(name.text.clone());
                    }
                }
                StatementKind::Fact(fact) if fact.settles.is_some() => {
                    self.settled(fact, place, bodies, statement.span);
                }
                StatementKind::Hold { .. } | StatementKind::Note { .. } => {
                    if kinds.is_empty() {
                        self.unknown_kind(per);
                    }
                    for kind in kinds {
                        bodies.push(Body {
                            place,
                            what: BodyOf::Condition(kind),
                        });
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
                self.faults
                    .push(several(per, "one kind to work bands and scales out for"));
                None
            }
        }
    }

    #[expect(
        clippy::too_many_arguments,
        reason = "one call each for figures and items"
    )]
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
            let is_fact = self.pack.kinds[*kind]
                .facts
                .iter()
                .any(|f| f.name == name.text);
            if is_fact {
                self.faults.push(
                    Diagnostic::fault(name.span, format!("`{}` is a fact already", name.text))
                        .expected("a name of its own"),
                );
            } else if self.fresh(&format!("{kind}"), name) {
                bodies.push(Body {
                    place,
                    what: BodyOf::Definition(self.pack.definitions.len()),
                });
                self.pack.definitions.push(Definition {
                    name: name.text.clone(),
                    kind: *kind,
                    ty,
                    part: place.0,
                    law: law.to_owned(),
                    item,
                    span,
                    name_span: name.span,
                    claimed: None,
                    settles: None,
                    body: None,
                });
            }
        }
    }

    /// What a fact means once settled is a definition of its own, which only programs of that moment work out.
    fn settled(
        &mut self,
        fact: &FactStatement,
        place: (usize, usize),
        bodies: &mut Vec<Body>,
        span: Span,
    ) {
        for kind in kinds_of_word(&self.pack.kinds, &fact.of.text) {
            let at = self.pack.definitions.len();
            let facts = &mut self.pack.kinds[kind].facts;
            let Some(position) = facts.iter().position(|f| f.span == Some(fact.name.span)) else {
                continue;
            };
            facts[position].settles = Some(at);
            bodies.push(Body {
                place,
                what: BodyOf::Definition(at),
            });
            self.pack.definitions.push(Definition {
                name: fact.name.text.clone(),
                kind,
                ty: facts[position].ty,
                part: place.0,
                law: String::new(),
                item: None,
                span,
                name_span: fact.name.span,
                claimed: None,
                settles: Some(position),
                body: None,
            });
        }
    }
}

/// The law of a file before a reference to it.
fn in_law(part: &Part, see: &str) -> String {
    if part.law.is_empty() {
        see.to_owned()
    } else {
        format!("{}, {see}", part.law)
    }
}

fn several(word: &Ident, expected: &str) -> Diagnostic {
    Diagnostic::fault(
        word.span,
        format!("`{}` stands for several kinds", word.text),
    )
    .expected(expected)
}

pub(super) fn with_near(fault: Diagnostic, near: Option<&str>) -> Diagnostic {
    match near {
        Some(near) => fault.hint(format!("did you mean `{near}`?")),
        None => fault,
    }
}
