//! What a letter says of later, where facts about past periods settle.

use super::*;
use hourworth::measures::{EarnerResult, Point, Settled};

/// Invented: support is this much less, but for nothing below nothing, at the points that a test picks.
fn later(now: &Assessment, less: Money, picks: impl Fn(&Point) -> bool) -> Assessment {
    let support = now.items.iter().position(|item| item.name == "support");
    let support = support.expect("the household has the item");
    let change = |point: &mut Point| {
        let less = Money(less.0.min(point.items[support].0));
        if !picks(point) {
            return;
        }
        for sum in [
            &mut point.items[support],
            &mut point.net,
            &mut point.after_costs,
            &mut point.after_housing,
        ] {
            *sum = *sum - less;
        }
    };
    let mut earners = now.earners.clone();
    for earner in &mut earners {
        change(&mut earner.not_in_work);
        let grids = earner.lines.iter_mut().flat_map(|line| &mut line.grid);
        grids.for_each(change);
    }
    Assessment {
        settled: Some(Settled {
            facts: vec!["in_grace".into()],
            held: vec![],
            earners,
        }),
        ..now.clone()
    }
}

fn grace() -> LetterContext {
    let mut context = context();
    context.labels.insert(
        "settles.in_grace".into(),
        "the months of grace have ended".into(),
    );
    context
}

/// A sum as the letter writes it.
fn sum(money: Money) -> String {
    let text = money.plain();
    let (whole, part) = text.split_once('.').expect("two decimals");
    let whole = match whole.len() {
        4.. => format!(
            "{},{}",
            &whole[..whole.len() - 3],
            &whole[whole.len() - 3..]
        ),
        _ => whole.to_owned(),
    };
    if part == "00" {
        format!("£{whole}")
    } else {
        format!("£{whole}.{part}")
    }
}

fn today(earner: &EarnerResult) -> &Point {
    let line = &earner.lines[0];
    &line.grid[line.own]
}

#[test]
fn now_stands_against_once_settled_with_what_changes_and_why() {
    let now = tenant();
    let settled = later(&now, Money(6_000), |_| true);
    let pages = words(&settled, &grace());
    says(
        &pages,
        "The sums and turning points above are for now. Once the months of grace have ended, they change:",
    );
    let net = today(&now.earners[0]).net;
    assert!(
        today(&now.earners[0]).items[3..]
            .iter()
            .any(|i| i.0 >= 6_000)
    );
    says(
        &pages,
        &format!(
            "Today: {} a month in place of {}: Household Support £60 less.",
            sum(net - Money(6_000)),
            sum(net)
        ),
    );
    let zero = now.earners[0].not_in_work.net;
    says(
        &pages,
        &format!(
            "Not in work: {} a month in place of {}",
            sum(zero - Money(6_000)),
            sum(zero)
        ),
    );
    let none = words(&now, &grace()).concat();
    assert!(!none.contains("Later") && !none.contains("grace"), "{none}");
}

#[test]
fn an_offer_is_told_with_what_is_kept_of_it_then() {
    let now = lone_parent();
    let hours = today(&now.earners[0]).hours;
    // Today has less later, the offer has not.
    let settled = later(&now, Money(5_000), |point| point.hours == hours);
    let view = letter_view(&settled, &grace(), Detail::Full).expect("a view");
    let part = view.sections[0].parts.iter().find(|p| p.heading == "Later");
    let lines: Vec<(&str, &str)> = part
        .expect("a part on later")
        .lines
        .iter()
        .map(|line| (line.lead.as_str(), line.text.as_str()))
        .collect();
    let line = &now.earners[0].lines[1];
    let offer = &line.grid[line.step_to];
    let gain = offer.after_costs - today(&now.earners[0]).after_costs + Money(5_000);
    let expected = format!(
        "{} a month, as now. You then keep {} more than at today’s hours.",
        sum(offer.after_costs),
        sum(gain)
    );
    assert!(
        gain.0 > 0 && lines.contains(&("Offer:", expected.as_str())),
        "{lines:?}"
    );
    let leads: Vec<&str> = lines.iter().map(|(lead, _)| *lead).collect();
    assert_eq!(
        leads,
        ["", "Today:", "4 hours more:", "Offer:", "Not in work:"]
    );
    // Where room is short, today and the offer are what counts.
    let view = letter_view(&settled, &grace(), Detail::Short).expect("a view");
    let part = view.sections[0].parts.iter().find(|p| p.heading == "Later");
    let leads: Vec<&str> = part
        .expect("a part")
        .lines
        .iter()
        .map(|l| l.lead.as_str())
        .collect();
    assert_eq!(leads, ["", "Today:", "Offer:"]);
}

#[test]
fn a_second_section_does_not_say_today_again() {
    let settled = later(&couple(), Money(2_500), |_| true);
    let view = letter_view(&settled, &grace(), Detail::Full).expect("a view");
    let today: Vec<usize> = view
        .sections
        .iter()
        .map(|section| {
            let later = section.parts.iter().filter(|part| part.heading == "Later");
            later
                .flat_map(|part| &part.lines)
                .filter(|line| line.lead.starts_with("Today"))
                .count()
        })
        .collect();
    assert_eq!(today, [1, 0]);
}

#[test]
fn a_cause_that_names_a_folded_item_is_not_told() {
    let settled = later(&tenant(), Money(6_000), |_| true);
    let mut context = grace();
    context
        .labels
        .insert("settles.in_grace".into(), "Household Support is cut".into());
    context.delivery.fold = vec!["support".into()];
    let pages = words(&settled, &context);
    says(
        &pages,
        "Once a fact about an earlier time no longer counts, they change:",
    );
    assert!(!pages.concat().contains("HouseholdSupport"));
    says(&pages, "other items £60 less.");
}

#[test]
fn a_change_at_other_hours_alone_and_a_hold_are_told() {
    let now = tenant();
    let elsewhere = later(&now, Money(6_000), |point| point.hours == Hours::whole(1));
    says(
        &words(&elsewhere, &grace()),
        "Once the months of grace have ended, the sums at some other hours change. Those in this letter stay.",
    );
    let held = Assessment {
        settled: Some(Settled {
            facts: vec!["in_grace".into(), "waiting".into()],
            held: vec!["a reason for the office".into()],
            earners: vec![],
        }),
        ..now
    };
    let mut context = grace();
    context
        .labels
        .insert("settles.waiting".into(), "the wait is over".into());
    let pages = words(&held, &context);
    says(
        &pages,
        "Once the months of grace have ended and the wait is over, these rules do not cover your household.",
    );
    assert!(!pages.concat().contains("areasonfortheoffice"));
}
