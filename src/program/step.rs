//! Steps, registers and what a program carries beside them.

use super::{ItemKind, Shape};
use crate::index::{Id, IdVec};
use crate::num::{Direction, Fraction};
use crate::source::Span;

/// A register: the index of the step that fills it.
pub type Reg = Id<Step>;

/// What the walk makes of a rounding.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Manner {
    /// Money rounded to its minor unit: too small to see, left out of the walk.
    Minor,
    /// Steps too small to matter: drawn as the straight line through them.
    Slope,
    /// A real staircase: every step is a cliff of its own.
    Steps,
}

/// Which fact fills a register.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct FactRef {
    /// Position of the kind in the schema.
    pub kind: u32,
    /// Position of the record among those of its kind.
    pub instance: u32,
    /// Position of the fact in its kind.
    pub fact: u32,
}

/// What a step does. Yes and no are 1 and 0.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Op {
    /// A fixed number.
    Constant(Fraction),
    /// A fact of the household.
    Fact(Id<Input>),
    /// The hours a week of the varied job.
    Hours,
    /// The sum.
    Add(Reg, Reg),
    /// The difference.
    Subtract(Reg, Reg),
    /// The product.
    Multiply(Reg, Reg),
    /// The product with a fixed number.
    Times(Reg, Fraction),
    /// The smaller of two.
    Smaller(Reg, Reg),
    /// The larger of two.
    Larger(Reg, Reg),
    /// One of two, by a yes or no.
    Choose {
        /// The yes or no.
        when: Reg,
        /// Its value where yes.
        then: Reg,
        /// Its value where no.
        otherwise: Reg,
    },
    /// The multiple of a unit.
    Round {
        /// What is rounded.
        of: Reg,
        /// The unit, above zero.
        unit: Fraction,
        /// Which way.
        direction: Direction,
        /// What the walk makes of it.
        manner: Manner,
    },
    /// A quotient that is rounded at once. The divisor does not vary with hours; where the dividend does, the quotient is a real
    /// staircase.
    Divide {
        /// What is divided.
        of: Reg,
        /// By what; above zero by the range of its fact.
        by: Reg,
        /// The unit of the result, above zero.
        unit: Fraction,
        /// Which way.
        direction: Direction,
    },
    /// Whether the left is at least the right.
    AtLeast(Reg, Reg),
    /// Whether the left is above the right.
    Above(Reg, Reg),
    /// Whether both are the same.
    Same(Reg, Reg),
    /// Whether both are yes.
    Both(Reg, Reg),
    /// Whether one is yes.
    Either(Reg, Reg),
    /// Yes where no, no where yes.
    Not(Reg),
    /// A value of a keyed table; the keys do not vary with hours.
    Lookup {
        /// Which table.
        table: Id<Table>,
        /// One register a key.
        keys: Vec<Reg>,
    },
    /// Full years from one day to another, at least zero.
    Years {
        /// The first day.
        from: Reg,
        /// The last day.
        to: Reg,
    },
}

/// The whole numbers that one register means: value = number / scale.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Scales {
    /// With the law's roundings.
    pub exact: i128,
    /// In the walk.
    pub smooth: i128,
}

/// One step with what is known of its register.
#[derive(Clone, Debug)]
pub struct Step {
    /// What it does.
    pub op: Op,
    /// Scales of its register.
    pub scale: Scales,
    /// No value of the register, and no sum of the sizes of its terms in hours up to 168, is larger than this.
    pub limit: u128,
    /// Degree in hours of the varied job; 0 where it does not vary.
    pub degree: u8,
    /// Whether it varies with those hours at all (a condition has degree 0 and may vary).
    pub varies: bool,
    /// The figure or item that it belongs to; none for shared constants and facts.
    pub line: Option<Id<Line>>,
    /// The register of the fixed factor of a product, so that a working can say which amount it was.
    pub factor: Option<Reg>,
}

/// A fact that fills a register.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Input {
    /// Which fact.
    pub fact: FactRef,
    /// Units to one of the value as the list holds it.
    pub units: i64,
    /// The register.
    pub reg: Reg,
}

/// A named value that went into a line.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Entered {
    /// Its name in the rule text.
    pub name: String,
    /// Its register.
    pub reg: Reg,
    /// What the value means: `money a month`, `rate` … for printing.
    pub unit: String,
    /// Words of a choice, in order; empty for other values.
    pub words: Vec<String>,
}

/// A figure or item of one record.
#[derive(Clone, Debug)]
pub struct Line {
    /// Name in the pack.
    pub name: String,
    /// Title of the instrument.
    pub part: String,
    /// Law reference; empty where a figure has none.
    pub law: String,
    /// Position of the kind that it is worked out per.
    pub kind: u32,
    /// Position of the record.
    pub instance: u32,
    /// Its register. Filled when the line is complete.
    pub reg: Option<Reg>,
    /// Where it stands in the rule text.
    pub span: Span,
    /// The lines, facts and amounts that went in, as named in the rule text.
    pub inputs: Vec<Entered>,
    /// The amounts that went in.
    pub amounts: Vec<Id<Amount>>,
    /// What the value means: `money a month`, `rate` … for printing.
    pub unit: String,
    /// Words of a choice, in order; empty for other values.
    pub words: Vec<String>,
    /// Position in the order of the law.
    pub order: u32,
    /// Whether it was worked out under changed facts.
    pub as_if: bool,
}

/// An item of one record.
#[derive(Clone, Debug)]
pub struct Item {
    /// What kind of line it is.
    pub kind: ItemKind,
    /// Its line.
    pub line: Id<Line>,
    /// Its register, rounded to the minor unit; 1 or 0 for a passport.
    pub reg: Reg,
    /// Position of the adult that it belongs to; none for the household's own.
    pub adult: Option<u32>,
    /// What would be due if it were claimed; none where claiming is no question.
    pub due: Option<Reg>,
}

/// A reason to hold a household: it applies where the register is yes.
#[derive(Clone, Debug)]
pub struct Guard {
    /// Yes or no.
    pub reg: Reg,
    /// Why, in words that are printed.
    pub because: String,
}

/// A note that a statement prints where the register is yes.
#[derive(Clone, Debug)]
pub struct Note {
    /// Yes or no.
    pub reg: Reg,
    /// Name in the pack.
    pub name: String,
}

/// An amount of the law on the program's date.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Amount {
    /// Name in the pack.
    pub name: String,
    /// Value with its unit as text.
    pub value: String,
    /// First day that it holds, year-month-day.
    pub from: String,
    /// Last day; empty until further notice.
    pub to: String,
    /// Where it was published.
    pub source: String,
    /// Where in the source.
    pub locator: String,
    /// Whether the figure was seen in its source.
    pub confirmed: bool,
    /// The reason, where a list changed it.
    pub changed_because: String,
}

/// A keyed table for one date, dense in its keys.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Table {
    /// Name in the pack.
    pub name: String,
    /// Least value and number of values of each key; a key outside takes the nearest end.
    pub keys: Vec<(i64, usize)>,
    /// Values, the last key fastest.
    pub values: Vec<Fraction>,
    /// The row that each value comes from, as an amount; none where there is no row.
    pub amounts: Vec<Option<Id<Amount>>>,
}

/// A flat program.
#[derive(Clone, Debug)]
pub struct Program {
    /// The shape that it was made for.
    pub shape: Shape,
    /// The steps; each step only reads registers before it.
    pub steps: IdVec<Step>,
    /// The facts that it reads.
    pub inputs: IdVec<Input>,
    /// Figures and items that the items need.
    pub lines: IdVec<Line>,
    /// The items, in the order of the law.
    pub items: Vec<Item>,
    /// Reasons to hold.
    pub guards: Vec<Guard>,
    /// Notes to print.
    pub notes: Vec<Note>,
    /// The amounts used.
    pub amounts: IdVec<Amount>,
    /// The tables used.
    pub tables: IdVec<Table>,
}
