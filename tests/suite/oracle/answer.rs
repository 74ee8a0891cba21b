//! The oracle: rule text evaluated as it reads, recursively, on numbers of any size. In: a book, days, a home and hours. Out:
//! every item, the holds and the notes. Nothing is compiled, unrolled or scaled; the one shortcut is that what was worked
//! out once for a home and does not vary with the hours is remembered.
//!
//! Two manners of rounding: by the `law`, and `smooth`, where a rounding of what varies with the earner's hours is left out unless
//! it says `as steps`.

#[path = "answer/sums.rs"]
mod sums;

#[path = "answer/courses.rs"]
mod courses;

use super::book::{ADULT, Book, Cell, Condition, JOB, Ladder, Limit, Row};
use super::reader::{Expr, Search, Sign, Test, Way};
use super::text::{Q, full_years, q, whole};
use num_bigint::BigInt;
use num_traits::{ToPrimitive, Zero};
use std::cell::RefCell;
use std::collections::HashMap;

/// Which roundings are made.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Mode {
    Law,
    Smooth,
}

/// A record: its owner and its facts in units of the list.
#[derive(Clone, Debug)]
pub struct Record {
    pub owner: usize,
    pub values: Vec<i64>,
}

/// The records of a household by kind, and the job whose hours vary.
#[derive(Clone, Debug)]
pub struct Home {
    pub records: Vec<Vec<Record>>,
    pub varied_job: usize,
}

/// What an expression comes to.
#[derive(Clone, Debug, PartialEq)]
pub enum Value {
    Number(Q),
    Truth(bool),
    Word(String),
}

impl Value {
    fn number(self) -> Q {
        match self {
            Value::Number(value) => value,
            Value::Truth(yes) => whole(i128::from(yes)),
            Value::Word(word) => panic!("`{word}` is no quantity"),
        }
    }

    /// A word of a choice, of which `yes` and `no` may be two.
    fn word(self) -> String {
        match self {
            Value::Word(word) => word,
            Value::Truth(yes) => if yes { "yes" } else { "no" }.to_owned(),
            Value::Number(value) => panic!("{value} is no word"),
        }
    }

    fn truth(self) -> bool {
        match self {
            Value::Truth(yes) => yes,
            Value::Number(value) => !value.is_zero(),
            Value::Word(word) => panic!("the word `{word}` is no answer"),
        }
    }
}

/// What a value depends on.
#[derive(Clone, Debug, PartialEq)]
pub enum Course {
    /// On the pack, the dates and who lives there alone: it has this value.
    Fixed(Value),
    /// On facts too; the fact or figure (kind, record, name) where it is one as it stands.
    Steady(Option<(usize, usize, String)>),
    /// On the hours of the varied job too.
    Varies,
}

impl Course {
    fn is(&self, yes: bool) -> bool {
        matches!(self, Course::Fixed(value) if value.clone().truth() == yes)
    }

    /// Whether two courses are surely one and the same value.
    fn same(&self, other: &Course) -> bool {
        match (self, other) {
            (Course::Fixed(Value::Word(one)), Course::Fixed(Value::Word(two))) => one == two,
            (Course::Fixed(Value::Word(_)), _) | (_, Course::Fixed(Value::Word(_))) => false,
            // Yes is 1 and no is 0.
            (Course::Fixed(one), Course::Fixed(two)) => {
                one.clone().number() == two.clone().number()
            }
            (Course::Steady(Some(one)), Course::Steady(Some(two))) => one == two,
            (_, _) => false,
        }
    }

    fn is_number(&self, wanted: i128) -> bool {
        matches!(self, Course::Fixed(Value::Number(value)) if *value == whole(wanted))
    }

    fn rank(&self) -> u8 {
        match self {
            Course::Fixed(_) => 0,
            Course::Steady(_) => 1,
            Course::Varies => 2,
        }
    }
}

/// One of several results, by a condition that may not be known.
fn either_course(when: &Course, yes: Course, no: Course) -> Course {
    match when {
        Course::Fixed(known) => {
            if known.clone().truth() {
                yes
            } else {
                no
            }
        }
        Course::Steady(_) | Course::Varies if yes.same(&no) => yes,
        Course::Steady(_) | Course::Varies => {
            if [when, &yes, &no].iter().any(|c| **c == Course::Varies) {
                Course::Varies
            } else {
                Course::Steady(None)
            }
        }
    }
}

/// Records at hand: kind and position, the innermost last.
type Scopes = Vec<(usize, usize)>;

/// Facts that are taken otherwise for `as if`, by kind, record and fact; what was worked out under them.
#[derive(Default)]
struct World {
    changed: HashMap<(usize, usize, usize), (Value, Course)>,
    courses: RefCell<HashMap<(usize, usize), Course>>,
    done: RefCell<HashMap<(usize, usize), Value>>,
}

/// Where an expression is said: the part, which picks the amounts, the records at hand, and the facts taken otherwise.
struct Place<'p> {
    world: &'p World,
    part: usize,
    scopes: &'p Scopes,
}

impl Place<'_> {
    fn inside(&self, kind: usize, record: usize) -> Scopes {
        let mut scopes = self.scopes.clone();
        scopes.push((kind, record));
        scopes
    }

    fn here(&self) -> (usize, usize) {
        *self
            .scopes
            .last()
            .expect("an expression is said of a record")
    }
}

/// One evaluation: the hours, the manner of rounding, and what was worked out in it.
pub struct Run {
    hours: Q,
    mode: Mode,
    done: RefCell<HashMap<(usize, usize), Value>>,
}

/// An item of one record: name, kind, record.
pub type ItemOf = (String, usize, usize);

/// The oracle for one home on given days.
pub struct Oracle<'a> {
    book: &'a Book,
    days: Vec<i64>,
    home: Home,
    /// Whether a fact that settles means what it settles to.
    settled: bool,
    /// Nothing is taken otherwise; what does not vary is remembered.
    base: World,
}

/// `value` as a multiple of `unit`.
pub fn rounded(value: &Q, way: Way, unit: &Q) -> Q {
    let units = value / unit;
    let half = q(1, 2);
    let whole_units = match way {
        Way::Up => units.ceil(),
        Way::Down => units.floor(),
        Way::HalfUp => (units + half).floor(),
        Way::HalfDown => (units - half).ceil(),
        Way::HalfEven => {
            let (low, high) = ((&units - &half).ceil(), (&units + &half).floor());
            let even = |n: &Q| (n.to_integer() % BigInt::from(2)).is_zero();
            if even(&low) { low } else { high }
        }
    };
    whole_units * unit
}

impl<'a> Oracle<'a> {
    pub fn new(book: &'a Book, days: Vec<i64>, home: Home) -> Oracle<'a> {
        Oracle {
            book,
            days,
            home,
            settled: false,
            base: World::default(),
        }
    }

    /// The same home once its facts have settled.
    pub fn once_settled(mut self) -> Oracle<'a> {
        self.settled = true;
        self
    }

    /// All items at these hours, in the order of the law.
    pub fn items(&self, hours: &Q, mode: Mode) -> Vec<(ItemOf, Q)> {
        let run = self.run(hours, mode);
        let mut out = Vec::new();
        for (at, figure) in self
            .book
            .figures
            .iter()
            .enumerate()
            .filter(|(_, f)| f.item.is_some())
        {
            for record in 0..self.count(figure.kind) {
                out.push((
                    (figure.name.clone(), figure.kind, record),
                    self.figure(at, record, &self.base, &run).number(),
                ));
            }
        }
        out
    }

    /// A figure or item of one record by the law; none where the book has none of that name, or its value is a word.
    pub fn figure_by_law(&self, name: &str, kind: usize, record: usize, hours: &Q) -> Option<Q> {
        let at = *self.book.names[kind].get(name)?;
        match self.figure(at, record, &self.base, &self.run(hours, Mode::Law)) {
            Value::Word(_) => None,
            value => Some(value.number()),
        }
    }

    /// Reasons to hold, by the law.
    pub fn holds(&self, hours: &Q) -> Vec<String> {
        self.conditions(&self.book.holds, hours)
    }

    /// Names of the notes that hold, by the law.
    pub fn notes(&self, hours: &Q) -> Vec<String> {
        self.conditions(&self.book.notes, hours)
    }

    fn conditions(&self, list: &[Condition], hours: &Q) -> Vec<String> {
        let run = self.run(hours, Mode::Law);
        let mut out = Vec::new();
        for condition in list {
            for kind in &condition.kinds {
                let holds = |record| {
                    self.value(
                        &condition.when,
                        &Place {
                            world: &self.base,
                            part: condition.part,
                            scopes: &vec![(*kind, record)],
                        },
                        &run,
                    )
                    .truth()
                };
                if (0..self.count(*kind)).any(holds) && !out.contains(&condition.text) {
                    out.push(condition.text.clone());
                }
            }
        }
        out.sort();
        out
    }

    fn run(&self, hours: &Q, mode: Mode) -> Run {
        Run {
            hours: hours.clone(),
            mode,
            done: RefCell::default(),
        }
    }

    fn count(&self, kind: usize) -> usize {
        self.home.records[kind].len()
    }

    /// The record of kind `wanted` that a record is, or belongs to.
    fn owner(&self, kind: usize, record: usize, wanted: usize) -> Option<usize> {
        if kind == wanted {
            return Some(record);
        }
        self.owner(
            self.book.kinds[kind].owner?,
            self.home.records[kind][record].owner,
            wanted,
        )
    }

    fn figure(&self, at: usize, record: usize, world: &World, run: &Run) -> Value {
        let as_it_is = world.changed.is_empty();
        let known = world.done.borrow().get(&(at, record)).cloned();
        if let Some(value) = known.or_else(|| {
            run.done
                .borrow()
                .get(&(at, record))
                .filter(|_| as_it_is)
                .cloned()
        }) {
            return value;
        }
        let figure = &self.book.figures[at];
        let scopes = vec![(figure.kind, record)];
        let place = Place {
            world,
            part: figure.part,
            scopes: &scopes,
        };
        let mut value = self.value(&figure.expr, &place, run);
        if figure
            .item
            .as_deref()
            .is_some_and(|kind| kind != "passport")
            && (run.mode == Mode::Law || self.course(&figure.expr, &place) != Course::Varies)
        {
            value = Value::Number(rounded(&value.number(), Way::HalfUp, &q(1, 100)));
        }
        if figure
            .claimed
            .as_ref()
            .is_some_and(|claimed| !self.value(claimed, &place, run).truth())
        {
            value = Value::Number(Q::zero());
        }
        let passes = as_it_is && self.figure_course(at, record, world) == Course::Varies;
        let done = if passes { &run.done } else { &world.done };
        done.borrow_mut().insert((at, record), value.clone());
        value
    }

    /// A fact of a record.
    fn fact(&self, kind: usize, record: usize, fact: usize, world: &World, run: &Run) -> Value {
        if let Some((value, _)) = world.changed.get(&(kind, record, fact)) {
            return value.clone();
        }
        let decl = &self.book.kinds[kind].facts[fact];
        if let (true, Some((part, expr))) = (self.settled, &decl.settles) {
            let place = Place {
                world,
                part: *part,
                scopes: &vec![(kind, record)],
            };
            return self.value(expr, &place, run);
        }
        if (kind, record, fact) == (JOB, self.home.varied_job, 0) {
            return Value::Number(run.hours.clone());
        }
        let value = self.home.records[kind][record].values[fact];
        match (decl.ty.as_str(), self.book.choices.get(&decl.ty)) {
            ("yesno", _) => Value::Truth(value != 0),
            (_, Some(words)) => {
                Value::Word(words[usize::try_from(value).expect("a position")].clone())
            }
            (_, None) => Value::Number(q(i128::from(value), i128::from(decl.units))),
        }
    }

    /// The record that a name at hand belongs to: the innermost record first, then its owners, then the next one out.
    fn nearest(&self, name: &str, scopes: &Scopes) -> Option<(usize, usize)> {
        for (kind, record) in scopes.iter().rev() {
            let (mut kind, mut record) = (*kind, *record);
            loop {
                if self.book.names[kind].contains_key(name)
                    || self.book.kinds[kind].facts.iter().any(|f| f.name == name)
                {
                    return Some((kind, record));
                }
                let Some(owner) = self.book.kinds[kind].owner else {
                    break;
                };
                record = self.home.records[kind][record].owner;
                kind = owner;
            }
        }
        None
    }

    /// A figure, item or fact of a record.
    fn of_record(&self, name: &str, kind: usize, record: usize, world: &World, run: &Run) -> Value {
        match self.book.names[kind].get(name) {
            Some(figure) => self.figure(*figure, record, world, run),
            None => {
                let fact = self
                    .fact_at(name, kind)
                    .unwrap_or_else(|| panic!("`{name}` is known"));
                self.fact(kind, record, fact, world, run)
            }
        }
    }

    fn fact_at(&self, name: &str, kind: usize) -> Option<usize> {
        self.book.kinds[kind]
            .facts
            .iter()
            .position(|f| f.name == name)
    }

    /// The place at hand with some facts taken otherwise: those of the records at hand, as bare names find them.
    fn changed(
        &self,
        changes: &[(String, Expr)],
        place: &Place<'_>,
        value: impl Fn(&Expr, &Course) -> Value,
    ) -> World {
        let mut changed = place.world.changed.clone();
        for (name, expr) in changes {
            let (kind, record) = self
                .nearest(name, place.scopes)
                .expect("the fact is at hand");
            let fact = self.fact_at(name, kind).expect("it is a fact");
            let course = self.course(expr, place);
            changed.insert((kind, record, fact), (value(expr, &course), course));
        }
        World {
            changed,
            ..World::default()
        }
    }

    /// The row that holds on the date of a part.
    fn picked<'r>(&self, rows: impl Iterator<Item = &'r Row>, part: usize) -> Vec<&'r Row> {
        let day = self.days[self.book.dated[part].expect("a part that uses amounts is dated")];
        rows.filter(|row| row.from <= day && day <= row.to)
            .collect()
    }

    /// The adult of a relation, or the record of a kind, that `of` means.
    fn relation(&self, whose: &str, place: &Place<'_>) -> (usize, Option<usize>) {
        let kind = if whose == "partner" {
            ADULT
        } else {
            self.book.kinds_of(whose)[0]
        };
        let found = place
            .scopes
            .iter()
            .rev()
            .find_map(|(k, r)| self.owner(*k, *r, kind))
            .expect("the relation is at hand");
        if whose != "partner" {
            return (kind, Some(found));
        }
        (kind, (0..self.count(ADULT)).find(|adult| *adult != found))
    }

    /// The records that a sum, count or search goes over: those of the record at hand where the kind belongs below it, else all.
    fn among(&self, kind: usize, place: &Place<'_>) -> Vec<usize> {
        let (here, at) = place.here();
        (0..self.count(kind))
            .filter(|r| kind == here || self.owner(kind, *r, here).is_none_or(|owner| owner == at))
            .collect()
    }

    fn eligible(
        &self,
        over: &Search,
        kind: usize,
        record: usize,
        place: &Place<'_>,
        run: &Run,
    ) -> bool {
        over.with.as_ref().is_none_or(|with| {
            self.value(
                with,
                &Place {
                    world: place.world,
                    part: place.part,
                    scopes: &place.inside(kind, record),
                },
                run,
            )
            .truth()
        })
    }

    fn key(&self, over: &Search, kind: usize, record: usize, place: &Place<'_>, run: &Run) -> Q {
        self.name(
            &over.by,
            &Place {
                world: place.world,
                part: place.part,
                scopes: &place.inside(kind, record),
            },
            run,
        )
        .number()
    }

    /// Whether `a` stands before `b`: the smaller key, `down` the larger; a tie keeps the order of the list.
    fn before(
        &self,
        over: &Search,
        kind: usize,
        a: usize,
        b: usize,
        place: &Place<'_>,
        run: &Run,
    ) -> bool {
        let (x, y) = (
            self.key(over, kind, a, place, run),
            self.key(over, kind, b, place, run),
        );
        if x == y {
            a < b
        } else if over.down {
            x > y
        } else {
            x < y
        }
    }

    /// The one of these that stands before all others.
    fn leading(
        &self,
        over: &Search,
        kind: usize,
        list: &[usize],
        place: &Place<'_>,
        run: &Run,
    ) -> Option<usize> {
        list.iter().copied().find(|a| {
            list.iter()
                .all(|b| a == b || self.before(over, kind, *a, *b, place, run))
        })
    }

    /// A bare name.
    fn name(&self, name: &str, place: &Place<'_>, run: &Run) -> Value {
        if let Some((kind, record)) = self.nearest(name, place.scopes) {
            return self.of_record(name, kind, record, place.world, run);
        }
        if let Some(rows) = self.book.amounts.get(name) {
            // Nothing is known on that day: the household is held.
            return cell(
                self.picked(rows.iter(), place.part)
                    .first()
                    .and_then(|row| row.value.as_ref()),
            );
        }
        if let Some(date) = self.date(name) {
            return Value::Number(whole(i128::from(self.days[date])));
        }
        Value::Word(name.to_owned())
    }

    fn date(&self, name: &str) -> Option<usize> {
        self.book
            .dates
            .iter()
            .position(|d| d == name)
            .or((name == "date").then_some(0))
    }

    fn value(&self, expr: &Expr, place: &Place<'_>, run: &Run) -> Value {
        let number = |e: &Expr| self.value(e, place, run).number();
        let truth = |e: &Expr| self.value(e, place, run).truth();
        match expr {
            Expr::Number(value) => Value::Number(value.clone()),
            Expr::Day(day) => Value::Number(whole(i128::from(*day))),
            Expr::YesNo(yes) => Value::Truth(*yes),
            Expr::Name(name) => self.name(name, place, run),
            Expr::Of {
                name,
                whose,
                failing,
            } => match self.relation(whose, place) {
                (kind, Some(record)) => self.of_record(name, kind, record, place.world, run),
                (_, None) => self.value(failing.as_ref().expect("something stands in"), place, run),
            },
            Expr::Lookup { table, keys } => {
                let keys: Vec<Value> = keys.iter().map(|k| self.value(k, place, run)).collect();
                self.looked_up(table, &keys, place.part)
            }
            Expr::Where {
                when,
                give,
                otherwise,
            } => self.value(if truth(when) { give } else { otherwise }, place, run),
            Expr::Larger(list) => {
                Value::Number(list.iter().map(number).max().expect("a list has an entry"))
            }
            Expr::Smaller(list) => {
                Value::Number(list.iter().map(number).min().expect("a list has an entry"))
            }
            Expr::SumOver { over, body } => {
                let mut total = Q::zero();
                for (kind, record) in self.counted(over, place, run) {
                    total += self
                        .value(
                            body,
                            &Place {
                                world: place.world,
                                part: place.part,
                                scopes: &place.inside(kind, record),
                            },
                            run,
                        )
                        .number();
                }
                Value::Number(total)
            }
            Expr::CountOf(over) => {
                Value::Number(whole(self.counted(over, place, run).len() as i128))
            }
            Expr::Any(over) => Value::Truth(!self.counted(over, place, run).is_empty()),
            Expr::Every(over) => {
                let all: usize = self
                    .book
                    .kinds_of(&over.kind)
                    .iter()
                    .map(|kind| self.among(*kind, place).len())
                    .sum();
                Value::Truth(self.counted(over, place, run).len() == all)
            }
            Expr::First {
                over,
                give,
                failing,
            } => {
                let kind = self.book.kinds_of(&over.kind)[0];
                let list: Vec<usize> = self
                    .among(kind, place)
                    .into_iter()
                    .filter(|r| self.eligible(over, kind, *r, place, run))
                    .collect();
                match self.leading(over, kind, &list, place, run) {
                    Some(record) => self.value(
                        give,
                        &Place {
                            world: place.world,
                            part: place.part,
                            scopes: &place.inside(kind, record),
                        },
                        run,
                    ),
                    None => self.value(failing, place, run),
                }
            }
            Expr::Place(over) => {
                let (kind, me) = place.here();
                let others = (0..self.count(kind)).filter(|other| *other != me);
                let ahead = others.filter(|other| {
                    self.eligible(over, kind, *other, place, run)
                        && self.before(over, kind, *other, me, place, run)
                });
                Value::Number(whole(1 + ahead.count() as i128))
            }
            Expr::Years { from, to } => {
                let day = |e: &Expr| number(e).to_integer().to_i64().expect("a day");
                Value::Number(whole(i128::from(full_years(day(from), day(to)))))
            }
            Expr::AsIf { name, changes } => {
                let (kind, record) = self
                    .nearest(name, place.scopes)
                    .expect("the figure is at hand");
                let world = self.changed(changes, place, |expr, _| self.value(expr, place, run));
                self.of_record(name, kind, record, &world, run)
            }
            Expr::Missing(name) => {
                let row = self.picked(self.book.amounts[name].iter(), place.part);
                Value::Truth(row.first().is_none_or(|row| row.value.is_none()))
            }
            Expr::Pair { sign, left, right } => {
                Value::Number(pair(*sign, number(left), number(right)))
            }
            Expr::Rounded {
                of,
                way,
                unit,
                steps,
            } => {
                let value = number(of);
                let left_out =
                    run.mode == Mode::Smooth && !steps && self.course(of, place) == Course::Varies;
                Value::Number(if left_out {
                    value
                } else {
                    rounded(&value, *way, unit)
                })
            }
            Expr::Converted { of, by } => Value::Number(number(of) * &self.book.conversions[by]),
            Expr::Charged { of, by } => {
                let ladder = &self.book.bands[by];
                let all = number(of);
                let (mut low, mut total) = (Q::zero(), Q::zero());
                self.on_ladder(ladder, place, |inside| {
                    for (rate, limit) in &ladder.lines {
                        let rate = self.value(rate, inside, run).number();
                        let high = match limit {
                            Limit::UpTo(limit) | Limit::Below(limit) => {
                                self.value(limit, inside, run).number()
                            }
                            Limit::Beyond => all.clone(),
                        };
                        // What of it lies between the two limits. A limit below the one before it leaves an empty band.
                        let high = high.max(low.clone());
                        let slice = all.clone().min(high.clone()) - &low;
                        total += slice.max(Q::zero()) * rate;
                        low = high;
                    }
                });
                Value::Number(total)
            }
            Expr::Placed { of, on } => {
                let ladder = &self.book.scales[on];
                let all = number(of);
                self.on_ladder(ladder, place, |inside| {
                    let holds = |limit: &Limit| match limit {
                        Limit::UpTo(limit) => all <= self.value(limit, inside, run).number(),
                        Limit::Below(limit) => all < self.value(limit, inside, run).number(),
                        Limit::Beyond => true,
                    };
                    let step = ladder
                        .lines
                        .iter()
                        .find(|(_, limit)| holds(limit))
                        .expect("the last step goes beyond");
                    self.value(&step.0, inside, run)
                })
            }
            Expr::Compared { test, left, right } => {
                let (left, right) = (self.value(left, place, run), self.value(right, place, run));
                let same = match (&left, &right) {
                    (Value::Word(word), other) | (other, Value::Word(word)) => {
                        *word == other.clone().word()
                    }
                    (_, _) => {
                        matches!(test, Test::Is | Test::IsNot)
                            && left.clone().number() == right.clone().number()
                    }
                };
                Value::Truth(match test {
                    Test::Is => same,
                    Test::IsNot => !same,
                    Test::Above => left.number() > right.number(),
                    Test::Below => left.number() < right.number(),
                    Test::AtLeast => left.number() >= right.number(),
                    Test::AtMost => left.number() <= right.number(),
                })
            }
            Expr::Not(inner) => Value::Truth(!truth(inner)),
            Expr::And(left, right) => Value::Truth(truth(left) && truth(right)),
            Expr::Or(left, right) => Value::Truth(truth(left) || truth(right)),
        }
    }
}

fn pair(sign: Sign, left: Q, right: Q) -> Q {
    match sign {
        Sign::Add => left + right,
        Sign::Subtract => left - right,
        Sign::Multiply => left * right,
        Sign::Divide => left / right,
        Sign::Beyond => (left - right).max(Q::zero()),
        Sign::LimitedTo => left.min(right),
        Sign::RaisedTo => left.max(right),
    }
}

/// What stands in a cell. Nothing is known where it is empty: the household is held.
fn cell(cell: Option<&Cell>) -> Value {
    match cell {
        Some(Cell::Number(value)) => Value::Number(value.clone()),
        Some(Cell::Word(word)) => Value::Word(word.clone()),
        None => Value::Number(Q::zero()),
    }
}
