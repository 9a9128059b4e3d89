//! Proven bounds on the entropy of a piece that is not solved.
//!
//! The piece is a pure state on its legs. For a set X of legs let S(X) be its entropy. Three
//! things are known about every X without any number of the tensors:
//!
//! 1. S(X) ≤ the minimal cut between X and the other legs, and S(X) ≥ 0;
//! 2. where closure absorbs the whole piece from X and its complement, S(X) is the sum over
//!    the straight wires exactly;
//! 3. S(X) = S(complement of X), because the whole is pure.
//!
//! Strong subadditivity, S(X) + S(Y) ≥ S(X∪Y) + S(X∩Y) (J. Math. Phys. 14, 1938 (1973)),
//! ties the sets together. With U and L an upper and a lower bound,
//! L(X) ← L(X∪Y) + L(X∩Y) − U(Y) and U(X∪Y) ← U(X) + U(Y) − L(X∩Y) are again bounds. With
//! purity this holds Araki and Lieb's inequality and weak monotonicity as special cases.
//! For a few legs all pairs of sets are run through until nothing improves; for more legs
//! only the steps by one and two legs away from the region are taken:
//! |S(X) − S(Y)| ≤ Σ ln(dim) over the legs in one of X and Y but not in both.

use super::closure::{Turn, close};
use super::cut::Cutter;
use super::the_core::{Piece, split};
use super::wires::Wires;

/// Most legs for which all sets of legs are run through: 4^10 pairs a round.
const ALL_SETS: usize = 10;
/// A gain below this many nats ends the rounds.
const GAIN: f64 = 1e-9;

/// Proven lower and upper bound, in nats, on the entropy between the two sides of a piece.
/// The state must not be zero.
///
/// Cost: for n ≤ 10 legs 2^n searches of the piece and a few rounds of 4^n; else about n²/2
/// searches.
pub fn bounds(piece: &Piece) -> (f64, f64) {
    let wires = Wires::of(&piece.network);
    let n = wires.open();
    let cutter = Cutter::new(&wires);
    let look = |inside: &[bool]| -> (f64, f64) {
        let cut = cutter.cut(inside);
        for turn in [Turn::RegionFirst, Turn::ComplementFirst, Turn::WithinNearCut] {
            let closure = close(&wires, inside, turn, Some(&cut));
            if closure.core_nodes() == 0 {
                let exact = split(&wires, inside, &closure)
                    .straight
                    .iter()
                    .map(|&l| (piece.network.dim(l) as f64).ln())
                    .sum();
                return (exact, exact);
            }
        }
        (0.0, cut.nats)
    };
    let region = piece.inside();
    if n <= ALL_SETS { all_sets(n, &region, look) } else { near_sets(&wires, &region, look) }
}

fn all_sets(n: usize, region: &[bool], look: impl Fn(&[bool]) -> (f64, f64)) -> (f64, f64) {
    let sets = 1usize << n;
    let full = sets - 1;
    let mut lower = vec![0.0; sets];
    let mut upper = vec![0.0; sets];
    for set in 0..sets {
        if set > full ^ set {
            continue;
        }
        let inside: Vec<bool> = (0..n).map(|k| set >> k & 1 == 1).collect();
        let (l, u) = if set == 0 { (0.0, 0.0) } else { look(&inside) };
        lower[set] = l;
        lower[full ^ set] = l;
        upper[set] = u;
        upper[full ^ set] = u;
    }
    let target = (0..n).filter(|&k| region[k]).fold(0, |m, k| m | 1 << k);
    loop {
        let mut gained = false;
        for x in 0..sets {
            for y in 0..sets {
                let (join, meet) = (x | y, x & y);
                let l = lower[join] + lower[meet] - upper[y];
                if l > lower[x] + GAIN {
                    lower[x] = l;
                    lower[full ^ x] = l;
                    gained = true;
                }
                let u = upper[x] + upper[y] - lower[meet];
                if u < upper[join] - GAIN {
                    upper[join] = u;
                    upper[full ^ join] = u;
                    gained = true;
                }
            }
        }
        if !gained {
            return (lower[target], upper[target].max(lower[target]));
        }
    }
}

fn near_sets(
    wires: &Wires<'_>,
    region: &[bool],
    look: impl Fn(&[bool]) -> (f64, f64),
) -> (f64, f64) {
    let n = region.len();
    let weight = |k: usize| (wires.dim(wires.open_wire(k)) as f64).ln();
    let mut inside = region.to_vec();
    let (mut lower, mut upper) = look(&inside);
    for a in 0..n {
        inside[a] = !inside[a];
        for b in a..n.min(a + 64) {
            let mut moved = weight(a);
            if b > a {
                inside[b] = !inside[b];
                moved += weight(b);
            }
            let (l, u) = look(&inside);
            lower = lower.max(l - moved);
            upper = upper.min(u + moved);
            if b > a {
                inside[b] = !inside[b];
            }
        }
        inside[a] = !inside[a];
    }
    (lower, upper.max(lower))
}
