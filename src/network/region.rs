//! Parts of the boundary (and bulk legs that join them), as the user writes them.

use super::{BoundarySite, Network};
use crate::tensor::Label;
use thiserror::Error;

/// What can be wrong with a region.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum RegionError {
    /// A site past the end.
    #[error("region {region:?} names site {site}, but the boundary has {sites} sites (0 to {})", .sites.saturating_sub(1))]
    PastTheEnd {
        /// The region as written.
        region: String,
        /// The site.
        site: u64,
        /// Boundary legs there are.
        sites: usize,
    },
    /// A part that is neither a site, nor a range, nor a bulk leg's label.
    #[error(
        "region {region:?}: {part:?} is neither a site, nor a range a..b, nor a bulk leg's label"
    )]
    Unreadable {
        /// The region as written.
        region: String,
        /// The part.
        part: String,
    },
}

/// A set of boundary legs, joined by any bulk legs that it names.
///
/// Written `0..5`, `3`, `0..3,7..9`, `70..4` (wraps past the last site), `0..5,k0`. Ranges
/// are half open.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Region {
    sites: Vec<bool>,
    bulk: Vec<Label>,
}

impl Region {
    /// Reads a region of this network's boundary. `a..a` is empty. The empty text is the
    /// empty region.
    ///
    /// # Errors
    /// [`RegionError`].
    pub fn parse(text: &str, network: &Network) -> Result<Self, RegionError> {
        let n = network.boundary().len();
        let mut sites = vec![false; n];
        let mut bulk = Vec::new();
        let past = |site: u64| RegionError::PastTheEnd { region: text.into(), site, sites: n };
        for part in text.split(',').map(str::trim).filter(|p| !p.is_empty()) {
            let bad = || RegionError::Unreadable { region: text.into(), part: part.into() };
            if let Some((a, b)) = part.split_once("..") {
                let a: u64 = a.trim().parse().map_err(|_| bad())?;
                let b: u64 = b.trim().parse().map_err(|_| bad())?;
                if a >= n as u64 && a != b {
                    return Err(past(a));
                }
                if b > n as u64 {
                    return Err(past(b));
                }
                let mut at = a as usize;
                while at != b as usize {
                    if at == n {
                        at = 0;
                        if at == b as usize {
                            break;
                        }
                    }
                    sites[at] = true;
                    at += 1;
                }
            } else if let Ok(site) = part.parse::<u64>() {
                if site >= n as u64 {
                    return Err(past(site));
                }
                sites[site as usize] = true;
            } else {
                let label = network
                    .bulk()
                    .iter()
                    .copied()
                    .find(|&l| network.label_name(l) == part)
                    .ok_or_else(bad)?;
                if !bulk.contains(&label) {
                    bulk.push(label);
                }
            }
        }
        Ok(Self { sites, bulk })
    }
    /// The region that holds these sites of a boundary of `sites.len()` legs, and these bulk legs.
    pub fn new(sites: Vec<bool>, bulk: Vec<Label>) -> Self {
        Self { sites, bulk }
    }
    /// The interval of `length` sites from `start` on, round a boundary of `boundary` sites.
    pub fn interval(start: usize, length: usize, boundary: usize) -> Self {
        let mut sites = vec![false; boundary];
        for k in 0..length.min(boundary) {
            sites[(start + k) % boundary] = true;
        }
        Self { sites, bulk: Vec::new() }
    }
    /// One flag a boundary site.
    pub fn flags(&self) -> &[bool] {
        &self.sites
    }
    /// Whether a site belongs to it.
    pub fn holds(&self, site: BoundarySite) -> bool {
        self.sites[site.index()]
    }
    /// Bulk legs that joined it.
    pub fn bulk(&self) -> &[Label] {
        &self.bulk
    }
    /// Number of boundary sites.
    pub fn sites(&self) -> usize {
        self.sites.iter().filter(|&&s| s).count()
    }
    /// The complement's boundary sites; bulk legs are not taken over.
    pub fn complement(&self) -> Self {
        Self { sites: self.sites.iter().map(|s| !s).collect(), bulk: Vec::new() }
    }
    /// As the user would write it: maximal ranges from the lowest start on, one that wraps last.
    pub fn show(&self, network: &Network) -> String {
        let n = self.sites.len();
        let mut parts: Vec<String> = Vec::new();
        if n > 0 && self.sites.iter().all(|&s| s) {
            parts.push(format!("0..{n}"));
        } else {
            for a in 0..n {
                if !self.sites[a] || self.sites[(a + n - 1) % n] {
                    continue;
                }
                let mut b = a;
                while self.sites[b % n] {
                    b += 1;
                }
                if b == a + 1 {
                    parts.push(a.to_string());
                } else if b > n {
                    parts.push(format!("{a}..{}", b - n));
                } else {
                    parts.push(format!("{a}..{b}"));
                }
            }
        }
        parts.extend(self.bulk.iter().map(|&l| network.label_name(l).to_owned()));
        parts.join(",")
    }
}
