//! The smallest erasure that hurts: distance of the whole code or of one bulk leg.
//!
//! The distance of the code is the least number of boundary legs that hold an operator which
//! acts on the bulk; that of a bulk leg the least number of legs whose loss makes the leg
//! unrecoverable while all other bulk legs stay with their reference.

use super::checks::{Checks, Held};
use super::erasure::Target;
use super::short::short_checks;
use super::span::{Packing, Span, Words};
use super::{Code, CodeError};
use crate::watch::{News, Watch};
use rand::SeedableRng;
use rand::seq::SliceRandom;
use rand_chacha::ChaCha8Rng;
use rayon::prelude::*;
use std::collections::{BTreeSet, HashMap};
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

/// What to search for and how long.
#[derive(Debug, Clone, PartialEq)]
pub struct Request {
    /// Whose distance.
    pub target: Target,
    /// Seconds after which the search ends with bounds (needs a watch with a clock).
    pub seconds: f64,
    /// Most minimal supports that are kept; all are counted up to this number.
    pub supports: usize,
    /// Seed of the random sets that give the first upper bound.
    pub seed: u64,
}

impl Default for Request {
    fn default() -> Self {
        Self { target: Target::Every, seconds: 60.0, supports: 1_000_000, seed: 0 }
    }
}

/// What is known about a distance.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Distance {
    /// Proven: no smaller set hurts.
    pub lower: usize,
    /// Proven: a set of this size hurts. Boundary legs + 1 where not even the loss of all
    /// of them was shown to.
    pub upper: usize,
    /// All sets of size `upper` that hurt, ascending, once `lower` = `upper`; else one set of
    /// that size.
    pub supports: Vec<Vec<u32>>,
    /// Whether `supports` holds all of them.
    pub complete: bool,
    /// Search nodes visited.
    pub nodes: u64,
}

impl Distance {
    /// The distance, where both bounds meet.
    pub fn exact(&self) -> Option<usize> {
        (self.lower == self.upper).then_some(self.lower)
    }
}

/// Searches a stabilizer code.
///
/// Errors are built leg by leg, each next leg taken from the lightest check that is violated
/// so far and none twice (branch and bound on syndromes); the last leg is looked up. Weights
/// are tried in ascending order, so an interrupted search has proven a lower bound. Upper
/// bounds come from intervals and random sets, thinned out while they still hurt. Every
/// support found is tested by ranks again.
///
/// Cost: about legs·b^{d−1} nodes, with b the number of errors on a light check.
///
/// # Errors
/// [`CodeError::NotStabilizer`].
pub fn search(
    code: &Code<'_>,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Distance, CodeError> {
    if !code.is_stabilizer() {
        return Err(code.not_stabilizer("the exact distance"));
    }
    let n = code.boundary();
    let start = watch.seconds();
    let hurts = |held: &[Held<'_>]| match request.target {
        Target::Leg(k) => held.iter().any(|h| h.touches(k)),
        Target::Every => held.iter().any(|h| h.any()),
    };
    if hurts(&code.held()) {
        // A leg that the whole boundary does not determine is lost without any erasure.
        return Ok(Distance {
            lower: 0,
            upper: 0,
            supports: vec![vec![]],
            complete: true,
            nodes: 0,
        });
    }
    let mut found =
        Distance { lower: 1, upper: n + 1, supports: vec![], complete: false, nodes: 0 };
    if let Some(set) = small_set(code, request, &hurts) {
        found.upper = set.len();
        found.supports = vec![set];
    }
    let searches: Vec<Search> =
        code.checks().iter().map(|c| Search::new(c, request.target)).collect();
    while found.lower <= found.upper.min(n) {
        watch.tell(News::Best(&format!("no set of fewer than {} legs hurts", found.lower)));
        let over = || watch.stop() || (watch.seconds() - start) > request.seconds;
        let mut supports = BTreeSet::new();
        let mut whole = true;
        for s in &searches {
            let (sets, nodes, ended) = s.weight(found.lower, request.supports, &over);
            found.nodes += nodes;
            whole &= ended;
            supports.extend(sets);
        }
        if !supports.is_empty() {
            found.upper = found.lower;
            found.complete = whole && supports.len() < request.supports;
            found.supports = supports.into_iter().collect();
            verify(code, &found.supports, &hurts);
            return Ok(found);
        }
        if !whole {
            return Ok(found);
        }
        found.lower += 1;
    }
    found.lower = found.lower.min(found.upper);
    Ok(found)
}

/// Tests supports by ranks: each hurts, and it stops to hurt without any one of its legs.
fn verify(code: &Code<'_>, supports: &[Vec<u32>], hurts: &dyn Fn(&[Held<'_>]) -> bool) {
    let mut held = code.held();
    for set in supports.iter().take(1000) {
        held.iter_mut().for_each(Held::clear);
        set.iter().for_each(|&l| held.iter_mut().for_each(|h| h.add(l as usize)));
        assert!(hurts(&held), "set {set:?} was found to hurt, but ranks deny it");
    }
}

/// A small set that hurts: the shortest interval and some random sets, each thinned out.
fn small_set(
    code: &Code<'_>,
    request: &Request,
    hurts: &(dyn Fn(&[Held<'_>]) -> bool + Sync),
) -> Option<Vec<u32>> {
    let n = code.boundary();
    let mut orders: Vec<Vec<usize>> = Vec::new();
    let step = n.div_ceil(64).max(1);
    orders.extend((0..n).step_by(step).map(|s| (0..n).map(|i| (s + i) % n).collect()));
    let mut rng = ChaCha8Rng::seed_from_u64(request.seed);
    for _ in 0..16 {
        let mut order: Vec<usize> = (0..n).collect();
        order.shuffle(&mut rng);
        orders.push(order);
    }
    orders
        .par_iter()
        .filter_map(|order| {
            let mut held = code.held();
            let mut set: Vec<usize> = Vec::new();
            for &l in order {
                held.iter_mut().for_each(|h| h.add(l));
                set.push(l);
                if hurts(&held) {
                    break;
                }
            }
            if !hurts(&held) {
                return None;
            }
            let mut at = 0;
            while at < set.len() {
                held.iter_mut().for_each(Held::clear);
                for (i, &l) in set.iter().enumerate() {
                    if i != at {
                        held.iter_mut().for_each(|h| h.add(l));
                    }
                }
                if hurts(&held) {
                    set.remove(at);
                } else {
                    at += 1;
                }
            }
            let mut set: Vec<u32> = set.into_iter().map(|l| l as u32).collect();
            set.sort_unstable();
            Some(set)
        })
        .min_by(|a, b| (a.len(), a).cmp(&(b.len(), b)))
}

/// The search for one prime.
struct Search {
    packing: Packing,
    checks: usize,
    legs: usize,
    /// Errors of each leg, all but the identity; the columns of each.
    error_start: Vec<usize>,
    errors: Vec<u64>,
    error_leg: Vec<u32>,
    /// Errors that violate each check, by leg.
    breakers: Vec<Vec<u32>>,
    /// Most checks that one error violates.
    most: u32,
    /// Errors by their violations.
    by_violation: HashMap<Vec<u64>, Vec<u32>>,
    target: std::ops::Range<usize>,
    kernel: Option<Span>,
}

struct Path<'s> {
    search: &'s Search,
    barred: Vec<bool>,
    used: Vec<bool>,
    legs: Vec<u32>,
    sums: Vec<Vec<u64>>,
    found: BTreeSet<Vec<u32>>,
    limit: usize,
    nodes: u64,
    over: &'s (dyn Fn() -> bool + Sync),
    ended: &'s AtomicBool,
}

impl Search {
    fn new(checks: &Checks, target: Target) -> Self {
        let short = checks.with_rows(short_checks(checks, 4));
        let packing = short.packing();
        let p = packing.prime;
        let legs = short.boundary();
        let stride = packing.stride();
        let mut error_start = vec![0];
        let mut errors: Vec<u64> = Vec::new();
        let mut error_leg = Vec::new();
        for leg in 0..legs {
            let columns = short.columns_of(leg);
            let count = p.pow(columns.len() as u32);
            for number in 1..count {
                let mut v = vec![0; stride];
                let mut rest = number;
                for c in columns.clone() {
                    packing.add(&mut v, rest % p, short.column(c), 0);
                    rest /= p;
                }
                errors.extend_from_slice(&v);
                error_leg.push(leg as u32);
            }
            error_start.push(error_leg.len());
        }
        let checks_count = short.count();
        let mut breakers = vec![Vec::new(); checks_count];
        let mut by_violation: HashMap<Vec<u64>, Vec<u32>> = HashMap::new();
        let mut most = 1;
        for e in 0..error_leg.len() {
            let v = &errors[e * stride..(e + 1) * stride];
            let mut broken = 0;
            for (c, list) in breakers.iter_mut().enumerate() {
                if packing.get(v, c) != 0 {
                    list.push(e as u32);
                    broken += 1;
                }
            }
            most = most.max(broken);
            by_violation
                .entry(violation(packing, checks_count, v, true))
                .or_default()
                .push(e as u32);
        }
        let target = match target {
            Target::Leg(k) => short.places_of_bulk(k),
            Target::Every => checks_count..packing.width,
        };
        let kernel = (!short.kernel().is_empty()).then(|| {
            let mut span = Span::new(packing);
            let mut v = vec![0; stride];
            for l in short.kernel() {
                v.fill(0);
                for (i, &x) in l.iter().enumerate() {
                    packing.set(&mut v, checks_count + i, u64::from(x));
                }
                span.push(&v);
            }
            span
        });
        Self {
            packing,
            checks: checks_count,
            legs,
            error_start,
            errors,
            error_leg,
            breakers,
            most,
            by_violation,
            target,
            kernel,
        }
    }
    fn error(&self, e: usize) -> &Words {
        let s = self.packing.stride();
        &self.errors[e * s..(e + 1) * s]
    }
    fn hurts(&self, sum: &Words) -> bool {
        if self.packing.vanishes(sum, self.target.clone()) {
            return false;
        }
        self.kernel.as_ref().is_none_or(|k| !k.holds(&mut sum.to_vec()))
    }
    /// All minimal supports of this weight, given that there is none of a smaller one; false
    /// where time ran out.
    fn weight(
        &self,
        weight: usize,
        limit: usize,
        over: &(dyn Fn() -> bool + Sync),
    ) -> (BTreeSet<Vec<u32>>, u64, bool) {
        let ended = AtomicBool::new(false);
        let nodes = AtomicU64::new(0);
        let parts: Vec<BTreeSet<Vec<u32>>> = (0..self.legs)
            .into_par_iter()
            .map(|first| {
                let mut path = Path {
                    search: self,
                    barred: vec![false; self.error_leg.len()],
                    used: vec![false; self.legs],
                    legs: Vec::with_capacity(weight),
                    sums: vec![vec![0; self.packing.stride()]; weight + 1],
                    found: BTreeSet::new(),
                    limit,
                    nodes: 0,
                    over,
                    ended: &ended,
                };
                // The least leg of the support is `first`.
                path.barred[..self.error_start[first]].fill(true);
                for e in self.error_start[first]..self.error_start[first + 1] {
                    path.take(e, weight);
                }
                nodes.fetch_add(path.nodes, Ordering::Relaxed);
                path.found
            })
            .collect();
        let mut all = BTreeSet::new();
        for p in parts {
            all.extend(p);
        }
        while all.len() > limit {
            all.pop_last();
        }
        (all, nodes.into_inner(), !ended.into_inner())
    }
}

/// The check part of a vector, or of its negative.
fn violation(packing: Packing, checks: usize, v: &Words, negative: bool) -> Vec<u64> {
    if packing.prime == 2 {
        let mut out = v[..checks.div_ceil(64)].to_vec();
        if !checks.is_multiple_of(64) {
            *out.last_mut().expect("one word at least") &= (1 << (checks % 64)) - 1;
        }
        out
    } else {
        let flip = |x: u64| if negative { (packing.prime - x) % packing.prime } else { x };
        v[..checks].iter().map(|&x| flip(x)).collect()
    }
}

impl Path<'_> {
    /// Puts an error on a leg that has none; `left` legs may be used, this one included.
    fn take(&mut self, e: usize, left: usize) {
        let s = self.search;
        let depth = self.legs.len();
        let (head, tail) = self.sums.split_at_mut(depth + 1);
        tail[0].copy_from_slice(&head[depth]);
        s.packing.add(&mut tail[0], 1, s.error(e), 0);
        let leg = s.error_leg[e];
        self.used[leg as usize] = true;
        self.legs.push(leg);
        self.go_on(left - 1);
        self.legs.pop();
        self.used[leg as usize] = false;
    }
    fn go_on(&mut self, left: usize) {
        self.nodes += 1;
        if self.nodes.is_multiple_of(4096) && (self.over)() {
            self.ended.store(true, Ordering::Relaxed);
        }
        if self.ended.load(Ordering::Relaxed) || self.found.len() >= self.limit {
            return;
        }
        let s = self.search;
        let sum = &self.sums[self.legs.len()];
        let broken = count_broken(s.packing, s.checks, sum);
        if broken == 0 {
            if left == 0 && s.hurts(sum) {
                self.keep();
            }
            // A silent error of less weight that does not hurt can be divided out.
            return;
        }
        if broken as usize > left * s.most as usize {
            return;
        }
        if left == 1 {
            self.finish();
            return;
        }
        let check = (0..s.checks).find(|&c| s.packing.get(sum, c) != 0).expect("one is broken");
        let mut barred = Vec::new();
        for &e in &s.breakers[check] {
            let e = e as usize;
            if !self.barred[e] && !self.used[s.error_leg[e] as usize] {
                self.take(e, left);
                // From now on this check is broken by a later error only.
                self.barred[e] = true;
                barred.push(e);
            }
        }
        for e in barred {
            self.barred[e] = false;
        }
    }
    /// One leg is left: only errors that mend every broken check will do.
    fn finish(&mut self) {
        let s = self.search;
        let depth = self.legs.len();
        let key = violation(s.packing, s.checks, &self.sums[depth], false);
        let Some(menders) = s.by_violation.get(&key) else { return };
        for &e in menders {
            let e = e as usize;
            if self.barred[e] || self.used[s.error_leg[e] as usize] {
                continue;
            }
            let mut sum = self.sums[depth].clone();
            s.packing.add(&mut sum, 1, s.error(e), 0);
            if s.hurts(&sum) {
                self.legs.push(s.error_leg[e]);
                self.keep();
                self.legs.pop();
            }
        }
    }
    fn keep(&mut self) {
        let mut set = self.legs.clone();
        set.sort_unstable();
        self.found.insert(set);
    }
}

fn count_broken(packing: Packing, checks: usize, v: &Words) -> u32 {
    if packing.prime == 2 {
        let full = checks / 64;
        let mut n: u32 = v[..full].iter().map(|w| w.count_ones()).sum();
        if !checks.is_multiple_of(64) {
            n += (v[full] & ((1 << (checks % 64)) - 1)).count_ones();
        }
        n
    } else {
        v[..checks].iter().filter(|&&x| x != 0).count() as u32
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::code::samples::{pentagons, state_of};
    use crate::tiling::Rule;
    use crate::watch::Silent;

    fn distance(code: &Code<'_>, target: Target) -> Distance {
        search(code, &Request { target, ..Request::default() }, &Silent).unwrap()
    }

    /// Exhaustive rank tests by an independent program gave [[20,6,3]], [[25,11,3]] with
    /// exactly 5 supports of weight 3, [[55,21,3]], and 20 smallest blocking erasures of 4
    /// legs for the central leg of the 25-leg code, the "four" of JHEP 06 (2015) 149.
    #[test]
    fn pentagon_codes() {
        for (rings, rule, n, k, supports) in [
            (1, Rule::Edge, 20, 6, None),
            (1, Rule::Vertex, 25, 11, Some(5)),
            (2, Rule::Edge, 55, 21, None),
        ] {
            let net = pentagons(rings, rule);
            let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
            assert_eq!((code.boundary(), code.bulk()), (n, k));
            let d = distance(&code, Target::Every);
            assert_eq!((d.exact(), d.complete), (Some(3), true));
            if let Some(s) = supports {
                assert_eq!(d.supports.len(), s);
                let d = distance(&code, Target::Leg(code.centre()));
                assert_eq!((d.exact(), d.supports.len()), (Some(4), 20));
            }
        }
    }

    #[test]
    fn agrees_with_all_sets() {
        let net = pentagons(1, Rule::Edge);
        let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
        for target in [Target::Every, Target::Leg(0), Target::Leg(3)] {
            let d = distance(&code, target);
            let mut held = code.held();
            let mut sets = Vec::new();
            for set in 0u32..1 << 20 {
                if set.count_ones() as usize > d.upper {
                    continue;
                }
                held[0].clear();
                let legs: Vec<u32> = (0..20).filter(|l| set >> l & 1 == 1).collect();
                legs.iter().for_each(|&l| held[0].add(l as usize));
                let hurts = match target {
                    Target::Every => held[0].any(),
                    Target::Leg(k) => held[0].touches(k),
                };
                if hurts {
                    assert_eq!(legs.len(), d.upper, "a smaller set hurts");
                    sets.push(legs);
                }
            }
            sets.sort();
            assert_eq!(d.supports, sets);
        }
    }
}
