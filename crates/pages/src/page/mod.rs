//! The page: one sheet that shows the finding and why, as vectors (SVG) and as a picture (PNG).
//!
//! Text is measured with the embedded font before it is placed, so that nothing is cut or overlaps whatever the
//! scenario says. No display, GPU or installed font is needed.

mod axis;
mod blocks;
mod canvas;
mod fit;
mod footer;
mod frame;
mod gap;
mod growth;
mod header;
mod law_picture;
mod picture;
mod style;
mod table;
mod text;

pub use footer::scenario_digest;
pub use picture::Pixels;
pub use style::{PageSize, PageStyle};

use canvas::{Canvas, Rect};
use gaussgap_conclusions::report::Report;

const MARGIN: f64 = 40.0;
const GUTTER: f64 = 36.0;

/// The page as an SVG document. Text stays text; the font is named, not embedded (the page's own picture uses the
/// DejaVu Sans that comes with the program).
pub fn to_svg(report: &Report, style: &PageStyle) -> String {
    svg(report, style, style.usable_scale())
}

/// The page as a PNG picture, `style.scale` dots per unit.
pub fn to_png(report: &Report, style: &PageStyle) -> Vec<u8> {
    picture::png(&svg(report, style, 1.0), style.size.dimensions(), style.usable_scale())
}

/// The page as dots in memory, for the clipboard.
pub fn to_pixels(report: &Report, style: &PageStyle) -> Pixels {
    picture::pixels(&svg(report, style, 1.0), style.size.dimensions(), style.usable_scale())
}

fn svg(report: &Report, style: &PageStyle, scale: f32) -> String {
    let (width, height) = style.size.dimensions();
    let title = report.scenario.title.as_deref().unwrap_or("Normal approximation of a sum");
    drawn(report, style).finish(width, height, scale, title)
}

fn drawn(report: &Report, style: &PageStyle) -> Canvas {
    let (width, height) = style.size.dimensions();
    let (width, height) = (f64::from(width), f64::from(height));
    let mut canvas = Canvas::new(style.palette());
    let paper = canvas.palette.paper;
    canvas.rect(Rect::new(0.0, 0.0, width, height), paper);
    let sheet = Rect::new(MARGIN, MARGIN - 8.0, width - MARGIN, height - 22.0);
    let foot = sheet.bottom - footer::height(report, sheet.width());
    let head = header::draw(&mut canvas, sheet, report) + 20.0;
    let body = Rect { top: head, bottom: foot - 14.0, ..sheet };
    if width > height {
        three_columns(&mut canvas, body, report)
    } else {
        two_columns(&mut canvas, body, report)
    }
    footer::draw(&mut canvas, Rect { top: foot, ..sheet }, report);
    canvas
}

/// Figures side by side, the blocks of text below them.
fn three_columns(canvas: &mut Canvas, body: Rect, report: &Report) {
    let figures = Rect { bottom: body.top + (0.54 * body.height()).max(body.height() - 330.0), ..body };
    let blocks = Rect { top: figures.bottom + 18.0, ..body };
    let [left, middle, right] = columns(figures);
    fit::draw(canvas, left, report);
    gap::draw(canvas, middle, report);
    growth::draw(canvas, right, report);
    let [left, middle, right] = columns(blocks);
    blocks::tails(canvas, left, report);
    blocks::remedies(canvas, middle, report);
    blocks::law_and_cautions(canvas, right, report);
}

/// For upright paper: two figures, then growth beside the law, then the tables, then the cautions.
fn two_columns(canvas: &mut Canvas, body: Rect, report: &Report) {
    let row = |from: f64, to: f64| {
        let part = |fraction: f64| body.top + fraction * body.height();
        columns::<2>(Rect { top: part(from), bottom: part(to) - 20.0, ..body })
    };
    let [left, right] = row(0.0, 0.35);
    fit::draw(canvas, left, report);
    gap::draw(canvas, right, report);
    let [left, right] = row(0.35, 0.70);
    growth::draw(canvas, left, report);
    blocks::law_and_cautions(canvas, right, report);
    let [left, right] = row(0.70, 1.0);
    blocks::tails(canvas, left, report);
    blocks::remedies(canvas, right, report);
}

fn columns<const N: usize>(area: Rect) -> [Rect; N] {
    let width = (area.width() - GUTTER * (N as f64 - 1.0)) / N as f64;
    std::array::from_fn(|index| {
        let left = area.left + index as f64 * (width + GUTTER);
        Rect { left, right: left + width, ..area }
    })
}

#[cfg(test)]
mod tests;
