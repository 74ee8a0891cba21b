//! One household on the terminal: a table for each line, its turning points in words, and a small drawing.
//! In: an [`Assessment`]. Out: text. Shows references and the earner's place, no names.

use super::chart::{Mark, chart};
use crate::batch::wage;
use crate::measures::{
    Assessment, BudgetLine, CoupleTable, EarnerResult, OfferMeasures, Point, Settled, Turn,
    TurnKind,
};
use crate::num::{Fraction, Hours, Money};

/// The words that the figures need beside them.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Terms {
    /// Currency, ISO 4217.
    pub currency: String,
    /// Statement period: `month`.
    pub period: String,
    /// Title of the rules.
    pub rules: String,
    /// The list's date.
    pub date: String,
}

/// The whole page.
pub fn show(assessment: &Assessment, terms: &Terms) -> String {
    let mut out = vec![
        format!("household {}", assessment.reference),
        format!(
            "rules: {}, for {}; sums in {} a {}; an estimate, not a decision",
            terms.rules, terms.date, terms.currency, terms.period
        ),
    ];
    for earner in &assessment.earners {
        for line in &earner.lines {
            out.push(String::new());
            out.push(heading(earner, line));
            out.push(String::new());
            out.extend(table(earner, line));
            out.push(String::new());
            out.extend(turning_points(assessment, line));
            if let Some(offer) = offer_of(earner, line) {
                out.extend(offer_words(offer));
            }
            out.push(String::new());
            out.extend(chart(line, &marks(earner)));
            out.push(legend(earner));
        }
        if let Some(target) = &earner.target {
            out.push(String::new());
            out.push(match (target.first, target.stays) {
                (Some(first), Some(stays)) => format!(
                    "for {} after costs of working: first reached at {} hours, stays reached from {} hours",
                    target.sum.plain(),
                    first.plain(),
                    stays.plain()
                ),
                (Some(first), None) => format!(
                    "for {} after costs of working: first reached at {} hours, but not kept to the end of the line",
                    target.sum.plain(),
                    first.plain()
                ),
                (None, _) => format!("for {} after costs of working: not reached on this line", target.sum.plain()),
            });
        }
    }
    if let Some(table) = &assessment.couple {
        out.extend(couple(table));
    }
    if let Some(settled) = &assessment.settled {
        out.extend(later(assessment, settled));
    }
    if assessment.earners.is_empty() {
        out.push("no adult has a job or an offer: there is no line to show".into());
    }
    for unclaimed in &assessment.unclaimed {
        out.push(format!(
            "not claimed and in no sum: {}, {} at today's hours",
            assessment.items[unclaimed.item].name,
            unclaimed.due.plain()
        ));
    }
    for note in &assessment.notes {
        out.push(format!("note: {note}"));
    }
    out.push(String::new());
    out.join("\n")
}

/// Net income for each pair of the partners' hours.
fn couple(table: &CoupleTable) -> Vec<String> {
    let mut out = vec![
        String::new(),
        "net income by both partners' hours a week (down: adult 1, across: adult 2):".to_owned(),
        String::new(),
    ];
    let mark = |hours: &Hours, own: Hours| {
        if *hours == own {
            format!("> {}", hours.plain())
        } else {
            hours.plain()
        }
    };
    let mut head = format!("{:>8}", "hours");
    for hours in &table.second {
        head.push_str(&format!("{:>11}", mark(hours, table.own.1)));
    }
    out.push(head);
    for (hours, row) in table.first.iter().zip(&table.net) {
        let mut line = format!("{:>8}", mark(hours, table.own.0));
        for sum in row {
            line.push_str(&format!("{:>11}", sum.plain()));
        }
        out.push(line);
    }
    out
}

/// Net income now and once settled, at the named points.
fn later(assessment: &Assessment, settled: &Settled) -> Vec<String> {
    let mut out = vec![
        String::new(),
        format!(
            "once settled ({}); all above is for now:",
            settled.facts.join(", ")
        ),
    ];
    for reason in &settled.held {
        out.push(format!("  held then: {reason}"));
    }
    let heads = [
        "earner",
        "point",
        "hours",
        "net now",
        "net settled",
        "change",
        "PTR settled",
        "METR here settled",
    ];
    let mut rows = vec![heads.map(str::to_owned).to_vec()];
    for (now, later) in assessment.earners.iter().zip(&settled.earners) {
        let mut push = |name: &str, now: &Point, then: &Point| {
            rows.push(vec![
                (later.adult + 1).to_string(),
                name.to_owned(),
                then.hours.plain(),
                now.net.plain(),
                then.net.plain(),
                signed(then.net - now.net),
                percent(then.ptr),
                percent(then.metr_here),
            ]);
        };
        push("not in work", &now.not_in_work, &later.not_in_work);
        for (line, then) in now.lines.iter().zip(&later.lines) {
            let name = match line.terms.reference.as_str() {
                "" => "today",
                reference => reference,
            };
            push(name, &line.grid[line.own], &then.grid[then.own]);
            if line.step_to != line.own {
                push("step", &line.grid[line.step_to], &then.grid[then.step_to]);
            }
        }
    }
    if rows.len() > 1 {
        out.extend(align(&rows));
    }
    out
}

fn heading(earner: &EarnerResult, line: &BudgetLine) -> String {
    let terms = &line.terms;
    let what = if terms.reference.is_empty() {
        "today".to_owned()
    } else {
        format!("offer {}", terms.reference)
    };
    format!(
        "adult {}, {what}: {} hours a week at {} an hour",
        earner.adult + 1,
        terms.hours.plain(),
        wage(terms.wage)
    )
}

/// A sign under the chart for today's hours (`T`) and each offer's (`1`, `2`, …).
fn marks(earner: &EarnerResult) -> Vec<Mark> {
    let mut signs = "123456789".chars();
    earner
        .lines
        .iter()
        .filter_map(|line| {
            let sign = if line.terms.reference.is_empty() {
                'T'
            } else {
                signs.next()?
            };
            Some(Mark {
                sign,
                hours: line.terms.hours,
            })
        })
        .collect()
}

/// What the signs under the chart stand for.
fn legend(earner: &EarnerResult) -> String {
    let mut place = 0;
    let signs: Vec<String> = earner
        .lines
        .iter()
        .map(|line| match line.terms.reference.as_str() {
            "" => "T today".to_owned(),
            reference => {
                place += 1;
                format!("{place} {reference}")
            }
        })
        .collect();
    format!("          net income by hours a week; {}", signs.join(", "))
}

/// Not in work, every fourth hour, the job's own hours and the end of the named step.
fn table(earner: &EarnerResult, line: &BudgetLine) -> Vec<String> {
    let mut rows = vec![
        [
            "hours",
            "pay",
            "take-home",
            "net",
            "after costs",
            "after housing",
            "PTR",
            "METR here",
            "next hour",
        ]
        .map(str::to_owned)
        .to_vec(),
    ];
    rows.push(row("none", &earner.not_in_work, None));
    for (place, point) in line.grid.iter().enumerate() {
        let own = place == line.own;
        if !own && place != line.step_to && point.hours.0 % 400 != 0 {
            continue;
        }
        let hours = match own {
            true => format!("> {}", point.hours.plain()),
            false => point.hours.plain(),
        };
        let next = line
            .grid
            .iter()
            .find(|next| next.hours == Hours(point.hours.0 + 100));
        rows.push(row(&hours, point, next));
    }
    align(&rows)
}

fn row(hours: &str, point: &Point, next: Option<&Point>) -> Vec<String> {
    vec![
        hours.to_owned(),
        point.pay.plain(),
        point.take_home.plain(),
        point.net.plain(),
        point.after_costs.plain(),
        point.after_housing.plain(),
        percent(point.ptr),
        percent(point.metr_here),
        next.map(|next| signed(next.net - point.net))
            .unwrap_or_default(),
    ]
}

/// Columns to the right edge, two spaces apart.
pub(super) fn align(rows: &[Vec<String>]) -> Vec<String> {
    let width = |column: usize| {
        rows.iter()
            .filter_map(|row| row.get(column))
            .map(|cell| cell.chars().count())
            .max()
            .unwrap_or(0)
    };
    let widths: Vec<usize> = (0..rows.iter().map(Vec::len).max().unwrap_or(0))
        .map(width)
        .collect();
    rows.iter()
        .map(|row| {
            let cells: Vec<String> = row
                .iter()
                .zip(&widths)
                .map(|(cell, width)| format!("{cell:>width$}"))
                .collect();
            cells.join("  ").trim_end().to_owned()
        })
        .collect()
}

fn percent(rate: Option<Fraction>) -> String {
    rate.map(|rate| format!("{}%", (rate * Fraction::whole(100)).decimal(1)))
        .unwrap_or_default()
}

fn signed(money: Money) -> String {
    match money.0 {
        1.. => format!("+{}", money.plain()),
        _ => money.plain(),
    }
}

fn turning_points(assessment: &Assessment, line: &BudgetLine) -> Vec<String> {
    if line.turns.is_empty() && line.traps.is_empty() && line.no_gain.is_empty() {
        return vec!["no turning points".into()];
    }
    let mut out = vec!["turning points:".to_owned()];
    out.extend(line.turns.iter().map(|turn| turn_words(assessment, turn)));
    for trap in &line.traps {
        let until = match trap.to {
            Some(to) => format!("regained at {} hours", to.decimal(2)),
            None => format!("not regained by {} hours", line.up_to.plain()),
        };
        out.push(format!(
            "  trap from {} hours: up to {} below {}{}, {until}",
            trap.from.decimal(2),
            trap.depth.plain(),
            trap.peak.plain(),
            if line.has_costs { " after costs" } else { "" }
        ));
    }
    for stretch in &line.no_gain {
        out.push(format!(
            "  no gain from {} to {} hours",
            stretch.from.decimal(2),
            stretch.to.decimal(2)
        ));
    }
    out
}

fn turn_words(assessment: &Assessment, turn: &Turn) -> String {
    let causes: Vec<String> = turn
        .causes
        .iter()
        .map(|cause| format!("{} ({})", cause.part, cause.line))
        .collect();
    let what = match turn.kind {
        TurnKind::Kink => match (turn.metr_before, turn.metr_after) {
            (Some(_), Some(_)) => format!(
                "METR goes from {} to {}",
                percent(turn.metr_before),
                percent(turn.metr_after)
            ),
            (None, _) | (_, None) => "the slope changes".to_owned(),
        },
        TurnKind::Cliff => format!(
            "net income {} by {}, from {} to {}",
            if turn.size < Money::ZERO {
                "drops"
            } else {
                "jumps"
            },
            Money(turn.size.0.abs()).plain(),
            turn.net_before.plain(),
            turn.net_after.plain()
        ),
        TurnKind::CostStep => format!(
            "costs of working step by {}",
            Money((turn.after_costs_after - turn.after_costs_before).0.abs()).plain()
        ),
        TurnKind::Passport => {
            let changes: Vec<String> = turn
                .effects
                .iter()
                .map(|effect| {
                    let name = &assessment.items[effect.item].name;
                    if effect.jump < Money::ZERO {
                        format!("{name} is lost")
                    } else {
                        format!("{name} is won")
                    }
                })
                .collect();
            changes.join(", ")
        }
    };
    format!(
        "  {} hours, pay {}: {what}; {}",
        turn.hours.plain(),
        turn.pay.plain(),
        causes.join(", ")
    )
}

fn offer_of<'a>(earner: &'a EarnerResult, line: &BudgetLine) -> Option<&'a OfferMeasures> {
    earner
        .offers
        .iter()
        .find(|offer| earner.lines.get(offer.line) == Some(line))
}

fn offer_words(offer: &OfferMeasures) -> Vec<String> {
    let mut out = vec![match offer.holding {
        Some(hours) => format!(
            "holding hours: from {} hours at this wage as much is left after costs of working as today",
            hours.plain()
        ),
        None => "holding hours: none; less is left after costs of working than today at the end of the line".to_owned(),
    }];
    if let Some(rise) = &offer.rise {
        let warning = if rise.fragile {
            "; today's hours sit on a turning point, so this split is fragile"
        } else {
            ""
        };
        out.push(format!(
            "rise split at today's hours: price part {} for each further hour, income part {}{warning}",
            rise.price.decimal(2),
            signed(rise.income)
        ));
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::batch::fixture::assessment;
    use crate::measures::{RiseSplit, TargetHours};

    #[test]
    fn a_household_is_shown() {
        let mut assessment = assessment();
        let earner = &mut assessment.earners[0];
        earner.offers = vec![OfferMeasures {
            line: 1,
            holding: Some(Hours(225)),
            rise: Some(RiseSplit {
                price: Fraction::new(9, 4),
                income: Money(410),
                fragile: true,
            }),
            pay: None,
        }];
        earner.target = Some(TargetHours {
            sum: Money(51_400),
            first: Some(Hours(125)),
            stays: None,
        });
        let terms = Terms {
            currency: "GBP".into(),
            period: "month".into(),
            rules: "Invented rules".into(),
            date: "2026-04-06".into(),
        };
        let text = show(&assessment, &terms);
        assert!(!text.contains("Somebody"));
        insta::assert_snapshot!(text, @r"
        household HA-1
        rules: Invented rules, for 2026-04-06; sums in GBP a month; an estimate, not a decision

        adult 1, today: 2 hours a week at 12.21 an hour

        hours    pay  take-home     net  after costs  after housing    PTR  METR here  next hour
         none   0.00       0.00  500.00       490.00         -10.00             55.0%
            0   0.00       0.00  500.00       490.00         -10.00             55.0%     +10.00
          > 2  20.00      19.00  514.00       504.00           4.00  33.3%      55.0%      +4.00
            3  30.00      28.00  518.00       508.00           8.00  33.3%      55.0%

        turning points:
          1.5 hours, pay 15.00: net income drops by 12.00, from 515.00 to 503.00; Invented Benefit (work_limit)
          trap from 1.50 hours: up to 12.00 below 515.00, not regained by 3 hours
          no gain from 0.00 to 0.33 hours

             518 │                                                           ▄▄▀▀▀
                 │                                                     ▄▄▄▀▀▀
                 │                                                ▄▄▄▀▀
                 │                                           ▄▄▀▀▀
                 │                                     ▄▄▄▀▀▀
                 │                                ▄▄▄▀▀
             509 │                           ▄▄▀▀▀
                 │                     ▄▄▄▀▀▀
                 │                ▄▄▄▀▀
                 │           ▄▄▀▀▀
                 │     ▄▄▄▀▀▀
                 │▄▄▄▀▀
             500 └────────────────────────────────────────────────────────────────
                                                            T                    1
                  0                    1                    2                    3 hours
                  net income by hours a week; T today, 1 =shift

        adult 1, offer =shift: 3 hours a week at 12.2125 an hour

        hours    pay  take-home     net  after costs  after housing    PTR  METR here  next hour
         none   0.00       0.00  500.00       490.00         -10.00             55.0%
            0   0.00       0.00  500.00       490.00         -10.00             55.0%     +10.00
          > 3  30.00      28.00  518.00       508.00           8.00  33.3%      55.0%

        no turning points
        holding hours: from 2.25 hours at this wage as much is left after costs of working as today
        rise split at today's hours: price part 2.25 for each further hour, income part +4.10; today's hours sit on a turning point, so this split is fragile

             518 │                                                           ▄▄▀▀▀
                 │                                                     ▄▄▄▀▀▀
                 │                                                ▄▄▄▀▀
                 │                                           ▄▄▀▀▀
                 │                                     ▄▄▄▀▀▀
                 │                                ▄▄▄▀▀
             509 │                           ▄▄▀▀▀
                 │                     ▄▄▄▀▀▀
                 │                ▄▄▄▀▀
                 │           ▄▄▀▀▀
                 │     ▄▄▄▀▀▀
                 │▄▄▄▀▀
             500 └────────────────────────────────────────────────────────────────
                                                            T                    1
                  0                    1                    2                    3 hours
                  net income by hours a week; T today, 1 =shift

        for 514.00 after costs of working: first reached at 1.25 hours, but not kept to the end of the line
        ");
    }

    #[test]
    fn what_is_settled_stands_against_now() {
        let settled = crate::batch::fixture::settled();
        let lines = later(&settled, settled.settled.as_ref().unwrap());
        insta::assert_snapshot!(lines.join("\n"), @r"

        once settled (in_grace); all above is for now:
        earner        point  hours  net now  net settled  change  PTR settled  METR here settled
             1  not in work      0   500.00       450.00  -50.00                           55.0%
             1        today      2   514.00       464.00  -50.00        33.3%              55.0%
             1         step      3   518.00       468.00  -50.00        33.3%              55.0%
             1       =shift      3   518.00       468.00  -50.00        33.3%              55.0%
        ");
    }
}
