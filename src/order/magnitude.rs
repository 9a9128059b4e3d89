//! Sums of products of sizes: exact while they fit, never overflowing.

/// A non-negative number: exact as an integer while that fits, and always as mantissa times
/// a power of two whose exponent is held apart, so that 2^100000 is a number like any other.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Magnitude {
    exact: Option<u128>,
    mantissa: f64,
    exponent: i64,
}

impl Magnitude {
    /// Nothing.
    pub const ZERO: Self = Self { exact: Some(0), mantissa: 0.0, exponent: 0 };
    /// One.
    pub const ONE: Self = Self { exact: Some(1), mantissa: 1.0, exponent: 0 };

    fn tidy(mut self) -> Self {
        if let Some(n) = self.exact {
            self.mantissa = n as f64;
            self.exponent = 0;
        }
        while self.mantissa >= 2f64.powi(256) {
            self.mantissa *= 2f64.powi(-256);
            self.exponent += 256;
        }
        self
    }
    /// This times a size.
    pub fn times(self, size: u64) -> Self {
        Self {
            exact: self.exact.and_then(|n| n.checked_mul(u128::from(size))),
            mantissa: self.mantissa * size as f64,
            exponent: self.exponent,
        }
        .tidy()
    }
    /// This times a count.
    pub fn times_count(self, count: u128) -> Self {
        Self {
            exact: self.exact.and_then(|n| n.checked_mul(count)),
            mantissa: self.mantissa * count as f64,
            exponent: self.exponent,
        }
        .tidy()
    }
    /// The product.
    pub fn product(self, other: Self) -> Self {
        Self {
            exact: match (self.exact, other.exact) {
                (Some(a), Some(b)) => a.checked_mul(b),
                _ => None,
            },
            mantissa: self.mantissa * other.mantissa,
            exponent: self.exponent + other.exponent,
        }
        .tidy()
    }
    fn scaled(self, exponent: i64) -> f64 {
        let gap = self.exponent - exponent;
        if gap < -1000 { 0.0 } else { self.mantissa * 2f64.powi(gap as i32) }
    }
    /// The sum.
    pub fn plus(self, other: Self) -> Self {
        let exponent = self.exponent.max(other.exponent);
        Self {
            exact: match (self.exact, other.exact) {
                (Some(a), Some(b)) => a.checked_add(b),
                _ => None,
            },
            mantissa: self.scaled(exponent) + other.scaled(exponent),
            exponent,
        }
        .tidy()
    }
    /// The difference, not below nothing. Once a sum has left the exact range its
    /// differences are rounded ones.
    pub fn minus(self, other: Self) -> Self {
        let exponent = self.exponent.max(other.exponent);
        Self {
            exact: match (self.exact, other.exact) {
                (Some(a), Some(b)) => a.checked_sub(b),
                _ => None,
            },
            mantissa: (self.scaled(exponent) - other.scaled(exponent)).max(0.0),
            exponent,
        }
        .tidy()
    }
    /// The larger of the two.
    pub fn max(self, other: Self) -> Self {
        let larger = match (self.exact, other.exact) {
            (Some(a), Some(b)) => a >= b,
            _ => self.log2() >= other.log2(),
        };
        if larger { self } else { other }
    }
    /// The integer, where it fits.
    pub fn exact(self) -> Option<u128> {
        self.exact
    }
    /// Logarithm to base 2; −∞ for nothing.
    pub fn log2(self) -> f64 {
        self.mantissa.log2() + self.exponent as f64
    }
}

#[cfg(test)]
mod tests {
    use super::Magnitude;

    #[test]
    fn huge_products_keep_their_logarithm() {
        let mut m = Magnitude::ONE;
        for _ in 0..100_000 {
            m = m.times(3);
        }
        assert_eq!(m.exact(), None);
        assert!((m.log2() - 100_000.0 * 3f64.log2()).abs() < 1e-6);
        assert!((m.plus(m).log2() - m.log2() - 1.0).abs() < 1e-9);
        assert_eq!(m.plus(m).minus(m).exact(), None);
        assert!((m.plus(m).minus(m).log2() - m.log2()).abs() < 1e-9);
        assert_eq!(m.max(Magnitude::ONE), m);
    }

    #[test]
    fn small_sums_are_exact() {
        let a = Magnitude::ONE.times(1 << 40).times(1 << 40);
        assert_eq!(a.plus(Magnitude::ONE).minus(a).exact(), Some(1));
        assert_eq!(Magnitude::ZERO.log2(), f64::NEG_INFINITY);
    }
}
