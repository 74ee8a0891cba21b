//! `list.toml`: what holds for a whole list. In: its text. Out: [`ListSettings`] or every fault of it. Refuses unknown keys and any
//! guess about days. Imports `num`.

use super::fault::{Fault, Place};
use super::format::{DateForm, Decimals, Format, near, read_day, read_decimal, read_word};
use super::problem::Problem;
use super::record::Written;
use super::toml_text::{Entry, TomlText, entries, scalar};
use crate::num::Hours;
use chrono::NaiveDate;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// The sign between the cells of a table.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Delimiter {
    /// `,`
    Comma,
    /// `;`
    Semicolon,
    /// A tab.
    Tab,
}

impl Delimiter {
    pub(super) const ALL: [Delimiter; 3] = [Delimiter::Comma, Delimiter::Semicolon, Delimiter::Tab];

    pub(super) fn byte(self) -> u8 {
        match self {
            Delimiter::Comma => b',',
            Delimiter::Semicolon => b';',
            Delimiter::Tab => b'\t',
        }
    }

    fn word(self) -> &'static str {
        match self {
            Delimiter::Comma => "comma",
            Delimiter::Semicolon => "semicolon",
            Delimiter::Tab => "tab",
        }
    }
}

/// An amount of the law that the list changes for a what-if.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ChangedAmount {
    /// Name of the amount in the pack.
    pub amount: String,
    /// The value in its place, as written.
    pub value: String,
    /// Why; printed on every statement that was made with it.
    pub because: String,
    /// Line in its file, counted from 1.
    pub line: usize,
}

/// The hours that the list asks for; what it leaves out is the product's own default.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct GridSettings {
    /// The fewest hours a week.
    pub from: Option<Hours>,
    /// The most hours a week.
    pub to: Option<Hours>,
    /// From one row to the next.
    pub step: Option<Hours>,
}

/// The language of the households that name none, with its place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ListLanguage {
    /// BCP 47 tag, as written.
    pub tag: String,
    /// Name of the file.
    file: String,
    /// Where in it.
    place: Place,
}

impl ListLanguage {
    /// The position of the language among those that there are.
    ///
    /// # Errors
    /// The fault where it is none of them.
    pub fn among(&self, languages: &[String]) -> Result<usize, Box<Fault>> {
        let fault = |problem| Fault {
            file: self.file.clone(),
            place: self.place.clone(),
            reference: String::new(),
            value: self.tag.clone(),
            problem,
        };
        read_word("language", &self.tag, languages).map_err(|problem| Box::new(fault(problem)))
    }
}

/// What holds for a whole list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ListSettings {
    /// Title of the list for the log; may be empty.
    pub title: String,
    /// The rule pack: its name or its path.
    pub pack: String,
    /// The list's first date: the one that picks amounts unless the pack says otherwise.
    pub date: NaiveDate,
    /// The further dates by the names of the pack.
    pub dates: Vec<(String, NaiveDate)>,
    /// How days and numbers are written.
    pub format: Format,
    /// The sign between cells; none where each table says so by its header.
    pub delimiter: Option<Delimiter>,
    /// Changed amounts.
    pub changed: Vec<ChangedAmount>,
    /// The hours to show.
    pub grid: GridSettings,
    /// Local files that are laid over the pack, as paths from the list's folder.
    pub local: Vec<String>,
    /// The language of the households that name none, where the list says.
    pub language: Option<ListLanguage>,
}

/// The keys of `list.toml`.
const KEYS: [&str; 9] = [
    "title", "pack", "date", "dates", "format", "changed", "grid", "local", "language",
];

impl ListSettings {
    /// Reads the text of a `list.toml`.
    ///
    /// # Errors
    /// Every fault of the text.
    pub fn parse(file: &str, text: &str) -> Result<ListSettings, Vec<Fault>> {
        read(file, text, OtherKeys::Fault)
    }

    /// Reads the settings at the top of a single household. The keys of the household itself are left alone, whatever they are:
    /// they are checked when [`read_single`](super::read_single) knows the pack.
    ///
    /// # Errors
    /// Every fault of the settings.
    pub fn parse_single(file: &str, text: &str) -> Result<ListSettings, Vec<Fault>> {
        read(file, text, OtherKeys::OfHousehold)
    }
}

/// Whether a key of a single household belongs to the settings.
pub(super) fn is_setting(key: &str) -> bool {
    KEYS.contains(&key)
}

/// The keys of the settings.
pub(super) fn setting_keys() -> &'static [&'static str] {
    &KEYS
}

/// What a key that is no setting means.
#[derive(Clone, Copy, PartialEq, Eq)]
enum OtherKeys {
    /// Nothing: a fault.
    Fault,
    /// It belongs to the household of a single text.
    OfHousehold,
}

fn read(file: &str, text: &str, others: OtherKeys) -> Result<ListSettings, Vec<Fault>> {
    let mut toml = TomlText::new(file, text);
    let Some(root) = toml.parse() else {
        return Err(toml.faults);
    };
    let root = root.get_ref();
    let mut title = String::new();
    let mut pack = None;
    let mut date = None;
    let mut dates = vec![];
    let mut changed = vec![];
    let mut grid = GridSettings::default();
    let mut local = vec![];
    let mut language = None;
    let (format, delimiter) = read_format(&mut toml, root);
    for entry in entries(root) {
        match entry.key.as_str() {
            "title" => title = read_text(&mut toml, &entry).unwrap_or_default(),
            "pack" => pack = Some(read_text(&mut toml, &entry).unwrap_or_default()),
            "date" => date = Some(read_date(&mut toml, &entry, format)),
            "dates" => {
                for entry in table(
                    &mut toml,
                    &entry,
                    "a table of days, such as `payment = 2026-05-29`",
                ) {
                    if let Some(day) = read_date(&mut toml, &entry, format) {
                        dates.push((entry.key.clone(), day));
                    }
                }
            }
            "changed" => changed = read_changed(&mut toml, &entry),
            "grid" => grid = read_grid(&mut toml, &entry, format),
            "local" => local = read_files(&mut toml, &entry),
            "language" => language = read_language(&mut toml, &entry),
            "format" => {}
            _ if others == OtherKeys::OfHousehold => {}
            other => {
                let nearest = near(other, KEYS);
                toml.fault(
                    entry.key_span.clone(),
                    "",
                    other,
                    Problem::UnknownKey(nearest),
                );
            }
        }
    }
    let missing = |expected: &str| Problem::Missing {
        expected: expected.into(),
        ask: String::new(),
    };
    if pack.is_none() {
        toml.fault(
            0..0,
            "pack",
            "",
            missing("the name or path of a rule pack, such as `pack = \"uk\"`"),
        );
    } else if pack.as_deref() == Some("") && toml.faults.is_empty() {
        toml.fault(0..0, "pack", "", missing("the name or path of a rule pack"));
    }
    if date.is_none() {
        let form = format.dates;
        toml.fault(
            0..0,
            "date",
            "",
            missing(&format!("the date of the list as {}", form.words())),
        );
    }
    match (pack, date.flatten()) {
        (Some(pack), Some(date)) if toml.faults.is_empty() => Ok(ListSettings {
            title,
            pack,
            date,
            dates,
            format,
            delimiter,
            changed,
            grid,
            local,
            language,
        }),
        _ => {
            toml.faults.sort_by_key(Fault::row);
            Err(toml.faults)
        }
    }
}

fn read_format(toml: &mut TomlText<'_>, root: &DeTable<'_>) -> (Format, Option<Delimiter>) {
    let mut format = Format::default();
    let mut delimiter = None;
    let Some(entry) = entries(root)
        .into_iter()
        .find(|entry| entry.key == "format")
    else {
        return (format, delimiter);
    };
    for entry in table(toml, &entry, "a table with `dates` and `decimals`") {
        match entry.key.as_str() {
            "dates" => {
                let words = DateForm::ALL.map(|form| form.words().to_string());
                if let Some(place) = read_choice(toml, &entry, "form of days", &words) {
                    format.dates = DateForm::ALL[place];
                }
            }
            "decimals" => {
                let all = [Decimals::Point, Decimals::Comma];
                let words = all.map(|decimals| decimals.word().to_string());
                if let Some(place) = read_choice(toml, &entry, "decimal sign", &words) {
                    format.decimals = all[place];
                }
            }
            "delimiter" => {
                let words = Delimiter::ALL.map(|delimiter| delimiter.word().to_string());
                if let Some(place) = read_choice(toml, &entry, "delimiter", &words) {
                    delimiter = Some(Delimiter::ALL[place]);
                }
            }
            other => {
                let nearest = near(other, ["dates", "decimals", "delimiter"]);
                toml.fault(
                    entry.key_span.clone(),
                    "",
                    other,
                    Problem::UnknownKey(nearest),
                );
            }
        }
    }
    (format, delimiter)
}

fn read_changed(toml: &mut TomlText<'_>, entry: &Entry<'_>) -> Vec<ChangedAmount> {
    let mut all: Vec<ChangedAmount> = vec![];
    let expected = "tables `[[changed]]` with `amount`, `value` and `because`";
    let Some(list) = entry.value.get_ref().as_array() else {
        toml.wrong_shape(&entry.key, entry.value, expected);
        return all;
    };
    for one in list.iter() {
        let Some(fields) = one.get_ref().as_table() else {
            toml.wrong_shape(&entry.key, one, expected);
            continue;
        };
        let mut found: [Option<String>; 3] = [None, None, None];
        for field in entries(fields) {
            match ["amount", "value", "because"]
                .iter()
                .position(|name| *name == field.key)
            {
                Some(place) => found[place] = read_text(toml, &field),
                None => {
                    let nearest = near(&field.key, ["amount", "value", "because"]);
                    toml.fault(
                        field.key_span.clone(),
                        "",
                        &field.key,
                        Problem::UnknownKey(nearest),
                    );
                }
            }
        }
        for (place, (name, expected)) in [
            ("amount", "the name of the amount that is changed"),
            ("value", "the value in its place"),
            (
                "because",
                "the reason, in words that every statement can print",
            ),
        ]
        .into_iter()
        .enumerate()
        {
            if found[place].as_deref().unwrap_or_default().is_empty() {
                let problem = Problem::Missing {
                    expected: expected.into(),
                    ask: String::new(),
                };
                toml.fault(one.span(), name, "", problem);
            }
        }
        if let [Some(amount), Some(value), Some(because)] = found {
            if all.iter().any(|earlier| earlier.amount == amount) {
                toml.fault(one.span(), "amount", &amount, Problem::SecondEntry);
            }
            all.push(ChangedAmount {
                amount,
                value,
                because,
                line: toml.spot(&one.span(), Written::AsToml).line,
            });
        }
    }
    all
}

fn read_language(toml: &mut TomlText<'_>, entry: &Entry<'_>) -> Option<ListLanguage> {
    let tag = read_text(toml, entry)?;
    let spot = toml.spot(&entry.value.span(), Written::AsToml);
    Some(ListLanguage {
        tag,
        file: toml.file.to_owned(),
        place: Place::Text {
            line: spot.line,
            column: spot.column,
            key: entry.key.clone(),
        },
    })
}

fn read_grid(toml: &mut TomlText<'_>, entry: &Entry<'_>, format: Format) -> GridSettings {
    let mut grid = GridSettings::default();
    let before = toml.faults.len();
    for field in table(toml, entry, "a table with `from`, `to` and `step`") {
        let slot = match field.key.as_str() {
            "from" => &mut grid.from,
            "to" => &mut grid.to,
            "step" => &mut grid.step,
            other => {
                let nearest = near(other, ["from", "to", "step"]);
                toml.fault(
                    field.key_span.clone(),
                    "",
                    other,
                    Problem::UnknownKey(nearest),
                );
                continue;
            }
        };
        let Some((text, written)) = scalar(field.value.get_ref()) else {
            toml.wrong_shape(&field.key, field.value, "hours a week, such as 48");
            continue;
        };
        let decimals = form_of(written, format).decimals;
        match read_decimal(&text, 2, decimals, &|| "hours a week, such as 48".into()) {
            Ok(hours) => *slot = Some(Hours(hours)),
            Err(problem) => toml.fault(field.value.span(), &field.key, &text, problem),
        }
    }
    if toml.faults.len() == before {
        let from = grid.from.unwrap_or(Hours(0));
        let to = grid.to.unwrap_or(Hours::whole(48));
        let step = grid.step.unwrap_or(Hours::whole(1));
        let fits = from.0 >= 0 && from < to && to <= Hours::whole(168) && step.0 > 0;
        if !fits || (to.0 - from.0) / step.0 > 2_000 {
            let words = format!(
                "`from` is {}, `to` is {}, `step` is {}",
                from.plain(),
                to.plain(),
                step.plain()
            );
            toml.fault(entry.value.span(), "grid", "", Problem::BadGrid(words));
        }
    }
    grid
}

/// Names of local files.
fn read_files(toml: &mut TomlText<'_>, entry: &Entry<'_>) -> Vec<String> {
    let expected = "a list of local files, such as `local = [\"harrowmere.toml\"]`";
    let Some(list) = entry.value.get_ref().as_array() else {
        toml.wrong_shape(&entry.key, entry.value, expected);
        return vec![];
    };
    let mut all = vec![];
    for one in list.iter() {
        match one.get_ref().as_str().map(str::trim) {
            Some(name) if !name.is_empty() => all.push(name.to_owned()),
            _ => toml.wrong_shape(&entry.key, one, expected),
        }
    }
    all
}

/// How a value of this writing is read.
pub(super) fn form_of(written: Written, declared: Format) -> Format {
    match written {
        Written::AsDeclared | Written::Unreadable => declared,
        Written::AsToml => Format::default(),
    }
}

fn table<'t>(toml: &mut TomlText<'_>, entry: &Entry<'t>, expected: &str) -> Vec<Entry<'t>> {
    let value: &'t Spanned<DeValue<'t>> = entry.value;
    match value.get_ref().as_table() {
        Some(fields) => entries(fields),
        None => {
            toml.wrong_shape(&entry.key, value, expected);
            vec![]
        }
    }
}

fn read_text(toml: &mut TomlText<'_>, entry: &Entry<'_>) -> Option<String> {
    let text = scalar(entry.value.get_ref()).map(|(text, _)| text);
    if text.is_none() {
        toml.wrong_shape(&entry.key, entry.value, "text");
    }
    text
}

fn read_choice(
    toml: &mut TomlText<'_>,
    entry: &Entry<'_>,
    what: &str,
    words: &[String],
) -> Option<usize> {
    let text = read_text(toml, entry)?;
    match read_word(what, &text, words) {
        Ok(place) => Some(place),
        Err(problem) => {
            toml.fault(entry.value.span(), &entry.key, &text, problem);
            None
        }
    }
}

fn read_date(toml: &mut TomlText<'_>, entry: &Entry<'_>, format: Format) -> Option<NaiveDate> {
    let Some((text, written)) = scalar(entry.value.get_ref()) else {
        toml.wrong_shape(&entry.key, entry.value, "a day");
        return None;
    };
    match read_day(&text, form_of(written, format).dates) {
        Ok(day) => Some(day),
        Err(problem) => {
            toml.fault(entry.value.span(), &entry.key, &text, problem);
            None
        }
    }
}
