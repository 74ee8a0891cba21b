//! The table of both partners' hours: net income for each pair of hours, everything else fixed (design section 7).

use super::points::Sums;
use super::types::CoupleTable;
use crate::case::{ADULT, Household};
use crate::engine::{JobChoice, Machine, Setting};
use crate::num::Hours;

/// Hours of the table besides each partner's own.
const HOURS: [i64; 6] = [0, 8, 16, 24, 32, 40];

/// Works the table out on the first adult's program; none unless there are two adults who both have a job today.
pub(super) fn couple(household: &Household, machine: &Machine) -> Option<CoupleTable> {
    if household.instances[ADULT].len() != 2 {
        return None;
    }
    let first = Setting::new(household, 0, JobChoice::Today)?;
    let second = Setting::new(household, 1, JobChoice::Today)?;
    let works = |setting: &Setting<'_>| setting.own_hours().0 > 0 && setting.wage() > 0;
    if !works(&first) || !works(&second) {
        return None;
    }
    let hours = |setting: &Setting<'_>| {
        let mut hours: Vec<Hours> = HOURS
            .iter()
            .map(|h| Hours::whole(*h))
            .chain([setting.own_hours()])
            .collect();
        hours.sort_unstable();
        hours.dedup();
        hours
    };
    let (rows, columns) = (hours(&first), hours(&second));
    let mut net = vec![Vec::with_capacity(columns.len()); rows.len()];
    let mut after_costs = net.clone();
    for column in &columns {
        let special = machine.special(
            &first
                .clone()
                .with_partner_at(*column)
                .facts(machine.program()),
        );
        let sums = Sums::new(&special, 0);
        let mut points = special.points();
        for (row, hours) in rows.iter().enumerate() {
            let totals = sums.totals(&points.at(*hours));
            net[row].push(totals.net);
            after_costs[row].push(totals.after_costs);
        }
    }
    Some(CoupleTable {
        own: (first.own_hours(), second.own_hours()),
        first: rows,
        second: columns,
        net,
        after_costs,
    })
}
