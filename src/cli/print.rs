//! `hourworth print`: the main job.

use super::args::PrintArgs;
use super::exit::{Exit, Failure};
use super::progress::Told;
use crate::batch::{
    Entry, Existing, FaultRow, GridRows, Inputs, Orders, Places, PoolPlan, Prepared, Record,
    Reject, RunFolder, RunPlan, StopFlag, Summary, WorkerCommand, item_columns, pack_folder,
    pack_hash, prepare, run, setup,
};
use crate::case::{Fault, RejectedHousehold};
use crate::load::LOCAL;
use crate::statement::{EmployerCost, Kind};
use chrono::NaiveDate;
use std::path::Path;
use std::time::Duration;

/// After how many households a worker is replaced.
const REPLACE_AFTER: u32 = 500;

/// Prints every household of a list.
pub(super) fn print(args: &PrintArgs) -> Result<Exit, Failure> {
    let places = Places {
        rules: args.rules.rules.as_deref(),
        templates: args.templates.as_deref(),
        office: args.office.as_deref(),
        local: &args.rules.laid.local,
    };
    let prepared = prepare(&args.list, &places)?;
    let existing = if args.replace {
        Existing::Replace
    } else {
        Existing::Refuse
    };
    let folder = RunFolder::take(&args.to, existing)?;
    if let Some(zip) = &args.zip {
        free(zip, existing)?;
    }
    let (survey, rows) = prepared.survey(Some(&folder))?;
    if !survey.list_faults.is_empty() {
        return Err(crate::load::Error::Faults(survey.list_faults).into());
    }
    let issued = args
        .issued
        .unwrap_or_else(|| chrono::Local::now().date_naive());
    let inputs = inputs(&prepared, args);
    let written_day = issued.to_string();
    let run_id = inputs.run_id(&written_day);
    let orders = Orders {
        run_id: run_id.clone(),
        issued,
        rows: if args.grid {
            GridRows::All
        } else {
            GridRows::Named
        },
        kinds: kinds(args),
        employer: if args.employer_cost {
            EmployerCost::Shown
        } else {
            EmployerCost::LeftOut
        },
    };
    let plan = RunPlan {
        record: Record {
            run_id: &run_id,
            issued: &written_day,
            inputs: &inputs,
        },
        pool: pool(&prepared, &orders, args, survey.households)?,
        households: survey.households,
        items: item_columns(&prepared.pack),
    };
    let (_, readings) = prepared
        .list
        .read(&prepared.schema, &prepared.options, &rows)?;
    let single = prepared.list.is_single();
    let entries = readings.map(|reading| Ok(entry(reading?, single)));
    let mut told = Told::new(survey.households);
    let stop = StopFlag::default();
    let asked = stop.clone();
    // Without the handler the run can still be stopped, only less politely.
    let _ = ctrlc::set_handler(move || asked.stop());
    let ended = run(&folder, &plan, entries, &stop, &mut told);
    told.end();
    let summary = ended?;
    if let Some(zip) = &args.zip {
        pack_folder(&folder, zip)?;
    }
    tell(&summary, &run_id, args, issued);
    let rejected = summary.ledger.rejected + summary.ledger.stray_faults;
    Ok(if rejected > 0 && !args.allow_rejects {
        Exit::Found
    } else {
        Exit::Done
    })
}

/// The kinds that are asked for, each once, the client's first.
fn kinds(args: &PrintArgs) -> Vec<Kind> {
    if args.no_statements {
        return vec![];
    }
    let kinds = Kind::ALL.into_iter();
    kinds.filter(|kind| args.kind.contains(kind)).collect()
}

fn kind_words(kinds: &[Kind]) -> String {
    let words: Vec<&str> = kinds.iter().map(|kind| kind.word()).collect();
    words.join(",")
}

/// Refuses a ZIP file that could not be written or would take another file's place, before the run rather than after it.
fn free(zip: &Path, existing: Existing) -> Result<(), Failure> {
    if zip.exists() && (existing == Existing::Refuse || zip.is_dir()) {
        return Err(Failure::Request(format!(
            "`{}` exists already; choose another name for the ZIP file, or give `--replace`",
            zip.display()
        )));
    }
    match zip.parent() {
        Some(folder) if folder != Path::new("") && !folder.is_dir() => {
            Err(Failure::Request(format!(
                "there is no folder `{}` for the ZIP file; make it first",
                folder.display()
            )))
        }
        Some(_) | None => Ok(()),
    }
}

/// One reading of the list as an entry of the run.
fn entry(reading: crate::case::Reading, single: bool) -> Entry {
    match reading {
        Ok(household) => Entry::Household(Box::new(household)),
        Err(rejected) if rejected.row == 0 && !single => {
            Entry::Stray(rejected.faults.iter().map(fault_row).collect())
        }
        Err(RejectedHousehold {
            reference, faults, ..
        }) => Entry::Rejected(Reject {
            reference,
            faults: faults.iter().map(fault_row).collect(),
        }),
    }
}

fn fault_row(fault: &Fault) -> FaultRow {
    let hint = fault.problem.hint();
    let expected = fault.problem.expected();
    FaultRow {
        file: fault.file.clone(),
        row: fault.row(),
        column: fault.column().to_owned(),
        value: fault.value.clone(),
        message: fault.problem.found(&fault.value),
        expected: if hint.is_empty() {
            expected
        } else {
            format!("{expected}; {hint}")
        },
    }
}

fn inputs(prepared: &Prepared, args: &PrintArgs) -> Inputs {
    let settings = &prepared.list.settings;
    let yes_no = |yes: bool| if yes { "yes" } else { "no" }.to_owned();
    let mut options = vec![
        ("list".to_owned(), settings.title.clone()),
        // As it was asked for: where the list itself lies changes nothing.
        (
            "pack".to_owned(),
            args.rules.rules.as_ref().unwrap_or(&settings.pack).clone(),
        ),
        ("grid".to_owned(), yes_no(args.grid)),
        ("statements".to_owned(), yes_no(!args.no_statements)),
        ("kinds".to_owned(), kind_words(&kinds(args))),
        ("employer_cost".to_owned(), yes_no(args.employer_cost)),
        (
            "pack_sha256".to_owned(),
            pack_hash(&prepared.pack_files.files.hashes()),
        ),
        ("deadline_seconds".to_owned(), args.deadline.to_string()),
        ("memory_mb".to_owned(), args.memory.to_string()),
    ];
    let dates = prepared.pack.manifest.dates.iter();
    for ((name, _), day) in dates.zip(&prepared.terms.dates) {
        let day = crate::case::day_of(*day).map(|day| day.to_string());
        options.push((format!("date {name}"), day.unwrap_or_default()));
    }
    for change in &settings.changed {
        options.push((
            format!("changed {}", change.amount),
            format!("{} ({})", change.value, change.because),
        ));
    }
    Inputs {
        list: prepared.list.hashes.clone(),
        pack_title: prepared.pack.manifest.title.clone(),
        // Examples are for `prove` alone.
        pack: prepared
            .pack_files
            .files
            .hashes()
            .into_iter()
            .filter(|(name, _)| !name.starts_with("examples/") && !name.starts_with(LOCAL))
            .collect(),
        local: prepared
            .pack_files
            .files
            .hashes()
            .into_iter()
            .filter_map(|(name, hash)| Some((name.strip_prefix(LOCAL)?.to_owned(), hash)))
            .collect(),
        templates: prepared.templates.hashes(),
        office: prepared
            .office
            .iter()
            .map(|office| office.hash.clone())
            .collect(),
        options,
    }
}

fn pool(
    prepared: &Prepared,
    orders: &Orders,
    args: &PrintArgs,
    households: u64,
) -> Result<PoolPlan, Failure> {
    let program = std::env::current_exe().map_err(|cause| {
        Failure::Request(format!(
            "the program's own file is not known, so no worker can start: {cause}"
        ))
    })?;
    let processors = std::thread::available_parallelism().map_or(1, usize::from);
    let wanted = args.workers.map_or(processors, usize::from);
    let most = usize::try_from(households).unwrap_or(usize::MAX).max(1);
    Ok(PoolPlan {
        command: WorkerCommand {
            program,
            args: vec!["worker".to_owned()],
            env: vec![],
        },
        setup: setup(prepared, orders),
        workers: wanted.min(most),
        deadline: Duration::from_secs(u64::from(args.deadline)),
        memory: Some(args.memory << 20),
        replace_after: REPLACE_AFTER,
    })
}

fn tell(summary: &Summary, run_id: &str, args: &PrintArgs, issued: NaiveDate) {
    let ledger = &summary.ledger;
    eprintln!(
        "run {run_id}, issued {issued}: {} households = {} printed + {} held + {} rejected",
        ledger.households, ledger.printed, ledger.held, ledger.rejected
    );
    let seconds = summary.milliseconds / 1000;
    let tenths = summary.milliseconds / 100 % 10;
    eprintln!(
        "{} in {seconds}.{tenths} seconds, in `{}`",
        counted(ledger.pieces, "statement"),
        args.to.display()
    );
    if ledger.held > 0 {
        eprintln!("held: the reasons are in `held.csv`");
    }
    if ledger.rejected + ledger.stray_faults > 0 {
        eprintln!("rejected: every fault is in `rejects.csv`");
    }
    if ledger.stray_faults > 0 {
        eprintln!(
            "of no household of the list: {}",
            counted(ledger.stray_faults, "fault")
        );
    }
}

/// `1 fault`, `2 faults`.
fn counted(count: u64, what: &str) -> String {
    match count {
        1 => format!("1 {what}"),
        many => format!("{many} {what}s"),
    }
}
