//! Tiles of a regular tiling as they lie in the plane: corners, sides, which leg leaves
//! through which side. Everything follows from the places of the tiles' centres.

use super::geometry::Plane;
use crate::network::{Network, TensorId, tile_frames};
use crate::tiling::Curvature;
use crate::tiling::geometry::Frame;
use num_complex::Complex64;
use std::f64::consts::TAU;

/// A tile: where its centre is, and where its side 0 looks when the tile is moved to 0.
#[derive(Debug, Clone, Copy)]
pub(super) struct Tile {
    pub(super) centre: Complex64,
    pub(super) turn: Complex64,
    pub(super) scale: f64,
}

/// A patch of tiles, one tensor a tile; tensors without a tile (states on bulk legs) have
/// none.
#[derive(Debug)]
pub(super) struct Tiles {
    pub(super) plane: Plane,
    pub(super) p: usize,
    pub(super) tiles: Vec<Option<Tile>>,
    /// Which of several glued patches each tensor belongs to; each lies in a plane of its own.
    pub(super) sheet: Vec<u32>,
    pub(super) sheets: usize,
    /// Which leg of a tensor leaves through each of its tile's sides; `u32::MAX` for none.
    doors: Vec<u32>,
    middle: f64,
    corner: f64,
}

const NONE: u32 = u32::MAX;

impl Tiles {
    /// The tiles of a network that tells its tiling; `None` where what it tells does not fit
    /// together (other polygons among the tiles, say).
    pub(super) fn of(network: &Network) -> Option<Self> {
        let layout = network.layout()?;
        let (p, q) = layout.tiling?;
        if p < 3 || q < 3 {
            return None;
        }
        let plane = Plane::of(p, q);
        let n = network.tensors();
        let sheet: Vec<u32> = network.tensor_ids().map(|t| layout.sheet_of(t)).collect();
        let mut frames = tile_frames(network)?.1;
        if plane == Plane::Spherical {
            turn_sphere(&mut frames, p, q);
        }
        let told: Vec<Option<(Complex64, f64)>> = frames
            .iter()
            .map(|f| f.as_ref().map(|f| (f.place(), f.angle())))
            .map(|f| f.map(|(z, angle)| (Complex64::new(z[0], z[1]), angle)))
            .collect();
        let framed = told.iter().any(Option::is_some);
        let sound = |z: &Complex64| {
            z.re.is_finite()
                && z.im.is_finite()
                && z.norm() < 1e6
                && (plane != Plane::Hyperbolic || z.norm_sqr() < 1.0)
        };
        let place: Vec<Option<Complex64>> = (0..n)
            .map(|t| match told[t] {
                Some((z, _)) => Some(z),
                None if framed => None,
                None => layout.place.get(t).map(|z| Complex64::new(z[0], z[1])),
            })
            .map(|z| z.filter(sound))
            .collect();
        if place.iter().all(Option::is_none) {
            return None;
        }
        let half = match plane {
            Plane::Euclidean => half_step(network, &place, &sheet)?,
            _ => 0.0,
        };
        let mut boundary = vec![false; network.labels()];
        for l in network.boundary() {
            boundary[l.index()] = true;
        }
        let (middle, corner) = plane.tile(p, q, half);
        let p = p as usize;
        let mut tiles = vec![None; n];
        let mut doors = vec![NONE; n * p];
        for t in 0..n {
            let Some(centre) = place[t] else { continue };
            let door = &mut doors[t * p..(t + 1) * p];
            let turn = if let Some((_, angle)) = told[t] {
                if network.legs(TensorId::new(t as u32)).len() < p {
                    return None;
                }
                door.iter_mut().enumerate().for_each(|(s, d)| *d = s as u32);
                Complex64::from_polar(1.0, angle)
            } else {
                orient(network, t, plane, &place, &boundary, door)?
            };
            tiles[t] = Some(Tile { centre, turn, scale: plane.scale(centre) });
        }
        let sheets = sheet.iter().max().map_or(1, |&s| s as usize + 1);
        let made = Self { plane, p, tiles, sheet, sheets, doors, middle, corner };
        made.fits(network).then_some(made)
    }
    /// Whether neighbours agree on the wall between them.
    fn fits(&self, network: &Network) -> bool {
        (0..self.tiles.len()).all(|t| {
            let Some(tile) = self.tiles[t] else { return true };
            (0..self.p).all(|s| {
                let Some(leg) = self.leg(t, s) else { return true };
                let label = network.legs(TensorId::new(t as u32))[leg];
                let Some(u) = other(network, label, t) else { return true };
                if self.sheet[u] != self.sheet[t] || tile.scale < 1e-4 {
                    return true;
                }
                let (Some(them), Some(theirs)) =
                    (self.tiles[u], self.side_of(network, u, label, t))
                else {
                    return true;
                };
                let (a, b) = self.wall(t, s);
                let (c, d) = self.wall(u, theirs);
                let slack = 0.08 * self.middle * tile.scale.max(them.scale);
                (a - d).norm() < slack && (b - c).norm() < slack
            })
        })
    }
    /// The leg that leaves tensor `t` through side `s`.
    pub(super) fn leg(&self, t: usize, s: usize) -> Option<usize> {
        let leg = self.doors[t * self.p + s];
        (leg != NONE).then_some(leg as usize)
    }
    /// The side of `t` through which `label` leaves.
    pub(super) fn side(
        &self,
        network: &Network,
        t: usize,
        label: crate::tensor::Label,
    ) -> Option<usize> {
        let legs = network.legs(TensorId::new(t as u32));
        (0..self.p).find(|&s| self.leg(t, s).is_some_and(|k| legs[k] == label))
    }
    fn side_of(
        &self,
        network: &Network,
        u: usize,
        label: crate::tensor::Label,
        from: usize,
    ) -> Option<usize> {
        debug_assert!(u != from);
        self.side(network, u, label)
    }
    fn turned(&self, tile: &Tile, s: f64, radius: f64) -> Complex64 {
        let z = tile.turn * Complex64::from_polar(radius, TAU * s / self.p as f64);
        self.plane.carry(tile.centre, z)
    }
    /// The two ends of a side, counter-clockwise about the tile.
    pub(super) fn wall(&self, t: usize, s: usize) -> (Complex64, Complex64) {
        let tile = self.tiles[t].expect("a tensor with a tile");
        let s = s as f64;
        (self.turned(&tile, s - 0.5, self.corner), self.turned(&tile, s + 0.5, self.corner))
    }
    /// The middle of a side.
    pub(super) fn gate(&self, t: usize, s: usize) -> Complex64 {
        let tile = self.tiles[t].expect("a tensor with a tile");
        self.turned(&tile, s as f64, self.middle)
    }
    /// A point on the ray from the tile's centre through the middle of side `s`, at `far`
    /// times the on-paper distance that the middle has when the tile lies at 0.
    pub(super) fn along(&self, t: usize, s: f64, far: f64) -> Complex64 {
        let tile = self.tiles[t].expect("a tensor with a tile");
        self.turned(&tile, s, far * self.middle)
    }
    /// Where the ray through side `s` ends on the unit circle (hyperbolic plane).
    pub(super) fn ideal(&self, t: usize, s: usize) -> Complex64 {
        let tile = self.tiles[t].expect("a tensor with a tile");
        self.turned(&tile, s as f64, 1.0)
    }
    /// On-paper distance from a tile's centre to its side.
    pub(super) fn size(&self, t: usize) -> f64 {
        // The globe is drawn without a change of areas: all its tiles are of one size.
        let scale = |tile: Tile| if self.plane == Plane::Spherical { 1.0 } else { tile.scale };
        self.tiles[t].map_or(0.0, |tile| scale(tile) * self.middle)
    }
}

/// Turns a sphere on which a tile lies at the pole that the projection sends to infinity, so
/// that the pole comes to lie inside that tile, near a corner.
fn turn_sphere(frames: &mut [Option<Frame>], p: u32, q: u32) {
    let lost = |f: &Frame| f.place().iter().any(|x| !x.is_finite() || x.abs() > 50.0);
    if !frames.iter().flatten().any(lost) {
        return;
    }
    let curvature = Curvature::Spherical;
    let (_, corner) = Plane::Spherical.tile(p, q, 0.0);
    // Off every axis of symmetry, or two bonds would lie on one line through the pole.
    let way = Frame::turn(curvature, std::f64::consts::PI / f64::from(p) - 0.4)
        .after(&Frame::shift(curvature, corner * 0.7));
    for frame in frames.iter_mut().flatten() {
        *frame = way.after(frame);
    }
}

/// The other tensor that holds a label, where there are exactly two holders.
pub(super) fn other(network: &Network, label: crate::tensor::Label, t: usize) -> Option<usize> {
    match network.holders(label) {
        [a, b] if a.index() == t && b.index() != t => Some(b.index()),
        [a, b] if b.index() == t && a.index() != t => Some(a.index()),
        _ => None,
    }
}

/// Half the distance of the first two neighbours found.
fn half_step(network: &Network, place: &[Option<Complex64>], sheet: &[u32]) -> Option<f64> {
    for t in network.tensor_ids() {
        let Some(here) = place[t.index()] else { continue };
        for &l in network.legs(t) {
            let across = other(network, l, t.index()).filter(|&u| sheet[u] == sheet[t.index()]);
            if let Some(there) = across.and_then(|u| place[u]) {
                let d = (there - here).norm();
                if d > 0.0 {
                    return Some(d / 2.0);
                }
            }
        }
    }
    Some(0.5)
}

/// Finds which leg leaves through which side, and where side 0 looks. Bonds say which way
/// they leave; the legs' order says the rest: side `s` belongs to leg `s` up to a rotation
/// or a reflection. Where the order tells nothing of the kind, free sides go to the legs
/// that are left, in their order.
fn orient(
    network: &Network,
    t: usize,
    plane: Plane,
    place: &[Option<Complex64>],
    boundary: &[bool],
    door: &mut [u32],
) -> Option<Complex64> {
    let p = door.len();
    let step = TAU / p as f64;
    let legs = network.legs(TensorId::new(t as u32));
    let here = place[t]?;
    let mut sided: Vec<usize> = Vec::with_capacity(p);
    let mut looks: Vec<(usize, f64)> = Vec::with_capacity(p);
    for (k, &label) in legs.iter().enumerate() {
        match network.holders(label) {
            [_] => {
                if boundary[label.index()] {
                    sided.push(k);
                }
            }
            _ => {
                if let Some(there) = other(network, label, t).and_then(|u| place[u])
                    && (there - here).norm() > 1e-12
                {
                    let w = plane.centre(here, there);
                    looks.push((k, w.arg()));
                    sided.push(k);
                }
            }
        }
    }
    if sided.len() > p {
        return None;
    }
    let order = |k: usize| sided.iter().position(|&s| s == k).expect("listed above") as f64;
    let Some(&(first, look)) = looks.first() else {
        for (s, &k) in sided.iter().enumerate() {
            door[s] = k as u32;
        }
        return Some(Complex64::from_polar(1.0, -std::f64::consts::FRAC_PI_2));
    };
    let off = |angle: f64| {
        let turns = angle / step;
        (turns - turns.round()).abs()
    };
    for way in [1.0, -1.0] {
        let start = look - way * order(first) * step;
        let near = |(k, angle): &(usize, f64)| {
            let miss = (angle - start - way * order(*k) * step) / TAU;
            (miss - miss.round()).abs() * p as f64
        };
        if sided.len() == p && looks.iter().all(|l| near(l) < 0.2) {
            for (i, &k) in sided.iter().enumerate() {
                let s = if way > 0.0 { i } else { (p - i) % p };
                door[s] = k as u32;
            }
            return Some(Complex64::from_polar(1.0, start));
        }
    }
    let start = look;
    for &(k, angle) in &looks {
        if off(angle - start) > 0.2 {
            return None;
        }
        let s = ((angle - start) / step).round().rem_euclid(p as f64) as usize % p;
        if door[s] != NONE {
            return None;
        }
        door[s] = k as u32;
    }
    let mut left = sided.iter().filter(|k| looks.iter().all(|l| l.0 != **k));
    for slot in door.iter_mut().filter(|d| **d == NONE) {
        if let Some(&k) = left.next() {
            *slot = k as u32;
        }
    }
    Some(Complex64::from_polar(1.0, start))
}
