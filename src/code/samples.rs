//! Codes for tests, and a slow, obvious contraction of their stabilizer groups.

use super::checks::tests::five_one_three;
use super::span::{Packing, Span};
use crate::block::{Block, Entries, IsometryTable, PrimePart, SparseEntries, Stabilizer};
use crate::network::{Layout, Network, NetworkBuilder};
use crate::tensor::Label;
use crate::tiling::{Centre, Growth, Rule, grow};
use std::sync::Arc;

pub(crate) fn six_leg() -> Arc<Block> {
    let part = Arc::new(five_one_three());
    Arc::new(Block::lazy(
        "six-leg",
        vec![2; 6],
        IsometryTable::perfect(6),
        Some(Stabilizer { parts: vec![part] }),
        || Entries::Sparse(SparseEntries::collect(vec![2; 6], Vec::new())),
    ))
}

/// Tiles of the {5|6, 4} tiling by rings; pentagons carry a bulk leg where `bulk(ring)`.
pub(crate) fn tiled(polygons: &[u32], keep_last: bool, rings: u32, rule: Rule) -> Network {
    let growth = Growth {
        polygons: polygons.to_vec(),
        keep_last,
        around: 4,
        rings,
        centre: Centre::Tile,
        rule,
    };
    let patch = grow(&growth, 1_000_000).unwrap();
    let block = six_leg();
    let mut b = NetworkBuilder::new("sample");
    let mut label: Vec<Option<Label>> = vec![None; patch.sides()];
    let mut ring = Vec::new();
    let mut bulk = Vec::new();
    for tile in 0..patch.tiles() as u32 {
        let mut legs = Vec::new();
        for side in 0..patch.sides_of(tile) {
            let here = patch.number(crate::tiling::Side { tile, side });
            let l = match patch.glued(here) {
                Some(there) if label[there].is_some() => label[there].unwrap(),
                _ => b.label(&format!("x{here}"), 2),
            };
            label[here] = Some(l);
            legs.push(l);
        }
        if legs.len() == 5 {
            let l = b.label(&format!("k{tile}"), 2);
            bulk.push(l);
            legs.push(l);
        }
        b.tensor(None, &legs, &block).unwrap();
        ring.push(patch.ring_of(tile));
    }
    b.boundary(patch.boundary_numbers().iter().map(|&n| label[n as usize].unwrap()));
    b.bulk(bulk);
    b.layout(Layout { ring, tiling: Some((5, 4)), ..Layout::default() });
    b.finish().unwrap()
}

/// The pentagon code.
pub(crate) fn pentagons(rings: u32, rule: Rule) -> Network {
    tiled(&[5], false, rings, rule)
}

/// Stabilizers of the state on the open legs of a network of qubit stabilizer tensors whose
/// bonds join two legs: all generators side by side, then every bond in turn restricted to
/// x_a = x_b, z_a = −z_b and dropped. Signs are left out. Cubic in the number of legs.
pub(crate) fn state_of(net: &Network) -> PrimePart {
    let mut columns: Vec<Label> = Vec::new();
    for t in net.tensor_ids() {
        columns.extend_from_slice(net.legs(t));
    }
    let n = columns.len();
    let mut rows: Vec<Vec<u32>> = Vec::new();
    let mut at = 0;
    for t in net.tensor_ids() {
        let part = &net.block(t).stabilizer().unwrap().parts[0];
        let w = part.width();
        for g in &part.generators {
            let mut row = vec![0; 2 * n];
            row[at..at + w].copy_from_slice(&g[..w]);
            row[n + at..n + at + w].copy_from_slice(&g[w..]);
            rows.push(row);
        }
        at += w;
    }
    let open: Vec<Label> = net.boundary().iter().chain(net.bulk()).copied().collect();
    let place = |l: Label| columns.iter().position(|&c| c == l).unwrap();
    // Pivot first on what must vanish: x_a + x_b and z_a + z_b of every bond.
    let mut front: Vec<[usize; 2]> = Vec::new();
    for l in (0..net.labels() as u32).map(Label::new).filter(|l| !open.contains(l)) {
        let ends: Vec<usize> = (0..n).filter(|&c| columns[c] == l).collect();
        assert_eq!(ends.len(), 2);
        front.push([ends[0], ends[1]]);
        front.push([n + ends[0], n + ends[1]]);
    }
    let kept: Vec<usize> =
        open.iter().map(|&l| place(l)).chain(open.iter().map(|&l| n + place(l))).collect();
    let packing = Packing { prime: 2, width: front.len() + kept.len() };
    let mut span = Span::new(packing);
    let mut v = vec![0; packing.stride()];
    for row in &rows {
        v.fill(0);
        for (i, [a, b]) in front.iter().enumerate() {
            packing.set(&mut v, i, u64::from(row[*a] ^ row[*b]));
        }
        for (i, &c) in kept.iter().enumerate() {
            packing.set(&mut v, front.len() + i, u64::from(row[c]));
        }
        span.push(&v);
    }
    let generators = (0..span.dimension())
        .filter(|&r| span.pivot(r) >= front.len())
        .map(|r| {
            (0..kept.len()).map(|i| packing.get(span.row(r), front.len() + i) as u32).collect()
        })
        .collect::<Vec<Vec<u32>>>();
    assert_eq!(generators.len(), open.len());
    let phases = vec![0; generators.len()];
    PrimePart { prime: 2, digits: vec![1; open.len()], generators, phases }
}
