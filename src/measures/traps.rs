//! Traps and no-gain stretches of a budget line.

use super::points::Stretch;
use super::turns::minor;
use super::types::{NoGain, Trap};
use crate::engine::Curve;
use crate::num::Fraction;

/// Ranges of hours where a curve is below its highest value at fewer hours by more than one currency unit somewhere inside. `at_zero` is the
/// value at zero hours.
pub(super) fn traps(stretches: &[Stretch], curve: impl Fn(&Stretch) -> Curve, at_zero: Fraction) -> Vec<Trap> {
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
            out.push(Trap { from: trap.from, to, peak: minor(trap.peak), depth: minor(trap.peak - trap.lowest) });
        }
    };
    for stretch in stretches {
        let c = curve(stretch);
        let start = c.at(stretch.from);
        let mut here = stretch.from;
        // At the start of a stretch the curve may have jumped.
        match &mut open {
            None if start < peak => open = Some(Open { from: here, peak, lowest: start }),
            Some(trap) if start >= trap.peak => close(&mut open, Some(here), &mut out),
            Some(trap) => trap.lowest = trap.lowest.min(start),
            None => peak = peak.max(start),
        }
        // Inside, the curve turns at most once (degree two).
        let vertex = (c.c[2] != 0).then(|| Fraction::new(-c.c[1], 2 * c.c[2])).filter(|v| *v > stretch.from && *v < stretch.to);
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
                    open = Some(Open { from: here, peak, lowest: end });
                }
                None => peak = peak.max(end),
            }
            here = to;
        }
    }
    close(&mut open, None, &mut out);
    out
}

/// Stretches where pay rises and a curve neither rises nor falls; neighbours are joined.
pub(super) fn no_gain(stretches: &[Stretch], curve: impl Fn(&Stretch) -> Curve) -> Vec<NoGain> {
    let mut out: Vec<NoGain> = Vec::new();
    for stretch in stretches {
        let c = curve(stretch);
        let rises = stretch.pay.c[1] != 0 || stretch.pay.c[2] != 0;
        if !rises || c.c[1] != 0 || c.c[2] != 0 {
            continue;
        }
        match out.last_mut() {
            Some(last) if last.to == stretch.from => last.to = stretch.to,
            _ => out.push(NoGain { from: stretch.from, to: stretch.to }),
        }
    }
    out
}
