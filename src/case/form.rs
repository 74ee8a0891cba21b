//! Blank files of a list for a rule pack. In: the schema, the pack's name and title. Out: file names with their texts. Writes no file.
//! Imports nothing outside `case`.

use super::format::{Format, describe, write_value};
use super::layout::{Holds, Layout, layouts};
use super::schema::{FactSpec, FactType, Need, Schema};

/// The blank files of a list: `list.toml`, each table with its header row, and every fact with its question, type, range and default
/// as a table (`facts.csv`) and as a page to read (`facts.md`).
pub fn form(schema: &Schema, pack: &str, title: &str) -> Vec<(String, String)> {
    let layouts = layouts(schema);
    let mut files = vec![("list.toml".to_string(), list_toml(pack, title))];
    for layout in &layouts {
        files.push((layout.file.clone(), header(layout)));
    }
    files.push(("facts.csv".into(), facts_csv(schema, &layouts)));
    files.push(("facts.md".into(), facts_md(schema, &layouts, title)));
    files
}

fn list_toml(pack: &str, title: &str) -> String {
    format!(
        "# A list of households for the rules: {title}\n\
         title = \"\"\n\
         pack = {pack}\n\
         # The date of the list; take the sign # away and write the day.\n\
         # date = 2026-05-04\n\
         # The language of the households that name none, where it is not English.\n\
         # language = \"cy\"\n\n\
         [format]\n\
         dates = \"year-month-day\"      # or \"day/month/year\", \"month/day/year\"\n\
         decimals = \"point\"            # or \"comma\"\n\n\
         # Further dates of the rule pack, each with its name.\n\
         # [dates]\n\
         # payment = 2026-05-29\n\n\
         # Changed amounts, for a what-if; every statement says which and why.\n\
         # [[changed]]\n\
         # amount = \"name_of_the_amount\"\n\
         # value = \"0\"\n\
         # because = \"the reason in words\"\n",
        title = title.replace(['\n', '\r'], " "),
        pack = toml::Value::String(pack.into()),
    )
}

/// The header row: the table's own columns, then each fact with how it is known. One way to write an address is enough.
fn header(layout: &Layout) -> String {
    let names = layout
        .columns
        .iter()
        .filter(|column| column.holds != Holds::Address);
    let names: Vec<&str> = names.map(|column| column.name.as_str()).collect();
    csv_text(&[names.into_iter().map(Into::into).collect()])
}

fn csv_text(rows: &[Vec<String>]) -> String {
    let mut out = csv::Writer::from_writer(vec![]);
    let into_memory = "writing into memory does not fail";
    for row in rows {
        out.write_record(row).expect(into_memory);
    }
    let bytes = out.into_inner().expect(into_memory);
    String::from_utf8(bytes).expect("text went in")
}

/// One fact in words: file, for whom, column, question, type, least, most, default.
fn facts_rows(schema: &Schema, layouts: &[Layout]) -> Vec<[String; 8]> {
    let mut rows = vec![];
    for layout in layouts {
        for kind in &layout.kinds {
            for fact in &schema.kinds[*kind].facts {
                let (least, most) = range(fact);
                rows.push([
                    layout.file.clone(),
                    schema.kinds[*kind].name.clone(),
                    fact.name.clone(),
                    fact.ask.clone(),
                    describe(&fact.ty, Format::default()).replace('`', ""),
                    least,
                    most,
                    match fact.need {
                        Need::Required => "required".into(),
                        Need::Default(value) => write_value(&fact.ty, value, Format::default()),
                    },
                ]);
            }
        }
    }
    rows
}

/// The least and the largest value; empty where the type says enough, or where there is no limit.
fn range(fact: &FactSpec) -> (String, String) {
    match &fact.ty {
        FactType::YesNo | FactType::Choice(_) => (String::new(), String::new()),
        FactType::Money(_)
        | FactType::Rate
        | FactType::Hours
        | FactType::Number
        | FactType::Count
        | FactType::Date => {
            let write = |limit: i64| write_value(&fact.ty, limit, Format::default());
            let least = if fact.min == i64::MIN {
                String::new()
            } else {
                write(fact.min)
            };
            let most = if fact.max == i64::MAX {
                String::new()
            } else {
                write(fact.max)
            };
            (least, most)
        }
    }
}

fn facts_csv(schema: &Schema, layouts: &[Layout]) -> String {
    let names = [
        "file", "of", "column", "question", "type", "least", "most", "default",
    ];
    let mut rows = vec![names.map(String::from).to_vec()];
    rows.extend(
        facts_rows(schema, layouts)
            .into_iter()
            .map(|row| row.to_vec()),
    );
    csv_text(&rows)
}

fn facts_md(schema: &Schema, layouts: &[Layout], title: &str) -> String {
    let mut out = format!(
        "# The facts of {title}\n\nBeside each column, `<column>_known` says `seen` or `told`.\n"
    );
    let rows = facts_rows(schema, layouts);
    for layout in layouts {
        let own: Vec<&[String; 8]> = rows.iter().filter(|row| row[0] == layout.file).collect();
        out.push_str(&format!("\n## {}\n\n", layout.file));
        let columns = layout.columns.iter();
        let columns = columns.filter(|column| !matches!(column.holds, Holds::Fact | Holds::Known));
        let columns: Vec<String> = columns.map(|column| format!("`{}`", column.name)).collect();
        out.push_str(&format!("Its own columns: {}.\n", columns.join(", ")));
        if own.is_empty() {
            continue;
        }
        out.push_str("\n| column | of | question | what to write | from | to | left out |\n|---|---|---|---|---|---|---|\n");
        for [_, of, column, question, ty, least, most, default] in own {
            let cells =
                [of, question, ty, least, most, default].map(|cell| cell.replace('|', "\\|"));
            out.push_str(&format!("| `{column}` | {} |\n", cells.join(" | ")));
        }
    }
    out
}
