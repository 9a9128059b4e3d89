//! Orders in which labels are summed, turned into trees.
//!
//! Summing a label joins all tensors that hold it; in the line graph its neighbours become a
//! clique. Minimum fill and minimum degree choose the next label greedily, ties (and
//! near-ties) broken at random; a local search then moves single labels to other places in
//! the order, those of the widest steps more often than others, by simulated annealing on
//! Σ 4^(bits of the clique). Every order gives a tree, and the best
//! tree's widest step comes from some order (SIAM J. Comput. 38, 963 (2008)).

use super::graph::{Graph, LineGraph, members};
use super::greedy::log2_sum;
use super::net::{Net, Steps};
use super::tree::Tree;
use crate::watch::Watch;
use rand::Rng;
use rand_chacha::ChaCha8Rng;

/// How the next label is chosen.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Choice {
    /// Fewest new pairs of neighbours.
    Fill,
    /// Smallest clique.
    Degree,
    /// Fewest new pairs for the size of the clique.
    FillAndDegree,
}

/// A greedy elimination order of the closed labels (vertices of the line graph).
pub(crate) fn greedy(line: &LineGraph, choice: Choice, rng: &mut ChaCha8Rng) -> Vec<u32> {
    let n = line.graph.n;
    let mut g = line.graph.clone();
    let figure = |g: &Graph, v: usize| -> f64 {
        match choice {
            Choice::Fill => g.fill_of(v) as f64,
            Choice::Degree => g.row_bits(v, &line.bits),
            Choice::FillAndDegree => {
                let d = g.degree(v) as f64;
                g.fill_of(v) as f64 + d
            }
        }
    };
    let mut figures: Vec<f64> = (0..n).map(|v| figure(&g, v)).collect();
    let mut shake: Vec<u32> = (0..n).map(|_| rng.random()).collect();
    let mut left: Vec<usize> = (0..n).filter(|&v| !line.open[v]).collect();
    let mut order = Vec::with_capacity(left.len());
    let mut row = Vec::new();
    while !left.is_empty() {
        let (at, &v) = left
            .iter()
            .enumerate()
            .min_by(|(_, a), (_, b)| {
                figures[**a].total_cmp(&figures[**b]).then(shake[**a].cmp(&shake[**b]))
            })
            .expect("labels are left");
        left.swap_remove(at);
        order.push(v as u32);
        let near = g.neighbours(v);
        let new_pairs = g.fill_of(v) > 0;
        g.eliminate(v, &mut row);
        // Figures change for the neighbours and, where pairs were joined, for theirs.
        let mut touched = vec![0u64; g.words];
        for &u in &near {
            touched[u / 64] |= 1 << (u % 64);
            if new_pairs && choice != Choice::Degree {
                touched.iter_mut().zip(g.row(u)).for_each(|(t, r)| *t |= r);
            }
        }
        for u in members(&touched) {
            figures[u] = figure(&g, u);
            shake[u] = rng.random();
        }
    }
    order
}

impl Graph {
    /// Bits of the neighbours of v.
    fn row_bits(&self, v: usize, bits: &[f64]) -> f64 {
        members(self.row(v)).into_iter().map(|u| bits[u]).sum()
    }
}

/// Most bytes for the graphs kept along an order.
const KEPT: usize = 32 << 20;

/// An order under search. What is left of the graph depends on which labels are gone, not on
/// their order: a move changes nothing outside the stretch between its two places. Graphs
/// kept at every `stride`-th place make the stretch cheap to look at.
struct Search<'a> {
    line: &'a LineGraph,
    /// The common size of all labels, where they have one.
    uniform: Option<f64>,
    order: Vec<u32>,
    /// Bits of the clique at each place.
    widths: Vec<f64>,
    /// Σ 4^(bits − scale).
    sum: f64,
    scale: f64,
    stride: usize,
    kept: Vec<Graph>,
    scratch: Graph,
    row: Vec<u64>,
    work: u64,
}

impl<'a> Search<'a> {
    fn new(line: &'a LineGraph, order: Vec<u32>) -> Self {
        let n = order.len();
        let first = line.bits.first().copied().unwrap_or(1.0);
        let one = line.graph.n * line.graph.words * 8;
        let stride = (n * one / KEPT + 1).max(12);
        let mut s = Self {
            line,
            uniform: line.bits.iter().all(|&b| b == first).then_some(first),
            widths: vec![0.0; n],
            order,
            sum: 0.0,
            scale: 0.0,
            stride,
            kept: vec![line.graph.clone(); n.div_ceil(stride)],
            scratch: line.graph.clone(),
            row: Vec::new(),
            work: 0,
        };
        s.settle(0, n);
        s.scale = s.widest();
        s.sum = s.widths.iter().map(|&w| s.weight(w)).sum();
        s
    }
    fn weight(&self, bits: f64) -> f64 {
        (2.0 * (bits - self.scale)).clamp(-1000.0, 900.0).exp2()
    }
    fn widest(&self) -> f64 {
        self.widths.iter().copied().fold(0.0, f64::max)
    }
    /// Takes a label out of the scratch graph; the bits of its clique.
    fn take(&mut self, v: usize) -> f64 {
        let bits = match self.uniform {
            Some(_) => 0.0,
            None => self.scratch.row_bits(v, &self.line.bits) + self.line.bits[v],
        };
        let degree = self.scratch.eliminate(v, &mut self.row);
        self.work += 4 + (degree * (self.scratch.words + 6) / 8) as u64;
        self.uniform.map_or(bits, |b| b * (degree + 1) as f64)
    }
    /// Sets the scratch graph to what is left before a place.
    fn go_to(&mut self, place: usize) {
        let at = place / self.stride;
        self.scratch.clone_from(&self.kept[at]);
        self.work += (self.scratch.n * self.scratch.words / 32) as u64;
        for i in at * self.stride..place {
            let v = self.order[i] as usize;
            self.take(v);
        }
    }
    /// Brings widths and kept graphs of a stretch of places up to date.
    fn settle(&mut self, from: usize, to: usize) {
        self.go_to(from);
        for i in from..to {
            if i % self.stride == 0 && i > 0 {
                self.kept[i / self.stride].clone_from(&self.scratch);
            }
            let v = self.order[i] as usize;
            self.widths[i] = self.take(v);
        }
        if to < self.order.len() && to.is_multiple_of(self.stride) {
            self.kept[to / self.stride].clone_from(&self.scratch);
        }
    }
    /// Moves the label at one place to another.
    fn rotate(&mut self, from: usize, to: usize) {
        if from < to {
            self.order[from..=to].rotate_left(1);
        } else {
            self.order[to..=from].rotate_right(1);
        }
    }
    /// Tries a move; makes it and returns true where the growth is accepted.
    fn attempt(&mut self, from: usize, to: usize, accept: impl FnOnce(f64) -> bool) -> bool {
        let (lo, hi) = (from.min(to), from.max(to));
        self.go_to(lo);
        self.rotate(from, to);
        let before: f64 = self.widths[lo..=hi].iter().map(|&w| self.weight(w)).sum();
        let mut after = 0.0;
        for i in lo..=hi {
            let v = self.order[i] as usize;
            let bits = self.take(v);
            after += self.weight(bits);
        }
        let sum = (self.sum - before + after).max(f64::MIN_POSITIVE);
        if accept((sum / self.sum).log2()) {
            self.settle(lo, hi + 1);
            // Afresh, so that no rounding builds up.
            self.sum = self.widths.iter().map(|&w| self.weight(w)).sum();
            true
        } else {
            self.rotate(to, from);
            false
        }
    }
}

/// Improves an order by moving labels; `work` counts neighbours met. Ends early where the
/// widest clique is down to `goal` bits. Returns the best order.
pub(crate) fn improve(
    line: &LineGraph,
    order: Vec<u32>,
    hot: f64,
    goal: f64,
    work: u64,
    rng: &mut ChaCha8Rng,
    watch: &dyn Watch,
) -> Vec<u32> {
    let n = order.len();
    if n < 3 {
        return order;
    }
    let step = line.bits.iter().copied().fold(0.0, f64::max);
    let mut s = Search::new(line, order);
    let mut widest = s.widest();
    let mut best = (widest, s.sum, s.order.clone());
    let mut tries = 0u32;
    while s.work < work && best.0 > goal + 1e-9 {
        let temperature = hot * 0.02f64.powf(s.work as f64 / work as f64);
        let start = rng.random_range(0..n);
        let from = if rng.random::<f64>() < 0.5 {
            // A label whose clique is nearly as wide as the widest.
            (0..n)
                .map(|i| (start + i) % n)
                .find(|&i| s.widths[i] >= widest - step - 1e-9)
                .unwrap_or(start)
        } else {
            start
        };
        let reach = if rng.random::<f64>() < 0.8 { 10.min(n - 1) } else { n - 1 };
        let by = 1 + rng.random_range(0..reach);
        let to =
            if rng.random::<bool>() { (from + by).min(n - 1) } else { from.saturating_sub(by) };
        let chance: f64 = rng.random();
        if from == to {
            s.work += 1;
            continue;
        }
        if s.attempt(from, to, |growth| growth <= 0.0 || chance < (-growth / temperature).exp2()) {
            widest = s.widest();
            if (widest, s.sum) < (best.0, best.1) {
                best = (widest, s.sum, s.order.clone());
            }
        }
        tries += 1;
        if tries.is_multiple_of(256) && watch.stop() {
            break;
        }
    }
    best.2
}

/// The order in which a tree sums the closed labels, as vertices of the line graph.
pub(crate) fn order_of(net: &Net, tree: &Tree, line: &LineGraph) -> Vec<u32> {
    let mut vertex = vec![0u32; net.bits.len()];
    for (v, &l) in line.labels.iter().enumerate() {
        vertex[l as usize] = v as u32;
    }
    let mut order = Vec::with_capacity(line.labels.len());
    let mut union = Vec::new();
    for v in tree.bottom_up() {
        let [a, b] = tree.children[v as usize];
        super::cost::merge(&tree.sets[a as usize], &tree.sets[b as usize], &mut union);
        let kept = &tree.sets[v as usize];
        order.extend(
            union.iter().filter(|l| kept.binary_search(l).is_err()).map(|&l| vertex[l as usize]),
        );
    }
    order
}

/// The steps that sum the labels in this order: the tensors that hold a label are joined, the
/// two with the smallest union first; what is left at the end likewise.
pub(crate) fn steps(net: &Net, line: &LineGraph, order: &[u32]) -> Steps {
    let mut live: Vec<Option<Vec<u32>>> = net.tensors.iter().cloned().map(Some).collect();
    let mut lone = net.lone.clone();
    let mut left = net.counts();
    let mut holders = net.holders();
    let mut steps = Vec::with_capacity(live.len().saturating_sub(1));
    let join = |live: &mut Vec<Option<Vec<u32>>>,
                lone: &mut Vec<f64>,
                left: &mut Vec<u32>,
                holders: &mut Vec<Vec<u32>>,
                steps: &mut Steps,
                mut bucket: Vec<u32>| {
        while bucket.len() > 1 {
            let (i, j) = cheapest(net, live, lone, &bucket);
            let b = bucket.swap_remove(j);
            let a = bucket.swap_remove(i);
            let x = live[a as usize].take().unwrap_or_default();
            let y = live[b as usize].take().unwrap_or_default();
            let mut union = Vec::new();
            super::cost::merge(&x, &y, &mut union);
            let set = super::cost::keep(&x, &y, &union, left);
            let c = live.len() as u32;
            for &l in &set {
                let h = &mut holders[l as usize];
                h.retain(|&t| t != a && t != b);
                h.push(c);
            }
            lone.push(lone[a as usize] + lone[b as usize]);
            live.push(Some(set));
            steps.push((a, b));
            bucket.push(c);
        }
    };
    for &v in order {
        let bucket: Vec<u32> = holders[line.labels[v as usize] as usize]
            .iter()
            .copied()
            .filter(|&t| live[t as usize].is_some())
            .collect();
        join(&mut live, &mut lone, &mut left, &mut holders, &mut steps, bucket);
    }
    let rest = (0..live.len() as u32).filter(|&t| live[t as usize].is_some()).collect();
    join(&mut live, &mut lone, &mut left, &mut holders, &mut steps, rest);
    steps
}

/// Places i < j of the two tensors of the bucket whose union is smallest. Large buckets only
/// look at the smallest tensor and its partners.
fn cheapest(net: &Net, live: &[Option<Vec<u32>>], lone: &[f64], bucket: &[u32]) -> (usize, usize) {
    let set = |i: usize| live[bucket[i] as usize].as_deref().unwrap_or_default();
    let mut union = Vec::new();
    let mut best = (f64::INFINITY, f64::INFINITY, 0, 1);
    let mut firsts: Vec<usize> = (0..bucket.len()).collect();
    if bucket.len() > 24 {
        let smallest = firsts
            .iter()
            .copied()
            .min_by(|&a, &b| net.size(set(a)).total_cmp(&net.size(set(b))).then(a.cmp(&b)));
        firsts = smallest.into_iter().collect();
    }
    for &i in &firsts {
        for j in 0..bucket.len() {
            if i == j || (firsts.len() > 1 && j < i) {
                continue;
            }
            super::cost::merge(set(i), set(j), &mut union);
            let bits = net.size(&union) + lone[bucket[i] as usize] + lone[bucket[j] as usize];
            let parts = log2_sum(net.size(set(i)), net.size(set(j)));
            if (bits, -parts) < (best.0, best.1) {
                best = (bits, -parts, i.min(j), i.max(j));
            }
        }
    }
    (best.2, best.3)
}
