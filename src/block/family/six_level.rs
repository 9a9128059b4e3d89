//! Four legs of six levels, where no two orthogonal Latin squares exist.

use crate::block::exact::{Exact, ExactValues};
use crate::block::stabilizer_tensor::{first_failure, legs_of};
use crate::block::{Block, BlockError, IsometryTable};

/// Exponents of w = exp(2πi/3), found and proven here.
const CUBE_ROOTS: [[u32; 6]; 6] = [
    [0, 0, 0, 1, 0, 2],
    [2, 1, 2, 1, 2, 2],
    [2, 2, 1, 2, 0, 2],
    [1, 2, 0, 0, 2, 2],
    [2, 2, 0, 1, 1, 0],
    [1, 2, 2, 1, 0, 1],
];

/// T[i,j,k,l] = (1/6) Σ_q w^{E[p][q]} z^{q(k−l)} where i−k = j−l = p modulo 6, else 0, with
/// z = exp(2πi/6): 180 entries.
pub(super) fn cube_roots(_: usize) -> Result<Block, BlockError> {
    prove("four-leg", bell_diagonal(6, &CUBE_ROOTS.map(|r| r.map(|e| 2 * e))))
}

/// T[i,j,k,l] = (1/6) Σ_q z^{E[p][q] + q(k−l)} where i−k = j−l = p modulo 6, else 0.
fn bell_diagonal(d: u32, exponents: &[[u32; 6]; 6]) -> Exact {
    let mut entries: Vec<(u64, Vec<(u32, i64)>)> = Vec::new();
    for p in 0..d {
        for k in 0..d {
            for l in 0..d {
                let (i, j) = ((k + p) % d, (l + p) % d);
                let mut sum = vec![0i64; d as usize];
                for q in 0..d {
                    let e = exponents[p as usize][q as usize] + q * (k + d - l);
                    sum[(e % d) as usize] += 1;
                }
                let sum = shortest(sum);
                if !sum.is_empty() {
                    let place = u64::from(((i * d + j) * d + k) * d + l);
                    entries.push((place, sum));
                }
            }
        }
    }
    entries.sort();
    let (index, value) = entries.into_iter().unzip();
    Exact {
        dims: vec![d as usize; 4],
        root: d,
        scale_squared: (1, u128::from(d * d)),
        index,
        value: ExactValues::Sums(value),
    }
}

/// A sum of sixth roots of unity over the basis 1, z of Z[z], z² = z − 1.
fn shortest(sum: Vec<i64>) -> Vec<(u32, i64)> {
    let one = sum[0] - sum[2] - sum[3] + sum[5];
    let z = sum[1] + sum[2] - sum[4] - sum[5];
    [(0, one), (1, z)].into_iter().filter(|t| t.1 != 0).collect()
}

/// Proves all splits in exact integers and makes the block.
fn prove(name: &str, exact: Exact) -> Result<Block, BlockError> {
    let legs = exact.dims.len();
    if let Some(mask) = first_failure(legs, |m| exact.is_isometry(m)) {
        return Err(BlockError::ProofFailed { family: name.to_owned(), legs: legs_of(mask) });
    }
    let nonzeros = exact.len() as u128;
    Ok(Block::exact_lazy(
        name,
        exact.dims.clone(),
        IsometryTable::perfect(legs),
        None,
        nonzeros,
        move || exact.clone(),
    ))
}
