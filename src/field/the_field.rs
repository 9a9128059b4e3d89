//! GF(q) with table arithmetic.

use super::polynomial::{conway, prime_power};
use std::fmt;
use std::sync::Arc;
use thiserror::Error;

/// What can be wrong with a request for a field or with matrices over it.
#[derive(Debug, Error, Clone, PartialEq, Eq)]
#[non_exhaustive]
pub enum FieldError {
    /// No field has this many elements.
    #[error("there is no field of {order} elements: {order} is not a prime power")]
    NotPrimePower {
        /// Elements asked for.
        order: u64,
    },
    /// The tables would be too large.
    #[error("a field of {order} elements is beyond the largest supported one, 65536")]
    TooLarge {
        /// Elements asked for.
        order: u64,
    },
}

struct Tables {
    order: u32,
    prime: u32,
    degree: u32,
    modulus: Vec<u32>,
    /// exp\[k\] = g^k for k < 2(q−1), so that sums of two logarithms need no reduction.
    exp: Vec<u16>,
    /// log\[v\] for v ≠ 0; log\[0\] is unused.
    log: Vec<u16>,
    /// zech\[k\] = log(1 + g^k), or `NONE` where 1 + g^k = 0; odd extension fields only.
    zech: Vec<u32>,
    /// sum[a·q + b] = a + b; odd extension fields up to `MOST_SUMMED` elements only.
    sum: Vec<u16>,
}

/// Largest order of an odd extension field whose sums are tabulated (128 KiB).
const MOST_SUMMED: u32 = 256;

const NONE: u32 = u32::MAX;

/// GF(q), q = p^m ≤ 2^16. Cloning shares the tables.
///
/// Extensions are taken modulo the Conway polynomial, whose root x is the generator of the
/// multiplicative group; in a prime field the generator is the least primitive root.
/// Making one costs O(q·m); every operation is a few table reads.
#[derive(Clone)]
pub struct Field(Arc<Tables>);

impl Field {
    /// The field of `order` elements.
    ///
    /// # Errors
    /// [`FieldError`] where `order` is no prime power or exceeds 65536.
    pub fn new(order: u64) -> Result<Self, FieldError> {
        let (p, m) = prime_power(order).ok_or(FieldError::NotPrimePower { order })?;
        if order > 1 << 16 {
            return Err(FieldError::TooLarge { order });
        }
        let (q, p) = (order as u32, p as u32);
        let modulus: Vec<u32> = conway(u64::from(p), m).into_iter().map(|c| c as u32).collect();
        let mut exp = vec![0u16; 2 * (q as usize - 1)];
        let mut log = vec![0u16; q as usize];
        let top = p.pow(m - 1);
        let mut v = 1u32;
        for k in 0..q - 1 {
            exp[k as usize] = v as u16;
            exp[(k + q - 1) as usize] = v as u16;
            log[v as usize] = k as u16;
            // Times x: shift the digits up and fold the one that overflows.
            let carry = v / top;
            let mut shifted = (v % top) * p;
            if m == 1 {
                shifted = 0;
            }
            let mut out = 0;
            let mut place = 1;
            for &c in &modulus {
                let digit = shifted % p;
                shifted /= p;
                out += ((digit + (p - c) * carry) % p) * place;
                place *= p;
            }
            v = out;
        }
        let mut field =
            Tables { order: q, prime: p, degree: m, modulus, exp, log, zech: vec![], sum: vec![] };
        if p != 2 && m > 1 {
            field.zech = (0..q - 1)
                .map(|k| {
                    let v = u32::from(field.exp[k as usize]);
                    // 1 + v touches only the lowest digit.
                    let sum = if v % p == p - 1 { v - (p - 1) } else { v + 1 };
                    if sum == 0 { NONE } else { u32::from(field.log[sum as usize]) }
                })
                .collect();
        }
        if p != 2 && m > 1 && q <= MOST_SUMMED {
            let plain = Self(Arc::new(field));
            let sum = (0..q * q).map(|k| plain.add(k / q, k % q) as u16).collect();
            field = Arc::into_inner(plain.0).expect("the only handle");
            field.sum = sum;
        }
        Ok(Self(Arc::new(field)))
    }
    /// Number of elements q.
    pub fn order(&self) -> u32 {
        self.0.order
    }
    /// The characteristic p.
    pub fn prime(&self) -> u32 {
        self.0.prime
    }
    /// The degree m over GF(p).
    pub fn degree(&self) -> u32 {
        self.0.degree
    }
    /// Coefficients of the defining polynomial below its leading one, x^0 first.
    pub fn modulus(&self) -> &[u32] {
        &self.0.modulus
    }
    /// The generator of the multiplicative group on which the logarithms stand.
    pub fn generator(&self) -> u32 {
        self.exp(1)
    }
    /// a + b.
    #[inline]
    pub fn add(&self, a: u32, b: u32) -> u32 {
        let t = &*self.0;
        debug_assert!(a < t.order && b < t.order);
        if t.degree == 1 {
            let s = a + b;
            return if s >= t.order { s - t.order } else { s };
        }
        if t.prime == 2 {
            return a ^ b;
        }
        if a == 0 {
            return b;
        }
        if b == 0 {
            return a;
        }
        let (la, lb) = (u32::from(t.log[a as usize]), u32::from(t.log[b as usize]));
        let (low, apart) = if lb >= la { (la, lb - la) } else { (lb, la - lb) };
        match t.zech[apart as usize] {
            NONE => 0,
            z => u32::from(t.exp[(low + z) as usize]),
        }
    }
    /// −a.
    #[inline]
    pub fn neg(&self, a: u32) -> u32 {
        let t = &*self.0;
        if a == 0 || t.prime == 2 {
            a
        } else if t.degree == 1 {
            t.order - a
        } else {
            // −1 = g^{(q−1)/2}.
            let half = (t.order - 1) / 2;
            u32::from(t.exp[(u32::from(t.log[a as usize]) + half) as usize])
        }
    }
    /// a − b.
    #[inline]
    pub fn sub(&self, a: u32, b: u32) -> u32 {
        self.add(a, self.neg(b))
    }
    /// a·b.
    #[inline]
    pub fn mul(&self, a: u32, b: u32) -> u32 {
        let t = &*self.0;
        debug_assert!(a < t.order && b < t.order);
        if a == 0 || b == 0 {
            return 0;
        }
        u32::from(t.exp[usize::from(t.log[a as usize]) + usize::from(t.log[b as usize])])
    }
    /// 1/a.
    ///
    /// # Panics
    /// Where a = 0.
    #[inline]
    #[track_caller]
    pub fn inv(&self, a: u32) -> u32 {
        assert!(a != 0, "zero has no inverse");
        let t = &*self.0;
        u32::from(
            t.exp[(t.order - 1 - u32::from(t.log[a as usize])) as usize % (t.order as usize - 1)],
        )
    }
    /// a^e, with a^0 = 1.
    pub fn pow(&self, a: u32, e: u64) -> u32 {
        if e == 0 {
            return 1;
        }
        if a == 0 {
            return 0;
        }
        let n = u64::from(self.0.order - 1);
        let l = u64::from(self.0.log[a as usize]) * (e % n);
        self.exp((l % n) as u32)
    }
    /// The generator to the power k.
    pub fn exp(&self, k: u32) -> u32 {
        u32::from(self.0.exp[(k % (self.0.order - 1)) as usize])
    }
    /// The logarithm of a to the base of the generator; `None` for zero.
    pub fn log(&self, a: u32) -> Option<u32> {
        (a != 0).then(|| u32::from(self.0.log[a as usize]))
    }
    /// The trace Σ a^{p^i} over i < m, an element of GF(p).
    pub fn trace(&self, a: u32) -> u32 {
        let mut sum = 0;
        let mut term = a;
        for _ in 0..self.0.degree {
            sum = self.add(sum, term);
            term = self.pow(term, u64::from(self.0.prime));
        }
        sum
    }
    /// The m coefficients of a, x^0 first.
    pub fn digits(&self, a: u32) -> Vec<u32> {
        let mut rest = a;
        (0..self.0.degree)
            .map(|_| {
                let d = rest % self.0.prime;
                rest /= self.0.prime;
                d
            })
            .collect()
    }
    /// The element with these coefficients, x^0 first.
    pub fn from_digits(&self, digits: &[u32]) -> u32 {
        digits.iter().rev().fold(0, |v, &d| v * self.0.prime + d % self.0.prime)
    }
    /// The m × m matrix of multiplication by a on coefficient columns: entry (i, j) is
    /// coefficient i of a·x^j.
    pub fn multiplication(&self, a: u32) -> Vec<Vec<u32>> {
        let m = self.0.degree as usize;
        let mut out = vec![vec![0; m]; m];
        for j in 0..m {
            let xj = self.0.prime.pow(j as u32);
            for (row, d) in out.iter_mut().zip(self.digits(self.mul(a, xj))) {
                row[j] = d;
            }
        }
        out
    }
    pub(super) fn log_table(&self) -> &[u16] {
        &self.0.log
    }
    /// All sums, row by row, where they are tabulated.
    pub(super) fn sum_table(&self) -> &[u16] {
        &self.0.sum
    }
    pub(super) fn exp_table(&self) -> &[u16] {
        &self.0.exp
    }
}

impl PartialEq for Field {
    fn eq(&self, other: &Self) -> bool {
        self.0.order == other.0.order
    }
}
impl Eq for Field {}
impl fmt::Debug for Field {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "GF({})", self.0.order)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn product_by_digits(f: &Field, a: u32, b: u32) -> u32 {
        let (m, p) = (f.degree() as usize, f.prime());
        let (a, b) = (f.digits(a), f.digits(b));
        let mut wide = vec![0; 2 * m - 1];
        for i in 0..m {
            for j in 0..m {
                wide[i + j] = (wide[i + j] + a[i] * b[j]) % p;
            }
        }
        for top in (m..2 * m - 1).rev() {
            let c = wide[top];
            for i in 0..m {
                wide[top - m + i] = (wide[top - m + i] + (p - f.modulus()[i]) * c) % p;
            }
        }
        f.from_digits(&wide[..m])
    }

    #[test]
    fn arithmetic_agrees_with_polynomials() {
        for q in [2, 3, 4, 5, 7, 8, 9, 16, 25, 27, 49, 64, 81, 101, 121, 125, 128, 243, 256] {
            let f = Field::new(q).unwrap();
            for a in 0..q as u32 {
                for b in 0..q as u32 {
                    let (da, db) = (f.digits(a), f.digits(b));
                    let sum: Vec<u32> = da.iter().zip(&db).map(|(x, y)| x + y).collect();
                    assert_eq!(f.add(a, b), f.from_digits(&sum), "GF({q}): {a} + {b}");
                    let expected = if f.degree() == 1 {
                        a * b % q as u32
                    } else {
                        product_by_digits(&f, a, b)
                    };
                    assert_eq!(f.mul(a, b), expected, "GF({q}): {a}·{b}");
                    assert_eq!(f.add(f.sub(a, b), b), a);
                }
                if a != 0 {
                    assert_eq!(f.mul(a, f.inv(a)), 1);
                }
                assert!(f.trace(a) < f.prime());
            }
        }
    }

    #[test]
    fn large_fields_and_refusals() {
        for q in [65536, 59049, 65521, 15625] {
            let f = Field::new(q).unwrap();
            let g = f.generator();
            assert_eq!(f.pow(g, q - 1), 1);
            assert_eq!(f.mul(g, f.inv(g)), 1);
            assert_eq!(f.add(g, f.neg(g)), 0);
        }
        assert_eq!(Field::new(6), Err(FieldError::NotPrimePower { order: 6 }));
        assert_eq!(Field::new(1), Err(FieldError::NotPrimePower { order: 1 }));
        assert_eq!(Field::new(1 << 17), Err(FieldError::TooLarge { order: 1 << 17 }));
    }
}
