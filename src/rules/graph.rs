//! Checks that need the whole pack: circles, unused names, what varies with hours, dates without an amount.

use super::amounts::{AmountDecl, day_text};
use super::ast::BinaryOp;
use super::pack::{JOB, Pack};
use super::tree::{Limit, Node, Over, Target, What};
use super::types::Ty;
use crate::diag::Diagnostic;
use crate::num::Fraction;
use crate::program::Manner;
use std::collections::HashSet;

/// What is known of a quantity: its degree in hours, and whether it varies at all.
#[derive(Clone, Copy, Default)]
struct Course {
    degree: u32,
    varies: bool,
}

impl Course {
    fn with(self, other: Course) -> Course {
        Course { degree: self.degree.max(other.degree), varies: self.varies || other.varies }
    }
}

struct Graph<'a> {
    pack: &'a Pack,
    faults: &'a mut Vec<Diagnostic>,
    courses: Vec<Option<Course>>,
    /// Definitions being worked out, the innermost last.
    path: Vec<usize>,
    in_circle: HashSet<usize>,
    bands: Vec<Option<Course>>,
    scales: Vec<Option<Course>>,
}

pub(super) fn check(pack: &Pack, faults: &mut Vec<Diagnostic>) {
    let mut graph = Graph {
        pack,
        faults,
        courses: vec![None; pack.definitions.len()],
        path: Vec::new(),
        in_circle: HashSet::new(),
        bands: vec![None; pack.bands.len()],
        scales: vec![None; pack.scales.len()],
    };
    for at in 0..pack.definitions.len() {
        graph.definition(at);
    }
    for condition in pack.holds.iter().chain(&pack.notes) {
        graph.course(&condition.when);
    }
    unused(pack, graph.faults);
}

impl Graph<'_> {
    fn definition(&mut self, at: usize) -> Course {
        if let Some(course) = self.courses[at] {
            return course;
        }
        if let Some(start) = self.path.iter().position(|d| *d == at) {
            let circle: Vec<usize> = self.path[start..].to_vec();
            if circle.iter().all(|d| self.in_circle.insert(*d)) {
                let mut names: Vec<&str> = circle.iter().map(|d| self.pack.definitions[*d].name.as_str()).collect();
                names.push(names[0]);
                let first = &self.pack.definitions[circle[0]];
                self.faults.push(
                    Diagnostic::fault(first.name_span, format!("`{}` needs itself: {}", first.name, names.join(" needs ")))
                        .expected("figures that do not need each other")
                        .hint("split one of them so that one part does not need the other, or work it out `as if` a fact were settled"),
                );
            }
            return Course::default();
        }
        self.path.push(at);
        let course = self.pack.definitions[at].body.as_ref().map_or(Course::default(), |body| self.course(body));
        self.path.pop();
        if course.degree > 2 {
            let definition = &self.pack.definitions[at];
            self.faults.push(
                Diagnostic::fault(definition.name_span, format!("`{}` is of degree {} in hours", definition.name, course.degree))
                    .expected("degree two at the most"),
            );
        }
        // The degree is reported once, not again for everything that uses it.
        let course = Course { degree: course.degree.min(2), ..course };
        self.courses[at] = Some(course);
        course
    }

    fn target(&mut self, target: Target) -> Course {
        match target {
            Target::Figure(at) => self.definition(at),
            Target::Fact { kind: JOB, fact: 0 } => Course { degree: 1, varies: true },
            Target::Fact { .. } => Course::default(),
        }
    }

    fn over(&mut self, over: &Over) -> Course {
        [&over.with, &over.body, &over.by].into_iter().flatten().fold(Course::default(), |c, node| c.with(self.course(node)))
    }

    fn fixed(&mut self, node: &Node, why: &str) {
        if self.course(node).varies {
            self.faults.push(
                Diagnostic::fault(node.span, "this varies with hours").expected(format!("something that does not, as {why}")).hint("multiply out"),
            );
        }
    }

    fn course(&mut self, node: &Node) -> Course {
        match &node.what {
            What::Fixed(_) | What::Amount { .. } | What::Missing { .. } | What::Dated(_) => Course::default(),
            What::Name { target, .. } => self.target(*target),
            What::Partner { target, failing, .. } => {
                let course = self.target(*target);
                failing.as_ref().map_or(course, |f| course.with(self.course(f)))
            }
            What::Lookup { keys, .. } => {
                for key in keys {
                    self.fixed(key, "it is the key of a table");
                }
                Course::default()
            }
            What::Where { when, give, otherwise } => {
                let when = self.course(when);
                let course = self.course(give).with(self.course(otherwise));
                Course { degree: course.degree, varies: course.varies || when.varies }
            }
            What::Extreme { list, .. } => list.iter().fold(Course::default(), |c, n| c.with(self.course(n))),
            What::Sum(over) => over.iter().fold(Course::default(), |c, o| c.with(self.over(o))),
            What::Count(over) | What::Any { over, .. } => {
                let course = over.iter().fold(Course::default(), |c, o| c.with(self.over(o)));
                Course { degree: 0, varies: course.varies }
            }
            What::First { over, failing, .. } => self.over(over).with(self.course(failing)),
            What::Place { over, .. } => Course { degree: 0, varies: self.over(over).varies },
            What::Years { from, to } => {
                self.fixed(from, "it is a day");
                self.fixed(to, "it is a day");
                Course::default()
            }
            What::Binary { op, left, right } => {
                let (l, r) = (self.course(left), self.course(right));
                match op {
                    BinaryOp::Multiply => Course { degree: l.degree + r.degree, varies: l.varies || r.varies },
                    BinaryOp::Add | BinaryOp::Subtract | BinaryOp::Divide | BinaryOp::Beyond | BinaryOp::LimitedTo | BinaryOp::RaisedTo => l.with(r),
                }
            }
            What::Convert { of, .. } => self.course(of),
            What::Round { of, unit, manner, .. } => {
                let course = self.course(of);
                let minor = matches!(node.ty, Ty::Money(_)) && *unit == Fraction::new(1, 100);
                if course.varies && manner.is_none() && !minor {
                    self.faults.push(
                        Diagnostic::fault(node.span, "this rounding varies with hours and does not say how it is drawn")
                            .expected("`as steps` or `as a slope`"),
                    );
                }
                let steps = *manner == Some(Manner::Steps);
                Course { degree: if steps { 0 } else { course.degree }, varies: course.varies }
            }
            What::DivideRounded { of, by, manner, .. } => {
                self.fixed(by, "it divides");
                let course = self.course(of);
                if course.varies && *manner != Some(Manner::Steps) {
                    self.faults.push(
                        Diagnostic::fault(of.span, "this varies with hours and is divided by a fact")
                            .expected("something that does not vary, or a quotient rounded `as steps`")
                            .hint("multiply out"),
                    );
                }
                Course { degree: 0, varies: course.varies }
            }
            What::Charge { of, bands } => {
                let course = self.course(of);
                let inner = self.bands_course(*bands);
                Course { degree: course.degree.max(inner.degree), varies: course.varies || inner.varies }
            }
            What::PlaceOn { of, scale } => {
                let course = self.course(of);
                let inner = self.scale_course(*scale);
                Course { degree: inner.degree, varies: course.varies || inner.varies }
            }
            What::Compare { left, right, .. } | What::Both(left, right) | What::Either(left, right) => {
                let course = self.course(left).with(self.course(right));
                Course { degree: 0, varies: course.varies }
            }
            What::Not(inner) => Course { degree: 0, varies: self.course(inner).varies },
        }
    }

    fn bands_course(&mut self, at: usize) -> Course {
        if let Some(course) = self.bands[at] {
            return course;
        }
        self.bands[at] = Some(Course::default());
        let mut course = Course::default();
        for (rate, limit) in &self.pack.bands[at].bands {
            self.fixed(rate, "it is the rate of a band");
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
                Limit::UpTo(limit) | Limit::Below(limit) => course.varies |= self.course(limit).varies,
                Limit::Beyond => {}
            }
        }
        self.scales[at] = Some(course);
        course
    }
}

#[derive(Default)]
struct Used {
    figures: HashSet<usize>,
    facts: HashSet<(usize, usize)>,
    amounts: HashSet<usize>,
    guarded: HashSet<usize>,
    tables: HashSet<usize>,
    conversions: HashSet<usize>,
    bands: HashSet<usize>,
    scales: HashSet<usize>,
}

fn unused(pack: &Pack, faults: &mut Vec<Diagnostic>) {
    let mut used = Used::default();
    {
        let mut note = |node: &Node| match &node.what {
            What::Name { target, .. } | What::Partner { target, .. } => match target {
                Target::Figure(at) => {
                    used.figures.insert(*at);
                }
                Target::Fact { kind, fact } => {
                    used.facts.insert((*kind, *fact));
                }
            },
            What::Amount { amount, .. } => {
                used.amounts.insert(*amount);
            }
            What::Missing { amount, .. } => {
                used.guarded.insert(*amount);
            }
            What::Lookup { table, .. } => {
                used.tables.insert(*table);
            }
            What::Convert { conversion, .. } => {
                used.conversions.insert(*conversion);
            }
            What::Charge { bands, .. } => {
                used.bands.insert(*bands);
            }
            What::PlaceOn { scale, .. } => {
                used.scales.insert(*scale);
            }
            _ => {}
        };
        for definition in &pack.definitions {
            if let Some(body) = &definition.body {
                body.visit(&mut note);
            }
        }
        for condition in pack.holds.iter().chain(&pack.notes) {
            condition.when.visit(&mut note);
        }
        for bands in &pack.bands {
            for (rate, limit) in &bands.bands {
                rate.visit(&mut note);
                if let Some(limit) = limit {
                    limit.visit(&mut note);
                }
            }
        }
        for scale in &pack.scales {
            for (value, limit) in &scale.steps {
                value.visit(&mut note);
                if let Limit::UpTo(limit) | Limit::Below(limit) = limit {
                    limit.visit(&mut note);
                }
            }
        }
    }
    let unused = |what: &str, name: &str| {
        Diagnostic::general(format!("the {what} `{name}` is not used")).hint(format!("remove the {what}, or use it in an item"))
    };
    for (at, definition) in pack.definitions.iter().enumerate() {
        let same_name_used = pack.definitions.iter().enumerate().any(|(other, d)| {
            d.name == definition.name && d.span == definition.span && used.figures.contains(&other)
        });
        if definition.item.is_none() && !used.figures.contains(&at) && !same_name_used {
            faults.push(
                Diagnostic::fault(definition.name_span, format!("the figure `{}` is not used", definition.name)).expected("a figure that an item needs"),
            );
        }
    }
    for (kind, decl) in pack.kinds.iter().enumerate() {
        for (fact, f) in decl.facts.iter().enumerate() {
            let built_in = ["birth", "hours", "wage"].contains(&f.name.as_str());
            let elsewhere = pack.kinds.iter().enumerate().any(|(k, d)| d.facts.iter().enumerate().any(|(i, other)| other.name == f.name && used.facts.contains(&(k, i))));
            if !built_in && !used.facts.contains(&(kind, fact)) && !elsewhere {
                faults.push(unused("fact", &f.name));
            }
        }
    }
    for (at, amount) in pack.amounts.iter().enumerate() {
        if !used.amounts.contains(&at) && !used.guarded.contains(&at) {
            faults.push(Diagnostic { span: Some(amount.rows[0].span), ..unused("amount", &amount.name) });
        }
        if used.amounts.contains(&at) {
            dates(pack, amount, used.guarded.contains(&at), faults);
        }
    }
    for (at, table) in pack.tables.iter().enumerate() {
        if !used.tables.contains(&at) {
            faults.push(unused("table", &table.name));
        }
    }
    for (at, conversion) in pack.conversions.iter().enumerate() {
        if !used.conversions.contains(&at) {
            faults.push(unused("conversion", &conversion.name));
        }
    }
    for (at, bands) in pack.bands.iter().enumerate() {
        if !used.bands.contains(&at) {
            faults.push(unused("bands", &bands.name));
        }
    }
    for (at, scale) in pack.scales.iter().enumerate() {
        if !used.scales.contains(&at) {
            faults.push(unused("scale", &scale.name));
        }
    }
}

/// Every day that the pack covers has a row; an absent one is asked for with `missing`.
fn dates(pack: &Pack, amount: &AmountDecl, guarded: bool, faults: &mut Vec<Diagnostic>) {
    let mut next = pack.manifest.from;
    for row in &amount.rows {
        if row.to < next {
            continue;
        }
        if row.from > next {
            break;
        }
        if row.value.is_none() && !guarded {
            faults.push(
                Diagnostic::fault(row.span, format!("`{}` is absent from {}", amount.name, day_text(row.from)))
                    .expected(format!("a `hold where … missing {}`", amount.name)),
            );
        }
        next = row.to.saturating_add(1);
        if next > pack.manifest.to {
            return;
        }
    }
    if next <= pack.manifest.to {
        let place = amount.rows.iter().rev().find(|row| row.from <= next).unwrap_or(&amount.rows[0]);
        faults.push(
            Diagnostic::fault(place.span, format!("`{}` has no value on {}", amount.name, day_text(next)))
                .expected(format!("a value for every day from {} to {}", day_text(pack.manifest.from), day_text(pack.manifest.to))),
        );
    }
}
