//! Two patches, each with a hole, glued along the rims of the holes.

use super::Setting;
use super::fields::Fields;
use super::tiling::{Join, Sheet, TilingRecipe, lay};
use crate::network::file::Problem;
use crate::network::{Network, NetworkBuilder};
use serde_json::{Map, Value, json};

/// Two patches with holes, joined: the rim of one hole runs along the rim of the other, in
/// the opposite sense, so that the whole is an orientable annulus. The boundary is the outer
/// boundary of the first patch, then that of the second.
#[derive(Debug, Clone, PartialEq)]
pub struct WormholeRecipe {
    /// The one patch; its first hole is glued.
    pub one: TilingRecipe,
    /// The other; a copy of the first where the file has none.
    pub other: TilingRecipe,
    /// By how many sides the second rim is turned against the first.
    pub twist: u64,
}

pub(super) const KEYS: &[&str] = &["one", "other", "twist"];

impl WormholeRecipe {
    pub(super) fn read(map: &Map<String, Value>) -> Result<Self, Problem> {
        let fields = Fields::new(map, KEYS, "[wormhole]")?;
        let patch = |key: &'static str, place: &str| match fields.get(key) {
            None => Ok(None),
            Some(Value::Object(m)) => TilingRecipe::read(m, place).map(Some),
            Some(other) => Err(fields.unknown(key, other, "a table with the keys of [tiling]")),
        };
        let one = patch("one", "[wormhole.one]")?.ok_or_else(|| fields.missing("one"))?;
        Ok(Self {
            other: patch("other", "[wormhole.other]")?.unwrap_or_else(|| one.clone()),
            one,
            twist: fields.whole("twist", 0..=u64::from(u32::MAX))?.unwrap_or(0),
        })
    }
    pub(super) fn to_table(&self) -> Map<String, Value> {
        let mut map = Map::new();
        map.insert("one".into(), Value::Object(self.one.to_table()));
        if self.other != self.one {
            map.insert("other".into(), Value::Object(self.other.to_table()));
        }
        if self.twist != 0 {
            map.insert("twist".into(), json!(self.twist));
        }
        map
    }
    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        let sheets = [
            Sheet::new(&self.one, self.one.patch(setting)?, "[wormhole.one]")?,
            Sheet::new(&self.other, self.other.patch(setting)?, "[wormhole.other]")?,
        ];
        let rims = sheets.each_ref().map(|s| s.cycles.get(1).map_or(0, Vec::len));
        for (rim, place) in rims.iter().zip(["[wormhole.one]", "[wormhole.other]"]) {
            if *rim == 0 {
                return Err(Problem::MissingKey { key: "remove", place: place.to_owned() });
            }
        }
        if rims[0] != rims[1] {
            return Err(Problem::Unfit {
                place: "[wormhole]".into(),
                what: "the first hole's rim",
                value: format!("of {} sides", rims[0]),
                other: format!("the second's of {} sides", rims[1]),
            });
        }
        let twist = (self.twist % rims[0] as u64) as usize;
        let join = Join { one: (0, 1), other: (1, 1), twist };
        let mut builder = NetworkBuilder::new(setting.name.clone());
        let layout = lay(&mut builder, &sheets, &[join], setting)?;
        builder.layout(layout);
        setting.dims.all_met()?;
        Ok(builder.finish()?)
    }
}
