//! Texts that nobody meant: bytes, soups of words, and the built-in pack with pieces lost or doubled. Whatever comes in,
//! the check ends soon and panics never; what it refuses it shows.

use hourworth::load::{Files, PackFiles, TextFile, check_pack, lay_local, read_pack};
use proptest::prelude::*;
use std::path::Path;
use std::time::{Duration, Instant};

const MANIFEST: &str = "title = \"T\"\narea = \"A\"\ncurrency = \"GBP\"\nperiod = \"month\"\n\
    covers = { from = 2026-01-01, to = 2026-12-31 }\n[dates]\nday = \"the day\"\n";

/// Words, signs and beginnings of statements, so that soups get past the first word.
const PIECES: &[&str] = &[
    "\n",
    "\n",
    "\n",
    "\nper adult\n",
    "\nper child\n",
    "\nper member\n",
    "\nper job\n",
    "\nrecord r of adult\n",
    "\nchoice c = u, v\n",
    "\nfact f of household: money a month default 0 ask \"?\"\n",
    "\nfact g of member: yesno default no ask \"?\"\n",
    "\nfact n of household: count from 1 to 9 default 1 ask \"?\"\n",
    "\nfigure x: money a month = ",
    "\nfigure y: count = ",
    "\nfigure z: yesno = ",
    "\nitem i: pay = ",
    "\nitem j: passport = ",
    " see \"s\"\n",
    "\nhold where ",
    " because \"w\"\n",
    "\nnote m where ",
    "\nbands b of money a month\nband 20% up to money 5 a month\nband 40% beyond\n",
    "\nscale s of count gives rate\nstep 5% up to 3\nstep 9% beyond\n",
    "\nconversion k from week to month times 52/12 see \"s\"\n",
    "\ntable t by count gives money a month\n",
    "part",
    "law",
    "per",
    "record",
    "choice",
    "fact",
    "conversion",
    "table",
    "bands",
    "band",
    "scale",
    "step",
    "figure",
    "item",
    "hold",
    "note",
    "a",
    "above",
    "an",
    "and",
    "any",
    "as",
    "ask",
    "at",
    "because",
    "below",
    "beyond",
    "by",
    "charged",
    "converted",
    "count",
    "dated",
    "default",
    "every",
    "failing",
    "first",
    "from",
    "give",
    "gives",
    "half",
    "is",
    "larger",
    "limited",
    "missing",
    "money",
    "not",
    "of",
    "or",
    "otherwise",
    "over",
    "partner",
    "place",
    "placed",
    "raised",
    "required",
    "rounded",
    "where",
    "with",
    "see",
    "smaller",
    "sum",
    "times",
    "to",
    "up",
    "down",
    "years",
    "yes",
    "no",
    "most",
    "least",
    "slope",
    "steps",
    "hours",
    "household",
    "adult",
    "child",
    "member",
    "job",
    "unit",
    "other",
    "x",
    "y",
    "z",
    "f",
    "g",
    "n",
    "b",
    "s",
    "k",
    "t",
    "r",
    "c",
    "u",
    "v",
    "i",
    "birth",
    "wage",
    "date",
    "day",
    "week",
    "month",
    "year",
    "rate",
    "number",
    "yesno",
    "pay",
    "tax",
    "(",
    ")",
    "(",
    ")",
    "[",
    "]",
    ",",
    ":",
    "=",
    "%",
    "+",
    "-",
    "*",
    "/",
    "0",
    "1",
    "2",
    "0.01",
    "20%",
    "999999999999999999",
    "2026-02-29",
    "2026-04-06",
    "\"text\"",
    "\"",
    "#",
];

/// Checks a pack, and asks every message for its line and its excerpt.
fn holds(rules: &str, others: &[(&str, &str)]) {
    let mut files = vec![
        ("pack.toml", MANIFEST),
        ("order.txt", "a.rules\n"),
        ("a.rules", rules),
    ];
    files.retain(|(name, _)| others.iter().all(|(other, _)| other != name));
    files.extend(others);
    let file = |(name, text): (&str, &str)| TextFile {
        name: name.into(),
        text: text.into(),
        sha256: String::new(),
    };
    judge(&PackFiles {
        name: "soup".into(),
        files: Files(files.into_iter().map(file).collect()),
    });
}

fn judge(pack: &PackFiles) {
    let start = Instant::now();
    if let Err((sources, faults)) = check_pack(pack) {
        assert!(!faults.is_empty(), "a refusal says why");
        for fault in faults.iter().take(20) {
            let (line, shown) = (fault.line(&sources), fault.render(&sources, false));
            assert!(line.contains(&fault.message), "{line}");
            assert!(shown.starts_with("fault: "), "{shown}");
        }
    }
    assert!(
        start.elapsed() < Duration::from_secs(10),
        "it took {:?}",
        start.elapsed()
    );
}

fn soup(most: usize) -> impl Strategy<Value = String> {
    prop::collection::vec(prop::sample::select(PIECES), 0..most).prop_map(|pieces| pieces.join(" "))
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_bytes(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        holds(&String::from_utf8_lossy(&bytes), &[]);
    }

    #[test]
    fn any_signs(text in "[a-z0-9 _.:=+*/%()\\[\\],\"#\n-]{0,300}") {
        holds(&format!("part \"T\" dated by day\n{text}"), &[]);
    }

    #[test]
    fn any_soup(text in soup(120)) {
        holds(&format!("part \"T\" dated by day\n{text}"), &[]);
    }

    #[test]
    fn any_expression(text in soup(25)) {
        let text = text.replace('\n', " ");
        holds(&format!("part \"T\" dated by day\nfact f of household: money a month default 0 ask \"?\"\nitem i: pay = {text} see \"s\"\nitem j: pay = f see \"s\"\n"), &[]);
    }

    #[test]
    fn any_local_file(text in "(word|choice|table|rows|value|[a-z0-9_,.=é\"\\[\\]{}\n -]){0,200}") {
        let rules = "part \"T\" dated by day\nchoice c = u, v\nfact f of household: c default u ask \"?\"\ntable t by c, count gives rate\nitem j: passport = t[f, 1] above 0 see \"s\"\n";
        let manifest = format!("{MANIFEST}[[local]]\nchoice = \"c\"\nfills = [\"t\"]\n");
        let head = "title = \"T\"\npack = \"p\"\nchoice = \"c\"\nword = \"w\"\nfrom = 2026-01-01\nto = 2026-12-31\nsource = \"s\"\nname.en = \"W\"\n";
        holds(rules, &[("pack.toml", &manifest), ("local/w.toml", &text)]);
        holds(rules, &[("pack.toml", &manifest), ("local/w.toml", &format!("{head}{text}"))]);
        holds(rules, &[("pack.toml", &manifest), ("local/w.toml", &format!("{head}[[table]]\nname = \"t\"\nunit = \"percent\"\nrows = [{text}"))]);
    }

    #[test]
    fn any_table(text in "[a-z0-9_,.\"\n\r -]{0,200}") {
        let head = "name,from,to,value,unit,period,source,locator,status\n";
        let rules = "part \"T\" dated by day\ntable t by count gives rate\nitem j: passport = t[1] above 0 see \"s\"\n";
        let amounts = format!("{head}{text}");
        let table = format!("n,from,to,value,source,locator,status\n{text}");
        let labels = format!("\u{feff}key,text\né{text}");
        holds(rules, &[("amounts.csv", &amounts), ("tables/t.csv", &table), ("labels.en.csv", &labels), ("order.txt", &text), ("pack.toml", MANIFEST)]);
        holds(rules, &[("pack.toml", &text), ("amounts.csv", &text), ("tables/t.csv", &text), ("labels.en.csv", &text)]);
    }
}

/// Places of a text at which something is cut: every `step`th, at a boundary of characters.
fn cuts(text: &str, step: usize) -> Vec<usize> {
    (0..text.len())
        .step_by(step)
        .filter(|at| text.is_char_boundary(*at))
        .collect()
}

/// The built-in pack with one file changed.
fn with(pack: &PackFiles, name: &str, text: String) -> PackFiles {
    let mut pack = pack.clone();
    for file in pack.files.0.iter_mut().filter(|f| f.name == name) {
        file.text.clone_from(&text);
    }
    pack
}

/// The files of the built-in pack that are read when it is checked.
fn uk() -> (PackFiles, Vec<(String, String)>) {
    let mut pack = read_pack("uk", None).expect("the pack is built in");
    let local = ["harrowmere", "pennickmoor"]
        .map(|name| Path::new("demo_cases/councils").join(format!("{name}.toml")));
    lay_local(&mut pack, &[], None, &local).expect("the local files are there");
    let texts = pack
        .files
        .texts()
        .filter(|(name, _)| !name.starts_with("examples/"));
    let texts = texts
        .map(|(name, text)| (name.to_owned(), text.to_owned()))
        .collect();
    (pack, texts)
}

#[test]
fn every_file_of_the_built_in_pack_cut_short() {
    let (pack, texts) = uk();
    for (at, (name, text)) in texts.iter().enumerate() {
        // A prime, and another start for each file, so that the cuts fall everywhere in lines.
        for cut in cuts(text, 997)
            .into_iter()
            .map(|cut| cut + at % 7)
            .filter(|cut| text.is_char_boundary(*cut))
        {
            judge(&with(&pack, name, text[..cut].to_owned()));
        }
    }
}

#[test]
fn every_file_of_the_built_in_pack_with_a_word_lost_or_doubled() {
    let (pack, texts) = uk();
    for (at, (name, text)) in texts.iter().enumerate() {
        let words: Vec<&str> = text.split_inclusive([' ', '\n', ',']).collect();
        for place in (at % 5..words.len()).step_by(211) {
            let mut lost = words.clone();
            lost.remove(place);
            judge(&with(&pack, name, lost.concat()));
            let mut doubled = words.clone();
            doubled.insert(place, words[place]);
            judge(&with(&pack, name, doubled.concat()));
        }
    }
}

#[test]
fn long_chains_and_deep_texts() {
    let part = "part \"T\" dated by day\n";
    let mut chain = String::from(part);
    for n in 0..20_000 {
        chain.push_str(&format!("figure x{n}: count = x{} + 1\n", n + 1));
    }
    holds(&chain, &[]);
    holds(
        &format!("{chain}figure x20000: count = 1\nitem i: passport = x0 above 1 see \"s\"\n"),
        &[],
    );
    holds(
        &format!("{chain}figure x20000: count = x0\nitem i: passport = x0 above 1 see \"s\"\n"),
        &[],
    );
    for piece in [
        "(",
        "not ",
        "1 + ",
        "1 beyond ",
        "yes and ",
        "sum over child of ",
        "where yes give 1 otherwise ",
        "years from ",
        "x of partner failing ",
        "x[",
        "larger of (",
    ] {
        holds(
            &format!(
                "{part}figure x: count = {}1\nitem i: passport = x above 1 see \"s\"\n",
                piece.repeat(50_000)
            ),
            &[],
        );
    }
    let many_sums = "sum over member of ".repeat(3);
    let mut sums = String::from(part);
    for n in 0..60 {
        sums.push_str(&format!("figure x{n}: count = {many_sums} x{}\n", n + 1));
    }
    holds(
        &format!("{sums}figure x60: count = 1\nitem i: passport = x0 above 1 see \"s\"\n"),
        &[],
    );
    // The deepest chains that are taken must not exhaust a small stack.
    let links = [
        ("{} + 1", 247),
        ("count of child with ({} above 1)", 122),
        ("where any adult with ({} above 1) give 1 otherwise 2", 122),
        ("first child by birth give {} failing 1", 247),
        (
            "(count of child with ({} above 2 or {} below 1) + 1) rounded up to 1",
            82,
        ),
        ("smaller of (1, not_more, {} beyond 1 limited to 5)", 122),
    ];
    for (link, length) in links {
        let mut deepest = format!("{part}figure not_more: count = 9\n");
        for n in 0..length {
            deepest.push_str(&format!(
                "figure x{n}: count = {}\n",
                link.replace("{}", &format!("x{}", n + 1))
            ));
        }
        deepest.push_str(&format!("figure x{length}: count = count of child\nitem i: passport = x0 above not_more see \"s\"\n"));
        let small = std::thread::Builder::new().stack_size(1 << 20);
        let result = small
            .spawn(move || deepest_holds(&deepest))
            .expect("a thread")
            .join();
        result.expect("no overflow");
    }
}

/// Checks a chain that is nearly too deep: it is taken.
fn deepest_holds(rules: &str) {
    let file = |(name, text): (&str, &str)| TextFile {
        name: name.into(),
        text: text.into(),
        sha256: String::new(),
    };
    let files = [
        ("pack.toml", MANIFEST),
        ("order.txt", "a.rules\n"),
        ("a.rules", rules),
    ];
    let pack = PackFiles {
        name: "chain".into(),
        files: Files(files.into_iter().map(file).collect()),
    };
    if let Err((sources, faults)) = check_pack(&pack) {
        panic!(
            "{} faults, the first {}",
            faults.len(),
            faults[0].line(&sources)
        );
    }
}
