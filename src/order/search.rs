//! The question and the answer.

use super::greedy::{self, Rule};
use super::net::Net;
use super::{Cost, OrderError, Plan, Shape, cost};
use crate::watch::{News, Watch};

/// What is to be small.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
#[non_exhaustive]
pub enum Objective {
    /// Scalar multiply-adds.
    #[default]
    MultiplyAdds,
    /// The largest tensor; among equals the multiply-adds.
    Size,
    /// Multiply-adds + `weight` × elements written: with `weight` = (rate of arithmetic) /
    /// (rate of memory) of a machine, in multiply-adds an element, it models the time there.
    Mix {
        /// Multiply-adds that take as long as writing (and reading back) one element.
        weight: f64,
    },
}

/// What order is sought.
#[derive(Debug, Clone, PartialEq)]
pub struct Request {
    /// Seed of every random choice.
    pub seed: u64,
    /// What is to be small.
    pub objective: Objective,
    /// Most elements that may be alive at once; a plan that takes more is sliced.
    pub memory: Option<u64>,
    /// Work to spend, in the search's own units. The same work and seed give the same plan
    /// whatever the number of threads.
    pub work: u64,
    /// Outer bound on the time by [`Watch::seconds`]. A search that this ends, or a stop,
    /// gives the best plan so far, which then depends on the machine's speed.
    pub seconds: f64,
}

impl Default for Request {
    fn default() -> Self {
        Self {
            seed: 0,
            objective: Objective::default(),
            memory: None,
            work: 100_000_000,
            seconds: f64::INFINITY,
        }
    }
}

/// An order with its price.
#[derive(Debug, Clone, PartialEq)]
pub struct Found {
    /// The order.
    pub plan: Plan,
    /// Its price.
    pub cost: Cost,
    /// The method that found it.
    pub method: String,
}

/// Finds an order for this shape.
///
/// # Errors
/// [`OrderError`]: the shape is none, or no plan fits the memory.
pub fn search(shape: &Shape, request: &Request, watch: &dyn Watch) -> Result<Found, OrderError> {
    shape.check()?;
    let net = Net::of(shape, &[]);
    watch.tell(News::Stage("greedy orders"));
    let mut best: Option<Found> = None;
    for alpha in [1.0, 0.5, 0.0] {
        let steps = greedy::order(&net, Rule { alpha, noise: 0.0 }, request.seed);
        let mut plan = Plan::unsliced(steps);
        let mut price = cost(shape, &plan)?;
        if let Some(limit) = request.memory {
            while price.log2_peak_elements > (limit as f64).log2() {
                (plan, price) = slice_once(shape, &plan, limit)?;
            }
        }
        if best.as_ref().is_none_or(|b| price.log10_multiply_adds < b.cost.log10_multiply_adds) {
            best = Some(Found { plan, cost: price, method: "greedy".into() });
        }
        if watch.stop() || watch.seconds() > request.seconds {
            break;
        }
    }
    best.ok_or(OrderError::Empty)
}

/// Slices the label that costs least for each halving of the peak.
fn slice_once(shape: &Shape, plan: &Plan, limit: u64) -> Result<(Plan, Cost), OrderError> {
    let before = cost(shape, plan)?;
    let mut best: Option<(f64, Plan, Cost)> = None;
    for l in (0..shape.sizes.len() as u32).map(crate::tensor::Label::new) {
        if shape.sizes[l.index()] < 2 || plan.sliced.contains(&l) {
            continue;
        }
        let mut next = plan.clone();
        next.sliced.push(l);
        let price = cost(shape, &next)?;
        let gain = before.log2_peak_elements - price.log2_peak_elements;
        if gain <= 1e-9 {
            continue;
        }
        let loss = price.log10_multiply_adds - before.log10_multiply_adds;
        if best.as_ref().is_none_or(|b| loss / gain < b.0) {
            best = Some((loss / gain, next, price));
        }
    }
    best.map(|(_, p, c)| (p, c))
        .ok_or(OrderError::Memory { limit, needed: before.log2_peak_elements })
}
