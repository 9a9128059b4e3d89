//! The search for a narrow order on the kernel of a part.
//!
//! Elimination orders under local search and annealed trees take turns: a tree tells the
//! order in which it sums labels, an order makes a tree, and each kind of move leads out of
//! places where the other is stuck. Ends as soon as the lower bound is met.

use super::anneal::{self, Schedule};
use super::elimination::{self, Choice};
use super::portfolio::{Run, TASKS};
use super::price::Price;
use super::tree::Tree;
use rayon::prelude::*;

/// Rounds; each starts from the best two of those before.
const ROUNDS: u64 = 5;
/// Numbers its random streams apart from those of the portfolio's own rounds.
const STREAM: u64 = 1000;

/// A narrow order of the part, grown back from its kernel; `work` is each task's. `None` where the
/// part has no kernel.
pub(super) fn order(run: &Run, work: u64) -> Option<Tree> {
    let (kernel, line) = run.kernel.as_ref()?;
    let (net, whole) = (&kernel.net, run.task.net);
    if net.tensors.len() < 2 {
        return Some(Tree::new(whole, &kernel.grown_back(whole, &[])));
    }
    let key = |t: &Tree| (t.widest(), t.total(Price::NARROW));
    let mut pool: Vec<Tree> = Vec::new();
    for round in 0..ROUNDS {
        let work = work / ROUNDS;
        let made: Vec<Tree> = (0..TASKS)
            .into_par_iter()
            .map(|i| {
                let mut rng = run.rng(STREAM + round, i);
                let from = pool.get(i / 2 % 2).filter(|_| i % 4 != 3);
                let by_order = i % 2 == 0;
                let choice = [Choice::Fill, Choice::FillAndDegree, Choice::Degree][i % 3];
                let hot = [2.0, 0.3, 0.7, 1.2, 0.5][(i / 2 + round as usize) % 5];
                let make = |order: &[u32]| Tree::new(net, &elimination::steps(net, line, order));
                let order = match from {
                    Some(tree) if by_order => elimination::order_of(net, tree, line),
                    _ => elimination::greedy(line, choice, &mut rng),
                };
                if by_order {
                    let order = elimination::improve(
                        line,
                        order,
                        hot,
                        run.goal(),
                        work,
                        &mut rng,
                        run.task.watch,
                    );
                    return make(&order);
                }
                let mut tree = from.cloned().unwrap_or_else(|| make(&order));
                let schedule = Schedule { hot: hot.min(1.2), cold: 0.05, work };
                anneal::run(net, &mut tree, Price::NARROW, schedule, &mut rng, run.task.watch);
                tree
            })
            .collect();
        pool.extend(made);
        pool.sort_by(|a, b| key(a).partial_cmp(&key(b)).expect("prices are numbers"));
        pool.dedup_by(|a, b| key(a) == key(b));
        pool.truncate(2);
        if pool[0].widest() <= run.goal() + 1e-9 || run.task.watch.stop() {
            break;
        }
    }
    Some(Tree::new(whole, &kernel.grown_back(whole, &pool[0].steps())))
}
