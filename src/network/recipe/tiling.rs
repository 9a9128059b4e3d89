//! A patch of a tiling as a network: one tensor a tile.

use super::{Selection, Setting};
use crate::network::file::{Problem, check_keys, whole, word};
use crate::network::source::NamedBlock;
use crate::network::{Layout, Network, NetworkBuilder};
use crate::tiling::{Centre, Growth, Patch, Rule, Tiling, grow};
use serde_json::{Map, Value, json};

mod sheet;

use sheet::{Sheet, lay};

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
    pub block: Option<NamedBlock>,
    /// By how many sides it is turned.
    pub turn: Option<u32>,
    /// Whether they have a bulk leg.
    pub bulk: Option<bool>,
    /// The state to which their bulk leg is fixed.
    pub bulk_state: Option<NamedBlock>,
}

/// A patch of a tiling.
#[derive(Debug, Clone, PartialEq)]
pub struct TilingRecipe {
    /// Which patch.
    pub growth: Growth,
    /// The block of every tile; none for the perfect block with as many legs as needed.
    pub block: Option<NamedBlock>,
    /// Blocks by ring, begun again from the front when used up; goes before `block`.
    pub blocks: Vec<NamedBlock>,
    /// By how many sides blocks are turned.
    pub turns: Turns,
    /// Which tiles have a bulk leg.
    pub bulk: Selection,
    /// Dimension of the bulk legs, where it is their own.
    pub bulk_dimension: Option<usize>,
    /// The state to which every bulk leg is fixed; none leaves them open.
    pub bulk_state: Option<NamedBlock>,
    /// Tiles that are taken out; what lay beside them becomes boundary.
    pub remove: Selection,
    /// Exceptions.
    pub rules: Vec<TileRule>,
}

const KEYS: &[&str] = &[
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
const RULE_KEYS: &[&str] = &["tiles", "block", "turn", "bulk", "bulk_state"];

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
        check_keys(map, KEYS, place)?;
        let needed = |key: &'static str| Problem::MissingKey { key, place: place.to_owned() };
        let most = u64::from(Tiling::MOST);
        let polygons = list(map, "polygon", place, 3..=most)?.ok_or_else(|| needed("polygon"))?;
        let around = whole(map, "around", place, 3..=most)?.ok_or_else(|| needed("around"))?;
        let rings = whole(map, "rings", place, 0..=u64::from(u32::MAX))?;
        let choose = |key, known: &'static str, default: bool| match word(map, key, place, known)? {
            None => Ok(default),
            Some(w) => match known.split(", ").position(|k| k == w) {
                Some(n) => Ok(n == 1),
                None => Err(unknown(key, place, w, known)),
            },
        };
        let rule = if choose("growth", "vertex, edge", false)? { Rule::Edge } else { Rule::Vertex };
        let centre =
            if choose("centre", "tile, vertex", false)? { Centre::Vertex } else { Centre::Tile };
        let keep_last = choose("then", "repeat, last", false)?;
        let growth = Growth {
            polygons,
            keep_last,
            around: around as u32,
            rings: rings.ok_or_else(|| needed("rings"))? as u32,
            centre,
            rule,
        };
        let blocks = match map.get("blocks") {
            None => Vec::new(),
            Some(Value::Array(list)) => {
                list.iter().map(|v| as_block(v, "blocks", place)).collect::<Result<_, _>>()?
            }
            Some(other) => return Err(unknown("blocks", place, &other.to_string(), BLOCKS)),
        };
        let rules = match map.get("tile") {
            None => Vec::new(),
            Some(Value::Array(list)) => {
                list.iter().map(|v| TileRule::read(v, place)).collect::<Result<_, _>>()?
            }
            Some(other) => {
                return Err(unknown("tile", place, &other.to_string(), "a list of tables"));
            }
        };
        Ok(Self {
            growth,
            block: block(map, "block", place)?,
            blocks,
            turns: Turns(list(map, "turn", place, 0..=most)?.unwrap_or_default()),
            bulk: selection(map, "bulk", place)?.unwrap_or_default(),
            bulk_dimension: whole(map, "bulk_dimension", place, 1..=u64::from(u32::MAX >> 1))?
                .map(|d| d as usize),
            bulk_state: block(map, "bulk_state", place)?,
            remove: selection(map, "remove", place)?.unwrap_or_default(),
            rules,
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
            put("blocks", self.blocks.iter().map(NamedBlock::to_value).collect());
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
        Ok(grow(&growth, setting.limits.tensors)?)
    }

    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        let sheet = Sheet::new(self, self.patch(setting)?, "[tiling]")?;
        let mut builder = NetworkBuilder::new(setting.name.clone());
        let layout = lay(&mut builder, &[sheet], &[], setting)?;
        builder.layout(layout);
        setting.dims.all_met()?;
        Ok(builder.finish()?)
    }

    fn block_of(&self, tile: u32, ring: u32) -> Option<&NamedBlock> {
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
    fn state_of(&self, tile: u32, ring: u32) -> Option<&NamedBlock> {
        let states = |r: &&TileRule| r.bulk_state.is_some() && r.tiles.holds(tile, ring);
        let rule = self.rules.iter().rev().find(states);
        rule.and_then(|r| r.bulk_state.as_ref()).or(self.bulk_state.as_ref())
    }
}

impl TileRule {
    fn read(value: &Value, place: &str) -> Result<Self, Problem> {
        let place = format!("a tile of {place}");
        let Value::Object(map) = value else {
            return Err(unknown("tile", &place, &value.to_string(), "a list of tables"));
        };
        check_keys(map, RULE_KEYS, &place)?;
        let bulk = match map.get("bulk") {
            None => None,
            Some(Value::Bool(b)) => Some(*b),
            Some(other) => return Err(unknown("bulk", &place, &other.to_string(), "true, false")),
        };
        Ok(Self {
            tiles: selection(map, "tiles", &place)?
                .ok_or(Problem::MissingKey { key: "tiles", place: place.clone() })?,
            block: block(map, "block", &place)?,
            turn: whole(map, "turn", &place, 0..=u64::from(Tiling::MOST))?.map(|t| t as u32),
            bulk,
            bulk_state: block(map, "bulk_state", &place)?,
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

const BLOCKS: &str = "a block's name, or a table with family and settings";

fn unknown(key: &'static str, place: &str, value: &str, known: &'static str) -> Problem {
    Problem::Word { key, place: place.to_owned(), value: value.to_owned(), known }
}

fn as_block(value: &Value, key: &'static str, place: &str) -> Result<NamedBlock, Problem> {
    NamedBlock::from_value(value).ok_or_else(|| unknown(key, place, &value.to_string(), BLOCKS))
}

pub(super) fn block(
    map: &Map<String, Value>,
    key: &'static str,
    place: &str,
) -> Result<Option<NamedBlock>, Problem> {
    map.get(key).map(|v| as_block(v, key, place)).transpose()
}

fn selection(
    map: &Map<String, Value>,
    key: &'static str,
    place: &str,
) -> Result<Option<Selection>, Problem> {
    let Some(value) = map.get(key) else { return Ok(None) };
    let text = value.as_str().map_or_else(|| value.to_string(), str::to_owned);
    match Selection::parse(&text) {
        Some(s) => Ok(Some(s)),
        None => Err(Problem::Selection { key, place: place.to_owned(), text }),
    }
}

/// A whole number, or a list of them.
fn list(
    map: &Map<String, Value>,
    key: &'static str,
    place: &str,
    range: std::ops::RangeInclusive<u64>,
) -> Result<Option<Vec<u32>>, Problem> {
    let Some(Value::Array(items)) = map.get(key) else {
        return Ok(whole(map, key, place, range)?.map(|n| vec![n as u32]));
    };
    let numbers = items.iter().map(|v| {
        v.as_u64().filter(|n| range.contains(n)).map(|n| n as u32).ok_or_else(|| Problem::Range {
            key,
            place: place.to_owned(),
            value: v.to_string(),
            least: *range.start(),
            most: *range.end(),
        })
    });
    numbers.collect::<Result<Vec<_>, _>>().map(Some)
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
