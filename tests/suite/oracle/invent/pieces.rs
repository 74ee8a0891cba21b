//! Pieces of expressions: names, sums, searches, relations, lookups.

use super::*;

impl Maker<'_> {
    /// A value without parts.
    pub(super) fn leaf(&mut self, ty: Ty, scopes: &[usize], room: Room) -> Piece {
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

    pub(super) fn join(
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
    pub(super) fn any_kind(&mut self) -> usize {
        if self.luck.percent(10) {
            MEMBER
        } else {
            self.luck.below(self.kinds.len())
        }
    }

    pub(super) fn with(&mut self, scopes: &[usize], depth: usize, room: Room) -> (String, bool) {
        if self.luck.percent(55) {
            return (String::new(), false);
        }
        let when = self.piece(Ty::YesNo, scopes, depth, room);
        (format!(" with ({})", when.text), when.varies)
    }

    /// The name of something to order by.
    pub(super) fn key(&mut self, scopes: &[usize], kind: usize, room: Room) -> Named {
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
    pub(super) fn piece(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
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

    pub(super) fn zero_or(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
        let quantity = !matches!(ty, Ty::Date | Ty::YesNo | Ty::Choice(_));
        if quantity && self.luck.percent(25) {
            Piece::plain("0".into())
        } else {
            self.piece(ty, scopes, depth, room)
        }
    }

    pub(super) fn search(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
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
    pub(super) fn relation(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
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
    pub(super) fn as_if(&mut self, ty: Ty, scopes: &[usize], depth: usize, room: Room) -> Piece {
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

    pub(super) fn lookup(&mut self, ty: Ty, scopes: &[usize], depth: usize) -> Piece {
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
}
