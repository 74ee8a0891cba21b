//! `hourworth show` and `hourworth working`: one household of a list on standard output.

use super::args::{Format, OneArgs, ShowArgs, WorkingArgs};
use super::exit::{Exit, Failure};
use super::show::{Terms, show as page};
use crate::batch::{Books, Places, Prepared, prepare};
use crate::case::{ADULT, Household};
use crate::engine::JobChoice;
use crate::measures::{Verdict, WorkedPoint};
use crate::rules::Moment;
use std::io::Write;

/// One household, ready to be worked out.
struct One {
    books: Books,
    household: Household,
    terms: Terms,
}

/// Shows one household.
pub(super) fn show(args: &ShowArgs) -> Result<Exit, Failure> {
    let mut one = match find(&args.one)? {
        Ok(one) => one,
        Err(exit) => return Ok(exit),
    };
    let assessment = match one.books.assess(&one.household) {
        Ok(Verdict::Assessed(assessment)) => assessment,
        Ok(Verdict::Held(reasons)) => return Ok(held(&one.household, &reasons)),
        Err(cause) => return Err(Failure::Request(cause)),
    };
    let mut out = std::io::stdout().lock();
    match args.one.format {
        Format::Text => write!(out, "{}", page(&assessment, &one.terms))?,
        Format::Json => writeln!(out, "{:#}", super::json::json(&assessment))?,
    }
    Ok(Exit::Done)
}

/// Shows the working at one point.
pub(super) fn working(args: &WorkingArgs) -> Result<Exit, Failure> {
    let mut one = match find(&args.one)? {
        Ok(one) => one,
        Err(exit) => return Ok(exit),
    };
    let adult = usize::from(args.earner) - 1;
    let adults = one.household.instances[ADULT].len();
    if adult >= adults {
        return Err(Failure::Request(format!(
            "`{}` has no adult {}, expected 1 to {adults}",
            one.household.reference, args.earner
        )));
    }
    let choice = match &args.offer {
        None => JobChoice::Today,
        Some(wanted) => {
            let of_adult = || {
                let offers = one.household.offers.iter().enumerate();
                offers.filter(|(_, offer)| offer.owner == adult)
            };
            let found = of_adult().find(|(_, offer)| offer.reference == *wanted);
            let Some((place, _)) = found else {
                let known: Vec<String> = of_adult()
                    .map(|(_, offer)| format!("`{}`", offer.reference))
                    .collect();
                return Err(Failure::Request(format!(
                    "adult {} of `{}` has no offer `{wanted}`, expected {}",
                    args.earner,
                    one.household.reference,
                    if known.is_empty() {
                        "no `--offer`: there is none".to_owned()
                    } else {
                        format!("one of {}", known.join(", "))
                    }
                )));
            };
            JobChoice::Offer(place)
        }
    };
    let moment = if args.settled {
        Moment::Settled
    } else {
        Moment::Now
    };
    // A household that the pack does not cover has no figures to explain.
    match one.books.assess(&one.household) {
        Ok(Verdict::Assessed(assessment)) => {
            if let (Moment::Settled, Some(settled)) = (moment, &assessment.settled)
                && !settled.held.is_empty()
            {
                return Ok(held(&one.household, &settled.held));
            }
        }
        Ok(Verdict::Held(reasons)) => return Ok(held(&one.household, &reasons)),
        Err(cause) => return Err(Failure::Request(cause)),
    }
    let lines = one
        .books
        .working(
            &one.household,
            WorkedPoint {
                adult,
                choice,
                hours: args.hours,
                moment,
            },
        )
        .map_err(Failure::Request)?;
    let mut out = std::io::stdout().lock();
    match args.one.format {
        Format::Text => write!(out, "{}", super::working::text(&lines))?,
        Format::Json => writeln!(out, "{:#}", super::working::json(&lines))?,
    }
    Ok(Exit::Done)
}

fn held(household: &Household, reasons: &[String]) -> Exit {
    eprintln!("household `{}` is held:", household.reference);
    for reason in reasons {
        eprintln!("  {reason}");
    }
    Exit::Found
}

/// Finds the household in its list; a faulty one is told with its faults.
fn find(args: &OneArgs) -> Result<Result<One, Exit>, Failure> {
    let places = Places {
        rules: args.rules.rules.as_deref(),
        local: &args.rules.laid.local,
        ..Places::default()
    };
    let prepared = prepare(&args.list, &places)?;
    let (survey, rows) = prepared.survey(None)?;
    if !survey.list_faults.is_empty() {
        return Err(crate::load::Error::Faults(survey.list_faults).into());
    }
    let wanted = &args.household;
    let (_, readings) = prepared
        .list
        .read(&prepared.schema, &prepared.options, &rows)?;
    for reading in readings {
        match reading? {
            Ok(household) if household.reference.eq_ignore_ascii_case(wanted) => {
                return Ok(Ok(one(&prepared, household)));
            }
            Err(rejected) if rejected.reference.eq_ignore_ascii_case(wanted) => {
                eprintln!("household `{}` has faults:", rejected.reference);
                for fault in rejected.faults {
                    eprintln!("  {fault}");
                }
                return Ok(Err(Exit::Found));
            }
            Ok(_) | Err(_) => {}
        }
    }
    Err(Failure::Request(format!(
        "the list has no household `{wanted}`, found {} others",
        survey.households
    )))
}

fn one(prepared: &Prepared, household: Household) -> One {
    let manifest = &prepared.pack.manifest;
    let mut rules = manifest.title.clone();
    for local in prepared.locals_of(&household) {
        rules.push_str(&format!("; {}", local.title));
    }
    One {
        books: Books::new(prepared.pack.clone(), prepared.terms.clone()),
        household,
        terms: Terms {
            currency: manifest.currency.clone(),
            period: manifest.period.word().to_owned(),
            rules,
            date: prepared.list.settings.date.to_string(),
        },
    }
}
