//! The product against the oracle, for one household with one earner in one job. In: both, and which hours to ask for. Out: how much was
//! compared, or the first difference in words.

use super::answer::{Home, ItemOf, Mode, Oracle, Record};
use super::book::{Book, JOB};
use super::bound::{bounds, of};
use super::luck::Luck;
use super::text::{Q, q, whole};
use hourworth::case::{Household, Schema};
use hourworth::engine::{
    Curve, ItemKind, JobChoice, Machine, Piece, Setting, Special, Walk, working,
};
use hourworth::num::{Fraction, Hours, Money};
use hourworth::program::{Moment, Program};
use hourworth::rules::Pack;
use num_bigint::BigInt;
use num_traits::{Signed, ToPrimitive};

/// A kind of record: its word, its owner, its facts with their units.
type Kind<'a> = (&'a str, Option<usize>, Vec<(&'a str, i64)>);

/// What was compared.
#[derive(Clone, Debug, Default)]
pub struct Tally {
    pub households: usize,
    pub packs: usize,
    pub law_points: usize,
    pub fraction_points: usize,
    pub pieces: usize,
    pub walk_points: usize,
    pub bends: usize,
    pub irrational: usize,
    /// Pieces that are narrower than what is known of an irrational end; their inside was not asked for.
    pub narrow: usize,
    pub bounded_points: usize,
    /// Items at bounded points that lay in a window, of all items at them.
    pub windows: usize,
    pub bounded_items: usize,
    pub curved: usize,
    /// Households that were asked once settled as well.
    pub settled: usize,
}

/// One question: a household, its earner, the job, and how much to ask.
pub struct Subject<'a> {
    pub book: &'a Book,
    pub pack: &'a Pack,
    pub days: &'a [i64],
    pub household: &'a Household,
    pub earner: usize,
    pub choice: JobChoice,
}

/// How much to ask.
#[derive(Clone, Copy, Debug)]
pub struct Asked {
    pub seed: u64,
    pub law_points: usize,
    pub fractions: usize,
    pub most_pieces: usize,
    pub rationals: usize,
    pub bounded: usize,
}

type Outcome = Result<(), String>;

/// Half the width that the isolating interval of an irrational place may have, and more.
fn close() -> Q {
    q(1, 1_000_000_000)
}

fn fraction(value: &Q) -> Fraction {
    let part = |n: &BigInt| n.to_i128().expect("hours are small numbers");
    Fraction::new(part(value.numer()), part(value.denom()))
}

fn show(value: &Q) -> String {
    let near = (value * whole(1_000_000)).round().to_integer();
    format!("{value} (about {near} millionths)")
}

/// The records of a household as the oracle takes them, with the job in question among them.
fn home(setting: &Setting<'_>, household: &Household) -> Home {
    let varied_job = setting.shape.varied_job as usize;
    let mut records: Vec<Vec<Record>> = household
        .instances
        .iter()
        .map(|kind| {
            kind.iter()
                .map(|r| Record {
                    owner: r.owner,
                    values: r.values.clone(),
                })
                .collect()
        })
        .collect();
    records[JOB][varied_job]
        .values
        .clone_from(&setting.job().values);
    Home {
        records,
        varied_job,
    }
}

struct Both<'a> {
    oracle: Oracle<'a>,
    special: Special<'a>,
    facts: Vec<i64>,
    names: Vec<(ItemOf, ItemKind)>,
}

/// Asks everything, now and, where facts of the pack settle, once settled. Nothing where the earner or job is not there.
///
/// # Errors
/// The first difference.
pub fn compare(subject: &Subject<'_>, asked: Asked, tally: &mut Tally) -> Outcome {
    compare_at(subject, Moment::Now, asked, tally)?;
    if subject.pack.settling().is_empty() {
        return Ok(());
    }
    tally.settled += 1;
    compare_at(subject, Moment::Settled, asked, tally)
        .map_err(|difference| format!("once settled: {difference}"))
}

fn compare_at(subject: &Subject<'_>, moment: Moment, asked: Asked, tally: &mut Tally) -> Outcome {
    let Some(setting) = Setting::new(subject.household, subject.earner, subject.choice) else {
        return Ok(());
    };
    let setting = setting.at_moment(moment);
    let program = match subject.pack.program(subject.days, &[], &setting.shape) {
        Ok(program) => program,
        Err(faults) => {
            // A household larger than the one that the checker tries may need larger numbers; it is told so.
            let words: Vec<String> = faults
                .iter()
                .map(|f| f.render(&subject.pack.sources, false))
                .collect();
            return if words.iter().all(|w| w.contains("too large")) {
                Ok(())
            } else {
                Err(format!("no program: {}", words.join("\n")))
            };
        }
    };
    let facts = setting.facts(&program);
    let machine = Machine::new(program);
    let program = machine.program();
    let names = program
        .items
        .iter()
        .map(|item| {
            let line = &program.lines[item.line];
            (
                (
                    line.name.clone(),
                    line.kind as usize,
                    line.instance as usize,
                ),
                item.kind,
            )
        })
        .collect();
    let oracle = Oracle::new(
        subject.book,
        subject.days.to_vec(),
        home(&setting, subject.household),
    );
    let both = Both {
        oracle: match moment {
            Moment::Now => oracle,
            Moment::Settled => oracle.once_settled(),
        },
        special: machine.special(&facts),
        facts,
        names,
    };
    let mut luck = Luck::new(asked.seed);
    tally.households += 1;
    both.by_law(&mut luck, asked, setting.own_hours(), tally)?;
    let up_to = whole([48, 60, 20, 100, 168][luck.below(5)]);
    let walk = both.special.walk(fraction(&up_to));
    both.along(&walk, &up_to, &mut luck, asked, tally)?;
    both.bounded(&walk, &up_to, &mut luck, asked, tally)
}

impl Both<'_> {
    fn program(&self) -> &Program {
        self.special.program()
    }

    /// Items by the law on the grid and anywhere; holds and notes.
    fn by_law(&self, luck: &mut Luck, asked: Asked, own: Hours, tally: &mut Tally) -> Outcome {
        let mut hours = vec![0, own.0, 25, 16_800];
        hours.extend((0..asked.law_points).map(|_| luck.between(0, 240) * 25));
        hours.extend((0..asked.law_points / 3).map(|_| luck.between(0, 16_800)));
        for hundredths in hours {
            let at = q(i128::from(hundredths), 100);
            let mut points = self.special.points();
            let found = points.at(Hours(hundredths));
            let many = points.many(&[Hours(0), Hours(hundredths), Hours(16_800)]);
            if many[1] != found {
                return Err(format!(
                    "many points at once differ from one: {:?} and {found:?}",
                    many[1]
                ));
            }
            let exactly = self
                .special
                .points()
                .exactly_at(Fraction::new(i128::from(hundredths), 100));
            self.same_money(&found, &at, "on the grid")?;
            if found != exactly {
                return Err(format!(
                    "at {at} hours the grid has {found:?}, the exact evaluation {exactly:?}"
                ));
            }
            let sorted = |mut list: Vec<String>| {
                list.sort();
                list.dedup();
                list
            };
            for (what, mine, theirs) in [
                (
                    "holds",
                    self.oracle.holds(&at),
                    self.special.standing(Hours(hundredths)).holds,
                ),
                (
                    "notes",
                    self.oracle.notes(&at),
                    self.special.standing(Hours(hundredths)).notes,
                ),
            ] {
                if mine != sorted(theirs.clone()) {
                    return Err(format!(
                        "{what} at {at} hours: the oracle has {mine:?}, the engine {theirs:?}"
                    ));
                }
            }
            tally.law_points += 1;
        }
        for _ in 0..asked.fractions {
            let below = [3, 7, 64, 1000, 5200, 99_991, 1_000_003][luck.below(7)];
            let at = q(i128::from(luck.between(0, 100 * below)), i128::from(below));
            self.same_money(
                &self.special.points().exactly_at(fraction(&at)),
                &at,
                "exactly",
            )?;
            tally.fraction_points += 1;
        }
        Ok(())
    }

    fn same_money(&self, found: &[Money], at: &Q, how: &str) -> Outcome {
        let expected = self.oracle.items(at, Mode::Law);
        if expected.len() != found.len() {
            return Err(format!(
                "the oracle has {} items, the engine {}",
                expected.len(),
                found.len()
            ));
        }
        for (((name, value), (own, kind)), money) in expected.iter().zip(&self.names).zip(found) {
            if name != own {
                return Err(format!(
                    "the oracle has the item {name:?} where the engine has {own:?}"
                ));
            }
            let unit = if *kind == ItemKind::Passport { 1 } else { 100 };
            if *value != q(i128::from(money.0), unit) {
                return Err(format!(
                    "{name:?} at {at} hours {how}: the oracle has {}, the engine {money:?}\n{}",
                    show(value),
                    self.first_difference(at)
                ));
            }
        }
        Ok(())
    }

    /// The first figure in the order of the law that differs, for a failure on the grid.
    fn first_difference(&self, at: &Q) -> String {
        let hundredths = at * whole(100);
        if !hundredths.is_integer() {
            return String::new();
        }
        let hours = Hours(hundredths.to_integer().to_i64().expect("hours are small"));
        let mut out = String::new();
        for line in working(&self.special, hours) {
            let mine = self
                .oracle
                .figure_by_law(&line.name, line.of.0, line.of.1, at);
            if mine.as_ref().is_some_and(|mine| *mine != of(line.exact)) {
                out += &format!(
                    "figure {} of {:?}: the oracle has {mine:?}, the engine {:?}\n",
                    line.name, line.of, line.exact
                );
            }
        }
        out
    }

    /// Items of the oracle with roundings smoothed.
    fn smooth(&self, at: &Q) -> Vec<Q> {
        self.oracle
            .items(at, Mode::Smooth)
            .into_iter()
            .map(|(_, value)| value)
            .collect()
    }

    fn differs(&self, item: usize, at: &Q, how: &str, oracle: &Q, walk: &Q) -> String {
        format!(
            "{:?} at {} hours {how}: the oracle has {}, the walk {}",
            self.names[item].0,
            show(at),
            show(oracle),
            show(walk)
        )
    }

    fn on_piece(&self, piece: &Piece, at: &Q, how: &str) -> Outcome {
        for (item, (mine, curve)) in self.smooth(at).iter().zip(&piece.items).enumerate() {
            let theirs = on_curve(curve, at);
            if *mine != theirs {
                return Err(self.differs(
                    item,
                    at,
                    &format!("{how} of the piece {:?} to {:?}", piece.from, piece.to),
                    mine,
                    &theirs,
                ));
            }
        }
        Ok(())
    }

    /// The walk: no gaps, each piece at both ends from inside and at three places within, each bend, and rationals at random.
    fn along(
        &self,
        walk: &Walk,
        up_to: &Q,
        luck: &mut Luck,
        asked: Asked,
        tally: &mut Tally,
    ) -> Outcome {
        let Some(first) = walk.pieces.first() else {
            return Err("a walk without a piece".into());
        };
        let ends_well = walk.pieces.last().is_some_and(|last| of(last.to) == *up_to);
        if !of(first.from).is_integer() || of(first.from) != whole(0) || !ends_well {
            return Err(format!(
                "the walk goes from {:?} to {:?}",
                first.from,
                walk.pieces.last().map(|p| p.to)
            ));
        }
        for pair in walk.pieces.windows(2) {
            if pair[0].to != pair[1].from || pair[0].from >= pair[0].to {
                return Err(format!(
                    "the piece {:?} to {:?} does not meet the one from {:?}",
                    pair[0].from, pair[0].to, pair[1].from
                ));
            }
        }
        let step = walk.pieces.len().div_ceil(asked.most_pieces).max(1);
        for piece in walk.pieces.iter().skip(luck.below(step)).step_by(step) {
            self.piece(piece, tally)?;
        }
        let step = walk.bends.len().div_ceil(asked.most_pieces).max(1);
        for bend in walk.bends.iter().skip(luck.below(step)).step_by(step) {
            let at = of(bend.at);
            let values = self.special.smooth_at(bend.at);
            for (item, (mine, theirs)) in self.smooth(&at).iter().zip(&values).enumerate() {
                let theirs = of(*theirs);
                // A value that does not fit is given to a thousand million millionth.
                let fits = mine.numer().to_i128().is_some() && mine.denom().to_i128().is_some();
                let same = if fits {
                    *mine == theirs
                } else {
                    (mine - &theirs).abs() <= q(1, 1_000_000_000_000_000)
                };
                if !same {
                    return Err(self.differs(item, &at, "at a bend", mine, &theirs));
                }
            }
            tally.bends += 1;
            tally.irrational += usize::from(irrational(bend.at));
        }
        for _ in 0..asked.rationals {
            let below = luck.between(1, 10_000);
            let at = q(i128::from(luck.between(0, 168 * below)), i128::from(below));
            let piece = walk.pieces.iter().find(|p| {
                of(p.from) < at && at < of(p.to) && !(irrational(p.to) && of(p.to) - &at < close())
            });
            if let Some(piece) = piece {
                self.on_piece(piece, &at, "inside")?;
                tally.walk_points += 1;
            }
        }
        Ok(())
    }

    fn piece(&self, piece: &Piece, tally: &mut Tally) -> Outcome {
        let (from, to) = (of(piece.from), of(piece.to));
        let length = &to - &from;
        tally.pieces += 1;
        tally.curved += usize::from(piece.items.iter().any(|c| c.c[2] != 0));
        if irrational(piece.to) && length <= close() * whole(4) {
            tally.narrow += 1;
            return Ok(());
        }
        // The true place of an irrational end lies less than this before the end that the walk gives, never behind it.
        let beside = close().min(&length * q(1, 8));
        let inside = [q(1, 4), q(1, 2), q(3, 4)].map(|part| &from + &length * part);
        for (at, how) in [
            (&from + &beside, "right of the start"),
            (&to - &beside, "left of the end"),
        ] {
            self.on_piece(piece, &at, how)?;
        }
        for at in inside {
            self.on_piece(piece, &at, "inside")?;
        }
        tally.walk_points += 5;
        Ok(())
    }

    /// The law's grid against the walk, within the bound of the program.
    fn bounded(
        &self,
        walk: &Walk,
        up_to: &Q,
        luck: &mut Luck,
        asked: Asked,
        tally: &mut Tally,
    ) -> Outcome {
        let quarters = (up_to * whole(4))
            .to_integer()
            .to_i64()
            .expect("hours are small");
        for _ in 0..asked.bounded {
            let quarter = luck.between(0, quarters);
            let at = q(i128::from(quarter), 4);
            let law = self.special.points().at(Hours(quarter * 25));
            let registers = bounds(self.program(), &self.facts, &at);
            let piece = walk
                .pieces
                .iter()
                .find(|p| of(p.from) < at && at < of(p.to));
            for (place, (item, money)) in self.program().items.iter().zip(&law).enumerate() {
                let bounded = &registers[item.reg.position()];
                if let Some(piece) = piece {
                    let on_walk = on_curve(&piece.items[place], &at);
                    if on_walk != bounded.smooth {
                        return Err(self.differs(
                            place,
                            &at,
                            "step by step",
                            &bounded.smooth,
                            &on_walk,
                        ));
                    }
                }
                let unit = if item.kind == ItemKind::Passport {
                    1
                } else {
                    100
                };
                let apart = (q(i128::from(money.0), unit) - &bounded.smooth).abs();
                if apart > bounded.error {
                    return Err(format!(
                        "{:?} at {at} hours: the law is {} from the walk, more than {}",
                        self.names[place].0,
                        show(&apart),
                        show(&bounded.error)
                    ));
                }
                tally.windows += usize::from(bounded.window);
                tally.bounded_items += 1;
            }
            tally.bounded_points += 1;
        }
        Ok(())
    }
}

/// Whether a place of the walk is the upper end of an isolating interval: its denominator is a high power of two.
fn irrational(place: Fraction) -> bool {
    let below = place.denominator();
    below.count_ones() == 1 && below > 1 << 20
}

fn on_curve(curve: &Curve, at: &Q) -> Q {
    let [c0, c1, c2] = curve.c.map(whole);
    (c0 + (c1 + c2 * at) * at) / whole(curve.scale)
}

/// The kinds and facts that the oracle read in the rule text are those of the schema.
pub fn same_schema(book: &Book, schema: &Schema) -> Outcome {
    let mine: Vec<Kind<'_>> = book
        .kinds
        .iter()
        .map(|k| {
            (
                k.name.as_str(),
                k.owner,
                k.facts.iter().map(|f| (f.name.as_str(), f.units)).collect(),
            )
        })
        .collect();
    let theirs: Vec<Kind<'_>> = schema
        .kinds
        .iter()
        .map(|k| {
            (
                k.name.as_str(),
                k.owner,
                k.facts
                    .iter()
                    .map(|f| (f.name.as_str(), f.ty.units()))
                    .collect(),
            )
        })
        .collect();
    if mine == theirs {
        Ok(())
    } else {
        Err(format!("the oracle reads {mine:?}, the product {theirs:?}"))
    }
}
