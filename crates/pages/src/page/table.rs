//! Tables: columns as wide as their cells, one column that takes the rest, and a last line for rows without room.

use super::canvas::{Anchor, Canvas, Rect};
use super::text::{Font, shortened, width, wrapped};

/// A heading above a block.
pub(super) const HEADING: Font = Font::bold(15.0);
/// Room a heading takes.
pub(super) const HEADING_ROOM: f64 = 26.0;
const GAP: f64 = 14.0;

/// A column: what stands above it, and whether its cells are numbers (set flush right).
pub(super) struct Column {
    pub title: &'static str,
    pub numeric: bool,
}

/// Cells in columns; the first column that is not numeric takes the room that is left and is broken into lines.
pub(super) struct Table {
    pub columns: Vec<Column>,
    pub rows: Vec<Vec<String>>,
    /// At most this many lines in the wide column's cells.
    pub lines: usize,
}

/// Draws a heading; returns where the block goes on.
pub(super) fn heading(canvas: &mut Canvas, area: Rect, text: &str) -> Rect {
    let ink = canvas.palette.ink;
    let text = shortened(text, HEADING, area.width(), false);
    canvas.text(area.left, area.top + 13.0, &text, HEADING, ink, Anchor::Start);
    Rect { top: area.top + HEADING_ROOM, ..area }
}

impl Table {
    /// Draws as many rows as there is room for and returns the bottom of what was drawn.
    pub fn draw(&self, canvas: &mut Canvas, area: Rect) -> f64 {
        let palette = canvas.palette;
        let (font, widths) = self.fitting(area.width());
        let step = font.line_height() + 3.0;
        let title_font = Font { bold: true, ..font };
        let rights = rights(area.left, &widths);
        let mut y = area.top + font.size;
        for (column, (&right, &wide)) in self.columns.iter().zip(rights.iter().zip(&widths)) {
            let title = shortened(column.title, title_font, wide, false);
            let (x, anchor) =
                if column.numeric { (right, Anchor::End) } else { (right - wide, Anchor::Start) };
            canvas.text(x, y, &title, title_font, palette.muted, anchor);
        }
        canvas.line((area.left, y + 6.0), (area.right, y + 6.0), palette.axis_line());
        y += step + 4.0;
        for (index, row) in self.rows.iter().enumerate() {
            let cells: Vec<Vec<String>> = row
                .iter()
                .zip(&self.columns)
                .zip(&widths)
                .map(|((cell, column), &wide)| {
                    let most = if column.numeric { 1 } else { self.lines };
                    wrapped(cell, font, wide + 0.01, most)
                })
                .collect();
            let high = cells.iter().map(Vec::len).max().unwrap_or(1).max(1);
            let remaining = self.rows.len() - index;
            let bottom = y + (high - 1) as f64 * font.line_height();
            let reserved = if remaining > 1 { step } else { 0.0 };
            if bottom + 4.0 + reserved > area.bottom {
                let more = format!("… and {remaining} more in the report");
                let more = shortened(&more, font, area.width(), false);
                canvas.text(area.left, y, &more, font, palette.muted, Anchor::Start);
                return y + 6.0;
            }
            for ((lines, column), (&right, &wide)) in
                cells.iter().zip(&self.columns).zip(rights.iter().zip(&widths))
            {
                let (x, anchor) =
                    if column.numeric { (right, Anchor::End) } else { (right - wide, Anchor::Start) };
                for (line, text) in lines.iter().enumerate() {
                    canvas.text(x, y + line as f64 * font.line_height(), text, font, palette.ink, anchor);
                }
            }
            canvas.line((area.left, bottom + 5.0), (area.right, bottom + 5.0), palette.rule_line());
            y = bottom + step;
        }
        y - step + 8.0
    }

    /// The largest font whose columns fit, and the columns' widths.
    fn fitting(&self, room: f64) -> (Font, Vec<f64>) {
        let wide = self.columns.iter().position(|column| !column.numeric);
        for size in [13.0, 12.5, 12.0, 11.5, 11.0, 10.5, 10.0, 9.5, 9.0] {
            let font = Font::regular(size);
            let bold = Font::bold(size);
            let mut widths: Vec<f64> = self
                .columns
                .iter()
                .enumerate()
                .map(|(index, column)| {
                    let cells = self.rows.iter().filter_map(|row| row.get(index));
                    cells.map(|cell| width(cell, font)).fold(width(column.title, bold), f64::max)
                })
                .collect();
            let gaps = GAP * self.columns.len().saturating_sub(1) as f64;
            if let Some(wide) = wide {
                let others: f64 =
                    widths.iter().enumerate().filter(|(index, _)| *index != wide).map(|(_, w)| w).sum();
                let left = room - gaps - others;
                // The wide column gets what it asks for or half of the room, before the font gets smaller.
                if left >= widths[wide].min(0.4 * room) || size == 9.0 {
                    widths[wide] = left.max(20.0);
                    return (font, widths);
                }
            } else if widths.iter().sum::<f64>() + gaps <= room {
                let spare = (room - gaps - widths.iter().sum::<f64>())
                    / self.columns.len().saturating_sub(1).max(1) as f64;
                widths.iter_mut().skip(1).for_each(|width| *width += spare);
                return (font, widths);
            } else if size == 9.0 {
                let factor = (room - gaps) / widths.iter().sum::<f64>();
                widths.iter_mut().for_each(|width| *width *= factor);
                return (font, widths);
            }
        }
        (Font::regular(9.0), vec![room / self.columns.len().max(1) as f64; self.columns.len()])
    }
}

fn rights(left: f64, widths: &[f64]) -> Vec<f64> {
    let mut right = left - GAP;
    widths
        .iter()
        .map(|width| {
            right += GAP + width;
            right
        })
        .collect()
}
