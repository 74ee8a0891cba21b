//! Where the next ten units of pay go: one bar a segment. In: shares of each item. Out: a drawing in
//! hundredths of a point, every part labelled in or under its bar.

use super::chart::{Label, hundredths, wrapped};
use super::fonts::{Weight, width};
use super::money::Currency;
use crate::num::Money;
use serde::Serialize;

/// A finished drawing of bars.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize)]
pub struct Bars {
    /// The heading; empty where there is nothing to draw.
    pub title: String,
    /// The drawing in words.
    pub alt: String,
    /// Width of the drawing.
    pub width: i64,
    /// Height of the drawing.
    pub height: i64,
    /// Parts of all bars.
    pub parts: Vec<BarPart>,
    /// Thin lines from words to their part.
    pub leaders: Vec<[i64; 4]>,
    /// Words on paper.
    pub labels: Vec<Label>,
    /// Words on the dark part.
    pub light_labels: Vec<Label>,
}

/// A part of a bar.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct BarPart {
    /// Left edge.
    pub x: i64,
    /// Top edge.
    pub y: i64,
    /// Width.
    pub w: i64,
    /// Height.
    pub h: i64,
    /// 0 kept, 1 tax and contributions, 2 pension, 3 benefits, 4 costs, 5 gained on top.
    pub kind: u8,
}

/// Where a part of the pay goes.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Goes {
    /// Kept.
    Kept,
    /// Tax, contributions, loan repayments.
    Tax,
    /// Into the person's own pension.
    Pension,
    /// Benefits and other income that fall.
    Benefit,
    /// Costs of working.
    Cost,
    /// Benefits that rise with pay.
    Gain,
}

/// One bar before it is drawn.
pub(super) struct Bar {
    /// The hours that it is for.
    pub label: String,
    /// Parts with their words, the kept one first; sums above zero, except what is kept.
    pub parts: Vec<(Goes, String, Money)>,
}

/// Draws the bars below each other.
pub(super) fn draw(
    title: String,
    alt: String,
    bars: &[Bar],
    currency: &Currency,
    total_width: f64,
    size: f64,
) -> Bars {
    let mut out = Bars {
        title,
        alt,
        width: hundredths(total_width),
        ..Bars::default()
    };
    let line = size * 1.25;
    let beside = size < 15.0;
    let left = if beside { size * 8.2 + 0.8 * size } else { 0.0 };
    let longest = bars
        .iter()
        .map(|bar| {
            bar.parts
                .iter()
                .map(|part| part.2.0.max(0))
                .sum::<i64>()
                .max(1000)
        })
        .max()
        .unwrap_or(1000);
    let unit = (total_width - left) / longest as f64;
    let mut top = 0.0;
    for bar in bars {
        let high = size * 1.7;
        let mut least = top;
        if beside {
            let words = wrapped(&bar.label, Weight::Regular, size, left - size * 0.5);
            least = top + line * words.len() as f64;
            let start = top + (high - line * words.len() as f64).max(0.0) / 2.0;
            for (position, text) in words.into_iter().enumerate() {
                let y = start + position as f64 * line;
                out.labels.push(label(0.0, y, text, Weight::Regular));
            }
        } else {
            out.labels
                .push(label(0.0, top, bar.label.clone(), Weight::Bold));
            top += line * 1.1;
        }
        top = draw_bar(
            bar,
            currency,
            (left, top, high),
            (unit, total_width, size),
            &mut out,
        );
        top = top.max(least) + size * 0.6;
    }
    out.height = hundredths((top - size * 0.6).max(0.0));
    out
}

fn label(x: f64, y: f64, text: String, weight: Weight) -> Label {
    Label {
        x: hundredths(x),
        y: hundredths(y),
        text,
        weight: u8::from(weight == Weight::Bold),
    }
}

/// Draws one bar; returns where the next thing may start.
fn draw_bar(
    bar: &Bar,
    currency: &Currency,
    (left, top, high): (f64, f64, f64),
    (unit, total_width, size): (f64, f64, f64),
    out: &mut Bars,
) -> f64 {
    let line = size * 1.25;
    let inside = top + (high - line) / 2.0;
    let mut x = left;
    let mut outside: Vec<(f64, String)> = vec![];
    for (goes, name, sum) in &bar.parts {
        let wide = sum.0.max(0) as f64 * unit;
        if wide > 0.0 {
            out.parts.push(BarPart {
                x: hundredths(x),
                y: hundredths(top),
                w: hundredths(wide),
                h: hundredths(high),
                kind: *goes as u8,
            });
        }
        let full = format!("{name} {}", currency.exact(*sum));
        let weight = match goes {
            Goes::Kept => Weight::Bold,
            Goes::Tax | Goes::Pension | Goes::Benefit | Goes::Cost | Goes::Gain => Weight::Regular,
        };
        if width(&full, weight, size) + size * 0.7 <= wide {
            let word = label(x + size * 0.35, inside, full, weight);
            match goes {
                Goes::Kept => out.light_labels.push(word),
                Goes::Tax | Goes::Pension | Goes::Benefit | Goes::Cost | Goes::Gain => {
                    out.labels.push(word);
                }
            }
        } else {
            outside.push((x + wide / 2.0, full));
        }
        x += wide;
    }
    under(&outside, (left, top + high), (total_width, size), out)
}

/// Words under a bar for the parts that cannot hold theirs, in as few lines as they need.
fn under(
    words: &[(f64, String)],
    (left, top): (f64, f64),
    (total_width, size): (f64, f64),
    out: &mut Bars,
) -> f64 {
    let line = size * 1.25;
    let space = size * 0.9;
    let mut rows: Vec<Vec<(f64, f64, &str)>> = vec![];
    let mut row: Vec<(f64, f64, &str)> = vec![];
    let mut used = 0.0;
    for (target, text) in words {
        let wide = width(text, Weight::Regular, size);
        if !row.is_empty() && used + space + wide > total_width - left {
            rows.push(std::mem::take(&mut row));
            used = 0.0;
        }
        used += wide + if row.is_empty() { 0.0 } else { space };
        row.push((*target, wide, text));
    }
    if !row.is_empty() {
        rows.push(row);
    }
    let count = rows.len();
    for (level, row) in rows.into_iter().enumerate() {
        let y = top + size * 0.25 + level as f64 * line;
        let mut edge = total_width;
        let mut places: Vec<f64> = vec![];
        for (target, wide, _) in row.iter().rev() {
            let x = (target - wide / 2.0).min(edge - wide);
            places.push(x);
            edge = x - space;
        }
        places.reverse();
        let mut least = left;
        for ((target, wide, text), x) in row.iter().zip(places) {
            let x = x.max(least);
            least = x + wide + space;
            out.labels
                .push(label(x, y, (*text).to_owned(), Weight::Regular));
            let from = target.clamp(x, x + wide);
            if level == 0 && (from - target).abs() < size * 1.5 {
                out.leaders
                    .push([*target, top, from, top + size * 0.35].map(hundredths));
            }
        }
    }
    if count == 0 {
        top
    } else {
        top + size * 0.25 + count as f64 * line
    }
}
