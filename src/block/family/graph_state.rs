//! Perfect tensors with five to eight legs from weighted graphs over finite fields.

use super::perfect_parts::{Recipe, graph, product, recipe, settle};
use super::{Family, Legs};
use crate::block::{Block, BlockError, Request};

pub(super) const FIVE: Family = Family {
    name: "five-leg",
    legs: Legs::Exactly(5),
    dimensions: "every D >= 2",
    construction: "graph state of the ring of five",
    source: "recomputed: all determinantal divisors of every bipartition are 1",
    stabilizer: "over GF(q), q the prime powers of D",
    isometric: "all",
    options: &[],
    make,
};

pub(super) const SIX: Family = Family {
    name: "six-leg",
    legs: Legs::Exactly(6),
    dimensions: "every D >= 2",
    construction: "graph state of six vertices joined at cyclic distances 2 and 3",
    source: "recomputed: every off-diagonal 3 x 3 minor is 1 or -1",
    stabilizer: "over GF(q), q the prime powers of D",
    isometric: "all",
    options: &[],
    make,
};

pub(super) const SEVEN: Family = Family {
    name: "seven-leg",
    legs: Legs::Exactly(7),
    dimensions: "products of odd prime powers and of 4, 8, 16, ...",
    construction: "circulant graph states (graph); MDS codes from q = 7 on (mds)",
    source: "recomputed by ranks; codes arXiv:1701.03359",
    stabilizer: "over GF(q), q the prime powers of D",
    isometric: "all",
    options: &[],
    make,
};

pub(super) const EIGHT: Family = Family {
    name: "eight-leg",
    legs: Legs::Exactly(8),
    dimensions: "products of prime powers from 5 on",
    construction: "double-circulant graph states (graph, at 5, 7, 8, 9); MDS codes from q = 7 \
                   on (mds)",
    source: "recomputed by ranks; codes arXiv:1701.03359",
    stabilizer: "over GF(q), q the prime powers of D",
    isometric: "all",
    options: &[],
    make,
};

/// `graph` and `mds` as constructions; without a choice, what exists, graphs first.
pub(super) fn make(request: &Request) -> Result<Block, BlockError> {
    let d = request.one_dimension()?;
    let n = request.dims.len();
    settle(n, d)?;
    match request.construction.as_deref() {
        None => product(request, recipe),
        Some("graph") => product(request, |n, q| graph(n, q).map(Recipe::Graph)),
        Some("mds") => product(request, |n, q| (q + 1 >= n as u64).then_some(Recipe::Code)),
        Some(other) => Err(BlockError::UnknownConstruction {
            family: request.family.clone(),
            dimension: d,
            name: other.to_owned(),
            known: "graph, mds".to_owned(),
        }),
    }
}
