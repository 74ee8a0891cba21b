//! A household once the facts about past periods have settled, where anything differs then. In: the household, its results of now, and
//! programs. Out: [`Settled`], or nothing. Makes no program and works nothing out where no fact of the household settles to something else.

use super::assess::{Evidence, Gathered, Programs, Request, earner, offers_of, standing_of};
use super::types::{EarnerResult, Settled};
use crate::case::{Household, Instance, JOB};
use crate::engine::{JobChoice, Machine, Setting, working};
use crate::num::{Fraction, Hours, Money};
use crate::program::{Moment, Settling};

/// What has been worked out of now.
pub(super) struct Now<'a> {
    pub household: &'a Household,
    pub request: &'a Request,
    pub wanted: Option<Money>,
    pub earners: &'a [EarnerResult],
}

/// The results once settled, where `open` holds the facts that may settle to something else; none where all are those of now. What they rest on is added to what was gathered.
///
/// # Errors
/// Where the pack cannot make a program for the household's shape.
pub(super) fn once_settled(
    now: &Now<'_>,
    open: Vec<Settling>,
    programs: &mut dyn Programs,
    gathered: &mut Gathered,
) -> Result<Option<Settled>, String> {
    if open.is_empty() {
        return Ok(None);
    }
    let mut later = Later {
        now,
        open,
        causes: vec![],
        held: vec![],
        earners: vec![],
        gathered: Gathered::new(Evidence::Gathered),
    };
    for result in now.earners {
        later.earner(result, programs, gathered)?;
    }
    if !later.held.is_empty() {
        later.earners.clear();
    } else if !later.changed() {
        return Ok(None);
    }
    gathered.merge(later.gathered);
    let named =
        |settling: &&Settling| later.causes.is_empty() || later.causes.contains(&settling.name);
    let mut facts: Vec<String> = vec![];
    for settling in later.open.iter().filter(named) {
        if !facts.contains(&settling.name) {
            facts.push(settling.name.clone());
        }
    }
    Ok(Some(Settled {
        facts,
        held: later.held,
        earners: later.earners,
    }))
}

/// The facts of the pack that may settle to something else for this household.
pub(super) fn open(household: &Household, programs: &dyn Programs) -> Vec<Settling> {
    programs
        .settling()
        .iter()
        .filter(|settling| records(household, settling).any(|record| differs(settling, record)))
        .cloned()
        .collect()
}

/// The records that may hold a fact, offers among them.
fn records<'h>(
    household: &'h Household,
    settling: &Settling,
) -> impl Iterator<Item = &'h Instance> {
    let offers: &[Instance] = if settling.kind == JOB {
        &household.offers
    } else {
        &[]
    };
    household.instances[settling.kind].iter().chain(offers)
}

/// Whether a record's fact may settle to something else.
fn differs(settling: &Settling, record: &Instance) -> bool {
    settling
        .to
        .is_none_or(|to| record.values[settling.fact] != to)
}

struct Later<'a> {
    now: &'a Now<'a>,
    /// The facts that may settle to something else.
    open: Vec<Settling>,
    /// Names of those that did and reached a figure.
    causes: Vec<String>,
    held: Vec<String>,
    earners: Vec<EarnerResult>,
    gathered: Gathered,
}

impl Later<'_> {
    /// Works one earner out once more, unless no rule of the household's asks for a fact that settles.
    fn earner(
        &mut self,
        result: &EarnerResult,
        programs: &mut dyn Programs,
        gathered: &Gathered,
    ) -> Result<(), String> {
        let household = self.now.household;
        let Some(today) = Setting::new(household, result.adult, JobChoice::Today) else {
            return Ok(());
        };
        let machine = programs.machine(&today.shape)?;
        let asked = |settling: &Settling| {
            let mut inputs = machine.program().inputs.iter().map(|input| input.fact);
            inputs.any(|f| (f.kind as usize, f.fact as usize) == (settling.kind, settling.fact))
        };
        if !self.open.iter().any(asked) {
            self.earners.push(result.clone());
            return Ok(());
        }
        let setting = today.at_moment(Moment::Settled);
        let machine = programs.machine(&setting.shape)?;
        let special = machine.special(&setting.facts(machine.program()));
        let standing = standing_of(household, &machine, &setting, &special);
        for reason in standing.holds {
            if !self.held.contains(&reason) {
                self.held.push(reason);
            }
        }
        if !self.held.is_empty() {
            return Ok(());
        }
        let later = earner(
            household,
            &machine,
            &special,
            &setting,
            self.now.request,
            self.now.wanted,
            &mut self.gathered,
        );
        self.find_causes(result, &machine, gathered);
        self.earners.extend(later);
        Ok(())
    }

    /// Whether any sum or rate is another than now.
    fn changed(&self) -> bool {
        let pairs = || self.earners.iter().zip(self.now.earners);
        pairs().any(|(later, now)| {
            later.not_in_work != now.not_in_work
                || later
                    .lines
                    .iter()
                    .zip(&now.lines)
                    .any(|(later, now)| later.grid != now.grid)
        })
    }

    /// Notes the facts that reached a figure of now and settle to another value at the hours that a letter speaks of.
    fn find_causes(&mut self, result: &EarnerResult, machine: &Machine, gathered: &Gathered) {
        let household = self.now.household;
        let offers = offers_of(household, result.adult).map(|(at, _)| JobChoice::Offer(at));
        for choice in std::iter::once(JobChoice::Today).chain(offers) {
            let Some(setting) = Setting::new(household, result.adult, choice) else {
                continue;
            };
            let setting = setting.at_moment(Moment::Settled);
            let special = machine.special(&setting.facts(machine.program()));
            let lines = match self.open.iter().any(|settling| settling.to.is_none()) {
                true => [Hours(0), setting.own_hours()].map(|hours| working(&special, hours)),
                false => [vec![], vec![]],
            };
            for settling in &self.open {
                if self.causes.contains(&settling.name) {
                    continue;
                }
                let another = |instance: usize, value: i64| match settling.to {
                    Some(to) => value != to,
                    None => lines.iter().flatten().any(|line| {
                        let told = Fraction::new(i128::from(value), i128::from(settling.units));
                        line.of == (settling.kind, instance)
                            && line.name == settling.name
                            && line.exact != told
                    }),
                };
                let varied = setting.shape.varied_job as usize;
                let all = household.instances[settling.kind].iter().enumerate();
                let is_cause = all
                    .filter(|(instance, _)| {
                        gathered.rests_on(settling.kind, *instance, settling.fact)
                    })
                    .any(|(instance, record)| {
                        let record = if settling.kind == JOB && instance == varied {
                            setting.job()
                        } else {
                            record
                        };
                        another(instance, record.values[settling.fact])
                    });
                if is_cause {
                    self.causes.push(settling.name.clone());
                }
            }
        }
    }
}
