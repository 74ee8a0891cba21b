//! How hard the fixed English words of the client letter are to read, by a published formula.
//!
//! Flesch–Kincaid grade = 0.39 · words a sentence + 11.8 · syllables a word − 15.59. Source: Kincaid, Fishburne, Rogers and Chissom
//! 1975, "Derivation of New Readability Formulas … for Navy Enlisted Personnel" (the formula read in reprints of it). A grade of 6 to 8 is
//! a reading age of about 12 to 14. Slots hold plain sample words. A whole sentence ends in a full stop; headings and labels do
//! not count, as they have no sentence. Syllables are counted by groups of vowels.

#![expect(clippy::float_arithmetic, reason = "a grade is no money")]

use hourworth::statement::TemplateSet;

/// The highest grade: reading age 13 to 14.
const GRADE: f64 = 8.0;
/// The most words of a sentence.
const LONGEST: usize = 25;

/// Groups of vowels, less a silent `e` or `ed` at the end; at least one.
fn syllables(word: &str) -> usize {
    let word = word.to_lowercase();
    let word = word.trim_end_matches("’s");
    if word.chars().any(|c| c.is_ascii_digit()) {
        // A number is read out: `20` and `£90` have two syllables at least.
        return 2;
    }
    let vowel = |c: char| "aeiouy".contains(c);
    let mut groups = 0;
    let mut before = false;
    for character in word.chars() {
        groups += usize::from(vowel(character) && !before);
        before = vowel(character);
    }
    let silent_e = word.ends_with('e') && !word.ends_with("le");
    let silent_ed = word.ends_with("ed") && !word.ends_with("ted") && !word.ends_with("ded");
    groups -= usize::from(groups > 1 && (silent_e || silent_ed));
    groups.max(1)
}

/// A text with plain words in its slots.
fn filled(text: &str) -> String {
    let mut out = String::new();
    let mut rest = text;
    while let Some((before, after)) = rest.split_once('{') {
        let (slot, after) = after.split_once('}').expect("a slot ends");
        out.push_str(before);
        out.push_str(match slot.trim_start_matches('#') {
            hours if hours.ends_with("|hours") => "20 hours",
            "sum" | "less_sum" | "more_sum" | "now" | "pay" => "£90",
            "each" => "£10",
            "ten" => "£4",
            "period" => "month",
            "assessed" | "until" => "1 June 2026",
            "name" | "list" => "Income Tax",
            _ => "20",
        });
        rest = after;
    }
    out + rest
}

/// Whole sentences: each ends in a full stop.
fn sentences(text: &str) -> Vec<String> {
    let mut out = vec![];
    let mut now = String::new();
    for word in text.split_whitespace() {
        if !now.is_empty() {
            now.push(' ');
        }
        now.push_str(word);
        if word.ends_with(['.', ':']) {
            out.push(std::mem::take(&mut now));
        }
    }
    out.retain(|sentence| sentence.ends_with('.'));
    out
}

fn words(sentence: &str) -> Vec<&str> {
    let parts = sentence.split(|c: char| c.is_whitespace() || "“”();,".contains(c));
    parts
        .filter(|word| word.chars().any(char::is_alphanumeric))
        .collect()
}

fn grade(sentences: &[String]) -> f64 {
    let all: Vec<&str> = sentences
        .iter()
        .flat_map(|sentence| words(sentence))
        .collect();
    let said: usize = all.iter().map(|word| syllables(word)).sum();
    0.39 * all.len() as f64 / sentences.len() as f64 + 11.8 * said as f64 / all.len() as f64 - 15.59
}

fn gather(table: &toml::Table, out: &mut Vec<String>) {
    for (key, value) in table {
        match value {
            toml::Value::Table(_) if ["write", "language", "month", "copy"].contains(&&**key) => {}
            toml::Value::Table(inner) => gather(inner, out),
            toml::Value::String(text) => out.extend(sentences(&filled(text))),
            other => panic!("`{key}` is {other}, no text"),
        }
    }
}

fn fixed_sentences() -> Vec<String> {
    let set = TemplateSet::built_in();
    let (_, text) = set
        .files()
        .find(|(name, _)| *name == "text/en.toml")
        .expect("texts");
    let mut out = vec![];
    gather(&text.parse().expect("it parses"), &mut out);
    out
}

#[test]
fn syllables_are_counted() {
    for (word, count) in [
        ("pay", 1),
        ("hours", 1),
        ("table", 2),
        ("changed", 1),
        ("counted", 2),
        ("adviser", 3),
        ("each", 1),
        ("estimate", 3),
        ("household", 3),
        ("you", 1),
        ("today’s", 2),
    ] {
        assert_eq!(syllables(word), count, "{word}");
    }
    // The counter takes the silent `e` within `household` for a syllable: it counts too many rather than too few.
    let hard = ["The administration of contributory entitlements necessitates consideration of individual circumstances.".to_owned()];
    assert!(grade(&hard) > 15.0, "the formula tells hard words");
}

#[test]
fn the_letter_is_read_at_twelve_to_fourteen() {
    let all = fixed_sentences();
    assert!(all.len() > 80, "{} sentences", all.len());
    let long: Vec<&String> = all
        .iter()
        .filter(|sentence| words(sentence).len() > LONGEST)
        .collect();
    assert!(long.is_empty(), "more than {LONGEST} words: {long:#?}");
    let whole = grade(&all);
    println!(
        "Flesch–Kincaid grade {whole:.1} over {} sentences",
        all.len()
    );
    assert!(whole <= GRADE, "grade {whole:.1}");
    // Short sentences of a few words pull the mean down: so the longer ones alone as well.
    let longer: Vec<String> = all
        .into_iter()
        .filter(|sentence| words(sentence).len() >= 10)
        .collect();
    let grade = grade(&longer);
    println!(
        "grade {grade:.1} over the {} of ten words or more",
        longer.len()
    );
    assert!(grade <= GRADE, "grade {grade:.1} of the longer sentences");
}
