//! The regions that a study asks about, on a boundary of a given length.

use super::StudyError;
use super::file::{self, Entropies, Intervals};
use crate::network::{Network, Region};
use rand::{Rng, SeedableRng, seq::index};
use rand_chacha::ChaCha8Rng;
use serde::{Deserialize, Serialize};
use std::collections::BTreeSet;

/// Most boundary sites for which every subset is asked.
pub const MOST_SUBSET_SITES: usize = 18;

/// Most regions of one case: every answer stands in the tables and the page.
pub const MOST_REGIONS: u64 = 500_000;

/// Why a region is asked about.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Kind {
    /// An interval of the sweep.
    Interval,
    /// A region by name.
    Named,
    /// A random union of intervals.
    Union,
    /// One of all subsets.
    Subset,
}

impl Kind {
    /// As it is written in tables.
    pub fn word(self) -> &'static str {
        match self {
            Self::Interval => "interval",
            Self::Named => "named",
            Self::Union => "union",
            Self::Subset => "subset",
        }
    }
}

/// A region that is asked about.
#[derive(Debug, Clone, PartialEq)]
pub struct Asked {
    /// Why.
    pub kind: Kind,
    /// Its name, for a named one.
    pub name: Option<String>,
    /// The region.
    pub region: Region,
    /// First site and length, for an interval.
    pub interval: Option<(usize, usize)>,
}

/// All regions of a study on one network, in the order in which they are reported:
/// intervals by length then start, named ones, unions in the order drawn, subsets.
///
/// # Errors
/// [`StudyError::Region`], [`StudyError::Value`].
pub fn all(
    entropies: &Entropies,
    network: &Network,
    case: &str,
    seed: u64,
) -> Result<Vec<Asked>, StudyError> {
    let n = network.boundary().len();
    let wrong = |message: String| StudyError::Region { case: case.to_owned(), message };
    let mut out = Vec::new();
    let every = match entropies.intervals {
        Intervals::Some { every, .. } => every as usize,
        Intervals::Word(_) => 1,
    };
    let lengths = lengths(&entropies.intervals, n).map_err(&wrong)?;
    let starts = n.div_ceil(every) as u64;
    let drawn = entropies.union.iter().fold(0u64, |s, u| s.saturating_add(u.count));
    let total = (lengths.len() as u64).saturating_mul(starts).saturating_add(drawn);
    if total > MOST_REGIONS {
        return Err(wrong(format!(
            "{total} regions are asked about; at most {MOST_REGIONS}: give intervals = {{ lengths = .., every = .. }}"
        )));
    }
    for length in lengths {
        for start in (0..n).step_by(every) {
            out.push(Asked {
                kind: Kind::Interval,
                name: None,
                region: Region::interval(start, length, n),
                interval: Some((start, length)),
            });
        }
    }
    for named in &entropies.region {
        let region = Region::parse(&named.sites, network).map_err(|e| wrong(e.to_string()))?;
        out.push(Asked {
            kind: Kind::Named,
            name: Some(named.name.clone()),
            region,
            interval: None,
        });
    }
    for u in &entropies.union {
        let drawn = unions(n, u.count, &u.parts, u.seed.unwrap_or(seed)).map_err(&wrong)?;
        out.extend(drawn.into_iter().map(|region| Asked {
            kind: Kind::Union,
            name: None,
            region,
            interval: None,
        }));
    }
    if entropies.subsets {
        if n > MOST_SUBSET_SITES {
            return Err(wrong(format!(
                "every subset of {n} boundary sites is too many; at most {MOST_SUBSET_SITES} sites"
            )));
        }
        // A subset and its complement have one entropy where no bulk leg is open, so that
        // the half without the last site would do; all are reported for a plain table.
        for mask in 1u64..(1 << n).max(1) - 1 {
            let sites = (0..n).map(|s| mask >> s & 1 == 1).collect();
            out.push(Asked {
                kind: Kind::Subset,
                name: None,
                region: Region::new(sites, Vec::new()),
                interval: None,
            });
        }
    }
    Ok(out)
}

fn lengths(intervals: &Intervals, n: usize) -> Result<Vec<usize>, String> {
    match intervals {
        Intervals::Word(w) if w == "all" => Ok((1..n).collect()),
        Intervals::Word(_) => Ok(Vec::new()),
        Intervals::Some { lengths: None, .. } => Ok((1..n).collect()),
        Intervals::Some { lengths: Some(v), .. } => {
            let list = file::whole_numbers(v)
                .ok_or_else(|| format!("lengths = {v} is no list of whole numbers"))?;
            if let Some(l) = list.iter().find(|&&l| l == 0 || l >= n as u64) {
                return Err(format!(
                    "an interval of length {l} on a boundary of {n} sites; lengths run from 1 to {}",
                    n.saturating_sub(1)
                ));
            }
            Ok(list.into_iter().map(|l| l as usize).collect())
        }
    }
}

/// `count` different unions of intervals on a boundary of `n` sites.
///
/// Each is drawn so: a number of intervals m from `parts`, each as likely; 2m different cut
/// points among the n gaps between neighbouring sites, every choice as likely; and which of
/// the two unions between them, each as likely. The regions depend on n, the seed, the count
/// and the parts alone, so that they are the same for every dimension.
///
/// # Errors
/// A sentence, where the boundary is too short for so many parts or so many regions.
pub fn unions(n: usize, count: u64, parts: &[u64], seed: u64) -> Result<Vec<Region>, String> {
    if let Some(m) = parts.iter().find(|&&m| 2 * m > n as u64) {
        return Err(format!(
            "{m} separate intervals need a boundary of {} sites; this one has {n}",
            2 * m
        ));
    }
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let mut seen: BTreeSet<Vec<bool>> = BTreeSet::new();
    let mut out = Vec::new();
    let mut misses = 0u64;
    while (out.len() as u64) < count {
        let m = parts[rng.random_range(0..parts.len())] as usize;
        let mut cuts = index::sample(&mut rng, n, 2 * m).into_vec();
        cuts.sort_unstable();
        let flip: bool = rng.random();
        let mut sites = vec![flip; n];
        for pair in cuts.chunks(2) {
            for s in &mut sites[pair[0]..pair[1]] {
                *s = !flip;
            }
        }
        if seen.insert(sites.clone()) {
            out.push(Region::new(sites, Vec::new()));
        } else {
            misses += 1;
            if misses > 1000 + 100 * count {
                return Err(format!(
                    "a boundary of {n} sites has too few unions of {parts:?} intervals to draw {count} different ones"
                ));
            }
        }
    }
    Ok(out)
}

/// Number of maximal runs of sites round the boundary.
pub fn parts(region: &Region) -> usize {
    let f = region.flags();
    let n = f.len();
    if n > 0 && f.iter().all(|&s| s) {
        return 1;
    }
    (0..n).filter(|&s| f[s] && !f[(s + n - 1) % n]).count()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn unions_have_the_asked_parts_and_are_the_same_for_a_seed() {
        let a = unions(20, 200, &[4, 5, 6], 7).unwrap();
        let b = unions(20, 200, &[4, 5, 6], 7).unwrap();
        assert_eq!(a, b);
        assert_ne!(a, unions(20, 200, &[4, 5, 6], 8).unwrap());
        let mut counts = [0; 7];
        for r in &a {
            counts[parts(r)] += 1;
        }
        assert_eq!(counts[4] + counts[5] + counts[6], 200);
        assert!(counts[4..].iter().all(|&c| c > 40), "{counts:?}");
        let different: BTreeSet<_> = a.iter().map(|r| r.flags().to_vec()).collect();
        assert_eq!(different.len(), 200);
    }

    #[test]
    fn a_boundary_too_short_is_refused() {
        assert!(unions(7, 1, &[4], 0).unwrap_err().contains("need a boundary of 8 sites"));
        assert!(unions(2, 3, &[1], 0).unwrap_err().contains("too few"));
        assert_eq!(unions(2, 2, &[1], 0).unwrap().len(), 2);
    }
}
