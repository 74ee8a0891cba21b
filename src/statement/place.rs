//! Finds a place for a label where it hides least. In: what is already drawn. Out: a rectangle and,
//! where the label stands away from what it names, a thin line to it.

/// A rectangle on paper, in points, y downwards.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Rect {
    /// Left edge.
    pub left: f64,
    /// Top edge.
    pub top: f64,
    /// Right edge.
    pub right: f64,
    /// Bottom edge.
    pub bottom: f64,
}

impl Rect {
    /// Area shared with another rectangle.
    pub fn overlap(&self, other: &Rect) -> f64 {
        let wide = self.right.min(other.right) - self.left.max(other.left);
        let high = self.bottom.min(other.bottom) - self.top.max(other.top);
        wide.max(0.0) * high.max(0.0)
    }

    /// Whether a point lies inside.
    fn holds(&self, point: (f64, f64)) -> bool {
        (self.left..=self.right).contains(&point.0) && (self.top..=self.bottom).contains(&point.1)
    }
}

/// A straight line from a label to what it names.
pub(super) type Leader = ((f64, f64), (f64, f64));

/// A label that asks for a place.
pub(super) struct Ask {
    /// What it names.
    pub target: (f64, f64),
    /// Its width and height.
    pub size: (f64, f64),
}

/// The place of a label.
#[derive(Clone, Copy, Debug)]
pub(super) struct Place {
    /// Where it stands.
    pub rect: Rect,
    /// The thin line to what it names, where it stands away from it.
    pub leader: Option<Leader>,
}

/// Orders of placing that are tried at most.
const ORDERS: usize = 12;

/// Places all labels: tries several orders and keeps the one that hides least.
pub(super) fn place_all(placer: &Placer, asks: &[Ask]) -> Vec<Place> {
    let mut order: Vec<usize> = (0..asks.len()).collect();
    let mut best: Option<(f64, Vec<Place>)> = None;
    for _ in 0..ORDERS {
        let mut trial = placer.clone();
        let mut places: Vec<Option<Place>> = vec![None; asks.len()];
        let mut total = 0.0;
        for position in &order {
            let (place, cost) = trial.place(&asks[*position]);
            places[*position] = Some(place);
            total += cost;
        }
        if best.as_ref().is_none_or(|(least, _)| total < *least) {
            best = Some((total, places.into_iter().flatten().collect()));
        }
        if !next_order(&mut order) {
            break;
        }
    }
    best.map(|(_, places)| places).unwrap_or_default()
}

/// The next order in the order of the dictionary; false after the last.
fn next_order(order: &mut [usize]) -> bool {
    let Some(turn) = order.windows(2).rposition(|pair| pair[0] < pair[1]) else {
        return false;
    };
    let larger = order.iter().rposition(|other| *other > order[turn]);
    if let Some(larger) = larger {
        order.swap(turn, larger);
    }
    order[turn + 1..].reverse();
    true
}

/// What is drawn so far.
#[derive(Clone)]
pub(super) struct Placer {
    area: Rect,
    gap: f64,
    points: Vec<(f64, f64)>,
    taken: Vec<Rect>,
}

/// Distance between the samples of a stroke.
const SAMPLE: f64 = 5.0;
/// What a gap of distance costs.
const AWAY_COST: f64 = 6.0;
/// Distances of a label from its target, in gaps.
const AWAY: [f64; 7] = [1.0, 2.2, 3.6, 5.4, 7.6, 10.0, 13.0];
/// Directions in which a label may stand: above and below, and the sides.
const SIDES: [(f64, f64); 12] = [
    (0.0, -1.0),
    (1.0, -1.0),
    (-1.0, -1.0),
    (1.0, 1.0),
    (-1.0, 1.0),
    (0.0, 1.0),
    (1.0, 0.0),
    (-1.0, 0.0),
    (0.5, -1.0),
    (-0.5, -1.0),
    (0.5, 1.0),
    (-0.5, 1.0),
];

impl Placer {
    /// An empty area; `size` is the size of print.
    pub fn new(area: Rect, size: f64) -> Placer {
        Placer {
            area,
            gap: size * 0.6,
            points: vec![],
            taken: vec![],
        }
    }

    /// Keeps labels off a stroke.
    pub fn avoid_stroke(&mut self, from: (f64, f64), to: (f64, f64)) {
        let length = (to.0 - from.0).hypot(to.1 - from.1);
        let steps = (length / SAMPLE).ceil().max(1.0) as usize;
        for step in 0..=steps {
            let share = step as f64 / steps as f64;
            self.points.push((
                from.0 + (to.0 - from.0) * share,
                from.1 + (to.1 - from.1) * share,
            ));
        }
    }

    /// Keeps labels off a dot.
    pub fn avoid_point(&mut self, at: (f64, f64), radius: f64) {
        self.taken.push(Rect {
            left: at.0 - radius,
            top: at.1 - radius,
            right: at.0 + radius,
            bottom: at.1 + radius,
        });
    }

    /// Takes the best place for a label; returns it and what it costs.
    fn place(&mut self, ask: &Ask) -> (Place, f64) {
        let (target, (wide, high)) = (ask.target, ask.size);
        let mut best: Option<(f64, Rect)> = None;
        for away in AWAY {
            if best.is_some_and(|(least, _)| least <= away * AWAY_COST) {
                break;
            }
            for side in SIDES {
                let centre = (
                    target.0 + side.0 * (wide / 2.0 + self.gap * away),
                    target.1 + side.1 * (high / 2.0 + self.gap * away),
                );
                let rect = self.inside(centre, wide, high);
                let shifted = (f64::midpoint(rect.left, rect.right) - centre.0).abs()
                    + (f64::midpoint(rect.top, rect.bottom) - centre.1).abs();
                let mut cost = away * AWAY_COST + shifted * 0.5;
                if best.is_some_and(|(least, _)| least <= cost) {
                    continue;
                }
                let wider = Rect {
                    left: rect.left - self.gap,
                    right: rect.right + self.gap,
                    ..rect
                };
                let hidden: f64 = self.taken.iter().map(|other| wider.overlap(other)).sum();
                let crossed = self.points.iter().filter(|point| rect.holds(**point));
                cost += hidden * 2.0 + crossed.count() as f64 * 14.0;
                if best.is_none_or(|(least, _)| cost < least) {
                    cost += self.leader_cost(&rect, target);
                }
                if best.is_none_or(|(least, _)| cost < least) {
                    best = Some((cost, rect));
                }
            }
        }
        let (cost, rect) = best.expect("there are places to try");
        self.taken.push(rect);
        let nearest = (
            target.0.clamp(rect.left, rect.right),
            target.1.clamp(rect.top, rect.bottom),
        );
        let far = (nearest.0 - target.0).hypot(nearest.1 - target.1) > self.gap * 1.6;
        let leader = far.then_some((nearest, target));
        if let Some((from, to)) = leader {
            self.avoid_stroke(from, to);
        }
        (Place { rect, leader }, cost)
    }

    /// What a leader from this place would hide: other labels weigh much, strokes little.
    fn leader_cost(&self, rect: &Rect, target: (f64, f64)) -> f64 {
        let start = (
            target.0.clamp(rect.left, rect.right),
            target.1.clamp(rect.top, rect.bottom),
        );
        let samples = 12;
        let mut cost = 0.0;
        for step in 1..samples - 1 {
            let share = f64::from(step) / f64::from(samples);
            let point = (
                start.0 + (target.0 - start.0) * share,
                start.1 + (target.1 - start.1) * share,
            );
            if self.taken.iter().any(|other| other.holds(point)) {
                cost += 12.0;
            }
            let near = |other: &&(f64, f64)| {
                (other.0 - point.0).abs() < 2.0 && (other.1 - point.1).abs() < 2.0
            };
            cost += self.points.iter().filter(near).count() as f64 * 3.0;
        }
        cost
    }

    /// A rectangle around a centre, moved into the area.
    fn inside(&self, centre: (f64, f64), wide: f64, high: f64) -> Rect {
        let left = (centre.0 - wide / 2.0)
            .min(self.area.right - wide)
            .max(self.area.left + 2.0);
        let top = (centre.1 - high / 2.0)
            .min(self.area.bottom - high - 1.0)
            .max(self.area.top - self.gap);
        Rect {
            left,
            top,
            right: left + wide,
            bottom: top + high,
        }
    }
}
