//! The results of one household, as plain data that statements and tables print.

use crate::num::{Fraction, Hours, Money};

pub use crate::engine::ItemKind;

/// One line of the statement: an item for one instance (an adult's tax, the household's benefit).
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ItemInfo {
    /// The item's name in the pack.
    pub name: String,
    /// What it is.
    pub kind: ItemKind,
    /// Position of the adult that it belongs to; none for the household's own.
    pub adult: Option<usize>,
    /// Law reference: the instrument's law and the item's place in it.
    pub law: String,
    /// Title of the instrument (`part`).
    pub part: String,
}

/// The household at one number of hours of the earner.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Point {
    /// Hours a week of the varied job.
    pub hours: Hours,
    /// E: the earner's contractual pay, all jobs, in the statement period.
    pub pay: Money,
    /// Amounts of all items, in the order of [`Assessment::items`]; a passport is 0 or 1.
    pub items: Vec<Money>,
    /// The earner's pay after tax, contributions, pension payments and loan repayments.
    pub take_home: Money,
    /// Y: all cash of the unit.
    pub net: Money,
    /// Net income less costs of working.
    pub after_costs: Money,
    /// After costs, less rent and full local tax.
    pub after_housing: Money,
    /// Participation tax rate, 1 − [Y(h) − Y(0)] / E(h); none without pay.
    pub ptr: Option<Fraction>,
    /// The same with net income after costs.
    pub ptr_after_costs: Option<Fraction>,
    /// Y(0) / Y(h); none where Y(h) is not above zero.
    pub replacement: Option<Fraction>,
    /// Marginal effective tax rate at the point, 1 − dY/dE to the right, roundings smoothed; none on the last point.
    pub metr_here: Option<Fraction>,
    /// The same with net income after costs.
    pub metr_here_after_costs: Option<Fraction>,
}

/// Which line a budget line is for.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct JobTerms {
    /// Empty for today's job, else the words of the offer.
    pub offer: String,
    /// Reference of the offer in the list; empty for today's job.
    pub reference: String,
    /// Basic wage, in ten-thousandths of the currency unit an hour.
    pub wage: i64,
    /// Hours of today's job or of the offer.
    pub hours: Hours,
    /// All facts of this job, with how they are known.
    pub facts: Vec<FactUse>,
}

/// What happens at a turning point.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TurnKind {
    /// The slope changes, the level does not.
    Kink,
    /// Net income jumps up (or down where `size` is below zero).
    Cliff,
    /// A cost of working steps up or down; no rule of the pack turned.
    CostStep,
    /// Only help in kind is won or lost.
    Passport,
}

/// A rule that turned at a point.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Cause {
    /// Title of the instrument (`part`).
    pub part: String,
    /// Name of the figure or item whose rule turned.
    pub line: String,
}

/// What a turning point does to one item.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Effect {
    /// Position in [`Assessment::items`].
    pub item: usize,
    /// Jump of the item in minor units as it enters net income (a tax that rises is below zero). For a passport: 1 won, −1 lost.
    pub jump: Money,
    /// Change of what the item adds to net income per unit of extra pay.
    pub slope: Fraction,
}

/// A kink, a cliff or a passport change.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Turn {
    /// What it is.
    pub kind: TurnKind,
    /// Hours where it lies, exact (the upper end of its interval where it is irrational).
    pub at: Fraction,
    /// Hours to print: `at` rounded up to a hundredth.
    pub hours: Hours,
    /// E there, to print: for a cliff the first payable pay in whole minor units from which the new branch stays.
    pub pay: Money,
    /// Net income just before and just after, exact evaluations with the law's roundings; after costs likewise.
    pub net_before: Money,
    /// See `net_before`.
    pub net_after: Money,
    /// After costs, just before.
    pub after_costs_before: Money,
    /// After costs, just after.
    pub after_costs_after: Money,
    /// Size of the jump of net income, signed; zero for a kink.
    pub size: Money,
    /// METR to the left and to the right, roundings smoothed; none where pay does not change.
    pub metr_before: Option<Fraction>,
    /// See `metr_before`.
    pub metr_after: Option<Fraction>,
    /// The rules that turned.
    pub causes: Vec<Cause>,
    /// What changed; the effects add up to the whole.
    pub effects: Vec<Effect>,
}

/// A stretch of the budget line with one METR (or, where a rule is of the second degree, one formula).
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Segment {
    /// First hours, exact.
    pub from: Fraction,
    /// Last hours, exact.
    pub to: Fraction,
    /// E at both ends, smoothed, in currency units of the statement period.
    pub pay_from: Fraction,
    /// See `pay_from`.
    pub pay_to: Fraction,
    /// Net income at both ends as limits from inside, smoothed, in currency units.
    pub net_from: Fraction,
    /// See `net_from`.
    pub net_to: Fraction,
    /// After costs at both ends, likewise.
    pub after_costs_from: Fraction,
    /// See `after_costs_from`.
    pub after_costs_to: Fraction,
    /// METR at the start of the segment; none where pay does not change.
    pub metr: Option<Fraction>,
    /// The same after costs.
    pub metr_after_costs: Option<Fraction>,
    /// The part of each extra unit of pay that goes into the person's own pension.
    pub pension_share: Fraction,
    /// What each item adds to net income per unit of extra pay, in the order of [`Assessment::items`] (pay is 1, taxes below zero).
    pub shares: Vec<Fraction>,
    /// The intercept of the segment's line at zero hours, in currency units of the statement period.
    pub virtual_income: Fraction,
}

/// A range of hours where net income is below its highest value at fewer hours by more than one currency unit a period.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Trap {
    /// Where net income starts to be lower.
    pub from: Fraction,
    /// Where it is regained; none where that is not by the end of the line.
    pub to: Option<Fraction>,
    /// The highest net income at fewer hours.
    pub peak: Money,
    /// The most that is lost inside.
    pub depth: Money,
}

/// A stretch where net income neither rises nor falls.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NoGain {
    /// First hours.
    pub from: Fraction,
    /// Last hours.
    pub to: Fraction,
}

/// One earner's budget line at one wage.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BudgetLine {
    /// The job that it is for.
    pub terms: JobTerms,
    /// Exact points on the grid (0 to 48 by 1, widened), offers and today's hours included, ordered by hours.
    pub grid: Vec<Point>,
    /// Position in `grid` of the job's own hours.
    pub own: usize,
    /// Position in `grid` of the hours of the named step's end: four hours more on today's line, the offer's hours on an offer's.
    pub step_to: usize,
    /// Y(0+), the first minute of work, smoothed, in minor units rounded half up.
    pub first_minute: Money,
    /// Turning points in order.
    pub turns: Vec<Turn>,
    /// Segments in order.
    pub segments: Vec<Segment>,
    /// Traps in order; measured after costs where there are costs of childcare, plain otherwise.
    pub traps: Vec<Trap>,
    /// No-gain stretches in order.
    pub no_gain: Vec<NoGain>,
    /// Highest hours that were walked.
    pub up_to: Hours,
    /// Whether there are costs of working on this line, so that the after-costs measures lead.
    pub has_costs: bool,
}

/// Splitting a rise (the difference of two wages) at today's hours. No behaviour is predicted.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct RiseSplit {
    /// Price part: the hourly return at today's hours, new less old, in currency units of the statement period per weekly hour.
    pub price: Fraction,
    /// Income part: net income at today's hours, new less old.
    pub income: Money,
    /// Whether today's hours sit on a turning point of either line, where the split is fragile.
    pub fragile: bool,
}

/// What another wage does to the pay that reaches the person: take-home pay without what is not taken from pay
/// ([`Request::apart`](super::Request::apart)). No benefits, no behaviour.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PaySplit {
    /// What one more weekly hour adds at today's hours on today's terms, to the right, roundings smoothed, in currency units of
    /// the statement period.
    pub hour_before: Fraction,
    /// The same on the offer's terms; the difference is the price part.
    pub hour_after: Fraction,
    /// Income part: pay that reaches the person at today's hours, new less old, exact to the minor unit.
    pub income: Money,
    /// Whether today's hours sit on a turning point of either line, where the split is fragile.
    pub fragile: bool,
    /// The fewest quarter hours on the offer's terms from which as much reaches the person as today; none where it never does.
    pub holding: Option<Hours>,
}

/// What an offer means against today.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OfferMeasures {
    /// Position of the offer's line in [`EarnerResult::lines`].
    pub line: usize,
    /// The fewest quarter hours at the offer's wage from which as much is left after costs of working as today (net income, where there are no such
    /// costs); none where it never is.
    pub holding: Option<Hours>,
    /// The rise split at today's hours; none for an earner without a job today.
    pub rise: Option<RiseSplit>,
    /// The same for the pay that reaches the person; none for an earner without a job today.
    pub pay: Option<PaySplit>,
}

/// The hours that a sum needs.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TargetHours {
    /// The sum asked for, net a period and after costs of working, where there are any.
    pub sum: Money,
    /// The fewest quarter hours at which what is left first reaches it.
    pub first: Option<Hours>,
    /// The fewest from which it stays reached to the end of the line.
    pub stays: Option<Hours>,
}

/// All results for one earner.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct EarnerResult {
    /// Position among the adults.
    pub adult: usize,
    /// Name for the letter; may be empty.
    pub name: String,
    /// Y(0): all jobs of the earner ended.
    pub not_in_work: Point,
    /// Whether the earner has a job today.
    pub has_job: bool,
    /// Today's line first where there is one, then one line an offer.
    pub lines: Vec<BudgetLine>,
    /// One entry an offer.
    pub offers: Vec<OfferMeasures>,
    /// Target hours on the first line, where the list names a sum.
    pub target: Option<TargetHours>,
}

/// A fact as it was used.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct FactUse {
    /// Kind of record.
    pub kind: String,
    /// Whose: the member's name or reference; empty for the household.
    pub of: String,
    /// Name of the fact.
    pub name: String,
    /// Value as text.
    pub value: String,
    /// 's' seen, 't' told, 'a' assumed.
    pub known: char,
}

/// An amount of the law as it was used.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct AmountUse {
    /// Name in the pack.
    pub name: String,
    /// Value with its unit as text.
    pub value: String,
    /// First day that it holds.
    pub from: String,
    /// Last day that it holds; empty until further notice.
    pub to: String,
    /// Where it was published.
    pub source: String,
    /// Where in the source.
    pub locator: String,
    /// Whether the figure was seen in its source.
    pub confirmed: bool,
    /// Set where a list changed the amount for a what-if: the reason given.
    pub changed_because: String,
    /// Title of the instrument that used it first.
    pub part: String,
}

/// One line of a working: a figure or an item at one point, in the order of the law.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct WorkingLine {
    /// Title of the instrument.
    pub part: String,
    /// Name of the figure or item.
    pub name: String,
    /// Whose: `adult 1`, `child 2`, or empty for the household.
    pub of: String,
    /// Value as text with its unit.
    pub value: String,
    /// The rule as it stands in the pack.
    pub formula: String,
    /// The values that went in, `name = value`.
    pub inputs: Vec<String>,
    /// Law reference; may be empty for a figure.
    pub law: String,
    /// The amounts of the law that went in.
    pub amounts: Vec<AmountUse>,
    /// Whether the figure could have changed an item here: not so where it stands in a branch of a rule that was not taken.
    pub counts: bool,
}

/// Net income for each pair of the partners' hours, everything else fixed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct CoupleTable {
    /// Today's hours of the first and second adult.
    pub own: (Hours, Hours),
    /// Hours of the first adult: the rows.
    pub first: Vec<Hours>,
    /// Hours of the second adult: the columns.
    pub second: Vec<Hours>,
    /// Net income, by row and column.
    pub net: Vec<Vec<Money>>,
    /// The same after costs.
    pub after_costs: Vec<Vec<Money>>,
}

/// A benefit that would be due at today's hours and is not claimed; it stands in no sum.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Unclaimed {
    /// Position in [`Assessment::items`].
    pub item: usize,
    /// What would be due a period, other claims as they are.
    pub due: Money,
}

/// The household once the facts about past periods have settled.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Settled {
    /// Names of the facts that settle to something else and are why, in the order of the pack.
    pub facts: Vec<String>,
    /// Why the pack does not cover the household once settled; then there are no results.
    pub held: Vec<String>,
    /// The results, one entry an earner, in the order of [`Assessment::earners`] and with the same items, lines and grids.
    pub earners: Vec<EarnerResult>,
}

/// Everything that was worked out for one household.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Assessment {
    /// The household's reference.
    pub reference: String,
    /// The lines of the statement.
    pub items: Vec<ItemInfo>,
    /// One entry an earner; an adult without a job and without an offer has none.
    pub earners: Vec<EarnerResult>,
    /// The table of both partners' hours, where both have a job today.
    pub couple: Option<CoupleTable>,
    /// The same once the facts about past periods have settled; none where that changes no sum and no rate on any line.
    pub settled: Option<Settled>,
    /// Benefits that would be due at today's hours of the first earner and are not claimed.
    pub unclaimed: Vec<Unclaimed>,
    /// Names of the pack's notes that hold at today's hours.
    pub notes: Vec<String>,
    /// The facts used, with how they are known.
    pub facts: Vec<FactUse>,
    /// The amounts used.
    pub amounts: Vec<AmountUse>,
}
