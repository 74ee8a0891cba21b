//! Rounding, once for the whole program.

use serde::{Deserialize, Serialize};

/// Which way a rounding goes.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
pub enum Direction {
    /// To the next multiple at or above.
    Up,
    /// To the next multiple at or below.
    Down,
    /// To the nearest; a half goes up.
    HalfUp,
    /// To the nearest; a half goes down.
    HalfDown,
    /// To the nearest; a half goes to the even multiple.
    HalfEven,
}

/// `numerator / denominator` as a whole number, rounded.
///
/// # Panics
/// Where the denominator is not above zero, or the result does not fit.
pub fn divide_rounded(numerator: i128, denominator: i128, direction: Direction) -> i128 {
    assert!(denominator > 0, "a rounding needs a denominator above zero");
    // Most numbers are small, and a division of 64 bits is several times faster.
    let (floor, rest) = match (i64::try_from(numerator), i64::try_from(denominator)) {
        (Ok(n), Ok(d)) => (i128::from(n.div_euclid(d)), i128::from(n.rem_euclid(d))),
        (_, _) => (
            numerator.div_euclid(denominator),
            numerator.rem_euclid(denominator),
        ),
    };
    if rest == 0 {
        return floor;
    }
    let up = match direction {
        Direction::Up => true,
        Direction::Down => false,
        Direction::HalfUp => rest >= denominator - rest,
        Direction::HalfDown => rest > denominator - rest,
        Direction::HalfEven => match rest.cmp(&(denominator - rest)) {
            std::cmp::Ordering::Greater => true,
            std::cmp::Ordering::Less => false,
            std::cmp::Ordering::Equal => floor.rem_euclid(2) == 1,
        },
    };
    if up { floor + 1 } else { floor }
}

/// The multiple of `unit` that `value` is rounded to.
///
/// # Panics
/// Where the unit is not above zero.
pub fn round_to(value: i128, unit: i128, direction: Direction) -> i128 {
    divide_rounded(value, unit, direction) * unit
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_direction_at_and_beside_the_half() {
        let t = |n: i128, expected: [i128; 5]| {
            let all = [
                Direction::Up,
                Direction::Down,
                Direction::HalfUp,
                Direction::HalfDown,
                Direction::HalfEven,
            ];
            assert_eq!(all.map(|d| divide_rounded(n, 10, d)), expected, "{n}/10");
        };
        t(0, [0, 0, 0, 0, 0]);
        t(1, [1, 0, 0, 0, 0]);
        t(5, [1, 0, 1, 0, 0]);
        t(6, [1, 0, 1, 1, 1]);
        t(10, [1, 1, 1, 1, 1]);
        t(15, [2, 1, 2, 1, 2]);
        t(-1, [0, -1, 0, 0, 0]);
        t(-5, [0, -1, 0, -1, 0]);
        t(-15, [-1, -2, -1, -2, -2]);
        t(-16, [-1, -2, -2, -2, -2]);
    }
}
