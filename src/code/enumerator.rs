//! Weight enumerators of small stabilizer codes.

use super::checks::Checks;
use super::greedy::choose;
use super::span::Packing;
use super::{Code, CodeError};
use rayon::prelude::*;

/// How many operators of each weight a code has; the weight is the number of boundary legs
/// on which an operator acts.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Enumerator {
    /// A_w: elements of the stabilizer group.
    pub stabilizer: Vec<u128>,
    /// B_w: operators that commute with the stabilizer group.
    pub normalizer: Vec<u128>,
}

impl Enumerator {
    /// The least w with B_w > A_w: the distance, where something is encoded.
    pub fn distance(&self) -> Option<usize> {
        (1..self.normalizer.len()).find(|&w| self.normalizer[w] > self.stabilizer[w])
    }
}

/// Most elements that are listed one by one.
pub const MOST: u128 = 1 << 30;

/// Counts the stabilizer group element by element and turns the counts into the
/// normalizer's by the quantum MacWilliams identity (PRL 78, 1600 (1997), from memory):
/// B(w) = |S|⁻¹ Σ_i A_i K_w(i), Krawtchouk polynomials over an alphabet of q².
///
/// Only for one prime and legs of one dimension; p^checks elements are visited.
///
/// # Errors
/// [`CodeError::NotStabilizer`], [`CodeError::TooLarge`].
pub fn enumerate(code: &Code<'_>) -> Result<Enumerator, CodeError> {
    let question = "the weight enumerator";
    let [checks] = code.checks() else { return Err(code.not_stabilizer(question)) };
    let n = checks.boundary();
    let p = u128::from(checks.prime());
    let digits = checks.digits(0);
    if (1..n).any(|l| checks.digits(l) != digits) {
        return Err(CodeError::TooLarge {
            question,
            need: "boundary legs of several dimensions".into(),
            limit: "one".into(),
        });
    }
    let size = (0..checks.count()).try_fold(1u128, |s, _| s.checked_mul(p));
    let size = size.filter(|&s| s <= MOST).ok_or_else(|| CodeError::TooLarge {
        question,
        need: format!("{p}^{} elements", checks.count()),
        limit: format!("{MOST}"),
    })?;
    let stabilizer = count(checks);
    let q2 = p.pow(2 * digits as u32);
    let normalizer = (0..=n)
        .map(|w| {
            let sum: i128 = stabilizer
                .iter()
                .enumerate()
                .map(|(i, &a)| a as i128 * krawtchouk(n as u64, w as u64, i as u64, q2 as i128))
                .sum();
            (sum / size as i128) as u128
        })
        .collect();
    Ok(Enumerator { stabilizer, normalizer })
}

/// K_w(i) = Σ_j (−1)^j C(i,j) C(n−i,w−j) (Q−1)^{w−j}.
fn krawtchouk(n: u64, w: u64, i: u64, alphabet: i128) -> i128 {
    (0..=w.min(i))
        .filter(|j| w - j <= n - i)
        .map(|j| {
            let sign = if j % 2 == 0 { 1 } else { -1 };
            sign * choose(i, j) as i128
                * choose(n - i, w - j) as i128
                * (alphabet - 1).pow((w - j) as u32)
        })
        .sum()
}

/// Counts elements of the stabilizer group by weight; the first few generators are spread
/// over threads, the rest run through in an order that changes one generator at a time.
fn count(checks: &Checks) -> Vec<u128> {
    let n = checks.boundary();
    let digits = checks.boundary_digits();
    let p = u64::from(checks.prime());
    let packing = Packing { prime: p, width: 2 * digits };
    let rows: Vec<Vec<u64>> = checks
        .rows()
        .iter()
        .map(|r| {
            let mut v = vec![0; packing.stride()];
            for d in 0..digits {
                packing.set(&mut v, 2 * d, u64::from(r[d]));
                packing.set(&mut v, 2 * d + 1, u64::from(r[digits + d]));
            }
            v
        })
        .collect();
    let ahead = (0..=rows.len()).find(|&a| a == rows.len() || p.pow(a as u32) >= 64).unwrap_or(0);
    let (first, rest) = rows.split_at(ahead);
    (0..p.pow(ahead as u32))
        .into_par_iter()
        .map(|number| {
            let mut v = vec![0; packing.stride()];
            let mut left = number;
            for r in first {
                packing.add(&mut v, left % p, r, 0);
                left /= p;
            }
            let mut out = vec![0u128; n + 1];
            // Adding a row p times adds nothing, so a digit that wraps needs no undoing.
            let mut counter = vec![0u64; rest.len()];
            loop {
                out[weight(checks, packing, &v)] += 1;
                let mut i = 0;
                loop {
                    if i == rest.len() {
                        return out;
                    }
                    packing.add(&mut v, 1, &rest[i], 0);
                    counter[i] += 1;
                    if counter[i] < p {
                        break;
                    }
                    counter[i] = 0;
                    i += 1;
                }
            }
        })
        .reduce(
            || vec![0; n + 1],
            |mut a, b| {
                a.iter_mut().zip(b).for_each(|(a, b)| *a += b);
                a
            },
        )
}

fn weight(checks: &Checks, packing: Packing, v: &[u64]) -> usize {
    if packing.prime == 2 && checks.boundary_digits() == checks.boundary() {
        const LOW: u64 = 0x5555_5555_5555_5555;
        return v.iter().map(|w| ((w | w >> 1) & LOW).count_ones() as usize).sum();
    }
    (0..checks.boundary()).filter(|&l| !packing.vanishes(v, checks.columns_of(l))).count()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::code::samples::{pentagons, state_of};
    use crate::tiling::Rule;

    /// The five-qubit code has A = 1,0,0,0,15,0 and B = 1,0,0,30,15,18 (PRL 78, 1600 (1997),
    /// from memory); [[20,6,3]] by the independent exhaustive rank test.
    #[test]
    fn known_enumerators() {
        let net = pentagons(0, Rule::Edge);
        let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
        let e = enumerate(&code).unwrap();
        assert_eq!(e.stabilizer, [1, 0, 0, 0, 15, 0]);
        assert_eq!(e.normalizer, [1, 0, 0, 30, 15, 18]);
        assert_eq!(e.distance(), Some(3));
        let net = pentagons(1, Rule::Edge);
        let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
        let e = enumerate(&code).unwrap();
        assert_eq!(e.stabilizer.iter().sum::<u128>(), 1 << 14);
        assert_eq!(e.normalizer.iter().sum::<u128>(), 1 << 26);
        assert_eq!(e.distance(), Some(3));
    }
}
