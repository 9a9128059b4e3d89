//! Bounds on a distance for any network: closure from below and above, minimal cuts from above.

use super::Code;
use super::distance::{Distance, Request};
use super::erasure::Target;
use super::greedy::{BUNDLE, choose};
use super::pattern::Patterns;
use super::reach::Reach;
use crate::entropy::{Asker, Wires};
use crate::network::Region;
use crate::watch::{News, Watch};
use rayon::prelude::*;
use std::sync::atomic::{AtomicBool, Ordering};

/// Bounds on the distance without ranks.
///
/// Below: every set of fewer legs was tried, and closure recovers the target from the rest.
/// Above: a set from which closure recovers a bulk leg makes that leg unrecoverable from the
/// rest (no cloning). The bounds meet only by luck. Cost: C(n, w) closures, 256 at a time.
pub fn by_closure(code: &Code<'_>, request: &Request, watch: &dyn Watch) -> Distance {
    let n = code.boundary();
    let start = watch.seconds();
    let over = || watch.stop() || watch.seconds() - start > request.seconds;
    let upper = holding_set(code, request.target, watch);
    let mut out = Distance {
        lower: 0,
        upper: upper.as_ref().map_or(n + 1, Vec::len),
        supports: upper.into_iter().collect(),
        complete: false,
        nodes: 0,
    };
    for size in 0..=n {
        if size > out.upper {
            break;
        }
        out.lower = size;
        watch.tell(News::Best(&format!("no set of fewer than {size} legs hurts")));
        let sets = choose(n as u64, size as u64);
        let bundles = u64::try_from(sets.div_ceil(BUNDLE as u128)).unwrap_or(u64::MAX);
        let stopped = AtomicBool::new(false);
        let hurt = (0..bundles).into_par_iter().any(|b| {
            if b % 64 == 0 && over() {
                stopped.store(true, Ordering::Relaxed);
            }
            // `any` ends all threads at the first `true`.
            stopped.load(Ordering::Relaxed) || {
                let first = u128::from(b) * BUNDLE as u128;
                some_lost(code, request.target, size, first, sets)
            }
        });
        if hurt {
            break;
        }
    }
    out.lower = out.lower.min(out.upper);
    out
}

fn some_lost(code: &Code<'_>, target: Target, size: usize, first: u128, sets: u128) -> bool {
    let count = (sets - first).min(BUNDLE as u128) as usize;
    let mut patterns = Patterns::new(code.boundary());
    let mut bench = code.greedy().bench();
    patterns.list(size, first, count);
    code.greedy().recover(&mut bench, patterns.erased());
    let lost = |k: usize| {
        let bits = code.greedy().lost(&bench, k);
        (0..count).any(|i| bits[i / 64] >> (i % 64) & 1 == 1)
    };
    match target {
        Target::Leg(k) => lost(k),
        Target::Every => (0..code.bulk()).any(lost),
    }
}

/// The smallest set found from which closure recovers the leg (any leg): the shortest
/// intervals that do, thinned out.
fn holding_set(code: &Code<'_>, target: Target, watch: &dyn Watch) -> Option<Vec<u32>> {
    const INTERVALS: usize = 64;
    let n = code.boundary();
    let reach = Reach::greedy(code, watch);
    let legs: Vec<usize> = match target {
        Target::Leg(k) => vec![k],
        Target::Every => (0..code.bulk()).collect(),
    };
    let mut tries: Vec<(usize, usize, usize)> = legs
        .iter()
        .flat_map(|&k| (0..n).map(move |s| (k, s)))
        .filter_map(|(k, s)| Some((reach.length(s, k)?, s, k)))
        .collect();
    tries.sort_unstable();
    tries.truncate(INTERVALS);
    tries
        .par_iter()
        .map(|&(length, start, k)| {
            let mut set: Vec<u32> = (0..length).map(|i| ((start + i) % n) as u32).collect();
            let mut at = 0;
            while at < set.len() {
                let without: Vec<u32> = set.iter().copied().filter(|&l| l != set[at]).collect();
                if code.wedge(|s| without.contains(&(s as u32)))[k] {
                    set = without;
                } else {
                    at += 1;
                }
            }
            set.sort_unstable();
            set
        })
        .min_by(|a, b| (a.len(), a).cmp(&(b.len(), b)))
}

/// An upper bound on the distance of the whole code by minimal cuts.
///
/// If two disjoint sets of m legs can each be lost, what is encoded fits through the cut
/// round the rest: ln(bulk dimension) ≤ S(rest) ≤ cut(rest) (quantum Singleton bound,
/// PRA 55, 900 (1997), from memory, with the cut in the place of the number of legs). So an m
/// with a smaller cut bounds the distance. Tried for neighbouring intervals, from up to 64
/// starts; `None` where no m ≤ n/2 is excluded.
pub fn by_cuts(code: &Code<'_>) -> Option<usize> {
    let n = code.boundary();
    let net = code.network();
    let encoded: f64 = net.bulk().iter().map(|&l| (net.dim(l) as f64).ln()).sum();
    let wires = Wires::of(net);
    let asker = Asker::new(&wires, crate::entropy::Request::default());
    let starts: Vec<usize> = (0..n).step_by(n.div_ceil(64).max(1)).collect();
    let excluded = |m: usize| {
        starts.par_iter().any(|&s| {
            let rest = Region::interval(s + 2 * m, n - 2 * m, n);
            asker.cut(&rest).nats < encoded - 1e-9
        })
    };
    // A larger m leaves a smaller rest, so the least excluded m is found by bisection.
    let (mut low, mut high) = (0, n / 2 + 1);
    while low + 1 < high {
        let m = usize::midpoint(low, high);
        if excluded(m) {
            high = m;
        } else {
            low = m;
        }
    }
    (high <= n / 2).then_some(high)
}
