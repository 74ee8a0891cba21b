//! Many households: workers that work them out, and the run's folder with everything that comes of it.
//!
//! In: a plan and the entries of a case list in order. Out: statements, tables and the record of the
//! run, in list order whatever the number of workers. Refuses to call a run done that does not balance.
//! May import every folder before it.

mod archive;
mod aside;
mod books;
mod child;
mod error;
mod evidence;
#[cfg(test)]
pub(crate) mod fixture;
mod folder;
mod frame;
mod ledger;
mod outcome;
mod pool;
mod prepare;
mod proof;
mod record;
mod run;
mod tables;
mod work;
mod worker;

pub use archive::pack_folder;
pub use aside::Aside;
pub use books::Books;
pub use child::WorkerCommand;
pub use error::Error;
pub use evidence::{pack_hash, rules_record, workings};
pub use folder::{Existing, RunFolder};
pub use ledger::Ledger;
pub use outcome::{
    Assessor, Entry, FaultRow, Outcome, Product, Reject, StatementFile, statement_number,
};
pub use pool::{Done, PoolFigures, PoolPlan, StopFlag, drive};
pub use prepare::{Places, Prepared, built_in_templates, checked, findings, prepare};
pub use proof::{Proof, prove};
pub use record::{Inputs, Record};
pub use run::{Progress, RunPlan, Summary, run};
pub(crate) use tables::wage;
pub use tables::{GridRows, Table, results, results_header, turning_points, turning_points_header};
pub use work::{Orders, Press, Work, item_columns, setup, work};
pub use worker::serve;
