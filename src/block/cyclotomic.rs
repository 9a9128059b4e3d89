//! Isometries proven in the integers of a cyclotomic field.

use super::exact::{Exact, ExactValues};
use std::collections::HashMap;

/// Arithmetic in Z\[ζ\], ζ a primitive root of unity of order n: polynomials modulo Φ_n.
pub(super) struct Cyclotomic {
    order: usize,
    /// Φ_n, x^0 first, monic.
    phi: Vec<i64>,
}

impl Cyclotomic {
    pub(super) fn new(order: u32) -> Self {
        Self { order: order as usize, phi: cyclotomic_polynomial(order as usize) }
    }
    /// Whether Σ c_e ζ^e (e < n) vanishes.
    pub(super) fn is_zero(&self, coefficients: &[i64]) -> bool {
        self.remainder(coefficients).iter().all(|&c| c == 0)
    }
    fn remainder(&self, coefficients: &[i64]) -> Vec<i64> {
        let mut rest = coefficients.to_vec();
        let degree = self.phi.len() - 1;
        for top in (degree..rest.len()).rev() {
            let c = rest[top];
            if c != 0 {
                for (i, &f) in self.phi.iter().enumerate() {
                    rest[top - degree + i] -= c * f;
                }
            }
        }
        rest.truncate(degree);
        rest
    }
}

/// Φ_n = (x^n − 1) / Π_{d | n, d < n} Φ_d.
fn cyclotomic_polynomial(n: usize) -> Vec<i64> {
    let mut out = vec![0i64; n + 1];
    out[0] = -1;
    out[n] = 1;
    for d in (1..n).filter(|d| n.is_multiple_of(*d)) {
        let divisor = cyclotomic_polynomial(d);
        let k = divisor.len() - 1;
        let mut quotient = vec![0i64; out.len() - k];
        for top in (k..out.len()).rev() {
            let c = out[top];
            quotient[top - k] = c;
            for (i, &f) in divisor.iter().enumerate() {
                out[top - k + i] -= c * f;
            }
        }
        out = quotient;
    }
    out
}

impl Exact {
    /// Whether M†M = c·1 with c > 0 exactly, M being read from the legs in `mask` (columns)
    /// to the rest (rows).
    ///
    /// Counts in Z\[ζ\], so the answer is a proof. Time O(Σ over rows of (entries a row)² ·
    /// terms²).
    pub fn is_isometry(&self, mask: u64) -> bool {
        let legs = self.dims.len();
        let columns: u64 =
            (0..legs).filter(|l| mask >> l & 1 == 1).map(|l| self.dims[l] as u64).product();
        // (row, column, entry), rows together.
        let mut places: Vec<(u64, u64, usize)> = Vec::with_capacity(self.len());
        for (k, &index) in self.index.iter().enumerate() {
            let (mut rest, mut row, mut col) = (index, 0, 0);
            let (mut row_unit, mut col_unit) = (1, 1);
            for l in (0..legs).rev() {
                let d = self.dims[l] as u64;
                let v = rest % d;
                rest /= d;
                if mask >> l & 1 == 1 {
                    col += v * col_unit;
                    col_unit *= d;
                } else {
                    row += v * row_unit;
                    row_unit *= d;
                }
            }
            places.push((row, col, k));
        }
        places.sort_unstable();
        let ring = Cyclotomic::new(self.root);
        let n = ring.order;
        let mut products: HashMap<(u64, u64), Vec<i64>> = HashMap::new();
        for row in places.chunk_by(|a, b| a.0 == b.0) {
            for (i, a) in row.iter().enumerate() {
                for b in &row[i..] {
                    let sum = products.entry((a.1, b.1)).or_insert_with(|| vec![0; n]);
                    match &self.value {
                        ExactValues::Roots(e) => {
                            sum[(e[b.2] as usize + n - e[a.2] as usize) % n] += 1;
                        }
                        ExactValues::Sums(s) => {
                            for &(e, x) in &s[a.2] {
                                for &(f, y) in &s[b.2] {
                                    sum[(f as usize + n - e as usize) % n] += x * y;
                                }
                            }
                        }
                    }
                }
            }
        }
        let mut norm: Option<Vec<i64>> = None;
        let mut seen = 0;
        for ((a, b), sum) in &products {
            if a == b {
                seen += 1;
                match &norm {
                    None => norm = Some(sum.clone()),
                    Some(first) => {
                        let apart: Vec<i64> = sum.iter().zip(first).map(|(x, y)| x - y).collect();
                        if !ring.is_zero(&apart) {
                            return false;
                        }
                    }
                }
            } else if !ring.is_zero(sum) {
                return false;
            }
        }
        // A column without entries would have norm 0; a Gram matrix's diagonal is positive
        // wherever an entry stands.
        seen == columns
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cyclotomic_polynomials() {
        assert_eq!(cyclotomic_polynomial(1), [-1, 1]);
        assert_eq!(cyclotomic_polynomial(6), [1, -1, 1]);
        assert_eq!(cyclotomic_polynomial(12), [1, 0, -1, 0, 1]);
        let z = Cyclotomic::new(6);
        assert!(z.is_zero(&[1, 0, 0, 1, 0, 0]));
        assert!(z.is_zero(&[1, 0, 1, 0, 1, 0]));
        assert!(!z.is_zero(&[1, 0, 1, 0, 0, 0]));
    }

    #[test]
    fn a_wrong_sign_is_noticed() {
        // Hadamard, and the same with one sign turned.
        let good = Exact::from_roots(vec![2, 2], 2, (1, 2), vec![(0, 0), (1, 0), (2, 0), (3, 1)]);
        let bad = Exact::from_roots(vec![2, 2], 2, (1, 2), vec![(0, 0), (1, 0), (2, 1), (3, 1)]);
        assert!(good.is_isometry(1) && good.is_isometry(2));
        assert!(!bad.is_isometry(1) && !bad.is_isometry(2));
        // A column that vanishes.
        let flat = Exact::from_roots(vec![2, 2], 1, (1, 1), vec![(0, 0)]);
        assert!(!flat.is_isometry(1));
        assert!(flat.is_isometry(0));
    }
}
