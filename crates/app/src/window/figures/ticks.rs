//! Where the ticks of an axis lie and what they say.

use super::super::model::prepared::OwnUnits;
use super::super::numbers::{shown, superscript};

/// What the numbers along an axis mean.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Scale {
    /// As they are.
    Linear,
    /// The axis holds log₁₀ of the value.
    Log,
    /// The axis holds z, the ticks the quantity's own unit.
    Own(OwnUnits),
}

/// A tick: its place on the axis and its label.
#[derive(Debug, Clone, PartialEq)]
pub struct Tick {
    /// Place in axis coordinates.
    pub at: f64,
    /// Label; empty for an unlabelled tick.
    pub label: String,
}

/// About `most` ticks between two ends.
pub fn ticks(scale: Scale, from: f64, to: f64, most: usize) -> Vec<Tick> {
    let good = from.is_finite() && to.is_finite() && to > from;
    if !good || most == 0 {
        return Vec::new();
    }
    match scale {
        Scale::Linear => linear(from, to, most),
        Scale::Log => powers(from, to, most),
        Scale::Own(own) => {
            let (a, b) = (own.center + from * own.unit, own.center + to * own.unit);
            let mut ticks = ticks(Scale::Linear, a, b, most);
            for tick in &mut ticks {
                tick.at = (tick.at - own.center) / own.unit;
            }
            ticks
        }
    }
}

/// Steps of 1, 2 or 5 times a power of ten.
fn linear(from: f64, to: f64, most: usize) -> Vec<Tick> {
    let rough = (to - from) / most as f64;
    let power = 10f64.powf(rough.log10().floor());
    let step = [1.0, 2.0, 5.0, 10.0].into_iter().map(|k| k * power).find(|step| *step >= rough * 0.999_999);
    let step = step.unwrap_or(10.0 * power);
    let (first, last) = ((from / step).ceil(), (to / step).floor());
    if !step.is_finite() || step <= 0.0 || last - first > 1000.0 {
        return Vec::new();
    }
    let digits = |value: f64| {
        let ratio = (value.abs() / step).max(1.0).log10().floor() as usize;
        (ratio + 2).min(12)
    };
    let count = (last - first) as i64;
    (0..=count.max(-1))
        .map(|i| {
            let at = (first + i as f64) * step;
            let at = if at.abs() < step * 1e-9 { 0.0 } else { at };
            Tick { at, label: shown(at, digits(at)) }
        })
        .collect()
}

/// Whole powers of ten, thinned; 2 and 5 times them where there is little else.
fn powers(from: f64, to: f64, most: usize) -> Vec<Tick> {
    let (first, last) = (from.ceil() as i32, to.floor() as i32);
    let decades = last - first + 1;
    let every = (decades.max(1) as usize).div_ceil(most).max(1) as i32;
    let mut ticks = Vec::new();
    for power in first - 1..=last {
        let at = f64::from(power);
        if at >= from && at <= to && power.rem_euclid(every) == 0 {
            ticks.push(Tick { at, label: power_label(power) });
        }
        if decades <= 2 {
            for k in [2.0f64, 5.0] {
                let at = f64::from(power) + k.log10();
                if at >= from && at <= to {
                    ticks.push(Tick { at, label: shown(10f64.powf(at), 2) });
                }
            }
        }
    }
    ticks
}

fn power_label(power: i32) -> String {
    match power {
        -3..=4 => shown(10f64.powi(power), 1),
        _ => format!("10{}", superscript(power)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_inside() {
        let labels = |scale, from, to, most| -> Vec<String> {
            ticks(scale, from, to, most).into_iter().map(|tick| tick.label).collect()
        };
        assert_eq!(labels(Scale::Linear, -4.0, 4.0, 8), ["−4", "−3", "−2", "−1", "0", "1", "2", "3", "4"]);
        assert_eq!(labels(Scale::Linear, 0.0, 0.06, 4), ["0", "0.02", "0.04", "0.06"]);
        assert_eq!(labels(Scale::Log, 0.0, 4.0, 6), ["1", "10", "100", "1000", "10000"]);
        assert_eq!(labels(Scale::Log, -30.0, 0.0, 4), ["10⁻²⁴", "10⁻¹⁶", "10⁻⁸", "1"]);
        let own = Scale::Own(OwnUnits { center: 48.0, unit: 5.0 });
        assert_eq!(labels(own, -4.0, 4.0, 4), ["30", "40", "50", "60"]);
    }

    #[test]
    fn unusable_ends_give_no_ticks() {
        for (from, to) in [(1.0, 1.0), (2.0, 1.0), (f64::NAN, 1.0), (0.0, f64::INFINITY)] {
            assert!(ticks(Scale::Linear, from, to, 5).is_empty());
        }
        assert!(ticks(Scale::Linear, 1.0, 1.0 + 1e-17, 5).is_empty());
        assert!(ticks(Scale::Linear, 1e300, 2e300, 5).len() < 12);
    }
}
