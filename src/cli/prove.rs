//! `hourworth prove`: a pack's published examples, one line for each published value, with its source.

use super::args::{Format, ProveArgs};
use super::exit::{Exit, Failure};
use crate::batch::{Proof, checked, prove as run};
use crate::load::{Asks, Error, Example, Expect, What, lay_local, read_examples, read_pack};
use crate::rules::Moment;
use serde_json::json;
use std::io::Write;

/// How many examples ended how. An example is met when all its values are.
#[derive(Default)]
struct Totals {
    met: usize,
    not_met: usize,
    not_expressed: usize,
    values: usize,
    values_met: usize,
}

/// Runs all examples of a pack.
pub(super) fn prove(args: &ProveArgs) -> Result<Exit, Failure> {
    let mut files = read_pack(&args.pack, None)?;
    lay_local(&mut files, &[], None, &args.laid.local)?;
    let pack = checked(&files)?;
    let examples = read_examples(&files.files).map_err(Error::Findings)?;
    let mut out = std::io::stdout().lock();
    let mut totals = Totals::default();
    for example in &examples {
        let case = match &example.asks {
            Asks::NotExpressed(reason) => {
                totals.not_expressed += 1;
                match args.format {
                    Format::Text => writeln!(
                        out,
                        "not expressed  {}: {reason} [{}]",
                        example.id,
                        source(example)
                    )?,
                    Format::Json => writeln!(
                        out,
                        "{}",
                        json!({
                            "example": example.id,
                            "result": "not expressed",
                            "reason": reason,
                            "source": source(example),
                        })
                    )?,
                }
                continue;
            }
            Asks::Values(case) => case,
        };
        let proofs = run(&pack, case);
        let met = |proof: &Proof| matches!(proof, Proof::Met(_));
        totals.values += proofs.len();
        totals.values_met += proofs.iter().filter(|proof| met(proof)).count();
        if proofs.iter().all(met) {
            totals.met += 1;
        } else {
            totals.not_met += 1;
        }
        for (expect, proof) in case.expects.iter().zip(&proofs) {
            match args.format {
                Format::Text => writeln!(out, "{}", text(example, expect, proof))?,
                Format::Json => writeln!(out, "{}", value(example, expect, proof))?,
            }
        }
    }
    if args.format == Format::Text {
        writeln!(
            out,
            "{} examples: {} met, {} not met, {} not expressed; {} of {} published values met",
            examples.len(),
            totals.met,
            totals.not_met,
            totals.not_expressed,
            totals.values_met,
            totals.values
        )?;
    }
    Ok(if totals.not_met == 0 {
        Exit::Done
    } else {
        Exit::Found
    })
}

fn source(example: &Example) -> String {
    let memory = match example.status.as_str() {
        "read" => "",
        "derived" => "; worked out by hand, not published",
        _ => "; from memory, not confirmed",
    };
    format!(
        "{}, {}, {}{memory}",
        example.publisher, example.document, example.locator
    )
}

fn what(expect: &Expect) -> String {
    let once = match expect.moment {
        Moment::Now => "",
        Moment::Settled => " once settled",
    };
    match &expect.what {
        What::Figure { name, of, period } => {
            let period = match period.as_str() {
                "" => String::new(),
                period => format!(" a {period}"),
            };
            format!("{name} of {of}{period}{once}")
        }
        What::Metr { adult, hours } => {
            format!(
                "METR of adult {} at {} hours{once}",
                adult + 1,
                hours.decimal(2)
            )
        }
    }
}

fn text(example: &Example, expect: &Expect, proof: &Proof) -> String {
    let (word, found) = match proof {
        Proof::Met(found) => ("met          ", found.decimal(4)),
        Proof::NotMet(found) => ("not met      ", found.decimal(4)),
        Proof::NoValue(reason) => ("not met      ", reason.clone()),
    };
    format!(
        "{word}  {}: {} is {found}, published {} (within {}) [{}]",
        example.id,
        what(expect),
        expect.value.decimal(4),
        expect.tolerance.decimal(4),
        source(example)
    )
}

fn value(example: &Example, expect: &Expect, proof: &Proof) -> serde_json::Value {
    let (result, found, reason) = match proof {
        Proof::Met(found) => ("met", Some(found.decimal(6)), None),
        Proof::NotMet(found) => ("not met", Some(found.decimal(6)), None),
        Proof::NoValue(reason) => ("not met", None, Some(reason)),
    };
    json!({
        "example": example.id,
        "result": result,
        "of": what(expect),
        "found": found,
        "reason": reason,
        "published": expect.value.decimal(6),
        "tolerance": expect.tolerance.decimal(6),
        "quoted": expect.quoted,
        "source": source(example),
    })
}
