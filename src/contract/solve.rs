//! Runs a plan from end to end.

use super::algebra::Algebra;
use super::dense::{DenseAlgebra, DenseOf, is_real};
use super::layout::Layout;
use super::program::Program;
use super::total::Total;
use super::{ContractError, Outcome, Problem, Request};
use crate::block::Block;
use crate::linalg::Scalar;
use crate::network::Network;
use crate::order::{Plan, Shape};
use crate::tensor::{Dense, DenseTensor, Label};
use crate::watch::{News, Watch};
use ndarray::ArrayD;
use num_complex::Complex64;
use std::sync::Arc;

/// Contracts a network along a plan. The axes of the result are the boundary legs, then the
/// bulk legs.
///
/// # Errors
/// [`ContractError`].
pub fn run(
    network: &Network,
    plan: &Plan,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Outcome, ContractError> {
    let problem = Problem {
        shape: Shape::of(network),
        blocks: network.tensor_ids().map(|t| Arc::clone(network.block(t))).collect(),
    };
    solve(&problem, plan, request, watch)
}

/// Contracts a problem along a plan.
///
/// Time as the plan's multiply-adds say; memory as its peak.
///
/// # Errors
/// [`ContractError`].
pub fn solve(
    problem: &Problem,
    plan: &Plan,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Outcome, ContractError> {
    let _ = request;
    let shape = &problem.shape;
    check(problem)?;
    let program = Program::compile(shape, plan)?;
    let layout = Layout::plan(&program);
    let mut seen: Vec<*const Block> = Vec::new();
    let real = problem.blocks.iter().all(|b| {
        // Blocks are shared; each is looked at once.
        if seen.contains(&Arc::as_ptr(b)) {
            return true;
        }
        seen.push(Arc::as_ptr(b));
        is_real(b.entries())
    });
    let shared = DenseAlgebra::new(&program, &layout);
    let (data, log10_scale) = if real {
        let (a, s) = slices::<f64>(problem, &program, &shared, watch)?;
        (Dense::Real(a), s)
    } else {
        let (a, s) = slices::<Complex64>(problem, &program, &shared, watch)?;
        (Dense::Complex(a), s)
    };
    Ok(Outcome {
        tensor: DenseTensor::new(shape.open.clone(), data).expect("one label an axis"),
        log10_scale,
        multiply_adds: shared.multiply_adds(),
        peak_bytes: shared.peak_bytes(),
    })
}

fn check(problem: &Problem) -> Result<(), ContractError> {
    let (blocks, tensors) = (problem.blocks.len(), problem.shape.tensors.len());
    if blocks != tensors {
        return Err(ContractError::BlockCount { blocks, tensors });
    }
    problem.shape.check()?;
    for (tensor, (block, labels)) in problem.blocks.iter().zip(&problem.shape.tensors).enumerate() {
        let expected: Vec<u64> = labels.iter().map(|l| problem.shape.sizes[l.index()]).collect();
        if !block.dims().iter().map(|&d| d as u64).eq(expected.iter().copied()) {
            return Err(ContractError::BlockShape {
                tensor,
                expected,
                found: block.dims().to_vec(),
            });
        }
    }
    Ok(())
}

fn slices<T: Scalar>(
    problem: &Problem,
    program: &Program,
    shared: &DenseAlgebra<'_>,
    watch: &dyn Watch,
) -> Result<(ArrayD<T>, f64), ContractError> {
    let shape = &problem.shape;
    let algebra = DenseOf::<T>::new(shared);
    let dims: Vec<usize> = shape.open.iter().map(|l| shape.sizes[l.index()] as usize).collect();
    let mut total = Total::zero(&shape.open, &dims);
    watch.tell(News::Stage("contracting"));
    for slice in 0..program.slices {
        let fixed = program.fixed(slice);
        let stopped = ContractError::Stopped { done: slice, slices: program.slices };
        let root = one_slice(&algebra, program, &problem.blocks, &fixed, watch, &stopped)?;
        let (array, exponent) = algebra.finish(root);
        total.add(&fixed, array, exponent);
        watch.tell(News::Progress {
            done: (slice + 1).min(u128::from(u64::MAX)) as u64,
            total: program.slices.min(u128::from(u64::MAX)) as u64,
        });
    }
    Ok(total.finish())
}

/// Walks the plan once.
fn one_slice<A: Algebra>(
    algebra: &A,
    program: &Program,
    blocks: &[Arc<Block>],
    fixed: &[(Label, usize)],
    watch: &dyn Watch,
    stopped: &ContractError,
) -> Result<A::Tensor, ContractError> {
    let n = program.leaves.len();
    let mut results: Vec<Option<A::Tensor>> = Vec::with_capacity(program.steps.len());
    let leaf = |t: usize| algebra.leaf(t, &program.leaves[t], &blocks[t], fixed);
    for (number, step) in program.steps.iter().enumerate() {
        if watch.stop() {
            return Err(stopped.clone());
        }
        let mut take = |t: usize| match t.checked_sub(n) {
            None => leaf(t),
            Some(s) => Ok(results[s].take().expect("a checked plan uses a tensor once")),
        };
        let (a, b) = (take(step.operands[0])?, take(step.operands[1])?);
        results.push(Some(algebra.join(number, step, a, b)?));
    }
    match results.pop() {
        Some(root) => Ok(root.expect("the last result is nobody's operand")),
        None => leaf(0),
    }
}
