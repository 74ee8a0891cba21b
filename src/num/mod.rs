//! Exact numbers: money in whole minor units, hours in hundredths, fractions of 128-bit integers, and
//! what every rounding means, once. No floats. Imports nothing.

mod fraction;
mod money;
mod rounding;

pub use fraction::Fraction;
pub(crate) use fraction::gcd;
pub use money::{Hours, Money};
pub use rounding::{Direction, divide_rounded, round_to};
