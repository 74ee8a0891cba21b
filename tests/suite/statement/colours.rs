//! The colours of a letter: contrast as the Web Content Accessibility Guidelines measure it, and what is left of it in grey and for
//! eyes that lack a kind of cone. All colours are read from the templates; none is written here.

#![expect(clippy::float_arithmetic, reason = "light is measured, not counted")]

use hourworth::statement::TemplateSet;
use std::collections::BTreeMap;

/// Red, green and blue, each from 0 to 1, as written for a screen (sRGB).
type Colour = [f64; 3];

const WHITE: Colour = [1.0; 3];

fn template(name: &str) -> String {
    let set = TemplateSet::built_in();
    let (_, text) = set.files().find(|(file, _)| *file == name).expect(name);
    text.to_owned()
}

/// `luma(8%)`, `rgb("#3b2a57")` or `white`.
fn read(text: &str) -> Option<Colour> {
    let text = text.trim();
    if text == "white" {
        return Some(WHITE);
    }
    if let Some(part) = text.strip_prefix("luma(") {
        let share: f64 = part.split('%').next()?.parse().ok()?;
        return Some([share / 100.0; 3]);
    }
    let digits = text.strip_prefix("rgb(\"#")?.get(..6)?;
    let part =
        |at: usize| u8::from_str_radix(&digits[at..at + 2], 16).map(|v| f64::from(v) / 255.0);
    Some([part(0).ok()?, part(2).ok()?, part(4).ok()?])
}

/// The named colours of `page.typ`.
fn palette() -> BTreeMap<String, Colour> {
    let page = template("shared/page.typ");
    let lines = page.lines().filter_map(|line| line.strip_prefix("#let "));
    let named = lines.filter_map(|line| line.split_once(" = "));
    named
        .filter_map(|(name, value)| Some((name.to_owned(), read(value)?)))
        .collect()
}

/// The fills of the bars, in the order of their kinds.
fn fills() -> Vec<Colour> {
    let draw = template("shared/draw.typ");
    let line = draw
        .lines()
        .find(|line| line.contains("let fills = ("))
        .expect("the fills");
    let list = line
        .split_once('(')
        .expect("a list")
        .1
        .trim_end_matches(')');
    let named = palette();
    let of = |name: &str| named.get(name.trim()).copied().or_else(|| read(name));
    list.split(", ").map(|name| of(name).expect(name)).collect()
}

/// Light that a screen gives for a value: the inverse of the sRGB curve, as WCAG 2.1 and 2.2 write it.
fn linear(value: f64) -> f64 {
    if value <= 0.04045 {
        value / 12.92
    } else {
        ((value + 0.055) / 1.055).powf(2.4)
    }
}

/// Relative luminance. Source: W3C, Web Content Accessibility Guidelines 2.2, "relative luminance" (the formula read in reprints of it).
fn luminance(colour: Colour) -> f64 {
    let [r, g, b] = colour.map(linear);
    0.2126 * r + 0.7152 * g + 0.0722 * b
}

/// Contrast ratio, 1 to 21. Source: as for [`luminance`], "contrast ratio".
fn contrast(one: Colour, other: Colour) -> f64 {
    let (one, other) = (luminance(one), luminance(other));
    (one.max(other) + 0.05) / (one.min(other) + 0.05)
}

/// What an eye without one kind of cone sees, on linear light. Source: Machado, Oliveira and Fernandes 2009, "A Physiologically-based
/// Model for Simulation of Color Vision Deficiency", matrices of severity 1.0 (the first compared with a published copy of the table, the others from `memory`).
const EYES: [(&str, [[f64; 3]; 3]); 3] = [
    (
        "protanopia",
        [
            [0.152286, 1.052583, -0.204868],
            [0.114503, 0.786281, 0.099216],
            [-0.003882, -0.048116, 1.051998],
        ],
    ),
    (
        "deuteranopia",
        [
            [0.367322, 0.860646, -0.227968],
            [0.280085, 0.672501, 0.047413],
            [-0.011820, 0.042940, 0.968881],
        ],
    ),
    (
        "tritanopia",
        [
            [1.255528, -0.076749, -0.178779],
            [-0.078411, 0.930809, 0.147602],
            [0.004733, 0.691367, 0.303900],
        ],
    ),
];

/// The luminance that such an eye sees.
fn seen(colour: Colour, eye: &[[f64; 3]; 3]) -> f64 {
    let light = colour.map(linear);
    let row = |row: [f64; 3]| -> f64 {
        let sum: f64 = row
            .iter()
            .zip(light)
            .map(|(share, part)| share * part)
            .sum();
        sum.clamp(0.0, 1.0)
    };
    let [r, g, b] = eye.map(row);
    0.2126 * r + 0.7152 * g + 0.0722 * b
}

fn ratio(one: f64, other: f64) -> f64 {
    (one.max(other) + 0.05) / (one.min(other) + 0.05)
}

#[test]
fn the_formula_gives_the_known_ends() {
    // Black on white is 21:1 by the definition; #777777 is just below 4.5:1 on white (common practice, no source).
    assert!((contrast([0.0; 3], WHITE) - 21.0).abs() < 1e-9);
    let grey = read("rgb(\"#777777\")").expect("a colour");
    assert!((4.4..4.5).contains(&contrast(grey, WHITE)));
    // What these eyes see of grey is grey: each row of a matrix adds up to one.
    for (name, eye) in &EYES {
        for row in eye {
            assert!((row.iter().sum::<f64>() - 1.0).abs() < 1e-5, "{name}");
        }
    }
}

#[test]
fn words_stand_out_from_their_ground() {
    let named = palette();
    let fills = fills();
    // Words in these colours, on paper and on the shade of a trap; labels of the bars on the fills, white ones on the dark fill.
    let draw = template("shared/draw.typ");
    let shade = draw
        .lines()
        .find(|line| line.contains("in bands") || line.contains("luma(89%)"));
    assert!(shade.is_some(), "the shade of a trap");
    let shaded = draw
        .split("for (x1, x2) in bands")
        .nth(1)
        .and_then(|rest| rest.split_once("fill: "))
        .and_then(|(_, fill)| read(fill))
        .expect("the shade's colour");
    for name in ["ink", "soft", "accent"] {
        for ground in [WHITE, shaded] {
            let found = contrast(named[name], ground);
            assert!(found >= 4.5, "{name}: {found:.2}");
        }
    }
    let (dark, light): (Vec<_>, Vec<_>) = fills.iter().partition(|fill| luminance(**fill) < 0.2);
    assert!(!dark.is_empty() && !light.is_empty());
    for fill in dark {
        assert!(contrast(WHITE, fill) >= 4.5);
    }
    for fill in light {
        assert!(contrast(named["ink"], fill) >= 4.5);
    }
}

#[test]
fn lines_stand_out_from_what_they_touch() {
    let named = palette();
    // The net income, other runs, axes and marks, and the rules between parts.
    for name in ["ink", "soft", "accent", "hair"] {
        let found = contrast(named[name], WHITE);
        assert!(found >= 3.0, "{name}: {found:.2}");
    }
    // Each part of a bar has an outline of ink, so fill need not stand out from fill.
    let draw = template("shared/draw.typ");
    assert!(draw.contains("fill: fills.at(kind), stroke: 0.6pt + ink"));
    for fill in fills().into_iter().filter(|fill| luminance(*fill) >= 0.2) {
        assert!(contrast(named["ink"], fill) >= 3.0);
    }
}

#[test]
fn no_hue_is_needed_to_tell_a_fill() {
    // What is kept is dark, all else is light: so in grey and for each eye. Light fills share outlines and direct labels (the rule that
    // is relied on: WCAG 2.2, 1.4.1, "use of colour"): the words beside them say which is which.
    let fills = fills();
    let (kept, rest) = fills.split_first().expect("fills");
    for other in rest {
        assert!(contrast(*kept, *other) >= 3.0);
        for (name, eye) in &EYES {
            let found = ratio(seen(*kept, eye), seen(*other, eye));
            assert!(found >= 3.0, "{name}: {found:.2}");
        }
        let (most, least) = (
            other.iter().copied().fold(0.0, f64::max),
            other.iter().copied().fold(1.0, f64::min),
        );
        assert!(most - least < 1e-9, "a light fill has a hue");
    }
    // Words and lines keep their contrast for each eye.
    for (colour, value) in palette() {
        for (name, eye) in &EYES {
            let found = ratio(seen(value, eye), seen(WHITE, eye));
            assert!(found >= 3.0, "{colour}, {name}: {found:.2}");
        }
    }
}
