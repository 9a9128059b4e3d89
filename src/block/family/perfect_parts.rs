//! Perfect tensors over one finite field, by number of legs: graph states and codes.

use crate::block::PrimePart;
use crate::block::existence::obstruction;
use crate::block::{Block, BlockError, Existence, Request, Stabilizer};
use crate::field::{Field, factorise};

/// How a perfect tensor over GF(q) is built.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) enum Recipe {
    /// The graph state with these weights; each is checked by ranks when it is made.
    Graph(Vec<Vec<u32>>),
    /// The words of an [n, ⌊n/2⌋] code of the largest distance n − ⌊n/2⌋ + 1, by evaluation
    /// of polynomials at every element and at infinity.
    Code,
}

/// The recipe for n legs over GF(q) that this crate prefers, where it has one.
///
/// Sources: graph weights recomputed, every bipartition by ranks; codes arXiv:1701.03359.
pub(super) fn recipe(n: usize, q: u64) -> Option<Recipe> {
    graph(n, q).map(Recipe::Graph).or_else(|| (q + 1 >= n as u64).then_some(Recipe::Code))
}

/// Weights of a graph over GF(q) whose state is perfect.
pub(super) fn graph(n: usize, q: u64) -> Option<Vec<Vec<u32>>> {
    let odd = q % 2 == 1;
    match (n, q) {
        (4, 2) => None,
        // 2 stands for x where the characteristic is 2.
        (4, _) => {
            let edges = [(0, 1, 0), (0, 2, 1), (0, 3, 1), (1, 2, 1), (1, 3, 2), (2, 3, 0)];
            let mut out = vec![vec![0; 4]; 4];
            for (i, j, v) in edges {
                out[i][j] = v;
                out[j][i] = v;
            }
            Some(out)
        }
        (5, _) => Some(circulant(5, &[1, 0])),
        (6, _) => Some(circulant(6, &[0, 1, 1])),
        (7, 4) => Some(circulant(7, &[1, 1, 2])),
        (7, 8) => Some(circulant(7, &[0, 1, 2])),
        (7, _) if odd => Some(circulant(7, &[0, 1, 1])),
        (8, 5) => Some(double_circulant([0, 4], [1, 2], [2, 0, 1, 1])),
        (8, 7) => Some(double_circulant([5, 4], [1, 3], [6, 3, 5, 4])),
        (8, 8) => Some(double_circulant([7, 1], [4, 1], [3, 5, 4, 6])),
        (8, 9) => Some(double_circulant([8, 6], [3, 3], [6, 6, 8, 0])),
        (9, 3) => {
            let mut ten = circulant(10, &[0, 1, 1, 1, 2]);
            ten.pop();
            ten.iter_mut().for_each(|row| {
                row.pop();
            });
            Some(ten)
        }
        (10, 3) => Some(circulant(10, &[0, 1, 1, 1, 2])),
        _ => None,
    }
}

/// The matrix whose entry at cyclic distance k weighs `weights[k − 1]`.
fn circulant(n: usize, weights: &[u32]) -> Vec<Vec<u32>> {
    let entry = |i: usize, j: usize| match i.abs_diff(j) {
        0 => 0,
        apart => weights[apart.min(n - apart) - 1],
    };
    (0..n).map(|i| (0..n).map(|j| entry(i, j)).collect()).collect()
}

/// [[C(a), M], [Mᵀ, C(b)]] with 4-cycle circulants C and M_ij = m[(j − i) mod 4].
fn double_circulant(a: [u32; 2], b: [u32; 2], m: [u32; 4]) -> Vec<Vec<u32>> {
    let (a, b) = (circulant(4, &a), circulant(4, &b));
    let entry = |i: usize, j: usize| match (i < 4, j < 4) {
        (true, true) => a[i][j],
        (false, false) => b[i - 4][j - 4],
        (true, false) => m[(j - i) % 4],
        (false, true) => m[(i - j) % 4],
    };
    (0..8).map(|i| (0..8).map(|j| entry(i, j)).collect()).collect()
}

/// The generating words of the evaluation code [n, k] over GF(q), n ≤ q + 1.
pub(super) fn code_words(field: &Field, n: usize, k: usize) -> Vec<Vec<u32>> {
    let q = field.order() as usize;
    (0..k)
        .map(|power| {
            (0..n)
                .map(|place| match place {
                    p if p == q => u32::from(power + 1 == k),
                    p => field.pow(p as u32, power as u64),
                })
                .collect()
        })
        .collect()
}

/// The field of a prime power of d.
pub(super) fn field_of(p: u64, m: u32) -> Field {
    Field::new(p.pow(m)).expect("dimensions stay below 2^16, so their prime powers do")
}

/// Refuses what does not exist, is open, or has no built-in recipe; says `Ok` otherwise.
pub(super) fn settle(n: usize, d: usize) -> Result<(), BlockError> {
    let known = obstruction(n, d).unwrap_or_else(|| {
        if factorise(d as u64).iter().all(|&(p, m)| recipe(n, p.pow(m)).is_some()) {
            Existence::Built
        } else {
            Existence::Unsettled
        }
    });
    known.refusal(n, d).map_or(Ok(()), Err)
}

/// A perfect tensor as a product over the prime powers of the dimension, each by `choose`.
pub(super) fn product(
    request: &Request,
    choose: impl Fn(usize, u64) -> Option<Recipe>,
) -> Result<Block, BlockError> {
    let d = request.one_dimension()?;
    let n = request.dims.len();
    let mut parts = Vec::new();
    for (p, m) in factorise(d as u64) {
        let field = field_of(p, m);
        let recipe =
            choose(n, p.pow(m)).ok_or(BlockError::NoConstruction { legs: n, dimension: d })?;
        parts.push(match recipe {
            Recipe::Graph(weights) => PrimePart::from_graph(&field, &weights),
            Recipe::Code => PrimePart::from_field_code(&field, &code_words(&field, n, n / 2)),
        });
    }
    Stabilizer::new(parts).into_perfect(&request.family, n, d)
}
