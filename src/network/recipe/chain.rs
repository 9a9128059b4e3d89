//! Chains: one tensor a site, each with one open leg, joined to its neighbours.

use super::fields::Fields;
use super::weave::{Leg, Weave};
use super::{Setting, or_random};
use crate::network::Network;
use crate::network::file::Problem;
use crate::network::source::BlockSource;
use serde_json::{Map, Value, json};
use std::f64::consts::TAU;

/// A chain of tensors with legs (previous, site, next), counter-clockwise.
#[derive(Debug, Clone, PartialEq)]
pub struct ChainRecipe {
    /// Sites.
    pub length: u64,
    /// Whether the last is joined to the first.
    pub periodic: bool,
    /// Dimension of the bonds, where it is not that of every leg.
    pub bond_dimension: Option<usize>,
    /// The block of every tensor; none for random ones.
    pub block: Option<BlockSource>,
}

pub(super) const KEYS: &[&str] = &["length", "periodic", "bond_dimension", "block"];

impl ChainRecipe {
    pub(super) fn read(map: &Map<String, Value>) -> Result<Self, Problem> {
        let fields = Fields::new(map, KEYS, "[chain]")?;
        Ok(Self {
            length: fields.needed("length", 1..=u64::from(u32::MAX))?,
            periodic: fields.flag("periodic", false)?,
            bond_dimension: fields
                .whole("bond_dimension", 1..=u64::from(u32::MAX >> 1))?
                .map(|d| d as usize),
            block: fields.block("block")?,
        })
    }
    pub(super) fn to_table(&self) -> Map<String, Value> {
        let mut map = Map::new();
        map.insert("length".into(), json!(self.length));
        map.insert("periodic".into(), json!(self.periodic));
        if let Some(d) = self.bond_dimension {
            map.insert("bond_dimension".into(), json!(d));
        }
        if let Some(b) = &self.block {
            map.insert("block".into(), b.to_value());
        }
        map
    }
    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        let (count, limit) = (self.length, setting.limits.tensors);
        if count > limit {
            return Err(Problem::TooMany { what: "tensors", count, limit });
        }
        let n = count as u32;
        let mut weave = Weave::default();
        weave.bond_dim = self.bond_dimension;
        for v in 0..n {
            weave.vertex();
            if v > 0 || self.periodic {
                weave.leg(Leg::Bond((v + n - 1) % n));
            }
            weave.leg(Leg::Open);
            if v + 1 < n || self.periodic {
                weave.leg(Leg::Bond(v));
            }
            let angle = TAU * f64::from(v) / f64::from(n);
            let place = if self.periodic {
                let radius = f64::from(n) / TAU;
                [radius * angle.cos(), radius * angle.sin()]
            } else {
                [f64::from(v), 0.0]
            };
            weave.layout.place.push(place);
        }
        weave.network(setting, true, |v| or_random(self.block.as_ref(), v))
    }
}
