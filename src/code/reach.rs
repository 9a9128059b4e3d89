//! Intervals: the shortest that recover a bulk leg, and bursts that lose it.

use super::erasure::Target;
use super::{Code, Held};
use crate::entropy::closure::{Front, Side};
use crate::watch::Watch;
use rayon::prelude::*;
use serde::Serialize;

/// For every start of an interval and every bulk leg the least length that recovers it.
///
/// An interval that recovers a leg keeps doing so when it grows, so this holds the answer for
/// every interval of the boundary.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Reach {
    boundary: usize,
    bulk: usize,
    /// Start by start, bulk leg by bulk leg; boundary + 1 where no interval will do.
    lengths: Vec<u32>,
}

/// The shortest intervals that recover a bulk leg.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Shortest {
    /// Their length; `None` where not even the whole boundary recovers the leg.
    pub length: Option<usize>,
    /// Where they start.
    pub starts: Vec<usize>,
}

/// How bursts (located erasures of neighbouring legs) hurt.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Bursts {
    /// For each length 0..=n, the number of the n bursts of that length that lose the target.
    pub losing: Vec<usize>,
    /// The shortest burst that loses the target; `None` where none does.
    pub shortest: Option<usize>,
    /// The longest length of which no burst loses the target.
    pub safe: usize,
}

impl Reach {
    /// By closure, growing each interval leg by leg: O(legs) a start.
    pub fn greedy(code: &Code<'_>, watch: &dyn Watch) -> Self {
        let (n, k) = (code.boundary(), code.bulk());
        let wires = code.wires();
        let mut bulk_at: Vec<Vec<u32>> = vec![Vec::new(); wires.nodes()];
        for b in 0..k {
            for end in wires.ends(wires.open_wire(n + b)) {
                if let crate::entropy::End::Node { node, .. } = end {
                    bulk_at[node as usize].push(b as u32);
                }
            }
        }
        let one = |start: usize| {
            let mut lengths = vec![n as u32 + 1; k];
            if watch.stop() {
                return lengths;
            }
            let mut front = Front::new(wires, Side::Region);
            let mut owner = vec![None; wires.nodes()];
            let mut left = k;
            for length in 1..=n {
                front.learn_open((start + length - 1) % n);
                while let Some(node) = front.step(&mut owner, &|_| true) {
                    for &b in &bulk_at[node as usize] {
                        lengths[b as usize] = length as u32;
                        left -= 1;
                    }
                }
                if left == 0 {
                    break;
                }
            }
            lengths
        };
        Self::collect(n, k, one)
    }
    /// By ranks (stabilizer codes): the interval recovers a leg while the rest holds no
    /// operator that acts on it. One elimination a start.
    ///
    /// # Panics
    /// Where the code has no stabilizer form.
    #[track_caller]
    pub fn exact(code: &Code<'_>, watch: &dyn Watch) -> Self {
        assert!(code.is_stabilizer(), "ranks need a stabilizer code");
        let (n, k) = (code.boundary(), code.bulk());
        let one = |start: usize| {
            let mut lengths = vec![0u32; k];
            if watch.stop() {
                return vec![n as u32 + 1; k];
            }
            for checks in code.checks() {
                let mut held = Held::new(checks);
                let mut touched = vec![false; k];
                held.touched_since(0, &mut touched);
                let mut lengths_here: Vec<u32> =
                    touched.iter().map(|&t| if t { n as u32 + 1 } else { 0 }).collect();
                let mut left = touched.iter().filter(|t| !**t).count();
                for gone in 1..=n {
                    if left == 0 {
                        break;
                    }
                    let mark = held.rows();
                    // The complement grows backwards from the interval's start.
                    held.add((start + n - gone) % n);
                    let before = touched.clone();
                    held.touched_since(mark, &mut touched);
                    for b in 0..k {
                        if touched[b] && !before[b] {
                            lengths_here[b] = (n - gone + 1) as u32;
                            left -= 1;
                        }
                    }
                }
                for (a, b) in lengths.iter_mut().zip(lengths_here) {
                    *a = (*a).max(b);
                }
            }
            lengths
        };
        Self::collect(n, k, one)
    }
    fn collect(n: usize, k: usize, one: impl Fn(usize) -> Vec<u32> + Sync + Send) -> Self {
        let lengths = (0..n).into_par_iter().flat_map_iter(one).collect();
        Self { boundary: n, bulk: k, lengths }
    }
    /// The least length from a start that recovers a bulk leg.
    pub fn length(&self, start: usize, bulk_leg: usize) -> Option<usize> {
        let l = self.lengths[start * self.bulk + bulk_leg] as usize;
        (l <= self.boundary).then_some(l)
    }
    /// The shortest intervals that recover a bulk leg.
    pub fn shortest(&self, bulk_leg: usize) -> Shortest {
        let length = (0..self.boundary).filter_map(|s| self.length(s, bulk_leg)).min();
        let starts = (0..self.boundary)
            .filter(|&s| length.is_some() && self.length(s, bulk_leg) == length)
            .collect();
        Shortest { length, starts }
    }
    /// How bursts of every length and place hurt.
    pub fn bursts(&self, target: Target) -> Bursts {
        let n = self.boundary;
        let needed: Vec<usize> = (0..n)
            .map(|s| {
                let of = |b: usize| self.lengths[s * self.bulk + b] as usize;
                match target {
                    Target::Leg(b) => of(b),
                    Target::Every => (0..self.bulk).map(of).max().unwrap_or(0),
                }
            })
            .collect();
        // A burst loses the target when the interval behind it is too short.
        let mut losing = vec![0; n + 1];
        for need in needed {
            if n + 1 > need {
                losing[n + 1 - need] += 1;
            } else {
                losing[0] += 1;
            }
        }
        for l in 1..=n {
            losing[l] += losing[l - 1];
        }
        let shortest = losing.iter().position(|&c| c > 0);
        let safe = shortest.map_or(n, |s| s.saturating_sub(1));
        Bursts { losing, shortest, safe }
    }
}
