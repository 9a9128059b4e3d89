//! Reductions: what can be said about the best order before looking for it.
//!
//! * *Parallel bonds.* Labels held by the same tensors are one label of the product size:
//!   exact.
//! * *Components.* Parts that share no label are ordered apart and joined last, the smallest
//!   results first. Parts that are copies of one another are ordered once. Joining results
//!   takes at most a pass over each more than the best order, so networks small enough for
//!   the exhaustive method are kept whole.
//!
//! (Absorbing a tensor into a neighbour that holds all its labels leaves the widest step of
//! the best order as it is but not its multiply-adds; the search for narrow orders uses it.)

use super::net::{Net, Steps};
use std::collections::{BTreeMap, BinaryHeap, HashMap};

/// A connected part of a net, as a net of its own.
#[derive(Debug, Clone)]
pub(crate) struct Part {
    pub net: Net,
    /// The tensors of the whole that are its tensors.
    pub tensors: Vec<u32>,
    /// The number of the first part that is a copy of this one; its own where there is none.
    pub like: usize,
}

/// The net as one part, parallel labels fused.
pub(crate) fn whole(net: &Net) -> Part {
    let tensors: Vec<u32> = (0..net.tensors.len() as u32).collect();
    let part = cut_out(net, &net.holders(), &tensors, &tensors);
    Part { net: part, tensors, like: 0 }
}

/// The connected parts of a net, parallel labels fused.
pub(crate) fn split(net: &Net) -> Vec<Part> {
    let n = net.tensors.len();
    let mut part_of = vec![usize::MAX; n];
    let holders = net.holders();
    let mut parts: Vec<Vec<u32>> = Vec::new();
    let mut label_seen = vec![false; net.bits.len()];
    for start in 0..n {
        if part_of[start] != usize::MAX {
            continue;
        }
        let number = parts.len();
        part_of[start] = number;
        let mut found = vec![start as u32];
        let mut at = 0;
        while at < found.len() {
            for &l in &net.tensors[found[at] as usize] {
                if std::mem::replace(&mut label_seen[l as usize], true) {
                    continue;
                }
                for &t in &holders[l as usize] {
                    if part_of[t as usize] == usize::MAX {
                        part_of[t as usize] = number;
                        found.push(t);
                    }
                }
            }
            at += 1;
        }
        found.sort_unstable();
        parts.push(found);
    }
    let mut place = vec![u32::MAX; n];
    let mut known: BTreeMap<Key, usize> = BTreeMap::new();
    parts
        .into_iter()
        .enumerate()
        .map(|(number, tensors)| {
            for (i, &t) in tensors.iter().enumerate() {
                place[t as usize] = i as u32;
            }
            let part = cut_out(net, &holders, &tensors, &place);
            let like = *known.entry(Key::of(&part)).or_insert(number);
            Part { net: part, tensors, like }
        })
        .collect()
}

/// What makes two parts copies: sizes as exact bits, label numbers by first appearance.
#[derive(PartialEq, Eq, PartialOrd, Ord)]
struct Key(Vec<u64>, Vec<Vec<u32>>);

impl Key {
    fn of(net: &Net) -> Self {
        let sizes = net
            .bits
            .iter()
            .zip(&net.open)
            .flat_map(|(b, &o)| [b.to_bits(), u64::from(o)])
            .chain(net.lone.iter().map(|l| l.to_bits()))
            .collect();
        Self(sizes, net.tensors.clone())
    }
}

/// The part with these tensors; labels are numbered by first appearance.
fn cut_out(net: &Net, holders: &[Vec<u32>], tensors: &[u32], place: &[u32]) -> Net {
    let mut number: HashMap<u32, Option<u32>> = HashMap::new();
    let mut by_holders: HashMap<(bool, Vec<u32>), u32> = HashMap::new();
    let (mut bits, mut open) = (Vec::new(), Vec::new());
    let mut sets = Vec::with_capacity(tensors.len());
    for &t in tensors {
        let mut set = Vec::new();
        for &l in &net.tensors[t as usize] {
            let new = *number.entry(l).or_insert_with(|| {
                let held: Vec<u32> =
                    holders[l as usize].iter().map(|&h| place[h as usize]).collect();
                let is_open = net.open[l as usize];
                let fresh = bits.len() as u32;
                let at = *by_holders.entry((is_open, held)).or_insert(fresh);
                if at == fresh {
                    bits.push(net.bits[l as usize]);
                    open.push(is_open);
                    Some(at)
                } else {
                    bits[at as usize] += net.bits[l as usize];
                    None
                }
            });
            set.extend(new);
        }
        set.sort_unstable();
        sets.push(set);
    }
    let lone = tensors.iter().map(|&t| net.lone[t as usize]).collect();
    Net { bits, open, tensors: sets, lone }
}

/// Joins the steps of the parts, given in order, to steps of the whole; the results of the
/// parts are joined smallest first.
pub(crate) fn join(net: &Net, parts: &[Part], steps: &[Steps]) -> Steps {
    let n = net.tensors.len();
    let mut all = Vec::with_capacity(n.saturating_sub(1));
    let mut heap = BinaryHeap::new();
    for (part, own) in parts.iter().zip(steps) {
        let k = part.tensors.len();
        let mut number = part.tensors.clone();
        for &(a, b) in own {
            all.push((number[a as usize], number[b as usize]));
            number.push((n + all.len() - 1) as u32);
        }
        debug_assert_eq!(own.len() + 1, k);
        // What is left of a part: its open labels.
        let size: f64 = part.net.lone.iter().sum::<f64>()
            + part
                .net
                .bits
                .iter()
                .zip(&part.net.open)
                .filter(|(_, o)| **o)
                .map(|(b, _)| b)
                .sum::<f64>();
        heap.push(Left { size, node: *number.last().expect("a part has a tensor") });
    }
    while let (Some(a), Some(b)) = (heap.pop(), heap.pop()) {
        all.push((a.node, b.node));
        heap.push(Left { size: a.size + b.size, node: (n + all.len() - 1) as u32 });
    }
    all
}

/// A result waiting to be joined; the smallest is the greatest in this order.
#[derive(PartialEq)]
struct Left {
    size: f64,
    node: u32,
}
impl Eq for Left {}
impl PartialOrd for Left {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}
impl Ord for Left {
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        other.size.total_cmp(&self.size).then(other.node.cmp(&self.node))
    }
}
