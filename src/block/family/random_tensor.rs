//! A tensor of independent random numbers, for networks whose numbers do not matter.

use super::{Family, Legs};
use crate::block::gaussian::gaussian;
use crate::block::{Block, BlockError, Entries, IsometryTable, Request};
use crate::tensor::Dense;
use ndarray::ArrayD;
use rand::SeedableRng;
use rand_chacha::ChaCha8Rng;

pub(super) const FAMILY: Family = Family {
    name: "random-tensor",
    legs: Legs::Any,
    dimensions: "any",
    construction: "independent complex Gaussian entries from the seed; the mean square of a \
                   column, read from the first half of the legs to the second, is 1",
    source: "definition",
    stabilizer: "no",
    isometric: "none but the empty set",
    options: &[],
    make,
};

fn make(request: &Request) -> Result<Block, BlockError> {
    let dims = request.dims.clone();
    let size = dims.iter().try_fold(1usize, |s, &d| s.checked_mul(d)).filter(|&s| s <= 1 << 60);
    let Some(size) = size else {
        return Err(BlockError::WrongDimensions {
            family: request.family.clone(),
            expected: "at most 2^60 entries".to_owned(),
            dims,
        });
    };
    let table = IsometryTable::unknown(dims.len());
    let column: usize = dims[dims.len() / 2..].iter().product();
    let (seed, shape) = (request.seed, dims.clone());
    Ok(Block::lazy(request.family.clone(), dims, table, None, move || {
        let mut rng = ChaCha8Rng::seed_from_u64(seed);
        let mut numbers = gaussian(&mut rng, size);
        let scale = 1.0 / (column as f64).sqrt();
        numbers.iter_mut().for_each(|v| *v *= scale);
        let array = ArrayD::from_shape_vec(shape.clone(), numbers).expect("one number an entry");
        Entries::Dense(Dense::Complex(array))
    })
    .with_nonzeros(size as u128))
}
