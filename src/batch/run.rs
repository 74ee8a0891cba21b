//! One run from the first household to the balance: what the pool reports is written here, in list order.

use super::aside::{Aside, Forced};
use super::folder::{
    HELD, RECORD, REJECTS, RESULTS, RunFolder, STATEMENTS_LIST, TIMINGS, TURNS, statements_folder,
};
use super::record::State;
use super::tables::{Table, text_cell};
use super::{
    Done, Entry, Error, FaultRow, Ledger, Outcome, PoolFigures, PoolPlan, Product, Record,
    StopFlag, drive, results_header, statement_number, turning_points_header,
};
use crate::load::hex;
use sha2::{Digest, Sha256};
use std::time::Instant;

/// Position of the file's name in `statements.csv`.
pub(super) const STATEMENTS_FILE_COLUMN: usize = 4;

/// Hears how far a run is.
pub trait Progress {
    /// So many of all households are written.
    fn advance(&mut self, written: u64, households: u64);
}

/// What a run is to do, beside the entries of its list.
#[derive(Clone, Debug)]
pub struct RunPlan<'a> {
    /// Its record.
    pub record: Record<'a>,
    /// Its workers.
    pub pool: PoolPlan,
    /// Households counted in the list beforehand.
    pub households: u64,
    /// Names of the pack's items, in order: the columns of `results.csv`.
    pub items: Vec<String>,
}

/// How a run ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Summary {
    /// The counts; they balance.
    pub ledger: Ledger,
    /// What the pool did.
    pub pool: PoolFigures,
    /// How long it took, in thousandths of a second.
    pub milliseconds: u128,
}

/// Works out and writes all households of a list.
///
/// # Errors
/// Where the list, a worker or the disk fails, where somebody stops the run, and where the counts do not balance. The
/// folder's record then does not say that the run is done.
pub fn run<I>(
    folder: &RunFolder,
    plan: &RunPlan<'_>,
    entries: I,
    stop: &StopFlag,
    progress: &mut dyn Progress,
) -> Result<Summary, Error>
where
    I: Iterator<Item = Result<Entry, Error>> + Send,
{
    let begun = Instant::now();
    folder.begin()?;
    let started = plan.record.json(State::Running);
    folder.write(RECORD, started.as_bytes(), Forced::ToDisk)?;
    let mut writer = Writer::open(folder, plan)?;
    let pool = drive(&plan.pool, entries, stop, |done| {
        writer.take(done)?;
        progress.advance(writer.place, plan.households);
        Ok(())
    })?;
    let ledger = writer.finish()?;
    let ended = plan.record.json(State::Ended(&ledger));
    folder.write(RECORD, ended.as_bytes(), Forced::ToDisk)?;
    let summary = Summary {
        ledger,
        pool,
        milliseconds: begun.elapsed().as_millis(),
    };
    folder.write(TIMINGS, timings(plan, &summary).as_bytes(), Forced::No)?;
    ledger.check()?;
    Ok(summary)
}

fn timings(plan: &RunPlan<'_>, summary: &Summary) -> String {
    let per_second = u128::from(summary.ledger.printed) * 1000 / summary.milliseconds.max(1);
    let text = serde_json::json!({
        "run": plan.record.run_id,
        "milliseconds": u64::try_from(summary.milliseconds).unwrap_or(u64::MAX),
        "printed_a_second": u64::try_from(per_second).unwrap_or(u64::MAX),
        "workers": plan.pool.workers,
        "worker_processes": summary.pool.started,
        "workers_lost": summary.pool.lost,
        "peak_memory_kb": {
            "parent": super::worker::peak_memory_kb(),
            "largest_worker": summary.pool.peak_kb,
        },
    });
    let mut text = serde_json::to_string_pretty(&text).unwrap_or_default();
    text.push('\n');
    text
}

/// The open tables of a run.
struct Writer<'a> {
    folder: &'a RunFolder,
    run_id: &'a str,
    results: Aside,
    turns: Aside,
    held: Aside,
    rejects: Aside,
    statements: Aside,
    ledger: Ledger,
    /// Households written so far.
    place: u64,
    made: String,
}

impl<'a> Writer<'a> {
    fn open(folder: &'a RunFolder, plan: &RunPlan<'a>) -> Result<Writer<'a>, Error> {
        let create = |name: &str, header: &[String]| -> Result<Aside, Error> {
            let mut file = Aside::create(&folder.file(name))?;
            let mut table = Table::default();
            table.push(header);
            file.add(&table.bytes)?;
            Ok(file)
        };
        let words = |words: &[&str]| words.iter().map(|w| (*w).to_owned()).collect::<Vec<_>>();
        folder.make(super::folder::STATEMENTS)?;
        Ok(Writer {
            folder,
            run_id: plan.record.run_id,
            results: create(RESULTS, &results_header(&plan.items))?,
            turns: create(TURNS, &turning_points_header())?,
            held: create(HELD, &words(&["household", "reason"]))?,
            rejects: create(
                REJECTS,
                &words(&[
                    "household",
                    "stage",
                    "file",
                    "row",
                    "column",
                    "value",
                    "fault",
                    "expected",
                ]),
            )?,
            statements: create(
                STATEMENTS_LIST,
                &words(&[
                    "number",
                    "household",
                    "kind",
                    "variant",
                    "file",
                    "pages",
                    "bytes",
                    "sha256",
                ]),
            )?,
            ledger: Ledger {
                households: plan.households,
                ..Ledger::default()
            },
            place: 0,
            made: super::folder::STATEMENTS.to_owned(),
        })
    }

    fn take(&mut self, done: Done) -> Result<(), Error> {
        match done {
            Done::Worked {
                reference,
                row,
                outcome,
            } => {
                match outcome {
                    Outcome::Printed(product) => self.printed(&reference, *product)?,
                    Outcome::Held { reasons } => {
                        self.ledger.held += 1;
                        let rows = reasons
                            .iter()
                            .map(|r| vec![reference.clone(), text_cell(r)]);
                        self.held.add(&Table::from_rows(rows).bytes)?;
                    }
                    Outcome::Failed { cause } => {
                        self.ledger.rejected += 1;
                        self.ledger.failed += 1;
                        let fault = FaultRow {
                            row,
                            message: cause,
                            ..FaultRow::default()
                        };
                        self.reject(&reference, "working", &[fault])?;
                    }
                }
                self.place += 1;
            }
            Done::Rejected(reject) => {
                self.ledger.rejected += 1;
                self.reject(&reject.reference, "reading", &reject.faults)?;
                self.place += 1;
            }
            Done::Stray(faults) => {
                self.ledger.stray_faults += faults.len() as u64;
                self.reject("", "reading", &faults)?;
            }
        }
        Ok(())
    }

    fn reject(&mut self, reference: &str, stage: &str, faults: &[FaultRow]) -> Result<(), Error> {
        let rows = faults.iter().map(|fault| {
            vec![
                text_cell(reference),
                stage.to_owned(),
                text_cell(&fault.file),
                match fault.row {
                    0 => String::new(),
                    row => row.to_string(),
                },
                text_cell(&fault.column),
                text_cell(&fault.value),
                text_cell(&fault.message),
                text_cell(&fault.expected),
            ]
        });
        self.rejects.add(&Table::from_rows(rows).bytes)
    }

    fn printed(&mut self, reference: &str, product: Product) -> Result<(), Error> {
        let below = statements_folder(self.place, self.ledger.households);
        if !product.statements.is_empty() && below != self.made {
            self.folder.make(&below)?;
            self.made.clone_from(&below);
        }
        let number = statement_number(self.run_id, reference);
        let mut list = Table::default();
        for statement in &product.statements {
            let file = format!("{below}/{}", statement.file_name(reference));
            self.folder.write(&file, &statement.pdf, Forced::No)?;
            list.push(&[
                number.clone(),
                reference.to_owned(),
                statement.kind.clone(),
                statement.variant.clone(),
                file,
                statement.pages.map(|p| p.to_string()).unwrap_or_default(),
                statement.pdf.len().to_string(),
                hex(&Sha256::digest(&statement.pdf)),
            ]);
            self.ledger.pieces += 1;
            self.ledger.pages += u64::from(statement.pages.unwrap_or(0));
        }
        self.statements.add(&list.bytes)?;
        self.results.add(&product.results.bytes)?;
        self.turns.add(&product.turns.bytes)?;
        self.ledger.printed += 1;
        self.ledger.result_rows += product.results.rows;
        self.ledger.turning_point_rows += product.turns.rows;
        self.ledger.kinks += product.kinks;
        self.ledger.cliffs += product.cliffs;
        Ok(())
    }

    fn finish(self) -> Result<Ledger, Error> {
        for file in [
            self.results,
            self.turns,
            self.held,
            self.rejects,
            self.statements,
        ] {
            file.finish(Forced::ToDisk)?;
        }
        Ok(self.ledger)
    }
}
