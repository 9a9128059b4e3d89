//! Partial sums in a fixed tree, so that the total has the same bits in whatever order, on
//! however many threads or machines they were made.

use super::total::Total;
use crate::linalg::Scalar;
use std::collections::BTreeMap;

/// A place in the tree of sums: node (h, i) covers the units i·2^h .. (i+1)·2^h.
pub(super) type Node = (u32, u64);

/// The partial sums that wait for their neighbours. As soon as both halves of a node are
/// there they are added, the lower half first.
pub(super) struct Sums<T> {
    units: u64,
    waiting: BTreeMap<Node, Total<T>>,
}

impl<T: Scalar> Sums<T> {
    /// An empty tree over so many units (at least one).
    pub fn new(units: u64) -> Self {
        Self { units, waiting: BTreeMap::new() }
    }

    /// The first unit of a node.
    fn start((h, i): Node) -> u64 {
        i << h
    }

    /// Whether a node holds unit `unit`.
    pub fn covers((h, i): Node, unit: u64) -> bool {
        unit >> h == i
    }

    /// Adds a node and joins it with its neighbours; gives the node that it ended in and
    /// those that went into it besides.
    pub fn insert(&mut self, node: Node, total: Total<T>) -> (Node, Vec<Node>) {
        let (mut node, mut total) = (node, total);
        let mut joined = Vec::new();
        loop {
            let (h, i) = node;
            if i == 0 && 1u64.checked_shl(h).is_none_or(|w| w >= self.units) {
                break;
            }
            let neighbour = (h, i ^ 1);
            if Self::start(neighbour) >= self.units {
                // The tree ends before the neighbour.
                node = (h + 1, i >> 1);
                continue;
            }
            let Some(other) = self.waiting.remove(&neighbour) else { break };
            joined.push(neighbour);
            total = if i & 1 == 0 {
                total.add(other);
                total
            } else {
                let mut first = other;
                first.add(total);
                first
            };
            node = (h + 1, i >> 1);
        }
        self.waiting.insert(node, total);
        (node, joined)
    }

    /// The partial sum at a node.
    pub fn get(&self, node: Node) -> &Total<T> {
        &self.waiting[&node]
    }

    /// Units that are in no partial sum yet, ascending.
    pub fn missing(&self) -> Vec<u64> {
        let mut open: Vec<bool> = vec![true; self.units as usize];
        for &(h, i) in self.waiting.keys() {
            let end = ((i + 1) << h).min(self.units);
            open[Self::start((h, i)) as usize..end as usize].fill(false);
        }
        (0..self.units).filter(|&u| open[u as usize]).collect()
    }

    /// All partial sums, in the order of their places in the tree.
    pub fn nodes(&self) -> impl Iterator<Item = (Node, &Total<T>)> {
        self.waiting.iter().map(|(&node, total)| (node, total))
    }

    /// All partial sums.
    pub fn into_nodes(self) -> BTreeMap<Node, Total<T>> {
        self.waiting
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use ndarray::arr0;

    fn unit(u: u64) -> Total<f64> {
        let mut t = Total::zero(&[]);
        t.add_slice(&[], &[], arr0(1.0 / (u as f64 + 0.3)).into_dyn(), 3 - (u % 5) as i64);
        t
    }

    #[test]
    fn any_order_and_any_split_give_the_same_bits() {
        for units in [1u64, 2, 3, 7, 8, 13, 100] {
            let sum = |order: &[u64]| {
                let mut s = Sums::new(units);
                for &u in order {
                    s.insert((0, u), unit(u));
                }
                assert!(s.missing().is_empty());
                let mut nodes = s.into_nodes();
                assert_eq!(nodes.len(), 1, "{units} units leave one sum");
                nodes.pop_first().unwrap().1
            };
            let forward: Vec<u64> = (0..units).collect();
            let backward: Vec<u64> = (0..units).rev().collect();
            let whole = sum(&forward);
            assert_eq!(whole, sum(&backward));
            // Two parties with every third unit and the rest, then put together.
            let mut parts = [Sums::new(units), Sums::new(units)];
            for u in 0..units {
                parts[usize::from(u % 3 == 0)].insert((0, u), unit(u));
            }
            let [a, b] = parts;
            let mut all = Sums::new(units);
            for (node, t) in b.into_nodes().into_iter().chain(a.into_nodes()) {
                all.insert(node, t);
            }
            assert_eq!(all.into_nodes().pop_first().unwrap().1, whole);
        }
    }
}
