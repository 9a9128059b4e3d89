//! The exhaustive method: the best order there is.
//!
//! Up to [`DENSE`] tensors every order is weighed, outer products included, over all subsets
//! (see [`super::subsets`]). Beyond that the sets are connected ones only, made in the order
//! of their price: a set is settled when no cheaper way to make it can remain (the shortest
//! path principle on hyperpaths, Inf. Process. Lett. 6, 1 (1977)), and joined with the
//! settled sets that it touches; sets dearer than a known order are dropped. That gives the
//! best among the orders without outer products. Networks that it cannot afford are handed
//! back.

use super::net::{Net, Steps};
use super::price::Price;
use super::subsets::{self, Aim, Held};
use crate::watch::Watch;
use std::cmp::Reverse;
use std::collections::{BinaryHeap, HashMap};

/// Up to so many tensors all orders are weighed.
pub(crate) const DENSE: usize = 20;
/// Most tensors that the sparse way numbers.
pub(crate) const SPARSE: usize = 64;

/// Most sets that the sparse way settles.
const SETS: usize = 2_000_000;

/// The labels of a small net with the tensors that hold them.
fn held(net: &Net) -> Vec<Held> {
    let mut labels: Vec<Held> = net
        .holders()
        .into_iter()
        .enumerate()
        .filter(|(_, h)| !h.is_empty())
        .map(|(l, h)| Held {
            by: h.iter().fold(0, |m, &t| m | 1 << t),
            open: net.open[l],
            bits: net.bits[l],
        })
        .collect();
    for (t, &bits) in net.lone.iter().enumerate() {
        if bits > 0.0 {
            labels.push(Held { by: 1 << t, open: true, bits });
        }
    }
    labels
}

/// The best order of all; `cap` is log2 of the price of a known one. `None` where the net
/// is too large or sizes leave the range of a double.
pub(crate) fn dense(net: &Net, aim: Aim, cap: f64) -> Option<Steps> {
    let k = net.tensors.len();
    if k > DENSE {
        return None;
    }
    subsets::best(k, &held(net), aim, cap).map(|(steps, _)| steps)
}

struct Set {
    best: f64,
    parts: (u64, u64),
    near: u64,
    touch: f64,
    inner: f64,
    settled: bool,
}

/// The best order without outer products of a connected net, at most [`SPARSE`] tensors;
/// `cap` is log2 of the price of a known one. `None` where more than [`SETS`] sets or
/// `work` pairs would be needed, or the watch asks to stop.
pub(crate) fn sparse(
    net: &Net,
    price: Price,
    cap: f64,
    work: u64,
    watch: &dyn Watch,
) -> Option<Steps> {
    let mut work = work;
    let k = net.tensors.len();
    let all_bits: f64 = net.bits.iter().sum::<f64>() + net.lone.iter().sum::<f64>();
    if k > SPARSE || all_bits * price.steps.max(price.results) > 900.0 {
        return None;
    }
    let cap = cap.exp2() * (1.0 + 1e-9);
    let full = if k == 64 { u64::MAX } else { (1 << k) - 1 };
    let masks: Vec<u64> =
        net.holders().iter().map(|h| h.iter().fold(0u64, |m, &t| m | 1 << t)).collect();
    let near_of =
        |t: usize| net.tensors[t].iter().fold(0u64, |m, &l| m | masks[l as usize]) & !(1 << t);
    let mut sets: HashMap<u64, Set> = HashMap::new();
    let mut queue: BinaryHeap<Reverse<(u64, u64)>> = BinaryHeap::new();
    // Settled sets that hold each tensor, in the order of their price.
    let mut holding: Vec<Vec<u64>> = vec![Vec::new(); k];
    let order_of = |x: f64| x.to_bits();
    for t in 0..k {
        let touch = net.size(&net.tensors[t]) + net.lone[t];
        let near = near_of(t);
        sets.insert(
            1 << t,
            Set { best: 0.0, parts: (0, 0), near, touch, inner: 0.0, settled: false },
        );
        queue.push(Reverse((order_of(0.0), 1 << t)));
    }
    let mut settled = 0;
    while let Some(Reverse((key, s))) = queue.pop() {
        let set = sets.get_mut(&s)?;
        if set.settled || order_of(set.best) != key {
            continue;
        }
        set.settled = true;
        settled += 1;
        if s == full {
            return Some(unfold(k, full, &sets));
        }
        if settled > SETS || (settled % 64 == 0 && watch.stop()) {
            return None;
        }
        let (cost, near, touch, inner) = (set.best, set.near, set.touch, set.inner);
        let mut seen_before = 0u64;
        let mut todo = near;
        while todo != 0 {
            let v = todo.trailing_zeros();
            todo &= todo - 1;
            for &t in &holding[v as usize] {
                work = work.saturating_sub(1);
                if t & s != 0 || t & seen_before != 0 {
                    continue;
                }
                let other = &sets[&t];
                if cost + other.best > cap {
                    break;
                }
                let union = s | t;
                // Labels on both, and those of them that are summed now.
                let (mut both, mut summed) = (0.0, 0.0);
                let (small, big) = if s.count_ones() < t.count_ones() { (s, t) } else { (t, s) };
                let mut border = small;
                let mut seen: [u32; 64] = [u32::MAX; 64];
                let mut seen_len = 0;
                while border != 0 {
                    let x = border.trailing_zeros() as usize;
                    border &= border - 1;
                    for &l in &net.tensors[x] {
                        let m = masks[l as usize];
                        if m & big == 0 {
                            continue;
                        }
                        // A hyperedge can stand on several tensors of the smaller part.
                        if m & small & (m & small).wrapping_sub(1) != 0 {
                            if seen[..seen_len].contains(&l) {
                                continue;
                            }
                            if seen_len == 64 {
                                return None;
                            }
                            seen[seen_len] = l;
                            seen_len += 1;
                        }
                        both += net.bits[l as usize];
                        if m & !union == 0 && !net.open[l as usize] {
                            summed += net.bits[l as usize];
                        }
                    }
                }
                let touch_union = touch + other.touch - both;
                let inner_union = inner + other.inner + summed;
                let met = touch_union - inner - other.inner;
                let left = touch_union - inner_union;
                let total = cost + other.best + price.step(met, left).exp2();
                let next = if union == full { 0.0 } else { (price.steps * left).exp2() };
                if total + next > cap {
                    continue;
                }
                let near_union = (near | other.near) & !union;
                let entry = sets.entry(union).or_insert(Set {
                    best: f64::INFINITY,
                    parts: (0, 0),
                    near: near_union,
                    touch: touch_union,
                    inner: inner_union,
                    settled: false,
                });
                if total < entry.best {
                    entry.best = total;
                    entry.parts = (s, t);
                    queue.push(Reverse((order_of(total), union)));
                }
            }
            if work == 0 {
                return None;
            }
            seen_before |= 1 << v;
        }
        let mut members = s;
        while members != 0 {
            holding[members.trailing_zeros() as usize].push(s);
            members &= members - 1;
        }
    }
    None
}

fn unfold(k: usize, full: u64, sets: &HashMap<u64, Set>) -> Steps {
    let mut order = Vec::with_capacity(k.saturating_sub(1));
    let mut stack = vec![full];
    while let Some(s) = stack.pop() {
        if s.count_ones() > 1 {
            order.push(s);
            let (a, b) = sets[&s].parts;
            stack.extend([a, b]);
        }
    }
    order.reverse();
    let mut number: HashMap<u64, u32> = HashMap::new();
    let mut steps = Vec::with_capacity(order.len());
    for (i, s) in order.iter().enumerate() {
        let of = |t: u64| if t.count_ones() == 1 { t.trailing_zeros() } else { number[&t] };
        let (a, b) = sets[s].parts;
        steps.push((of(a), of(b)));
        number.insert(*s, (k + i) as u32);
    }
    steps
}
