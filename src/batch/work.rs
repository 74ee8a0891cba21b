//! What a worker does in earnest: rebuilds pack, templates and office from its setup, then assesses and typesets one
//! household after another. In: bytes and households. Out: [`Outcome`]s. Reads no file and no clock.

use super::evidence::{rules_record, workings};
use super::prepare::checked;
use super::{
    Assessor, Books, GridRows, Outcome, Prepared, Product, StatementFile, results,
    statement_number, turning_points,
};
use crate::case::{ADULT, FactType, Household, JOB, Known, Schema, day_of};
use crate::diag::nearest;
use crate::load::{Files, HoldRules, Office, PackFiles, Terms, schema_of};
use crate::measures::{Assessment, TurnKind, Verdict};
use crate::num::{Fraction, Hours};
use crate::rules::{Change, ENGLISH, Local, Pack};
use crate::statement::{
    EmployerCost, Evidence, FactShape, Kind, LetterContext, LetterDelivery, LocalRules,
    RulesRecord, StatementError, TemplateSet, Texts, Typeset, Typesetter, copy_view, pay_views,
    typeset,
};
use chrono::NaiveDate;
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;
use std::sync::Arc;

/// What a run asks of each household.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Orders {
    /// The run's id, in each statement's number.
    pub run_id: String,
    /// Issue date of the statements.
    pub issued: NaiveDate,
    /// Which points become rows.
    pub rows: GridRows,
    /// Which kinds of statement are typeset; empty for tables only.
    pub kinds: Vec<Kind>,
    /// Whether payroll pages show what the employer pays on top.
    pub employer: EmployerCost,
}

/// What crosses to a worker.
#[derive(Serialize, Deserialize)]
struct Setup {
    pack_name: String,
    pack: Files,
    dates: Vec<i64>,
    changes: Vec<(String, Fraction, String)>,
    grid: (Option<Hours>, Option<Hours>),
    templates: Files,
    office: Option<Office>,
    orders: Orders,
}

/// The bytes that a worker is set up with.
pub fn setup(prepared: &Prepared, orders: &Orders) -> Vec<u8> {
    let mut pack = prepared.pack_files.files.clone();
    // Examples are for `prove` alone.
    pack.0.retain(|file| !file.name.starts_with("examples/"));
    let changes = prepared.terms.changes.iter();
    let setup = Setup {
        pack_name: prepared.pack_files.name.clone(),
        pack,
        dates: prepared.terms.dates.clone(),
        changes: changes
            .map(|c| (c.amount.clone(), c.value, c.because.clone()))
            .collect(),
        grid: (prepared.terms.grid_to, prepared.terms.grid_step),
        templates: prepared.templates.clone(),
        office: prepared.office.as_ref().map(|file| file.office.clone()),
        orders: orders.clone(),
    };
    postcard::to_allocvec(&setup).unwrap_or_default()
}

/// A worker's assessor.
pub struct Work {
    books: Books,
    orders: Orders,
    items: Vec<String>,
    hold: HoldRules,
    press: Option<Press>,
    rules: RulesRecord,
}

/// Builds a worker's assessor.
///
/// # Errors
/// What is wrong with the setup.
pub fn work(payload: &[u8]) -> Result<Work, String> {
    let setup: Setup = postcard::from_bytes(payload).map_err(|error| error.to_string())?;
    let files = PackFiles {
        name: setup.pack_name,
        files: setup.pack,
    };
    let pack = checked(&files).map_err(|error| error.to_string())?;
    let terms = Terms {
        dates: setup.dates,
        changes: setup
            .changes
            .into_iter()
            .map(|(amount, value, because)| Change {
                amount,
                value,
                because,
            })
            .collect(),
        grid_to: setup.grid.0,
        grid_step: setup.grid.1,
    };
    let office = setup.office.unwrap_or_default();
    let press = if setup.orders.kinds.is_empty() {
        None
    } else {
        let press = Press::new(&setup.templates, &office, &pack, &terms, &setup.orders);
        Some(press.map_err(|error| error.to_string())?)
    };
    let rules = rules_record(&files.name, &files.files, &pack, &terms);
    Ok(Work {
        items: item_columns(&pack),
        books: if setup.orders.kinds.is_empty() {
            Books::new(pack, terms).for_tables()
        } else {
            Books::new(pack, terms)
        },
        orders: setup.orders,
        hold: office.hold,
        press,
        rules,
    })
}

/// The columns of `results.csv` for a pack: its items' names, each once.
pub fn item_columns(pack: &Pack) -> Vec<String> {
    pack.item_names()
        .into_iter()
        .map(|(name, _)| name)
        .collect()
}

impl Assessor for Work {
    fn assess(&mut self, household: &Household) -> Outcome {
        let mut reasons = own_reasons(household, &self.hold, self.books.schema());
        reasons.extend(unfolded(household, &self.items));
        let assessment = match self.books.assess(household) {
            Ok(Verdict::Assessed(assessment)) => assessment,
            Ok(Verdict::Held(more)) => {
                reasons.extend(more);
                return Outcome::Held { reasons };
            }
            Err(cause) => return Outcome::Failed { cause },
        };
        if assessment.earners.is_empty() {
            reasons.push("no adult has a job of today with hours and a wage, or an offer, so there is nothing to compare".to_owned());
        }
        if !reasons.is_empty() {
            return Outcome::Held { reasons };
        }
        let mut product = tables(&assessment, &self.items, self.orders.rows);
        if let Some(press) = &mut self.press {
            // Workings and the record of the rules are for kinds that print them.
            let mut evidence = Evidence::default();
            if self.orders.kinds.iter().any(|kind| *kind != Kind::Client) {
                evidence.rules = self.rules.clone();
                match workings(&mut self.books, household, &assessment) {
                    Ok(points) => evidence.points = points,
                    Err(cause) => return Outcome::Failed { cause },
                }
            }
            match press.statements(household, &assessment, &evidence) {
                Ok(statements) => product.statements = statements,
                Err(
                    error @ (StatementError::Glyph { .. }
                    | StatementError::Room { .. }
                    | StatementError::Label { .. }),
                ) => {
                    return Outcome::Held {
                        reasons: vec![error.to_string()],
                    };
                }
                Err(error) => {
                    return Outcome::Failed {
                        cause: error.to_string(),
                    };
                }
            }
        }
        Outcome::Printed(Box::new(product))
    }
}

/// The rows of an assessment.
fn tables(assessment: &Assessment, items: &[String], rows: GridRows) -> Product {
    let turns = || {
        assessment
            .earners
            .iter()
            .flat_map(|earner| &earner.lines)
            .flat_map(|line| &line.turns)
    };
    Product {
        results: results(assessment, items, rows),
        turns: turning_points(assessment),
        statements: vec![],
        kinks: turns().filter(|turn| turn.kind == TurnKind::Kink).count() as u64,
        cliffs: turns().filter(|turn| turn.kind == TurnKind::Cliff).count() as u64,
    }
}

/// Names to fold that are no item of the pack. Nothing would be folded for them, and somebody's safety may hang on it.
fn unfolded(household: &Household, items: &[String]) -> Vec<String> {
    let unknown = household
        .delivery
        .fold
        .iter()
        .filter(|name| !items.contains(name));
    unknown
        .map(|name| {
            let hint = match nearest(name, items.iter().map(String::as_str)) {
                Some(near) => format!("; did you mean `{near}`?"),
                None => String::new(),
            };
            format!("`fold` names `{name}`, expected an item of the rules{hint}")
        })
        .collect()
}

/// Why the list or the office holds a household, whatever its figures.
fn own_reasons(household: &Household, hold: &HoldRules, schema: &Schema) -> Vec<String> {
    let mut reasons = vec![];
    if !household.delivery.hold.is_empty() {
        reasons.push(household.delivery.hold.clone());
    }
    if hold.without_address && household.delivery.address.is_empty() {
        reasons.push("no address is given".to_owned());
    }
    for wanted in &hold.must_be_seen {
        let mut unseen = vec![];
        for (at, (kind, instances)) in schema.kinds.iter().zip(&household.instances).enumerate() {
            let Some(fact) = kind.facts.iter().position(|fact| fact.name == *wanted) else {
                continue;
            };
            // A job without hours stands for none, so nothing of it can be seen.
            let all = instances
                .iter()
                .filter(|job| at != JOB || job.values[0] > 0);
            for instance in all {
                match instance.known[fact] {
                    Known::Seen => {}
                    Known::Told => unseen.push("told"),
                    Known::Assumed => unseen.push("assumed"),
                }
            }
        }
        unseen.sort_unstable();
        unseen.dedup();
        if !unseen.is_empty() {
            reasons.push(format!(
                "`{wanted}` is {}, the office wants it seen",
                unseen.join(" and ")
            ));
        }
    }
    reasons
}

/// What sets letters: templates, office and the words of a pack, ready for one household after another.
pub struct Press {
    typesetter: Typesetter,
    templates: TemplateSet,
    texts: BTreeMap<String, Arc<Texts>>,
    labels: BTreeMap<String, BTreeMap<String, String>>,
    locals: Vec<Local>,
    english: Arc<BTreeMap<String, String>>,
    /// The fixed words of the office's own records.
    office_texts: Arc<Texts>,
    context: LetterContext,
    /// The language that the context has its labels in; empty before the first household.
    spoken: String,
    run_id: String,
    kinds: Vec<Kind>,
    employer: EmployerCost,
}

impl Press {
    /// Reads the templates and gathers what all letters of a run share.
    ///
    /// # Errors
    /// Where a template or a file of texts is faulty.
    pub fn new(
        templates: &Files,
        office: &Office,
        pack: &Pack,
        terms: &Terms,
        orders: &Orders,
    ) -> Result<Press, StatementError> {
        let set = TemplateSet::new(
            templates
                .texts()
                .map(|(name, text)| (name.to_owned(), text.to_owned()))
                .collect(),
        );
        let day = |days: i64| day_of(days).unwrap_or_default();
        let context = LetterContext {
            number: String::new(),
            issued: orders.issued,
            assessed: day(terms.dates.first().copied().unwrap_or_default()),
            rules_title: pack.manifest.title.clone(),
            area: pack.manifest.area.clone(),
            rules_until: day(pack.manifest.to),
            currency: pack.manifest.currency.clone(),
            period: pack.manifest.period.word().to_owned(),
            office: letterhead(office),
            labels: BTreeMap::new(),
            locals: vec![],
            english: Arc::default(),
            facts: fact_shapes(&schema_of(pack)),
            texts: set.texts(ENGLISH)?,
            delivery: LetterDelivery::default(),
        };
        Ok(Press {
            typesetter: Typesetter::new(&set)?,
            templates: set,
            texts: BTreeMap::new(),
            labels: pack.labels.clone(),
            locals: pack.locals().to_vec(),
            english: Arc::new(pack.labels.get(ENGLISH).cloned().unwrap_or_default()),
            office_texts: Arc::clone(&context.texts),
            context,
            spoken: String::new(),
            run_id: orders.run_id.clone(),
            kinds: orders.kinds.clone(),
            employer: orders.employer,
        })
    }

    /// What a household's letter needs besides its assessment: its number, its language's words, its delivery.
    ///
    /// # Errors
    /// Where the template set has no texts in the household's language.
    pub fn context(&mut self, household: &Household) -> Result<&LetterContext, StatementError> {
        let language = match household.delivery.language.as_str() {
            "" => ENGLISH,
            language => language,
        };
        let texts = match self.texts.get(language) {
            Some(texts) => Arc::clone(texts),
            None => {
                let texts = self.templates.texts(language)?;
                self.texts.insert(language.to_owned(), Arc::clone(&texts));
                texts
            }
        };
        let delivery = &household.delivery;
        let only = household.instances[ADULT]
            .iter()
            .position(|adult| !delivery.only.is_empty() && adult.reference == delivery.only);
        let ordinary = LetterDelivery::default();
        self.context.number = statement_number(&self.run_id, &household.reference);
        self.context.texts = texts;
        // A pack's words are many, and most households of a list have the language of the one before.
        if self.spoken != language {
            language.clone_into(&mut self.spoken);
            self.context.labels = self.labels.get(language).cloned().unwrap_or_default();
            self.context.locals = self
                .locals
                .iter()
                .map(|local| local_rules(local, language))
                .collect();
            self.context.english = match language {
                ENGLISH => Arc::default(),
                _ => Arc::clone(&self.english),
            };
        }
        self.context.delivery = LetterDelivery {
            address: delivery.address.clone(),
            paper: match delivery.paper.as_str() {
                "" => ordinary.paper,
                paper => paper.to_owned(),
            },
            print_size: delivery.print_size.max(ordinary.print_size),
            only,
            fold: delivery.fold.clone(),
        };
        Ok(&self.context)
    }

    /// The context of the last household for the office's own record: in English and in ordinary print, whatever the household's
    /// language and size of print are.
    pub fn office_context(&self) -> LetterContext {
        let locals = self.locals.iter();
        LetterContext {
            texts: Arc::clone(&self.office_texts),
            labels: BTreeMap::clone(&self.english),
            locals: locals.map(|local| local_rules(local, ENGLISH)).collect(),
            english: Arc::default(),
            delivery: LetterDelivery {
                print_size: LetterDelivery::default().print_size,
                ..self.context.delivery.clone()
            },
            ..self.context.clone()
        }
    }

    /// Sets all statements of a household that the run asks for.
    ///
    /// # Errors
    /// As for [`typeset`], [`copy_view`] and [`pay_views`].
    pub fn statements(
        &mut self,
        household: &Household,
        assessment: &Assessment,
        evidence: &Evidence,
    ) -> Result<Vec<StatementFile>, StatementError> {
        self.context(household)?;
        let context = &self.context;
        let mut files = vec![];
        for kind in &self.kinds {
            match kind {
                Kind::Client => {
                    let made = typeset(&mut self.typesetter, assessment, context)?;
                    files.push(file(*kind, String::new(), made));
                }
                Kind::Payroll => {
                    let views = pay_views(assessment, context, evidence, self.employer)?;
                    let several = views.len() > 1;
                    for (adult, view) in views {
                        // One employee's page is nobody else's: each is a file of its own.
                        let variant = if several {
                            household.instances[ADULT][adult].reference.clone()
                        } else {
                            String::new()
                        };
                        let identity = (format!("{}-{variant}", view.number), context.issued);
                        let made = self.typesetter.pay_page(
                            &view,
                            &context.texts,
                            (&identity.0, identity.1),
                        )?;
                        files.push(file(*kind, variant, made));
                    }
                }
                Kind::Caseworker => {
                    let context = self.office_context();
                    let view = copy_view(assessment, &context, evidence)?;
                    let identity = (view.number.as_str(), context.issued);
                    let made = self
                        .typesetter
                        .statement(*kind, &view, &context.texts, identity)?;
                    files.push(file(*kind, String::new(), made));
                }
            }
        }
        Ok(files)
    }
}

/// A finished statement as a file.
fn file(kind: Kind, variant: String, made: Typeset) -> StatementFile {
    StatementFile {
        kind: kind.word().to_owned(),
        variant,
        pages: u32::try_from(made.pages).ok(),
        pdf: made.bytes,
    }
}

/// How letters write the facts of a schema, by kind of record and name.
fn fact_shapes(schema: &Schema) -> BTreeMap<String, FactShape> {
    let mut shapes = BTreeMap::new();
    for kind in &schema.kinds {
        for fact in &kind.facts {
            let shape = match &fact.ty {
                FactType::Money(period) => FactShape::Money(period.clone()),
                FactType::Hours => FactShape::Hours,
                FactType::Date => FactShape::Date,
                FactType::YesNo => FactShape::YesNo,
                FactType::Choice(_) => FactShape::Word,
                FactType::Rate | FactType::Number | FactType::Count => FactShape::Plain,
            };
            shapes.insert(format!("{}.{}", kind.name, fact.name), shape);
        }
    }
    shapes
}

/// A local file as a letter in this language names it.
fn local_rules(local: &Local, language: &str) -> LocalRules {
    let office = local.offices.get(language).or(local.offices.get("en"));
    LocalRules {
        title: local.title.clone(),
        source: local.source.clone(),
        facts: local.facts.clone(),
        word: local.word.clone(),
        items: local.items.clone(),
        office: office.cloned().unwrap_or_default(),
        until: day_of(local.to).unwrap_or_default(),
    }
}

/// The office's lines as a letter prints them.
fn letterhead(office: &Office) -> crate::statement::Office {
    let mut lines = office.address.clone();
    let others = [
        &office.phone,
        &office.email,
        &office.hours,
        &office.accreditation,
    ];
    lines.extend(others.into_iter().filter(|line| !line.is_empty()).cloned());
    let next = [&office.signatory, &office.privacy, &office.complaints];
    crate::statement::Office {
        name: office.name.clone(),
        lines,
        next_steps: next
            .into_iter()
            .filter(|line| !line.is_empty())
            .cloned()
            .collect(),
    }
}
