//! Recursive bisection: the network is cut in two along few labels, then each half is.
//!
//! Good where a network has small separators (tilings, lattices, circuits). Groups of a few
//! tensors are ordered exactly. The halves of every cut come from [`super::hypergraph`].

use super::hypergraph::{Hypergraph, bisect};
use super::net::{Net, Steps};
use super::price::Price;
use super::subsets::{self, Aim, Held};
use rand_chacha::ChaCha8Rng;
use std::collections::HashMap;

/// Groups of so many tensors are no longer cut.
const GROUP: usize = 8;

enum Node {
    Cut(usize, usize),
    Group(Vec<u32>, Steps),
}

/// An order by recursive bisection with halves of at most 1/2 + `slack`.
pub(crate) fn order(net: &Net, price: Price, slack: f64, rng: &mut ChaCha8Rng) -> Steps {
    let n = net.tensors.len();
    let counts = net.counts();
    let mut nodes: Vec<Option<Node>> = vec![None];
    let mut todo = vec![(0usize, (0..n as u32).collect::<Vec<u32>>())];
    while let Some((at, group)) = todo.pop() {
        if group.len() <= GROUP {
            let steps = small(net, &counts, &group, price);
            nodes[at] = Some(Node::Group(group, steps));
            continue;
        }
        let side = bisect(hypergraph(net, &group), slack, rng);
        let (mut a, mut b) = (Vec::new(), Vec::new());
        for (&t, &s) in group.iter().zip(&side) {
            if s { a.push(t) } else { b.push(t) }
        }
        let k = nodes.len();
        nodes.extend([None, None]);
        nodes[at] = Some(Node::Cut(k, k + 1));
        todo.push((k, a));
        todo.push((k + 1, b));
    }
    // A cut comes before its halves, so going backwards meets the halves first.
    let mut result = vec![0u32; nodes.len()];
    let mut steps: Steps = Vec::with_capacity(n.saturating_sub(1));
    for (at, node) in nodes.into_iter().enumerate().rev() {
        match node {
            Some(Node::Cut(a, b)) => {
                steps.push((result[a], result[b]));
                result[at] = (n + steps.len() - 1) as u32;
            }
            Some(Node::Group(mut group, own)) => {
                for (a, b) in own {
                    steps.push((group[a as usize], group[b as usize]));
                    group.push((n + steps.len() - 1) as u32);
                }
                result[at] = group[group.len() - 1];
            }
            None => {}
        }
    }
    steps
}

/// The hypergraph of some tensors; labels that only one of them holds do not matter to it.
fn hypergraph(net: &Net, group: &[u32]) -> Hypergraph {
    let mut edges: HashMap<u32, usize> = HashMap::new();
    let mut list: Vec<(Vec<u32>, f64)> = Vec::new();
    for (i, &t) in group.iter().enumerate() {
        for &l in &net.tensors[t as usize] {
            let e = *edges.entry(l).or_insert_with(|| {
                list.push((Vec::new(), net.bits[l as usize]));
                list.len() - 1
            });
            list[e].0.push(i as u32);
        }
    }
    list.retain(|(pins, _)| pins.len() > 1);
    Hypergraph { vertices: vec![1.0; group.len()], edges: list }
}

/// The best order of a few tensors within the whole.
fn small(net: &Net, counts: &[u32], group: &[u32], price: Price) -> Steps {
    let mut place: HashMap<u32, usize> = HashMap::new();
    let mut labels: Vec<(Held, u32)> = Vec::new();
    for (i, &t) in group.iter().enumerate() {
        for &l in &net.tensors[t as usize] {
            let at = *place.entry(l).or_insert_with(|| {
                labels.push((Held { by: 0, open: false, bits: net.bits[l as usize] }, l));
                labels.len() - 1
            });
            labels[at].0.by |= 1 << i;
        }
    }
    let mut held: Vec<Held> = labels
        .iter()
        .map(|&(h, l)| Held { open: counts[l as usize] > h.by.count_ones(), ..h })
        .collect();
    for (i, &t) in group.iter().enumerate() {
        if net.lone[t as usize] > 0.0 {
            held.push(Held { by: 1 << i, open: true, bits: net.lone[t as usize] });
        }
    }
    let k = group.len();
    subsets::best(k, &held, Aim::Sum(price), f64::INFINITY).map_or_else(
        // Too large for doubles: one after the other.
        || (1..k).map(|i| (if i == 1 { 0 } else { (k + i - 2) as u32 }, i as u32)).collect(),
        |(steps, _)| steps,
    )
}
