//! Random small packs. In: chance. Out: the texts of a pack that uses any of the language's constructs, most of them accepted by the
//! checker. Expressions are made by type, so that they have a meaning; what they mean is the oracle's affair.

#[path = "invent/literals.rs"]
mod literals;

#[path = "invent/pieces.rs"]
mod pieces;
#[path = "invent/shapes.rs"]
mod shapes;

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
        for _ in 0..self.luck.below(3) {
            self.settling_fact();
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
            "employer",
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

    /// A fact that settles to what may vary with hours: to names that are there already, so to nothing that needs it.
    fn settling_fact(&mut self) {
        self.part = self.luck.below(2);
        let kind = match self.luck.below(6) {
            0..=1 => HOUSEHOLD,
            2..=3 => ADULT,
            4 => JOB,
            _ => self.luck.below(self.kinds.len()),
        };
        let ty = self.any_type();
        let depth = 1 + self.luck.below(3);
        let degree = self.luck.below(3) as u8;
        let room = Room {
            degree,
            steady: self.luck.percent(30),
        };
        let to = self.piece(ty, &[kind], depth, room);
        let name = self.fresh("fact");
        let (of, ty_text) = (self.kind_name(kind), self.type_text(ty));
        self.say(
            "fact",
            None,
            &name,
            format!(
                "fact {name} of {of}: {ty_text} required settles to {} ask \"What was it?\"",
                to.at(VALUE)
            ),
        );
        self.names.push(Named {
            name,
            kind,
            ty,
            degree: to.degree,
            varies: to.varies,
            divides: false,
        });
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
