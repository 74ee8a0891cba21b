//! Sums and rates at one number of hours.

use super::types::Point;
use crate::engine::{Curve, ItemKind, Piece, Special};
use crate::num::{Fraction, Hours, Money};

/// What each item is, for the sums of one earner.
#[derive(Clone, Debug)]
pub(super) struct Sums {
    kinds: Vec<(ItemKind, Option<u32>)>,
    /// By item: whether it is part of take-home pay and still not taken from pay.
    apart: Vec<bool>,
    earner: u32,
}

/// The sums of one point, without rates.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Totals {
    pub pay: Money,
    pub take_home: Money,
    pub net: Money,
    pub after_costs: Money,
    pub after_housing: Money,
}

impl Sums {
    pub(super) fn new(special: &Special<'_>, earner: u32) -> Sums {
        Sums {
            kinds: special
                .program()
                .items
                .iter()
                .map(|i| (i.kind, i.adult))
                .collect(),
            apart: vec![],
            earner,
        }
    }

    /// The same, where items of these names are not taken from pay.
    pub(super) fn without(mut self, special: &Special<'_>, names: &[String]) -> Sums {
        let program = special.program();
        let items = program.items.iter();
        self.apart = items
            .map(|item| names.contains(&program.lines[item.line].name))
            .collect();
        self
    }

    /// How an item enters the pay that reaches the person.
    fn in_pay(&self, item: usize) -> i64 {
        let (kind, adult) = self.kinds[item];
        let apart = self.apart.get(item).copied().unwrap_or(false);
        if kind.in_take_home() && self.mine(adult) && !apart {
            kind.sign_in_net()
        } else {
            0
        }
    }

    /// The pay that reaches the person.
    pub(super) fn reaches(&self, items: &[Money]) -> Money {
        let items = items.iter().enumerate();
        items
            .map(|(item, sum)| Money(self.in_pay(item) * sum.0))
            .sum()
    }

    /// The same as a curve.
    pub(super) fn reaches_curve(&self, items: &[Curve]) -> Curve {
        let weights = (0..self.kinds.len()).map(|item| i128::from(self.in_pay(item)));
        Curve::total(weights.zip(items).filter(|(weight, _)| *weight != 0))
    }

    fn mine(&self, adult: Option<u32>) -> bool {
        adult == Some(self.earner)
    }

    /// E, take-home pay, Y, after costs and left after housing, each the sum of rounded items (design section 2).
    pub(super) fn totals(&self, items: &[Money]) -> Totals {
        let mut t = Totals::default();
        for ((kind, adult), amount) in self.kinds.iter().zip(items) {
            let signed = Money(kind.sign_in_net() * amount.0);
            if *kind == ItemKind::Pay && self.mine(*adult) {
                t.pay += *amount;
            }
            if kind.in_take_home() && self.mine(*adult) {
                t.take_home += signed;
            }
            t.net += signed;
            match kind {
                ItemKind::Cost => t.after_costs += -*amount,
                ItemKind::Housing => t.after_housing += -*amount,
                ItemKind::Pay
                | ItemKind::Income
                | ItemKind::Tax
                | ItemKind::Contribution
                | ItemKind::Pension
                | ItemKind::Loan
                | ItemKind::Benefit
                | ItemKind::Passport
                | ItemKind::Employer => {}
            }
        }
        t.after_costs += t.net;
        t.after_housing += t.after_costs;
        t
    }

    pub(super) fn kind(&self, item: usize) -> ItemKind {
        self.kinds[item].0
    }

    /// How an item enters what is left: 1 adds, −1 comes off, 0 stays out (passports, what the employer pays).
    pub(super) fn sign(&self, item: usize) -> i64 {
        match self.kinds[item].0 {
            ItemKind::Cost | ItemKind::Housing => -1,
            kind => kind.sign_in_net(),
        }
    }

    fn weighted(&self, piece: &[Curve], weight: impl Fn(ItemKind, Option<u32>) -> i64) -> Curve {
        let weights: Vec<i64> = self
            .kinds
            .iter()
            .map(|(kind, adult)| weight(*kind, *adult))
            .collect();
        Curve::total(
            weights
                .iter()
                .zip(piece)
                .filter(|(w, _)| **w != 0)
                .map(|(w, c)| (i128::from(*w), c)),
        )
    }

    /// E as a curve.
    pub(super) fn pay_curve(&self, items: &[Curve]) -> Curve {
        self.weighted(items, |kind, adult| {
            i64::from(kind == ItemKind::Pay && self.mine(adult))
        })
    }

    /// Y as a curve.
    pub(super) fn net_curve(&self, items: &[Curve]) -> Curve {
        self.weighted(items, |kind, _| kind.sign_in_net())
    }

    /// After costs as a curve.
    pub(super) fn after_costs_curve(&self, items: &[Curve]) -> Curve {
        self.weighted(items, |kind, _| {
            if kind == ItemKind::Cost {
                -1
            } else {
                kind.sign_in_net()
            }
        })
    }

    /// The earner's own pension payments as a curve.
    pub(super) fn pension_curve(&self, items: &[Curve]) -> Curve {
        self.weighted(items, |kind, adult| {
            i64::from(kind == ItemKind::Pension && self.mine(adult))
        })
    }

    /// Whether any item of this kind is above zero.
    pub(super) fn has(&self, kind: ItemKind, items: &[Money]) -> bool {
        self.kinds
            .iter()
            .zip(items)
            .any(|((k, _), amount)| *k == kind && amount.0 != 0)
    }
}

/// A piece with its sums as curves.
#[derive(Clone, Debug)]
pub(super) struct Stretch {
    pub from: Fraction,
    pub to: Fraction,
    pub pay: Curve,
    pub net: Curve,
    pub after_costs: Curve,
    pub pension: Curve,
    /// The pay that reaches the person.
    pub reaches: Curve,
}

impl Stretch {
    pub(super) fn new(sums: &Sums, piece: &Piece) -> Stretch {
        Stretch {
            from: piece.from,
            to: piece.to,
            pay: sums.pay_curve(&piece.items),
            net: sums.net_curve(&piece.items),
            after_costs: sums.after_costs_curve(&piece.items),
            pension: sums.pension_curve(&piece.items),
            reaches: sums.reaches_curve(&piece.items),
        }
    }

    /// Marginal effective tax rate at a point, 1 − dY/dE (methods section 5, the limit of the arc form); none where pay does not change.
    pub(super) fn metr(&self, curve: &Curve, at: Fraction) -> Option<Fraction> {
        let pay = self.pay.slope(at);
        (!pay.is_zero()).then(|| Fraction::ONE - curve.slope(at) / pay)
    }
}

/// Participation tax rate, 1 − [Y(h) − Y(0)] / E(h) (OECD, effective tax rate on entering employment); none without pay.
pub fn participation_rate(net: Money, net_at_zero: Money, pay: Money) -> Option<Fraction> {
    (pay.0 > 0).then(|| {
        Fraction::ONE - Fraction::new(i128::from((net - net_at_zero).0), i128::from(pay.0))
    })
}

/// Replacement rate, Y(0) / Y(h); none where Y(h) is not above zero.
pub(super) fn replacement_rate(net: Money, net_at_zero: Money) -> Option<Fraction> {
    (net.0 > 0).then(|| Fraction::new(i128::from(net_at_zero.0), i128::from(net.0)))
}

/// A whole point. `stretch` is the one that starts at or before the hours; none on the last point.
pub(super) fn point(
    sums: &Sums,
    hours: Hours,
    items: Vec<Money>,
    at_zero: &Totals,
    stretch: Option<&Stretch>,
) -> Point {
    let t = sums.totals(&items);
    let here = hours.as_fraction();
    Point {
        hours,
        pay: t.pay,
        take_home: t.take_home,
        net: t.net,
        after_costs: t.after_costs,
        after_housing: t.after_housing,
        ptr: participation_rate(t.net, at_zero.net, t.pay),
        ptr_after_costs: participation_rate(t.after_costs, at_zero.after_costs, t.pay),
        replacement: replacement_rate(t.net, at_zero.net),
        metr_here: stretch.and_then(|s| s.metr(&s.net, here)),
        metr_here_after_costs: stretch.and_then(|s| s.metr(&s.after_costs, here)),
        items,
    }
}
