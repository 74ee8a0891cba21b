//! The pool: hands the entries of a list to worker processes and reports them back in list order.
//!
//! Memory stays flat: an entry is read only when it is less than a window ahead of the last one reported, so a slow
//! household can hold back no more than a window of finished ones.

use super::child::{Answer, StartError, Worker, WorkerCommand};
use super::{Entry, Error, FaultRow, Outcome, Reject};
use crate::case::Household;
use std::collections::BTreeMap;
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::mpsc::{Receiver, Sender, SyncSender, channel, sync_channel};
use std::sync::{Arc, Condvar, Mutex};
use std::thread;
use std::time::Duration;

/// How often in a row a worker may fail to start before the run ends.
const STARTS: u32 = 3;

/// How the pool works.
#[derive(Clone, Debug)]
pub struct PoolPlan {
    /// How to start a worker.
    pub command: WorkerCommand,
    /// What a worker builds its assessor from.
    pub setup: Vec<u8>,
    /// How many workers; at least one is used.
    pub workers: usize,
    /// The longest that one household may take.
    pub deadline: Duration,
    /// Most address space in bytes that a worker may use; kept on Unix systems only.
    pub memory: Option<u64>,
    /// After how many households a worker is replaced.
    pub replace_after: u32,
}

/// Set to stop a run between two households.
#[derive(Clone, Debug, Default)]
pub struct StopFlag(Arc<AtomicBool>);

impl StopFlag {
    /// Asks the run to stop.
    pub fn stop(&self) {
        self.0.store(true, Ordering::SeqCst);
    }

    /// Whether somebody asked.
    pub fn stopped(&self) -> bool {
        self.0.load(Ordering::SeqCst)
    }
}

/// One finished entry.
#[derive(Debug)]
pub enum Done {
    /// A household that was read, and what became of it.
    Worked {
        /// Its reference.
        reference: String,
        /// Its row in the list.
        row: u64,
        /// What became of it.
        outcome: Outcome,
    },
    /// A household that could not be read.
    Rejected(Reject),
    /// Faults that belong to no household.
    Stray(Vec<FaultRow>),
}

/// What the pool did.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct PoolFigures {
    /// Worker processes started.
    pub started: u64,
    /// Workers lost to a deadline, a limit or a fault.
    pub lost: u64,
    /// The most memory that any worker held, in kilobytes; 0 where the system does not say.
    pub peak_kb: u64,
}

struct Job {
    place: u64,
    household: Box<Household>,
}

enum Report {
    Done(u64, Done),
    Failed(Error),
}

/// Lets the reader run at most a window ahead of the writer.
struct Gate {
    written: Mutex<u64>,
    moved: Condvar,
    window: u64,
    closed: AtomicBool,
}

impl Gate {
    /// Waits until this place may be read; false when the run is over.
    fn pass(&self, place: u64) -> bool {
        let mut written = self.written.lock().expect("nobody panics while holding it");
        while place >= *written + self.window && !self.closed.load(Ordering::SeqCst) {
            written = self
                .moved
                .wait(written)
                .expect("nobody panics while holding it");
        }
        !self.closed.load(Ordering::SeqCst)
    }

    fn advance(&self, to: u64) {
        *self.written.lock().expect("nobody panics while holding it") = to;
        self.moved.notify_all();
    }

    fn close(&self) {
        // Under the lock, so that a reader between its test and its wait cannot miss it.
        let _written = self.written.lock().expect("nobody panics while holding it");
        self.closed.store(true, Ordering::SeqCst);
        self.moved.notify_all();
    }
}

/// Works all entries out and calls `each` for every one of them in list order, on the calling thread.
///
/// # Errors
/// The first error of the list, of a worker's start or of `each`; [`Error::Interrupted`] where `stop` was set.
pub fn drive<I>(
    plan: &PoolPlan,
    entries: I,
    stop: &StopFlag,
    mut each: impl FnMut(Done) -> Result<(), Error>,
) -> Result<PoolFigures, Error>
where
    I: Iterator<Item = Result<Entry, Error>> + Send,
{
    let workers = plan.workers.max(1);
    let gate = Gate {
        written: Mutex::new(0),
        moved: Condvar::new(),
        window: 4 * workers as u64 + 8,
        closed: AtomicBool::new(false),
    };
    let figures = Mutex::new(PoolFigures::default());
    let (jobs, queue) = sync_channel::<Job>(workers);
    let queue = Mutex::new(queue);
    let (reports, inbox) = channel::<Report>();
    let mut failure = None;
    let mut next = 0u64;
    thread::scope(|scope| {
        let feeding = reports.clone();
        let gate = &gate;
        scope.spawn(move || feed(entries, gate, stop, &jobs, &feeding));
        for _ in 0..workers {
            let reports = reports.clone();
            let (queue, figures) = (&queue, &figures);
            scope.spawn(move || work(plan, queue, &reports, figures));
        }
        drop(reports);
        let mut waiting = BTreeMap::new();
        for report in inbox {
            match report {
                Report::Failed(error) => {
                    failure.get_or_insert(error);
                    gate.close();
                }
                Report::Done(place, done) => {
                    waiting.insert(place, done);
                }
            }
            while failure.is_none()
                && let Some(done) = waiting.remove(&next)
            {
                next += 1;
                if let Err(error) = each(done) {
                    failure = Some(error);
                    gate.close();
                }
                gate.advance(next);
            }
        }
    });
    match failure {
        Some(error) => Err(error),
        None if stop.stopped() => Err(Error::Interrupted(next)),
        None => Ok(figures
            .into_inner()
            .expect("nobody panics while holding it")),
    }
}

/// Reads the list and hands its households out.
fn feed<I>(
    entries: I,
    gate: &Gate,
    stop: &StopFlag,
    jobs: &SyncSender<Job>,
    reports: &Sender<Report>,
) where
    I: Iterator<Item = Result<Entry, Error>>,
{
    let mut entries = entries;
    for place in 0.. {
        if !gate.pass(place) || stop.stopped() {
            return;
        }
        let sent = match entries.next() {
            None => return,
            Some(Ok(Entry::Household(household))) => jobs.send(Job { place, household }).is_ok(),
            Some(Ok(Entry::Rejected(reject))) => reports
                .send(Report::Done(place, Done::Rejected(reject)))
                .is_ok(),
            Some(Ok(Entry::Stray(faults))) => reports
                .send(Report::Done(place, Done::Stray(faults)))
                .is_ok(),
            Some(Err(error)) => {
                let _ = reports.send(Report::Failed(error));
                return;
            }
        };
        if !sent {
            return;
        }
    }
}

/// Keeps one worker process busy until there are no more households.
fn work(
    plan: &PoolPlan,
    queue: &Mutex<Receiver<Job>>,
    reports: &Sender<Report>,
    figures: &Mutex<PoolFigures>,
) {
    let mut current: Option<Worker> = None;
    loop {
        let job = queue.lock().expect("nobody panics while holding it").recv();
        let Ok(Job { place, household }) = job else {
            break;
        };
        let mut worker = match current.take() {
            Some(worker) => worker,
            None => match start(plan, figures) {
                Ok(worker) => worker,
                Err(error) => {
                    let _ = reports.send(Report::Failed(error));
                    // Keeps taking households, so that the reader is never stuck, but works none out.
                    while queue
                        .lock()
                        .expect("nobody panics while holding it")
                        .recv()
                        .is_ok()
                    {}
                    break;
                }
            },
        };
        let (reference, row) = (household.reference.clone(), household.row);
        let outcome = match worker.assess(household, plan.deadline) {
            Answer::Done(outcome) => {
                if worker.served < plan.replace_after.max(1) {
                    current = Some(worker);
                } else {
                    end(worker, figures, End::Retired);
                }
                outcome
            }
            Answer::Lost(outcome) => {
                end(worker, figures, End::Lost);
                outcome
            }
        };
        let done = Done::Worked {
            reference,
            row,
            outcome,
        };
        if reports.send(Report::Done(place, done)).is_err() {
            break;
        }
    }
    if let Some(worker) = current {
        end(worker, figures, End::Retired);
    }
}

fn start(plan: &PoolPlan, figures: &Mutex<PoolFigures>) -> Result<Worker, Error> {
    let mut last = String::new();
    for _ in 0..STARTS {
        match Worker::start(&plan.command, &plan.setup, plan.memory) {
            Ok(worker) => {
                let mut figures = figures.lock().expect("nobody panics while holding it");
                figures.started += 1;
                return Ok(worker);
            }
            Err(StartError::Refused(cause)) => return Err(Error::Worker(cause)),
            Err(StartError::Broken(cause)) => last = cause,
        }
    }
    Err(Error::Worker(last))
}

/// How a worker's time ends.
enum End {
    /// It has served its time.
    Retired,
    /// It was killed, died or is in disorder.
    Lost,
}

fn end(worker: Worker, figures: &Mutex<PoolFigures>, how: End) {
    {
        let mut figures = figures.lock().expect("nobody panics while holding it");
        figures.peak_kb = figures.peak_kb.max(worker.peak_kb);
        match how {
            End::Retired => {}
            End::Lost => figures.lost += 1,
        }
    }
    worker.retire();
}
