//! An [`Assessment`] for programs. Money and rates are text, so that no reader turns them into floats: money with two
//! decimals (a passport is 1 or 0), rates and slopes with four, places in hours with six. A value that does not exist is null.

use crate::batch::wage;
use crate::measures::{
    Assessment, BudgetLine, EarnerResult, Effect, ItemKind, Point, Segment, Turn, TurnKind,
};
use crate::num::{Fraction, Hours, Money};
use serde_json::{Value, json};

/// The whole assessment, without names.
pub(super) fn json(assessment: &Assessment) -> Value {
    json!({
        "household": assessment.reference,
        "items": assessment.items.iter().map(|item| json!({
            "name": item.name,
            "kind": kind(item.kind),
            "adult": item.adult.map(|adult| adult + 1),
            "law": item.law,
            "part": item.part,
        })).collect::<Value>(),
        "earners": assessment.earners.iter().map(|e| earner(assessment, e)).collect::<Value>(),
        "couple": assessment.couple.as_ref().map(|table| json!({
            "first": table.first.iter().map(|h| h.plain()).collect::<Vec<_>>(),
            "second": table.second.iter().map(|h| h.plain()).collect::<Vec<_>>(),
            "net": sums(&table.net),
            "after_costs": sums(&table.after_costs),
        })),
        "settled": assessment.settled.as_ref().map(|settled| json!({
            "facts": settled.facts,
            "held": settled.held,
            "earners": settled.earners.iter().map(|e| earner(assessment, e)).collect::<Value>(),
        })),
        "unclaimed": assessment.unclaimed.iter().map(|unclaimed| json!({
            "item": assessment.items[unclaimed.item].name,
            "due": unclaimed.due.plain(),
        })).collect::<Value>(),
        "notes": assessment.notes,
        "facts": assessment.facts.iter().map(|fact| json!({
            "kind": fact.kind,
            "name": fact.name,
            "value": fact.value,
            "known": match fact.known { 's' => "seen", 'a' => "assumed", _ => "told" },
        })).collect::<Value>(),
        "amounts": assessment.amounts.iter().map(|amount| json!({
            "name": amount.name,
            "value": amount.value,
            "from": amount.from,
            "to": amount.to,
            "source": amount.source,
            "locator": amount.locator,
            "confirmed": amount.confirmed,
            "changed_because": amount.changed_because,
        })).collect::<Value>(),
    })
}

fn sums(rows: &[Vec<Money>]) -> Vec<Vec<String>> {
    rows.iter()
        .map(|row| row.iter().map(|sum| sum.plain()).collect())
        .collect()
}

fn kind(kind: ItemKind) -> &'static str {
    match kind {
        ItemKind::Pay => "pay",
        ItemKind::Income => "income",
        ItemKind::Tax => "tax",
        ItemKind::Contribution => "contribution",
        ItemKind::Pension => "pension",
        ItemKind::Loan => "loan",
        ItemKind::Benefit => "benefit",
        ItemKind::Passport => "passport",
        ItemKind::Cost => "cost",
        ItemKind::Housing => "housing",
        ItemKind::Employer => "employer",
    }
}

fn earner(assessment: &Assessment, earner: &EarnerResult) -> Value {
    json!({
        "adult": earner.adult + 1,
        "has_job": earner.has_job,
        "not_in_work": point(assessment, &earner.not_in_work),
        "lines": earner.lines.iter().map(|l| line(assessment, l)).collect::<Value>(),
        "offers": earner.offers.iter().map(|offer| json!({
            "line": offer.line,
            "holding_hours": offer.holding.map(Hours::plain),
            "rise": offer.rise.as_ref().map(|rise| json!({
                "price_part": rise.price.decimal(4),
                "income_part": rise.income.plain(),
                "fragile": rise.fragile,
            })),
        })).collect::<Value>(),
        "target": earner.target.as_ref().map(|target| json!({
            "sum": target.sum.plain(),
            "first_hours": target.first.map(Hours::plain),
            "stays_from_hours": target.stays.map(Hours::plain),
        })),
    })
}

fn line(assessment: &Assessment, line: &BudgetLine) -> Value {
    json!({
        "line": if line.terms.reference.is_empty() { "today" } else { &line.terms.reference },
        "wage": wage(line.terms.wage),
        "hours": line.terms.hours.plain(),
        "up_to_hours": line.up_to.plain(),
        "first_minute": line.first_minute.plain(),
        "own": line.own,
        "step_to": line.step_to,
        "grid": line.grid.iter().map(|p| point(assessment, p)).collect::<Value>(),
        "turning_points": line.turns.iter().map(|t| turn(assessment, t)).collect::<Value>(),
        "segments": line.segments.iter().map(segment).collect::<Value>(),
        "traps": line.traps.iter().map(|trap| json!({
            "from_hours": trap.from.decimal(6),
            "to_hours": trap.to.map(|to| to.decimal(6)),
            "peak": trap.peak.plain(),
            "depth": trap.depth.plain(),
        })).collect::<Value>(),
        "no_gain": line.no_gain.iter().map(|stretch| json!({
            "from_hours": stretch.from.decimal(6),
            "to_hours": stretch.to.decimal(6),
        })).collect::<Value>(),
    })
}

fn rate(value: Option<Fraction>) -> Option<String> {
    value.map(|rate| rate.decimal(4))
}

fn point(assessment: &Assessment, point: &Point) -> Value {
    let kinds = assessment.items.iter().map(|item| item.kind);
    let items: Vec<String> = kinds
        .zip(&point.items)
        .map(|(kind, amount)| match kind {
            ItemKind::Passport => amount.0.to_string(),
            _ => amount.plain(),
        })
        .collect();
    json!({
        "hours": point.hours.plain(),
        "pay": point.pay.plain(),
        "items": items,
        "take_home": point.take_home.plain(),
        "net": point.net.plain(),
        "after_costs": point.after_costs.plain(),
        "after_housing": point.after_housing.plain(),
        "ptr": rate(point.ptr),
        "ptr_after_costs": rate(point.ptr_after_costs),
        "metr_here": rate(point.metr_here),
        "metr_here_after_costs": rate(point.metr_here_after_costs),
        "replacement": rate(point.replacement),
    })
}

fn turn(assessment: &Assessment, turn: &Turn) -> Value {
    json!({
        "kind": match turn.kind {
            TurnKind::Kink => "kink",
            TurnKind::Cliff => "cliff",
            TurnKind::CostStep => "cost_step",
            TurnKind::Passport => "passport",
        },
        "hours": turn.hours.plain(),
        "at_hours": turn.at.decimal(6),
        "pay": turn.pay.plain(),
        "net_before": turn.net_before.plain(),
        "net_after": turn.net_after.plain(),
        "size": turn.size.plain(),
        "after_costs_before": turn.after_costs_before.plain(),
        "after_costs_after": turn.after_costs_after.plain(),
        "metr_before": rate(turn.metr_before),
        "metr_after": rate(turn.metr_after),
        "causes": turn.causes.iter().map(|cause| json!({
            "part": cause.part,
            "line": cause.line,
        })).collect::<Value>(),
        "effects": turn.effects.iter().map(|e| effect(assessment, e)).collect::<Value>(),
    })
}

fn effect(assessment: &Assessment, effect: &Effect) -> Value {
    let item = &assessment.items[effect.item];
    let change = match item.kind {
        ItemKind::Passport if effect.jump < Money::ZERO => json!({ "passport": "lost" }),
        ItemKind::Passport => json!({ "passport": "won" }),
        ItemKind::Pay
        | ItemKind::Income
        | ItemKind::Tax
        | ItemKind::Contribution
        | ItemKind::Pension
        | ItemKind::Loan
        | ItemKind::Benefit
        | ItemKind::Cost
        | ItemKind::Housing
        | ItemKind::Employer => {
            json!({ "jump": effect.jump.plain(), "slope": effect.slope.decimal(4) })
        }
    };
    json!({
        "item": item.name,
        "adult": item.adult.map(|adult| adult + 1),
        "change": change,
    })
}

fn segment(segment: &Segment) -> Value {
    json!({
        "from_hours": segment.from.decimal(6),
        "to_hours": segment.to.decimal(6),
        "pay_from": segment.pay_from.decimal(4),
        "pay_to": segment.pay_to.decimal(4),
        "net_from": segment.net_from.decimal(4),
        "net_to": segment.net_to.decimal(4),
        "after_costs_from": segment.after_costs_from.decimal(4),
        "after_costs_to": segment.after_costs_to.decimal(4),
        "metr": rate(segment.metr),
        "metr_after_costs": rate(segment.metr_after_costs),
        "pension_share": segment.pension_share.decimal(4),
        "shares": segment.shares.iter().map(|share| share.decimal(4)).collect::<Vec<_>>(),
        "virtual_income": segment.virtual_income.decimal(4),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::batch::fixture::{assessment, settled};

    #[test]
    fn a_household_for_programs_has_no_name() {
        let value = json(&assessment());
        let text = value.to_string();
        assert!(!text.contains("Somebody"), "{text}");
        let line = &value["earners"][0]["lines"][0];
        assert_eq!(line["grid"][2]["net"], "514.00");
        assert_eq!(line["grid"][0]["ptr"], Value::Null);
        assert_eq!(
            line["turning_points"][0]["effects"][0]["change"]["jump"],
            "-12.00"
        );
        assert_eq!(line["turning_points"][0]["at_hours"], "1.500000");
        assert_eq!(line["traps"][0]["to_hours"], Value::Null);
        assert_eq!(value["settled"], Value::Null);
        let settled = &json(&settled())["settled"];
        assert_eq!(settled["facts"][0], "in_grace");
        assert_eq!(settled["earners"][0]["not_in_work"]["net"], "450.00");
    }
}
