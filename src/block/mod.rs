//! Building blocks: which tensor can be had, why it may be trusted, what it is worth.

mod entries;
mod isometry;
mod stabilizer;
mod the_block;

pub use entries::{Entries, SparseEntries};
pub use isometry::IsometryTable;
pub use stabilizer::{PrimePart, Stabilizer};
pub use the_block::Block;
