//! From the generators of a stabilizer tensor to its table and its entries.

use super::exact::{Exact, gcd};
use super::{Block, BlockError, IsometryTable, PrimePart, Proof, Stabilizer};
use std::sync::Arc;

/// Most non-zero entries a block is expanded to.
pub const MOST_ENTRIES: u64 = 1 << 28;

impl Stabilizer {
    /// Joins parts, primes ascending.
    pub fn new(mut parts: Vec<PrimePart>) -> Self {
        parts.sort_by_key(|p| p.prime);
        Self { parts: parts.into_iter().map(Arc::new).collect() }
    }
    /// Whether the tensor is an isometry from the legs in `mask`, by ranks over every prime.
    pub fn is_isometry(&self, mask: u64) -> bool {
        self.parts.iter().all(|p| p.is_isometry(mask))
    }
    /// The entropy of the legs in `mask` in nats.
    pub fn entropy_nats(&self, mask: u64) -> f64 {
        self.parts.iter().map(|p| p.entropy(mask) as f64 * f64::from(p.prime).ln()).sum()
    }
    /// The table of isometries of a tensor with legs `dims`, by ranks.
    pub fn isometries(&self, dims: &[usize]) -> IsometryTable {
        let legs = dims.len();
        if dims.iter().all(|&d| d == dims[0])
            && first_failure(legs, |m| self.is_isometry(m)).is_none()
        {
            IsometryTable::perfect(legs)
        } else {
            IsometryTable::ask(legs, |m| self.is_isometry(m))
        }
    }
    /// Number of non-zero entries.
    pub fn nonzeros(&self) -> u128 {
        self.parts
            .iter()
            .map(|p| u128::from(p.prime).saturating_pow(p.support() as u32))
            .fold(1, u128::saturating_mul)
    }
    /// The entries, normalised to Σ|entry|² = `norm_squared`; the first one is positive.
    pub fn exact(&self, dims: &[usize], norm_squared: u128) -> Exact {
        let mut strides = vec![1u64; dims.len()];
        for l in (0..dims.len().saturating_sub(1)).rev() {
            strides[l] = strides[l + 1] * dims[l + 1] as u64;
        }
        let mut entries = vec![(0u64, 0u32)];
        let mut root = 1u32;
        // What one unit of this prime's value adds to the leg's index.
        let mut units: Vec<u64> = dims.iter().map(|&d| d as u64).collect();
        for part in &self.parts {
            for (u, &d) in units.iter_mut().zip(&part.digits) {
                *u /= u64::from(part.prime.pow(d));
            }
            let weights: Vec<u64> = units.iter().zip(&strides).map(|(u, s)| u * s).collect();
            let places = part.expand(&weights);
            let order = if part.prime == 2 { 4 } else { part.prime };
            let joint = root / gcd(root, order) * order;
            let mut next = Vec::with_capacity(entries.len() * places.len());
            for &(i, e) in &entries {
                for &(j, t) in &places {
                    next.push((i + j, (e * (joint / root) + t * (joint / order)) % joint));
                }
            }
            entries = next;
            root = joint;
        }
        let count = entries.len() as u128;
        Exact::from_roots(dims.to_vec(), root, (norm_squared, count), entries)
    }
    /// A block of this tensor, which must be perfect.
    ///
    /// # Errors
    /// [`BlockError::ProofFailed`] where it is not; as [`Self::into_block`] otherwise.
    pub(super) fn into_perfect(
        self,
        name: &str,
        legs: usize,
        dimension: usize,
    ) -> Result<Block, BlockError> {
        let norm_squared = (dimension as u128).saturating_pow(legs as u32 / 2);
        let copy = self.clone();
        let block = self.into_block(name, vec![dimension; legs], norm_squared)?;
        if block.isometries().is_perfect() {
            return Ok(block);
        }
        let failure = first_failure(legs, |m| copy.is_isometry(m)).unwrap_or(0);
        Err(BlockError::ProofFailed { family: name.to_owned(), legs: legs_of(failure) })
    }
    /// A block of this tensor, normalised to Σ|entry|² = `norm_squared`, with its table
    /// proven by ranks.
    ///
    /// # Errors
    /// [`BlockError::TooLarge`] where the size of the array overflows.
    pub(super) fn into_block(
        self,
        name: &str,
        dims: Vec<usize>,
        norm_squared: u128,
    ) -> Result<Block, BlockError> {
        let size = dims.iter().try_fold(1u64, |s, &d| s.checked_mul(d as u64));
        if size.is_none_or(|s| s > 1 << 62) {
            return Err(BlockError::TooLarge {
                what: name.to_owned(),
                entries: format!("{dims:?} levels, so up to their product of"),
                limit: 1 << 62,
            });
        }
        let isometries = self.isometries(&dims);
        let nonzeros = self.nonzeros();
        let copy = self.clone();
        let shape = dims.clone();
        Ok(Block::exact_lazy(name, dims, isometries, Some(self), nonzeros, move || {
            copy.exact(&shape, norm_squared)
        })
        .proven(Proof::Ranks))
    }
}

/// The first set of ⌊legs/2⌋ legs for which `isometric` says no; for an even number only the
/// sets with leg 0 are asked, as the complement is equivalent there.
pub(super) fn first_failure(legs: usize, mut isometric: impl FnMut(u64) -> bool) -> Option<u64> {
    halves(legs).find(|&m| !isometric(m))
}

/// The sets of ⌊legs/2⌋ legs, one of each complementary pair for an even number.
pub(super) fn halves(legs: usize) -> impl Iterator<Item = u64> {
    let half = legs / 2;
    let last = if legs >= 64 { 0 } else { 1u64 << legs };
    let mut next = if half == 0 || legs >= 64 { last } else { (1u64 << half) - 1 };
    std::iter::from_fn(move || {
        while next < last {
            let mask = next;
            // The next number with as many ones.
            let low = mask & mask.wrapping_neg();
            let ripple = mask + low;
            next = ripple | (((mask ^ ripple) >> 2) / low);
            if legs % 2 == 1 || mask & 1 == 1 {
                return Some(mask);
            }
        }
        None
    })
}

/// The legs of a mask.
pub(super) fn legs_of(mask: u64) -> Vec<usize> {
    (0..64).filter(|l| mask >> l & 1 == 1).collect()
}
