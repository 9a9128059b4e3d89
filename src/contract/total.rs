//! Slices put together: summed where the sliced label is summed, side by side where it is
//! open.

use super::dense::{normalise, scale};
use crate::linalg::Scalar;
use crate::tensor::{Label, largest};
use ndarray::{ArrayD, Axis, IxDyn};

/// `values`·2^`exponent`, in the shape of the whole result.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Total<T> {
    pub values: ArrayD<T>,
    /// None while everything is 0.
    pub exponent: Option<i64>,
}

impl<T: Scalar> Total<T> {
    pub fn zero(dims: &[usize]) -> Self {
        Self { values: ArrayD::from_elem(IxDyn(dims), T::zero()), exponent: None }
    }

    /// A single slice that is the whole result.
    pub fn of(mut values: ArrayD<T>, exponent: i64) -> Self {
        let flat = values.as_slice_mut().expect("slices come in row-major order");
        let top = largest(flat);
        let e = normalise(flat, top);
        Self { exponent: (top != 0.0).then_some(exponent + e), values }
    }

    fn flat(&mut self) -> &mut [T] {
        self.values.as_slice_mut().expect("a total is in row-major order")
    }

    /// Brings both to one power of two, the larger, so that scaling only ever shrinks.
    fn meet(&mut self, flat: &mut [T], exponent: i64) {
        match self.exponent {
            Some(e) if e >= exponent => scale(flat, exponent - e),
            Some(e) => {
                scale(self.flat(), e - exponent);
                self.exponent = Some(exponent);
            }
            None => self.exponent = Some(exponent),
        }
    }

    /// Adds one slice, whose axes are the labels of `open` that are not fixed.
    pub fn add_slice(
        &mut self,
        open: &[Label],
        fixed: &[(Label, usize)],
        mut slice: ArrayD<T>,
        exponent: i64,
    ) {
        let flat = slice.as_slice_mut().expect("slices come in row-major order");
        let top = largest(flat);
        if top == 0.0 {
            return;
        }
        let exponent = exponent + normalise(flat, top);
        self.meet(flat, exponent);
        let mut place = self.values.view_mut();
        let mut open = open.to_vec();
        for &(l, value) in fixed {
            if let Some(at) = open.iter().position(|&x| x == l) {
                place.index_axis_inplace(Axis(at), value);
                open.remove(at);
            }
        }
        place.zip_mut_with(&slice, |x, y| *x += *y);
    }

    /// Adds another total.
    pub fn add(&mut self, mut other: Self) {
        let Some(exponent) = other.exponent else { return };
        self.meet(other.flat(), exponent);
        self.values.zip_mut_with(&other.values, |x, y| *x += *y);
    }

    /// The values and log10 of their factor; the factor is 1 wherever the values fit the
    /// range of the numbers with room to spare.
    pub fn finish(mut self) -> (ArrayD<T>, f64) {
        let Some(e) = self.exponent else { return (self.values, 0.0) };
        let flat = self.flat();
        let top = largest(flat);
        let e = e + normalise(flat, top);
        let most = if T::EPSILON > 1e-10 { 100 } else { 900 };
        if (-most..=most).contains(&e) {
            scale(flat, e);
            (self.values, 0.0)
        } else {
            (self.values, e as f64 * std::f64::consts::LOG10_2)
        }
    }
}
