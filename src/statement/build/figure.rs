//! What the chart and the bars of a section show.

use super::steps::Step;
use super::turns::{in_range, is_cost_step, jump, own_traps};
use super::words::{Measure, Words, hours_text};
use crate::measures::{BudgetLine, EarnerResult, ItemKind, Point, Segment, Turn, TurnKind};
use crate::num::{Direction, Fraction, Hours, Money, divide_rounded};
use crate::statement::bars::{self, Bar, Bars, Goes};
use crate::statement::chart::{self, Band, Chart, Drop, Mark, MarkKind, Plot, Stretch, wrapped};
use crate::statement::error::StatementError;
use crate::statement::fonts::Weight;
use crate::statement::money::{hours, kept_of_ten, money};

/// Where a part of the next ten units goes: what it is, its words, and the sum.
type Share = (Goes, String, Money);

/// Jumps named in the chart at most.
const NAMED_JUMPS: usize = 3;
/// The least jump that is named in the chart, in minor units.
const LEAST_NAMED: i64 = 500;
/// Bars at most.
const BARS: usize = 2;
/// Rates named in the title at most.
const RATES: usize = 4;
/// Traps and stretches shorter than this, in hours, are not named in the title.
const LEAST_STRETCH: Fraction = Fraction::ONE;
/// Stretches shorter than this, in hours, get no bar unless they start at today's hours.
const LEAST_BAR: Fraction = Fraction::ONE;

/// Width of the text in points: the page less its margins of 20 and 18 mm.
pub(in crate::statement) fn text_width(paper: &str) -> f64 {
    let page = if paper == "us-letter" { 612.0 } else { 595.28 };
    page - (20.0 + 18.0) * 72.0 / 25.4
}

/// A place for drawing.
fn place(value: Fraction) -> f64 {
    value.numerator() as f64 / value.denominator() as f64
}

/// A sum for drawing, in currency units.
fn units(sum: Money) -> f64 {
    sum.0 as f64 / 100.0
}

/// Builds the chart.
pub(super) fn chart(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
    measure: Measure,
) -> Result<Chart, StatementError> {
    let size = f64::from(words.context.delivery.print_size.max(12));
    let Some(main) = earner.lines.first() else {
        return Ok(Chart::default());
    };
    let axis = axis(words, earner, measure, Starred::AsItIs)?;
    let mut lines: Vec<&BudgetLine> = vec![main];
    for step in steps {
        let known = lines
            .iter()
            .any(|line| line.terms.wage == step.line.terms.wage);
        if !known {
            lines.push(step.line);
        }
    }
    let drops = named_jumps(main, steps, earner, measure);
    let mut named = vec![];
    for turn in &drops {
        let size = jump(turn, measure);
        let key = if size.0 < 0 {
            "chart.drop"
        } else {
            "chart.rise"
        };
        let (size, at) = (words.currency.whole(size), hours_text(turn.hours));
        named.push(Drop {
            hours: place(turn.at),
            sums: around(turn, measure),
            label: words.say(key, &[("sum", &size), ("hours", &at)])?,
        });
    }
    let mut bands = vec![];
    for trap in own_traps(main, measure) {
        let to = trap.to.map_or(place(main.up_to.as_fraction()), place);
        bands.push(Band {
            hours: (place(trap.from), to),
            label: if trap.from.is_zero() {
                words.plain("chart.band_start")?
            } else {
                words.say("chart.band", &[("hours", &hours_text(hours(trap.from)))])?
            },
        });
    }
    let plot = Plot {
        title: title(words, earner, steps, &drops, measure)?,
        alt: alt(words, earner, main, steps, &drops, measure)?,
        axes: (axis, words.plain("chart.axis_hours")?),
        lines: lines.iter().map(|line| stretches(line, measure)).collect(),
        marks: marks(words, earner, steps, measure, size)?,
        drops: named,
        bands,
        currency: &words.currency,
        width: text_width(&words.context.delivery.paper),
        size,
    };
    Ok(chart::draw(&plot))
}

/// Whether the star of sums that rest on unconfirmed amounts is wanted.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Starred {
    AsItIs,
    Never,
}

/// The words over the axis of sums.
fn axis(
    words: &Words<'_>,
    earner: &EarnerResult,
    measure: Measure,
    starred: Starred,
) -> Result<String, StatementError> {
    // Whatever the line rests on, up to its last hours.
    let line = earner.lines.first().map_or(&[][..], |line| &line.grid);
    let points: Vec<&Point> = std::iter::once(&earner.not_in_work).chain(line).collect();
    let star = match starred {
        Starred::AsItIs => words.marks.of_points(&points, |_| true),
        Starred::Never => "",
    };
    let key = match measure {
        Measure::Net => "chart.axis_sum",
        Measure::AfterCosts => "chart.axis_sum_after_costs",
    };
    words.say(key, &[("star", star)])
}

/// A line's segments as stretches.
fn stretches(line: &BudgetLine, measure: Measure) -> Vec<Stretch> {
    line.segments
        .iter()
        .map(|segment| {
            let (from, to) = measure.ends(segment);
            (
                (place(segment.from), place(from)),
                (place(segment.to), place(to)),
            )
        })
        .collect()
}

/// Sums just before and just after a turn, in currency units.
fn around(turn: &Turn, measure: Measure) -> (f64, f64) {
    match measure {
        Measure::Net => (units(turn.net_before), units(turn.net_after)),
        Measure::AfterCosts => (
            units(turn.after_costs_before),
            units(turn.after_costs_after),
        ),
    }
}

/// Points to mark, with their labels.
fn marks(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
    measure: Measure,
    size: f64,
) -> Result<Vec<Mark>, StatementError> {
    let today = Words::today(earner);
    let main_wage = earner.lines.first().map(|line| line.terms.wage);
    let said = |at: Hours, sum: Money| {
        let values = [
            ("hours", hours_text(at)),
            ("sum", words.currency.whole(sum)),
        ];
        let values: Vec<(&str, &str)> = values.iter().map(|(k, v)| (*k, v.as_str())).collect();
        words.say("chart.hours_sum", &values)
    };
    let mut marks = vec![Mark {
        hours: 0.0,
        sum: units(measure.at(&earner.not_in_work)),
        kind: MarkKind::NoWork,
        label: vec![],
    }];
    let sum = words.currency.whole(measure.at(today));
    let today_words = if earner.has_job {
        said(today.hours, measure.at(today))?
    } else {
        words.say("chart.today_no_work", &[("sum", &sum)])?
    };
    let today_mark = Mark {
        hours: place(today.hours.as_fraction()),
        sum: units(measure.at(today)),
        kind: MarkKind::Today,
        label: vec![words.plain("chart.today")?, today_words],
    };
    if earner.has_job {
        marks.push(today_mark);
    } else {
        marks[0] = today_mark;
    }
    for step in steps {
        let mut label = wrapped(&step.name, Weight::Bold, size, size * 13.0);
        label.truncate(2);
        let other_wage = main_wage.is_some_and(|wage| wage != step.line.terms.wage);
        label.push(if other_wage {
            let (at, wage) = (
                hours_text(step.to.hours),
                words.currency.wage(step.line.terms.wage),
            );
            let sum = words.currency.whole(measure.at(step.to));
            let values = [("hours", at.as_str()), ("wage", &wage), ("sum", &sum)];
            words.say("chart.hours_wage_sum", &values)?
        } else {
            said(step.to.hours, measure.at(step.to))?
        });
        marks.push(Mark {
            hours: place(step.to.hours.as_fraction()),
            sum: units(measure.at(step.to)),
            kind: MarkKind::Step,
            label,
        });
    }
    Ok(marks)
}

/// The largest jumps: falls between today and the steps first, then other falls, then rises.
fn named_jumps<'a>(
    main: &'a BudgetLine,
    steps: &[Step<'_>],
    earner: &EarnerResult,
    measure: Measure,
) -> Vec<&'a Turn> {
    let range = in_range(earner, steps);
    let mut jumps: Vec<&Turn> = main
        .turns
        .iter()
        .filter(|turn| !is_cost_step(main, turn, measure) && turn.at > Fraction::ZERO)
        .filter(|turn| turn.kind == TurnKind::Cliff || turn.kind == TurnKind::CostStep)
        .filter(|turn| jump(turn, measure).0.abs() >= LEAST_NAMED)
        .collect();
    jumps.sort_by_key(|turn| {
        let inside = turn.hours >= range.0 && turn.hours <= range.1;
        let size = jump(turn, measure).0;
        (size > 0, !inside, -size.abs())
    });
    jumps.truncate(NAMED_JUMPS);
    jumps.sort_by_key(|turn| turn.hours);
    jumps
}

/// The message of the chart: a trap or a jump between today and the steps, else what is kept of each further unit.
fn title(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
    drops: &[&Turn],
    measure: Measure,
) -> Result<String, StatementError> {
    let Some(main) = earner.lines.first() else {
        return words.plain("chart.title_plain");
    };
    let today = Words::today(earner);
    let (low, high) = in_range(earner, steps);
    let trap = own_traps(main, measure).into_iter().find(|trap| {
        let ahead = trap.to.is_none_or(|to| to > today.hours.as_fraction());
        let wide = trap.to.is_none_or(|to| to - trap.from >= LEAST_STRETCH);
        ahead && wide && trap.from <= high.as_fraction()
    });
    if let Some(trap) = trap {
        let from = hours_text(hours(trap.from));
        return match trap.to {
            // Nobody works 0 hours: the words compare with not being in work.
            Some(to) if trap.from.is_zero() => {
                words.say("chart.title_trap_start", &[("to", &hours_text(hours(to)))])
            }
            None if trap.from.is_zero() => words.plain("chart.title_trap_start_open"),
            Some(to) => words.say(
                "chart.title_trap",
                &[("from", &from), ("to", &hours_text(hours(to)))],
            ),
            None => words.say("chart.title_trap_open", &[("from", &from)]),
        };
    }
    let inside = |turn: &&&Turn| turn.hours > low && turn.hours <= high;
    if let Some(turn) = drops.iter().find(inside) {
        let size = jump(turn, measure);
        let sum = words.currency.short(Money(size.0.abs()));
        let at = hours_text(turn.hours);
        let key = if size.0 < 0 {
            "chart.title_drop"
        } else {
            "chart.title_rise"
        };
        return words.say(key, &[("hours", &at), ("sum", &sum)]);
    }
    let rates = rates_between(main, (low, high), measure);
    let said: Vec<String> = rates.iter().map(|ten| words.currency.short(*ten)).collect();
    match rates.as_slice() {
        [] => words.plain("chart.title_plain"),
        some if some.iter().any(|ten| ten.0 <= 0) => words.plain("chart.title_plain"),
        [_] => {
            let at = hours_text(today.hours);
            let key = if earner.has_job {
                "chart.title_slope"
            } else {
                "chart.title_slope_start"
            };
            words.say(key, &[("hours", &at), ("ten", &said[0])])
        }
        [..] => {
            let mut list = String::new();
            for ten in &said {
                list = match list.as_str() {
                    "" => ten.clone(),
                    first => words.say(
                        "chart.title_slopes_then",
                        &[("first", first), ("next", ten)],
                    )?,
                };
            }
            words.say("chart.title_slopes", &[("list", &list)])
        }
    }
}

/// What is kept of ten units on the stretches of a range, neighbours that are alike as one.
fn rates_between(main: &BudgetLine, (low, high): (Hours, Hours), measure: Measure) -> Vec<Money> {
    let (low, high) = (low.as_fraction(), high.as_fraction());
    let mut rates: Vec<Money> = vec![];
    for segment in &main.segments {
        let (from, to) = (segment.from.max(low), segment.to.min(high));
        let long = to - from >= LEAST_STRETCH || rates.is_empty() && to > from;
        let (true, Some(rate)) = (long, measure.rate(segment)) else {
            continue;
        };
        let ten = kept_of_ten(rate);
        if rates.last().is_none_or(|last| (last.0 - ten.0).abs() >= 5) {
            rates.push(ten);
        }
    }
    rates.truncate(RATES);
    rates
}

/// The chart in words.
fn alt(
    words: &Words<'_>,
    earner: &EarnerResult,
    main: &BudgetLine,
    steps: &[Step<'_>],
    drops: &[&Turn],
    measure: Measure,
) -> Result<String, StatementError> {
    let sum = |sum: Money| words.currency.short(sum);
    let last = hours_text(main.up_to);
    let axis = axis(words, earner, measure, Starred::Never)?;
    let mut said = vec![
        words.say("chart.alt", &[("axis", &axis), ("last", &last)])?,
        words.say(
            "chart.alt_none",
            &[("sum", &sum(measure.at(&earner.not_in_work)))],
        )?,
    ];
    let today = Words::today(earner);
    let mut points = vec![];
    if earner.has_job {
        points.push((words.plain("chart.today")?, today));
    }
    points.extend(steps.iter().map(|step| (step.name.clone(), step.to)));
    for (name, point) in points {
        let (at, value) = (hours_text(point.hours), sum(measure.at(point)));
        let values = [("name", name.as_str()), ("hours", &at), ("sum", &value)];
        said.push(words.say("chart.alt_mark", &values)?);
    }
    for turn in drops {
        let (before, after) = match measure {
            Measure::Net => (turn.net_before, turn.net_after),
            Measure::AfterCosts => (turn.after_costs_before, turn.after_costs_after),
        };
        let (at, before, after) = (hours_text(turn.hours), sum(before), sum(after));
        let values = [
            ("hours", at.as_str()),
            ("before", &before),
            ("after", &after),
        ];
        let key = if jump(turn, measure).0 < 0 {
            "chart.alt_drop"
        } else {
            "chart.alt_rise"
        };
        said.push(words.say(key, &values)?);
    }
    for trap in own_traps(main, measure) {
        let (from, depth) = (hours_text(hours(trap.from)), sum(trap.depth));
        said.push(match trap.to {
            Some(to) => words.say(
                "chart.alt_trap",
                &[
                    ("from", &from),
                    ("to", &hours_text(hours(to))),
                    ("sum", &depth),
                ],
            )?,
            None => words.say(
                "chart.alt_trap_open",
                &[("from", &from), ("last", &last), ("sum", &depth)],
            )?,
        });
    }
    if let Some(segment) = main.segments.last() {
        let value = sum(money(measure.ends(segment).1));
        said.push(words.say("chart.alt_end", &[("hours", &last), ("sum", &value)])?);
    }
    Ok(said.join(" "))
}

/// Builds the bars: the segments from today to the steps.
pub(super) fn bars(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
    measure: Measure,
) -> Result<Bars, StatementError> {
    let size = f64::from(words.context.delivery.print_size.max(12));
    let Some(main) = earner.lines.first() else {
        return Ok(Bars::default());
    };
    let (low, high) = in_range(earner, steps);
    let (low, high) = (low.as_fraction(), high.as_fraction());
    let mut found: Vec<(Fraction, Fraction, Vec<Share>)> = vec![];
    let mut star = "";
    for segment in &main.segments {
        let begins_inside = segment.from < high || (low == high && segment.from <= low);
        if segment.to <= low || !begins_inside || measure.rate(segment).is_none() {
            continue;
        }
        let from = if segment.from < low {
            low
        } else {
            segment.from
        };
        let parts = parts(words, segment, measure)?;
        if star.is_empty() {
            star = words.marks.of_segment(segment);
        }
        match found.last_mut() {
            Some(last) if last.1 == from && last.2 == parts => last.1 = segment.to,
            Some(_) | None => found.push((from, segment.to, parts)),
        }
    }
    let mut position = 0;
    found.retain(|(from, to, _)| {
        position += 1;
        position == 1 || *to - *from >= LEAST_BAR
    });
    found.truncate(BARS);
    if found.iter().all(|(_, _, parts)| parts.len() < 2) {
        return Ok(Bars::default());
    }
    let mut bars = vec![];
    let mut alts = vec![];
    for (from, to, parts) in found {
        let (from, to_text) = (hours_text(hours(from)), hours_text(hours(to)));
        let label = if to >= main.up_to.as_fraction() {
            words.say("bars.range_open", &[("from", &from)])?
        } else {
            words.say("bars.range", &[("from", &from), ("to", &to_text)])?
        };
        let mut said = vec![];
        for (_, name, sum) in &parts {
            let sum = words.currency.exact(*sum);
            said.push(words.say("bars.alt_part", &[("name", name), ("sum", &sum)])?);
        }
        let values = [
            ("range", label.as_str()),
            ("parts", &words.enumerated(&said)),
        ];
        alts.push(words.say("bars.alt", &values)?);
        bars.push(Bar { label, parts });
    }
    Ok(bars::draw(
        words.say("bars.heading", &[("star", star)])?,
        alts.join(" "),
        &bars,
        &words.currency,
        text_width(&words.context.delivery.paper),
        size,
    ))
}

/// Where ten units of extra pay go on a segment; the parts add up to ten and what is gained on top.
fn parts(
    words: &Words<'_>,
    segment: &Segment,
    measure: Measure,
) -> Result<Vec<(Goes, String, Money)>, StatementError> {
    let mut losses: Vec<(Goes, String, Fraction)> = vec![];
    let mut gains: Vec<(String, Fraction)> = vec![];
    for (position, share) in segment.shares.iter().enumerate() {
        let (goes, name) = match words.assessment.items[position].kind {
            ItemKind::Pay
            | ItemKind::Passport
            | ItemKind::Cost
            | ItemKind::Housing
            | ItemKind::Employer => continue,
            ItemKind::Tax | ItemKind::Contribution => (Goes::Tax, words.plain("bars.tax")?),
            ItemKind::Loan => (Goes::Tax, words.plain("bars.loan")?),
            ItemKind::Pension => (Goes::Pension, words.plain("bars.pension")?),
            ItemKind::Income | ItemKind::Benefit => (Goes::Benefit, words.item(position)?),
        };
        if share.is_zero() {
            continue;
        }
        match losses.iter_mut().find(|(_, known, _)| *known == name) {
            Some((_, _, sum)) => *sum = *sum - *share,
            None => losses.push((goes, name, -*share)),
        }
    }
    if let (Measure::AfterCosts, Some(after), Some(plain)) =
        (measure, segment.metr_after_costs, segment.metr)
        && after != plain
    {
        losses.push((Goes::Cost, words.plain("bars.cost")?, after - plain));
    }
    losses.retain(|(_, name, share)| {
        if share.is_negative() {
            gains.push((name.clone(), -*share));
        }
        *share > Fraction::ZERO
    });
    losses.sort_by_key(|(goes, _, _)| *goes);
    let ten = |share: Fraction| {
        let pence = divide_rounded(
            share.numerator() * 1000,
            share.denominator(),
            Direction::HalfUp,
        );
        Money(i64::try_from(pence).unwrap_or(0))
    };
    let kept = measure.rate(segment).map_or(Money(1000), kept_of_ten);
    let mut parts: Vec<(Goes, String, Money)> = losses
        .into_iter()
        .map(|(goes, name, share)| (goes, name, ten(share)))
        .filter(|(_, _, sum)| sum.0 != 0)
        .collect();
    let mut on_top = vec![];
    for (name, share) in gains {
        let name = words.say("bars.gain", &[("name", &name)])?;
        on_top.push((Goes::Gain, name, ten(share)));
    }
    let whole: Money = Money(1000) + on_top.iter().map(|part| part.2).sum();
    let short = whole - kept - parts.iter().map(|part| part.2).sum();
    if let Some(largest) = parts.iter_mut().max_by_key(|part| part.2) {
        largest.2 += short;
    }
    let first = if kept.0 < 0 {
        (Goes::Kept, words.plain("bars.lost")?, -kept)
    } else {
        (Goes::Kept, words.plain("bars.kept")?, kept)
    };
    let mut all = vec![first];
    all.append(&mut parts);
    all.append(&mut on_top);
    Ok(all)
}
