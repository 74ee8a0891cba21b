//! Kinds of item and the shape of a household.

use serde::{Deserialize, Serialize};

/// What kind of line an item is; says how it enters the sums.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
pub enum ItemKind {
    /// Contractual pay; counts in.
    Pay,
    /// Other income; counts in.
    Income,
    /// Tax; comes off.
    Tax,
    /// Social contribution; comes off.
    Contribution,
    /// Payment into the person's own pension, sacrificed pay included; comes off.
    Pension,
    /// Repayment of a loan through the pay; comes off.
    Loan,
    /// Benefit; counts in.
    Benefit,
    /// Help in kind that is won or lost: 1 or 0, not in any sum.
    Passport,
    /// Paid only because of working; comes off after costs.
    Cost,
    /// Rent and local tax; comes off what is left after housing.
    Housing,
    /// What the employer pays on top of the pay: shown, not in any sum of the household.
    Employer,
}

impl ItemKind {
    /// All kinds, in the order of [`ItemKind::WORDS`].
    pub const ALL: [ItemKind; 11] = [
        ItemKind::Pay,
        ItemKind::Income,
        ItemKind::Tax,
        ItemKind::Contribution,
        ItemKind::Pension,
        ItemKind::Loan,
        ItemKind::Benefit,
        ItemKind::Passport,
        ItemKind::Cost,
        ItemKind::Housing,
        ItemKind::Employer,
    ];
    /// The words of the rule language for the kinds.
    pub const WORDS: [&'static str; 11] = [
        "pay",
        "income",
        "tax",
        "contribution",
        "pension",
        "loan",
        "benefit",
        "passport",
        "cost",
        "housing",
        "employer",
    ];

    /// The kind with this word.
    pub fn from_word(word: &str) -> Option<ItemKind> {
        Self::WORDS
            .iter()
            .position(|w| *w == word)
            .map(|at| Self::ALL[at])
    }

    /// The word of the rule language.
    pub fn word(self) -> &'static str {
        Self::WORDS[self as usize]
    }

    /// How an amount of this kind enters net income: 1 adds, −1 comes off, 0 stays out.
    pub fn sign_in_net(self) -> i64 {
        match self {
            ItemKind::Pay | ItemKind::Income | ItemKind::Benefit => 1,
            ItemKind::Tax | ItemKind::Contribution | ItemKind::Pension | ItemKind::Loan => -1,
            ItemKind::Passport | ItemKind::Cost | ItemKind::Housing | ItemKind::Employer => 0,
        }
    }

    /// Whether it is part of take-home pay.
    pub fn in_take_home(self) -> bool {
        match self {
            ItemKind::Pay
            | ItemKind::Tax
            | ItemKind::Contribution
            | ItemKind::Pension
            | ItemKind::Loan => true,
            ItemKind::Income
            | ItemKind::Benefit
            | ItemKind::Passport
            | ItemKind::Cost
            | ItemKind::Housing
            | ItemKind::Employer => false,
        }
    }
}

/// How many records of each kind a household has, whose they are, and who is the earner. Households with one shape share a program.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Shape {
    /// By kind (the positions of the schema): the position of the owner of each record.
    pub owners: Vec<Vec<u32>>,
    /// Position of the earner among the adults.
    pub earner: u32,
    /// Position among the jobs of the one whose hours vary.
    pub varied_job: u32,
    /// What the facts about past periods mean.
    pub moment: Moment,
}

/// When: facts about past periods differ between the two.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Moment {
    /// Every fact is what the list tells.
    #[default]
    Now,
    /// A fact that settles means what the pack says it settles to.
    Settled,
}

/// A fact that settles.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Settling {
    /// Its name.
    pub name: String,
    /// Position of its kind.
    pub kind: usize,
    /// Position among the facts of its kind.
    pub fact: usize,
    /// Units to one of a value as lists hold it.
    pub units: i64,
    /// The value that it always settles to, as lists hold it; none where rules work it out.
    pub to: Option<i64>,
}
