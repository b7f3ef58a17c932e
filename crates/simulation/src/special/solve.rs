//! A safeguarded Newton iteration on the positive axis, for the quantiles.

/// One evaluation of a monotone probability F (or P(X > ·)) at x.
pub(crate) struct Probe {
    /// The probability at x.
    pub probability: f64,
    /// The density at x.
    pub density: f64,
}

/// Which probability is inverted.
#[derive(Clone, Copy, PartialEq)]
pub(crate) enum Tail {
    /// P(X ≤ x), rising.
    Lower,
    /// P(X > x), falling.
    Upper,
}

/// The x > 0 at which `probe(x).probability` equals `target`, 0 < target < 1.
///
/// Newton steps on ln probability against ln x, kept inside a bracket that shrinks at every evaluation and
/// halved (geometrically) where a step leaves it. Accurate to the last few bits that the probability itself
/// determines; 0 or +∞ where the solution lies beyond the doubles.
pub(crate) fn on_positive_axis(target: f64, start: f64, tail: Tail, probe: impl Fn(f64) -> Probe) -> f64 {
    let (mut low, mut high) = (0.0f64, f64::INFINITY);
    let mut x = if start > 0.0 && start.is_finite() { start } else { 1.0 };
    for round in 0..400 {
        let Probe { probability, density } = probe(x);
        let difference =
            if probability > 0.0 { libm::log1p((probability - target) / target) } else { f64::NEG_INFINITY };
        if difference == 0.0 {
            return x;
        }
        let too_far = match tail {
            Tail::Lower => difference > 0.0,
            Tail::Upper => difference < 0.0,
        };
        if too_far {
            high = x;
        } else {
            low = x;
        }
        // d ln(probability)/d ln x, in absolute value.
        let slope = x * (density / probability);
        let step = difference.abs() / slope;
        let next = if !step.is_finite() {
            f64::NAN
        } else if too_far {
            x * (-step).exp()
        } else {
            x * step.min(700.0).exp()
        };
        if step < 1e-8 && difference.abs() < 1e-8 && round > 0 {
            // Quadratic convergence in both scales: the step just taken lands on the last bits.
            return next.clamp(low, high);
        }
        x = if next > low && next < high && round < 60 { next } else { between(low, high) };
        if x <= low || x >= high || x == 0.0 || x == f64::INFINITY {
            return x;
        }
    }
    x
}

/// A point between the ends of a bracket, halving its ratio's logarithm.
fn between(low: f64, high: f64) -> f64 {
    if low == 0.0 {
        let candidate = high * 1e-10;
        if candidate < f64::MIN_POSITIVE { 0.0 } else { candidate }
    } else if high == f64::INFINITY {
        low * 1e10
    } else {
        low.sqrt() * high.sqrt()
    }
}
