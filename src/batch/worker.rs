//! The worker's side: one process, one household at a time, told over standard input, answering over standard
//! output. Limits its own memory, ends at the end of its input, and never prints a household's data.

use super::frame::{FromWorker, GREETING, ToWorker, read_frame, write_frame};
use super::{Assessor, Outcome};
use std::io::{self, Write};
use std::panic::{self, AssertUnwindSafe};
use std::process::ExitCode;
use std::sync::Mutex;

/// Where the last panic happened: file and line only, because a panic's words may hold a household's data.
static PANICKED_AT: Mutex<String> = Mutex::new(String::new());

/// Serves households until the input ends. `build` makes the assessor from the payload of the setup.
/// An error of `build` is sent to the parent, which ends the run with it.
pub fn serve<A: Assessor>(build: impl FnOnce(&[u8]) -> Result<A, String>) -> ExitCode {
    panic::set_hook(Box::new(|info| {
        if let (Some(place), Ok(mut at)) = (info.location(), PANICKED_AT.lock()) {
            *at = format!("{}:{}", place.file(), place.line());
        }
    }));
    match talk(build) {
        Ok(()) => ExitCode::SUCCESS,
        // The parent has gone or talks nonsense: nobody is left to tell.
        Err(_) => ExitCode::from(2),
    }
}

fn talk<A: Assessor>(build: impl FnOnce(&[u8]) -> Result<A, String>) -> io::Result<()> {
    let mut from = io::stdin().lock();
    let mut to = io::BufWriter::new(io::stdout().lock());
    to.write_all(GREETING)?;
    to.flush()?;
    let Some(ToWorker::Setup { memory, payload }) = read_frame(&mut from)? else {
        return Ok(());
    };
    if let Some(bytes) = memory {
        limit_memory(bytes)?;
    }
    let mut assessor = match guarded(|| build(&payload)) {
        Ok(Ok(assessor)) => assessor,
        Ok(Err(cause)) | Err(cause) => return write_frame(&mut to, &FromWorker::Refused(cause)),
    };
    drop(payload);
    write_frame(&mut to, &FromWorker::Ready)?;
    while let Some(message) = read_frame(&mut from)? {
        let ToWorker::Assess(household) = message else {
            return Err(io::Error::other("a second setup"));
        };
        let (outcome, last) = match guarded(|| assessor.assess(&household)) {
            Ok(outcome) => (outcome, false),
            Err(cause) => (Outcome::Failed { cause }, true),
        };
        let answer = FromWorker::Done {
            outcome,
            peak_kb: peak_memory_kb(),
            last,
        };
        write_frame(&mut to, &answer)?;
        if last {
            break;
        }
    }
    Ok(())
}

/// Runs a piece of work; a panic becomes a cause that names the place in this program.
fn guarded<T>(work: impl FnOnce() -> T) -> Result<T, String> {
    panic::catch_unwind(AssertUnwindSafe(work)).map_err(|_| {
        let at = PANICKED_AT.lock().map(|at| at.clone()).unwrap_or_default();
        format!("a fault of this program at {at}")
    })
}

#[cfg(unix)]
fn limit_memory(bytes: u64) -> io::Result<()> {
    let (_, hard) = rlimit::getrlimit(rlimit::Resource::AS)?;
    rlimit::setrlimit(rlimit::Resource::AS, bytes.min(hard), hard)
}

#[cfg(not(unix))]
fn limit_memory(_bytes: u64) -> io::Result<()> {
    Ok(())
}

/// The most memory that this process has held, in kilobytes; 0 where the system does not say.
pub(super) fn peak_memory_kb() -> u64 {
    if cfg!(not(target_os = "linux")) {
        return 0;
    }
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    status
        .lines()
        .find_map(|line| line.strip_prefix("VmHWM:"))
        .and_then(|rest| rest.split_whitespace().next()?.parse().ok())
        .unwrap_or(0)
}
