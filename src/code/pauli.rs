//! Generalised Pauli operators with their phases, and words for them.

use serde::Serialize;
use thiserror::Error;

/// X^x Z^z on one digit of a leg.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize)]
pub struct Factor {
    /// The boundary leg.
    pub site: usize,
    /// The prime.
    pub prime: u32,
    /// Which of the leg's digits of that prime.
    pub digit: usize,
    /// Power of X.
    pub x: u32,
    /// Power of Z.
    pub z: u32,
}

/// Powers of X and Z on one digit of a bulk leg.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Power {
    /// The prime.
    pub prime: u32,
    /// Which of the leg's digits of that prime.
    pub digit: usize,
    /// Power of X.
    pub x: u32,
    /// Power of Z.
    pub z: u32,
}

/// A word that names no operator.
#[derive(Debug, Error, Clone, PartialEq, Eq)]
#[error(
    "operator {word:?} of {text:?} is not understood; write I, X, Z, X2, Z3 or X2Z, one word a digit, with a space between digits"
)]
pub struct WordError {
    /// The word.
    pub word: String,
    /// The whole text.
    pub text: String,
}

/// Reads `X`, `Z`, `XZ`, `X2Z3`, `I`: one word for each digit (prime, digit) of a leg, in
/// order; digits without a word get the identity. X^x stands left of Z^z.
///
/// # Errors
/// [`WordError`].
pub fn parse(text: &str, digits: &[(u32, usize)]) -> Result<Vec<Power>, WordError> {
    let words: Vec<&str> = text.split_whitespace().collect();
    let bad = |word: &str| WordError { word: word.to_owned(), text: text.to_owned() };
    if words.is_empty() || words.len() > digits.len() {
        return Err(bad(words.get(digits.len()).unwrap_or(&"")));
    }
    digits
        .iter()
        .enumerate()
        .map(|(i, &(prime, digit))| {
            let word = words.get(i).copied().unwrap_or("I");
            let (x, z) = powers(word).ok_or_else(|| bad(word))?;
            Ok(Power { prime, digit, x: x % prime, z: z % prime })
        })
        .collect()
}

fn powers(word: &str) -> Option<(u32, u32)> {
    let upper = word.to_ascii_uppercase();
    if upper == "I" {
        return Some((0, 0));
    }
    let mut rest = upper.as_str();
    let mut out = (0, 0);
    for (letter, slot) in [('X', &mut out.0), ('Z', &mut out.1)] {
        if let Some(tail) = rest.strip_prefix(letter) {
            let end = tail.find(|c: char| !c.is_ascii_digit()).unwrap_or(tail.len());
            *slot = if end == 0 { 1 } else { tail[..end].parse().ok()? };
            rest = &tail[end..];
        }
    }
    (rest.is_empty() && upper != rest).then_some(out)
}

/// Rows (x|z; t): operators τ^t ⊗ X^x Z^z in the convention of [`crate::block::PrimePart`].
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Signed {
    pub(super) xz: Vec<u32>,
    pub(super) phase: u32,
}

impl Signed {
    /// Order of τ.
    pub(super) fn turns(prime: u32) -> u32 {
        if prime == 2 { 4 } else { prime }
    }
    /// self := self · other^c. Commuting or not: Z^z X^x = ω^{zx} X^x Z^z.
    pub(super) fn times(&mut self, other: &Signed, c: u32, prime: u32) {
        let n = self.xz.len() / 2;
        let (turns, omega) = (Self::turns(prime), if prime == 2 { 2 } else { 1 });
        for _ in 0..c % prime {
            let swap: u64 =
                (0..n).map(|d| u64::from(self.xz[n + d]) * u64::from(other.xz[d])).sum::<u64>()
                    % u64::from(prime);
            self.phase = (self.phase + other.phase + omega * swap as u32) % turns;
            for (a, &b) in self.xz.iter_mut().zip(&other.xz) {
                *a = (*a + b) % prime;
            }
        }
    }
    /// ⟨self, other⟩ = x·z' − z·x' mod p; 0 where they commute.
    pub(super) fn product(&self, other: &[u32], prime: u32) -> u32 {
        let n = self.xz.len() / 2;
        let p = u64::from(prime);
        let sum: u64 = (0..n)
            .map(|d| {
                u64::from(self.xz[d]) * u64::from(other[n + d])
                    + (p - u64::from(self.xz[n + d])) * u64::from(other[d])
            })
            .sum();
        (sum % p) as u32
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn words() {
        let digits = [(3, 0), (3, 1)];
        let read =
            |t: &str| parse(t, &digits).map(|v| v.iter().map(|p| (p.x, p.z)).collect::<Vec<_>>());
        assert_eq!(read("X"), Ok(vec![(1, 0), (0, 0)]));
        assert_eq!(read("X2Z4 z"), Ok(vec![(2, 1), (0, 1)]));
        assert_eq!(read("I XZ"), Ok(vec![(0, 0), (1, 1)]));
        for bad in ["", "Q", "XX", "X Z X", "ZX", "X-1"] {
            assert!(read(bad).is_err(), "{bad:?}");
        }
    }
}
