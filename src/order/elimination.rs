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
        g.eliminate(v);
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

/// An order under search, with the price of its cliques.
struct Search<'a> {
    line: &'a LineGraph,
    uniform: Option<f64>,
    scratch: Graph,
    widths: Vec<f64>,
}

impl Search<'_> {
    /// Bits of every label's clique in this order, itself included; returns the widest and
    /// log2 Σ 4^bits.
    fn weigh(&mut self, order: &[u32]) -> (f64, f64) {
        self.scratch.clone_from(&self.line.graph);
        let g = &mut self.scratch;
        let (mut widest, mut sum) = (0.0f64, 0.0f64);
        let mut scale = 0.0f64;
        for &v in order {
            let v = v as usize;
            let own = self.line.bits[v];
            let bits = match self.uniform {
                Some(b) => b * (g.degree(v) + 1) as f64,
                None => g.row_bits(v, &self.line.bits) + own,
            };
            self.widths[v] = bits;
            widest = widest.max(bits);
            let x = 2.0 * bits;
            if x > scale + 900.0 {
                sum *= (scale - x).exp2();
                scale = x;
            }
            sum += (x - scale).exp2();
            g.eliminate(v);
        }
        (widest, scale + sum.log2())
    }
}

/// Improves an order by moving labels; `work` counts labels eliminated. Ends early where the
/// widest clique is down to `goal` bits. Returns the best order and the bits of its widest clique.
pub(crate) fn improve(
    line: &LineGraph,
    order: Vec<u32>,
    goal: f64,
    work: u64,
    rng: &mut ChaCha8Rng,
    watch: &dyn Watch,
) -> (Vec<u32>, f64) {
    let n = order.len();
    let first = line.bits.first().copied().unwrap_or(1.0);
    let mut s = Search {
        line,
        uniform: line.bits.iter().all(|&b| b == first).then_some(first),
        scratch: line.graph.clone(),
        widths: vec![0.0; line.graph.n],
    };
    let mut now = order;
    let (mut widest, mut price) = s.weigh(&now);
    let mut best = (now.clone(), widest, price);
    if n < 3 {
        return (best.0, best.1);
    }
    let mut spent = 0u64;
    let mut tries = 0u32;
    while spent < work && best.1 > goal + 1e-9 {
        // Three heats: the first hot, later ones from the best order on.
        let done = (spent as f64 / work as f64 * 3.0).fract();
        let temperature = 2.0 * 0.02f64.powf(done);
        let from = if rng.random::<f64>() < 0.6 {
            // A label whose clique is nearly as wide as the widest.
            let start = rng.random_range(0..n);
            (0..n)
                .map(|i| (start + i) % n)
                .find(|&i| s.widths[now[i] as usize] >= widest - first)
                .unwrap_or(start)
        } else {
            rng.random_range(0..n)
        };
        let reach = if rng.random::<f64>() < 0.5 { 12.min(n - 1) } else { n - 1 };
        let by = 1 + rng.random_range(0..reach);
        let to =
            if rng.random::<bool>() { (from + by).min(n - 1) } else { from.saturating_sub(by) };
        if from == to {
            spent += 1;
            continue;
        }
        let mut next = now.clone();
        let v = next.remove(from);
        next.insert(to, v);
        let kept = s.widths.clone();
        let (w, p) = s.weigh(&next);
        spent += n as u64;
        let growth = p - price;
        if growth <= 0.0 || rng.random::<f64>() < (-growth / temperature).exp2() {
            now = next;
            (widest, price) = (w, p);
            if (w, p) < (best.1, best.2) {
                best = (now.clone(), w, p);
            }
        } else {
            s.widths = kept;
        }
        tries += 1;
        if tries.is_multiple_of(256) && watch.stop() {
            break;
        }
    }
    (best.0, best.1)
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
