//! The parent's side of one worker process: start it, give it a household, wait no longer than the deadline, end it.
//! Threads feed and drain its pipes, so that a worker that hangs cannot hang the parent.

use super::frame::{FromWorker, ToWorker, await_greeting, read_frame, write_frame};
use crate::case::Household;
use std::io::{BufReader, BufWriter, Read};
use std::path::PathBuf;
use std::process::{Child, Command, ExitStatus, Stdio};
use std::sync::mpsc::{Receiver, RecvTimeoutError, Sender, channel};
use std::thread;
use std::time::{Duration, Instant};

/// How long a worker may take to start and to build what it needs.
const START: Duration = Duration::from_secs(120);
/// How long a worker may take to end by itself.
const END: Duration = Duration::from_secs(2);
/// How much of a worker's error output is kept.
const KEPT_WORDS: usize = 4096;

/// How to start a worker.
#[derive(Clone, Debug)]
pub struct WorkerCommand {
    /// The program.
    pub program: PathBuf,
    /// Its arguments.
    pub args: Vec<String>,
    /// What is added to its environment.
    pub env: Vec<(String, String)>,
}

/// One running worker.
pub(super) struct Worker {
    child: Child,
    orders: Option<Sender<ToWorker>>,
    answers: Receiver<FromWorker>,
    words: Receiver<String>,
    memory: Option<u64>,
    /// Households given to it so far.
    pub served: u32,
    /// The most memory it has reported, in kilobytes.
    pub peak_kb: u64,
}

/// Why there is no worker.
pub(super) enum StartError {
    /// The setup was refused: no worker will ever take it.
    Refused(String),
    /// The process did not come up.
    Broken(String),
}

/// What a worker did with a household.
pub(super) enum Answer {
    /// It answered, and can take another.
    Done(super::Outcome),
    /// It answered, or did not, and is gone: the household gets this outcome.
    Lost(super::Outcome),
}

impl Worker {
    /// Starts a worker and waits until it is ready.
    pub fn start(
        command: &WorkerCommand,
        setup: &[u8],
        memory: Option<u64>,
    ) -> Result<Worker, StartError> {
        let mut child = Command::new(&command.program)
            .args(&command.args)
            .env("RAYON_NUM_THREADS", "1")
            .envs(command.env.iter().map(|(name, value)| (name, value)))
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .map_err(|cause| StartError::Broken(cause.to_string()))?;
        let stdin = child.stdin.take().expect("it was asked for");
        let stdout = child.stdout.take().expect("it was asked for");
        let stderr = child.stderr.take().expect("it was asked for");
        let (orders, to_write) = channel::<ToWorker>();
        thread::spawn(move || {
            let mut stdin = BufWriter::new(stdin);
            for order in to_write {
                if write_frame(&mut stdin, &order).is_err() {
                    break;
                }
            }
        });
        let (answered, answers) = channel();
        thread::spawn(move || {
            let mut stdout = BufReader::with_capacity(64 << 10, stdout);
            if await_greeting(&mut stdout).is_err() {
                return;
            }
            while let Ok(Some(answer)) = read_frame(&mut stdout) {
                if answered.send(answer).is_err() {
                    break;
                }
            }
        });
        let (said, words) = channel();
        thread::spawn(move || {
            let _ = said.send(last_words(stderr));
        });
        let mut worker = Worker {
            child,
            orders: Some(orders),
            answers,
            words,
            memory,
            served: 0,
            peak_kb: 0,
        };
        worker.order(ToWorker::Setup {
            memory,
            payload: setup.to_vec(),
        });
        match worker.answers.recv_timeout(START) {
            Ok(FromWorker::Ready) => Ok(worker),
            Ok(FromWorker::Refused(cause)) => Err(StartError::Refused(cause)),
            Ok(FromWorker::Done { .. }) => {
                Err(StartError::Broken("it answered out of turn".into()))
            }
            Err(RecvTimeoutError::Timeout) => Err(StartError::Broken(format!(
                "it was not ready after {} seconds",
                START.as_secs()
            ))),
            Err(RecvTimeoutError::Disconnected) => Err(StartError::Broken(worker.cause_of_death())),
        }
    }

    fn order(&mut self, order: ToWorker) {
        if let Some(orders) = &self.orders {
            // A failure shows itself as a missing answer.
            let _ = orders.send(order);
        }
    }

    /// Has one household worked out. A worker that is late is killed.
    pub fn assess(&mut self, household: Box<Household>, deadline: Duration) -> Answer {
        self.served += 1;
        self.order(ToWorker::Assess(household));
        match self.answers.recv_timeout(deadline) {
            Ok(FromWorker::Done {
                outcome,
                peak_kb,
                last,
            }) => {
                self.peak_kb = self.peak_kb.max(peak_kb);
                if last {
                    Answer::Lost(outcome)
                } else {
                    Answer::Done(outcome)
                }
            }
            Ok(FromWorker::Ready | FromWorker::Refused(_)) => {
                Answer::Lost(failed("the worker answered out of turn".into()))
            }
            Err(RecvTimeoutError::Timeout) => {
                self.kill();
                Answer::Lost(failed(format!(
                    "not done within the deadline of {} seconds",
                    seconds(deadline)
                )))
            }
            Err(RecvTimeoutError::Disconnected) => Answer::Lost(failed(self.cause_of_death())),
        }
    }

    /// Lets the worker end by itself, and ends it where it does not.
    pub fn retire(mut self) {
        self.orders = None;
        let from = Instant::now();
        while from.elapsed() < END {
            if !matches!(self.child.try_wait(), Ok(None)) {
                return;
            }
            thread::sleep(Duration::from_millis(2));
        }
    }

    fn kill(&mut self) {
        let _ = self.child.kill();
        let _ = self.child.wait();
    }

    /// Why the process ended, in words that carry nothing of a household.
    fn cause_of_death(&mut self) -> String {
        let from = Instant::now();
        let status = loop {
            match self.child.try_wait() {
                Ok(Some(status)) => break Some(status),
                Ok(None) if from.elapsed() < END => thread::sleep(Duration::from_millis(2)),
                Ok(None) | Err(_) => break None,
            }
        };
        let Some(status) = status else {
            self.kill();
            return "the worker stopped answering".into();
        };
        let words = self.words.recv_timeout(END).unwrap_or_default();
        if words.contains("memory allocation of") {
            match self.memory {
                Some(bytes) => format!("more memory needed than the limit of {} MB", bytes >> 20),
                None => "more memory needed than there is".into(),
            }
        } else if words.contains("overflowed its stack") {
            "the worker overflowed its stack".into()
        } else {
            format!("the worker ended ({})", ending(status))
        }
    }
}

impl Drop for Worker {
    fn drop(&mut self) {
        self.kill();
    }
}

fn failed(cause: String) -> super::Outcome {
    super::Outcome::Failed { cause }
}

fn seconds(time: Duration) -> String {
    let thousandths = time.as_millis();
    match thousandths % 1000 {
        0 => (thousandths / 1000).to_string(),
        rest => format!("{}.{rest:03}", thousandths / 1000)
            .trim_end_matches('0')
            .to_owned(),
    }
}

/// The end of what a worker wrote to its error output; only looked through for known words, never shown.
fn last_words(mut from: impl Read) -> String {
    let mut kept: Vec<u8> = Vec::new();
    let mut piece = [0u8; 1024];
    while let Ok(read @ 1..) = from.read(&mut piece) {
        kept.extend_from_slice(&piece[..read]);
        if kept.len() > 2 * KEPT_WORDS {
            kept.drain(..kept.len() - KEPT_WORDS);
        }
    }
    String::from_utf8_lossy(&kept).into_owned()
}

#[cfg(unix)]
fn ending(status: ExitStatus) -> String {
    use std::os::unix::process::ExitStatusExt;
    match (status.code(), status.signal()) {
        (Some(code), _) => format!("status {code}"),
        (None, Some(signal)) => format!("signal {signal}"),
        (None, None) => "no status".into(),
    }
}

#[cfg(not(unix))]
fn ending(status: ExitStatus) -> String {
    match status.code() {
        Some(code) => format!("status {code}"),
        None => "no status".into(),
    }
}
