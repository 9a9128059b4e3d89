//! All slices of a plan: side by side as far as the memory allows, summed in a fixed tree.

use super::arena::Arena;
use super::checkpoint::Checkpoint;
use super::dense::DenseAlgebra;
use super::layout::Layout;
use super::program::Program;
use super::record::{Refusal, decode, encode};
use super::schedule::Schedule;
use super::sparse::SparseAlgebra;
use super::sums::{Node, Sums};
use super::team::Team;
use super::total::Total;
use super::walk::{Numeric, Walk};
use super::{ContractError, Problem, Request};
use crate::linalg::Scalar;
use crate::watch::{News, Watch};
use rayon::prelude::*;
use std::sync::atomic::{AtomicU64, Ordering};

/// Partial sums that a run starts from; a fixed number, so that the sums do not depend on
/// the machine.
const UNITS: u128 = 1024;

/// Leaves of the tree of sums: groups of slices.
pub(super) fn units(slices: u128) -> u64 {
    slices.min(UNITS) as u64
}

/// What is set up once for all slices.
pub(super) struct Setup<'a> {
    pub problem: &'a Problem,
    pub program: &'a Program,
    pub layout: &'a Layout,
    pub schedule: &'a Schedule,
    /// Whether entries that vanish are left out.
    pub sparse: bool,
    /// Slices that may be alive at once.
    pub together: usize,
    /// Bytes that the arena may hold.
    pub room: u64,
    /// Names everything that decides the bits of the partial sums.
    pub key: String,
}

/// Runs all slices; rank 0 gets the total, the others `None`. Also the multiply-adds done.
pub(super) fn run<T: Scalar>(
    setup: &Setup<'_>,
    request: &Request,
    team: &dyn Team,
    watch: &dyn Watch,
) -> Result<(Option<Total<T>>, u128), ContractError> {
    let program = setup.program;
    let arena = Arena::<T>::new(setup.room);
    let dense = DenseAlgebra::new(program, setup.layout, &arena);
    if setup.sparse {
        let algebra = SparseAlgebra::new(program, dense);
        return with(setup, &algebra, &arena, request, team, watch);
    }
    with(setup, &dense, &arena, request, team, watch)
}

fn with<T: Scalar, A: Numeric<T>>(
    setup: &Setup<'_>,
    algebra: &A,
    arena: &Arena<T>,
    request: &Request,
    team: &dyn Team,
    watch: &dyn Watch,
) -> Result<(Option<Total<T>>, u128), ContractError> {
    let program = setup.program;
    let units = units(program.slices);
    let mut sums = Sums::<T>::new(units);
    let checkpoint = match &request.checkpoint {
        Some(folder) => {
            let checkpoint = Checkpoint::open(folder, &setup.key)?;
            checkpoint.load(&mut sums)?;
            Some(checkpoint)
        }
        None => None,
    };
    let missing = sums.missing();
    // What was there before is rank 0's; every rank makes a stretch of what is missing.
    let (rank, size) = (team.rank(), team.size());
    let mine = &missing[missing.len() * rank / size..missing.len() * (rank + 1) / size];
    if rank > 0 {
        sums = Sums::new(units);
    }
    let progress = Progress::new(program, units, mine.len() as u64, watch);
    for wave in mine.chunks(setup.together) {
        let totals: Vec<Result<Total<T>, ContractError>> =
            wave.par_iter().map(|&unit| one_unit(setup, algebra, unit, units, &progress)).collect();
        let mut stopped = None;
        for (&unit, total) in wave.iter().zip(totals) {
            // What other units of the wave have finished is kept.
            match total {
                Ok(total) => insert(&mut sums, (0, unit), total, checkpoint.as_ref())?,
                Err(e) => stopped = stopped.or(Some(e)),
            }
        }
        if let Some(e) = stopped {
            return Err(match e {
                ContractError::Stopped { .. } => {
                    let left = sums.missing().len() as u128;
                    let done = (u128::from(units) - left) * program.slices / u128::from(units);
                    ContractError::Stopped { done, slices: program.slices }
                }
                other => other,
            });
        }
    }
    debug_assert!(arena.peak() <= setup.room, "{} of {} bytes", arena.peak(), setup.room);
    let done = algebra.done();
    if size == 1 {
        let total = sums.into_nodes().pop_first().map(|n| n.1);
        return Ok((total, done));
    }
    let mine: Vec<Vec<u8>> = if rank == 0 {
        Vec::new()
    } else {
        sums.nodes().map(|(node, total)| encode(&setup.key, node, total)).collect()
    };
    let Some(records) = team.gather(mine) else { return Ok((None, done)) };
    for record in records {
        let (node, total) = decode::<T>(&setup.key, &record).map_err(|e| {
            let reason = match e {
                Refusal::Other => "it belongs to another computation".to_owned(),
                Refusal::Damaged(reason) => reason,
            };
            ContractError::Message { reason }
        })?;
        insert(&mut sums, node, total, checkpoint.as_ref())?;
    }
    Ok((sums.into_nodes().pop_first().map(|n| n.1), done))
}

fn insert<T: Scalar>(
    sums: &mut Sums<T>,
    node: Node,
    total: Total<T>,
    checkpoint: Option<&Checkpoint>,
) -> Result<(), ContractError> {
    let (at, mut parts) = sums.insert(node, total);
    if let Some(checkpoint) = checkpoint {
        if at != node {
            parts.push(node);
        }
        checkpoint.save(at, sums.get(at), &parts)?;
    }
    Ok(())
}

/// The slices of one unit, summed in order.
fn one_unit<T: Scalar, A: Numeric<T>>(
    setup: &Setup<'_>,
    algebra: &A,
    unit: u64,
    units: u64,
    progress: &Progress<'_>,
) -> Result<Total<T>, ContractError> {
    let program = setup.program;
    let shape = &setup.problem.shape;
    let whole = program.open.len() == shape.open.len();
    let bound = |u: u64| program.slices * u128::from(u) / u128::from(units);
    let mut total: Option<Total<T>> = None;
    for slice in bound(unit)..bound(unit + 1) {
        let fixed = program.fixed(slice);
        let walk = Walk {
            algebra,
            program,
            schedule: setup.schedule,
            blocks: &setup.problem.blocks,
            fixed: &fixed,
            before: &|step| progress.before(step),
        };
        let (array, exponent) = algebra.finish(walk.run()?);
        match &mut total {
            None if whole => total = Some(Total::of(array, exponent)),
            None => {
                let dims: Vec<usize> =
                    shape.open.iter().map(|l| shape.sizes[l.index()] as usize).collect();
                let mut t = Total::zero(&dims);
                t.add_slice(&shape.open, &fixed, array, exponent);
                total = Some(t);
            }
            Some(t) => t.add_slice(&shape.open, &fixed, array, exponent),
        }
    }
    Ok(total.expect("a unit holds at least one slice"))
}

/// Tells how far the work has come, in millions of multiply-adds, and hears a stop.
struct Progress<'a> {
    watch: &'a dyn Watch,
    steps: Vec<u64>,
    done: AtomicU64,
    told: AtomicU64,
    total: u64,
    slices: u128,
}

/// Multiply-adds are told in this unit.
const MILLION: u64 = 1_000_000;

impl<'a> Progress<'a> {
    fn new(program: &Program, units: u64, mine: u64, watch: &'a dyn Watch) -> Self {
        let steps: Vec<u64> = program
            .steps
            .iter()
            .map(|s| s.multiply_adds.min(u128::from(u64::MAX)) as u64)
            .collect();
        let all = program.multiply_adds().saturating_mul(program.slices) as f64
            * (mine as f64 / units as f64)
            / MILLION as f64;
        watch.tell(News::Stage("contracting (millions of multiply-adds)"));
        Self {
            watch,
            steps,
            done: AtomicU64::new(0),
            told: AtomicU64::new(0),
            total: all.ceil() as u64,
            slices: program.slices,
        }
    }
    fn before(&self, step: usize) -> Result<(), ContractError> {
        if self.watch.stop() {
            return Err(ContractError::Stopped { done: 0, slices: self.slices });
        }
        let done = self.done.fetch_add(self.steps[step], Ordering::Relaxed) / MILLION;
        if done > self.told.fetch_max(done, Ordering::Relaxed) {
            self.watch.tell(News::Progress { done, total: self.total });
        }
        Ok(())
    }
}
