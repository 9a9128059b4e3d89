//! Slices put together: summed where the sliced label is summed, side by side where it is
//! open.

use super::dense::{normalise, scale};
use crate::linalg::Scalar;
use crate::tensor::{Label, largest};
use ndarray::{ArrayD, Axis, IxDyn};

/// `values`·2^`exponent`.
pub(super) struct Total<T> {
    open: Vec<Label>,
    values: ArrayD<T>,
    /// None while everything is 0.
    exponent: Option<i64>,
}

impl<T: Scalar> Total<T> {
    pub fn zero(open: &[Label], dims: &[usize]) -> Self {
        Self {
            open: open.to_vec(),
            values: ArrayD::from_elem(IxDyn(dims), T::zero()),
            exponent: None,
        }
    }

    /// Adds one slice, whose axes are the open labels that are not fixed.
    pub fn add(&mut self, fixed: &[(Label, usize)], mut slice: ArrayD<T>, exponent: i64) {
        let flat = slice.as_slice_mut().expect("slices come in row-major order");
        let top = largest(flat);
        if top == 0.0 {
            return;
        }
        let exponent = exponent + normalise(flat, top);
        // The larger power of two is kept, so that scaling only ever shrinks.
        let common = match self.exponent {
            Some(e) if e >= exponent => {
                scale(flat, exponent - e);
                e
            }
            Some(e) => {
                let mine = self.values.as_slice_mut().expect("a total is in row-major order");
                scale(mine, e - exponent);
                exponent
            }
            None => exponent,
        };
        self.exponent = Some(common);
        let mut place = self.values.view_mut();
        let mut open = self.open.clone();
        for &(l, value) in fixed {
            if let Some(at) = open.iter().position(|&x| x == l) {
                place.index_axis_inplace(Axis(at), value);
                open.remove(at);
            }
        }
        place.zip_mut_with(&slice, |x, y| *x += *y);
    }

    /// The values and log10 of their factor; the factor is 1 wherever the values fit the
    /// range of a double with room to spare.
    pub fn finish(mut self) -> (ArrayD<T>, f64) {
        let Some(e) = self.exponent else { return (self.values, 0.0) };
        let flat = self.values.as_slice_mut().expect("a total is in row-major order");
        let top = largest(flat);
        let e = e + normalise(flat, top);
        if (-900..=900).contains(&e) {
            scale(flat, e);
            (self.values, 0.0)
        } else {
            (self.values, e as f64 * std::f64::consts::LOG10_2)
        }
    }
}
