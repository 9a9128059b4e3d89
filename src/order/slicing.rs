//! Labels to fix, so that a plan fits a memory.
//!
//! A sliced label is fixed to each of its values in turn: tensors that hold it shrink, and
//! every step without it is repeated. The label taken next is the one with the least growth
//! of multiply-adds for each doubling that the peak loses; between two slicings the tree is refined
//! for what is left of the network (windows and cold annealing), so that tree and slices
//! suit each other. At the end labels that turned out needless are set free again.

use super::anneal::{self, Schedule};
use super::greedy::log2_sum;
use super::net::{Net, Steps};
use super::price::Price;
use super::schedule;
use super::tree::Tree;
use super::windows;
use super::{Cost, OrderError, Plan, Shape, cost};
use crate::tensor::Label;
use crate::watch::{News, Watch};
use rand::Rng;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::SeedableRng;
use rayon::prelude::*;

/// Labels tried in full at each slicing.
const TRIED: usize = 12;
/// Attempts side by side; fixed, so that the threads do not matter.
const ATTEMPTS: u64 = 8;

/// What a sliced plan must keep to.
pub(crate) struct Limit {
    /// log2 of the elements that may be alive, the whole result included where there are
    /// slices.
    pub peak: f64,
    /// Fewest slices.
    pub slices: u128,
    pub price: Price,
    pub seed: u64,
    pub work: u64,
}

impl Limit {
    fn met(&self, price: &Cost, result: f64) -> bool {
        price.slices >= self.slices && needed(price, result) <= self.peak + 1e-9
    }
}

/// log2 of the elements that a plan keeps alive; `result` bits are those of its whole result,
/// which slices are gathered in.
fn needed(price: &Cost, result: f64) -> f64 {
    if price.slices > 1 {
        log2_sum(price.log2_peak_elements, result)
    } else {
        price.log2_peak_elements
    }
}

/// Slices and refines until the plan fits; the cheapest of several attempts.
pub(crate) fn fit(
    shape: &Shape,
    plan: &Plan,
    limit: &Limit,
    watch: &dyn Watch,
) -> Result<(Plan, Cost), OrderError> {
    let start = (plan.clone(), cost(shape, plan)?);
    let result: f64 = shape.open.iter().map(|l| (shape.sizes[l.index()] as f64).log2()).sum();
    if limit.met(&start.1, result) {
        return Ok(start);
    }
    if result > limit.peak {
        return Err(refused(limit, result));
    }
    watch.tell(News::Stage("slicing"));
    let made: Vec<Result<(Plan, Cost), OrderError>> = (0..ATTEMPTS)
        .into_par_iter()
        .map(|i| attempt(shape, start.clone(), result, limit, i, watch))
        .collect();
    let mut best: Option<(Plan, Cost)> = None;
    let mut error = None;
    for outcome in made {
        match outcome {
            Ok(found) => {
                if best
                    .as_ref()
                    .is_none_or(|b| found.1.log10_multiply_adds < b.1.log10_multiply_adds - 1e-12)
                {
                    best = Some(found);
                }
            }
            Err(e) => error = error.or(Some(e)),
        }
    }
    best.ok_or_else(|| error.unwrap_or(OrderError::Empty))
}

fn refused(limit: &Limit, needed: f64) -> OrderError {
    OrderError::Memory { limit: limit.peak.exp2() as u64, needed }
}

/// One attempt; the first takes the label that looks best each time, the others one of the
/// best three.
fn attempt(
    shape: &Shape,
    start: (Plan, Cost),
    result: f64,
    limit: &Limit,
    number: u64,
    watch: &dyn Watch,
) -> Result<(Plan, Cost), OrderError> {
    let mut rng = ChaCha8Rng::seed_from_u64(limit.seed);
    rng.set_stream(2000 + number);
    let work = limit.work / ATTEMPTS;
    let doublings = if limit.peak.is_finite() {
        start.1.log2_peak_elements - limit.peak
    } else {
        (limit.slices as f64).log2()
    };
    let share = work / (doublings.max(1.0) as u64 + 2);
    let mut now = start;
    if number >= ATTEMPTS / 2 {
        // Another tree to begin with.
        refine(shape, &mut now, limit, 0.4, share, &mut rng, watch)?;
    }
    while !limit.met(&now.1, result) {
        let choices = if number == 0 { 1 } else { 3 };
        let mut next = candidates(shape, &now, limit)?;
        if next.is_empty() {
            return Err(refused(limit, needed(&now.1, result)));
        }
        next.truncate(choices);
        let at = rng.random_range(0..next.len());
        now = next.swap_remove(at);
        if !watch.stop() && share > 0 {
            refine(shape, &mut now, limit, 0.15, share, &mut rng, watch)?;
        }
    }
    // Needless labels go, the earliest first: refinement may have made them so.
    let mut at = 0;
    while at < now.0.sliced.len() {
        let mut fewer = now.0.clone();
        fewer.sliced.remove(at);
        let price = cost(shape, &fewer)?;
        if limit.met(&price, result) {
            now = (fewer, price);
        } else {
            at += 1;
        }
    }
    if !watch.stop() && share > 0 {
        refine(shape, &mut now, limit, 0.1, share, &mut rng, watch)?;
    }
    Ok(now)
}

/// The plan with one label more sliced, for the labels that do most good, best first: least
/// growth of multiply-adds for each halving of the peak (or, where only slices are asked for,
/// for each doubling of their number).
fn candidates(
    shape: &Shape,
    now: &(Plan, Cost),
    limit: &Limit,
) -> Result<Vec<(Plan, Cost)>, OrderError> {
    let (plan, before) = now;
    let by_peak = limit.peak.is_finite();
    let net = Net::of(shape, &plan.sliced);
    let tree = Tree::new(&net, &plan.steps);
    let total = tree.total(Price::ADDS);
    let largest = tree.largest();
    // Share of the multiply-adds in steps with each label, and whether a large tensor has it.
    let mut within = vec![0.0f64; net.bits.len()];
    let mut on_large = vec![0.0f64; net.bits.len()];
    let mut union = Vec::new();
    for v in tree.leaves..tree.children.len() {
        let [a, b] = tree.children[v];
        super::cost::merge(&tree.sets[a as usize], &tree.sets[b as usize], &mut union);
        let share = (tree.met[v] - total).exp2();
        union.iter().for_each(|&l| within[l as usize] += share);
    }
    for (set, size) in tree.sets.iter().zip(&tree.size) {
        let share = (size - largest).exp2();
        if share > 0.05 {
            set.iter().for_each(|&l| on_large[l as usize] += share);
        }
    }
    // A lone open label is on no shared list: it is on its tensor and on all that this
    // becomes part of.
    for (t, labels) in shape.tensors.iter().enumerate() {
        if net.lone[t] == 0.0 {
            continue;
        }
        let (mut share, mut large) = (0.0, 0.0);
        let mut v = t;
        loop {
            let s = (tree.size[v] - largest).exp2();
            large += if s > 0.05 { s } else { 0.0 };
            let up = tree.parent[v];
            if up == super::tree::NONE {
                break;
            }
            v = up as usize;
            share += (tree.met[v] - total).exp2();
        }
        for l in labels {
            if net.open[l.index()] && within[l.index()] == 0.0 {
                within[l.index()] = share;
                on_large[l.index()] = large;
            }
        }
    }
    let mut list: Vec<(f64, Label)> = Vec::new();
    for l in (0..shape.sizes.len() as u32).map(Label::new) {
        let size = shape.sizes[l.index()];
        if size < 2 || plan.sliced.contains(&l) {
            continue;
        }
        let size = size as f64;
        let growth = (size * (1.0 - (1.0 - 1.0 / size) * within[l.index()].min(1.0))).log2();
        if on_large[l.index()] > 0.0 || (!by_peak && within[l.index()] > 0.0) {
            list.push((growth / size.log2() - 0.25 * on_large[l.index()].min(4.0), l));
        }
    }
    list.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    let mut found: Vec<(f64, Plan, Cost)> = Vec::new();
    for (tried, (_, l)) in list.into_iter().enumerate() {
        if (tried >= TRIED && !found.is_empty()) || tried >= 64 * TRIED {
            break;
        }
        let mut next = plan.clone();
        next.sliced.push(l);
        let price = cost(shape, &next)?;
        let gain = if by_peak {
            before.log2_peak_elements - price.log2_peak_elements
        } else {
            (shape.sizes[l.index()] as f64).log2()
        };
        if gain > 1e-9 {
            let loss = (price.log10_multiply_adds - before.log10_multiply_adds).max(0.0) + 0.01;
            found.push((loss / gain, next, price));
        }
    }
    found.sort_by(|a, b| a.0.total_cmp(&b.0));
    Ok(found.into_iter().map(|(_, p, c)| (p, c)).collect())
}

/// Refines the tree of a sliced plan; the plan changes only where multiply-adds fall and the peak does not rise.
fn refine(
    shape: &Shape,
    now: &mut (Plan, Cost),
    limit: &Limit,
    hot: f64,
    work: u64,
    rng: &mut ChaCha8Rng,
    watch: &dyn Watch,
) -> Result<(), OrderError> {
    let net = Net::of(shape, &now.0.sliced);
    let mut tree = Tree::new(&net, &now.0.steps);
    let cold = Schedule { hot, cold: 0.01, work: work / 2 };
    let price = limit.price.within(tree.widest());
    anneal::run(&net, &mut tree, price, cold, rng, watch);
    windows::pass(&net, &mut tree, price, 8, work / 2, watch);
    let steps = tree.steps_in(&schedule::least_peak(&tree));
    let plan = Plan { steps, sliced: now.0.sliced.clone() };
    let price = cost(shape, &plan)?;
    let better = price.log10_multiply_adds < now.1.log10_multiply_adds
        && (!limit.peak.is_finite() || price.log2_peak_elements <= now.1.log2_peak_elements + 1e-9);
    let smaller = limit.peak.is_finite()
        && price.log2_peak_elements < now.1.log2_peak_elements - 0.3
        && price.log10_multiply_adds <= now.1.log10_multiply_adds + 0.1;
    if better || smaller {
        *now = (plan, price);
    }
    Ok(())
}

/// The steps of a plan in the order of least peak.
pub(crate) fn scheduled(shape: &Shape, plan: &Plan) -> Steps {
    let net = Net::of(shape, &plan.sliced);
    let tree = Tree::new(&net, &plan.steps);
    tree.steps_in(&schedule::least_peak(&tree))
}
