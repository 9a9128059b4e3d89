//! Erasure patterns in bundles: random ones of given size, all of given size, independent
//! ones of given rate.

use super::greedy::{BUNDLE, Bits, NONE, choose};
use rand::{RngCore, SeedableRng};
use rand_chacha::ChaCha8Rng;

/// The generator of one bundle: its own stream of the seed, so that bundles can be made in
/// any order and on any thread.
pub fn generator(seed: u64, bundle: u64) -> ChaCha8Rng {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    rng.set_stream(bundle);
    rng
}

/// Draws patterns; keeps its scratch space between bundles.
#[derive(Debug, Clone)]
pub struct Patterns {
    erased: Vec<Bits>,
    deck: Vec<u32>,
}

impl Patterns {
    /// For a boundary of this many legs.
    pub fn new(legs: usize) -> Self {
        Self { erased: vec![NONE; legs], deck: (0..legs as u32).collect() }
    }
    /// The patterns of the last draw, one entry a leg.
    pub fn erased(&self) -> &[Bits] {
        &self.erased
    }
    /// The erased legs of one pattern.
    pub fn legs_of(&self, pattern: usize) -> impl Iterator<Item = usize> + '_ {
        let (k, b) = (pattern / 64, pattern % 64);
        self.erased.iter().enumerate().filter(move |(_, e)| e[k] >> b & 1 == 1).map(|(l, _)| l)
    }
    fn set(&mut self, leg: usize, pattern: usize) {
        self.erased[leg][pattern / 64] |= 1 << (pattern % 64);
    }
    /// Pattern i erases `sizes[i]` legs, all such sets equally likely; patterns past the end
    /// of `sizes` erase nothing.
    ///
    /// # Panics
    /// Where there are more sizes than patterns in a bundle, or a size exceeds the boundary.
    #[track_caller]
    pub fn draw(&mut self, sizes: &[u32], rng: &mut ChaCha8Rng) {
        assert!(sizes.len() <= BUNDLE);
        let n = self.deck.len();
        self.erased.fill(NONE);
        for (i, d) in self.deck.iter_mut().enumerate() {
            *d = i as u32;
        }
        for (pattern, &size) in sizes.iter().enumerate() {
            let size = size as usize;
            assert!(size <= n, "{size} of {n} legs cannot be erased");
            // The smaller side is drawn. A shuffled deck stays shuffled evenly when its head
            // is shuffled again, so it is never put back in order within a bundle.
            let kept = size > n / 2;
            let drawn = if kept { n - size } else { size };
            if kept {
                for e in &mut self.erased {
                    e[pattern / 64] |= 1 << (pattern % 64);
                }
            }
            for i in 0..drawn {
                let j = i + below(rng, (n - i) as u32) as usize;
                self.deck.swap(i, j);
                let leg = self.deck[i] as usize;
                self.erased[leg][pattern / 64] ^= 1 << (pattern % 64);
            }
        }
    }
    /// The sets of `size` legs with numbers `first..first+count` in lexicographic order.
    ///
    /// # Panics
    /// Where `count` exceeds a bundle or the numbers exceed C(legs, size).
    #[track_caller]
    pub fn list(&mut self, size: usize, first: u128, count: usize) {
        assert!(count <= BUNDLE);
        self.erased.fill(NONE);
        let n = self.deck.len();
        let mut set = unrank(n, size, first);
        for pattern in 0..count {
            for &l in &set {
                self.set(l, pattern);
            }
            if pattern + 1 < count {
                assert!(step(&mut set, n), "fewer sets of {size} legs than asked for");
            }
        }
    }
    /// Each leg of each pattern erased independently with probability p (to within 2^−32).
    pub fn independent(&mut self, p: f64, rng: &mut ChaCha8Rng) {
        let threshold = (p.clamp(0.0, 1.0) * 4_294_967_296.0).round() as u64;
        for e in &mut self.erased {
            for word in e {
                *word = if threshold >= 1 << 32 { !0 } else { coin(threshold as u32, rng) };
            }
        }
    }
    /// Pattern i erases legs start..start+length, wrapping round.
    pub fn bursts(&mut self, bursts: &[(usize, usize)]) {
        self.erased.fill(NONE);
        let n = self.deck.len();
        for (pattern, &(start, length)) in bursts.iter().enumerate() {
            for i in 0..length.min(n) {
                self.set((start + i) % n, pattern);
            }
        }
    }
}

/// 64 coins that fall with probability threshold/2^32: the uniform number of each is
/// compared with the threshold bit by bit, and drawing ends once all are decided.
fn coin(threshold: u32, rng: &mut ChaCha8Rng) -> u64 {
    let (mut below, mut equal) = (0u64, !0u64);
    for bit in (0..32).rev() {
        if equal == 0 || threshold & ((2u32 << bit).wrapping_sub(1)) == 0 {
            break;
        }
        let r = rng.next_u64();
        if threshold >> bit & 1 == 1 {
            below |= equal & !r;
            equal &= r;
        } else {
            equal &= !r;
        }
    }
    below
}

/// A number below `bound`, each equally likely (ACM Trans. Model. Comput. Simul. 29, 3 (2019)).
fn below(rng: &mut ChaCha8Rng, bound: u32) -> u32 {
    let mut m = u64::from(rng.next_u32()) * u64::from(bound);
    if (m as u32) < bound {
        let reject = bound.wrapping_neg() % bound;
        while (m as u32) < reject {
            m = u64::from(rng.next_u32()) * u64::from(bound);
        }
    }
    (m >> 32) as u32
}

/// The set of this number among the sets of `size` of n, in lexicographic order.
fn unrank(n: usize, size: usize, mut number: u128) -> Vec<usize> {
    let mut out = Vec::with_capacity(size);
    let mut at = 0;
    while out.len() < size {
        let with = choose((n - at - 1) as u64, (size - out.len() - 1) as u64);
        if number < with {
            out.push(at);
        } else {
            number -= with;
        }
        at += 1;
    }
    out
}

/// The next set in lexicographic order; `false` at the last.
fn step(set: &mut [usize], n: usize) -> bool {
    let size = set.len();
    let Some(i) = (0..size).rev().find(|&i| set[i] < n - size + i) else { return false };
    set[i] += 1;
    for j in i + 1..size {
        set[j] = set[j - 1] + 1;
    }
    true
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sets(p: &Patterns, count: usize) -> Vec<Vec<usize>> {
        (0..count).map(|i| p.legs_of(i).collect()).collect()
    }

    #[test]
    fn lists_hold_every_set_once() {
        let mut p = Patterns::new(9);
        let mut all = Vec::new();
        for first in (0..126).step_by(50) {
            let count = 50.min(126 - first);
            p.list(4, first as u128, count);
            all.extend(sets(&p, count));
        }
        let mut sorted = all.clone();
        sorted.sort();
        sorted.dedup();
        assert_eq!((all.len(), sorted.len()), (126, 126));
        assert_eq!(all, sorted);
        assert!(all.iter().all(|s| s.len() == 4));
        p.list(0, 0, 1);
        assert_eq!(sets(&p, 1), [Vec::<usize>::new()]);
    }

    #[test]
    fn draws_have_their_size_and_are_even() {
        let mut p = Patterns::new(7);
        let mut seen = [0u32; 7];
        for bundle in 0..40 {
            let sizes: Vec<u32> = (0..256).map(|i| i % 8).collect();
            p.draw(&sizes, &mut generator(5, bundle));
            for (i, s) in sets(&p, 256).into_iter().enumerate() {
                assert_eq!(s.len(), i % 8);
                s.into_iter().for_each(|l| seen[l] += 1);
            }
        }
        // 10240 draws, each leg in half of them: 5120 ± 5·50.
        assert!(seen.iter().all(|&c| (4870..5370).contains(&c)), "{seen:?}");
    }

    #[test]
    fn coins_fall_at_their_rate() {
        let mut p = Patterns::new(400);
        for rate in [0.0, 0.1, 0.5, 0.73, 1.0] {
            p.independent(rate, &mut generator(1, 2));
            let ones: u32 = p.erased().iter().flatten().map(|w| w.count_ones()).sum();
            let n = 400.0 * BUNDLE as f64;
            let sigma = (n * rate * (1.0 - rate)).sqrt();
            assert!((f64::from(ones) - n * rate).abs() <= 4.5 * sigma, "{rate}: {ones}");
        }
    }

    #[test]
    fn bursts_wrap() {
        let mut p = Patterns::new(5);
        p.bursts(&[(3, 3), (0, 5), (2, 0)]);
        assert_eq!(sets(&p, 3), [vec![0, 3, 4], vec![0, 1, 2, 3, 4], vec![]]);
    }
}
