//! Checks that sit on few legs next to each other.

use super::checks::Checks;
use super::span::{Packing, Span, inverse};

/// One check with its row packed for the order of columns at hand.
struct Row {
    words: Vec<u64>,
    first: usize,
    last: usize,
}

/// An independent set of checks of small weight that generates all of them.
///
/// For several cuts of the circle of boundary legs the checks are brought into the form with
/// the shortest spans (leading places distinct, trailing places distinct; IEEE Trans. Inf.
/// Theory 42, 1072 (1996), from memory, there for trellises); of all these rows the lightest
/// independent ones are kept. O(cuts·checks²·legs/64) for p = 2.
pub(super) fn short_checks(checks: &Checks, cuts: usize) -> Vec<Vec<u32>> {
    let n = checks.boundary_digits();
    let p = u64::from(checks.prime());
    let packing = Packing { prime: p, width: 2 * n };
    let mut pool: Vec<(usize, Vec<u32>)> = Vec::new();
    for cut in 0..cuts.max(1) {
        let shift = cut * n / cuts.max(1);
        let place = |d: usize| 2 * ((d + n - shift) % n);
        let rows: Vec<Vec<u64>> = checks
            .rows()
            .iter()
            .map(|r| {
                let mut w = vec![0; packing.stride()];
                for d in 0..n {
                    packing.set(&mut w, place(d), u64::from(r[d]));
                    packing.set(&mut w, place(d) + 1, u64::from(r[n + d]));
                }
                w
            })
            .collect();
        for row in shortest_spans(rows, packing) {
            let mut r = vec![0u32; 2 * n];
            for d in 0..n {
                r[d] = packing.get(&row, place(d)) as u32;
                r[n + d] = packing.get(&row, place(d) + 1) as u32;
            }
            let weight = (0..checks.boundary()).filter(|&l| acts(checks, &r, l)).count();
            pool.push((weight, r));
        }
    }
    pool.sort();
    let mut span = Span::new(packing);
    let mut out = Vec::new();
    for (_, r) in pool {
        let mut w = vec![0; packing.stride()];
        for (i, &x) in r.iter().enumerate() {
            packing.set(&mut w, i, u64::from(x));
        }
        if span.push(&w).is_some() {
            out.push(r);
        }
    }
    out
}

/// Whether a row (x|z) acts on a boundary leg.
pub(super) fn acts(checks: &Checks, row: &[u32], leg: usize) -> bool {
    let n = checks.boundary_digits();
    let columns = checks.columns_of(leg);
    (columns.start / 2..columns.end / 2).any(|d| row[d] != 0 || row[n + d] != 0)
}

fn shortest_spans(rows: Vec<Vec<u64>>, packing: Packing) -> Vec<Vec<u64>> {
    let p = packing.prime;
    let mut span = Span::new(packing);
    for r in &rows {
        span.push(r);
    }
    let ends = |w: &[u64]| {
        let last = (0..packing.width).rev().find(|&i| packing.get(w, i) != 0);
        last.unwrap_or(0)
    };
    let mut rows: Vec<Row> = (0..span.dimension())
        .map(|r| {
            let words = span.row(r).to_vec();
            let last = ends(&words);
            Row { words, first: span.pivot(r), last }
        })
        .collect();
    rows.sort_by_key(|r| std::cmp::Reverse(r.first));
    // Rows come latest start first; each is freed of the trailing places of those before.
    let mut owner: Vec<Option<usize>> = vec![None; packing.width];
    for i in 0..rows.len() {
        let (done, rest) = rows.split_at_mut(i);
        let row = &mut rest[0];
        while let Some(j) = owner[row.last] {
            let other = &done[j].words;
            let c =
                packing.get(&row.words, row.last) * inverse(packing.get(other, row.last), p) % p;
            packing.add(&mut row.words, p - c, other, 0);
            row.last = ends(&row.words);
        }
        owner[row.last] = Some(i);
    }
    rows.into_iter().map(|r| r.words).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::code::samples::{pentagons, state_of};
    use crate::tiling::Rule;

    #[test]
    fn outer_tiles_give_checks_on_their_own_legs() {
        let net = pentagons(1, Rule::Edge);
        let checks = Checks::of(&state_of(&net), 20);
        let rows = short_checks(&checks, 4);
        assert_eq!(rows.len(), 14);
        // Each of the five outer tiles has four legs and two checks on them (2·4 − 6).
        let weights: Vec<usize> =
            rows.iter().map(|r| (0..20).filter(|&l| acts(&checks, r, l)).count()).collect();
        assert!(weights.iter().filter(|&&w| w <= 4).count() >= 10, "{weights:?}");
    }
}
