//! Walks a schedule on an algebra.

use super::program::Program;
use super::schedule::{Item, Schedule};
use super::{Algebra, ContractError};
use crate::block::Block;
use crate::tensor::Label;
use ndarray::ArrayD;
use std::sync::{Arc, Mutex};

/// An algebra whose tensors are arrays of numbers in the end.
pub(super) trait Numeric<T>: Algebra {
    /// The last tensor with its axes in the order of the open labels, and the power of two
    /// that it is to be multiplied by.
    fn finish(&self, tensor: Self::Tensor) -> (ArrayD<T>, i64);
    /// Multiply-adds done so far.
    fn done(&self) -> u128;
}

/// One pass over all steps, with some labels fixed.
pub(super) struct Walk<'a, A: Algebra> {
    pub algebra: &'a A,
    pub program: &'a Program,
    pub schedule: &'a Schedule,
    pub blocks: &'a [Arc<Block>],
    pub fixed: &'a [(Label, usize)],
    /// Asked before each step; an error ends the walk.
    pub before: &'a (dyn Fn(usize) -> Result<(), ContractError> + Sync),
}

type Slot<T> = Mutex<Option<T>>;

impl<A: Algebra> Walk<'_, A> {
    /// The last result.
    pub fn run(&self) -> Result<A::Tensor, ContractError> {
        let Some(root) = self.schedule.root else { return self.leaf(0) };
        let slots: Vec<Slot<A::Tensor>> =
            self.program.steps.iter().map(|_| Mutex::new(None)).collect();
        self.segment(root, &slots)?;
        Ok(take(&slots[slots.len() - 1]))
    }

    fn leaf(&self, t: usize) -> Result<A::Tensor, ContractError> {
        self.algebra.leaf(t, &self.program.leaves[t], &self.blocks[t], self.fixed)
    }

    fn operand(&self, node: usize, slots: &[Slot<A::Tensor>]) -> Result<A::Tensor, ContractError> {
        match node.checked_sub(self.program.leaves.len()) {
            None => self.leaf(node),
            Some(s) => Ok(take(&slots[s])),
        }
    }

    fn segment(&self, number: usize, slots: &[Slot<A::Tensor>]) -> Result<(), ContractError> {
        for &item in &self.schedule.segments[number] {
            match item {
                Item::Fork(x, y) => {
                    let (x, y) = rayon::join(|| self.segment(x, slots), || self.segment(y, slots));
                    x?;
                    y?;
                }
                Item::Step(s) => {
                    (self.before)(s)?;
                    let step = &self.program.steps[s];
                    let a = self.operand(step.operands[0], slots)?;
                    let b = self.operand(step.operands[1], slots)?;
                    let made = self.algebra.join(s, step, a, b)?;
                    *slots[s].lock().expect("no thread panics while it holds a slot") = Some(made);
                }
            }
        }
        Ok(())
    }
}

fn take<T>(slot: &Slot<T>) -> T {
    let mut slot = slot.lock().expect("no thread panics while it holds a slot");
    slot.take().expect("a checked plan makes every tensor before its only use")
}
