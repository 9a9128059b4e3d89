//! Entries without rounding: roots of unity and integer sums of them.

use super::SparseEntries;
use num_complex::Complex64;

/// The non-zero entries of a block as numbers of a cyclotomic field, up to one common factor:
/// entry = √(num/den) · v with v in Z\[ζ\], ζ = exp(2πi/root).
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Exact {
    /// Sizes of the axes.
    pub dims: Vec<usize>,
    /// Order of the root of unity ζ.
    pub root: u32,
    /// num and den of the squared common factor.
    pub scale_squared: (u128, u128),
    /// Row-major places, ascending.
    pub index: Vec<u64>,
    /// The numbers v, one a place.
    pub value: ExactValues,
}

/// Numbers in Z\[ζ\].
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum ExactValues {
    /// Every one is a power of ζ; its exponents.
    Roots(Vec<u32>),
    /// Sums Σ c·ζ^e, as lists of (e, c).
    Sums(Vec<Vec<(u32, i64)>>),
}

impl Exact {
    /// Sorts the places and reduces the root to the order that is needed.
    pub fn from_roots(
        dims: Vec<usize>,
        root: u32,
        scale_squared: (u128, u128),
        mut entries: Vec<(u64, u32)>,
    ) -> Self {
        entries.sort_unstable();
        let g = entries.iter().fold(root, |g, &(_, e)| gcd(g, e % root));
        let value = entries.iter().map(|&(_, e)| e % root / g).collect();
        Self {
            dims,
            root: root / g,
            scale_squared: shorten(scale_squared),
            index: entries.into_iter().map(|e| e.0).collect(),
            value: ExactValues::Roots(value),
        }
    }
    /// Number of entries.
    pub fn len(&self) -> usize {
        self.index.len()
    }
    /// Whether there is no entry.
    pub fn is_empty(&self) -> bool {
        self.index.is_empty()
    }
    /// The number v of entry `k` as (exponent, coefficient) pairs.
    pub fn terms(&self, k: usize) -> Vec<(u32, i64)> {
        match &self.value {
            ExactValues::Roots(e) => vec![(e[k], 1)],
            ExactValues::Sums(s) => s[k].clone(),
        }
    }
    /// The entries in floating point.
    pub fn to_sparse(&self) -> SparseEntries {
        let scale = (self.scale_squared.0 as f64 / self.scale_squared.1 as f64).sqrt();
        let powers: Vec<Complex64> = (0..self.root).map(|e| root_of_unity(e, self.root)).collect();
        let value = |k: usize| match &self.value {
            ExactValues::Roots(e) => powers[e[k] as usize] * scale,
            ExactValues::Sums(s) => {
                s[k].iter().map(|&(e, c)| powers[e as usize] * c as f64).sum::<Complex64>() * scale
            }
        };
        let entries = self.index.iter().enumerate().map(|(k, &i)| (i, value(k))).collect();
        SparseEntries::collect(self.dims.clone(), entries)
    }
}

/// exp(2πi·e/n), exact on the axes; conjugate and opposite roots are so to the last bit.
pub(super) fn root_of_unity(e: u32, n: u32) -> Complex64 {
    let (e, n) = (u64::from(e % n), u64::from(n));
    let octant = 8 * e / n;
    // Distance from the nearer axis, in units of 1/(8n) of a turn, from 0 to n.
    let apart =
        if octant.is_multiple_of(2) { 8 * e - octant * n } else { (octant + 1) * n - 8 * e };
    let (s, c) = if apart == n {
        (std::f64::consts::FRAC_1_SQRT_2, std::f64::consts::FRAC_1_SQRT_2)
    } else {
        (std::f64::consts::TAU * apart as f64 / (8 * n) as f64).sin_cos()
    };
    let (re, im) = match octant {
        0 => (c, s),
        1 => (s, c),
        2 => (-s, c),
        3 => (-c, s),
        4 => (-c, -s),
        5 => (-s, -c),
        6 => (s, -c),
        _ => (c, -s),
    };
    // No negative zeros.
    Complex64::new(re + 0.0, im + 0.0)
}

pub(super) fn gcd(a: u32, b: u32) -> u32 {
    if b == 0 { a } else { gcd(b, a % b) }
}

fn shorten((num, den): (u128, u128)) -> (u128, u128) {
    let (mut a, mut b) = (num, den);
    while b != 0 {
        (a, b) = (b, a % b);
    }
    (num / a, den / a)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn roots_lie_where_they_should() {
        for n in 1..40u32 {
            for e in 0..n {
                let z = root_of_unity(e, n);
                let t = std::f64::consts::TAU * f64::from(e) / f64::from(n);
                assert!((z - Complex64::new(t.cos(), t.sin())).norm() < 1e-14, "{e}/{n}");
                let w = root_of_unity(n - e, n);
                assert!((z.conj() - w).norm() == 0.0, "{e}/{n}");
            }
        }
        assert_eq!(root_of_unity(1, 2), Complex64::new(-1.0, 0.0));
        assert_eq!(root_of_unity(1, 4), Complex64::new(0.0, 1.0));
    }
}
