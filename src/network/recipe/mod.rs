//! Recipes: a few lines that are expanded into a network.
//!
//! | family | what it makes |
//! |---|---|
//! | [`TilingRecipe`] | a patch of a {p,q} tiling, with bulk legs, holes and exceptions |
//! | [`WormholeRecipe`] | two patches glued along holes |
//! | [`LatticeRecipe`] | a square, cubic, hexagonal or triangular lattice |
//! | [`TreeRecipe`] | a complete tree |
//! | [`LayeredRecipe`] | a layered isometric network |
//! | [`ChainRecipe`] | a chain of tensors, one a site |
//! | [`RegularRecipe`] | a random regular graph |
//! | [`GeometricRecipe`] | a random geometric graph |
//! | [`CompleteRecipe`] | a complete graph |

mod chain;
mod fields;
mod lattice;
mod layered;
mod random;
mod select;
mod setting;
mod tiling;
mod tree;
mod weave;
mod wormhole;

pub use chain::ChainRecipe;
pub use lattice::{LatticeKind, LatticeOpen, LatticeRecipe};
pub use layered::{LayeredKind, LayeredRecipe, LayeredTop};
pub use random::{CompleteRecipe, GeometricRecipe, RegularRecipe};
pub use select::Selection;
pub use tiling::{TileRule, TilingRecipe, Turns};
pub use tree::{RootLeg, TreeRecipe};
pub use wormhole::WormholeRecipe;

pub(in crate::network) use setting::{LegDims, Setting};

use super::file::Problem;
use super::source::{BlockSource, NamedBlock};
use super::{Limits, Network, Overrides};
use serde_json::{Map, Value};
use std::path::Path;

/// A recipe of any family.
#[derive(Debug, Clone, PartialEq)]
#[non_exhaustive]
pub enum Recipe {
    /// A patch of a tiling.
    Tiling(TilingRecipe),
    /// Two patches glued along holes.
    Wormhole(Box<WormholeRecipe>),
    /// A lattice.
    Lattice(LatticeRecipe),
    /// A complete tree.
    Tree(TreeRecipe),
    /// A layered isometric network.
    Layered(LayeredRecipe),
    /// A chain.
    Chain(ChainRecipe),
    /// A random regular graph.
    Regular(RegularRecipe),
    /// A random geometric graph.
    Geometric(GeometricRecipe),
    /// A complete graph.
    Complete(CompleteRecipe),
}

/// Names of the families, which are the keys that hold recipes in a file.
pub(in crate::network) const FAMILIES: &[&str] = &[
    "tiling",
    "wormhole",
    "lattice",
    "tree",
    "layered",
    "chain",
    "regular",
    "geometric",
    "complete",
];

/// The tables of a network file and their keys: `""` is the file itself, `tensor` one of its
/// tensors, `tiling.tile` one of a tiling's exceptions, all others the table of that name.
pub const FILE_KEYS: &[(&str, &[&str])] = &[
    ("", &super::file::raw::PLAIN),
    ("tensor", &super::file::raw::TENSOR),
    ("layout", super::file::read::LAYOUT),
    ("tiling", tiling::KEYS),
    ("tiling.tile", tiling::RULE_KEYS),
    ("wormhole", wormhole::KEYS),
    ("lattice", lattice::KEYS),
    ("tree", tree::KEYS),
    ("layered", layered::KEYS),
    ("chain", chain::KEYS),
    ("regular", random::REGULAR),
    ("geometric", random::GEOMETRIC),
    ("complete", random::COMPLETE),
];

impl Recipe {
    /// Reads the table of a family.
    pub(in crate::network) fn read(
        family: &str,
        map: &Map<String, Value>,
    ) -> Result<Self, Problem> {
        Ok(match family {
            "tiling" => Self::Tiling(TilingRecipe::read(map, "[tiling]")?),
            "wormhole" => Self::Wormhole(Box::new(WormholeRecipe::read(map)?)),
            "lattice" => Self::Lattice(LatticeRecipe::read(map)?),
            "tree" => Self::Tree(TreeRecipe::read(map)?),
            "layered" => Self::Layered(LayeredRecipe::read(map)?),
            "chain" => Self::Chain(ChainRecipe::read(map)?),
            "regular" => Self::Regular(RegularRecipe::read(map)?),
            "geometric" => Self::Geometric(GeometricRecipe::read(map)?),
            "complete" => Self::Complete(CompleteRecipe::read(map)?),
            _ => unreachable!("only known families come here"),
        })
    }
    /// The family and its table, as a file holds them.
    pub fn to_table(&self) -> (&'static str, Map<String, Value>) {
        match self {
            Self::Tiling(r) => ("tiling", r.to_table()),
            Self::Wormhole(r) => ("wormhole", r.to_table()),
            Self::Lattice(r) => ("lattice", r.to_table()),
            Self::Tree(r) => ("tree", r.to_table()),
            Self::Layered(r) => ("layered", r.to_table()),
            Self::Chain(r) => ("chain", r.to_table()),
            Self::Regular(r) => ("regular", r.to_table()),
            Self::Geometric(r) => ("geometric", r.to_table()),
            Self::Complete(r) => ("complete", r.to_table()),
        }
    }
    /// Makes the network, every leg of dimension `dimension` where the recipe does not say
    /// otherwise.
    ///
    /// # Errors
    /// [`Problem`].
    pub fn network(
        &self,
        name: &str,
        dimension: Option<usize>,
        limits: &Limits,
    ) -> Result<Network, Problem> {
        self.network_beside(name, dimension, Path::new(""), limits)
    }
    /// Like [`Self::network`], with array files looked for in `folder`.
    ///
    /// # Errors
    /// [`Problem`].
    pub fn network_beside(
        &self,
        name: &str,
        dimension: Option<usize>,
        folder: &Path,
        limits: &Limits,
    ) -> Result<Network, Problem> {
        let overrides = Overrides::default();
        let mut setting = Setting {
            name: name.to_owned(),
            dims: LegDims::new(dimension, Vec::new()),
            limits,
            overrides: &overrides,
            shelf: super::file::BlockShelf::new(folder, limits),
        };
        self.expand(&mut setting)
    }
    fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        match self {
            Self::Tiling(r) => r.expand(setting),
            Self::Wormhole(r) => r.expand(setting),
            Self::Lattice(r) => r.expand(setting),
            Self::Tree(r) => r.expand(setting),
            Self::Layered(r) => r.expand(setting),
            Self::Chain(r) => r.expand(setting),
            Self::Regular(r) => r.expand(setting),
            Self::Geometric(r) => r.expand(setting),
            Self::Complete(r) => r.expand(setting),
        }
    }
}

pub(in crate::network) fn expand(
    family: &str,
    map: &Map<String, Value>,
    setting: &mut Setting<'_>,
) -> Result<Network, Problem> {
    Recipe::read(family, map)?.expand(setting)
}

/// The block asked for, or else the perfect one with as many legs as needed.
fn perfect(block: Option<&BlockSource>) -> BlockSource {
    block.cloned().unwrap_or_else(|| BlockSource::family("perfect"))
}

/// The block asked for, or else random numbers, other ones for each tensor.
pub(in crate::network) fn or_random(block: Option<&BlockSource>, tensor: usize) -> BlockSource {
    let random = || NamedBlock { seed: tensor as u64, ..NamedBlock::family("random-tensor") };
    block.cloned().unwrap_or_else(|| BlockSource::Named(random()))
}
