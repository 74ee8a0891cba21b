//! Random small packs. In: chance. Out: the texts of a pack that uses any of the language's constructs, most of them accepted by the
//! checker. Expressions are made by type, so that they have a meaning; what they mean is the oracle's affair.

use super::book::{ADULT, CHILD, HOUSEHOLD, JOB, OTHER};
use super::luck::Luck;
use hourworth::load::{Files, PackFiles, TextFile};
use std::collections::{BTreeSet, HashMap};

/// Adults, children and other adults together.
const MEMBER: usize = 1000;
const PERIODS: [&str; 5] = ["hour", "day", "week", "month", "year"];
const MONTH: usize = 3;

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Ty {
    Money(Option<usize>),
    Rate,
    Hours,
    Number,
    Count,
    Date,
    YesNo,
    Choice(usize),
}

/// A statement and what it declares.
#[derive(Clone, Debug)]
pub struct Statement {
    pub part: usize,
    per: Option<String>,
    keyword: &'static str,
    name: String,
    text: String,
}

/// The texts of an invented pack.
#[derive(Clone, Debug, Default)]
pub struct Invented {
    pub statements: Vec<Statement>,
    /// Name and rows.
    amounts: Vec<(String, String)>,
    tables: Vec<(String, String)>,
}

/// What is known of an expression: its text, how loosely it binds, its degree in hours, and whether it varies with them.
#[derive(Clone, Debug)]
struct Piece {
    text: String,
    level: u8,
    degree: u8,
    varies: bool,
}

const VALUE: u8 = 0;
const PRODUCT: u8 = 1;
const SUM: u8 = 2;
const SHAPED: u8 = 3;
const COMPARED: u8 = 4;
const DENIAL: u8 = 5;
const BOTH: u8 = 6;
const EITHER: u8 = 7;

impl Piece {
    fn plain(text: String) -> Piece {
        Piece {
            text,
            level: VALUE,
            degree: 0,
            varies: false,
        }
    }

    /// Its text where nothing that binds more loosely than `level` may stand.
    fn at(&self, level: u8) -> String {
        if self.level > level {
            format!("({})", self.text)
        } else {
            self.text.clone()
        }
    }
}

/// A figure or fact that may be named.
#[derive(Clone, Debug)]
struct Named {
    name: String,
    kind: usize,
    ty: Ty,
    degree: u8,
    varies: bool,
    /// A fact whose range starts above zero.
    divides: bool,
}

/// What an expression may be: its degree at the most, and whether it may vary at all.
#[derive(Clone, Copy, Debug)]
struct Room {
    degree: u8,
    steady: bool,
}

struct Maker<'l> {
    luck: &'l mut Luck,
    out: Invented,
    kinds: Vec<(String, Option<usize>)>,
    choices: Vec<Vec<String>>,
    names: Vec<Named>,
    amounts: Vec<(String, Ty)>,
    /// Name, keys (a choice, or a count) and what it gives.
    tables: Vec<(String, Vec<Option<usize>>, Ty)>,
    /// Bands: name, kind, type.
    bands: Vec<(String, usize, Ty)>,
    scales: Vec<(String, usize, Ty, Ty)>,
    conversions: Vec<(usize, usize)>,
    part: usize,
    made: usize,
}

/// Days on which the invented packs start and end, and days between on which amounts change.
pub const DAYS: [&str; 4] = ["2025-04-06", "2025-10-01", "2026-04-06", "2027-04-05"];

/// A pack.
pub fn invent(luck: &mut Luck) -> Invented {
    let kinds = [
        ("household", None),
        ("adult", Some(HOUSEHOLD)),
        ("child", Some(HOUSEHOLD)),
        ("other", Some(HOUSEHOLD)),
        ("job", Some(ADULT)),
    ];
    let kinds = kinds.map(|(name, owner)| (name.to_owned(), owner)).to_vec();
    let mut maker = Maker {
        luck,
        out: Invented::default(),
        kinds,
        choices: Vec::new(),
        names: Vec::new(),
        amounts: Vec::new(),
        tables: Vec::new(),
        bands: Vec::new(),
        scales: Vec::new(),
        conversions: Vec::new(),
        part: 0,
        made: 0,
    };
    maker.pack();
    maker.out.prune();
    maker.out
}

impl Maker<'_> {
    fn pack(&mut self) {
        for kind in [ADULT, CHILD, OTHER] {
            self.names.push(Named {
                name: "birth".into(),
                kind,
                ty: Ty::Date,
                degree: 0,
                varies: false,
                divides: false,
            });
        }
        self.names.push(Named {
            name: "hours".into(),
            kind: JOB,
            ty: Ty::Hours,
            degree: 1,
            varies: true,
            divides: false,
        });
        self.names.push(Named {
            name: "wage".into(),
            kind: JOB,
            ty: Ty::Money(Some(0)),
            degree: 0,
            varies: false,
            divides: false,
        });
        for at in 0..self.luck.below(3) {
            let owner = self.luck.below(self.kinds.len());
            let (name, of) = (format!("record_{at}"), self.kinds[owner].0.clone());
            self.say("record", None, &name, format!("record {name} of {of}"));
            self.kinds.push((name, Some(owner)));
        }
        for at in 0..self.luck.below(3) {
            let words: Vec<String> = (0..2 + self.luck.below(3))
                .map(|w| format!("word_{at}_{w}"))
                .collect();
            let name = format!("choice_{at}");
            self.say(
                "choice",
                None,
                &name,
                format!("choice {name} = {}", words.join(", ")),
            );
            self.choices.push(words);
        }
        if self.luck.percent(92) {
            self.pay();
        }
        for _ in 0..3 + self.luck.below(9) {
            self.part = self.luck.below(2);
            let kind = match self.luck.below(12) {
                0..=3 => HOUSEHOLD,
                4..=6 => ADULT,
                7..=8 => JOB,
                9 => MEMBER,
                _ => self.luck.below(self.kinds.len()),
            };
            let ty = self.any_type();
            let depth = 1 + self.luck.below(4);
            let mut piece = self.piece(
                ty,
                &[kind],
                depth,
                Room {
                    degree: 2,
                    steady: false,
                },
            );
            // Most figures vary with hours; what only a given-up one needs is left out later.
            for _ in 0..6 {
                if !piece.varies || piece.level == VALUE {
                    piece = self.piece(
                        ty,
                        &[kind],
                        depth.max(2),
                        Room {
                            degree: 2,
                            steady: false,
                        },
                    );
                }
            }
            self.figure_of(kind, ty, piece);
        }
        // Whatever nothing needs is shown.
        let figures: Vec<Named> = self
            .names
            .iter()
            .filter(|n| n.name.starts_with("figure"))
            .cloned()
            .collect();
        let twins = |name: &str| figures.iter().filter(|n| n.name == name).count() > 1;
        let uses = self.out.uses();
        let unused: Vec<Named> = figures
            .iter()
            .filter(|n| twins(&n.name) || !uses.contains_key(n.name.as_str()))
            .cloned()
            .collect();
        for named in unused {
            self.part = self.luck.below(2);
            self.shown(&named);
        }
        // Both dates are used.
        self.say(
            "note",
            Some(HOUSEHOLD),
            "later",
            "note later where assessment at least 2026-04-06".into(),
        );
        if self.luck.percent(30) {
            let when = self.piece(
                Ty::YesNo,
                &[HOUSEHOLD],
                2,
                Room {
                    degree: 2,
                    steady: false,
                },
            );
            self.say(
                "hold",
                Some(HOUSEHOLD),
                "",
                format!("hold where {} because \"it is so\"", when.text),
            );
        }
    }

    /// Figures that vary with hours, for the others to build on: pay by the job, by the adult and for all, a share of it, and its square.
    fn pay(&mut self) {
        let varying = |text: String, degree| Piece {
            text,
            level: SHAPED,
            degree,
            varies: true,
        };
        self.figure_of(JOB, Ty::Money(Some(2)), varying("wage * hours".into(), 1));
        let of_job = self.names[self.names.len() - 1].name.clone();
        let by = self.conversion(2, MONTH);
        self.figure_of(
            ADULT,
            Ty::Money(Some(MONTH)),
            varying(format!("sum over job of {of_job} converted by {by}"), 1),
        );
        let of_adult = self.names[self.names.len() - 1].name.clone();
        if self.luck.percent(80) {
            self.figure_of(
                HOUSEHOLD,
                Ty::Money(Some(MONTH)),
                varying(format!("sum over adult of {of_adult}"), 1),
            );
        }
        for (kind, ty, of) in [
            (JOB, Ty::Money(Some(2)), of_job),
            (ADULT, Ty::Money(Some(MONTH)), of_adult),
        ] {
            if self.luck.percent(60) {
                let by = self.literal(ty).text.replace("money 0 ", "money 120 ");
                let number = *self.luck.pick(&[Ty::Number, Ty::Rate]);
                self.figure_of(kind, number, varying(format!("{of} / {by}"), 1));
                let share = self.names[self.names.len() - 1].name.clone();
                if self.luck.percent(60) {
                    let text = format!("{of} * ({} - {share})", self.luck.between(1, 9));
                    self.figure_of(kind, ty, varying(text, 2));
                }
            }
        }
    }

    fn fresh(&mut self, stem: &str) -> String {
        self.made += 1;
        format!("{stem}_{}", self.made)
    }

    fn kind_name(&self, kind: usize) -> String {
        if kind == MEMBER {
            "member".into()
        } else {
            self.kinds[kind].0.clone()
        }
    }

    fn say(&mut self, keyword: &'static str, per: Option<usize>, name: &str, text: String) {
        let per = per.map(|kind| self.kind_name(kind));
        self.out.statements.push(Statement {
            part: self.part,
            per,
            keyword,
            name: name.into(),
            text,
        });
    }

    fn figure_of(&mut self, kind: usize, ty: Ty, piece: Piece) {
        // Now and then a name that another kind has too.
        let others: Vec<String> = self
            .names
            .iter()
            .filter(|n| n.kind != kind && n.name.starts_with("figure"))
            .map(|n| n.name.clone())
            .collect();
        let name = if !others.is_empty() && self.luck.percent(2) {
            self.luck.pick(&others).clone()
        } else {
            self.fresh("figure")
        };
        self.say(
            "figure",
            Some(kind),
            &name,
            format!("figure {name}: {} = {}", self.type_text(ty), piece.text),
        );
        self.names.push(Named {
            name,
            kind,
            ty,
            degree: piece.degree,
            varies: piece.varies,
            divides: false,
        });
    }

    /// An item or note that needs a figure.
    fn shown(&mut self, named: &Named) {
        let (name, kind) = (&named.name, named.kind);
        let item = self.fresh("item");
        let money = *self.luck.pick(&[
            "income",
            "tax",
            "contribution",
            "pension",
            "loan",
            "benefit",
            "cost",
            "housing",
            "pay",
        ]);
        let text = match named.ty {
            Ty::Money(Some(MONTH)) => name.clone(),
            Ty::Money(Some(period)) => {
                let by = self.conversion(period, MONTH);
                format!("{name} converted by {by}")
            }
            Ty::Rate | Ty::Number | Ty::Count => {
                format!("money {} a month * {name}", 1 + self.luck.below(100))
            }
            Ty::Money(None) | Ty::Hours | Ty::Date => {
                let limit = self.leaf(
                    named.ty,
                    &[kind],
                    Room {
                        degree: 0,
                        steady: true,
                    },
                );
                format!(
                    "where {name} above {} give money 10 a month otherwise 0",
                    limit.at(SHAPED)
                )
            }
            Ty::YesNo if self.luck.percent(50) => {
                return self.say(
                    "note",
                    Some(kind),
                    &item,
                    format!("note {item} where {name}"),
                );
            }
            Ty::YesNo => {
                return self.say(
                    "item",
                    Some(kind),
                    &item,
                    format!("item {item}: passport = {name} see \"s.1\""),
                );
            }
            Ty::Choice(at) => {
                let word = self.choices[at][0].clone();
                return self.say(
                    "note",
                    Some(kind),
                    &item,
                    format!("note {item} where {name} is {word}"),
                );
            }
        };
        let ending = match self.luck.below(8) {
            0 => " rounded down to 0.01",
            1 => " rounded up to 1 as a slope",
            _ => "",
        };
        // `where` goes on as far as it can.
        let text = if text.starts_with("where") && !ending.is_empty() {
            format!("({text})")
        } else {
            text
        };
        let claimed = if self.luck.percent(15) {
            format!(
                " claimed where {}",
                self.piece(
                    Ty::YesNo,
                    &[kind],
                    2,
                    Room {
                        degree: 2,
                        steady: false
                    }
                )
                .text
            )
        } else {
            String::new()
        };
        self.say(
            "item",
            Some(kind),
            &item,
            format!("item {item}: {money} = {text}{ending}{claimed} see \"s.1\""),
        );
    }

    fn any_type(&mut self) -> Ty {
        match self.luck.below(20) {
            0..=4 => Ty::Money(Some(MONTH)),
            5..=9 => Ty::Money(Some(self.luck.below(5))),
            10 => Ty::Money(None),
            11 => Ty::Rate,
            12 => Ty::Hours,
            13 | 14 => Ty::Number,
            15 | 16 => Ty::Count,
            17 => Ty::Date,
            18 if !self.choices.is_empty() => Ty::Choice(self.luck.below(self.choices.len())),
            _ => Ty::YesNo,
        }
    }

    fn any_quantity(&mut self) -> Ty {
        loop {
            match self.any_type() {
                Ty::Date | Ty::YesNo | Ty::Choice(_) => {}
                ty => return ty,
            }
        }
    }

    fn type_text(&self, ty: Ty) -> String {
        match ty {
            Ty::Money(None) => "money".into(),
            Ty::Money(Some(0)) => "money an hour".into(),
            Ty::Money(Some(period)) => format!("money a {}", PERIODS[period]),
            Ty::Rate => "rate".into(),
            Ty::Hours => "hours".into(),
            Ty::Number => "number".into(),
            Ty::Count => "count".into(),
            Ty::Date => "date".into(),
            Ty::YesNo => "yesno".into(),
            Ty::Choice(at) => format!("choice_{at}"),
        }
    }

    /// A number with up to two decimals.
    fn decimal(&mut self, most: i64) -> String {
        let hundredths = match self.luck.below(3) {
            0 => self.luck.between(0, most) * 100,
            1 => self.luck.between(0, most * 4) * 25,
            _ => self.luck.between(0, most * 100),
        };
        if hundredths % 100 == 0 {
            format!("{}", hundredths / 100)
        } else {
            format!("{}.{:02}", hundredths / 100, hundredths % 100)
        }
    }

    fn size(&mut self, ty: Ty) -> String {
        let most = match ty {
            Ty::Money(Some(0)) => 30,
            Ty::Money(Some(1)) => 100,
            Ty::Money(Some(2)) => 500,
            Ty::Money(Some(4)) => 30_000,
            Ty::Money(_) => 2500,
            Ty::Rate => 100,
            Ty::Hours => 50,
            _ => 12,
        };
        self.decimal(most)
    }

    fn literal(&mut self, ty: Ty) -> Piece {
        Piece::plain(match ty {
            Ty::Money(None) => format!("money {}", self.size(ty)),
            Ty::Money(Some(period)) => format!(
                "money {} {} {}",
                self.size(ty),
                if period == 0 { "an" } else { "a" },
                PERIODS[period]
            ),
            Ty::Rate => format!("{}%", self.size(ty)),
            Ty::Hours => format!("{} hours", self.size(ty)),
            Ty::Number => self.size(ty),
            Ty::Count => format!("{}", self.luck.below(13)),
            Ty::Date => (*self.luck.pick(&[
                "2025-06-01",
                "2026-04-06",
                "2008-02-29",
                "1990-01-01",
                "2017-04-06",
            ]))
            .to_owned(),
            Ty::YesNo => (*self.luck.pick(&["yes", "no"])).to_owned(),
            Ty::Choice(at) => {
                let words = self.choices[at].clone();
                self.luck.pick(&words).clone()
            }
        })
    }

    fn owners(&self, kind: usize) -> Vec<usize> {
        let mut out = vec![kind];
        let mut at = if kind == MEMBER {
            Some(HOUSEHOLD)
        } else {
            self.kinds[kind].1
        };
        while let Some(owner) = at {
            out.push(owner);
            at = self.kinds[owner].1;
        }
        out
    }

    fn belongs(named: &Named, kind: usize) -> bool {
        named.kind == kind
            || (named.kind == MEMBER && [ADULT, CHILD, OTHER].contains(&kind))
            || (kind == MEMBER && named.name == "birth")
    }

    /// Names of a type that may stand here.
    fn reachable(&self, ty: Ty, scopes: &[usize], room: Room) -> Vec<Named> {
        let kinds: Vec<usize> = scopes.iter().flat_map(|kind| self.owners(*kind)).collect();
        let fits = |n: &&Named| {
            n.ty == ty
                && n.degree <= room.degree
                && (!room.steady || !n.varies)
                && kinds.iter().any(|k| Self::belongs(n, *k))
        };
        self.names.iter().filter(fits).cloned().collect()
    }

    fn new_fact(&mut self, ty: Ty, kind: usize, divides: bool) -> Named {
        let name = self.fresh("fact");
        let range = match ty {
            Ty::Money(_) if divides => " from 40 to 500",
            Ty::Money(Some(0)) => " from 0 to 100",
            Ty::Money(_) => {
                *self
                    .luck
                    .pick(&[" from 0 to 1000", " from 0 to 20000", " from 10 to 5000"])
            }
            Ty::Rate if divides => " from 1% to 90%",
            Ty::Rate => *self.luck.pick(&["", " from 5% to 50%"]),
            Ty::Hours if divides => " from 1 to 24",
            Ty::Hours => *self.luck.pick(&["", " from 0 to 60"]),
            Ty::Number if divides => " from 0.5 to 52",
            Ty::Number => *self
                .luck
                .pick(&[" from 0 to 100", " from -5 to 5", " from 1 to 52"]),
            Ty::Count if divides => " from 1 to 20",
            Ty::Count => *self
                .luck
                .pick(&[" from 0 to 10", " from -3 to 4", " from 1 to 20"]),
            Ty::Date | Ty::YesNo | Ty::Choice(_) => "",
        };
        let default = match ty {
            Ty::YesNo if self.luck.percent(50) => "default no",
            _ => "required",
        };
        let (of, ty_text) = (self.kind_name(kind), self.type_text(ty));
        self.say(
            "fact",
            None,
            &name,
            format!("fact {name} of {of}: {ty_text}{range} {default} ask \"What is it?\""),
        );
        let named = Named {
            name,
            kind,
            ty,
            degree: 0,
            varies: false,
            divides,
        };
        self.names.push(named.clone());
        named
    }

    fn new_amount(&mut self, ty: Ty) -> String {
        let name = self.fresh("amount");
        let (unit, period) = match ty {
            Ty::Money(period) => ("GBP", period.map_or("", |p| PERIODS[p])),
            Ty::Rate => ("percent", ""),
            Ty::Hours => ("hours", ""),
            Ty::Number => ("number", ""),
            Ty::Count => ("count", ""),
            Ty::Date => ("date", ""),
            Ty::YesNo | Ty::Choice(_) => ("yesno", ""),
        };
        let mut rows = String::new();
        for (from, to) in self.spells() {
            let absent = self.luck.percent(3);
            let value = match ty {
                _ if absent => String::new(),
                Ty::Count => format!("{}", self.luck.below(13)),
                Ty::Date | Ty::YesNo => self.literal(ty).text,
                // A divisor is not nothing.
                _ => match self.size(ty) {
                    zero if zero == "0" => "1".into(),
                    other => other,
                },
            };
            let status = if absent {
                "absent"
            } else {
                *self.luck.pick(&["read", "memory"])
            };
            rows += &format!("{name},{from},{to},{value},{unit},{period},a book,s.1,{status}\n");
            if absent {
                self.say(
                    "hold",
                    Some(HOUSEHOLD),
                    "",
                    format!("hold where missing {name} because \"it is missing\""),
                );
            }
        }
        self.out.amounts.push((name.clone(), rows));
        self.amounts.push((name.clone(), ty));
        name
    }

    /// Spells of days that cover the whole pack: one, or two that meet at a change.
    fn spells(&mut self) -> Vec<(String, String)> {
        let [start, autumn, spring, _] = DAYS.map(str::to_owned);
        match self.luck.below(4) {
            0 => vec![(start, "2025-09-30".into()), (autumn, String::new())],
            1 => vec![(start, "2026-04-05".into()), (spring, "2027-04-05".into())],
            _ => vec![("2024-01-01".into(), String::new())],
        }
    }

    fn amount(&mut self, ty: Ty) -> String {
        let known: Vec<String> = self
            .amounts
            .iter()
            .filter(|(_, t)| *t == ty)
            .map(|(name, _)| name.clone())
            .collect();
        if !known.is_empty() && self.luck.percent(60) {
            self.luck.pick(&known).clone()
        } else {
            self.new_amount(ty)
        }
    }

    /// A value without parts.
    fn leaf(&mut self, ty: Ty, scopes: &[usize], room: Room) -> Piece {
        let known = self.reachable(ty, scopes, room);
        match self.luck.below(10) {
            0..=5 if !known.is_empty() => {
                // Later figures, and those that vary, make the deeper packs.
                let varying: Vec<Named> = known.iter().filter(|n| n.varies).cloned().collect();
                let from = if !varying.is_empty() && self.luck.percent(75) {
                    &varying
                } else {
                    &known
                };
                let named = self.luck.pick(from).clone();
                Piece {
                    text: named.name,
                    level: VALUE,
                    degree: named.degree,
                    varies: named.varies,
                }
            }
            6 | 7 => {
                let kinds: Vec<usize> = scopes.iter().flat_map(|kind| self.owners(*kind)).collect();
                let kind = *self.luck.pick(&kinds);
                Piece::plain(self.new_fact(ty, kind, false).name)
            }
            8 if !matches!(ty, Ty::Choice(_)) => Piece::plain(self.amount(ty)),
            _ if ty == Ty::Date && self.luck.percent(60) => {
                Piece::plain((*self.luck.pick(&["assessment", "payment", "date"])).to_owned())
            }
            _ => self.literal(ty),
        }
    }

    fn join(
        &self,
        op: &str,
        left: &Piece,
        left_level: u8,
        right: &Piece,
        right_level: u8,
        level: u8,
    ) -> Piece {
        Piece {
            text: format!("{} {op} {}", left.at(left_level), right.at(right_level)),
            level,
            degree: left.degree.max(right.degree),
            varies: left.varies || right.varies,
        }
    }

    /// A kind to go over from here, and the word for it.
    fn any_kind(&mut self) -> usize {
        if self.luck.percent(10) {
            MEMBER
        } else {
            self.luck.below(self.kinds.len())
        }
    }

    fn with(&mut self, scopes: &[usize], depth: usize, room: Room) -> (String, bool) {
        if self.luck.percent(55) {
            return (String::new(), false);
        }
        let when = self.piece(Ty::YesNo, scopes, depth, room);
        (format!(" with ({})", when.text), when.varies)
    }

    /// The name of something to order by.
    fn key(&mut self, scopes: &[usize], kind: usize, room: Room) -> Named {
        let mut known: Vec<Named> = self
            .names
            .iter()
            .filter(|n| Self::belongs(n, kind) && !matches!(n.ty, Ty::Choice(_)))
            .cloned()
            .collect();
        known.retain(|n| n.degree <= room.degree && (!room.steady || !n.varies));
        if known.is_empty() || self.luck.percent(20) {
            let _ = scopes;
            return self.new_fact(Ty::Count, kind, false);
        }
        self.luck.pick(&known).clone()
    }

    /// An expression of a type.
    fn piece(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
        if depth == 0 {
            return self.leaf(ty, scopes, room);
        }
        let deeper = depth - 1;
        match self.luck.below(16) {
            0 | 1 => self.leaf(ty, scopes, room),
            2 | 3 => {
                let when = self.piece(Ty::YesNo, scopes, deeper, room);
                let give = self.piece(ty, scopes, deeper, room);
                let otherwise = self.zero_or(ty, scopes, deeper, room);
                let text = format!(
                    "where {} give {} otherwise {}",
                    when.text, give.text, otherwise.text
                );
                // It goes on as far as it can, so it stands alone.
                Piece {
                    text,
                    level: EITHER + 1,
                    degree: give.degree.max(otherwise.degree),
                    varies: when.varies || give.varies || otherwise.varies,
                }
            }
            4 => self.search(ty, scopes, deeper, room),
            5 if self.luck.percent(35) => self.as_if(ty, scopes, deeper, room),
            5 => self.relation(ty, scopes, deeper, room),
            6 if self.luck.percent(50) => self.lookup(ty, scopes, deeper),
            6 => self.on_scale(ty, scopes, deeper, room),
            _ => match ty {
                Ty::YesNo => self.condition(scopes, deeper, room),
                Ty::Date | Ty::Choice(_) => self.leaf(ty, scopes, room),
                Ty::Money(_) | Ty::Rate | Ty::Hours | Ty::Number | Ty::Count => {
                    self.quantity(ty, scopes, deeper, room)
                }
            },
        }
    }

    fn zero_or(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
        let quantity = !matches!(ty, Ty::Date | Ty::YesNo | Ty::Choice(_));
        if quantity && self.luck.percent(25) {
            Piece::plain("0".into())
        } else {
            self.piece(ty, scopes, depth, room)
        }
    }

    fn search(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
        let kind = self.any_kind();
        let inside = [scopes, &[kind]].concat();
        let quantity = !matches!(ty, Ty::Date | Ty::YesNo | Ty::Choice(_));
        let name = self.kind_name(kind);
        match self.luck.below(3) {
            0 | 1 if quantity => {
                let (with, varies) = self.with(&inside, depth, room);
                if ty == Ty::Count && self.luck.percent(50) {
                    return Piece {
                        text: format!("count of {name}{with}"),
                        level: VALUE,
                        degree: 0,
                        varies,
                    };
                }
                let body = self.piece(ty, &inside, depth, room);
                Piece {
                    text: format!("sum over {name}{with} of {}", body.at(VALUE)),
                    level: VALUE,
                    degree: body.degree,
                    varies: varies || body.varies,
                }
            }
            0 | 1 if ty == Ty::YesNo => {
                let when = self.piece(Ty::YesNo, &inside, depth, room);
                let word = if self.luck.percent(50) {
                    "any"
                } else {
                    "every"
                };
                Piece {
                    text: format!("{word} {name} with ({})", when.text),
                    level: VALUE,
                    degree: 0,
                    varies: when.varies,
                }
            }
            _ if kind == MEMBER => self.leaf(ty, scopes, room),
            _ => {
                let key = self.key(&inside, kind, room);
                let (with, varies) = self.with(&inside, depth, room);
                let down = if self.luck.percent(50) { " down" } else { "" };
                let here = *scopes.last().expect("a scope");
                if ty == Ty::Count && here != HOUSEHOLD && here != MEMBER && self.luck.percent(50) {
                    let key = self.key(scopes, here, room);
                    let here = [scopes, &[here]].concat();
                    let (with, varies) = self.with(&here, depth, room);
                    return Piece {
                        text: format!("place by {}{down}{with}", key.name),
                        level: VALUE,
                        degree: 0,
                        varies: key.varies || varies,
                    };
                }
                let give = self.piece(ty, &inside, depth, room);
                let failing = self.zero_or(ty, scopes, depth, room);
                Piece {
                    text: format!(
                        "first {name} by {}{down}{with} give {} failing {}",
                        key.name,
                        give.at(VALUE),
                        failing.at(VALUE)
                    ),
                    level: VALUE,
                    degree: give.degree.max(failing.degree).max(key.degree),
                    varies: key.varies || varies || give.varies || failing.varies,
                }
            }
        }
    }

    /// `… of partner failing …`, or of an owner.
    fn relation(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
        let kinds: Vec<usize> = scopes.iter().flat_map(|kind| self.owners(*kind)).collect();
        let fits = |n: &&Named, kind| {
            n.ty == ty
                && Self::belongs(n, kind)
                && n.degree <= room.degree
                && (!room.steady || !n.varies)
        };
        if kinds.contains(&ADULT) && self.luck.percent(60) {
            let of_adult: Vec<Named> = self
                .names
                .iter()
                .filter(|n| fits(n, ADULT))
                .cloned()
                .collect();
            let named = if of_adult.is_empty() {
                self.new_fact(ty, ADULT, false)
            } else {
                self.luck.pick(&of_adult).clone()
            };
            let failing = self.zero_or(ty, scopes, depth, room);
            let text = format!("{} of partner failing {}", named.name, failing.at(VALUE));
            return Piece {
                text,
                level: VALUE,
                degree: named.degree.max(failing.degree),
                varies: named.varies || failing.varies,
            };
        }
        let kind = *self.luck.pick(&kinds);
        let known: Vec<Named> = self
            .names
            .iter()
            .filter(|n| fits(n, kind))
            .cloned()
            .collect();
        if known.is_empty() || kind == MEMBER {
            return self.leaf(ty, scopes, room);
        }
        let named = self.luck.pick(&known).clone();
        Piece {
            text: format!("{} of {}", named.name, self.kind_name(kind)),
            level: VALUE,
            degree: named.degree,
            varies: named.varies,
        }
    }

    /// A figure once more, as if facts were otherwise.
    fn as_if(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
        let steady = Room {
            degree: 0,
            steady: true,
        };
        let figures: Vec<Named> = self
            .reachable(ty, scopes, room)
            .into_iter()
            .filter(|n| n.name.starts_with("figure"))
            .collect();
        let kinds: Vec<usize> = scopes.iter().flat_map(|kind| self.owners(*kind)).collect();
        let facts: Vec<Named> = self
            .names
            .iter()
            .filter(|n| !n.name.starts_with("figure") && kinds.iter().any(|k| Self::belongs(n, *k)))
            .cloned()
            .collect();
        if figures.is_empty() || facts.is_empty() || room.steady || room.degree == 0 {
            return self.relation(ty, scopes, depth, room);
        }
        let figure = self.luck.pick(&figures).clone();
        let mut changes = Vec::new();
        for _ in 0..1 + self.luck.below(2) {
            let fact = self.luck.pick(&facts).clone();
            // Most of these lie in the range of the fact.
            let value = match fact.ty {
                Ty::Count => Piece::plain(format!("{}", self.luck.between(0, 3))),
                Ty::Rate => Piece::plain(format!("{}%", self.luck.between(4, 50))),
                Ty::Money(Some(0)) | Ty::Hours => Piece::plain(self.literal(fact.ty).text),
                _ if self.luck.percent(70) => self.literal(fact.ty),
                _ => self.piece(fact.ty, scopes, depth.min(1), steady),
            };
            changes.push(format!("{} is {}", fact.name, value.at(VALUE)));
        }
        Piece {
            text: format!("{} as if ({})", figure.name, changes.join(" and ")),
            level: VALUE,
            degree: figure.degree.max(1),
            varies: true,
        }
    }

    fn lookup(&mut self, ty: Ty, scopes: &[usize], depth: usize) -> Piece {
        if matches!(ty, Ty::Date | Ty::YesNo | Ty::Choice(_)) {
            return self.leaf(
                ty,
                scopes,
                Room {
                    degree: 0,
                    steady: true,
                },
            );
        }
        let known: Vec<usize> = (0..self.tables.len())
            .filter(|t| self.tables[*t].2 == ty)
            .collect();
        let at = if known.is_empty() || self.luck.percent(30) {
            self.new_table(ty)
        } else {
            *self.luck.pick(&known)
        };
        let (name, keys, _) = self.tables[at].clone();
        let keys: Vec<String> = keys
            .into_iter()
            .map(|key| {
                let ty = key.map_or(Ty::Count, Ty::Choice);
                self.piece(
                    ty,
                    scopes,
                    depth.min(1),
                    Room {
                        degree: 0,
                        steady: true,
                    },
                )
                .text
            })
            .collect();
        Piece::plain(format!("{name}[{}]", keys.join(", ")))
    }

    fn new_table(&mut self, ty: Ty) -> usize {
        let name = self.fresh("table");
        let mut keys: Vec<Option<usize>> = vec![None];
        if !self.choices.is_empty() && self.luck.percent(60) {
            keys.insert(
                self.luck.below(2),
                Some(self.luck.below(self.choices.len())),
            );
        }
        let words: Vec<String> = keys
            .iter()
            .map(|key| key.map_or("count".into(), |at| format!("choice_{at}")))
            .collect();
        let gives = self.type_text(ty);
        self.say(
            "table",
            None,
            &name,
            format!("table {name} by {} gives {gives}", words.join(", ")),
        );
        let low = self.luck.between(0, 2);
        let mut combinations: Vec<Vec<String>> = vec![Vec::new()];
        for key in &keys {
            let values: Vec<String> = match key {
                Some(at) => self.choices[*at].clone(),
                None => (low..low + 3).map(|n| n.to_string()).collect(),
            };
            combinations = combinations
                .iter()
                .flat_map(|c| values.iter().map(|v| [c.clone(), vec![v.clone()]].concat()))
                .collect();
        }
        let mut text: String = (0..keys.len()).map(|k| format!("key_{k},")).collect();
        text += "from,to,value,source,locator,status\n";
        for (from, to) in self.spells() {
            for combination in &combinations {
                let value = if ty == Ty::Count {
                    format!("{}", self.luck.below(9))
                } else {
                    self.size(ty)
                };
                text += &format!(
                    "{},{from},{to},{value},a book,s.1,read\n",
                    combination.join(",")
                );
            }
        }
        self.out.tables.push((name.clone(), text));
        self.tables.push((name, keys, ty));
        self.tables.len() - 1
    }

    /// A ladder's place: the innermost record at hand, or one of its owners.
    fn ladder_kind(&mut self, scopes: &[usize]) -> usize {
        let kinds: Vec<usize> = self
            .owners(*scopes.last().expect("a scope"))
            .into_iter()
            .filter(|kind| *kind != MEMBER)
            .collect();
        *self.luck.pick(&kinds)
    }

    /// Limits that rise: fixed ones, or what lies above a figure.
    fn limits(&mut self, ty: Ty, kind: usize, many: usize, room: Room) -> Vec<Piece> {
        let known = self.reachable(ty, &[kind], room);
        let base = if known.is_empty() || self.luck.percent(60) {
            None
        } else {
            Some(self.luck.pick(&known).clone())
        };
        let mut fixed: Vec<i64> = (0..many).map(|_| self.luck.between(1, 60)).collect();
        fixed.sort_unstable();
        fixed.dedup();
        let size = match ty {
            Ty::Money(Some(4)) => 500,
            Ty::Money(Some(0)) | Ty::Hours | Ty::Number | Ty::Count => 1,
            Ty::Rate => 2,
            _ => 25,
        };
        fixed
            .into_iter()
            .map(|n| {
                let number = n * size;
                let text = match ty {
                    Ty::Money(None) => format!("money {number}"),
                    Ty::Money(Some(period)) => format!("money {number} a {}", PERIODS[period]),
                    Ty::Hours => format!("{number} hours"),
                    Ty::Rate => format!("{number}%"),
                    _ => format!("{number}"),
                };
                match &base {
                    None => Piece::plain(text),
                    Some(named) => Piece {
                        text: format!("{} + {text}", named.name),
                        level: SUM,
                        degree: named.degree,
                        varies: named.varies,
                    },
                }
            })
            .collect()
    }

    fn charged(&mut self, ty: Ty, scopes: &[usize], of: &Piece, room: Room) -> Piece {
        let reach = self.owners(*scopes.last().expect("a scope"));
        let known: Vec<String> = self
            .bands
            .iter()
            .filter(|(_, kind, t)| *t == ty && reach.contains(kind))
            .map(|(name, ..)| name.clone())
            .collect();
        let mut degree = of.degree;
        let name = if known.is_empty() || room.steady || self.luck.percent(50) {
            let kind = self.ladder_kind(scopes);
            let name = self.fresh("bands");
            let many = 1 + self.luck.below(3);
            let mut text = format!("bands {name} of {}", self.type_text(ty));
            for limit in self.limits(
                ty,
                kind,
                many,
                Room {
                    degree: room.degree.min(1),
                    ..room
                },
            ) {
                degree = degree.max(limit.degree);
                let rate = self.leaf(
                    Ty::Rate,
                    &[kind],
                    Room {
                        degree: 0,
                        steady: true,
                    },
                );
                text += &format!("\nband {} up to {}", rate.at(SUM), limit.at(SUM));
            }
            let rate = self.leaf(
                Ty::Rate,
                &[kind],
                Room {
                    degree: 0,
                    steady: true,
                },
            );
            text += &format!("\nband {} beyond", rate.at(SUM));
            self.say("bands", Some(kind), &name, text);
            self.bands.push((name.clone(), kind, ty));
            name
        } else {
            self.luck.pick(&known).clone()
        };
        Piece {
            text: format!("{} charged by {name}", of.at(SHAPED)),
            level: SHAPED,
            degree: degree.max(1),
            varies: true,
        }
    }

    fn on_scale(&mut self, gives: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
        if matches!(gives, Ty::Date | Ty::YesNo | Ty::Choice(_)) {
            return self.leaf(gives, scopes, room);
        }
        let reach = self.owners(*scopes.last().expect("a scope"));
        let known: Vec<(String, Ty)> = self
            .scales
            .iter()
            .filter(|(_, kind, _, g)| *g == gives && reach.contains(kind))
            .map(|(name, _, ty, _)| (name.clone(), *ty))
            .collect();
        let mut degree = 0;
        let (name, ty) = if known.is_empty() || room.steady || self.luck.percent(50) {
            let kind = self.ladder_kind(scopes);
            let ty = self.any_quantity();
            let name = self.fresh("scale");
            let mut text = format!(
                "scale {name} of {} gives {}",
                self.type_text(ty),
                self.type_text(gives)
            );
            let many = 1 + self.luck.below(3);
            for limit in self.limits(ty, kind, many, room) {
                let value = self.leaf(gives, &[kind], room);
                degree = degree.max(value.degree);
                let word = if self.luck.percent(50) {
                    "up to"
                } else {
                    "below"
                };
                text += &format!("\nstep {} {word} {}", value.at(SUM), limit.at(SUM));
            }
            let value = self.leaf(gives, &[kind], room);
            degree = degree.max(value.degree);
            text += &format!("\nstep {} beyond", value.at(SUM));
            self.say("scale", Some(kind), &name, text);
            self.scales.push((name.clone(), kind, ty, gives));
            (name, ty)
        } else {
            self.luck.pick(&known).clone()
        };
        let of = self.piece(ty, scopes, depth, room);
        Piece {
            text: format!("{} placed on {name}", of.at(SHAPED)),
            level: SHAPED,
            degree: degree.max(u8::from(!room.steady)),
            varies: !room.steady,
        }
    }

    fn conversion(&mut self, from: usize, to: usize) -> String {
        let name = format!("{}_to_{}", PERIODS[from], PERIODS[to]);
        if !self.conversions.contains(&(from, to)) {
            self.conversions.push((from, to));
            let weekly = ["40", "5", "1", "12/52", "1/52"][from];
            let times = match (from, to) {
                (2, 3) => "52/12",
                (3, 2) => "12/52",
                (4, 3) => "1/12",
                (3, 4) => "12",
                _ if self.luck.percent(50) => weekly,
                _ => *self.luck.pick(&["365/84", "1/7", "0.35", "4.33", "52"]),
            };
            self.say(
                "conversion",
                None,
                &name,
                format!(
                    "conversion {name} from {} to {} times {times} see \"s.1\"",
                    PERIODS[from], PERIODS[to]
                ),
            );
        }
        name
    }

    /// A rounding of a piece.
    fn rounded(&mut self, ty: Ty, of: &Piece) -> Piece {
        let way = *self
            .luck
            .pick(&["up", "down", "half up", "half down", "half even"]);
        let fine: &[&str] = match ty {
            Ty::Money(_) => &["0.01", "0.01", "1", "0.5", "10", "0.1"],
            Ty::Rate => &["1%", "0.5%", "0.01", "0.1"],
            Ty::Count => &["1", "2", "3"],
            _ => &["1", "0.1", "0.25", "2", "0.3"],
        };
        // Stairs are few: each step is a place of its own on the walk.
        let coarse: &[&str] = match ty {
            Ty::Money(Some(4)) => &["1000", "2500"],
            Ty::Money(Some(0 | 1)) => &["5", "1"],
            Ty::Money(_) => &["50", "100", "25"],
            Ty::Rate => &["10%", "25%"],
            _ => &["1", "2", "5"],
        };
        let steps = self.luck.percent(if of.varies { 40 } else { 10 });
        let unit = if steps {
            *self.luck.pick(coarse)
        } else {
            *self.luck.pick(fine)
        };
        let minor = matches!(ty, Ty::Money(_)) && unit == "0.01";
        let manner = match (steps, of.varies && !minor) {
            (true, _) => " as steps",
            (false, true) if !self.luck.percent(2) => " as a slope",
            (false, _) => "",
        };
        Piece {
            text: format!("{} rounded {way} to {unit}{manner}", of.at(SHAPED)),
            level: SHAPED,
            degree: if steps { 0 } else { of.degree },
            varies: of.varies,
        }
    }

    fn quantity(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
        let scalar = matches!(ty, Ty::Rate | Ty::Number | Ty::Count);
        match self.luck.below(14) {
            0 | 1 => {
                let (left, right) = (
                    self.piece(ty, scopes, depth, room),
                    self.zero_or(ty, scopes, depth, room),
                );
                let sign = *self.luck.pick(&["+", "-"]);
                self.join(sign, &left, SUM, &right, PRODUCT, SUM)
            }
            2 | 3 if ty != Ty::Count => {
                let left = self.piece(ty, scopes, depth, room);
                let factor = *self.luck.pick(&[Ty::Rate, Ty::Number, Ty::Count]);
                let right = self.piece(
                    factor,
                    scopes,
                    depth,
                    Room {
                        degree: room.degree - left.degree.min(room.degree),
                        steady: room.steady,
                    },
                );
                let degree = left.degree + right.degree;
                let (left, right) = if self.luck.percent(50) {
                    (left, right)
                } else {
                    (right, left)
                };
                Piece {
                    degree,
                    ..self.join("*", &left, PRODUCT, &right, VALUE, PRODUCT)
                }
            }
            4 if ty == Ty::Money(Some(2)) => {
                let left = self.piece(
                    Ty::Money(Some(0)),
                    scopes,
                    depth,
                    Room {
                        degree: room.degree.min(1),
                        ..room
                    },
                );
                let right = self.piece(
                    Ty::Hours,
                    scopes,
                    depth,
                    Room {
                        degree: room.degree - left.degree.min(room.degree),
                        steady: room.steady,
                    },
                );
                Piece {
                    degree: left.degree + right.degree,
                    ..self.join("*", &left, PRODUCT, &right, VALUE, PRODUCT)
                }
            }
            5 if ty != Ty::Count => {
                // Over a fixed number, or (to a number) over a fixed sum of the same kind.
                let ratio = matches!(ty, Ty::Number | Ty::Rate) && self.luck.percent(70);
                let of = if ratio {
                    *self
                        .luck
                        .pick(&[Ty::Money(Some(2)), Ty::Money(Some(MONTH)), Ty::Hours])
                } else {
                    ty
                };
                let left = self.piece(of, scopes, depth, room);
                let by = if ratio { of } else { Ty::Number };
                let right = match self.literal(by).text {
                    _ if self.luck.percent(50) => self.amount(by),
                    zero if zero.split(' ').any(|w| w == "0") => self.amount(by),
                    text => text,
                };
                self.join("/", &left, PRODUCT, &Piece::plain(right), VALUE, PRODUCT)
            }
            6 if matches!(ty, Ty::Rate | Ty::Number) || (!scalar && self.luck.percent(50)) => {
                // Over a fact, rounded at once.
                let left = self.piece(
                    if scalar { Ty::Money(Some(2)) } else { ty },
                    scopes,
                    depth,
                    room,
                );
                let wanted = if scalar {
                    Ty::Money(Some(2))
                } else {
                    *self.luck.pick(&[Ty::Count, Ty::Number])
                };
                let kinds: Vec<usize> = scopes.iter().flat_map(|kind| self.owners(*kind)).collect();
                let known: Vec<Named> = self
                    .reachable(
                        wanted,
                        scopes,
                        Room {
                            degree: 0,
                            steady: true,
                        },
                    )
                    .into_iter()
                    .filter(|n| n.divides)
                    .collect();
                let by = if known.is_empty() || self.luck.percent(30) {
                    let kind = *self.luck.pick(&kinds);
                    self.new_fact(wanted, kind, true)
                } else {
                    self.luck.pick(&known).clone()
                };
                let way = *self
                    .luck
                    .pick(&["up", "down", "half up", "half down", "half even"]);
                let unit = match (left.varies, ty) {
                    (true, Ty::Money(_)) => "50",
                    (true, _) => "5",
                    (false, Ty::Money(_)) => "0.01",
                    (false, _) => *self.luck.pick(&["0.01", "1", "0.5"]),
                };
                let manner = if left.varies { " as steps" } else { "" };
                let text = format!(
                    "{} / {} rounded {way} to {unit}{manner}",
                    left.at(PRODUCT),
                    by.name
                );
                Piece {
                    text,
                    level: SHAPED,
                    degree: 0,
                    varies: left.varies,
                }
            }
            7 | 8 => {
                let op = *self.luck.pick(&["beyond", "limited to", "raised to"]);
                let (left, right) = (
                    self.piece(ty, scopes, depth, room),
                    self.zero_or(ty, scopes, depth, room),
                );
                self.join(op, &left, SHAPED, &right, SUM, SHAPED)
            }
            9 => {
                if ty == Ty::Count {
                    let of = self.piece(Ty::Number, scopes, depth, room);
                    return self.rounded(ty, &of);
                }
                let of = self.piece(ty, scopes, depth, room);
                self.rounded(ty, &of)
            }
            10 => match ty {
                Ty::Money(Some(to)) => {
                    let from = (to + 1 + self.luck.below(4)) % 5;
                    let of = self.piece(Ty::Money(Some(from)), scopes, depth, room);
                    let by = self.conversion(from, to);
                    Piece {
                        text: format!("{} converted by {by}", of.at(SHAPED)),
                        level: SHAPED,
                        ..of
                    }
                }
                Ty::Count => {
                    let from = self.leaf(
                        Ty::Date,
                        scopes,
                        Room {
                            degree: 0,
                            steady: true,
                        },
                    );
                    let to = self.leaf(
                        Ty::Date,
                        scopes,
                        Room {
                            degree: 0,
                            steady: true,
                        },
                    );
                    Piece::plain(format!("years from {} to {}", from.at(VALUE), to.at(VALUE)))
                }
                Ty::Money(None)
                | Ty::Rate
                | Ty::Hours
                | Ty::Number
                | Ty::Date
                | Ty::YesNo
                | Ty::Choice(_) => self.leaf(ty, scopes, room),
            },
            11 => {
                let many = 1 + self.luck.below(3);
                let list: Vec<Piece> = (0..many)
                    .map(|_| self.zero_or(ty, scopes, depth, room))
                    .collect();
                let word = *self.luck.pick(&["larger", "smaller"]);
                let texts: Vec<String> = list.iter().map(|p| p.text.clone()).collect();
                Piece {
                    text: format!("{word} of ({})", texts.join(", ")),
                    level: VALUE,
                    degree: list.iter().map(|p| p.degree).max().unwrap_or(0),
                    varies: list.iter().any(|p| p.varies),
                }
            }
            12 if matches!(ty, Ty::Money(_)) => {
                let of = self.piece(ty, scopes, depth, room);
                if room.steady {
                    of
                } else {
                    self.charged(ty, scopes, &of, room)
                }
            }
            _ => self.search(ty, scopes, depth, room),
        }
    }

    fn condition(&mut self, scopes: &[usize], depth: usize, room: Room) -> Piece {
        let nested = |piece: Piece, level| Piece {
            level,
            degree: 0,
            ..piece
        };
        match self.luck.below(10) {
            0 => {
                let (left, right) = (
                    self.piece(Ty::YesNo, scopes, depth, room),
                    self.piece(Ty::YesNo, scopes, depth, room),
                );
                nested(self.join("and", &left, BOTH, &right, DENIAL, BOTH), BOTH)
            }
            1 => {
                let (left, right) = (
                    self.piece(Ty::YesNo, scopes, depth, room),
                    self.piece(Ty::YesNo, scopes, depth, room),
                );
                nested(self.join("or", &left, EITHER, &right, BOTH, EITHER), EITHER)
            }
            2 => {
                let inner = self.piece(Ty::YesNo, scopes, depth, room);
                Piece {
                    text: format!("not {}", inner.at(DENIAL)),
                    level: DENIAL,
                    degree: 0,
                    varies: inner.varies,
                }
            }
            3 if !self.choices.is_empty() => {
                let at = self.luck.below(self.choices.len());
                let left = self.leaf(Ty::Choice(at), scopes, room);
                let left = if left.text.starts_with("word") {
                    Piece::plain(self.new_fact(Ty::Choice(at), HOUSEHOLD, false).name)
                } else {
                    left
                };
                let right = self.literal(Ty::Choice(at));
                let op = *self.luck.pick(&["is", "is not"]);
                nested(
                    self.join(op, &left, SHAPED, &right, SHAPED, COMPARED),
                    COMPARED,
                )
            }
            4 => self.search(Ty::YesNo, scopes, depth, room),
            5 => {
                let (left, right) = (
                    self.leaf(Ty::Date, scopes, room),
                    self.leaf(Ty::Date, scopes, room),
                );
                let op = *self
                    .luck
                    .pick(&["above", "below", "at least", "at most", "is"]);
                nested(
                    self.join(op, &left, SHAPED, &right, SHAPED, COMPARED),
                    COMPARED,
                )
            }
            _ => {
                let ty = self.any_quantity();
                let (left, right) = (
                    self.piece(ty, scopes, depth, room),
                    self.zero_or(ty, scopes, depth.min(1), room),
                );
                let op = *self.luck.pick(&[
                    "above", "below", "at least", "at most", "above", "below", "at least",
                    "at most", "is", "is not",
                ]);
                nested(
                    self.join(op, &left, SHAPED, &right, SHAPED, COMPARED),
                    COMPARED,
                )
            }
        }
    }
}

/// The words of a text.
fn words(text: &str) -> BTreeSet<&str> {
    text.split(|c: char| !(c.is_ascii_lowercase() || c.is_ascii_digit() || c == '_'))
        .collect()
}

impl Invented {
    /// The statements that hold each word, but for the name that a statement declares where it declares it.
    fn uses(&self) -> HashMap<&str, usize> {
        let mut uses: HashMap<&str, usize> = HashMap::new();
        for statement in &self.statements {
            let body = if statement.name.is_empty() {
                statement.text.as_str()
            } else {
                statement
                    .text
                    .split_once(statement.name.as_str())
                    .map_or("", |(_, rest)| rest)
            };
            let per = statement.per.as_deref().unwrap_or("");
            for word in words(body).into_iter().chain([per]) {
                *uses.entry(word).or_default() += 1;
            }
        }
        uses
    }

    /// Leaves out what nothing needs.
    pub fn prune(&mut self) {
        loop {
            let before = self.statements.len() + self.amounts.len();
            let all = self.clone();
            let uses = all.uses();
            self.statements.retain(|s| {
                matches!(s.keyword, "item" | "hold" | "note") || uses.contains_key(s.name.as_str())
            });
            self.amounts
                .retain(|(name, _)| uses.contains_key(name.as_str()));
            self.tables
                .retain(|(name, _)| all.statements.iter().any(|s| s.name == *name));
            // A hold that asks for what is gone goes too.
            self.statements.retain(|s| {
                s.keyword != "hold"
                    || words(&s.text).iter().all(|w| {
                        !w.starts_with("amount_") || all.amounts.iter().any(|(name, _)| name == w)
                    })
            });
            if self.statements.len() + self.amounts.len() == before {
                return;
            }
        }
    }

    /// The same with one statement less.
    pub fn without(&self, at: usize) -> Invented {
        let mut less = self.clone();
        less.statements.remove(at);
        less.prune();
        less
    }

    /// The texts by name.
    pub fn texts(&self) -> Vec<(String, String)> {
        let mut out = vec![
            (
                "pack.toml".to_owned(),
                "title = \"Harrowmere\"\narea = \"Harrowmere\"\ncurrency = \"GBP\"\nperiod = \"month\"\n\
                 covers = { from = 2025-04-06, to = 2027-04-05 }\n\n[dates]\npayment = \"the day of pay\"\nassessment = \"the first day\"\n"
                    .to_owned(),
            ),
            ("order.txt".to_owned(), "first.rules\nsecond.rules\n".to_owned()),
        ];
        for (part, (name, date)) in [("first.rules", "payment"), ("second.rules", "assessment")]
            .into_iter()
            .enumerate()
        {
            let mut text = format!("part \"{name}\" dated by {date}\nlaw \"The Harrowmere Act\"\n");
            let mut per = "household".to_owned();
            for statement in self.statements.iter().filter(|s| s.part == part) {
                if let Some(wanted) = statement.per.as_ref().filter(|wanted| **wanted != per) {
                    per.clone_from(wanted);
                    text += &format!("per {per}\n");
                }
                text += &statement.text;
                text.push('\n');
            }
            out.push((name.to_owned(), text));
        }
        let rows: String = self.amounts.iter().map(|(_, rows)| rows.as_str()).collect();
        out.push((
            "amounts.csv".to_owned(),
            format!("name,from,to,value,unit,period,source,locator,status\n{rows}"),
        ));
        out.extend(
            self.tables
                .iter()
                .map(|(name, text)| (format!("tables/{name}.csv"), text.clone())),
        );
        out
    }
}

/// Texts as the files of a pack.
pub fn files(texts: &[(String, String)]) -> PackFiles {
    let files = texts
        .iter()
        .map(|(name, text)| TextFile {
            name: name.clone(),
            text: text.clone(),
            sha256: String::new(),
        })
        .collect();
    PackFiles {
        name: "invented".into(),
        files: Files(files),
    }
}
