//! The chart of a budget line: where every line, mark and word goes. In: places on the budget line in
//! hours and currency units. Out: a drawing in hundredths of a point, the origin at the top left.
//! Floats are used for places on paper only; every printed sum comes in as text.

use super::fonts::{Weight, width};
use super::money::Currency;
use super::place::{Ask, Place, Placer, Rect, place_all};
use crate::num::Money;
use serde::Serialize;

/// A finished drawing.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize)]
pub struct Chart {
    /// The message, as a title.
    pub title: String,
    /// The drawing in words, with this household's numbers.
    pub alt: String,
    /// Width of the drawing.
    pub width: i64,
    /// Height of the drawing.
    pub height: i64,
    /// Left, top, right and bottom of the plot.
    pub plot: [i64; 4],
    /// How far the words of a tick of the sums stand above it: half a line.
    pub lift: i64,
    /// Where zero lies, if inside the plot and not its bottom.
    pub zero: Vec<i64>,
    /// Ticks of the hours, from left to right.
    pub hours_ticks: Vec<Tick>,
    /// Ticks of the sums, from bottom to top.
    pub sum_ticks: Vec<Tick>,
    /// Shaded ranges of hours: left and right.
    pub bands: Vec<[i64; 2]>,
    /// Budget lines in unbroken runs.
    pub runs: Vec<Run>,
    /// Jumps: place, upper and lower end.
    pub jumps: Vec<[i64; 3]>,
    /// Marked points.
    pub dots: Vec<Dot>,
    /// Thin lines from labels to what they name.
    pub leaders: Vec<[i64; 4]>,
    /// Blank ground under the words that stand inside the plot: left, top, width, height.
    pub grounds: Vec<[i64; 4]>,
    /// Words.
    pub labels: Vec<Label>,
}

/// A tick of an axis.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Tick {
    /// Place along the axis.
    pub at: i64,
    /// Left edge of the words.
    pub edge: i64,
    /// The words.
    pub text: String,
}

/// An unbroken run of a budget line.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Run {
    /// 0 for the main line, 1 for another wage.
    pub kind: u8,
    /// Corner points.
    pub points: Vec<[i64; 2]>,
}

/// A marked point.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Dot {
    /// Place.
    pub x: i64,
    /// Place.
    pub y: i64,
    /// 0 today, 1 a named step, 2 not in work.
    pub kind: u8,
}

/// One line of words.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Label {
    /// Left edge.
    pub x: i64,
    /// Top edge of the line.
    pub y: i64,
    /// The words.
    pub text: String,
    /// 0 regular, 1 bold.
    pub weight: u8,
}

/// What a marked point is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum MarkKind {
    /// Today's hours.
    Today,
    /// Four hours more or an offer.
    Step,
    /// Not in work.
    NoWork,
}

/// A point to mark.
pub(super) struct Mark {
    /// Hours a week.
    pub hours: f64,
    /// Sum in currency units.
    pub sum: f64,
    /// What it is.
    pub kind: MarkKind,
    /// Its label; empty for none.
    pub label: Vec<String>,
}

/// A jump to name.
pub(super) struct Drop {
    /// Hours a week.
    pub hours: f64,
    /// Sum before and after.
    pub sums: (f64, f64),
    /// Its label.
    pub label: String,
}

/// A range of hours to shade.
pub(super) struct Band {
    /// First and last hours.
    pub hours: (f64, f64),
    /// Its label; empty for none.
    pub label: String,
}

/// A stretch of a budget line, from and to: hours and sum.
pub(super) type Stretch = ((f64, f64), (f64, f64));

/// Everything that is drawn.
pub(super) struct Plot<'a> {
    /// The message.
    pub title: String,
    /// The words for readers who do not see it.
    pub alt: String,
    /// Words over the axis of sums and under the axis of hours.
    pub axes: (String, String),
    /// Stretches of the lines, the main one first, ordered by hours.
    pub lines: Vec<Vec<Stretch>>,
    /// Points to mark.
    pub marks: Vec<Mark>,
    /// Jumps to name.
    pub drops: Vec<Drop>,
    /// Ranges to shade.
    pub bands: Vec<Band>,
    /// The currency of the sums.
    pub currency: &'a Currency,
    /// Width in points.
    pub width: f64,
    /// Size of print in points.
    pub size: f64,
}

/// Height of a line of words, in sizes of print.
const LINE: f64 = 1.25;

/// A place on paper in hundredths of a point.
pub(super) fn hundredths(points: f64) -> i64 {
    (points * 100.0).round() as i64
}

/// From values to places.
struct Scale {
    hours: (f64, f64),
    sums: (f64, f64),
    plot: Rect,
}

impl Scale {
    fn x(&self, hours: f64) -> f64 {
        let share = (hours - self.hours.0) / (self.hours.1 - self.hours.0);
        self.plot.left + share.clamp(0.0, 1.0) * (self.plot.right - self.plot.left)
    }

    fn y(&self, sum: f64) -> f64 {
        let share = (sum - self.sums.0) / (self.sums.1 - self.sums.0);
        self.plot.bottom - share.clamp(0.0, 1.0) * (self.plot.bottom - self.plot.top)
    }
}

/// The smallest round step that needs at most so many steps for a range.
fn round_step(range: f64, most: usize) -> f64 {
    let least = (range / most as f64).max(1.0);
    let power = 10f64.powi(least.log10().floor() as i32);
    [1.0, 2.0, 2.5, 5.0, 10.0]
        .into_iter()
        .map(|factor| factor * power)
        .find(|step| *step >= least - 1e-9)
        .unwrap_or(10.0 * power)
        .max(1.0)
        .ceil()
}

/// Least and largest of the sums that are drawn, widened to round ticks; and the step of the ticks.
fn sum_range(plot: &Plot<'_>) -> (f64, f64, f64) {
    let mut sums: Vec<f64> = plot.marks.iter().map(|mark| mark.sum).collect();
    for (from, to) in plot.lines.iter().flatten() {
        sums.extend([from.1, to.1]);
    }
    let least = sums.iter().copied().fold(f64::INFINITY, f64::min);
    let largest = sums.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    if sums.is_empty() {
        return (0.0, 100.0, 50.0);
    }
    // A little below nothing, such as the first fare before the first pay, needs no tick of its own.
    let from_zero = least >= -0.02 * largest && least <= 0.4 * largest;
    let least = if from_zero { 0.0 } else { least };
    let step = round_step((largest - least).max(20.0), 4);
    let bottom = (least / step).floor() * step;
    let mut top = (largest / step).ceil() * step;
    if top <= bottom {
        top = bottom + step;
    }
    (bottom, top, step)
}

/// The step of the hours' ticks.
fn hours_step(last: f64) -> f64 {
    [1.0, 2.0, 4.0, 8.0, 10.0, 20.0, 24.0]
        .into_iter()
        .find(|step| last / step <= 7.0)
        .unwrap_or(48.0)
}

/// Draws the plot.
pub(super) fn draw(plot: &Plot<'_>) -> Chart {
    let (size, line) = (plot.size, plot.size * LINE);
    let (bottom_sum, top_sum, step) = sum_range(plot);
    let last = plot
        .lines
        .iter()
        .flatten()
        .map(|stretch| stretch.1.0)
        .chain(plot.marks.iter().map(|mark| mark.hours))
        .fold(1.0, f64::max);
    let count = ((top_sum - bottom_sum) / step).round() as i64;
    let sum_words: Vec<(f64, String)> = (0..=count)
        .map(|position| bottom_sum + position as f64 * step)
        .map(|sum| {
            (
                sum,
                plot.currency.whole(Money((sum * 100.0).round() as i64)),
            )
        })
        .collect();
    let margin = sum_words
        .iter()
        .map(|(_, text)| width(text, Weight::Regular, size))
        .fold(0.0, f64::max);
    // Words over the axis that are wider than the drawing take further lines.
    let axis = wrapped(&plot.axes.0, Weight::Regular, size, plot.width);
    let more = line * axis.len().saturating_sub(1) as f64;
    let height = 46.0 + size * 10.6 + more;
    let scale = Scale {
        hours: (0.0, last),
        sums: (bottom_sum, top_sum),
        plot: Rect {
            left: margin + 0.6 * size,
            top: more + line + 0.9 * size,
            right: plot.width - size,
            bottom: height - 2.0 * line - 0.2 * size,
        },
    };
    let area = scale.plot;
    let mut chart = Chart {
        title: plot.title.clone(),
        alt: plot.alt.clone(),
        width: hundredths(plot.width),
        height: hundredths(height),
        lift: hundredths(size * LINE / 2.0),
        plot: [area.left, area.top, area.right, area.bottom].map(hundredths),
        ..Chart::default()
    };
    for (sum, text) in sum_words {
        let at = scale.y(sum);
        let edge = hundredths(margin - width(&text, Weight::Regular, size));
        chart.sum_ticks.push(Tick {
            at: hundredths(at),
            edge,
            text,
        });
    }
    if bottom_sum < 0.0 && top_sum > 0.0 {
        chart.zero.push(hundredths(scale.y(0.0)));
    }
    let tick = hours_step(last);
    for position in 0..=(last / tick).floor() as i64 {
        let hours = position as f64 * tick;
        let text = format!("{}", hours as i64);
        let at = scale.x(hours);
        let edge = hundredths(at - width(&text, Weight::Regular, size) / 2.0);
        chart.hours_ticks.push(Tick {
            at: hundredths(at),
            edge,
            text,
        });
    }
    for (position, text) in axis.into_iter().enumerate() {
        chart.labels.push(Label {
            x: 0,
            y: hundredths(position as f64 * line),
            text,
            weight: 0,
        });
    }
    let axis_width = width(&plot.axes.1, Weight::Regular, size);
    chart.labels.push(Label {
        x: hundredths(area.right - axis_width),
        y: hundredths(height - line),
        text: plot.axes.1.clone(),
        weight: 0,
    });
    let mut placer = Placer::new(area, size);
    for band in &plot.bands {
        let (left, right) = (scale.x(band.hours.0), scale.x(band.hours.1));
        chart.bands.push([hundredths(left), hundredths(right)]);
    }
    draw_lines(plot, &scale, &mut chart, &mut placer);
    draw_marks(plot, &scale, &mut chart, &mut placer);
    chart
}

/// The budget lines and their jumps.
fn draw_lines(plot: &Plot<'_>, scale: &Scale, chart: &mut Chart, placer: &mut Placer) {
    for (position, stretches) in plot.lines.iter().enumerate() {
        let kind = u8::from(position > 0);
        let mut run: Vec<(f64, f64)> = vec![];
        let mut runs = vec![];
        for (from, to) in stretches {
            let start = (scale.x(from.0), scale.y(from.1));
            let end = (scale.x(to.0), scale.y(to.1));
            match run.last().copied() {
                Some(last) if (last.1 - start.1).abs() > 0.4 => {
                    runs.push(std::mem::take(&mut run));
                    run.push(start);
                    if kind == 0 {
                        let (upper, lower) = (last.1.min(start.1), last.1.max(start.1));
                        chart.jumps.push([start.0, upper, lower].map(hundredths));
                        placer.avoid_stroke((start.0, upper), (start.0, lower));
                    }
                }
                Some(_) => {}
                None => run.push(start),
            }
            run.push(end);
            placer.avoid_stroke(start, end);
        }
        runs.push(run);
        for run in runs.into_iter().filter(|run| run.len() > 1) {
            let points = run.iter().map(|(x, y)| [hundredths(*x), hundredths(*y)]);
            chart.runs.push(Run {
                kind,
                points: points.collect(),
            });
        }
    }
}

/// Marks, jumps and bands with their words, each word where it hides least.
fn draw_marks(plot: &Plot<'_>, scale: &Scale, chart: &mut Chart, placer: &mut Placer) {
    for mark in &plot.marks {
        let (x, y) = (scale.x(mark.hours), scale.y(mark.sum));
        placer.avoid_point((x, y), 0.45 * plot.size);
        chart.dots.push(Dot {
            x: hundredths(x),
            y: hundredths(y),
            kind: match mark.kind {
                MarkKind::Today => 0,
                MarkKind::Step => 1,
                MarkKind::NoWork => 2,
            },
        });
    }
    let mut wanted: Vec<Wanted> = vec![];
    for mark in plot.marks.iter().filter(|mark| !mark.label.is_empty()) {
        let target = (scale.x(mark.hours), scale.y(mark.sum));
        wanted.push(Wanted::new(
            mark.label.clone(),
            Weight::Bold,
            target,
            plot.size,
        ));
    }
    for drop in &plot.drops {
        let middle = f64::midpoint(scale.y(drop.sums.0), scale.y(drop.sums.1));
        let target = (scale.x(drop.hours), middle);
        let label = vec![drop.label.clone()];
        wanted.push(Wanted::new(label, Weight::Regular, target, plot.size));
    }
    for band in plot.bands.iter().filter(|band| !band.label.is_empty()) {
        let (left, right) = (scale.x(band.hours.0), scale.x(band.hours.1));
        let target = (f64::midpoint(left, right), scale.plot.bottom - plot.size);
        let label = vec![band.label.clone()];
        let label = Wanted::new(label, Weight::Regular, target, plot.size);
        if label.size.0 < right - left {
            wanted.push(label);
        }
    }
    let sizes: Vec<Ask> = wanted
        .iter()
        .map(|label| Ask {
            target: label.target,
            size: label.size,
        })
        .collect();
    // Points come first; a jump or a range whose words would cover others stays without words.
    let mut taken: Vec<Rect> = vec![];
    for (label, place) in wanted.iter().zip(place_all(placer, &sizes)) {
        let free = taken.iter().all(|other| other.overlap(&place.rect) <= 0.0);
        if free || label.first == Weight::Bold {
            taken.push(place.rect);
            write(label, &place, plot.size, chart);
        }
    }
}

/// A label that wants a place.
struct Wanted {
    lines: Vec<String>,
    first: Weight,
    target: (f64, f64),
    size: (f64, f64),
}

impl Wanted {
    fn new(lines: Vec<String>, first: Weight, target: (f64, f64), size: f64) -> Wanted {
        let mut label = Wanted {
            lines,
            first,
            target,
            size: (0.0, 0.0),
        };
        let widths = label.lines.iter().enumerate();
        let widest = widths
            .map(|(position, text)| width(text, label.weight(position), size))
            .fold(0.0, f64::max);
        label.size = (widest, size * LINE * label.lines.len() as f64);
        label
    }

    fn weight(&self, position: usize) -> Weight {
        if position == 0 {
            self.first
        } else {
            Weight::Regular
        }
    }
}

/// Draws one label and its leader.
fn write(label: &Wanted, place: &Place, size: f64, chart: &mut Chart) {
    if let Some((from, to)) = place.leader {
        chart
            .leaders
            .push([from.0, from.1, to.0, to.1].map(hundredths));
    }
    let at = place.rect;
    let ground = [at.left - 1.5, at.top, label.size.0 + 3.0, label.size.1];
    chart.grounds.push(ground.map(hundredths));
    for (position, text) in label.lines.iter().enumerate() {
        chart.labels.push(Label {
            x: hundredths(at.left),
            y: hundredths(at.top + position as f64 * size * LINE),
            text: text.clone(),
            weight: u8::from(label.weight(position) == Weight::Bold),
        });
    }
}

/// Words in lines of at most so many points.
pub(super) fn wrapped(text: &str, weight: Weight, size: f64, most: f64) -> Vec<String> {
    let mut lines: Vec<String> = vec![];
    for word in text.split(' ').filter(|word| !word.is_empty()) {
        match lines.last_mut() {
            Some(line) if width(&format!("{line} {word}"), weight, size) <= most => {
                line.push(' ');
                line.push_str(word);
            }
            _ => lines.push(word.to_owned()),
        }
    }
    lines
}
