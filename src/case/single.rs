//! One household as a single TOML text, with the names of the tables. In: text, schema, settings. Out: a checked household or every
//! fault with line and column. Imports nothing outside `case`.

use super::check::{Checks, check};
use super::fault::{Place, RejectedHousehold};
use super::format::near;
use super::layout::{HOUSEHOLDS, Holds, Layout};
use super::list::{ReadOptions, Reading};
use super::problem::Problem;
use super::record::{Draft, Record, Spot, Standing, Written};
use super::schema::Schema;
use super::settings::{ListSettings, is_setting, setting_keys};
use super::toml_text::{Entry, TomlText, entries, scalar};
use toml::Spanned;
use toml::de::DeValue;

/// Reads a household from a TOML text: `reference`, `[household]`, `[[member]]`, `[[job]]` and one array of tables for each kind of
/// record that the pack declares, beside the keys of `list.toml`.
///
/// # Errors
/// Every fault of the text, with line and column.
pub fn read_single(
    file: &str,
    text: &str,
    schema: &Schema,
    settings: &ListSettings,
    options: &ReadOptions,
) -> Reading {
    let layouts = super::layout::layouts(schema);
    let mut toml = TomlText::new(file, text);
    let Some(root) = toml.parse() else {
        return Err(reject("", toml));
    };
    let own = toml.spot(&(0..0), Written::AsToml);
    let mut household = blank(&layouts[HOUSEHOLDS], own);
    let mut rows: Vec<Vec<Record>> = layouts.iter().map(|_| vec![]).collect();
    let reference_column = layouts[HOUSEHOLDS].by_name["household"];
    let mut household_rest = None;
    for entry in entries(root.get_ref()) {
        let key = entry.key.as_str();
        if key == "reference" {
            fill_one(
                &mut toml,
                &layouts[HOUSEHOLDS],
                &mut household,
                reference_column,
                &entry,
            );
        } else if key == layouts[HOUSEHOLDS].key {
            household_rest = Some(entry);
        } else if let Some(table) = layouts.iter().position(|layout| layout.key == key) {
            rows[table] = read_array(&mut toml, &layouts[table], &entry);
        } else if !is_setting(key) {
            let keys = layouts.iter().map(|layout| layout.key.as_str());
            let known = keys
                .chain(setting_keys().iter().copied())
                .chain(["reference"]);
            let nearest = near(key, known);
            toml.fault(
                entry.key_span.clone(),
                "",
                key,
                Problem::UnknownKey(nearest),
            );
        }
    }
    if let Some(entry) = household_rest {
        match entry.value.get_ref().as_table() {
            Some(fields) => fill(
                &mut toml,
                &layouts[HOUSEHOLDS],
                &mut household,
                entries(fields),
            ),
            None => toml.wrong_shape(&entry.key, entry.value, "a table `[household]`"),
        }
    }
    let reference = household.cell(reference_column).to_string();
    let files: Vec<String> = layouts.iter().map(|_| file.to_string()).collect();
    let checks = Checks::new(schema, &layouts, &files, settings, options);
    let draft = Draft {
        household,
        rows,
        shared: vec![],
    };
    match check(&checks, draft) {
        Ok(household) if toml.faults.is_empty() => Ok(household),
        Ok(_) => Err(reject(&reference, toml)),
        Err(mut rejected) => {
            rejected.faults.extend(reject(&reference, toml).faults);
            rejected.faults.sort_by_key(position);
            Err(rejected)
        }
    }
}

fn reject(reference: &str, toml: TomlText<'_>) -> RejectedHousehold {
    let mut faults = toml.faults;
    for fault in &mut faults {
        fault.reference = reference.into();
    }
    faults.sort_by_key(position);
    RejectedHousehold {
        reference: reference.into(),
        row: 0,
        faults,
    }
}

fn position(fault: &super::fault::Fault) -> (usize, usize) {
    match &fault.place {
        Place::Text { line, column, .. } => (*line, *column),
        Place::File | Place::Row(_) | Place::Cell { .. } | Place::Column(_) => (0, 0),
    }
}

fn blank(layout: &Layout, own: Spot) -> Record {
    Record {
        standing: Standing::Toml {
            own,
            cells: vec![None; layout.columns.len()],
        },
        cells: vec![String::new(); layout.columns.len()],
        faults: vec![],
    }
}

fn read_array(toml: &mut TomlText<'_>, layout: &Layout, entry: &Entry<'_>) -> Vec<Record> {
    let expected = format!("tables `[[{}]]`", layout.key);
    let Some(list) = entry.value.get_ref().as_array() else {
        toml.wrong_shape(&entry.key, entry.value, &expected);
        return vec![];
    };
    let mut all = vec![];
    for one in list.iter() {
        match one.get_ref().as_table() {
            Some(fields) => {
                let mut record = blank(layout, toml.spot(&one.span(), Written::AsToml));
                fill(toml, layout, &mut record, entries(fields));
                all.push(record);
            }
            None => toml.wrong_shape(&entry.key, one, &expected),
        }
    }
    all
}

fn fill(toml: &mut TomlText<'_>, layout: &Layout, record: &mut Record, fields: Vec<Entry<'_>>) {
    for field in fields {
        let column = layout.by_name.get(&field.key).copied();
        match column.filter(|column| layout.columns[*column].holds != Holds::Household) {
            Some(column) => fill_one(toml, layout, record, column, &field),
            None => {
                let own = layout
                    .columns
                    .iter()
                    .filter(|column| column.holds != Holds::Household);
                let nearest = near(&field.key, own.map(|column| column.name.as_str()));
                toml.fault(
                    field.key_span.clone(),
                    "",
                    &field.key,
                    Problem::UnknownKey(nearest),
                );
            }
        }
    }
}

fn fill_one(
    toml: &mut TomlText<'_>,
    layout: &Layout,
    record: &mut Record,
    column: usize,
    field: &Entry<'_>,
) {
    let lines = matches!(layout.columns[column].holds, Holds::Address | Holds::Fold);
    let (found, expected) = match lines {
        true => (text_of(field.value), "text, or an array of texts"),
        false => (scalar(field.value.get_ref()), "one value"),
    };
    let (text, written) = found.unwrap_or_else(|| {
        toml.wrong_shape(&field.key, field.value, expected);
        (String::new(), Written::Unreadable)
    });
    let spot = toml.spot(&field.value.span(), written);
    record.cells[column] = text;
    if let Standing::Toml { cells, .. } = &mut record.standing {
        cells[column] = Some(spot);
    }
}

/// A value as text; the texts of an array become lines.
fn text_of(value: &Spanned<DeValue<'_>>) -> Option<(String, Written)> {
    let Some(list) = value.get_ref().as_array() else {
        return scalar(value.get_ref());
    };
    let lines: Option<Vec<&str>> = list.iter().map(|line| line.get_ref().as_str()).collect();
    lines.map(|lines| (lines.join("\n"), Written::AsDeclared))
}
