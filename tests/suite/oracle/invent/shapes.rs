//! Tables, ladders and bands, conversions, roundings, quantities and conditions.

use super::*;

impl Maker<'_> {
    pub(super) fn new_table(&mut self, ty: Ty) -> usize {
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
    pub(super) fn ladder_kind(&mut self, scopes: &[usize]) -> usize {
        let kinds: Vec<usize> = self
            .owners(*scopes.last().expect("a scope"))
            .into_iter()
            .filter(|kind| *kind != MEMBER)
            .collect();
        *self.luck.pick(&kinds)
    }

    /// Limits that rise: fixed ones, or what lies above a figure.
    pub(super) fn limits(&mut self, ty: Ty, kind: usize, many: usize, room: Room) -> Vec<Piece> {
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

    pub(super) fn charged(&mut self, ty: Ty, scopes: &[usize], of: &Piece, room: Room) -> Piece {
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

    pub(super) fn on_scale(
        &mut self,
        gives: Ty,
        scopes: &[usize],
        depth: usize,
        room: Room,
    ) -> Piece {
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

    pub(super) fn conversion(&mut self, from: usize, to: usize) -> String {
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
    pub(super) fn rounded(&mut self, ty: Ty, of: &Piece) -> Piece {
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

    pub(super) fn quantity(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
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

    pub(super) fn condition(&mut self, scopes: &[usize], depth: usize, room: Room) -> Piece {
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
