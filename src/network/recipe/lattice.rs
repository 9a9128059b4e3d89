//! Square, cubic, hexagonal and triangular lattices, open or periodic.

use super::fields::Fields;
use super::weave::{Leg, Weave};
use super::{Setting, perfect};
use crate::network::Network;
use crate::network::file::Problem;
use crate::network::source::BlockSource;
use serde_json::{Map, Value, json};

/// Which lattice.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LatticeKind {
    /// Four neighbours.
    Square,
    /// Six neighbours in three directions.
    Cubic,
    /// Three neighbours, two sites a cell.
    Hexagonal,
    /// Six neighbours in the plane.
    Triangular,
}

/// Which legs a lattice leaves open.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum LatticeOpen {
    /// The legs that stick out at the rim.
    Rim,
    /// One leg more on every site; at the rim sites have fewer legs.
    Sites,
    /// None; at the rim sites have fewer legs.
    None,
}

/// A lattice of nx × ny (× nz) cells, one tensor a site.
#[derive(Debug, Clone, PartialEq)]
pub struct LatticeRecipe {
    /// Which lattice.
    pub kind: LatticeKind,
    /// Cells in each direction.
    pub size: Vec<u64>,
    /// Which directions close into circles.
    pub periodic: Vec<bool>,
    /// Which legs stay open.
    pub open: LatticeOpen,
    /// The block of every site; none for the perfect block with as many legs as needed.
    pub block: Option<BlockSource>,
}

pub(super) const KEYS: &[&str] = &["kind", "size", "periodic", "open", "block"];
const KINDS: &str = "square, cubic, hexagonal, triangular";
const OPEN: &str = "rim, sites, none";

/// A step to a neighbour: from a site of the cell, to which site of which cell, and which step
/// of that site leads back.
struct Step {
    cell: [i64; 3],
    site: usize,
    back: usize,
}

const fn step(x: i64, y: i64, z: i64, site: usize, back: usize) -> Step {
    Step { cell: [x, y, z], site, back }
}

impl LatticeKind {
    /// Directions of the lattice.
    pub fn directions(self) -> usize {
        if self == Self::Cubic { 3 } else { 2 }
    }
    /// Steps of each site of a cell, counter-clockwise in the plane.
    fn steps(self) -> Vec<Vec<Step>> {
        match self {
            Self::Square => vec![vec![
                step(1, 0, 0, 0, 2),
                step(0, 1, 0, 0, 3),
                step(-1, 0, 0, 0, 0),
                step(0, -1, 0, 0, 1),
            ]],
            Self::Cubic => vec![vec![
                step(1, 0, 0, 0, 2),
                step(0, 1, 0, 0, 3),
                step(-1, 0, 0, 0, 0),
                step(0, -1, 0, 0, 1),
                step(0, 0, 1, 0, 5),
                step(0, 0, -1, 0, 4),
            ]],
            Self::Triangular => vec![vec![
                step(1, 0, 0, 0, 3),
                step(0, 1, 0, 0, 4),
                step(-1, 1, 0, 0, 5),
                step(-1, 0, 0, 0, 0),
                step(0, -1, 0, 0, 1),
                step(1, -1, 0, 0, 2),
            ]],
            Self::Hexagonal => vec![
                vec![step(0, 0, 0, 1, 1), step(-1, 0, 0, 1, 2), step(0, -1, 0, 1, 0)],
                vec![step(0, 1, 0, 0, 2), step(0, 0, 0, 0, 0), step(1, 0, 0, 0, 1)],
            ],
        }
    }
    fn place(self, cell: [u64; 3], site: usize) -> [f64; 2] {
        let [x, y, z] = cell.map(|c| c as f64);
        let half_root = 3f64.sqrt() / 2.0;
        match self {
            Self::Square => [x, y],
            Self::Cubic => [x + 0.38 * z, y + 0.27 * z],
            Self::Triangular => [x + 0.5 * y, half_root * y],
            Self::Hexagonal => {
                let s = site as f64;
                [x + 0.5 * y + 0.5 * s, half_root * y + half_root / 3.0 * s]
            }
        }
    }
    const fn word(self) -> &'static str {
        match self {
            Self::Square => "square",
            Self::Cubic => "cubic",
            Self::Hexagonal => "hexagonal",
            Self::Triangular => "triangular",
        }
    }
}

impl LatticeRecipe {
    pub(super) fn read(map: &Map<String, Value>) -> Result<Self, Problem> {
        let fields = Fields::new(map, KEYS, "[lattice]")?;
        if fields.get("kind").is_none() {
            return Err(fields.missing("kind"));
        }
        let kind = [
            LatticeKind::Square,
            LatticeKind::Cubic,
            LatticeKind::Hexagonal,
            LatticeKind::Triangular,
        ][fields.word("kind", KINDS)?];
        let size = fields.numbers("size", 1..=u64::from(u32::MAX))?;
        let periodic = match fields.get("periodic") {
            Some(Value::Array(list)) => {
                let flags = list.iter().map(Value::as_bool).collect::<Option<Vec<_>>>();
                let wrong = || fields.unknown("periodic", &json!(list), "true, false or a list");
                flags.ok_or_else(wrong)?
            }
            _ => vec![fields.flag("periodic", false)?],
        };
        Ok(Self {
            kind,
            size: size.ok_or_else(|| fields.missing("size"))?,
            periodic,
            open: [LatticeOpen::Rim, LatticeOpen::Sites, LatticeOpen::None]
                [fields.word("open", OPEN)?],
            block: fields.block("block")?,
        })
    }
    pub(super) fn to_table(&self) -> Map<String, Value> {
        let mut map = Map::new();
        map.insert("kind".into(), json!(self.kind.word()));
        map.insert("size".into(), json!(self.size));
        map.insert("periodic".into(), json!(self.periodic));
        let open = match self.open {
            LatticeOpen::Rim => "rim",
            LatticeOpen::Sites => "sites",
            LatticeOpen::None => "none",
        };
        map.insert("open".into(), json!(open));
        if let Some(b) = &self.block {
            map.insert("block".into(), b.to_value());
        }
        map
    }
    pub(super) fn expand(&self, setting: &mut Setting<'_>) -> Result<Network, Problem> {
        let directions = self.kind.directions();
        let spread = |given: usize| given == 1 || given == directions;
        let unfit = |what, value: String| Problem::Unfit {
            place: "[lattice]".into(),
            what,
            value,
            other: format!("a lattice of {directions} directions"),
        };
        if self.size.len() != directions {
            return Err(unfit("size", format!("{:?}", self.size)));
        }
        if !spread(self.periodic.len()) {
            return Err(unfit("periodic", format!("{:?}", self.periodic)));
        }
        let mut size = [1u64; 3];
        size[..directions].copy_from_slice(&self.size);
        let closes = |d: usize| {
            d < directions && self.periodic[if self.periodic.len() == 1 { 0 } else { d }]
        };
        let steps = self.kind.steps();
        let per_cell = steps.len() as u64;
        let cells = size.iter().try_fold(1u64, |n, &s| n.checked_mul(s));
        let sites = cells.and_then(|c| c.checked_mul(per_cell)).unwrap_or(u64::MAX);
        let limit = setting.limits.tensors.min(setting.limits.legs / steps[0].len() as u64);
        if sites > limit {
            return Err(Problem::TooMany { what: "tensors", count: sites, limit });
        }
        let most_steps = steps[0].len();
        let mut edge_of = vec![u32::MAX; sites as usize * most_steps];
        let mut edges = 0;
        let mut weave = Weave::default();
        for v in 0..sites {
            let (cell, site) = (v / per_cell, (v % per_cell) as usize);
            let at = [cell % size[0], cell / size[0] % size[1], cell / (size[0] * size[1])];
            weave.vertex();
            weave.layout.place.push(self.kind.place(at, site));
            for (k, s) in steps[site].iter().enumerate() {
                let mut to = [0u64; 3];
                let mut inside = true;
                for d in 0..3 {
                    let n = at[d] as i64 + s.cell[d];
                    let m = size[d] as i64;
                    inside &= (0..m).contains(&n) || closes(d);
                    to[d] = n.rem_euclid(m) as u64;
                }
                if !inside {
                    if self.open == LatticeOpen::Rim {
                        weave.leg(Leg::Open);
                    }
                    continue;
                }
                let w = ((to[2] * size[1] + to[1]) * size[0] + to[0]) * per_cell + s.site as u64;
                let (here, there) = (v as usize * most_steps + k, w as usize * most_steps + s.back);
                if edge_of[there] == u32::MAX {
                    edge_of[here] = edges;
                    edges += 1;
                } else {
                    edge_of[here] = edge_of[there];
                }
                weave.leg(Leg::Bond(edge_of[here]));
            }
            if self.open == LatticeOpen::Sites {
                weave.leg(Leg::Open);
            }
        }
        let planar = directions == 2 && self.open == LatticeOpen::Rim;
        weave.network(setting, planar, |_| perfect(self.block.as_ref()))
    }
}
