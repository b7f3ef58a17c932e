//! From the page's SVG to a PNG, with the embedded font and nothing of the machine's.

use super::text::{BOLD, REGULAR};
use resvg::{tiny_skia, usvg};
use std::sync::{Arc, LazyLock};

/// The embedded fonts, read once.
static FONTS: LazyLock<Arc<usvg::fontdb::Database>> = LazyLock::new(|| {
    let mut fonts = usvg::fontdb::Database::new();
    fonts.load_font_source(usvg::fontdb::Source::Binary(Arc::new(REGULAR)));
    fonts.load_font_source(usvg::fontdb::Source::Binary(Arc::new(BOLD)));
    Arc::new(fonts)
});

/// A picture in memory: rows from the top, four bytes a dot (red, green, blue, alpha; all dots opaque).
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Pixels {
    /// Dots in a row.
    pub width: u32,
    /// Rows.
    pub height: u32,
    /// The dots.
    pub rgba: Vec<u8>,
}

/// Draws an SVG of the given size (in units) with `scale` dots per unit, as a PNG.
pub(super) fn png(svg: &str, size: (u32, u32), scale: f32) -> Vec<u8> {
    drawn(svg, size, scale).encode_png().expect("pixels in memory can be encoded")
}

/// The same, as dots in memory.
pub(super) fn pixels(svg: &str, size: (u32, u32), scale: f32) -> Pixels {
    let drawn = drawn(svg, size, scale);
    Pixels { width: drawn.width(), height: drawn.height(), rgba: drawn.take() }
}

fn drawn(svg: &str, size: (u32, u32), scale: f32) -> tiny_skia::Pixmap {
    let options = usvg::Options {
        font_family: "DejaVu Sans".to_owned(),
        fontdb: Arc::clone(&FONTS),
        ..usvg::Options::default()
    };
    // Our own SVG is well-formed whatever the report says, and the sizes are at most 4 × 1754: neither can fail.
    let tree = usvg::Tree::from_str(svg, &options).expect("the page's own SVG is well-formed");
    let dots = |length: u32| (length as f32 * scale).round() as u32;
    let mut pixels =
        tiny_skia::Pixmap::new(dots(size.0), dots(size.1)).expect("page sizes are neither empty nor huge");
    resvg::render(&tree, tiny_skia::Transform::from_scale(scale, scale), &mut pixels.as_mut());
    pixels
}
