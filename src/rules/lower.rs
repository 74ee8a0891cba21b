//! A checked pack to a flat program, for dates, changed amounts and a shape of household.
//!
//! Sums and searches are unrolled; a figure that no item needs is left out. `lower_expr` holds the expressions.

use super::amounts::{TableRow, day_text};
use super::pack::{ADULT, Change, HOUSEHOLD, JOB, Pack};
use super::types::Ty;
use crate::diag::{Diagnostic, nearest};
use crate::index::Id;
use crate::num::{Direction, Fraction};
use crate::program::{
    Amount, Builder, FactRef, Guard, Item, ItemKind, Line, Manner, Moment, Note, Program, Reg,
    Shape, Table,
};
use std::collections::{BTreeMap, BTreeSet, HashMap};

/// Facts that stand changed: kind, record and fact.
type World = BTreeMap<(usize, usize, usize), Reg>;

/// How often a figure may be worked out inside itself under changed facts.
const DEEPEST_WORLDS: usize = 3;

pub(super) struct Lowering<'a> {
    pub pack: &'a Pack,
    pub dates: &'a [i64],
    changes: &'a [Change],
    pub shape: &'a Shape,
    pub builder: Builder,
    /// Registers of figures by their facts changed for `as if`, definition and record.
    done: HashMap<(usize, usize, usize), Reg>,
    /// What would be due of an item that can be claimed, by definition and record, under no changed facts.
    due: HashMap<(usize, usize), Reg>,
    /// Sets of changed facts; the first changes nothing.
    worlds: Vec<World>,
    /// The one at hand.
    pub world: usize,
    /// Figures being worked out, by world, definition and record.
    open: Vec<(usize, usize, usize)>,
    /// By definition: the facts that it rests on. Filled when first asked for.
    rests_on: HashMap<usize, BTreeSet<(usize, usize)>>,
    amounts: HashMap<(usize, usize), (Id<Amount>, Reg)>,
    tables: HashMap<(usize, usize), Id<Table>>,
    pub faults: Vec<Diagnostic>,
    /// Expressions being unrolled; bounded by the parser and by the absence of circles.
    pub part: usize,
}

/// The hint of a fault that only shows once settled.
pub(super) const ONCE_SETTLED: &str = "it is so once the facts have settled";

/// The largest item, in currency units: sums of many items still fit into 64 bits of minor units.
const LARGEST_ITEM: u128 = 1_000_000_000_000;

/// Checks dates and changed amounts of a list.
pub(super) fn accepts(
    pack: &Pack,
    dates: &[i64],
    changes: &[Change],
) -> Result<(), Vec<Diagnostic>> {
    let mut faults = Vec::new();
    for ((name, _), day) in pack.manifest.dates.iter().zip(dates) {
        if *day < pack.manifest.from || *day > pack.manifest.to {
            faults.push(
                Diagnostic::general(format!("the date `{name}` is {}", day_text(*day))).expected(
                    format!(
                        "a day from {} to {}, which the pack covers",
                        day_text(pack.manifest.from),
                        day_text(pack.manifest.to)
                    ),
                ),
            );
        }
    }
    for change in changes {
        if let Some(amount) = pack.amounts.iter().find(|a| a.name == change.amount) {
            faults.extend(unfit(amount.ty, change));
        } else {
            let fault =
                Diagnostic::general(format!("`{}` is not an amount of the pack", change.amount))
                    .expected("a name of `amounts.csv`");
            let near = nearest(&change.amount, pack.amounts.iter().map(|a| a.name.as_str()));
            faults.push(match near {
                Some(near) => fault.hint(format!("did you mean `{near}`?")),
                None => fault,
            });
        }
    }
    if faults.is_empty() {
        Ok(())
    } else {
        Err(faults)
    }
}

/// What is wrong with the value of a changed amount.
fn unfit(ty: Ty, change: &Change) -> Option<Diagnostic> {
    let expected = match ty {
        Ty::Count if change.value.denominator() != 1 => "a whole number",
        Ty::YesNo if !change.value.is_zero() && change.value != Fraction::ONE => {
            "1 for yes or 0 for no"
        }
        Ty::Date | Ty::Choice(_) => "another amount: days and words cannot be changed by a list",
        Ty::Count | Ty::YesNo | Ty::Money(_) | Ty::Rate | Ty::Hours | Ty::Number => return None,
    };
    Some(
        Diagnostic::general(format!(
            "`{}` is {ty} and the list changes it to {}",
            change.amount,
            plain(change.value)
        ))
        .expected(expected),
    )
}

/// Makes programs of a small and a large household: what a list's changed amounts and its dates together upset shows here, before the first
/// household is read.
pub(super) fn try_out(
    pack: &Pack,
    dates: &[i64],
    changes: &[Change],
) -> Result<(), Vec<Diagnostic>> {
    for shape in tried(pack) {
        program(pack, dates, changes, &shape)?;
    }
    Ok(())
}

/// The shapes that a pack is tried on: a small and a large household, now and, where facts settle, once settled.
fn tried(pack: &Pack) -> Vec<Shape> {
    let mut shapes = vec![small(pack), large(pack)];
    if pack.definitions.iter().any(|d| d.settles.is_some()) {
        shapes.extend(shapes.clone().into_iter().map(|shape| Shape {
            moment: Moment::Settled,
            ..shape
        }));
    }
    shapes
}

/// Makes the program.
pub(super) fn program(
    pack: &Pack,
    dates: &[i64],
    changes: &[Change],
    shape: &Shape,
) -> Result<Program, Vec<Diagnostic>> {
    accepts(pack, dates, changes)?;
    let mut lowering = Lowering {
        pack,
        dates,
        changes,
        shape,
        builder: Builder::new(shape.clone()),
        done: HashMap::new(),
        due: HashMap::new(),
        worlds: vec![World::new()],
        world: 0,
        open: Vec::new(),
        rests_on: HashMap::new(),
        amounts: HashMap::new(),
        tables: HashMap::new(),
        faults: Vec::new(),
        part: 0,
    };
    lowering.everything();
    let lines: Vec<(String, crate::source::Span)> = lowering
        .builder
        .program()
        .lines
        .iter()
        .map(|line| (line.name.clone(), line.span))
        .collect();
    let faults = lowering.faults;
    match lowering.builder.finish() {
        Ok(program) if faults.is_empty() => Ok(program),
        Ok(_) => Err(faults),
        Err(too_large) => {
            let mut faults = faults;
            faults.push(match too_large.line {
                Some(line) => {
                    let (name, span) = &lines[line.position()];
                    Diagnostic::fault(*span, format!("`{name}` could hold a number that is too large"))
                        .expected(format!("at most 33 digits, those behind the point included, and at most {LARGEST_ITEM} for an item"))
                        .hint("round an intermediate figure, or narrow the range of a fact")
                }
                None => Diagnostic::general("a number of the pack is too large").expected("at most 33 digits, those behind the point included"),
            });
            Err(faults)
        }
    }
}

/// Lowers a large and a small household at every date at which an amount changes, to find what only shows then.
pub(super) fn probe(pack: &Pack, faults: &mut Vec<Diagnostic>) {
    let mut days: Vec<i64> = vec![pack.manifest.from, pack.manifest.to];
    for amount in &pack.amounts {
        days.extend(
            amount
                .rows
                .iter()
                .map(|row| row.from)
                .filter(|day| *day > pack.manifest.from && *day <= pack.manifest.to),
        );
    }
    for table in &pack.tables {
        days.extend(super::tables::days(pack, table));
    }
    days.sort_unstable();
    days.dedup();
    for day in days {
        for shape in tried(pack) {
            let dates = vec![day; pack.manifest.dates.len()];
            if let Err(found) = program(pack, &dates, &[], &shape) {
                for fault in found {
                    if !faults
                        .iter()
                        .any(|f| f.span == fault.span && f.message == fault.message)
                    {
                        let fault = match shape.moment {
                            Moment::Now => fault,
                            Moment::Settled => fault.hint(ONCE_SETTLED),
                        };
                        let later = day > pack.manifest.from;
                        faults.push(if later {
                            fault.hint(format!("it is so from {}", day_text(day)))
                        } else {
                            fault
                        });
                    }
                }
            }
        }
    }
}

fn small(pack: &Pack) -> Shape {
    let mut owners: Vec<Vec<u32>> = vec![Vec::new(); pack.kinds.len()];
    owners[HOUSEHOLD] = vec![0];
    owners[ADULT] = vec![0];
    owners[JOB] = vec![0];
    Shape {
        owners,
        earner: 0,
        varied_job: 0,
        moment: Moment::Now,
    }
}

fn large(pack: &Pack) -> Shape {
    let mut owners: Vec<Vec<u32>> = pack
        .kinds
        .iter()
        .map(|kind| {
            if kind.owner == Some(ADULT) {
                vec![0, 1, 1]
            } else {
                vec![0; 3]
            }
        })
        .collect();
    owners[HOUSEHOLD] = vec![0];
    owners[ADULT] = vec![0, 0];
    Shape {
        owners,
        earner: 1,
        varied_job: 1,
        moment: Moment::Now,
    }
}

impl Lowering<'_> {
    fn everything(&mut self) {
        let pack = self.pack;
        for (at, definition) in pack.definitions.iter().enumerate() {
            let Some(kind) = definition.item else {
                continue;
            };
            for instance in 0..self.count(definition.kind) {
                let reg = self.figure(at, instance);
                let adult = self
                    .climb(definition.kind, instance, ADULT)
                    .map(|at| at as u32);
                let line = self.line_of(at, instance);
                let due = self.due.get(&(at, instance)).copied();
                self.builder.item(Item {
                    kind,
                    line,
                    reg,
                    adult,
                    due,
                });
            }
        }
        for (conditions, hold) in [(&pack.holds, true), (&pack.notes, false)] {
            for condition in conditions {
                self.part = condition.part;
                let mut any = None;
                for instance in 0..self.count(condition.kind) {
                    let reg = self.node(&condition.when, &mut vec![(condition.kind, instance)]);
                    any = Some(any.map_or(reg, |before| self.builder.either(before, reg)));
                }
                let Some(reg) = any else { continue };
                if hold {
                    self.builder.guard(Guard {
                        reg,
                        because: condition.text.clone(),
                    });
                } else {
                    self.builder.note(Note {
                        reg,
                        name: condition.text.clone(),
                    });
                }
            }
        }
    }

    pub(super) fn count(&self, kind: usize) -> usize {
        self.shape.owners.get(kind).map_or(0, Vec::len)
    }

    /// The record of `wanted` that a record is, or belongs to.
    pub(super) fn climb(&self, kind: usize, instance: usize, wanted: usize) -> Option<usize> {
        let (mut kind, mut instance) = (kind, instance);
        while kind != wanted {
            let owner = self.pack.kinds[kind].owner?;
            instance = self.shape.owners[kind][instance] as usize;
            kind = owner;
        }
        Some(instance)
    }

    fn line_of(&self, definition: usize, instance: usize) -> Id<Line> {
        let name = &self.pack.definitions[definition];
        let found = self.builder.program().lines.iter_with_id().find(|(_, l)| {
            !l.as_if
                && l.name == name.name
                && l.kind == name.kind as u32
                && l.instance == instance as u32
        });
        found
            .map(|(id, _)| id)
            .expect("a figure that was worked out has a line")
    }

    /// The register of a figure or item of one record.
    pub(super) fn figure(&mut self, at: usize, instance: usize) -> Reg {
        let world = self.narrowed(at);
        if let Some(reg) = self.done.get(&(world, at, instance)) {
            return *reg;
        }
        if self.open.contains(&(world, at, instance))
            || self
                .open
                .iter()
                .filter(|(_, d, i)| (*d, *i) == (at, instance))
                .count()
                > DEEPEST_WORLDS
        {
            let definition = &self.pack.definitions[at];
            let fault = Diagnostic::fault(
                definition.name_span,
                format!(
                    "`{}` needs itself even as if the facts were changed",
                    definition.name
                ),
            )
            .expected("changed facts under which it does not need itself");
            if !self.faults.contains(&fault) {
                self.faults.push(fault);
            }
            return self.builder.constant(Fraction::ZERO);
        }
        self.open.push((world, at, instance));
        let before_world = std::mem::replace(&mut self.world, world);
        let pack = self.pack;
        let definition = &pack.definitions[at];
        let body = definition
            .body
            .as_ref()
            .expect("a checked pack has no empty figure");
        let (title, _) = &pack.parts[definition.part];
        let words = match definition.ty {
            Ty::Choice(choice) => pack.choices[choice].words.clone(),
            _ => Vec::new(),
        };
        let before_part = std::mem::replace(&mut self.part, definition.part);
        let (line, before) = self.builder.open(Line {
            name: definition.name.clone(),
            part: title.clone(),
            law: definition.law.clone(),
            kind: definition.kind as u32,
            instance: instance as u32,
            reg: None,
            span: definition.span,
            inputs: Vec::new(),
            amounts: Vec::new(),
            unit: definition.ty.to_string(),
            words,
            order: at as u32,
            as_if: world != 0,
        });
        let mut reg = self.node(body, &mut vec![(definition.kind, instance)]);
        if definition
            .item
            .is_some_and(|kind| kind != ItemKind::Passport)
        {
            reg = self
                .builder
                .round(reg, Fraction::new(1, 100), Direction::HalfUp, Manner::Minor);
        }
        if definition.item.is_some() && self.builder.limit(reg) > LARGEST_ITEM {
            self.builder.overflow();
        }
        if let Some(claimed) = &definition.claimed {
            let claimed = self.node(claimed, &mut vec![(definition.kind, instance)]);
            if world == 0 {
                self.due.insert((at, instance), reg);
            }
            let none = self.builder.constant(Fraction::ZERO);
            reg = self.builder.choose(claimed, reg, none);
        }
        self.builder.close(line, reg, before);
        self.part = before_part;
        self.world = before_world;
        self.open.pop();
        self.done.insert((world, at, instance), reg);
        reg
    }

    /// The world at hand without the changed facts that a figure does not rest on, so that it is worked out once more only where they matter.
    fn narrowed(&mut self, at: usize) -> usize {
        if self.world == 0 {
            return 0;
        }
        let rests_on = self.rests_on(at).clone();
        let world: World = self.worlds[self.world]
            .iter()
            .filter(|((kind, _, fact), _)| rests_on.contains(&(*kind, *fact)))
            .map(|(k, v)| (*k, *v))
            .collect();
        self.world_of(world)
    }

    fn world_of(&mut self, world: World) -> usize {
        self.worlds
            .iter()
            .position(|w| *w == world)
            .unwrap_or_else(|| {
                self.worlds.push(world);
                self.worlds.len() - 1
            })
    }

    /// The world at hand with further facts changed.
    pub(super) fn changed(&mut self, changes: Vec<((usize, usize, usize), Reg)>) -> usize {
        let mut world = self.worlds[self.world].clone();
        world.extend(changes);
        self.world_of(world)
    }

    /// The facts that a figure rests on, through all that it needs.
    fn rests_on(&mut self, at: usize) -> &BTreeSet<(usize, usize)> {
        if !self.rests_on.contains_key(&at) {
            let (mut facts, mut seen, mut waiting) = (BTreeSet::new(), BTreeSet::new(), vec![at]);
            while let Some(next) = waiting.pop() {
                if seen.insert(next) {
                    let definition = &self.pack.definitions[next];
                    for node in definition.body.iter().chain(&definition.claimed) {
                        super::graph::rests_on(
                            self.pack,
                            node,
                            self.shape.moment,
                            &mut waiting,
                            &mut facts,
                        );
                    }
                }
            }
            self.rests_on.insert(at, facts);
        }
        &self.rests_on[&at]
    }

    /// The register of a fact of one record.
    pub(super) fn fact(&mut self, kind: usize, instance: usize, fact: usize) -> Reg {
        if let Some(changed) = self.worlds[self.world].get(&(kind, instance, fact)) {
            return *changed;
        }
        if let (Moment::Settled, Some(at)) =
            (self.shape.moment, self.pack.kinds[kind].facts[fact].settles)
        {
            return self.figure(at, instance);
        }
        if kind == JOB && fact == 0 && instance == self.shape.varied_job as usize {
            return self.builder.hours();
        }
        let decl = &self.pack.kinds[kind].facts[fact];
        let largest = |value: Fraction| {
            value
                .numerator()
                .unsigned_abs()
                .div_ceil(value.denominator().unsigned_abs())
        };
        let limit = largest(decl.range.0).max(largest(decl.range.1));
        let place = FactRef {
            kind: kind as u32,
            instance: instance as u32,
            fact: fact as u32,
        };
        self.builder.fact(place, decl.kind.units(), limit)
    }

    /// Value of an amount on its date: its register, and the amount for the working.
    pub(super) fn amount(&mut self, amount: usize, dated: usize) -> Reg {
        if let Some((id, reg)) = self.amounts.get(&(amount, dated)).copied() {
            self.builder.amount_went_in(id);
            return reg;
        }
        let decl = &self.pack.amounts[amount];
        let change = self.changes.iter().find(|c| c.amount == decl.name);
        let row = decl.on(self.dates[dated]);
        let percent = decl.ty == Ty::Rate;
        let value = match change {
            Some(change) if percent => change.value / Fraction::whole(100),
            Some(change) => change.value,
            None => row.and_then(|row| row.value).unwrap_or(Fraction::ZERO),
        };
        let shown = change.map_or_else(
            || row.map_or_else(String::new, |r| r.shown.clone()),
            |c| plain(c.value),
        );
        let entry = Amount {
            name: decl.name.clone(),
            value: format!("{shown} {}", decl.unit).trim().to_owned(),
            from: row.map_or_else(String::new, |r| day_text(r.from)),
            to: row
                .filter(|r| r.to != i64::MAX)
                .map_or_else(String::new, |r| day_text(r.to)),
            source: row.map_or_else(String::new, |r| r.source.clone()),
            locator: row.map_or_else(String::new, |r| r.locator.clone()),
            confirmed: row.is_some_and(|r| r.confirmed),
            changed_because: change.map_or_else(String::new, |c| c.because.clone()),
        };
        let id = self.builder.amount(entry);
        let reg = self.builder.constant(value);
        self.amounts.insert((amount, dated), (id, reg));
        self.builder.amount_went_in(id);
        reg
    }

    /// Whether an amount is absent on its date.
    pub(super) fn is_missing(&self, amount: usize, dated: usize) -> bool {
        let decl = &self.pack.amounts[amount];
        let changed = self.changes.iter().any(|c| c.amount == decl.name);
        !changed
            && decl
                .on(self.dates[dated])
                .is_none_or(|row| row.value.is_none())
    }

    /// A keyed table on its date. The check of the pack found a value for every key.
    pub(super) fn table(&mut self, at: usize, dated: usize) -> Id<Table> {
        if let Some(id) = self.tables.get(&(at, dated)) {
            return *id;
        }
        let decl = &self.pack.tables[at];
        let dense = super::tables::dense(self.pack, decl, self.dates[dated])
            .expect("a checked table has rows on every day covered");
        let values = dense
            .values
            .into_iter()
            .map(|v| v.unwrap_or(Fraction::ZERO))
            .collect();
        let unit = super::local::unit(self.pack, decl.gives);
        let mut entered: HashMap<&[String], Id<Amount>> = HashMap::new();
        let mut amounts = Vec::new();
        for row in dense.rows {
            let Some(TableRow { keys, row }) = row else {
                amounts.push(None);
                continue;
            };
            // A row may stand at several places: a count beyond its word's own takes the nearest.
            let id = *entered.entry(keys).or_insert_with(|| {
                self.builder.amount(Amount {
                    name: format!("{}[{}]", decl.name, keys.join(", ")),
                    value: match unit.as_str() {
                        "word" | "yesno" | "date" => row.shown.clone(),
                        unit => format!("{} {unit}", row.shown),
                    },
                    from: day_text(row.from),
                    to: if row.to == i64::MAX {
                        String::new()
                    } else {
                        day_text(row.to)
                    },
                    source: row.source.clone(),
                    locator: row.locator.clone(),
                    confirmed: row.confirmed,
                    changed_because: String::new(),
                })
            });
            amounts.push(Some(id));
        }
        let id = self.builder.table(Table {
            name: decl.name.clone(),
            keys: dense.keys,
            values,
            amounts,
        });
        self.tables.insert((at, dated), id);
        id
    }
}

fn plain(value: Fraction) -> String {
    value
        .decimal(6)
        .trim_end_matches('0')
        .trim_end_matches('.')
        .to_owned()
}
