//! Money and hours as whole numbers of their smallest printed unit.

use super::Fraction;
use serde::{Deserialize, Serialize};
use std::iter::Sum;
use std::ops::{Add, AddAssign, Neg, Sub};

/// Money in whole minor units (pence, cents) of the currency, in the statement period unless said otherwise.
#[derive(
    Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize,
)]
pub struct Money(pub i64);

impl Money {
    /// No money.
    pub const ZERO: Money = Money(0);

    /// This sum as a fraction of the currency unit.
    pub fn in_units(self) -> Fraction {
        Fraction::new(i128::from(self.0), 100)
    }

    /// As text with two decimals, a point and no grouping: `-1234.50`.
    pub fn plain(self) -> String {
        let sign = if self.0 < 0 { "-" } else { "" };
        let size = self.0.unsigned_abs();
        format!("{sign}{}.{:02}", size / 100, size % 100)
    }
}

impl Add for Money {
    type Output = Money;
    fn add(self, other: Money) -> Money {
        Money(self.0 + other.0)
    }
}
impl AddAssign for Money {
    fn add_assign(&mut self, other: Money) {
        self.0 += other.0;
    }
}
impl Sub for Money {
    type Output = Money;
    fn sub(self, other: Money) -> Money {
        Money(self.0 - other.0)
    }
}
impl Neg for Money {
    type Output = Money;
    fn neg(self) -> Money {
        Money(-self.0)
    }
}
impl Sum for Money {
    fn sum<I: Iterator<Item = Money>>(values: I) -> Money {
        values.fold(Money::ZERO, Add::add)
    }
}

/// Hours a week, in whole hundredths of an hour.
#[derive(
    Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize,
)]
pub struct Hours(pub i64);

impl Hours {
    /// Whole hours a week.
    pub const fn whole(hours: i64) -> Hours {
        Hours(hours * 100)
    }

    /// As a fraction of an hour.
    pub fn as_fraction(self) -> Fraction {
        Fraction::new(i128::from(self.0), 100)
    }

    /// As text without needless zeros: `16`, `37.5`, `12.25`.
    pub fn plain(self) -> String {
        let sign = if self.0 < 0 { "-" } else { "" };
        let size = self.0.unsigned_abs();
        match (size / 100, size % 100) {
            (whole, 0) => format!("{sign}{whole}"),
            (whole, part) if part % 10 == 0 => format!("{sign}{whole}.{}", part / 10),
            (whole, part) => format!("{sign}{whole}.{part:02}"),
        }
    }
}
