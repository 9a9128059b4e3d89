//! The question and the answer.

use super::graph::LineGraph;
use super::net::{Net, Steps};
use super::portfolio::{self, Solved, Task};
use super::{Cost, OrderError, Plan, Shape, cost, lower, parts};
use crate::tensor::Label;
use crate::watch::{News, Watch};

/// What is to be small.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
#[non_exhaustive]
pub enum Objective {
    /// Scalar multiply-adds.
    MultiplyAdds,
    /// Multiply-adds, but a plan whose widest step is narrower may cost a little more: each
    /// halving of the widest step is worth a factor of two, since narrow steps mean small
    /// tensors. Where the order of fewest multiply-adds is proven, it is taken.
    #[default]
    Balanced,
    /// The largest tensor; among equals the multiply-adds.
    Size,
    /// Multiply-adds + `weight` × elements written: with `weight` = (rate of arithmetic) /
    /// (rate of memory) of a machine, in multiply-adds an element, it models the time there.
    Mix {
        /// Multiply-adds that take as long as writing (and reading back) one element.
        weight: f64,
    },
}

/// Which method looks for the order.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
#[non_exhaustive]
pub enum Method {
    /// All of them, sharing the work.
    #[default]
    Portfolio,
}

/// What order is sought.
#[derive(Debug, Clone, PartialEq)]
pub struct Request {
    /// Seed of every random choice.
    pub seed: u64,
    /// What is to be small.
    pub objective: Objective,
    /// Which method looks.
    pub method: Method,
    /// Most elements that may be alive at once; a plan that takes more is sliced.
    pub memory: Option<u64>,
    /// Work to spend, in labels touched. The same work and seed give the same plan whatever
    /// the number of threads.
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
            method: Method::default(),
            memory: None,
            work: 200_000_000,
            seconds: f64::INFINITY,
        }
    }
}

/// An order with its price.
#[derive(Debug, Clone, PartialEq)]
#[non_exhaustive]
pub struct Found {
    /// The order.
    pub plan: Plan,
    /// Its price.
    pub cost: Cost,
    /// The method that found it (for several parts: the largest part's).
    pub method: String,
    /// No order without slices has a widest step of fewer labels.
    pub widest_step_bound: usize,
    /// Whether this order is proven best for its objective.
    pub optimal: bool,
    /// Whether time or a stop ended the search before its work was done.
    pub cut_short: bool,
}

/// Stops at the caller's wish or when time is up.
struct Until<'a> {
    watch: &'a dyn Watch,
    end: f64,
}

impl Watch for Until<'_> {
    fn tell(&self, news: News<'_>) {
        self.watch.tell(news);
    }
    fn seconds(&self) -> f64 {
        self.watch.seconds()
    }
    fn stop(&self) -> bool {
        self.watch.stop() || self.watch.seconds() >= self.end
    }
}

/// Finds an order for this shape.
///
/// Exact reductions come first; each connected part is then ordered by the method asked for.
/// The result is a valid order at all times: when the watch asks to stop, the best so far is
/// given.
///
/// # Errors
/// [`OrderError`]: the shape is none, or no plan fits the memory.
pub fn search(shape: &Shape, request: &Request, watch: &dyn Watch) -> Result<Found, OrderError> {
    shape.check()?;
    let until = Until { watch, end: watch.seconds() + request.seconds };
    let net = Net::of(shape, &[]);
    watch.tell(News::Stage("looking for an order"));
    let (steps, solved) = order_net(&net, request, &until);
    let mut plan = Plan::unsliced(steps);
    let mut price = cost(shape, &plan)?;
    if let Some(limit) = request.memory {
        while price.log2_peak_elements > (limit as f64).log2() {
            (plan, price) = slice_once(shape, &plan, limit)?;
        }
    }
    let bound = widest_step_bound(shape, &net);
    Ok(Found {
        plan,
        cost: price,
        method: solved.method.into(),
        widest_step_bound: bound,
        optimal: solved.optimal && price.slices == 1,
        cut_short: until.stop(),
    })
}

/// Orders all parts of a net; the second value tells of the largest part, `optimal` of all.
fn order_net(net: &Net, request: &Request, watch: &dyn Watch) -> (Steps, Solved) {
    let all = parts::split(net);
    let weight = |p: &parts::Part| (p.tensors.len() as u64).pow(2);
    let total: u64 = all.iter().filter(|p| p.tensors.len() > 2).map(weight).sum();
    let mut solved: Vec<Solved> = Vec::with_capacity(all.len());
    for (i, part) in all.iter().enumerate() {
        if part.like < i {
            solved.push(solved[part.like].clone());
            continue;
        }
        let share = weight(part) as f64 / total.max(1) as f64;
        solved.push(portfolio::solve(&Task {
            net: &part.net,
            objective: request.objective,
            method: request.method,
            seed: request.seed,
            work: (request.work as f64 * share) as u64,
            watch,
        }));
    }
    let largest = (0..all.len())
        .max_by_key(|&i| (all[i].tensors.len(), std::cmp::Reverse(i)))
        .expect("a net has a part");
    let optimal = solved.iter().all(|s| s.optimal);
    let steps: Vec<Steps> = solved.iter().map(|s| s.steps.clone()).collect();
    let summary = Solved { steps: Vec::new(), method: solved[largest].method, optimal };
    (parts::join(net, &all, &steps), summary)
}

/// A proven lower bound on the labels of the widest step of any unsliced order.
fn widest_step_bound(shape: &Shape, net: &Net) -> usize {
    if shape.tensors.len() < 2 {
        return 0;
    }
    // The last step meets all open labels, and every tensor is met once.
    let mut bound = shape.open.len();
    for t in &net.tensors {
        bound = bound.max(t.len());
    }
    if let Some(line) = LineGraph::of(net, 3000) {
        if line.graph.n > 0 {
            bound = bound.max(lower::best_treewidth(&line.graph, 5) + 1);
        }
    }
    bound
}

/// Slices the label that costs least for each halving of the peak.
fn slice_once(shape: &Shape, plan: &Plan, limit: u64) -> Result<(Plan, Cost), OrderError> {
    let before = cost(shape, plan)?;
    let mut best: Option<(f64, Plan, Cost)> = None;
    for l in (0..shape.sizes.len() as u32).map(Label::new) {
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
