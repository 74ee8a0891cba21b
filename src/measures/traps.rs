//! Traps and no-gain stretches of a budget line.

use super::points::Stretch;
use super::turns::minor;
use super::types::{NoGain, Trap};
use crate::engine::Curve;
use crate::num::Fraction;

/// Ranges of hours where a curve is below its highest value at fewer hours by more than one currency unit somewhere inside. `at_zero` is the
/// value at zero hours.
pub(super) fn traps(
    stretches: &[Stretch],
    curve: impl Fn(&Stretch) -> Curve,
    at_zero: Fraction,
) -> Vec<Trap> {
    struct Open {
        from: Fraction,
        peak: Fraction,
        lowest: Fraction,
    }
    let mut out = Vec::new();
    let mut peak = at_zero;
    let mut open: Option<Open> = None;
    let close = |open: &mut Option<Open>, to: Option<Fraction>, out: &mut Vec<Trap>| {
        if let Some(trap) = open.take()
            && trap.peak - trap.lowest > Fraction::ONE
        {
            out.push(Trap {
                from: trap.from,
                to,
                peak: minor(trap.peak),
                depth: minor(trap.peak - trap.lowest),
            });
        }
    };
    for stretch in stretches {
        let c = curve(stretch);
        let start = c.at(stretch.from);
        let mut here = stretch.from;
        // At the start of a stretch the curve may have jumped.
        match &mut open {
            None if start < peak => {
                open = Some(Open {
                    from: here,
                    peak,
                    lowest: start,
                })
            }
            Some(trap) if start >= trap.peak => {
                close(&mut open, Some(here), &mut out);
                peak = start;
            }
            Some(trap) => trap.lowest = trap.lowest.min(start),
            None => peak = peak.max(start),
        }
        // Inside, the curve turns at most once (degree two).
        let vertex = (c.c[2] != 0)
            .then(|| Fraction::new(-c.c[1], 2 * c.c[2]))
            .filter(|v| *v > stretch.from && *v < stretch.to);
        for to in vertex.into_iter().chain([stretch.to]) {
            let end = c.at(to);
            match &mut open {
                Some(trap) if end >= trap.peak => {
                    let level = trap.peak;
                    let back = c.crosses(level, here, to).unwrap_or(to);
                    close(&mut open, Some(back), &mut out);
                    peak = peak.max(end);
                }
                Some(trap) => trap.lowest = trap.lowest.min(end),
                None if end < peak => {
                    // It falls from the highest value on.
                    open = Some(Open {
                        from: here,
                        peak,
                        lowest: end,
                    });
                }
                None => peak = peak.max(end),
            }
            here = to;
        }
    }
    close(&mut open, None, &mut out);
    out
}

/// Stretches where pay rises and a curve neither rises nor falls; neighbours at one level are joined.
pub(super) fn no_gain(stretches: &[Stretch], curve: impl Fn(&Stretch) -> Curve) -> Vec<NoGain> {
    let mut out: Vec<NoGain> = Vec::new();
    let mut level = Fraction::ZERO;
    for stretch in stretches {
        let c = curve(stretch);
        let rises = stretch.pay.c[1] != 0 || stretch.pay.c[2] != 0;
        if !rises || c.c[1] != 0 || c.c[2] != 0 {
            continue;
        }
        let here = c.at(stretch.from);
        match out.last_mut() {
            Some(last) if last.to == stretch.from && level == here => last.to = stretch.to,
            _ => out.push(NoGain {
                from: stretch.from,
                to: stretch.to,
            }),
        }
        level = here;
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Stretches of one hour each with the net income at both ends, in whole currency units; pay is 10 an hour.
    fn line(ends: &[(i128, i128)]) -> Vec<Stretch> {
        let still = Curve {
            c: [0, 0, 0],
            scale: 1,
        };
        ends.iter()
            .enumerate()
            .map(|(at, (start, end))| {
                let (at, slope) = (at as i128, end - start);
                let net = Curve {
                    c: [start - slope * at, slope, 0],
                    scale: 1,
                };
                let pay = Curve {
                    c: [0, 10, 0],
                    scale: 1,
                };
                Stretch {
                    from: Fraction::whole(at),
                    to: Fraction::whole(at + 1),
                    pay,
                    net,
                    after_costs: net,
                    pension: still,
                    reaches: still,
                }
            })
            .collect()
    }

    fn found(ends: &[(i128, i128)]) -> Vec<(String, String, i64, i64)> {
        traps(&line(ends), |s| s.net, Fraction::whole(ends[0].0))
            .into_iter()
            .map(|t| {
                (
                    t.from.decimal(2),
                    t.to.map_or_else(String::new, |to| to.decimal(2)),
                    t.peak.0,
                    t.depth.0,
                )
            })
            .collect()
    }

    fn trap(from: &str, to: &str, peak: i64, depth: i64) -> (String, String, i64, i64) {
        (from.to_owned(), to.to_owned(), peak * 100, depth * 100)
    }

    #[test]
    fn a_fall_is_regained_where_the_line_comes_back() {
        assert_eq!(
            found(&[(100, 120), (110, 130)]),
            [trap("1.00", "1.50", 120, 10)]
        );
        assert_eq!(
            found(&[(100, 120), (110, 115)]),
            [trap("1.00", "", 120, 10)]
        );
        // One currency unit is no trap.
        assert_eq!(found(&[(100, 120), (119, 130)]), []);
    }

    #[test]
    fn a_jump_out_of_a_trap_is_the_new_peak() {
        // Regained by a jump to 150, from where the line falls to 130, which is still above the old peak.
        assert_eq!(
            found(&[(100, 120), (110, 115), (150, 130)]),
            [trap("1.00", "2.00", 120, 10), trap("2.00", "", 150, 20)]
        );
        // A jump back to the peak itself, then a slow fall.
        assert_eq!(
            found(&[(100, 120), (110, 115), (120, 110)]),
            [trap("1.00", "2.00", 120, 10), trap("2.00", "", 120, 10)]
        );
    }

    #[test]
    fn flat_stretches_join_at_one_level_only() {
        let flat = |ends: &[(i128, i128)]| -> Vec<(String, String)> {
            no_gain(&line(ends), |s| s.net)
                .into_iter()
                .map(|n| (n.from.decimal(0), n.to.decimal(0)))
                .collect()
        };
        let pair = |from: &str, to: &str| (from.to_owned(), to.to_owned());
        assert_eq!(
            flat(&[(100, 100), (100, 100), (100, 110)]),
            [pair("0", "2")]
        );
        // A jump between them is a gain or a loss.
        assert_eq!(
            flat(&[(100, 100), (130, 130)]),
            [pair("0", "1"), pair("1", "2")]
        );
    }
}
