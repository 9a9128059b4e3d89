//! Dense numbers times a power of two.

use super::arena::Arena;
use super::layout::{Layout, strides};
use super::program::Program;
use super::walk::Numeric;
use super::{Algebra, ContractError, Leaf, Step};
use crate::block::{Block, Entries};
use crate::linalg::Scalar;
use crate::tensor::{Dense, Label, gather, largest, reduced};
use ndarray::{ArrayD, Axis, IxDyn};
use num_complex::Complex64;
use std::ops::Deref;
use std::sync::{Arc, Mutex, OnceLock};

/// The entries of a tensor: its own, or those of a leaf that all slices share.
pub(super) enum Values<T> {
    Own(Vec<T>),
    Shared(Arc<Vec<T>>),
}

impl<T> Deref for Values<T> {
    type Target = [T];
    fn deref(&self) -> &[T] {
        match self {
            Self::Own(v) => v,
            Self::Shared(v) => v,
        }
    }
}

/// A dense intermediate: `values`·2^`exponent`, axes in the order that the layout planned.
pub(super) struct Held<T> {
    pub values: Values<T>,
    pub exponent: i64,
    /// No entry exceeds 2^high.
    high: i64,
    /// No product of entries that led here fell below 2^low, unless it was 0.
    low: i64,
}

/// Bounds on magnitudes, in powers of two, beyond which an intermediate is scaled back to
/// about 1. Products of two within them stay far inside the range of the numbers.
fn wide<T: Scalar>() -> i64 {
    if T::EPSILON > 1e-10 { 24 } else { 256 }
}
/// Entries up to which scaling is done at every step, since it costs next to nothing.
const SMALL: usize = 1 << 9;

/// The dense algebra of one program.
pub(super) struct DenseAlgebra<'a, T> {
    program: &'a Program,
    layout: &'a Layout,
    pub arena: &'a Arena<T>,
    /// Leaves that no slice changes, kept after their first use where there are slices.
    kept: Vec<OnceLock<Kept<T>>>,
    done: Mutex<u128>,
}

type Kept<T> = (Arc<Vec<T>>, i64, i64);

/// The exponent e with 2^e ≤ x < 2^(e+1).
pub(super) fn exponent(x: f64) -> i64 {
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
        let factor = 2f64.powi(part);
        values.iter_mut().for_each(|x| *x = x.scaled(factor));
        left -= part;
    }
}

/// Scales to about 1 and takes the bounds anew; gives the exponent and the lower bound.
fn settle<T: Scalar>(values: &mut [T]) -> (i64, i64) {
    let e = normalise(values, largest(values));
    let least =
        values.iter().map(|x| x.magnitude()).filter(|&x| x > 0.0).fold(f64::INFINITY, f64::min);
    (e, if least.is_finite() { exponent(least) } else { 0 })
}

impl<'a, T: Scalar> DenseAlgebra<'a, T> {
    pub fn new(program: &'a Program, layout: &'a Layout, arena: &'a Arena<T>) -> Self {
        let leaves = if program.slices > 1 { program.leaves.len() } else { 0 };
        let kept = (0..leaves).map(|_| OnceLock::new()).collect();
        Self { program, layout, arena, kept, done: Mutex::new(0) }
    }

    /// Order of a tensor's axes.
    pub fn order(&self, node: usize) -> &[Label] {
        &self.layout.orders[node]
    }

    /// The values with their axes in another order.
    fn moved(&self, values: &[T], from: &[Label], to: &[Label]) -> Vec<T> {
        let sizes = &self.program.sizes;
        let steps = strides(from, sizes);
        let place = |l: &Label| steps[from.iter().position(|x| x == l).expect("the same labels")];
        let dims: Vec<usize> = to.iter().map(|l| sizes[l.index()]).collect();
        let step: Vec<usize> = to.iter().map(place).collect();
        self.arena.fill(values.len(), |out| gather(&dims, &step, values, out))
    }

    fn free(&self, values: Values<T>) {
        if let Values::Own(v) = values {
            self.arena.give(v);
        }
    }

    /// A tensor from entries in the order that the layout planned.
    pub fn hold(&self, mut values: Vec<T>, exponent: i64) -> Held<T> {
        self.arena.adopt(values.len());
        let (e, low) = settle(&mut values);
        Held { values: Values::Own(values), exponent: exponent + e, high: 1, low }
    }

    /// Estimated time of a step.
    pub fn nanoseconds(&self, number: usize) -> f64 {
        self.layout.steps[number].loops.nanoseconds(T::COMPLEX, size_of::<T>())
    }
}

impl<T: Scalar> Numeric<T> for DenseAlgebra<'_, T> {
    fn finish(&self, held: Held<T>) -> (ArrayD<T>, i64) {
        let from = self.order(self.layout.orders.len() - 1);
        let to = &self.program.open;
        let values = match held.values {
            Values::Own(v) if from == to => v,
            other => {
                let moved = self.moved(&other, from, to);
                self.free(other);
                moved
            }
        };
        self.arena.release(values.len());
        let dims: Vec<usize> = to.iter().map(|l| self.program.sizes[l.index()]).collect();
        let array = ArrayD::from_shape_vec(IxDyn(&dims), values).expect("one entry a place");
        (array, held.exponent)
    }
    fn done(&self) -> u128 {
        *self.done.lock().expect("no thread panics while it holds the count")
    }
}

impl<T: Scalar> Algebra for DenseAlgebra<'_, T> {
    type Tensor = Held<T>;

    fn leaf(
        &self,
        number: usize,
        leaf: &Leaf,
        block: &Block,
        fixed: &[(Label, usize)],
    ) -> Result<Held<T>, ContractError> {
        let touched = leaf.axes.iter().any(|l| fixed.iter().any(|f| f.0 == *l));
        let slot = self.kept.get(number).filter(|_| !touched);
        if let Some((values, exponent, low)) = slot.and_then(OnceLock::get) {
            let values = Values::Shared(Arc::clone(values));
            return Ok(Held { values, exponent: *exponent, high: 1, low: *low });
        }
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
        let small = small.as_slice().expect("a reduced array is contiguous");
        let values = self.moved(small, &labels, self.order(number));
        self.arena.release(values.len());
        let mut held = self.hold(values, 0);
        if let Some(slot) = slot
            && let Values::Own(v) = held.values
        {
            // Shared leaves are reckoned with apart from the arena.
            self.arena.release(v.len());
            let kept = slot.get_or_init(|| (Arc::new(v), held.exponent, held.low));
            held.values = Values::Shared(Arc::clone(&kept.0));
        }
        Ok(held)
    }

    fn join(
        &self,
        number: usize,
        step: &Step,
        a: Held<T>,
        b: Held<T>,
    ) -> Result<Held<T>, ContractError> {
        let plan = &self.layout.steps[number];
        let bring = |mut held: Held<T>, side: usize| {
            if let Some(to) = &plan.moved[side] {
                let moved = self.moved(&held.values, self.order(step.operands[side]), to);
                self.free(std::mem::replace(&mut held.values, Values::Own(moved)));
            }
            held
        };
        let (a, b) = (bring(a, 0), bring(b, 1));
        let len = self.program.entries(self.order(self.program.leaves.len() + number));
        let mut values = self.arena.fill(len, |out| plan.loops.run(&a.values, &b.values, out));
        let mut exponent = a.exponent + b.exponent;
        *self.done.lock().expect("no thread panics while it holds the count") +=
            plan.loops.multiply_adds();
        let terms = self.program.entries(&step.sum).max(1);
        // One more for the two products of a complex one.
        let mut high = a.high + b.high + 1 + i64::from(usize::BITS - terms.leading_zeros());
        let mut low = a.low + b.low - 1;
        self.free(a.values);
        self.free(b.values);
        if len <= SMALL || high > wide::<T>() || low < -wide::<T>() {
            let (e, least) = settle(&mut values);
            (exponent, high, low) = (exponent + e, 1, least);
        }
        Ok(Held { values: Values::Own(values), exponent, high, low })
    }

    fn cost(&self, number: usize, _: &Step, _: &Held<T>, _: &Held<T>) -> f64 {
        self.nanoseconds(number)
    }
}

/// A block's entries as dense numbers of this type.
fn entries_as<T: Scalar>(entries: &Entries) -> ArrayD<T> {
    match entries {
        Entries::Dense(Dense::Real(a)) => a.mapv(|x| T::from_c64(Complex64::from(x))),
        Entries::Dense(Dense::Complex(a)) => a.mapv(T::from_c64),
        Entries::Sparse(s) => {
            let mut a = ArrayD::from_elem(IxDyn(s.dims()), T::zero());
            let flat = a.as_slice_mut().expect("a fresh array is contiguous");
            for (&i, v) in s.index().iter().zip(s.value()) {
                flat[i as usize] = T::from_c64(*v);
            }
            a
        }
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
