//! Invented households with invented amounts: consistent assessments made from piecewise straight
//! lines, without any engine. Nothing here is a fact of the law.

#[path = "invented/homes.rs"]
mod homes;

pub use homes::*;

use chrono::NaiveDate;
use hourworth::measures::{
    AmountUse, Assessment, BudgetLine, Cause, EarnerResult, Effect, FactUse, ItemInfo, ItemKind,
    JobTerms, NoGain, OfferMeasures, Point, Segment, Trap, Turn, TurnKind,
};
use hourworth::num::{Direction, Fraction, Hours, Money, divide_rounded};
use hourworth::statement::{FactShape, LetterContext, LetterDelivery, Office, TemplateSet};
use std::collections::BTreeMap;

/// `n / d`.
pub fn f(n: i128, d: i128) -> Fraction {
    Fraction::new(n, d)
}

/// A whole number.
pub fn w(n: i128) -> Fraction {
    Fraction::whole(n)
}

/// Currency units as money, rounded half up.
pub fn money(units: Fraction) -> Money {
    let pence = divide_rounded(
        units.numerator() * 100,
        units.denominator(),
        Direction::HalfUp,
    );
    Money(i64::try_from(pence).expect("a small sum"))
}

/// A function of hours in straight pieces: each starts at some hours with a value and a slope.
#[derive(Clone, Debug)]
pub struct Pieces(pub Vec<(Fraction, Fraction, Fraction)>);

impl Pieces {
    pub fn flat(value: Fraction) -> Pieces {
        Pieces(vec![(w(0), value, w(0))])
    }

    pub fn line(slope: Fraction) -> Pieces {
        Pieces(vec![(w(0), w(0), slope)])
    }

    /// `before` below these hours, `after` from them on.
    pub fn step(at: Fraction, before: Fraction, after: Fraction) -> Pieces {
        Pieces(vec![(w(0), before, w(0)), (at, after, w(0))])
    }

    fn piece(&self, at: Fraction) -> (Fraction, Fraction, Fraction) {
        *self
            .0
            .iter()
            .rev()
            .find(|piece| piece.0 <= at)
            .expect("pieces start at zero")
    }

    /// The value at some hours; at a jump the one after it.
    pub fn at(&self, hours: Fraction) -> Fraction {
        let (from, value, slope) = self.piece(hours);
        value + slope * (hours - from)
    }

    /// The value just before some hours.
    pub fn before(&self, hours: Fraction) -> Fraction {
        let (from, value, slope) = *self
            .0
            .iter()
            .rev()
            .find(|piece| piece.0 < hours)
            .unwrap_or(&self.0[0]);
        value + slope * (hours - from)
    }

    pub fn slope(&self, at: Fraction) -> Fraction {
        self.piece(at).2
    }

    fn join(&self, other: &Pieces, with: impl Fn(Fraction, Fraction) -> Fraction) -> Pieces {
        let mut places: Vec<Fraction> =
            self.0.iter().chain(&other.0).map(|piece| piece.0).collect();
        places.sort();
        places.dedup();
        let pieces = places.into_iter().map(|at| {
            (
                at,
                with(self.at(at), other.at(at)),
                with(self.slope(at), other.slope(at)),
            )
        });
        Pieces(pieces.collect())
    }

    pub fn plus(&self, other: &Pieces) -> Pieces {
        self.join(other, |a, b| a + b)
    }

    pub fn less(&self, other: &Pieces) -> Pieces {
        self.join(other, |a, b| a - b)
    }

    pub fn times(&self, factor: Fraction) -> Pieces {
        Pieces(
            self.0
                .iter()
                .map(|p| (p.0, p.1 * factor, p.2 * factor))
                .collect(),
        )
    }

    /// Never below nothing.
    pub fn floored(&self) -> Pieces {
        let mut out: Vec<(Fraction, Fraction, Fraction)> = vec![];
        for (position, &(from, value, slope)) in self.0.iter().enumerate() {
            let end = self.0.get(position + 1).map(|next| next.0);
            let zero = w(0);
            let crossing = (slope != zero).then(|| from - value / slope);
            let inside = crossing.filter(|at| *at > from && end.is_none_or(|end| *at < end));
            let starts_above = value > zero || (value == zero && slope > zero);
            out.push(if starts_above {
                (from, value, slope)
            } else {
                (from, zero, zero)
            });
            if let Some(at) = inside {
                out.push(if starts_above {
                    (at, zero, zero)
                } else {
                    (at, zero, slope)
                });
            }
        }
        Pieces(out)
    }
}

/// An item with its sums over hours.
pub struct Line {
    pub name: &'static str,
    pub kind: ItemKind,
    pub adult: Option<usize>,
    pub part: &'static str,
    pub sums: Pieces,
}

fn sign(kind: ItemKind) -> Fraction {
    match kind {
        ItemKind::Pay | ItemKind::Income | ItemKind::Benefit => w(1),
        ItemKind::Tax | ItemKind::Contribution | ItemKind::Pension | ItemKind::Loan => w(-1),
        ItemKind::Passport | ItemKind::Cost | ItemKind::Housing | ItemKind::Employer => w(0),
    }
}

fn hours_up(at: Fraction) -> Hours {
    Hours(i64::try_from((at * w(100)).ceil()).expect("few hours"))
}

/// The budget line of items up to so many hours.
pub fn budget_line(
    items: &[Line],
    terms: JobTerms,
    earner: usize,
    step_to: Hours,
    up_to: i64,
) -> BudgetLine {
    let total = |filter: &dyn Fn(ItemKind) -> Fraction| {
        items.iter().fold(Pieces::flat(w(0)), |sum, item| {
            sum.plus(&item.sums.times(filter(item.kind)))
        })
    };
    let net = total(&sign);
    let after = total(&|kind| {
        if kind == ItemKind::Cost {
            w(-1)
        } else {
            sign(kind)
        }
    });
    let pay = items
        .iter()
        .filter(|item| item.kind == ItemKind::Pay && item.adult == Some(earner))
        .fold(Pieces::flat(w(0)), |sum, item| sum.plus(&item.sums));
    let last = w(i128::from(up_to));
    let rate = |line: &Pieces, at: Fraction| {
        let slope = pay.slope(at);
        (!slope.is_zero()).then(|| w(1) - line.slope(at) / slope)
    };
    let mut places: Vec<Fraction> = items
        .iter()
        .flat_map(|item| item.sums.0.iter().map(|piece| piece.0))
        .collect();
    places.push(w(0));
    places.sort();
    places.dedup();
    places.retain(|at| *at < last);
    let mut segments = vec![];
    for (position, &from) in places.iter().enumerate() {
        let to = places.get(position + 1).copied().unwrap_or(last);
        let slope = pay.slope(from);
        segments.push(Segment {
            from,
            to,
            pay_from: pay.at(from),
            pay_to: pay.before(to),
            net_from: net.at(from),
            net_to: net.before(to),
            after_costs_from: after.at(from),
            after_costs_to: after.before(to),
            metr: rate(&net, from),
            metr_after_costs: rate(&after, from),
            pension_share: w(0),
            shares: items
                .iter()
                .map(|item| {
                    if slope.is_zero() {
                        w(0)
                    } else {
                        sign(item.kind) * item.sums.slope(from) / slope
                    }
                })
                .collect(),
            virtual_income: net.at(from) - net.slope(from) * from,
        });
    }
    let mut turns = vec![];
    for &at in places.iter().filter(|at| **at > w(0)) {
        let mut causes = vec![];
        let mut effects = vec![];
        let mut passport = false;
        for (position, item) in items.iter().enumerate() {
            if !item.sums.0.iter().any(|piece| piece.0 == at) {
                continue;
            }
            let factor = if item.kind == ItemKind::Passport {
                w(1)
            } else {
                sign(item.kind)
            };
            let size = factor * (item.sums.at(at) - item.sums.before(at));
            let jump = if item.kind == ItemKind::Passport {
                passport |= !size.is_zero();
                Money(i64::try_from(size.floor()).expect("one"))
            } else {
                money(size)
            };
            causes.push(Cause {
                part: item.part.to_owned(),
                line: item.name.to_owned(),
            });
            effects.push(Effect {
                item: position,
                jump,
                slope: w(0),
            });
        }
        if causes.len() > 1 {
            causes.retain(|cause| cause.line != "support");
        }
        let size = money(net.at(at) - net.before(at));
        let kind = if size.0 != 0 {
            TurnKind::Cliff
        } else if passport {
            TurnKind::Passport
        } else {
            TurnKind::Kink
        };
        let left = segments.iter().find(|segment: &&Segment| segment.to == at);
        turns.push(Turn {
            kind,
            at,
            hours: hours_up(at),
            pay: money(pay.at(at)),
            net_before: money(net.before(at)),
            net_after: money(net.at(at)),
            after_costs_before: money(after.before(at)),
            after_costs_after: money(after.at(at)),
            size,
            metr_before: left.and_then(|segment| segment.metr),
            metr_after: rate(&net, at),
            causes,
            effects,
        });
    }
    let mut wanted: Vec<Hours> = (0..=up_to).map(Hours::whole).collect();
    wanted.extend([terms.hours, step_to, Hours(terms.hours.0 - 400)]);
    wanted.retain(|hours| hours.0 >= 0);
    wanted.sort();
    wanted.dedup();
    let grid: Vec<Point> = wanted
        .iter()
        .map(|hours| point(items, *hours, earner))
        .collect();
    let find = |hours: Hours| {
        grid.iter()
            .position(|point| point.hours == hours)
            .expect("on the grid")
    };
    let (own, step_to) = (find(terms.hours), find(step_to));
    let measured = if after.0 == net.0 { &net } else { &after };
    BudgetLine {
        own,
        step_to,
        first_minute: money(net.at(w(0))),
        traps: traps(measured, &places, last),
        no_gain: segments
            .iter()
            .filter(|segment| net.slope(segment.from).is_zero())
            .map(|segment| NoGain {
                from: segment.from,
                to: segment.to,
            })
            .collect(),
        terms,
        grid,
        turns,
        segments,
        up_to: Hours::whole(up_to),
        has_costs: after.0 != net.0,
    }
}

/// Ranges where the sum lies below an earlier one by more than one unit.
fn traps(sum: &Pieces, places: &[Fraction], last: Fraction) -> Vec<Trap> {
    let mut traps: Vec<Trap> = vec![];
    let (mut peak, mut peak_at) = (sum.at(w(0)), w(0));
    let mut open: Option<Trap> = None;
    for (position, &from) in places.iter().enumerate() {
        let to = places.get(position + 1).copied().unwrap_or(last);
        for (at, value) in [(from, sum.at(from)), (to, sum.before(to))] {
            if value > peak {
                if let Some(mut trap) = open.take() {
                    let slope = sum.slope(from);
                    trap.to = Some(from + (peak - sum.at(from)) / slope);
                    traps.push(trap);
                }
                (peak, peak_at) = (value, at);
            } else if peak - value > w(1) {
                let loss = money(peak - value);
                let trap = open.get_or_insert(Trap {
                    from: peak_at,
                    to: None,
                    peak: money(peak),
                    depth: loss,
                });
                trap.depth = trap.depth.max(loss);
            }
        }
    }
    traps.extend(open);
    traps
}

/// The household at some hours, items rounded to the minor unit.
fn point(items: &[Line], hours: Hours, earner: usize) -> Point {
    let at = hours.as_fraction();
    let sums: Vec<Money> = items
        .iter()
        .map(|item| {
            if item.kind == ItemKind::Passport {
                Money(i64::try_from(item.sums.at(at).floor()).expect("one"))
            } else {
                money(item.sums.at(at))
            }
        })
        .collect();
    let sum = |kinds: &[ItemKind]| -> Money {
        items
            .iter()
            .zip(&sums)
            .filter(|(item, _)| kinds.contains(&item.kind))
            .map(|(_, sum)| *sum)
            .sum()
    };
    let comes_off = sum(&[
        ItemKind::Tax,
        ItemKind::Contribution,
        ItemKind::Pension,
        ItemKind::Loan,
    ]);
    let net = sum(&[ItemKind::Pay, ItemKind::Income, ItemKind::Benefit]) - comes_off;
    let after_costs = net - sum(&[ItemKind::Cost]);
    let slope = |cost: bool| {
        let pay: Fraction = items
            .iter()
            .filter(|item| item.kind == ItemKind::Pay && item.adult == Some(earner))
            .fold(w(0), |sum, item| sum + item.sums.slope(at));
        let income = items.iter().fold(w(0), |sum, item| {
            let factor = if cost && item.kind == ItemKind::Cost {
                w(-1)
            } else {
                sign(item.kind)
            };
            sum + factor * item.sums.slope(at)
        });
        (!pay.is_zero()).then(|| w(1) - income / pay)
    };
    Point {
        hours,
        pay: items
            .iter()
            .zip(&sums)
            .filter(|(item, _)| item.kind == ItemKind::Pay && item.adult == Some(earner))
            .map(|(_, sum)| *sum)
            .sum(),
        take_home: sum(&[ItemKind::Pay]) - comes_off,
        net,
        after_costs,
        after_housing: after_costs - sum(&[ItemKind::Housing]),
        ptr: None,
        ptr_after_costs: None,
        replacement: None,
        metr_here: slope(false),
        metr_here_after_costs: slope(true),
        items: sums,
    }
}

/// What an invented household is made of.
#[derive(Clone)]
pub struct Home {
    /// Benefit before anything comes off, a month.
    pub award: i128,
    /// Pay that the benefit leaves alone, a month.
    pub allowance: i128,
    /// Rent and local tax a month.
    pub rent: i128,
    /// Net pay of the other adult; 0 for none.
    pub partner: i128,
    /// Childcare an hour worked, a month.
    pub childcare: i128,
    /// Hours at which help with local tax ends, and the help.
    pub cliff: Option<(i128, i128)>,
    /// Hours at which free school meals end.
    pub meals: Option<i128>,
    /// Contribution that the employer pays on top, a month.
    pub employer: Option<i128>,
}

pub const TENANT: Home = Home {
    award: 940,
    allowance: 0,
    rent: 690,
    partner: 0,
    childcare: 0,
    cliff: None,
    meals: None,
    employer: None,
};
pub const LONE_PARENT: Home = Home {
    award: 1480,
    allowance: 404,
    rent: 780,
    partner: 0,
    childcare: 18,
    cliff: Some((23, 94)),
    meals: Some(14),
    employer: None,
};
pub const COUPLE: Home = Home {
    award: 1690,
    allowance: 404,
    rent: 860,
    partner: 1250,
    childcare: 0,
    cliff: None,
    meals: None,
    employer: None,
};

/// The items of a home at a wage in ten-thousandths an hour.
pub fn items(home: &Home, wage: i64, adult: usize) -> Vec<Line> {
    let pay = Pieces::line(f(i128::from(wage) * 52, 10_000 * 12));
    let pension = pay.less(&Pieces::flat(w(520))).floored().times(f(5, 100));
    let tax = pay
        .less(&pension)
        .less(&Pieces::flat(f(104_750, 100)))
        .floored()
        .times(f(20, 100));
    let contribution = pay.less(&Pieces::flat(w(1048))).floored().times(f(8, 100));
    let in_hand = pay.less(&tax).less(&contribution).less(&pension);
    let partner = Pieces::flat(w(home.partner));
    let childcare = Pieces::line(w(home.childcare));
    let counted = in_hand
        .plus(&partner)
        .less(&Pieces::flat(w(home.allowance)))
        .floored()
        .times(f(55, 100));
    let award = Pieces::flat(w(home.award))
        .plus(&childcare.times(f(85, 100)))
        .less(&counted)
        .floored();
    let line = |name, kind, own: bool, part, sums| Line {
        name,
        kind,
        adult: own.then_some(adult),
        part,
        sums,
    };
    let mut all = vec![
        line("pay", ItemKind::Pay, true, "Pay", pay),
        line("income_tax", ItemKind::Tax, true, "Income Tax", tax),
        line(
            "contribution",
            ItemKind::Contribution,
            true,
            "National Insurance",
            contribution,
        ),
        line(
            "pension_payment",
            ItemKind::Pension,
            true,
            "Pension",
            pension,
        ),
        line(
            "support",
            ItemKind::Benefit,
            false,
            "Household Support",
            award,
        ),
    ];
    if home.partner > 0 {
        all.push(Line {
            name: "pay",
            kind: ItemKind::Pay,
            adult: Some(1 - adult),
            part: "Pay",
            sums: partner,
        });
    }
    if let Some((hours, help)) = home.cliff {
        let help = Pieces::step(w(hours), w(help), w(0));
        all.push(line(
            "local_tax_help",
            ItemKind::Benefit,
            false,
            "Local Tax Help",
            help,
        ));
    }
    if let Some(hours) = home.meals {
        let meals = Pieces::step(w(hours), w(1), w(0));
        all.push(line(
            "school_meals",
            ItemKind::Passport,
            false,
            "School meals",
            meals,
        ));
    }
    if let Some(sum) = home.employer {
        all.push(line(
            "employer_contribution",
            ItemKind::Employer,
            true,
            "National Insurance",
            Pieces::flat(w(sum)),
        ));
    }
    if home.childcare > 0 {
        all.push(line(
            "childcare",
            ItemKind::Cost,
            false,
            "Childcare",
            childcare,
        ));
    }
    if home.rent > 0 {
        all.push(line(
            "rent",
            ItemKind::Housing,
            false,
            "Housing",
            Pieces::flat(w(home.rent)),
        ));
    }
    all
}

/// An offer: its words, hours in hundredths, wage in ten-thousandths.
pub type Offer = (&'static str, i64, i64);

/// One earner with today's job (hours in hundredths, wage) and offers.
pub fn earner(
    home: &Home,
    adult: usize,
    name: &str,
    job: Option<(i64, i64)>,
    offers: &[Offer],
) -> EarnerResult {
    let mut lines = vec![];
    if let Some((hours, wage)) = job {
        let terms = JobTerms {
            offer: String::new(),
            reference: String::new(),
            wage,
            hours: Hours(hours),
            facts: vec![],
        };
        lines.push(budget_line(
            &items(home, wage, adult),
            terms,
            adult,
            Hours(hours + 400),
            48,
        ));
    }
    let mut measures = vec![];
    for (position, (words, hours, wage)) in offers.iter().enumerate() {
        let terms = JobTerms {
            offer: (*words).to_owned(),
            reference: format!("o{position}"),
            wage: *wage,
            hours: Hours(*hours),
            facts: vec![],
        };
        let line = budget_line(&items(home, *wage, adult), terms, adult, Hours(*hours), 48);
        let today = job.map(|_| lines[0].grid[lines[0].own].net);
        let holding = today.and_then(|today| {
            line.grid
                .iter()
                .find(|point| point.net >= today)
                .map(|point| point.hours)
        });
        measures.push(OfferMeasures {
            line: lines.len(),
            holding,
            rise: None,
            pay: None,
        });
        lines.push(line);
    }
    let wage = job
        .map(|job| job.1)
        .or(offers.first().map(|offer| offer.2))
        .unwrap_or(120_000);
    EarnerResult {
        adult,
        name: name.to_owned(),
        not_in_work: point(&items(home, wage, adult), Hours(0), adult),
        has_job: job.is_some(),
        lines,
        offers: measures,
        target: None,
    }
}

fn fact(of: &str, name: &str, value: &str, known: char) -> FactUse {
    FactUse {
        kind: "household".into(),
        of: of.into(),
        name: name.into(),
        value: value.into(),
        known,
    }
}

/// A household of these earners.
pub fn assessment(home: &Home, earners: Vec<EarnerResult>) -> Assessment {
    let adult = earners[0].adult;
    Assessment {
        reference: "H-0042".into(),
        items: items(home, 120_000, adult)
            .into_iter()
            .map(|item| ItemInfo {
                name: item.name.into(),
                kind: item.kind,
                adult: item.adult,
                law: "Invented Act s.1".into(),
                part: item.part.into(),
            })
            .collect(),
        earners,
        couple: None,
        settled: None,
        unclaimed: vec![],
        notes: vec![],
        facts: vec![
            fact("", "rent", &format!("£{}.00 a month", home.rent), 's'),
            fact("", "tenure", "private", 't'),
            fact("Ana", "birth", "1991-05-02", 't'),
            fact("Ana", "pension_rate", "5%", 'a'),
            fact("", "savings", "£0.00", 'a'),
            fact("Ana", "student", "no", 'a'),
            fact("Ana", "carer", "no", 'a'),
        ],
        amounts: vec![AmountUse {
            name: "support_taper".into(),
            value: "55%".into(),
            from: "2026-04-06".into(),
            to: String::new(),
            source: "Invented Gazette".into(),
            locator: "p. 1".into(),
            confirmed: true,
            changed_because: String::new(),
            part: "Invented part".to_owned(),
        }],
    }
}
