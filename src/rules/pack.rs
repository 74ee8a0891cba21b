//! A checked pack and the ways to use it.

use super::amounts::{AmountDecl, TableRow};
use super::ast::{BinaryOp, Part};
use super::local::Local;
use super::manifest::Manifest;
use super::tree::{BandsDecl, Condition, Definition, Node, ScaleDecl, What};
use super::types::{Period, Ty};
use crate::diag::{Diagnostic, Severity};
use crate::num::Fraction;
use crate::program::{ItemKind, Program, Settling, Shape};
use crate::source::{FileId, Sources, Span};
use std::collections::{BTreeMap, BTreeSet};

/// The texts of a pack, read by somebody else.
#[derive(Clone, Debug)]
pub struct PackTexts {
    /// All texts, under the names that messages show.
    pub sources: Sources,
    /// `pack.toml`.
    pub manifest: FileId,
    /// The `.rules` files, in the order of the law.
    pub rules: Vec<FileId>,
    /// `amounts.csv`, if there is one.
    pub amounts: Option<FileId>,
    /// `tables/NAME.csv`, by name.
    pub tables: Vec<(String, FileId)>,
    /// `labels.<language>.csv`, by language.
    pub labels: Vec<(String, FileId)>,
    /// Local files.
    pub locals: Vec<FileId>,
}

/// An amount that a list changes for a what-if.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Change {
    /// Name of the amount.
    pub amount: String,
    /// The value in the amount's unit (a percentage for a rate).
    pub value: Fraction,
    /// Why.
    pub because: String,
}

/// What a fact may hold.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum FactKind {
    /// Money of a period, or a sum.
    Money(Option<Period>),
    /// A rate.
    Rate,
    /// Hours a week.
    Hours,
    /// A number.
    Number,
    /// A whole number.
    Count,
    /// A day.
    Date,
    /// Yes or no.
    YesNo,
    /// One of these words.
    Choice(Vec<String>),
}

impl FactKind {
    /// Units to one of a value as lists hold it.
    pub(super) fn units(&self) -> i64 {
        match self {
            FactKind::Money(Some(Period::Hour)) | FactKind::Rate => 10_000,
            FactKind::Money(_) | FactKind::Hours | FactKind::Number => 100,
            FactKind::Count | FactKind::Date | FactKind::YesNo | FactKind::Choice(_) => 1,
        }
    }
}

/// A fact that a list may hold.
#[derive(Clone, Debug)]
pub struct FactDecl {
    /// Name.
    pub name: String,
    /// What it may hold.
    pub kind: FactKind,
    /// Least and largest value (a rate as a fraction of one; a date in days).
    pub range: (Fraction, Fraction),
    /// The value where it is left out; none where it is required. A choice is the position of its word.
    pub default: Option<Fraction>,
    /// The question that asks for it.
    pub ask: String,
    pub(super) ty: Ty,
    /// Position among the definitions of what it means once settled.
    pub(super) settles: Option<usize>,
    /// Where it is declared; none for those that are always there.
    pub(super) span: Option<Span>,
}

/// A kind of record.
#[derive(Clone, Debug)]
pub struct KindDecl {
    /// Its word.
    pub name: String,
    /// Position of the kind that it belongs to.
    pub owner: Option<usize>,
    /// Its facts.
    pub facts: Vec<FactDecl>,
    /// Where it is declared; none for those that are always there.
    pub(super) span: Option<Span>,
}

/// Position of the household among the kinds.
pub(super) const HOUSEHOLD: usize = 0;
/// Position of adults.
pub(super) const ADULT: usize = 1;
/// Position of children.
pub(super) const CHILD: usize = 2;
/// Position of other adults.
pub(super) const OTHER: usize = 3;
/// Position of jobs.
pub(super) const JOB: usize = 4;

#[derive(Clone, Debug)]
pub(super) struct ChoiceDecl {
    pub name: String,
    pub span: Span,
    pub words: Vec<String>,
    /// How many of its words are the pack's own; those of local files follow.
    pub own: usize,
}

#[derive(Clone, Debug)]
pub(super) struct ConversionDecl {
    pub name: String,
    pub span: Span,
    pub from: Period,
    pub to: Period,
    pub times: Fraction,
}

#[derive(Clone, Debug)]
pub(super) struct TableDecl {
    pub name: String,
    pub span: Span,
    /// Its file.
    pub file: FileId,
    /// Where the first line of the file ends.
    pub header: u32,
    /// None for a count.
    pub keys: Vec<Option<usize>>,
    pub gives: Ty,
    pub rows: Vec<TableRow>,
    pub filled: Filled,
}

/// Who gives the rows of a table.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Filled {
    /// The pack alone.
    Pack,
    /// The pack, and local files for their own words of the first key.
    Both,
    /// Local files alone: for the pack's own words of the first key it gives nothing.
    Local,
}

/// A checked pack.
#[derive(Clone, Debug)]
pub struct Pack {
    /// What it says of itself.
    pub manifest: Manifest,
    /// The kinds of record and their facts: household, adult, child, other, job, then the pack's own.
    pub kinds: Vec<KindDecl>,
    /// Labels by language.
    pub labels: BTreeMap<String, BTreeMap<String, String>>,
    /// The texts.
    pub sources: Sources,
    /// Warnings that were found.
    pub warnings: Vec<Diagnostic>,
    /// Labels that a language other than English lacks, or has too many. The pack can be used, but not in that language.
    pub gaps: Vec<(String, Diagnostic)>,
    pub(super) parts: Vec<(String, String)>,
    pub(super) choices: Vec<ChoiceDecl>,
    pub(super) conversions: Vec<ConversionDecl>,
    pub(super) amounts: Vec<AmountDecl>,
    pub(super) tables: Vec<TableDecl>,
    pub(super) bands: Vec<BandsDecl>,
    pub(super) scales: Vec<ScaleDecl>,
    pub(super) definitions: Vec<Definition>,
    pub(super) holds: Vec<Condition>,
    pub(super) notes: Vec<Condition>,
    pub(super) locals: Vec<Local>,
    /// Dates of the list on which tables are looked up that local files fill.
    pub(super) open_dates: BTreeSet<usize>,
}

/// Checks a pack.
///
/// # Errors
/// Every fault of its texts, with the texts to show them in.
pub fn check(texts: PackTexts) -> Result<Pack, (Sources, Vec<Diagnostic>)> {
    let mut faults = Vec::new();
    let sources = texts.sources;
    let manifest = super::manifest::read(
        texts.manifest,
        &sources.get(texts.manifest).text,
        &mut faults,
    );
    let parts: Vec<Part> = texts
        .rules
        .iter()
        .map(|file| super::parser::parse(*file, &sources.get(*file).text, &mut faults))
        .collect();
    let Some(manifest) = manifest else {
        return Err((sources, faults));
    };
    let clean_rules = faults.is_empty();
    let mut broken = BTreeSet::new();
    let amounts = texts
        .amounts
        .map(|file| {
            super::amounts::read(
                file,
                &sources.get(file).text,
                &manifest.currency,
                &mut broken,
                &mut faults,
            )
        })
        .unwrap_or_default();
    let clean_amounts = clean_rules && faults.is_empty();
    let mut labels = BTreeMap::new();
    for (language, file) in &texts.labels {
        if let Some(texts) = super::labels::read(*file, &sources.get(*file).text, &mut faults) {
            labels.insert(language.clone(), texts);
        }
    }
    let tables: Vec<(String, FileId, String)> = texts
        .tables
        .iter()
        .map(|(name, file)| (name.clone(), *file, sources.get(*file).text.clone()))
        .collect();
    let locals = texts
        .locals
        .iter()
        .filter_map(|file| super::local_text::read(*file, sources.get(*file), &mut faults))
        .collect();
    let before = faults.len();
    let pack = super::declare::declare(
        manifest,
        parts,
        amounts,
        labels,
        super::declare::Rows { tables, locals },
        broken,
        &mut faults,
    );
    // Circles and unused names would only echo a statement that was given up.
    if clean_rules && faults.len() == before {
        super::graph::check(&pack, &mut faults);
        super::labels::check(&pack, &texts.labels, &sources, &mut faults);
        if clean_amounts {
            super::used::check(&pack, &mut faults);
        }
    }
    if faults.is_empty() {
        super::lower::probe(&pack, &mut faults);
    }
    faults.sort_by_key(|f| f.span.map(|s| (s.file, s.start)));
    faults.dedup();
    let (faults, warnings): (Vec<_>, Vec<_>) = faults
        .into_iter()
        .partition(|f| f.severity == Severity::Fault);
    if faults.is_empty() {
        Ok(Pack {
            gaps: super::labels::gaps(&pack),
            sources,
            warnings,
            ..pack
        })
    } else {
        Err((sources, faults))
    }
}

impl Pack {
    /// The flat program for these dates (in the order of [`Manifest::dates`], in days since 1970-01-01), changed amounts and shape.
    ///
    /// # Errors
    /// A date outside the pack, a change of an unknown amount, a number that could overflow.
    pub fn program(
        &self,
        dates: &[i64],
        changes: &[Change],
        shape: &Shape,
    ) -> Result<Program, Vec<Diagnostic>> {
        super::lower::program(self, dates, changes, shape)
    }

    /// Checks the dates and changed amounts of a list against the pack, before any household is read.
    ///
    /// # Errors
    /// Every fault: a date outside the days covered, a changed amount that the pack does not know, a value that does not fit its
    /// amount, and what the rules refuse with these values (limits of bands that fall, numbers that are too large).
    pub fn accepts(&self, dates: &[i64], changes: &[Change]) -> Result<(), Vec<Diagnostic>> {
        super::lower::accepts(self, dates, changes)?;
        super::local::accepts(self, dates)?;
        // The pack alone was tried on every date; other values and dates that differ from each other were not.
        if changes.is_empty() && dates.windows(2).all(|pair| pair[0] == pair[1]) {
            return Ok(());
        }
        super::lower::try_out(self, dates, changes)
    }

    /// The facts that settle, in the order of kinds and facts.
    pub fn settling(&self) -> Vec<Settling> {
        let mut out = Vec::new();
        for (kind, decl) in self.kinds.iter().enumerate() {
            for (fact, f) in decl.facts.iter().enumerate() {
                let Some(at) = f.settles else { continue };
                let to = self.definitions[at]
                    .body
                    .as_ref()
                    .and_then(fixed)
                    .and_then(|value| {
                        let units = value * Fraction::whole(i128::from(f.kind.units()));
                        (units.denominator() == 1)
                            .then(|| i64::try_from(units.numerator()).ok())
                            .flatten()
                    });
                out.push(Settling {
                    name: f.name.clone(),
                    kind,
                    fact,
                    units: f.kind.units(),
                    to,
                });
            }
        }
        out
    }

    /// Names and kinds of the items, in the order of the law, without those of one name that follow.
    pub fn item_names(&self) -> Vec<(String, ItemKind)> {
        let mut out: Vec<(String, ItemKind)> = Vec::new();
        for definition in &self.definitions {
            if let Some(kind) = definition.item
                && !out.iter().any(|(name, _)| *name == definition.name)
            {
                out.push((definition.name.clone(), kind));
            }
        }
        out
    }

    /// Languages whose labels are complete, English first; English alone where the pack has no labels.
    pub fn languages(&self) -> Vec<&str> {
        let mut all = vec![super::labels::ENGLISH];
        let whole = |language: &&str| self.gaps.iter().all(|(known, _)| known != language);
        let others = self.labels.keys().map(String::as_str);
        all.extend(
            others
                .filter(|language| *language != super::labels::ENGLISH)
                .filter(whole),
        );
        all
    }

    /// Names of the notes.
    pub fn note_names(&self) -> Vec<String> {
        self.notes.iter().map(|note| note.text.clone()).collect()
    }

    /// The local files that are laid over the pack.
    pub fn locals(&self) -> &[Local] {
        &self.locals
    }

    /// Titles and laws of the instruments, in the order of the law.
    pub fn instruments(&self) -> &[(String, String)] {
        &self.parts
    }
}

/// The value of an expression that is a fixed number, or a difference of two, which is how a number below nothing is written.
fn fixed(node: &Node) -> Option<Fraction> {
    match &node.what {
        What::Fixed(value) => Some(*value),
        What::Binary {
            op: BinaryOp::Subtract,
            left,
            right,
        } => fixed(left)?.checked_add(-fixed(right)?),
        _ => None,
    }
}
