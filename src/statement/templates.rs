//! Filling templates. In: a template set (name → text) and a view. Out: a Typst source in which every
//! value that came from outside is a string literal.
//!
//! `shared/` holds Typst files that are imported as they stand; `text/` holds the texts by language;
//! everything else is Typst markup with tags. An inserted text is written as `#"…";` and nothing can
//! insert it otherwise: there are no filters, and after filling, the Typst parser must see exactly a
//! string at each insertion. So a value inside quotes, a comment, raw text or code is refused.
//! Whole numbers are written as they are. Fractions, lists and missing values are refused.

use super::error::StatementError;
use super::fonts::first_unset;
use super::texts::Texts;
use super::world::file_id;
use include_dir::{Dir, include_dir};
use minijinja::value::{Kwargs, ValueKind};
use minijinja::{Environment, Error, ErrorKind, Output, State, UndefinedBehavior, Value};
use std::collections::BTreeMap;
use std::sync::Arc;
use typst::syntax::{LinkedNode, Side, Source, SyntaxKind};

static BUILT_IN: Dir<'_> = include_dir!("$CARGO_MANIFEST_DIR/templates");

/// The language that the others are measured by.
const ENGLISH: &str = "en";
/// Steps that one template may take; a letter takes about a tenth of it.
const FUEL: u64 = 200_000;
/// How deep templates may nest; an include counts as ten.
const DEPTH: usize = 64;

/// Template texts by name, such as `client/letter.typ`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TemplateSet {
    files: BTreeMap<String, String>,
}

impl TemplateSet {
    /// The set inside the binary.
    pub fn built_in() -> TemplateSet {
        let mut files = BTreeMap::new();
        collect(&BUILT_IN, &mut files);
        TemplateSet { files }
    }

    /// A set of these files alone.
    pub fn new(files: BTreeMap<String, String>) -> TemplateSet {
        TemplateSet { files }
    }

    /// The set with one file added or replaced.
    #[must_use]
    pub fn with(mut self, name: impl Into<String>, text: impl Into<String>) -> TemplateSet {
        self.files.insert(name.into(), text.into());
        self
    }

    /// All files by name.
    pub fn files(&self) -> impl Iterator<Item = (&str, &str)> {
        self.files
            .iter()
            .map(|(name, text)| (name.as_str(), text.as_str()))
    }

    /// The texts of one language, from `text/<language>.toml`; a region's tag falls back to its language.
    ///
    /// # Errors
    /// Where there is no such file or it is faulty.
    pub fn texts(&self, language: &str) -> Result<Arc<Texts>, StatementError> {
        let mut tag = language;
        loop {
            if let Some(text) = self.files.get(&format!("text/{tag}.toml")) {
                return Texts::read(language, text).map(Arc::new);
            }
            match tag.rsplit_once('-') {
                Some((shorter, _)) => tag = shorter,
                None => {
                    return Err(StatementError::Texts {
                        language: language.to_owned(),
                        message: format!("no file `text/{tag}.toml` in the template set"),
                    });
                }
            }
        }
    }

    /// The languages that there are texts in.
    pub fn languages(&self) -> impl Iterator<Item = &str> {
        let files = self.files.keys();
        files.filter_map(|name| name.strip_prefix("text/")?.strip_suffix(".toml"))
    }

    /// The languages whose texts are complete: English, and those that differ from it in nothing but their words.
    pub fn complete_languages(&self) -> Vec<&str> {
        let Ok(english) = self.texts(ENGLISH) else {
            return vec![];
        };
        let whole = |language: &&str| {
            let texts = self.texts(language);
            texts.is_ok_and(|texts| texts.differences(&english).is_empty())
        };
        self.languages().filter(whole).collect()
    }

    /// What is wrong with the texts: every fault of each file, and every key, value and plural form in which a language differs
    /// from English.
    pub fn language_faults(&self) -> Vec<StatementError> {
        let mut faults = vec![];
        let mut read = |language: &str| {
            let text = self.files.get(&format!("text/{language}.toml"))?;
            match Texts::read_all(language, text) {
                Ok(texts) => Some(texts),
                Err(found) => {
                    faults.extend(found);
                    None
                }
            }
        };
        let english = read(ENGLISH);
        let others: Vec<Texts> = self
            .languages()
            .filter(|language| *language != ENGLISH)
            .filter_map(&mut read)
            .collect();
        match english {
            Some(english) => {
                for texts in &others {
                    faults.extend(texts.differences(&english));
                }
            }
            None if faults.is_empty() => faults.extend(self.texts(ENGLISH).err()),
            None => {}
        }
        faults
    }

    /// The Typst files that are imported as they stand.
    pub(super) fn shared(&self) -> impl Iterator<Item = (&str, &str)> {
        self.files().filter(|(name, _)| name.starts_with("shared/"))
    }
}

/// Gathers the text files of a folder inside the binary.
fn collect(folder: &Dir<'_>, out: &mut BTreeMap<String, String>) {
    for file in folder.files() {
        if let Some(text) = file.contents_utf8() {
            let name = file.path().to_string_lossy().replace('\\', "/");
            out.insert(name, text.to_owned());
        }
    }
    for inner in folder.dirs() {
        collect(inner, out);
    }
}

/// Compiled templates.
pub(super) struct Filler {
    environment: Environment<'static>,
}

impl Filler {
    /// Compiles every template of the set that has tags.
    ///
    /// # Errors
    /// Where one does not parse.
    pub fn new(set: &TemplateSet) -> Result<Filler, StatementError> {
        let mut environment = Environment::empty();
        environment.set_undefined_behavior(UndefinedBehavior::Strict);
        environment.set_fuel(Some(FUEL));
        environment.set_recursion_limit(DEPTH);
        environment.set_debug(true);
        environment.set_formatter(write_value);
        environment.add_function("t", say);
        for (name, text) in set.files() {
            let filled = !name.starts_with("shared/") && name.ends_with(".typ");
            if filled {
                environment
                    .add_template_owned(name.to_owned(), text.to_owned())
                    .map_err(|error| from_template(&error))?;
            }
        }
        Ok(Filler { environment })
    }

    /// Fills a template and checks that every insertion is a string for the Typst parser.
    ///
    /// # Errors
    /// Where a name is undefined, a value is not fit to be printed, the fuel runs out, or a value
    /// stands where no text can stand.
    pub fn fill(
        &self,
        name: &str,
        view: &Value,
        texts: &Arc<Texts>,
    ) -> Result<Source, StatementError> {
        let template = self
            .environment
            .get_template(name)
            .map_err(|error| from_template(&error))?;
        let context = minijinja::context! {
            texts__ => Value::from_object(Spoken(Arc::clone(texts))),
            ..view.clone()
        };
        let (text, spans) = template
            .render_with_spans(context)
            .map_err(|error| from_template(&error))?;
        let source = Source::new(file_id(name)?, text);
        let root = LinkedNode::new(source.root());
        for span in &spans {
            let range = span.output_range();
            if span.kind() != minijinja::OutputSpanKind::Expression
                || !source.text()[range.clone()].starts_with('#')
            {
                continue;
            }
            let literal = range.start + 1..range.end - 1;
            let leaf = root.leaf_at(literal.start, Side::After);
            let fits = leaf.is_some_and(|leaf| {
                leaf.kind() == SyntaxKind::Str
                    && leaf.range() == literal
                    && leaf
                        .prev_leaf()
                        .is_some_and(|before| before.kind() == SyntaxKind::Hash)
            });
            if !fits {
                return Err(StatementError::Template {
                    template: span.name().to_owned(),
                    line: span.line(),
                    message: "a value stands where no text can stand, expected markup".to_owned(),
                });
            }
        }
        Ok(source)
    }
}

/// Writes a value: a text as a Typst string, a whole number as it is, anything else is refused.
fn write_value(
    out: &mut Output<'_>,
    _state: &mut State<'_, '_>,
    value: &Value,
) -> Result<(), Error> {
    match value.kind() {
        ValueKind::String => {
            let text = value.as_str().unwrap_or_default();
            write_literal(out, text).map_err(Error::from)
        }
        ValueKind::Number if value.is_integer() => {
            out.write_fmt(format_args!("{value}")).map_err(Error::from)
        }
        ValueKind::Undefined => Err(Error::from(ErrorKind::UndefinedError)),
        kind => Err(Error::new(
            ErrorKind::BadEscape,
            format!("found a {kind}, expected a text or a whole number"),
        )),
    }
}

/// Writes `#"…";` with backslash, quote and control characters escaped.
fn write_literal(out: &mut Output<'_>, text: &str) -> std::fmt::Result {
    out.write_str("#\"")?;
    let mut clean = 0;
    for (at, character) in text.char_indices() {
        if character != '\\' && character != '"' && !character.is_control() {
            continue;
        }
        out.write_str(&text[clean..at])?;
        match character {
            '\\' => out.write_str("\\\\")?,
            '"' => out.write_str("\\\"")?,
            '\n' => out.write_str("\\n")?,
            other => out.write_fmt(format_args!("\\u{{{:x}}}", u32::from(other)))?,
        }
        clean = at + character.len_utf8();
    }
    out.write_str(&text[clean..])?;
    out.write_str("\";")
}

/// The texts as a template sees them.
#[derive(Debug)]
struct Spoken(Arc<Texts>);

impl minijinja::value::Object for Spoken {}

/// The function `t("key", name=value)` of templates.
fn say(state: &mut State<'_, '_>, key: &str, values: Kwargs) -> Result<String, Error> {
    let texts = state.lookup("texts__");
    let spoken = texts
        .as_ref()
        .and_then(|value| value.downcast_object_ref::<Spoken>())
        .ok_or_else(|| Error::new(ErrorKind::InvalidOperation, "no texts are loaded"))?;
    let mut pairs = vec![];
    for name in values.args() {
        let value: Value = values.get(name)?;
        match value.kind() {
            ValueKind::String => pairs.push((name, value.as_str().unwrap_or_default().to_owned())),
            ValueKind::Number if value.is_integer() => pairs.push((name, value.to_string())),
            kind => {
                return Err(Error::new(
                    ErrorKind::InvalidOperation,
                    format!("`{name}` is a {kind}, expected a text or a whole number"),
                ));
            }
        }
    }
    let pairs: Vec<(&str, &str)> = pairs.iter().map(|(n, v)| (*n, v.as_str())).collect();
    spoken
        .0
        .say(key, &pairs)
        .map_err(|error| Error::new(ErrorKind::InvalidOperation, error.to_string()))
}

/// A template error with template and line; the innermost place that is known.
fn from_template(error: &Error) -> StatementError {
    let mut deepest = error;
    let mut cause: Option<&(dyn std::error::Error + 'static)> = std::error::Error::source(error);
    while let Some(next) = cause {
        if let Some(inner) = next.downcast_ref::<Error>() {
            deepest = inner;
        }
        cause = next.source();
    }
    let mut message = deepest.kind().to_string();
    if let Some(detail) = deepest.detail() {
        message = format!("{message}: {detail}");
    }
    if let (Some(source), Some(range)) = (deepest.template_source(), deepest.range())
        && let Some(excerpt) = source.get(range)
    {
        message = format!("{message}, found `{}`", excerpt.trim());
    }
    StatementError::Template {
        template: deepest.name().unwrap_or("unknown").to_owned(),
        line: deepest.line().unwrap_or(0),
        message,
    }
}

/// Checks every text of a view.
///
/// # Errors
/// The first character that the shipped fonts cannot set, with the field that holds it.
pub(super) fn check_glyphs(view: &Value) -> Result<(), StatementError> {
    walk(view, &mut String::new())
}

/// Checks a value and everything inside it.
fn walk(value: &Value, path: &mut String) -> Result<(), StatementError> {
    let length = path.len();
    match value.kind() {
        ValueKind::String => {
            if let Some(character) = value.as_str().and_then(first_unset) {
                return Err(StatementError::Glyph {
                    field: path.clone(),
                    character,
                });
            }
        }
        ValueKind::Map => {
            for key in value.try_iter().into_iter().flatten() {
                let inner = value.get_item(&key).unwrap_or_default();
                if length > 0 {
                    path.push('.');
                }
                path.push_str(key.as_str().unwrap_or("?"));
                walk(&inner, path)?;
                path.truncate(length);
            }
        }
        ValueKind::Seq => {
            for (position, inner) in value.try_iter().into_iter().flatten().enumerate() {
                path.push_str(&format!("[{position}]"));
                walk(&inner, path)?;
                path.truncate(length);
            }
        }
        _ => {}
    }
    Ok(())
}
