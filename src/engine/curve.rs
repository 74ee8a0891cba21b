//! Polynomials in hours of degree two at most, as scaled whole numbers.

use crate::num::{Fraction, gcd};
use num_bigint::BigInt;
use std::cmp::Ordering;

/// `(c[0] + c[1] h + c[2] h²) / scale`, anchored at zero hours.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Curve {
    /// Coefficients, the constant first.
    pub c: [i128; 3],
    /// What they are divided by; above zero.
    pub scale: i128,
}

impl Curve {
    /// The value at these hours. Where it does not fit into 128 bits it is given to a thousand million millionth, or as
    /// finely as its size allows.
    pub fn at(&self, h: Fraction) -> Fraction {
        if self.c[1] == 0 && self.c[2] == 0 {
            return Fraction::new(self.c[0], self.scale);
        }
        if let Some(value) = self.small_at(h) {
            return value;
        }
        let (p, q) = (BigInt::from(h.numerator()), BigInt::from(h.denominator()));
        let [c0, c1, c2] = self.c.map(BigInt::from);
        let numerator = c0 * &q * &q + c1 * &p * &q + c2 * &p * &p;
        let denominator = BigInt::from(self.scale) * &q * &q;
        small_fraction(&numerator, &denominator).unwrap_or_else(|| {
            // As fine as leaves room to reckon with it; large values are the unscaled ones of the walk.
            let mut fine = 1_000_000_000_000_000i128;
            loop {
                let scaled = &numerator * BigInt::from(fine) / &denominator;
                match i128::try_from(scaled) {
                    Ok(scaled) if fine == 1 || scaled.unsigned_abs() >> 100 == 0 => {
                        return Fraction::new(scaled, fine);
                    }
                    Ok(_) | Err(_) if fine > 1 => fine /= 1000,
                    Ok(_) | Err(_) => unreachable!("a bounded value fits"),
                }
            }
        })
    }

    /// The value, where every step on the way fits into 128 bits.
    fn small_at(&self, h: Fraction) -> Option<Fraction> {
        let (p, q) = (h.numerator(), h.denominator());
        if self.c[2] == 0 {
            let numerator = self.c[0]
                .checked_mul(q)?
                .checked_add(self.c[1].checked_mul(p)?)?;
            return Some(Fraction::new(numerator, self.scale.checked_mul(q)?));
        }
        let square = q.checked_mul(q)?;
        let linear = self.c[1].checked_mul(p.checked_mul(q)?)?;
        let quadratic = self.c[2].checked_mul(p.checked_mul(p)?)?;
        let numerator = self.c[0]
            .checked_mul(square)?
            .checked_add(linear)?
            .checked_add(quadratic)?;
        Some(Fraction::new(numerator, self.scale.checked_mul(square)?))
    }

    /// The weighted sum of curves.
    ///
    /// # Panics
    /// Where the common scale does not fit; scales are bounded when a program is made.
    pub fn total<'c>(curves: impl Iterator<Item = (i128, &'c Curve)> + Clone) -> Curve {
        let scale = curves
            .clone()
            .fold(1i128, |s, (_, c)| s / gcd(s, c.scale) * c.scale);
        let mut c = [0i128; 3];
        for (weight, curve) in curves {
            let by = weight * (scale / curve.scale);
            for (sum, part) in c.iter_mut().zip(curve.c) {
                *sum += part * by;
            }
        }
        Curve { c, scale }
    }

    /// The first place after `from`, up to `to`, where the curve crosses a level; the level is taken to a millionth.
    pub fn crosses(&self, level: Fraction, from: Fraction, to: Fraction) -> Option<Fraction> {
        let fine = 1_000_000i128;
        let level = (level * Fraction::whole(fine)).floor();
        let poly = [
            self.c[0] * fine - level * self.scale,
            self.c[1] * fine,
            self.c[2] * fine,
        ];
        let common = gcd(gcd(poly[0], poly[1]), poly[2]).max(1);
        next_change(&poly.map(|v| v / common), from, to)
    }

    /// The slope at these hours.
    pub fn slope(&self, h: Fraction) -> Fraction {
        Curve {
            c: [self.c[1], 2 * self.c[2], 0],
            scale: self.scale,
        }
        .at(h)
    }

    /// The intercept at zero hours of the tangent at these hours: V = Y(h) − Y′(h) h = c0 − c2 h².
    pub fn intercept(&self, h: Fraction) -> Fraction {
        Curve {
            c: [self.c[0], 0, -self.c[2]],
            scale: self.scale,
        }
        .at(h)
    }

    /// Whether two curves are the same function.
    pub fn same(&self, other: &Curve) -> bool {
        if self.scale == other.scale {
            return self.c == other.c;
        }
        (0..3).all(|k| self.c[k] * other.scale == other.c[k] * self.scale)
    }
}

/// Scaled coefficients without their scale, as the walk holds them.
pub(super) type Poly = [i128; 3];

/// Sign of a polynomial at p/q.
pub(super) fn sign_at(c: &Poly, h: Fraction) -> Ordering {
    let (p, q) = (h.numerator(), h.denominator());
    let small = if c[2] == 0 {
        (|| c[0].checked_mul(q)?.checked_add(c[1].checked_mul(p)?))()
    } else {
        (|| {
            let square = q.checked_mul(q)?;
            let constant = c[0].checked_mul(square)?;
            let linear = c[1].checked_mul(p.checked_mul(q)?)?;
            let quadratic = c[2].checked_mul(p.checked_mul(p)?)?;
            constant.checked_add(linear)?.checked_add(quadratic)
        })()
    };
    match small {
        Some(value) => value.cmp(&0),
        None => {
            let (p, q) = (BigInt::from(p), BigInt::from(q));
            let value = BigInt::from(c[0]) * &q * &q
                + BigInt::from(c[1]) * &p * &q
                + BigInt::from(c[2]) * &p * &p;
            value.cmp(&BigInt::from(0))
        }
    }
}

/// Sign just to the right of h.
pub(super) fn sign_right(c: &Poly, h: Fraction) -> Ordering {
    if c[1] == 0 && c[2] == 0 {
        return c[0].cmp(&0);
    }
    match sign_at(c, h) {
        Ordering::Equal if c[2] == 0 => c[1].cmp(&0),
        Ordering::Equal => match sign_at(&[c[1], 2 * c[2], 0], h) {
            Ordering::Equal => c[2].cmp(&0),
            sign => sign,
        },
        sign => sign,
    }
}

/// Denominator of the isolating grid of irrational roots: they are known to less than a four thousand millionth of an hour.
const FINE: i128 = 1 << 32;

/// The first place after `h`, before or at `end`, where the sign differs from the one just right of `h`. For an irrational root it
/// is the upper end of its isolating interval. None where there is no such place, or it is not before `end`.
pub(super) fn next_change(c: &Poly, h: Fraction, end: Fraction) -> Option<Fraction> {
    if c[1] == 0 && c[2] == 0 {
        return None;
    }
    if c[2] == 0 {
        let start = sign_right(c, h);
        // The sign at the end decides cheaply whether the one root lies before it.
        if sign_at(c, end) == start {
            return None;
        }
        return Some(Fraction::new(-c[0], c[1])).filter(|root| *root > h && *root <= end);
    }
    let vertex = Fraction::new(-c[1], 2 * c[2]);
    let mut from = h;
    for to in [vertex, end] {
        if to <= from || to > end {
            continue;
        }
        let start = sign_right(c, from);
        if start != Ordering::Equal && sign_at(c, to) != start {
            return Some(crossing(c, from, to, start));
        }
        from = to;
    }
    None
}

/// The root in (from, to] of a quadratic that is monotone there.
fn crossing(c: &Poly, from: Fraction, to: Fraction, start: Ordering) -> Fraction {
    // A perfect square under the root makes the root rational.
    let disc = BigInt::from(c[1]) * BigInt::from(c[1])
        - BigInt::from(4) * BigInt::from(c[0]) * BigInt::from(c[2]);
    if disc >= BigInt::from(0) {
        let root = disc.sqrt();
        if &root * &root == disc {
            for signed in [root.clone(), -root] {
                let numerator = -BigInt::from(c[1]) + signed;
                let denominator = BigInt::from(2) * BigInt::from(c[2]);
                if let Some(exact) = small_fraction(&numerator, &denominator)
                    && exact > from
                    && exact <= to
                {
                    return exact;
                }
            }
        }
    }
    let (mut low, mut high) = (
        (from * Fraction::whole(FINE)).floor(),
        (to * Fraction::whole(FINE)).ceil(),
    );
    while high - low > 1 {
        let middle = low + (high - low) / 2;
        let at = Fraction::new(middle, FINE);
        if at > from && sign_at(c, at) != start {
            high = middle;
        } else {
            low = middle;
        }
    }
    Fraction::new(high, FINE).min(to)
}

fn small_fraction(numerator: &BigInt, denominator: &BigInt) -> Option<Fraction> {
    let mut a = numerator.magnitude().clone();
    let mut b = denominator.magnitude().clone();
    let zero = num_bigint::BigUint::from(0u8);
    while b != zero {
        let rest = &a % &b;
        a = std::mem::replace(&mut b, rest);
    }
    let common = BigInt::from(a.max(num_bigint::BigUint::from(1u8)));
    let n = i128::try_from(numerator / &common).ok()?;
    let d = i128::try_from(denominator / &common).ok()?;
    Some(Fraction::new(n, d))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_too_large_for_exact_fractions_are_near() {
        let unit = 10i128.pow(12);
        let curve = Curve {
            c: [3 * unit, 2 * unit, unit],
            scale: 1,
        };
        // (1 + h)² + 2 at a place with a large denominator, in units of a million million.
        let h = Fraction::whole(47) + Fraction::new(1, 1 << 61);
        let nearly = curve.at(h);
        assert_eq!(nearly.floor(), 2306 * unit);
        assert!(nearly - Fraction::whole(2306 * unit) < Fraction::new(1, 1000));
        assert_eq!(curve.slope(Fraction::whole(2)), Fraction::whole(6 * unit));
        // The tangent at 2 hours: 11 − 6 × 2.
        assert_eq!(curve.intercept(Fraction::whole(2)), Fraction::whole(-unit));
    }
}
