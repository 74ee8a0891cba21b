//! `office.toml`: who sends the statements, and what is held back. In: a path or text. Out: [`Office`], or a fault with the
//! place in the text. Refuses unknown keys.

use super::Error;
use super::files::read_text;
use serde::{Deserialize, Serialize};
use std::path::Path;

/// The office whose letterhead a statement carries. Every part may be empty.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct Office {
    /// Name of the office.
    pub name: String,
    /// Lines of its address.
    pub address: Vec<String>,
    /// Telephone.
    pub phone: String,
    /// Electronic post.
    pub email: String,
    /// When it can be reached.
    pub hours: String,
    /// Who accredits it, in one line.
    pub accreditation: String,
    /// Who signs.
    pub signatory: String,
    /// What it does with the reader's data, in one line.
    pub privacy: String,
    /// How to complain, in one line.
    pub complaints: String,
    /// What is held back.
    pub hold: HoldRules,
}

/// When a statement is held back.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct HoldRules {
    /// Names of facts that must be `seen` before a statement goes out.
    pub must_be_seen: Vec<String>,
    /// Whether a household without an address is held back.
    pub without_address: bool,
}

/// An office file with its hash.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OfficeFile {
    /// What it says.
    pub office: Office,
    /// File name and SHA-256, for a run's record.
    pub hash: (String, String),
}

/// Reads an office file.
///
/// # Errors
/// Where it cannot be read, is no TOML, or has a key that is not known; the message shows the place.
pub fn read_office(path: &Path) -> Result<OfficeFile, Error> {
    let file = read_text(path)?;
    let office = parse_office(&file.text).map_err(|what| Error::unfit(path, what))?;
    Ok(OfficeFile {
        office,
        hash: (file.name, file.sha256),
    })
}

/// Reads the text of an office file.
///
/// # Errors
/// What is wrong, with line and column.
pub fn parse_office(text: &str) -> Result<Office, String> {
    toml::from_str(text).map_err(|error| {
        let place = error.span().map(|span| {
            let before = &text[..span.start.min(text.len())];
            let line = before.matches('\n').count() + 1;
            let start = before.rfind('\n').map_or(0, |at| at + 1);
            format!(
                "line {line}, column {}: ",
                before[start..].chars().count() + 1
            )
        });
        format!("{}{}", place.unwrap_or_default(), error.message())
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_office_is_read() {
        let text = "name = \"Harrowmere Advice Rooms\"\naddress = [\"2 Mill Yard\", \"Harrowmere\"]\n\
                    [hold]\nmust_be_seen = [\"rent\"]\n";
        let office = parse_office(text).unwrap();
        assert_eq!(office.name, "Harrowmere Advice Rooms");
        assert_eq!(office.hold.must_be_seen, ["rent"]);
        assert_eq!(parse_office("").unwrap(), Office::default());
    }

    #[test]
    fn an_unknown_key_is_shown_with_its_place() {
        let fault = parse_office("name = \"x\"\ntelefone = \"1\"\n").unwrap_err();
        assert!(
            fault.starts_with("line 2, column 1: unknown field `telefone`"),
            "{fault}"
        );
    }
}
