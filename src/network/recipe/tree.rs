//! Complete trees in which every tensor has k children.

use super::fields::Fields;
use super::weave::{Leg, Weave};
use super::{Setting, perfect};
use crate::network::Network;
use crate::network::file::Problem;
use crate::network::source::BlockSource;
use serde_json::{Map, Value, json};
use std::f64::consts::TAU;

/// What becomes of the leg by which the root would have a parent.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum RootLeg {
    /// The root has no such leg.
    None,
    /// It is boundary site 0; the leaves' legs follow.
    Boundary,
    /// It is a bulk leg.
    Bulk,
}

/// A complete k-ary tree; the legs of its leaves are the boundary.
#[derive(Debug, Clone, PartialEq)]
pub struct TreeRecipe {
    /// Children of a tensor, k.
    pub arity: u64,
    /// Generations beside the root.
    pub depth: u64,
    /// The root's upward leg.
    pub root: RootLeg,
    /// The block of every tensor; none for the perfect block with as many legs as needed.
    pub block: Option<BlockSource>,
}

pub(super) const KEYS: &[&str] = &["arity", "depth", "root", "block"];

impl TreeRecipe {
    pub(super) fn read(map: &Map<String, Value>) -> Result<Self, Problem> {
        let fields = Fields::new(map, KEYS, "[tree]")?;
        Ok(Self {
            arity: fields.needed("arity", 1..=10_000)?,
            depth: fields.needed("depth", 0..=u64::from(u32::MAX))?,
            root: [RootLeg::None, RootLeg::Boundary, RootLeg::Bulk]
                [fields.word("root", "none, boundary, bulk")?],
            block: fields.block("block")?,
        })
    }
    pub(super) fn to_table(&self) -> Map<String, Value> {
        let mut map = Map::new();
        map.insert("arity".into(), json!(self.arity));
        map.insert("depth".into(), json!(self.depth));
        let root = match self.root {
            RootLeg::None => "none",
            RootLeg::Boundary => "boundary",
            RootLeg::Bulk => "bulk",
        };
        map.insert("root".into(), json!(root));
        if let Some(b) = &self.block {
            map.insert("block".into(), b.to_value());
        }
        map
    }
    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        let limit = setting.limits.tensors;
        let depth = setting.overrides.rings.map_or(self.depth, u64::from);
        let (mut count, mut generation) = (1u64, 1u64);
        let mut sizes = vec![1u64];
        for _ in 0..depth {
            generation = generation.saturating_mul(self.arity);
            count = count.saturating_add(generation);
            sizes.push(generation);
            if count > limit {
                return Err(Problem::TooMany { what: "tensors", count, limit });
            }
        }
        let mut weave = Weave::default();
        let (mut vertex, mut child) = (0u64, 1u64);
        for (ring, &size) in sizes.iter().enumerate() {
            for k in 0..size {
                weave.vertex();
                weave.layout.ring.push(ring as u32);
                let radius = ring as f64 / (depth as f64 + 0.5);
                let angle = TAU * (k as f64 + 0.5) / size as f64;
                let inner = [radius * angle.cos(), radius * angle.sin()];
                weave.layout.place.push(if ring == 0 { [0.0, 0.0] } else { inner });
                // The bond between a tensor and its parent bears the tensor's number less one.
                match (vertex, self.root) {
                    (0, RootLeg::None) => {}
                    (0, RootLeg::Boundary) => weave.leg(Leg::Open),
                    (0, RootLeg::Bulk) => weave.leg(Leg::Bulk),
                    (v, _) => weave.leg(Leg::Bond(v as u32 - 1)),
                }
                for _ in 0..self.arity {
                    if child < count {
                        weave.leg(Leg::Bond(child as u32 - 1));
                        child += 1;
                    } else {
                        weave.leg(Leg::Open);
                    }
                }
                vertex += 1;
            }
        }
        weave.network(setting, true, |_| perfect(self.block.as_ref()))
    }
}
