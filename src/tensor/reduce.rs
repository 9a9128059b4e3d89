//! Diagonals and sums within one tensor.

use super::Label;
use crate::linalg::Scalar;
use ndarray::{ArrayD, ArrayView1, ArrayViewD, Axis, IxDyn};

/// Takes the diagonal of every label that stands more than once, then sums over every label
/// that `keep` refuses. The labels left stand in the order of their first occurrence.
///
/// As `aab->b`: summing a label that stands twice gives the partial trace. One addition an
/// entry of the diagonal; no multiplication.
///
/// # Panics
/// Where labels and axes differ in number, or one label's axes in size.
#[track_caller]
pub fn reduced<T: Scalar>(
    array: &ArrayViewD<'_, T>,
    labels: &[Label],
    keep: impl Fn(Label) -> bool,
) -> (Vec<Label>, ArrayD<T>) {
    assert_eq!(labels.len(), array.ndim(), "one label an axis");
    let mut distinct: Vec<Label> = Vec::with_capacity(labels.len());
    let mut sizes: Vec<usize> = Vec::new();
    let mut strides: Vec<isize> = Vec::new();
    for (i, &l) in labels.iter().enumerate() {
        if let Some(at) = distinct.iter().position(|&d| d == l) {
            assert_eq!(sizes[at], array.len_of(Axis(i)), "a diagonal of unequal axes");
            strides[at] += array.strides()[i];
        } else {
            distinct.push(l);
            sizes.push(array.len_of(Axis(i)));
            strides.push(array.strides()[i]);
        }
    }
    let kept: Vec<usize> = (0..distinct.len()).filter(|&i| keep(distinct[i])).collect();
    let summed: Vec<usize> = (0..distinct.len()).filter(|&i| !keep(distinct[i])).collect();
    let shape: Vec<usize> = kept.iter().map(|&i| sizes[i]).collect();
    let out_labels = kept.iter().map(|&i| distinct[i]).collect();
    if array.is_empty() {
        return (out_labels, ArrayD::from_elem(IxDyn(&shape), T::zero()));
    }
    if summed.is_empty() {
        let steps: Vec<isize> = kept.iter().map(|&i| strides[i]).collect();
        // SAFETY: Σ index·stride with indices below the sizes is a place of the view.
        let values = unsafe { super::permute::collect(&shape, &steps, array.as_ptr()) };
        let out = ArrayD::from_shape_vec(IxDyn(&shape), values).expect("one value a place");
        return (out_labels, out);
    }
    // A kept label may have size 0 only where the array is empty, so all counts are ≥ 1.
    let total = |which: &[usize]| which.iter().map(|&i| sizes[i]).product::<usize>();
    let walk = |which: &[usize], k: usize| {
        let mut left = k;
        which.iter().rev().fold(0isize, |at, &i| {
            let digit = (left % sizes[i]) as isize;
            left /= sizes[i];
            at + digit * strides[i]
        })
    };
    let inner: Vec<isize> = (0..total(&summed)).map(|k| walk(&summed, k)).collect();
    let first = array.as_ptr();
    let values: Vec<T> = (0..total(&kept))
        .map(|k| {
            let base = walk(&kept, k);
            // SAFETY: every offset is Σ index·stride over the axes with indices below their
            // sizes, which is a place of the view.
            inner.iter().map(|&s| unsafe { *first.offset(base + s) }).sum()
        })
        .collect();
    let out = ArrayD::from_shape_vec(IxDyn(&shape), values).expect("one value a place");
    (out_labels, out)
}

/// Largest magnitude of the entries; 0 for none.
pub(crate) fn largest<T: Scalar>(values: &[T]) -> f64 {
    ArrayView1::from(values).iter().map(|x| x.magnitude()).fold(0.0, f64::max)
}

#[cfg(test)]
mod tests {
    use super::*;
    use ndarray::array;

    #[test]
    fn traces_diagonals_and_sums() {
        let l = |n| Label::new(n);
        let a = array![[[1.0, 2.0], [3.0, 4.0]], [[5.0, 6.0], [7.0, 8.0]]].into_dyn();
        let (labels, t) = reduced(&a.view(), &[l(0), l(1), l(0)], |x| x == l(1));
        assert_eq!((labels, t), (vec![l(1)], array![1.0 + 6.0, 3.0 + 8.0].into_dyn()));
        let (labels, t) = reduced(&a.view(), &[l(0), l(0), l(0)], |_| true);
        assert_eq!((labels, t), (vec![l(0)], array![1.0, 8.0].into_dyn()));
        let (labels, t) = reduced(&a.view(), &[l(2), l(1), l(0)], |_| false);
        assert_eq!((labels, t), (vec![], ndarray::arr0(36.0).into_dyn()));
        let (_, t) =
            reduced(&a.slice(ndarray::s![..;-1, .., ..]).into_dyn(), &[l(2), l(1), l(0)], |x| {
                x == l(2)
            });
        assert_eq!(t, array![26.0, 10.0].into_dyn());
    }
}
