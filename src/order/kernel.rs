//! What is left of a net once the steps are taken that no narrowest order can do better
//! without.
//!
//! These reductions keep the widest step of the best order (not its multiply-adds), so they
//! serve searches for narrow orders; trees are grown back over the whole net before their
//! multiply-adds are refined.
//! * A *simplicial* label (the labels met with it all meet one another) is summed: its
//!   clique has to be met in some step of any order.
//! * An *almost simplicial* one (all but one meet one another) is summed where its clique is
//!   no wider than a lower bound (Discrete Appl. Math. 145, 143 (2005)); only where all labels have one size.
//! * A tensor whose labels another one holds is absorbed by it.

use super::graph::{Graph, LineGraph, common};
use super::net::{Net, Steps};

/// The rest of a net.
#[derive(Debug, Clone)]
pub(crate) struct Kernel {
    pub net: Net,
    steps: Steps,
    /// Which tensor or result of the whole each tensor of the rest is.
    nodes: Vec<u32>,
}

impl Kernel {
    /// Reduces a net. `bound` is a lower bound on the treewidth of its line graph.
    pub fn of(net: &Net, line: &LineGraph, bound: usize) -> Self {
        let order = safe(line, bound);
        let mut live: Vec<Option<Vec<u32>>> = net.tensors.iter().cloned().map(Some).collect();
        let mut lone = net.lone.clone();
        let mut left = net.counts();
        let mut holders = net.holders();
        let mut steps: Steps = Vec::new();
        let mut join =
            |live: &mut Vec<Option<Vec<u32>>>, holders: &mut Vec<Vec<u32>>, a: u32, b: u32| {
                let x = live[a as usize].take().unwrap_or_default();
                let y = live[b as usize].take().unwrap_or_default();
                let mut union = Vec::new();
                super::cost::merge(&x, &y, &mut union);
                let set = super::cost::keep(&x, &y, &union, &mut left);
                let c = live.len() as u32;
                for &l in &set {
                    let h = &mut holders[l as usize];
                    h.retain(|&t| t != a && t != b);
                    h.push(c);
                }
                lone.push(lone[a as usize] + lone[b as usize]);
                live.push(Some(set));
                steps.push((a, b));
                c
            };
        for v in order {
            let mut bucket: Vec<u32> = holders[line.labels[v as usize] as usize]
                .iter()
                .copied()
                .filter(|&t| live[t as usize].is_some())
                .collect();
            // Smallest first; the union of all is the label's clique or less.
            bucket.sort_by_key(|&t| live[t as usize].as_ref().map_or(0, Vec::len));
            let mut bucket = bucket.into_iter();
            if let Some(mut a) = bucket.next() {
                for b in bucket {
                    a = join(&mut live, &mut holders, a, b);
                }
            }
        }
        // Absorption, until nothing is held by a neighbour as a whole.
        let mut at = 0;
        while at < live.len() {
            let a = at as u32;
            at += 1;
            let Some(set) = live[a as usize].clone() else { continue };
            let Some(&rare) = set.iter().min_by_key(|&&l| holders[l as usize].len()) else {
                continue;
            };
            let host = holders[rare as usize].iter().copied().find(|&t| {
                t != a
                    && live[t as usize]
                        .as_ref()
                        .is_some_and(|s| set.iter().all(|l| s.binary_search(l).is_ok()))
            });
            if let Some(b) = host {
                join(&mut live, &mut holders, a, b);
            }
        }
        let nodes: Vec<u32> =
            (0..live.len() as u32).filter(|&t| live[t as usize].is_some()).collect();
        let tensors = nodes.iter().map(|&t| live[t as usize].take().unwrap_or_default()).collect();
        let lone = nodes.iter().map(|&t| lone[t as usize]).collect();
        let net = Net { bits: net.bits.clone(), open: net.open.clone(), tensors, lone };
        Self { net, steps, nodes }
    }

    /// Steps of the whole from steps of the rest.
    pub fn grown_back(&self, whole: &Net, steps: &[(u32, u32)]) -> Steps {
        let n = whole.tensors.len();
        let mut all = self.steps.clone();
        let mut number = self.nodes.clone();
        for &(a, b) in steps {
            all.push((number[a as usize], number[b as usize]));
            number.push((n + all.len() - 1) as u32);
        }
        all
    }
}

/// Closed labels that can be summed first, in this order.
fn safe(line: &LineGraph, bound: usize) -> Vec<u32> {
    let first = line.bits.first().copied().unwrap_or(0.0);
    let uniform = line.bits.iter().all(|&b| b == first);
    let mut g = line.graph.clone();
    let mut low = bound;
    let mut order = Vec::new();
    let mut row = Vec::new();
    let mut gone = vec![false; g.n];
    let mut todo: std::collections::BTreeSet<(usize, usize)> =
        (0..g.n).filter(|&v| !line.open[v]).map(|v| (g.degree(v), v)).collect();
    while let Some((d, v)) = todo.pop_first() {
        if gone[v] || d != g.degree(v) {
            continue;
        }
        let simplicial = g.fill_of(v) == 0;
        if simplicial || (uniform && d <= low && almost_simplicial(&g, v)) {
            low = low.max(d);
            let near = g.neighbours(v);
            g.eliminate(v, &mut row);
            gone[v] = true;
            order.push(v as u32);
            for u in near {
                // Its own degree and the pairs among its neighbours' neighbours changed.
                for w in g.neighbours(u).into_iter().chain([u]) {
                    if !line.open[w] && !gone[w] {
                        todo.insert((g.degree(w), w));
                    }
                }
            }
        }
    }
    order
}

/// Whether all neighbours of v but one are joined with one another.
fn almost_simplicial(g: &Graph, v: usize) -> bool {
    let near = g.neighbours(v);
    let d = near.len();
    let missing: Vec<usize> = near.iter().map(|&u| d - 1 - common(g.row(u), g.row(v))).collect();
    let total: usize = missing.iter().sum::<usize>() / 2;
    missing.contains(&total)
}
