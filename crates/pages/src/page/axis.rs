//! Axes: from values to places on the page, round tick values, and how they are written.

use crate::numbers::{number, superscript, whole};

/// A tick: where, and what is written there.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Tick {
    pub value: f64,
    pub label: String,
}

/// Values `low` to `high` on a straight or logarithmic axis.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Axis {
    pub low: f64,
    pub high: f64,
    pub logarithmic: bool,
}

impl Axis {
    /// A straight axis; an empty range is widened.
    pub fn straight(low: f64, high: f64) -> Self {
        if high - low > 1e-300 && (high - low).is_finite() {
            Self { low, high, logarithmic: false }
        } else {
            Self {
                low: low - 0.5 * low.abs().max(1e-3),
                high: low + 0.5 * low.abs().max(1e-3),
                logarithmic: false,
            }
        }
    }

    /// A logarithmic axis over positive values; at most 30 decades, at least a factor of 2.
    pub fn logarithmic(low: f64, high: f64) -> Self {
        let high = if high.is_finite() && high > 0.0 { high } else { 1.0 };
        let low = if low.is_finite() && low > 0.0 { low } else { high / 10.0 };
        let low = low.min(high / 2.0).max(high * 1e-30);
        Self { low, high, logarithmic: true }
    }

    /// Where a value lies, 0 at `low`, 1 at `high`.
    pub fn fraction(&self, value: f64) -> f64 {
        if self.logarithmic {
            let low = self.low.ln();
            (value.max(1e-320).ln() - low) / (self.high.ln() - low)
        } else {
            (value - self.low) / (self.high - self.low)
        }
    }

    /// Round values inside the axis, about `wanted` of them, and a common factor such as `×10⁻⁵` to be written once.
    pub fn ticks(&self, wanted: usize) -> (Vec<Tick>, Option<String>) {
        if self.logarithmic { (self.decades(wanted), None) } else { self.round_steps(wanted) }
    }

    fn round_steps(&self, wanted: usize) -> (Vec<Tick>, Option<String>) {
        let span = self.high - self.low;
        let raw = span / wanted.max(1) as f64;
        let power = 10_f64.powi(raw.log10().floor() as i32);
        let step =
            [1.0, 2.0, 5.0, 10.0].into_iter().map(|m| m * power).find(|&s| s >= raw * 0.999).unwrap_or(raw);
        if !(step > 0.0 && step.is_finite()) {
            return (Vec::new(), None);
        }
        let largest = self.low.abs().max(self.high.abs());
        let exponent = largest.log10().floor() as i32;
        let shared = if (-3..5).contains(&exponent) { 0 } else { exponent };
        let scale = 10_f64.powi(-shared);
        let scale = if scale.is_finite() && scale > 0.0 { scale } else { 1.0 };
        let decimals = (-(step * scale).log10().floor()).clamp(0.0, 15.0) as usize;
        let (first, last) = ((self.low / step - 1e-9).ceil(), (self.high / step + 1e-9).floor());
        let count = (last - first).clamp(0.0, 50.0) as usize;
        let ticks = (0..=count)
            .map(|k| {
                let value = (first + k as f64) * step;
                let text = format!("{:.decimals$}", value * scale);
                let text = if text.trim_start_matches('-').chars().all(|c| c == '0' || c == '.') {
                    "0".to_owned()
                } else {
                    text
                };
                Tick { value, label: text.replace('-', "−") }
            })
            .collect();
        (ticks, (shared != 0).then(|| format!("×10{}", superscript(shared))))
    }

    fn decades(&self, wanted: usize) -> Vec<Tick> {
        let (low, high) = (self.low.log10(), self.high.log10());
        let (first, last) = ((low - 1e-9).ceil() as i32, (high + 1e-9).floor() as i32);
        if last - first < 1 {
            // Less than a decade between two powers: 1, 2, 5 and, if need be, every digit.
            let steps: &[f64] = if high - low > 0.5 {
                &[1.0, 2.0, 5.0]
            } else {
                &[1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0, 9.0]
            };
            return (first - 1..=last + 1)
                .flat_map(|decade| steps.iter().map(move |step| step * 10_f64.powi(decade)))
                .filter(|value| *value >= self.low * 0.999_999 && *value <= self.high * 1.000_001)
                .map(|value| Tick { value, label: number(value, 2) })
                .collect();
        }
        let stride = ((last - first) as f64 / wanted.max(1) as f64).ceil().max(1.0) as usize;
        (first..=last)
            .step_by(stride)
            .map(|decade| Tick { value: 10_f64.powi(decade), label: decade_label(decade) })
            .collect()
    }
}

fn decade_label(decade: i32) -> String {
    match decade {
        0..=4 => whole(10_u64.pow(decade.unsigned_abs())),
        -3..=-1 => format!("{:.*}", decade.unsigned_abs() as usize, 10_f64.powi(decade)),
        _ => format!("10{}", superscript(decade)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn labels(axis: Axis, wanted: usize) -> Vec<String> {
        axis.ticks(wanted).0.into_iter().map(|tick| tick.label).collect()
    }

    #[test]
    fn ticks_are_round() {
        assert_eq!(labels(Axis::straight(-4.0, 4.0), 8), ["−4", "−3", "−2", "−1", "0", "1", "2", "3", "4"]);
        assert_eq!(labels(Axis::straight(0.0, 1.0), 5), ["0", "0.2", "0.4", "0.6", "0.8", "1.0"]);
        let (ticks, factor) = Axis::straight(-2.1e-5, 2.1e-5).ticks(4);
        assert_eq!(ticks.iter().map(|tick| tick.label.as_str()).collect::<Vec<_>>(), ["−2", "0", "2"]);
        assert_eq!(factor.unwrap(), "×10⁻⁵");
        assert_eq!(labels(Axis::logarithmic(1.0, 10_000.0), 5), ["1", "10", "100", "1000", "10\u{202f}000"]);
        assert_eq!(labels(Axis::logarithmic(1e-5, 0.5), 5), ["10⁻⁵", "10⁻⁴", "0.001", "0.01", "0.1"]);
        assert_eq!(labels(Axis::logarithmic(2.0, 9.0), 5), ["2", "5"]);
    }

    #[test]
    fn extreme_ranges_give_finite_places_and_few_ticks() {
        for (low, high) in [
            (0.0, 0.0),
            (-1e300, 1e300),
            (0.0, 1e-300),
            (1.0, 1.0 + 1e-15),
            (-1e-320, 1e-320),
            (5e300, 5e300),
        ] {
            for axis in [Axis::straight(low, high), Axis::logarithmic(low, high)] {
                let (ticks, _) = axis.ticks(6);
                assert!(ticks.len() <= 51);
                for tick in ticks {
                    assert!(axis.fraction(tick.value).is_finite());
                }
                assert!(axis.fraction(low).is_finite() && axis.fraction(high).is_finite());
            }
        }
    }
}
