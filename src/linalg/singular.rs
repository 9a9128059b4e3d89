//! Singular values and vectors, believed only after a check.

use super::view::{balance, finite, matref, parts, to_array};
use super::{LinalgError, Scalar, jacobi_singular_values};
use faer::diag::Diag;
use faer::dyn_stack::{MemBuffer, MemStack};
use faer::linalg::svd::{ComputeSvdVectors, SvdParams, svd, svd_scratch};
use faer::{Auto, Mat, MatRef, Spec};
use ndarray::{Array2, ArrayView2};

/// A = U·diag(s)·V†.
#[derive(Debug, Clone, PartialEq)]
pub struct Svd<T> {
    /// Left vectors as columns, shape (m, r), r = min(m, n).
    pub u: Array2<T>,
    /// Singular values, descending, r of them.
    pub s: Vec<f64>,
    /// Right vectors, conjugated, as rows: V†, shape (r, n).
    pub vt: Array2<T>,
}

/// Singular values of A, descending, min(m, n) of them.
///
/// The squares are held against ‖A‖²; where the backend's answer fails, slower methods are
/// tried. A matrix of zeros has zeros; a matrix without rows or columns has none. Values
/// below about 1e-15·s_max·√n carry no digits. Cost about 8/3·m·n² for m ≥ n.
///
/// # Errors
/// [`LinalgError::NotFinite`], [`LinalgError::Untrusted`].
///
/// ```
/// let a = ndarray::array![[0.0, 2.0], [1.0, 0.0]];
/// assert_eq!(lierne::linalg::singular_values(&a.view()).unwrap(), vec![2.0, 1.0]);
/// ```
pub fn singular_values<T: Scalar>(a: &ArrayView2<'_, T>) -> Result<Vec<f64>, LinalgError> {
    finite(a)?;
    let (m, n) = a.dim();
    let Some((scaled, e)) = balance(a) else {
        return Ok(vec![0.0; m.min(n)]);
    };
    let expected = norm2(&scaled.view());
    let mut nearest = f64::NAN;
    let rounds: [&dyn Fn() -> Option<Vec<f64>>; 3] = [
        &|| backend(matref(&scaled.view()), ComputeSvdVectors::No).map(|p| p.1),
        &|| backend(matref(&scaled.view()), ComputeSvdVectors::Thin).map(|p| p.1),
        &|| jacobi_singular_values(&scaled.view()),
    ];
    for round in rounds {
        if let Some(s) = round() {
            let found: f64 = s.iter().map(|x| x * x).sum();
            if believable::<T>(expected, found, m.min(n)) {
                return Ok(s.into_iter().map(|x| x.times_two_to(e)).collect());
            }
            if nearest.is_nan() || (found - expected).abs() < (nearest - expected).abs() {
                nearest = found;
            }
        }
    }
    Err(LinalgError::Untrusted { rows: m, columns: n, expected, found: nearest })
}

/// The thin singular value decomposition. A zero matrix gets unit vectors.
///
/// Checked like [`singular_values`], and A − U·diag(s)·V† is checked too. Cost about
/// 10·m·n² for m ≥ n.
///
/// # Errors
/// [`LinalgError::NotFinite`], [`LinalgError::Untrusted`].
pub fn thin_svd<T: Scalar>(a: &ArrayView2<'_, T>) -> Result<Svd<T>, LinalgError> {
    finite(a)?;
    let (m, n) = a.dim();
    let r = m.min(n);
    let Some((scaled, e)) = balance(a) else {
        return Ok(Svd {
            u: Array2::from_shape_fn((m, r), |(i, j)| unit(i == j)),
            s: vec![0.0; r],
            vt: Array2::from_shape_fn((r, n), |(i, j)| unit(i == j)),
        });
    };
    let expected = norm2(&scaled.view());
    let mut nearest = f64::NAN;
    // The transposed problem walks through different numbers and serves as second attempt.
    for transposed in [false, true] {
        let parts = if transposed {
            backend(matref(&scaled.t()), ComputeSvdVectors::Thin)
                .and_then(|(u, s, v)| Some((conj(&v?), s, conj(&u?))))
        } else {
            backend(matref(&scaled.view()), ComputeSvdVectors::Thin)
                .and_then(|(u, s, v)| Some((to_array(&u?), s, to_array(&v?))))
        };
        let Some((u, s, v)) = parts else { continue };
        let found: f64 = s.iter().map(|x| x * x).sum();
        let vt = v.t().mapv(T::conjugate);
        if believable::<T>(expected, found, r) && rebuilds(&scaled.view(), &u, &s, &vt) {
            let s = s.into_iter().map(|x| x.times_two_to(e)).collect();
            return Ok(Svd { u, s, vt });
        }
        nearest = found;
    }
    jacobi_svd(&scaled, e).ok_or(LinalgError::Untrusted {
        rows: m,
        columns: n,
        expected,
        found: nearest,
    })
}

/// Number of singular values above `cut`·s_max, for values in any order; 1e-12 is a good cut
/// for double precision.
pub fn rank(values: &[f64], cut: f64) -> usize {
    let top = values.iter().copied().fold(0.0, f64::max);
    values.iter().filter(|&&s| s > cut * top).count()
}

fn unit<T: Scalar>(one: bool) -> T {
    if one { T::one() } else { T::zero() }
}

fn conj<T: Scalar>(a: &Mat<T>) -> Array2<T> {
    to_array(a).mapv_into(T::conjugate)
}

pub(super) fn norm2<T: Scalar>(a: &ArrayView2<'_, T>) -> f64 {
    // Row by row, so that rounding does not grow with the number of entries.
    a.rows().into_iter().map(|r| r.iter().map(|x| x.abs2()).sum::<f64>()).sum()
}

/// The backward error of a sound method moves the sum of squares by some ε·√r relative.
fn believable<T: Scalar>(expected: f64, found: f64, r: usize) -> bool {
    (expected - found).abs() <= 32.0 * T::EPSILON * (r as f64).sqrt().max(4.0) * expected
}

fn rebuilds<T: Scalar>(a: &ArrayView2<'_, T>, u: &Array2<T>, s: &[f64], vt: &Array2<T>) -> bool {
    let mut us = u.clone();
    for (mut column, &x) in us.columns_mut().into_iter().zip(s) {
        column.mapv_inplace(|y| y.scaled(x));
    }
    let off = &super::product(&us.view(), &vt.view()) - a;
    let r = s.len() as f64;
    norm2(&off.view()).sqrt() <= 64.0 * T::EPSILON * r.sqrt().max(4.0) * norm2(a).sqrt()
}

type Parts<T> = (Option<Mat<T>>, Vec<f64>, Option<Mat<T>>);

/// The backend's method with its divide-and-conquer step switched off: the threshold below
/// which it iterates directly is put out of reach.
fn backend<T: Scalar>(a: MatRef<'_, T>, want: ComputeSvdVectors) -> Option<Parts<T>> {
    let (m, n) = a.shape();
    let r = m.min(n);
    let par = parts(m, n);
    let params: Spec<SvdParams, T> =
        Spec::new(SvdParams { recursion_threshold: usize::MAX, ..<SvdParams as Auto<T>>::auto() });
    let mut s = Diag::<T>::zeros(r);
    let vectors = want != ComputeSvdVectors::No;
    let (mut u, mut v) = if vectors {
        (Some(Mat::<T>::zeros(m, r)), Some(Mat::<T>::zeros(n, r)))
    } else {
        (None, None)
    };
    let mut memory = MemBuffer::try_new(svd_scratch::<T>(m, n, want, want, par, params)).ok()?;
    svd(
        a,
        s.as_mut(),
        u.as_mut().map(|x| x.as_mut()),
        v.as_mut().map(|x| x.as_mut()),
        par,
        MemStack::new(&mut memory),
        params,
    )
    .ok()?;
    let s: Vec<f64> = s.column_vector().iter().map(|x| x.to_c64().re).collect();
    s.iter().all(|x| x.is_finite()).then_some((u, s, v))
}

/// Last resort: the Hermitian eigenvectors of the smaller Gram matrix orthogonalise A, and
/// the small values are refined by one-sided Jacobi rotations.
fn jacobi_svd<T: Scalar>(a: &Array2<T>, e: i32) -> Option<Svd<T>> {
    super::jacobi::jacobi_svd(&a.view()).map(|(u, s, vt)| Svd {
        u,
        s: s.into_iter().map(|x| x.times_two_to(e)).collect(),
        vt,
    })
}
