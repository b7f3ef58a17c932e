//! The frame of a figure: heading, legend, axes with ticks and captions, and the plot inside.

use super::axis::Axis;
use super::canvas::{Anchor, Canvas, Rect};
use super::style::Stroke;
use super::text::{Font, shortened, width, wrapped};

const HEADING: Font = Font::bold(15.0);
const SMALL: Font = Font::regular(12.0);
const SAMPLE: f64 = 30.0;

/// What a line of the legend shows.
#[derive(Debug, Clone, Copy)]
pub(super) enum Sample {
    Line(Stroke),
    Band,
    Marked(Stroke),
}

/// What surrounds the plot.
pub(super) struct FrameSpec<'a> {
    pub heading: &'a str,
    pub x_caption: &'a str,
    pub y_caption: &'a str,
    pub legend: &'a [(Sample, String)],
}

/// The plot's place and axes.
pub(super) struct Frame {
    pub plot: Rect,
    pub x: Axis,
    pub y: Axis,
}

impl Frame {
    /// Draws heading, legend, axes and ticks into `outer` and leaves the plot to be filled.
    pub fn draw(canvas: &mut Canvas, outer: Rect, spec: &FrameSpec, x: Axis, y: Axis) -> Self {
        let palette = canvas.palette;
        let heading = shortened(spec.heading, HEADING, outer.width(), false);
        canvas.text(outer.left, outer.top + 13.0, &heading, HEADING, palette.ink, Anchor::Start);
        let legend_bottom = legend(canvas, outer, outer.top + 34.0, spec.legend);

        let (y_ticks, y_factor) = y.ticks(((outer.height() - 90.0) / 45.0).clamp(2.0, 8.0) as usize);
        let label_room = y_ticks.iter().map(|tick| width(&tick.label, SMALL)).fold(0.0, f64::max);
        let caption = match y_factor {
            Some(factor) => format!("{}, {factor}", spec.y_caption),
            None => spec.y_caption.to_owned(),
        };
        let caption = shortened(&caption, SMALL, outer.width(), false);
        canvas.text(outer.left, legend_bottom + 4.0, &caption, SMALL, palette.muted, Anchor::Start);
        let plot = Rect::new(
            outer.left + label_room + 8.0,
            legend_bottom + 14.0,
            outer.right - 8.0,
            (outer.bottom - 40.0).max(legend_bottom + 40.0),
        );
        canvas.rect(plot, palette.panel);
        let frame = Self { plot, x, y };
        let mut lowest = f64::INFINITY;
        for tick in &y_ticks {
            let place = frame.y_place(tick.value);
            if place < plot.top - 0.5 || place > plot.bottom + 0.5 {
                continue;
            }
            canvas.line((plot.left, place), (plot.right, place), palette.rule_line());
            if lowest - place >= 13.0 {
                canvas.text(plot.left - 6.0, place + 4.2, &tick.label, SMALL, palette.muted, Anchor::End);
                lowest = place;
            }
        }
        let (x_ticks, x_factor) = x.ticks((plot.width() / 50.0).clamp(2.0, 10.0) as usize);
        let mut taken = f64::NEG_INFINITY;
        for tick in &x_ticks {
            let place = frame.x_place(tick.value);
            if place < plot.left - 0.5 || place > plot.right + 0.5 {
                continue;
            }
            canvas.line((place, plot.top), (place, plot.bottom), palette.rule_line());
            let half = width(&tick.label, SMALL) / 2.0;
            let middle = place.min(outer.right - half);
            if middle - half > taken {
                canvas.text(middle, plot.bottom + 17.0, &tick.label, SMALL, palette.muted, Anchor::Middle);
                taken = middle + half + 6.0;
            }
        }
        canvas.outline(plot, palette.axis_line());
        let caption = match x_factor {
            Some(factor) => format!("{}, {factor}", spec.x_caption),
            None => spec.x_caption.to_owned(),
        };
        let caption = shortened(&caption, SMALL, plot.width(), false);
        canvas.text(
            (plot.left + plot.right) / 2.0,
            plot.bottom + 34.0,
            &caption,
            SMALL,
            palette.muted,
            Anchor::Middle,
        );
        frame
    }

    pub fn x_place(&self, value: f64) -> f64 {
        self.plot.left + self.x.fraction(value).clamp(-3.0, 4.0) * self.plot.width()
    }

    pub fn y_place(&self, value: f64) -> f64 {
        self.plot.bottom - self.y.fraction(value).clamp(-3.0, 4.0) * self.plot.height()
    }

    pub fn place(&self, x: f64, y: f64) -> (f64, f64) {
        (self.x_place(x), self.y_place(y))
    }

    /// Whether a label that begins at `x` ends inside the plot.
    pub fn has_room(&self, x: f64, text: &str) -> bool {
        x + width(text, SMALL) <= self.plot.right - 6.0
    }

    /// A label inside the plot, on a patch of the plot's colour so that lines don't cross it.
    pub fn note(&self, canvas: &mut Canvas, x: f64, y: f64, text: &str, colour: &str, anchor: Anchor) {
        let text = shortened(text, SMALL, self.plot.width() - 16.0, false);
        let wide = width(&text, SMALL);
        let left = match anchor {
            Anchor::Start => x,
            Anchor::Middle => x - wide / 2.0,
            Anchor::End => x - wide,
        };
        let left = left.clamp(self.plot.left + 6.0, (self.plot.right - 6.0 - wide).max(self.plot.left + 6.0));
        let panel = canvas.palette.panel;
        canvas.rect(Rect::new(left - 3.0, y - 11.5, left + wide + 3.0, y + 4.0), panel);
        canvas.text(left, y, &text, SMALL, colour, Anchor::Start);
    }
}

/// An empty figure with the reason why.
pub(super) fn empty(canvas: &mut Canvas, outer: Rect, heading: &str, reason: &str) {
    let palette = canvas.palette;
    canvas.text(outer.left, outer.top + 13.0, heading, HEADING, palette.ink, Anchor::Start);
    let plot = Rect::new(outer.left, outer.top + 28.0, outer.right - 8.0, outer.bottom - 8.0);
    canvas.rect(plot, palette.panel);
    canvas.outline(plot, palette.rule_line());
    let font = Font::regular(13.5);
    let most = (((plot.height() - 24.0) / font.line_height()) as usize).max(1);
    let lines = wrapped(reason, font, plot.width() - 48.0, most);
    let top = (plot.top + plot.bottom - lines.len() as f64 * font.line_height()) / 2.0 + font.size;
    for (row, line) in lines.iter().enumerate() {
        let y = top + row as f64 * font.line_height();
        canvas.text((plot.left + plot.right) / 2.0, y, line, font, palette.muted, Anchor::Middle);
    }
}

/// Draws the legend in as many rows as it needs; returns the baseline below it.
fn legend(canvas: &mut Canvas, outer: Rect, top: f64, items: &[(Sample, String)]) -> f64 {
    let palette = canvas.palette;
    let (mut x, mut y) = (outer.left, top);
    for (sample, label) in items {
        let label = shortened(label, SMALL, outer.width() - SAMPLE - 8.0, false);
        let needed = SAMPLE + 6.0 + width(&label, SMALL);
        if x > outer.left && x + needed > outer.right {
            x = outer.left;
            y += 18.0;
        }
        match sample {
            Sample::Line(stroke) => canvas.line((x, y - 4.0), (x + SAMPLE, y - 4.0), *stroke),
            Sample::Marked(stroke) => {
                canvas.line((x, y - 4.0), (x + SAMPLE, y - 4.0), *stroke);
                canvas.circle(x + SAMPLE / 2.0, y - 4.0, 3.0, stroke.colour);
            }
            Sample::Band => {
                let patch = Rect::new(x, y - 10.0, x + SAMPLE, y + 2.0);
                canvas.rect(patch, palette.band);
                canvas.outline(patch, palette.axis_line());
            }
        }
        canvas.text(x + SAMPLE + 6.0, y, &label, SMALL, palette.ink, Anchor::Start);
        x += needed + 18.0;
    }
    if items.is_empty() { y } else { y + 18.0 }
}
