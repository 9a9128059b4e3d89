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
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::SeedableRng;

/// Labels tried in full at each slicing.
const TRIED: usize = 16;

/// What a sliced plan must keep to.
pub(crate) struct Limit {
    /// log2 of the elements that may be alive, the whole result included where there are slices.
    pub peak: f64,
    pub price: Price,
    pub seed: u64,
    pub work: u64,
}

/// Slices and refines until the plan fits.
pub(crate) fn fit(
    shape: &Shape,
    plan: Plan,
    limit: &Limit,
    watch: &dyn Watch,
) -> Result<(Plan, Cost), OrderError> {
    let mut rng = ChaCha8Rng::seed_from_u64(limit.seed ^ 0x51_1c_e5);
    let result: f64 = shape.open.iter().map(|l| (shape.sizes[l.index()] as f64).log2()).sum();
    let refused = |needed: f64| OrderError::Memory { limit: limit.peak.exp2() as u64, needed };
    let needed = |price: &Cost| {
        if price.slices > 1 {
            log2_sum(price.log2_peak_elements, result)
        } else {
            price.log2_peak_elements
        }
    };
    let mut now = (plan, Cost::default());
    now.1 = cost(shape, &now.0)?;
    let start = now.1.log2_peak_elements;
    let mut rounds = 0u64;
    while needed(&now.1) > limit.peak + 1e-9 {
        if result > limit.peak {
            return Err(refused(result));
        }
        let next = slice_once(shape, &now)?.ok_or_else(|| refused(needed(&now.1)))?;
        now = next;
        rounds += 1;
        // The first slicings shape all that follows, so all get the same share.
        let share = limit.work / ((start - limit.peak).max(1.0) as u64 + 1);
        if !watch.stop() && limit.work > 0 {
            refine(shape, &mut now, limit, share, &mut rng, watch)?;
        }
        watch.tell(News::Progress { done: rounds, total: 0 });
    }
    // Needless labels go, the earliest first: refinement may have made them so.
    let mut at = 0;
    while at < now.0.sliced.len() {
        let mut fewer = now.0.clone();
        fewer.sliced.remove(at);
        let price = cost(shape, &fewer)?;
        if needed(&price) <= limit.peak + 1e-9 {
            now = (fewer, price);
        } else {
            at += 1;
        }
    }
    Ok(now)
}

/// Slices the label that costs least for each halving of the peak; `None` where none helps.
fn slice_once(shape: &Shape, now: &(Plan, Cost)) -> Result<Option<(Plan, Cost)>, OrderError> {
    let (plan, before) = now;
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
    // Lone open labels are on no shared list; where they fill the largest tensors they count.
    let mut candidates: Vec<(f64, Label)> = Vec::new();
    for l in (0..shape.sizes.len() as u32).map(Label::new) {
        let size = shape.sizes[l.index()];
        if size < 2 || plan.sliced.contains(&l) {
            continue;
        }
        if on_large[l.index()] > 0.0 {
            let size = size as f64;
            let growth = (size * (1.0 - (1.0 - 1.0 / size) * within[l.index()])).log2();
            candidates.push((growth / size.log2() - 0.25 * on_large[l.index()].min(4.0), l));
        } else if net.open[l.index()] && within[l.index()] == 0.0 {
            candidates.push((1.0, l));
        }
    }
    candidates.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    let mut best: Option<(f64, Plan, Cost)> = None;
    let (mut tried, mut helped) = (0, 0);
    for (_, l) in candidates {
        if tried >= TRIED && (helped > 0 || tried >= 64 * TRIED) {
            break;
        }
        tried += 1;
        let mut next = plan.clone();
        next.sliced.push(l);
        let price = cost(shape, &next)?;
        let gain = before.log2_peak_elements - price.log2_peak_elements;
        if gain <= 1e-9 {
            continue;
        }
        helped += 1;
        let loss = (price.log10_multiply_adds - before.log10_multiply_adds).max(0.0) + 0.01;
        if best.as_ref().is_none_or(|b| loss / gain < b.0) {
            best = Some((loss / gain, next, price));
        }
    }
    Ok(best.map(|(_, p, c)| (p, c)))
}

/// Refines the tree of a sliced plan; the plan changes only where multiply-adds fall and the peak does not rise.
fn refine(
    shape: &Shape,
    now: &mut (Plan, Cost),
    limit: &Limit,
    work: u64,
    rng: &mut ChaCha8Rng,
    watch: &dyn Watch,
) -> Result<(), OrderError> {
    let net = Net::of(shape, &now.0.sliced);
    let mut tree = Tree::new(&net, &now.0.steps);
    let cold = Schedule { hot: 0.15, cold: 0.01, work: work / 2 };
    let price = limit.price.within(tree.widest());
    anneal::run(&net, &mut tree, price, cold, rng, watch);
    windows::pass(&net, &mut tree, price, 8, work / 2, watch);
    let steps = tree.steps_in(&schedule::least_peak(&tree));
    let plan = Plan { steps, sliced: now.0.sliced.clone() };
    let price = cost(shape, &plan)?;
    let better = price.log10_multiply_adds < now.1.log10_multiply_adds
        && price.log2_peak_elements <= now.1.log2_peak_elements + 1e-9;
    let smaller = price.log2_peak_elements < now.1.log2_peak_elements - 0.5
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
