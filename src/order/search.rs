//! The question and the answer.

use super::graph::LineGraph;
use super::net::{Net, Steps};
use super::portfolio::{self, Solved, Task};
use super::price::Price;
use super::{Cost, OrderError, Plan, Shape, cost, exhaustive, lower, parts, slicing};
use crate::watch::{News, Watch};

/// What is to be small.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
#[non_exhaustive]
pub enum Objective {
    /// Scalar multiply-adds.
    MultiplyAdds,
    /// Multiply-adds, but a plan whose widest step is narrower may cost a little more: each
    /// halving of the widest step is worth a factor of two, since narrow steps mean small
    /// tensors. On parts of up to 64 tensors multiply-adds alone count.
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
    /// Every order weighed; fails on networks that are too large for it.
    Exhaustive,
    /// Greedy orders with randomised restarts.
    Greedy,
    /// Orders in which labels are summed, improved by local search.
    Elimination,
    /// Recursive bisection of the network.
    Bisection,
    /// Simulated annealing on trees.
    Annealing,
    /// Greedy orders whose windows are solved exactly, again and again.
    Windows,
}

impl Method {
    /// All methods.
    pub const ALL: [Self; 7] = [
        Self::Portfolio,
        Self::Exhaustive,
        Self::Greedy,
        Self::Elimination,
        Self::Bisection,
        Self::Annealing,
        Self::Windows,
    ];
    /// Its name.
    pub fn name(self) -> &'static str {
        match self {
            Self::Portfolio => "portfolio",
            Self::Exhaustive => "exhaustive",
            Self::Greedy => "greedy",
            Self::Elimination => "elimination",
            Self::Bisection => "bisection",
            Self::Annealing => "annealing",
            Self::Windows => "windows",
        }
    }
    /// The method of this name.
    ///
    /// # Errors
    /// [`OrderError::Method`] with the names there are.
    pub fn parse(name: &str) -> Result<Self, OrderError> {
        Self::ALL.into_iter().find(|m| m.name() == name).ok_or_else(|| OrderError::Method {
            name: name.into(),
            known: Self::ALL.map(Self::name).join(", "),
        })
    }
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
    /// Up to so many tensors (at most 20) the portfolio weighs every order.
    pub exhaustive: usize,
    /// A known plan to begin with: the result is no worse, and slices its labels too.
    pub start: Option<Plan>,
    /// Most elements that may be alive at once; a plan that takes more is sliced.
    pub memory: Option<u64>,
    /// Fewest slices; 1 for a plan that need not be sliced.
    pub slices: u128,
    /// Work to spend, in labels touched. The same work and seed give the same plan whatever
    /// the number of threads.
    pub work: u64,
    /// Outer bound on the time from the call on by [`Watch::seconds`]. A search that this ends, or a stop,
    /// gives the best plan so far, which then depends on the machine's speed.
    pub seconds: f64,
}

impl Default for Request {
    fn default() -> Self {
        Self {
            seed: 0,
            objective: Objective::default(),
            method: Method::default(),
            exhaustive: 20,
            start: None,
            memory: None,
            slices: 1,
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
    /// log10 of the factor in multiply-adds that slicing costs against the unsliced order
    /// found first; below 0 where refinement won more.
    pub slicing_log10_overhead: f64,
    /// No order (with the same labels sliced as in a given plan) has a widest step of fewer labels.
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
    let sliced = match &request.start {
        Some(plan) => {
            cost(shape, plan)?;
            plan.sliced.clone()
        }
        None => Vec::new(),
    };
    let net = Net::of(shape, &sliced);
    watch.tell(News::Stage("looking for an order"));
    // Where slices follow, their refinement has its part of the work.
    let slices = request.memory.is_some() || request.slices > 1;
    let rest = if slices { request.work / 2 } else { 0 };
    let work = request.work - rest;
    let (steps, solved) = order_net(&net, request, work, &until)?;
    let mut plan = Plan { steps, sliced };
    plan.steps = slicing::scheduled(shape, &plan);
    let mut price = cost(shape, &plan)?;
    let unsliced = price.log10_multiply_adds;
    if slices {
        let limit = slicing::Limit {
            peak: request.memory.map_or(f64::INFINITY, |m| (m as f64).log2()),
            slices: request.slices,
            price: Price::of(request.objective),
            seed: request.seed,
            work: rest,
        };
        (plan, price) = slicing::fit(shape, &plan, &limit, &until)?;
    }
    Ok(Found {
        widest_step_bound: widest_step_bound(shape, &net),
        slicing_log10_overhead: price.log10_multiply_adds - unsliced,
        plan,
        cost: price,
        method: solved.method.into(),
        optimal: solved.optimal && price.slices == 1,
        cut_short: until.stop(),
    })
}

/// Orders all parts of a net; the second value tells of the largest part, `optimal` of all.
fn order_net(
    net: &Net,
    request: &Request,
    work: u64,
    watch: &dyn Watch,
) -> Result<(Steps, Solved), OrderError> {
    let task = |net, start, work| {
        let task = Task {
            net,
            objective: request.objective,
            method: request.method,
            exhaustive: request.exhaustive,
            seed: request.seed,
            work,
            start,
            watch,
        };
        portfolio::solve(&task).ok_or(OrderError::TooWide { tensors: task.net.tensors.len() })
    };
    if let Some(plan) = &request.start {
        let solved = task(net, Some(&plan.steps), work)?;
        return Ok((solved.steps.clone(), solved));
    }
    let whole = net.tensors.len() <= request.exhaustive.min(exhaustive::DENSE)
        && matches!(request.method, Method::Portfolio | Method::Exhaustive);
    let all = if whole { vec![parts::whole(net)] } else { parts::split(net) };
    let weight = |p: &parts::Part| (p.tensors.len() as u64).pow(2);
    let total: u64 = all
        .iter()
        .enumerate()
        .filter(|(i, p)| p.like == *i && p.tensors.len() > 2)
        .map(|(_, p)| weight(p))
        .sum();
    let mut solved: Vec<Solved> = Vec::with_capacity(all.len());
    for (i, part) in all.iter().enumerate() {
        if part.like < i {
            solved.push(solved[part.like].clone());
            continue;
        }
        let share = weight(part) as f64 / total.max(1) as f64;
        solved.push(task(&part.net, None, (work as f64 * share) as u64)?);
    }
    let largest = (0..all.len())
        .max_by_key(|&i| (all[i].tensors.len(), std::cmp::Reverse(i)))
        .expect("a net has a part");
    let optimal = solved.iter().all(|s| s.optimal);
    let steps: Vec<Steps> = solved.iter().map(|s| s.steps.clone()).collect();
    let summary = Solved { steps: Vec::new(), method: solved[largest].method, optimal };
    Ok((parts::join(net, &all, &steps), summary))
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
    if let Some(line) = LineGraph::of(net, 3000)
        && line.graph.n > 0
    {
        bound = bound.max(lower::best_treewidth(&line.graph, 5) + 1);
    }
    bound
}
