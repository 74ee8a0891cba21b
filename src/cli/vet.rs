//! `hourworth vet`: every fault of case lists, rule packs, local files, templates and office files.

use super::args::VetArgs;
use super::exit::{Exit, Failure};
use crate::batch::{Places, checked, prepare};
use crate::load::{
    Error, LIST_FILE, PACK_FILE, built_in_packs, lay_local, read_office, read_pack, read_templates,
};
use crate::rules::Pack;
use crate::statement::{TemplateSet, Typesetter};
use std::io::Write;
use std::path::Path;

/// What a path holds.
enum Thing {
    Pack,
    List,
    Templates,
    Office,
    Local,
}

/// Checks each path; faults go to standard output, one after another.
pub(super) fn vet(args: &VetArgs) -> Result<Exit, Failure> {
    let mut out = std::io::stdout().lock();
    let mut exit = Exit::Done;
    for path in &args.paths {
        let (words, found) = match thing(path)? {
            Thing::Pack => ("rule pack", pack(path, args)),
            Thing::Local => ("local file", local(path, args)),
            Thing::List => ("case list", list(path, args)),
            Thing::Templates => ("templates", templates(path)),
            Thing::Office => ("office file", read_office(path).map(|_| Report::sound(""))),
        };
        let report = match found {
            Ok(report) => report,
            Err(Error::Faults(faults)) => Report {
                faults: faults.iter().map(ToString::to_string).collect(),
                ..Report::sound("")
            },
            Err(Error::Findings(faults)) => Report {
                faults,
                ..Report::sound("")
            },
            Err(error @ Error::Unfit { .. }) => Report {
                faults: vec![error.to_string()],
                ..Report::sound("")
            },
            Err(
                error @ (Error::Read { .. }
                | Error::NotText { .. }
                | Error::NoPack { .. }
                | Error::Unsorted { .. }
                | Error::Sort { .. }),
            ) => return Err(error.into()),
        };
        for fault in report.faults.iter().chain(&report.warnings) {
            writeln!(out, "{fault}")?;
        }
        let count = match report.faults.len() {
            0 => "no fault".to_owned(),
            1 => "1 fault".to_owned(),
            many => format!("{many} faults"),
        };
        writeln!(
            out,
            "{words} `{}`: {count}{}",
            path.display(),
            report.counted
        )?;
        if !report.faults.is_empty() {
            exit = Exit::Found;
        }
    }
    Ok(exit)
}

/// What a check found.
struct Report {
    faults: Vec<String>,
    warnings: Vec<String>,
    /// What was counted, with a comma in front.
    counted: String,
}

impl Report {
    fn sound(counted: &str) -> Report {
        Report {
            faults: vec![],
            warnings: vec![],
            counted: counted.to_owned(),
        }
    }
}

fn thing(path: &Path) -> Result<Thing, Failure> {
    let name = path.to_string_lossy();
    if !path.exists() && built_in_packs().iter().any(|pack| *pack == name) {
        return Ok(Thing::Pack);
    }
    if path.join(PACK_FILE).is_file() {
        return Ok(Thing::Pack);
    }
    if path.join(LIST_FILE).is_file() {
        return Ok(Thing::List);
    }
    if path.is_file() && name.ends_with(".toml") {
        // A household names its pack; an office file has none.
        let text = crate::load::read_text(path)?.text;
        if is_local(&text) {
            return Ok(Thing::Local);
        }
        let household = text.lines().any(|line| {
            let line = line.trim_start();
            line.starts_with("pack") || line.starts_with("[household]")
        });
        return Ok(if household {
            Thing::List
        } else {
            Thing::Office
        });
    }
    if path.is_dir() && path.join("text").is_dir() {
        return Ok(Thing::Templates);
    }
    Err(Failure::Request(format!(
        "`{}` is nothing to check, expected a folder with `{PACK_FILE}`, `{LIST_FILE}` or templates, a `.toml` file, or one of the built-in packs: {}",
        path.display(),
        built_in_packs().join(", ")
    )))
}

/// Whether a TOML text is a local file: it names a choice of a pack and a word, before anything else stands in brackets.
fn is_local(text: &str) -> bool {
    let top = || {
        text.lines()
            .map(str::trim_start)
            .take_while(|line| !line.starts_with('['))
    };
    let has = |key: &str| {
        top().any(|line| {
            line.strip_prefix(key)
                .is_some_and(|rest| rest.trim_start().starts_with('='))
        })
    };
    has("choice") || has("word")
}

fn pack(path: &Path, args: &VetArgs) -> Result<Report, Error> {
    let mut files = read_pack(&path.to_string_lossy(), None)?;
    lay_local(&mut files, &[], None, &args.rules.laid.local)?;
    let pack = checked(&files)?;
    let gaps = pack.gaps.iter();
    Ok(Report {
        faults: gaps.map(|(_, gap)| gap.line(&pack.sources)).collect(),
        warnings: crate::batch::findings(&pack.sources, &pack.warnings),
        ..Report::sound(&laid(&pack))
    })
}

/// The local files that were laid over a pack, to be counted.
fn laid(pack: &Pack) -> String {
    match pack.locals() {
        [] => String::new(),
        [one] => format!(", with `{}`", one.title),
        several => format!(", with {} local files", several.len()),
    }
}

/// Checks a local file against the pack that `--rules` or else the file itself names.
fn local(path: &Path, args: &VetArgs) -> Result<Report, Error> {
    let text = crate::load::read_text(path)?.text;
    let named = text.lines().map(str::trim_start).find_map(|line| {
        let value = line.strip_prefix("pack")?.trim_start().strip_prefix('=')?;
        value.trim().strip_prefix('"')?.split('"').next()
    });
    let pack = args.rules.rules.as_deref().or(named).unwrap_or("uk");
    let mut files = read_pack(pack, path.parent())?;
    let mut all = args.rules.laid.local.clone();
    all.push(path.to_owned());
    lay_local(&mut files, &[], None, &all)?;
    let pack = checked(&files)?;
    let own = pack.locals().last();
    let counted = own.map_or_else(String::new, |own| {
        format!(
            ", adds `{}` to {}, laid over `{}`",
            own.word,
            own.facts.join(", "),
            pack.manifest.title
        )
    });
    Ok(Report::sound(&counted))
}

fn list(path: &Path, args: &VetArgs) -> Result<Report, Error> {
    let places = Places {
        rules: args.rules.rules.as_deref(),
        local: &args.rules.laid.local,
        ..Places::default()
    };
    let prepared = prepare(path, &places)?;
    let (survey, rows) = match prepared.survey(None) {
        Ok(found) => found,
        Err(crate::batch::Error::List(error)) => return Err(error),
        Err(error) => return Err(Error::Findings(vec![error.to_string()])),
    };
    let mut faults: Vec<String> = survey.list_faults.iter().map(ToString::to_string).collect();
    let (_, readings) = prepared
        .list
        .read(&prepared.schema, &prepared.options, &rows)?;
    for reading in readings {
        if let Err(rejected) = reading? {
            faults.extend(rejected.faults.iter().map(ToString::to_string));
        }
    }
    Ok(Report {
        faults,
        ..Report::sound(&format!(
            ", {} households, {} of them faulty",
            survey.households, survey.rejected
        ))
    })
}

fn templates(path: &Path) -> Result<Report, Error> {
    let files = read_templates(path)?;
    let texts = files
        .texts()
        .map(|(name, text)| (name.to_owned(), text.to_owned()))
        .collect();
    let set = TemplateSet::new(texts);
    let mut faults = vec![];
    if let Err(error) = Typesetter::new(&set) {
        faults.push(error.to_string());
    }
    faults.extend(set.language_faults().iter().map(ToString::to_string));
    Ok(Report {
        faults,
        ..Report::sound("")
    })
}
