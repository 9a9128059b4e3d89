//! A random unitary map from the first half of the legs to the second.

use super::{Family, Legs};
use crate::block::gaussian::gaussian;
use crate::block::{Block, BlockError, Request, from_dense};
use crate::linalg::qr;
use crate::tensor::Dense;
use ndarray::Array2;
use rand::SeedableRng;
use rand_chacha::ChaCha8Rng;

pub(super) const FAMILY: Family = Family {
    name: "random-unitary",
    legs: Legs::Even,
    dimensions: "any with equal products of both halves, up to 4096",
    construction: "Q of a complex Gaussian matrix, R's diagonal positive; Haar distributed",
    source: "Notices Am. Math. Soc. 54, 592 (2007), from memory",
    stabilizer: "no",
    isometric: "each half of the legs, and the sets within them",
    options: &[],
    make,
};

/// Most levels of one half.
const MOST_LEVELS: usize = 4096;

fn make(request: &Request) -> Result<Block, BlockError> {
    let half = request.dims.len() / 2;
    let product = |dims: &[usize]| dims.iter().try_fold(1usize, |s, &d| s.checked_mul(d));
    let (first, second) = (product(&request.dims[..half]), product(&request.dims[half..]));
    let size = match (first, second) {
        (Some(a), Some(b)) if a == b && a <= MOST_LEVELS => a,
        _ => {
            return Err(BlockError::WrongDimensions {
                family: request.family.clone(),
                expected: format!(
                    "both halves of the legs to hold the same {MOST_LEVELS} or fewer levels"
                ),
                dims: request.dims.clone(),
            });
        }
    };
    let mut rng = ChaCha8Rng::seed_from_u64(request.seed);
    let draw = Array2::from_shape_vec((size, size), gaussian(&mut rng, size * size))
        .expect("one number an entry");
    let q = qr(&draw.view()).expect("Gaussian numbers are finite").q;
    let array = q
        .as_standard_layout()
        .into_owned()
        .into_shape_with_order(request.dims.clone())
        .expect("the sizes multiply to the whole");
    from_dense(request.family.clone(), Dense::Complex(array), 1e-10)
}
