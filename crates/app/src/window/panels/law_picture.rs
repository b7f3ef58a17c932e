//! The finished law of one summand: a small picture, its mean, sd, skewness, share of zeros, and warnings.

use crate::window::figures::View;
use crate::window::numbers::{percent, shown};
use crate::window::tokens;
use egui::{Frame, Margin, RichText, Sense, Stroke, Ui, WidgetInfo, pos2, vec2};
use gaussgap_conclusions::report::Summand;

/// Draws the facts of the law in a slot.
pub fn show(ui: &mut Ui, view: &View<'_>, slot: usize) {
    let report = &view.shown.report;
    let summand = report.summands.get(slot).unwrap_or(&report.summand);
    let palette = tokens::palette(ui);
    Frame::new()
        .fill(palette.well)
        .corner_radius(tokens::CORNER)
        .inner_margin(Margin::symmetric(10, 6))
        .show(ui, |ui| {
            ui.set_width(ui.available_width());
            ui.spacing_mut().item_spacing.y = 2.0;
            picture(ui, view, slot);
            let unit = view.scenario.quantity.as_ref().and_then(|q| q.unit.as_deref()).unwrap_or("");
            for line in facts(summand, unit) {
                ui.label(RichText::new(line).size(12.0));
            }
            for warning in &summand.warnings {
                ui.label(RichText::new(format!("⚠ {warning}")).size(12.0).color(palette.undecided));
            }
        });
}

/// What is known of a law, a line each.
fn facts(summand: &Summand, unit: &str) -> Vec<String> {
    let amount = |value: Option<f64>| match value {
        Some(value) => format!("{} {unit}", shown(value, 5)).trim_end().to_owned(),
        None => "not finite".to_owned(),
    };
    let number = |value: Option<f64>| value.map_or_else(|| "not defined".to_owned(), |value| shown(value, 4));
    let mut lines = vec![
        format!("mean {}, sd {}", amount(summand.mean), amount(summand.sd)),
        format!("skewness {}, excess kurtosis {}", number(summand.skewness), number(summand.excess_kurtosis)),
    ];
    let zeros: f64 = summand.atoms.iter().filter(|atom| atom.value == 0.0).map(|atom| atom.mass).sum();
    if zeros > 0.0 {
        lines.push(format!("{} zeros", percent(zeros, 3)));
    }
    lines
}

/// The density and the atoms of the law.
fn picture(ui: &mut Ui, view: &View<'_>, slot: usize) {
    let Some(picture) = view.shown.pictures.get(slot) else { return };
    let (low, high) = (picture.range[0], picture.range[1]);
    if !(high > low && high.is_finite() && low.is_finite()) {
        return;
    }
    let palette = tokens::palette(ui);
    let (rect, response) = ui.allocate_exact_size(vec2(ui.available_width(), 58.0), Sense::hover());
    response.widget_info(|| {
        WidgetInfo::labeled(egui::accesskit::Role::Image, true, "Picture of the law of one summand")
    });
    let painter = ui.painter().with_clip_rect(rect.expand(1.0).intersect(ui.clip_rect()));
    let ground = rect.bottom() - 14.0;
    let x = |value: f64| rect.left() + ((value - low) / (high - low)) as f32 * rect.width();
    let tallest = picture.density.iter().map(|p| p[1]).filter(|y| y.is_finite()).fold(0.0, f64::max);
    let height = f64::from(ground - rect.top() - 2.0);
    if tallest > 0.0 {
        let path: Vec<_> = picture
            .density
            .iter()
            .map(|&[value, density]| {
                pos2(x(value), ground - (density.min(tallest) / tallest * height) as f32)
            })
            .collect();
        let fill = palette.accent.gamma_multiply(0.18);
        for pair in path.windows(2) {
            let [a, b] = [pair[0], pair[1]];
            let corners = vec![a, b, pos2(b.x, ground), pos2(a.x, ground)];
            painter.add(egui::Shape::convex_polygon(corners, fill, Stroke::NONE));
        }
        painter.line(path, Stroke::new(1.5, palette.accent));
    }
    let heaviest = picture.atoms.iter().map(|atom| atom.mass).fold(0.0, f64::max);
    for atom in &picture.atoms {
        let top = ground - (atom.mass / heaviest * height) as f32;
        painter.vline(x(atom.value), top..=ground, Stroke::new(1.8, palette.ink));
    }
    painter.hline(rect.x_range(), ground, Stroke::new(1.0, palette.muted));
    let font = tokens::regular(10.5);
    painter.text(
        pos2(rect.left(), ground + 2.0),
        egui::Align2::LEFT_TOP,
        shown(low, 3),
        font.clone(),
        palette.muted,
    );
    painter.text(
        pos2(rect.right(), ground + 2.0),
        egui::Align2::RIGHT_TOP,
        shown(high, 3),
        font,
        palette.muted,
    );
}
