//! Diagnostics: what is wrong with a text that somebody wrote, where, and what was expected.
//! In: spans and words. Out: a plain or coloured excerpt. Imports `index` and `source`.

use crate::source::{Sources, Span};
use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};

/// How grave a diagnostic is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Severity {
    /// The text cannot be used.
    Fault,
    /// The text can be used, but somebody should look.
    Warning,
}

/// One finding about a text.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    /// How grave it is.
    pub severity: Severity,
    /// Where; none where a whole file or pack is meant.
    pub span: Option<Span>,
    /// What was found: lower case, no full stop, names in backticks.
    pub message: String,
    /// What was expected there.
    pub expected: Option<String>,
    /// Things to do, each a short sentence.
    pub hints: Vec<String>,
}

impl Diagnostic {
    /// A fault at a place.
    pub fn fault(span: Span, message: impl Into<String>) -> Self {
        Diagnostic {
            severity: Severity::Fault,
            span: Some(span),
            message: message.into(),
            expected: None,
            hints: vec![],
        }
    }

    /// A fault without a place.
    pub fn general(message: impl Into<String>) -> Self {
        Diagnostic {
            severity: Severity::Fault,
            span: None,
            message: message.into(),
            expected: None,
            hints: vec![],
        }
    }

    /// A warning at a place.
    pub fn warning(span: Span, message: impl Into<String>) -> Self {
        Diagnostic {
            severity: Severity::Warning,
            ..Diagnostic::fault(span, message)
        }
    }

    /// Says what was expected.
    #[must_use]
    pub fn expected(mut self, what: impl Into<String>) -> Self {
        self.expected = Some(what.into());
        self
    }

    /// Adds something to do.
    #[must_use]
    pub fn hint(mut self, what: impl Into<String>) -> Self {
        self.hints.push(what.into());
        self
    }

    /// One line: `file:line:column: message; expected …`.
    pub fn line(&self, sources: &Sources) -> String {
        let mut out = String::new();
        if let Some(span) = self.span {
            let (line, column) = sources.line_column(span.file, span.start);
            out.push_str(&format!(
                "{}:{line}:{column}: ",
                sources.get(span.file).name
            ));
        }
        out.push_str(&self.message);
        if let Some(expected) = &self.expected {
            out.push_str("; expected ");
            out.push_str(expected);
        }
        for hint in &self.hints {
            out.push_str("; ");
            out.push_str(hint);
        }
        out
    }

    /// The finding with an excerpt of the text.
    pub fn render(&self, sources: &Sources, colour: bool) -> String {
        let level = match self.severity {
            Severity::Fault => Level::ERROR.with_name("fault"),
            Severity::Warning => Level::WARNING.with_name("warning"),
        };
        let mut group = level
            .primary_title(&self.message)
            .elements(Vec::<annotate_snippets::Element<'_>>::new());
        if let Some(span) = self.span {
            let source = sources.get(span.file);
            let label = self.expected.as_ref().map(|e| format!("expected {e}"));
            let mut mark = AnnotationKind::Primary.span(span.start as usize..span.end as usize);
            if let Some(label) = &label {
                mark = mark.label(label.clone());
            }
            group = group.element(
                Snippet::source(&source.text)
                    .path(&source.name)
                    .annotation(mark),
            );
        } else if let Some(expected) = &self.expected {
            group = group.element(Level::NOTE.message(format!("expected {expected}")));
        }
        for hint in &self.hints {
            group = group.element(Level::HELP.message(hint.clone()));
        }
        let renderer = if colour {
            Renderer::styled()
        } else {
            Renderer::plain()
        };
        renderer.render(&[group])
    }
}

/// The known name nearest to a mistyped one, if any is near enough.
pub fn nearest<'a>(wanted: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let limit = wanted.chars().count().div_ceil(3).max(1);
    known
        .into_iter()
        .map(|name| (edit_distance(wanted, name), name))
        .filter(|(distance, _)| *distance <= limit)
        .min()
        .map(|(_, name)| name)
}

/// How many single letters must be added, dropped, changed or swapped with a neighbour to get from one word to the other.
fn edit_distance(a: &str, b: &str) -> usize {
    let (a, b): (Vec<char>, Vec<char>) = (a.chars().collect(), b.chars().collect());
    let mut rows = vec![vec![0usize; b.len() + 1]; a.len() + 1];
    for (i, row) in rows.iter_mut().enumerate() {
        row[0] = i;
    }
    for (j, cell) in rows[0].iter_mut().enumerate() {
        *cell = j;
    }
    for i in 1..=a.len() {
        for j in 1..=b.len() {
            let change = usize::from(a[i - 1] != b[j - 1]);
            let mut best = (rows[i - 1][j] + 1)
                .min(rows[i][j - 1] + 1)
                .min(rows[i - 1][j - 1] + change);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                best = best.min(rows[i - 2][j - 2] + 1);
            }
            rows[i][j] = best;
        }
    }
    rows[a.len()][b.len()]
}
