//! How wide text is in the page's font, and breaking it into lines that fit.

use skrifa::instance::{LocationRef, Size};
use skrifa::raw::FontRef;
use skrifa::{GlyphId, MetadataProvider};
use std::sync::LazyLock;

/// DejaVu Sans, the font of the page.
pub(super) static REGULAR: &[u8] = include_bytes!("../../../../assets/fonts/DejaVuSans.ttf");
/// DejaVu Sans Bold.
pub(super) static BOLD: &[u8] = include_bytes!("../../../../assets/fonts/DejaVuSans-Bold.ttf");

/// Widths of the characters of a font, in ems.
struct Widths {
    table: Vec<f32>,
    missing: f32,
    font: Option<FontRef<'static>>,
}

impl Widths {
    fn of(bytes: &'static [u8]) -> Self {
        let font = FontRef::new(bytes).ok();
        let mut widths = Self { table: Vec::new(), missing: 0.6, font };
        if let Some(font) = &widths.font {
            let metrics = font.glyph_metrics(Size::new(1.0), LocationRef::default());
            let missing = metrics.advance_width(GlyphId::NOTDEF).unwrap_or(0.6);
            let charmap = font.charmap();
            widths.table = (0..0x250_u32)
                .map(|c| charmap.map(c).and_then(|glyph| metrics.advance_width(glyph)).unwrap_or(missing))
                .collect();
            widths.missing = missing;
        }
        widths
    }

    fn of_char(&self, c: char) -> f32 {
        if let Some(width) = self.table.get(c as usize) {
            return *width;
        }
        let Some(font) = &self.font else { return self.missing };
        let Some(glyph) = font.charmap().map(c) else { return self.missing };
        font.glyph_metrics(Size::new(1.0), LocationRef::default())
            .advance_width(glyph)
            .unwrap_or(self.missing)
    }
}

static REGULAR_WIDTHS: LazyLock<Widths> = LazyLock::new(|| Widths::of(REGULAR));
static BOLD_WIDTHS: LazyLock<Widths> = LazyLock::new(|| Widths::of(BOLD));

/// Size and weight of text.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Font {
    pub size: f64,
    pub bold: bool,
}

impl Font {
    pub const fn regular(size: f64) -> Self {
        Self { size, bold: false }
    }
    pub const fn bold(size: f64) -> Self {
        Self { size, bold: true }
    }
    /// Distance between two baselines.
    pub fn line_height(self) -> f64 {
        self.size * 1.32
    }
}

/// The width of a text: the sum of the advance widths (kerning would only make it narrower).
pub(super) fn width(text: &str, font: Font) -> f64 {
    let widths: &Widths = if font.bold { &BOLD_WIDTHS } else { &REGULAR_WIDTHS };
    text.chars().map(|c| f64::from(widths.of_char(c))).sum::<f64>() * font.size
}

/// Text as it can be drawn: one line, control characters and runs of white space turned into single spaces.
pub(super) fn clean(text: &str) -> String {
    text.split(|c: char| {
        (c.is_whitespace() && c != '\u{a0}' && c != '\u{202f}') || c.is_control() || is_noncharacter(c)
    })
    .filter(|word| !word.is_empty())
    .collect::<Vec<_>>()
    .join(" ")
}

/// Characters XML 1.0 has no place for.
fn is_noncharacter(c: char) -> bool {
    matches!(c, '\u{fffe}' | '\u{ffff}')
}

/// Breaks text into lines no wider than `limit`. Words wider than a line are broken where they must be. Beyond
/// `most` lines, the last one ends in an ellipsis.
pub(super) fn wrapped(text: &str, font: Font, limit: f64, most: usize) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    let mut line = String::new();
    // A number and its percent sign stay together.
    let text = clean(text).replace(" %", "\u{a0}%");
    for word in text.split(' ').filter(|word| !word.is_empty()) {
        let longer = if line.is_empty() { word.to_owned() } else { format!("{line} {word}") };
        if width(&longer, font) <= limit {
            line = longer;
            continue;
        }
        if !line.is_empty() {
            lines.push(std::mem::take(&mut line));
        }
        let mut rest = word;
        while width(rest, font) > limit {
            let cut = fitting(rest, font, limit);
            lines.push(rest[..cut].to_owned());
            rest = &rest[cut..];
        }
        line = rest.to_owned();
    }
    if !line.is_empty() {
        lines.push(line);
    }
    if lines.len() > most {
        lines.truncate(most);
        if let Some(last) = lines.last_mut() {
            *last = shortened(&format!("{last} …"), font, limit, true);
        }
    }
    lines
}

/// Bytes of the longest beginning that fits, at least one character.
fn fitting(text: &str, font: Font, limit: f64) -> usize {
    let mut used = 0.0;
    for (at, c) in text.char_indices() {
        used += width(c.encode_utf8(&mut [0; 4]), font);
        if used > limit {
            return if at == 0 { c.len_utf8() } else { at };
        }
    }
    text.len()
}

/// The text on one line no wider than `limit`, with an ellipsis where it was cut (or `always`).
pub(super) fn shortened(text: &str, font: Font, limit: f64, always: bool) -> String {
    let text = clean(text);
    if width(&text, font) <= limit {
        return text;
    }
    let room = limit - width("…", font);
    if room <= 0.0 {
        return String::new();
    }
    let bare = text.trim_end_matches('…').trim_end();
    if always && width(bare, font) <= room {
        return format!("{bare}…");
    }
    let cut = fitting(bare, font, room);
    if width(&bare[..cut], font) > room { "…".to_owned() } else { format!("{}…", bare[..cut].trim_end()) }
}

/// Lines and the font they fit with: the largest of `sizes` for which at most `most` lines are needed, else the
/// smallest with an ellipsis.
pub(super) fn fitted(text: &str, sizes: &[f64], bold: bool, limit: f64, most: usize) -> (Vec<String>, Font) {
    let mut font = Font { size: sizes.last().copied().unwrap_or(12.0), bold };
    for &size in sizes {
        font.size = size;
        let lines = wrapped(text, font, limit, usize::MAX);
        if lines.len() <= most {
            return (lines, font);
        }
    }
    (wrapped(text, font, limit, most), font)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_font_has_every_character_the_page_uses() {
        for bytes in [REGULAR, BOLD] {
            let font = FontRef::new(bytes).unwrap();
            for c in "ΦσμγκρΔ√≤≥±×·−–—…⁰¹²³⁴⁵⁶⁷⁸⁹⁻₀₁₂→✓✗°∞½²\u{202f}".chars()
            {
                assert!(font.charmap().map(c).is_some(), "{c} {:x}", c as u32);
            }
        }
    }

    /// Advance width of "M" in DejaVu Sans 2.37: 1767 of 2048 units (from memory).
    #[test]
    fn widths_are_those_of_the_font() {
        assert!((width("M", Font::regular(2048.0)) - 1767.0).abs() < 1.0);
        assert!(width("wide", Font::bold(10.0)) > width("wide", Font::regular(10.0)));
    }

    #[test]
    fn lines_fit_whatever_the_text() {
        let font = Font::regular(13.0);
        for text in [
            "a",
            "",
            "one two three four five",
            &"x".repeat(300),
            "Φ ≤ √n ".repeat(30).as_str(),
            "日本語 text",
        ] {
            for limit in [25.0, 60.0, 300.0] {
                for most in [1, 2, 50] {
                    let lines = wrapped(text, font, limit, most);
                    assert!(lines.len() <= most);
                    for line in &lines {
                        assert!(width(line, font) <= limit + 1e-9, "{line} {limit}");
                    }
                }
            }
        }
        let all = wrapped("one two three four five", font, 60.0, 50);
        assert_eq!(all.join(" "), "one two three four five");
    }

    #[test]
    fn nothing_is_drawn_that_xml_cannot_carry() {
        assert_eq!(clean("a\u{0}b\n\tc\u{fffe}"), "a b c");
    }
}
