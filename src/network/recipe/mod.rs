//! Recipes: a few lines that are expanded into a network.
//!
//! | family | what it makes |
//! |---|---|
//! | [`TilingRecipe`] | a patch of a {p,q} tiling, with bulk legs, holes and exceptions |

mod select;
mod setting;
mod tiling;

pub use select::Selection;
pub use tiling::{TileRule, TilingRecipe, Turns};

pub(in crate::network) use setting::{LegDims, Setting};

use super::file::Problem;
use super::{Limits, Network, Overrides};
use serde_json::{Map, Value};
use std::path::Path;

/// A recipe of any family.
#[derive(Debug, Clone, PartialEq)]
#[non_exhaustive]
pub enum Recipe {
    /// A patch of a tiling.
    Tiling(TilingRecipe),
}

/// Names of the families, which are the keys that hold recipes in a file.
pub(in crate::network) const FAMILIES: &[&str] = &["tiling"];

impl Recipe {
    /// Reads the table of a family.
    pub(in crate::network) fn read(
        family: &str,
        map: &Map<String, Value>,
    ) -> Result<Self, Problem> {
        match family {
            "tiling" => Ok(Self::Tiling(TilingRecipe::read(map, "[tiling]")?)),
            _ => unreachable!("only known families come here"),
        }
    }
    /// The family and its table, as a file holds them.
    pub fn to_table(&self) -> (&'static str, Map<String, Value>) {
        match self {
            Self::Tiling(r) => ("tiling", r.to_table()),
        }
    }
    /// Makes the network, every leg of dimension `dimension`.
    ///
    /// # Errors
    /// [`Problem`].
    pub fn network(
        &self,
        name: &str,
        dimension: Option<usize>,
        limits: &Limits,
    ) -> Result<Network, Problem> {
        let overrides = Overrides::default();
        let mut setting = Setting {
            name: name.to_owned(),
            dims: LegDims::new(dimension, Vec::new()),
            limits,
            overrides: &overrides,
            shelf: super::file::BlockShelf::new(Path::new(""), limits),
        };
        self.expand(&mut setting)
    }
    fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        match self {
            Self::Tiling(r) => r.expand(setting),
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
