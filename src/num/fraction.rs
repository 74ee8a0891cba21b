//! Exact fractions of 128-bit integers, always in lowest terms with a denominator above zero.

use num_bigint::BigInt;
use num_traits::{Signed, Zero};
use serde::{Deserialize, Serialize};
use std::cmp::Ordering;
use std::fmt;
use std::ops::{Add, Div, Mul, Neg, Sub};

/// An exact fraction. Its arithmetic panics where a result does not fit into 128 bits: sizes are bounded when a
/// pack is checked, so that would be a fault of this program.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Serialize, Deserialize)]
pub struct Fraction {
    numerator: i128,
    denominator: i128,
}

/// The greatest common divisor; 0 only for two zeros.
pub(crate) fn gcd(a: i128, b: i128) -> i128 {
    let (mut a, mut b) = (a.unsigned_abs(), b.unsigned_abs());
    while b != 0 {
        // A division of 64 bits is several times faster, and most numbers get there at once.
        if let (Ok(mut x), Ok(mut y)) = (u64::try_from(a), u64::try_from(b)) {
            while y != 0 {
                (x, y) = (y, x % y);
            }
            return i128::from(x);
        }
        (a, b) = (b, a % b);
    }
    i128::try_from(a).expect("a common divisor fits")
}

impl Fraction {
    /// Nothing.
    pub const ZERO: Fraction = Fraction {
        numerator: 0,
        denominator: 1,
    };
    /// One.
    pub const ONE: Fraction = Fraction {
        numerator: 1,
        denominator: 1,
    };

    /// `numerator / denominator` in lowest terms.
    ///
    /// # Panics
    /// Where the denominator is zero.
    pub fn new(numerator: i128, denominator: i128) -> Fraction {
        assert!(denominator != 0, "a fraction needs a denominator");
        let common = gcd(numerator, denominator);
        let sign = if denominator < 0 { -1 } else { 1 };
        Fraction {
            numerator: sign * numerator / common,
            denominator: sign * denominator / common,
        }
    }

    /// A whole number.
    pub const fn whole(value: i128) -> Fraction {
        Fraction {
            numerator: value,
            denominator: 1,
        }
    }

    /// The numerator in lowest terms.
    pub fn numerator(self) -> i128 {
        self.numerator
    }

    /// The denominator in lowest terms, above zero.
    pub fn denominator(self) -> i128 {
        self.denominator
    }

    /// The largest whole number not above it.
    pub fn floor(self) -> i128 {
        self.numerator.div_euclid(self.denominator)
    }

    /// The smallest whole number not below it.
    pub fn ceil(self) -> i128 {
        -(-self.numerator).div_euclid(self.denominator)
    }

    /// Whether it is zero.
    pub fn is_zero(self) -> bool {
        self.numerator == 0
    }

    /// Whether it is below zero.
    pub fn is_negative(self) -> bool {
        self.numerator < 0
    }

    /// The sum, or none where it does not fit.
    pub fn checked_add(self, other: Fraction) -> Option<Fraction> {
        let common = gcd(self.denominator, other.denominator);
        let (left, right) = (other.denominator / common, self.denominator / common);
        let numerator =
            (self.numerator.checked_mul(left)?).checked_add(other.numerator.checked_mul(right)?)?;
        Some(Fraction::new(
            numerator,
            self.denominator.checked_mul(left)?,
        ))
    }

    /// The product, or none where it does not fit.
    pub fn checked_mul(self, other: Fraction) -> Option<Fraction> {
        let (first, second) = (
            gcd(self.numerator, other.denominator).max(1),
            gcd(other.numerator, self.denominator).max(1),
        );
        let numerator = (self.numerator / first).checked_mul(other.numerator / second)?;
        Some(Fraction::new(
            numerator,
            (self.denominator / second).checked_mul(other.denominator / first)?,
        ))
    }

    /// The point half way to the other.
    pub fn midpoint(self, other: Fraction) -> Fraction {
        (self + other) / Fraction::whole(2)
    }

    /// How many of `1 / parts` it is, rounded half up.
    ///
    /// # Panics
    /// Where the result does not fit.
    pub fn rounded(self, parts: i128) -> i128 {
        if let Some(scaled) = self.numerator.checked_mul(parts) {
            return super::divide_rounded(scaled, self.denominator, super::Direction::HalfUp);
        }
        // ⌊(2 n p + d) / 2 d⌋, for sizes that 128 bits do not hold.
        let (n, d) = (BigInt::from(self.numerator), BigInt::from(self.denominator));
        let (top, bottom): (BigInt, BigInt) = (n * parts * 2 + &d, d * 2);
        let floor = &top / &bottom - i32::from(top.is_negative() && !(&top % &bottom).is_zero());
        i128::try_from(floor).expect("a bounded value fits")
    }

    /// As text with this many decimals, rounded half up away from zero, without a `-0`.
    pub fn decimal(self, places: u32) -> String {
        let scale = 10i128.pow(places);
        let size = if self.is_negative() { -self } else { self };
        let scaled = size.rounded(scale);
        let sign = if self.numerator < 0 && scaled != 0 {
            "-"
        } else {
            ""
        };
        if places == 0 {
            return format!("{sign}{scaled}");
        }
        format!(
            "{sign}{}.{:0width$}",
            scaled / scale,
            scaled % scale,
            width = places as usize
        )
    }
}

impl Add for Fraction {
    type Output = Fraction;
    fn add(self, other: Fraction) -> Fraction {
        let common = gcd(self.denominator, other.denominator);
        let (left, right) = (other.denominator / common, self.denominator / common);
        Fraction::new(
            self.numerator * left + other.numerator * right,
            self.denominator * left,
        )
    }
}
impl Neg for Fraction {
    type Output = Fraction;
    fn neg(self) -> Fraction {
        Fraction {
            numerator: -self.numerator,
            denominator: self.denominator,
        }
    }
}
impl Sub for Fraction {
    type Output = Fraction;
    fn sub(self, other: Fraction) -> Fraction {
        self + -other
    }
}
impl Mul for Fraction {
    type Output = Fraction;
    fn mul(self, other: Fraction) -> Fraction {
        let (first, second) = (
            gcd(self.numerator, other.denominator).max(1),
            gcd(other.numerator, self.denominator).max(1),
        );
        Fraction::new(
            (self.numerator / first) * (other.numerator / second),
            (self.denominator / second) * (other.denominator / first),
        )
    }
}
impl Div for Fraction {
    type Output = Fraction;
    /// # Panics
    /// Where the other is zero.
    fn div(self, other: Fraction) -> Fraction {
        assert!(!other.is_zero(), "a division needs a divisor");
        self * Fraction::new(other.denominator, other.numerator)
    }
}
impl PartialOrd for Fraction {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}
impl Ord for Fraction {
    fn cmp(&self, other: &Self) -> Ordering {
        let common = gcd(self.denominator, other.denominator);
        let (left, right) = (other.denominator / common, self.denominator / common);
        if let (Some(a), Some(b)) = (
            self.numerator.checked_mul(left),
            other.numerator.checked_mul(right),
        ) {
            return a.cmp(&b);
        }
        // Whole parts first, then what is left, turned over: nothing grows, so nothing can overflow.
        let (mut a, mut b) = (
            (self.numerator, self.denominator),
            (other.numerator, other.denominator),
        );
        loop {
            let wholes = a.0.div_euclid(a.1).cmp(&b.0.div_euclid(b.1));
            if wholes != Ordering::Equal {
                return wholes;
            }
            match (a.0.rem_euclid(a.1), b.0.rem_euclid(b.1)) {
                (0, rest) => return 0.cmp(&rest),
                (_, 0) => return Ordering::Greater,
                (x, y) => (a, b) = ((b.1, y), (a.1, x)),
            }
        }
    }
}
impl fmt::Debug for Fraction {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}/{}", self.numerator, self.denominator)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn decimals_round_half_away_from_zero() {
        let t = |n, d, places, text: &str| assert_eq!(Fraction::new(n, d).decimal(places), text);
        t(1, 8, 2, "0.13");
        t(-1, 8, 2, "-0.13");
        t(-1, 1000, 2, "0.00");
        t(2, 3, 1, "0.7");
        t(7, 2, 0, "4");
    }

    #[test]
    fn rounding_holds_at_any_size() {
        let fine = i128::MAX / 2;
        // A little below, at and above a half penny, with denominators that leave no room.
        let t = |n, d, expected| assert_eq!(Fraction::new(n, d).rounded(100), expected, "{n}/{d}");
        t(fine - fine / 200, fine, 100);
        t(-(fine / 2), fine, -50);
        t(-(fine / 100 * 3), fine, -3);
        t(1, 200, 1);
        t(-1, 200, 0);
        assert_eq!(Fraction::new(-(fine / 100 * 3), fine).decimal(2), "-0.03");
    }

    #[test]
    fn any_two_compare() {
        let huge = i128::MAX;
        let t = |a: Fraction, b: Fraction, expected: Ordering| {
            assert_eq!(
                (a.cmp(&b), b.cmp(&a)),
                (expected, expected.reverse()),
                "{a:?} {b:?}"
            );
        };
        // 1 − 1/n grows with n.
        t(
            Fraction::new(huge - 2, huge - 1),
            Fraction::new(huge - 1, huge),
            Ordering::Less,
        );
        t(
            Fraction::new(-huge + 2, huge - 1),
            Fraction::new(-huge + 1, huge),
            Ordering::Greater,
        );
        t(
            Fraction::new(huge, huge - 1),
            Fraction::new(huge - 1, huge),
            Ordering::Greater,
        );
        t(
            Fraction::new(huge, 3),
            Fraction::new(huge, 2),
            Ordering::Less,
        );
        t(
            Fraction::new(huge, 2),
            Fraction::new(huge, 2),
            Ordering::Equal,
        );
        t(
            Fraction::new(huge, 2),
            Fraction::whole(huge / 2),
            Ordering::Greater,
        );
        t(
            Fraction::new(-1, huge),
            Fraction::new(1, huge - 1),
            Ordering::Less,
        );
    }

    #[test]
    fn what_does_not_fit_is_none() {
        let large = Fraction::whole(i128::MAX);
        assert_eq!(large.checked_add(Fraction::ONE), None);
        assert_eq!(large.checked_mul(Fraction::whole(2)), None);
        assert_eq!(
            Fraction::new(1, i128::MAX).checked_mul(Fraction::new(1, 2)),
            None
        );
        // What cancels still fits.
        assert_eq!(
            large.checked_mul(Fraction::new(1, i128::MAX)),
            Some(Fraction::ONE)
        );
        assert_eq!(
            Fraction::new(1, 6).checked_add(Fraction::new(1, 3)),
            Some(Fraction::new(1, 2))
        );
    }

    #[test]
    fn floors_and_ceilings_below_zero() {
        assert_eq!(
            (Fraction::new(-7, 2).floor(), Fraction::new(-7, 2).ceil()),
            (-4, -3)
        );
        assert!(Fraction::new(1, 3) + Fraction::new(1, 6) == Fraction::new(1, 2));
        assert!(Fraction::new(-1, 3) < Fraction::new(-1, 4));
    }
}
