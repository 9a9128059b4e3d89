//! Evidence by contraction: the piece as a matrix between its two cuts.

use super::Spectrum;
use super::answer::{EntropyError, Price, Request, Unsolved};
use super::decompose::singular_values;
use super::sectors::Sectors;
use super::solve::Solved;
use super::the_core::Piece;
use crate::block::{Block, Entries};
use crate::contract::{self, Problem};
use crate::network::TensorId;
use crate::order::{self, Found, Shape};
use crate::tensor::Dense;
use crate::watch::Watch;
use std::sync::Arc;

/// Singular values below this times the greatest are taken for zeros.
const RANK_CUT: f64 = 1e-12;

/// Contracts a piece and takes the singular values of the matrix between its sides.
pub(super) fn by_contraction(
    piece: &Piece,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Solved, EntropyError> {
    let network = &piece.network;
    let shape = Shape::of(network);
    let sectors = Sectors::of(piece);
    let (found, price) = price(piece, &shape, &sectors, request, watch)?;
    if !request.contraction {
        return Ok(Solved::Refused(Unsolved::NotAdmitted, Some(price)));
    }
    if price.log2_bytes > (request.memory_bytes as f64).log2() {
        return Ok(Solved::Refused(Unsolved::Memory, Some(price)));
    }
    if price.log10_multiply_adds() > request.log10_multiply_adds {
        return Ok(Solved::Refused(Unsolved::Work, Some(price)));
    }
    if watch.stop() || watch.seconds() > request.seconds {
        return Ok(Solved::Refused(Unsolved::Time, Some(price)));
    }
    let blocks = network.tensor_ids().map(|t| Arc::clone(network.block(t))).collect();
    let problem = Problem { shape, blocks };
    let contract = contract::Request::default();
    let outcome = contract::solve(&problem, &found.plan, &contract, watch)?;
    let rows: usize =
        network.boundary()[..piece.region_legs].iter().map(|&l| network.dim(l)).product();
    let (_, data) = outcome.tensor.into_parts();
    let values = match data {
        Dense::Real(a) => singular_values(&a, rows, &sectors)?,
        Dense::Complex(a) => singular_values(&a, rows, &sectors)?,
    };
    let Some(spectrum) = Spectrum::of_singular_values(&values, RANK_CUT) else {
        return Err(EntropyError::Zero { tensor: network.tensor_name(TensorId::new(0)) });
    };
    // Each of the n probabilities is off by about ε·√n of the norm, and
    // d(−p ln p) = −(1 + ln p) dp.
    let n = values.len().max(1) as f64;
    let error = 4.0 * f64::EPSILON * n.sqrt() * (1.0 + n.ln());
    Ok(Solved::Values(spectrum, price, error))
}

fn price(
    piece: &Piece,
    shape: &Shape,
    sectors: &Sectors,
    request: &Request,
    watch: &dyn Watch,
) -> Result<(Found, Price), EntropyError> {
    let network = &piece.network;
    let log2 = |labels: &[crate::tensor::Label]| -> f64 {
        labels.iter().map(|&l| (network.dim(l) as f64).log2()).sum()
    };
    let (region, complement) = network.boundary().split_at(piece.region_legs);
    let (log2_rows, log2_columns) = (log2(region), log2(complement));
    let complex = network.blocks().iter().any(|b| !is_real(b));
    let log2_element = if complex { 4.0 } else { 3.0 };
    let order = order::Request { seed: request.seed, work: 100_000, ..order::Request::default() };
    let found = order::search(shape, &order, watch)?;
    let short = log2_rows.min(log2_columns);
    // About 8/3·m·n² real multiply-adds for the singular values of a block, four times that
    // where it is complex; blocks that a shift relates are solved once, and a shift that keeps
    // a block splits it further.
    let (blocks, different, split) = sectors.count();
    let log2_triples = log2_rows + log2_columns + short - 3.0 * blocks.log2();
    let log10_decomposition = (log2_triples + different.log2() - 2.0 * split.log2()) * 2f64.log10()
        + if complex { 1.0 } else { 0.4 };
    let matrix = log2_rows + log2_columns + log2_element;
    let work = matrix - 2.0 * blocks.log2() + 2.0;
    let price = Price {
        log10_contraction: found.cost.log10_multiply_adds,
        log10_decomposition,
        // Beside the matrix stand one block and the decomposition's copies of it.
        log2_bytes: (found.cost.log2_peak_elements + log2_element)
            .max((matrix.exp2() + work.exp2()).log2()),
        log2_rows,
        log2_columns,
    };
    Ok((found, price))
}

fn is_real(block: &Block) -> bool {
    match block.entries() {
        Entries::Dense(Dense::Real(_)) => true,
        Entries::Dense(Dense::Complex(a)) => a.iter().all(|x| x.im == 0.0),
        Entries::Sparse(s) => s.value().iter().all(|x| x.im == 0.0),
    }
}
