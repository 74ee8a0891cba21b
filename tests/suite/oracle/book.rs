//! The texts of a pack to a book of its statements: what `rules/README.md` says of each file, read once more.

use super::reader::{Expr, Reader};
use super::text::{Q, Token, day, number, q, tokens, whole};
use hourworth::load::PackFiles;
use std::collections::HashMap;

/// Positions of the kinds that are always there.
pub const HOUSEHOLD: usize = 0;
pub const ADULT: usize = 1;
pub const CHILD: usize = 2;
pub const OTHER: usize = 3;
pub const JOB: usize = 4;

/// A kind of record.
#[derive(Debug)]
pub struct Kind {
    pub name: String,
    pub owner: Option<usize>,
    pub facts: Vec<Fact>,
}

/// A fact: its name, its type, and how many units of a list make one.
#[derive(Debug)]
pub struct Fact {
    pub name: String,
    pub ty: String,
    pub units: i64,
    /// What it means once settled, with the part that says so.
    pub settles: Option<(usize, Expr)>,
}

/// A figure or item.
#[derive(Debug)]
pub struct Figure {
    pub name: String,
    pub kind: usize,
    pub part: usize,
    pub expr: Expr,
    /// The kind of item; none for a figure.
    pub item: Option<String>,
    /// Where an item is claimed; none where that is no question.
    pub claimed: Option<Expr>,
}

/// A hold or a note.
#[derive(Debug)]
pub struct Condition {
    pub kinds: Vec<usize>,
    pub part: usize,
    pub when: Expr,
    pub text: String,
}

/// How far a band or step goes.
#[derive(Debug)]
pub enum Limit {
    UpTo(Expr),
    Below(Expr),
    Beyond,
}

/// Bands or a scale: a value and how far it goes, line by line.
#[derive(Debug)]
pub struct Ladder {
    pub kind: usize,
    pub part: usize,
    pub lines: Vec<(Expr, Limit)>,
}

/// What stands in a cell: a number, or the word of a choice.
#[derive(Clone, Debug)]
pub enum Cell {
    Number(Q),
    Word(String),
}

/// A dated row of `amounts.csv` or of a table; no value where it is absent.
#[derive(Debug)]
pub struct Row {
    pub keys: Vec<String>,
    pub from: i64,
    pub to: i64,
    pub value: Option<Cell>,
}

/// A keyed table: the choice that each key is of, none for a count.
#[derive(Debug)]
pub struct Table {
    pub keys: Vec<Option<String>>,
    /// The type of its values.
    pub gives: String,
    pub rows: Vec<Row>,
}

/// A whole pack as read.
#[derive(Debug, Default)]
pub struct Book {
    pub dates: Vec<String>,
    pub kinds: Vec<Kind>,
    pub choices: HashMap<String, Vec<String>>,
    pub conversions: HashMap<String, Q>,
    pub bands: HashMap<String, Ladder>,
    pub scales: HashMap<String, Ladder>,
    pub amounts: HashMap<String, Vec<Row>>,
    pub tables: HashMap<String, Table>,
    pub figures: Vec<Figure>,
    /// Figures and items by kind and name.
    pub names: Vec<HashMap<String, usize>>,
    pub holds: Vec<Condition>,
    pub notes: Vec<Condition>,
    /// Which of `dates` picks the amounts of each part.
    pub dated: Vec<Option<usize>>,
}

impl Book {
    /// Reads the files of a pack that the checker accepted.
    pub fn read(files: &PackFiles) -> Book {
        let text = |name: &str| files.files.text(name).unwrap_or("");
        let mut book = Book {
            dates: dates(text("pack.toml")),
            ..Book::default()
        };
        let birth = || Fact {
            name: "birth".into(),
            ty: "date".into(),
            units: 1,
            settles: None,
        };
        let job = vec![
            Fact {
                name: "hours".into(),
                ty: "hours".into(),
                units: 100,
                settles: None,
            },
            Fact {
                name: "wage".into(),
                ty: "money".into(),
                units: 10_000,
                settles: None,
            },
        ];
        for (name, owner, facts) in [
            ("household", None, vec![]),
            ("adult", Some(HOUSEHOLD), vec![birth()]),
            ("child", Some(HOUSEHOLD), vec![birth()]),
            ("other", Some(HOUSEHOLD), vec![birth()]),
            ("job", Some(ADULT), job),
        ] {
            book.kinds.push(Kind {
                name: name.into(),
                owner,
                facts,
            });
        }
        let order: Vec<&str> = text("order.txt")
            .lines()
            .map(|l| l.split('#').next().unwrap_or("").trim())
            .filter(|l| !l.is_empty())
            .collect();
        // Kinds and choices may be declared after they are named.
        for name in &order {
            book.declarations(text(name));
        }
        book.names = book.kinds.iter().map(|_| HashMap::new()).collect();
        for (part, name) in order.iter().enumerate() {
            book.part(part, text(name));
        }
        book.read_amounts(text("amounts.csv"));
        for (name, text) in files.files.texts() {
            if let Some(table) = name
                .strip_prefix("tables/")
                .and_then(|n| n.strip_suffix(".csv"))
                && let Some(table) = book.tables.get_mut(table)
            {
                let choice = book.choices.contains_key(&table.gives);
                read_table(table, choice, text);
            }
        }
        for (name, text) in files.files.texts() {
            if name.starts_with("local/") {
                book.lay(text);
            }
        }
        book
    }

    /// Lays a local file over the pack: its word, and its rows with every key written out.
    fn lay(&mut self, text: &str) {
        let file: toml::Table = text.parse().expect("the checker read this");
        let at = |table: &toml::Table, key: &str| plain(&table[key]);
        let (choice, word) = (at(&file, "choice"), at(&file, "word"));
        self.choices
            .get_mut(&choice)
            .expect("the choice is open")
            .push(word.clone());
        for block in file["table"].as_array().expect("tables") {
            let block = block.as_table().expect("a table");
            let own = |key: &str| {
                at(
                    if block.contains_key(key) {
                        block
                    } else {
                        &file
                    },
                    key,
                )
            };
            let (from, to, status) = (own("from"), own("to"), own("status"));
            let lines: Vec<Vec<toml::Value>> = match block.get("rows") {
                Some(rows) => rows
                    .as_array()
                    .expect("rows")
                    .iter()
                    .map(|row| row.as_array().expect("a row").clone())
                    .collect(),
                None => vec![vec![block["value"].clone()]],
            };
            let table = self.tables.get_mut(&at(block, "name")).expect("it is open");
            let ty = match self.choices.contains_key(&table.gives) {
                true => "choice".to_owned(),
                false => table.gives.clone(),
            };
            for line in lines {
                let (value, cells) = line.split_last().expect("a value");
                let mut keys = vec![vec![word.clone()]];
                for (cell, key) in cells.iter().zip(&table.keys[1..]) {
                    let words: Vec<String> = match (cell, key) {
                        (toml::Value::Array(words), _) => words.iter().map(plain).collect(),
                        (toml::Value::String(all), Some(choice)) if all == "all" => {
                            self.choices[choice].clone()
                        }
                        (one, _) => vec![plain(one)],
                    };
                    keys = words
                        .iter()
                        .flat_map(|word| {
                            keys.iter().map(|before| {
                                let mut whole = before.clone();
                                whole.push(word.clone());
                                whole
                            })
                        })
                        .collect();
                }
                for key in keys {
                    let line = row(key, &from, &to, &plain(value), &status, &ty);
                    table.rows.push(line);
                }
            }
        }
    }

    /// The kinds that a word stands for.
    pub fn kinds_of(&self, word: &str) -> Vec<usize> {
        match word {
            "unit" => vec![HOUSEHOLD],
            "member" => vec![ADULT, CHILD, OTHER],
            _ => vec![
                self.kinds
                    .iter()
                    .position(|k| k.name == word)
                    .unwrap_or_else(|| panic!("`{word}` is a kind")),
            ],
        }
    }

    fn declarations(&mut self, text: &str) {
        let tokens = tokens(text);
        for at in 0..tokens.len() {
            let word = |n: usize| match tokens.get(at + n) {
                Some(Token::Word(word)) => word.as_str(),
                _ => "",
            };
            // Neither word can be a name, so they only stand at the start of these statements.
            if word(0) == "record" {
                let owner = self.kinds_of(word(3))[0];
                self.kinds.push(Kind {
                    name: word(1).into(),
                    owner: Some(owner),
                    facts: Vec::new(),
                });
            } else if word(0) == "choice" {
                let mut words = vec![word(3).to_owned()];
                while tokens.get(at + 2 + 2 * words.len()) == Some(&Token::Sign(',')) {
                    words.push(word(3 + 2 * words.len()).to_owned());
                }
                self.choices.insert(word(1).into(), words);
            }
        }
    }

    fn part(&mut self, part: usize, text: &str) {
        let mut reader = Reader::new(tokens(text));
        let mut per = "household".to_owned();
        let mut last = (String::new(), String::new());
        self.dated.push(None);
        while *reader.peek() != Token::End {
            let keyword = reader.name();
            match keyword.as_str() {
                "part" => {
                    reader.text();
                    reader.word("dated");
                    reader.word("by");
                    let name = reader.name();
                    self.dated[part] = self.dates.iter().position(|d| *d == name);
                }
                "law" => {
                    reader.text();
                }
                "per" => per = reader.name(),
                "record" => {
                    reader.name();
                    reader.word("of");
                    reader.name();
                }
                "choice" => {
                    reader.name();
                    reader.sign('=');
                    reader.name();
                    while reader.take_sign(',') {
                        reader.name();
                    }
                }
                "fact" => self.fact(part, &mut reader),
                "conversion" => self.conversion(&mut reader),
                "table" => self.table(&mut reader),
                "bands" | "scale" => {
                    let name = reader.name();
                    reader.word("of");
                    type_name(&mut reader);
                    if keyword == "scale" {
                        reader.word("gives");
                        type_name(&mut reader);
                    }
                    let ladder = Ladder {
                        kind: self.kinds_of(&per)[0],
                        part,
                        lines: Vec::new(),
                    };
                    if keyword == "scale" {
                        &mut self.scales
                    } else {
                        &mut self.bands
                    }
                    .insert(name.clone(), ladder);
                    last = (keyword, name);
                }
                "band" | "step" => {
                    let value = reader.sum();
                    let limit = if reader.take("up") {
                        reader.word("to");
                        Limit::UpTo(reader.sum())
                    } else if reader.take("below") {
                        Limit::Below(reader.sum())
                    } else {
                        reader.word("beyond");
                        Limit::Beyond
                    };
                    let ladders = if last.0 == "scale" {
                        &mut self.scales
                    } else {
                        &mut self.bands
                    };
                    ladders
                        .get_mut(&last.1)
                        .expect("a line stands under its ladder")
                        .lines
                        .push((value, limit));
                }
                "figure" => {
                    let name = reader.name();
                    reader.sign(':');
                    type_name(&mut reader);
                    reader.sign('=');
                    self.figure(name, &per, part, None, &mut reader);
                }
                "item" => {
                    let name = reader.name();
                    reader.sign(':');
                    let kind = reader.name();
                    reader.sign('=');
                    self.figure(name, &per, part, Some(kind), &mut reader);
                }
                "hold" | "note" => {
                    let mut text = if keyword == "note" {
                        reader.name()
                    } else {
                        String::new()
                    };
                    reader.word("where");
                    let when = reader.expr();
                    if keyword == "hold" {
                        reader.word("because");
                        text = reader.text();
                    }
                    let condition = Condition {
                        kinds: self.kinds_of(&per),
                        part,
                        when,
                        text,
                    };
                    if keyword == "hold" {
                        &mut self.holds
                    } else {
                        &mut self.notes
                    }
                    .push(condition);
                }
                other => panic!("`{other}` starts no statement"),
            }
        }
    }

    fn fact(&mut self, part: usize, reader: &mut Reader) {
        let name = reader.name();
        reader.word("of");
        let of = reader.name();
        reader.sign(':');
        let (ty, period) = type_name(reader);
        let signed = |reader: &mut Reader| {
            reader.take_sign('-');
            reader.number();
            reader.take_sign('%');
        };
        if reader.take("from") {
            signed(reader);
            reader.word("to");
            signed(reader);
        }
        if !reader.take("required") {
            reader.word("default");
            reader.take_sign('-');
            reader.sum();
        }
        let mut settles = None;
        if reader.take("settles") {
            reader.word("to");
            settles = Some((part, reader.value()));
        }
        reader.word("ask");
        reader.text();
        let units = match (ty.as_str(), period.as_str()) {
            ("money", "hour") | ("rate", _) => 10_000,
            ("money" | "hours" | "number", _) => 100,
            _ => 1,
        };
        for kind in self.kinds_of(&of) {
            self.kinds[kind].facts.push(Fact {
                name: name.clone(),
                ty: ty.clone(),
                units,
                settles: settles.clone(),
            });
        }
    }

    fn conversion(&mut self, reader: &mut Reader) {
        let name = reader.name();
        reader.word("from");
        reader.name();
        reader.word("to");
        reader.name();
        reader.word("times");
        let mut times = reader.number();
        if reader.take_sign('/') {
            times /= reader.number();
        }
        reader.word("see");
        reader.text();
        self.conversions.insert(name, times);
    }

    fn table(&mut self, reader: &mut Reader) {
        let name = reader.name();
        reader.word("by");
        let mut keys = Vec::new();
        loop {
            let key = reader.name();
            keys.push((key != "count").then_some(key));
            if !reader.take_sign(',') {
                break;
            }
        }
        reader.word("gives");
        let gives = type_name(reader).0;
        self.tables.insert(
            name,
            Table {
                keys,
                gives,
                rows: Vec::new(),
            },
        );
    }

    fn figure(
        &mut self,
        name: String,
        per: &str,
        part: usize,
        item: Option<String>,
        reader: &mut Reader,
    ) {
        let expr = reader.expr();
        let claimed = reader.take("claimed").then(|| {
            reader.word("where");
            reader.expr()
        });
        if reader.take("see") {
            reader.text();
        }
        for kind in self.kinds_of(per) {
            self.names[kind].insert(name.clone(), self.figures.len());
            self.figures.push(Figure {
                name: name.clone(),
                kind,
                part,
                expr: expr.clone(),
                item: item.clone(),
                claimed: claimed.clone(),
            });
        }
    }

    fn read_amounts(&mut self, text: &str) {
        for fields in csv::ReaderBuilder::new()
            .from_reader(text.as_bytes())
            .records()
        {
            let fields = fields.expect("the checker read this");
            let cell = |at: usize| fields.get(at).unwrap_or("").trim().to_owned();
            let row = row(
                Vec::new(),
                &cell(1),
                &cell(2),
                &cell(3),
                &cell(8),
                if cell(4) == "percent" { "rate" } else { "" },
            );
            self.amounts.entry(cell(0)).or_default().push(row);
        }
    }
}

/// A type: its word and, for money, its period.
fn type_name(reader: &mut Reader) -> (String, String) {
    let word = reader.name();
    let period = if word == "money" && (reader.take("a") || reader.take("an")) {
        reader.name()
    } else {
        String::new()
    };
    (word, period)
}

/// Names of the dates, in the order of `[dates]`.
fn dates(manifest: &str) -> Vec<String> {
    let lines = manifest
        .lines()
        .skip_while(|line| line.split('#').next().unwrap_or("").trim() != "[dates]")
        .skip(1);
    lines
        .take_while(|line| !line.trim().starts_with('['))
        .filter_map(|line| line.split_once('='))
        .map(|(name, _)| name.trim().to_owned())
        .collect()
}

fn row(keys: Vec<String>, from: &str, to: &str, value: &str, status: &str, ty: &str) -> Row {
    let value = match (value, status, ty) {
        (_, "absent", _) => None,
        (word, _, "choice") => Some(Cell::Word(word.to_owned())),
        ("yes", _, _) => Some(Cell::Number(whole(1))),
        ("no", _, _) => Some(Cell::Number(whole(0))),
        // Rates stand in percent.
        (value, _, "rate") => number(value).map(|v| Cell::Number(v / q(100, 1))),
        (value, _, _) => number(value)
            .or_else(|| day(value).map(|d| whole(i128::from(d))))
            .map(Cell::Number),
    };
    Row {
        keys,
        from: day(from).expect("the checker read this day"),
        to: if to.is_empty() {
            i64::MAX
        } else {
            day(to).expect("the checker read this day")
        },
        value,
    }
}

/// A value of a local file as text.
fn plain(value: &toml::Value) -> String {
    match value {
        toml::Value::Boolean(true) => "yes".into(),
        toml::Value::Boolean(false) => "no".into(),
        toml::Value::String(text) => text.clone(),
        other => other.to_string(),
    }
}

fn read_table(table: &mut Table, choice: bool, text: &str) {
    let keys = table.keys.len();
    let ty = if choice {
        "choice"
    } else {
        table.gives.as_str()
    };
    for fields in csv::ReaderBuilder::new()
        .from_reader(text.as_bytes())
        .records()
    {
        let fields = fields.expect("the checker read this");
        let cell = |at: usize| fields.get(at).unwrap_or("").trim().to_owned();
        table.rows.push(row(
            (0..keys).map(cell).collect(),
            &cell(keys),
            &cell(keys + 1),
            &cell(keys + 2),
            &cell(keys + 5),
            ty,
        ));
    }
}
