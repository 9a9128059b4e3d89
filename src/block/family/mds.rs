//! States from maximum-distance-separable codes.

use super::perfect_parts::{Recipe, product, settle};
use super::{Family, Legs};
use crate::block::existence::{Existence, obstruction};
use crate::block::{Block, BlockError, Request};
use crate::field::factorise;

pub(super) const FAMILY: Family = Family {
    name: "mds",
    legs: Legs::AtLeast(2),
    dimensions: "every prime power of D at least n - 1",
    construction: "sum of the words of an evaluation code [n, n/2] over GF(q), entries 1",
    source: "arXiv:1701.03359",
    stabilizer: "over GF(q), q the prime powers of D",
    isometric: "all",
    options: &[],
    make,
};

fn make(request: &Request) -> Result<Block, BlockError> {
    let d = request.one_dimension()?;
    let n = request.dims.len();
    if let Some(e @ (Existence::Impossible(_) | Existence::Open(_))) = obstruction(n, d) {
        return Err(e.refusal(n, d).expect("neither of them is built"));
    }
    if factorise(d as u64).iter().any(|&(p, m)| p.pow(m) + 1 < n as u64) {
        return Err(BlockError::WrongDimensions {
            family: request.family.clone(),
            expected: format!("prime powers of at least {} in every dimension", n - 1),
            dims: request.dims.clone(),
        });
    }
    settle(n, d)?;
    product(request, |_, _| Some(Recipe::Code))
}
