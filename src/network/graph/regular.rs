//! Random regular graphs.

use super::Edges;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::collections::BTreeSet;

/// A simple graph of n vertices with d neighbours each, from the seed; nothing where there is
/// none (d ≥ n, or n·d odd).
///
/// Points, d a vertex, are paired at random, a pair that would make a loop or a double edge
/// being drawn anew; where only such pairs are left, all begins again (Combin. Probab. Comput.
/// 8, 377 (1999)). Asymptotically uniform for fixed d. Expected time O(n·d²).
pub fn regular(n: usize, d: usize, seed: u64) -> Option<Edges> {
    if d >= n || n * d % 2 == 1 {
        return None;
    }
    // Dense graphs are the complements of sparse ones.
    if 2 * d >= n {
        let rest: BTreeSet<(u32, u32)> = regular(n, n - 1 - d, seed)?.into_iter().collect();
        let n = n as u32;
        let all = (0..n).flat_map(|a| (a + 1..n).map(move |b| (a, b)));
        return Some(all.filter(|e| !rest.contains(e)).collect());
    }
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    loop {
        if let Some(mut edges) = attempt(n, d, &mut rng) {
            edges.sort_unstable();
            return Some(edges);
        }
    }
}

fn attempt(n: usize, d: usize, rng: &mut ChaCha8Rng) -> Option<Edges> {
    let mut points: Vec<u32> = (0..n as u32).flat_map(|v| std::iter::repeat_n(v, d)).collect();
    let mut neighbours: Vec<Vec<u32>> = vec![Vec::with_capacity(d); n];
    let mut edges = Vec::with_capacity(n * d / 2);
    let mut refused = 0;
    while !points.is_empty() {
        let i = rng.random_range(0..points.len());
        let j = rng.random_range(0..points.len());
        let (a, b) = (points[i], points[j]);
        if i == j || a == b || neighbours[a as usize].contains(&b) {
            refused += 1;
            if refused > 50 + 4 * points.len() && !fits(&points, &neighbours) {
                return None;
            }
            continue;
        }
        refused = 0;
        neighbours[a as usize].push(b);
        neighbours[b as usize].push(a);
        edges.push((a.min(b), a.max(b)));
        points.swap_remove(i.max(j));
        points.swap_remove(i.min(j));
    }
    Some(edges)
}

/// Whether any pair of points that are left may be joined.
fn fits(points: &[u32], neighbours: &[Vec<u32>]) -> bool {
    points.iter().enumerate().any(|(k, &a)| {
        points[k + 1..].iter().any(|&b| a != b && !neighbours[a as usize].contains(&b))
    })
}
