//! Simulated annealing on contraction trees by local rotations.
//!
//! A move takes a result P = (X, C) with X = (A, B) and hangs C beside A or beside B:
//! ((A, C), B) or ((B, C), A). Only X changes its labels: it keeps those of its new operands
//! that the other operand or P still needs. A move is judged by the doublings of the price of
//! the two steps (as arXiv:2108.05665 does), always taken when they do not grow, and with probability
//! 2^(−growth / temperature) when they do. Any tree can be reached from any other.

use super::net::Net;
use super::price::Price;
use super::tree::Tree;
use crate::watch::Watch;
use rand::Rng;
use rand_chacha::ChaCha8Rng;

/// How to cool.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Schedule {
    /// First temperature, in doublings.
    pub hot: f64,
    /// Last temperature.
    pub cold: f64,
    /// Work to spend (labels touched).
    pub work: u64,
}

/// Marks of the labels of two node sets.
struct Marks(Vec<u8>);

const OTHER: u8 = 1;
const PARENT: u8 = 2;

/// Anneals a tree and leaves the best tree met in its place. Returns the work done.
pub(crate) fn run(
    net: &Net,
    tree: &mut Tree,
    price: Price,
    schedule: Schedule,
    rng: &mut ChaCha8Rng,
    watch: &dyn Watch,
) -> u64 {
    let n = tree.leaves;
    if n < 3 {
        return 0;
    }
    let mut marks = Marks(vec![0; net.bits.len()]);
    let mut spent = 0u64;
    let mut best = Keep::of(tree, price);
    let mut rounds = 0u32;
    while spent < schedule.work {
        let done = spent as f64 / schedule.work as f64;
        let temperature = schedule.hot * (schedule.cold / schedule.hot).powf(done);
        for _ in 0..n {
            let p = (n + rng.random_range(0..n - 1)) as u32;
            spent += attempt(net, tree, price, temperature, p, rng, &mut marks);
        }
        rounds += 1;
        // Early on the tree is worse than what it began with; looking costs as much as a
        // tenth of the moves.
        if rounds.is_multiple_of(4) || n > 2000 {
            best.look(tree, price);
            if watch.stop() {
                break;
            }
        }
    }
    best.look(tree, price);
    best.restore(net, tree);
    spent
}

/// The shape of the best tree so far.
struct Keep {
    total: f64,
    children: Vec<[u32; 2]>,
    root: u32,
}

impl Keep {
    fn of(tree: &Tree, price: Price) -> Self {
        Self { total: tree.total(price), children: tree.children.clone(), root: tree.root }
    }
    fn look(&mut self, tree: &Tree, price: Price) {
        let total = tree.total(price);
        if total < self.total - 1e-12 {
            self.total = total;
            self.children.clone_from(&tree.children);
            self.root = tree.root;
        }
    }
    fn restore(self, net: &Net, tree: &mut Tree) {
        if self.children == tree.children {
            return;
        }
        tree.children = self.children;
        tree.root = self.root;
        let steps = tree.steps();
        *tree = Tree::new(net, &steps);
    }
}

/// One move at P; the labels touched.
fn attempt(
    net: &Net,
    tree: &mut Tree,
    price: Price,
    temperature: f64,
    p: u32,
    rng: &mut ChaCha8Rng,
    marks: &mut Marks,
) -> u64 {
    let [l, r] = tree.children[p as usize];
    let coin: u32 = rng.random();
    let (x, c) = match (tree.is_leaf(l), tree.is_leaf(r)) {
        (true, true) => return 1,
        (false, true) => (l, r),
        (true, false) => (r, l),
        (false, false) if coin & 1 == 0 => (l, r),
        _ => (r, l),
    };
    let [a, b] = tree.children[x as usize];
    let (k, o) = if coin & 2 == 0 { (a, b) } else { (b, a) };
    let (ks, cs) = (&tree.sets[k as usize], &tree.sets[c as usize]);
    let (os, ps) = (&tree.sets[o as usize], &tree.sets[p as usize]);
    let touched = (ks.len() + cs.len() + 2 * (os.len() + ps.len()) + 8) as u64;
    let mut other_bits = 0.0;
    for &l in os {
        marks.0[l as usize] |= OTHER;
        other_bits += net.bits[l as usize];
    }
    for &l in ps {
        marks.0[l as usize] |= PARENT;
    }
    let lone_x = tree.lone[k as usize] + tree.lone[c as usize];
    // Bits met by the new X, left on it, and of those left the ones that O does not hold.
    let (mut met, mut left, mut more) = (0.0, 0.0, 0.0);
    let mut look = |l: u32| {
        let bits = net.bits[l as usize];
        met += bits;
        let m = marks.0[l as usize];
        if m != 0 {
            left += bits;
            if m & OTHER == 0 {
                more += bits;
            }
        }
    };
    let (mut i, mut j) = (0, 0);
    while i < ks.len() && j < cs.len() {
        let (u, v) = (ks[i], cs[j]);
        look(u.min(v));
        i += usize::from(u <= v);
        j += usize::from(v <= u);
    }
    ks[i..].iter().for_each(|&l| look(l));
    cs[j..].iter().for_each(|&l| look(l));
    let (met, left) = (met + lone_x, left + lone_x);
    let met_p = other_bits + more + tree.lone[p as usize];
    let size_p = tree.size[p as usize];
    let before = super::greedy::log2_sum(
        price.step(tree.met[x as usize], tree.size[x as usize]),
        price.step(tree.met[p as usize], size_p),
    );
    let after = super::greedy::log2_sum(price.step(met, left), price.step(met_p, size_p));
    let growth = after - before;
    let taken = growth <= 0.0
        || (temperature > 0.0 && {
            let u: f64 = rng.random();
            u < (-growth / temperature).exp2()
        });
    if taken {
        let mut set = std::mem::take(&mut tree.sets[x as usize]);
        set.clear();
        let (ks, cs) = (&tree.sets[k as usize], &tree.sets[c as usize]);
        let (mut i, mut j) = (0, 0);
        while i < ks.len() || j < cs.len() {
            let u = ks.get(i).copied().unwrap_or(u32::MAX);
            let v = cs.get(j).copied().unwrap_or(u32::MAX);
            let l = u.min(v);
            if marks.0[l as usize] != 0 {
                set.push(l);
            }
            i += usize::from(u <= v);
            j += usize::from(v <= u);
        }
        tree.children[x as usize] = [k, c];
        tree.children[p as usize] = [x, o];
        tree.parent[c as usize] = x;
        tree.parent[o as usize] = p;
        tree.lone[x as usize] = lone_x;
        tree.met[x as usize] = met;
        tree.size[x as usize] = left;
        tree.met[p as usize] = met_p;
        tree.sets[x as usize] = set;
    }
    for &l in tree.sets[o as usize].iter().chain(&tree.sets[p as usize]) {
        marks.0[l as usize] = 0;
    }
    touched
}
