//! Writing SVG: shapes and text, escaped, with the place of every text remembered for the tests of the layout.

use super::style::{Palette, Stroke};
use super::text::{Font, clean, width};
use std::fmt::Write;

/// A rectangle; y grows downwards.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Rect {
    pub left: f64,
    pub top: f64,
    pub right: f64,
    pub bottom: f64,
}

impl Rect {
    pub const fn new(left: f64, top: f64, right: f64, bottom: f64) -> Self {
        Self { left, top, right, bottom }
    }
    pub fn width(&self) -> f64 {
        self.right - self.left
    }
    pub fn height(&self) -> f64 {
        self.bottom - self.top
    }
    pub fn shrunk(&self, by: f64) -> Self {
        Self::new(self.left + by, self.top + by, self.right - by, self.bottom - by)
    }
}

/// Where a text is fixed.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Anchor {
    Start,
    Middle,
    End,
}

/// A text that was drawn, and the room it takes.
#[derive(Debug, Clone)]
pub(super) struct DrawnText {
    #[cfg_attr(not(test), allow(dead_code, reason = "read by the tests of the layout"))]
    pub text: String,
    #[cfg_attr(not(test), allow(dead_code, reason = "read by the tests of the layout"))]
    pub room: Rect,
}

/// The page while it is drawn.
pub(super) struct Canvas {
    pub palette: Palette,
    pub texts: Vec<DrawnText>,
    body: String,
    clips: u32,
}

impl Canvas {
    pub fn new(palette: Palette) -> Self {
        Self { palette, texts: Vec::new(), body: String::with_capacity(1 << 17), clips: 0 }
    }

    /// One line of text with its baseline at `y`.
    pub fn text(&mut self, x: f64, y: f64, text: &str, font: Font, colour: &str, anchor: Anchor) {
        let text = clean(text);
        if text.is_empty() {
            return;
        }
        let wide = width(&text, font);
        let left = match anchor {
            Anchor::Start => x,
            Anchor::Middle => x - wide / 2.0,
            Anchor::End => x - wide,
        };
        let weight = if font.bold { " font-weight=\"bold\"" } else { "" };
        let _ = writeln!(
            self.body,
            "<text x=\"{}\" y=\"{}\" font-size=\"{}\"{weight} fill=\"{colour}\">{}</text>",
            short(left),
            short(y),
            short(font.size),
            escaped(&text)
        );
        let room = Rect::new(left, y - 0.76 * font.size, left + wide, y + 0.24 * font.size);
        self.texts.push(DrawnText { text, room });
    }

    /// Lines of text below each other, the first baseline at `y`; returns the baseline after the last.
    pub fn lines(&mut self, x: f64, y: f64, lines: &[String], font: Font, colour: &str) -> f64 {
        let mut baseline = y;
        for line in lines {
            self.text(x, baseline, line, font, colour, Anchor::Start);
            baseline += font.line_height();
        }
        baseline
    }

    pub fn rect(&mut self, rect: Rect, fill: &str) {
        let _ = writeln!(
            self.body,
            "<rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" fill=\"{fill}\"/>",
            short(rect.left),
            short(rect.top),
            short(rect.width().max(0.0)),
            short(rect.height().max(0.0))
        );
    }

    pub fn outline(&mut self, rect: Rect, stroke: Stroke) {
        let _ = writeln!(
            self.body,
            "<rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" fill=\"none\"{}/>",
            short(rect.left),
            short(rect.top),
            short(rect.width().max(0.0)),
            short(rect.height().max(0.0)),
            stroked(stroke)
        );
    }

    pub fn line(&mut self, from: (f64, f64), to: (f64, f64), stroke: Stroke) {
        let _ = writeln!(
            self.body,
            "<line x1=\"{}\" y1=\"{}\" x2=\"{}\" y2=\"{}\"{}/>",
            short(from.0),
            short(from.1),
            short(to.0),
            short(to.1),
            stroked(stroke)
        );
    }

    pub fn polyline(&mut self, points: &[(f64, f64)], stroke: Stroke) {
        if points.len() < 2 {
            return;
        }
        let mut path = String::with_capacity(points.len() * 14);
        let mut last = (f64::NAN, f64::NAN);
        for &(x, y) in points {
            // Points that fall on the same hundredth of a unit draw nothing new.
            let rounded = ((x * 100.0).round(), (y * 100.0).round());
            if rounded != last {
                let command = if path.is_empty() { 'M' } else { 'L' };
                let _ = write!(path, "{command}{} {}", short(x), short(y));
                last = rounded;
            }
        }
        let _ = writeln!(
            self.body,
            "<path d=\"{path}\" fill=\"none\" stroke-linejoin=\"round\"{}/>",
            stroked(stroke)
        );
    }

    pub fn polygon(&mut self, points: &[(f64, f64)], fill: &str) {
        let list: Vec<String> = points.iter().map(|&(x, y)| format!("{},{}", short(x), short(y))).collect();
        let _ = writeln!(self.body, "<polygon points=\"{}\" fill=\"{fill}\"/>", list.join(" "));
    }

    pub fn circle(&mut self, x: f64, y: f64, radius: f64, fill: &str) {
        let _ = writeln!(
            self.body,
            "<circle cx=\"{}\" cy=\"{}\" r=\"{}\" fill=\"{fill}\"/>",
            short(x),
            short(y),
            short(radius)
        );
    }

    /// Draws what `draw` draws, but only inside `rect`.
    pub fn clipped(&mut self, rect: Rect, draw: impl FnOnce(&mut Self)) {
        self.clips += 1;
        let id = self.clips;
        let _ = writeln!(
            self.body,
            "<clipPath id=\"inside{id}\"><rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\"/></clipPath><g clip-path=\"url(#inside{id})\">",
            short(rect.left),
            short(rect.top),
            short(rect.width()),
            short(rect.height())
        );
        draw(self);
        self.body.push_str("</g>\n");
    }

    /// The finished document. `width` and `height` are those of the page, `scale` the dots per unit.
    pub fn finish(&self, width: u32, height: u32, scale: f32, title: &str) -> String {
        let (wide, high) = (f64::from(width) * f64::from(scale), f64::from(height) * f64::from(scale));
        format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{}\" height=\"{}\" viewBox=\"0 0 {width} {height}\" \
             font-family=\"'DejaVu Sans', Verdana, sans-serif\" role=\"img\">\n<title>{}</title>\n{}</svg>\n",
            short(wide),
            short(high),
            escaped(&clean(title)),
            self.body
        )
    }
}

fn stroked(stroke: Stroke) -> String {
    let dash =
        if stroke.dash.is_empty() { String::new() } else { format!(" stroke-dasharray=\"{}\"", stroke.dash) };
    let cap = if stroke.dash.starts_with("1.5") { " stroke-linecap=\"round\"" } else { "" };
    format!(" stroke=\"{}\" stroke-width=\"{}\"{dash}{cap}", stroke.colour, short(stroke.width))
}

/// A coordinate with at most two decimals. What is not finite (it never should be) becomes 0.
fn short(value: f64) -> String {
    if !value.is_finite() {
        return "0".to_owned();
    }
    let text = format!("{:.2}", value.clamp(-1e6, 1e6));
    let text = text.trim_end_matches('0').trim_end_matches('.');
    if text == "-0" { "0".to_owned() } else { text.to_owned() }
}

/// Text inside XML.
fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            _ => out.push(c),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn text_is_escaped_and_coordinates_are_short() {
        assert_eq!(escaped("a<b & \"c\">"), "a&lt;b &amp; &quot;c&quot;&gt;");
        assert_eq!(short(1.0), "1");
        assert_eq!(short(-0.001), "0");
        assert_eq!(short(12.345_67), "12.35");
        assert_eq!(short(f64::NAN), "0");
    }
}
