//! Checks that need the whole pack: circles, depth, and what varies with hours.

use super::ast::BinaryOp;
use super::pack::{JOB, Pack};
use super::tree::{Limit, Node, Over, Target, What};
use super::types::Ty;
use crate::diag::Diagnostic;
use crate::num::Fraction;
use crate::program::{Manner, Moment};
use std::collections::HashSet;

/// What is known of a quantity: its degree in hours, and whether it varies at all.
#[derive(Clone, Copy, Default)]
struct Course {
    degree: u32,
    varies: bool,
}

impl Course {
    fn with(self, other: Course) -> Course {
        Course {
            degree: self.degree.max(other.degree),
            varies: self.varies || other.varies,
        }
    }
}

struct Graph<'a> {
    pack: &'a Pack,
    moment: Moment,
    faults: &'a mut Vec<Diagnostic>,
    /// By definition; those that come later in the order are not known yet.
    courses: Vec<Course>,
    bands: Vec<Option<Course>>,
    scales: Vec<Option<Course>>,
}

/// How many expressions may stand inside each other from an item down to the facts, so that no pack can exhaust the stack.
const DEEPEST: usize = 500;

pub(super) fn check(pack: &Pack, faults: &mut Vec<Diagnostic>) {
    check_at(pack, Moment::Now, faults);
    if pack.definitions.iter().any(|d| d.settles.is_some()) {
        let mut later = Vec::new();
        check_at(pack, Moment::Settled, &mut later);
        for fault in later {
            let known = |f: &Diagnostic| f.span == fault.span && f.message == fault.message;
            if !faults.iter().any(known) {
                faults.push(fault.hint(super::lower::ONCE_SETTLED));
            }
        }
    }
}

fn check_at(pack: &Pack, moment: Moment, faults: &mut Vec<Diagnostic>) {
    let order = Order::new(pack, moment).run(faults);
    depths(pack, moment, &order, faults);
    let mut graph = Graph {
        pack,
        moment,
        faults,
        courses: vec![Course::default(); pack.definitions.len()],
        bands: vec![None; pack.bands.len()],
        scales: vec![None; pack.scales.len()],
    };
    for at in order {
        graph.definition(at);
    }
    for condition in pack.holds.iter().chain(&pack.notes) {
        graph.course(&condition.when);
    }
    // Whatever is used was worked out by now; a fault of what is not used counts as well.
    for at in 0..pack.bands.len() {
        graph.bands_course(at);
    }
    for at in 0..pack.scales.len() {
        graph.scale_course(at);
    }
}

/// The definition that a name stands for; a fact stands for one once it has settled.
fn defined(pack: &Pack, target: Target, moment: Moment) -> Option<usize> {
    match (target, moment) {
        (Target::Figure(at), _) => Some(at),
        (Target::Fact { .. }, Moment::Now) => None,
        (Target::Fact { kind, fact }, Moment::Settled) => pack.kinds[kind].facts[fact].settles,
    }
}

/// The definitions that a node needs, each once, in the order of the text.
fn needs(pack: &Pack, node: &Node, moment: Moment) -> Vec<usize> {
    let mut out = Vec::new();
    let mut lists = Vec::new();
    node.visit(&mut |node| match &node.what {
        What::Name { target, .. } | What::Partner { target, .. } => {
            out.extend(defined(pack, *target, moment));
        }
        What::Charge { bands, .. } => lists.extend(pack.bands[*bands].nodes()),
        What::PlaceOn { scale, .. } => lists.extend(pack.scales[*scale].nodes()),
        _ => {}
    });
    // Bands and scales hold no further bands and scales.
    for node in lists {
        node.visit(&mut |node| {
            if let What::Name { target, .. } | What::Partner { target, .. } = &node.what {
                out.extend(defined(pack, *target, moment));
            }
        });
    }
    let mut seen = HashSet::new();
    out.retain(|at| seen.insert(*at));
    out
}

/// Notes the figures and facts that a node rests on, those of its bands and scales included.
pub(super) fn rests_on(
    pack: &Pack,
    node: &Node,
    moment: Moment,
    figures: &mut Vec<usize>,
    facts: &mut std::collections::BTreeSet<(usize, usize)>,
) {
    let mut lists = Vec::new();
    let mut note = |node: &Node, lists: &mut Vec<usize>| match &node.what {
        What::Name {
            target: Target::Figure(at),
            ..
        }
        | What::Partner {
            target: Target::Figure(at),
            ..
        }
        | What::AsIf { figure: at, .. } => figures.push(*at),
        What::Name {
            target: Target::Fact { kind, fact },
            ..
        }
        | What::Partner {
            target: Target::Fact { kind, fact },
            ..
        } => {
            facts.insert((*kind, *fact));
            let target = Target::Fact {
                kind: *kind,
                fact: *fact,
            };
            figures.extend(defined(pack, target, moment));
        }
        What::Charge { bands, .. } => lists.push(*bands),
        What::PlaceOn { scale, .. } => lists.push(pack.bands.len() + *scale),
        _ => {}
    };
    node.visit(&mut |node| note(node, &mut lists));
    for list in lists {
        let nodes = if list < pack.bands.len() {
            pack.bands[list].nodes()
        } else {
            pack.scales[list - pack.bands.len()].nodes()
        };
        for node in nodes {
            node.visit(&mut |node| note(node, &mut Vec::new()));
        }
    }
}

/// Puts definitions into an order in which each comes after what it needs, and finds circles. Keeps its own stack, so that
/// a long chain is no danger.
struct Order<'a> {
    pack: &'a Pack,
    needs: Vec<Vec<usize>>,
}

impl<'a> Order<'a> {
    fn new(pack: &'a Pack, moment: Moment) -> Self {
        let needs = pack
            .definitions
            .iter()
            .map(|d| {
                d.body
                    .iter()
                    .chain(&d.claimed)
                    .flat_map(|node| needs(pack, node, moment))
                    .collect()
            })
            .collect();
        Order { pack, needs }
    }

    fn run(&self, faults: &mut Vec<Diagnostic>) -> Vec<usize> {
        #[derive(Clone, Copy, PartialEq)]
        enum State {
            New,
            Open,
            Done,
        }
        let mut state = vec![State::New; self.needs.len()];
        let mut in_circle = HashSet::new();
        let mut out = Vec::new();
        for start in 0..self.needs.len() {
            if state[start] != State::New {
                continue;
            }
            state[start] = State::Open;
            let mut path = vec![(start, 0)];
            while let Some((at, next)) = path.last_mut() {
                let at = *at;
                let Some(need) = self.needs[at].get(*next).copied() else {
                    state[at] = State::Done;
                    out.push(at);
                    path.pop();
                    continue;
                };
                *next += 1;
                match state[need] {
                    State::New => {
                        state[need] = State::Open;
                        path.push((need, 0));
                    }
                    State::Open => {
                        let from = path
                            .iter()
                            .position(|(d, _)| *d == need)
                            .expect("an open definition is on the path");
                        let circle: Vec<usize> = path[from..].iter().map(|(d, _)| *d).collect();
                        // Figures that already stand in a reported circle would only repeat it.
                        if circle.iter().all(|d| !in_circle.contains(d)) {
                            self.report(&circle, faults);
                        }
                        in_circle.extend(circle);
                    }
                    State::Done => {}
                }
            }
        }
        out
    }

    fn report(&self, circle: &[usize], faults: &mut Vec<Diagnostic>) {
        let start = (0..circle.len()).min_by_key(|at| circle[*at]).unwrap_or(0);
        let mut names: Vec<&str> = circle
            .iter()
            .cycle()
            .skip(start)
            .take(circle.len())
            .map(|d| self.pack.definitions[*d].name.as_str())
            .collect();
        names.push(names[0]);
        if names.len() > 8 {
            names.splice(5..names.len() - 2, ["…"]);
        }
        let first = &self.pack.definitions[circle[start]];
        if circle
            .iter()
            .any(|d| self.pack.definitions[*d].settles.is_some())
        {
            faults.push(
                Diagnostic::fault(
                    first.name_span,
                    format!("`{}` needs itself: {}", first.name, names.join(" needs ")),
                )
                .expected("facts that settle to what does not need them")
                .hint("let the fact settle to a figure that does not need it, or to one worked out `as if` the fact were otherwise"),
            );
            return;
        }
        faults.push(
            Diagnostic::fault(first.name_span, format!("`{}` needs itself: {}", first.name, names.join(" needs ")))
                .expected("figures that do not need each other")
                .hint("split one of them so that one part does not need the other, or work one out `as if` a fact were otherwise"),
        );
    }
}

/// Reports a definition that would take too deep a stack to work out.
fn depths(pack: &Pack, moment: Moment, order: &[usize], faults: &mut Vec<Diagnostic>) {
    let mut depths = vec![0usize; pack.definitions.len()];
    for at in order {
        let definition = &pack.definitions[*at];
        let Some(body) = &definition.body else {
            continue;
        };
        let deepest = needs(pack, body, moment)
            .into_iter()
            .map(|need| depths[need])
            .max()
            .unwrap_or(0);
        let mut own = 0;
        body.visit(&mut |node| {
            own = own.max(match &node.what {
                What::Charge { bands, .. } => pack.bands[*bands]
                    .nodes()
                    .iter()
                    .map(|n| n.height())
                    .max()
                    .unwrap_or(0),
                What::PlaceOn { scale, .. } => pack.scales[*scale]
                    .nodes()
                    .iter()
                    .map(|n| n.height())
                    .max()
                    .unwrap_or(0),
                _ => 0,
            });
        });
        depths[*at] = deepest + own + body.height();
        if depths[*at] > DEEPEST {
            faults.push(
                Diagnostic::fault(
                    definition.name_span,
                    format!(
                        "`{}` needs figures that need figures, {} operators deep",
                        definition.name, depths[*at]
                    ),
                )
                .expected(format!("at most {DEEPEST}"))
                .hint("let some figures use facts and amounts in place of other figures"),
            );
            // What needs it is not reported again.
            depths[*at] = 0;
        }
    }
}

impl Graph<'_> {
    fn definition(&mut self, at: usize) {
        let definition = &self.pack.definitions[at];
        let course = definition
            .body
            .as_ref()
            .map_or(Course::default(), |body| self.course(body));
        if course.degree > 2 {
            self.faults.push(
                Diagnostic::fault(
                    definition.name_span,
                    format!(
                        "`{}` is of degree {} in hours",
                        definition.name, course.degree
                    ),
                )
                .expected("degree two at the most")
                .hint("multiply what varies with hours at most once"),
            );
        }
        // The degree is reported once, not again for everything that uses it.
        self.courses[at] = Course {
            degree: course.degree.min(2),
            ..course
        };
    }

    fn target(&mut self, target: Target) -> Course {
        match target {
            Target::Figure(at) => self.courses[at],
            Target::Fact { kind: JOB, fact: 0 } => Course {
                degree: 1,
                varies: true,
            },
            Target::Fact { .. } => defined(self.pack, target, self.moment)
                .map_or(Course::default(), |at| self.courses[at]),
        }
    }

    fn over(&mut self, over: &Over) -> Course {
        [&over.with, &over.body, &over.by]
            .into_iter()
            .flatten()
            .fold(Course::default(), |c, node| c.with(self.course(node)))
    }

    fn fixed(&mut self, node: &Node, why: &str, hint: &str) {
        if self.course(node).varies {
            let fault = Diagnostic::fault(node.span, "this varies with hours")
                .expected(format!("something that does not, as {why}"));
            self.faults.push(fault.hint(hint));
        }
    }

    fn course(&mut self, node: &Node) -> Course {
        match &node.what {
            What::Fixed(_) | What::Amount { .. } | What::Missing { .. } | What::Dated(_) => {
                Course::default()
            }
            What::Name { target, .. } => self.target(*target),
            // What it needs may come later in the order: under changed facts a figure may need itself. Where it is not known yet, the
            // program's own bounds still hold when it is made.
            What::AsIf {
                figure, changes, ..
            } => {
                let varies = Course {
                    degree: 1,
                    varies: true,
                };
                for change in changes {
                    self.fixed(
                        &change.value,
                        "it stands in for a fact",
                        "give a value that holds at any hours",
                    );
                }
                changes
                    .iter()
                    .fold(self.courses[*figure].with(varies), |c, change| {
                        c.with(self.course(&change.value))
                    })
            }
            What::Partner {
                target, failing, ..
            } => {
                let course = self.target(*target);
                failing
                    .as_ref()
                    .map_or(course, |f| course.with(self.course(f)))
            }
            What::Lookup { keys, .. } => {
                for key in keys {
                    self.fixed(
                        key,
                        "it is the key of a table",
                        "place what varies on a `scale`",
                    );
                }
                Course::default()
            }
            What::Where {
                when,
                give,
                otherwise,
            } => {
                let when = self.course(when);
                let course = self.course(give).with(self.course(otherwise));
                Course {
                    degree: course.degree,
                    varies: course.varies || when.varies,
                }
            }
            What::Extreme { list, .. } => list
                .iter()
                .fold(Course::default(), |c, n| c.with(self.course(n))),
            What::Sum(over) => over
                .iter()
                .fold(Course::default(), |c, o| c.with(self.over(o))),
            What::Count(over) | What::Any { over, .. } => {
                let course = over
                    .iter()
                    .fold(Course::default(), |c, o| c.with(self.over(o)));
                Course {
                    degree: 0,
                    varies: course.varies,
                }
            }
            What::First { over, failing, .. } => self.over(over).with(self.course(failing)),
            What::Place { over, .. } => Course {
                degree: 0,
                varies: self.over(over).varies,
            },
            What::Years { from, to } => {
                self.fixed(from, "it is a day", "let the day come from a fact");
                self.fixed(to, "it is a day", "let the day come from a fact");
                Course::default()
            }
            What::Binary { op, left, right } => {
                let (l, r) = (self.course(left), self.course(right));
                match op {
                    BinaryOp::Multiply => Course {
                        degree: l.degree + r.degree,
                        varies: l.varies || r.varies,
                    },
                    BinaryOp::Add
                    | BinaryOp::Subtract
                    | BinaryOp::Divide
                    | BinaryOp::Beyond
                    | BinaryOp::LimitedTo
                    | BinaryOp::RaisedTo => l.with(r),
                }
            }
            What::Convert { of, .. } => self.course(of),
            What::Round {
                of, unit, manner, ..
            } => {
                let course = self.course(of);
                let minor = matches!(node.ty, Ty::Money(_)) && *unit == Fraction::new(1, 100);
                if course.varies && manner.is_none() && !minor {
                    self.faults.push(
                        Diagnostic::fault(
                            node.span,
                            "this rounding varies with hours and does not say how it is drawn",
                        )
                        .expected("`as steps` or `as a slope`"),
                    );
                }
                let steps = *manner == Some(Manner::Steps);
                Course {
                    degree: if steps { 0 } else { course.degree },
                    varies: course.varies,
                }
            }
            What::DivideRounded { of, by, manner, .. } => {
                self.fixed(by, "it divides", "multiply out");
                let course = self.course(of);
                if course.varies && *manner != Some(Manner::Steps) {
                    self.faults.push(
                        Diagnostic::fault(
                            of.span,
                            "this varies with hours and is divided by a fact",
                        )
                        .expected("something that does not vary, or a quotient rounded `as steps`")
                        .hint("multiply out"),
                    );
                }
                Course {
                    degree: 0,
                    varies: course.varies,
                }
            }
            What::Charge { of, bands } => {
                let course = self.course(of);
                let inner = self.bands_course(*bands);
                Course {
                    degree: course.degree.max(inner.degree),
                    varies: course.varies || inner.varies,
                }
            }
            What::PlaceOn { of, scale } => {
                let course = self.course(of);
                let inner = self.scale_course(*scale);
                Course {
                    degree: inner.degree,
                    varies: course.varies || inner.varies,
                }
            }
            What::Compare { left, right, .. }
            | What::Both(left, right)
            | What::Either(left, right) => {
                let course = self.course(left).with(self.course(right));
                Course {
                    degree: 0,
                    varies: course.varies,
                }
            }
            What::Not(inner) => Course {
                degree: 0,
                varies: self.course(inner).varies,
            },
        }
    }

    fn bands_course(&mut self, at: usize) -> Course {
        if let Some(course) = self.bands[at] {
            return course;
        }
        self.bands[at] = Some(Course::default());
        let mut course = Course::default();
        for (rate, limit) in &self.pack.bands[at].bands {
            self.fixed(
                rate,
                "it is the rate of a band",
                "use a figure of its own for each rate",
            );
            if let Some(limit) = limit {
                course = course.with(self.course(limit));
            }
        }
        self.bands[at] = Some(course);
        course
    }

    fn scale_course(&mut self, at: usize) -> Course {
        if let Some(course) = self.scales[at] {
            return course;
        }
        self.scales[at] = Some(Course::default());
        let mut course = Course::default();
        for (value, limit) in &self.pack.scales[at].steps {
            course = course.with(self.course(value));
            match limit {
                Limit::UpTo(limit) | Limit::Below(limit) => {
                    course.varies |= self.course(limit).varies
                }
                Limit::Beyond => {}
            }
        }
        self.scales[at] = Some(course);
        course
    }
}
