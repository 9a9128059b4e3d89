//! The minimal cut: the least product of dimensions that separates a region from the rest.

use super::flow::{ENDLESS, Flow};
use super::wires::{End, Node, Wires};
use crate::tensor::Label;

/// Weights of labels as whole numbers in which equal products of dimensions weigh the same.
///
/// A dimension Π p^e weighs Σ e·w_p with w_p = round(2^32·ln p / ln 2), divided by the common
/// divisor; where all dimensions are powers of one number the weights are small integers.
#[derive(Debug, Clone)]
struct Weights {
    of_label: Vec<u64>,
}

impl Weights {
    fn of(wires: &Wires<'_>) -> Self {
        let network = wires.network();
        let mut known: Vec<(usize, u64)> = Vec::new();
        let mut of_label = Vec::with_capacity(network.labels());
        for l in (0..network.labels() as u32).map(Label::new) {
            let dim = network.dim(l);
            let weight = match known.iter().find(|k| k.0 == dim) {
                Some(&(_, w)) => w,
                None => {
                    let w = weight(dim);
                    known.push((dim, w));
                    w
                }
            };
            of_label.push(weight);
        }
        let common = known.iter().fold(0, |g, &(_, w)| gcd(g, w)).max(1);
        for w in &mut of_label {
            *w /= common;
        }
        Self { of_label }
    }
}

/// Weights of labels as whole numbers, and what one unit is in nats.
pub(super) fn weights(wires: &Wires<'_>) -> (Vec<u64>, f64) {
    let weights = Weights::of(wires);
    let network = wires.network();
    let unit = weights
        .of_label
        .iter()
        .enumerate()
        .find(|(_, w)| **w > 0)
        .map_or(0.0, |(l, &w)| (network.dim(Label::new(l as u32)) as f64).ln() / w as f64);
    (weights.of_label, unit)
}

fn gcd(a: u64, b: u64) -> u64 {
    if b == 0 { a } else { gcd(b, a % b) }
}

fn weight(dim: usize) -> u64 {
    let mut rest = dim;
    let mut total = 0;
    let mut p = 2;
    while rest > 1 {
        if p * p > rest {
            p = rest;
        }
        while rest.is_multiple_of(p) {
            rest /= p;
            total += ((p as f64).log2() * 4_294_967_296.0).round() as u64;
        }
        p += 1;
    }
    total
}

/// A minimal cut between a region and its complement.
#[derive(Debug, Clone, PartialEq)]
pub struct Cut {
    /// Σ ln(dim) of the cut labels.
    pub nats: f64,
    /// The labels of the minimal cut nearest to the region, ascending. A hyperedge counts once.
    pub near: Vec<Label>,
    /// The labels of the minimal cut nearest to the complement, ascending.
    pub far: Vec<Label>,
    /// One flag a tensor: whether the region's side of the near cut holds it.
    pub near_side: Vec<bool>,
    /// One flag a tensor: whether the region's side of the far cut holds it.
    pub far_side: Vec<bool>,
}

impl Cut {
    /// Whether there is only one minimal cut: both extreme ones are the same set of labels.
    pub fn unique(&self) -> bool {
        self.near == self.far
    }
}

/// Finds minimal cuts of many regions of one network.
///
/// For any cut, S(A) ≤ Σ ln(dim) over the labels it severs, because they bound the rank of
/// the state across it; the least such sum is the candidate of Ryu and Takayanagi. Severing a
/// hyperedge costs its dimension once, however many tensors share it. Found by a maximal
/// flow; one search costs a few passes over the network.
#[derive(Debug, Clone)]
pub struct Cutter<'w, 'n> {
    wires: &'w Wires<'n>,
    template: Flow,
    weights: Weights,
    /// First flow vertex of each node (a copy tensor takes two, entry and exit).
    vertex: Vec<u32>,
    first_open: u32,
    first_pair: usize,
}

const SOURCE: u32 = 0;
const SINK: u32 = 1;

impl<'w, 'n> Cutter<'w, 'n> {
    /// Prepares a network.
    pub fn new(wires: &'w Wires<'n>) -> Self {
        let weights = Weights::of(wires);
        let mut vertices = 2u32;
        let mut vertex = Vec::with_capacity(wires.nodes());
        let mut pairs = Vec::with_capacity(wires.count() + 2 * wires.open());
        for n in 0..wires.nodes() {
            vertex.push(vertices);
            vertices += 1;
            if let Node::Copy(l) = wires.node(n) {
                pairs.push((vertices - 1, vertices, weights.of_label[l.index()], 0));
                vertices += 1;
            }
        }
        let first_open = vertices;
        vertices += wires.open() as u32;
        for w in 0..wires.count() as u32 {
            let spot = |end| match end {
                End::Node { node, .. } => {
                    (vertex[node as usize], matches!(wires.node(node as usize), Node::Copy(_)))
                }
                End::Open(k) => (first_open + k, false),
            };
            let [(a, copy_a), (b, copy_b)] = wires.ends(w).map(spot);
            let weight = weights.of_label[wires.label(w).index()];
            match (copy_a, copy_b) {
                (false, false) => pairs.push((a, b, weight, weight)),
                (true, _) => {
                    pairs.push((b, a, ENDLESS, 0));
                    pairs.push((a + 1, b, ENDLESS, 0));
                }
                (false, true) => {
                    pairs.push((a, b, ENDLESS, 0));
                    pairs.push((b + 1, a, ENDLESS, 0));
                }
            }
        }
        let first_pair = pairs.len();
        for k in 0..wires.open() as u32 {
            pairs.push((SOURCE, first_open + k, 0, 0));
            pairs.push((first_open + k, SINK, 0, 0));
        }
        let template = Flow::new(vertices as usize, &pairs);
        Self { wires, template, weights, vertex, first_open, first_pair }
    }
    /// The minimal cut of a region, given by one flag an open leg (see [`Wires::inside`]).
    ///
    /// # Panics
    /// Where `inside` has not one flag an open leg.
    #[track_caller]
    pub fn cut(&self, inside: &[bool]) -> Cut {
        assert_eq!(inside.len(), self.wires.open(), "one flag an open leg");
        let mut flow = self.template.clone();
        for (k, &of_region) in inside.iter().enumerate() {
            let pair = self.first_pair + 2 * k + usize::from(!of_region);
            flow.set(pair, ENDLESS, 0);
        }
        flow.send(SOURCE, SINK);
        let near = flow.reached_from(SOURCE);
        let far: Vec<bool> = flow.reaching(SINK).iter().map(|r| !r).collect();
        let (near_side, near) = self.read(&near);
        let (far_side, far) = self.read(&far);
        let nats = near.iter().map(|&l| (self.wires.network().dim(l) as f64).ln()).sum();
        Cut { nats, near, far, near_side, far_side }
    }
    fn read(&self, side: &[bool]) -> (Vec<bool>, Vec<Label>) {
        let mut labels = Vec::new();
        for w in 0..self.wires.count() as u32 {
            let label = self.wires.label(w);
            let spot = |end| match end {
                End::Node { node, .. } => {
                    let v = self.vertex[node as usize] as usize;
                    (!matches!(self.wires.node(node as usize), Node::Copy(_))).then(|| side[v])
                }
                End::Open(k) => Some(side[self.first_open as usize + k as usize]),
            };
            if let [Some(a), Some(b)] = self.wires.ends(w).map(spot)
                && a != b
                && self.weights.of_label[label.index()] > 0
            {
                labels.push(label);
            }
        }
        for n in self.wires.network().tensors()..self.wires.nodes() {
            let v = self.vertex[n] as usize;
            if let Node::Copy(l) = self.wires.node(n)
                && side[v]
                && !side[v + 1]
                && self.weights.of_label[l.index()] > 0
            {
                labels.push(l);
            }
        }
        labels.sort_unstable();
        let tensors = self.wires.network().tensors();
        (self.vertex[..tensors].iter().map(|&v| side[v as usize]).collect(), labels)
    }
}
