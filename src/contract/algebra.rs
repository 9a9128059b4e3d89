//! What a plan runs on.

use super::{ContractError, Leaf, Step};
use crate::block::Block;
use crate::tensor::Label;

/// A kind of tensor on which a plan can be run: how an input becomes one, how two become
/// one, and what that takes.
///
/// The driver hands over every operand at its last use, so that an implementation may free
/// or re-use it. It calls from several threads at once, in an order that respects the plan's
/// tree; the results must not depend on that order.
///
/// To add an algebra: a type whose value holds what all tensors of a run share, and a
/// `Tensor` that carries one intermediate. An algebra over a finite field has a subspace of
/// GF(q)^2n as `Tensor`, its `leaf` reads [`Block::stabilizer`], its `join` intersects on the
/// labels in [`Step::sum`] and [`Step::batch`].
pub trait Algebra: Sync {
    /// One intermediate.
    type Tensor: Send;

    /// Brings an input into its leaf form: `fixed` labels at their values, diagonals taken,
    /// labels that are not in `leaf.labels` summed over. `number` is the leaf's.
    ///
    /// # Errors
    /// Where the block cannot be read in this algebra.
    fn leaf(
        &self,
        number: usize,
        leaf: &Leaf,
        block: &Block,
        fixed: &[(Label, usize)],
    ) -> Result<Self::Tensor, ContractError>;

    /// Carries out step `number`. `a` and `b` are its operands in the step's order.
    ///
    /// # Errors
    /// Where the result cannot be formed.
    fn join(
        &self,
        number: usize,
        step: &Step,
        a: Self::Tensor,
        b: Self::Tensor,
    ) -> Result<Self::Tensor, ContractError>;

    /// Estimated time of step `number` for these operands, in nanoseconds of one thread.
    fn cost(&self, number: usize, step: &Step, a: &Self::Tensor, b: &Self::Tensor) -> f64;
}
