//! The Schmidt spectrum of one split of a block, from its non-zero entries alone.

use super::SparseEntries;
use crate::linalg::{LinalgError, qr, singular_values};
use ndarray::{Array2, Axis, concatenate};
use num_complex::Complex64;

/// Singular values below this times the largest count as zero.
pub(super) const RANK_CUT: f64 = 1e-12;

/// Squared singular values of the matrix from the legs in the mask (columns) to the rest
/// (rows), scaled to sum 1 and sorted descending; zeros are left out but for `columns`.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Spectrum {
    pub(super) weights: Vec<f64>,
    /// Levels of the legs in the mask.
    pub(super) columns: f64,
}

impl Spectrum {
    /// ‖M†M − 1‖ in the spectral norm, M scaled so that M†M has mean diagonal 1.
    pub(super) fn defect(&self) -> f64 {
        let c = self.columns;
        let worst = self.weights.iter().map(|p| (p * c - 1.0).abs()).fold(0.0, f64::max);
        if (self.weights.len() as f64) < c { worst.max(1.0) } else { worst }
    }
    pub(super) fn rank(&self) -> usize {
        let cut = self.weights.first().map_or(0.0, |p| p * RANK_CUT * RANK_CUT);
        self.weights.iter().filter(|&&p| p > cut).count()
    }
    /// −Σ p ln p.
    pub(super) fn entropy(&self) -> f64 {
        let sum: f64 = self.weights.iter().filter(|&&p| p > 0.0).map(|p| p * p.ln()).sum();
        if sum < 0.0 { -sum } else { 0.0 }
    }
    /// Σ p².
    pub(super) fn purity(&self) -> f64 {
        self.weights.iter().map(|p| p * p).sum()
    }
}

/// The spectrum of one split.
///
/// The matrix is split into independent blocks by its zeros first, so that a permutation
/// costs O(entries·log entries) and nothing dense larger than a block is built.
pub(super) fn spectrum(entries: &SparseEntries, mask: u64) -> Result<Spectrum, LinalgError> {
    let dims = entries.dims();
    let columns: f64 = dims
        .iter()
        .enumerate()
        .filter(|(l, _)| mask >> l & 1 == 1)
        .map(|(_, &d)| d as f64)
        .product();
    let mut cells: Vec<(u64, u64, Complex64)> = entries
        .index()
        .iter()
        .zip(entries.value())
        .map(|(&i, &v)| {
            let (row, col) = split_index(dims, mask, i);
            (row, col, v)
        })
        .collect();
    let rows = renumber(&mut cells, |c| &mut c.0);
    let cols = renumber(&mut cells, |c| &mut c.1);
    let mut parent: Vec<u32> = (0..(rows + cols) as u32).collect();
    for &(r, c, _) in &cells {
        let (a, b) = (find(&mut parent, r as u32), find(&mut parent, (rows as u64 + c) as u32));
        parent[a.max(b) as usize] = a.min(b);
    }
    let mut patch: Vec<(u32, u64, u64, Complex64)> =
        cells.iter().map(|&(r, c, v)| (find(&mut parent, r as u32), r, c, v)).collect();
    patch.sort_by_key(|p| (p.0, p.1, p.2));
    let mut weights = Vec::new();
    for piece in patch.chunk_by(|a, b| a.0 == b.0) {
        if let [(_, _, _, v)] = piece {
            weights.push(v.norm_sqr());
        } else {
            weights.extend(values(piece)?.into_iter().map(|s| s * s));
        }
    }
    let sum: f64 = weights.iter().sum();
    weights.iter_mut().for_each(|w| *w /= sum);
    weights.sort_by(|a, b| b.total_cmp(a));
    Ok(Spectrum { weights, columns })
}

/// Singular values of one connected block.
fn values(piece: &[(u32, u64, u64, Complex64)]) -> Result<Vec<f64>, LinalgError> {
    let mut cells: Vec<(u64, u64, Complex64)> =
        piece.iter().map(|&(_, r, c, v)| (r, c, v)).collect();
    let rows = renumber(&mut cells, |c| &mut c.0);
    let cols = renumber(&mut cells, |c| &mut c.1);
    // The short side becomes the columns, which changes no singular value.
    let tall = rows >= cols;
    let (m, n) = if tall { (rows, cols) } else { (cols, rows) };
    let mut placed: Vec<(usize, usize, Complex64)> = cells
        .iter()
        .map(
            |&(r, c, v)| {
                if tall { (r as usize, c as usize, v) } else { (c as usize, r as usize, v) }
            },
        )
        .collect();
    placed.sort_by_key(|p| (p.0, p.1));
    let fill = |from: usize, to: usize| {
        let mut a = Array2::<Complex64>::zeros((to - from, n));
        let start = placed.partition_point(|p| p.0 < from);
        for &(r, c, v) in placed[start..].iter().take_while(|p| p.0 < to) {
            a[[r - from, c]] = v;
        }
        a
    };
    // A very tall matrix is folded into its triangular factor piece by piece.
    let step = (4 * n).max(2048);
    let mut a = fill(0, m.min(step));
    let mut at = a.nrows();
    while at < m {
        let end = m.min(at + step);
        let r = qr(&a.view())?.r;
        a = concatenate(Axis(0), &[r.view(), fill(at, end).view()]).expect("one width");
        at = end;
    }
    singular_values(&a.view())
}

/// (row, column) of a place: the legs outside and inside the mask, row-major.
fn split_index(dims: &[usize], mask: u64, index: u64) -> (u64, u64) {
    let (mut rest, mut row, mut col) = (index, 0, 0);
    let (mut row_unit, mut col_unit) = (1, 1);
    for l in (0..dims.len()).rev() {
        let d = dims[l] as u64;
        let v = rest % d;
        rest /= d;
        if mask >> l & 1 == 1 {
            col += v * col_unit;
            col_unit *= d;
        } else {
            row += v * row_unit;
            row_unit *= d;
        }
    }
    (row, col)
}

/// Replaces the numbers in use by 0, 1, 2, … in order; returns how many there are.
fn renumber<T>(cells: &mut [T], part: impl Fn(&mut T) -> &mut u64) -> usize {
    let mut used: Vec<u64> = cells.iter_mut().map(|c| *part(c)).collect();
    used.sort_unstable();
    used.dedup();
    for c in cells {
        let v = part(c);
        *v = used.binary_search(v).expect("collected above") as u64;
    }
    used.len()
}

fn find(parent: &mut [u32], x: u32) -> u32 {
    let mut root = x;
    while parent[root as usize] != root {
        root = parent[root as usize];
    }
    let mut at = x;
    while parent[at as usize] != root {
        at = std::mem::replace(&mut parent[at as usize], root);
    }
    root
}
