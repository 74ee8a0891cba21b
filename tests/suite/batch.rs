//! The batch with pretend households: the pool runs this test binary as its worker, told by the environment.
//! What a pretend household does is in its reference: `held-…`, `slow-…`, `panic-…`, `abort-…`, `hungry-…`.

use hourworth::batch::{
    Assessor, Entry, Error, Existing, FaultRow, Inputs, Outcome, PoolPlan, Product, Progress,
    Record, Reject, RunFolder, RunPlan, StatementFile, StopFlag, Summary, Table, WorkerCommand,
    pack_folder, run, serve,
};
use hourworth::case::{Delivery, Household};
use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

const ROLE: &str = "HOURWORTH_PRETEND";

struct Pretend {
    pdf: Vec<u8>,
    work: Duration,
}

impl Assessor for Pretend {
    fn assess(&mut self, household: &Household) -> Outcome {
        let reference = &household.reference;
        match reference.split('-').next().unwrap_or_default() {
            "held" => {
                return Outcome::Held {
                    reasons: vec!["=a student".into(), "second reason".into()],
                };
            }
            "slow" => std::thread::sleep(Duration::from_secs(60)),
            "panic" => panic!("the name of a client"),
            "abort" => std::process::abort(),
            "hungry" => {
                let much = vec![1u8; 3 << 30];
                assert!(much.iter().step_by(4096).all(|byte| *byte == 1));
            }
            _ => {}
        }
        let until = Instant::now() + self.work;
        while Instant::now() < until {
            std::hint::spin_loop();
        }
        let mut results = Table::default();
        results.push(&[reference.clone(), "1234.50".into()]);
        let mut pdf = self.pdf.clone();
        pdf.extend(reference.bytes());
        Outcome::Printed(Box::new(Product {
            results,
            statements: vec![StatementFile {
                kind: "client".into(),
                variant: String::new(),
                pages: Some(2),
                pdf,
            }],
            kinks: 3,
            cliffs: 1,
            ..Product::default()
        }))
    }
}

/// In a worker process: serves, and ends the process. Otherwise: one household goes through such a process.
#[test]
#[expect(
    clippy::disallowed_methods,
    reason = "the environment tells the worker's process from the test's"
)]
fn pretend_worker() {
    if let Ok(role) = std::env::var(ROLE) {
        let code = serve(|payload: &[u8]| {
            let text = String::from_utf8(payload.to_vec()).map_err(|e| e.to_string())?;
            let Some((size, micros)) = text.split_once(' ') else {
                return Err(format!("`{text}` is no setup"));
            };
            if role == "refuses" {
                return Err("this pack does not cover the date".into());
            }
            Ok(Pretend {
                pdf: vec![b'%'; size.parse().map_err(|_| "no size")?],
                work: Duration::from_micros(micros.parse().map_err(|_| "no time")?),
            })
        });
        // No more of the test harness: its words would follow the frames.
        std::process::exit(i32::from(code != std::process::ExitCode::SUCCESS));
    }
    let outcome = Job::of(&["a"]).run().unwrap();
    assert_eq!(outcome.summary.ledger.printed, 1);
}

fn household(reference: &str, row: u64) -> Household {
    Household {
        reference: reference.into(),
        target: None,
        delivery: Delivery::default(),
        instances: vec![],
        job_roles: vec![],
        offers: vec![],
        row,
    }
}

struct Quiet;
impl Progress for Quiet {
    fn advance(&mut self, _written: u64, _households: u64) {}
}

struct Job {
    entries: Vec<Entry>,
    households: u64,
    workers: usize,
    deadline: Duration,
    memory: Option<u64>,
    replace_after: u32,
    setup: String,
    role: &'static str,
    stop: StopFlag,
}

struct Ended {
    summary: Summary,
    folder: RunFolder,
    _outer: tempfile::TempDir,
}

impl Ended {
    fn text(&self, name: &str) -> String {
        fs::read_to_string(self.folder.path().join(name)).unwrap()
    }
}

impl Job {
    fn of(references: &[&str]) -> Job {
        let entries = (2u64..)
            .zip(references)
            .map(|(row, reference)| Entry::Household(Box::new(household(reference, row))));
        Job {
            entries: entries.collect(),
            households: references.len() as u64,
            workers: 2,
            deadline: Duration::from_secs(20),
            memory: None,
            replace_after: 200,
            setup: "64 0".into(),
            role: "works",
            stop: StopFlag::default(),
        }
    }

    fn pool(&self) -> PoolPlan {
        PoolPlan {
            command: WorkerCommand {
                program: std::env::current_exe().unwrap(),
                args: [
                    "--exact",
                    "suite::batch::pretend_worker",
                    "--nocapture",
                    "--test-threads=1",
                ]
                .map(String::from)
                .to_vec(),
                env: vec![(ROLE.into(), self.role.into())],
            },
            setup: self.setup.clone().into_bytes(),
            workers: self.workers,
            deadline: self.deadline,
            memory: self.memory,
            replace_after: self.replace_after,
        }
    }

    fn run(&self) -> Result<Ended, Error> {
        let outer = tempfile::tempdir().unwrap();
        self.run_in(&outer.path().join("run"))
            .map(|(summary, folder)| Ended {
                summary,
                folder,
                _outer: outer,
            })
    }

    fn run_in(&self, path: &Path) -> Result<(Summary, RunFolder), Error> {
        let folder = RunFolder::take(path, Existing::Refuse)?;
        let inputs = Inputs {
            list: vec![("households.csv".into(), "00".into())],
            ..Inputs::default()
        };
        let plan = RunPlan {
            record: Record {
                run_id: &inputs.run_id("2026-04-06"),
                issued: "2026-04-06",
                inputs: &inputs,
            },
            pool: self.pool(),
            households: self.households,
            items: vec!["income_tax".into()],
        };
        let entries = self.entries.clone().into_iter().map(Ok);
        let summary = run(&folder, &plan, entries, &self.stop, &mut Quiet)?;
        Ok((summary, folder))
    }
}

/// All files of a folder with their bytes, beside those that may differ from run to run.
fn contents(folder: &Path) -> BTreeMap<PathBuf, Vec<u8>> {
    let mut all = BTreeMap::new();
    let mut folders = vec![folder.to_owned()];
    while let Some(next) = folders.pop() {
        for entry in fs::read_dir(next).unwrap() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                folders.push(path);
            } else if !path.ends_with("timings.json") && !path.ends_with(".hourworth-lock") {
                let name = path.strip_prefix(folder).unwrap().to_owned();
                all.insert(name, fs::read(path).unwrap());
            }
        }
    }
    all
}

#[test]
fn order_and_bytes_do_not_hang_on_the_number_of_workers() {
    let references: Vec<String> = (0..60)
        .map(|n| match n % 7 {
            3 => format!("held-{n:03}"),
            _ => format!("h-{n:03}"),
        })
        .collect();
    let references: Vec<&str> = references.iter().map(String::as_str).collect();
    let mut runs = vec![];
    for workers in [1, 2, 5] {
        let ended = Job {
            workers,
            replace_after: 7,
            setup: "2000 500".into(),
            ..Job::of(&references)
        }
        .run()
        .unwrap();
        assert!(
            ended.summary.pool.started >= 60 / 7,
            "{:?}",
            ended.summary.pool
        );
        assert_eq!(ended.summary.pool.lost, 0);
        runs.push(contents(ended.folder.path()));
    }
    assert_eq!(runs[0].len(), 60 - 9 + 6);
    assert!(runs[0] == runs[1] && runs[1] == runs[2]);
    let results = String::from_utf8(runs[0][Path::new("results.csv")].clone()).unwrap();
    let mut printed = results
        .lines()
        .skip(1)
        .map(|line| line.split(',').next().unwrap());
    assert!(printed.clone().is_sorted() && printed.all(|reference| reference.starts_with("h-")));
}

#[test]
fn one_household_of_each_kind_balances() {
    let mut job = Job::of(&["a", "held-b", "c"]);
    job.entries.insert(
        2,
        Entry::Rejected(Reject {
            reference: "bad ref".into(),
            faults: vec![FaultRow {
                file: "members.csv".into(),
                row: 7,
                column: "birth".into(),
                value: "+31.02.2020".into(),
                message: "no such day".into(),
                expected: "a day".into(),
            }],
        }),
    );
    job.entries.push(Entry::Stray(vec![FaultRow {
        file: "jobs.csv".into(),
        row: 9,
        message: "no such household".into(),
        ..FaultRow::default()
    }]));
    job.households = 4;
    let ended = job.run().unwrap();
    let ledger = ended.summary.ledger;
    assert_eq!((ledger.printed, ledger.held, ledger.rejected), (2, 1, 1));
    assert_eq!((ledger.failed, ledger.stray_faults), (0, 1));
    assert_eq!(
        (ledger.pieces, ledger.pages, ledger.kinks, ledger.cliffs),
        (2, 4, 6, 2)
    );
    insta::assert_snapshot!(ended.text("held.csv"), @r"
    household,reason
    held-b,'=a student
    held-b,second reason
    ");
    insta::assert_snapshot!(ended.text("rejects.csv"), @r"
    household,stage,file,row,column,value,fault,expected
    bad ref,reading,members.csv,7,birth,'+31.02.2020,no such day,a day
    ,reading,jobs.csv,9,,,no such household,
    ");
    let id = ended.text("statements.csv").lines().nth(1).unwrap()[..17].to_owned();
    // The hash by another tool: 64 percent signs and the letter a, through `sha256sum`.
    insta::assert_snapshot!(ended.text("statements.csv").replace(&id, "<run>"), @r"
    number,household,kind,variant,file,pages,bytes,sha256
    <run>-a,a,client,,statements/a.client.pdf,2,65,24b4f6b55516bf2b4d5741e9a31465ccfcb41863e8f316c5c444645b596dfe1b
    <run>-c,c,client,,statements/c.client.pdf,2,65,0daaf80a6cf064492e41841516f42cac77dd56c88211ce71bbfc8b6fc5a42f25
    ");
    let record = ended.text("run.json").replace(&id, "<run>");
    insta::assert_snapshot!(record.replace(env!("CARGO_PKG_VERSION"), "<version>"), @r#"
    {
      "program": "hourworth",
      "version": "<version>",
      "run": "<run>",
      "issued": "2026-04-06",
      "state": "done",
      "balance": {
        "says": "households = printed + held + rejected",
        "holds": true
      },
      "counts": {
        "households": 4,
        "printed": 2,
        "held": 1,
        "rejected": 1,
        "failed": 0,
        "stray_faults": 1,
        "pieces": 2,
        "pages": 4,
        "result_rows": 2,
        "turning_point_rows": 0,
        "kinks": 6,
        "cliffs": 2
      },
      "options": {},
      "list": {
        "households.csv": "00"
      },
      "rules_title": "",
      "rules": {},
      "local": {},
      "templates": {},
      "office": {}
    }
    "#);
}

#[test]
fn a_run_that_does_not_balance_is_refused() {
    let mut job = Job::of(&["a", "b"]);
    job.households = 3;
    let outer = tempfile::tempdir().unwrap();
    let path = outer.path().join("run");
    let error = job.run_in(&path).unwrap_err();
    assert_eq!(
        error.to_string(),
        "the run does not balance: 3 households in the list, but 2 printed, 0 held and 0 rejected"
    );
    let record = fs::read_to_string(path.join("run.json")).unwrap();
    assert!(
        record.contains("\"state\": \"does not balance\""),
        "{record}"
    );
}

#[test]
fn a_stuck_worker_costs_one_household() {
    let job = Job {
        deadline: Duration::from_millis(700),
        ..Job::of(&["a", "slow-b", "c", "d", "e"])
    };
    let begun = Instant::now();
    let ended = job.run().unwrap();
    assert!(begun.elapsed() < Duration::from_secs(30));
    let ledger = ended.summary.ledger;
    assert_eq!((ledger.printed, ledger.rejected, ledger.failed), (4, 1, 1));
    assert_eq!(ended.summary.pool.lost, 1);
    let rejects = ended.text("rejects.csv");
    assert!(
        rejects.contains("slow-b,working,,3,,,not done within the deadline of 0.7 seconds,"),
        "{rejects}"
    );
}

#[test]
fn a_dying_worker_costs_one_household_and_says_no_name() {
    let ended = Job::of(&["a", "abort-b", "c", "panic-d", "e"])
        .run()
        .unwrap();
    assert_eq!(ended.summary.ledger.printed, 3);
    assert_eq!(ended.summary.pool.lost, 2);
    let rejects = ended.text("rejects.csv");
    assert!(
        rejects.contains("panic-d,working,,5,,,a fault of this program at "),
        "{rejects}"
    );
    assert!(rejects.contains("tests/suite/batch.rs:"), "{rejects}");
    assert!(!rejects.contains("name of a client"), "{rejects}");
    if cfg!(unix) {
        assert!(
            rejects.contains("abort-b,working,,3,,,the worker ended (signal 6),"),
            "{rejects}"
        );
    }
}

#[cfg(target_os = "linux")]
#[test]
fn a_hungry_household_meets_the_memory_limit() {
    let job = Job {
        memory: Some(1 << 30),
        ..Job::of(&["a", "hungry-b", "c"])
    };
    let ended = job.run().unwrap();
    assert_eq!(ended.summary.ledger.printed, 2);
    let rejects = ended.text("rejects.csv");
    assert!(
        rejects.contains("hungry-b,working,,3,,,more memory needed than the limit of 1024 MB,"),
        "{rejects}"
    );
}

#[test]
fn a_refused_setup_ends_the_run_and_leaves_no_half_file() {
    let job = Job {
        role: "refuses",
        ..Job::of(&["a", "b"])
    };
    let outer = tempfile::tempdir().unwrap();
    let path = outer.path().join("run");
    let error = job.run_in(&path).unwrap_err();
    assert_eq!(
        error.to_string(),
        "a worker could not start: this pack does not cover the date"
    );
    let files: Vec<_> = contents(&path).into_keys().collect();
    assert_eq!(files, [PathBuf::from("run.json")]);
    let record = fs::read_to_string(path.join("run.json")).unwrap();
    assert!(record.contains("\"state\": \"running\""), "{record}");
}

#[test]
fn a_program_that_is_no_worker_is_refused() {
    let job = Job::of(&["a"]);
    let mut plan = job.pool();
    plan.command.args = vec!["--list".into()];
    let entries = job.entries.clone().into_iter().map(Ok);
    let error =
        hourworth::batch::drive(&plan, entries, &StopFlag::default(), |_| Ok(())).unwrap_err();
    assert_eq!(
        error.to_string(),
        "a worker could not start: the worker ended (status 0)"
    );
}

#[test]
fn a_stopped_run_is_interrupted_between_households() {
    let references: Vec<String> = (0..200).map(|n| format!("h-{n:03}")).collect();
    let references: Vec<&str> = references.iter().map(String::as_str).collect();
    let job = Job::of(&references);
    let stop = StopFlag::default();
    let mut seen = 0u64;
    let entries = job.entries.clone().into_iter().map(Ok);
    let error = hourworth::batch::drive(&job.pool(), entries, &stop, |_| {
        seen += 1;
        if seen == 5 {
            stop.stop();
        }
        Ok(())
    })
    .unwrap_err();
    assert!(
        matches!(error, Error::Interrupted(done) if done == seen),
        "{error}"
    );
    assert!((5..40).contains(&seen), "{seen}");
}

#[test]
fn an_error_of_the_writer_ends_the_run() {
    let references: Vec<String> = (0..100).map(|n| format!("h-{n:03}")).collect();
    let references: Vec<&str> = references.iter().map(String::as_str).collect();
    let job = Job::of(&references);
    let entries = job.entries.clone().into_iter().map(Ok);
    let mut seen = 0;
    let error = hourworth::batch::drive(&job.pool(), entries, &StopFlag::default(), |_| {
        seen += 1;
        if seen == 3 {
            return Err(Error::Worker("the disk is full".into()));
        }
        Ok(())
    })
    .unwrap_err();
    assert!(error.to_string().contains("the disk is full"));
    assert_eq!(seen, 3);
}

#[test]
fn the_zip_has_all_outputs_and_the_same_bytes_twice() {
    let mut zips = vec![];
    for workers in [1, 3] {
        let ended = Job {
            workers,
            ..Job::of(&["a", "held-b", "c"])
        }
        .run()
        .unwrap();
        let path = ended.folder.path().parent().unwrap().join("all.zip");
        pack_folder(&ended.folder, &path).unwrap();
        let bytes = fs::read(&path).unwrap();
        let mut zip = zip::ZipArchive::new(std::io::Cursor::new(&bytes)).unwrap();
        let names: Vec<String> = zip
            .file_names()
            .map(|name| name.unwrap().into_owned())
            .collect();
        assert_eq!(
            names,
            [
                "run.json",
                "results.csv",
                "turning_points.csv",
                "held.csv",
                "rejects.csv",
                "statements.csv",
                "statements/a.client.pdf",
                "statements/c.client.pdf",
            ]
        );
        let mut packed = vec![];
        std::io::Read::read_to_end(
            &mut zip.by_name("statements/c.client.pdf").unwrap(),
            &mut packed,
        )
        .unwrap();
        assert!(packed.ends_with(b"%c"));
        zips.push(bytes);
    }
    assert!(zips[0] == zips[1]);
}

#[cfg(unix)]
#[test]
fn everything_is_private() {
    use std::os::unix::fs::PermissionsExt;
    let ended = Job::of(&["a", "held-b"]).run().unwrap();
    let mut paths = vec![ended.folder.path().to_owned()];
    paths.push(ended.folder.path().join("statements"));
    paths.extend(
        contents(ended.folder.path())
            .into_keys()
            .map(|name| ended.folder.path().join(name)),
    );
    paths.push(ended.folder.path().join("timings.json"));
    for path in paths {
        let mode = fs::metadata(&path).unwrap().permissions().mode() & 0o777;
        let wanted = if path.is_dir() { 0o700 } else { 0o600 };
        assert_eq!(mode, wanted, "{}", path.display());
    }
}
