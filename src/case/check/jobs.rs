//! The jobs of a household: today's, further ones and offers. Imports nothing outside `case`.

use super::facts::Facts;
use super::members::{Members, role_word};
use super::{Need, Work};
use crate::case::format::{read_word, write_value};
use crate::case::household::{Instance, JobRole, Known};
use crate::case::layout::{Holds, JOBS};
use crate::case::problem::Problem;
use crate::case::record::{Draft, Record};
use crate::case::schema::{self, ADULT, FactType, JOB};
use std::collections::BTreeMap;

/// The words for the status of a job.
const STATUS: [&str; 3] = ["today", "further", "offer"];

/// The most hours of a week, in hundredths.
const WEEK: i64 = 16_800;

/// The jobs of a household.
pub(super) struct Jobs {
    /// Today's and further jobs, by adult, today's first.
    pub(super) instances: Vec<Instance>,
    pub(super) roles: Vec<JobRole>,
    pub(super) offers: Vec<Instance>,
}

/// One job of an adult while all are read.
struct OneJob<'d> {
    record: &'d Record,
    /// None where the member named is no adult of the household.
    adult: Option<usize>,
    role: JobRole,
    /// Hours that were written without fault.
    hours: i64,
    instance: Instance,
}

impl Work<'_> {
    /// Reads all jobs and offers.
    pub(super) fn jobs(&mut self, draft: &Draft, members: &Members) -> Jobs {
        let mut all = vec![];
        let mut firsts: BTreeMap<String, String> = BTreeMap::new();
        for record in &draft.rows[JOBS] {
            self.reader_faults(JOBS, record);
            self.own_reference(JOBS, record, "job", &mut firsts);
            all.extend(self.job(record, members));
        }
        let mut jobs = Jobs {
            instances: vec![],
            roles: vec![],
            offers: vec![],
        };
        for adult in 0..members.instances[0].len() {
            let (own, rest): (Vec<OneJob<'_>>, Vec<OneJob<'_>>) =
                all.into_iter().partition(|job| job.adult == Some(adult));
            all = rest;
            let name = members.instances[0][adult].reference.clone();
            self.of_one_adult(&own, &name);
            let mut furthers = vec![];
            let mut today = None;
            for job in own {
                match job.role {
                    JobRole::Today => today = Some(job.instance),
                    JobRole::Further => furthers.push(job.instance),
                    JobRole::Offer => jobs.offers.push(job.instance),
                }
            }
            jobs.instances
                .push(today.unwrap_or_else(|| self.no_job(adult)));
            jobs.roles.push(JobRole::Today);
            jobs.roles.extend(furthers.iter().map(|_| JobRole::Further));
            jobs.instances.extend(furthers);
        }
        // Tables, commands and letters must be able to name each offer.
        for at in 0..jobs.offers.len() {
            if jobs.offers[at].reference.is_empty() {
                let taken = |name: &str| {
                    jobs.offers
                        .iter()
                        .any(|offer| offer.reference.eq_ignore_ascii_case(name))
                };
                let free = (at + 1..)
                    .map(|n| format!("offer-{n}"))
                    .find(|name| !taken(name));
                jobs.offers[at].reference = free.unwrap_or_default();
            }
        }
        jobs
    }

    /// The optional reference of a record, which no other of its kind may have.
    pub(super) fn own_reference(
        &mut self,
        table: usize,
        record: &Record,
        kind: &str,
        firsts: &mut BTreeMap<String, String>,
    ) {
        let column = self.column(table, Holds::Reference);
        self.reference_of(table, record, column, Need::Free);
        let key = record.cell(column).to_ascii_lowercase();
        if key.is_empty() {
            return;
        }
        match firsts.get(&key) {
            Some(first) => {
                let problem = Problem::SecondRecord {
                    kind: kind.into(),
                    first: first.clone(),
                };
                self.fault(table, record, column, problem);
            }
            None => {
                firsts.insert(key, record.row_words());
            }
        }
    }

    /// The position among its kind of the member that a record names.
    pub(super) fn member_of(
        &mut self,
        table: usize,
        record: &Record,
        members: &Members,
        owner: usize,
        wrong: impl Fn(String) -> Problem,
    ) -> Option<usize> {
        let column = self.column(table, Holds::Owner);
        let text = record.cell(column);
        if text.is_empty() {
            let problem = Problem::Missing {
                expected: "the reference of a member".into(),
                ask: String::new(),
            };
            self.fault(table, record, column, problem);
            return None;
        }
        let Some(member) = members.find(text) else {
            let problem = Problem::UnknownMember(members.references(owner));
            self.fault(table, record, column, problem);
            return None;
        };
        match member.kind {
            Some(kind) if kind == owner => Some(member.position),
            Some(kind) => {
                self.fault(table, record, column, wrong(role_word(kind)));
                None
            }
            None => None,
        }
    }

    fn job<'d>(&mut self, record: &'d Record, members: &Members) -> Option<OneJob<'d>> {
        let adult = self.member_of(JOBS, record, members, ADULT, Problem::JobOf);
        let role = self.status(record);
        let is_offer = role == Some(JobRole::Offer);
        let facts = self.facts(JOBS, record, JOB, if is_offer { "wage" } else { "" });
        let kind = &self.checks.schema.kinds[JOB];
        let wage = facts.written(kind, "wage");
        if is_offer && let Some(column) = self.checks.layouts[JOBS].by_name.get("wage").copied() {
            let empty = record.cell(column).is_empty();
            if empty || wage == Some(0) {
                self.fault(JOBS, record, column, Problem::OfferWithoutWage);
            }
        }
        self.premium(record, &facts);
        let hours = facts.written(kind, "hours").unwrap_or_default();
        let label = record.cell(self.column(JOBS, Holds::Label)).to_string();
        let reference = record.cell(self.column(JOBS, Holds::Reference)).to_string();
        Some(OneJob {
            record,
            adult,
            role: role?,
            hours,
            instance: facts.instance(label, reference, adult.unwrap_or_default()),
        })
    }

    fn status(&mut self, record: &Record) -> Option<JobRole> {
        let column = self.column(JOBS, Holds::Status);
        let text = record.cell(column);
        let problem = if text.is_empty() {
            Problem::Missing {
                expected: "`today`, `further` or `offer`".into(),
                ask: String::new(),
            }
        } else {
            match read_word("status", text, &STATUS.map(String::from)) {
                Ok(0) => return Some(JobRole::Today),
                Ok(1) => return Some(JobRole::Further),
                Ok(_) => return Some(JobRole::Offer),
                Err(problem) => problem,
            }
        };
        self.fault(JOBS, record, column, problem);
        None
    }

    /// A wage beyond so many hours is not below the basic wage.
    fn premium(&mut self, record: &Record, facts: &Facts) {
        let checks = self.checks;
        let kind = &checks.schema.kinds[JOB];
        let premium = facts
            .written(kind, "premium_wage")
            .filter(|premium| *premium != 0);
        let column = checks.layouts[JOBS].by_name.get("premium_wage").copied();
        if let (Some(premium), Some(wage), Some(column)) =
            (premium, facts.written(kind, "wage"), column)
            && premium < wage
        {
            let wage = write_value(
                &FactType::Money("hour".into()),
                wage,
                checks.settings.format,
            );
            self.fault(JOBS, record, column, Problem::PremiumBelowWage(wage));
        }
    }

    /// One job of today for each adult, further ones only beside it, and no more hours than a week has.
    fn of_one_adult(&mut self, own: &[OneJob<'_>], name: &str) {
        let status = self.column(JOBS, Holds::Status);
        let of = |role| own.iter().filter(move |job| job.role == role);
        let first = of(JobRole::Today).next();
        for second in of(JobRole::Today).skip(1) {
            let first = first.map(|job| job.record.row_words()).unwrap_or_default();
            self.fault(JOBS, second.record, status, Problem::SecondToday(first));
        }
        if first.is_none() {
            for further in of(JobRole::Further) {
                self.fault(JOBS, further.record, status, Problem::FurtherAlone);
            }
        }
        let furthers: i64 = of(JobRole::Further).map(|job| job.hours).sum();
        let mains = of(JobRole::Today).take(1).chain(of(JobRole::Offer));
        for main in mains.filter(|main| main.hours + furthers > WEEK) {
            let hours = write_value(
                &FactType::Hours,
                main.hours + furthers,
                self.checks.settings.format,
            );
            let problem = Problem::SumOfHours {
                member: name.into(),
                hours,
            };
            let column = self.checks.layouts[JOBS].by_name.get("hours").copied();
            self.fault(JOBS, main.record, column.unwrap_or(status), problem);
        }
    }

    /// The job of an adult who has none: no hours, no wage, the rest as the pack says.
    fn no_job(&self, adult: usize) -> Instance {
        let facts = &self.checks.schema.kinds[JOB].facts;
        let nothing = |name: &str| name == "hours" || name == "wage";
        Instance {
            label: String::new(),
            reference: String::new(),
            owner: adult,
            values: facts
                .iter()
                .map(|fact| match fact.need {
                    schema::Need::Default(value) if !nothing(&fact.name) => value,
                    schema::Need::Default(_) => 0,
                    schema::Need::Required => fact.min.clamp(0, fact.max.max(0)),
                })
                .collect(),
            known: facts
                .iter()
                .map(|fact| {
                    if nothing(&fact.name) {
                        Known::Told
                    } else {
                        Known::Assumed
                    }
                })
                .collect(),
        }
    }
}
