//! Dense numbers times a power of two.

use super::layout::{Layout, strides};
use super::program::Program;
use super::{Algebra, ContractError, Leaf, Step};
use crate::block::{Block, Entries};
use crate::linalg::Scalar;
use crate::tensor::{Dense, Label, gather, largest, reduced};
use ndarray::{ArrayD, Axis, IxDyn};
use num_complex::Complex64;
use std::mem::MaybeUninit;
use std::sync::atomic::{AtomicU64, Ordering};

/// A dense intermediate: `values`·2^`exponent`, axes in the order that the layout planned.
pub(super) struct Held<T> {
    pub values: Vec<T>,
    pub exponent: i64,
    /// No entry exceeds 2^high.
    high: i64,
    /// No product of entries that led here fell below 2^low, unless it was 0.
    low: i64,
}

/// Bounds on magnitudes beyond which an intermediate is scaled back to about 1. Products of
/// two within them stay far inside the range of a double.
const WIDE: i64 = 256;
/// Entries up to which scaling is done at every step, since it costs next to nothing.
const SMALL: usize = 1 << 10;

/// The dense algebra for one program.
pub(super) struct DenseAlgebra<'a> {
    program: &'a Program,
    layout: &'a Layout,
    multiply_adds: std::sync::Mutex<u128>,
    live: AtomicU64,
    peak: AtomicU64,
}

impl<'a> DenseAlgebra<'a> {
    pub fn new(program: &'a Program, layout: &'a Layout) -> Self {
        Self {
            program,
            layout,
            multiply_adds: std::sync::Mutex::new(0),
            live: AtomicU64::new(0),
            peak: AtomicU64::new(0),
        }
    }
    pub fn multiply_adds(&self) -> u128 {
        *self.multiply_adds.lock().expect("no thread panics while it holds the count")
    }
    pub fn peak_bytes(&self) -> u64 {
        self.peak.load(Ordering::Relaxed)
    }
    fn born<T>(&self, entries: usize) {
        let bytes = (entries * size_of::<T>()) as u64;
        let now = self.live.fetch_add(bytes, Ordering::Relaxed) + bytes;
        self.peak.fetch_max(now, Ordering::Relaxed);
    }
    fn gone<T>(&self, values: Vec<T>) {
        self.live.fetch_sub((values.len() * size_of::<T>()) as u64, Ordering::Relaxed);
    }
    /// The values with their axes in another order.
    fn moved<T: Scalar>(&self, values: &[T], from: &[Label], to: &[Label]) -> Vec<T> {
        let sizes = &self.program.sizes;
        let steps = strides(from, sizes);
        let place = |l: &Label| steps[from.iter().position(|x| x == l).expect("the same labels")];
        let dims: Vec<usize> = to.iter().map(|l| sizes[l.index()]).collect();
        let step: Vec<usize> = to.iter().map(place).collect();
        self.born::<T>(values.len());
        fill(values.len(), |out| gather(&dims, &step, values, out))
    }
}

/// A vector whose entries `write` writes, all of them.
fn fill<T: Scalar>(len: usize, write: impl FnOnce(&mut [MaybeUninit<T>])) -> Vec<T> {
    let mut values: Vec<T> = Vec::with_capacity(len);
    write(&mut values.spare_capacity_mut()[..len]);
    // SAFETY: both kernels that are called here write every entry or panic.
    unsafe { values.set_len(len) };
    values
}

/// The exponent e with 2^e ≤ x < 2^(e+1).
fn exponent(x: f64) -> i64 {
    let bits = x.to_bits() >> 52 & 0x7ff;
    if bits == 0 { x.log2().floor() as i64 } else { bits as i64 - 1023 }
}

/// Scales by a power of two so that the largest magnitude lies in [1, 2).
pub(super) fn normalise<T: Scalar>(values: &mut [T], top: f64) -> i64 {
    if top == 0.0 || !top.is_finite() {
        return 0;
    }
    let e = exponent(top);
    scale(values, -e);
    e
}

/// Multiplies by 2^e, in parts that stay in range.
pub(super) fn scale<T: Scalar>(values: &mut [T], e: i64) {
    let mut left = e.clamp(-4000, 4000) as i32;
    while left != 0 {
        let part = left.clamp(-1000, 1000);
        values.iter_mut().for_each(|x| *x = x.times_two_to(part));
        left -= part;
    }
}

fn hold<T: Scalar>(mut values: Vec<T>, exponent_so_far: i64) -> Held<T> {
    let top = largest(&values);
    let e = normalise(&mut values, top);
    let least =
        values.iter().map(|x| x.magnitude()).filter(|&x| x > 0.0).fold(f64::INFINITY, f64::min);
    let low = if least.is_finite() { exponent(least) } else { 0 };
    Held { values, exponent: exponent_so_far + e, high: 1, low }
}

impl<T: Scalar> Algebra for DenseOf<'_, T> {
    type Tensor = Held<T>;

    fn leaf(
        &self,
        number: usize,
        leaf: &Leaf,
        block: &Block,
        fixed: &[(Label, usize)],
    ) -> Result<Held<T>, ContractError> {
        let dense: ArrayD<T> = entries_as(block.entries());
        if !dense.iter().all(|x| x.finite()) {
            return Err(ContractError::NotFinite { tensor: number, block: block.name().into() });
        }
        let mut view = dense.view();
        let mut axes = leaf.axes.clone();
        for &(l, value) in fixed {
            while let Some(at) = axes.iter().position(|&x| x == l) {
                view.index_axis_inplace(Axis(at), value);
                axes.remove(at);
            }
        }
        let (labels, small) = reduced(&view, &axes, |l| leaf.labels.contains(&l));
        debug_assert_eq!(labels, leaf.labels);
        let order = &self.shared.layout.orders[number];
        let values = small.into_raw_vec_and_offset().0;
        self.shared.born::<T>(values.len());
        let values = if *order == labels {
            values
        } else {
            let moved = self.shared.moved(&values, &labels, order);
            self.shared.gone(values);
            moved
        };
        Ok(hold(values, 0))
    }

    fn join(
        &self,
        number: usize,
        step: &Step,
        a: Held<T>,
        b: Held<T>,
    ) -> Result<Held<T>, ContractError> {
        let shared = self.shared;
        let plan = &shared.layout.steps[number];
        let orders = &shared.layout.orders;
        let bring = |held: Held<T>, side: usize| {
            let (mut held, from) = (held, &orders[step.operands[side]]);
            if let Some(to) = &plan.moved[side] {
                let moved = shared.moved(&held.values, from, to);
                shared.gone(std::mem::replace(&mut held.values, moved));
            }
            held
        };
        let (a, b) = (bring(a, 0), bring(b, 1));
        let len = shared.program.entries(&orders[shared.program.leaves.len() + number]);
        shared.born::<T>(len);
        let mut values = fill(len, |out| plan.join.run(&a.values, &b.values, out));
        *shared.multiply_adds.lock().expect("no thread panics while it holds the count") +=
            plan.join.multiply_adds();
        let terms = shared.program.entries(&step.sum).max(1);
        let mut held = Held {
            exponent: a.exponent + b.exponent,
            // Complex products and sums of `terms` of them.
            high: a.high + b.high + 1 + (usize::BITS - terms.leading_zeros()) as i64,
            low: a.low + b.low - 1,
            values: Vec::new(),
        };
        shared.gone(a.values);
        shared.gone(b.values);
        if len <= SMALL || held.high > WIDE || held.low < -WIDE {
            return Ok(hold(values, held.exponent));
        }
        std::mem::swap(&mut held.values, &mut values);
        Ok(held)
    }

    fn cost(&self, step: &Step, _: &Held<T>, _: &Held<T>) -> f64 {
        step.multiply_adds as f64 * if T::COMPLEX { 0.08 } else { 0.02 }
    }
}

/// The algebra of one number type.
pub(super) struct DenseOf<'a, T> {
    shared: &'a DenseAlgebra<'a>,
    kind: std::marker::PhantomData<fn() -> T>,
}

impl<'a, T: Scalar> DenseOf<'a, T> {
    pub fn new(shared: &'a DenseAlgebra<'a>) -> Self {
        Self { shared, kind: std::marker::PhantomData }
    }
    /// The final tensor with its axes in the order of the open labels.
    pub fn finish(&self, held: Held<T>) -> (ArrayD<T>, i64) {
        let shared = self.shared;
        let from = &shared.layout.orders[shared.layout.orders.len() - 1];
        let to = &shared.program.open;
        let values = if from == to {
            held.values
        } else {
            let moved = shared.moved(&held.values, from, to);
            shared.gone(held.values);
            moved
        };
        let dims: Vec<usize> = to.iter().map(|l| shared.program.sizes[l.index()]).collect();
        shared.live.fetch_sub((values.len() * size_of::<T>()) as u64, Ordering::Relaxed);
        let array = ArrayD::from_shape_vec(IxDyn(&dims), values).expect("one entry a place");
        (array, held.exponent)
    }
}

/// A block's entries as dense numbers of this type.
fn entries_as<T: Scalar>(entries: &Entries) -> ArrayD<T> {
    match entries.to_dense() {
        Dense::Real(a) => a.mapv(|x| T::from_c64(Complex64::from(x))),
        Dense::Complex(a) => a.mapv(T::from_c64),
    }
}

/// Whether no entry has an imaginary part.
pub(super) fn is_real(entries: &Entries) -> bool {
    match entries {
        Entries::Sparse(s) => s.value().iter().all(|v| v.im == 0.0),
        Entries::Dense(Dense::Real(_)) => true,
        Entries::Dense(Dense::Complex(a)) => a.iter().all(|v| v.im == 0.0),
    }
}
