//! Greedy orders: always join the pair of neighbours that looks best.
//!
//! A heuristic in n log n: it promises a valid order, fast, and nothing about its cost. A
//! pair's figure of merit is size(result) − α·(size(a) + size(b)); with α = 1 it is the
//! change of the elements alive. Randomised restarts vary α and shake the figures (thermal
//! noise of a given temperature, in doublings).

use super::cost::{keep, merge};
use super::net::{Net, Steps};
use rand::Rng;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::SeedableRng;
use std::cmp::Reverse;
use std::collections::BinaryHeap;

/// Which pair looks best.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Rule {
    /// Weight of the operands' sizes against the result's.
    pub alpha: f64,
    /// Temperature of the noise on a figure of merit, in doublings; 0 for none.
    pub noise: f64,
}

impl Default for Rule {
    fn default() -> Self {
        Self { alpha: 1.0, noise: 0.0 }
    }
}

/// A label on more tensors than this offers only some of its pairs.
const CROWD: usize = 12;

/// log2(2^a + 2^b).
pub(super) fn log2_sum(a: f64, b: f64) -> f64 {
    let (hi, lo) = if a >= b { (a, b) } else { (b, a) };
    if lo == f64::NEG_INFINITY {
        hi
    } else {
        hi + (lo - hi).exp2().ln_1p() * std::f64::consts::LOG2_E
    }
}

/// A figure that orders x = 2^out − α(2^a + 2^b) without ever forming such numbers: the
/// sign of x times its logarithm, shifted so that the logarithm is positive.
fn merit(out: f64, a: f64, b: f64, rule: Rule) -> f64 {
    const SHIFT: f64 = 64.0;
    if rule.alpha <= 0.0 {
        return SHIFT + out;
    }
    let inputs = log2_sum(a, b) + rule.alpha.log2();
    let (hi, lo) = (out.max(inputs), out.min(inputs));
    let rest = 1.0 - (lo - hi).exp2();
    if rest <= 0.0 {
        return 0.0;
    }
    let size = (hi + rest.log2() + SHIFT).max(1e-9);
    if out > inputs { size } else { -size }
}

/// A total order on figures of merit.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Figure(f64);
impl Eq for Figure {}
impl PartialOrd for Figure {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}
impl Ord for Figure {
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        self.0.total_cmp(&other.0)
    }
}

struct State<'a> {
    net: &'a Net,
    rule: Rule,
    rng: ChaCha8Rng,
    live: Vec<Option<Vec<u32>>>,
    sizes: Vec<f64>,
    lone: Vec<f64>,
    left: Vec<u32>,
    holders: Vec<Vec<u32>>,
    queue: BinaryHeap<Reverse<(Figure, u32, u32)>>,
    steps: Steps,
}

/// A greedy order by this rule; the seed matters where the rule has noise.
pub(crate) fn order(net: &Net, rule: Rule, seed: u64) -> Steps {
    let sizes = net.tensors.iter().zip(&net.lone).map(|(t, lone)| net.size(t) + lone).collect();

    let mut s = State {
        net,
        rule,
        rng: ChaCha8Rng::seed_from_u64(seed),
        live: net.tensors.iter().cloned().map(Some).collect(),
        sizes,
        lone: net.lone.clone(),
        left: net.counts(),
        holders: net.holders(),
        queue: BinaryHeap::new(),
        steps: Vec::with_capacity(net.tensors.len().saturating_sub(1)),
    };
    loop {
        s.offer_all();
        if s.queue.is_empty() {
            break;
        }
        while let Some(Reverse((_, a, b))) = s.queue.pop() {
            if s.live[a as usize].is_some() && s.live[b as usize].is_some() {
                let c = s.join(a, b);
                s.offer_neighbours(c);
            }
        }
    }
    s.join_parts();
    s.steps
}

impl State<'_> {
    /// Offers pairs of live tensors that share a label.
    fn offer_all(&mut self) {
        let mut pairs = Vec::new();
        for l in 0..self.holders.len() {
            let live = &self.live;
            let list = &mut self.holders[l];
            list.retain(|&t| live[t as usize].is_some());
            if list.len() <= CROWD {
                for (i, &a) in list.iter().enumerate() {
                    pairs.extend(list[i + 1..].iter().map(|&b| (a, b)));
                }
            } else {
                let sizes = &self.sizes;
                list.sort_by(|&a, &b| {
                    sizes[a as usize].total_cmp(&sizes[b as usize]).then(a.cmp(&b))
                });
                pairs.extend(list.windows(2).map(|w| (w[0].min(w[1]), w[0].max(w[1]))));
            }
        }
        pairs.sort_unstable();
        pairs.dedup();
        for (a, b) in pairs {
            self.offer(a, b);
        }
    }
    fn offer_neighbours(&mut self, c: u32) {
        let mut near = Vec::new();
        let set = self.live[c as usize].clone().unwrap_or_default();
        for &l in &set {
            let live = &self.live;
            let list = &mut self.holders[l as usize];
            if list.len() > 2 * self.left[l as usize] as usize {
                list.retain(|&t| live[t as usize].is_some());
            }
            near.extend(
                list.iter().rev().filter(|&&t| t != c && live[t as usize].is_some()).take(CROWD),
            );
        }
        near.sort_unstable();
        near.dedup();
        for t in near {
            self.offer(t, c);
        }
    }
    fn offer(&mut self, a: u32, b: u32) {
        let (Some(x), Some(y)) = (&self.live[a as usize], &self.live[b as usize]) else {
            return;
        };
        let mut out = self.sizes[a as usize] + self.sizes[b as usize];
        let (mut i, mut j) = (0, 0);
        while i < x.len() && j < y.len() {
            let (p, q) = (x[i], y[j]);
            if p == q {
                let gone = self.left[p as usize] == 2;
                out -= self.net.bits[p as usize] * if gone { 2.0 } else { 1.0 };
            }
            i += usize::from(p <= q);
            j += usize::from(q <= p);
        }
        let mut figure = merit(out, self.sizes[a as usize], self.sizes[b as usize], self.rule);
        if self.rule.noise > 0.0 {
            let u: f64 = self.rng.random();
            figure -= self.rule.noise * -(-(u.max(1e-300)).ln()).ln();
        }
        self.queue.push(Reverse((Figure(figure), a, b)));
    }
    fn join(&mut self, a: u32, b: u32) -> u32 {
        let x = self.live[a as usize].take().unwrap_or_default();
        let y = self.live[b as usize].take().unwrap_or_default();
        let mut union = Vec::with_capacity(x.len() + y.len());
        merge(&x, &y, &mut union);
        let result = keep(&x, &y, &union, &mut self.left);
        let c = self.live.len() as u32;
        for &l in &result {
            self.holders[l as usize].push(c);
        }
        let lone = self.lone[a as usize] + self.lone[b as usize];
        self.lone.push(lone);
        self.sizes.push(self.net.size(&result) + lone);
        self.live.push(Some(result));
        self.steps.push((a, b));
        c
    }
    /// What is left shares nothing but open labels at most: smallest first.
    fn join_parts(&mut self) {
        let mut queue: BinaryHeap<Reverse<(Figure, u32)>> = (0..self.live.len())
            .filter(|&t| self.live[t].is_some())
            .map(|t| Reverse((Figure(self.sizes[t]), t as u32)))
            .collect();
        while let (Some(Reverse((_, a))), Some(Reverse((_, b)))) = (queue.pop(), queue.pop()) {
            let c = self.join(a, b);
            queue.push(Reverse((Figure(self.sizes[c as usize]), c)));
        }
    }
}
