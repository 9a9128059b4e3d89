//! Integers factored, and the polynomial that defines an extension field.

/// The prime factors of n with their exponents, primes ascending; empty for n < 2.
///
/// Trial division: √n steps at most.
pub fn factorise(n: u64) -> Vec<(u64, u32)> {
    let mut out = Vec::new();
    let mut rest = n;
    let mut p = 2;
    while rest > 1 {
        if p * p > rest {
            out.push((rest, 1));
            break;
        }
        let mut e = 0;
        while rest.is_multiple_of(p) {
            rest /= p;
            e += 1;
        }
        if e > 0 {
            out.push((p, e));
        }
        p += 1;
    }
    out
}

/// The prime p and exponent m with q = p^m, where q is a prime power.
pub fn prime_power(q: u64) -> Option<(u64, u32)> {
    match factorise(q).as_slice() {
        [one] => Some(*one),
        _ => None,
    }
}

/// Residues modulo a monic polynomial of degree m over GF(p); coefficient i belongs to x^i.
struct Ring {
    p: u64,
    /// Coefficients below the leading one.
    low: Vec<u64>,
}

impl Ring {
    fn multiply(&self, a: &[u64], b: &[u64]) -> Vec<u64> {
        let m = self.low.len();
        let mut wide = vec![0u64; 2 * m - 1];
        for (i, &x) in a.iter().enumerate() {
            for (j, &y) in b.iter().enumerate() {
                wide[i + j] = (wide[i + j] + x * y) % self.p;
            }
        }
        for top in (m..wide.len()).rev() {
            let c = wide[top];
            if c != 0 {
                for (i, &l) in self.low.iter().enumerate() {
                    wide[top - m + i] = (wide[top - m + i] + (self.p - l) * c) % self.p;
                }
                wide[top] = 0;
            }
        }
        wide.truncate(m);
        wide
    }
    fn one(&self) -> Vec<u64> {
        let mut v = vec![0; self.low.len()];
        v[0] = 1;
        v
    }
    fn x(&self) -> Vec<u64> {
        let m = self.low.len();
        let mut v = vec![0; m];
        if m == 1 {
            v[0] = (self.p - self.low[0]) % self.p;
        } else {
            v[1] = 1;
        }
        v
    }
    fn power(&self, a: &[u64], mut e: u64) -> Vec<u64> {
        let mut base = a.to_vec();
        let mut out = self.one();
        while e > 0 {
            if e & 1 == 1 {
                out = self.multiply(&out, &base);
            }
            base = self.multiply(&base, &base);
            e >>= 1;
        }
        out
    }
    /// Whether x has multiplicative order p^m − 1; then the polynomial is irreducible too.
    fn x_is_primitive(&self) -> bool {
        let order = self.p.pow(self.low.len() as u32) - 1;
        let x = self.x();
        if x.iter().all(|&c| c == 0) || self.power(&x, order) != self.one() {
            return false;
        }
        factorise(order).iter().all(|&(f, _)| self.power(&x, order / f) != self.one())
    }
}

/// The Conway polynomial of GF(p^m): coefficients below the leading one, x^0 first.
///
/// It is the least primitive polynomial, in the order of (−1)^{m−i}·c_i from i = m−1 down,
/// that is compatible with those of the subfields: for d | m the power
/// x^{(p^m−1)/(p^d−1)} is a root of the polynomial of degree d.
pub(super) fn conway(p: u64, m: u32) -> Vec<u64> {
    let smaller: Vec<(u32, Vec<u64>)> =
        (1..m).filter(|d| m.is_multiple_of(*d)).map(|d| (d, conway(p, d))).collect();
    let size = p.pow(m);
    for code in 0..size {
        // The most significant digit of `code` belongs to x^{m-1}.
        let mut low = vec![0; m as usize];
        let mut rest = code;
        for (i, c) in low.iter_mut().enumerate() {
            let digit = rest % p;
            rest /= p;
            *c = if (m as usize - i) % 2 == 1 { (p - digit) % p } else { digit };
        }
        let ring = Ring { p, low };
        if !ring.x_is_primitive() {
            continue;
        }
        let compatible = smaller.iter().all(|(d, poly)| {
            let y = ring.power(&ring.x(), (size - 1) / (p.pow(*d) - 1));
            let mut power = ring.one();
            let mut value = vec![0; m as usize];
            for c in poly.iter().copied().chain([1]) {
                for (v, w) in value.iter_mut().zip(&power) {
                    *v = (*v + c * w) % p;
                }
                power = ring.multiply(&power, &y);
            }
            value.iter().all(|&v| v == 0)
        });
        if compatible {
            return ring.low;
        }
    }
    unreachable!("a Conway polynomial exists for every prime and degree")
}
