//! All facts with how they are known, those of each person and each offer together.

use super::{Copy, Side};
use crate::measures::FactUse;
use crate::statement::build::facts::{fact_name, value};
use crate::statement::copy_view::{CopyPart, CopySection, LongRow};
use crate::statement::error::StatementError;
use crate::statement::money::capital;

/// Width that the names of facts get at least, in sizes of print.
const NAMES: f64 = 12.0;

pub(super) fn section(copy: &Copy<'_>) -> Result<CopySection, StatementError> {
    let words = &copy.words;
    let mut rows = vec![];
    let facts = &words.assessment.facts;
    let mut owners: Vec<(&str, &str)> = vec![];
    for fact in facts {
        let owner = (fact.of.as_str(), fact.kind.as_str());
        if !owners.contains(&owner) {
            owners.push(owner);
        }
    }
    for (of, kind) in owners {
        let named = words
            .label(&format!("record.{kind}"))
            .map_or_else(|| words.plain(&format!("copy.record.{kind}")), Ok)
            .unwrap_or_else(|_| crate::statement::money::readable(kind));
        rows.push(LongRow::group(if of.is_empty() && kind == "household" {
            words.plain("copy.facts.household")?
        } else if of.is_empty() {
            capital(&named)
        } else {
            words.say("copy.facts.of", &[("who", of), ("record", &named)])?
        }));
        for fact in facts
            .iter()
            .filter(|fact| fact.of == of && fact.kind == kind)
        {
            rows.push(row(copy, fact)?);
        }
    }
    for earner in &copy.earners {
        for line in earner
            .lines
            .iter()
            .filter(|line| !line.terms.reference.is_empty())
        {
            let who = capital(&line.terms.offer);
            rows.push(LongRow::group(words.say(
                "copy.facts.offer",
                &[("name", &earner.name), ("offer", &who)],
            )?));
            for fact in &line.terms.facts {
                rows.push(row(copy, fact)?);
            }
        }
    }
    let heads = ["fact", "value", "known"];
    let heads: Vec<String> = heads
        .iter()
        .map(|head| words.plain(&format!("copy.facts.{head}")))
        .collect::<Result<_, _>>()?;
    let table = copy.room.whole(
        &words.plain("copy.facts.summary")?,
        &heads,
        rows,
        (1, NAMES),
        Side::Words,
    );
    Ok(CopySection {
        heading: words.plain("copy.facts.heading")?,
        parts: vec![CopyPart {
            heading: String::new(),
            lines: vec![words.plain("copy.facts.lead")?.into()],
            tables: vec![table],
        }],
    })
}

fn row(copy: &Copy<'_>, fact: &FactUse) -> Result<LongRow, StatementError> {
    let words = &copy.words;
    let known = match fact.known {
        's' => "seen",
        't' => "told",
        'a' => "assumed",
        _ => "missing",
    };
    let name = capital(&fact_name(words, fact)?);
    Ok(LongRow::plain(vec![
        words.say("copy.facts.name", &[("name", &name), ("code", &fact.name)])?,
        value(words, fact)?,
        words.plain(&format!("copy.facts.{known}"))?,
    ]))
}
