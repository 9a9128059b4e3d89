//! Small patches of {p,q}, grown by coordinates: slow, obvious, independent of the library's
//! own growth.

#![allow(clippy::needless_range_loop)] // tiles and sides are named by number throughout

use lierne::block::{Block, Entries, IsometryTable, SparseEntries};
use lierne::network::{Network, NetworkBuilder};
use num_complex::Complex64;
use std::collections::BTreeMap;
use std::f64::consts::{PI, TAU};
use std::sync::Arc;

/// A block that is never asked for its numbers.
pub fn blank(legs: usize) -> Arc<Block> {
    let dims = vec![2; legs];
    Arc::new(Block::lazy("blank", dims.clone(), IsometryTable::unknown(legs), None, move || {
        Entries::Sparse(SparseEntries::collect(dims.clone(), vec![]))
    }))
}

/// The patch as a network with a tile's legs counter-clockwise, and its tiles' centres.
pub fn grow(p: usize, q: usize, rings: usize) -> (Network, Vec<Complex64>) {
    let kappa = match ((p - 2) * (q - 2)).cmp(&4) {
        std::cmp::Ordering::Less => -1.0,
        std::cmp::Ordering::Equal => 0.0,
        std::cmp::Ordering::Greater => 1.0,
    };
    let (a, b) = (PI / p as f64, PI / q as f64);
    // Twice the inradius, on paper.
    let step = match kappa {
        1.0 => (b.cos() / a.sin()).acosh().tanh(),
        0.0 => 1.0 / a.tan(),
        _ => (b.cos() / a.sin()).acos().tan(),
    };
    let carry = |c: Complex64, z: Complex64| (z + c) / (1.0 + kappa * c.conj() * z);
    let mut tiles: Vec<(Complex64, f64)> = vec![(Complex64::new(0.0, 0.0), -PI / 2.0)];
    let mut glue: Vec<Vec<Option<(usize, usize)>>> = vec![vec![None; p]];
    let mut ring = vec![0u32];
    let mut start = 0;
    for r in 1..=rings {
        let end = tiles.len();
        for t in start..end {
            for s in 0..p {
                let (c, turn) = tiles[t];
                let z = carry(c, Complex64::from_polar(step, turn + TAU * s as f64 / p as f64));
                if tiles.iter().any(|(c, _)| {
                    (c - z).norm() < 1e-6 * (1.0 - kappa * z.norm_sqr()).abs().max(1e-3)
                }) {
                    continue;
                }
                let back = carry(-z, c).arg();
                tiles.push((z, back));
                glue.push(vec![None; p]);
                ring.push(r as u32);
            }
        }
        start = end;
    }
    let centre = |t: usize, s: usize| {
        let (c, turn) = tiles[t];
        carry(c, Complex64::from_polar(step, turn + TAU * s as f64 / p as f64))
    };
    let n = tiles.len();
    for t in 0..n {
        for s in 0..p {
            let z = centre(t, s);
            let scale = (1.0 - kappa * z.norm_sqr()).abs().max(1e-3);
            if let Some(u) = (0..n).find(|&u| (tiles[u].0 - z).norm() < 1e-6 * scale) {
                let s2 = (0..p)
                    .find(|&s2| (centre(u, s2) - tiles[t].0).norm() < 1e-6 * scale)
                    .expect("neighbours touch");
                glue[t][s] = Some((u, s2));
            }
        }
    }
    let block = blank(p);
    let mut builder = NetworkBuilder::new(format!("{{{p},{q}}}, {rings} rings"));
    let mut labels = BTreeMap::new();
    for t in 0..n {
        for s in 0..p {
            let name = match glue[t][s] {
                Some(other) if other < (t, s) => continue,
                Some(_) => format!("x{t}.{s}"),
                None => format!("b{t}.{s}"),
            };
            labels.insert((t, s), builder.label(&name, 2));
        }
    }
    let label = |t: usize, s: usize| {
        labels
            .get(&(t, s))
            .copied()
            .or_else(|| labels.get(&glue[t][s]?).copied())
            .expect("every side has a label")
    };
    for t in 0..n {
        let legs: Vec<_> = (0..p).map(|s| label(t, s)).collect();
        builder.tensor(None, &legs, &block).expect("p legs");
    }
    // Round the boundary: from an open side to the next corner, and on through the tiles
    // that meet there.
    let open: Vec<(usize, usize)> = (0..n)
        .flat_map(|t| (0..p).map(move |s| (t, s)))
        .filter(|&(t, s)| glue[t][s].is_none())
        .collect();
    if let Some(&first) = open.first() {
        let mut at = first;
        let mut order = Vec::new();
        loop {
            order.push(label(at.0, at.1));
            let mut next = (at.0, (at.1 + 1) % p);
            while let Some((u, s)) = glue[next.0][next.1] {
                next = (u, (s + 1) % p);
            }
            at = next;
            if at == first {
                break;
            }
        }
        assert_eq!(order.len(), open.len(), "one rim");
        builder.boundary(order);
    }
    let mut layout = lierne::network::Layout::default();
    layout.ring = ring;
    layout.tiling = Some((p as u32, q as u32));
    layout.place = tiles.iter().map(|(c, _)| [c.re, c.im]).collect();
    builder.layout(layout);
    (builder.finish().expect("a sound network"), tiles.iter().map(|t| t.0).collect())
}
