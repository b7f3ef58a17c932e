//! Sums and products kept to twice the working precision, for centres of lattices with many points.

/// An unevaluated sum `high + low` of two doubles, |low| ≤ ulp(high)/2.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub(crate) struct Twofold {
    /// The leading part.
    pub high: f64,
    /// What the leading part leaves over.
    pub low: f64,
}

impl Twofold {
    /// A double as it is.
    pub const fn new(value: f64) -> Self {
        Self { high: value, low: 0.0 }
    }

    /// a·b without error (Dekker's product by fused multiply-add), barring underflow.
    pub fn product(a: f64, b: f64) -> Self {
        let high = a * b;
        Self { high, low: a.mul_add(b, -high) }
    }

    /// The sum with a double: Knuth's two-sum on the leading part; relative error ≤ 2⁻¹⁰⁴.
    pub fn plus(self, value: f64) -> Self {
        let sum = self.high + value;
        let part = sum - self.high;
        let rest = (self.high - (sum - part)) + (value - part);
        Self::renormalized(sum, rest + self.low)
    }

    /// The sum of two; relative error ≤ 2⁻¹⁰² unless the leading parts cancel.
    pub fn plus_twofold(self, other: Self) -> Self {
        let sum = self.plus(other.high);
        Self::renormalized(sum.high, sum.low + other.low)
    }

    /// The product with a double; relative error ≤ 2⁻¹⁰².
    pub fn times(self, factor: f64) -> Self {
        let product = Self::product(self.high, factor);
        Self::renormalized(product.high, self.low.mul_add(factor, product.low))
    }

    /// The quotient by a double; relative error ≤ 2⁻¹⁰⁰.
    pub fn over(self, divisor: f64) -> Self {
        let high = self.high / divisor;
        let rest = (-high).mul_add(divisor, self.high) + self.low;
        Self::renormalized(high, rest / divisor)
    }

    /// The nearest double.
    pub fn value(self) -> f64 {
        self.high + self.low
    }

    /// x − self, rounded once or twice.
    pub fn distance_to(self, x: f64) -> f64 {
        (x - self.high) - self.low
    }

    fn renormalized(high: f64, low: f64) -> Self {
        let sum = high + low;
        Self { high: sum, low: low - (sum - high) }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn keeps_what_a_double_loses() {
        // 10⁹ · 0.1 with the double nearest to 0.1: exact value 100000000.000000005551115123125782…
        let product = Twofold::product(1e9, 0.1);
        assert_eq!(product.high, 1e8);
        assert!((product.low - 5.551115123125783e-9).abs() < 1e-22);
        assert!((product.distance_to(1e8) + 5.551115123125783e-9).abs() < 1e-22);
        let third = Twofold::new(1.0).over(3.0).times(3.0);
        assert!((third.high - 1.0).abs() + third.low.abs() < 1e-30);
    }
}
