//! Networks: which tensors there are, which legs they share, which legs are left open.
//!
//! [`NetworkBuilder`] puts one together in code, [`load`] reads a file, a [`Recipe`] makes one
//! of a known family; all give a checked [`Network`]. [`save`] writes it.

mod as_graph;
mod build;
mod file;
mod frames;
pub mod graph;
mod ids;
pub mod import;
mod intern;
mod limits;
mod recipe;
mod region;
mod source;
mod survey;
mod the_network;

pub use as_graph::{GraphNode, as_graph};
pub use build::{NetworkBuilder, NetworkError};
pub use file::{FileError, Format, Problem, from_toml, load, load_with, nearest, save, to_bytes};
pub use frames::tile_frames;
pub use ids::{BoundarySite, TensorId};
pub use limits::{Limits, Overrides};
pub use recipe::{
    ChainRecipe, CompleteRecipe, FILE_KEYS, GeometricRecipe, LatticeKind, LatticeOpen,
    LatticeRecipe, LayeredKind, LayeredRecipe, LayeredTop, Recipe, RegularRecipe, RootLeg,
    Selection, TileRule, TilingRecipe, TreeRecipe, Turns, WormholeRecipe,
};
pub use region::{Region, RegionError};
pub use source::{BlockSource, NamedBlock};
pub use survey::{Survey, TilingSurvey};
pub use the_network::{Layout, Network};
