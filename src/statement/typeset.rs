//! From a view to PDF bytes. A [`Typesetter`] is made once and used for many letters.

use super::build::Detail;
use super::context::LetterContext;
use super::crowded::{crowded, places};
use super::error::StatementError;
use super::kind::Kind;
use super::pay_view::PayView;
use super::room::probable_length;
use super::templates::{Filler, TemplateSet, check_glyphs};
use super::texts::Texts;
use super::view::LetterView;
use super::world::Desk;
use chrono::NaiveDate;
use std::sync::Arc;
use typst::layout::{Frame, FrameItem};

/// The template of the client letter.
const CLIENT: &str = Kind::Client.template();
/// Letters after which the typesetter's memory is swept.
const SWEEP_EVERY: u64 = 8;
/// Sweeps that an unused result survives.
const SWEEP_AGE: usize = 2;
/// Pages that a letter in ordinary print may have.
pub const PAGE_LIMIT: usize = 4;
/// Sizes of print above this one are large print and may need more pages.
const ORDINARY_PRINT: u8 = 12;

/// A finished document.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Typeset {
    /// The PDF.
    pub bytes: Vec<u8>,
    /// Its pages.
    pub pages: usize,
}

/// Templates compiled once, fonts loaded once. One thread uses one; it is not for sharing.
pub struct Typesetter {
    filler: Filler,
    desk: Desk,
    made: u64,
}

impl Typesetter {
    /// Reads a template set.
    ///
    /// # Errors
    /// Where a template does not parse.
    pub fn new(set: &TemplateSet) -> Result<Typesetter, StatementError> {
        Ok(Typesetter {
            filler: Filler::new(set)?,
            desk: Desk::new(set.shared())?,
            made: 0,
        })
    }

    /// Typesets a client letter. The same view, texts and day give the same bytes.
    ///
    /// # Errors
    /// Where a text cannot be set (the field and the character are named), a template is faulty, or a
    /// letter in ordinary print needs more than [`PAGE_LIMIT`] pages.
    pub fn letter(
        &mut self,
        view: &LetterView,
        texts: &Arc<Texts>,
        issued: NaiveDate,
    ) -> Result<Typeset, StatementError> {
        let value = minijinja::Value::from(minijinja::value::Serde(view));
        check_glyphs(&value)?;
        let made = self.document(CLIENT, &value, texts, &view.number, issued)?;
        if view.print_size <= ORDINARY_PRINT && made.pages > PAGE_LIMIT {
            return Err(StatementError::TooLong {
                pages: made.pages,
                limit: PAGE_LIMIT,
            });
        }
        Ok(made)
    }

    /// Typesets a view of any kind with that kind's template; `identity` is the statement's number, with the variant where there are several.
    ///
    /// # Errors
    /// As for [`Typesetter::any`].
    pub fn statement<V: serde::Serialize>(
        &mut self,
        kind: Kind,
        view: &V,
        texts: &Arc<Texts>,
        (identity, issued): (&str, NaiveDate),
    ) -> Result<Typeset, StatementError> {
        self.any(kind.template(), view, texts, identity, issued)
    }

    /// Typesets a payroll page; with closer lines where it would need a second page in ordinary print. `identity` is as for
    /// [`Typesetter::statement`].
    ///
    /// # Errors
    /// As for [`Typesetter::any`].
    pub fn pay_page(
        &mut self,
        view: &PayView,
        texts: &Arc<Texts>,
        identity: (&str, NaiveDate),
    ) -> Result<Typeset, StatementError> {
        let made = self.statement(Kind::Payroll, view, texts, identity)?;
        if made.pages == 1 || view.print_size > ORDINARY_PRINT {
            return Ok(made);
        }
        let closer = PayView {
            close: 1,
            ..view.clone()
        };
        self.statement(Kind::Payroll, &closer, texts, identity)
    }

    /// The Typst source of a client letter, for those who write templates.
    ///
    /// # Errors
    /// As for [`Typesetter::letter`].
    pub fn source(&self, view: &LetterView, texts: &Arc<Texts>) -> Result<String, StatementError> {
        let value = minijinja::Value::from(minijinja::value::Serde(view));
        self.source_of(CLIENT, &value, texts)
    }

    /// The Typst source of any filled template.
    ///
    /// # Errors
    /// As for [`Typesetter::any`].
    pub fn source_of(
        &self,
        template: &str,
        view: &minijinja::Value,
        texts: &Arc<Texts>,
    ) -> Result<String, StatementError> {
        check_glyphs(view)?;
        let source = self.filler.fill(template, view, texts)?;
        Ok(source.text().to_owned())
    }

    /// The words of a client letter as they are set, one text a page, in reading order.
    ///
    /// # Errors
    /// As for [`Typesetter::letter`].
    pub fn words(
        &self,
        view: &LetterView,
        texts: &Arc<Texts>,
    ) -> Result<Vec<String>, StatementError> {
        let value = minijinja::Value::from(minijinja::value::Serde(view));
        self.words_of(CLIENT, &value, texts)
    }

    /// The words of any filled template, one text a page.
    ///
    /// # Errors
    /// As for [`Typesetter::any`].
    pub fn words_of(
        &self,
        template: &str,
        view: &minijinja::Value,
        texts: &Arc<Texts>,
    ) -> Result<Vec<String>, StatementError> {
        check_glyphs(view)?;
        let source = self.filler.fill(template, view, texts)?;
        let document = self.desk.pages(source)?;
        Ok(document
            .pages()
            .iter()
            .map(|page| frame_text(&page.frame))
            .collect())
    }

    /// What has no room in a filled template: words outside the margins, and words that cover others. Empty where all is well.
    ///
    /// # Errors
    /// As for [`Typesetter::any`].
    pub fn crowded<V: serde::Serialize>(
        &self,
        template: &str,
        view: &V,
        texts: &Arc<Texts>,
    ) -> Result<Vec<String>, StatementError> {
        let value = minijinja::Value::from(minijinja::value::Serde(view));
        check_glyphs(&value)?;
        let source = self.filler.fill(template, &value, texts)?;
        Ok(crowded(&self.desk.pages(source)?))
    }

    /// The pieces of text of a filled template with their left edge in points, page by page.
    ///
    /// # Errors
    /// As for [`Typesetter::any`].
    pub fn places<V: serde::Serialize>(
        &self,
        template: &str,
        view: &V,
        texts: &Arc<Texts>,
    ) -> Result<Vec<(String, f64)>, StatementError> {
        let value = minijinja::Value::from(minijinja::value::Serde(view));
        let source = self.filler.fill(template, &value, texts)?;
        Ok(places(&self.desk.pages(source)?))
    }

    /// Fills one template with any view and typesets it.
    ///
    /// # Errors
    /// As for [`Typesetter::letter`], without the limit of pages.
    pub fn any<V: serde::Serialize>(
        &mut self,
        template: &str,
        view: &V,
        texts: &Arc<Texts>,
        identity: &str,
        issued: NaiveDate,
    ) -> Result<Typeset, StatementError> {
        let value = minijinja::Value::from(minijinja::value::Serde(view));
        check_glyphs(&value)?;
        self.document(template, &value, texts, identity, issued)
    }

    fn document(
        &mut self,
        template: &str,
        view: &minijinja::Value,
        texts: &Arc<Texts>,
        identity: &str,
        issued: NaiveDate,
    ) -> Result<Typeset, StatementError> {
        let source = self.filler.fill(template, view, texts)?;
        let pages = self.desk.pages(source.clone());
        let made = pages.and_then(|document| {
            Ok(Typeset {
                bytes: self.desk.pdf(&document, source, identity, issued)?,
                pages: document.pages().len(),
            })
        });
        self.made += 1;
        if self.made.is_multiple_of(SWEEP_EVERY) {
            comemo::evict(SWEEP_AGE);
        }
        made
    }
}

/// All text of a frame, a space between its pieces.
fn frame_text(frame: &Frame) -> String {
    let mut out = String::new();
    for (_, item) in frame.items() {
        let piece = match item {
            FrameItem::Group(group) => frame_text(&group.frame),
            FrameItem::Text(text) => text.text.to_string(),
            FrameItem::Shape(..)
            | FrameItem::Image(..)
            | FrameItem::Link(..)
            | FrameItem::Tag(..) => continue,
        };
        if !out.is_empty() {
            out.push(' ');
        }
        out.push_str(&piece);
    }
    out
}

/// Numbers of pages that are tried, the fewest first: an ordinary letter has two.
const TRIED: [usize; 2] = [2, 3];
/// What a probable length must leave free of the last page, in pages, for lines that the typesetter keeps together.
const SPARE: f64 = 0.03;

/// Builds and typesets one client letter: with as much detail as two pages hold; where nothing fits on two, as three hold; else with
/// every detail, and briefly where that would be longer than [`PAGE_LIMIT`] pages.
///
/// # Errors
/// As for [`super::letter_view`] and [`Typesetter::letter`].
pub fn typeset(
    typesetter: &mut Typesetter,
    assessment: &crate::measures::Assessment,
    context: &LetterContext,
) -> Result<Typeset, StatementError> {
    typeset_with_view(typesetter, assessment, context).map(|(made, _)| made)
}

/// As [`typeset`], with the view that was printed.
///
/// # Errors
/// As for [`typeset`].
pub fn typeset_with_view(
    typesetter: &mut Typesetter,
    assessment: &crate::measures::Assessment,
    context: &LetterContext,
) -> Result<(Typeset, LetterView), StatementError> {
    let mut set = |view: &LetterView| typesetter.letter(view, &context.texts, context.issued);
    let mut views = vec![];
    for detail in [Detail::Full, Detail::Plain, Detail::Short, Detail::Bare] {
        let view = super::letter_view(assessment, context, detail)?;
        let length = probable_length(&view);
        views.push((view, length));
        // The first that fits is the one with the most detail; nothing shorter is needed. Large print has its own length.
        if views[0].0.print_size > ORDINARY_PRINT || length + SPARE <= TRIED[0] as f64 {
            break;
        }
    }
    for pages in TRIED {
        for place in 0..views.len() {
            if views[place].1 + SPARE > pages as f64 {
                continue;
            }
            let made = set(&views[place].0)?;
            if made.pages <= pages {
                return Ok((made, views.swap_remove(place).0));
            }
        }
    }
    let full = views.swap_remove(0).0;
    match set(&full) {
        Ok(made) => Ok((made, full)),
        Err(StatementError::TooLong { .. }) => {
            let brief = super::letter_view(assessment, context, Detail::Brief)?;
            set(&brief).map(|made| (made, brief))
        }
        Err(other) => Err(other),
    }
}
