//! One building block.

use super::{Entries, Exact, IsometryTable, Stabilizer};
use crate::tensor::Dense;
use std::fmt;
use std::sync::{Arc, OnceLock};

type Maker = Arc<dyn Fn() -> Entries + Send + Sync>;
type ExactMaker = Arc<dyn Fn() -> Exact + Send + Sync>;

/// How the table of isometries of a block was filled.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum Proof {
    /// Every pair of symbols was counted in every pair of columns.
    Counting,
    /// Ranks of stabilizer generators over prime fields.
    Ranks,
    /// M†M = c·1 in the integers of a cyclotomic field.
    Cyclotomic,
    /// A closed formula for the reduced states.
    Formula,
    /// Floating point, within a tolerance: no proof.
    Numerical,
}

impl std::fmt::Display for Proof {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Proof::Counting => "by counting pairs",
            Proof::Ranks => "by ranks over finite fields",
            Proof::Cyclotomic => "in exact cyclotomic integers",
            Proof::Formula => "by a closed formula",
            Proof::Numerical => "numerically, within a tolerance",
        })
    }
}

/// A tensor with what is known about it. Its numbers are made when first asked for, so that
/// questions which geometry or a finite field answers never build them.
#[derive(Clone)]
pub struct Block {
    name: String,
    dims: Vec<usize>,
    isometries: IsometryTable,
    stabilizer: Option<Stabilizer>,
    nonzeros: Option<u128>,
    proof: Proof,
    make: Maker,
    make_exact: Option<ExactMaker>,
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
            nonzeros: None,
            proof: Proof::Numerical,
            make: Arc::new(make),
            make_exact: None,
            entries: Arc::default(),
        }
    }
    /// A block whose `nonzeros` entries are known without rounding. The caller vouches as in
    /// [`Self::lazy`].
    pub fn exact_lazy(
        name: impl Into<String>,
        dims: Vec<usize>,
        isometries: IsometryTable,
        stabilizer: Option<Stabilizer>,
        nonzeros: u128,
        make: impl Fn() -> Exact + Send + Sync + 'static,
    ) -> Self {
        let make: ExactMaker = Arc::new(make);
        let exact = make.clone();
        let total = dims.iter().fold(1u128, |s, &d| s.saturating_mul(d as u128));
        let floating = move || {
            let sparse = Entries::Sparse(exact().to_sparse());
            if nonzeros.saturating_mul(2) > total {
                Entries::Dense(sparse.to_dense())
            } else {
                sparse
            }
        };
        let mut block = Self::lazy(name, dims, isometries, stabilizer, floating);
        block.nonzeros = Some(nonzeros);
        block.make_exact = Some(make);
        block
    }
    /// A block whose numbers are at hand. The caller vouches as in [`Self::lazy`].
    pub fn ready(
        name: impl Into<String>,
        isometries: IsometryTable,
        stabilizer: Option<Stabilizer>,
        entries: Entries,
    ) -> Self {
        let dims = entries.dims().to_vec();
        let mut block = Self::lazy(name, dims, isometries, stabilizer, || {
            unreachable!("the entries were set when the block was made")
        });
        block.nonzeros = Some(u128::from(entries.nonzeros()));
        block.entries = Arc::new(OnceLock::from(entries));
        block
    }
    /// The same block, its table having been filled in this way.
    #[must_use]
    pub fn proven(mut self, proof: Proof) -> Self {
        self.proof = proof;
        self
    }
    /// How its table of isometries was filled.
    pub fn proof(&self) -> Proof {
        self.proof
    }
    /// The same block, the number of its non-zero entries being known beforehand.
    #[must_use]
    pub fn with_nonzeros(mut self, nonzeros: u128) -> Self {
        self.nonzeros = Some(nonzeros);
        self
    }
    /// The same block under another name.
    #[must_use]
    pub fn named(mut self, name: impl Into<String>) -> Self {
        self.name = name.into();
        self
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
    ///
    /// Some blocks have more entries than any memory holds ([`Self::nonzeros`] tells without
    /// making them); ask there first.
    pub fn entries(&self) -> &Entries {
        self.entries.get_or_init(|| (self.make)())
    }
    /// Number of non-zero entries. Known beforehand for the built-in blocks; for other ones
    /// the entries are made and counted.
    pub fn nonzeros(&self) -> u128 {
        self.nonzeros.unwrap_or_else(|| u128::from(self.entries().nonzeros()))
    }
    /// Its entries without rounding, where they are known so; made anew at every call.
    pub fn exact(&self) -> Option<Exact> {
        self.make_exact.as_ref().map(|make| make())
    }
    /// All entries as an array.
    pub fn to_dense(&self) -> Dense {
        self.entries().to_dense()
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
