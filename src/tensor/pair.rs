//! Two labelled tensors into one.

use super::join::{Join, Leg};
use super::{Dense, DenseTensor, Label, permuted, reduced};
use crate::linalg::Scalar;
use ndarray::{ArrayD, ArrayViewD, IxDyn};
use num_complex::Complex64;
use std::mem::MaybeUninit;

/// Contracts two tensors: C = Σ A·B over every label that is not in `keep`. The result's
/// labels stand in the order of `keep`; a label of `keep` that neither tensor holds is passed
/// over.
///
/// A kept label on both is a batch label; a label on one only that is not kept is summed
/// there first; a label twice on one tensor means its diagonal. Real where both are real.
/// Cost: the product of the sizes of all labels of both (after the sums on one alone).
///
/// ```
/// use lierne::tensor::{Dense, DenseTensor, Label, contract_pair};
/// let [i, j, k] = [0, 1, 2].map(Label::new);
/// let m = Dense::Real(ndarray::array![[1.0, 2.0], [3.0, 4.0]].into_dyn());
/// let a = DenseTensor::new(vec![i, j], m.clone()).unwrap();
/// let b = DenseTensor::new(vec![j, k], m).unwrap();
/// let c = contract_pair(&a, &b, &[k, i]);
/// assert_eq!(c.data(), &Dense::Real(ndarray::array![[7.0, 15.0], [10.0, 22.0]].into_dyn()));
/// ```
///
/// # Panics
/// Where a label has two sizes.
#[track_caller]
pub fn contract_pair(a: &DenseTensor, b: &DenseTensor, keep: &[Label]) -> DenseTensor {
    let (la, lb) = (a.labels(), b.labels());
    let (labels, data) = match (a.data(), b.data()) {
        (Dense::Real(x), Dense::Real(y)) => {
            let (l, z) = pair::<f64>(la, &x.view(), lb, &y.view(), keep);
            (l, Dense::Real(z))
        }
        (x, y) => {
            let (x, y) = (x.to_complex(), y.to_complex());
            let (l, z) = pair::<Complex64>(la, &x.view(), lb, &y.view(), keep);
            (l, Dense::Complex(z))
        }
    };
    DenseTensor::new(labels, data).expect("one label an axis")
}

fn pair<T: Scalar>(
    la: &[Label],
    a: &ArrayViewD<'_, T>,
    lb: &[Label],
    b: &ArrayViewD<'_, T>,
    keep: &[Label],
) -> (Vec<Label>, ArrayD<T>) {
    let (la, a) = reduced(a, la, |l| keep.contains(&l) || lb.contains(&l));
    let (lb, b) = reduced(b, lb, |l| keep.contains(&l) || la.contains(&l));
    let size_of = |l: Label| {
        la.iter()
            .position(|&x| x == l)
            .map(|i| a.shape()[i])
            .or_else(|| lb.iter().position(|&x| x == l).map(|i| b.shape()[i]))
    };
    // The product comes out as batch, rows, columns, and is moved to the order asked for.
    let batch: Vec<Label> =
        la.iter().copied().filter(|l| lb.contains(l) && keep.contains(l)).collect();
    let rows: Vec<Label> = la.iter().copied().filter(|l| !lb.contains(l)).collect();
    let columns: Vec<Label> = lb.iter().copied().filter(|l| !la.contains(l)).collect();
    let sum: Vec<Label> =
        la.iter().copied().filter(|l| lb.contains(l) && !keep.contains(l)).collect();
    let made: Vec<Label> = batch.iter().chain(&rows).chain(&columns).copied().collect();
    let dims: Vec<usize> = made.iter().map(|&l| size_of(l).unwrap_or(1)).collect();
    let mut steps = vec![1usize; dims.len()];
    for i in (1..dims.len()).rev() {
        steps[i - 1] = steps[i] * dims[i];
    }
    let step = |labels: &[Label], array: &ArrayD<T>, l: Label| {
        labels.iter().position(|&x| x == l).map_or(0, |i| array.strides()[i] as usize)
    };
    let leg = |l: Label| Leg {
        size: size_of(l).unwrap_or(1),
        left: step(&la, &a, l),
        right: step(&lb, &b, l),
        out: made.iter().position(|&x| x == l).map_or(0, |i| steps[i]),
    };
    for (i, &l) in la.iter().enumerate() {
        if let Some(j) = lb.iter().position(|&x| x == l) {
            assert_eq!(a.shape()[i], b.shape()[j], "label {} has two sizes", l.number());
        }
    }
    let legs = |labels: &[Label]| labels.iter().map(|&l| leg(l)).collect();
    let join =
        Join { batch: legs(&batch), rows: legs(&rows), sum: legs(&sum), columns: legs(&columns) };
    let places: usize = dims.iter().product();
    let mut out: Vec<MaybeUninit<T>> = Vec::with_capacity(places);
    out.resize_with(places, MaybeUninit::uninit);
    join.plan().run(
        a.as_slice().expect("a reduced array is contiguous"),
        b.as_slice().expect("a reduced array is contiguous"),
        &mut out,
    );
    // SAFETY: `run` has written every entry, and the two types have one layout.
    let out: Vec<T> = unsafe {
        let mut out = std::mem::ManuallyDrop::new(out);
        Vec::from_raw_parts(out.as_mut_ptr().cast::<T>(), out.len(), out.capacity())
    };
    let out = ArrayD::from_shape_vec(IxDyn(&dims), out).expect("one entry a place");
    let order: Vec<usize> = keep.iter().filter_map(|l| made.iter().position(|m| m == l)).collect();
    let labels: Vec<Label> = order.iter().map(|&i| made[i]).collect();
    if order.iter().copied().eq(0..made.len()) {
        (labels, out)
    } else {
        (labels, permuted(&out.view(), &order))
    }
}
