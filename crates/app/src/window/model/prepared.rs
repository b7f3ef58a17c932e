//! A report made ready for drawing: every polyline of every figure, computed once per report.

use gaussgap_conclusions::report::Report;
use gaussgap_conclusions::scenario::{Scenario, Source, Statistic};
use gaussgap_simulation::law::{Atom, LawSpec};

/// A polyline in the coordinates of a figure.
pub type Line = Vec<[f64; 2]>;

/// Probabilities below this are not read off the curve, which carries absolute accuracy only.
const CURVE_FLOOR: f64 = 1e-11;

/// A report with everything the figures draw.
#[derive(Debug, Clone)]
pub struct Prepared {
    /// The report.
    pub report: std::sync::Arc<Report>,
    /// (z, P(Z ≤ z)), steps as steps.
    pub fit: Line,
    /// (z, Φ(z)).
    pub normal: Line,
    /// (z, P(Z ≤ z) − Φ(z)), steps as steps.
    pub gap: Line,
    /// (z, one-term expansion of the gap), empty without a third moment.
    pub expansion: Line,
    /// (z, log₁₀ of the tail probability beyond z), the left tail.
    pub tail_low: Line,
    /// The right tail.
    pub tail_high: Line,
    /// The normal's tails.
    pub normal_low: Line,
    /// The normal's right tail.
    pub normal_high: Line,
    /// (log₁₀ n, log₁₀ distance).
    pub growth: Line,
    /// (log₁₀ n, log₁₀ Berry–Esseen bound).
    pub growth_bound: Line,
    /// (log₁₀ n, log₁₀ leading term).
    pub growth_leading: Line,
    /// Where one standard unit lies in the quantity's own: value = center + z · unit.
    pub own_units: Option<OwnUnits>,
    /// The law of one summand, one picture per kind.
    pub pictures: Vec<Picture>,
}

/// The quantity's own units along z.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct OwnUnits {
    /// Value at z = 0.
    pub center: f64,
    /// Length of one standard unit.
    pub unit: f64,
}

/// The finished law of one summand, as a small picture.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Picture {
    /// (x, density of the continuous part).
    pub density: Line,
    /// Values taken with positive probability.
    pub atoms: Vec<Atom>,
    /// Ends of the horizontal axis.
    pub range: [f64; 2],
}

impl Prepared {
    /// Prepares a report; `scenario` carries the values of its data laws.
    pub fn new(report: Report, scenario: &Scenario) -> Self {
        let curve = &report.curve;
        let mut prepared = Self {
            fit: Line::new(),
            normal: Line::new(),
            gap: Line::new(),
            expansion: Line::new(),
            tail_low: Line::new(),
            tail_high: Line::new(),
            normal_low: Line::new(),
            normal_high: Line::new(),
            growth: log_line(&report.growth.n, &report.growth.kolmogorov),
            growth_bound: log_line(&report.growth.n, &report.growth.berry_esseen),
            growth_leading: log_line(&report.growth.n, &report.growth.leading_term),
            own_units: own_units(&report, scenario),
            pictures: pictures(scenario),
            report: std::sync::Arc::new(report.clone()),
        };
        let skewness = report.sum.skewness;
        let rows = curve.z.iter().zip(&curve.at_or_below).zip(&curve.below).zip(&curve.normal);
        for (((&z, &at), &below), &normal) in rows {
            prepared.normal.push([z, normal]);
            if below != at {
                prepared.fit.push([z, below]);
                prepared.gap.push([z, below - normal]);
            }
            prepared.fit.push([z, at]);
            prepared.gap.push([z, at - normal]);
            if let Some(skewness) = skewness {
                prepared.expansion.push([z, first_term(z, skewness)]);
            }
            push_tail(&mut prepared.tail_low, z, below, z <= 0.0);
            push_tail(&mut prepared.tail_low, z, at, z <= 0.0);
            push_tail(&mut prepared.tail_high, z, 1.0 - below, z >= 0.0);
            push_tail(&mut prepared.tail_high, z, 1.0 - at, z >= 0.0);
            push_tail(&mut prepared.normal_low, z, normal, z <= 0.0);
            push_tail(&mut prepared.normal_high, z, 1.0 - normal, z >= 0.0);
        }
        prepared
    }
}

/// The first term of the Edgeworth expansion of F − Φ at z: −γ(z² − 1)φ(z)/6, γ the skewness of the sum.
pub fn first_term(z: f64, skewness: f64) -> f64 {
    let density = (-0.5 * z * z).exp() / (2.0 * std::f64::consts::PI).sqrt();
    -skewness * (z * z - 1.0) * density / 6.0
}

fn push_tail(line: &mut Line, z: f64, probability: f64, here: bool) {
    if here && probability > CURVE_FLOOR {
        let point = [z, probability.log10()];
        if line.last() != Some(&point) {
            line.push(point);
        }
    }
}

fn log_line(n: &[u64], values: &[Option<f64>]) -> Line {
    n.iter()
        .zip(values)
        .filter_map(|(&n, value)| {
            let value = (*value)?;
            (value > 0.0 && n > 0).then(|| [(n as f64).log10(), value.log10()])
        })
        .collect()
}

fn own_units(report: &Report, scenario: &Scenario) -> Option<OwnUnits> {
    let (center, unit) = (report.sum.mean?, report.sum.sd?);
    let divide = match (&scenario.source, scenario.statistic) {
        (Source::Like { n, .. }, Statistic::Mean) => *n as f64,
        _ => 1.0,
    };
    let own = OwnUnits { center: center / divide, unit: unit / divide };
    (own.center.is_finite() && own.unit.is_finite() && own.unit > 0.0).then_some(own)
}

fn pictures(scenario: &Scenario) -> Vec<Picture> {
    let laws: Vec<&LawSpec> = match &scenario.source {
        Source::Like { law, .. } => vec![law],
        Source::Parts { parts } => parts.iter().map(|part| &part.law).collect(),
        Source::Groups { groups } => groups.iter().map(|group| &group.law).collect(),
    };
    laws.into_iter().map(picture).collect()
}

/// Points of the density in a picture.
const PICTURE_POINTS: usize = 160;
/// Atoms in a picture.
const PICTURE_ATOMS: usize = 400;

fn picture(spec: &LawSpec) -> Picture {
    let Ok(law) = spec.compile() else { return Picture::default() };
    let ends = [law.quantile(0.002), law.quantile(0.995)];
    if !ends.iter().all(|end| end.is_finite()) || ends[1] < ends[0] {
        return Picture::default();
    }
    let width = ends[1] - ends[0];
    let margin = if width > 0.0 { width * 0.04 } else { ends[0].abs().max(1.0) * 0.5 };
    let range = [ends[0] - margin, ends[1] + margin];
    let step = (range[1] - range[0]) / (PICTURE_POINTS - 1) as f64;
    let density = if law.pieces.is_empty() {
        Line::new()
    } else {
        let points = (0..PICTURE_POINTS).map(|i| range[0] + i as f64 * step);
        points.map(|x| [x, law.density(x)]).filter(|p| p[1].is_finite()).collect()
    };
    let inside = law.atoms.iter().filter(|atom| atom.value >= range[0] && atom.value <= range[1]);
    let mut atoms: Vec<Atom> = inside.copied().collect();
    if atoms.len() > PICTURE_ATOMS {
        atoms.sort_by(|a, b| b.mass.total_cmp(&a.mass));
        atoms.truncate(PICTURE_ATOMS);
        atoms.sort_by(|a, b| a.value.total_cmp(&b.value));
    }
    Picture { density, atoms, range }
}
