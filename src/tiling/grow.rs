//! Growth of a patch, ring by ring, by counting alone.
//!
//! The patch is a disk; its rim is a cyclic list of open sides, and between two of them stands
//! a vertex that knows how many tiles meet there. A tile laid on an open side replaces it in
//! the list by its own other sides and adds one to the two vertices at its ends; a vertex that
//! reaches q closes, and the two open sides that meet there become one edge. Each of these
//! steps takes constant time, so growth is linear in the number of sides. Nothing is assumed
//! about curvature: a sphere simply runs out of open sides.

use super::patch::{OPEN, Ring};
use super::{Patch, Tiling, TilingError};

/// From where a patch grows.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Centre {
    /// Ring 0 is one tile.
    #[default]
    Tile,
    /// Ring 0 is the q tiles round one vertex.
    Vertex,
}

/// Which tiles a ring adds.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Rule {
    /// Every tile that shares a vertex with the patch.
    #[default]
    Vertex,
    /// Every tile that shares an edge with the patch.
    Edge,
}

/// What patch to grow.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Growth {
    /// Sides of the tiles of ring 0, 1, …; begun again from the front when used up. One
    /// number for a regular tiling; `[5, 6]` alternates pentagons and hexagons.
    pub polygons: Vec<u32>,
    /// Whether the last of `polygons` is kept for all later rings instead of beginning again.
    pub keep_last: bool,
    /// Tiles at a vertex.
    pub around: u32,
    /// Rings beside ring 0.
    pub rings: u32,
    /// From where.
    pub centre: Centre,
    /// Which tiles a ring adds.
    pub rule: Rule,
}

impl Growth {
    /// Rings of the regular tiling {p,q} round a tile.
    pub fn regular(tiling: Tiling, rings: u32, rule: Rule) -> Self {
        Self {
            polygons: vec![tiling.polygon()],
            keep_last: false,
            around: tiling.around(),
            rings,
            centre: Centre::Tile,
            rule,
        }
    }
    /// Sides of the tiles of a ring.
    pub fn polygon_of_ring(&self, ring: u32) -> u32 {
        let ring = ring as usize;
        let last = self.polygons.len() - 1;
        if self.keep_last {
            self.polygons[ring.min(last)]
        } else {
            self.polygons[ring % self.polygons.len()]
        }
    }
}

/// Most of what a patch may have.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Bounds {
    /// Most tiles.
    pub tiles: u64,
    /// Most sides of all tiles together.
    pub sides: u64,
}

/// Grows a patch of at most `limit` tiles and 2^28 sides. Time and memory are linear in the
/// number of sides.
///
/// # Errors
/// [`TilingError`]; a patch that would exceed the limit is refused before its last ring, and
/// one that would exceed it by far from the growth of its first rings.
pub fn grow(growth: &Growth, limit: u64) -> Result<Patch, TilingError> {
    grow_within(growth, Bounds { tiles: limit, sides: 1 << 28 })
}

/// Like [`grow`], with both bounds given.
///
/// # Errors
/// As for [`grow`].
pub fn grow_within(growth: &Growth, bounds: Bounds) -> Result<Patch, TilingError> {
    let limit = bounds.tiles;
    if growth.polygons.is_empty() {
        return Err(TilingError::NoPolygon);
    }
    for &p in &growth.polygons {
        Tiling::new(u64::from(p), u64::from(growth.around))?;
    }
    let mut rim = Rim::new(growth, bounds)?;
    let mut sizes: Vec<u64> = vec![u64::from(rim.tiles)];
    for ring in 1..=growth.rings {
        if rim.rim_length == 0 {
            return Err(TilingError::Closed {
                tiling: Patch::describe(&growth.polygons, growth.around),
                tiles: rim.tiles,
                possible: ring - 1,
                rings: growth.rings,
            });
        }
        let before = rim.tiles;
        rim.begin_ring(growth.polygon_of_ring(ring));
        rim.room(rim.expected())?;
        match growth.rule {
            Rule::Vertex => rim.ring_by_vertices()?,
            Rule::Edge => rim.ring_by_edges()?,
        }
        sizes.push(u64::from(rim.tiles - before));
        if foreseen(&sizes, growth.rings) > 4.0 * limit as f64 {
            return Err(rim.too_many());
        }
    }
    Ok(rim.finish(growth.centre == Centre::Vertex))
}

/// The size of the last ring, foreseen from the sizes so far: the slowest of the last three
/// ratios goes on, or the size grows linearly, whichever is less.
fn foreseen(sizes: &[u64], rings: u32) -> f64 {
    let r = sizes.len() - 1;
    if r < 4 {
        return 0.0;
    }
    let left = (rings as usize - r) as f64;
    let ratio = (r - 2..=r).map(|k| sizes[k] as f64 / sizes[k - 1] as f64).fold(f64::MAX, f64::min);
    let last = sizes[r] as f64;
    if ratio > 1.3 {
        (last.ln() + left * ratio.ln()).exp()
    } else {
        let step = (sizes[r] as f64 - sizes[r - 1] as f64).max(0.0);
        last * left + step * left * left / 2.0
    }
}

/// Marks a vertex that stood on the rim when the ring began.
const OLD: u32 = 1 << 31;
const COUNT: u32 = OLD - 1;

struct Rim<'a> {
    growth: &'a Growth,
    bounds: Bounds,
    around: u32,
    sides: u32,
    rings: Vec<Ring>,
    tiles: u32,
    glue: Vec<u32>,
    next: Vec<u32>,
    prev: Vec<u32>,
    /// Of an open side: tiles at the vertex where it starts, and the mark [`OLD`].
    start: Vec<u32>,
    rim_length: u32,
    old_left: u32,
    /// An open side, moved on when it closes.
    cursor: u32,
}

impl<'a> Rim<'a> {
    fn new(growth: &'a Growth, bounds: Bounds) -> Result<Self, TilingError> {
        let p = growth.polygon_of_ring(0);
        let mut rim = Self {
            growth,
            bounds,
            around: growth.around,
            sides: p,
            rings: vec![Ring { first_tile: 0, first_side: 0, sides: p }],
            tiles: 1,
            glue: vec![OPEN; p as usize],
            next: (0..p).map(|s| (s + 1) % p).collect(),
            prev: (0..p).map(|s| (s + p - 1) % p).collect(),
            start: vec![1; p as usize],
            rim_length: p,
            old_left: 0,
            cursor: 0,
        };
        if growth.centre == Centre::Vertex {
            rim.room(u64::from(growth.around - 1))?;
            rim.start[0] |= OLD;
            rim.old_left = 1;
            rim.complete_old()?;
        }
        Ok(rim)
    }

    fn begin_ring(&mut self, sides: u32) {
        self.sides = sides;
        self.rings.push(Ring { first_tile: self.tiles, first_side: self.glue.len() as u32, sides });
    }

    fn ring_by_vertices(&mut self) -> Result<(), TilingError> {
        let mut at = self.cursor;
        for _ in 0..self.rim_length {
            self.start[at as usize] |= OLD;
            at = self.next[at as usize];
        }
        self.old_left = self.rim_length;
        // The first tile lies on the cursor's own side.
        self.cursor = self.next[self.cursor as usize];
        self.complete_old()
    }

    fn complete_old(&mut self) -> Result<(), TilingError> {
        while self.old_left > 0 && self.rim_length > 0 {
            let (at, ring) = (self.cursor, self.rings[self.rings.len() - 1]);
            let start = self.start[at as usize];
            if start & OLD != 0 {
                // The last tile missing at a vertex lies on the old side that starts there, so
                // that its side 0 looks inwards.
                let on_old = (start & COUNT) + 1 == self.around && at < ring.first_side;
                self.lay(if on_old { at } else { self.prev[at as usize] })?;
            } else {
                self.cursor = self.next[self.cursor as usize];
            }
        }
        Ok(())
    }

    fn ring_by_edges(&mut self) -> Result<(), TilingError> {
        let mut old = Vec::with_capacity(self.rim_length as usize);
        let mut at = self.cursor;
        for _ in 0..self.rim_length {
            old.push(at);
            at = self.next[at as usize];
        }
        for side in old {
            if self.glue[side as usize] == OPEN {
                self.lay(side)?;
            }
        }
        Ok(())
    }

    /// Tiles that the next ring will have: at a vertex where m tiles are missing they are m − 1
    /// beside those counted at its neighbours. Too many only where the patch closes up.
    fn expected(&self) -> u64 {
        if self.growth.rule == Rule::Edge {
            // A vertex where one tile is missing has it on both of its sides.
            return u64::from(self.rim_length).div_ceil(2);
        }
        let mut sum = 0;
        let mut at = self.cursor;
        for _ in 0..self.rim_length {
            sum += u64::from(self.around - (self.start[at as usize] & COUNT) - 1);
            at = self.next[at as usize];
        }
        sum
    }

    /// Refuses `more` tiles that would exceed the bounds.
    fn room(&self, more: u64) -> Result<(), TilingError> {
        let sides = self.glue.len() as u64 + more.saturating_mul(u64::from(self.sides));
        if u64::from(self.tiles) + more > self.bounds.tiles {
            return Err(self.too_many());
        }
        let limit = self.bounds.sides.min(u64::from(OPEN) - 1);
        if sides > limit {
            return Err(TilingError::TooManySides {
                tiling: Patch::describe(&self.growth.polygons, self.around),
                rings: self.growth.rings,
                limit,
            });
        }
        Ok(())
    }

    /// Lays a tile on an open side.
    fn lay(&mut self, on: u32) -> Result<(), TilingError> {
        self.room(1)?;
        let p = self.sides;
        let base = self.glue.len() as u32;
        let (first, last) = (base + 1, base + p - 1);
        let (before, after) = (self.prev[on as usize], self.next[on as usize]);
        self.glue.push(on);
        self.glue[on as usize] = base;
        self.glue.resize((base + p) as usize, OPEN);
        self.next.extend((base..base + p).map(|s| s + 1));
        self.prev.extend((base..base + p).map(|s| s.wrapping_sub(1)));
        self.start.push(0);
        self.start.push(self.start[on as usize] + 1);
        self.start.resize((base + p) as usize, 1);
        self.start[after as usize] += 1;
        self.link(before, first);
        self.link(last, after);
        self.tiles += 1;
        self.rim_length += p - 2;
        if self.cursor == on {
            self.cursor = first;
        }
        self.close(first)?;
        if self.glue[after as usize] == OPEN {
            self.close(after)?;
        }
        Ok(())
    }

    fn link(&mut self, a: u32, b: u32) {
        self.next[a as usize] = b;
        self.prev[b as usize] = a;
    }

    /// Closes the vertex where `out` starts if it is full, and what becomes full by that.
    fn close(&mut self, mut out: u32) -> Result<(), TilingError> {
        loop {
            let count = self.start[out as usize] & COUNT;
            if count < self.around {
                return Ok(());
            }
            let into = self.prev[out as usize];
            if count > self.around || into == out {
                return Err(self.misfit());
            }
            self.glue[into as usize] = out;
            self.glue[out as usize] = into;
            self.rim_length -= 2;
            self.old_left -= self.start[out as usize] >> 31;
            let on = self.next[out as usize];
            if on == into {
                self.old_left -= self.start[into as usize] >> 31;
                return if self.start[into as usize] & COUNT == self.around {
                    Ok(())
                } else {
                    Err(self.misfit())
                };
            }
            if self.cursor == into || self.cursor == out {
                self.cursor = on;
            }
            self.link(self.prev[into as usize], on);
            let (a, b) = (self.start[into as usize], self.start[on as usize]);
            self.old_left -= (a & b) >> 31;
            self.start[on as usize] = ((a & COUNT) + (b & COUNT)) | ((a | b) & OLD);
            out = on;
        }
    }

    fn finish(self, at_vertex: bool) -> Patch {
        let mut boundary = Vec::with_capacity(self.rim_length as usize);
        let first = self.rings.last().map_or(0, |r| r.first_side);
        let open = |s: &u32| self.glue[*s as usize] == OPEN;
        // Every open side belongs to the last ring; with one ring only, to the first.
        if let Some(begin) = (first..self.glue.len() as u32).find(open) {
            let mut at = begin;
            loop {
                boundary.push(at);
                at = self.next[at as usize];
                if at == begin {
                    break;
                }
            }
        }
        Patch {
            around: self.around,
            rings: self.rings,
            tiles: self.tiles,
            glue: self.glue,
            boundary,
            at_vertex,
        }
    }

    fn too_many(&self) -> TilingError {
        TilingError::TooManyTiles {
            tiling: Patch::describe(&self.growth.polygons, self.around),
            rings: self.growth.rings,
            limit: self.bounds.tiles,
        }
    }

    fn misfit(&self) -> TilingError {
        Patch::misfit(&self.growth.polygons, self.around, self.rings.len() as u32 - 1)
    }
}
