//! A block as the state stabilized by a group of generalised Pauli operators.

use std::sync::Arc;

/// A tensor that is a stabilizer state, prime by prime.
///
/// # Digits
/// A leg of dimension D = Π p^m (primes ascending) holds m digits of each prime p. The leg's
/// index is v₀·(D/p₀^{m₀}) + …: the value of the smallest prime's part is the most
/// significant, and within one prime v = Σ c_i p^i, digit 0 the least significant. The
/// tensor is the product over primes of the tensors described by [`PrimePart`].
///
/// For GF(p^m) the digits are the coefficients of powers of x, so that the field's sum is
/// the sum digit by digit.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Stabilizer {
    /// One part a prime that divides some leg's dimension, primes ascending.
    pub parts: Vec<Arc<PrimePart>>,
}

/// The part of a stabilizer tensor that lives on the digits of one prime.
///
/// On one digit X|j⟩ = |j+1⟩ and Z|j⟩ = ω^j|j⟩ with ω = exp(2πi/p). A generator (x|z; t)
/// is the operator τ^t ⊗_d X^{x_d} Z^{z_d} with τ = ω for odd p and τ = i for p = 2, and it
/// fixes the tensor read as a state Σ T[j…]|j…⟩ (nothing conjugated).
///
/// Invariants: (1) as many independent generators as digits; (2) they commute; (3) with
/// their phases they generate no multiple of the identity but 1.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct PrimePart {
    /// The prime.
    pub prime: u32,
    /// Digits of this prime on each leg (0 where the leg has none), in the order of legs.
    pub digits: Vec<u32>,
    /// Generators, one row each: first all x (leg by leg, digit 0 first), then all z.
    pub generators: Vec<Vec<u32>>,
    /// Exponent of τ of each generator: modulo p, or modulo 4 for p = 2.
    pub phases: Vec<u32>,
}

impl PrimePart {
    /// Digits in all.
    pub fn width(&self) -> usize {
        self.digits.iter().map(|&d| d as usize).sum()
    }
}
