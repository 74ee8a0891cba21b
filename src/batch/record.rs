//! The record of a run: `run.json`, which is the same for the same input, and `timings.json`, which is not.

use super::Ledger;
use serde::Serialize;
use sha2::{Digest, Sha256};

/// What went into a run, with the SHA-256 of every file.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize)]
pub struct Inputs {
    /// Files of the case list.
    pub list: Vec<(String, String)>,
    /// Title of the rule pack.
    pub pack_title: String,
    /// Files of the rule pack.
    pub pack: Vec<(String, String)>,
    /// Local files that were laid over it.
    pub local: Vec<(String, String)>,
    /// Files of the templates.
    pub templates: Vec<(String, String)>,
    /// The office file, where there is one.
    pub office: Vec<(String, String)>,
    /// What was asked for beside the files, by name: whatever can change a byte of the output.
    pub options: Vec<(String, String)>,
}

impl Inputs {
    /// The run's id: the issue date with eight letters of a hash over everything that went in, this program's
    /// version included. The same input on the same issue date has the same id.
    pub fn run_id(&self, issued: &str) -> String {
        let mut hash = Sha256::new();
        let mut add = |text: &str| {
            hash.update((text.len() as u64).to_le_bytes());
            hash.update(text.as_bytes());
        };
        add(env!("CARGO_PKG_VERSION"));
        add(issued);
        add(&self.pack_title);
        let groups = [
            &self.list,
            &self.pack,
            &self.local,
            &self.templates,
            &self.office,
            &self.options,
        ];
        for group in groups {
            add(&group.len().to_string());
            for (name, value) in group {
                add(name);
                add(value);
            }
        }
        // Letters and digits that cannot be mistaken for one another in print.
        const SIGNS: &[u8; 32] = b"0123456789ABCDEFGHJKMNPQRSTVWXYZ";
        let signs: String = hash.finalize()[..8]
            .iter()
            .map(|byte| char::from(SIGNS[usize::from(byte % 32)]))
            .collect();
        format!("{}-{signs}", issued.replace('-', ""))
    }
}

/// Everything that `run.json` says.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Record<'a> {
    /// The run's id.
    pub run_id: &'a str,
    /// The issue date, `2026-04-06`.
    pub issued: &'a str,
    /// What went in.
    pub inputs: &'a Inputs,
}

/// How far a run has come.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum State<'a> {
    /// Started; the folder is not whole.
    Running,
    /// Ended, with these counts.
    Ended(&'a Ledger),
}

/// Names with values, written as an object in their own order.
struct Pairs<'a>(&'a [(String, String)]);

impl Serialize for Pairs<'_> {
    fn serialize<S: serde::Serializer>(&self, to: S) -> Result<S::Ok, S::Error> {
        to.collect_map(self.0.iter().map(|(name, value)| (name, value)))
    }
}

/// `run.json`, in the order in which somebody reads it.
#[derive(Serialize)]
struct Written<'a> {
    program: &'static str,
    version: &'static str,
    run: &'a str,
    issued: &'a str,
    state: &'static str,
    balance: Option<Balance>,
    counts: Option<&'a Ledger>,
    options: Pairs<'a>,
    list: Pairs<'a>,
    rules_title: &'a str,
    rules: Pairs<'a>,
    local: Pairs<'a>,
    templates: Pairs<'a>,
    office: Pairs<'a>,
}

#[derive(Serialize)]
struct Balance {
    says: &'static str,
    holds: bool,
}

impl Record<'_> {
    /// The text of `run.json`.
    pub(super) fn json(&self, state: State<'_>) -> String {
        let (state, counts) = match state {
            State::Running => ("running", None),
            State::Ended(ledger) if ledger.balances() => ("done", Some(ledger)),
            State::Ended(ledger) => ("does not balance", Some(ledger)),
        };
        let written = Written {
            program: "hourworth",
            version: env!("CARGO_PKG_VERSION"),
            run: self.run_id,
            issued: self.issued,
            state,
            balance: counts.map(|ledger| Balance {
                says: "households = printed + held + rejected",
                holds: ledger.balances(),
            }),
            counts,
            options: Pairs(&self.inputs.options),
            list: Pairs(&self.inputs.list),
            rules_title: &self.inputs.pack_title,
            rules: Pairs(&self.inputs.pack),
            local: Pairs(&self.inputs.local),
            templates: Pairs(&self.inputs.templates),
            office: Pairs(&self.inputs.office),
        };
        let mut text = serde_json::to_string_pretty(&written).unwrap_or_default();
        text.push('\n');
        text
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_id_hangs_on_every_input() {
        let mut inputs = Inputs::default();
        let first = inputs.run_id("2026-04-06");
        assert!(
            first.starts_with("20260406-") && first.len() == 17,
            "{first}"
        );
        assert_eq!(first, inputs.run_id("2026-04-06"));
        assert_ne!(first, inputs.run_id("2026-04-07"));
        inputs.list.push(("households.csv".into(), "00".into()));
        let second = inputs.run_id("2026-04-06");
        assert_ne!(first, second);
        let moved = Inputs {
            pack: std::mem::take(&mut inputs.list),
            ..Inputs::default()
        };
        assert_ne!(second, moved.run_id("2026-04-06"));
    }
}
