//! A budget line as a small drawing in text: hours to the right, net income upwards, from the exact segments.
//! In: a line. Out: rows of text. The drawing is coarse; the figures stand in the table above it.

use crate::measures::{BudgetLine, Segment};
use crate::num::{Fraction, Hours};

/// Columns of the drawing.
const WIDTH: usize = 64;
/// Rows of the drawing; each holds two dots, one above the other.
const HEIGHT: usize = 12;

/// A mark under the axis: a sign at some hours.
pub(super) struct Mark {
    /// The sign.
    pub sign: char,
    /// Where.
    pub hours: Hours,
}

/// Draws a line; nothing where there are no segments.
pub(super) fn chart(line: &BudgetLine, marks: &[Mark]) -> Vec<String> {
    let (Some(first), Some(last)) = (line.segments.first(), line.segments.last()) else {
        return vec![];
    };
    let ends = || line.segments.iter().flat_map(|s| [s.net_from, s.net_to]);
    let low = ends().min().unwrap_or(Fraction::ZERO).floor();
    let high = ends().max().unwrap_or(Fraction::ZERO).ceil().max(low + 1);
    let unit = tick(high - low);
    let low = low.div_euclid(unit) * unit;
    let high = high + (-high).rem_euclid(unit);
    let span = last.to - first.from;
    let levels = 2 * HEIGHT as i128;
    let dots: Vec<i128> = (0..WIDTH)
        .map(|column| {
            let share = Fraction::new(2 * column as i128 + 1, 2 * WIDTH as i128);
            let net = net_at(&line.segments, first.from + span * share);
            let level = (net - Fraction::whole(low)) * Fraction::new(levels, high - low);
            level.floor().clamp(0, levels - 1)
        })
        .collect();
    let label = |value: i128| format!("{value:>8}");
    let mut rows = vec![];
    for row in 0..HEIGHT {
        let upper = levels - 1 - 2 * row as i128;
        let text: String = dots
            .iter()
            .map(|dot| match upper - dot {
                0 => '▀',
                1 => '▄',
                _ => ' ',
            })
            .collect();
        let name = match row {
            0 => label(high),
            _ if row == HEIGHT / 2 => label((high + low) / 2),
            _ => " ".repeat(8),
        };
        rows.push(format!("{name} │{}", text.trim_end()));
    }
    rows.push(format!("{} └{}", label(low), "─".repeat(WIDTH)));
    let place = |hours: Fraction| -> usize {
        let at = (hours - first.from) / span * Fraction::whole(WIDTH as i128);
        usize::try_from(at.floor().clamp(0, WIDTH as i128 - 1)).unwrap_or(0)
    };
    let mut signs = vec![' '; WIDTH];
    for mark in marks {
        signs[place(mark.hours.as_fraction())] = mark.sign;
    }
    if !marks.is_empty() {
        let signs: String = signs.into_iter().collect();
        rows.push(format!("{}{}", " ".repeat(10), signs.trim_end()));
    }
    let mut hours = String::new();
    let up_to = last.to.floor();
    let step = (up_to / 8).max(1);
    for hour in (0..=up_to).step_by(usize::try_from(step).unwrap_or(1)) {
        let hour = Fraction::whole(hour);
        if hour < first.from {
            continue;
        }
        let at = place(hour);
        if hours.chars().count() <= at {
            hours.push_str(&" ".repeat(at - hours.chars().count()));
            hours.push_str(&hour.decimal(0));
        }
    }
    rows.push(format!("{}{hours} hours", " ".repeat(10)));
    rows
}

/// Net income at some hours, along the segment that holds them.
fn net_at(segments: &[Segment], hours: Fraction) -> Fraction {
    let segment = segments
        .iter()
        .find(|segment| hours <= segment.to)
        .or(segments.last());
    let Some(segment) = segment else {
        return Fraction::ZERO;
    };
    let length = segment.to - segment.from;
    if length.is_zero() {
        return segment.net_to;
    }
    segment.net_from + (segment.net_to - segment.net_from) * ((hours - segment.from) / length)
}

/// A round sum of which the axis shows a few.
fn tick(span: i128) -> i128 {
    let mut unit = 1;
    while unit * 10 <= span {
        unit *= 10;
    }
    match span / unit {
        0..=1 => (unit / 5).max(1),
        2..=4 => (unit / 2).max(1),
        _ => unit,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::batch::fixture::assessment;

    fn segment(from: i128, to: i128, net_from: i128, net_to: i128) -> Segment {
        let line = &assessment().earners[0].lines[0];
        Segment {
            from: Fraction::whole(from),
            to: Fraction::whole(to),
            net_from: Fraction::whole(net_from),
            net_to: Fraction::whole(net_to),
            ..line.segments[0].clone()
        }
    }

    #[test]
    fn a_rise_a_cliff_and_a_slower_rise() {
        let mut line = assessment().earners[0].lines[0].clone();
        line.segments = vec![
            segment(0, 16, 800, 1250),
            segment(16, 24, 1000, 1100),
            segment(24, 48, 1100, 1600),
        ];
        let mark = |sign, hours| Mark {
            sign,
            hours: Hours::whole(hours),
        };
        let rows = chart(&line, &[mark('T', 16), mark('1', 30)]);
        insta::assert_snapshot!(rows.join("\n"), @r"
        1600 │                                                            ▄▄▀▀
             │                                                       ▄▄▄▀▀
             │                                                   ▄▄▀▀
             │                                               ▄▄▀▀
             │                                           ▄▄▀▀
             │                   ▄▄                 ▄▄▄▀▀
        1200 │                ▄▀▀               ▄▄▀▀
             │             ▄▀▀            ▄▄▄▄▀▀
             │         ▄▄▀▀        ▄▄▄▄▀▀▀
             │      ▄▄▀
             │   ▄▄▀
             │▄▄▀
         800 └────────────────────────────────────────────────────────────────
                                   T                  1
              0       6       12      18      24      30      36      42     48 hours
        ");
    }

    #[test]
    fn the_axis_has_round_ends() {
        assert_eq!([7, 10, 19, 30, 70, 800].map(tick), [1, 2, 2, 5, 10, 100]);
    }
}
