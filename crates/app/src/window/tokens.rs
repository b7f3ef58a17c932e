//! Design tokens: every colour, size, distance and dash of the window, and the style made of them.

use egui::{Color32, CornerRadius, FontFamily, FontId, Margin, Shadow, Stroke, TextStyle, Vec2, Visuals};

/// The colours of one theme. Ink on paper has a contrast of at least 4.5 to 1 for every pair in use.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Palette {
    /// Background of the window.
    pub paper: Color32,
    /// Background of cards and figures.
    pub card: Color32,
    /// Background of fields and of what is pointed at.
    pub well: Color32,
    /// Hairlines and frames.
    pub line: Color32,
    /// Grid lines inside figures.
    pub grid: Color32,
    /// Text.
    pub ink: Color32,
    /// Secondary text.
    pub muted: Color32,
    /// Controls, and the actual law in figures.
    pub accent: Color32,
    /// The normal law in figures.
    pub normal: Color32,
    /// The expansion and the leading term.
    pub expansion: Color32,
    /// The bound.
    pub bound: Color32,
    /// The tolerance band.
    pub tolerance: Color32,
    /// Edge of the tolerance band, and text about it.
    pub tolerance_edge: Color32,
    /// It holds.
    pub holds: Color32,
    /// It fails; mistakes.
    pub fails: Color32,
    /// It is undecided; warnings.
    pub undecided: Color32,
    /// The four pins.
    pub ghosts: [Color32; 4],
}

const fn rgb(hex: u32) -> Color32 {
    Color32::from_rgb((hex >> 16) as u8, (hex >> 8) as u8, hex as u8)
}

/// Ink on warm paper.
pub const LIGHT: Palette = Palette {
    paper: rgb(0xF3F1EA),
    card: rgb(0xFDFCF9),
    well: rgb(0xEAE7DD),
    line: rgb(0xD3CEBF),
    grid: rgb(0xE7E3D8),
    ink: rgb(0x1E252B),
    muted: rgb(0x555D64),
    accent: rgb(0x0B5A73),
    normal: rgb(0x8C4A00),
    expansion: rgb(0x5B4B9A),
    bound: rgb(0x6A5F4B),
    tolerance: rgb(0xDCE9DA),
    tolerance_edge: rgb(0x3C6B43),
    holds: rgb(0x1F6B3B),
    fails: rgb(0xA3261C),
    undecided: rgb(0x7A5300),
    ghosts: [rgb(0x7A3E6B), rgb(0x4F6B1E), rgb(0x94421F), rgb(0x3F5F9E)],
};

/// Chalk on slate.
pub const DARK: Palette = Palette {
    paper: rgb(0x13191E),
    card: rgb(0x1A2228),
    well: rgb(0x26313A),
    line: rgb(0x38454F),
    grid: rgb(0x27323A),
    ink: rgb(0xE9E6DD),
    muted: rgb(0xA9B2B9),
    accent: rgb(0x6CC4DE),
    normal: rgb(0xE3A857),
    expansion: rgb(0xB3A4F0),
    bound: rgb(0xB8AC94),
    tolerance: rgb(0x1F3428),
    tolerance_edge: rgb(0x84BF8E),
    holds: rgb(0x7FCB94),
    fails: rgb(0xF28B7D),
    undecided: rgb(0xE2B45A),
    ghosts: [rgb(0xD79BC8), rgb(0xB3CC78), rgb(0xF0A383), rgb(0x9DB8F2)],
};

/// The palette in force.
pub fn palette(ui: &egui::Ui) -> &'static Palette {
    if ui.visuals().dark_mode { &DARK } else { &LIGHT }
}

/// Line patterns of figures: (dash, gap) in points; an empty list is a full line.
pub mod dash {
    /// The actual law.
    pub const ACTUAL: &[f32] = &[];
    /// The normal law.
    pub const NORMAL: &[f32] = &[7.0, 4.0];
    /// The expansion, the leading term.
    pub const EXPANSION: &[f32] = &[2.0, 3.0];
    /// The bound.
    pub const BOUND: &[f32] = &[10.0, 3.0, 2.0, 3.0];
    /// The edge of the tolerance.
    pub const TOLERANCE: &[f32] = &[1.5, 2.5];
    /// The four pins.
    pub const GHOSTS: [&[f32]; 4] =
        [&[12.0, 3.0], &[5.0, 2.0, 1.0, 2.0], &[3.0, 5.0], &[8.0, 2.0, 2.0, 2.0, 2.0, 2.0]];
}

/// Distance between related things.
pub const GAP: f32 = 6.0;
/// Distance between groups.
pub const SPACE: f32 = 12.0;
/// Width of the column of law cards.
pub const CARDS_WIDTH: f32 = 286.0;
/// Width below which the cards and the board take turns.
pub const NARROW: f32 = 820.0;
/// Narrowest useful figure.
pub const FIGURE_WIDTH: f32 = 318.0;
/// Lowest useful figure.
pub const FIGURE_HEIGHT: f32 = 186.0;
/// Width of lines that carry meaning.
pub const LINE: f32 = 1.8;
/// Corner radius of everything.
pub const CORNER: u8 = 3;

/// Small print.
pub const SMALL: f32 = 11.5;
/// Running text.
pub const BODY: f32 = 13.0;
/// The plan sentence.
pub const SENTENCE: f32 = 16.5;
/// The finding.
pub const FINDING: f32 = 16.5;

/// The bold face.
pub fn bold(size: f32) -> FontId {
    FontId::new(size, FontFamily::Name("bold".into()))
}

/// The regular face.
pub fn regular(size: f32) -> FontId {
    FontId::new(size, FontFamily::Proportional)
}

/// Installs fonts and both themes' styles.
pub fn install(ctx: &egui::Context) {
    super::fonts::install(ctx);
    ctx.all_styles_mut(|style| {
        style.text_styles = [
            (TextStyle::Small, regular(SMALL)),
            (TextStyle::Body, regular(BODY)),
            (TextStyle::Button, regular(BODY)),
            (TextStyle::Heading, bold(15.0)),
            (TextStyle::Monospace, regular(BODY)),
        ]
        .into();
        let spacing = &mut style.spacing;
        spacing.item_spacing = Vec2::splat(GAP);
        spacing.button_padding = Vec2::new(8.0, 3.5);
        spacing.interact_size = Vec2::new(28.0, 24.0);
        spacing.window_margin = Margin::same(16);
        spacing.menu_margin = Margin::same(6);
        spacing.indent = 14.0;
        spacing.combo_width = 60.0;
        spacing.scroll.floating = false;
        spacing.scroll.foreground_color = false;
        spacing.scroll.bar_width = 7.0;
        spacing.scroll.bar_inner_margin = 3.0;
        spacing.scroll.bar_outer_margin = 0.0;
        style.animation_time = 0.08;
        style.interaction.tooltip_delay = 0.4;
    });
    ctx.set_visuals_of(egui::Theme::Light, visuals(&LIGHT, Visuals::light()));
    ctx.set_visuals_of(egui::Theme::Dark, visuals(&DARK, Visuals::dark()));
}

fn visuals(palette: &Palette, base: Visuals) -> Visuals {
    let mut visuals = base;
    let corner = CornerRadius::same(CORNER);
    visuals.override_text_color = None;
    visuals.weak_text_color = Some(palette.muted);
    visuals.hyperlink_color = palette.accent;
    visuals.faint_bg_color = palette.well;
    visuals.extreme_bg_color = palette.card;
    visuals.text_edit_bg_color = Some(palette.card);
    visuals.code_bg_color = palette.well;
    visuals.warn_fg_color = palette.undecided;
    visuals.error_fg_color = palette.fails;
    visuals.window_corner_radius = CornerRadius::same(CORNER + 1);
    visuals.menu_corner_radius = corner;
    visuals.window_shadow =
        Shadow { offset: [0, 6], blur: 18, spread: 0, color: Color32::from_black_alpha(70) };
    visuals.popup_shadow =
        Shadow { offset: [0, 3], blur: 9, spread: 0, color: Color32::from_black_alpha(50) };
    visuals.window_fill = palette.card;
    visuals.window_stroke = Stroke::new(1.0, palette.line);
    visuals.panel_fill = palette.paper;
    visuals.selection.bg_fill = palette.accent.gamma_multiply(0.28);
    visuals.selection.stroke = Stroke::new(1.5, palette.accent);
    visuals.indent_has_left_vline = true;
    visuals.slider_trailing_fill = true;
    visuals.disabled_alpha = 0.6;
    let widgets = &mut visuals.widgets;
    for (widget, fill, stroke) in [
        (&mut widgets.noninteractive, palette.card, palette.line),
        (&mut widgets.inactive, palette.card, palette.line),
        (&mut widgets.hovered, palette.well, palette.accent),
        (&mut widgets.active, palette.well, palette.accent),
        (&mut widgets.open, palette.well, palette.accent),
    ] {
        widget.bg_fill = fill;
        widget.weak_bg_fill = fill;
        widget.bg_stroke = Stroke::new(1.0, stroke);
        widget.fg_stroke = Stroke::new(1.0, palette.ink);
        widget.corner_radius = corner;
        widget.expansion = 0.0;
    }
    // Rails and scroll handles are drawn with the strong fill, buttons with the weak one.
    widgets.inactive.bg_fill = palette.line;
    widgets.hovered.bg_fill = palette.muted;
    widgets.active.bg_fill = palette.muted;
    widgets.active.bg_stroke = Stroke::new(2.0, palette.accent);
    visuals
}

#[cfg(test)]
mod tests {
    use super::*;

    fn luminance(color: Color32) -> f64 {
        let linear = |c: u8| {
            let c = f64::from(c) / 255.0;
            if c <= 0.04045 { c / 12.92 } else { ((c + 0.055) / 1.055).powf(2.4) }
        };
        0.2126 * linear(color.r()) + 0.7152 * linear(color.g()) + 0.0722 * linear(color.b())
    }

    /// Contrast ratio of the Web Content Accessibility Guidelines 2.1 (relative luminance, 0.05 flare).
    fn contrast(a: Color32, b: Color32) -> f64 {
        let (a, b) = (luminance(a), luminance(b));
        (a.max(b) + 0.05) / (a.min(b) + 0.05)
    }

    #[test]
    fn every_ink_can_be_read_on_every_ground() {
        for palette in [&LIGHT, &DARK] {
            let inks = [
                palette.ink,
                palette.muted,
                palette.accent,
                palette.normal,
                palette.expansion,
                palette.bound,
                palette.tolerance_edge,
                palette.holds,
                palette.fails,
                palette.undecided,
            ];
            for ground in [palette.paper, palette.card, palette.well, palette.tolerance] {
                for ink in inks.iter().chain(&palette.ghosts) {
                    let ratio = contrast(*ink, ground);
                    assert!(ratio >= 4.5, "{ink:?} on {ground:?}: {ratio:.2}");
                }
            }
        }
    }
}
