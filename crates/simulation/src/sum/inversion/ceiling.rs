//! Bounds without oscillation on a summand's transform, from which truncation errors are computed.
//!
//! Up to t = 8 the modulus is evaluated on a ladder; between rungs δ apart it exceeds the larger end by at most
//! δ²/8, since |φ″| ≤ E X² = 1 in standard units. Further out the moduli of what leaves from each end of a
//! stretch are added ([`SummandTransform::envelope`]), which fall with t. Below the ladder,
//! 1 − |φ(t)|² ≥ (1 − |φ(2t)|²)/4 carries the bound down.

use super::transform::SummandTransform;

/// Lowest rung.
const LOWEST: f64 = 1.0 / 512.0;
/// Where the ladder ends.
const HIGHEST: f64 = 8.0;
const RATIO: f64 = 1.02;

/// Ceilings on |φ| and on the continuous part alone, each falling with t.
#[derive(Debug)]
pub(super) struct Ceiling {
    rungs: Vec<f64>,
    /// ln of the bound on |φ(u)| for all u ≥ rung.
    log_whole: Vec<f64>,
    /// Bound on |C(u)| for all u ≥ rung.
    continuous: Vec<f64>,
    /// min (1 − |φ|²)/t² over the lowest octave.
    curvature: f64,
}

impl Ceiling {
    /// Evaluates the ladder.
    pub(super) fn new(summand: &SummandTransform) -> Self {
        let mut rungs = vec![LOWEST];
        let mut t = LOWEST;
        while t < HIGHEST {
            t = (t * RATIO).min(t + 0.03).min(HIGHEST);
            rungs.push(t);
        }
        let deficit = |t: f64| -> f64 {
            // 1 − |φ|², accurate as t falls to 0.
            match (t < 1.0).then(|| summand.cumulant(t)).flatten() {
                Some((log, error)) => -(2.0 * log.re).exp_m1() - 2.0 * error,
                None => {
                    let split = summand.split(t);
                    let modulus = (split.atoms + split.continuous).norm() + split.error;
                    1.0 - modulus * modulus
                }
            }
        };
        let deficits: Vec<f64> = rungs.iter().map(|t| deficit(*t)).collect();
        let parts: Vec<f64> = rungs
            .iter()
            .map(|t| {
                let split = summand.split(*t);
                split.continuous.norm() + split.error
            })
            .collect();
        let last = rungs.len() - 1;
        let mut log_whole = vec![0.0; rungs.len()];
        let mut continuous = vec![0.0; rungs.len()];
        let far = summand.envelope(HIGHEST);
        continuous[last] = far;
        log_whole[last] = (far + summand.atom_mass).min(1.0).ln();
        for k in (0..last).rev() {
            let gap = rungs[k + 1] - rungs[k];
            let excess = gap * gap / 8.0;
            // |φ| ≤ max of the ends + excess; in terms of 1 − |φ|² this costs at most 2·excess + excess².
            let smallest = deficits[k].min(deficits[k + 1]) - 2.0 * excess - excess * excess;
            let bound = if smallest > 0.0 { 0.5 * (-smallest).ln_1p() } else { 0.0 };
            log_whole[k] = bound.max(log_whole[k + 1]);
            continuous[k] =
                (parts[k].max(parts[k + 1]) + excess).min(summand.continuous_mass).max(continuous[k + 1]);
            if rungs[k] >= 1.0 {
                let far = summand.envelope(rungs[k]);
                continuous[k] = continuous[k].min(far.max(continuous[k + 1]));
            }
        }
        let curvature = rungs
            .windows(2)
            .enumerate()
            .take_while(|(_, w)| w[0] <= 2.0 * LOWEST)
            .map(|(k, w)| {
                let gap = w[1] - w[0];
                (deficits[k].min(deficits[k + 1]) - gap * gap / 4.0 * (1.0 + gap * gap)) / (w[1] * w[1])
            })
            .fold(f64::INFINITY, f64::min)
            .max(0.0);
        Self { rungs, log_whole, continuous, curvature }
    }

    fn rung(&self, t: f64) -> usize {
        self.rungs.partition_point(|r| *r <= t).saturating_sub(1)
    }

    /// ln of a bound on |φ(u)| for every u ≥ t.
    pub(super) fn log_whole(&self, summand: &SummandTransform, t: f64) -> f64 {
        if t >= HIGHEST {
            return (summand.envelope(t) + summand.atom_mass).min(1.0).ln();
        }
        if t < LOWEST {
            return (0.5 * (-self.curvature * t * t).ln_1p()).max(self.log_whole[0]);
        }
        self.log_whole[self.rung(t)]
    }

    /// A bound on the continuous part for every u ≥ t.
    pub(super) fn continuous(&self, summand: &SummandTransform, t: f64) -> f64 {
        if t >= HIGHEST {
            return summand.envelope(t);
        }
        if t < LOWEST {
            return summand.continuous_mass;
        }
        self.continuous[self.rung(t)]
    }
}
