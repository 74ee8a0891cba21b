//! Whether the words of a sheet have room. In: laid out pages. Out: a line for each piece of text that stands outside the margins or
//! covers another. Draws nothing and changes nothing.

use typst::layout::{Frame, FrameItem, Point, Transform};
use typst_layout::PagedDocument;

/// A millimetre in points.
const MM: f64 = 72.0 / 25.4;
/// Margins of the sheet at the left and at the right, as `shared/page.typ` has them, in points.
const MARGINS: (f64, f64) = (20.0 * MM, 18.0 * MM);
/// What a piece may touch another, in points: the roundings of places.
const SLACK: f64 = 1.0;
/// What a full stop or a colon at the end of a line may hang over its margin, in sizes of print.
const HANG: f64 = 0.35;
/// How high the letters of a line stand above its foot, in sizes of print; what hangs below counts as room between lines.
const HIGH: f64 = 0.7;

/// A piece of text on a page.
struct Piece {
    words: String,
    left: f64,
    top: f64,
    right: f64,
    bottom: f64,
}

impl Piece {
    /// Whether this piece covers another by more than the slack, both ways.
    fn covers(&self, other: &Piece) -> bool {
        let wide = self.right.min(other.right) - self.left.max(other.left);
        let high = self.bottom.min(other.bottom) - self.top.max(other.top);
        wide > SLACK && high > SLACK
    }
}

/// What has no room: `page 2: … stands outside the margins`, `page 2: … covers …`.
pub(super) fn crowded(document: &PagedDocument) -> Vec<String> {
    let mut found = vec![];
    for (position, page) in document.pages().iter().enumerate() {
        let size = page.frame.size();
        let (wide, high) = (size.x.to_pt(), size.y.to_pt());
        let mut pieces = vec![];
        gather(&page.frame, Transform::identity(), &mut pieces);
        let number = position + 1;
        for (place, piece) in pieces.iter().enumerate() {
            let slack = HANG * (piece.bottom - piece.top) / HIGH;
            let inside = piece.left >= MARGINS.0 - slack
                && piece.right <= wide - MARGINS.1 + slack
                && piece.top >= 0.0
                && piece.bottom <= high;
            if !inside {
                found.push(format!(
                    "page {number}: `{}` stands outside the margins",
                    piece.words
                ));
            }
            for other in pieces[..place].iter().filter(|other| piece.covers(other)) {
                found.push(format!(
                    "page {number}: `{}` covers `{}`",
                    piece.words, other.words
                ));
            }
        }
    }
    found
}

/// All pieces of text with their left edge in points, page by page.
pub(super) fn places(document: &PagedDocument) -> Vec<(String, f64)> {
    let mut pieces = vec![];
    for page in document.pages() {
        gather(&page.frame, Transform::identity(), &mut pieces);
    }
    let placed = pieces.into_iter().map(|piece| (piece.words, piece.left));
    placed.collect()
}

/// All pieces of text of a frame.
fn gather(frame: &Frame, way: Transform, out: &mut Vec<Piece>) {
    for (at, item) in frame.items() {
        match item {
            FrameItem::Group(group) => {
                let inner = way
                    .pre_concat(Transform::translate(at.x, at.y))
                    .pre_concat(group.transform);
                gather(&group.frame, inner, out);
            }
            FrameItem::Text(text) if !text.text.trim().is_empty() => {
                let start = at.transform(way);
                let end = Point::new(at.x + text.width(), at.y).transform(way);
                out.push(Piece {
                    words: text.text.to_string(),
                    left: start.x.to_pt().min(end.x.to_pt()),
                    right: start.x.to_pt().max(end.x.to_pt()),
                    top: start.y.to_pt() - HIGH * text.size.to_pt(),
                    bottom: start.y.to_pt(),
                });
            }
            FrameItem::Text(_)
            | FrameItem::Shape(..)
            | FrameItem::Image(..)
            | FrameItem::Link(..)
            | FrameItem::Tag(..) => {}
        }
    }
}
