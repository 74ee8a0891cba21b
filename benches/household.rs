//! Where the time of one household goes, stage by stage, over the demo list. Prints times and ratios of one run; asserts that the
//! stages agree; times nothing against a limit.

#![expect(
    clippy::float_arithmetic,
    reason = "times are floats; sums of money never are"
)]

use hourworth::batch::{Books, Places, prepare};
use hourworth::case::Household;
use hourworth::engine::{JobChoice, Machine, Setting};
use hourworth::measures::Verdict;
use hourworth::num::{Fraction, Hours};
use std::hint::black_box;
use std::path::Path;
use std::time::{Duration, Instant};

fn timed<T>(rounds: u32, mut call: impl FnMut() -> T) -> Duration {
    let start = Instant::now();
    for _ in 0..rounds {
        black_box(call());
    }
    start.elapsed() / rounds
}

fn main() {
    let list = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo_cases/harrowmere");
    let prepared = prepare(&list, &Places::default()).expect("the demo list is sound");
    let (_, rows) = prepared.survey(None).expect("the demo list can be read");
    let (_, readings) = prepared
        .list
        .read(&prepared.schema, &prepared.options, &rows)
        .expect("the demo list can be read");
    let households: Vec<Household> = readings
        .filter_map(|r| r.ok().and_then(Result::ok))
        .collect();
    assert!(households.len() > 10, "the demo list has households");
    let n = u32::try_from(households.len()).expect("few households");
    // As tests run this once with `--test`; by hand it runs longer.
    let rounds = if std::env::args().any(|a| a == "--test") {
        1
    } else {
        50
    };

    let program = |setting: &Setting<'_>| {
        prepared
            .pack
            .program(&prepared.terms.dates, &[], &setting.shape)
            .expect("a program")
    };
    let first = |h: &'_ Household| -> Option<(Machine, Vec<i64>)> {
        let setting = Setting::new(h, 0, JobChoice::Today)?;
        let machine = Machine::new(program(&setting));
        let facts = setting.facts(machine.program());
        Some((machine, facts))
    };
    let ready: Vec<(Machine, Vec<i64>)> = households.iter().filter_map(first).collect();
    let steps: usize = ready
        .iter()
        .map(|(m, _)| m.program().steps.len())
        .sum::<usize>()
        / ready.len();
    let varying: usize = ready
        .iter()
        .map(|(m, _)| m.program().steps.iter().filter(|s| s.varies).count())
        .sum::<usize>()
        / ready.len();
    println!(
        "{n} households; a program has {steps} steps on average, of which {varying} vary with hours"
    );

    let lower = timed(rounds.min(5), || {
        households
            .iter()
            .filter_map(|h| Setting::new(h, 0, JobChoice::Today))
            .map(|s| program(&s).steps.len())
            .sum::<usize>()
    }) / n;
    let live: usize = ready
        .iter()
        .map(|(m, f)| m.special(f).live_steps())
        .sum::<usize>()
        / ready.len();
    println!("of which the items of a household need {live}");
    let special = timed(rounds, || {
        ready
            .iter()
            .map(|(m, f)| m.special(f).points().at(Hours(0)).len())
            .sum::<usize>()
    }) / n;
    let hours: Vec<Hours> = (0..49).map(Hours::whole).collect();
    let grid = timed(rounds, || {
        ready
            .iter()
            .map(|(m, f)| {
                let special = m.special(f);
                let mut points = special.points();
                points.many(&hours).len()
            })
            .sum::<usize>()
    }) / n;
    let mut passes = 0;
    let walk = timed(rounds, || {
        passes = ready
            .iter()
            .map(|(m, f)| m.special(f).walk(Fraction::whole(48)).passes)
            .sum::<usize>();
    }) / n;
    let mut books = Books::new(prepared.pack.clone(), prepared.terms.clone());
    let mut turns = 0;
    let assess = timed(rounds, || {
        turns = households
            .iter()
            .map(
                |h| match books.assess(h).expect("the demo list can be worked out") {
                    Verdict::Assessed(a) => a
                        .earners
                        .iter()
                        .flat_map(|e| &e.lines)
                        .map(|l| l.turns.len())
                        .sum::<usize>(),
                    Verdict::Held(_) => 0,
                },
            )
            .sum::<usize>();
    }) / n;
    println!("making a program            {lower:>10.1?}");
    println!("fixed part, one point       {special:>10.1?}");
    println!("49 points                   {grid:>10.1?}");
    println!(
        "walk ({:.1} passes)           {walk:>10.1?}",
        f(passes) / f(n as usize)
    );
    println!(
        "whole assessment            {assess:>10.1?}   all earners and offers, {turns} turning points in all"
    );
    println!(
        "assessment / (grid + walk)  {:>10.2}",
        assess.as_secs_f64() / (grid + walk).as_secs_f64()
    );
}

#[expect(clippy::cast_precision_loss, reason = "a small count for printing")]
fn f(n: usize) -> f64 {
    n as f64
}
