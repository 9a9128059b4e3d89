//! In which order the axes of every intermediate lie, and where they are moved.
//!
//! A step is loops around a matrix product; how large that product can be depends on the
//! orders in which both operands and the result lie. The orders are chosen for the whole
//! tree at once. From the root down every tensor gets a few candidates: the orders that its
//! consumer would like best, and those that its own step leaves naturally. From the leaves
//! up the cheapest combination is found by dynamic programming over the candidates, where an
//! operand may also be moved to an order that its consumer likes.

use super::program::{Program, Step};
use crate::tensor::{Join, Label, Leg, Loops};

/// How one step is carried out on dense tensors.
#[derive(Debug, Clone)]
pub(super) struct StepLayout {
    /// The order into which an operand is brought first, where that pays.
    pub moved: [Option<Vec<Label>>; 2],
    /// The loops.
    pub loops: Loops,
}

/// The axes of every tensor of a program.
#[derive(Debug, Clone)]
pub(super) struct Layout {
    /// Order of the axes as a leaf is brought in or a step leaves them, one list a tensor.
    pub orders: Vec<Vec<Label>>,
    /// One a step.
    pub steps: Vec<StepLayout>,
    /// Estimated time of one slice on one thread, in nanoseconds.
    pub nanoseconds: f64,
}

/// Numbers that the tensors are made of.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Numbers {
    pub complex: bool,
    pub bytes: usize,
}

impl Numbers {
    pub fn of<T: crate::linalg::Scalar>() -> Self {
        Self { complex: T::COMPLEX, bytes: size_of::<T>() }
    }
}

/// Multiply-adds from which on a step's result has more than one candidate.
const WORTH_CHOOSING: u128 = 1 << 12;

/// Multiply-adds below which the operands are taken as they come.
const WORTH_LOOKING: u128 = 256;

/// Row-major steps of axes in this order.
pub(super) fn strides(order: &[Label], sizes: &[usize]) -> Vec<usize> {
    let mut steps = vec![1; order.len()];
    for i in (1..order.len()).rev() {
        steps[i - 1] = steps[i] * sizes[order[i].index()];
    }
    steps
}

/// Time to move the axes of a tensor, in nanoseconds on one thread.
fn moving(entries: f64, numbers: Numbers) -> f64 {
    120.0 + entries * 0.13 * numbers.bytes as f64
}

/// A way to have an operand: the order in which it comes, its price so far, which of its
/// candidates it is, and whether it was moved there.
struct Way {
    order: Vec<Label>,
    price: f64,
    candidate: usize,
    moved: bool,
}

/// What was cheapest for one candidate of one step.
#[derive(Clone, Copy)]
struct Choice {
    price: f64,
    operands: [(usize, Option<usize>); 2],
}

struct Planner<'a> {
    program: &'a Program,
    numbers: Numbers,
    /// The orders that the consumer of each tensor likes.
    liked: Vec<Vec<Vec<Label>>>,
    /// The orders among which each tensor's is chosen.
    candidates: Vec<Vec<Vec<Label>>>,
    /// Cheapest way to each candidate of each step's result.
    choices: Vec<Vec<Choice>>,
}

fn joined(parts: &[&[Label]]) -> Vec<Label> {
    parts.concat()
}

/// Labels of `set` in the order in which they stand in `order`.
fn sorted_as(order: &[Label], set: &[Label]) -> Vec<Label> {
    order.iter().copied().filter(|l| set.contains(l)).collect()
}

impl Layout {
    /// Plans all orders.
    pub fn plan(program: &Program, numbers: Numbers) -> Self {
        let mut p = Planner {
            program,
            numbers,
            liked: Vec::new(),
            candidates: Vec::new(),
            choices: Vec::new(),
        };
        p.offer_orders();
        p.price_choices();
        p.settle()
    }
}

impl Planner<'_> {
    fn leaves(&self) -> usize {
        self.program.leaves.len()
    }
    fn entries(&self, labels: &[Label]) -> f64 {
        self.program.entries(labels) as f64
    }

    fn offer_orders(&mut self) {
        let n = self.leaves();
        let nodes = n + self.program.steps.len();
        self.liked = vec![Vec::new(); nodes];
        self.liked[nodes - 1].push(self.program.open.clone());
        self.candidates = vec![Vec::new(); nodes];
        for (number, step) in self.program.steps.iter().enumerate().rev() {
            let out = self.liked[n + number][0].clone();
            let batch = sorted_as(&out, &step.batch);
            let rows = sorted_as(&out, &step.rows);
            let columns = sorted_as(&out, &step.columns);
            let sum = self.sum_order(step);
            for (side, kept) in [&rows, &columns].into_iter().enumerate() {
                let mut liked = if side == 0 {
                    vec![joined(&[&batch, kept, &sum]), joined(&[&batch, &sum, kept])]
                } else {
                    vec![joined(&[&batch, &sum, kept]), joined(&[&batch, kept, &sum])]
                };
                if !batch.is_empty() {
                    liked.push(joined(&[kept, &sum, &batch]));
                }
                liked.dedup();
                self.liked[step.operands[side]] = liked;
            }
            let mut all = self.liked[n + number].clone();
            if step.multiply_adds >= WORTH_CHOOSING {
                all.push(joined(&[&batch, &rows, &columns]));
                all.push(joined(&[&batch, &columns, &rows]));
                if !batch.is_empty() {
                    all.push(joined(&[&rows, &columns, &batch]));
                }
            } else {
                all.truncate(1);
            }
            self.candidates[n + number] = distinct(all);
        }
        for t in 0..n {
            self.candidates[t] = distinct(self.liked[t].clone());
        }
    }

    /// The order of summed labels: as the larger operand's own step can leave them, its rows
    /// together and its columns together.
    fn sum_order(&self, step: &Step) -> Vec<Label> {
        let n = self.leaves();
        let size = |side: usize| {
            let kept = if side == 0 { &step.rows } else { &step.columns };
            self.entries(kept)
        };
        let big = usize::from(size(1) > size(0));
        match step.operands[big].checked_sub(n) {
            None => step.sum.clone(),
            Some(made) => {
                let made = &self.program.steps[made];
                let mut sum: Vec<Label> = Vec::with_capacity(step.sum.len());
                for group in [&made.batch, &made.rows, &made.columns] {
                    sum.extend(step.sum.iter().filter(|l| group.contains(l)));
                }
                sum
            }
        }
    }

    fn options(&self, node: usize) -> Vec<Way> {
        let n = self.leaves();
        let prices: Vec<f64> = match node.checked_sub(n) {
            None => vec![0.0; self.candidates[node].len()],
            Some(s) => self.choices[s].iter().map(|c| c.price).collect(),
        };
        let mut options: Vec<Way> = self.candidates[node]
            .iter()
            .zip(&prices)
            .enumerate()
            .map(|(candidate, (order, &price))| Way {
                order: order.clone(),
                price,
                candidate,
                moved: false,
            })
            .collect();
        if node >= n {
            let cheapest = (0..prices.len())
                .min_by(|&i, &j| prices[i].total_cmp(&prices[j]))
                .expect("at least one candidate");
            let labels = &self.candidates[node][cheapest];
            let price = prices[cheapest] + moving(self.entries(labels), self.numbers);
            for order in self.liked[node].iter().take(2) {
                // Moving pays only where the order could not be had cheaper directly.
                let direct = self.candidates[node].iter().position(|c| c == order);
                if direct.is_none_or(|i| prices[i] > price) {
                    options.push(Way {
                        order: order.clone(),
                        price,
                        candidate: cheapest,
                        moved: true,
                    });
                }
            }
        }
        options
    }

    fn price_choices(&mut self) {
        let n = self.leaves();
        for (number, step) in self.program.steps.iter().enumerate() {
            let mut options = step.operands.map(|o| self.options(o));
            if step.multiply_adds < WORTH_LOOKING {
                options.iter_mut().for_each(|o| o.truncate(1));
            }
            let mut choices = Vec::with_capacity(self.candidates[n + number].len());
            for out in &self.candidates[n + number] {
                let mut best: Option<Choice> = None;
                for a in &options[0] {
                    for b in &options[1] {
                        let so_far = a.price + b.price;
                        if best.is_some_and(|c| c.price <= so_far) {
                            continue;
                        }
                        let loops = self.join(step, &a.order, &b.order, out).plan();
                        let price =
                            so_far + loops.nanoseconds(self.numbers.complex, self.numbers.bytes);
                        if best.is_none_or(|c| price < c.price) {
                            let way = |o: &Way, side: usize| {
                                let node = step.operands[side];
                                let moved = o.moved.then(|| {
                                    let liked = &self.liked[node];
                                    liked.iter().position(|l| *l == o.order).expect("a liked order")
                                });
                                (o.candidate, moved)
                            };
                            best = Some(Choice { price, operands: [way(a, 0), way(b, 1)] });
                        }
                    }
                }
                choices.push(best.expect("every operand has an option"));
            }
            self.choices.push(choices);
        }
    }

    fn settle(self) -> Layout {
        let n = self.leaves();
        let nodes = self.candidates.len();
        let mut taken = vec![0usize; nodes];
        let root = nodes - 1;
        let mut nanoseconds = 0.0;
        if let Some(last) = root.checked_sub(n) {
            let end = |i: usize| {
                let order = &self.candidates[root][i];
                let last_move = if *order == self.program.open {
                    0.0
                } else {
                    moving(self.entries(order), self.numbers)
                };
                self.choices[last][i].price + last_move
            };
            taken[root] = (0..self.choices[last].len())
                .min_by(|&i, &j| end(i).total_cmp(&end(j)))
                .expect("at least one candidate");
            nanoseconds = end(taken[root]);
        }
        let mut steps = Vec::with_capacity(self.program.steps.len());
        for (number, step) in self.program.steps.iter().enumerate().rev() {
            let choice = self.choices[number][taken[n + number]];
            let mut moved: [Option<Vec<Label>>; 2] = [None, None];
            let mut orders: [&Vec<Label>; 2] = [&self.program.open; 2];
            for side in 0..2 {
                let node = step.operands[side];
                let (candidate, to) = choice.operands[side];
                taken[node] = candidate;
                orders[side] = match to {
                    None => &self.candidates[node][candidate],
                    Some(i) => &self.liked[node][i],
                };
                moved[side] = to.map(|i| self.liked[node][i].clone());
            }
            let out = &self.candidates[n + number][taken[n + number]];
            steps.push(StepLayout {
                moved,
                loops: self.join(step, orders[0], orders[1], out).plan(),
            });
        }
        steps.reverse();
        let orders =
            self.candidates.into_iter().zip(taken).map(|(mut c, i)| c.swap_remove(i)).collect();
        Layout { orders, steps, nanoseconds }
    }

    /// The loops of a step for axes in these orders.
    fn join(&self, step: &Step, a: &[Label], b: &[Label], out: &[Label]) -> Join {
        let sizes = &self.program.sizes;
        let (sa, sb, sc) = (strides(a, sizes), strides(b, sizes), strides(out, sizes));
        let at = |order: &[Label], steps: &[usize], l: Label| {
            order.iter().position(|&x| x == l).map_or(0, |i| steps[i])
        };
        let legs = |labels: &[Label]| {
            labels
                .iter()
                .map(|&l| Leg {
                    size: sizes[l.index()],
                    left: at(a, &sa, l),
                    right: at(b, &sb, l),
                    out: at(out, &sc, l),
                })
                .collect()
        };
        Join {
            batch: legs(&step.batch),
            rows: legs(&step.rows),
            sum: legs(&step.sum),
            columns: legs(&step.columns),
        }
    }
}

fn distinct(orders: Vec<Vec<Label>>) -> Vec<Vec<Label>> {
    let mut out: Vec<Vec<Label>> = Vec::with_capacity(orders.len());
    for o in orders {
        if !out.contains(&o) {
            out.push(o);
        }
    }
    out
}
