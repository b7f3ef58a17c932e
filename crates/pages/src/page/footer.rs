//! The foot of the page: everything needed to get the same result again.

use super::canvas::{Canvas, Rect};
use super::text::{Font, wrapped};
use crate::numbers::{error_only, whole};
use gaussgap_conclusions::report::Report;
use gaussgap_simulation::figure::Basis;
use gaussgap_simulation::sum::Route;
use sha2::{Digest, Sha256};

const FONT: Font = Font::regular(11.0);
/// At most this many lines.
const MOST: usize = 3;

/// The first 16 hexadecimal digits of the SHA-256 of the scenario as compact JSON with every default filled in, as
/// it stands in the report.
pub fn scenario_digest(report: &Report) -> String {
    let text = serde_json::to_string(&report.scenario).unwrap_or_default();
    Sha256::digest(text.as_bytes()).iter().take(8).map(|byte| format!("{byte:02x}")).collect()
}

/// The room the foot takes.
pub(super) fn height(report: &Report, wide: f64) -> f64 {
    10.0 + wrapped(&sentence(report), FONT, wide, MOST).len() as f64 * FONT.line_height()
}

/// Draws the foot at the top of `area`.
pub(super) fn draw(canvas: &mut Canvas, area: Rect, report: &Report) {
    let palette = canvas.palette;
    canvas.line((area.left, area.top), (area.right, area.top), palette.axis_line());
    let lines = wrapped(&sentence(report), FONT, area.width(), MOST);
    canvas.lines(area.left, area.top + 6.0 + FONT.size, &lines, FONT, palette.muted);
}

fn sentence(report: &Report) -> String {
    let program = &report.program;
    let method = &report.method;
    let route = match method.route {
        Some(Route::ClosedForm) => "closed form",
        Some(Route::Lattice) => "lattice",
        Some(Route::Inversion) => "inversion",
        Some(Route::Simulation) => "simulation",
        None => "none",
    };
    let mut parts = vec![format!("{} {}", program.name, program.version), format!("route: {route}")];
    if let Some(error) = report.distance.kolmogorov {
        let basis = match error.basis {
            Basis::Bound => "bound".to_owned(),
            Basis::Confidence => format!("confidence {}", report.scenario.method.confidence),
        };
        parts.push(format!("error of the distance ±{} ({basis})", error_only(error.error)));
    }
    if let Some(error) = report.claim.actual.filter(|actual| actual.basis == Basis::Confidence) {
        let confidence = report.scenario.method.confidence;
        parts.push(format!(
            "error of the claim's figure ±{} (confidence {confidence})",
            error_only(error.error)
        ));
    }
    if let Some(draws) = method.draws {
        parts.push(format!("{} draws", whole(draws)));
    }
    if let Some(seed) = method.seed {
        parts.push(format!("seed {seed}"));
    }
    parts.push(format!("scenario digest {} (SHA-256)", scenario_digest(report)));
    if let Some(bound) = &report.distance.berry_esseen {
        parts.push(format!("bound: {}", bound.source.trim_end_matches('.')));
    }
    if !method.detail.trim().is_empty() {
        parts.push(method.detail.trim().trim_end_matches('.').to_owned());
    }
    format!("{}.", parts.join(" · "))
}
