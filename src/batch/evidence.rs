//! What a file copy and a payroll page need besides the assessment: the workings of their points, and the record of the rules.

use super::Books;
use crate::case::{Household, JOB, JobRole, day_of};
use crate::engine::JobChoice;
use crate::load::{Files, Terms, hex};
use crate::measures::{Assessment, EarnerResult};
use crate::num::Hours;
use crate::program::Moment;
use crate::rules::Pack;
use crate::statement::{PointPlace, RulesRecord, WorkedPoint};
use sha2::{Digest, Sha256};

/// The workings of a household: today once, and for each earner not in work and each offer; without an offer, more hours on today's terms.
///
/// # Errors
/// Where the pack cannot make a program.
pub fn workings(
    books: &mut Books,
    household: &Household,
    assessment: &Assessment,
) -> Result<Vec<WorkedPoint>, String> {
    let mut points = vec![];
    for (place, earner) in assessment.earners.iter().enumerate() {
        for (choice, hours, point) in wanted(household, earner, place == 0) {
            let at = crate::measures::WorkedPoint {
                adult: earner.adult,
                choice,
                hours,
                moment: Moment::Now,
            };
            let lines = books.working(household, at)?;
            points.push(WorkedPoint {
                adult: earner.adult,
                job: job_of(household, earner.adult),
                place: point,
                lines,
            });
        }
    }
    Ok(points)
}

/// The points of one earner. Only the first one's are not in work and today: the household of the others' today is the same.
fn wanted(
    household: &Household,
    earner: &EarnerResult,
    first: bool,
) -> Vec<(JobChoice, Hours, PointPlace)> {
    let mut wanted = vec![];
    let jobs = household.instances[JOB]
        .iter()
        .filter(|job| job.owner == earner.adult);
    // With further jobs ended too, the household's facts are others: not in work has no working then.
    if jobs.count() < 2 {
        wanted.push((JobChoice::Today, Hours(0), PointPlace::NotInWork));
    }
    let today = earner.lines.first().filter(|_| earner.has_job);
    if let Some(line) = today {
        if first {
            let hours = line.grid[line.own].hours;
            wanted.push((JobChoice::Today, hours, PointPlace::Today));
        }
        if earner.offers.is_empty() && line.step_to != line.own {
            let hours = line.grid[line.step_to].hours;
            wanted.push((JobChoice::Today, hours, PointPlace::More(hours)));
        }
    }
    let offers = household.offers.iter().enumerate();
    let offers = offers.filter(|(_, offer)| offer.owner == earner.adult);
    for ((at, _), measured) in offers.zip(&earner.offers) {
        let line = &earner.lines[measured.line];
        let hours = line.grid[line.step_to].hours;
        wanted.push((
            JobChoice::Offer(at),
            hours,
            PointPlace::Offer(measured.line),
        ));
    }
    wanted
}

/// The main job of an adult as a working names it.
fn job_of(household: &Household, adult: usize) -> String {
    let jobs = household.instances[JOB].iter().zip(&household.job_roles);
    let main = jobs
        .into_iter()
        .position(|(job, role)| job.owner == adult && *role == JobRole::Today);
    format!("job {}", main.map_or(0, |place| place + 1))
}

/// The record of a run's rules.
pub fn rules_record(name: &str, files: &Files, pack: &Pack, terms: &Terms) -> RulesRecord {
    let dates = pack.manifest.dates.iter().zip(&terms.dates);
    RulesRecord {
        name: name.to_owned(),
        hash: pack_hash(&files.hashes()),
        from: day_of(pack.manifest.from).unwrap_or_default(),
        dates: dates
            .map(|((_, what), day)| (what.clone(), day_of(*day).unwrap_or_default()))
            .collect(),
        steps: shared_steps(files),
        version: env!("CARGO_PKG_VERSION").to_owned(),
    }
}

/// The conversions and bands of a pack: rules name them, and their text stands nowhere in a working.
fn shared_steps(files: &Files) -> Vec<(String, String)> {
    let mut steps: Vec<(String, String)> = vec![];
    let rules = files.texts().filter(|(name, _)| name.ends_with(".rules"));
    for (_, text) in rules {
        let mut open = false;
        for line in text.lines() {
            let mut words = line.split_whitespace();
            match (words.next(), words.next()) {
                (Some("conversion" | "bands"), Some(name)) => {
                    let step = line.split_whitespace().collect::<Vec<_>>().join(" ");
                    steps.push((name.to_owned(), step));
                    open = true;
                }
                // A band, or what goes on over the line.
                (Some(first), _) if open && (first == "band" || line.starts_with(' ')) => {
                    if let Some((_, step)) = steps.last_mut() {
                        let more = line.split_whitespace().collect::<Vec<_>>().join(" ");
                        step.push_str(if first == "band" { "; " } else { " " });
                        step.push_str(&more);
                    }
                }
                (None | Some(_), _) => open = false,
            }
        }
    }
    steps
}

/// The SHA-256 of a pack: of the list of its files in the order of their names, a line each with the file's own hash, two spaces and the
/// name. Examples are for `prove` alone and do not count.
pub fn pack_hash(files: &[(String, String)]) -> String {
    let mut files: Vec<&(String, String)> = files
        .iter()
        .filter(|(name, _)| !name.starts_with("examples/"))
        .collect();
    files.sort();
    let lines = files.iter().map(|(name, hash)| format!("{hash}  {name}\n"));
    hex(&Sha256::digest(lines.collect::<String>()))
}
