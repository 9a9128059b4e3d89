//! A network as a drawing sees it: nodes with edges of two ends each.

use crate::network::{Network, TensorId};
use crate::tensor::Label;

/// A line to be drawn between two nodes.
#[derive(Debug, Clone, Copy)]
pub(super) struct Edge {
    pub(super) a: usize,
    pub(super) b: usize,
    pub(super) label: Label,
}

/// Nodes are the tensors, then one knot for each label that more than two ends meet in.
#[derive(Debug)]
pub(super) struct Graph {
    pub(super) tensors: usize,
    pub(super) nodes: usize,
    pub(super) edges: Vec<Edge>,
    /// Labels that stand twice on one tensor alone.
    pub(super) loops: Vec<(usize, Label)>,
    /// The node that each boundary site hangs on.
    pub(super) sites: Vec<usize>,
    starts: Vec<usize>,
    around: Vec<(usize, usize)>,
}

impl Graph {
    pub(super) fn of(network: &Network) -> Self {
        let tensors = network.tensors();
        let mut site_of = vec![usize::MAX; network.labels()];
        for (s, l) in network.boundary().iter().enumerate() {
            site_of[l.index()] = s;
        }
        let mut bulk = vec![false; network.labels()];
        for l in network.bulk() {
            bulk[l.index()] = true;
        }
        let mut graph = Self {
            tensors,
            nodes: tensors,
            edges: Vec::new(),
            loops: Vec::new(),
            sites: vec![0; network.boundary().len()],
            starts: Vec::new(),
            around: Vec::new(),
        };
        for l in 0..network.labels() {
            let label = Label::new(l as u32);
            let holders = network.holders(label);
            let open = usize::from(site_of[l] != usize::MAX) + usize::from(bulk[l]);
            match (holders, open) {
                ([t], _) => {
                    if site_of[l] != usize::MAX {
                        graph.sites[site_of[l]] = t.index();
                    }
                }
                ([a, b], 0) if a == b => graph.loops.push((a.index(), label)),
                ([a, b], 0) => graph.edges.push(Edge { a: a.index(), b: b.index(), label }),
                _ => {
                    let knot = graph.nodes;
                    graph.nodes += 1;
                    for t in holders {
                        graph.edges.push(Edge { a: t.index(), b: knot, label });
                    }
                    if site_of[l] != usize::MAX {
                        graph.sites[site_of[l]] = knot;
                    }
                }
            }
        }
        graph.index();
        graph
    }
    fn index(&mut self) {
        let mut starts = vec![0; self.nodes + 1];
        for e in &self.edges {
            starts[e.a + 1] += 1;
            starts[e.b + 1] += 1;
        }
        for v in 0..self.nodes {
            starts[v + 1] += starts[v];
        }
        let mut next = starts.clone();
        let mut around = vec![(0, 0); 2 * self.edges.len()];
        for (k, e) in self.edges.iter().enumerate() {
            for (v, w) in [(e.a, e.b), (e.b, e.a)] {
                around[next[v]] = (w, k);
                next[v] += 1;
            }
        }
        self.starts = starts;
        self.around = around;
    }
    /// Neighbours of a node with the edges that lead there.
    pub(super) fn around(&self, v: usize) -> &[(usize, usize)] {
        &self.around[self.starts[v]..self.starts[v + 1]]
    }
    /// Steps from `from` to every node; `u32::MAX` where none lead.
    pub(super) fn steps(&self, from: usize) -> Vec<u32> {
        let mut far = vec![u32::MAX; self.nodes];
        far[from] = 0;
        let mut queue = std::collections::VecDeque::from([from]);
        while let Some(v) = queue.pop_front() {
            for &(w, _) in self.around(v) {
                if far[w] == u32::MAX {
                    far[w] = far[v] + 1;
                    queue.push_back(w);
                }
            }
        }
        far
    }
    /// Nodes by connected component, each component in ascending order, the largest first.
    pub(super) fn components(&self) -> Vec<Vec<usize>> {
        let mut seen = vec![false; self.nodes];
        let mut all = Vec::new();
        for v in 0..self.nodes {
            if seen[v] {
                continue;
            }
            seen[v] = true;
            let mut part = vec![v];
            let mut i = 0;
            while i < part.len() {
                for &(w, _) in self.around(part[i]) {
                    if !seen[w] {
                        seen[w] = true;
                        part.push(w);
                    }
                }
                i += 1;
            }
            part.sort_unstable();
            all.push(part);
        }
        all.sort_by_key(|p| (std::cmp::Reverse(p.len()), p[0]));
        all
    }
    /// Whether it is a tree, or several.
    pub(super) fn is_forest(&self) -> bool {
        self.edges.len() + self.components().len() == self.nodes
    }
    /// The sites that hang on each node, ascending.
    pub(super) fn sites_by_node(&self) -> Vec<Vec<usize>> {
        let mut by = vec![Vec::new(); self.nodes];
        for (s, &v) in self.sites.iter().enumerate() {
            by[v].push(s);
        }
        by
    }
    /// The first tensor that a node's edges lead to: itself, or a knot's first holder.
    pub(super) fn shown(network: &Network, t: usize) -> String {
        network.tensor_name(TensorId::new(t as u32))
    }
}
