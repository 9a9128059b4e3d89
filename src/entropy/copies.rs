//! Rényi-2 entropy of a piece by contracting four copies of it.

use super::answer::{EntropyError, Request};
use super::the_core::Piece;
use crate::block::{Block, Entries, IsometryTable};
use crate::contract::{self, Problem};
use crate::order::{self, Shape};
use crate::tensor::{Dense, Label};
use crate::watch::Watch;
use std::sync::Arc;

/// log10 of the most multiply-adds that are spent on what only improves a bound.
const MOST_WORK: f64 = 9.0;

/// S₂ = −ln(tr ρ² / (tr ρ)²) of a piece, in nats, where its contraction fits the budget.
///
/// tr ρ² joins two copies and two conjugated ones: copies 0 and 1 share the complement's
/// legs, as do 2 and 3; 1 and 2 share the region's, as do 3 and 0. No matrix between the two
/// sides is ever formed, so this may fit where a spectrum does not. S₂ ≤ S.
pub(super) fn renyi2(
    piece: &Piece,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Option<f64>, EntropyError> {
    let Some(four) = value(piece, 4, request, watch)? else { return Ok(None) };
    let Some(two) = value(piece, 2, request, watch)? else { return Ok(None) };
    if !four.is_finite() || !two.is_finite() {
        return Ok(None);
    }
    Ok(Some(2.0 * two - four))
}

/// ln of the closed ring of `copies` copies: tr ρ for two, tr ρ² for four.
fn value(
    piece: &Piece,
    copies: usize,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Option<f64>, EntropyError> {
    let network = &piece.network;
    let one = Shape::of(network);
    let mut shape = Shape::default();
    let mut blocks = Vec::new();
    let mut shared: Vec<Option<usize>> = vec![None; one.sizes.len()];
    for (k, l) in network.boundary().iter().enumerate() {
        shared[l.index()] = Some(k);
    }
    let conjugates: Vec<Arc<Block>> = network.blocks().iter().map(conjugate).collect();
    // Label of an open leg between copy c and the next: complement legs join 2k and 2k + 1,
    // region legs join 2k + 1 and 2k + 2.
    let open = network.boundary().len();
    let mut of_open = vec![vec![Label::new(0); open]; copies];
    for (k, boundary) in network.boundary().iter().enumerate() {
        for pair in 0..copies / 2 {
            let first = 2 * pair + usize::from(k < piece.region_legs);
            let label = Label::new(shape.sizes.len() as u32);
            shape.sizes.push(one.sizes[boundary.index()]);
            of_open[first][k] = label;
            of_open[(first + 1) % copies][k] = label;
        }
    }
    for (copy, open_labels) in of_open.iter().enumerate() {
        let mut own = vec![None; one.sizes.len()];
        for t in network.tensor_ids() {
            let labels = network
                .legs(t)
                .iter()
                .map(|l| match shared[l.index()] {
                    Some(k) => open_labels[k],
                    None => *own[l.index()].get_or_insert_with(|| {
                        shape.sizes.push(one.sizes[l.index()]);
                        Label::new(shape.sizes.len() as u32 - 1)
                    }),
                })
                .collect();
            shape.tensors.push(labels);
            blocks.push(if copy % 2 == 0 {
                Arc::clone(network.block(t))
            } else {
                Arc::clone(&conjugates[network.block_number(t)])
            });
        }
    }
    let order = order::Request { seed: request.seed, work: 200_000, ..Default::default() };
    let found = order::search(&shape, &order, watch)?;
    if found.cost.log10_multiply_adds > request.log10_multiply_adds.min(MOST_WORK)
        || found.cost.log2_peak_elements + 4.0 > (request.memory_bytes as f64).log2()
        || watch.stop()
        || watch.seconds() > request.seconds
    {
        return Ok(None);
    }
    let problem = Problem { shape, blocks };
    let outcome = contract::solve(&problem, &found.plan, &contract::Request::default(), watch)?;
    let number = match outcome.tensor.data() {
        Dense::Real(a) => a.iter().copied().next(),
        Dense::Complex(a) => a.iter().map(|x| x.re).next(),
    };
    Ok(number.map(|x| x.ln() + outcome.log10_scale * std::f64::consts::LN_10))
}

/// The complex conjugate of a block.
pub(super) fn conjugate(block: &Arc<Block>) -> Arc<Block> {
    let real = match block.entries() {
        Entries::Dense(Dense::Real(_)) => true,
        Entries::Dense(Dense::Complex(a)) => a.iter().all(|x| x.im == 0.0),
        Entries::Sparse(s) => s.value().iter().all(|x| x.im == 0.0),
    };
    if real {
        return Arc::clone(block);
    }
    let source = Arc::clone(block);
    Arc::new(Block::lazy(
        format!("{} conjugated", block.name()),
        block.dims().to_vec(),
        IsometryTable::unknown(block.dims().len()),
        None,
        move || match source.entries() {
            Entries::Dense(d) => Entries::Dense(Dense::Complex(d.to_complex().mapv(|x| x.conj()))),
            Entries::Sparse(s) => Entries::Sparse(crate::block::SparseEntries::collect(
                s.dims().to_vec(),
                s.index().iter().copied().zip(s.value().iter().map(|x| x.conj())).collect(),
            )),
        },
    ))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::entropy::contraction::by_contraction;
    use crate::entropy::solve::Solved;
    use crate::entropy::testing::ring;
    use crate::watch::Silent;

    #[test]
    fn four_copies_give_the_second_renyi_entropy_of_the_spectrum() {
        let request = Request::default();
        for (n, dim) in [(2, 3), (3, 3), (2, 6), (4, 3)] {
            let piece = ring(n, dim);
            let Solved::Values(spectrum, ..) =
                by_contraction(&piece, &request, &Silent).expect("it runs")
            else {
                panic!("a ring of {n} fits the budget")
            };
            let copies = renyi2(&piece, &request, &Silent).expect("it runs").expect("it fits");
            assert!((copies - spectrum.renyi(2.0)).abs() < 1e-10, "{n}, {dim}: {copies}");
        }
    }
}
