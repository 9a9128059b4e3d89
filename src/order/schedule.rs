//! The evaluation order of a tree that keeps the fewest elements alive.
//!
//! Every step first adds its result to what is alive, then takes its operands away. Among all
//! orders of the steps of one tree (children before parents, branches interleaved at will)
//! the least peak is found exactly: each branch is a list of segments with a climb and a net
//! change, kept so that no segment would rather come before the one in front of it; lists of
//! two branches are merged by the same rule (minimum maximum cumulative cost under tree
//! precedence; SIAM J. Alg. Disc. Meth. 8, 375 (1987)). Segments that lower what is alive come
//! first, the smaller climb first; then those that raise it, the larger fall from their
//! climb first.

use super::tree::Tree;
use std::cmp::Ordering;

/// A run of steps that stays together.
#[derive(Debug, Clone, Copy)]
struct Segment {
    /// Most that is alive during it, above what was alive before.
    climb: f64,
    /// What is alive after it, above what was before.
    change: f64,
    first: u32,
    last: u32,
}

impl Segment {
    fn before(&self, other: &Self) -> Ordering {
        match (self.change <= 0.0, other.change <= 0.0) {
            (true, false) => Ordering::Less,
            (false, true) => Ordering::Greater,
            (true, true) => self.climb.total_cmp(&other.climb),
            (false, false) => (other.climb - other.change).total_cmp(&(self.climb - self.change)),
        }
    }
}

/// The results in an order of least peak, children before parents.
pub(crate) fn least_peak(tree: &Tree) -> Vec<u32> {
    // Sizes relative to the largest, so that doubles hold the ones that matter.
    let shift = (tree.largest() - 900.0).max(0.0);
    let size: Vec<f64> = tree.size.iter().map(|s| (s - shift).exp2()).collect();
    let nodes = tree.children.len();
    let mut lists: Vec<Vec<Segment>> = vec![Vec::new(); nodes];
    let mut next: Vec<u32> = vec![u32::MAX; nodes];
    for v in tree.bottom_up() {
        let [a, b] = tree.children[v as usize];
        let (x, y) =
            (std::mem::take(&mut lists[a as usize]), std::mem::take(&mut lists[b as usize]));
        let mut list = merge(x, y);
        let mut s = Segment {
            climb: size[v as usize],
            change: size[v as usize] - size[a as usize] - size[b as usize],
            first: v,
            last: v,
        };
        while let Some(&p) = list.last() {
            if p.before(&s) != Ordering::Greater {
                break;
            }
            list.pop();
            next[p.last as usize] = s.first;
            s = Segment {
                climb: p.climb.max(p.change + s.climb),
                change: p.change + s.change,
                first: p.first,
                last: s.last,
            };
        }
        list.push(s);
        lists[v as usize] = list;
    }
    let mut order = Vec::with_capacity(tree.leaves.saturating_sub(1));
    for s in &lists[tree.root as usize] {
        let mut v = s.first;
        loop {
            order.push(v);
            if v == s.last {
                break;
            }
            v = next[v as usize];
        }
    }
    order
}

fn merge(x: Vec<Segment>, y: Vec<Segment>) -> Vec<Segment> {
    if x.is_empty() {
        return y;
    }
    if y.is_empty() {
        return x;
    }
    // A short list is put into the long one, so that combs stay cheap.
    let (long, short) = if x.len() >= y.len() { (x, y) } else { (y, x) };
    if short.len() * 16 < long.len() {
        let mut list = long;
        let mut from = 0;
        for s in short {
            let at = from + list[from..].partition_point(|p| p.before(&s) != Ordering::Greater);
            list.insert(at, s);
            from = at + 1;
        }
        return list;
    }
    let mut list = Vec::with_capacity(long.len() + short.len());
    let (mut i, mut j) = (0, 0);
    while i < long.len() && j < short.len() {
        if long[i].before(&short[j]) == Ordering::Greater {
            list.push(short[j]);
            j += 1;
        } else {
            list.push(long[i]);
            i += 1;
        }
    }
    list.extend_from_slice(&long[i..]);
    list.extend_from_slice(&short[j..]);
    list
}
