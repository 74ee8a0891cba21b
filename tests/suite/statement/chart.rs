//! The chart and the bars at their extremes.

use super::invented::{Line, Pieces, assessment, budget_line, context, f, tenant, w};
use hourworth::measures::{Assessment, EarnerResult, ItemInfo, ItemKind, JobTerms};
use hourworth::num::{Fraction, Hours};
use hourworth::statement::{Chart, Detail, LetterView, TemplateSet, Typesetter, letter_view};

/// A household whose only benefit follows these pieces, beside pay of 50 an hour.
fn home(benefit: Pieces, hours: i64, wage: i128) -> Assessment {
    let items = || {
        let line = |name, kind, adult, sums| Line {
            name,
            kind,
            adult,
            part: "Part",
            sums,
        };
        vec![
            line("pay", ItemKind::Pay, Some(0), Pieces::line(w(wage))),
            line("support", ItemKind::Benefit, None, benefit.clone()),
        ]
    };
    let terms = JobTerms {
        offer: String::new(),
        reference: String::new(),
        wage: 115_385,
        hours: Hours::whole(hours),
        facts: vec![],
    };
    let line = budget_line(&items(), terms, 0, Hours::whole(hours + 4), 48);
    let zero = line.grid[0].clone();
    let mut made = tenant();
    made.items = items()
        .into_iter()
        .map(|item| ItemInfo {
            name: item.name.into(),
            kind: item.kind,
            adult: item.adult,
            law: "s.1".into(),
            part: "Part".into(),
        })
        .collect();
    made.earners = vec![EarnerResult {
        adult: 0,
        name: String::new(),
        not_in_work: zero,
        has_job: true,
        lines: vec![line],
        offers: vec![],
        target: None,
    }];
    made
}

fn view(assessment: &Assessment, print_size: u8) -> LetterView {
    let mut context = context();
    context.delivery.print_size = print_size;
    letter_view(assessment, &context, Detail::Full).expect("a view")
}

/// Grounds stand in the drawing and do not cover each other; ticks do not touch; runs stay in the plot.
fn check(chart: &Chart, what: &str) {
    let [left, top, right, bottom] = chart.plot;
    for (position, a) in chart.grounds.iter().enumerate() {
        assert!(
            a[0] >= left - 200 && a[0] + a[2] <= right + 400,
            "{what}: {a:?} leaves {left}..{right}"
        );
        assert!(
            a[1] >= 0 && a[1] + a[3] <= bottom + 100,
            "{what}: {a:?} leaves the plot"
        );
        for b in &chart.grounds[position + 1..] {
            let wide = (a[0] + a[2]).min(b[0] + b[2]) - a[0].max(b[0]);
            let high = (a[1] + a[3]).min(b[1] + b[3]) - a[1].max(b[1]);
            assert!(
                wide <= 0 || high <= 0,
                "{what}: labels {a:?} and {b:?} collide"
            );
        }
    }
    for pair in chart.hours_ticks.windows(2) {
        assert!(
            pair[1].edge > pair[0].edge + 800,
            "{what}: ticks of hours touch"
        );
    }
    for pair in chart.sum_ticks.windows(2) {
        assert!(
            pair[0].at - pair[1].at >= 1200,
            "{what}: ticks of sums touch"
        );
    }
    assert!(
        (2..=8).contains(&chart.sum_ticks.len()),
        "{what}: {} ticks",
        chart.sum_ticks.len()
    );
    for [x, y] in chart.runs.iter().flat_map(|run| &run.points) {
        assert!(
            (left..=right).contains(x) && (top..=bottom).contains(y),
            "{what}: {x},{y}"
        );
    }
    assert!(!chart.runs.is_empty(), "{what}: no line");
    assert!(
        !chart.alt.is_empty() && !chart.title.is_empty(),
        "{what}: no words"
    );
}

fn extremes() -> Vec<(&'static str, Assessment)> {
    let forty = Pieces(
        (0..40)
            .map(|n| (f(n * 12, 10), w(600 - n * 9), w(n % 7 - 3)))
            .collect(),
    );
    let pounds_apart = Pieces(
        (0..12)
            .map(|n| (w(n * 2 + 10), w(900 - n * 60), w(0)))
            .fold(vec![(w(0), w(900), w(0))], |mut all, piece| {
                all.push(piece);
                all
            }),
    );
    // Falls whose places lie two hundredths of an hour, a pound of pay, apart.
    let close = Pieces(
        std::iter::once((w(0), w(700), w(0)))
            .chain((0..6).map(|n| (w(20) + f(n * 2, 100), w(660 - n * 40), w(0))))
            .collect(),
    );
    vec![
        ("one segment", home(Pieces::flat(w(0)), 16, 50)),
        ("zero everywhere", home(Pieces::flat(w(0)), 16, 0)),
        ("forty segments", home(forty, 16, 50)),
        ("a stair of falls", home(pounds_apart, 16, 20)),
        ("falls a pound apart", home(close, 18, 50)),
        ("negative net", home(Pieces::flat(w(-900)), 8, 50)),
        ("large sums", home(Pieces::flat(w(90_000)), 8, 5_000)),
        ("one penny an hour", home(Pieces::flat(w(0)), 8, 0)),
        ("all day", home(Pieces::flat(w(100)), 44, 50)),
        ("first hour", home(Pieces::step(w(1), w(100), w(0)), 1, 50)),
    ]
}

#[test]
fn labels_never_collide() {
    for (name, assessment) in extremes() {
        for size in [12, 16, 18, 20] {
            let view = view(&assessment, size);
            check(&view.sections[0].chart, &format!("{name} at {size}"));
        }
    }
}

#[test]
fn extremes_typeset() {
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).expect("templates");
    for (name, assessment) in extremes() {
        let (view, context) = (view(&assessment, 12), context());
        let made = typesetter.letter(&view, &context.texts, context.issued);
        let made = made.unwrap_or_else(|error| panic!("{name}: {error}"));
        assert!(made.pages <= 3, "{name}: {} pages", made.pages);
    }
}

#[test]
fn ticks_are_round_and_hold_the_line() {
    let chart = &view(&tenant(), 12).sections[0].chart;
    let words: Vec<&str> = chart
        .sum_ticks
        .iter()
        .map(|tick| tick.text.as_str())
        .collect();
    assert_eq!(words, ["£500", "£1,000", "£1,500", "£2,000", "£2,500"]);
    let words: Vec<&str> = chart
        .hours_ticks
        .iter()
        .map(|tick| tick.text.as_str())
        .collect();
    assert_eq!(words, ["0", "8", "16", "24", "32", "40", "48"]);
}

#[test]
fn a_fall_breaks_the_line_and_a_trap_is_shaded() {
    let benefit = Pieces::step(w(20), w(300), w(150));
    let chart = view(&home(benefit, 16, 50), 12).sections[0].chart.clone();
    assert_eq!(
        (chart.runs.len(), chart.jumps.len(), chart.bands.len()),
        (2, 1, 1)
    );
    // 150 lost at 50 an hour: regained after 3 hours, from the invented figures above.
    assert_eq!(
        chart.title,
        "Between 20 and 23 hours you have less than at 20 hours"
    );
    assert!(
        chart
            .alt
            .contains("At 20 hours it falls from £1,300 to £1,150."),
        "{}",
        chart.alt
    );
    assert!(
        chart
            .labels
            .iter()
            .any(|label| label.text == "−£150 at 20 hours")
    );
    let [left, right] = chart.bands[0];
    let hour = Fraction::new(i128::from(chart.plot[2] - chart.plot[0]), 48);
    let wanted = (hour * w(3)).floor();
    assert!(
        (i128::from(right - left) - wanted).abs() <= 2,
        "three hours wide"
    );
}

#[test]
fn the_parts_of_a_bar_add_up_to_ten() {
    let mut all = vec![("tenant", tenant())];
    all.push(("lone parent", super::invented::lone_parent()));
    all.push(("couple", super::invented::couple()));
    let mut bars = 0;
    for (name, assessment) in all {
        for section in view(&assessment, 12).sections {
            let alt = section.bars.alt;
            for sentence in alt.split_terminator(". ") {
                let pence: i64 = sentence
                    .split('£')
                    .skip(1)
                    .map(|part| {
                        let digits: String = part.chars().filter(char::is_ascii_digit).collect();
                        digits.parse::<i64>().expect("pence")
                    })
                    .sum();
                assert_eq!(pence, 1000, "{name}: {sentence}");
                bars += 1;
            }
        }
    }
    assert!(bars >= 6, "{bars} bars");
}

#[test]
fn more_than_ten_kept_is_said() {
    // A benefit that rises by 10 an hour on pay of 50: twelve of each extra ten are kept.
    let rising = Pieces(vec![(w(0), w(0), w(10))]);
    let bars = view(&home(rising, 16, 50), 12).sections[0].bars.clone();
    assert!(
        bars.alt
            .contains("Kept £12.00, More Household Support £2.00"),
        "{}",
        bars.alt
    );
}

#[test]
fn less_than_nothing_kept_is_said() {
    // A benefit that falls by 60 an hour on pay of 50: two of each extra ten are lost.
    let falling = Pieces(vec![(w(0), w(3000), w(-60))]);
    let view = view(&home(falling, 16, 50), 12);
    let section = &view.sections[0];
    assert!(
        section
            .bars
            .alt
            .contains("Lost £2.00, Household Support £12.00"),
        "{}",
        section.bars.alt
    );
    assert_eq!(section.answers[0].kept, "You have £40 less a month");
    let _ = assessment;
}
