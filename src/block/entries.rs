//! The numbers of a block, sparse where most of them vanish.

use crate::tensor::Dense;
use ndarray::{ArrayD, IxDyn};
use num_complex::Complex64;

/// The non-zero entries of an array, in row-major order.
///
/// Invariants: (1) `index` ascends strictly; (2) every index is below the product of
/// `dims`; (3) no value is zero; (4) `index` and `value` have one length.
#[derive(Debug, Clone, PartialEq)]
pub struct SparseEntries {
    dims: Vec<usize>,
    index: Vec<u64>,
    value: Vec<Complex64>,
}

impl SparseEntries {
    /// Sorts the entries, adds those that share a place and drops zeros.
    ///
    /// # Panics
    /// Where a place lies outside `dims`, or the product of `dims` exceeds 2^63.
    #[track_caller]
    pub fn collect(dims: Vec<usize>, entries: Vec<(u64, Complex64)>) -> Self {
        let size = dims
            .iter()
            .try_fold(1u64, |s, &d| s.checked_mul(d as u64))
            .filter(|&s| s <= 1 << 63)
            .expect("the product of the dimensions must stay below 2^63");
        let mut entries = entries;
        entries.sort_by_key(|e| e.0);
        let mut index: Vec<u64> = Vec::with_capacity(entries.len());
        let mut value: Vec<Complex64> = Vec::with_capacity(entries.len());
        for (place, x) in entries {
            assert!(place < size, "place {place} lies outside an array of {size} entries");
            if index.last() == Some(&place) {
                *value.last_mut().expect("one value an index") += x;
            } else {
                index.push(place);
                value.push(x);
            }
        }
        let keep: Vec<bool> = value.iter().map(|v| v.norm_sqr() > 0.0).collect();
        let mut it = keep.iter();
        index.retain(|_| *it.next().expect("one flag an entry"));
        let mut it = keep.iter();
        value.retain(|_| *it.next().expect("one flag an entry"));
        Self { dims, index, value }
    }
    /// Sizes of the axes.
    pub fn dims(&self) -> &[usize] {
        &self.dims
    }
    /// Row-major places of the non-zero entries, ascending.
    pub fn index(&self) -> &[u64] {
        &self.index
    }
    /// The non-zero entries, in the order of [`Self::index`].
    pub fn value(&self) -> &[Complex64] {
        &self.value
    }
}

/// The numbers of a block.
#[derive(Debug, Clone, PartialEq)]
pub enum Entries {
    /// Only the non-zero ones.
    Sparse(SparseEntries),
    /// All of them.
    Dense(Dense),
}

impl Entries {
    /// Sizes of the axes.
    pub fn dims(&self) -> &[usize] {
        match self {
            Entries::Sparse(s) => s.dims(),
            Entries::Dense(d) => d.shape(),
        }
    }
    /// Number of non-zero entries.
    pub fn nonzeros(&self) -> u64 {
        match self {
            Entries::Sparse(s) => s.index.len() as u64,
            Entries::Dense(Dense::Real(a)) => a.iter().filter(|&&x| x != 0.0).count() as u64,
            Entries::Dense(Dense::Complex(a)) => {
                a.iter().filter(|x| x.norm_sqr() != 0.0).count() as u64
            }
        }
    }
    /// All entries as an array, real where every entry is real.
    pub fn to_dense(&self) -> Dense {
        match self {
            Entries::Dense(d) => d.clone(),
            Entries::Sparse(s) => {
                if s.value.iter().all(|v| v.im == 0.0) {
                    let mut a = ArrayD::<f64>::zeros(IxDyn(&s.dims));
                    let flat = a.as_slice_mut().expect("a fresh array is contiguous");
                    for (&i, v) in s.index.iter().zip(&s.value) {
                        flat[i as usize] = v.re;
                    }
                    Dense::Real(a)
                } else {
                    let mut a = ArrayD::<Complex64>::zeros(IxDyn(&s.dims));
                    let flat = a.as_slice_mut().expect("a fresh array is contiguous");
                    for (&i, v) in s.index.iter().zip(&s.value) {
                        flat[i as usize] = *v;
                    }
                    Dense::Complex(a)
                }
            }
        }
    }
    /// The non-zero entries.
    pub fn to_sparse(&self) -> SparseEntries {
        match self {
            Entries::Sparse(s) => s.clone(),
            Entries::Dense(d) => {
                let dims = d.shape().to_vec();
                let mut index = Vec::new();
                let mut value = Vec::new();
                let mut put = |i: usize, v: Complex64| {
                    if v.norm_sqr() != 0.0 {
                        index.push(i as u64);
                        value.push(v);
                    }
                };
                match d {
                    Dense::Real(a) => {
                        for (i, &x) in a.iter().enumerate() {
                            put(i, Complex64::new(x, 0.0));
                        }
                    }
                    Dense::Complex(a) => {
                        for (i, &x) in a.iter().enumerate() {
                            put(i, x);
                        }
                    }
                }
                SparseEntries { dims, index, value }
            }
        }
    }
}
