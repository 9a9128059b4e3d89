//! Layered isometric networks: each layer turns sites two by two (or at the seams of threes)
//! and maps two (or three) of them to one of the next layer.

use super::fields::Fields;
use super::weave::{Leg, Weave};
use super::{Setting, perfect};
use crate::network::Network;
use crate::network::file::Problem;
use crate::network::source::BlockSource;
use serde_json::{Map, Value, json};
use std::f64::consts::TAU;

/// How many sites become one.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LayeredKind {
    /// Two.
    Binary,
    /// Three.
    Ternary,
}

/// What closes the legs of the last layer.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LayeredTop {
    /// One tensor.
    Tensor,
    /// Nothing: they are bulk legs.
    Bulk,
}

/// A layered isometric network (Phys. Rev. Lett. 99, 220405 (2007); the ternary one Phys. Rev.
/// B 79, 144108 (2009)). Boundary site i is the i-th leg of the lowest layer.
///
/// Two-site tensors have legs (lower left, lower right, upper right, upper left), the others
/// (lower ones from left to right, upper): counter-clockwise with the boundary below.
#[derive(Debug, Clone, PartialEq)]
pub struct LayeredRecipe {
    /// How many sites become one.
    pub kind: LayeredKind,
    /// Layers.
    pub layers: u64,
    /// Sites left after the last layer.
    pub top: u64,
    /// What closes them.
    pub close: LayeredTop,
    /// Whether the last site neighbours the first.
    pub periodic: bool,
    /// The two-site tensors; none for the perfect four-leg block.
    pub turn: Option<BlockSource>,
    /// The tensors that make one site of several; none for perfect blocks.
    pub merge: Option<BlockSource>,
    /// The tensor on top; none for a perfect block.
    pub cap: Option<BlockSource>,
}

pub(super) const KEYS: &[&str] =
    &["kind", "layers", "top", "close", "periodic", "turn", "merge", "cap"];

#[derive(Clone, Copy, PartialEq)]
enum Role {
    Turn,
    Merge,
    Cap,
}

impl LayeredRecipe {
    pub(super) fn read(map: &Map<String, Value>) -> Result<Self, Problem> {
        let fields = Fields::new(map, KEYS, "[layered]")?;
        Ok(Self {
            kind: [LayeredKind::Binary, LayeredKind::Ternary]
                [fields.word("kind", "binary, ternary")?],
            layers: fields.needed("layers", 1..=64)?,
            top: fields.whole("top", 1..=10_000)?.unwrap_or(2),
            close: [LayeredTop::Tensor, LayeredTop::Bulk][fields.word("close", "tensor, bulk")?],
            periodic: fields.flag("periodic", true)?,
            turn: fields.block("turn")?,
            merge: fields.block("merge")?,
            cap: fields.block("cap")?,
        })
    }
    pub(super) fn to_table(&self) -> Map<String, Value> {
        let mut map = Map::new();
        let kind = if self.kind == LayeredKind::Binary { "binary" } else { "ternary" };
        map.insert("kind".into(), json!(kind));
        map.insert("layers".into(), json!(self.layers));
        map.insert("top".into(), json!(self.top));
        let close = if self.close == LayeredTop::Tensor { "tensor" } else { "bulk" };
        map.insert("close".into(), json!(close));
        map.insert("periodic".into(), json!(self.periodic));
        for (key, block) in [("turn", &self.turn), ("merge", &self.merge), ("cap", &self.cap)] {
            if let Some(b) = block {
                map.insert(key.into(), b.to_value());
            }
        }
        map
    }
    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        let ratio: u64 = if self.kind == LayeredKind::Binary { 2 } else { 3 };
        let layers = setting.overrides.rings.map_or(self.layers, u64::from);
        let limit = setting.limits.tensors;
        let bottom =
            (0..layers).try_fold(self.top, |n, _| n.checked_mul(ratio).filter(|&n| n <= 2 * limit));
        let Some(bottom) = bottom else {
            return Err(Problem::TooMany { what: "tensors", count: limit + 1, limit });
        };
        let mut weave = Weave::default();
        let mut roles = Vec::new();
        let mut sites = vec![0u32; bottom as usize];
        // A wire is the leg that a lower tensor sends up, or a boundary site.
        let mut wires: Vec<Leg> = vec![Leg::Open; bottom as usize];
        let mut bonds = 0u32;
        for layer in 0..layers {
            let n = wires.len();
            let step = ratio as usize;
            let pairs = if self.periodic { n / step } else { n / step - 1 };
            for i in 0..pairs {
                let (a, b) = (step * i + step - 1, (step * i + step) % n);
                roles.push(Role::Turn);
                weave.vertex();
                self.place(&mut weave, (a as f64 + 0.5) / n as f64, layer as f64, layers, n);
                for w in [a, b] {
                    if wires[w] == Leg::Open {
                        sites[w] = weave.legs();
                    }
                    weave.leg(wires[w]);
                }
                weave.leg(Leg::Bond(bonds + 1));
                weave.leg(Leg::Bond(bonds));
                (wires[a], wires[b]) = (Leg::Bond(bonds), Leg::Bond(bonds + 1));
                bonds += 2;
            }
            let mut above = Vec::with_capacity(n / step);
            for i in 0..n / step {
                roles.push(Role::Merge);
                weave.vertex();
                let middle = (step * i) as f64 + (step as f64 - 1.0) / 2.0;
                self.place(&mut weave, middle / n as f64, layer as f64 + 0.5, layers, n);
                for w in step * i..step * (i + 1) {
                    if wires[w] == Leg::Open {
                        sites[w] = weave.legs();
                    }
                    weave.leg(wires[w]);
                }
                let last = layer + 1 == layers && self.close == LayeredTop::Bulk;
                let up = if last { Leg::Bulk } else { Leg::Bond(bonds) };
                bonds += u32::from(!last);
                weave.leg(up);
                above.push(up);
            }
            wires = above;
        }
        if self.close == LayeredTop::Tensor {
            roles.push(Role::Cap);
            weave.vertex();
            self.place(&mut weave, 0.5, layers as f64, layers, 1);
            for &w in &wires {
                weave.leg(w);
            }
        }
        weave.layout.cycles = vec![bottom as u32];
        weave.sites = Some(sites);
        weave.network(setting, false, |v| match roles[v] {
            Role::Turn => perfect(self.turn.as_ref()),
            Role::Merge => perfect(self.merge.as_ref()),
            Role::Cap => perfect(self.cap.as_ref()),
        })
    }
    /// Periodic networks are drawn round the top, others below it.
    fn place(&self, weave: &mut Weave, along: f64, height: f64, layers: u64, sites: usize) {
        let depth = layers as f64;
        let place = if self.periodic {
            let radius = if sites == 1 { 0.0 } else { 1.0 - height / (depth + 0.5) };
            [radius * (TAU * along).cos(), radius * (TAU * along).sin()]
        } else {
            [along, height / (2.0 * depth)]
        };
        weave.layout.place.push(place);
    }
}
