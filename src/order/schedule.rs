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
    /// The two as one, `other` right behind.
    fn followed_by(&self, other: &Self) -> Self {
        Self {
            climb: self.climb.max(self.change + other.climb),
            change: self.change + other.change,
            first: self.first,
            last: other.last,
        }
    }
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
        let mut list = merge(x, y, &mut next);
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
            s = p.followed_by(&s);
        }
        put(&mut list, s, &mut next);
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

/// Puts a segment behind a list whose segments are none of them later; one that is equal to
/// the last joins it, which loses nothing (whatever comes before or after one comes before or
/// after both) and keeps lists short.
fn put(list: &mut Vec<Segment>, s: Segment, next: &mut [u32]) {
    match list.last_mut() {
        Some(p) if p.before(&s) == Ordering::Equal => {
            next[p.last as usize] = s.first;
            *p = p.followed_by(&s);
        }
        _ => list.push(s),
    }
}

fn merge(x: Vec<Segment>, y: Vec<Segment>, next: &mut [u32]) -> Vec<Segment> {
    // A short list is put into the long one, so that combs stay cheap.
    let (mut long, short) = if x.len() >= y.len() { (x, y) } else { (y, x) };
    if short.len() * 16 < long.len() {
        for s in short {
            let at = long.partition_point(|p| p.before(&s) == Ordering::Less);
            match long.get_mut(at) {
                Some(p) if p.before(&s) == Ordering::Equal => {
                    next[p.last as usize] = s.first;
                    *p = p.followed_by(&s);
                }
                _ => long.insert(at, s),
            }
        }
        return long;
    }
    let mut list = Vec::with_capacity(long.len() + short.len());
    let (mut i, mut j) = (0, 0);
    while i < long.len() || j < short.len() {
        let take_short =
            i == long.len() || (j < short.len() && long[i].before(&short[j]) == Ordering::Greater);
        let s = if take_short { short[j] } else { long[i] };
        j += usize::from(take_short);
        i += usize::from(!take_short);
        put(&mut list, s, next);
    }
    list
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::order::net::Net;
    use crate::order::{Plan, Shape, cost};
    use crate::tensor::Label;
    use rand::Rng;
    use rand_chacha::ChaCha8Rng;
    use rand_chacha::rand_core::SeedableRng;

    /// The least peak over all orders of the results, by trying them all.
    fn slow(shape: &Shape, tree: &Tree, done: &mut Vec<u32>, best: &mut u128) {
        if done.len() + 1 == tree.leaves {
            let plan = Plan { steps: tree.steps_in(done), sliced: Vec::new() };
            let peak = cost(shape, &plan).unwrap().peak_elements.unwrap();
            *best = (*best).min(peak);
            return;
        }
        for v in tree.leaves as u32..tree.children.len() as u32 {
            let ready =
                tree.children[v as usize].iter().all(|&c| tree.is_leaf(c) || done.contains(&c));
            if ready && !done.contains(&v) {
                done.push(v);
                slow(shape, tree, done, best);
                done.pop();
            }
        }
    }

    #[test]
    fn no_order_of_the_steps_has_a_smaller_peak() {
        let mut rng = ChaCha8Rng::seed_from_u64(3);
        for _ in 0..60 {
            let n = rng.random_range(2..8);
            let mut tensors = vec![Vec::new(); n];
            let mut sizes = Vec::new();
            let mut open = Vec::new();
            for l in 0..rng.random_range(n..3 * n) {
                sizes.push(rng.random_range(1..9));
                let (a, b) = (rng.random_range(0..n), rng.random_range(0..n));
                tensors[a].push(Label::new(l as u32));
                tensors[b].push(Label::new(l as u32));
                if rng.random_range(0..5) == 0 {
                    open.push(Label::new(l as u32));
                }
            }
            let shape = Shape::new(sizes, tensors, open).unwrap();
            let net = Net::of(&shape, &[]);
            let mut alive: Vec<u32> = (0..n as u32).collect();
            let mut steps = Vec::new();
            while alive.len() > 1 {
                let a = alive.swap_remove(rng.random_range(0..alive.len()));
                let b = alive.swap_remove(rng.random_range(0..alive.len()));
                alive.push((n + steps.len()) as u32);
                steps.push((a, b));
            }
            let tree = Tree::new(&net, &steps);
            let mut best = u128::MAX;
            slow(&shape, &tree, &mut Vec::new(), &mut best);
            let plan = Plan { steps: tree.steps_in(&least_peak(&tree)), sliced: Vec::new() };
            assert_eq!(cost(&shape, &plan).unwrap().peak_elements, Some(best));
        }
    }
}
