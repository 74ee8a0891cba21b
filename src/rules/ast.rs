//! The tree of a rule text as written, before names are looked up.

use crate::num::{Direction, Fraction};
use crate::program::{ItemKind, Manner};
use crate::source::Span;

/// A name with its place.
#[derive(Clone, Debug)]
pub(super) struct Ident {
    pub text: String,
    pub span: Span,
}

/// One file.
#[derive(Clone, Debug)]
pub(super) struct Part {
    pub title: String,
    pub title_span: Span,
    /// Name of the date that picks amounts.
    pub dated: Option<Ident>,
    pub law: String,
    pub statements: Vec<Statement>,
    /// Names whose statements have faults: what uses them is not reported again.
    pub broken: Vec<String>,
}

/// A statement with what it stands under.
#[derive(Clone, Debug)]
pub(super) struct Statement {
    /// The last `per` before it.
    pub per: Option<Ident>,
    pub what: StatementKind,
    pub span: Span,
}

#[derive(Clone, Debug)]
pub(super) enum StatementKind {
    Record {
        name: Ident,
        owner: Ident,
    },
    Choice {
        name: Ident,
        words: Vec<Ident>,
    },
    Fact(Box<FactStatement>),
    Conversion {
        name: Ident,
        from: Ident,
        to: Ident,
        times: Fraction,
    },
    Table {
        name: Ident,
        keys: Vec<Ident>,
        gives: TypeName,
    },
    Bands {
        name: Ident,
        of: TypeName,
        bands: Vec<Band>,
    },
    Scale {
        name: Ident,
        of: TypeName,
        gives: TypeName,
        steps: Vec<ScaleStep>,
    },
    Figure {
        name: Ident,
        ty: TypeName,
        expr: Expr,
        law: Option<String>,
    },
    Item {
        name: Ident,
        kind: ItemKind,
        expr: Expr,
        claimed: Option<Expr>,
        law: String,
    },
    Hold {
        when: Expr,
        because: String,
    },
    Note {
        name: Ident,
        when: Expr,
    },
}

#[derive(Clone, Debug)]
pub(super) struct FactStatement {
    pub name: Ident,
    pub of: Ident,
    pub ty: TypeName,
    pub range: Option<(Fraction, Fraction, Span)>,
    pub default: Option<Expr>,
    /// What it will be once settled.
    pub settles: Option<Expr>,
    pub ask: String,
}

#[derive(Clone, Debug)]
pub(super) struct Band {
    pub rate: Expr,
    /// None for `beyond`.
    pub up_to: Option<Expr>,
    pub span: Span,
}

#[derive(Clone, Debug)]
pub(super) struct ScaleStep {
    pub value: Expr,
    pub limit: StepLimit,
    pub span: Span,
}

#[derive(Clone, Debug)]
pub(super) enum StepLimit {
    UpTo(Expr),
    Below(Expr),
    Beyond,
}

/// A type as written.
#[derive(Clone, Debug)]
pub(super) struct TypeName {
    /// `money`, `rate` … or the name of a choice.
    pub word: Ident,
    /// The period of money.
    pub period: Option<Ident>,
}

#[derive(Clone, Debug)]
pub(super) struct Expr {
    pub kind: ExprKind,
    pub span: Span,
    /// How many expressions stand inside each other, itself included.
    pub height: u16,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum BinaryOp {
    Add,
    Subtract,
    Multiply,
    Divide,
    Beyond,
    LimitedTo,
    RaisedTo,
}

impl BinaryOp {
    pub(super) fn word(self) -> &'static str {
        match self {
            BinaryOp::Add => "+",
            BinaryOp::Subtract => "-",
            BinaryOp::Multiply => "*",
            BinaryOp::Divide => "/",
            BinaryOp::Beyond => "beyond",
            BinaryOp::LimitedTo => "limited to",
            BinaryOp::RaisedTo => "raised to",
        }
    }
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum CompareOp {
    Above,
    Below,
    AtLeast,
    AtMost,
    Is,
    IsNot,
}

#[derive(Clone, Debug)]
pub(super) enum ExprKind {
    Number(Fraction),
    Percent(Fraction),
    HoursLiteral(Fraction),
    Money(Fraction, Option<Ident>),
    Day(i64),
    YesNo(bool),
    Name(Ident),
    Of {
        name: Ident,
        whose: Ident,
        failing: Option<Box<Expr>>,
    },
    Lookup {
        table: Ident,
        keys: Vec<Expr>,
    },
    Where {
        when: Box<Expr>,
        give: Box<Expr>,
        otherwise: Box<Expr>,
    },
    Extreme {
        larger: bool,
        list: Vec<Expr>,
    },
    SumOver {
        kind: Ident,
        with: Option<Box<Expr>>,
        body: Box<Expr>,
    },
    CountOf {
        kind: Ident,
        with: Option<Box<Expr>>,
    },
    AnyEvery {
        every: bool,
        kind: Ident,
        with: Box<Expr>,
    },
    First {
        kind: Ident,
        by: Ident,
        down: bool,
        with: Option<Box<Expr>>,
        give: Box<Expr>,
        failing: Box<Expr>,
    },
    Place {
        by: Ident,
        down: bool,
        with: Option<Box<Expr>>,
    },
    Years {
        from: Box<Expr>,
        to: Box<Expr>,
    },
    Missing(Ident),
    /// A figure worked out once more under changed facts.
    AsIf {
        name: Ident,
        changes: Vec<(Ident, Expr)>,
    },
    Binary {
        op: BinaryOp,
        left: Box<Expr>,
        right: Box<Expr>,
    },
    Round {
        of: Box<Expr>,
        direction: Direction,
        unit: Fraction,
        manner: Option<Manner>,
    },
    Convert {
        of: Box<Expr>,
        by: Ident,
    },
    Charge {
        of: Box<Expr>,
        by: Ident,
    },
    PlaceOn {
        of: Box<Expr>,
        on: Ident,
    },
    Compare {
        op: CompareOp,
        left: Box<Expr>,
        right: Box<Expr>,
    },
    Not(Box<Expr>),
    Both(Box<Expr>, Box<Expr>),
    Either(Box<Expr>, Box<Expr>),
}

impl ExprKind {
    /// Calls back for each expression right inside this one.
    pub(super) fn inner<'a>(&'a self, call: &mut dyn FnMut(&'a Expr)) {
        match self {
            ExprKind::Number(_)
            | ExprKind::Percent(_)
            | ExprKind::HoursLiteral(_)
            | ExprKind::Money(..)
            | ExprKind::Day(_)
            | ExprKind::YesNo(_)
            | ExprKind::Name(_)
            | ExprKind::Missing(_) => {}
            ExprKind::Of { failing: one, .. }
            | ExprKind::CountOf { with: one, .. }
            | ExprKind::Place { with: one, .. } => {
                one.iter().for_each(|e| call(e));
            }
            ExprKind::AsIf { changes, .. } => changes.iter().for_each(|(_, value)| call(value)),
            ExprKind::Lookup { keys: list, .. } | ExprKind::Extreme { list, .. } => {
                list.iter().for_each(call)
            }
            ExprKind::Where {
                when,
                give,
                otherwise,
            } => [when, give, otherwise].into_iter().for_each(|e| call(e)),
            ExprKind::SumOver { with, body, .. } => {
                with.iter().for_each(|e| call(e));
                call(body);
            }
            ExprKind::First {
                with,
                give,
                failing,
                ..
            } => {
                with.iter().for_each(|e| call(e));
                call(give);
                call(failing);
            }
            ExprKind::AnyEvery { with: of, .. }
            | ExprKind::Round { of, .. }
            | ExprKind::Convert { of, .. }
            | ExprKind::Charge { of, .. }
            | ExprKind::PlaceOn { of, .. }
            | ExprKind::Not(of) => call(of),
            ExprKind::Years { from: a, to: b }
            | ExprKind::Binary {
                left: a, right: b, ..
            }
            | ExprKind::Compare {
                left: a, right: b, ..
            }
            | ExprKind::Both(a, b)
            | ExprKind::Either(a, b) => {
                call(a);
                call(b);
            }
        }
    }
}
