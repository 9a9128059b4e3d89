//! Building blocks: which tensor can be had, why it may be trusted, what it is worth.
//!
//! [`make`] builds a block of a named family ([`families`] lists them) and proves its table
//! of isometries; [`from_dense`] judges anyone's array, [`read_npy`] reads it from a file.
//!
//! A block with n legs of dimension D is normalised as an isometry: read from ⌊n/2⌋ legs to
//! the rest it has orthonormal columns where it is perfect. One-leg states and states without
//! any isometric split have norm 1; encoders are isometries from their bulk legs.

mod check;
mod cyclotomic;
mod encoder;
mod entries;
mod error;
mod exact;
mod exact_file;
mod existence;
mod family;
mod find;
mod gaussian;
mod isometry;
mod npy;
mod numeric;
mod pauli_text;
mod prime_part;
mod request;
mod spectrum;
mod stabilizer;
mod stabilizer_tensor;
mod the_block;
mod verify;

pub use check::{
    CheckError, CheckRequest, MOST_CHECKED_LEGS, Report, Split, check_block, check_dense,
    check_entries, gate,
};
pub use entries::{Entries, SparseEntries};
pub use error::BlockError;
pub use exact::{Exact, ExactValues};
pub use exact_file::{ExactFileError, exact_from_json, exact_to_json};
pub use existence::{Existence, obstruction};
pub use family::{Family, Legs, families};
pub use find::{FindError, FindRequest, Found, Reason, Start, find};
pub use isometry::IsometryTable;
pub use npy::{NpyError, read_npy, write_npy, write_npy_entries};
pub use numeric::from_dense;
pub use request::{Request, make, usual_dims};
pub use stabilizer::{PrimePart, Stabilizer};
pub use stabilizer_tensor::MOST_ENTRIES;
pub use the_block::{Block, Proof};
pub use verify::{Verified, verify, verify_all, verify_requests};
