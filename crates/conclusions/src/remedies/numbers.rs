//! Claims about one number (threshold, deviation, quantile): better approximations, and the exact number.

use crate::bounds::{Shape, cornish_fisher, edgeworth, edgeworth_on_lattice, saddlepoint_above};
use crate::claims::scale_of;
use crate::prepared::{Prepared, Scale};
use crate::report::{ClaimFacts, Remedy};
use crate::scenario::{Claim, Direction};
use crate::words::nouns::text_with_unit;
use crate::words::numbers::{about_points, chance, number_to, percent_decimals};
use gaussgap_simulation::figure::{Basis, Figure};
use gaussgap_simulation::special::normal;
use gaussgap_simulation::sum::StandardizedSum;

/// The rows for the planned claim.
pub(super) fn remedies(prepared: &Prepared, sum: &dyn StandardizedSum, claim: &ClaimFacts) -> Vec<Remedy> {
    let Some(actual) = claim.actual else { return Vec::new() };
    let scale = scale_of(prepared, sum);
    match prepared.scenario.claim {
        Claim::Threshold { at, direction } => {
            let (z, _) = scale.z_of(at);
            let event = match direction {
                Direction::AtMost => Event::AtMost(z),
                Direction::AtLeast => Event::AtLeast(z),
            };
            probabilities(prepared, sum, actual, event)
        }
        Claim::Deviation { epsilon, .. } => {
            probabilities(prepared, sum, actual, Event::Beyond(epsilon / scale.sd()))
        }
        Claim::Quantile { p } => quantiles(prepared, sum, claim, &scale, actual, p),
        _ => Vec::new(),
    }
}

/// Which probability is approximated.
#[derive(Clone, Copy)]
enum Event {
    AtMost(f64),
    AtLeast(f64),
    Beyond(f64),
}

/// The lattice of the standardized sum, for like summands.
struct Steps {
    span: f64,
    /// A point of the lattice.
    origin: f64,
}

impl Steps {
    fn of(prepared: &Prepared, sum: &dyn StandardizedSum) -> Option<Self> {
        let span = sum.lattice_span()?;
        // Any jump of the sum is a point of its lattice.
        let reach = (2.0 * span).max(1.0);
        let origin = match (prepared.laws.as_slice(), sum.jumps(-reach, reach, 1_000_000)) {
            (_, Some(jumps)) if !jumps.is_empty() => jumps[0],
            ([law], _) => {
                let moments = sum.moments();
                (law.lattice?.offset * moments.n as f64 - moments.mean) / moments.sd
            }
            _ => return None,
        };
        Some(Self { span, origin })
    }

    /// Half a step above the largest point that is at most z (points within rounding of z count).
    fn middle_above(&self, z: f64) -> f64 {
        self.origin + (((z - self.origin) / self.span + 1e-7).floor() + 0.5) * self.span
    }

    /// Half a step below the smallest point that is at least z.
    fn middle_below(&self, z: f64) -> f64 {
        self.origin + (((z - self.origin) / self.span - 1e-7).ceil() - 0.5) * self.span
    }
}

/// The rows for a probability: an approximation of P(Z ≤ z) and of P(Z > z) each, applied to the event.
fn probabilities(
    prepared: &Prepared,
    sum: &dyn StandardizedSum,
    actual: Figure,
    event: Event,
) -> Vec<Remedy> {
    let steps = Steps::of(prepared, sum);
    // Where a continuous approximation is read: halfway between the lattice points.
    let above_at = |z: f64| steps.as_ref().map_or(z, |steps| steps.middle_above(z));
    let below_at = |z: f64| steps.as_ref().map_or(z, |steps| steps.middle_below(z));
    let apply = |at_most: &dyn Fn(f64) -> Option<f64>, above: &dyn Fn(f64) -> Option<f64>| match event {
        Event::AtMost(z) => at_most(above_at(z)),
        Event::AtLeast(z) => above(below_at(z)),
        Event::Beyond(e) => Some(at_most(below_at(-e))? + above(above_at(e))?),
    };
    let mut rows = Vec::new();
    let mut push = |name: &str, value: Option<f64>| {
        if let Some(value) = value.filter(|value| value.is_finite()) {
            rows.push(row(prepared, name, value, actual));
        }
    };
    if steps.is_some() {
        push("continuity correction", apply(&|z| Some(normal::at_or_below(z)), &|z| Some(normal::above(z))));
    }
    let moments = sum.moments();
    if let (Some(skewness), Some(excess_kurtosis)) = (moments.skewness, moments.excess_kurtosis) {
        let shape = Shape { skewness, excess_kurtosis };
        let expansion = |z: f64| match &steps {
            Some(steps) => edgeworth_on_lattice(shape, steps.span, z),
            None => edgeworth(shape, z),
        };
        let value = apply(&|z| Some(expansion(z)), &|z| Some(1.0 - expansion(z)));
        push("Edgeworth expansion, two terms", value.map(|value| value.clamp(0.0, 1.0)));
    }
    let spec = prepared.sum_spec(&prepared.planned);
    let span = steps.as_ref().map(|steps| steps.span);
    let saddlepoint = |z: f64| saddlepoint_above(&spec, moments.sd, span, z);
    push("saddlepoint approximation", apply(&|z| saddlepoint(z).map(|above| 1.0 - above), &saddlepoint));
    rows.push(exact_row(
        actual,
        format!(
            "gives {}; nothing is approximated",
            chance(actual.value, percent_decimals(0.001, actual.error, 0.001))
        ),
        prepared.scenario.tolerance.allowed(actual.value),
    ));
    rows
}

/// A row for an approximate probability.
fn row(prepared: &Prepared, name: &str, value: f64, actual: Figure) -> Remedy {
    let difference = actual.value - value;
    let decimals = percent_decimals(difference, actual.error, prepared.scenario.tolerance.allowed(value));
    let note = format!("gives {}, off by {}", chance(value, decimals), about_points(difference.abs()));
    near(name, actual, value, prepared.scenario.tolerance.allowed(value), note)
}

/// A row that holds where the true number is near the approximate one.
fn near(name: &str, actual: Figure, value: f64, allowed: f64, note: String) -> Remedy {
    let holds = (actual.value - value).abs() + actual.error <= allowed;
    Remedy { name: name.to_owned(), actual: Some(actual), holds, note }
}

/// The exact number itself: holds where its own error is within the tolerance.
fn exact_row(actual: Figure, note: String, allowed: f64) -> Remedy {
    let name = if actual.basis == Basis::Bound { "use the exact number" } else { "use the simulated number" };
    Remedy { name: name.to_owned(), actual: Some(actual), holds: actual.error <= allowed, note }
}

/// The rows for a quantile, in standard deviations of the statistic.
fn quantiles(
    prepared: &Prepared,
    sum: &dyn StandardizedSum,
    claim: &ClaimFacts,
    scale: &Scale,
    actual: Figure,
    p: f64,
) -> Vec<Remedy> {
    let z = normal::quantile(p);
    let moments = sum.moments();
    let in_units = |z: f64| text_with_unit(prepared.scenario, &number_to(scale.value_of(z), 6));
    let mut rows = Vec::new();
    if let (Some(skewness), Some(excess_kurtosis)) = (moments.skewness, moments.excess_kurtosis) {
        let w = cornish_fisher(Shape { skewness, excess_kurtosis }, z);
        let off = number_to((actual.value - w).abs(), 2);
        let note = format!("gives {}, off by {off} standard deviations", in_units(w));
        rows.push(near("Cornish–Fisher expansion, two terms", actual, w, claim.allowed, note));
    }
    let note = format!("gives {}; nothing is approximated", in_units(actual.value));
    rows.push(exact_row(actual, note, claim.allowed));
    rows
}
