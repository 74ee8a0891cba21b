//! The checked tree: every name looked up, every type known.

use super::ast::{BinaryOp, CompareOp};
use super::types::Ty;
use crate::num::{Direction, Fraction};
use crate::program::{ItemKind, Manner};
use crate::source::Span;

#[derive(Clone, Debug)]
pub(super) struct Node {
    pub ty: Ty,
    pub span: Span,
    pub what: What,
}

/// What a name stands for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Target {
    /// A fact, by its position in its kind.
    Fact { kind: usize, fact: usize },
    /// A figure or item, by its position among the definitions.
    Figure(usize),
}

/// One kind that a sum, count or search goes over.
#[derive(Clone, Debug)]
pub(super) struct Over {
    pub kind: usize,
    pub with: Option<Node>,
    pub body: Option<Node>,
    /// The key of an order.
    pub by: Option<Node>,
}

#[derive(Clone, Debug)]
pub(super) enum What {
    Fixed(Fraction),
    /// An amount, picked by a date of the pack.
    Amount {
        amount: usize,
        dated: usize,
    },
    /// Whether an amount is absent on that date.
    Missing {
        amount: usize,
        dated: usize,
    },
    /// A date of the pack.
    Dated(usize),
    /// A fact or figure of the record that stands at `level` of the scopes, or of its owner of the right kind.
    Name {
        target: Target,
        kind: usize,
        level: usize,
        text: String,
    },
    /// The same of the partner; `failing` where there is none.
    Partner {
        target: Target,
        level: usize,
        failing: Option<Box<Node>>,
        text: String,
    },
    /// A value of a table on a date of the pack.
    /// A figure of the record at `level`, or of its owner of the right kind, once more under changed facts.
    AsIf {
        figure: usize,
        kind: usize,
        level: usize,
        changes: Vec<Changed>,
        text: String,
    },
    Lookup {
        table: usize,
        dated: usize,
        keys: Vec<Node>,
    },
    Where {
        when: Box<Node>,
        give: Box<Node>,
        otherwise: Box<Node>,
    },
    Extreme {
        larger: bool,
        list: Vec<Node>,
    },
    Sum(Vec<Over>),
    Count(Vec<Over>),
    Any {
        every: bool,
        over: Vec<Over>,
    },
    First {
        down: bool,
        over: Box<Over>,
        failing: Box<Node>,
    },
    Place {
        down: bool,
        over: Box<Over>,
    },
    Years {
        from: Box<Node>,
        to: Box<Node>,
    },
    Binary {
        op: BinaryOp,
        left: Box<Node>,
        right: Box<Node>,
    },
    /// A product with a fixed factor of a conversion.
    Convert {
        of: Box<Node>,
        conversion: usize,
    },
    Round {
        of: Box<Node>,
        direction: Direction,
        unit: Fraction,
        manner: Option<Manner>,
    },
    DivideRounded {
        of: Box<Node>,
        by: Box<Node>,
        direction: Direction,
        unit: Fraction,
        manner: Option<Manner>,
    },
    Charge {
        of: Box<Node>,
        bands: usize,
    },
    PlaceOn {
        of: Box<Node>,
        scale: usize,
    },
    Compare {
        op: CompareOp,
        left: Box<Node>,
        right: Box<Node>,
    },
    Not(Box<Node>),
    Both(Box<Node>, Box<Node>),
    Either(Box<Node>, Box<Node>),
}

impl Node {
    /// Whether it is the literal 0, which fits every quantity.
    pub(super) fn is_zero(&self) -> bool {
        matches!(self.what, What::Fixed(value) if value.is_zero() && self.ty == Ty::Count)
    }

    /// Whether it is a fixed number on every date: literals, amounts and sums of them.
    pub(super) fn is_fixed(&self) -> bool {
        match &self.what {
            What::Fixed(_) | What::Amount { .. } => true,
            What::Binary { left, right, .. } => left.is_fixed() && right.is_fixed(),
            What::Convert { of, .. } | What::Round { of, .. } => of.is_fixed(),
            What::Extreme { list, .. } => list.iter().all(Node::is_fixed),
            _ => false,
        }
    }
}

/// A fact that stands changed for one figure: that of the record at `level`, or of its owner of the right kind.
#[derive(Clone, Debug)]
pub(super) struct Changed {
    pub kind: usize,
    pub fact: usize,
    pub level: usize,
    pub value: Node,
}

/// A figure or item of one kind of record.
#[derive(Clone, Debug)]
pub(super) struct Definition {
    pub name: String,
    pub kind: usize,
    pub ty: Ty,
    pub part: usize,
    pub law: String,
    pub item: Option<ItemKind>,
    /// Whether the item is claimed; none where that is no question.
    pub claimed: Option<Node>,
    pub span: Span,
    pub name_span: Span,
    /// The fact of its kind, by position, that means this once settled; none for a figure or item, which has its name from the text.
    pub settles: Option<usize>,
    /// None where the expression has faults.
    pub body: Option<Node>,
}

#[derive(Clone, Debug)]
pub(super) struct BandsDecl {
    pub name: String,
    pub span: Span,
    pub kind: usize,
    pub ty: Ty,
    pub bands: Vec<(Node, Option<Node>)>,
}

#[derive(Clone, Debug)]
pub(super) enum Limit {
    UpTo(Node),
    Below(Node),
    Beyond,
}

#[derive(Clone, Debug)]
pub(super) struct ScaleDecl {
    pub name: String,
    pub span: Span,
    pub kind: usize,
    pub ty: Ty,
    pub gives: Ty,
    pub steps: Vec<(Node, Limit)>,
}

/// A hold or note.
#[derive(Clone, Debug)]
pub(super) struct Condition {
    pub kind: usize,
    pub when: Node,
    /// The reason, or the name of the note.
    pub text: String,
    pub part: usize,
}

impl Node {
    /// How many expressions stand inside each other, itself included.
    pub(super) fn height(&self) -> usize {
        let mut below = 0;
        self.inner(&mut |node| below = below.max(node.height()));
        below + 1
    }

    /// Calls back for this node and every node below it.
    pub(super) fn visit<'a>(&'a self, call: &mut dyn FnMut(&'a Node)) {
        call(self);
        self.inner(&mut |node| node.visit(call));
    }

    /// Calls back for every node right below this one.
    fn inner<'a>(&'a self, call: &mut dyn FnMut(&'a Node)) {
        match &self.what {
            What::Fixed(_)
            | What::Amount { .. }
            | What::Missing { .. }
            | What::Dated(_)
            | What::Name { .. } => {}
            What::AsIf { changes, .. } => changes.iter().for_each(|c| call(&c.value)),
            What::Partner { failing, .. } => {
                if let Some(failing) = failing {
                    call(failing);
                }
            }
            What::Lookup { keys: list, .. } | What::Extreme { list, .. } => {
                list.iter().for_each(call)
            }
            What::Where {
                when,
                give,
                otherwise,
            } => [when, give, otherwise].into_iter().for_each(|n| call(n)),
            What::Sum(over) | What::Count(over) | What::Any { over, .. } => {
                over.iter().flat_map(Over::nodes).for_each(call)
            }
            What::First { over, failing, .. } => {
                over.nodes().for_each(&mut *call);
                call(failing);
            }
            What::Place { over, .. } => over.nodes().for_each(call),
            What::Years { from: a, to: b }
            | What::Binary {
                left: a, right: b, ..
            }
            | What::DivideRounded { of: a, by: b, .. }
            | What::Compare {
                left: a, right: b, ..
            }
            | What::Both(a, b)
            | What::Either(a, b) => {
                call(a);
                call(b);
            }
            What::Convert { of, .. }
            | What::Round { of, .. }
            | What::Charge { of, .. }
            | What::PlaceOn { of, .. }
            | What::Not(of) => {
                call(of);
            }
        }
    }
}

impl Over {
    fn nodes(&self) -> impl Iterator<Item = &Node> {
        [&self.with, &self.body, &self.by].into_iter().flatten()
    }
}

impl BandsDecl {
    /// Every expression of its bands.
    pub(super) fn nodes(&self) -> Vec<&Node> {
        self.bands
            .iter()
            .flat_map(|(rate, limit)| std::iter::once(rate).chain(limit))
            .collect()
    }
}

impl ScaleDecl {
    /// Every expression of its steps.
    pub(super) fn nodes(&self) -> Vec<&Node> {
        self.steps
            .iter()
            .flat_map(|(value, limit)| {
                let limit = match limit {
                    Limit::UpTo(limit) | Limit::Below(limit) => Some(limit),
                    Limit::Beyond => None,
                };
                std::iter::once(value).chain(limit)
            })
            .collect()
    }
}
