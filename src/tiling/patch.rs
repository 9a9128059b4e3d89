//! A patch of tiles.

use super::TilingError;

/// One side of one tile of a patch.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Side {
    /// The tile, numbered from 0 in the order in which tiles were laid.
    pub tile: u32,
    /// The side, numbered from 0 counter-clockwise.
    pub side: u32,
}

/// The tiles of one ring; all have one number of sides.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Ring {
    pub first_tile: u32,
    pub first_side: u32,
    pub sides: u32,
}

/// What is not glued to anything.
pub(super) const OPEN: u32 = u32::MAX;

/// Tiles laid side by side, ring after ring.
///
/// Sides of a tile are numbered counter-clockwise; side 0 of every tile but the first is the
/// one on which it was laid against an earlier tile: one of an earlier ring, where the tile
/// touches one with a side. Invariants: (1) gluing is mutual;
/// (2) `boundary` holds every open side once, in counter-clockwise order; (3) tiles are
/// numbered ring by ring, counter-clockwise within a ring. Storage is four bytes a side.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Patch {
    pub(super) around: u32,
    pub(super) rings: Vec<Ring>,
    pub(super) tiles: u32,
    pub(super) glue: Vec<u32>,
    pub(super) boundary: Vec<u32>,
    pub(super) at_vertex: bool,
}

impl Patch {
    /// Number of tiles.
    pub fn tiles(&self) -> usize {
        self.tiles as usize
    }
    /// Tiles at an inner vertex.
    pub fn around(&self) -> u32 {
        self.around
    }
    /// Whether it was grown from a vertex: then that vertex, where side 0 of the first tile
    /// starts, is the middle.
    pub fn is_centred_at_vertex(&self) -> bool {
        self.at_vertex
    }
    /// Tiles in each ring.
    pub fn ring_sizes(&self) -> Vec<usize> {
        (0..self.rings.len())
            .map(|r| (self.ring_end(r) - self.rings[r].first_tile) as usize)
            .collect()
    }
    fn ring_end(&self, ring: usize) -> u32 {
        self.rings.get(ring + 1).map_or(self.tiles, |r| r.first_tile)
    }
    /// The ring of a tile.
    pub fn ring_of(&self, tile: u32) -> u32 {
        self.rings.partition_point(|r| r.first_tile <= tile) as u32 - 1
    }
    /// Number of sides of a tile.
    pub fn sides_of(&self, tile: u32) -> u32 {
        self.rings[self.ring_of(tile) as usize].sides
    }
    /// The number of sides, where all tiles have the same.
    pub fn polygon(&self) -> Option<u32> {
        let first = self.rings.first()?.sides;
        self.rings.iter().all(|r| r.sides == first).then_some(first)
    }
    /// Number of all sides of all tiles.
    pub fn sides(&self) -> usize {
        self.glue.len()
    }
    /// Number of a side among all sides, tile after tile.
    pub fn number(&self, side: Side) -> usize {
        let ring = self.rings[self.ring_of(side.tile) as usize];
        (ring.first_side + (side.tile - ring.first_tile) * ring.sides + side.side) as usize
    }
    /// The side of this number; the inverse of [`Self::number`].
    pub fn side(&self, number: usize) -> Side {
        let number = number as u32;
        let ring = self.rings[self.rings.partition_point(|r| r.first_side <= number) - 1];
        let within = number - ring.first_side;
        Side { tile: ring.first_tile + within / ring.sides, side: within % ring.sides }
    }
    /// What a side is glued to, by number; nothing where it is open.
    pub fn glued(&self, number: usize) -> Option<usize> {
        let other = self.glue[number];
        (other != OPEN).then_some(other as usize)
    }
    /// The neighbour across a side, and which of its sides touches.
    pub fn neighbour(&self, side: Side) -> Option<Side> {
        self.glued(self.number(side)).map(|n| self.side(n))
    }
    /// Open sides in counter-clockwise order.
    pub fn boundary(&self) -> impl ExactSizeIterator<Item = Side> + '_ {
        self.boundary.iter().map(|&n| self.side(n as usize))
    }
    /// Numbers of the open sides in counter-clockwise order.
    pub fn boundary_numbers(&self) -> &[u32] {
        &self.boundary
    }
    /// Vertices, counted through the corners that gluing brings together; edges; tiles. A
    /// disk has vertices − edges + tiles = 1, a sphere 2. Time and memory linear in sides.
    pub fn euler_counts(&self) -> (usize, usize, usize) {
        let sides = self.glue.len();
        // Corner n is where side n starts; the side before it ends there, and what that
        // side is glued to starts there too: the next corner round the same vertex.
        let mut seen = vec![false; sides];
        let mut vertices = 0;
        // Corners of open vertices first, each chain from its clockwise end.
        let chains = self.boundary.iter().map(|&n| n as usize).chain(0..sides);
        for start in chains {
            if seen[start] {
                continue;
            }
            vertices += 1;
            let mut at = start;
            loop {
                seen[at] = true;
                let s = self.side(at);
                let p = self.sides_of(s.tile) as usize;
                let before = at - s.side as usize + (s.side as usize + p - 1) % p;
                match self.glued(before) {
                    Some(partner) if !seen[partner] => at = partner,
                    _ => break,
                }
            }
        }
        let glued = self.glue.iter().filter(|&&g| g != OPEN).count();
        (vertices, glued / 2 + self.boundary.len(), self.tiles())
    }
    pub(super) fn describe(polygons: &[u32], around: u32) -> String {
        let list: Vec<String> = polygons.iter().map(u32::to_string).collect();
        format!("{{{},{around}}}", list.join("/"))
    }
    pub(super) fn misfit(polygons: &[u32], around: u32, ring: u32) -> TilingError {
        TilingError::Misfit { tiling: Self::describe(polygons, around), ring }
    }
}
