//! States of one leg.

use super::{Family, Legs};
use crate::block::gaussian::gaussian;
use crate::block::{Block, BlockError, Entries, IsometryTable, PrimePart, Request, Stabilizer};
use crate::field::factorise;
use crate::tensor::Dense;
use ndarray::ArrayD;
use num_complex::Complex64;
use rand::SeedableRng;
use rand_chacha::ChaCha8Rng;

pub(super) const BASIS: Family = Family {
    name: "basis",
    legs: Legs::Exactly(1),
    dimensions: "every D",
    construction: "1 at one level (option level, default 0)",
    source: "definition",
    stabilizer: "over GF(p) for each prime p of D",
    isometric: "none but the empty set",
    options: &["level"],
    make: basis,
};

pub(super) const PLUS: Family = Family {
    name: "plus",
    legs: Legs::Exactly(1),
    dimensions: "every D",
    construction: "1/sqrt(D) at every level",
    source: "definition",
    stabilizer: "over GF(p) for each prime p of D",
    isometric: "none but the empty set",
    options: &[],
    make: plus,
};

pub(super) const RANDOM: Family = Family {
    name: "random-state",
    legs: Legs::Exactly(1),
    dimensions: "every D",
    construction: "complex Gaussian entries from the seed, normalised",
    source: "definition",
    stabilizer: "no",
    isometric: "none but the empty set",
    options: &[],
    make: random,
};

fn basis(request: &Request) -> Result<Block, BlockError> {
    let d = request.dims[0];
    let level = request.count("level", 0, d - 1)?;
    let mut parts = Vec::new();
    let mut unit = d;
    for (p, m) in factorise(d as u64) {
        let (p, m) = (p as u32, m as usize);
        let size = (p as usize).pow(m as u32);
        unit /= size;
        let mut value = level / unit % size;
        let mut generators = Vec::new();
        let mut phases = Vec::new();
        for digit in 0..m {
            let mut row = vec![0; 2 * m];
            row[m + digit] = 1;
            generators.push(row);
            let v = (value % p as usize) as u32;
            value /= p as usize;
            phases.push(if p == 2 { 2 * v } else { (p - v) % p });
        }
        parts.push(PrimePart { prime: p, digits: vec![m as u32], generators, phases });
    }
    Stabilizer::new(parts).into_block(&request.family, request.dims.clone(), 1)
}

fn plus(request: &Request) -> Result<Block, BlockError> {
    let mut parts = Vec::new();
    for (p, m) in factorise(request.dims[0] as u64) {
        let m = m as usize;
        let words: Vec<Vec<u32>> =
            (0..m).map(|i| (0..m).map(|j| u32::from(i == j)).collect()).collect();
        parts.push(PrimePart::from_code(p as u32, vec![m as u32], &words));
    }
    Stabilizer::new(parts).into_block(&request.family, request.dims.clone(), 1)
}

fn random(request: &Request) -> Result<Block, BlockError> {
    let d = request.dims[0];
    let mut rng = ChaCha8Rng::seed_from_u64(request.seed);
    let mut state = gaussian(&mut rng, d);
    let norm = state.iter().map(Complex64::norm_sqr).sum::<f64>().sqrt();
    state.iter_mut().for_each(|v| *v /= norm);
    let array = ArrayD::from_shape_vec(vec![d], state).expect("one entry a level");
    let entries = Entries::Dense(Dense::Complex(array));
    Ok(Block::ready(&request.family, IsometryTable::perfect(1), None, entries))
}
