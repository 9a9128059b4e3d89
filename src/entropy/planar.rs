//! Minimal cuts of all intervals of a planar patch: shortest paths in the dual.

use super::cut::weights;
use super::wires::{End, Wires};
use std::cmp::Reverse;
use std::collections::BinaryHeap;

/// The faces of a planar patch and the wires between them.
///
/// The legs of every tensor, in their order, turn counter-clockwise about it, and the
/// boundary legs end on a circle, in counter-clockwise order. Two corners meet in a face; a
/// gap between neighbouring boundary legs is a face at the circle. Severing wires along a
/// path of faces from one gap to another separates the interval between them from the rest,
/// and every minimal cut of an interval is such a path.
#[derive(Debug, Clone)]
pub struct Planar {
    /// Face of the gap before each boundary site.
    gaps: Vec<u32>,
    starts: Vec<u32>,
    /// (face, weight, label) across each wire.
    across: Vec<(u32, u64, u32)>,
    /// ln of the dimension that weighs 1.
    nats_per_weight: f64,
}

impl Planar {
    /// Reads the faces off the order of legs; `None` where the network is no planar patch (by
    /// Euler's formula), is not connected, or has bulk legs or hyperedges.
    pub fn of(wires: &Wires<'_>) -> Option<Self> {
        let network = wires.network();
        let nodes = wires.nodes();
        if nodes != network.tensors() || !network.bulk().is_empty() || wires.open() == 0 {
            return None;
        }
        // Darts: one for each end of each wire. An end on the circle belongs to the circle.
        let dart = |wire: u32, side: usize| 2 * wire as usize + side;
        let side_of = |wire: u32, node: u32, leg: u32| {
            usize::from(wires.ends(wire)[0] != End::Node { node, leg })
        };
        let darts = 2 * wires.count();
        let mut next = vec![usize::MAX; darts];
        for n in 0..nodes as u32 {
            let legs = wires.wires_of(n as usize);
            for k in 0..legs.len() {
                let j = (k + 1) % legs.len();
                next[dart(legs[k], side_of(legs[k], n, k as u32))] =
                    dart(legs[j], side_of(legs[j], n, j as u32));
            }
        }
        // Seen from outside, the circle's legs turn the other way.
        let open = wires.open();
        let circle = |k: usize| {
            let wire = wires.open_wire(k);
            dart(wire, usize::from(matches!(wires.ends(wire)[1], End::Open(_))))
        };
        for k in 0..open {
            next[circle(k)] = circle((k + open - 1) % open);
        }
        // A face is an orbit of: cross the wire, then turn to the next leg.
        let mut face = vec![u32::MAX; darts];
        let mut faces = 0;
        for d in 0..darts {
            if face[d] != u32::MAX {
                continue;
            }
            let mut at = d;
            while face[at] == u32::MAX {
                face[at] = faces;
                at = next[at ^ 1];
            }
            faces += 1;
        }
        let connected = {
            let mut seen = vec![false; nodes];
            let mut stack: Vec<u32> = Vec::new();
            for k in 0..open {
                if let [End::Node { node, .. }, _] = wires.ends(wires.open_wire(k)) {
                    stack.push(node);
                }
            }
            while let Some(n) = stack.pop() {
                if std::mem::replace(&mut seen[n as usize], true) {
                    continue;
                }
                for &w in wires.wires_of(n as usize) {
                    for end in wires.ends(w) {
                        if let End::Node { node, .. } = end {
                            stack.push(node);
                        }
                    }
                }
            }
            seen.iter().all(|&s| s)
        };
        // One more vertex for the circle.
        let euler = (nodes + 1) as i64 - wires.count() as i64 + i64::from(faces);
        if !connected || euler != 2 {
            return None;
        }
        // A wire separates the faces of its two darts.
        let (of_label, nats_per_weight) = weights(wires);
        let mut starts = vec![0u32; faces as usize + 1];
        for &f in &face {
            starts[f as usize + 1] += 1;
        }
        for f in 0..faces as usize {
            starts[f + 1] += starts[f];
        }
        let mut at = starts.clone();
        let mut across = vec![(0, 0, 0); darts];
        for w in 0..wires.count() as u32 {
            let label = wires.label(w);
            for side in 0..2 {
                let (f, g) = (face[dart(w, side)], face[dart(w, 1 - side)]);
                across[at[f as usize] as usize] = (g, of_label[label.index()], label.number());
                at[f as usize] += 1;
            }
        }
        // From the outer end of leg k the walk turns to leg k − 1: that corner is the gap.
        let gaps = (0..open).map(|k| face[circle(k) ^ 1]).collect();
        Some(Self { gaps, starts, across, nats_per_weight })
    }
    /// Number of boundary sites.
    pub fn sites(&self) -> usize {
        self.gaps.len()
    }
    /// Minimal cuts, in nats, of the intervals [start, start + l) for l = 0..=sites. One
    /// shortest-path search over the faces.
    pub fn cuts_from(&self, start: usize) -> Vec<f64> {
        let distance = self.distances(self.gaps[start]);
        let n = self.sites();
        (0..=n)
            .map(|l| distance[self.gaps[(start + l) % n] as usize] as f64 * self.nats_per_weight)
            .collect()
    }
    fn distances(&self, from: u32) -> Vec<u64> {
        let mut distance = vec![u64::MAX; self.starts.len() - 1];
        distance[from as usize] = 0;
        if self.across.iter().all(|a| a.1 == 1) {
            let mut queue = vec![from];
            let mut k = 0;
            while k < queue.len() {
                let f = queue[k] as usize;
                k += 1;
                for &(g, ..) in self.row(f) {
                    if distance[g as usize] == u64::MAX {
                        distance[g as usize] = distance[f] + 1;
                        queue.push(g);
                    }
                }
            }
            return distance;
        }
        let mut heap = BinaryHeap::from([Reverse((0u64, from))]);
        while let Some(Reverse((d, f))) = heap.pop() {
            if d > distance[f as usize] {
                continue;
            }
            for &(g, w, _) in self.row(f as usize) {
                if d + w < distance[g as usize] {
                    distance[g as usize] = d + w;
                    heap.push(Reverse((d + w, g)));
                }
            }
        }
        distance
    }
    fn row(&self, face: usize) -> &[(u32, u64, u32)] {
        &self.across[self.starts[face] as usize..self.starts[face + 1] as usize]
    }
}
