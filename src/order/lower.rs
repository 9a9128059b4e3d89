//! Lower bounds on the widest step.
//!
//! The labels met in the steps of any order form a tree decomposition of the line graph (open
//! labels joined with one another), so no order has a widest step below its treewidth + 1
//! (SIAM J. Comput. 38, 963 (2008)); and the treewidth of a graph is at least that of any
//! minor, which is at least its minimum degree. Contracting a vertex of minimum degree into
//! the neighbour with which it shares fewest neighbours, again and again, visits good minors
//! (maximum minimum degree with contraction, J. Graph Algorithms Appl. 10, 5 (2006)).

use super::graph::{Graph, common};

/// A lower bound on the treewidth of a graph, by contraction of minors.
///
/// `start` shifts which of several vertices of minimum degree goes first, so that several
/// starts may be tried.
pub(crate) fn treewidth(graph: &Graph, start: usize) -> usize {
    let n = graph.n;
    let mut g = graph.clone();
    let mut degree: Vec<usize> = (0..n).map(|v| g.degree(v)).collect();
    let mut left: Vec<usize> = (0..n).collect();
    if n > 0 {
        left.rotate_left(start % n);
    }
    let mut bound = 0;
    while left.len() > bound + 1 {
        let (at, &v) =
            left.iter().enumerate().min_by_key(|(_, v)| degree[**v]).expect("vertices are left");
        bound = bound.max(degree[v]);
        left.remove(at);
        let near = g.neighbours(v);
        let Some(&u) = near.iter().min_by_key(|&&u| (common(g.row(u), g.row(v)), degree[u])) else {
            continue;
        };
        g.contract(u, v);
        for w in near {
            degree[w] = g.degree(w);
        }
    }
    bound
}

/// The best of several starts.
pub(crate) fn best_treewidth(graph: &Graph, starts: usize) -> usize {
    (0..starts.max(1))
        .map(|s| treewidth(graph, s * graph.n.div_ceil(starts.max(1)).max(1)))
        .max()
        .unwrap_or(0)
}
