//! Rows of digits modulo a prime, packed as the prime allows.

use std::fmt::Debug;

/// One half (all x or all z) of a generator: a vector of digits modulo a prime.
///
/// A half of `w` words holds [`Packing::PER_WORD`]·`w` digits, so that two rows are joined
/// side by side by joining their words.
pub(super) trait Packing: Copy + Debug + Send + Sync + 'static {
    /// What the digits are packed into.
    type Word: Copy + Debug + Default + PartialEq + Send + Sync;
    /// Digits that one word holds.
    const PER_WORD: usize;
    /// The packing for this prime.
    fn new(prime: u32) -> Self;
    /// The prime.
    fn prime(&self) -> u32;
    /// A digit.
    fn get(&self, half: &[Self::Word], digit: usize) -> u32;
    /// Sets a digit below the prime.
    fn set(&self, half: &mut [Self::Word], digit: usize, value: u32);
    /// dst += c·src, 0 < c < p.
    fn add(&self, dst: &mut [Self::Word], src: &[Self::Word], c: u32);
    /// Σ a·b modulo p.
    fn dot(&self, a: &[Self::Word], b: &[Self::Word]) -> u32;
    /// Number of non-zero digits, or a number that grows with it.
    fn weight(&self, half: &[Self::Word]) -> usize;
}

/// Digits modulo 2, one bit each.
#[derive(Debug, Clone, Copy)]
pub(super) struct Bits;

impl Packing for Bits {
    type Word = u64;
    const PER_WORD: usize = 64;
    fn new(_prime: u32) -> Self {
        Self
    }
    fn prime(&self) -> u32 {
        2
    }
    #[inline(always)]
    fn get(&self, half: &[u64], digit: usize) -> u32 {
        (half[digit / 64] >> (digit % 64) & 1) as u32
    }
    fn set(&self, half: &mut [u64], digit: usize, value: u32) {
        let word = &mut half[digit / 64];
        *word = *word & !(1 << (digit % 64)) | u64::from(value) << (digit % 64);
    }
    #[inline(always)]
    fn add(&self, dst: &mut [u64], src: &[u64], _c: u32) {
        for (d, s) in dst.iter_mut().zip(src) {
            *d ^= s;
        }
    }
    fn dot(&self, a: &[u64], b: &[u64]) -> u32 {
        a.iter().zip(b).fold(0, |s, (a, b)| s ^ (a & b)).count_ones() & 1
    }
    fn weight(&self, half: &[u64]) -> usize {
        half.iter().map(|w| w.count_ones() as usize).sum()
    }
}

/// Digits modulo 3: a plane of "not zero" and a plane of "is two".
#[derive(Debug, Clone, Copy)]
pub(super) struct Trits;

/// 64 digits modulo 3: bit k of the first word says that digit k is not 0, of the second that
/// it is 2.
pub(super) type TritWord = [u64; 2];

#[inline(always)]
fn trit_sum([a0, a1]: TritWord, [b0, b1]: TritWord) -> TritWord {
    let s = a0 ^ b1;
    let t = a1 ^ b0;
    [(a0 ^ b0) | (s ^ a1), s & t]
}

impl Packing for Trits {
    type Word = TritWord;
    const PER_WORD: usize = 64;
    fn new(_prime: u32) -> Self {
        Self
    }
    fn prime(&self) -> u32 {
        3
    }
    #[inline(always)]
    fn get(&self, half: &[TritWord], digit: usize) -> u32 {
        let [s, t] = half[digit / 64];
        ((s >> (digit % 64) & 1) + (t >> (digit % 64) & 1)) as u32
    }
    fn set(&self, half: &mut [TritWord], digit: usize, value: u32) {
        let bit = digit % 64;
        let [s, t] = &mut half[digit / 64];
        *s = *s & !(1 << bit) | u64::from(value != 0) << bit;
        *t = *t & !(1 << bit) | u64::from(value == 2) << bit;
    }
    #[inline(always)]
    fn add(&self, dst: &mut [TritWord], src: &[TritWord], c: u32) {
        if c == 1 {
            for (d, &s) in dst.iter_mut().zip(src) {
                *d = trit_sum(*d, s);
            }
        } else {
            for (d, &[s, t]) in dst.iter_mut().zip(src) {
                *d = trit_sum(*d, [s, s ^ t]);
            }
        }
    }
    fn dot(&self, a: &[TritWord], b: &[TritWord]) -> u32 {
        let (mut plus, mut minus) = (0u32, 0u32);
        for (&[a0, a1], &[b0, b1]) in a.iter().zip(b) {
            let both = a0 & b0;
            let sign = (a1 ^ b1) & both;
            plus += (both & !sign).count_ones();
            minus += sign.count_ones();
        }
        (plus + 2 * minus) % 3
    }
    fn weight(&self, half: &[TritWord]) -> usize {
        half.iter().map(|w| w[0].count_ones() as usize).sum()
    }
}

/// Digits modulo any prime below 2^16, one a word.
#[derive(Debug, Clone, Copy)]
pub(super) struct Plain {
    prime: u32,
}

impl Packing for Plain {
    type Word = u16;
    const PER_WORD: usize = 1;
    fn new(prime: u32) -> Self {
        assert!(prime < 1 << 16, "digits modulo {prime} do not fit sixteen bits");
        Self { prime }
    }
    fn prime(&self) -> u32 {
        self.prime
    }
    #[inline(always)]
    fn get(&self, half: &[u16], digit: usize) -> u32 {
        u32::from(half[digit])
    }
    fn set(&self, half: &mut [u16], digit: usize, value: u32) {
        half[digit] = value as u16;
    }
    #[inline(always)]
    fn add(&self, dst: &mut [u16], src: &[u16], c: u32) {
        let p = self.prime;
        if p < 256 {
            // floor(v / p) = (v·m) >> 16 for v < 2^16 with m = ceil(2^16 / p) or one less; the
            // remainder is corrected by at most one subtraction.
            let m = (1u32 << 16) / p;
            for (d, &s) in dst.iter_mut().zip(src) {
                let v = u32::from(*d) + c * u32::from(s);
                let mut r = v - ((v * m) >> 16) * p;
                r -= if r >= p { p } else { 0 };
                r -= if r >= p { p } else { 0 };
                *d = r as u16;
            }
        } else {
            for (d, &s) in dst.iter_mut().zip(src) {
                let v = u64::from(*d) + u64::from(c) * u64::from(s);
                *d = (v % u64::from(p)) as u16;
            }
        }
    }
    fn dot(&self, a: &[u16], b: &[u16]) -> u32 {
        let sum: u64 = a.iter().zip(b).map(|(&a, &b)| u64::from(a) * u64::from(b)).sum();
        (sum % u64::from(self.prime)) as u32
    }
    fn weight(&self, half: &[u16]) -> usize {
        half.iter().filter(|&&d| d != 0).count()
    }
}

/// The inverse of a modulo the prime p.
pub(super) fn inverse(a: u32, p: u32) -> u32 {
    let (mut result, mut base, mut e) = (1u64, u64::from(a), p - 2);
    while e > 0 {
        if e & 1 == 1 {
            result = result * base % u64::from(p);
        }
        base = base * base % u64::from(p);
        e >>= 1;
    }
    result as u32
}

#[cfg(test)]
mod tests {
    use super::*;
    use rand::{Rng, SeedableRng};
    use rand_chacha::ChaCha8Rng;

    fn agrees<P: Packing>(prime: u32) {
        let packing = P::new(prime);
        let mut rng = ChaCha8Rng::seed_from_u64(u64::from(prime));
        let n = 150usize;
        let words = n.div_ceil(P::PER_WORD);
        for _ in 0..40 {
            let a: Vec<u32> = (0..n).map(|_| rng.random_range(0..prime)).collect();
            let b: Vec<u32> = (0..n).map(|_| rng.random_range(0..prime)).collect();
            let c = rng.random_range(1..prime);
            let pack = |v: &[u32]| {
                let mut half = vec![P::Word::default(); words];
                for (k, &d) in v.iter().enumerate() {
                    packing.set(&mut half, k, d);
                }
                half
            };
            let (mut pa, pb) = (pack(&a), pack(&b));
            let dot: u64 = a.iter().zip(&b).map(|(&a, &b)| u64::from(a) * u64::from(b)).sum();
            assert_eq!(u64::from(packing.dot(&pa, &pb)), dot % u64::from(prime));
            assert_eq!(packing.weight(&pa), a.iter().filter(|&&d| d != 0).count());
            packing.add(&mut pa, &pb, c);
            for k in 0..n {
                let by_hand = (u64::from(a[k]) + u64::from(c) * u64::from(b[k])) % u64::from(prime);
                assert_eq!(u64::from(packing.get(&pa, k)), by_hand, "p = {prime}");
            }
        }
    }

    #[test]
    fn packed_digits_add_and_multiply_like_plain_ones() {
        agrees::<Bits>(2);
        agrees::<Trits>(3);
        for p in [2, 3, 5, 7, 13, 127, 251, 257, 65521] {
            agrees::<Plain>(p);
            assert_eq!(u64::from(inverse(p - 1, p)) * u64::from(p - 1) % u64::from(p), 1);
        }
    }
}
