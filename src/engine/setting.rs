//! A household with one earner in one job: which program it needs and which facts go into it.

use crate::case::{ADULT, FactType, Household, Instance, JOB, JobRole};
use crate::num::Hours;
use crate::program::{Moment, Program, Shape};

/// Which job's hours vary.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum JobChoice {
    /// Today's job.
    Today,
    /// An offer in place of today's job, by its position in [`Household::offers`].
    Offer(usize),
}

/// The facts of a household with one earner in one job.
#[derive(Clone, Debug)]
pub struct Setting<'h> {
    household: &'h Household,
    /// The shape, with the earner in it.
    pub shape: Shape,
    varied: &'h Instance,
    /// Further jobs of the earner are ended.
    alone: bool,
    /// Hours of the partner's main job in place of those of the list.
    partner_hours: Option<Hours>,
}

/// The shape of a household with this adult as the earner.
///
/// # Panics
/// Where the adult has no main job; readers give each adult one.
pub fn shape_of(household: &Household, adult: usize) -> Shape {
    let owners = household
        .instances
        .iter()
        .map(|kind| kind.iter().map(|i| i.owner as u32).collect())
        .collect();
    let varied = main_job(household, adult).expect("each adult has a main job");
    Shape {
        owners,
        earner: adult as u32,
        varied_job: varied as u32,
        moment: Moment::Now,
    }
}

fn main_job(household: &Household, adult: usize) -> Option<usize> {
    household.instances[JOB]
        .iter()
        .zip(&household.job_roles)
        .position(|(job, role)| job.owner == adult && *role == JobRole::Today)
}

impl<'h> Setting<'h> {
    /// A setting, or none where the offer is not this adult's.
    pub fn new(household: &'h Household, adult: usize, choice: JobChoice) -> Option<Self> {
        if adult >= household.instances[ADULT].len() {
            return None;
        }
        let shape = shape_of(household, adult);
        let varied = match choice {
            JobChoice::Today => &household.instances[JOB][shape.varied_job as usize],
            JobChoice::Offer(at) => household
                .offers
                .get(at)
                .filter(|offer| offer.owner == adult)?,
        };
        Some(Setting {
            household,
            shape,
            varied,
            alone: false,
            partner_hours: None,
        })
    }

    /// The same once the facts about past periods have settled.
    #[must_use]
    pub fn at_moment(mut self, moment: Moment) -> Self {
        self.shape.moment = moment;
        self
    }

    /// The same with the earner's further jobs ended.
    #[must_use]
    pub fn without_further_jobs(mut self) -> Self {
        self.alone = true;
        self
    }

    /// The same with the partner's main job at these hours.
    #[must_use]
    pub fn with_partner_at(mut self, hours: Hours) -> Self {
        self.partner_hours = Some(hours);
        self
    }

    /// Hours of the varied job as the list has them.
    pub fn own_hours(&self) -> Hours {
        Hours(self.varied.values[0])
    }

    /// Basic wage of the varied job, in ten-thousandths of the currency unit an hour.
    pub fn wage(&self) -> i64 {
        self.varied.values[1]
    }

    /// The varied job.
    pub fn job(&self) -> &'h Instance {
        self.varied
    }

    /// The values that a program's inputs take, in its order.
    pub fn facts(&self, program: &Program) -> Vec<i64> {
        program
            .inputs
            .iter()
            .map(|input| {
                let (kind, instance, fact) = (
                    input.fact.kind as usize,
                    input.fact.instance as usize,
                    input.fact.fact as usize,
                );
                let record = &self.household.instances[kind][instance];
                if kind == JOB {
                    if instance == self.shape.varied_job as usize {
                        return self.varied.values[fact];
                    }
                    let earners = record.owner == self.shape.earner as usize;
                    if fact == 0 && earners && self.alone {
                        return 0;
                    }
                    if let (0, false, JobRole::Today, Some(hours)) = (
                        fact,
                        earners,
                        self.household.job_roles[instance],
                        self.partner_hours,
                    ) {
                        return hours.0;
                    }
                }
                record.values[fact]
            })
            .collect()
    }
}

/// A fact's value as text: `1250.00`, `5%`, `16 hours`, `2026-05-04`, `yes`, `private`.
pub fn fact_text(ty: &FactType, value: i64) -> String {
    let decimals = |units: i64, least: usize| {
        let places = if units == 10_000 { 4 } else { 2 };
        let text = crate::num::Fraction::new(i128::from(value), i128::from(units)).decimal(places);
        let Some((whole, part)) = text.split_once('.') else {
            return text;
        };
        let kept = part.trim_end_matches('0');
        let kept = if kept.len() < least {
            &part[..least]
        } else {
            kept
        };
        if kept.is_empty() {
            whole.to_owned()
        } else {
            format!("{whole}.{kept}")
        }
    };
    match ty {
        FactType::Money(_) => decimals(ty.units(), 2),
        FactType::Rate => format!("{}%", decimals(100, 0)),
        FactType::Hours => format!("{} hours", decimals(100, 0)),
        FactType::Number => decimals(100, 0),
        FactType::Count => value.to_string(),
        FactType::Date => i32::try_from(value)
            .ok()
            .and_then(chrono::NaiveDate::from_epoch_days)
            .map_or_else(String::new, |d| d.format("%Y-%m-%d").to_string()),
        FactType::YesNo => if value == 0 { "no" } else { "yes" }.to_owned(),
        FactType::Choice(words) => usize::try_from(value)
            .ok()
            .and_then(|at| words.get(at))
            .cloned()
            .unwrap_or_default(),
    }
}
