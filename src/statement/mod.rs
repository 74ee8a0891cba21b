//! Statements of three [kinds](Kind): an assessment in, PDF bytes out.
//!
//! [`letter_view`], [`pay_views`] and [`copy_view`] say what is printed, as plain words and whole numbers; a template (Typst markup
//! with tags) says how it is set; [`Typesetter`] fills the template, lays out pages offline with the
//! shipped fonts and writes PDF/UA-1 and PDF/A-2a. The same input gives the same bytes. Refuses
//! characters that the fonts cannot set, undefined names, and values where no text can stand.
//! Reads no file, clock or environment. Imports `measures`, `diag`, `num`.

#![expect(
    clippy::float_arithmetic,
    reason = "places on a page are floats; sums of money never are"
)]

mod bars;
mod build;
mod chart;
mod context;
mod copy_view;
mod crowded;
mod error;
mod evidence;
mod fonts;
mod kind;
mod money;
mod pay_view;
mod place;
mod room;
mod speech;
mod templates;
mod texts;
mod typeset;
mod view;
mod world;

pub use bars::{BarPart, Bars};
pub use build::{Detail, EmployerCost, copy_view, letter_view, pay_views};
pub use chart::{Chart, Dot, Label, Run, Tick};
pub use context::{FactShape, LetterContext, LetterDelivery, LocalRules, Office, missing_labels};
pub use copy_view::{
    CopyPart, CopySection, CopyView, Head, LongRow, LongTable, LongWeight, SignOff,
};
pub use error::StatementError;
pub use evidence::{Evidence, PointPlace, RulesRecord, WorkedPoint};
pub use kind::Kind;
pub use money::{Currency, Decimals};
pub use pay_view::{PayFact, PayGroup, PayTable, PayView};
pub use room::probable_length;
pub use speech::{Form, Speech};
pub use templates::TemplateSet;
pub use texts::Texts;
pub use typeset::{PAGE_LIMIT, Typeset, Typesetter, typeset, typeset_with_view};
pub use view::{
    Answer, AnswerWeight, Column, LetterView, Line, Part, PartKind, Particular, Row, RowWeight,
    Section, Table, TurnText,
};
