//! Drawing inside a figure: a frame with ticks, lines with patterns, bands, markers. No state, no input.

use super::super::tokens::{self, Palette};
use super::ticks::{self, Scale};
use egui::{Color32, Painter, Pos2, Rect, Shape, Stroke, Ui, pos2, vec2};

/// One axis of a figure.
#[derive(Debug, Clone, PartialEq)]
pub struct Axis {
    /// The lower end.
    pub from: f64,
    /// The upper end.
    pub to: f64,
    /// What its numbers mean.
    pub scale: Scale,
    /// What it measures.
    pub label: String,
}

impl Axis {
    /// An axis, widened where its ends coincide or are unusable.
    pub fn new(from: f64, to: f64, scale: Scale, label: impl Into<String>) -> Self {
        let (from, to) = match (from.is_finite(), to.is_finite()) {
            (true, true) if to > from => (from, to),
            (true, _) => (from - 0.5, from + 0.5),
            _ => (0.0, 1.0),
        };
        Self { from, to, scale, label: label.into() }
    }
}

/// How a line looks.
#[derive(Debug, Clone, Copy)]
pub struct Ink {
    /// Colour.
    pub color: Color32,
    /// Width in points.
    pub width: f32,
    /// Lengths of dashes and gaps by turns; empty for a full line.
    pub dash: &'static [f32],
}

impl Ink {
    /// A line that carries meaning.
    pub fn new(color: Color32, dash: &'static [f32]) -> Self {
        Self { color, width: tokens::LINE, dash }
    }

    /// The same, thinner.
    pub fn thin(self) -> Self {
        Self { width: 1.2, ..self }
    }
}

/// The shape of a marker, so that series differ without colour.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Marker {
    /// A filled disc.
    Disc,
    /// An open ring.
    Ring,
    /// A diamond.
    Diamond,
    /// A triangle pointing down.
    Triangle,
}

/// A framed drawing area.
pub struct Plot {
    painter: Painter,
    /// The area inside the axes.
    pub area: Rect,
    x: Axis,
    y: Axis,
    palette: &'static Palette,
}

impl Plot {
    /// Draws frame, grid and ticks into `outer` and returns the area inside.
    pub fn new(ui: &Ui, outer: Rect, x: Axis, y: Axis) -> Self {
        let palette = tokens::palette(ui);
        let painter = ui.painter().with_clip_rect(outer.intersect(ui.clip_rect()));
        let font = tokens::regular(tokens::SMALL);
        let text = |text: &str, color| painter.layout_no_wrap(text.to_owned(), font.clone(), color);
        let line_height = text("0", palette.muted).size().y;
        let y_most = ((outer.height() - 30.0) / 34.0).clamp(2.0, 9.0) as usize;
        let y_ticks: Vec<_> = ticks::ticks(y.scale, y.from, y.to, y_most)
            .into_iter()
            .map(|tick| (tick.at, text(&tick.label, palette.muted)))
            .collect();
        let label_width = y_ticks.iter().map(|(_, label)| label.size().x).fold(0.0, f32::max);
        // A short name of the axis stands beside the last tick, a long one takes its place.
        let name_width = text(&x.label, palette.muted).size().x;
        let name_room = if name_width < 34.0 { name_width + 8.0 } else { 10.0 };
        let area = Rect::from_min_max(
            pos2(outer.left() + label_width + 8.0, outer.top() + line_height / 2.0 + 1.0),
            pos2(outer.right() - name_room, outer.bottom() - line_height - 6.0),
        );
        let plot = Self { painter: painter.clone(), area, x, y, palette };
        if area.width() < 20.0 || area.height() < 20.0 {
            return plot;
        }
        for (at, label) in y_ticks {
            let y = plot.y_to_screen(at);
            painter.hline(area.x_range(), y, Stroke::new(1.0, palette.grid));
            let place = pos2(area.left() - 5.0 - label.size().x, y - label.size().y / 2.0);
            painter.galley(place, label, palette.muted);
        }
        plot.x_ticks();
        painter.hline(area.x_range(), area.bottom(), Stroke::new(1.0, palette.muted));
        plot
    }

    fn x_ticks(&self) {
        let font = tokens::regular(tokens::SMALL);
        let Self { painter, area, palette, .. } = self;
        let name = painter.layout_no_wrap(self.x.label.clone(), font.clone(), palette.muted);
        let short = name.size().x < 34.0;
        let name_from = if short { area.right() + 8.0 } else { area.right() + 8.0 - name.size().x };
        let most = (area.width() / 48.0).clamp(2.0, 12.0) as usize;
        let mut free_from = area.left() - 30.0;
        for tick in ticks::ticks(self.x.scale, self.x.from, self.x.to, most) {
            let x = self.x_to_screen(tick.at);
            painter.vline(x, area.bottom()..=area.bottom() + 3.0, Stroke::new(1.0, palette.muted));
            let label = painter.layout_no_wrap(tick.label, font.clone(), palette.muted);
            let left = x - label.size().x / 2.0;
            if left > free_from + 6.0 && left + label.size().x < name_from - 2.0 {
                free_from = left + label.size().x;
                painter.galley(pos2(left, area.bottom() + 4.0), label, palette.muted);
            }
        }
        painter.galley(pos2(name_from, area.bottom() + 4.0), name, palette.muted);
    }

    /// Horizontal place of a value.
    pub fn x_to_screen(&self, x: f64) -> f32 {
        let share = (x - self.x.from) / (self.x.to - self.x.from);
        (f64::from(self.area.left()) + share.clamp(-100.0, 100.0) * f64::from(self.area.width())) as f32
    }

    /// Vertical place of a value.
    pub fn y_to_screen(&self, y: f64) -> f32 {
        let share = (y - self.y.from) / (self.y.to - self.y.from);
        (f64::from(self.area.bottom()) - share.clamp(-10.0, 10.0) * f64::from(self.area.height())) as f32
    }

    /// Value at a horizontal place, within the axis.
    pub fn x_from_screen(&self, x: f32) -> f64 {
        let share = f64::from((x - self.area.left()) / self.area.width().max(1.0));
        self.x.from + share.clamp(0.0, 1.0) * (self.x.to - self.x.from)
    }

    /// A painter that cannot draw outside the area.
    pub fn inside(&self) -> Painter {
        self.painter.with_clip_rect(self.area.expand(1.0).intersect(self.painter.clip_rect()))
    }

    /// The points inside the horizontal axis, with one neighbour on each side. Points are in order of x.
    fn visible<'a>(&self, points: &'a [[f64; 2]]) -> &'a [[f64; 2]] {
        let from = points.partition_point(|point| point[0] < self.x.from).saturating_sub(1);
        let to = (points.partition_point(|point| point[0] <= self.x.to) + 1).min(points.len());
        points.get(from..to).unwrap_or(points)
    }

    /// A polyline; points with infinite coordinates break nothing, points closer than a pixel are thinned.
    pub fn line(&self, points: &[[f64; 2]], ink: Ink) {
        let path = self.thinned(self.visible(points));
        if path.len() < 2 {
            return;
        }
        let stroke = Stroke::new(ink.width, ink.color);
        if ink.dash.is_empty() {
            self.inside().add(Shape::line(path, stroke));
        } else {
            let dashes: Vec<f32> = ink.dash.iter().copied().step_by(2).collect();
            let gaps: Vec<f32> = ink.dash.iter().copied().skip(1).step_by(2).collect();
            self.inside().extend(Shape::dashed_line_with_offset(&path, stroke, &dashes, &gaps, 0.0));
        }
    }

    /// The points on the screen: of every pixel column the first, lowest, highest and last.
    fn thinned(&self, points: &[[f64; 2]]) -> Vec<Pos2> {
        let visible = points.iter().filter(|[x, y]| x.is_finite() && y.is_finite());
        let on_screen = visible.map(|&[x, y]| pos2(self.x_to_screen(x), self.y_to_screen(y)));
        if points.len() < 4 * self.area.width().max(1.0) as usize {
            return on_screen.collect();
        }
        let mut path: Vec<Pos2> = Vec::new();
        let mut column: Vec<Pos2> = Vec::new();
        for point in on_screen {
            if column.first().is_some_and(|first| first.x.floor() != point.x.floor()) {
                flush(&mut column, &mut path);
            }
            column.push(point);
        }
        flush(&mut column, &mut path);
        path
    }

    /// A horizontal band.
    pub fn band(&self, from: f64, to: f64, color: Color32) {
        let (top, bottom) = (self.y_to_screen(to), self.y_to_screen(from));
        let rect = Rect::from_x_y_ranges(self.area.x_range(), top..=bottom);
        self.inside().rect_filled(rect, 0.0, color);
    }

    /// A horizontal line across the area.
    pub fn across(&self, y: f64, ink: Ink) {
        self.line(&[[self.x.from, y], [self.x.to, y]], ink);
    }

    /// A vertical line through the area.
    pub fn upright(&self, x: f64, ink: Ink) {
        self.line(&[[x, self.y.from], [x, self.y.to]], ink);
    }

    /// A marker.
    pub fn marker(&self, x: f64, y: f64, marker: Marker, color: Color32) {
        if x.is_finite() && y.is_finite() {
            paint_marker(
                &self.inside(),
                pos2(self.x_to_screen(x), self.y_to_screen(y)),
                marker,
                color,
                self.palette.card,
            );
        }
    }

    /// A short text beside a point, kept inside the area.
    pub fn note(&self, x: f64, y: f64, text: &str, color: Color32) {
        let galley = self.painter.layout_no_wrap(text.to_owned(), tokens::regular(tokens::SMALL), color);
        let size = galley.size();
        let wanted = pos2(self.x_to_screen(x) + 7.0, self.y_to_screen(y) - size.y - 3.0);
        let left = wanted.x.min(self.area.right() - size.x - 2.0).max(self.area.left() + 2.0);
        let top = wanted.y.max(self.area.top() + 1.0).min(self.area.bottom() - size.y - 1.0);
        let rect = Rect::from_min_size(pos2(left, top), size).expand2(vec2(2.0, 0.0));
        self.inside().rect_filled(rect, 2.0, self.palette.card.gamma_multiply(0.85));
        self.inside().galley(pos2(left, top), galley, color);
    }

    /// A sentence in the middle of an empty figure.
    pub fn says(&self, text: &str) {
        let font = tokens::regular(tokens::BODY);
        let galley = self.painter.layout(text.to_owned(), font, self.palette.muted, self.area.width() - 12.0);
        let place = self.area.center() - galley.size() / 2.0;
        self.painter.galley(place, galley, self.palette.muted);
    }
}

/// Moves the first, extreme and last points of a column over, in their order.
fn flush(column: &mut Vec<Pos2>, path: &mut Vec<Pos2>) {
    let by_y = |a: &usize, b: &usize| column[*a].y.total_cmp(&column[*b].y);
    let extremes = ((0..column.len()).min_by(by_y), (0..column.len()).max_by(by_y));
    if let (Some(low), Some(high)) = extremes {
        let mut kept = [0, low, high, column.len() - 1];
        kept.sort_unstable();
        let mut last = None;
        for index in kept {
            if last != Some(index) {
                path.push(column[index]);
                last = Some(index);
            }
        }
    }
    column.clear();
}

/// Paints a marker at a place on the screen.
pub fn paint_marker(painter: &Painter, at: Pos2, marker: Marker, color: Color32, ground: Color32) {
    let stroke = Stroke::new(1.6, color);
    match marker {
        Marker::Disc => painter.circle_filled(at, 3.6, color),
        Marker::Ring => painter.circle(at, 3.6, ground, stroke),
        Marker::Diamond => painter.add(Shape::convex_polygon(
            vec![at + vec2(0.0, -4.8), at + vec2(4.8, 0.0), at + vec2(0.0, 4.8), at + vec2(-4.8, 0.0)],
            ground,
            stroke,
        )),
        Marker::Triangle => painter.add(Shape::convex_polygon(
            vec![at + vec2(-5.0, -4.0), at + vec2(5.0, -4.0), at + vec2(0.0, 4.5)],
            color,
            Stroke::NONE,
        )),
    };
}

/// The smallest and largest finite coordinate `axis` (0 or 1) of some lines.
pub fn extent<'a>(lines: impl IntoIterator<Item = &'a [[f64; 2]]>, axis: usize) -> Option<(f64, f64)> {
    lines
        .into_iter()
        .flatten()
        .filter_map(|point| point.get(axis).copied())
        .filter(|value| value.is_finite())
        .fold(None, |ends, value| match ends {
            None => Some((value, value)),
            Some((low, high)) => Some((low.min(value), high.max(value))),
        })
}
