//! All methods together on one connected part.
//!
//! The work is laid out in rounds. A round is a list of tasks, each with its own seed and its
//! own share of the work, which run side by side; its outcome is taken in the order of the
//! list. So the plan depends on the seed and the work alone, not on the threads.

use super::anneal::{self, Schedule};
use super::elimination::{self, Choice};
use super::exhaustive;
use super::graph::LineGraph;
use super::greedy::{self, Rule};
use super::lower;
use super::net::{Net, Steps};
use super::price::Price;
use super::subsets::Aim;
use super::tree::Tree;
use super::windows;
use super::{Method, Objective};
use crate::watch::{News, Watch};
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::SeedableRng;
use rayon::prelude::*;
use std::sync::Mutex;

/// Tasks of a round; fixed, so that the threads do not matter.
const TASKS: usize = 8;
/// Rounds after the first.
const ROUNDS: u64 = 6;
/// Line graphs with more labels than this are left to the methods that do not build them.
const LINE: usize = 4000;

/// What is sought for a part.
pub(crate) struct Task<'a> {
    pub net: &'a Net,
    pub objective: Objective,
    pub method: Method,
    pub seed: u64,
    pub work: u64,
    pub watch: &'a dyn Watch,
}

/// The order of a part.
#[derive(Debug, Clone)]
pub(crate) struct Solved {
    pub steps: Steps,
    pub method: &'static str,
    /// Whether no order is better.
    pub optimal: bool,
}

struct Candidate {
    tree: Tree,
    score: f64,
    method: &'static str,
}

/// What an objective makes of a tree; smaller is better.
pub(crate) fn score(tree: &Tree, objective: Objective) -> f64 {
    let total = tree.total(Price::of(objective));
    match objective {
        Objective::Balanced => total + tree.widest(),
        Objective::Size => 1000.0 * tree.largest() + tree.total(Price::ADDS),
        _ => total,
    }
}

struct Run<'a> {
    task: &'a Task<'a>,
    price: Price,
    best_score: Mutex<f64>,
}

impl Run<'_> {
    fn candidate(&self, tree: Tree, method: &'static str) -> Candidate {
        let score = score(&tree, self.task.objective);
        let mut best = self.best_score.lock().unwrap_or_else(std::sync::PoisonError::into_inner);
        if score < *best {
            *best = score;
            self.task.watch.tell(News::Best(&format!(
                "{:.3} doublings of multiply-adds, widest step {:.1} bits, largest tensor {:.1} bits ({method})",
                tree.total(Price::ADDS),
                tree.widest(),
                tree.largest(),
            )));
        }
        Candidate { tree, score, method }
    }
    fn rng(&self, round: u64, task: usize) -> ChaCha8Rng {
        let mut rng = ChaCha8Rng::seed_from_u64(self.task.seed);
        rng.set_stream(round * TASKS as u64 + task as u64 + 1);
        rng
    }
    /// Windows, then cold annealing, then windows: never dearer than before.
    fn polish(&self, tree: &mut Tree, price: Price, work: u64, rng: &mut ChaCha8Rng) {
        let (net, watch) = (self.task.net, self.task.watch);
        let (spent, _) = windows::pass(net, tree, price, 8, work / 3, watch);
        let cold = Schedule { hot: 0.05, cold: 0.005, work: (work - spent.min(work)) / 2 };
        let spent = spent + anneal::run(net, tree, price, cold, rng, watch);
        let mut left = work.saturating_sub(spent);
        while left > 0 && !watch.stop() {
            let (spent, changed) = windows::pass(net, tree, price, 8, left, watch);
            left = left.saturating_sub(spent);
            if !changed {
                break;
            }
        }
    }
}

/// Orders a connected part.
pub(crate) fn solve(task: &Task) -> Solved {
    let net = task.net;
    let n = net.tensors.len();
    if n <= 2 {
        let steps = if n == 2 { vec![(0, 1)] } else { Vec::new() };
        return Solved { steps, method: "only order", optimal: true };
    }
    let run = Run { task, price: Price::of(task.objective), best_score: Mutex::new(f64::INFINITY) };
    let first = Tree::new(net, &greedy::order(net, Rule::default(), task.seed));
    let mut pool = vec![run.candidate(first, "greedy")];
    if n <= exhaustive::DENSE {
        let aim = match task.objective {
            Objective::Size => Aim::Largest(Price::ADDS),
            _ => Aim::Sum(run.price),
        };
        let cap = match aim {
            Aim::Sum(price) => {
                // A short descent gives a bound that drops most sets.
                let tree = &mut pool[0].tree.clone();
                run.polish(tree, price, 200_000, &mut run.rng(0, 0));
                tree.total(price) + 1e-9
            }
            Aim::Largest(_) => f64::INFINITY,
        };
        if let Some(found) = exhaustive::dense(net, aim, cap) {
            return Solved { steps: found.steps, method: "exhaustive", optimal: true };
        }
    }
    let line = LineGraph::of(net, LINE);
    let share = task.work / TASKS as u64;
    // First round: every method from scratch.
    let made: Vec<Vec<Candidate>> = (0..TASKS)
        .into_par_iter()
        .map(|i| {
            let mut rng = run.rng(0, i);
            let work = share * 2 / 5;
            match (i, &line) {
                (0 | 1, Some(line)) => by_elimination(&run, line, i, work, &mut rng),
                (4.., _) => by_annealing(&run, i, work, &mut rng),
                _ => by_restarts(&run, i, work, &mut rng),
            }
        })
        .collect();
    pool.extend(made.into_iter().flatten());
    sift(&mut pool);
    for round in 1..=ROUNDS {
        if task.watch.stop() {
            break;
        }
        let narrowest = pool.iter().map(|c| c.tree.widest()).fold(f64::INFINITY, f64::min);
        let made: Vec<Candidate> = (0..TASKS)
            .into_par_iter()
            .map(|i| {
                let mut rng = run.rng(round, i);
                let from = &pool[i % pool.len().min(3)];
                let mut tree = from.tree.clone();
                let work = share * 3 / 5 / ROUNDS;
                let mut price = run.price;
                if task.objective == Objective::Balanced {
                    price = match i % 4 {
                        0 => Price::NARROW,
                        1 => price,
                        _ => price.within(narrowest),
                    };
                }
                let hot = [0.1, 0.3, 0.6, 1.0][(i + round as usize) % 4];
                let schedule = Schedule { hot, cold: 0.02, work: work * 2 / 3 };
                anneal::run(net, &mut tree, price, schedule, &mut rng, task.watch);
                let price =
                    if price == Price::NARROW { run.price.within(tree.widest()) } else { price };
                run.polish(&mut tree, price, work / 3, &mut rng);
                run.candidate(tree, "annealing")
            })
            .collect();
        pool.extend(made);
        sift(&mut pool);
    }
    Solved { steps: pool[0].tree.steps(), method: pool[0].method, optimal: false }
}

/// Keeps the best few, best first; the earlier of equals first.
fn sift(pool: &mut Vec<Candidate>) {
    pool.sort_by(|a, b| a.score.total_cmp(&b.score));
    pool.dedup_by(|a, b| a.score == b.score);
    pool.truncate(6);
}

fn by_elimination(
    run: &Run,
    line: &LineGraph,
    i: usize,
    work: u64,
    rng: &mut ChaCha8Rng,
) -> Vec<Candidate> {
    let net = run.task.net;
    let choice = if i == 0 { Choice::Fill } else { Choice::FillAndDegree };
    let goal = lower::best_treewidth(&line.graph, 3) as f64;
    let order = elimination::greedy(line, choice, rng);
    let (order, _) = elimination::improve(line, order, goal, work / 2, rng, run.task.watch);
    let mut tree = Tree::new(net, &elimination::steps(net, line, &order));
    let mut price = run.price;
    if run.task.objective == Objective::Balanced {
        price = price.within(tree.widest());
    }
    run.polish(&mut tree, price, work / 2, rng);
    vec![run.candidate(tree, "elimination")]
}

fn by_restarts(run: &Run, i: usize, work: u64, rng: &mut ChaCha8Rng) -> Vec<Candidate> {
    use rand::Rng;
    let net = run.task.net;
    let legs: usize = net.tensors.iter().map(Vec::len).sum();
    let once = 60 * (legs as u64 + 1);
    let mut best: Option<Tree> = None;
    let mut spent = 0;
    let mut first = true;
    while first || (spent < work / 2 && !run.task.watch.stop()) {
        let rule = if first {
            Rule { alpha: if i % 2 == 0 { 0.5 } else { 0.0 }, noise: 0.0 }
        } else {
            Rule {
                alpha: rng.random_range(0.0..1.2),
                noise: 0.02f64.powf(rng.random::<f64>()) * 2.0,
            }
        };
        first = false;
        let tree = Tree::new(net, &greedy::order(net, rule, rng.random()));
        spent += once;
        if best
            .as_ref()
            .is_none_or(|b| score(&tree, run.task.objective) < score(b, run.task.objective))
        {
            best = Some(tree);
        }
    }
    let mut tree = best.expect("one order is made");
    run.polish(&mut tree, run.price, work / 2, rng);
    vec![run.candidate(tree, "greedy with restarts")]
}

fn by_annealing(run: &Run, i: usize, work: u64, rng: &mut ChaCha8Rng) -> Vec<Candidate> {
    let net = run.task.net;
    let mut tree = Tree::new(net, &greedy::order(net, Rule::default(), run.task.seed));
    let price = if run.task.objective == Objective::Balanced && i % 2 == 0 {
        Price::NARROW
    } else {
        run.price
    };
    let schedule = Schedule { hot: 2.0, cold: 0.02, work: work * 2 / 3 };
    anneal::run(net, &mut tree, price, schedule, rng, run.task.watch);
    run.polish(&mut tree, run.price, work / 3, rng);
    vec![run.candidate(tree, "annealing")]
}
