//! A checked pack at a list's dates, ready to assess household after household. Programs are made once for each shape of
//! household and earner, and kept.

use crate::case::{HOUSEHOLD, Household, Schema};
use crate::engine::{JobChoice, Machine, Setting, working};
use crate::load::{Terms, schema_of};
use crate::measures::{
    Evidence, Programs, Request, Verdict, WorkedPoint, WorkingLine, assess, working_at,
};
use crate::num::{Fraction, Hours};
use crate::program::{Moment, Settling, Shape};
use crate::rules::Pack;
use crate::source::Span;
use std::collections::HashMap;
use std::sync::Arc;

/// How many programs are kept. Few shapes make up most of a list; beyond this number all are dropped and made again, so that
/// memory stays flat.
const KEPT: usize = 64;

/// A pack with dates and changed amounts.
pub struct Books {
    schema: Schema,
    request: Request,
    shelf: Shelf,
}

/// The programs made so far.
struct Shelf {
    pack: Pack,
    terms: Terms,
    settling: Vec<Settling>,
    machines: HashMap<Shape, Arc<Machine>>,
}

impl Programs for Shelf {
    fn settling(&self) -> &[Settling] {
        &self.settling
    }

    fn machine(&mut self, shape: &Shape) -> Result<Arc<Machine>, String> {
        if let Some(machine) = self.machines.get(shape) {
            return Ok(Arc::clone(machine));
        }
        let program = self
            .pack
            .program(&self.terms.dates, &self.terms.changes, shape)
            .map_err(|faults| {
                let lines: Vec<String> = faults
                    .iter()
                    .map(|fault| fault.line(&self.pack.sources))
                    .collect();
                lines.join("; ")
            })?;
        if self.machines.len() >= KEPT {
            self.machines.clear();
        }
        let machine = Arc::new(Machine::new(program));
        self.machines.insert(shape.clone(), Arc::clone(&machine));
        Ok(machine)
    }
}

/// Items that are not taken from pay: those that a label `apart.NAME` in any language names.
fn apart(pack: &Pack) -> Vec<String> {
    let labels = pack.labels.values().flat_map(|labels| labels.keys());
    let mut names: Vec<String> = labels
        .filter_map(|key| key.strip_prefix("apart."))
        .map(str::to_owned)
        .collect();
    names.sort();
    names.dedup();
    names
}

impl Books {
    /// Opens a pack at these terms.
    pub fn new(pack: Pack, terms: Terms) -> Books {
        let ordinary = Request::default();
        Books {
            schema: schema_of(&pack),
            request: Request {
                grid_to: terms.grid_to.unwrap_or(ordinary.grid_to),
                grid_step: terms.grid_step.unwrap_or(ordinary.grid_step),
                apart: apart(&pack),
                ..ordinary
            },
            shelf: Shelf {
                settling: pack.settling(),
                pack,
                terms,
                machines: HashMap::new(),
            },
        }
    }

    /// The same for tables alone, which do not say what they rest on.
    #[must_use]
    pub fn for_tables(mut self) -> Books {
        self.request.evidence = Evidence::LeftOut;
        self
    }

    /// What a list for the pack may hold.
    pub fn schema(&self) -> &Schema {
        &self.schema
    }

    /// Works one household out.
    ///
    /// # Errors
    /// Where the pack cannot make a program for its shape.
    pub fn assess(&mut self, household: &Household) -> Result<Verdict, String> {
        assess(
            household,
            &self.schema,
            &mut self.shelf,
            &self.request,
            household.target,
        )
    }

    /// The working at one point, with each rule as it stands in the pack.
    ///
    /// # Errors
    /// Where there is no such adult or offer, or the pack cannot make a program.
    pub fn working(
        &mut self,
        household: &Household,
        point: WorkedPoint,
    ) -> Result<Vec<WorkingLine>, String> {
        let sources = self.shelf.pack.sources.clone();
        let rule = |span: Span| -> String {
            let words: Vec<&str> = sources.slice(span).split_whitespace().collect();
            words.join(" ")
        };
        working_at(household, &self.schema, &mut self.shelf, point, &rule)
    }

    /// The exact value of a figure or item at today's hours, the first adult being the earner. Once settled, a fact that settles is one of
    /// the figures.
    ///
    /// # Errors
    /// Where the pack cannot make a program, or works out no such figure for this household.
    pub fn figure(
        &mut self,
        household: &Household,
        name: &str,
        of: &str,
        moment: Moment,
    ) -> Result<Fraction, String> {
        let setting = Setting::new(household, 0, JobChoice::Today)
            .ok_or_else(|| "the household has no adult".to_owned())?
            .at_moment(moment);
        let machine = self.shelf.machine(&setting.shape)?;
        let special = machine.special(&setting.facts(machine.program()));
        let lines = working(&special, setting.own_hours());
        let whose = |(kind, instance): (usize, usize)| match kind {
            HOUSEHOLD => "household".to_owned(),
            kind => format!("{} {}", self.schema.kinds[kind].name, instance + 1),
        };
        let line = lines
            .iter()
            .find(|line| line.name == name && whose(line.of) == of);
        match line {
            Some(line) => Ok(line.exact),
            None => Err(format!("nothing works out `{name}` of `{of}`")),
        }
    }

    /// The marginal effective tax rate to the right of some hours, on today's line of an adult.
    ///
    /// # Errors
    /// Where the household is held, has no such line, or pay does not change there.
    pub fn metr(
        &mut self,
        household: &Household,
        adult: usize,
        hours: Fraction,
        moment: Moment,
    ) -> Result<Fraction, String> {
        // The line must go on beyond the hours asked for.
        let ordinary = self.request.clone();
        let beyond = Hours(i64::try_from(hours.ceil() * 100 + 100).unwrap_or(16_800));
        self.request.grid_to = ordinary.grid_to.max(beyond.min(Hours::whole(168)));
        let verdict = self.assess(household);
        self.request = ordinary;
        let assessment = match verdict? {
            Verdict::Assessed(assessment) => assessment,
            Verdict::Held(reasons) => return Err(format!("held: {}", reasons.join("; "))),
        };
        let earners = match (&assessment.settled, moment) {
            (Some(settled), Moment::Settled) if !settled.held.is_empty() => {
                return Err(format!("held once settled: {}", settled.held.join("; ")));
            }
            (Some(settled), Moment::Settled) => &settled.earners,
            // Where nothing differs once settled, the rate is that of now.
            (None, Moment::Settled) | (_, Moment::Now) => &assessment.earners,
        };
        let line = earners
            .iter()
            .find(|earner| earner.adult == adult && earner.has_job)
            .and_then(|earner| earner.lines.first())
            .ok_or_else(|| format!("adult {} has no job today", adult + 1))?;
        // A point of the grid holds the rate itself; elsewhere the rate at the segment's start stands for it.
        let at_point = line
            .grid
            .iter()
            .find(|point| point.hours.as_fraction() == hours)
            .and_then(|point| point.metr_here);
        let on_segment = || {
            line.segments
                .iter()
                .find(|segment| segment.from <= hours && hours < segment.to)
                .and_then(|segment| segment.metr)
        };
        at_point
            .or_else(on_segment)
            .ok_or_else(|| format!("there is no rate at {} hours", hours.decimal(2)))
    }
}
