//! The working at one point as numbered lines. In: the lines in the order of the law. Out: text or JSON.

use crate::measures::{AmountUse, WorkingLine};
use serde_json::{Value, json};

/// Numbered lines under the headings of their instruments.
pub(super) fn text(lines: &[WorkingLine]) -> String {
    let mut out = String::new();
    let mut part = "";
    for (place, line) in lines.iter().enumerate() {
        if line.part != part || place == 0 {
            if place > 0 {
                out.push('\n');
            }
            out.push_str(&line.part);
            out.push('\n');
            part = &line.part;
        }
        let whose = match line.of.as_str() {
            "" => String::new(),
            of => format!(" of {of}"),
        };
        let law = match line.law.as_str() {
            "" => String::new(),
            law => format!("  [{law}]"),
        };
        out.push_str(&format!(
            "{:>4}  {}{whose} = {}{law}\n",
            place + 1,
            line.name,
            line.value
        ));
        out.push_str(&format!("        {}\n", line.formula));
        if !line.inputs.is_empty() {
            out.push_str(&format!("        with {}\n", line.inputs.join(", ")));
        }
        for amount in &line.amounts {
            out.push_str(&format!("        {}\n", amount_words(amount)));
        }
    }
    out
}

/// An amount with its days, source and status.
fn amount_words(amount: &AmountUse) -> String {
    let days = match amount.to.as_str() {
        "" => format!("from {}", amount.from),
        to => format!("{} to {to}", amount.from),
    };
    let place = match amount.locator.as_str() {
        "" => amount.source.clone(),
        locator => format!("{}, {locator}", amount.source),
    };
    let status = match (amount.changed_because.as_str(), amount.confirmed) {
        ("", true) => String::new(),
        ("", false) => "; not confirmed".to_owned(),
        (why, _) => format!("; changed by the list: {why}"),
    };
    format!(
        "amount {} {}, {days}: {place}{status}",
        amount.name, amount.value
    )
}

/// The same for programs.
pub(super) fn json(lines: &[WorkingLine]) -> Value {
    lines
        .iter()
        .enumerate()
        .map(|(place, line)| {
            json!({
                "number": place + 1,
                "part": line.part,
                "name": line.name,
                "of": line.of,
                "value": line.value,
                "formula": line.formula,
                "inputs": line.inputs,
                "law": line.law,
                "amounts": line.amounts.iter().map(amount_words).collect::<Vec<_>>(),
            })
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lines_are_numbered_under_their_instrument() {
        let line = |part: &str, name: &str, of: &str, law: &str| WorkingLine {
            part: part.into(),
            name: name.into(),
            of: of.into(),
            value: "12.00 a month".into(),
            formula: "pay beyond allowance".into(),
            inputs: vec!["pay = 20.00".into(), "allowance = 8.00".into()],
            law: law.into(),
            amounts: vec![],
            counts: true,
        };
        let lines = [
            line("Invented Tax", "taxed", "adult 1", ""),
            line("Invented Tax", "tax", "adult 1", "Invented Act s. 2"),
            WorkingLine {
                inputs: vec![],
                ..line("Invented Benefit", "support", "", "Invented Act s. 9")
            },
        ];
        insta::assert_snapshot!(text(&lines), @r"
        Invented Tax
           1  taxed of adult 1 = 12.00 a month
                pay beyond allowance
                with pay = 20.00, allowance = 8.00
           2  tax of adult 1 = 12.00 a month  [Invented Act s. 2]
                pay beyond allowance
                with pay = 20.00, allowance = 8.00

        Invented Benefit
           3  support = 12.00 a month  [Invented Act s. 9]
                pay beyond allowance
        ");
        assert_eq!(json(&lines)[2]["number"], 3);
    }
}
