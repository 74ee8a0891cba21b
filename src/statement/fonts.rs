//! The shipped fonts: Noto Sans in three cuts, from inside the binary.
//! Answers which characters can be set and how wide a text is.

use std::sync::LazyLock;
use typst::foundations::Bytes;
use typst::layout::Abs;
use typst::text::{Font, FontBook, FontVariant, FontVariations};
use typst::utils::LazyHash;

/// Weight of a text that is measured.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Weight {
    /// The ordinary cut.
    Regular,
    /// The bold cut.
    Bold,
}

/// Characters whose widths are kept; wider ones count as [`WIDE`].
const MEASURED: u32 = 0x2300;
/// Width of a character without a measured width, in thousandths of the size.
const WIDE: u16 = 1000;

/// All shipped fonts.
pub(super) struct Fonts {
    /// The fonts by index.
    pub list: Vec<Font>,
    /// Their descriptions.
    pub book: LazyHash<FontBook>,
    /// Widths of the first characters, in thousandths of the size: regular, bold.
    widths: [Vec<u16>; 2],
}

static FONTS: LazyLock<Fonts> = LazyLock::new(|| {
    let list: Vec<Font> = [
        notosans::REGULAR_TTF,
        notosans::BOLD_TTF,
        notosans::ITALIC_TTF,
    ]
    .into_iter()
    .map(|data| Font::new(Bytes::new(data), 0).expect("the shipped fonts are valid"))
    .collect();
    let book = LazyHash::new(FontBook::from_fonts(&list));
    let widths = [widths(&list[0]), widths(&list[1])];
    Fonts { list, book, widths }
});

/// The widths of the first characters of a font, in thousandths of the size.
fn widths(font: &Font) -> Vec<u16> {
    let instance = font.clone().instantiate(
        FontVariant::default(),
        Abs::pt(12.0),
        &FontVariations::default(),
    );
    let face = instance.ttf();
    let em = u32::from(face.units_per_em());
    (0..MEASURED)
        .map(|code| {
            char::from_u32(code)
                .and_then(|character| face.glyph_index(character))
                .and_then(|glyph| face.glyph_hor_advance(glyph))
                .map_or(WIDE, |units| (u32::from(units) * 1000 / em) as u16)
        })
        .collect()
}

/// The shipped fonts, read once.
pub(super) fn fonts() -> &'static Fonts {
    &FONTS
}

/// Whether a character shows nothing and may change how its neighbours show: refused in typed text.
pub(super) fn is_invisible(character: char) -> bool {
    matches!(
        character,
        '\u{00AD}'
            | '\u{034F}'
            | '\u{061C}'
            | '\u{115F}'..='\u{1160}'
            | '\u{17B4}'..='\u{17B5}'
            | '\u{180B}'..='\u{180F}'
            | '\u{200B}'..='\u{200F}'
            | '\u{2028}'..='\u{202E}'
            | '\u{2060}'..='\u{206F}'
            | '\u{3164}'
            | '\u{FE00}'..='\u{FE0F}'
            | '\u{FEFF}'
            | '\u{FFA0}'
            | '\u{FFF0}'..='\u{FFFB}'
            | '\u{E0000}'..='\u{E0FFF}'
    )
}

/// The first character of a text that cannot be set as typed, if any. A line break can.
pub(super) fn first_unset(text: &str) -> Option<char> {
    text.chars().find(|&character| match character {
        ' '..='~' | '\n' => false,
        _ => {
            character.is_control()
                || is_invisible(character)
                || !fonts()
                    .list
                    .iter()
                    .all(|font| font.info().coverage.contains(u32::from(character)))
        }
    })
}

/// Width of one line of text in points, without kerning.
pub(super) fn width(text: &str, weight: Weight, size: f64) -> f64 {
    let table = &fonts().widths[match weight {
        Weight::Regular => 0,
        Weight::Bold => 1,
    }];
    let thousandths: u32 = text
        .chars()
        .map(|character| {
            u32::from(
                table
                    .get(u32::from(character) as usize)
                    .copied()
                    .unwrap_or(WIDE),
            )
        })
        .sum();
    f64::from(thousandths) * size / 1000.0
}
