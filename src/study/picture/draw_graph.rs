//! Draws a network that is no regular tiling, as its placement wants it.

use super::canvas::Canvas;
use super::graph::Graph;
use super::placement::{self, Shape};
use super::scene::Scene;
use super::{draw_disk, draw_free};

pub(super) fn draw(scene: &Scene<'_>, canvas: &mut Canvas) {
    let graph = Graph::of(scene.network);
    let placement = placement::place(scene.network, &graph);
    match placement.shape {
        Shape::Disk => draw_disk::draw(scene, &graph, &placement, canvas),
        Shape::Upright | Shape::Free | Shape::Lattice => {
            draw_free::draw(scene, &graph, &placement, canvas);
        }
    }
}

#[cfg(test)]
pub(super) mod tests {
    use crate::block::{Block, Entries, IsometryTable, SparseEntries};
    use crate::network::{Network, NetworkBuilder};
    use std::sync::Arc;

    pub(in crate::study::picture) fn blank(legs: usize) -> Arc<Block> {
        Arc::new(Block::lazy(
            "blank",
            vec![2; legs],
            IsometryTable::unknown(legs),
            None,
            move || Entries::Sparse(SparseEntries::collect(vec![2; legs], vec![])),
        ))
    }

    /// A loop of `n` tensors with one boundary leg each.
    pub(in crate::study::picture) fn wheel(n: usize) -> Network {
        let mut b = NetworkBuilder::new("wheel");
        let bonds: Vec<_> = (0..n).map(|k| b.label(&format!("x{k}"), 2)).collect();
        let legs: Vec<_> = (0..n).map(|k| b.label(&format!("b{k}"), 2)).collect();
        let block = blank(3);
        for k in 0..n {
            b.tensor(None, &[bonds[k], legs[k], bonds[(k + 1) % n]], &block).expect("three legs");
        }
        b.boundary(legs);
        b.finish().expect("a sound network")
    }
}
