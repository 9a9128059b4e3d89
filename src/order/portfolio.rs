//! All methods together on one connected part, or one of them alone.
//!
//! The work is laid out in rounds. A round is a list of tasks, each with its own seed and its
//! own share of the work, which run side by side; its outcome is taken in the order of the
//! list. So the plan depends on the seed and the work alone, not on the threads.

use super::anneal::{self, Schedule};
use super::bisection;
use super::elimination::{self, Choice};
use super::exhaustive;
use super::graph::LineGraph;
use super::greedy::{self, Rule};
use super::kernel::Kernel;
use super::lower;
use super::narrow;
use super::net::{Net, Steps};
use super::price::Price;
use super::subsets::Aim;
use super::tree::Tree;
use super::windows;
use super::{Method, Objective};
use crate::watch::{News, Watch};
use rand::Rng;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::SeedableRng;
use rayon::prelude::*;
use std::sync::{Mutex, PoisonError};

/// Tasks of a round; fixed, so that the threads do not matter.
pub(super) const TASKS: usize = 8;
/// Rounds after the first.
const ROUNDS: u64 = 6;
/// Rounds without a better plan after which the search ends, once no narrower step is possible.
const PATIENCE: u32 = 3;
/// Line graphs with more labels than this are left to the methods that do not build them.
pub(crate) const LINE: usize = 4000;
/// On parts of so many tensors a balanced search looks at multiply-adds alone.
const SMALL: usize = 64;
/// Trees kept from round to round.
const POOL: usize = 6;

/// What is sought for a part.
#[derive(Clone, Copy)]
pub(crate) struct Task<'a> {
    pub net: &'a Net,
    pub objective: Objective,
    pub method: Method,
    /// Up to so many tensors the portfolio takes the exhaustive method.
    pub exhaustive: usize,
    pub seed: u64,
    pub work: u64,
    /// A known order to begin with.
    pub start: Option<&'a [(u32, u32)]>,
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
fn score(tree: &Tree, objective: Objective) -> f64 {
    match objective {
        Objective::Balanced => tree.total(Price::ADDS) + tree.widest(),
        Objective::Size => 1000.0 * tree.largest() + tree.total(Price::ADDS),
        _ => tree.total(Price::of(objective)),
    }
}

pub(super) struct Run<'a> {
    pub task: &'a Task<'a>,
    price: Price,
    /// The net reduced for narrow orders, with its line graph.
    pub kernel: Option<(Kernel, LineGraph)>,
    bound: usize,
    /// Bits of the smallest label.
    least: f64,
    best: Mutex<f64>,
}

/// Orders a connected part. `None` only where the exhaustive method alone was asked for and
/// cannot do it.
pub(crate) fn solve(task: &Task) -> Option<Solved> {
    let net = task.net;
    let n = net.tensors.len();
    if task.objective == Objective::Balanced && n <= SMALL {
        return solve(&Task { objective: Objective::MultiplyAdds, ..*task });
    }
    if n <= 2 {
        let steps = if n == 2 { vec![(0, 1)] } else { Vec::new() };
        return Some(Solved { steps, method: "only order", optimal: true });
    }
    let mut run = Run {
        task,
        price: Price::of(task.objective),
        kernel: None,
        bound: 0,
        least: net
            .tensors
            .iter()
            .flatten()
            .map(|&l| net.bits[l as usize])
            .fold(f64::INFINITY, f64::min),
        best: Mutex::new(f64::INFINITY),
    };
    let wants = |m: Method| task.method == m || task.method == Method::Portfolio;
    if task.method == Method::Exhaustive || (wants(Method::Exhaustive) && n <= task.exhaustive) {
        if let Some(solved) = run.exhaustively() {
            return Some(solved);
        }
        if task.method == Method::Exhaustive {
            return None;
        }
    }
    if wants(Method::Elimination)
        && let Some(line) = LineGraph::of(net, LINE)
    {
        run.bound = lower::best_treewidth(&line.graph, 5);
        let kernel = Kernel::of(net, &line, run.bound);
        run.kernel = LineGraph::of(&kernel.net, LINE).map(|line| (kernel, line));
    }
    if task.method != Method::Portfolio {
        // Where the work is too little for eight attempts, fewer are made.
        let tasks = (task.work / (60 * run.legs())).clamp(1, TASKS as u64);
        let best = (0..tasks as usize)
            .into_par_iter()
            .map(|i| run.alone(i, task.work / tasks))
            .collect::<Vec<_>>()
            .into_iter()
            .min_by(|a, b| a.score.total_cmp(&b.score))?;
        return Some(Solved { steps: best.tree.steps(), method: best.method, optimal: false });
    }
    Some(run.portfolio())
}

impl Run<'_> {
    fn candidate(&self, tree: Tree, method: &'static str) -> Candidate {
        let score = score(&tree, self.task.objective);
        let mut best = self.best.lock().unwrap_or_else(PoisonError::into_inner);
        if score < *best {
            *best = score;
            self.task.watch.tell(News::Best(&format!(
                "10^{:.2} multiply-adds, widest step 2^{:.1}, largest tensor 2^{:.1} ({method})",
                tree.total(Price::ADDS) * std::f64::consts::LOG10_2,
                tree.widest(),
                tree.largest(),
            )));
        }
        Candidate { tree, score, method }
    }
    /// Bits of the narrowest step that the lower bound leaves possible.
    pub fn goal(&self) -> f64 {
        self.least * (self.bound + 1) as f64
    }
    pub fn rng(&self, round: u64, task: usize) -> ChaCha8Rng {
        let mut rng = ChaCha8Rng::seed_from_u64(self.task.seed);
        rng.set_stream(round * TASKS as u64 + task as u64 + 1);
        rng
    }
    fn better(&self, tree: &Tree, than: Option<&Tree>) -> bool {
        than.is_none_or(|t| score(tree, self.task.objective) < score(t, self.task.objective))
    }

    /// The best order of all, where it can be had.
    fn exhaustively(&self) -> Option<Solved> {
        let (net, task) = (self.task.net, self.task);
        let mut known = Tree::new(net, &greedy::order(net, Rule::default(), task.seed));
        let (aim, cap) = match task.objective {
            Objective::Size => (Aim::Largest(Price::ADDS), f64::INFINITY),
            _ => {
                // A known good order drops most sets.
                self.polish(&mut known, self.price, 2_000_000, &mut self.rng(0, 0));
                (Aim::Sum(self.price), known.total(self.price) + 1e-9)
            }
        };
        if let Some(found) = exhaustive::dense(net, aim, cap) {
            return Some(Solved { steps: found, method: "exhaustive", optimal: true });
        }
        if task.method != Method::Exhaustive || task.objective == Objective::Size {
            return None;
        }
        let found = exhaustive::sparse(net, self.price, cap, task.work, task.watch)?;
        Some(Solved { steps: found, method: "exhaustive, no outer products", optimal: false })
    }

    /// One method alone, its share of the work.
    fn alone(&self, i: usize, work: u64) -> Candidate {
        let mut rng = self.rng(0, i);
        match self.task.method {
            Method::Elimination if self.kernel.is_some() => {
                self.candidate(self.by_elimination(i, work, &mut rng), "elimination")
            }
            Method::Bisection => self.candidate(self.by_bisection(work, &mut rng), "bisection"),
            Method::Annealing => {
                self.candidate(self.by_annealing(self.price, work, &mut rng), "annealing")
            }
            Method::Windows => {
                let mut tree = self.greedy_tree(i, &mut rng);
                let mut left = work;
                while left > 0 && !self.task.watch.stop() {
                    let (spent, changed) = windows::pass(
                        self.task.net,
                        &mut tree,
                        self.price,
                        9,
                        left,
                        self.task.watch,
                    );
                    left = left.saturating_sub(spent);
                    if !changed {
                        break;
                    }
                }
                self.candidate(tree, "windows")
            }
            _ => self.candidate(self.by_restarts(i, work, &mut rng), "greedy"),
        }
    }

    fn portfolio(&self) -> Solved {
        let (net, task) = (self.task.net, self.task);
        let first = Tree::new(net, &greedy::order(net, Rule::default(), task.seed));
        let mut pool = vec![self.candidate(first, "greedy")];
        if let Some(steps) = task.start {
            pool.push(self.candidate(Tree::new(net, steps), "given plan"));
        }
        if task.work < 16 * 60 * self.legs() {
            // Too little work for this many tensors to try all methods: what there is goes
            // into the best so far.
            let at = (0..pool.len())
                .min_by(|&a, &b| pool[a].score.total_cmp(&pool[b].score))
                .unwrap_or(0);
            let Candidate { mut tree, method, .. } = pool.swap_remove(at);
            self.polish(&mut tree, self.price, task.work, &mut self.rng(0, 0));
            return Solved { steps: tree.steps(), method, optimal: false };
        }
        let mut share = task.work / TASKS as u64;
        if task.objective == Objective::Balanced
            && let Some(tree) = narrow::order(self, share / 2)
        {
            pool.push(self.candidate(tree, "elimination and annealing"));
            share -= share / 2;
        }
        let made: Vec<Candidate> =
            (0..TASKS).into_par_iter().map(|i| self.first_round(&pool, i, share * 2 / 5)).collect();
        pool.extend(made);
        sift(&mut pool);
        let mut idle = 0;
        for round in 1..=ROUNDS {
            let done = pool.iter().any(|c| c.tree.widest() <= self.goal() + 1e-9);
            if task.watch.stop() || (idle >= PATIENCE && done) {
                break;
            }
            let before = pool[0].score;
            let made: Vec<Candidate> = (0..TASKS)
                .into_par_iter()
                .map(|i| self.later_round(&pool, round, i, share * 3 / 5 / ROUNDS))
                .collect();
            pool.extend(made);
            sift(&mut pool);
            idle = if pool[0].score < before - 1e-9 { 0 } else { idle + 1 };
        }
        Solved { steps: pool[0].tree.steps(), method: pool[0].method, optimal: false }
    }

    /// A task of the first round.
    fn first_round(&self, pool: &[Candidate], i: usize, work: u64) -> Candidate {
        let mut rng = self.rng(0, i);
        let half = work / 2;
        let (mut tree, method) = match i {
            // The narrowest order so far, whose multiply-adds have yet to be looked at.
            0 | 4 if pool.len() > 1 => {
                (pool[1 + i % (pool.len() - 1)].tree.clone(), pool[1].method)
            }
            0 | 1 if self.kernel.is_some() => {
                (self.by_elimination(i, half, &mut rng), "elimination")
            }
            2 | 3 => (self.by_bisection(half, &mut rng), "bisection"),
            5.. => (self.by_annealing(self.price, half, &mut rng), "annealing"),
            _ => (self.by_restarts(i, half, &mut rng), "greedy"),
        };
        let price = match self.task.objective {
            Objective::Balanced if i < 2 || i == 4 => self.price.within(tree.widest()),
            _ => self.price,
        };
        self.polish(&mut tree, price, half, &mut rng);
        self.candidate(tree, method)
    }

    /// A task of a later round: anneals one of the best trees so far.
    fn later_round(&self, pool: &[Candidate], round: u64, i: usize, work: u64) -> Candidate {
        let (net, watch) = (self.task.net, self.task.watch);
        let mut rng = self.rng(round, i);
        let mut tree = pool[i % pool.len().min(3)].tree.clone();
        let mut price = self.price;
        if self.task.objective == Objective::Balanced {
            let narrowest = pool.iter().map(|c| c.tree.widest()).fold(f64::INFINITY, f64::min);
            price = match i % 4 {
                0 if narrowest > self.goal() + 1e-9 => Price::NARROW,
                1 => price,
                _ => price.within(narrowest),
            };
        }
        let hot = [0.1, 0.3, 0.6, 1.0][(i / 2 + round as usize) % 4];
        let schedule = Schedule { hot, cold: 0.02, work: work * 2 / 3 };
        anneal::run(net, &mut tree, price, schedule, &mut rng, watch);
        if price == Price::NARROW {
            price = self.price.within(tree.widest());
        }
        self.polish(&mut tree, price, work / 3, &mut rng);
        self.candidate(tree, "annealing")
    }

    /// Windows, then cold annealing, then windows again: never dearer than before.
    fn polish(&self, tree: &mut Tree, price: Price, work: u64, rng: &mut ChaCha8Rng) {
        let (net, watch) = (self.task.net, self.task.watch);
        let (spent, _) = windows::pass(net, tree, price, 8, work / 3, watch);
        let cold = Schedule { hot: 0.05, cold: 0.005, work: work.saturating_sub(spent) / 2 };
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

    fn greedy_tree(&self, i: usize, rng: &mut ChaCha8Rng) -> Tree {
        let rule = match i {
            0 => Rule::default(),
            1 => Rule { alpha: 0.5, noise: 0.0 },
            2 => Rule { alpha: 0.0, noise: 0.0 },
            _ => Rule {
                alpha: rng.random_range(0.0..1.2),
                noise: 2.0 * 0.02f64.powf(rng.random::<f64>()),
            },
        };
        Tree::new(self.task.net, &greedy::order(self.task.net, rule, rng.random()))
    }
    fn legs(&self) -> u64 {
        self.task.net.tensors.iter().map(|t| t.len() as u64 + 1).sum()
    }

    fn by_restarts(&self, i: usize, work: u64, rng: &mut ChaCha8Rng) -> Tree {
        let mut best = self.greedy_tree(i % 3, rng);
        let once = 60 * self.legs();
        let mut spent = once;
        while spent < work && !self.task.watch.stop() {
            let tree = self.greedy_tree(TASKS, rng);
            spent += once;
            if self.better(&tree, Some(&best)) {
                best = tree;
            }
        }
        best
    }

    fn by_bisection(&self, work: u64, rng: &mut ChaCha8Rng) -> Tree {
        let net = self.task.net;
        let legs = self.legs();
        let once = 200 * legs * u64::from(legs.max(2).ilog2());
        let mut best: Option<Tree> = None;
        let mut spent = 0;
        loop {
            let slack = 0.02 + 0.3 * rng.random::<f64>();
            let tree = Tree::new(net, &bisection::order(net, self.price, slack, rng));
            spent += once;
            if self.better(&tree, best.as_ref()) {
                best = Some(tree);
            }
            if spent >= work || self.task.watch.stop() {
                break;
            }
        }
        best.expect("one order was made")
    }

    fn by_elimination(&self, i: usize, work: u64, rng: &mut ChaCha8Rng) -> Tree {
        let net = self.task.net;
        let Some((kernel, line)) = &self.kernel else { return self.greedy_tree(i, rng) };
        let choice = [Choice::Fill, Choice::FillAndDegree, Choice::Degree][i % 3];
        let order = elimination::greedy(line, choice, rng);
        let order = elimination::improve(line, order, 2.0, self.goal(), work, rng, self.task.watch);
        let steps = elimination::steps(&kernel.net, line, &order);
        Tree::new(net, &kernel.grown_back(net, &steps))
    }

    fn by_annealing(&self, price: Price, work: u64, rng: &mut ChaCha8Rng) -> Tree {
        let mut tree = self.greedy_tree(0, rng);
        let schedule = Schedule { hot: 2.0, cold: 0.02, work };
        anneal::run(self.task.net, &mut tree, price, schedule, rng, self.task.watch);
        tree
    }
}

/// Keeps the best few, best first; the earlier of equals first.
fn sift(pool: &mut Vec<Candidate>) {
    pool.sort_by(|a, b| a.score.total_cmp(&b.score));
    pool.dedup_by(|a, b| a.score == b.score);
    pool.truncate(POOL);
}
