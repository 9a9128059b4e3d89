//! Perfect tensors from weighted graphs over finite fields.

use super::{Family, Legs};
use crate::block::existence::obstruction;
use crate::block::{Block, BlockError, PrimePart, Request, Stabilizer};
use crate::field::{Field, factorise};

pub(super) const FIVE: Family = Family {
    name: "five-leg",
    legs: Legs::Exactly(5),
    dimensions: "every D >= 2",
    construction: "graph state of the ring of five",
    source: "recomputed here: every bipartition's determinantal divisors are 1",
    stabilizer: "over GF(q) for each prime power q of D",
    isometric: "all",
    options: &[],
    make: |r| circulant(r, &[1, 0]),
};

pub(super) const SIX: Family = Family {
    name: "six-leg",
    legs: Legs::Exactly(6),
    dimensions: "every D >= 2",
    construction: "graph state of six vertices joined at cyclic distances 2 and 3",
    source: "recomputed here: every off-diagonal 3 x 3 minor is 1 or -1",
    stabilizer: "over GF(q) for each prime power q of D",
    isometric: "all",
    options: &[],
    make: |r| circulant(r, &[0, 1, 1]),
};

/// The graph whose edge between vertices at cyclic distance k weighs `weights[k − 1]`, over
/// every prime power of the dimension.
fn circulant(request: &Request, weights: &[u32]) -> Result<Block, BlockError> {
    let d = request.one_dimension()?;
    let n = request.dims.len();
    if let Some(refusal) = obstruction(n, d).and_then(|e| e.refusal(n, d)) {
        return Err(refusal);
    }
    let adjacency: Vec<Vec<u32>> = (0..n)
        .map(|i| {
            (0..n)
                .map(|j| match i.abs_diff(j) {
                    0 => 0,
                    apart => weights[apart.min(n - apart) - 1],
                })
                .collect()
        })
        .collect();
    let mut parts = Vec::new();
    for (p, m) in factorise(d as u64) {
        let field = Field::new(p.pow(m)).expect("dimensions stay below 2^16");
        parts.push(PrimePart::from_graph(&field, &adjacency));
    }
    Stabilizer::new(parts).into_perfect(&request.family, n, d)
}
