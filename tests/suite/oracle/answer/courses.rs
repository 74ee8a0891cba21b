//! Whether a value varies with hours, by the rule text alone.

use super::*;

impl Oracle<'_> {
    /// What a figure depends on.
    pub(super) fn figure_course(&self, at: usize, record: usize, world: &World) -> Course {
        if let Some(course) = world.courses.borrow().get(&(at, record)) {
            return course.clone();
        }
        let figure = &self.book.figures[at];
        let place = Place {
            world,
            part: figure.part,
            scopes: &vec![(figure.kind, record)],
        };
        let mut course = self.course(&figure.expr, &place);
        if let (Course::Fixed(value), Some(kind)) = (&course, &figure.item)
            && kind != "passport"
        {
            course = Course::Fixed(Value::Number(rounded(
                &value.clone().number(),
                Way::HalfUp,
                &q(1, 100),
            )));
        }
        if let Some(claimed) = &figure.claimed {
            course = either_course(
                &self.course(claimed, &place),
                course,
                Course::Fixed(Value::Number(Q::zero())),
            );
        }
        world
            .courses
            .borrow_mut()
            .insert((at, record), course.clone());
        course
    }

    pub(super) fn record_course(
        &self,
        name: &str,
        kind: usize,
        record: usize,
        world: &World,
    ) -> Course {
        let itself = || Course::Steady(Some((kind, record, name.to_owned())));
        if let Some(figure) = self.book.names[kind].get(name) {
            return match self.figure_course(*figure, record, world) {
                Course::Steady(None) if world.changed.is_empty() => itself(),
                course => course,
            };
        }
        let fact = self.fact_at(name, kind).expect("a fact");
        let settles = self.book.kinds[kind].facts[fact].settles.as_ref();
        match world.changed.get(&(kind, record, fact)) {
            Some((_, course)) => course.clone(),
            None if self.settled && settles.is_some() => {
                let (part, expr) = settles.expect("it settles");
                let place = Place {
                    world,
                    part: *part,
                    scopes: &vec![(kind, record)],
                };
                match self.course(expr, &place) {
                    Course::Steady(None) if world.changed.is_empty() => itself(),
                    course => course,
                }
            }
            None if (kind, record, fact) == (JOB, self.home.varied_job, 0) => Course::Varies,
            None => itself(),
        }
    }

    pub(super) fn name_course(&self, name: &str, place: &Place<'_>) -> Course {
        match self.nearest(name, place.scopes) {
            Some((kind, record)) => self.record_course(name, kind, record, place.world),
            None => Course::Fixed(self.name(name, place, &self.nowhere())),
        }
    }

    /// A run for what depends on no hours.
    pub(super) fn nowhere(&self) -> Run {
        self.run(&Q::zero(), Mode::Law)
    }

    /// The most that any of these depends on; the expression's own value where all are fixed.
    pub(super) fn joined(
        &self,
        expr: &Expr,
        place: &Place<'_>,
        parts: impl IntoIterator<Item = Course>,
    ) -> Course {
        match parts.into_iter().max_by_key(Course::rank) {
            Some(Course::Varies) => Course::Varies,
            Some(Course::Steady(_)) => Course::Steady(None),
            Some(Course::Fixed(_)) | None => {
                Course::Fixed(self.value(expr, place, &self.nowhere()))
            }
        }
    }

    pub(super) fn with_course(
        &self,
        over: &Search,
        kind: usize,
        record: usize,
        place: &Place<'_>,
    ) -> Course {
        match &over.with {
            None => Course::Fixed(Value::Truth(true)),
            Some(with) => self.course(
                with,
                &Place {
                    world: place.world,
                    part: place.part,
                    scopes: &place.inside(kind, record),
                },
            ),
        }
    }

    pub(super) fn key_course(
        &self,
        over: &Search,
        kind: usize,
        record: usize,
        place: &Place<'_>,
    ) -> Course {
        self.name_course(
            &over.by,
            &Place {
                world: place.world,
                part: place.part,
                scopes: &place.inside(kind, record),
            },
        )
    }

    /// Whether an expression is made of numbers and amounts alone.
    pub(super) fn plain(&self, expr: &Expr, place: &Place<'_>) -> bool {
        match expr {
            Expr::Number(_) => true,
            Expr::Name(name) => {
                self.nearest(name, place.scopes).is_none() && self.book.amounts.contains_key(name)
            }
            Expr::Pair { left, right, .. } => self.plain(left, place) && self.plain(right, place),
            Expr::Rounded { of, .. } | Expr::Converted { of, .. } => self.plain(of, place),
            Expr::Larger(list) | Expr::Smaller(list) => list.iter().all(|e| self.plain(e, place)),
            _ => false,
        }
    }

    /// What an expression depends on. A branch that cannot be taken does not count, nor does a factor of nothing.
    pub(super) fn course(&self, expr: &Expr, place: &Place<'_>) -> Course {
        let of = |e: &Expr| self.course(e, place);
        let nothing = Course::Fixed(Value::Number(Q::zero()));
        let inside = |kind, record, e: &Expr| {
            self.course(
                e,
                &Place {
                    world: place.world,
                    part: place.part,
                    scopes: &place.inside(kind, record),
                },
            )
        };
        match expr {
            Expr::Number(_) | Expr::Day(_) | Expr::YesNo(_) | Expr::Missing(_) => {
                self.joined(expr, place, [])
            }
            Expr::Name(name) => self.name_course(name, place),
            Expr::Of {
                name,
                whose,
                failing,
            } => match self.relation(whose, place) {
                (kind, Some(record)) => self.record_course(name, kind, record, place.world),
                (_, None) => of(failing.as_ref().expect("something stands in")),
            },
            Expr::AsIf { name, changes } => {
                let (kind, record) = self
                    .nearest(name, place.scopes)
                    .expect("the figure is at hand");
                // A value that is not fixed is not asked for.
                let world = self.changed(changes, place, |_, course| match course {
                    Course::Fixed(value) => value.clone(),
                    Course::Steady(_) | Course::Varies => Value::Number(Q::zero()),
                });
                self.record_course(name, kind, record, &world)
            }
            // The keys do not vary, by the checker.
            Expr::Lookup { .. } | Expr::Years { .. } => Course::Steady(None),
            Expr::Where {
                when,
                give,
                otherwise,
            } => match of(when) {
                known @ Course::Fixed(_) => of(if known.is(true) { give } else { otherwise }),
                unknown => either_course(&unknown, of(give), of(otherwise)),
            },
            Expr::Larger(list) | Expr::Smaller(list) => {
                let mut parts: Vec<Course> = list.iter().map(of).collect();
                // The larger of one value, or of one value twice, is that value.
                if parts.iter().all(|part| part.same(&parts[0])) {
                    parts.swap_remove(0)
                } else {
                    self.joined(expr, place, parts)
                }
            }
            Expr::SumOver { over, body } => {
                let mut parts = Vec::new();
                for kind in self.book.kinds_of(&over.kind) {
                    for record in self.among(kind, place) {
                        let when = self.with_course(over, kind, record, place);
                        if !when.is(false) {
                            parts.push(either_course(
                                &when,
                                inside(kind, record, body),
                                nothing.clone(),
                            ));
                        }
                    }
                }
                parts.retain(|part| !part.is_number(0));
                if parts.len() == 1 {
                    parts.swap_remove(0)
                } else {
                    self.joined(expr, place, parts)
                }
            }
            Expr::CountOf(over) => {
                let mut parts = Vec::new();
                for kind in self.book.kinds_of(&over.kind) {
                    parts.extend(
                        self.among(kind, place)
                            .into_iter()
                            .map(|record| self.with_course(over, kind, record, place)),
                    );
                }
                self.joined(expr, place, parts)
            }
            Expr::Any(over) | Expr::Every(over) => {
                let decides = matches!(expr, Expr::Any(_));
                let mut parts = Vec::new();
                for kind in self.book.kinds_of(&over.kind) {
                    for record in self.among(kind, place) {
                        let part = self.with_course(over, kind, record, place);
                        if part.is(decides) {
                            return part;
                        }
                        parts.push(part);
                    }
                }
                self.joined(expr, place, parts)
            }
            Expr::First {
                over,
                give,
                failing,
            } => {
                let kind = self.book.kinds_of(&over.kind)[0];
                let could: Vec<(usize, Course)> = self
                    .among(kind, place)
                    .into_iter()
                    .map(|r| (r, self.with_course(over, kind, r, place)))
                    .filter(|(_, c)| !c.is(false))
                    .collect();
                let sure = could.iter().all(|(_, c)| c.is(true));
                let keys: Vec<Course> = could
                    .iter()
                    .map(|(r, _)| self.key_course(over, kind, *r, place))
                    .collect();
                if sure && (could.len() < 2 || keys.iter().all(|k| k.rank() == 0)) {
                    let list: Vec<usize> = could.iter().map(|(r, _)| *r).collect();
                    let led = if list.len() < 2 {
                        list.first().copied()
                    } else {
                        self.leading(over, kind, &list, place, &self.nowhere())
                    };
                    return led.map_or_else(|| of(failing), |r| inside(kind, r, give));
                }
                let mut parts: Vec<Course> =
                    could.iter().map(|(r, _)| inside(kind, *r, give)).collect();
                parts.push(of(failing));
                // Whoever leads, it comes to the same.
                if parts.iter().all(|part| part.same(&parts[0])) {
                    return parts.swap_remove(0);
                }
                if could.len() > 1 {
                    parts.extend(keys);
                }
                parts.extend(could.into_iter().map(|(_, c)| c));
                self.joined(expr, place, parts)
            }
            Expr::Place(over) => {
                let (kind, me) = place.here();
                let mine = self.key_course(over, kind, me, place);
                let mut parts = Vec::new();
                for other in (0..self.count(kind)).filter(|other| *other != me) {
                    let eligible = self.with_course(over, kind, other, place);
                    let key = self.key_course(over, kind, other, place);
                    let known = mine.rank() == 0 && key.rank() == 0;
                    if eligible.is(false)
                        || (known && !self.before(over, kind, other, me, place, &self.nowhere()))
                    {
                        continue;
                    }
                    parts.push(eligible);
                    if !known {
                        parts.extend([key, mine.clone()]);
                    }
                }
                self.joined(expr, place, parts)
            }
            Expr::Pair { sign, left, right } => {
                let (left, right) = (of(left), of(right));
                match sign {
                    Sign::Multiply if left.is_number(0) || right.is_number(0) => nothing,
                    // Nothing more and once over leave a value as it stands.
                    Sign::Add | Sign::Subtract if right.is_number(0) => left,
                    Sign::Multiply | Sign::Divide if right.is_number(1) => left,
                    Sign::Add if left.is_number(0) => right,
                    Sign::Multiply if left.is_number(1) => right,
                    Sign::LimitedTo | Sign::RaisedTo if left.same(&right) => left,
                    _ => self.joined(expr, place, [left, right]),
                }
            }
            Expr::Rounded { of: inner, .. } => {
                let by_fact = matches!(&**inner, Expr::Pair { sign: Sign::Divide, right, .. } if !self.plain(right, place));
                match of(inner) {
                    // A quotient by what is no plain number counts as resting on facts.
                    Course::Fixed(_) if by_fact => Course::Steady(None),
                    course => self.joined(expr, place, [course]),
                }
            }
            Expr::Converted { of: inner, .. } => self.joined(expr, place, [of(inner)]),
            Expr::Charged { of: inner, by } => {
                let ladder = &self.book.bands[by];
                let mut parts = Vec::new();
                let all = of(inner);
                self.on_ladder(ladder, place, |inside| {
                    let mut low = nothing.clone();
                    for (rate, limit) in &ladder.lines {
                        let rate = self.course(rate, inside);
                        let high = match limit {
                            Limit::UpTo(limit) | Limit::Below(limit) => self.course(limit, inside),
                            Limit::Beyond => all.clone(),
                        };
                        let empty = match (&all, &low, &high) {
                            (Course::Fixed(all), Course::Fixed(low), Course::Fixed(high)) => {
                                all.clone().number().min(high.clone().number())
                                    <= low.clone().number()
                            }
                            (_, _, _) => false,
                        };
                        if !rate.is_number(0) && !empty {
                            parts.extend([all.clone(), rate, low, high.clone()]);
                        }
                        low = high;
                    }
                });
                self.joined(expr, place, parts)
            }
            Expr::Placed { of: inner, on } => {
                let ladder = &self.book.scales[on];
                let all = of(inner);
                self.on_ladder(ladder, place, |inside| {
                    let mut result = nothing.clone();
                    for (value, limit) in ladder.lines.iter().rev() {
                        let value = self.course(value, inside);
                        result = match limit {
                            Limit::Beyond => value,
                            Limit::UpTo(e) | Limit::Below(e) => {
                                let holds = match (&all, self.course(e, inside), limit) {
                                    (Course::Fixed(all), Course::Fixed(end), Limit::Below(_)) => {
                                        Course::Fixed(Value::Truth(
                                            all.clone().number() < end.number(),
                                        ))
                                    }
                                    (Course::Fixed(all), Course::Fixed(end), _) => Course::Fixed(
                                        Value::Truth(all.clone().number() <= end.number()),
                                    ),
                                    (all, end, _) => {
                                        if all.rank() > end.rank() {
                                            all.clone()
                                        } else {
                                            end
                                        }
                                    }
                                };
                                either_course(&holds, value, result)
                            }
                        };
                    }
                    result
                })
            }
            Expr::Compared { left, right, .. } => self.joined(expr, place, [of(left), of(right)]),
            Expr::Not(inner) => self.joined(expr, place, [of(inner)]),
            Expr::And(left, right) | Expr::Or(left, right) => {
                let decides = matches!(expr, Expr::Or(..));
                let left = of(left);
                if left.is(decides) {
                    return left;
                }
                let right = of(right);
                if right.is(decides) {
                    right
                } else {
                    self.joined(expr, place, [left, right])
                }
            }
        }
    }
}
