//! A household to its assessment.

use super::couple::couple;
use super::line::{Asked, Worked, work_out};
use super::points::{Sums, Totals, point};
use super::settled::{Now, once_settled, open};
use super::split::{Quarters, pay_split, rise};
use super::types::{
    AmountUse, Assessment, EarnerResult, FactUse, ItemInfo, JobTerms, OfferMeasures, Unclaimed,
    WorkingLine,
};
use crate::case::{ADULT, FactSpec, Household, Instance, JOB, JobRole, Known, Schema};
use crate::engine::{JobChoice, Machine, Setting, Special, Standing, fact_text, working};
use crate::num::{Hours, Money};
use crate::program::{Amount, Moment, Settling, Shape};
use std::collections::BTreeMap;
use std::sync::Arc;

/// Where machines for shapes come from; whoever has the pack keeps those already made.
pub trait Programs {
    /// The machine for a shape.
    ///
    /// # Errors
    /// Where the pack cannot make it, in words.
    fn machine(&mut self, shape: &Shape) -> Result<Arc<Machine>, String>;

    /// The facts of the pack that settle.
    fn settling(&self) -> &[Settling];
}

/// Whether an assessment says which facts and amounts it rests on. Statements need that, tables do not.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Evidence {
    /// Facts and amounts are listed.
    Gathered,
    /// Both lists stay empty, and so do the facts of each line's job.
    LeftOut,
}

/// What is asked of every household of a list.
#[derive(Clone, Debug)]
pub struct Request {
    /// Last hours of the grid; it starts at 0 and is widened to contain every offer.
    pub grid_to: Hours,
    /// Step of the grid.
    pub grid_step: Hours,
    /// How many hours more the named step of today's line goes.
    pub more: Hours,
    /// Whether the facts and amounts that the results rest on are gathered.
    pub evidence: Evidence,
    /// Names of items that are part of take-home pay and still not taken from pay, such as a tax that is paid with a return.
    pub apart: Vec<String>,
}

impl Default for Request {
    fn default() -> Self {
        Request {
            grid_to: Hours::whole(48),
            grid_step: Hours::whole(1),
            more: Hours::whole(4),
            evidence: Evidence::Gathered,
            apart: vec![],
        }
    }
}

/// What becomes of a household.
#[derive(Clone, Debug)]
pub enum Verdict {
    /// The pack does not cover it; each reason is a sentence.
    Held(Vec<String>),
    /// Worked out.
    Assessed(Box<Assessment>),
}

/// Works a household out. `wanted` is the sum a period, after costs of working, that the household must have.
///
/// # Errors
/// Where the pack cannot make a program for the household's shape.
pub fn assess(
    household: &Household,
    schema: &Schema,
    programs: &mut dyn Programs,
    request: &Request,
    wanted: Option<Money>,
) -> Result<Verdict, String> {
    let mut reasons: Vec<String> = Vec::new();
    let mut notes: Vec<String> = Vec::new();
    let mut earners = Vec::new();
    let mut items = Vec::new();
    let mut table = None;
    let mut unclaimed = Vec::new();
    // What settles is looked for among the facts that a result rests on.
    let open = open(household, programs);
    let mut gathered = Gathered::new(match open.is_empty() {
        true => request.evidence,
        false => Evidence::Gathered,
    });
    for adult in 0..household.instances[ADULT].len() {
        let Some(setting) = Setting::new(household, adult, JobChoice::Today) else {
            continue;
        };
        let machine = programs.machine(&setting.shape)?;
        let special = machine.special(&setting.facts(machine.program()));
        let today = setting.own_hours();
        let standing = standing_of(household, &machine, &setting, &special);
        add_new(&mut reasons, standing.holds);
        add_new(&mut notes, standing.notes);
        if !reasons.is_empty() {
            continue;
        }
        if items.is_empty() {
            items = item_infos(&special);
            table = couple(household, &machine);
            unclaimed = standing
                .unclaimed
                .into_iter()
                .map(|(item, due)| Unclaimed { item, due })
                .collect();
            gathered.add(&special, &[Hours(0), today]);
        }
        if let Some(result) = earner(
            household,
            &machine,
            &special,
            &setting,
            request,
            wanted,
            &mut gathered,
        ) {
            earners.push(result);
        }
    }
    if !reasons.is_empty() {
        return Ok(Verdict::Held(reasons));
    }
    let now = Now {
        household,
        request,
        wanted,
        earners: &earners,
    };
    let mut settled = once_settled(&now, open, programs, &mut gathered)?;
    if request.evidence == Evidence::Gathered {
        add_facts(&mut earners, household, schema);
        if let Some(settled) = &mut settled {
            add_facts(&mut settled.earners, household, schema);
        }
    }
    let (facts, amounts) = gathered.finish(household, schema);
    Ok(Verdict::Assessed(Box::new(Assessment {
        reference: household.reference.clone(),
        items,
        earners,
        couple: table,
        settled,
        unclaimed,
        notes,
        facts,
        amounts,
    })))
}

/// Why the pack does not cover an earner's job of today and offers, and the notes that hold at them.
pub(super) fn standing_of(
    household: &Household,
    machine: &Machine,
    setting: &Setting<'_>,
    special: &Special<'_>,
) -> Standing {
    let mut standing = special.standing(setting.own_hours());
    let adult = setting.shape.earner as usize;
    // An offer has facts of its own, which the rules may not cover either.
    for (offer, _) in offers_of(household, adult) {
        let Some(other) = Setting::new(household, adult, JobChoice::Offer(offer)) else {
            continue;
        };
        let special = machine.special(&other.facts(machine.program()));
        let there = special.standing(other.own_hours());
        add_new(&mut standing.holds, there.holds);
        add_new(&mut standing.notes, there.notes);
    }
    standing
}

/// The offers of an adult, with their positions in the household.
pub(super) fn offers_of(
    household: &Household,
    adult: usize,
) -> impl Iterator<Item = (usize, &Instance)> {
    household
        .offers
        .iter()
        .enumerate()
        .filter(move |(_, offer)| offer.owner == adult)
}

/// Adds what is not there yet.
fn add_new(all: &mut Vec<String>, more: Vec<String>) {
    for one in more {
        if !all.contains(&one) {
            all.push(one);
        }
    }
}

fn item_infos(special: &Special<'_>) -> Vec<ItemInfo> {
    let program = special.program();
    program
        .items
        .iter()
        .map(|item| {
            let line = &program.lines[item.line];
            ItemInfo {
                name: line.name.clone(),
                kind: item.kind,
                adult: item.adult.map(|a| a as usize),
                law: line.law.clone(),
                part: line.part.clone(),
            }
        })
        .collect()
}

/// Hours of the grid: from 0 by the step, with every named number of hours in it.
fn grid(request: &Request, up_to: Hours, named: &[Hours]) -> Vec<Hours> {
    let mut hours: Vec<Hours> = (0..)
        .map(|n| Hours(n * request.grid_step.0.max(1)))
        .take_while(|h| *h <= up_to)
        .collect();
    hours.extend(named);
    hours.push(up_to);
    hours.sort_unstable();
    hours.dedup();
    hours
}

/// One earner's results, at the moment of the setting; none where there is nothing to compare.
pub(super) fn earner(
    household: &Household,
    machine: &Machine,
    special: &Special<'_>,
    setting: &Setting<'_>,
    request: &Request,
    wanted: Option<Money>,
    gathered: &mut Gathered,
) -> Option<EarnerResult> {
    let adult = setting.shape.earner as usize;
    let offers: Vec<usize> = offers_of(household, adult).map(|(at, _)| at).collect();
    let today = setting.own_hours();
    let has_job = today.0 > 0 && setting.wage() > 0;
    if !has_job && offers.is_empty() {
        return None;
    }
    let sums = Sums::new(special, setting.shape.earner).without(special, &request.apart);
    // Y(0): all jobs of the earner ended.
    let further = household.instances[JOB]
        .iter()
        .filter(|job| job.owner == adult)
        .count()
        > 1;
    let mut points = special.points();
    let zero_items = if further {
        machine
            .special(
                &setting
                    .clone()
                    .without_further_jobs()
                    .facts(machine.program()),
            )
            .points()
            .at(Hours(0))
    } else {
        points.at(Hours(0))
    };
    let at_zero: Totals = sums.totals(&zero_items);
    let not_in_work = point(&sums, Hours(0), zero_items, &at_zero, None);
    let offered = offers.iter().map(|o| Hours(household.offers[*o].values[0]));
    let named: Vec<Hours> = offered
        .chain([today, Hours(today.0 + request.more.0)])
        .map(|h| Hours(h.0.min(16_800)))
        .collect();
    let widest = named.iter().copied().max().unwrap_or_default();
    let up_to = request.grid_to.max(Hours(
        widest.0.div_euclid(100) * 100 + if widest.0 % 100 == 0 { 0 } else { 100 },
    ));
    let hours = grid(request, up_to, &named);
    let mut lines: Vec<Worked> = Vec::new();
    let mut target_hours = None;
    if has_job {
        let terms = JobTerms {
            offer: String::new(),
            reference: String::new(),
            wage: setting.wage(),
            hours: today,
            facts: vec![],
        };
        let step_to = Hours((today.0 + request.more.0).min(16_800));
        lines.push(work_out(
            &mut points,
            &sums,
            Asked {
                terms,
                grid: &hours,
                step_to,
                up_to,
                at_zero: &at_zero,
            },
        ));
        gathered.add_line(special, lines.last());
        target_hours = wanted.map(|sum| Quarters::new(&mut points, &sums, up_to).target(sum));
    }
    let mut measures = Vec::new();
    for offer in offers {
        let Some(other) = Setting::new(household, adult, JobChoice::Offer(offer)) else {
            continue;
        };
        let other = other.at_moment(setting.shape.moment);
        let special = machine.special(&other.facts(machine.program()));
        let record = &household.offers[offer];
        let own = other.own_hours();
        let terms = JobTerms {
            offer: offer_words(record, measures.len() + 1),
            reference: record.reference.clone(),
            wage: other.wage(),
            hours: own,
            facts: vec![],
        };
        let mut points = special.points();
        let worked = work_out(
            &mut points,
            &sums,
            Asked {
                terms,
                grid: &hours,
                step_to: own,
                up_to,
                at_zero: &at_zero,
            },
        );
        gathered.add_line(&special, Some(&worked));
        let mut quarters = Quarters::new(&mut points, &sums, up_to);
        if target_hours.is_none() {
            target_hours = wanted.map(|sum| quarters.target(sum));
        }
        let kept = lines
            .first()
            .filter(|_| has_job)
            .map_or(not_in_work.after_costs, |line| {
                line.line.grid[line.line.own].after_costs
            });
        let split = if has_job {
            lines.first().and_then(|old| rise(old, &worked, today))
        } else {
            None
        };
        let pay = match lines.first() {
            Some(old) if has_job => pay_split((old, &worked), today, &sums, &mut quarters),
            Some(_) | None => None,
        };
        measures.push(OfferMeasures {
            line: lines.len(),
            holding: quarters.stays(kept),
            rise: split,
            pay,
        });
        lines.push(worked);
    }
    Some(EarnerResult {
        adult,
        name: household.instances[ADULT][adult].label.clone(),
        not_in_work,
        has_job,
        lines: lines.into_iter().map(|w| w.line).collect(),
        offers: measures,
        target: target_hours,
    })
}

/// Gives each line the facts of its job.
fn add_facts(earners: &mut [EarnerResult], household: &Household, schema: &Schema) {
    let Some(kind) = schema.kinds.get(JOB) else {
        return;
    };
    for earner in earners {
        let offers = offers_of(household, earner.adult).map(|(_, offer)| offer);
        let jobs = household.instances[JOB].iter().zip(&household.job_roles);
        let today = jobs
            .filter(|(job, role)| job.owner == earner.adult && **role == JobRole::Today)
            .map(|(job, _)| job)
            .take(usize::from(earner.has_job));
        for (line, record) in earner.lines.iter_mut().zip(today.chain(offers)) {
            let facts = kind.facts.iter().enumerate();
            line.terms.facts = facts
                .map(|(place, spec)| fact_use(&kind.name, "", spec, record, place))
                .collect();
        }
    }
}

/// One fact of a record.
fn fact_use(kind: &str, of: &str, spec: &FactSpec, record: &Instance, place: usize) -> FactUse {
    FactUse {
        kind: kind.to_owned(),
        of: of.to_owned(),
        name: spec.name.clone(),
        value: fact_text(&spec.ty, record.values[place]),
        known: match record.known[place] {
            Known::Seen => 's',
            Known::Told => 't',
            Known::Assumed => 'a',
        },
    }
}

fn amount_use(amount: &Amount, part: &str) -> AmountUse {
    AmountUse {
        name: amount.name.clone(),
        value: amount.value.clone(),
        from: amount.from.clone(),
        to: amount.to.clone(),
        source: amount.source.clone(),
        locator: amount.locator.clone(),
        confirmed: amount.confirmed,
        changed_because: amount.changed_because.clone(),
        part: part.to_owned(),
    }
}

/// The words of an offer, or what stands for them.
fn offer_words(record: &Instance, number: usize) -> String {
    match (record.label.trim(), record.reference.trim()) {
        ("", "") => format!("offer {number}"),
        ("", reference) => format!("offer {reference}"),
        (words, _) => words.to_owned(),
    }
}

/// Facts and amounts of all programs of a household.
pub(super) struct Gathered {
    evidence: Evidence,
    facts: std::collections::BTreeSet<(u32, u32, u32)>,
    amounts: BTreeMap<String, AmountUse>,
}

impl Gathered {
    pub(super) fn new(evidence: Evidence) -> Gathered {
        Gathered {
            evidence,
            facts: std::collections::BTreeSet::new(),
            amounts: BTreeMap::new(),
        }
    }

    /// Whether a result rests on this fact of this record.
    pub(super) fn rests_on(&self, kind: usize, instance: usize, fact: usize) -> bool {
        self.facts
            .contains(&(kind as u32, instance as u32, fact as u32))
    }

    /// Adds what others rest on.
    pub(super) fn merge(&mut self, other: Gathered) {
        self.facts.extend(other.facts);
        for (name, amount) in other.amounts {
            self.amounts.entry(name).or_insert(amount);
        }
    }

    /// Adds what the points of a line at these hours rest on.
    fn add(&mut self, special: &Special<'_>, hours: &[Hours]) {
        if self.evidence == Evidence::LeftOut {
            return;
        }
        let used = special.used(hours);
        self.facts.extend(used.facts.iter().copied());
        for (at, part) in &used.amounts {
            let amount = special.amount(*at);
            self.amounts
                .entry(amount.name.clone())
                .or_insert_with(|| amount_use(amount, part));
        }
    }

    /// Adds what a whole line rests on: each stretch between turning points by its first hours, and the points named.
    fn add_line(&mut self, special: &Special<'_>, worked: Option<&Worked>) {
        let Some(Worked { line, .. }) = worked else {
            return;
        };
        let mut hours: Vec<Hours> = line
            .turns
            .iter()
            .map(|turn| turn.hours.min(line.up_to))
            .collect();
        hours.extend([
            Hours(0),
            line.grid[line.own].hours,
            line.grid[line.step_to].hours,
            line.up_to,
        ]);
        hours.sort_unstable();
        hours.dedup();
        self.add(special, &hours);
    }

    fn finish(self, household: &Household, schema: &Schema) -> (Vec<FactUse>, Vec<AmountUse>) {
        if self.evidence == Evidence::LeftOut {
            return (Vec::new(), Vec::new());
        }
        let mut places = self.facts;
        // Hours of the main jobs vary, so no program reads them as facts; the statement rests on them all the same.
        for (at, job) in household.instances[JOB].iter().enumerate() {
            if job.values[0] > 0 {
                places.extend([(JOB as u32, at as u32, 0), (JOB as u32, at as u32, 1)]);
            }
        }
        let facts = places
            .into_iter()
            .filter_map(|(kind, instance, fact)| {
                let (kind, instance, fact) = (kind as usize, instance as usize, fact as usize);
                let record = household.instances.get(kind)?.get(instance)?;
                // A blank job stands for none.
                if kind == JOB && record.values[0] == 0 {
                    return None;
                }
                let spec = &schema.kinds[kind].facts[fact];
                let owner = if kind == JOB {
                    household.instances[ADULT].get(record.owner)
                } else {
                    Some(record)
                };
                let of = owner.map_or("", |r| {
                    if r.label.is_empty() {
                        r.reference.as_str()
                    } else {
                        r.label.as_str()
                    }
                });
                let of = if kind == crate::case::HOUSEHOLD {
                    ""
                } else {
                    of
                };
                Some(fact_use(&schema.kinds[kind].name, of, spec, record, fact))
            })
            .collect();
        (facts, self.amounts.into_values().collect())
    }
}

/// Where a working is asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct WorkedPoint {
    /// Position of the earner among the adults.
    pub adult: usize,
    /// Today's job, or an offer.
    pub choice: JobChoice,
    /// Hours of that job.
    pub hours: Hours,
    /// Now, or once settled.
    pub moment: Moment,
}

/// The working of one point of one earner: every figure and item in the order of the law. `rule` gives the text of a rule by its span.
///
/// # Errors
/// Where there is no such adult or offer, or the pack cannot make a program.
pub fn working_at(
    household: &Household,
    schema: &Schema,
    programs: &mut dyn Programs,
    point: WorkedPoint,
    rule: &dyn Fn(crate::source::Span) -> String,
) -> Result<Vec<WorkingLine>, String> {
    let setting = Setting::new(household, point.adult, point.choice)
        .ok_or_else(|| "there is no such adult or offer".to_owned())?
        .at_moment(point.moment);
    let machine = programs.machine(&setting.shape)?;
    let special = machine.special(&setting.facts(machine.program()));
    Ok(working(&special, point.hours)
        .into_iter()
        .map(|line| {
            let (kind, instance) = line.of;
            let of = if kind == crate::case::HOUSEHOLD {
                String::new()
            } else {
                format!("{} {}", schema.kinds[kind].name, instance + 1)
            };
            let amounts = line
                .amounts
                .iter()
                .map(|at| amount_use(special.amount(*at), &line.part))
                .collect();
            WorkingLine {
                part: line.part,
                name: line.name,
                of,
                value: line.value,
                formula: rule(line.span),
                inputs: line.inputs,
                law: line.law,
                amounts,
                counts: line.counts,
            }
        })
        .collect())
}
