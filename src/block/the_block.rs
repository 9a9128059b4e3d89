//! One building block.

use super::{Entries, IsometryTable, Stabilizer};
use std::fmt;
use std::sync::{Arc, OnceLock};

type Maker = Arc<dyn Fn() -> Entries + Send + Sync>;

/// A tensor with what is known about it. Its numbers are made when first asked for, so that
/// questions which geometry or a finite field answers never build them.
#[derive(Clone)]
pub struct Block {
    name: String,
    dims: Vec<usize>,
    isometries: IsometryTable,
    stabilizer: Option<Stabilizer>,
    make: Maker,
    entries: Arc<OnceLock<Entries>>,
}

impl Block {
    /// A block whose numbers `make` will make. The caller vouches that table and stabilizer
    /// belong to these numbers.
    pub fn lazy(
        name: impl Into<String>,
        dims: Vec<usize>,
        isometries: IsometryTable,
        stabilizer: Option<Stabilizer>,
        make: impl Fn() -> Entries + Send + Sync + 'static,
    ) -> Self {
        Self {
            name: name.into(),
            dims,
            isometries,
            stabilizer,
            make: Arc::new(make),
            entries: Arc::default(),
        }
    }
    /// What the block is, in words fit for a table: `four-leg`, `array t0.npy`.
    pub fn name(&self) -> &str {
        &self.name
    }
    /// Sizes of the legs.
    pub fn dims(&self) -> &[usize] {
        &self.dims
    }
    /// From which legs to the rest it is an isometry.
    pub fn isometries(&self) -> &IsometryTable {
        &self.isometries
    }
    /// Its stabilizer form, where it has one that is known.
    pub fn stabilizer(&self) -> Option<&Stabilizer> {
        self.stabilizer.as_ref()
    }
    /// Its numbers; made at the first call and kept.
    pub fn entries(&self) -> &Entries {
        self.entries.get_or_init(|| (self.make)())
    }
}

impl fmt::Debug for Block {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("Block")
            .field("name", &self.name)
            .field("dims", &self.dims)
            .finish_non_exhaustive()
    }
}
