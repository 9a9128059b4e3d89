//! Sparse numbers: only the entries that do not vanish.
//!
//! A step joins two lists of entries on the labels that both hold, as tables are joined: both
//! are sorted by those labels, and every pair within a group gives one product. Where a step
//! is estimated to be cheaper dense, or an operand is dense already, it is carried out by the
//! dense algebra; a result that has filled up stays dense.

use super::dense::{DenseAlgebra, Held, exponent};
use super::layout::strides;
use super::program::Program;
use super::walk::Numeric;
use super::{Algebra, ContractError, Leaf, Step};
use crate::block::{Block, Entries};
use crate::linalg::Scalar;
use crate::tensor::Label;
use ndarray::ArrayD;
use rayon::prelude::*;
use std::mem::MaybeUninit;
use std::sync::atomic::{AtomicU64, Ordering};

/// Entries that do not vanish, by their place in row-major order of the planned axes,
/// ascending; all times 2^`exponent`.
pub(super) struct List<T> {
    entries: Vec<(u64, T)>,
    exponent: i64,
}

/// A tensor of either kind.
pub(super) enum Mixed<T> {
    Sparse(List<T>),
    Dense(Held<T>),
}

/// The sparse algebra of one program.
pub(super) struct SparseAlgebra<'a, T> {
    program: &'a Program,
    dense: DenseAlgebra<'a, T>,
    done: AtomicU64,
}

/// Tensors of at most this many entries are kept sparse however full they are.
const SMALL: usize = 1 << 10;
/// One entry in so many makes a larger tensor dense.
const FULL: usize = 4;
/// Estimated nanoseconds for a product of two sparse entries, its place in the result
/// included, and for an operand's entry.
const PER_PRODUCT: f64 = 12.0;
const PER_ENTRY: f64 = 40.0;

/// Whether a block is so empty that sparse tensors may pay.
pub(super) fn pays(block: &Block) -> bool {
    let size: u64 = block.dims().iter().map(|&d| d as u64).product();
    block.dims().len() > 1 && block.entries().nonzeros().saturating_mul(3) <= size
}

impl<'a, T: Scalar> SparseAlgebra<'a, T> {
    pub fn new(program: &'a Program, dense: DenseAlgebra<'a, T>) -> Self {
        Self { program, dense, done: AtomicU64::new(0) }
    }

    fn size(&self, node: usize) -> usize {
        self.program.entries(self.dense.order(node))
    }

    /// Sorted, summed and scaled entries, kept as a list or filled into an array.
    fn settle(&self, node: usize, mut entries: Vec<(u64, T)>, so_far: i64) -> Mixed<T> {
        let top = entries.iter().map(|e| e.1.magnitude()).fold(0.0, f64::max);
        let e = if top == 0.0 { 0 } else { exponent(top) };
        let factor = 2f64.powi(-e as i32);
        entries.iter_mut().for_each(|x| x.1 = x.1.scaled(factor));
        let size = self.size(node);
        let list = List { entries, exponent: so_far + e };
        if size > SMALL && list.entries.len() > size / FULL {
            Mixed::Dense(self.fill(node, list))
        } else {
            Mixed::Sparse(list)
        }
    }

    fn fill(&self, node: usize, list: List<T>) -> Held<T> {
        let size = self.size(node);
        let values = self.dense.arena.fill(size, |out| {
            out.fill(MaybeUninit::new(T::zero()));
            for (place, x) in &list.entries {
                out[*place as usize].write(*x);
            }
        });
        self.dense.arena.release(size);
        self.dense.hold(values, list.exponent)
    }

    fn densely(&self, node: usize, tensor: Mixed<T>) -> Held<T> {
        match tensor {
            Mixed::Dense(held) => held,
            Mixed::Sparse(list) => self.fill(node, list),
        }
    }

    /// Splits the places of one operand into the key that both share and the part of the
    /// result's place; sorted by key, within it by that part.
    fn keyed(
        &self,
        node: usize,
        list: &List<T>,
        shared: &[Label],
        in_result: &[Label],
        result: &[Label],
    ) -> Vec<(u64, u64, T)> {
        let sizes = &self.program.sizes;
        let order = self.dense.order(node);
        let key_steps = strides(shared, sizes);
        let out_steps = strides(result, sizes);
        let step = |set: &[Label], steps: &[usize], l: Label| {
            set.iter().position(|&x| x == l).map_or(0, |i| steps[i] as u64)
        };
        // Last axis first, as the digits come out.
        let axes: Vec<(u64, u64, u64)> = order
            .iter()
            .rev()
            .map(|&l| {
                let out = if in_result.contains(&l) { step(result, &out_steps, l) } else { 0 };
                (sizes[l.index()] as u64, step(shared, &key_steps, l), out)
            })
            .collect();
        let split = |&(place, value): &(u64, T)| {
            let (mut left, mut key, mut out) = (place, 0, 0);
            for &(size, to_key, to_out) in &axes {
                let digit = left % size;
                left /= size;
                key += digit * to_key;
                out += digit * to_out;
            }
            (key, out, value)
        };
        let mut all: Vec<(u64, u64, T)> =
            list.entries.par_iter().with_min_len(4096).map(split).collect();
        all.par_sort_by_key(|e| (e.0, e.1));
        all
    }
}

/// A stretch of equal keys in both operands, and the number of products before it.
struct Group {
    left: (usize, usize),
    right: (usize, usize),
}

/// Pairs up equal keys of two sorted lists.
fn groups<T>(a: &[(u64, u64, T)], b: &[(u64, u64, T)]) -> (Vec<Group>, u64) {
    let (mut i, mut j, mut products) = (0, 0, 0u64);
    let mut found = Vec::new();
    while i < a.len() && j < b.len() {
        match a[i].0.cmp(&b[j].0) {
            std::cmp::Ordering::Less => i += 1,
            std::cmp::Ordering::Greater => j += 1,
            std::cmp::Ordering::Equal => {
                let key = a[i].0;
                let end_a = i + a[i..].iter().take_while(|e| e.0 == key).count();
                let end_b = j + b[j..].iter().take_while(|e| e.0 == key).count();
                products += ((end_a - i) as u64).saturating_mul((end_b - j) as u64);
                found.push(Group { left: (i, end_a), right: (j, end_b) });
                (i, j) = (end_a, end_b);
            }
        }
    }
    (found, products)
}

/// Adds neighbours of one place; drops what vanishes.
fn summed<T: Scalar>(sorted: Vec<(u64, T)>) -> Vec<(u64, T)> {
    let mut out: Vec<(u64, T)> = Vec::with_capacity(sorted.len());
    for (place, x) in sorted {
        match out.last_mut() {
            Some(last) if last.0 == place => last.1 += x,
            _ => out.push((place, x)),
        }
    }
    out.retain(|e| e.1.abs2() > 0.0 || e.1.magnitude() > 0.0);
    out
}

impl<T: Scalar> Algebra for SparseAlgebra<'_, T> {
    type Tensor = Mixed<T>;

    fn leaf(
        &self,
        number: usize,
        leaf: &Leaf,
        block: &Block,
        fixed: &[(Label, usize)],
    ) -> Result<Mixed<T>, ContractError> {
        let size: usize = block.dims().iter().product();
        if let Entries::Dense(_) = block.entries()
            && size > SMALL
            && !pays(block)
        {
            return self.dense.leaf(number, leaf, block, fixed).map(Mixed::Dense);
        }
        let sizes = &self.program.sizes;
        let order = self.dense.order(number);
        let steps = strides(order, sizes);
        let sparse = block.entries().to_sparse();
        let mut entries: Vec<(u64, T)> = Vec::with_capacity(sparse.index().len());
        let mut digit: Vec<u64> = vec![0; leaf.axes.len()];
        // For each axis: the value it must have, or the axis whose value it must repeat.
        let bound: Vec<Option<u64>> = leaf
            .axes
            .iter()
            .map(|l| fixed.iter().find(|f| f.0 == *l).map(|f| f.1 as u64))
            .collect();
        let twin: Vec<usize> = leaf
            .axes
            .iter()
            .map(|l| leaf.axes.iter().position(|x| x == l).expect("it is there"))
            .collect();
        let out: Vec<u64> = leaf
            .axes
            .iter()
            .enumerate()
            .map(|(i, l)| match order.iter().position(|x| x == l) {
                Some(at) if twin[i] == i => steps[at] as u64,
                _ => 0,
            })
            .collect();
        'entries: for (&place, &value) in sparse.index().iter().zip(sparse.value()) {
            let value = T::from_c64(value);
            if !value.finite() {
                let block = block.name().into();
                return Err(ContractError::NotFinite { tensor: number, block });
            }
            let mut left = place;
            for (i, &d) in block.dims().iter().enumerate().rev() {
                digit[i] = left % d as u64;
                left /= d as u64;
            }
            let mut at = 0;
            for i in 0..digit.len() {
                if bound[i].is_some_and(|v| v != digit[i]) || digit[i] != digit[twin[i]] {
                    continue 'entries;
                }
                at += digit[i] * out[i];
            }
            entries.push((at, value));
        }
        entries.sort_by_key(|e| e.0);
        Ok(self.settle(number, summed(entries), 0))
    }

    fn join(
        &self,
        number: usize,
        step: &Step,
        a: Mixed<T>,
        b: Mixed<T>,
    ) -> Result<Mixed<T>, ContractError> {
        let [x, y] = step.operands;
        let node = self.program.leaves.len() + number;
        let size = self.size(node);
        let (a, b) = match (a, b) {
            (Mixed::Sparse(a), Mixed::Sparse(b)) => {
                let result = self.dense.order(node);
                let shared: Vec<Label> = step.batch.iter().chain(&step.sum).copied().collect();
                let mine: Vec<Label> = step.batch.iter().chain(&step.rows).copied().collect();
                let left = self.keyed(x, &a, &shared, &mine, result);
                let right = self.keyed(y, &b, &shared, &step.columns, result);
                let (groups, products) = groups(&left, &right);
                let filling = [self.size(x), self.size(y), size].iter().sum::<usize>() as f64;
                let densely = self.dense.nanoseconds(number) + filling;
                if products as f64 * PER_PRODUCT <= densely {
                    self.done.fetch_add(products, Ordering::Relaxed);
                    let so_far = a.exponent + b.exponent;
                    let entries = multiply(&groups, &left, &right, products as usize, size);
                    return Ok(self.settle(node, entries, so_far));
                }
                (Mixed::Sparse(a), Mixed::Sparse(b))
            }
            other => other,
        };
        let adds = step.multiply_adds.min(u128::from(u64::MAX)) as u64;
        self.done.fetch_add(adds, Ordering::Relaxed);
        let (a, b) = (self.densely(x, a), self.densely(y, b));
        self.dense.join(number, step, a, b).map(Mixed::Dense)
    }

    fn cost(&self, number: usize, step: &Step, a: &Mixed<T>, b: &Mixed<T>) -> f64 {
        let dense = self.dense.nanoseconds(number);
        match (a, b) {
            (Mixed::Sparse(a), Mixed::Sparse(b)) => {
                let keys: usize =
                    [&step.batch, &step.sum].map(|s| self.program.entries(s)).iter().product();
                let (n, m) = (a.entries.len() as f64, b.entries.len() as f64);
                (PER_ENTRY * (n + m) + PER_PRODUCT * n * m / keys.max(1) as f64).min(dense)
            }
            _ => dense,
        }
    }
}

/// All products, by place in the result. Where they are many against the size of the result
/// they are added up in an array, else sorted.
fn multiply<T: Scalar>(
    groups: &[Group],
    left: &[(u64, u64, T)],
    right: &[(u64, u64, T)],
    products: usize,
    size: usize,
) -> Vec<(u64, T)> {
    if products > size / FULL {
        let mut sums = vec![T::zero(); size];
        for g in groups {
            for &(_, at, x) in &left[g.left.0..g.left.1] {
                for &(_, and, y) in &right[g.right.0..g.right.1] {
                    sums[(at + and) as usize] += x * y;
                }
            }
        }
        let filled = sums.into_iter().enumerate();
        return filled.filter(|e| e.1.magnitude() > 0.0).map(|(i, x)| (i as u64, x)).collect();
    }
    let mut all: Vec<(u64, T)> = groups
        .par_iter()
        .with_min_len(256)
        .flat_map_iter(|g| {
            let right = &right[g.right.0..g.right.1];
            left[g.left.0..g.left.1].iter().flat_map(move |&(_, at, x)| {
                right.iter().map(move |&(_, and, y)| (at + and, x * y))
            })
        })
        .collect();
    // Stable, so that equal places are added in the order of the operands.
    all.par_sort_by_key(|e| e.0);
    summed(all)
}

impl<T: Scalar> Numeric<T> for SparseAlgebra<'_, T> {
    fn finish(&self, tensor: Mixed<T>) -> (ArrayD<T>, i64) {
        let root = self.program.leaves.len() + self.program.steps.len() - 1;
        self.dense.finish(self.densely(root, tensor))
    }
    fn done(&self) -> u128 {
        u128::from(self.done.load(Ordering::Relaxed))
    }
}
