//! How far a tensor is from perfect, in every split, and what it is worth as a gate.

use super::numeric::{admit, largest_part};
use super::spectrum::{Spectrum, spectrum};
use super::{Block, BlockError, Entries, MOST_ENTRIES, SparseEntries};
use crate::linalg::LinalgError;
use crate::tensor::Dense;
use crate::watch::{News, Watch};
use ndarray::ArrayD;
use num_complex::Complex64;
use rayon::prelude::*;
use serde::Serialize;
use std::sync::atomic::{AtomicU64, Ordering};
use thiserror::Error;

/// What a check is asked for.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct CheckRequest {
    /// Largest defect that still counts as isometric.
    pub tolerance: f64,
}

impl Default for CheckRequest {
    fn default() -> Self {
        Self { tolerance: 1e-10 }
    }
}

/// Why a check gave no report.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum CheckError {
    /// The array is no tensor, or too large.
    #[error(transparent)]
    Block(#[from] BlockError),
    /// A decomposition failed its own check.
    #[error("the split with legs {left:?} on the left: {fault}")]
    Linalg {
        /// Legs of the split.
        left: Vec<usize>,
        /// The fault.
        fault: LinalgError,
    },
    /// Too many splits.
    #[error("{legs} legs have more splits than are checked; at most {most} legs are")]
    TooManyLegs {
        /// Legs of the array.
        legs: usize,
        /// Most legs.
        most: usize,
    },
    /// The caller asked to stop.
    #[error("stopped after {done} of {total} splits")]
    Stopped {
        /// Splits finished.
        done: u64,
        /// Splits in all.
        total: u64,
    },
}

/// One split of the legs in two.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Split {
    /// The smaller side (where equal, the side with leg 0): M maps it to the other legs.
    pub left: Vec<usize>,
    /// ‖M†M − 1‖ in the spectral norm, with M scaled to mean diagonal 1.
    pub defect: f64,
    /// −Σ p ln p of the normalised squared singular values.
    pub entropy_nats: f64,
    /// Singular values above 1e-12 of the largest.
    pub rank: usize,
}

/// The verdict on a tensor.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Report {
    /// Number of legs.
    pub legs: usize,
    /// Their dimensions.
    pub dimensions: Vec<usize>,
    /// Whether every split is isometric from its smaller side, within the tolerance.
    pub perfect: bool,
    /// The largest defect of all splits.
    pub largest_defect: f64,
    /// The tolerance of the verdict.
    pub tolerance: f64,
    /// Σ|entry|².
    pub norm_squared: f64,
    /// Number of non-zero entries.
    pub nonzeros: u64,
    /// The largest k such that every set of k legs is maximally mixed.
    pub uniformity: usize,
    /// Every split, by size of its smaller side.
    pub splits: Vec<Split>,
    /// e_p of the gate from legs 2, 3 to legs 0, 1 in units of its greatest value, where
    /// there are four legs of one dimension and the gate is unitary.
    pub entangling_power: Option<f64>,
    /// g_t of that gate: 0 for local gates, 1 for the swap, 1/2 for a perfect one.
    pub gate_typicality: Option<f64>,
    /// For four legs: normalised squared Schmidt values of the cuts 01|23, 02|13 and 03|12.
    pub schmidt: Option<[Vec<f64>; 3]>,
    /// Weight enumerators A_0, A_1, … of the state, for up to eight legs.
    pub enumerator: Option<Vec<f64>>,
}

/// Most legs of a checked array.
pub const MOST_CHECKED_LEGS: usize = 16;

/// Checks a user's array. Sparse arrays cost what their non-zero entries cost.
///
/// # Errors
/// [`CheckError`].
pub fn check_dense(
    name: &str,
    array: &Dense,
    request: &CheckRequest,
    watch: &dyn Watch,
) -> Result<Report, CheckError> {
    admit(name, array)?;
    // Scaled by a power of two, so that squares neither vanish nor overflow.
    let scale = (-largest_part(array).log2().floor()).exp2();
    let scaled = if (1e-100..1e100).contains(&scale) { 1.0 } else { scale };
    let entries = Entries::Dense(Dense::Complex(scale_array(array, scaled))).to_sparse();
    let mut report = check_entries(&entries, request, watch)?;
    report.norm_squared /= scaled * scaled;
    Ok(report)
}

fn scale_array(array: &Dense, scale: f64) -> ArrayD<Complex64> {
    array.to_complex().mapv_into(|v| v * scale)
}

/// Checks a block by its numbers, whatever its table says.
///
/// # Errors
/// [`CheckError`].
pub fn check_block(
    block: &Block,
    request: &CheckRequest,
    watch: &dyn Watch,
) -> Result<Report, CheckError> {
    if block.nonzeros() > u128::from(MOST_ENTRIES) {
        return Err(CheckError::Block(BlockError::TooLarge {
            what: block.name().to_owned(),
            entries: block.nonzeros().to_string(),
            limit: MOST_ENTRIES,
        }));
    }
    check_entries(&block.entries().to_sparse(), request, watch)
}

/// Checks non-zero entries.
///
/// # Errors
/// [`CheckError`].
pub fn check_entries(
    entries: &SparseEntries,
    request: &CheckRequest,
    watch: &dyn Watch,
) -> Result<Report, CheckError> {
    let dims = entries.dims().to_vec();
    let n = dims.len();
    if n > MOST_CHECKED_LEGS {
        return Err(CheckError::TooManyLegs { legs: n, most: MOST_CHECKED_LEGS });
    }
    let masks = smaller_sides(&dims);
    let done = AtomicU64::new(0);
    let total = masks.len() as u64;
    watch.tell(News::Stage("splits"));
    let spectra: Vec<Result<Spectrum, CheckError>> = masks
        .par_iter()
        .map(|&mask| {
            if watch.stop() {
                return Err(CheckError::Stopped { done: done.load(Ordering::Relaxed), total });
            }
            let found = spectrum(entries, mask)
                .map_err(|fault| CheckError::Linalg { left: legs_of(n, mask), fault });
            let done = done.fetch_add(1, Ordering::Relaxed) + 1;
            watch.tell(News::Progress { done, total });
            found
        })
        .collect();
    let spectra: Vec<Spectrum> = spectra.into_iter().collect::<Result<_, _>>()?;
    let splits: Vec<Split> = masks
        .iter()
        .zip(&spectra)
        .map(|(&mask, s)| Split {
            left: legs_of(n, mask),
            defect: s.defect(),
            entropy_nats: s.entropy(),
            rank: s.rank(),
        })
        .collect();
    let largest_defect = splits.iter().map(|s| s.defect).fold(0.0, f64::max);
    let of = |mask: u64| -> &Spectrum {
        let all = (1u64 << n) - 1;
        let at = masks.iter().position(|&m| m == mask || m == all & !mask);
        &spectra[at.expect("every split is in the list")]
    };
    let trivial = |mask: u64| mask == 0 || mask == (1u64 << n) - 1;
    let mixed = |mask: u64| {
        !trivial(mask) && {
            // The complement's spectrum is the same; its levels are not.
            let s = of(mask);
            let columns: f64 = level(&dims, mask);
            Spectrum { weights: s.weights.clone(), columns }.defect() <= request.tolerance
        }
    };
    let uniformity = (1..=n / 2)
        .take_while(|&k| (1..1u64 << n).filter(|m| m.count_ones() as usize == k).all(mixed))
        .last()
        .unwrap_or(0);
    let one_dimension = dims.iter().all(|&d| d == dims[0]);
    let mut report = Report {
        legs: n,
        perfect: largest_defect <= request.tolerance,
        largest_defect,
        tolerance: request.tolerance,
        norm_squared: entries.value().iter().map(Complex64::norm_sqr).sum(),
        nonzeros: entries.index().len() as u64,
        uniformity,
        splits,
        entangling_power: None,
        gate_typicality: None,
        schmidt: None,
        enumerator: None,
        dimensions: dims.clone(),
    };
    if n == 4 {
        let cuts = [0b0011, 0b0101, 0b1001].map(of);
        report.schmidt = Some(cuts.map(|s| s.weights.clone()));
        if one_dimension && dims[0] > 1 && cuts[0].defect() <= request.tolerance {
            let (power, typicality) = gate(dims[0], cuts[1].purity(), cuts[2].purity());
            report.entangling_power = Some(power);
            report.gate_typicality = Some(typicality);
        }
    }
    if n <= 8 {
        report.enumerator =
            Some(enumerator(&dims, |mask| if trivial(mask) { 1.0 } else { of(mask).purity() }, n));
    }
    Ok(report)
}

/// (e_p, g_t) of a unitary gate on two D-level systems from the purities of its cuts 02|13
/// and 03|12: with E(U) = 1 − purity(02|13), E(US) = 1 − purity(03|12) and
/// E(S) = 1 − 1/D², e_p = (E(U) + E(US))/E(S) − 1 and g_t = (E(U) − E(US) + E(S))/(2E(S))
/// (Phys. Rev. A 62, 030301 (2000); Phys. Rev. A 95, 040302 (2017)).
pub fn gate(dimension: usize, purity_realigned: f64, purity_swapped: f64) -> (f64, f64) {
    let d = dimension as f64;
    let swap = 1.0 - 1.0 / (d * d);
    let (u, us) = (1.0 - purity_realigned, 1.0 - purity_swapped);
    ((u + us) / swap - 1.0, (u - us + swap) / (2.0 * swap))
}

/// A_j = Σ over operators of weight j of |⟨E⟩|², from the purities of all sets of legs:
/// Π_{l∈S} D_l · purity(S) = Σ_{T⊆S} a_T, inverted and summed by size
/// (Phys. Rev. Lett. 78, 1600 (1997), from memory).
fn enumerator(dims: &[usize], purity: impl Fn(u64) -> f64, n: usize) -> Vec<f64> {
    let mut a: Vec<f64> = (0..1u64 << n).map(|s| level(dims, s) * purity(s)).collect();
    for l in 0..n {
        for s in 0..1usize << n {
            if s >> l & 1 == 1 {
                a[s] -= a[s ^ (1 << l)];
            }
        }
    }
    let mut out = vec![0.0; n + 1];
    for (s, v) in a.into_iter().enumerate() {
        out[s.count_ones() as usize] += v;
    }
    out
}

fn level(dims: &[usize], mask: u64) -> f64 {
    dims.iter().enumerate().filter(|(l, _)| mask >> l & 1 == 1).map(|(_, &d)| d as f64).product()
}

/// One side of every split: the one with fewer levels, where equal the one with leg 0; by
/// number of legs, then by legs.
fn smaller_sides(dims: &[usize]) -> Vec<u64> {
    let n = dims.len();
    let all = (1u64 << n) - 1;
    let mut out: Vec<u64> = (1..all)
        .filter(|m| m & 1 == 1)
        .map(|m| {
            let (a, b) = (level(dims, m), level(dims, all & !m));
            let fewer = m.count_ones() as usize * 2 <= n;
            if a < b || (a == b && fewer) { m } else { all & !m }
        })
        .collect();
    out.sort_by_key(|&m| (m.count_ones(), legs_of(n, m)));
    out
}

fn legs_of(n: usize, mask: u64) -> Vec<usize> {
    (0..n).filter(|l| mask >> l & 1 == 1).collect()
}
