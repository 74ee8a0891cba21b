//! Which items concern a household, and which sums rest on amounts of the law that nobody has checked.
//! An instrument is a part's title up to its first comma: `Universal Credit, award` is of `Universal Credit`.

use crate::measures::{Assessment, Cause, EarnerResult, ItemKind, Point, Segment, Turn};

/// The sign at a sum that rests on an unconfirmed amount.
pub(super) const STAR: &str = "*";

/// See the module.
pub(super) struct Marks {
    /// Instruments with unconfirmed amounts and how many, in the order of their names.
    pub instruments: Vec<(String, usize)>,
    /// By item: whether it is not zero at one of the points that the letter shows.
    present: Vec<bool>,
    /// By item: whether its instrument has unconfirmed amounts.
    starred: Vec<bool>,
}

/// The instrument of a part.
fn instrument(part: &str) -> &str {
    part.split_once(", ").map_or(part, |(name, _)| name)
}

/// The points that a letter shows of an earner: not in work, today, the named steps.
fn shown(earner: &EarnerResult) -> impl Iterator<Item = &Point> {
    let own = earner
        .lines
        .first()
        .filter(|_| earner.has_job)
        .map(|line| &line.grid[line.own]);
    let steps = earner.lines.iter().map(|line| &line.grid[line.step_to]);
    std::iter::once(&earner.not_in_work).chain(own).chain(steps)
}

impl Marks {
    /// Looks at the points that are shown of these earners.
    pub fn new(assessment: &Assessment, earners: &[&EarnerResult]) -> Marks {
        let mut instruments: Vec<(String, usize)> = vec![];
        for amount in assessment.amounts.iter().filter(|one| !one.confirmed) {
            let name = instrument(&amount.part);
            match instruments.iter_mut().find(|(known, _)| known == name) {
                Some((_, count)) => *count += 1,
                None => instruments.push((name.to_owned(), 1)),
            }
        }
        instruments.sort();
        let items = assessment.items.iter();
        let later = assessment
            .settled
            .iter()
            .flat_map(|settled| &settled.earners);
        let later: Vec<&EarnerResult> = later
            .filter(|later| earners.iter().any(|now| now.adult == later.adult))
            .collect();
        let present = (0..assessment.items.len()).map(|position| {
            earners
                .iter()
                .chain(&later)
                .flat_map(|earner| shown(earner))
                .any(|point| point.items[position].0 != 0)
        });
        let starred = items.map(|item| {
            let name = instrument(&item.part);
            instruments.iter().any(|(known, _)| known == name)
        });
        Marks {
            present: present.collect(),
            starred: starred.collect(),
            instruments,
        }
    }

    /// Whether an item concerns this household.
    pub fn present(&self, item: usize) -> bool {
        self.present[item]
    }

    /// Whether the household has a benefit at one of the points that are shown.
    pub fn has_benefits(&self, assessment: &Assessment) -> bool {
        let items = assessment.items.iter().zip(&self.present);
        items
            .into_iter()
            .any(|(item, present)| *present && item.kind == ItemKind::Benefit)
    }

    /// The sign for sums at these points, of the items that a test picks; empty where none rests on an unconfirmed amount.
    pub fn of_points(&self, points: &[&Point], picks: impl Fn(usize) -> bool) -> &'static str {
        let found = self.starred.iter().enumerate().any(|(item, starred)| {
            *starred && picks(item) && points.iter().any(|point| point.items[item].0 != 0)
        });
        if found { STAR } else { "" }
    }

    /// The sign for a turning point.
    pub fn of_turn(&self, turn: &Turn) -> &'static str {
        let cause = |cause: &Cause| {
            let name = instrument(&cause.part);
            self.instruments.iter().any(|(known, _)| known == name)
        };
        let effect = turn.effects.iter().any(|effect| self.starred[effect.item]);
        if effect || turn.causes.iter().any(cause) {
            STAR
        } else {
            ""
        }
    }

    /// The sign for what is kept on a segment.
    pub fn of_segment(&self, segment: &Segment) -> &'static str {
        let shares = segment.shares.iter().zip(&self.starred);
        if shares
            .into_iter()
            .any(|(share, starred)| *starred && !share.is_zero())
        {
            STAR
        } else {
            ""
        }
    }
}
