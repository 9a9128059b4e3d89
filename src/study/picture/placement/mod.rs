//! Where nodes go when no tiling says it.
//!
//! - [`tree`]: trees upright, chains in a row;
//! - [`given`]: places that the network brings along, first choice for lattices;
//! - [`rubber`]: networks whose boundary can be pinned to a circle, everything inside held by
//!   springs: what is planar comes out without a crossing (Proc. London Math. Soc. 13, 743
//!   (1963)); read as the Klein disk, its straight lines are geodesics of the Poincaré disk;
//! - [`stress`]: anything else by its distances.

mod given;
mod rubber;
mod stress;
mod tree;

use super::graph::Graph;
use crate::network::Network;
pub(super) use rubber::cross;

/// How a placement wants to be drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Shape {
    /// In the Poincaré disk, sites on its rim.
    Disk,
    /// Sites in a row at the bottom.
    Upright,
    /// Sites as pegs.
    Free,
    /// As `Free`, on a lattice that may close on itself: long bonds leave at one side and
    /// come back at the other.
    Lattice,
}

/// Where things go: y up, any scale (the unit disk for [`Shape::Disk`]).
#[derive(Debug, Clone)]
pub(super) struct Placement {
    pub(super) shape: Shape,
    pub(super) nodes: Vec<[f64; 2]>,
    /// None for pegs that the drawing places itself.
    pub(super) sites: Vec<Option<[f64; 2]>>,
}

/// The placement that suits a network. Deterministic.
pub(super) fn place(network: &Network, graph: &Graph) -> Placement {
    if graph.nodes > 1 && graph.is_forest() && graph.components().len() == 1 {
        return tree::place(network, graph);
    }
    let given = given::place(network, graph);
    match given {
        Some(p) if given::is_lattice(graph, &p) => p,
        given => rubber::place(graph).or(given).unwrap_or_else(|| stress::place(graph)),
    }
}
