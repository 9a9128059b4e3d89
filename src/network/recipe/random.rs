//! Random regular, random geometric and complete graphs as networks.

use super::fields::Fields;
use super::weave::Weave;
use super::{Setting, or_random};
use crate::network::Network;
use crate::network::file::Problem;
use crate::network::graph::{self, Edges};
use crate::network::source::BlockSource;
use serde_json::{Map, Value, json};

/// A random regular graph, uniform in the limit of many vertices.
#[derive(Debug, Clone, PartialEq)]
pub struct RegularRecipe {
    /// Vertices.
    pub vertices: u64,
    /// Neighbours of each.
    pub degree: u64,
    /// Seed.
    pub seed: u64,
    /// Whether each tensor has an open leg, too.
    pub open: bool,
    /// The block of every tensor; none for random ones.
    pub block: Option<BlockSource>,
}

/// A random geometric graph: points in the unit square, joined where they are near.
#[derive(Debug, Clone, PartialEq)]
pub struct GeometricRecipe {
    /// Vertices.
    pub vertices: u64,
    /// Neighbours of a point far from the edges, in the mean.
    pub mean_degree: f64,
    /// Seed.
    pub seed: u64,
    /// Whether opposite edges of the square are one.
    pub periodic: bool,
    /// Whether each tensor has an open leg, too.
    pub open: bool,
    /// The block of every tensor; none for random ones.
    pub block: Option<BlockSource>,
}

/// A complete graph.
#[derive(Debug, Clone, PartialEq)]
pub struct CompleteRecipe {
    /// Vertices.
    pub vertices: u64,
    /// Whether each tensor has an open leg, too.
    pub open: bool,
    /// The block of every tensor; none for random ones.
    pub block: Option<BlockSource>,
}

fn common(map: &mut Map<String, Value>, vertices: u64, open: bool, block: Option<&BlockSource>) {
    map.insert("vertices".into(), json!(vertices));
    if open {
        map.insert("open".into(), json!(true));
    }
    if let Some(b) = block {
        map.insert("block".into(), b.to_value());
    }
}

fn weave(
    vertices: u64,
    edges: &Edges,
    open: bool,
    block: Option<&BlockSource>,
    place: Vec<[f64; 2]>,
    setting: &mut Setting<'_>,
) -> Result<Network, Problem> {
    let mut weave = Weave::of_edges(vertices as usize, edges, open);
    weave.layout.place = place;
    weave.network(setting, false, |v| or_random(block, v))
}

fn most(vertices: u64, setting: &Setting<'_>) -> Result<(), Problem> {
    let limit = setting.limits.tensors;
    if vertices > limit {
        return Err(Problem::TooMany { what: "tensors", count: vertices, limit });
    }
    Ok(())
}

fn most_legs(legs: f64, setting: &Setting<'_>) -> Result<(), Problem> {
    let limit = setting.limits.legs;
    if legs > limit as f64 {
        return Err(Problem::TooMany { what: "legs", count: legs as u64, limit });
    }
    Ok(())
}

pub(super) const REGULAR: &[&str] = &["vertices", "degree", "seed", "open", "block"];
pub(super) const GEOMETRIC: &[&str] =
    &["vertices", "mean_degree", "seed", "periodic", "open", "block"];
pub(super) const COMPLETE: &[&str] = &["vertices", "open", "block"];

const ALL: std::ops::RangeInclusive<u64> = 1..=u32::MAX as u64;

impl RegularRecipe {
    pub(super) fn read(map: &Map<String, Value>) -> Result<Self, Problem> {
        let fields = Fields::new(map, REGULAR, "[regular]")?;
        Ok(Self {
            vertices: fields.needed("vertices", ALL)?,
            degree: fields.needed("degree", 1..=10_000)?,
            seed: fields.whole("seed", 0..=u64::MAX)?.unwrap_or(0),
            open: fields.flag("open", false)?,
            block: fields.block("block")?,
        })
    }
    pub(super) fn to_table(&self) -> Map<String, Value> {
        let mut map = Map::new();
        common(&mut map, self.vertices, self.open, self.block.as_ref());
        map.insert("degree".into(), json!(self.degree));
        map.insert("seed".into(), json!(self.seed));
        map
    }
    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        most(self.vertices, setting)?;
        most_legs(self.vertices as f64 * (self.degree + 1) as f64, setting)?;
        let edges = graph::regular(self.vertices as usize, self.degree as usize, self.seed);
        let Some(edges) = edges else {
            return Err(Problem::Unfit {
                place: "[regular]".into(),
                what: "degree",
                value: self.degree.to_string(),
                other: format!(
                    "{} vertices; it must be below their number, and their product even",
                    self.vertices
                ),
            });
        };
        weave(self.vertices, &edges, self.open, self.block.as_ref(), Vec::new(), setting)
    }
}

impl GeometricRecipe {
    pub(super) fn read(map: &Map<String, Value>) -> Result<Self, Problem> {
        let fields = Fields::new(map, GEOMETRIC, "[geometric]")?;
        Ok(Self {
            vertices: fields.needed("vertices", ALL)?,
            mean_degree: fields
                .real("mean_degree")?
                .ok_or_else(|| fields.missing("mean_degree"))?,
            seed: fields.whole("seed", 0..=u64::MAX)?.unwrap_or(0),
            periodic: fields.flag("periodic", false)?,
            open: fields.flag("open", false)?,
            block: fields.block("block")?,
        })
    }
    pub(super) fn to_table(&self) -> Map<String, Value> {
        let mut map = Map::new();
        common(&mut map, self.vertices, self.open, self.block.as_ref());
        map.insert("mean_degree".into(), json!(self.mean_degree));
        map.insert("seed".into(), json!(self.seed));
        map.insert("periodic".into(), json!(self.periodic));
        map
    }
    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        most(self.vertices, setting)?;
        most_legs(self.vertices as f64 * (self.mean_degree + 1.0), setting)?;
        let n = self.vertices as usize;
        let (points, edges) = graph::geometric(n, self.mean_degree, self.periodic, self.seed);
        weave(self.vertices, &edges, self.open, self.block.as_ref(), points, setting)
    }
}

impl CompleteRecipe {
    pub(super) fn read(map: &Map<String, Value>) -> Result<Self, Problem> {
        let fields = Fields::new(map, COMPLETE, "[complete]")?;
        Ok(Self {
            vertices: fields.needed("vertices", ALL)?,
            open: fields.flag("open", false)?,
            block: fields.block("block")?,
        })
    }
    pub(super) fn to_table(&self) -> Map<String, Value> {
        let mut map = Map::new();
        common(&mut map, self.vertices, self.open, self.block.as_ref());
        map
    }
    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        most_legs(self.vertices as f64 * self.vertices as f64, setting)?;
        let n = self.vertices as u32;
        let edges: Edges = (0..n).flat_map(|a| (a + 1..n).map(move |b| (a, b))).collect();
        weave(self.vertices, &edges, self.open, self.block.as_ref(), Vec::new(), setting)
    }
}
