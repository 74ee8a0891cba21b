//! How wide columns must be, and how many fit side by side. What does not fit becomes a further piece of the table, or goes
//! below its row.

use crate::statement::copy_view::{Head, LongRow, LongTable, LongWeight};
use crate::statement::fonts::{Weight, width};
use crate::statement::view::Line;

/// Distance between columns in sizes of print; that of `long` in `shared/ledger.typ`.
const GUTTER: f64 = 0.55;
/// What a width is rounded up by, in points.
const SPARE: f64 = 0.6;
/// What a column beside names is wide at least, in sizes of print, so that its head has room.
const LEAST: f64 = 3.6;

/// What a column of words is wide at most, in sizes of print: words go on in the next line.
const MOST: f64 = 11.0;

/// What stands in the columns after the names.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Side {
    /// Figures, at the right.
    Figures,
    /// Words, at the left.
    Words,
}

/// Room for tables.
#[derive(Clone, Copy)]
pub(super) struct Room {
    /// Width of the text in points.
    pub paper: f64,
    /// Size of print in points.
    pub size: f64,
}

impl Room {
    /// What a column needs: its widest cell, and the widest word of its head.
    fn need(self, head: &str, cells: &[&str], weights: &[Weight]) -> f64 {
        let words = head
            .split(' ')
            .map(|word| width(word, Weight::Bold, self.size));
        let cells = cells
            .iter()
            .zip(weights)
            .map(|(cell, weight)| width(cell, *weight, self.size));
        words.chain(cells).fold(0.0, f64::max) + SPARE
    }

    /// What all columns of a table need.
    fn needs(self, heads: &[String], rows: &[LongRow]) -> Vec<f64> {
        let rows: Vec<&LongRow> = rows
            .iter()
            .filter(|row| row.weight != LongWeight::Group)
            .collect();
        let weights: Vec<Weight> = rows
            .iter()
            .map(|row| match row.weight {
                LongWeight::Total | LongWeight::Marked => Weight::Bold,
                LongWeight::Plain | LongWeight::Worked | LongWeight::Group => Weight::Regular,
            })
            .collect();
        let columns = heads.iter().enumerate();
        columns
            .map(|(place, head)| {
                let cells: Vec<&str> = rows.iter().map(|row| row.cells[place].as_str()).collect();
                self.need(head, &cells, &weights)
            })
            .collect()
    }

    /// A table of figures in as many pieces as are needed; each has the first column again. The figures stand at the right.
    pub fn pieces(self, summary: &str, heads: &[String], rows: &[LongRow]) -> Vec<LongTable> {
        let needs = self.needs(heads, rows);
        let gutter = GUTTER * self.size;
        let mut pieces: Vec<Vec<usize>> = vec![];
        let mut free = 0.0;
        for (place, need) in needs.iter().enumerate().skip(1) {
            match pieces.last_mut() {
                Some(piece) if need + gutter <= free => piece.push(place),
                Some(_) | None => {
                    pieces.push(vec![0, place]);
                    free = self.paper - needs[0];
                }
            }
            free -= need + gutter;
        }
        let pieces = pieces.into_iter();
        pieces
            .map(|piece| LongTable {
                summary: summary.to_owned(),
                columns: piece
                    .iter()
                    .map(|place| head(&heads[*place], u8::from(*place > 0), needs[*place]))
                    .collect(),
                rows: rows
                    .iter()
                    .map(|row| LongRow {
                        cells: match row.weight {
                            LongWeight::Group => row.cells.clone(),
                            LongWeight::Plain
                            | LongWeight::Total
                            | LongWeight::Marked
                            | LongWeight::Worked => piece
                                .iter()
                                .map(|place| row.cells[*place].clone())
                                .collect(),
                        },
                        ..row.clone()
                    })
                    .collect(),
            })
            .collect()
    }

    /// One table: the columns before `fixed` stand at the left, the last of them takes what is left; figures that have no room beside a name
    /// of `least` sizes of print go below their rows, all of them.
    pub fn whole(
        self,
        summary: &str,
        heads: &[String],
        rows: Vec<LongRow>,
        (fixed, least): (usize, f64),
        side: Side,
    ) -> LongTable {
        let mut needs = self.needs(heads, &rows);
        for need in needs.iter_mut().skip(fixed) {
            *need = need.max(LEAST * self.size);
            if side == Side::Words {
                *need = need.min(MOST * self.size);
            }
        }
        let gutter = GUTTER * self.size;
        let rest = fixed.saturating_sub(1);
        let first: f64 = needs[..rest].iter().map(|need| need + gutter).sum();
        let mut free = self.paper - first - least * self.size;
        let mut fits = heads.len();
        for (place, need) in needs.iter().enumerate().skip(fixed) {
            free -= need + gutter;
            if free < 0.0 {
                fits = place;
                break;
            }
        }
        // One figure alone beside names that stand below one another says nothing: all go below.
        if fits < heads.len() {
            fits = fixed;
        }
        let columns = heads.iter().enumerate().take(fits);
        LongTable {
            summary: summary.to_owned(),
            columns: columns
                .map(|(place, name)| {
                    let wide = if place == rest { 0.0 } else { needs[place] };
                    head(
                        name,
                        u8::from(place >= fixed && side == Side::Figures),
                        wide,
                    )
                })
                .collect(),
            rows: rows
                .into_iter()
                .map(|row| below(row, heads, fits))
                .collect(),
        }
    }
}

/// A head with its width.
fn head(name: &str, right: u8, wide: f64) -> Head {
    Head {
        name: name.to_owned(),
        right,
        width: (wide * 100.0).ceil() as u32,
    }
}

/// A row whose figures beyond `fits` stand below it.
fn below(mut row: LongRow, heads: &[String], fits: usize) -> LongRow {
    if row.weight == LongWeight::Group || row.cells.len() <= fits {
        return row;
    }
    let figures = row.cells.split_off(fits);
    let named = heads[fits..].iter().zip(figures);
    let mut lines: Vec<Line> = named
        .filter(|(_, figure)| !figure.is_empty())
        .map(|(head, figure)| Line {
            lead: head.clone(),
            text: figure,
        })
        .collect();
    // Figures of the working are many: one line for all its values.
    if row.weight == LongWeight::Worked {
        let values: Vec<String> = lines
            .iter()
            .map(|line| format!("{} {}", line.lead, line.text))
            .collect();
        lines = vec![Line::from(values.join("; "))];
    }
    lines.append(&mut row.under);
    row.under = lines;
    row
}
