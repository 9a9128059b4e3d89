//! A patch of a tiling as a network: one tensor a tile.

use super::fields::Fields;
use super::{Selection, Setting};
use crate::network::file::Problem;
use crate::network::source::BlockSource;
use crate::network::{Layout, Network, NetworkBuilder};
use crate::tiling::{Bounds, Centre, Growth, Patch, Rule, Tiling, TilingError, grow_within};
use serde_json::{Map, Value, json};

mod sheet;

pub(super) use sheet::{Join, Sheet, lay};

/// By how many sides blocks are turned: leg k of the block lies on side k + turn.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Turns(
    /// One number a ring, begun again from the front when used up; empty for no turn.
    pub Vec<u32>,
);

/// What holds for some tiles only; a later rule goes before an earlier one.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct TileRule {
    /// Which tiles.
    pub tiles: Selection,
    /// Their block.
    pub block: Option<BlockSource>,
    /// By how many sides it is turned.
    pub turn: Option<u32>,
    /// Whether they have a bulk leg.
    pub bulk: Option<bool>,
    /// The state to which their bulk leg is fixed.
    pub bulk_state: Option<BlockSource>,
}

/// A patch of a tiling.
#[derive(Debug, Clone, PartialEq)]
pub struct TilingRecipe {
    /// Which patch.
    pub growth: Growth,
    /// The block of every tile; none for the perfect block with as many legs as needed.
    pub block: Option<BlockSource>,
    /// Blocks by ring, begun again from the front when used up; goes before `block`.
    pub blocks: Vec<BlockSource>,
    /// By how many sides blocks are turned.
    pub turns: Turns,
    /// Which tiles have a bulk leg.
    pub bulk: Selection,
    /// Dimension of the bulk legs, where it is their own.
    pub bulk_dimension: Option<usize>,
    /// The state to which every bulk leg is fixed; none leaves them open.
    pub bulk_state: Option<BlockSource>,
    /// Tiles that are taken out; what lay beside them becomes boundary.
    pub remove: Selection,
    /// Exceptions.
    pub rules: Vec<TileRule>,
}

pub(super) const KEYS: &[&str] = &[
    "polygon",
    "then",
    "around",
    "rings",
    "growth",
    "centre",
    "block",
    "blocks",
    "turn",
    "bulk",
    "bulk_dimension",
    "bulk_state",
    "remove",
    "tile",
];
pub(super) const RULE_KEYS: &[&str] = &["tiles", "block", "turn", "bulk", "bulk_state"];

impl TilingRecipe {
    /// The patch, its tiles perfect blocks without bulk legs.
    pub fn new(growth: Growth) -> Self {
        Self {
            growth,
            block: None,
            blocks: Vec::new(),
            turns: Turns::default(),
            bulk: Selection::None,
            bulk_dimension: None,
            bulk_state: None,
            remove: Selection::None,
            rules: Vec::new(),
        }
    }

    pub(super) fn read(map: &Map<String, Value>, place: &str) -> Result<Self, Problem> {
        let fields = Fields::new(map, KEYS, place)?;
        let most = u64::from(Tiling::MOST);
        let narrow = |list: Vec<u64>| list.into_iter().map(|n| n as u32).collect::<Vec<u32>>();
        let polygons = fields.numbers("polygon", 3..=most)?;
        let growth = Growth {
            polygons: narrow(polygons.ok_or_else(|| fields.missing("polygon"))?),
            keep_last: fields.word("then", "repeat, last")? == 1,
            around: fields.needed("around", 3..=most)? as u32,
            rings: fields.needed("rings", 0..=u64::from(u32::MAX))? as u32,
            centre: [Centre::Tile, Centre::Vertex][fields.word("centre", "tile, vertex")?],
            rule: [Rule::Vertex, Rule::Edge][fields.word("growth", "vertex, edge")?],
        };
        if growth.polygons.is_empty() {
            return Err(TilingError::NoPolygon.into());
        }
        let rules = fields.tables("tile")?;
        let bulk_dimension = fields.whole("bulk_dimension", 1..=u64::from(u32::MAX >> 1))?;
        Ok(Self {
            growth,
            block: fields.block("block")?,
            blocks: fields.blocks("blocks")?,
            turns: Turns(fields.numbers("turn", 0..=most)?.map(narrow).unwrap_or_default()),
            bulk: fields.selection("bulk")?.unwrap_or_default(),
            bulk_dimension: bulk_dimension.map(|d| d as usize),
            bulk_state: fields.block("bulk_state")?,
            remove: fields.selection("remove")?.unwrap_or_default(),
            rules: rules.into_iter().map(|m| TileRule::read(m, place)).collect::<Result<_, _>>()?,
        })
    }

    pub(super) fn to_table(&self) -> Map<String, Value> {
        let g = &self.growth;
        let mut map = Map::new();
        let mut put = |key: &str, value: Value| {
            map.insert(key.to_owned(), value);
        };
        put("polygon", if let [p] = g.polygons[..] { json!(p) } else { json!(g.polygons) });
        if g.keep_last {
            put("then", json!("last"));
        }
        put("around", json!(g.around));
        put("rings", json!(g.rings));
        put("growth", json!(if g.rule == Rule::Edge { "edge" } else { "vertex" }));
        if g.centre == Centre::Vertex {
            put("centre", json!("vertex"));
        }
        if let Some(b) = &self.block {
            put("block", b.to_value());
        }
        if !self.blocks.is_empty() {
            put("blocks", self.blocks.iter().map(BlockSource::to_value).collect());
        }
        if !self.turns.0.is_empty() {
            put("turn", json!(self.turns.0));
        }
        if self.bulk != Selection::None {
            put("bulk", json!(self.bulk.to_string()));
        }
        if let Some(d) = self.bulk_dimension {
            put("bulk_dimension", json!(d));
        }
        if let Some(s) = &self.bulk_state {
            put("bulk_state", s.to_value());
        }
        if self.remove != Selection::None {
            put("remove", json!(self.remove.to_string()));
        }
        if !self.rules.is_empty() {
            put("tile", self.rules.iter().map(TileRule::to_value).collect());
        }
        map
    }

    /// The patch, with the rings that the caller set over the recipe's.
    pub(super) fn patch(&self, setting: &Setting<'_>) -> Result<Patch, Problem> {
        let mut growth = self.growth.clone();
        growth.rings = setting.overrides.rings.unwrap_or(growth.rings);
        let (tiles, sides) = (setting.limits.tensors, setting.limits.legs);
        Ok(grow_within(&growth, Bounds { tiles, sides })?)
    }

    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        let sheet = Sheet::new(self, self.patch(setting)?, "[tiling]")?;
        let mut builder = NetworkBuilder::new(setting.name.clone());
        let layout = lay(&mut builder, &[sheet], &[], setting)?;
        builder.layout(layout);
        setting.dims.all_met()?;
        Ok(builder.finish()?)
    }

    fn block_of(&self, tile: u32, ring: u32) -> Option<&BlockSource> {
        let rule = self.rules.iter().rev().find(|r| r.block.is_some() && r.tiles.holds(tile, ring));
        match rule {
            Some(r) => r.block.as_ref(),
            None if self.blocks.is_empty() => self.block.as_ref(),
            None => Some(&self.blocks[ring as usize % self.blocks.len()]),
        }
    }
    fn turn_of(&self, tile: u32, ring: u32) -> u32 {
        let rule = self.rules.iter().rev().find(|r| r.turn.is_some() && r.tiles.holds(tile, ring));
        match rule.and_then(|r| r.turn) {
            Some(turn) => turn,
            None if self.turns.0.is_empty() => 0,
            None => self.turns.0[ring as usize % self.turns.0.len()],
        }
    }
    fn has_bulk(&self, tile: u32, ring: u32) -> bool {
        let rule = self.rules.iter().rev().find(|r| r.bulk.is_some() && r.tiles.holds(tile, ring));
        rule.and_then(|r| r.bulk).unwrap_or_else(|| self.bulk.holds(tile, ring))
    }
    fn state_of(&self, tile: u32, ring: u32) -> Option<&BlockSource> {
        let states = |r: &&TileRule| r.bulk_state.is_some() && r.tiles.holds(tile, ring);
        let rule = self.rules.iter().rev().find(states);
        rule.and_then(|r| r.bulk_state.as_ref()).or(self.bulk_state.as_ref())
    }
}

impl TileRule {
    fn read(map: &Map<String, Value>, place: &str) -> Result<Self, Problem> {
        let place = format!("a tile of {place}");
        let fields = Fields::new(map, RULE_KEYS, &place)?;
        let bulk = fields.get("bulk").map(|_| fields.flag("bulk", false)).transpose()?;
        let turn = fields.whole("turn", 0..=u64::from(Tiling::MOST))?;
        Ok(Self {
            tiles: fields.selection("tiles")?.ok_or_else(|| fields.missing("tiles"))?,
            block: fields.block("block")?,
            turn: turn.map(|t| t as u32),
            bulk,
            bulk_state: fields.block("bulk_state")?,
        })
    }
    fn to_value(&self) -> Value {
        let mut map = Map::new();
        map.insert("tiles".into(), json!(self.tiles.to_string()));
        if let Some(b) = &self.block {
            map.insert("block".into(), b.to_value());
        }
        if let Some(t) = self.turn {
            map.insert("turn".into(), json!(t));
        }
        if let Some(b) = self.bulk {
            map.insert("bulk".into(), json!(b));
        }
        if let Some(s) = &self.bulk_state {
            map.insert("bulk_state".into(), s.to_value());
        }
        Value::Object(map)
    }
}

/// The layout of sheets: rings, sheets and boundary cycles.
fn begin_layout(sheets: &[Sheet<'_>]) -> Layout {
    let mut layout = Layout::default();
    let kinds: Vec<_> = sheets.iter().map(|s| (s.patch.polygon(), s.patch.around())).collect();
    if let Some(&(Some(p), q)) = kinds.first()
        && kinds.iter().all(|k| *k == kinds[0])
    {
        layout.tiling = Some((p, q));
    }
    layout
}
