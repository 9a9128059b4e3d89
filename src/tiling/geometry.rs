//! Lengths of regular tilings, and where the tiles of a patch lie. For drawing only: nothing
//! here decides who is whose neighbour.
//!
//! Hyperbolic tilings (curvature −1) live in the Poincaré disk, spherical ones (curvature 1)
//! in the plane by stereographic projection from the pole opposite the middle, Euclidean ones
//! in the plane with edges of length 1.

use super::{Curvature, Patch, Tiling};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Lengths in the tiling {p,q}; radii are those of one tile.
///
/// With cos for cosh and tan for tanh on the sphere: cosh r = cos(π/q)/sin(π/p),
/// cosh R = cot(π/p)·cot(π/q), cosh(l/2) = cos(π/p)/sin(π/q), area = π(p − 2 − 2p/q), and an
/// edge of the middle tile is an arc of radius 1/sinh r about a point at 1/tanh r
/// (Canad. Math. Bull. 40, 158 (1997)).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Lengths {
    /// Sign of the curvature.
    pub curvature: Curvature,
    /// Length of an edge, l.
    pub edge: f64,
    /// From the middle of a tile to the middle of an edge, r.
    pub inradius: f64,
    /// From the middle of a tile to a vertex, R.
    pub circumradius: f64,
    /// R as it is drawn when the middle of the tile is the origin.
    pub vertex_drawn: f64,
    /// r as it is drawn when the middle of the tile is the origin.
    pub edge_middle_drawn: f64,
    /// Radius of the arc that draws an edge of the middle tile; nothing for straight edges.
    pub arc_radius: Option<f64>,
    /// Distance of that arc's centre from the origin.
    pub arc_centre: Option<f64>,
    /// Area of a tile.
    pub area: f64,
}

impl Lengths {
    /// The lengths of a regular tiling.
    pub fn of(tiling: Tiling) -> Self {
        let (p, q) = (f64::from(tiling.polygon()), f64::from(tiling.around()));
        let curvature = tiling.curvature();
        let cos_r = (PI / q).cos() / (PI / p).sin();
        let cos_big = 1.0 / ((PI / p).tan() * (PI / q).tan());
        let cos_half = (PI / p).cos() / (PI / q).sin();
        match curvature {
            Curvature::Hyperbolic => {
                let (r, big) = (cos_r.acosh(), cos_big.acosh());
                Self {
                    curvature,
                    edge: 2.0 * cos_half.acosh(),
                    inradius: r,
                    circumradius: big,
                    vertex_drawn: (big / 2.0).tanh(),
                    edge_middle_drawn: (r / 2.0).tanh(),
                    arc_radius: Some(1.0 / r.sinh()),
                    arc_centre: Some(1.0 / r.tanh()),
                    area: PI * (p - 2.0 - 2.0 * p / q),
                }
            }
            Curvature::Euclidean => {
                let (r, big) = (0.5 / (PI / p).tan(), 0.5 / (PI / p).sin());
                Self {
                    curvature,
                    edge: 1.0,
                    inradius: r,
                    circumradius: big,
                    vertex_drawn: big,
                    edge_middle_drawn: r,
                    arc_radius: None,
                    arc_centre: None,
                    area: p * r / 2.0,
                }
            }
            Curvature::Spherical => {
                let (r, big) = (cos_r.clamp(-1.0, 1.0).acos(), cos_big.clamp(-1.0, 1.0).acos());
                Self {
                    curvature,
                    edge: 2.0 * cos_half.clamp(-1.0, 1.0).acos(),
                    inradius: r,
                    circumradius: big,
                    vertex_drawn: (big / 2.0).tan(),
                    edge_middle_drawn: (r / 2.0).tan(),
                    arc_radius: Some(1.0 / r.sin()),
                    arc_centre: Some(1.0 / r.tan()),
                    area: PI * (2.0 * p / q - (p - 2.0)),
                }
            }
        }
    }
}

/// A motion of the surface that takes a tile from the origin to its place.
///
/// On the sphere, in the plane and in the disk (κ = 1, 0, −1) it is
/// z ↦ (a·z + b)/(−κ·b̄·z + ā) with |a|² + κ|b|² = 1.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Frame {
    kappa: f64,
    a: Complex64,
    b: Complex64,
}

impl Frame {
    /// Leaves everything in place.
    pub fn identity(curvature: Curvature) -> Self {
        Self { kappa: curvature.sign(), a: Complex64::new(1.0, 0.0), b: Complex64::new(0.0, 0.0) }
    }
    /// Turns about the origin, counter-clockwise, in radians.
    pub fn turn(curvature: Curvature, angle: f64) -> Self {
        Self { a: Complex64::from_polar(1.0, angle / 2.0), ..Self::identity(curvature) }
    }
    /// Takes the origin to the drawn point (t, 0) along the first axis.
    pub fn shift(curvature: Curvature, t: f64) -> Self {
        let kappa = curvature.sign();
        let a = 1.0 / (1.0 + kappa * t * t).sqrt();
        Self { kappa, a: Complex64::new(a, 0.0), b: Complex64::new(a * t, 0.0) }
    }
    /// First `inner`, then this.
    pub fn after(&self, inner: &Self) -> Self {
        let k = self.kappa;
        let a = self.a * inner.a - self.b * inner.b.conj() * k;
        let b = self.a * inner.b + self.b * inner.a.conj();
        let size = (a.norm_sqr() + k * b.norm_sqr()).abs();
        // Far out in the disk the difference drowns in rounding; there the last sizes stand.
        let scale = if size > 1e-6 { 1.0 / size.sqrt() } else { 1.0 };
        Self { kappa: k, a: a * scale, b: b * scale }
    }
    /// Undoes it.
    pub fn inverse(&self) -> Self {
        Self { kappa: self.kappa, a: self.a.conj(), b: -self.b }
    }
    /// Takes the origin to a place and turns what points along the first axis by `angle`.
    pub fn at(curvature: Curvature, place: [f64; 2], angle: f64) -> Self {
        let (t, towards) = (place[0].hypot(place[1]), place[1].atan2(place[0]));
        Self::turn(curvature, towards)
            .after(&Self::shift(curvature, t))
            .after(&Self::turn(curvature, angle - towards))
    }
    /// The angle by which what points along the first axis at the origin is turned.
    pub fn angle(&self) -> f64 {
        2.0 * self.a.arg()
    }
    /// Where a point goes.
    pub fn apply(&self, point: [f64; 2]) -> [f64; 2] {
        let z = Complex64::new(point[0], point[1]);
        let w = (self.a * z + self.b) / (self.a.conj() - self.b.conj() * z * self.kappa);
        [w.re, w.im]
    }
    /// Where the origin goes: the middle of the tile.
    pub fn place(&self) -> [f64; 2] {
        let w = self.b / self.a.conj();
        [w.re, w.im]
    }
    /// By how much a small length at the origin is drawn larger or smaller there.
    pub fn magnification(&self) -> f64 {
        1.0 / self.a.norm_sqr()
    }
}

/// Direction in which the middle of a side is seen from the middle of an unmoved tile.
pub fn side_angle(sides: u32, side: u32) -> f64 {
    2.0 * PI * f64::from(side) / f64::from(sides)
}

/// The motion from a tile at the origin to its neighbour across `side`, which touches with its
/// side `other`.
pub fn step(tiling: Tiling, side: u32, other: u32) -> Frame {
    let lengths = Lengths::of(tiling);
    let (c, p) = (lengths.curvature, tiling.polygon());
    let distance = match c {
        Curvature::Hyperbolic => lengths.inradius.tanh(),
        Curvature::Euclidean => 2.0 * lengths.inradius,
        Curvature::Spherical => lengths.inradius.tan(),
    };
    Frame::turn(c, side_angle(p, side))
        .after(&Frame::shift(c, distance))
        .after(&Frame::turn(c, PI - side_angle(p, other)))
}

/// The frame of ring 0's first tile: a tile in the middle with its side 0 below, or moved so
/// that the vertex where side 0 starts is in the middle.
pub fn first_frame(tiling: Tiling, at_vertex: bool) -> Frame {
    let c = tiling.curvature();
    let down = Frame::turn(c, -PI / 2.0);
    if !at_vertex {
        return down;
    }
    let corner = -PI / f64::from(tiling.polygon());
    let away = Frame::turn(c, corner).after(&Frame::shift(c, Lengths::of(tiling).vertex_drawn));
    Frame::turn(c, PI / 2.0).after(&away.inverse())
}

/// Where each tile of a patch of the regular tiling {p,q} lies. Linear in tiles.
///
/// Nothing where the patch has tiles of several kinds.
pub fn frames(patch: &Patch) -> Option<Vec<Frame>> {
    let p = patch.polygon()?;
    let tiling = Tiling::new(u64::from(p), u64::from(patch.around())).ok()?;
    // Side 0 is glued to the tile's parent, so one step a side of the parent suffices.
    let steps: Vec<Frame> = (0..p).map(|s| step(tiling, s, 0)).collect();
    let mut frames = Vec::with_capacity(patch.tiles());
    frames.push(first_frame(tiling, patch.is_centred_at_vertex()));
    for tile in 1..patch.tiles() {
        let parent = patch.glued(tile * p as usize).expect("side 0 lies on an earlier tile");
        let from: &Frame = &frames[parent / p as usize];
        frames.push(from.after(&steps[parent % p as usize]));
    }
    Some(frames)
}

/// Where the tiles of a hyperbolic patch of several kinds of polygons lie, all edges of one
/// length: the one at which `around` corners, the polygons by turns, make a full turn. Exact
/// where they do at every vertex (pentagons and hexagons by turns); else nearly so, with gaps
/// between the branches of the patch. Nothing where such polygons are not hyperbolic.
pub fn mixed_frames(patch: &Patch, polygons: &[u32]) -> Option<Vec<Frame>> {
    let share = f64::from(patch.around()) / polygons.len() as f64;
    // The angle at a corner falls as the edge grows; c is the cosh of half of it.
    let turn = |c: f64| -> f64 {
        let corner = |&p: &u32| 2.0 * ((PI / f64::from(p)).cos() / c).asin();
        share * polygons.iter().map(corner).sum::<f64>()
    };
    if turn(1.0) <= 2.0 * PI + 1e-9 {
        return None;
    }
    let (mut low, mut high) = (1.0, 1e6);
    for _ in 0..200 {
        let middle = f64::midpoint(low, high);
        if turn(middle) > 2.0 * PI { low = middle } else { high = middle }
    }
    let half = low.acosh();
    let inradius = |p: u32| (half.tanh() / (PI / f64::from(p)).tan()).asinh();
    let c = Curvature::Hyperbolic;
    let mut frames = vec![Frame::turn(c, -PI / 2.0)];
    for tile in 1..patch.tiles() as u32 {
        let side = patch.number(super::Side { tile, side: 0 });
        let parent = patch.side(patch.glued(side).expect("side 0 lies on an earlier tile"));
        let (p, q) = (patch.sides_of(parent.tile), patch.sides_of(tile));
        let distance = ((inradius(p) + inradius(q)) / 2.0).tanh();
        let there = Frame::turn(c, side_angle(p, parent.side))
            .after(&Frame::shift(c, distance))
            .after(&Frame::turn(c, PI));
        frames.push(frames[parent.tile as usize].after(&there));
    }
    Some(frames)
}

/// The corners of a tile, counter-clockwise; side s runs from corner s to corner s + 1.
pub fn tile_vertices(tiling: Tiling, frame: &Frame) -> Vec<[f64; 2]> {
    let p = tiling.polygon();
    let radius = Lengths::of(tiling).vertex_drawn;
    (0..p)
        .map(|s| {
            let angle = side_angle(p, s) - PI / f64::from(p);
            frame.apply([radius * angle.cos(), radius * angle.sin()])
        })
        .collect()
}
