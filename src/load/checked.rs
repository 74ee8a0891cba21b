//! A pack's files to a checked pack, and the schema of the lists that it takes.

use super::PackFiles;
use super::local::LOCAL;
use crate::case::{FactSpec, FactType, KindSpec, Need, Schema};
use crate::diag::{Diagnostic, nearest};
use crate::num::Fraction;
use crate::rules::{FactDecl, FactKind, Pack, PackTexts, check};
use crate::source::{Sources, Span};

/// Checks the files of a pack.
///
/// # Errors
/// Every fault, with the texts to show them in.
pub fn check_pack(pack: &PackFiles) -> Result<Pack, (Sources, Vec<Diagnostic>)> {
    let mut sources = Sources::new();
    let mut faults = Vec::new();
    let text = |name: &str| pack.files.text(name).unwrap_or("").to_owned();
    let manifest = sources.add("pack.toml", text("pack.toml"));
    let order = sources.add("order.txt", text("order.txt"));
    let mut names: Vec<String> = Vec::new();
    let mut next = 0;
    for whole in text("order.txt").split_inclusive('\n') {
        let (line, start) = (whole.trim(), next + whole.len() - whole.trim_start().len());
        next += whole.len();
        if line.is_empty() || line.starts_with('#') {
            continue;
        }
        let place = Span {
            file: order,
            start: start as u32,
            end: (start + line.len()) as u32,
        };
        if pack.files.text(line).is_none() {
            let fault = Diagnostic::fault(place, format!("there is no file `{line}`"))
                .expected("a `.rules` file of the pack");
            let near = nearest(
                line,
                pack.files
                    .texts()
                    .map(|(name, _)| name)
                    .filter(|name| name.ends_with(".rules")),
            );
            faults.push(match near {
                Some(near) => fault.hint(format!("did you mean `{near}`?")),
                None => fault,
            });
        } else if names.iter().any(|n| n == line) {
            faults.push(
                Diagnostic::fault(place, format!("`{line}` stands twice"))
                    .expected("each `.rules` file once"),
            );
        } else {
            names.push(line.to_owned());
        }
    }
    for (name, _) in pack.files.texts() {
        if name.ends_with(".rules") && !names.iter().any(|n| n == name) {
            faults.push(
                Diagnostic::general(format!("`{name}` does not stand in `order.txt`"))
                    .expected("each `.rules` file once, in the order of the law"),
            );
        }
    }
    let rules = names
        .iter()
        .map(|name| sources.add(name.clone(), text(name)))
        .collect();
    let amounts = pack
        .files
        .text("amounts.csv")
        .map(|text| sources.add("amounts.csv", text));
    let (mut tables, mut labels, mut locals) = (Vec::new(), Vec::new(), Vec::new());
    for (name, text) in pack.files.texts() {
        if let Some(local) = name.strip_prefix(LOCAL) {
            locals.push(sources.add(local, text));
        }
        if let Some(table) = name
            .strip_prefix("tables/")
            .and_then(|n| n.strip_suffix(".csv"))
        {
            tables.push((table.to_owned(), sources.add(name, text)));
        }
        if let Some(language) = name
            .strip_prefix("labels.")
            .and_then(|n| n.strip_suffix(".csv"))
        {
            labels.push((language.to_owned(), sources.add(name, text)));
        }
    }
    let result = check(PackTexts {
        sources,
        manifest,
        rules,
        amounts,
        tables,
        labels,
        locals,
    });
    match result {
        Ok(pack) if faults.is_empty() => Ok(pack),
        Ok(pack) => Err((pack.sources, faults)),
        Err((sources, found)) => {
            faults.extend(found);
            Err((sources, faults))
        }
    }
}

/// The kinds and facts of the lists that a pack takes.
pub fn schema_of(pack: &Pack) -> Schema {
    let kinds = pack
        .kinds
        .iter()
        .map(|kind| KindSpec {
            name: kind.name.clone(),
            owner: kind.owner,
            facts: kind.facts.iter().map(fact).collect(),
        })
        .collect();
    Schema { kinds }
}

fn fact(decl: &FactDecl) -> FactSpec {
    let ty = match &decl.kind {
        FactKind::Money(period) => {
            FactType::Money(period.map_or_else(String::new, |p| p.word().to_owned()))
        }
        FactKind::Rate => FactType::Rate,
        FactKind::Hours => FactType::Hours,
        FactKind::Number => FactType::Number,
        FactKind::Count => FactType::Count,
        FactKind::Date => FactType::Date,
        FactKind::YesNo => FactType::YesNo,
        FactKind::Choice(words) => FactType::Choice(words.clone()),
    };
    let scaled = |value: Fraction| {
        let units = value * Fraction::whole(i128::from(ty.units()));
        i64::try_from(units.floor()).unwrap_or(if units.is_negative() {
            i64::MIN
        } else {
            i64::MAX
        })
    };
    let (min, max) = (scaled(decl.range.0), scaled(decl.range.1));
    let need = decl
        .default
        .map_or(Need::Required, |value| Need::Default(scaled(value)));
    FactSpec {
        name: decl.name.clone(),
        min,
        max,
        need,
        ask: decl.ask.clone(),
        ty,
    }
}
