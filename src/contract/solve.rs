//! Runs a plan from end to end.

use super::dense::is_real;
use super::layout::{Layout, Numbers};
use super::program::Program;
use super::record::hex;
use super::schedule::Schedule;
use super::slices::{self, Setup};
use super::slicing;
use super::sparse;
use super::team::{Alone, Team};
use super::walk::Walk;
use super::{Algebra, ContractError, Forecast, Kind, Outcome, Precision, Problem, Request};
use crate::block::{Block, Entries};
use crate::linalg::Scalar;
use crate::network::Network;
use crate::order::{Plan, Shape};
use crate::tensor::{Dense, DenseTensor};
use crate::watch::Watch;
use num_complex::{Complex32, Complex64};
use sha2::{Digest, Sha256};
use std::sync::Arc;

impl Problem {
    /// The contraction of a whole network.
    pub fn of(network: &Network) -> Self {
        Self {
            shape: Shape::of(network),
            blocks: network.tensor_ids().map(|t| Arc::clone(network.block(t))).collect(),
        }
    }
}

/// Contracts a network along a plan. The axes of the result are the boundary legs, then the
/// bulk legs.
///
/// ```
/// use lierne::{block, contract, network::NetworkBuilder, order, watch::Silent};
/// use std::sync::Arc;
/// let mut b = NetworkBuilder::new("two");
/// let [x, y, z] = ["x", "y", "z"].map(|n| b.label(n, 3));
/// let request = block::Request { family: "identity".into(), dims: vec![3, 3], ..Default::default() };
/// let one = Arc::new(block::make(&request)?);
/// b.tensor(None, &[x, y], &one)?;
/// b.tensor(None, &[y, z], &one)?;
/// b.boundary([x, z]);
/// let network = b.finish()?;
/// let found = order::search(&order::Shape::of(&network), &Default::default(), &Silent)?;
/// let outcome = contract::run(&network, &found.plan, &Default::default(), &Silent)?;
/// assert_eq!(outcome.multiply_adds, 27);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
///
/// # Errors
/// As [`solve`].
pub fn run(
    network: &Network,
    plan: &Plan,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Outcome, ContractError> {
    solve(&Problem::of(network), plan, request, watch)
}

/// Contracts a problem along a plan.
///
/// Time as the plan's multiply-adds say; memory as [`forecast`] says, never more.
///
/// # Errors
/// [`ContractError`]: the plan or the blocks do not fit the shape, an entry is no finite
/// number, the memory does not suffice, a checkpoint cannot be used, or the caller stopped it.
pub fn solve(
    problem: &Problem,
    plan: &Plan,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Outcome, ContractError> {
    let outcome = share(problem, plan, request, &Alone, watch)?;
    Ok(outcome.expect("a single process gets the result"))
}

/// As [`solve`], the slices spread over the processes of a team. All of them call it with
/// the same arguments; rank 0 gets the result, with the same bits as a single process would,
/// the others `None`.
///
/// # Errors
/// As [`solve`]; an error of one rank is that rank's alone, the caller ends the others.
pub fn share(
    problem: &Problem,
    plan: &Plan,
    request: &Request,
    team: &dyn Team,
    watch: &dyn Watch,
) -> Result<Option<Outcome>, ContractError> {
    let ready = Ready::new(problem, plan, request)?;
    let run = match (ready.real, request.precision) {
        (true, Precision::Double) => finish::<f64>,
        (false, Precision::Double) => finish::<Complex64>,
        (true, Precision::Single) => finish::<f32>,
        (false, Precision::Single) => finish::<Complex32>,
    };
    let setup = Setup {
        problem,
        program: &ready.program,
        layout: &ready.layout,
        schedule: &ready.schedule,
        sparse: ready.sparse,
        together: ready.together,
        room: ready.arena,
        key: if request.checkpoint.is_some() || team.size() > 1 {
            key(problem, &ready, request)
        } else {
            String::new()
        },
    };
    let (data, done) = run(&setup, request, team, watch)?;
    let Some((data, log10_scale)) = data else { return Ok(None) };
    Ok(Some(Outcome {
        tensor: DenseTensor::new(problem.shape.open.clone(), data).expect("one label an axis"),
        log10_scale,
        multiply_adds: ready.program.multiply_adds().saturating_mul(ready.program.slices),
        done,
        peak_bytes: ready.bytes,
        slices: ready.program.slices,
        sliced: ready.plan.sliced,
    }))
}

/// Runs a plan on any algebra, in the plan's own order of steps, and gives the last tensor.
/// Labels that the plan slices are not sliced: an algebra whose tensors are small has no need
/// of it.
///
/// # Errors
/// [`ContractError`]: the plan or the blocks do not fit the shape, the caller stopped it, or
/// whatever the algebra finds.
pub fn on_algebra<A: Algebra>(
    problem: &Problem,
    plan: &Plan,
    algebra: &A,
    watch: &dyn Watch,
) -> Result<A::Tensor, ContractError> {
    check(problem)?;
    let plan = Plan { steps: plan.steps.clone(), sliced: Vec::new() };
    let program = Program::compile(&problem.shape, &plan)?;
    let schedule = Schedule::in_order(&program);
    let walk = Walk {
        algebra,
        program: &program,
        schedule: &schedule,
        blocks: &problem.blocks,
        fixed: &[],
        before: &|_| match watch.stop() {
            true => Err(ContractError::Stopped { done: 0, slices: 1 }),
            false => Ok(()),
        },
    };
    walk.run()
}

/// What [`solve`] would take, without doing it.
///
/// # Errors
/// As [`solve`] before it starts to contract.
pub fn forecast(
    problem: &Problem,
    plan: &Plan,
    request: &Request,
) -> Result<Forecast, ContractError> {
    let ready = Ready::new(problem, plan, request)?;
    Ok(Forecast {
        bytes: ready.bytes,
        seconds: ready.layout.nanoseconds * 1e-9 * ready.program.slices as f64,
        slices: ready.program.slices,
        plan: ready.plan,
    })
}

type Finished = (Option<(Dense, f64)>, u128);

fn finish<T: Scalar>(
    setup: &Setup<'_>,
    request: &Request,
    team: &dyn Team,
    watch: &dyn Watch,
) -> Result<Finished, ContractError> {
    let (total, done) = slices::run::<T>(setup, request, team, watch)?;
    let data = total.map(|t| {
        let (values, log10_scale) = t.finish();
        let data = if T::COMPLEX {
            Dense::Complex(values.mapv_into_any(T::to_c64))
        } else {
            Dense::Real(values.mapv_into_any(|x| x.to_c64().re))
        };
        (data, log10_scale)
    });
    Ok((data, done))
}

/// A plan made ready to run within the memory.
struct Ready {
    plan: Plan,
    program: Program,
    layout: Layout,
    schedule: Schedule,
    real: bool,
    sparse: bool,
    together: usize,
    arena: u64,
    bytes: u64,
}

impl Ready {
    fn new(problem: &Problem, plan: &Plan, request: &Request) -> Result<Self, ContractError> {
        check(problem)?;
        // Of tensors that share a block one is looked at.
        let mut distinct: Vec<&Arc<Block>> = problem.blocks.iter().collect();
        distinct.sort_by_key(|b| Arc::as_ptr(b));
        distinct.dedup_by_key(|b| Arc::as_ptr(b));
        let real = distinct.iter().all(|b| is_real(b.entries()));
        let numbers = match (real, request.precision) {
            (true, Precision::Double) => Numbers::of::<f64>(),
            (false, Precision::Double) => Numbers::of::<Complex64>(),
            (true, Precision::Single) => Numbers::of::<f32>(),
            (false, Precision::Single) => Numbers::of::<Complex32>(),
        };
        let sparse = request.kind == Kind::Automatic && distinct.iter().any(|b| sparse::pays(b));
        let stored: u64 = distinct.iter().map(|b| stored_bytes(b.entries())).sum();
        let limit = request.memory.unwrap_or(u64::MAX);
        let mut plan = plan.clone();
        let mut fewest = u64::MAX;
        loop {
            let ready = Self::fit(problem, &plan, numbers, (real, sparse), stored, limit)?;
            if ready.bytes <= limit {
                return Ok(ready);
            }
            fewest = fewest.min(ready.bytes);
            match slicing::one_more(&problem.shape, &plan)? {
                Some(next) if next.sliced.len() < 64 => plan = next,
                _ => return Err(ContractError::Memory { needed: fewest, limit }),
            }
        }
    }

    fn fit(
        problem: &Problem,
        plan: &Plan,
        numbers: Numbers,
        (real, sparse): (bool, bool),
        stored: u64,
        limit: u64,
    ) -> Result<Self, ContractError> {
        let shape = &problem.shape;
        let program = Program::compile(shape, plan)?;
        program.addressable()?;
        let layout = Layout::plan(&program, numbers);
        let entries: Vec<u64> =
            problem.blocks.iter().map(|b| b.dims().iter().map(|&d| d as u64).product()).collect();
        let result: u64 = shape
            .open
            .iter()
            .fold(numbers.bytes as u64, |s, l| s.saturating_mul(shape.sizes[l.index()]));
        // Partial sums: one a level of the tree, one a slice at work, one that is added.
        let (held, kept) = if program.slices == 1 {
            (0, 0)
        } else {
            let levels = u64::from(slices::units(program.slices).ilog2()) + 3;
            let leaves: u64 =
                program.leaves.iter().map(|l| program.entries(&l.labels) as u64).sum();
            (result.saturating_mul(levels), leaves.saturating_mul(numbers.bytes as u64))
        };
        let base = stored.saturating_add(held).saturating_add(kept);
        let room = limit.saturating_sub(base);
        let schedule = Schedule::plan(&program, &layout, numbers, &entries, room);
        let one = schedule.peak.saturating_add(if program.slices > 1 { result } else { 0 });
        let fitting = (room / one.max(1)).max(1);
        let together = fitting
            .min(rayon::current_num_threads() as u64)
            .min(slices::units(program.slices)) as usize;
        // What is forecast does not depend on the number of threads.
        let bytes = base.saturating_add(one);
        let arena = one.saturating_mul(together as u64);
        Ok(Self {
            plan: plan.clone(),
            program,
            layout,
            schedule,
            real,
            sparse,
            together,
            arena,
            bytes,
        })
    }
}

fn stored_bytes(entries: &Entries) -> u64 {
    match entries {
        Entries::Sparse(s) => s.index().len() as u64 * 24,
        Entries::Dense(Dense::Real(a)) => a.len() as u64 * 8,
        Entries::Dense(Dense::Complex(a)) => a.len() as u64 * 16,
    }
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

/// SHA-256 over everything that decides the bits of a partial sum.
fn key(problem: &Problem, ready: &Ready, request: &Request) -> String {
    let mut hash = Sha256::new();
    hash.update(env!("CARGO_PKG_VERSION"));
    hash.update(problem.shape.hash());
    for &(a, b) in &ready.plan.steps {
        hash.update(a.to_le_bytes());
        hash.update(b.to_le_bytes());
    }
    hash.update([0xff]);
    for l in &ready.plan.sliced {
        hash.update(l.number().to_le_bytes());
    }
    hash.update(format!("{:?} {:?}", request.precision, request.kind));
    let mut known: Vec<(*const Block, [u8; 32])> = Vec::new();
    for block in &problem.blocks {
        let at = Arc::as_ptr(block);
        let digest = match known.iter().find(|k| k.0 == at) {
            Some(k) => k.1,
            None => {
                let mut h = Sha256::new();
                let sparse = block.entries().to_sparse();
                for (i, v) in sparse.index().iter().zip(sparse.value()) {
                    h.update(i.to_le_bytes());
                    h.update(v.re.to_le_bytes());
                    h.update(v.im.to_le_bytes());
                }
                let digest: [u8; 32] = h.finalize().into();
                known.push((at, digest));
                digest
            }
        };
        hash.update(digest);
    }
    hex(&hash.finalize())
}
