//! What can be chosen about a page: its size, its scale, light or dark; and the colours and lines that follow.

/// The shape of a page.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum PageSize {
    /// 1600×1000, for screens.
    #[default]
    Landscape,
    /// A4 upright, 1240×1754 (150 dots per inch).
    A4,
    /// US Letter upright, 1275×1650 (150 dots per inch).
    Letter,
    /// A slide, 1600×900 (16:9).
    Slide,
}

impl PageSize {
    /// Width and height at scale 1.
    pub const fn dimensions(self) -> (u32, u32) {
        match self {
            Self::Landscape => (1600, 1000),
            Self::A4 => (1240, 1754),
            Self::Letter => (1275, 1650),
            Self::Slide => (1600, 900),
        }
    }
}

/// How a page looks.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PageStyle {
    /// Its shape.
    pub size: PageSize,
    /// Dots per unit of length, from 1 to 4 (values outside are brought inside).
    pub scale: f32,
    /// Light text on a dark page.
    pub dark: bool,
}

impl Default for PageStyle {
    fn default() -> Self {
        Self { size: PageSize::Landscape, scale: 1.0, dark: false }
    }
}

impl PageStyle {
    /// The scale, inside its limits.
    pub fn usable_scale(&self) -> f32 {
        if self.scale.is_finite() { self.scale.clamp(1.0, 4.0) } else { 1.0 }
    }

    pub(super) fn palette(&self) -> Palette {
        if self.dark { DARK } else { LIGHT }
    }
}

/// Colours of a page. Contrast against the paper is at least 4.5:1 for everything that is text.
#[derive(Debug, Clone, Copy)]
pub(super) struct Palette {
    pub paper: &'static str,
    pub panel: &'static str,
    pub ink: &'static str,
    pub muted: &'static str,
    pub rule: &'static str,
    pub band: &'static str,
    pub actual: &'static str,
    pub normal: &'static str,
    pub bound: &'static str,
    pub expansion: &'static str,
    pub mark: &'static str,
    pub holds: &'static str,
    pub fails: &'static str,
    pub undecided: &'static str,
}

const LIGHT: Palette = Palette {
    paper: "#ffffff",
    panel: "#f6f4ef",
    ink: "#1d232b",
    muted: "#565e68",
    rule: "#d6d2c8",
    band: "#e9e4d6",
    actual: "#12506b",
    normal: "#a04b12",
    bound: "#5b3f86",
    expansion: "#2f6b3a",
    mark: "#a3193b",
    holds: "#1f6a3d",
    fails: "#a3193b",
    undecided: "#7a5200",
};

const DARK: Palette = Palette {
    paper: "#171b21",
    panel: "#20262e",
    ink: "#eceae4",
    muted: "#aab1ba",
    rule: "#3c444f",
    band: "#2e3640",
    actual: "#7cc4e4",
    normal: "#f0a468",
    bound: "#c0a6ee",
    expansion: "#8fd19c",
    mark: "#ff8fa3",
    holds: "#8fd19c",
    fails: "#ff8fa3",
    undecided: "#f0c468",
};

/// A line: colour, width and dash pattern. Patterns differ between all lines of a figure, so that it can be read
/// in black and white.
#[derive(Debug, Clone, Copy)]
pub(super) struct Stroke {
    pub colour: &'static str,
    pub width: f64,
    pub dash: &'static str,
}

impl Palette {
    pub const fn actual_line(&self) -> Stroke {
        Stroke { colour: self.actual, width: 2.2, dash: "" }
    }
    pub const fn normal_line(&self) -> Stroke {
        Stroke { colour: self.normal, width: 1.6, dash: "7 4" }
    }
    pub const fn bound_line(&self) -> Stroke {
        Stroke { colour: self.bound, width: 1.8, dash: "1.5 4" }
    }
    pub const fn expansion_line(&self) -> Stroke {
        Stroke { colour: self.expansion, width: 1.5, dash: "9 3 2 3" }
    }
    pub const fn allowed_line(&self) -> Stroke {
        Stroke { colour: self.ink, width: 1.1, dash: "14 5" }
    }
    pub const fn planned_line(&self) -> Stroke {
        Stroke { colour: self.mark, width: 1.4, dash: "" }
    }
    pub const fn safe_line(&self) -> Stroke {
        Stroke { colour: self.holds, width: 1.4, dash: "3 3" }
    }
    pub const fn rule_line(&self) -> Stroke {
        Stroke { colour: self.rule, width: 1.0, dash: "" }
    }
    pub const fn axis_line(&self) -> Stroke {
        Stroke { colour: self.muted, width: 1.0, dash: "" }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn luminance(colour: &str) -> f64 {
        let part = |at: usize| {
            let value = f64::from(u8::from_str_radix(&colour[at..at + 2], 16).unwrap()) / 255.0;
            if value <= 0.04045 { value / 12.92 } else { ((value + 0.055) / 1.055).powf(2.4) }
        };
        0.2126 * part(1) + 0.7152 * part(3) + 0.0722 * part(5)
    }

    fn contrast(a: &str, b: &str) -> f64 {
        let (a, b) = (luminance(a), luminance(b));
        (a.max(b) + 0.05) / (a.min(b) + 0.05)
    }

    /// The contrast formula is that of the Web Content Accessibility Guidelines 2.2.
    #[test]
    fn text_can_be_read_on_both_papers() {
        for palette in [LIGHT, DARK] {
            for paper in [palette.paper, palette.panel] {
                for text in [
                    palette.ink,
                    palette.muted,
                    palette.mark,
                    palette.holds,
                    palette.fails,
                    palette.undecided,
                ] {
                    assert!(contrast(paper, text) >= 4.5, "{text} on {paper}: {}", contrast(paper, text));
                }
            }
            for line in [palette.actual, palette.normal, palette.bound, palette.expansion] {
                assert!(contrast(palette.paper, line) >= 3.0, "{line}");
            }
        }
    }
}
