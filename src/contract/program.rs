//! A plan compiled for one slice: which labels every intermediate has.

use super::ContractError;
use crate::order::{self, Plan, Shape};
use crate::tensor::Label;

/// An input tensor before the first step.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Leaf {
    /// Labels of its block's axes; one may stand twice (the diagonal).
    pub axes: Vec<Label>,
    /// Labels that are left once sliced labels are fixed, diagonals taken and labels that
    /// nobody else holds summed over.
    pub labels: Vec<Label>,
}

/// One pairwise step.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Step {
    /// The operands' numbers: leaves first, then the results of the steps before.
    pub operands: [usize; 2],
    /// Labels on both that the result keeps.
    pub batch: Vec<Label>,
    /// Labels of the first operand alone; all stay.
    pub rows: Vec<Label>,
    /// Labels on both that are summed over.
    pub sum: Vec<Label>,
    /// Labels of the second operand alone; all stay.
    pub columns: Vec<Label>,
    /// Scalar multiply-adds: the product of the sizes of all of these.
    pub multiply_adds: u128,
}

/// What is done in every slice.
#[derive(Debug, Clone)]
pub(super) struct Program {
    /// Size of each label; 1 for sliced ones.
    pub sizes: Vec<usize>,
    pub leaves: Vec<Leaf>,
    pub steps: Vec<Step>,
    /// Open labels that are not sliced.
    pub open: Vec<Label>,
    /// Sliced labels with their sizes.
    pub sliced: Vec<(Label, u64)>,
    pub slices: u128,
}

/// No tensor may have more entries than this many bits count.
const BITS: u32 = 48;

impl Program {
    /// Checks the plan and works out the labels.
    pub fn compile(shape: &Shape, plan: &Plan) -> Result<Self, ContractError> {
        let price = order::cost(shape, plan)?;
        let mut sizes: Vec<usize> = shape.sizes.iter().map(|&s| s as usize).collect();
        let mut gone = vec![false; sizes.len()];
        for l in &plan.sliced {
            if !shape.tensors.iter().any(|t| t.contains(l)) {
                return Err(ContractError::SlicedNowhere { label: l.number() });
            }
            sizes[l.index()] = 1;
            gone[l.index()] = true;
        }
        // By how many live tensors a label is held, open counting as one more.
        let mut held = vec![0u32; sizes.len()];
        for l in &shape.open {
            held[l.index()] += 1;
        }
        let mut labels: Vec<Vec<Label>> = Vec::with_capacity(2 * shape.tensors.len());
        for axes in &shape.tensors {
            let mut distinct: Vec<Label> = Vec::with_capacity(axes.len());
            for &l in axes.iter().filter(|l| !gone[l.index()]) {
                if !distinct.contains(&l) {
                    distinct.push(l);
                    held[l.index()] += 1;
                }
            }
            labels.push(distinct);
        }
        for set in &mut labels {
            set.retain(|l| held[l.index()] > 1);
        }
        let leaves = shape
            .tensors
            .iter()
            .zip(&labels)
            .map(|(axes, labels)| Leaf { axes: axes.clone(), labels: labels.clone() })
            .collect();
        let mut steps = Vec::with_capacity(plan.steps.len());
        let mut at = vec![0u8; sizes.len()];
        for &(x, y) in &plan.steps {
            let operands = [x as usize, y as usize];
            let (a, b) = (&labels[operands[0]], &labels[operands[1]]);
            a.iter().for_each(|l| at[l.index()] |= 1);
            b.iter().for_each(|l| at[l.index()] |= 2);
            let both: Vec<Label> = a.iter().copied().filter(|l| at[l.index()] == 3).collect();
            let rows: Vec<Label> = a.iter().copied().filter(|l| at[l.index()] == 1).collect();
            let columns: Vec<Label> = b.iter().copied().filter(|l| at[l.index()] == 2).collect();
            for &l in a.iter().chain(b) {
                at[l.index()] = 0;
            }
            both.iter().for_each(|l| held[l.index()] -= 1);
            let (batch, sum): (Vec<Label>, Vec<Label>) =
                both.into_iter().partition(|l| held[l.index()] > 1);
            let multiply_adds = [&batch, &rows, &sum, &columns]
                .iter()
                .flat_map(|g| g.iter())
                .fold(1u128, |m, l| m.saturating_mul(sizes[l.index()] as u128));
            let made = batch.iter().chain(&rows).chain(&columns).copied().collect();
            steps.push(Step { operands, batch, rows, sum, columns, multiply_adds });
            labels.push(made);
        }
        Ok(Self {
            open: shape.open.iter().copied().filter(|l| !gone[l.index()]).collect(),
            sliced: plan.sliced.iter().map(|&l| (l, shape.sizes[l.index()])).collect(),
            slices: price.slices,
            sizes,
            leaves,
            steps,
        })
    }

    /// Refuses tensors with more entries than memory can address.
    pub fn addressable(&self) -> Result<(), ContractError> {
        let bits = |labels: &mut dyn Iterator<Item = &Label>| -> f64 {
            labels.map(|l| (self.sizes[l.index()] as f64).log2()).sum()
        };
        let leaves = self.leaves.iter().map(|l| bits(&mut l.labels.iter()));
        let made =
            self.steps.iter().map(|s| bits(&mut s.batch.iter().chain(&s.rows).chain(&s.columns)));
        match leaves.chain(made).position(|b| b > f64::from(BITS)) {
            Some(tensor) => Err(ContractError::TooLarge { tensor, bits: BITS }),
            None => Ok(()),
        }
    }

    /// Product of the sizes of these labels.
    pub fn entries(&self, labels: &[Label]) -> usize {
        labels.iter().map(|l| self.sizes[l.index()]).product()
    }
    /// Value of each sliced label in one slice; the first label's varies slowest.
    pub fn fixed(&self, slice: u128) -> Vec<(Label, usize)> {
        let mut left = slice;
        let mut fixed: Vec<(Label, usize)> = self
            .sliced
            .iter()
            .rev()
            .map(|&(l, size)| {
                let value = (left % u128::from(size)) as usize;
                left /= u128::from(size);
                (l, value)
            })
            .collect();
        fixed.reverse();
        fixed
    }
    /// Multiply-adds of one slice.
    pub fn multiply_adds(&self) -> u128 {
        self.steps.iter().fold(0, |m, s| m.saturating_add(s.multiply_adds))
    }
}
