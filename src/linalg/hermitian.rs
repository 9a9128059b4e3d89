//! Hermitian eigenvalues and eigenvectors.

use super::view::{balance, finite, matref, parts, to_array};
use super::{LinalgError, Scalar};
use faer::diag::Diag;
use faer::dyn_stack::{MemBuffer, MemStack};
use faer::linalg::evd::{ComputeEigenvectors, self_adjoint_evd, self_adjoint_evd_scratch};
use faer::{Mat, Spec};
use ndarray::{Array2, ArrayView2};

/// Eigenvalues of A = A†, ascending; only the lower triangle is read.
///
/// Their sum is held against the trace and their squares against ‖A‖². Cost about 4/3·n³.
///
/// # Errors
/// [`LinalgError::NotSquare`], [`LinalgError::NotFinite`], [`LinalgError::Untrusted`].
pub fn hermitian_eigenvalues<T: Scalar>(a: &ArrayView2<'_, T>) -> Result<Vec<f64>, LinalgError> {
    eigen(a, ComputeEigenvectors::No).map(|(values, _)| values)
}

/// Eigenvalues of A = A†, ascending, and eigenvectors as columns. Cost about 9·n³.
///
/// # Errors
/// As [`hermitian_eigenvalues`].
pub fn hermitian_eigen<T: Scalar>(
    a: &ArrayView2<'_, T>,
) -> Result<(Vec<f64>, Array2<T>), LinalgError> {
    let (values, vectors) = eigen(a, ComputeEigenvectors::Yes)?;
    Ok((values, vectors.map_or_else(|| Array2::from_elem((0, 0), T::zero()), |u| to_array(&u))))
}

type Eigen<T> = (Vec<f64>, Option<Mat<T>>);

fn eigen<T: Scalar>(
    a: &ArrayView2<'_, T>,
    want: ComputeEigenvectors,
) -> Result<Eigen<T>, LinalgError> {
    let (rows, columns) = a.dim();
    if rows != columns {
        return Err(LinalgError::NotSquare { rows, columns });
    }
    finite(a)?;
    let n = rows;
    let Some((scaled, e)) = balance(a) else {
        let u = (want == ComputeEigenvectors::Yes).then(|| Mat::identity(n, n));
        return Ok((vec![0.0; n], u));
    };
    let back = |values: Vec<f64>| values.into_iter().map(|x| x.times_two_to(e)).collect();
    let a = &scaled.view();
    let mut expected = 0.0;
    for i in 0..n {
        expected += a[[i, i]].abs2();
        expected += 2.0 * (0..i).map(|j| a[[i, j]].abs2()).sum::<f64>();
    }
    let attempt = |par| -> Option<Eigen<T>> {
        let mut s = Diag::<T>::zeros(n);
        let mut u = (want == ComputeEigenvectors::Yes).then(|| Mat::<T>::zeros(n, n));
        let params = Spec::default();
        let scratch = self_adjoint_evd_scratch::<T>(n, want, par, params);
        let mut memory = MemBuffer::try_new(scratch).ok()?;
        self_adjoint_evd(
            matref(a),
            s.as_mut(),
            u.as_mut().map(|u| u.as_mut()),
            par,
            MemStack::new(&mut memory),
            params,
        )
        .ok()?;
        let values: Vec<f64> = s.column_vector().iter().map(|x| x.to_c64().re).collect();
        Some((values, u))
    };
    let mut nearest = f64::NAN;
    for par in [parts(n, n), faer::Par::Seq] {
        if let Some((values, u)) = attempt(par) {
            let found: f64 = values.iter().map(|x| x * x).sum();
            let room = 64.0 * T::EPSILON * (n as f64).sqrt().max(4.0);
            if (found - expected).abs() <= room * expected {
                return Ok((back(values), u));
            }
            nearest = found;
        }
    }
    // The eigenvalues of A lie at the singular values of A + c·1 less c, for a shift that
    // makes it positive.
    let shift = expected.sqrt();
    let full = Array2::from_shape_fn((n, n), |(i, j)| {
        let x = if i >= j { a[[i, j]] } else { a[[j, i]].conjugate() };
        if i == j { T::from_c64(num_complex::Complex64::from(x.to_c64().re + shift)) } else { x }
    });
    match super::thin_svd(&full.view()) {
        Ok(svd) => {
            let order: Vec<usize> = (0..n).rev().collect();
            let values = order.iter().map(|&i| svd.s[i] - shift).collect();
            let u = (want == ComputeEigenvectors::Yes)
                .then(|| Mat::from_fn(n, n, |i, j| svd.u[[i, order[j]]]));
            Ok((back(values), u))
        }
        Err(_) => Err(LinalgError::Untrusted { rows, columns, expected, found: nearest }),
    }
}
