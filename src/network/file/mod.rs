//! Network files: TOML or JSON, one schema.
//!
//! [`load`] reads a file of either kind, expanding a recipe where it holds one; [`save`]
//! writes the explicit network. [`from_toml`] takes the same keys out of a larger file.

mod blocks;
mod keys;
mod problem;
pub(in crate::network) mod raw;
pub(in crate::network) mod read;
mod study;
mod write;

pub(in crate::network) use blocks::BlockShelf;
pub(in crate::network) use keys::check_keys;
pub use keys::nearest;
pub use problem::{FileError, Problem};
pub use read::{from_toml, load, load_with};
pub use write::{Format, save, to_bytes};
