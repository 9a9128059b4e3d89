//! Trees: the root on top, boundary sites in a row at the bottom, no crossing. Chains lie in
//! a row.

use super::{Placement, Shape};
use crate::network::Network;
use crate::study::picture::graph::Graph;

/// What hangs below a node.
#[derive(Debug, Clone, Copy)]
enum Hang {
    Node(usize),
    Site(usize),
}

/// Places one tree. The root is the first tensor of ring 0, or the tree's middle where rings
/// are not told. Subtrees follow the boundary order of their sites where they have some,
/// else the order of edges. Cost: linear, but for sorting.
pub(super) fn place(network: &Network, graph: &Graph) -> Placement {
    let by_node = graph.sites_by_node();
    let longest = longest_path(graph);
    if (0..graph.nodes).all(|v| graph.around(v).len() <= 2) {
        return row(graph, &by_node, &longest);
    }
    let told = network.layout().and_then(|l| l.ring.iter().position(|&r| r == 0));
    let root = told.unwrap_or(longest[longest.len() / 2]);
    // Children in breadth-first order; then the least site below each node, from the leaves.
    let mut parent = vec![usize::MAX; graph.nodes];
    let mut depth = vec![0usize; graph.nodes];
    let mut order = vec![root];
    let mut i = 0;
    while i < order.len() {
        let v = order[i];
        for &(w, _) in graph.around(v) {
            if w != parent[v] {
                parent[w] = v;
                depth[w] = depth[v] + 1;
                order.push(w);
            }
        }
        i += 1;
    }
    let mut least: Vec<usize> =
        by_node.iter().map(|s| s.first().copied().unwrap_or(usize::MAX)).collect();
    for &v in order.iter().rev() {
        if parent[v] != usize::MAX {
            let p = parent[v];
            least[p] = least[p].min(least[v]);
        }
    }
    let mut sites = vec![None; graph.sites.len()];
    let mut x = vec![0.0; graph.nodes];
    let deepest = depth.iter().copied().max().unwrap_or(0);
    let floor = -((deepest + 1) as f64);
    // Depth first with a stack of its own: trees may be deep.
    let mut slot = 0.0;
    let mut stack: Vec<(Hang, bool)> = vec![(Hang::Node(root), false)];
    let mut spans: Vec<(f64, f64)> = vec![(f64::INFINITY, f64::NEG_INFINITY); graph.nodes];
    while let Some((hang, back)) = stack.pop() {
        match hang {
            Hang::Site(s) => {
                sites[s] = Some([slot, floor]);
                let v = graph.sites[s];
                spans[v] = (spans[v].0.min(slot), spans[v].1.max(slot));
                slot += 1.0;
            }
            Hang::Node(v) if back => {
                if spans[v].0 > spans[v].1 {
                    spans[v] = (slot, slot);
                    slot += 1.0;
                }
                x[v] = f64::midpoint(spans[v].0, spans[v].1);
                if parent[v] != usize::MAX {
                    let p = parent[v];
                    spans[p] = (spans[p].0.min(x[v]), spans[p].1.max(x[v]));
                }
            }
            Hang::Node(v) => {
                stack.push((hang, true));
                let mut below: Vec<(usize, Hang)> = by_node[v]
                    .iter()
                    .map(|&s| (s, Hang::Site(s)))
                    .chain(
                        graph
                            .around(v)
                            .iter()
                            .filter(|(w, _)| *w != parent[v])
                            .map(|&(w, _)| (least[w], Hang::Node(w))),
                    )
                    .collect();
                below.sort_by_key(|b| b.0);
                stack.extend(below.into_iter().rev().map(|b| (b.1, false)));
            }
        }
    }
    // Counter-clockwise round the whole is from left to right along the bottom.
    let wide = slot.max(2.0);
    let tall = (wide / (deepest as f64 + 1.5)).clamp(wide * 0.02, wide * 0.24);
    let nodes = (0..graph.nodes).map(|v| [x[v], -(depth[v] as f64) * tall]).collect();
    for s in sites.iter_mut().flatten() {
        s[1] = -(deepest as f64 + 0.75) * tall;
    }
    Placement { shape: Shape::Upright, nodes, sites }
}

/// A chain from left to right, its sites below.
fn row(graph: &Graph, by_node: &[Vec<usize>], path: &[usize]) -> Placement {
    let mut path = path.to_vec();
    let first = |v: &usize| by_node[*v].first().copied();
    let (a, b) = (path.iter().find_map(first), path.iter().rev().find_map(first));
    if a > b {
        path.reverse();
    }
    let mut nodes = vec![[0.0; 2]; graph.nodes];
    let mut sites = vec![None; graph.sites.len()];
    let mut at = 0.0;
    for v in path {
        let own = &by_node[v];
        let wide = (own.len() as f64).max(1.0);
        nodes[v] = [at + (wide - 1.0) / 2.0, 0.0];
        for (k, &s) in own.iter().enumerate() {
            sites[s] = Some([at + k as f64, 0.0]);
        }
        at += wide;
    }
    let drop = (at * 0.12).clamp(0.9, 1.6);
    for s in sites.iter_mut().flatten() {
        s[1] = -drop;
    }
    Placement { shape: Shape::Upright, nodes, sites }
}

/// A longest path of the tree.
fn longest_path(graph: &Graph) -> Vec<usize> {
    let end_of = |from: usize| {
        let far = graph.steps(from);
        let best = far.iter().copied().filter(|&d| d != u32::MAX).max().unwrap_or(0);
        (far.iter().position(|&d| d == best).unwrap_or(from), far)
    };
    let (start, _) = end_of(0);
    let (mut at, far) = end_of(start);
    let mut path = vec![at];
    while at != start {
        at = graph
            .around(at)
            .iter()
            .map(|a| a.0)
            .find(|&w| far[w] + 1 == far[at])
            .expect("every node but the start has a nearer neighbour");
        path.push(at);
    }
    path
}
