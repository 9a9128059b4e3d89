//! Building blocks: which tensor can be had, why it may be trusted, what it is worth.
//!
//! [`make`] builds a block of a named family ([`families`] lists them) and proves its table
//! of isometries; [`from_dense`] judges anyone's array, [`read_npy`] reads it from a file.
//!
//! A block with n legs of dimension D is normalised as an isometry: read from ⌊n/2⌋ legs to
//! the rest it has orthonormal columns where it is perfect. One-leg states and states without
//! any isometric split have norm 1; encoders are isometries from their bulk legs.

mod cyclotomic;
mod encoder;
mod entries;
mod error;
mod exact;
mod existence;
mod family;
mod isometry;
mod npy;
mod numeric;
mod pauli_text;
mod prime_part;
mod request;
mod stabilizer;
mod stabilizer_tensor;
mod the_block;

pub use entries::{Entries, SparseEntries};
pub use error::BlockError;
pub use exact::{Exact, ExactValues};
pub use existence::{Existence, obstruction};
pub use family::{Family, Legs, families};
pub use isometry::IsometryTable;
pub use npy::{NpyError, read_npy, write_npy};
pub use numeric::from_dense;
pub use request::{Request, make};
pub use stabilizer::{PrimePart, Stabilizer};
pub use stabilizer_tensor::MOST_ENTRIES;
pub use the_block::Block;
