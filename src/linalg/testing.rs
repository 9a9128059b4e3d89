//! Matrices and slow references for the tests of this floor.

use super::Scalar;
use ndarray::{Array2, ArrayView2, ShapeBuilder, s};
use num_complex::Complex64;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;

/// Entries uniform in the square [-1, 1)².
pub fn dense<T: Scalar>(m: usize, n: usize, seed: u64) -> Array2<T> {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    Array2::from_shape_simple_fn((m, n), || {
        T::from_c64(Complex64::new(rng.random_range(-1.0..1.0), rng.random_range(-1.0..1.0)))
    })
}

/// The product by its definition.
pub fn slow_product<T: Scalar>(a: &ArrayView2<'_, T>, b: &ArrayView2<'_, T>) -> Array2<T> {
    Array2::from_shape_fn((a.nrows(), b.ncols()), |(i, j)| {
        (0..a.ncols()).map(|k| a[[i, k]] * b[[k, j]]).sum()
    })
}

/// How a matrix lies in memory.
#[derive(Debug, Clone, Copy)]
pub enum Strides {
    Row,
    Column,
    Gaps,
    Backward,
}

impl Strides {
    pub const ALL: [Self; 4] = [Self::Row, Self::Column, Self::Gaps, Self::Backward];
    /// The m×n matrix that [`strided`] hid in `store`.
    pub fn view<T>(self, store: &Array2<T>, m: usize, n: usize) -> ArrayView2<'_, T> {
        match self {
            Self::Row | Self::Column => store.view(),
            Self::Gaps => store.slice(s![..; 2, ..; 3]).slice_move(s![..m, ..n]),
            Self::Backward => store.slice(s![..;-1, ..;-1]),
        }
    }
}

/// A store in which `strides.view` shows `a`.
pub fn strided<T: Scalar>(a: &Array2<T>, strides: Strides) -> Array2<T> {
    let (m, n) = a.dim();
    match strides {
        Strides::Row => a.clone(),
        Strides::Column => {
            let mut f = Array2::from_elem((m, n).f(), T::zero());
            f.assign(a);
            f
        }
        Strides::Gaps => {
            let mut g = Array2::from_elem((2 * m, 3 * n), T::zero());
            g.slice_mut(s![..; 2, ..; 3]).assign(a);
            g
        }
        Strides::Backward => a.slice(s![..;-1, ..;-1]).to_owned(),
    }
}
