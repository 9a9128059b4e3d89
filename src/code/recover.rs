//! Which bulk legs can be recovered from a boundary region.
//!
//! Recovery is that of a subsystem: a leg is recoverable from R when its reference is
//! maximally entangled with R alone, I(R : leg) = 2·ln(dim), while all other bulk legs stay
//! with references that nobody has. A leg cannot be recovered from R and from the rest of the
//! boundary both (no cloning); it may be recoverable from neither.

use super::{Code, CodeError};
use crate::entropy::{Asker, Evidence, Request};
use crate::network::Region;
use crate::watch::Watch;

/// Who can recover what.
#[derive(Debug, Clone, PartialEq)]
pub struct Recovery {
    /// Bulk legs recoverable from the region.
    pub recoverable: Vec<usize>,
    /// Bulk legs recoverable from the complement.
    pub from_complement: Vec<usize>,
    /// Bulk legs recoverable from neither.
    pub neither: Vec<usize>,
    /// Bulk legs that what could be afforded leaves open.
    pub undecided: Vec<usize>,
    /// Bulk legs that closure recovers from the region: a part of `recoverable`.
    pub greedy: Vec<usize>,
    /// Bulk legs that closure recovers from the complement.
    pub greedy_complement: Vec<usize>,
    /// Whether both greedy lists are all there is; `None` where undecided.
    pub greedy_is_exact: Option<bool>,
    /// How the lists are known: `geometry` where closure decided every leg, `finite-field`,
    /// `contraction`, or `bounds` where legs are undecided.
    pub evidence: Evidence,
}

/// Judges a region (its boundary sites; bulk legs in it are not looked at).
///
/// Cost: closure is linear in legs; ranks are one elimination of twice the region's digits
/// over GF(p); otherwise four entropies a leg that closure left open, within `budget`.
///
/// # Errors
/// Those of the entropies asked.
pub fn judge(
    code: &Code<'_>,
    region: &Region,
    budget: &Request,
    watch: &dyn Watch,
) -> Result<Recovery, CodeError> {
    let k = code.bulk();
    let inside = region.flags();
    let greedy = code.wedge(|s| inside[s]);
    let greedy_complement = code.wedge(|s| !inside[s]);
    let list = |flags: &[bool]| (0..k).filter(|&b| flags[b]).collect::<Vec<_>>();
    let mut mine = greedy.clone();
    let mut theirs = greedy_complement.clone();
    let mut open = vec![false; k];
    let decided = (0..k).all(|b| mine[b] || theirs[b]);
    let mut evidence = Evidence::Geometry;
    if !decided && code.is_stabilizer() {
        evidence = Evidence::FiniteField;
        // A leg is recoverable from one side when the other holds nothing that acts on it.
        mine = code.untouched(|s| !inside[s]);
        theirs = code.untouched(|s| inside[s]);
    } else if !decided {
        evidence = Evidence::Contraction;
        let asker = Asker::new(code.wires(), budget.clone());
        for b in (0..k).filter(|&b| !greedy[b] && !greedy_complement[b]) {
            let from_region = determines(code, &asker, region, b, watch)?;
            let from_rest = match from_region {
                Some(true) => Some(false),
                _ => determines(code, &asker, &region.complement(), b, watch)?,
            };
            mine[b] = from_region == Some(true);
            theirs[b] = from_rest == Some(true);
            open[b] = !mine[b] && !theirs[b] && (from_region.is_none() || from_rest.is_none());
        }
        if open.contains(&true) {
            evidence = Evidence::Bounds;
        }
    }
    let neither = (0..k).filter(|&b| !mine[b] && !theirs[b] && !open[b]).collect();
    let greedy_is_exact =
        (!open.contains(&true)).then(|| greedy == mine && greedy_complement == theirs);
    Ok(Recovery {
        recoverable: list(&mine),
        from_complement: list(&theirs),
        neither,
        undecided: list(&open),
        greedy: list(&greedy),
        greedy_complement: list(&greedy_complement),
        greedy_is_exact,
        evidence,
    })
}

/// Whether S(R ∪ leg) = S(R) − ln(dim); `None` where bounds leave it open.
fn determines(
    code: &Code<'_>,
    asker: &Asker<'_, '_>,
    region: &Region,
    leg: usize,
    watch: &dyn Watch,
) -> Result<Option<bool>, CodeError> {
    const TOLERANCE: f64 = 1e-7;
    let label = code.network().bulk()[leg];
    let ln = (code.network().dim(label) as f64).ln();
    let sites = Region::new(region.flags().to_vec(), Vec::new());
    let joined = Region::new(region.flags().to_vec(), vec![label]);
    let (a, b) = (asker.ask(&sites, watch)?, asker.ask(&joined, watch)?);
    // Least and largest value of S(R) − S(R ∪ leg), which is at most ln(dim).
    let (low, high) = (a.lower - b.upper, a.upper - b.lower);
    Ok(if low > ln - TOLERANCE {
        Some(true)
    } else if high < ln - TOLERANCE {
        Some(false)
    } else {
        None
    })
}

impl Code<'_> {
    /// One flag a bulk leg: whether closure recovers it from the boundary sites in `known`.
    pub fn wedge(&self, known: impl Fn(usize) -> bool) -> Vec<bool> {
        let mut bench = self.greedy().bench();
        let erased: Vec<_> =
            (0..self.boundary()).map(|s| if known(s) { [0; 4] } else { [!0; 4] }).collect();
        self.greedy().recover(&mut bench, &erased);
        (0..self.bulk()).map(|b| self.greedy().lost(&bench, b)[0] & 1 == 0).collect()
    }
    /// One flag a bulk leg: whether the sites in `held` hold no operator that acts on it.
    pub(super) fn untouched(&self, held: impl Fn(usize) -> bool) -> Vec<bool> {
        let mut touched = vec![false; self.bulk()];
        for mut h in self.held() {
            (0..self.boundary()).filter(|&s| held(s)).for_each(|s| h.add(s));
            h.touched_since(0, &mut touched);
        }
        touched.into_iter().map(|t| !t).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::code::reach::Reach;
    use crate::code::samples::{pentagons, state_of};
    use crate::tiling::Rule;
    use crate::watch::Silent;
    use rand::{Rng, SeedableRng};
    use rand_chacha::ChaCha8Rng;

    #[test]
    fn greedy_is_within_exact_and_nothing_is_cloned() {
        let mut rng = ChaCha8Rng::seed_from_u64(2);
        for (rings, rule) in [(1, Rule::Vertex), (2, Rule::Edge)] {
            let net = pentagons(rings, rule);
            let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
            let mut differs = false;
            for _ in 0..200 {
                let p: f64 = rng.random_range(0.3..0.8);
                let sites = (0..code.boundary()).map(|_| rng.random::<f64>() < p).collect();
                let region = Region::new(sites, Vec::new());
                let r = judge(&code, &region, &Request::default(), &Silent).unwrap();
                assert!(r.greedy.iter().all(|b| r.recoverable.contains(b)));
                assert!(r.greedy_complement.iter().all(|b| r.from_complement.contains(b)));
                assert!(!r.recoverable.iter().any(|b| r.from_complement.contains(b)));
                let all = [&r.recoverable, &r.from_complement, &r.neither];
                assert_eq!(all.iter().map(|l| l.len()).sum::<usize>(), code.bulk());
                differs |= r.greedy_is_exact == Some(false);
            }
            assert!(differs, "some region must show that greedy is not all");
        }
    }

    #[test]
    fn intervals_agree_with_regions() {
        let net = pentagons(1, Rule::Edge);
        let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
        let (greedy, exact) = (Reach::greedy(&code, &Silent), Reach::exact(&code, &Silent));
        for start in 0..20 {
            for length in 0..=20 {
                let region = Region::interval(start, length, 20);
                let r = judge(&code, &region, &Request::default(), &Silent).unwrap();
                for b in 0..code.bulk() {
                    let by = |reach: &Reach| reach.length(start, b).is_some_and(|l| l <= length);
                    assert_eq!(by(&exact), r.recoverable.contains(&b));
                    assert_eq!(by(&greedy), r.greedy.contains(&b));
                }
            }
        }
        let bursts = exact.bursts(crate::code::erasure::Target::Leg(code.centre()));
        assert_eq!((bursts.losing[0], bursts.losing[20]), (0, 20));
    }
}
