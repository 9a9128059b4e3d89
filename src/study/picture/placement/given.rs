//! Places that the network brings along.

use super::{Placement, Shape};
use crate::network::Network;
use crate::study::picture::graph::Graph;

/// Uses the network's own places where every tensor has one and no two share one; knots go
/// amid their tensors.
pub(super) fn place(network: &Network, graph: &Graph) -> Option<Placement> {
    let layout = network.layout()?;
    if graph.tensors == 0 || layout.place.len() != graph.tensors {
        return None;
    }
    if layout.place.iter().flatten().any(|x| !x.is_finite()) {
        return None;
    }
    let mut sorted: Vec<[u64; 2]> =
        layout.place.iter().map(|p| [p[0].to_bits(), p[1].to_bits()]).collect();
    sorted.sort_unstable();
    if sorted.windows(2).any(|w| w[0] == w[1]) {
        return None;
    }
    let mut nodes = layout.place.clone();
    for knot in graph.tensors..graph.nodes {
        let around = graph.around(knot);
        let mut sum = [0.0; 2];
        for &(t, _) in around {
            sum[0] += layout.place[t][0];
            sum[1] += layout.place[t][1];
        }
        let n = around.len().max(1) as f64;
        nodes.push([sum[0] / n, sum[1] / n]);
    }
    Some(Placement { shape: Shape::Lattice, nodes, sites: vec![None; graph.sites.len()] })
}

/// Whether most bonds are of one length, as on a lattice.
pub(super) fn is_lattice(graph: &Graph, placement: &Placement) -> bool {
    let at = &placement.nodes;
    let mut long: Vec<f64> = graph
        .edges
        .iter()
        .map(|e| (at[e.a][0] - at[e.b][0]).hypot(at[e.a][1] - at[e.b][1]))
        .collect();
    if long.len() < 2 {
        return true;
    }
    long.sort_by(f64::total_cmp);
    let median = long[long.len() / 2];
    let same = long.iter().filter(|l| (*l - median).abs() < 0.05 * median).count();
    2 * same >= long.len()
}
