//! The best of all orders of a few tensors, by dynamic programming over all their subsets.
//!
//! With outer products allowed, so that nothing is assumed about the best order. For k
//! tensors 3^k / 2 splits are tried, each a handful of additions: a split of S into S₁ and
//! S₂ meets labels of touch(S) − inner(S₁) − inner(S₂) bits, where touch(S) counts the labels
//! on S and inner(S) those that S sums. Sets whose result alone costs more than an order
//! already known are dropped.

use super::net::Steps;
use super::price::Price;
use rayon::prelude::*;

/// A label of a small net.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Held {
    /// The tensors that hold it, one bit each.
    pub by: u32,
    /// Whether it stays.
    pub open: bool,
    /// log2 of its size.
    pub bits: f64,
}

/// Bits of labels beyond which prices leave the range of a double.
const RANGE: f64 = 900.0;
/// From here on the sets of one cardinality are shared among threads.
const SHARED: usize = 15;

/// What the subsets are weighed by.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Aim {
    /// The sum of prices.
    Sum(Price),
    /// The largest result; among equals the sum of prices.
    Largest(Price),
}

struct Table {
    /// Best price of making each set, and 2^(−steps · inner).
    best: Vec<[f64; 2]>,
    /// One part of the best split.
    split: Vec<u32>,
}

/// The best steps for `k` tensors (at most 24) and log2 of their price; `None` where sizes leave the
/// range of a double or no order is below `cap` (log2).
pub(crate) fn best(k: usize, labels: &[Held], aim: Aim, cap: f64) -> Option<(Steps, f64)> {
    if k == 1 {
        return Some((Vec::new(), f64::NEG_INFINITY));
    }
    let price = match aim {
        Aim::Sum(p) | Aim::Largest(p) => p,
    };
    let all: f64 = labels.iter().map(|l| l.bits).sum();
    if k > 24 || all * price.steps.max(price.results) > RANGE {
        return None;
    }
    let (touch, inner) = profiles(k, labels);
    let mut limit = f64::INFINITY;
    if let Aim::Largest(_) = aim {
        let peak = fill::<true>(k, &touch, &inner, price, f64::INFINITY, f64::INFINITY);
        limit = peak.best[(1 << k) - 1][0] + 1e-9;
    }
    // Rounding must not cut off an order that costs exactly the cap.
    let table = fill::<false>(k, &touch, &inner, price, limit, cap.exp2() * (1.0 + 1e-9));
    let full = (1u32 << k) - 1;
    let found = table.best[full as usize][0];
    if !found.is_finite() {
        return None;
    }
    let mut order = Vec::with_capacity(k - 1);
    let mut stack = vec![full];
    while let Some(s) = stack.pop() {
        if s.count_ones() > 1 {
            order.push(s);
            stack.push(table.split[s as usize]);
            stack.push(s ^ table.split[s as usize]);
        }
    }
    order.reverse();
    let mut number = std::collections::BTreeMap::new();
    let mut steps = Vec::with_capacity(k - 1);
    for (i, &s) in order.iter().enumerate() {
        let of = |t: u32| if t.count_ones() == 1 { t.trailing_zeros() } else { number[&t] };
        let a = table.split[s as usize];
        steps.push((of(a), of(s ^ a)));
        number.insert(s, (k + i) as u32);
    }
    Some((steps, found.log2()))
}

/// touch and inner of every subset, in bits.
fn profiles(k: usize, labels: &[Held]) -> (Vec<f64>, Vec<f64>) {
    let sets = 1usize << k;
    let mut within_all = vec![0.0; sets];
    let mut inner = vec![0.0; sets];
    for l in labels {
        within_all[l.by as usize] += l.bits;
        if !l.open {
            inner[l.by as usize] += l.bits;
        }
    }
    for bit in 0..k {
        for s in 0..sets {
            if s >> bit & 1 == 1 {
                within_all[s] += within_all[s ^ (1 << bit)];
                inner[s] += inner[s ^ (1 << bit)];
            }
        }
    }
    let all = within_all[sets - 1];
    let touch = (0..sets).map(|s| all - within_all[sets - 1 - s]).collect();
    (touch, inner)
}

fn fill<const PEAK: bool>(
    k: usize,
    touch: &[f64],
    inner: &[f64],
    price: Price,
    limit: f64,
    cap: f64,
) -> Table {
    let sets = 1usize << k;
    let mut best = vec![[f64::INFINITY; 2]; sets];
    let mut split = vec![0u32; sets];
    for (s, b) in best.iter_mut().enumerate() {
        b[1] = (-price.steps * inner[s]).exp2();
        if s.count_ones() == 1 {
            b[0] = if PEAK { touch[s] - inner[s] } else { 0.0 };
        }
    }
    // Within a window no step may pass the price's limit.
    let widest = (price.steps * (price.limit + 1e-6)).exp2();
    let one = |best: &[[f64; 2]], s: u32| -> (f64, u32) {
        let result = touch[s as usize] - inner[s as usize];
        let own = if PEAK {
            result
        } else {
            // The step that uses this result costs no less than the result's elements.
            let next = if s as usize == sets - 1 { 0.0 } else { (price.steps * result).exp2() };
            if result > limit || next > cap {
                return (f64::INFINITY, 0);
            }
            if price.weight == f64::NEG_INFINITY {
                0.0
            } else {
                (price.weight + price.results * result).exp2()
            }
        };
        let met = (price.steps * touch[s as usize]).exp2();
        let low = s & s.wrapping_neg();
        let rest = s ^ low;
        let mut sub = rest;
        let (mut found, mut at) = (f64::INFINITY, 0);
        while sub != 0 {
            // The part with the lowest tensor is s ^ sub, so each split is seen once.
            let (a, b) = (best[sub as usize], best[(s ^ sub) as usize]);
            let c = if PEAK {
                a[0].max(b[0])
            } else {
                let step = met * a[1] * b[1];
                a[0] + b[0] + if step > widest { f64::INFINITY } else { step }
            };
            if c < found {
                found = c;
                at = sub;
            }
            sub = (sub - 1) & rest;
        }
        let found = if PEAK { found.max(own) } else { found + own };
        if found <= cap { (found, at) } else { (f64::INFINITY, at) }
    };
    if k < SHARED {
        for s in 1..sets as u32 {
            if s.count_ones() > 1 {
                let (b, at) = one(&best, s);
                best[s as usize][0] = b;
                split[s as usize] = at;
            }
        }
    } else {
        let mut by_count = vec![Vec::new(); k + 1];
        for s in 1..sets as u32 {
            by_count[s.count_ones() as usize].push(s);
        }
        for group in &by_count[2..] {
            let made: Vec<(f64, u32)> =
                group.par_iter().with_min_len(64).map(|&s| one(&best, s)).collect();
            for (&s, (b, at)) in group.iter().zip(made) {
                best[s as usize][0] = b;
                split[s as usize] = at;
            }
        }
    }
    Table { best, split }
}
