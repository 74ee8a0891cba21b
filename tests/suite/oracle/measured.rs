//! Measures of random households under random small packs, checked against plain readings of their definitions: whatever a pack
//! says, the pieces cover the line, rates follow from sums, and traps and hours are those that a look at every quarter hour finds.

use super::book::Book;
use super::homes::{Village, marks, shown};
use super::invent::{DAYS, files, invent};
use super::luck::Luck;
use super::text::{day, q};
use hourworth::case::Household;
use hourworth::engine::Machine;
use hourworth::load::{check_pack, schema_of};
use hourworth::measures::{
    Assessment, BudgetLine, EarnerResult, Point, Programs, Request, Segment, Verdict, assess,
};
use hourworth::num::{Fraction, Hours, Money};
use hourworth::program::{Moment, Settling, Shape};
use hourworth::rules::Pack;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::Arc;

const SEED: u64 = 9_000_000;

struct Shelf<'p> {
    pack: &'p Pack,
    /// Every program is one of this moment, whatever is asked for.
    always: Option<Moment>,
    days: Vec<i64>,
    settling: Vec<Settling>,
}

impl Programs for Shelf<'_> {
    fn machine(&mut self, shape: &Shape) -> Result<Arc<Machine>, String> {
        let mut shape = shape.clone();
        shape.moment = self.always.unwrap_or(shape.moment);
        let program = self
            .pack
            .program(&self.days, &[], &shape)
            .map_err(|faults| format!("{faults:?}"))?;
        Ok(Arc::new(Machine::new(program)))
    }

    fn settling(&self) -> &[Settling] {
        &self.settling
    }
}

/// The first thing that is not as the definitions say.
fn wrong(household: &Household, assessment: &Assessment, wanted: Money) -> Option<String> {
    assessment.earners.iter().find_map(|earner| {
        let lines = earner.lines.iter().enumerate();
        lines
            .clone()
            .find_map(|(at, line)| {
                wrong_line(line, earner).map(|what| format!("line {at}: {what}"))
            })
            .or_else(|| wrong_hours(household, earner, wanted))
    })
}

fn wrong_line(line: &BudgetLine, earner: &EarnerResult) -> Option<String> {
    let (first, last) = (line.segments.first()?, line.segments.last()?);
    if !first.from.is_zero() || last.to != line.up_to.as_fraction() {
        return Some(format!(
            "segments go from {:?} to {:?}",
            first.from, last.to
        ));
    }
    if let Some(pair) = line
        .segments
        .windows(2)
        .find(|pair| pair[0].to != pair[1].from || pair[0].from >= pair[0].to)
    {
        return Some(format!("a gap at {:?}", pair[0].to));
    }
    if let Some(turn) = line
        .turns
        .iter()
        .find(|turn| line.segments.iter().all(|s| s.from != turn.at))
    {
        return Some(format!("a turn inside a segment at {:?}", turn.at));
    }
    if line.grid[line.own].hours != line.terms.hours
        || line
            .grid
            .windows(2)
            .any(|pair| pair[0].hours >= pair[1].hours)
    {
        return Some("the grid is out of order".into());
    }
    for point in &line.grid {
        let rate = |sum: fn(&Point) -> Money| {
            (point.pay.0 > 0).then(|| {
                Fraction::ONE
                    - (sum(point) - sum(&earner.not_in_work)).in_units() / point.pay.in_units()
            })
        };
        if point.ptr != rate(|p| p.net) || point.ptr_after_costs != rate(|p| p.after_costs) {
            return Some(format!("participation rate at {:?}", point.hours));
        }
    }
    wrong_traps(line)
}

/// Traps by looking at both ends of every straight segment. Lines with a bent one are left to the other checks.
fn wrong_traps(line: &BudgetLine) -> Option<String> {
    let ends = |s: &Segment| {
        if line.has_costs {
            (s.after_costs_from, s.after_costs_to)
        } else {
            (s.net_from, s.net_to)
        }
    };
    // In big fractions, since the ends may be irrational places with large denominators.
    let big = |value: Fraction| q(value.numerator(), value.denominator());
    let bent = |s: &Segment| {
        let (from, to) = (big(s.from), big(s.to));
        let slope = (big(s.net_to) - big(s.net_from)) / (to - &from);
        big(s.net_from) - slope * from != big(s.virtual_income)
    };
    if line.segments.iter().any(bent) {
        return None;
    }
    let at_zero = line
        .grid
        .first()
        .map(|p| if line.has_costs { p.after_costs } else { p.net })?
        .in_units();
    let mut peak = at_zero;
    let unit = Fraction::ONE;
    for segment in &line.segments {
        let (from, to) = ends(segment);
        for (place, sum) in [(segment.from, from), (segment.to, to)] {
            let inside = line
                .traps
                .iter()
                .find(|trap| trap.from <= place && trap.to.is_none_or(|end| place <= end));
            if peak - sum > unit && inside.is_none() {
                return Some(format!(
                    "{} at {} hours is below {} and no trap holds it",
                    sum.decimal(2),
                    place.decimal(4),
                    peak.decimal(2)
                ));
            }
            if let Some(trap) = inside
                && peak - sum > trap.depth.in_units() + Fraction::new(1, 100)
            {
                return Some(format!(
                    "a trap from {} is deeper than {}: {}",
                    trap.from.decimal(4),
                    trap.depth.plain(),
                    (peak - sum).decimal(2)
                ));
            }
            peak = peak.max(sum);
        }
    }
    line.traps
        .iter()
        .find(|trap| trap.depth.0 < 100 || trap.to.is_some_and(|to| to <= trap.from))
        .map(|trap| format!("{trap:?}"))
}

/// Target and holding hours from the quarter hours of the grid.
fn wrong_hours(household: &Household, earner: &EarnerResult, wanted: Money) -> Option<String> {
    let quarters = |line: &BudgetLine| -> Vec<(Hours, Money)> {
        line.grid
            .iter()
            .filter(|p| p.hours.0 % 25 == 0)
            .map(|p| (p.hours, p.after_costs))
            .collect()
    };
    let stays = |line: &BudgetLine, sum: Money| -> Option<Hours> {
        let all = quarters(line);
        (0..all.len())
            .find(|from| all[*from..].iter().all(|(_, left)| *left >= sum))
            .map(|from| all[from].0)
    };
    let line = earner.lines.first()?;
    let target = earner.target.as_ref()?;
    let first = quarters(line)
        .into_iter()
        .find(|(_, left)| *left >= wanted)
        .map(|(hours, _)| hours);
    if (target.first, target.stays) != (first, stays(line, wanted)) {
        return Some(format!(
            "{target:?}, expected {first:?} and {:?}",
            stays(line, wanted)
        ));
    }
    let today = if earner.has_job {
        line.grid[line.own].after_costs
    } else {
        earner.not_in_work.after_costs
    };
    let own = line.grid[line.own].hours;
    let split = earner.offers.iter().find_map(|offer| {
        let pay = offer.pay.as_ref()?;
        let new = &earner.lines[offer.line];
        // Nothing of take-home pay is paid apart from pay in these packs.
        let taken_home = |line: &BudgetLine| {
            let mut grid = line.grid.iter();
            grid.find(|p| p.hours == own).map(|p| p.take_home)
        };
        let now = taken_home(line)?;
        let quarters: Vec<&Point> = (new.grid.iter()).filter(|p| p.hours.0 % 25 == 0).collect();
        let holding = (0..quarters.len())
            .find(|from| quarters[*from..].iter().all(|p| p.take_home >= now))
            .map(|from| quarters[from].hours);
        let income = taken_home(new)? - now;
        ((pay.income, pay.holding) != (income, holding))
            .then(|| format!("{pay:?}, expected {income:?} and {holding:?}"))
    });
    if split.is_some() {
        return split;
    }
    earner.offers.iter().find_map(|offer| {
        let expected = stays(&earner.lines[offer.line], today);
        (offer.holding != expected).then(|| {
            format!(
                "{offer:?} of {}, expected {expected:?}",
                household.reference
            )
        })
    })
}

/// What is said of later is what programs of the settled facts say; nothing is said where they say what is so now.
fn wrong_later(assessment: &Assessment, later: &Result<Verdict, String>) -> Option<String> {
    let wrong = match (&assessment.settled, later) {
        // A number is too large for a program that was not needed.
        (_, Err(_)) => None,
        (Some(settled), Ok(Verdict::Held(reasons))) => {
            (settled.held != *reasons).then_some("it is held for another reason")
        }
        (Some(settled), Ok(Verdict::Assessed(other))) => {
            let same = settled.held.is_empty() && settled.earners == other.earners;
            (!same || settled.facts.is_empty()).then_some("the results are others")
        }
        (None, Ok(Verdict::Held(_))) => (!assessment.earners.is_empty()).then_some("it is held"),
        (None, Ok(Verdict::Assessed(other))) => {
            let points = |earners: &[EarnerResult]| -> Vec<Point> {
                let lines = earners.iter().flat_map(|e| &e.lines);
                let zero = earners.iter().map(|e| e.not_in_work.clone());
                zero.chain(lines.flat_map(|line| line.grid.clone()))
                    .collect()
            };
            (points(&assessment.earners) != points(&other.earners)).then_some("it differs")
        }
    };
    wrong.map(|what| format!("once settled {what}"))
}

#[test]
fn measures_are_what_their_definitions_say() {
    let packs = 400 * super::times();
    let (mut assessed, mut trapped, mut settled) = (0, 0, 0);
    for seed in (SEED..).take(packs) {
        let texts = invent(&mut Luck::new(seed)).texts();
        let files = files(&texts);
        let Ok(pack) = check_pack(&files) else {
            continue;
        };
        let (schema, book) = (schema_of(&pack), Book::read(&files));
        let mut luck = Luck::new(seed ^ 0xE5);
        let days: Vec<i64> = (0..2)
            .map(|_| day(DAYS[luck.below(4)]).expect("a day"))
            .collect();
        let village = Village {
            schema: &schema,
            marks: marks(&book),
            day: days[0],
            most_children: 2,
            most_pay: 600_000,
        };
        let household = village.household(&mut luck);
        let wanted = Money(luck.between(1, 300_000));
        let request = Request {
            grid_step: Hours(25),
            ..Request::default()
        };
        let mut shelf = Shelf {
            pack: &pack,
            always: None,
            days,
            settling: pack.settling(),
        };
        let verdict = catch_unwind(AssertUnwindSafe(|| {
            assess(&household, &schema, &mut shelf, &request, Some(wanted))
        }));
        let told = |what: &str| {
            let rules: String = texts
                .iter()
                .map(|(name, text)| format!("--- {name}\n{text}\n"))
                .collect();
            format!(
                "seed {seed}, days {:?}: {what}\n{rules}\n{}",
                shelf.days,
                shown(&schema, &household)
            )
        };
        match verdict {
            Err(_) => panic!("{}", told("a panic")),
            Ok(Err(_) | Ok(Verdict::Held(_))) => {}
            Ok(Ok(Verdict::Assessed(assessment))) => {
                assessed += 1;
                trapped += usize::from(
                    assessment
                        .earners
                        .iter()
                        .flat_map(|e| &e.lines)
                        .any(|line| !line.traps.is_empty()),
                );
                if let Some(what) = wrong(&household, &assessment, wanted) {
                    panic!("{}", told(&what));
                }
                settled += usize::from(assessment.settled.is_some());
                // The same worked out on programs of the settled facts alone, whether anything can differ or not.
                let mut later = Shelf {
                    pack: &pack,
                    always: Some(Moment::Settled),
                    days: shelf.days.clone(),
                    settling: vec![],
                };
                let later = assess(&household, &schema, &mut later, &request, Some(wanted));
                if let Some(what) = wrong_later(&assessment, &later) {
                    panic!("{}", told(&what));
                }
            }
        }
    }
    println!(
        "{assessed} of {packs} assessed, {trapped} of them with a trap, {settled} that settle"
    );
    assert!(
        assessed * 4 > packs && trapped * 20 > assessed && settled * 20 > assessed,
        "too little was looked at: {assessed} of {packs}, {trapped} with a trap, {settled} that settle"
    );
}
