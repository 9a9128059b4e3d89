//! Failure probabilities from samples that are sorted by their number of erasures.
//!
//! Given that w of n legs are erased, all sets of w are equally likely, whatever the rate p;
//! so P(p) = Σ_w C(n,w) p^w (1−p)^{n−w} f_w with fractions f_w that do not depend on p. One
//! set of samples serves every p, and a rare failure is reached by sampling the w where
//! failures are, not by waiting for them.

use serde::{Deserialize, Serialize};

/// z of a two-sided 95 % interval.
pub const Z95: f64 = 1.959_963_984_540_054;

/// What was seen among erasures of one number of legs.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, Serialize, Deserialize)]
pub struct Tally {
    /// Sets judged.
    pub trials: u64,
    /// Sets on which the event happened.
    pub hits: u64,
    /// Whether the trials are all sets there are, so that the fraction is exact.
    pub complete: bool,
}

impl Tally {
    /// The fraction seen; 0 of 0 is 0.
    pub fn fraction(&self) -> f64 {
        if self.trials == 0 { 0.0 } else { self.hits as f64 / self.trials as f64 }
    }
}

/// A probability with a 95 % interval.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Estimate {
    /// The estimate.
    pub value: f64,
    /// Lower end.
    pub low: f64,
    /// Upper end.
    pub high: f64,
}

/// ln k! for k = 0..=n.
pub(super) fn ln_factorials(n: usize) -> Vec<f64> {
    let mut out = vec![0.0; n + 1];
    for k in 1..=n {
        out[k] = out[k - 1] + (k as f64).ln();
    }
    out
}

/// C(n,w) p^w (1−p)^{n−w} for w = 0..=n.
pub fn binomial_weights(n: usize, p: f64) -> Vec<f64> {
    if p <= 0.0 || p >= 1.0 {
        let mut out = vec![0.0; n + 1];
        out[if p <= 0.0 { 0 } else { n }] = 1.0;
        return out;
    }
    let f = ln_factorials(n);
    let (lp, lq) = (p.ln(), (-p).ln_1p());
    let mut out: Vec<f64> = (0..=n)
        .map(|w| (f[n] - f[w] - f[n - w] + w as f64 * lp + (n - w) as f64 * lq).exp())
        .collect();
    let sum: f64 = out.iter().sum();
    out.iter_mut().for_each(|x| *x /= sum);
    out
}

/// Wilson's score interval for `hits` of `trials`, J. Am. Stat. Assoc. 22, 209 (1927).
/// No trials give 0 to 1.
pub fn wilson(hits: u64, trials: u64, z: f64) -> Estimate {
    if trials == 0 {
        return Estimate { value: 0.0, low: 0.0, high: 1.0 };
    }
    let (n, x) = (trials as f64, hits as f64 / trials as f64);
    let centre = (x + z * z / (2.0 * n)) / (1.0 + z * z / n);
    let half = z / (1.0 + z * z / n) * (x * (1.0 - x) / n + z * z / (4.0 * n * n)).sqrt();
    let low = if hits == 0 { 0.0 } else { (centre - half).max(0.0) };
    let high = if hits == trials { 1.0 } else { (centre + half).min(1.0) };
    Estimate { value: x, low, high }
}

/// The probability of an event at erasure rate p from its tallies at 0..=n erasures.
///
/// The interval is Wilson's, carried over to strata: the set of values P that a score test
/// does not reject, with the fractions that are most likely under P
/// (Stat. Med. 4, 213 (1985)). With one stratum it is Wilson's interval exactly. Strata
/// without trials count as 0 in the value and the lower end, as 1 in the upper end. Cost:
/// O(n) a step of a bisection.
pub fn probability(tallies: &[Tally], p: f64, z: f64) -> Estimate {
    let weights = binomial_weights(tallies.len() - 1, p);
    weighted(tallies, &weights, z)
}

/// Σ weight·fraction with the interval of [`probability`].
pub(super) fn weighted(tallies: &[Tally], weights: &[f64], z: f64) -> Estimate {
    // What weighs less than this beside the heaviest cannot move a double.
    let heaviest = weights.iter().copied().fold(0.0, f64::max);
    let mut fixed = 0.0;
    let mut unknown = 0.0;
    let mut sampled: Vec<(f64, f64, f64)> = Vec::new();
    for (t, &w) in tallies.iter().zip(weights) {
        if w == 0.0 {
            continue;
        }
        if t.complete {
            fixed += w * t.fraction();
        } else if t.trials == 0 || w < 1e-18 * heaviest {
            unknown += w;
        } else {
            sampled.push((w, t.trials as f64, t.hits as f64));
        }
    }
    let seen: f64 = sampled.iter().map(|&(w, n, k)| w * k / n).sum();
    let top: f64 = sampled.iter().map(|&(w, _, _)| w).sum();
    let low = end(&sampled, seen, z, 1.0);
    let high = end(&sampled, seen, z, -1.0);
    Estimate {
        value: (fixed + seen).clamp(0.0, 1.0),
        low: (fixed + low.min(seen)).clamp(0.0, 1.0),
        high: (fixed + high.max(seen).min(top) + unknown).clamp(0.0, 1.0),
    }
}

/// One end of the score interval: the fractions are tilted by a multiplier of this sign
/// (positive tilts them down) until (P − seen)² = z²·Var.
fn end(strata: &[(f64, f64, f64)], seen: f64, z: f64, sign: f64) -> f64 {
    if strata.is_empty() {
        return seen;
    }
    let tilted = |multiplier: f64| {
        let (mut sum, mut variance) = (0.0, 0.0);
        for &(w, n, k) in strata {
            let f = most_likely(n, k, sign * multiplier * w);
            sum += w * f;
            variance += w * w * f * (1.0 - f) / n;
        }
        (sum, variance)
    };
    let beyond = |m: f64| {
        let (sum, variance) = tilted(m);
        (sum - seen) * (sum - seen) > z * z * variance
    };
    // A multiplier far below every n/w changes nothing, one far above tilts all the way.
    let scales = || strata.iter().map(|&(w, n, _)| (n / w).ln());
    let mut near = scales().fold(f64::INFINITY, f64::min) - 60.0;
    let mut far = scales().fold(f64::NEG_INFINITY, f64::max) + 40.0;
    for _ in 0..100 {
        let middle = 0.5 * (near + far);
        if beyond(middle.exp()) {
            far = middle;
        } else {
            near = middle;
        }
    }
    tilted(near.exp()).0
}

/// The f that maximises k ln f + (n−k) ln(1−f) − a·f.
fn most_likely(n: f64, k: f64, a: f64) -> f64 {
    let b = n + a;
    let root = (b * b - 4.0 * a * k).max(0.0).sqrt();
    let f = if b >= 0.0 { 2.0 * k / (b + root) } else { (b - root) / (2.0 * a) };
    if f.is_finite() { f.clamp(0.0, 1.0) } else { 0.0 }
}

/// Variance of the estimate of [`probability`], each fraction drawn half a success and half
/// a failure towards 1/2 so that none counts as certain.
pub(super) fn variance(tallies: &[Tally], weights: &[f64]) -> f64 {
    tallies
        .iter()
        .zip(weights)
        .filter(|(t, _)| !t.complete && t.trials > 0)
        .map(|(t, w)| {
            let n = t.trials as f64;
            let f = (t.hits as f64 + 0.5) / (n + 1.0);
            w * w * f * (1.0 - f) / n
        })
        .sum()
}

/// Where two failure curves cross.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct Crossing {
    /// The rate at which both are equal.
    pub p: f64,
    /// Standard error of that rate.
    pub error: f64,
}

/// The rate between `from` and `to` above which the larger code (`outer`) fails more often
/// than the smaller one and below which it fails less often; `None` where the data show no
/// such change of order.
///
/// Both curves are evaluated from their tallies on a grid and the change of sign that stands
/// out most on both sides is refined by bisection. The error is that of the difference
/// divided by its slope.
pub fn crossing(inner: &[Tally], outer: &[Tally], from: f64, to: f64) -> Option<Crossing> {
    const GRID: usize = 400;
    let difference = |p: f64| {
        let (wi, wo) = (binomial_weights(inner.len() - 1, p), binomial_weights(outer.len() - 1, p));
        let sum =
            |t: &[Tally], w: &[f64]| t.iter().zip(w).map(|(t, w)| w * t.fraction()).sum::<f64>();
        let d = sum(outer, &wo) - sum(inner, &wi);
        (d, (variance(inner, &wi) + variance(outer, &wo)).sqrt())
    };
    let at = |i: usize| from + (to - from) * i as f64 / GRID as f64;
    let grid: Vec<(f64, f64)> = (0..=GRID).map(|i| difference(at(i))).collect();
    // Best significance of "outer better" up to i, and of "outer worse" from i on.
    let z = |(d, s): (f64, f64)| if d == 0.0 { 0.0 } else { d / s.max(1e-300) };
    let mut better = vec![0.0f64; GRID + 1];
    let mut worse = vec![0.0f64; GRID + 1];
    for i in 0..=GRID {
        let before = if i > 0 { better[i - 1] } else { 0.0 };
        better[i] = before.max(-z(grid[i]));
    }
    for i in (0..=GRID).rev() {
        let behind = if i < GRID { worse[i + 1] } else { 0.0 };
        worse[i] = behind.max(z(grid[i]));
    }
    let best = (0..GRID)
        .filter(|&i| grid[i].0 < 0.0 && grid[i + 1].0 >= 0.0)
        .map(|i| (i, better[i].min(worse[i + 1])))
        .filter(|&(_, s)| s > Z95)
        .max_by(|a, b| a.1.total_cmp(&b.1))?;
    let (mut low, mut high) = (at(best.0), at(best.0 + 1));
    for _ in 0..50 {
        let middle = 0.5 * (low + high);
        if difference(middle).0 < 0.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
    let p = 0.5 * (low + high);
    let h = 0.5 * (to - from) / GRID as f64;
    let slope = (difference(p + h).0 - difference(p - h).0) / (2.0 * h);
    Some(Crossing { p, error: difference(p).1 / slope.abs().max(1e-300) })
}

#[cfg(test)]
mod tests {
    use super::*;
    use rand::{Rng, SeedableRng};
    use rand_chacha::ChaCha8Rng;

    #[test]
    fn weights_are_a_distribution_with_the_right_mean() {
        for n in [0usize, 1, 7, 100, 5000] {
            for p in [0.0, 0.003, 0.25, 0.5, 0.97, 1.0] {
                let w = binomial_weights(n, p);
                let mean: f64 = w.iter().enumerate().map(|(k, x)| k as f64 * x).sum();
                assert!((w.iter().sum::<f64>() - 1.0).abs() < 1e-12);
                assert!(
                    (mean - n as f64 * p).abs() < 1e-7 * (1.0 + n as f64),
                    "n {n} p {p}: {mean}"
                );
            }
        }
    }

    /// Values of J. Am. Stat. Assoc. 22, 209 (1927)'s formula worked by hand in exact
    /// arithmetic for 0 of 10, and 3 of 10 at z = 2: (0.3 + 0.2 ± 2·√(0.021 + 0.01))/1.4.
    #[test]
    fn wilson_by_hand() {
        let e = wilson(0, 10, 2.0);
        assert!((e.high - 4.0 / 14.0).abs() < 1e-12 && e.low == 0.0);
        let e = wilson(3, 10, 2.0);
        let half = 2.0 * 0.031f64.sqrt();
        assert!((e.low - (0.5 - half) / 1.4).abs() < 1e-12);
        assert!((e.high - (0.5 + half) / 1.4).abs() < 1e-12);
    }

    #[test]
    fn one_stratum_gives_wilson() {
        for (k, n) in [(0u64, 50u64), (1, 50), (25, 50), (49, 50), (50, 50), (3, 100_000)] {
            let a = weighted(&[Tally { trials: n, hits: k, complete: false }], &[1.0], Z95);
            let b = wilson(k, n, Z95);
            assert!(
                (a.low - b.low).abs() < 1e-9 && (a.high - b.high).abs() < 1e-9,
                "{k}/{n}: {a:?} {b:?}"
            );
        }
    }

    #[test]
    fn intervals_cover() {
        // True fractions over 12 strata; 95 % intervals should miss about 1 time in 20.
        let mut rng = ChaCha8Rng::seed_from_u64(3);
        let n = 11;
        let f: Vec<f64> = (0..=n).map(|w| (w as f64 / n as f64).powi(3)).collect();
        let weights = binomial_weights(n, 0.2);
        let truth: f64 = weights.iter().zip(&f).map(|(w, f)| w * f).sum();
        let mut missed = 0;
        for _ in 0..400 {
            let tallies: Vec<Tally> = f
                .iter()
                .map(|&f| {
                    let hits = (0..60).filter(|_| rng.random::<f64>() < f).count() as u64;
                    Tally { trials: 60, hits, complete: false }
                })
                .collect();
            let e = weighted(&tallies, &weights, Z95);
            if truth < e.low || truth > e.high {
                missed += 1;
            }
        }
        assert!((5..=40).contains(&missed), "{missed} of 400 missed");
    }

    /// Strata of almost no weight once drove the search for the ends past its root, and the
    /// interval came out as 0 to 1.
    #[test]
    fn strata_without_weight_do_not_widen_the_interval() {
        let n = 77;
        let tally = |w: usize| Tally {
            trials: 64,
            hits: if w > 30 {
                64
            } else if w > 12 {
                32
            } else {
                1
            },
            complete: !(4..=73).contains(&w),
        };
        let tallies: Vec<Tally> = (0..=n).map(tally).collect();
        for p in [0.05, 0.1, 0.2, 0.5, 0.95] {
            let e = probability(&tallies, p, Z95);
            assert!(e.low <= e.value && e.value <= e.high, "{p}: {e:?}");
            assert!(e.high - e.low < 0.2, "{p}: {e:?}");
        }
    }

    #[test]
    fn crossing_of_two_concatenation_levels() {
        // Failure of one and of two levels of a code that fails with 3 or more of 5: the
        // exact polynomial 10p³q² + 5p⁴q + p⁵ meets p at 1/2.
        let one: Vec<Tally> =
            [0u64, 1].iter().map(|&h| Tally { trials: 1, hits: h, complete: true }).collect();
        let five: Vec<Tally> = [(1, 0), (5, 0), (10, 0), (10, 10), (5, 5), (1, 1)]
            .iter()
            .map(|&(trials, hits)| Tally { trials, hits, complete: true })
            .collect();
        let c = crossing(&one, &five, 0.05, 0.95).unwrap();
        assert!((c.p - 0.5).abs() < 1e-9 && c.error < 1e-9);
        assert!(crossing(&five, &five, 0.05, 0.95).is_none());
    }
}
