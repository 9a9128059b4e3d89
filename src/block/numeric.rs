//! The table of isometries of anyone's array, in floating point.

use super::{Block, BlockError, Entries, IsometryTable};
use crate::tensor::Dense;
use ndarray::{Array2, ArrayD, ArrayView2};
use num_complex::Complex64;

/// Multiply-adds spent on one table; sets of legs beyond are answered `false`.
const MOST_WORK: u128 = 1 << 37;

/// A block from an array, with its table found numerically: a set of legs counts as
/// isometric where ‖M†M/c − 1‖ ≤ `tolerance` in the Frobenius norm (which bounds the spectral
/// one), c being the mean of the diagonal.
///
/// Sets are asked in order of size; once 2^37 multiply-adds are spent the rest is answered
/// `false`, which is safe for every use of the table. Above 20 legs the table is unknown.
///
/// # Errors
/// [`BlockError`] for arrays without axes or levels, with NaN or infinite entries, or zero
/// everywhere.
pub fn from_dense(
    name: impl Into<String>,
    array: Dense,
    tolerance: f64,
) -> Result<Block, BlockError> {
    let name = name.into();
    admit(&name, &array)?;
    let dims = array.shape().to_vec();
    // Scaled to the unit interval, so that squares neither vanish nor overflow.
    let largest = largest_part(&array);
    let complex = array.to_complex().mapv_into(|v| v / largest);
    let mut left = MOST_WORK;
    let table = IsometryTable::ask(dims.len(), |mask| {
        let (columns, rows) = sizes(&dims, mask);
        let cost = rows as u128 * (columns as u128).pow(2);
        if columns > rows || cost > left {
            return false;
        }
        left -= cost;
        gram_defect(&gram(&matrix(&complex, mask).view())) <= tolerance
    });
    let nonzeros = Entries::Dense(array.clone()).nonzeros();
    let entries = if nonzeros * 8 <= complex.len() as u64 {
        Entries::Sparse(Entries::Dense(array).to_sparse())
    } else {
        Entries::Dense(array)
    };
    Ok(Block::ready(name, table, None, entries))
}

/// Refuses what is no tensor.
pub(super) fn admit(name: &str, array: &Dense) -> Result<(), BlockError> {
    let shape = array.shape();
    if shape.is_empty() || shape.contains(&0) {
        return Err(BlockError::Shape { what: name.to_owned(), shape: shape.to_vec() });
    }
    let mut zero = true;
    let mut fault = None;
    let mut look = |at: usize, v: Complex64| {
        zero &= v.re == 0.0 && v.im == 0.0;
        if !(v.re.is_finite() && v.im.is_finite()) && fault.is_none() {
            fault = Some(at);
        }
    };
    match array {
        Dense::Real(a) => a.iter().enumerate().for_each(|(k, &v)| look(k, v.into())),
        Dense::Complex(a) => a.iter().enumerate().for_each(|(k, &v)| look(k, v)),
    }
    if let Some(at) = fault {
        let mut rest = at;
        let mut place = vec![0; shape.len()];
        for (p, &d) in place.iter_mut().zip(shape).rev() {
            *p = rest % d;
            rest /= d;
        }
        return Err(BlockError::NotFinite { what: name.to_owned(), place });
    }
    if zero {
        return Err(BlockError::Zero { what: name.to_owned() });
    }
    Ok(())
}

/// The largest real or imaginary part in magnitude.
pub(super) fn largest_part(array: &Dense) -> f64 {
    match array {
        Dense::Real(a) => a.iter().fold(0.0, |m: f64, v| m.max(v.abs())),
        Dense::Complex(a) => a.iter().fold(0.0, |m: f64, v| m.max(v.re.abs()).max(v.im.abs())),
    }
}

/// (levels of the legs in the mask, levels of the rest).
pub(super) fn sizes(dims: &[usize], mask: u64) -> (usize, usize) {
    let mut out = (1, 1);
    for (l, &d) in dims.iter().enumerate() {
        if mask >> l & 1 == 1 {
            out.0 *= d;
        } else {
            out.1 *= d;
        }
    }
    out
}

/// The array as a matrix: rows the legs outside the mask, columns those inside, each in order.
pub(super) fn matrix(array: &ArrayD<Complex64>, mask: u64) -> Array2<Complex64> {
    let legs = array.ndim();
    let (columns, rows) = sizes(array.shape(), mask);
    let mut order: Vec<usize> = (0..legs).filter(|l| mask >> l & 1 == 0).collect();
    order.extend((0..legs).filter(|l| mask >> l & 1 == 1));
    array
        .view()
        .permuted_axes(order)
        .as_standard_layout()
        .into_owned()
        .into_shape_with_order((rows, columns))
        .expect("the sizes multiply to the whole")
}

/// M†M.
pub(super) fn gram(m: &ArrayView2<Complex64>) -> Array2<Complex64> {
    let adjoint = m.t().mapv(|v| v.conj());
    adjoint.dot(m)
}

/// ‖G/c − 1‖ in the Frobenius norm, c the mean of the diagonal.
pub(super) fn gram_defect(g: &Array2<Complex64>) -> f64 {
    let n = g.nrows();
    let c = g.diag().iter().map(|v| v.re).sum::<f64>() / n as f64;
    if c <= 0.0 {
        return f64::INFINITY;
    }
    g.indexed_iter()
        .map(|((i, j), v)| (v / c - if i == j { 1.0 } else { 0.0 }).norm_sqr())
        .sum::<f64>()
        .sqrt()
}
