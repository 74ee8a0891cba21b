//! A household's results, made up so that every sum can be done in the head. For tests alone.

use crate::measures::{
    Assessment, BudgetLine, Cause, EarnerResult, Effect, ItemInfo, ItemKind, JobTerms, NoGain,
    Point, Segment, Settled, Trap, Turn, TurnKind,
};
use crate::num::{Fraction, Hours, Money};

fn point(hours: i64, pay: i64, tax: i64, benefit: i64) -> Point {
    let net = pay - tax + benefit;
    Point {
        hours: Hours::whole(hours),
        pay: Money(pay),
        items: vec![Money(pay), Money(tax), Money(0), Money(benefit)],
        take_home: Money(pay - tax),
        net: Money(net),
        after_costs: Money(net - 1000),
        after_housing: Money(net - 51_000),
        ptr: (pay > 0).then(|| Fraction::new(1, 3)),
        ptr_after_costs: (pay > 0).then(|| Fraction::new(2, 3)),
        replacement: Some(Fraction::new(1, 2)),
        metr_here: Some(Fraction::new(11, 20)),
        metr_here_after_costs: None,
    }
}

fn item(name: &str, kind: ItemKind, adult: Option<usize>) -> ItemInfo {
    ItemInfo {
        name: name.into(),
        kind,
        adult,
        law: "Invented Act s. 1".into(),
        part: "Invented Tax".into(),
    }
}

fn whole(value: i128) -> Fraction {
    Fraction::whole(value)
}

/// One earner, today's job and an offer, an invented tax and an invented benefit.
pub(crate) fn assessment() -> Assessment {
    let line = BudgetLine {
        terms: JobTerms {
            offer: String::new(),
            reference: String::new(),
            wage: 122_100,
            hours: Hours::whole(2),
            facts: vec![],
        },
        grid: vec![
            point(0, 0, 0, 50_000),
            point(1, 1000, 0, 50_000),
            point(2, 2000, 100, 49_500),
            point(3, 3000, 200, 49_000),
        ],
        own: 2,
        step_to: 3,
        first_minute: Money(49_000),
        turns: vec![Turn {
            kind: TurnKind::Cliff,
            at: Fraction::new(3, 2),
            hours: Hours(150),
            pay: Money(1500),
            net_before: Money(51_500),
            net_after: Money(50_300),
            after_costs_before: Money(50_500),
            after_costs_after: Money(49_300),
            size: Money(-1200),
            metr_before: Some(Fraction::ZERO),
            metr_after: Some(Fraction::new(11, 20)),
            causes: vec![Cause {
                part: "Invented Benefit".into(),
                line: "work_limit".into(),
            }],
            effects: vec![
                Effect {
                    item: 3,
                    jump: Money(-1200),
                    slope: Fraction::new(-1, 2),
                },
                Effect {
                    item: 1,
                    jump: Money::ZERO,
                    slope: Fraction::new(-1, 10),
                },
            ],
        }],
        segments: vec![Segment {
            from: whole(0),
            to: whole(3),
            pay_from: whole(0),
            pay_to: whole(30),
            net_from: whole(500),
            net_to: whole(518),
            after_costs_from: whole(490),
            after_costs_to: whole(508),
            metr: Some(Fraction::new(2, 5)),
            metr_after_costs: None,
            pension_share: Fraction::ZERO,
            shares: vec![],
            virtual_income: whole(500),
        }],
        traps: vec![Trap {
            from: Fraction::new(3, 2),
            to: None,
            peak: Money(51_500),
            depth: Money(1200),
        }],
        no_gain: vec![NoGain {
            from: whole(0),
            to: Fraction::new(1, 3),
        }],
        up_to: Hours::whole(3),
        has_costs: false,
    };
    let offer = BudgetLine {
        terms: JobTerms {
            offer: "evening shift".into(),
            reference: "=shift".into(),
            wage: 122_125,
            hours: Hours::whole(3),
            facts: vec![],
        },
        own: 3,
        step_to: 3,
        turns: vec![],
        traps: vec![],
        no_gain: vec![],
        ..line.clone()
    };
    Assessment {
        reference: "HA-1".into(),
        items: vec![
            item("pay", ItemKind::Pay, Some(0)),
            item("income_tax", ItemKind::Tax, Some(0)),
            item("income_tax", ItemKind::Tax, Some(1)),
            item("support", ItemKind::Benefit, None),
        ],
        earners: vec![EarnerResult {
            adult: 0,
            name: "Somebody".into(),
            not_in_work: point(0, 0, 0, 50_000),
            has_job: true,
            lines: vec![line, offer],
            offers: vec![],
            target: None,
        }],
        couple: None,
        settled: None,
        unclaimed: vec![],
        notes: vec![],
        facts: vec![],
        amounts: vec![],
    }
}

/// The same household, which has 50.00 less everywhere once the fact `in_grace` has settled.
pub(crate) fn settled() -> Assessment {
    let now = assessment();
    let mut earners = now.earners.clone();
    let less = |point: &mut Point| {
        point.items[3] += Money(-5000);
        for sum in [
            &mut point.net,
            &mut point.after_costs,
            &mut point.after_housing,
        ] {
            *sum += Money(-5000);
        }
    };
    for earner in &mut earners {
        less(&mut earner.not_in_work);
        earner
            .lines
            .iter_mut()
            .flat_map(|line| &mut line.grid)
            .for_each(less);
    }
    Assessment {
        settled: Some(Settled {
            facts: vec!["in_grace".into()],
            held: vec![],
            earners,
        }),
        ..now
    }
}
