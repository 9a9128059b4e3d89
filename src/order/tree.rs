//! Contraction trees: steps with the labels of every partial result, open to local change.

use super::cost::merge;
use super::greedy::log2_sum;
use super::net::{Net, Steps};
use super::price::Price;

/// No node.
pub(crate) const NONE: u32 = u32::MAX;

/// A binary tree over the tensors of a net.
///
/// Nodes 0..n are the tensors, n..2n−1 the results; `sets` are their shared labels (sorted),
/// `lone` the bits of their lone open labels, `met` the bits of all labels in the step that
/// makes a node (0 for tensors), `size` the bits of the node itself.
#[derive(Debug, Clone)]
pub(crate) struct Tree {
    pub leaves: usize,
    pub root: u32,
    pub children: Vec<[u32; 2]>,
    pub parent: Vec<u32>,
    pub sets: Vec<Vec<u32>>,
    pub lone: Vec<f64>,
    pub met: Vec<f64>,
    pub size: Vec<f64>,
}

impl Tree {
    /// The tree of valid steps.
    pub fn new(net: &Net, steps: &[(u32, u32)]) -> Self {
        let n = net.tensors.len();
        let total = 2 * n - 1;
        let mut tree = Self {
            leaves: n,
            root: total as u32 - 1,
            children: vec![[NONE; 2]; total],
            parent: vec![NONE; total],
            sets: net.tensors.clone(),
            lone: net.lone.clone(),
            met: vec![0.0; n],
            size: (0..n).map(|t| net.size(&net.tensors[t]) + net.lone[t]).collect(),
        };
        tree.sets.reserve(n);
        let mut left = net.counts();
        let mut union = Vec::new();
        for (s, &(a, b)) in steps.iter().enumerate() {
            let c = (n + s) as u32;
            tree.children[c as usize] = [a, b];
            tree.parent[a as usize] = c;
            tree.parent[b as usize] = c;
            let (x, y) = (&tree.sets[a as usize], &tree.sets[b as usize]);
            merge(x, y, &mut union);
            let set = super::cost::keep(x, y, &union, &mut left);
            let lone = tree.lone[a as usize] + tree.lone[b as usize];
            tree.met.push(net.size(&union) + lone);
            tree.size.push(net.size(&set) + lone);
            tree.lone.push(lone);
            tree.sets.push(set);
        }
        tree
    }
    /// Whether a node is an input tensor.
    pub fn is_leaf(&self, node: u32) -> bool {
        (node as usize) < self.leaves
    }
    /// The results, children before parents.
    pub fn bottom_up(&self) -> Vec<u32> {
        let mut order = Vec::with_capacity(self.leaves.saturating_sub(1));
        let mut stack = vec![self.root];
        while let Some(v) = stack.pop() {
            if !self.is_leaf(v) {
                order.push(v);
                stack.extend(self.children[v as usize]);
            }
        }
        order.reverse();
        order
    }
    /// The steps, results numbered in the order in which `results` lists them (children
    /// before parents).
    pub fn steps_in(&self, results: &[u32]) -> Steps {
        let mut number: Vec<u32> = (0..self.children.len() as u32).collect();
        let mut steps = Vec::with_capacity(results.len());
        for (s, &v) in results.iter().enumerate() {
            let [a, b] = self.children[v as usize];
            steps.push((number[a as usize], number[b as usize]));
            number[v as usize] = (self.leaves + s) as u32;
        }
        steps
    }
    /// The steps, bottom up.
    pub fn steps(&self) -> Steps {
        self.steps_in(&self.bottom_up())
    }
    /// log2 of the price of all steps.
    pub fn total(&self, price: Price) -> f64 {
        (self.leaves..self.met.len())
            .fold(f64::NEG_INFINITY, |sum, v| log2_sum(sum, price.step(self.met[v], self.size[v])))
    }
    /// log2 of the elements of the largest tensor.
    pub fn largest(&self) -> f64 {
        self.size.iter().copied().fold(0.0, f64::max)
    }
    /// Bits of the labels met in the widest step.
    pub fn widest(&self) -> f64 {
        self.met.iter().copied().fold(0.0, f64::max)
    }
    /// Hangs other children under a result and sets its measures anew.
    pub fn rehang(&mut self, net: &Net, node: u32, children: [u32; 2], set: Vec<u32>) {
        let [a, b] = children;
        self.children[node as usize] = children;
        self.parent[a as usize] = node;
        self.parent[b as usize] = node;
        let lone = self.lone[a as usize] + self.lone[b as usize];
        self.lone[node as usize] = lone;
        self.size[node as usize] = net.size(&set) + lone;
        self.met[node as usize] = self.union_bits(net, a, b) + lone;
        self.sets[node as usize] = set;
    }
    /// Bits of the shared labels of two nodes together.
    fn union_bits(&self, net: &Net, a: u32, b: u32) -> f64 {
        let (x, y) = (&self.sets[a as usize], &self.sets[b as usize]);
        let (mut i, mut j, mut bits) = (0, 0, 0.0);
        while i < x.len() && j < y.len() {
            let (p, q) = (x[i], y[j]);
            bits += net.bits[p.min(q) as usize];
            i += usize::from(p <= q);
            j += usize::from(q <= p);
        }
        bits + net.size(&x[i..]) + net.size(&y[j..])
    }
}
