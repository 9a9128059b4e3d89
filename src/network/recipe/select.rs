//! Which tiles of a patch: `none`, `all`, `centre`, `rings:0,2..4`, `tiles:3,7..9`.

use crate::network::file::Problem;
use std::fmt;

/// A set of tiles, by kind.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub enum Selection {
    /// No tile.
    #[default]
    None,
    /// Every tile.
    All,
    /// The tiles of ring 0.
    Centre,
    /// Every tile of these rings, as half-open ranges.
    Rings(Vec<(u32, u32)>),
    /// These tiles, as half-open ranges.
    Tiles(Vec<(u32, u32)>),
}

impl Selection {
    /// Reads the text of a selection; nothing where it is none.
    pub fn parse(text: &str) -> Option<Self> {
        match text.trim() {
            "none" => Some(Self::None),
            "all" => Some(Self::All),
            "centre" => Some(Self::Centre),
            other => {
                let (kind, list) = other.split_once(':')?;
                let ranges = list.split(',').map(range).collect::<Option<Vec<_>>>()?;
                match kind.trim() {
                    "rings" => Some(Self::Rings(ranges)),
                    "tiles" => Some(Self::Tiles(ranges)),
                    _ => None,
                }
            }
        }
    }
    /// Whether a tile belongs to it.
    pub fn holds(&self, tile: u32, ring: u32) -> bool {
        let within = |ranges: &[(u32, u32)], n| ranges.iter().any(|&(a, b)| (a..b).contains(&n));
        match self {
            Self::None => false,
            Self::All => true,
            Self::Centre => ring == 0,
            Self::Rings(ranges) => within(ranges, ring),
            Self::Tiles(ranges) => within(ranges, tile),
        }
    }
    /// Refuses a selection that names a ring or tile past the end.
    pub(in crate::network) fn check(
        &self,
        key: &'static str,
        place: &str,
        tiles: usize,
        rings: usize,
    ) -> Result<(), Problem> {
        let (what, ranges, count) = match self {
            Self::Rings(r) => ("ring", r, rings as u64),
            Self::Tiles(r) => ("tile", r, tiles as u64),
            _ => return Ok(()),
        };
        match ranges.iter().find(|r| u64::from(r.1) > count) {
            None => Ok(()),
            Some(r) => Err(Problem::SelectedPastTheEnd {
                key,
                place: place.to_owned(),
                what,
                number: u64::from(r.1) - 1,
                count,
            }),
        }
    }
}

fn range(text: &str) -> Option<(u32, u32)> {
    match text.split_once("..") {
        Some((a, b)) => {
            let (a, b) = (a.trim().parse().ok()?, b.trim().parse().ok()?);
            (a < b).then_some((a, b))
        }
        None => {
            let n: u32 = text.trim().parse().ok()?;
            Some((n, n.checked_add(1)?))
        }
    }
}

impl fmt::Display for Selection {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (kind, ranges) = match self {
            Self::None => return f.write_str("none"),
            Self::All => return f.write_str("all"),
            Self::Centre => return f.write_str("centre"),
            Self::Rings(r) => ("rings", r),
            Self::Tiles(r) => ("tiles", r),
        };
        let list: Vec<String> = ranges
            .iter()
            .map(|&(a, b)| if b == a + 1 { a.to_string() } else { format!("{a}..{b}") })
            .collect();
        write!(f, "{kind}:{}", list.join(","))
    }
}
