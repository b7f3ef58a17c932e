//! Binomial, Poisson and negative binomial probabilities, relative accuracy in both tails.
//!
//! Masses after Loader (see [`super::gamma`]), tail sums through the incomplete beta and gamma functions; all
//! with a relative error below 1e-13·(1 + |ln value|/100) down to 1e-300.

use super::beta::{self, Point};
use super::gamma;

/// P(X = k) for X binomial: C(trials, k) p^k (1−p)^(trials−k), 0 ≤ p ≤ 1.
pub fn binomial_mass(trials: u64, p: f64, k: u64) -> f64 {
    if k > trials {
        0.0
    } else if p <= 0.0 {
        if k == 0 { 1.0 } else { 0.0 }
    } else if p >= 1.0 {
        if k == trials { 1.0 } else { 0.0 }
    } else {
        beta::mass(k as f64, (trials - k) as f64, Point::at(p))
    }
}

/// P(X ≤ k) for X binomial: I_{1−p}(trials − k, k + 1).
pub fn binomial_at_or_below(trials: u64, p: f64, k: u64) -> f64 {
    if k >= trials { 1.0 } else { beta::above(k as f64 + 1.0, (trials - k) as f64, p) }
}

/// P(X > k) for X binomial: I_p(k + 1, trials − k).
pub fn binomial_above(trials: u64, p: f64, k: u64) -> f64 {
    if k >= trials { 0.0 } else { beta::below(k as f64 + 1.0, (trials - k) as f64, p) }
}

/// P(X = k) for X Poisson: e^(−rate) rate^k/k!, rate ≥ 0.
pub fn poisson_mass(rate: f64, k: u64) -> f64 {
    if k == 0 {
        (-rate).exp()
    } else if rate <= 0.0 {
        0.0
    } else {
        gamma::mass(k as f64, rate)
    }
}

/// P(X ≤ k) for X Poisson: Q(k + 1, rate).
pub fn poisson_at_or_below(rate: f64, k: u64) -> f64 {
    gamma::above(k as f64 + 1.0, rate)
}

/// P(X > k) for X Poisson: P(k + 1, rate).
pub fn poisson_above(rate: f64, k: u64) -> f64 {
    gamma::below(k as f64 + 1.0, rate)
}

/// P(X = k) for X the number of failures before the size-th success:
/// Γ(size+k)/(Γ(size) k!) p^size (1−p)^k, size > 0 real, 0 < p ≤ 1.
pub fn negative_binomial_mass(size: f64, p: f64, k: u64) -> f64 {
    if p >= 1.0 {
        return if k == 0 { 1.0 } else { 0.0 };
    }
    if p <= 0.0 {
        return 0.0;
    }
    let k = k as f64;
    beta::mass(size, k, Point::at(p)) * (size / (size + k))
}

/// P(X ≤ k) for X negative binomial: I_p(size, k + 1).
pub fn negative_binomial_at_or_below(size: f64, p: f64, k: u64) -> f64 {
    beta::below(size, k as f64 + 1.0, p)
}

/// P(X > k) for X negative binomial: I_{1−p}(k + 1, size).
pub fn negative_binomial_above(size: f64, p: f64, k: u64) -> f64 {
    beta::above(size, k as f64 + 1.0, p)
}
