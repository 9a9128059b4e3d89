//! Four legs of six levels, where no two orthogonal Latin squares exist.
//!
//! All are diagonal in a basis of maximally entangled pairs with phases that are roots of
//! unity, and all are proven in Z\[z\], z = exp(2πi/6).

use crate::block::exact::{Exact, ExactValues};
use crate::block::stabilizer_tensor::{first_failure, legs_of};
use crate::block::{Block, BlockError, IsometryTable, Proof};

/// Exponents of w = exp(2πi/3), found and proven here.
const CUBE_ROOTS: [[u32; 6]; 6] = [
    [0, 0, 0, 1, 0, 2],
    [2, 1, 2, 1, 2, 2],
    [2, 2, 1, 2, 0, 2],
    [1, 2, 0, 0, 2, 2],
    [2, 2, 0, 1, 1, 0],
    [1, 2, 2, 1, 0, 1],
];

/// T\[i,j,k,l\] = (1/6) Σ_q w^{E\[p\]\[q\]} z^{q(k−l)} where i−k = j−l = p modulo 6, else 0, with
/// z = exp(2πi/6): 180 entries.
pub(super) fn cube_roots(_: usize) -> Result<Block, BlockError> {
    let mut sums = Sums::new();
    for (p, row) in CUBE_ROOTS.iter().enumerate() {
        for k in 0..6 {
            for l in 0..6 {
                for (q, &root) in row.iter().enumerate() {
                    let e = 2 * root as usize + q * (k + 6 - l);
                    sums.add([(k + p) % 6, (l + p) % 6, k, l], e);
                }
            }
        }
    }
    prove("four-leg", sums.into_exact())
}

/// U = Σ λ_W |W⟩⟨W| over the products W of Pauli operators X^{a₁}Z^{a₂} of the two-level part
/// and X^xZ^y of the three-level part (level = 3·first + second), |W⟩ = (W ⊗ 1) Σ|kk⟩/√6,
/// read as T\[i,j,k,l\] = ⟨ij|U|kl⟩. With w = exp(2πi/3) and t = 0, 1, 2 for a = 01, 10, 11:
/// λ = w^{x²+y²} at a = 00 and w^{t²+x²−y²+ty} elsewhere (found by hand in the spirit of
/// arXiv:2504.15401; proven here).
pub(super) fn quadratic(_: usize) -> Result<Block, BlockError> {
    pauli_diagonal(|t, x, y| t * t + x * x + 2 * y * y + t * y)
}

/// As [`quadratic`], with λ = w^{2t²+xy+tx+ty} where a ≠ 00.
pub(super) fn quadratic_mixed(_: usize) -> Result<Block, BlockError> {
    pauli_diagonal(|t, x, y| 2 * t * t + x * y + t * x + t * y)
}

fn pauli_diagonal(elsewhere: fn(usize, usize, usize) -> usize) -> Result<Block, BlockError> {
    let mut sums = Sums::new();
    for a in 0..4 {
        let (a1, a2) = (a / 2, a % 2);
        for x in 0..3 {
            for y in 0..3 {
                let cube = if a == 0 { x * x + y * y } else { elsewhere(a - 1, x, y) };
                // ⟨ij|W⟩ is non-zero where i is j shifted, with phase (−1)^{a₂j₁} w^{y·j₂}.
                let column = |j: usize| {
                    let (j1, j2) = (j / 3, j % 3);
                    ((j1 + a1) % 2 * 3 + (j2 + x) % 3, 3 * a2 * j1 + 2 * y * j2)
                };
                for j in 0..6 {
                    for l in 0..6 {
                        let ((i, e), (k, f)) = (column(j), column(l));
                        sums.add([i, j, k, l], 2 * cube + e + 36 - f % 6);
                    }
                }
            }
        }
    }
    prove("four-leg", sums.into_exact())
}

/// Sums of sixth roots of unity, one a place of a 6 × 6 × 6 × 6 array, to be divided by 6.
struct Sums(Vec<[i64; 6]>);

impl Sums {
    fn new() -> Self {
        Self(vec![[0; 6]; 1296])
    }
    fn add(&mut self, place: [usize; 4], exponent: usize) {
        let at = place.iter().fold(0, |i, v| 6 * i + v);
        self.0[at][exponent % 6] += 1;
    }
    fn into_exact(self) -> Exact {
        let mut index = Vec::new();
        let mut value = Vec::new();
        for (at, sum) in self.0.into_iter().enumerate() {
            // Over the basis 1, z with z² = z − 1.
            let one = sum[0] - sum[2] - sum[3] + sum[5];
            let z = sum[1] + sum[2] - sum[4] - sum[5];
            let terms: Vec<(u32, i64)> =
                [(0, one), (1, z)].into_iter().filter(|t| t.1 != 0).collect();
            if !terms.is_empty() {
                index.push(at as u64);
                value.push(terms);
            }
        }
        Exact {
            dims: vec![6; 4],
            root: 6,
            scale_squared: (1, 36),
            index,
            value: ExactValues::Sums(value),
        }
    }
}

/// Proves all splits in exact integers and makes the block.
fn prove(name: &str, exact: Exact) -> Result<Block, BlockError> {
    let legs = exact.dims.len();
    if let Some(mask) = first_failure(legs, |m| exact.is_isometry(m)) {
        return Err(BlockError::ProofFailed { family: name.to_owned(), legs: legs_of(mask) });
    }
    let nonzeros = exact.len() as u128;
    let dims = exact.dims.clone();
    let table = IsometryTable::perfect(legs);
    let block = Block::exact_lazy(name, dims, table, None, nonzeros, move || exact.clone());
    Ok(block.proven(Proof::Cyclotomic))
}
