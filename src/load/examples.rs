//! A pack's published worked examples: `examples/*.toml`. In: a pack's files. Out: [`Example`]s in the order of file and text, or
//! what is wrong with a file. Works nothing out.

use super::files::Files;
use crate::num::Fraction;
use crate::rules::{Change, Moment, day, decimal};
use serde::Deserialize;

/// One published example.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Example {
    /// File of the pack.
    pub file: String,
    /// Its name.
    pub id: String,
    /// Who published it.
    pub publisher: String,
    /// Title of the document.
    pub document: String,
    /// Where in the document.
    pub locator: String,
    /// `read` where it was seen in its source, `memory` otherwise.
    pub status: String,
    /// What it asks, or why it is not asked.
    pub asks: Asks,
}

/// What an example asks of the pack.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Asks {
    /// The pack cannot express it: the reason.
    NotExpressed(String),
    /// A household with expected values.
    Values(Box<Case>),
}

/// The household of an example.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Case {
    /// The day of the list, in days since 1970-01-01; used for every date of the pack.
    pub date: i64,
    /// Amounts as they were when the example was published.
    pub changes: Vec<Change>,
    /// The household, as the text of a single household.
    pub household: String,
    /// What was published.
    pub expects: Vec<Expect>,
}

/// One published value.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Expect {
    /// What it is a value of.
    pub what: What,
    /// Now, or once the facts about past periods have settled.
    pub moment: Moment,
    /// The value: money in currency units, a rate as a fraction of one.
    pub value: Fraction,
    /// The most by which the pack's exact value may differ.
    pub tolerance: Fraction,
    /// The words of the source.
    pub quoted: String,
}

/// What a published value is of.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum What {
    /// A figure or item at today's hours.
    Figure {
        /// Its name.
        name: String,
        /// Whose: `household`, `adult 1`.
        of: String,
        /// The period of the value where it is not that of the figure.
        period: String,
    },
    /// The marginal effective tax rate to the right of these hours on today's line.
    Metr {
        /// Position of the adult.
        adult: usize,
        /// Hours a week.
        hours: Fraction,
    },
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    #[serde(default)]
    example: Vec<Written>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Written {
    id: String,
    publisher: String,
    document: String,
    locator: String,
    status: String,
    expressed: bool,
    #[serde(default)]
    reason: String,
    date: Option<toml::value::Datetime>,
    #[serde(default)]
    changed: Vec<WrittenChange>,
    household: Option<toml::Table>,
    #[serde(default)]
    expect: Vec<WrittenExpect>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenChange {
    amount: String,
    value: String,
    because: String,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenExpect {
    figure: Option<String>,
    #[serde(default)]
    of: String,
    #[serde(default)]
    period: String,
    metr_at_hours: Option<String>,
    adult: Option<usize>,
    value: String,
    tolerance: String,
    #[serde(default)]
    settled: bool,
    #[serde(default)]
    quoted: String,
}

/// Reads a pack's examples.
///
/// # Errors
/// Every fault, one line each.
pub fn read_examples(files: &Files) -> Result<Vec<Example>, Vec<String>> {
    let mut examples: Vec<Example> = vec![];
    let mut faults = vec![];
    let texts = files
        .texts()
        .filter(|(name, _)| name.starts_with("examples/") && name.ends_with(".toml"));
    for (name, text) in texts {
        let written: File = match toml::from_str(text) {
            Ok(written) => written,
            Err(error) => {
                faults.push(format!("`{name}`: {}", error.to_string().trim()));
                continue;
            }
        };
        for one in written.example {
            let id = one.id.clone();
            if examples.iter().any(|earlier| earlier.id == id) {
                faults.push(format!("`{name}`: `{id}` stands twice"));
            }
            match example(name, one) {
                Ok(example) => examples.push(example),
                Err(what) => faults.push(format!("`{name}`: `{id}`: {what}")),
            }
        }
    }
    if faults.is_empty() {
        Ok(examples)
    } else {
        Err(faults)
    }
}

fn example(file: &str, written: Written) -> Result<Example, String> {
    let asks = if !written.expressed {
        if written.reason.is_empty() {
            return Err("an example that is not expressed needs a `reason`".to_owned());
        }
        Asks::NotExpressed(written.reason)
    } else {
        let date = written.date.ok_or("`date` is missing")?.to_string();
        let household = written.household.ok_or("`household` is missing")?;
        if written.expect.is_empty() {
            return Err("it expects nothing".to_owned());
        }
        Asks::Values(Box::new(Case {
            date: day(&date).ok_or("`date` is no day")?,
            changes: written
                .changed
                .into_iter()
                .map(|change| {
                    Ok(Change {
                        value: number(&change.value)?,
                        amount: change.amount,
                        because: change.because,
                    })
                })
                .collect::<Result<_, String>>()?,
            household: toml::to_string(&household).map_err(|error| error.to_string())?,
            expects: written
                .expect
                .into_iter()
                .map(expect)
                .collect::<Result<_, String>>()?,
        }))
    };
    Ok(Example {
        file: file.to_owned(),
        id: written.id,
        publisher: written.publisher,
        document: written.document,
        locator: written.locator,
        status: written.status,
        asks,
    })
}

fn expect(written: WrittenExpect) -> Result<Expect, String> {
    let what = match (written.figure, written.metr_at_hours) {
        (Some(name), None) => What::Figure {
            name,
            of: written.of,
            period: written.period,
        },
        (None, Some(hours)) => What::Metr {
            adult: written
                .adult
                .unwrap_or(1)
                .checked_sub(1)
                .ok_or("`adult` counts from 1")?,
            hours: number(&hours)?,
        },
        (Some(_), Some(_)) | (None, None) => {
            return Err("expected `figure` or `metr_at_hours`, one of them".to_owned());
        }
    };
    Ok(Expect {
        what,
        moment: if written.settled {
            Moment::Settled
        } else {
            Moment::Now
        },
        value: number(&written.value)?,
        tolerance: number(&written.tolerance)?,
        quoted: written.quoted,
    })
}

fn number(text: &str) -> Result<Fraction, String> {
    decimal(text).ok_or_else(|| format!("found `{text}`, expected a number"))
}

#[cfg(test)]
mod tests {
    use super::*;

    const HEAD: &str = "[[example]]\nid = \"X\"\npublisher = \"p\"\ndocument = \"d\"\nlocator = \"l\"\nstatus = \"read\"\n";

    fn read(text: &str) -> Result<Vec<Example>, Vec<String>> {
        read_examples(&Files::of_texts(
            [("examples/a.toml", text), ("pack.toml", "")].into_iter(),
        ))
    }

    #[test]
    fn an_example_with_a_value_and_one_with_a_reason() {
        let text = format!(
            "{HEAD}expressed = true\ndate = 2024-05-06\n[example.household]\nreference = \"X1\"\n\
             [[example.expect]]\nfigure = \"tax\"\nof = \"adult 1\"\nvalue = \"12.5\"\ntolerance = \"0\"\nquoted = \"12.50\"\n\
             [[example.expect]]\nfigure = \"tax\"\nof = \"adult 1\"\nvalue = \"10\"\ntolerance = \"0\"\nsettled = true\n\
             {}expressed = false\nreason = \"another place\"\n",
            HEAD.replace("\"X\"", "\"Y\"")
        );
        let examples = read(&text).unwrap();
        assert_eq!(examples.len(), 2);
        let Asks::Values(case) = &examples[0].asks else {
            panic!("{examples:?}")
        };
        assert_eq!(case.household.trim(), "reference = \"X1\"");
        assert_eq!(case.expects[0].value, Fraction::new(25, 2));
        let moments: Vec<Moment> = case.expects.iter().map(|e| e.moment).collect();
        assert_eq!(moments, [Moment::Now, Moment::Settled]);
        assert_eq!(examples[1].asks, Asks::NotExpressed("another place".into()));
    }

    #[test]
    fn faults_are_told_with_file_and_name() {
        let fault = |text: &str| read(&format!("{HEAD}{text}")).unwrap_err().join("\n");
        assert_eq!(
            fault("expressed = false"),
            "`examples/a.toml`: `X`: an example that is not expressed needs a `reason`"
        );
        assert_eq!(
            fault("expressed = true"),
            "`examples/a.toml`: `X`: `date` is missing"
        );
        assert!(fault("expressed = true\ndait = 1").contains("unknown field `dait`"));
    }
}
