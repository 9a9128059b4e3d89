//! Tensors that hold legs equal: Bell pair, copy, identity.

use super::{Family, Legs};
use crate::block::{Block, BlockError, PrimePart, Request, Stabilizer};
use crate::field::factorise;

pub(super) const BELL: Family = Family {
    name: "bell",
    legs: Legs::Exactly(2),
    dimensions: "every D",
    construction: "1 where both legs agree",
    source: "the maximally entangled pair",
    stabilizer: "over GF(p) for each prime p of D",
    isometric: "all",
    options: &[],
    make: copy,
};

pub(super) const COPY: Family = Family {
    name: "copy",
    legs: Legs::AtLeast(2),
    dimensions: "every D",
    construction: "1 where all legs agree",
    source: "the state of Greenberger, Horne and Zeilinger, unnormalised",
    stabilizer: "over GF(p) for each prime p of D",
    isometric: "any one leg",
    options: &[],
    make: copy,
};

pub(super) const IDENTITY: Family = Family {
    name: "identity",
    legs: Legs::Even,
    dimensions: "any, leg i and leg n/2 + i alike",
    construction: "1 where leg i agrees with leg n/2 + i for every i",
    source: "the identity map from the first half of the legs to the second",
    stabilizer: "over GF(p) for each prime p of the dimensions",
    isometric: "sets that hold at most one leg of every pair",
    options: &[],
    make: identity,
};

fn copy(request: &Request) -> Result<Block, BlockError> {
    let d = request.one_dimension()?;
    let n = request.dims.len();
    build(request, |leg| leg == 0, |_| 0, d as u128, n)
}

fn identity(request: &Request) -> Result<Block, BlockError> {
    let half = request.dims.len() / 2;
    if request.dims[..half] != request.dims[half..] {
        return Err(BlockError::WrongDimensions {
            family: request.family.clone(),
            expected: "the same dimensions in both halves".to_owned(),
            dims: request.dims.clone(),
        });
    }
    let norm = request.dims[..half].iter().map(|&d| d as u128).product();
    build(request, |leg| leg < half, |leg| leg % half, norm, request.dims.len())
}

/// The code in which leg l repeats leg `head(l)`, where `is_head` says which legs lead.
fn build(
    request: &Request,
    is_head: impl Fn(usize) -> bool,
    head: impl Fn(usize) -> usize,
    norm_squared: u128,
    legs: usize,
) -> Result<Block, BlockError> {
    let dims = request.dims.clone();
    let mut primes: Vec<u64> =
        dims.iter().flat_map(|&d| factorise(d as u64)).map(|(p, _)| p).collect();
    primes.sort_unstable();
    primes.dedup();
    let mut parts = Vec::new();
    for p in primes {
        let digits: Vec<u32> = dims
            .iter()
            .map(|&d| factorise(d as u64).iter().find(|f| f.0 == p).map_or(0, |f| f.1))
            .collect();
        let starts: Vec<usize> = digits
            .iter()
            .scan(0, |at, &d| {
                let here = *at;
                *at += d as usize;
                Some(here)
            })
            .collect();
        let width = digits.iter().map(|&d| d as usize).sum();
        let mut words = Vec::new();
        for leg in (0..legs).filter(|&l| is_head(l)) {
            for digit in 0..digits[leg] as usize {
                let mut word = vec![0; width];
                for l in (0..legs).filter(|&l| head(l) == leg) {
                    word[starts[l] + digit] = 1;
                }
                words.push(word);
            }
        }
        parts.push(PrimePart::from_code(p as u32, digits, &words));
    }
    Stabilizer::new(parts).into_block(&request.family, dims, norm_squared)
}
