//! Orthonormal times triangular.

use super::view::{finite, matref, parts, to_array};
use super::{LinalgError, Scalar};
use faer::dyn_stack::{MemBuffer, MemStack};
use faer::linalg::householder::{
    apply_block_householder_sequence_on_the_left_in_place_scratch,
    apply_block_householder_sequence_on_the_left_in_place_with_conj,
};
use faer::linalg::qr::no_pivoting::factor::{
    qr_in_place, qr_in_place_scratch, recommended_block_size,
};
use faer::{Conj, Mat, Spec};
use ndarray::{Array2, ArrayView2};

/// A = Q·R.
#[derive(Debug, Clone, PartialEq)]
pub struct Qr<T> {
    /// Orthonormal columns, shape (m, r), r = min(m, n).
    pub q: Array2<T>,
    /// Upper triangular, shape (r, n), its diagonal real and not negative.
    pub r: Array2<T>,
}

/// The thin QR decomposition by Householder reflections, R's diagonal made real and not
/// negative (so that the factors of a matrix of full rank are unique). Cost about 4·m·n².
///
/// # Errors
/// [`LinalgError::NotFinite`].
pub fn qr<T: Scalar>(a: &ArrayView2<'_, T>) -> Result<Qr<T>, LinalgError> {
    finite(a)?;
    let (m, n) = a.dim();
    let size = m.min(n);
    if size == 0 {
        return Ok(Qr {
            q: Array2::from_elem((m, 0), T::zero()),
            r: Array2::from_elem((0, n), T::zero()),
        });
    }
    let par = parts(m, n);
    let mut factored: Mat<T> = matref(a).to_owned();
    let bs = recommended_block_size::<T>(m, n);
    let mut coeff = Mat::<T>::zeros(bs, size);
    let params = Spec::default();
    let mut memory = MemBuffer::new(qr_in_place_scratch::<T>(m, n, bs, par, params));
    qr_in_place(factored.as_mut(), coeff.as_mut(), par, MemStack::new(&mut memory), params);
    let mut q = Mat::<T>::identity(m, size);
    let mut memory = MemBuffer::new(
        apply_block_householder_sequence_on_the_left_in_place_scratch::<T>(m, bs, size),
    );
    apply_block_householder_sequence_on_the_left_in_place_with_conj(
        factored.as_ref().submatrix(0, 0, m, size),
        coeff.as_ref(),
        Conj::No,
        q.as_mut(),
        par,
        MemStack::new(&mut memory),
    );
    let mut q = to_array(&q);
    let mut r = Array2::from_shape_fn(
        (size, n),
        |(i, j)| if i <= j { factored[(i, j)] } else { T::zero() },
    );
    for i in 0..size {
        let d = r[[i, i]].to_c64();
        if d.norm() == 0.0 {
            continue;
        }
        let phase = T::from_c64(d / d.norm());
        q.column_mut(i).mapv_inplace(|x| x * phase);
        r.row_mut(i).mapv_inplace(|x| phase.conjugate() * x);
        r[[i, i]] = T::from_c64(num_complex::Complex64::from(d.norm()));
    }
    Ok(Qr { q, r })
}
