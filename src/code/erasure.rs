//! How the bulk survives located erasures of boundary legs.
//!
//! Erasures are *located*: whoever recovers knows which legs are gone, and nothing else goes
//! wrong. Greedy results are lower bounds on what survives; exact ones (stabilizer networks)
//! are what any recovery can reach. Nothing here models gate noise.

use super::greedy::{BUNDLE, Bench, choose};
use super::pattern::{Patterns, generator};
use super::strata::{Estimate, Tally, Z95, binomial_weights, probability};
use super::{Code, CodeError, Held};
use crate::watch::{News, Watch};
use rayon::prelude::*;
use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};

/// Whose survival is asked for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Target {
    /// One bulk leg, by its place in the network's list.
    Leg(usize),
    /// All bulk legs together.
    Every,
}

/// What to sample.
#[derive(Debug, Clone, PartialEq)]
pub struct Request {
    /// Rates at which the answer is wanted.
    pub rates: Vec<f64>,
    /// Samples a rate (all rates share one pool).
    pub samples: u64,
    /// Seed of every random choice.
    pub seed: u64,
    /// Whose survival.
    pub target: Target,
    /// Whether to judge by ranks too, where the network is a stabilizer network.
    pub exact: bool,
    /// Most erasure sets that are listed one by one instead of sampled; numbers of erasures
    /// with few sets come first. With 2^n sets or more the failure polynomial is exact.
    pub listed: u128,
}

impl Default for Request {
    fn default() -> Self {
        Self {
            rates: (1..=12).map(|i| f64::from(i) * 0.05).collect(),
            samples: 10_000,
            seed: 0,
            target: Target::Every,
            exact: true,
            listed: 1 << 20,
        }
    }
}

/// What was seen at one number of erasures.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
pub struct Record {
    /// Sets judged.
    pub trials: u64,
    /// Whether these are all sets there are.
    pub complete: bool,
    /// Sets on which the target was not recovered greedily.
    pub greedy: u64,
    /// Bulk legs not recovered greedily, summed over sets (target `Every`).
    pub greedy_legs: u64,
    /// Sets on which the target cannot be recovered.
    pub exact: u64,
    /// Bulk legs that cannot be recovered, summed over sets (target `Every`).
    pub exact_legs: u64,
    /// Independent bulk operators held by the erased set, summed over sets (target `Every`).
    pub operators: u64,
}

impl Record {
    fn add(&mut self, other: &Record) {
        self.trials += other.trials;
        self.greedy += other.greedy;
        self.greedy_legs += other.greedy_legs;
        self.exact += other.exact;
        self.exact_legs += other.exact_legs;
        self.operators += other.operators;
    }
}

/// Work done so far; what is saved and taken up again.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
pub struct Work {
    /// Fingerprint of network and request.
    pub of: String,
    /// One record for each number of erasures 0..=n.
    pub records: Vec<Record>,
    /// Bundles finished, in the order of the plan.
    pub bundles: u64,
    /// Sizes and numbers of samples of the second round, once it is planned.
    pub second_round: Option<Vec<(u32, u64)>>,
}

/// The answer at one rate.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Point {
    /// Erasure rate.
    pub p: f64,
    /// Probability that the target is not recovered greedily.
    pub greedy: Estimate,
    /// Probability that the target cannot be recovered.
    pub exact: Option<Estimate>,
    /// Mean number of bulk legs not recovered greedily.
    pub greedy_legs: Option<f64>,
    /// Mean number of bulk legs that cannot be recovered.
    pub exact_legs: Option<f64>,
    /// Mean number of independent bulk operators held by the erased set.
    pub operators: Option<f64>,
}

/// Sampled survival of one code.
#[derive(Debug, Clone, PartialEq)]
pub struct Survival {
    /// Boundary legs.
    pub boundary: usize,
    /// What was asked.
    pub target: Target,
    /// One record for each number of erasures.
    pub records: Vec<Record>,
    /// Whether exact judgements were made.
    pub exact: bool,
    /// Whether all planned samples were taken.
    pub finished: bool,
}

impl Survival {
    /// Tallies of greedy failure by number of erasures.
    pub fn greedy(&self) -> Vec<Tally> {
        self.tallies(|r| r.greedy)
    }
    /// Tallies of exact failure by number of erasures; `None` where none were made.
    pub fn exact(&self) -> Option<Vec<Tally>> {
        self.exact.then(|| self.tallies(|r| r.exact))
    }
    fn tallies(&self, hits: impl Fn(&Record) -> u64) -> Vec<Tally> {
        self.records
            .iter()
            .map(|r| Tally { trials: r.trials, hits: hits(r), complete: r.complete })
            .collect()
    }
    fn mean(&self, weights: &[f64], of: impl Fn(&Record) -> u64) -> f64 {
        self.records
            .iter()
            .zip(weights)
            .filter(|(r, _)| r.trials > 0)
            .map(|(r, w)| w * of(r) as f64 / r.trials as f64)
            .sum()
    }
    /// The answer at a rate.
    pub fn at(&self, p: f64) -> Point {
        let weights = binomial_weights(self.boundary, p);
        let every = self.target == Target::Every;
        let mean = |on: bool, of: fn(&Record) -> u64| on.then(|| self.mean(&weights, of));
        Point {
            p,
            greedy: probability(&self.greedy(), p, Z95),
            exact: self.exact().map(|t| probability(&t, p, Z95)),
            greedy_legs: mean(every, |r| r.greedy_legs),
            exact_legs: mean(every && self.exact, |r| r.exact_legs),
            operators: mean(every && self.exact, |r| r.operators),
        }
    }
    /// The number of erasure sets of each size on which the target fails, where all sets were
    /// judged: P(p) = Σ_w c_w p^w (1−p)^{n−w}. Greedy counts, and exact ones.
    pub fn polynomial(&self) -> Option<(Vec<u64>, Option<Vec<u64>>)> {
        self.records.iter().all(|r| r.complete).then(|| {
            let greedy = self.records.iter().map(|r| r.greedy).collect();
            let exact = self.exact.then(|| self.records.iter().map(|r| r.exact).collect());
            (greedy, exact)
        })
    }
}

/// A stretch of work of at most one bundle.
enum Job {
    List { size: usize, first: u128, count: usize },
    Draw { sizes: Vec<u32> },
}

struct Bank<'c> {
    patterns: Patterns,
    bench: Bench,
    held: Vec<Held<'c>>,
}

/// Samples the survival of the target.
///
/// First all sets of the sizes that can be listed are judged. Half of the samples are then
/// spread over sizes as each rate would, the other half where they lower the relative errors
/// of the wanted failure probabilities most, judged by the first half. All samples of one
/// size are pooled. `saved` is work to go on from; `keep` is handed the work after each
/// stretch and at the end. The result does not depend on threads, interruptions or stretches.
///
/// Cost: a bundle of 256 sets takes O(legs) word operations for the greedy judgement, and for
/// each set on which it fails an elimination of 2|E| columns for the exact one.
///
/// # Errors
/// [`CodeError::Rate`], [`CodeError::OtherWork`].
pub fn run(
    code: &Code<'_>,
    request: &Request,
    saved: Option<Work>,
    watch: &dyn Watch,
    keep: &mut dyn FnMut(&Work),
) -> Result<Survival, CodeError> {
    if let Some(&rate) = request.rates.iter().find(|p| !(0.0..=1.0).contains(*p)) {
        return Err(CodeError::Rate { rate });
    }
    let n = code.boundary();
    let exact = request.exact && code.is_stabilizer();
    let ours = fingerprint(code, request, exact);
    let mut work = match saved {
        Some(w) if w.of == ours && w.records.len() == n + 1 => w,
        Some(w) => return Err(CodeError::OtherWork { theirs: w.of, ours }),
        None => Work {
            of: ours,
            records: vec![Record::default(); n + 1],
            bundles: 0,
            second_round: None,
        },
    };
    let listed = listed_sizes(n, request.listed);
    let mut jobs = list_jobs(n, &listed);
    let rates: Vec<Vec<f64>> = request.rates.iter().map(|&p| open_weights(n, p, &listed)).collect();
    let half = request.samples / 2;
    jobs.extend(draw_jobs(&first_round(&rates, half)));
    let rest: u64 = rates
        .iter()
        .map(|w| ((request.samples - half) as f64 * w.iter().sum::<f64>()).round() as u64)
        .sum();
    let total = jobs.len() as u64 + rest.div_ceil(BUNDLE as u64);
    let mut finished = carry_out(code, request, exact, &jobs, 0, total, &mut work, watch, keep);
    if finished && rest > 0 {
        let plan = work
            .second_round
            .get_or_insert_with(|| second_round(&work.records, &rates, rest, exact))
            .clone();
        let more: Vec<Job> = draw_jobs(&plan).collect();
        let before = jobs.len() as u64;
        finished = carry_out(code, request, exact, &more, before, total, &mut work, watch, keep);
    }
    keep(&work);
    for (w, r) in work.records.iter_mut().enumerate() {
        r.complete = listed[w] && u128::from(r.trials) == choose(n as u64, w as u64);
    }
    Ok(Survival { boundary: n, target: request.target, records: work.records, exact, finished })
}

/// Which sizes are listed: those with fewest sets first, as long as the sum allows.
fn listed_sizes(n: usize, most: u128) -> Vec<bool> {
    let mut sizes: Vec<usize> = (0..=n).collect();
    sizes.sort_by_key(|&w| (choose(n as u64, w as u64), w));
    let mut out = vec![false; n + 1];
    let mut sum = 0u128;
    for w in sizes {
        sum = sum.saturating_add(choose(n as u64, w as u64));
        if sum > most {
            break;
        }
        out[w] = true;
    }
    out
}

fn list_jobs(n: usize, listed: &[bool]) -> Vec<Job> {
    let mut out = Vec::new();
    for size in (0..=n).filter(|&w| listed[w]) {
        let sets = choose(n as u64, size as u64);
        let mut first = 0;
        while first < sets {
            let count = (sets - first).min(BUNDLE as u128) as usize;
            out.push(Job::List { size, first, count });
            first += count as u128;
        }
    }
    out
}

/// Weight of each size at a rate, 0 for sizes that are listed.
fn open_weights(n: usize, p: f64, listed: &[bool]) -> Vec<f64> {
    let mut w = binomial_weights(n, p);
    w.iter_mut().zip(listed).filter(|(_, l)| **l).for_each(|(w, _)| *w = 0.0);
    w
}

/// Samples spread over sizes as each rate would, by rounding of running sums.
fn first_round(rates: &[Vec<f64>], samples: u64) -> Vec<(u32, u64)> {
    let mut count = vec![0u64; rates.first().map_or(0, Vec::len)];
    for weights in rates {
        let (mut sum, mut given) = (0.0, 0u64);
        for (w, x) in weights.iter().enumerate() {
            sum += x * samples as f64;
            let due = (sum.round() as u64).saturating_sub(given);
            count[w] += due;
            given += due;
        }
    }
    // A pilot at every size that matters at all, so that rare failures show where they are.
    for (w, c) in count.iter_mut().enumerate() {
        if rates.iter().any(|r| r[w] > 1e-12) {
            *c = (*c).max(samples.min(16));
        }
    }
    count.into_iter().enumerate().filter(|c| c.1 > 0).map(|(w, c)| (w as u32, c)).collect()
}

/// The rest of the samples where they lower the relative errors of failure most: in
/// proportion to the root of Σ over rates of (weight/P)²·f(1−f).
fn second_round(records: &[Record], rates: &[Vec<f64>], rest: u64, exact: bool) -> Vec<(u32, u64)> {
    let hits = |r: &Record| if exact { r.exact } else { r.greedy };
    let guess: Vec<f64> =
        records.iter().map(|r| (hits(r) as f64 + 0.5) / (r.trials as f64 + 1.0)).collect();
    let mut share = vec![0.0; records.len()];
    for weights in rates {
        let fails: f64 = weights.iter().zip(&guess).map(|(w, f)| w * f).sum();
        let rare = fails.min(1.0 - fails).max(1e-300);
        for (w, s) in share.iter_mut().enumerate() {
            *s += (weights[w] / rare).powi(2) * guess[w] * (1.0 - guess[w]);
        }
    }
    let share: Vec<f64> = share.into_iter().map(f64::sqrt).collect();
    let sum: f64 = share.iter().sum();
    if sum <= 0.0 {
        return Vec::new();
    }
    let (mut running, mut given) = (0.0, 0u64);
    let mut out = Vec::new();
    for (w, s) in share.iter().enumerate() {
        running += s / sum * rest as f64;
        let due = (running.round() as u64).saturating_sub(given);
        given += due;
        if due > 0 {
            out.push((w as u32, due));
        }
    }
    out
}

fn draw_jobs(plan: &[(u32, u64)]) -> impl Iterator<Item = Job> + use<> {
    let mut flat: Vec<Vec<u32>> = Vec::new();
    let mut now: Vec<u32> = Vec::with_capacity(BUNDLE);
    for &(size, count) in plan {
        for _ in 0..count {
            now.push(size);
            if now.len() == BUNDLE {
                flat.push(std::mem::replace(&mut now, Vec::with_capacity(BUNDLE)));
            }
        }
    }
    if !now.is_empty() {
        flat.push(now);
    }
    flat.into_iter().map(|sizes| Job::Draw { sizes })
}

/// Does the jobs that are not done yet; `before` jobs precede them. False where the watch
/// stopped it.
#[allow(clippy::too_many_arguments)]
fn carry_out(
    code: &Code<'_>,
    request: &Request,
    exact: bool,
    jobs: &[Job],
    before: u64,
    total: u64,
    work: &mut Work,
    watch: &dyn Watch,
    keep: &mut dyn FnMut(&Work),
) -> bool {
    const STRETCH: usize = 64;
    let done = work.bundles.saturating_sub(before).min(jobs.len() as u64) as usize;
    let bank = || Bank {
        patterns: Patterns::new(code.boundary()),
        bench: code.greedy().bench(),
        held: if exact { code.held() } else { Vec::new() },
    };
    for (s, stretch) in jobs[done..].chunks(STRETCH).enumerate() {
        if watch.stop() {
            return false;
        }
        let first = before + (done + s * STRETCH) as u64;
        let parts: Vec<Vec<(usize, Record)>> = stretch
            .par_iter()
            .enumerate()
            .map_init(bank, |bank, (i, job)| judge(code, request, job, first + i as u64, bank))
            .collect();
        for (size, part) in parts.iter().flatten() {
            work.records[*size].add(part);
        }
        work.bundles = first + stretch.len() as u64;
        watch.tell(News::Progress { done: work.bundles, total });
        keep(work);
    }
    true
}

/// Judges the patterns of one job.
fn judge<'c>(
    code: &'c Code<'_>,
    request: &Request,
    job: &Job,
    bundle: u64,
    bank: &mut Bank<'c>,
) -> Vec<(usize, Record)> {
    let sizes: Vec<u32> = match job {
        Job::List { size, first, count } => {
            bank.patterns.list(*size, *first, *count);
            vec![*size as u32; *count]
        }
        Job::Draw { sizes } => {
            bank.patterns.draw(sizes, &mut generator(request.seed, bundle));
            sizes.clone()
        }
    };
    code.greedy().recover(&mut bank.bench, bank.patterns.erased());
    let mut lost_legs = vec![0u32; sizes.len()];
    match request.target {
        Target::Leg(k) => {
            let lost = code.greedy().lost(&bank.bench, k);
            for (i, l) in lost_legs.iter_mut().enumerate() {
                *l = (lost[i / 64] >> (i % 64) & 1) as u32;
            }
        }
        Target::Every => {
            for k in 0..code.bulk() {
                let lost = code.greedy().lost(&bank.bench, k);
                for (word, mut bits) in lost.into_iter().enumerate() {
                    while bits != 0 {
                        let i = word * 64 + bits.trailing_zeros() as usize;
                        if let Some(l) = lost_legs.get_mut(i) {
                            *l += 1;
                        }
                        bits &= bits - 1;
                    }
                }
            }
        }
    }
    let mut out: Vec<(usize, Record)> = Vec::new();
    for (i, &size) in sizes.iter().enumerate() {
        let lost = lost_legs[i];
        let mut r = Record { trials: 1, greedy: u64::from(lost > 0), ..Record::default() };
        if request.target == Target::Every {
            r.greedy_legs = u64::from(lost);
        }
        if lost > 0 && !bank.held.is_empty() {
            judge_exactly(code, request.target, bank, i, &mut r);
        }
        match out.last_mut() {
            Some((s, sum)) if *s == size as usize => sum.add(&r),
            _ => out.push((size as usize, r)),
        }
    }
    out
}

fn judge_exactly(
    code: &Code<'_>,
    target: Target,
    bank: &mut Bank<'_>,
    pattern: usize,
    r: &mut Record,
) {
    for held in &mut bank.held {
        held.clear();
        for leg in bank.patterns.legs_of(pattern) {
            held.add(leg);
        }
    }
    let touched = |k: usize| bank.held.iter().any(|h| h.touches(k));
    match target {
        Target::Leg(k) => r.exact = u64::from(touched(k)),
        Target::Every => {
            r.operators = bank.held.iter().map(|h| h.dimension() as u64).sum();
            if r.operators > 0 {
                r.exact_legs = (0..code.bulk()).filter(|&k| touched(k)).count() as u64;
            }
            r.exact = u64::from(r.exact_legs > 0);
        }
    }
}

/// Names network and request, so that saved work is taken up by the same question only.
fn fingerprint(code: &Code<'_>, request: &Request, exact: bool) -> String {
    let net = code.network();
    let mut hash = Sha256::new();
    for t in net.tensor_ids() {
        hash.update((net.block_number(t) as u64).to_le_bytes());
        for l in net.legs(t) {
            hash.update(l.number().to_le_bytes());
        }
        hash.update([0xff; 4]);
    }
    for b in net.blocks() {
        hash.update(format!("{}{:?}{:?}{:?}", b.name(), b.dims(), b.isometries(), b.stabilizer()));
    }
    hash.update(format!("{:?}{:?}{request:?}{exact}", net.boundary(), net.bulk()));
    hash.finalize().iter().take(12).map(|b| format!("{b:02x}")).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::code::samples::{pentagons, state_of, tiled};
    use crate::entropy::closure::{Front, Side};
    use crate::tiling::Rule;
    use crate::watch::Silent;

    fn survival(code: &Code<'_>, request: &Request) -> Survival {
        run(code, request, None, &Silent, &mut |_| ()).unwrap()
    }

    /// PRL 77, 198 (1996)'s five-qubit code corrects any two erasures and no three.
    #[test]
    fn five_qubit_polynomial() {
        let net = pentagons(0, Rule::Edge);
        let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
        let s = survival(&code, &Request { target: Target::Leg(0), ..Request::default() });
        let counts = vec![0, 0, 0, 10, 5, 1];
        assert_eq!(s.polynomial(), Some((counts.clone(), Some(counts))));
        assert!((s.at(0.5).exact.unwrap().value - 0.5).abs() < 1e-12);
    }

    #[test]
    fn bundles_agree_with_closure_one_by_one() {
        let net = tiled(&[5, 6], false, 2, Rule::Edge);
        let code = Code::of(&net).unwrap();
        let mut patterns = Patterns::new(code.boundary());
        let mut bench = code.greedy().bench();
        for (bundle, p) in [0.1, 0.25, 0.4, 0.6].into_iter().enumerate() {
            patterns.independent(p, &mut generator(11, bundle as u64));
            code.greedy().recover(&mut bench, patterns.erased());
            for pattern in 0..BUNDLE {
                let gone: Vec<usize> = patterns.legs_of(pattern).collect();
                let mut front = Front::new(code.wires(), Side::Region);
                (0..code.boundary())
                    .filter(|l| !gone.contains(l))
                    .for_each(|l| front.learn_open(l));
                let mut owner = vec![None; code.wires().nodes()];
                front.run(&mut owner, &mut Vec::new(), &|_| true);
                for k in 0..code.bulk() {
                    let lost = code.greedy().lost(&bench, k)[pattern / 64] >> (pattern % 64) & 1;
                    assert_eq!(lost == 1, owner[code.tensor_of_bulk(k).index()].is_none());
                }
            }
        }
    }

    /// Cleaning lemma, New J. Phys. 11, 043029 (2009) (from memory): an erased set and its
    /// complement hold 2k operators together, so the mean at p = 1/2 is k.
    #[test]
    fn mean_operators_at_one_half() {
        let net = pentagons(1, Rule::Edge);
        let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
        let s = survival(&code, &Request::default());
        assert!(s.polynomial().is_some());
        assert!((s.at(0.5).operators.unwrap() - 6.0).abs() < 1e-10);
        assert!(s.records.iter().all(|r| r.exact <= r.greedy && r.exact_legs <= r.greedy_legs));
        // [[20,6,3]] of section "holographic codes": no two erasures hurt, some three do.
        assert_eq!((s.records[2].exact, s.records[3].exact > 0), (0, true));
    }

    #[test]
    fn interrupted_work_ends_alike() {
        let net = pentagons(2, Rule::Edge);
        let code = Code::of(&net).unwrap();
        let request = Request {
            samples: 3000,
            seed: 4,
            listed: 100_000,
            target: Target::Leg(0),
            ..Request::default()
        };
        let whole = survival(&code, &request);
        struct Impatient(std::sync::atomic::AtomicU32);
        impl Watch for Impatient {
            fn stop(&self) -> bool {
                self.0.fetch_add(1, std::sync::atomic::Ordering::Relaxed) % 3 == 2
            }
        }
        let watch = Impatient(0.into());
        let mut saved = None;
        let mut stops = 0;
        loop {
            let mut last = None;
            let s = run(&code, &request, saved.take(), &watch, &mut |w| last = Some(w.clone()))
                .unwrap();
            if s.finished {
                assert_eq!(s.records, whole.records);
                break;
            }
            stops += 1;
            saved = last;
        }
        assert!(stops > 2, "{stops}");
        let other = Request { seed: 5, ..request };
        let mut kept = None;
        let _ = run(&code, &other, None, &Silent, &mut |w| kept = Some(w.clone()));
        let clash = run(&code, &Request { seed: 6, ..other }, kept, &Silent, &mut |_| ());
        assert!(matches!(clash, Err(CodeError::OtherWork { .. })));
    }

    #[test]
    fn strata_agree_with_all_sets() {
        let net = pentagons(1, Rule::Edge);
        let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
        let all = survival(&code, &Request { target: Target::Leg(0), ..Request::default() });
        let some = survival(
            &code,
            &Request { target: Target::Leg(0), listed: 50, samples: 4000, ..Request::default() },
        );
        for p in [0.02, 0.1, 0.3, 0.5] {
            let (a, s) = (all.at(p).exact.unwrap(), some.at(p).exact.unwrap());
            assert!((a.high - a.low).abs() < 1e-9);
            // Twice the 95 % interval: missed about once in 10^4.
            let (below, above) = (2.0 * (s.value - s.low), 2.0 * (s.high - s.value));
            assert!(a.value >= s.value - below && a.value <= s.value + above, "{p}: {a:?} {s:?}");
            assert!(p < 0.1 || s.high / s.low < 3.0, "{p}: {s:?}");
        }
    }
}
