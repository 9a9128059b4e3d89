//! Boundary sites of a tiling: stones of the rim, pegs in holes and at straight edges; and
//! the cut that ends between them.

use super::canvas::{Canvas, SEEN, level};
use super::draw_tiles::Views;
use super::geometry::Plane;
use super::ink::TEXT;
use super::pen::{Path, View};
use super::rim;
use super::scene::{Scene, SitePlace};
use super::sheet::{Layer, What};
use super::stones::{self, STONE};
use super::text;
use super::tiles::Tiles;
use crate::tensor::Label;
use num_complex::Complex64;
use std::f64::consts::TAU;

/// Where a boundary site leaves its tile.
#[derive(Debug, Clone, Copy)]
pub(super) struct Door {
    pub(super) tensor: usize,
    pub(super) side: usize,
    /// Which closed line of walls the site's wall belongs to.
    rim: usize,
    /// On the rim of the disk, or a peg in a hole or at a straight edge.
    pub(super) outer: bool,
}

/// How far a peg stands off its wall, in on-paper distances from centre to wall.
pub(super) const PEG: f64 = 0.55;

/// The door of each boundary site, and which of them look outwards rather than into a hole.
pub(super) fn doors(scene: &Scene<'_>, tiles: &Tiles) -> Vec<Option<Door>> {
    let network = scene.network;
    let mut doors: Vec<Option<Door>> = network
        .boundary()
        .iter()
        .map(|&l| {
            let tensor = network.holders(l).first()?.index();
            tiles.tiles[tensor]?;
            Some(Door { tensor, side: tiles.side(network, tensor, l)?, rim: 0, outer: true })
        })
        .collect();
    // Runs of sites whose walls meet belong to one rim; the rim that reaches farthest out is
    // the outer one.
    let n = doors.len();
    let mut rim = vec![0usize; n];
    for s in 1..n {
        let touch = match (doors[s - 1], doors[s]) {
            (Some(a), Some(b)) if tiles.sheet[a.tensor] == tiles.sheet[b.tensor] => {
                let gap = (tiles.wall(a.tensor, a.side).1 - tiles.wall(b.tensor, b.side).0).norm();
                gap < 0.2 * tiles.size(a.tensor).min(tiles.size(b.tensor))
            }
            _ => false,
        };
        rim[s] = rim[s - 1] + usize::from(!touch);
    }
    let far: Vec<f64> =
        doors.iter().map(|d| d.map_or(0.0, |d| tiles.gate(d.tensor, d.side).norm())).collect();
    for sheet in 0..tiles.sheets as u32 {
        let here: Vec<usize> =
            (0..n).filter(|&s| doors[s].is_some_and(|d| tiles.sheet[d.tensor] == sheet)).collect();
        let farthest = here.iter().copied().max_by(|&a, &b| far[a].total_cmp(&far[b]));
        let Some(home) = farthest.map(|s| rim[s]) else { continue };
        for s in here {
            if let Some(d) = &mut doors[s] {
                d.outer = rim[s] == home;
                d.rim = rim[s];
            }
        }
    }
    doors
}

/// Boundary legs and their sites.
pub(super) fn draw(
    scene: &Scene<'_>,
    tiles: &Tiles,
    canvas: &mut Canvas,
    views: &Views<'_>,
    doors: &[Option<Door>],
) {
    let n = doors.len();
    let disk = tiles.plane == Plane::Hyperbolic;
    canvas.sites = vec![SitePlace { at: [0.0; 2], angle: 0.0 }; n];
    if disk {
        for sheet in 0..tiles.sheets {
            let on = |d: Door| d.outer && tiles.sheet[d.tensor] as usize == sheet;
            let outer: Vec<usize> = (0..n).filter(|&s| doors[s].is_some_and(on)).collect();
            rim_sites(scene, tiles, canvas, views.views[sheet], doors, &outer);
        }
    }
    for (s, door) in doors.iter().enumerate() {
        let Some(d) = door else { continue };
        if !(disk && d.outer) && peg(scene, tiles, canvas, views.of(d.tensor), s, *d) {
            canvas.drawn.sites += 1;
        }
    }
    if scene.options.numbers {
        peg_numbers(tiles, canvas, views, doors, disk);
    }
}

/// The sites of one disk's rim.
fn rim_sites(
    scene: &Scene<'_>,
    tiles: &Tiles,
    canvas: &mut Canvas,
    view: View,
    doors: &[Option<Door>],
    outer: &[usize],
) {
    let natural: Vec<f64> = outer
        .iter()
        .map(|&s| {
            let d = doors[s].expect("sites of the rim have doors");
            tiles.ideal(d.tensor, d.side).arg()
        })
        .collect();
    let angles = rim::spread(&natural, TAU / outer.len().max(1) as f64 * 0.72);
    for (&s, &angle) in outer.iter().zip(&angles) {
        let angle = angle.rem_euclid(TAU);
        canvas.sites[s] = SitePlace { at: view.at(Complex64::from_polar(STONE.0, angle)), angle };
        let d = doors[s].expect("sites of the rim have doors");
        let size = tiles.size(d.tensor) * view.unit;
        if size < SEEN {
            continue;
        }
        let (gate, here) =
            (tiles.gate(d.tensor, d.side), tiles.tiles[d.tensor].expect("a tile").centre);
        let end = Complex64::from_polar(1.0, angle);
        let mut p = Path::new();
        p.move_to(view.at(here));
        if (tiles.ideal(d.tensor, d.side) - end).norm() < 2e-3 {
            p.geodesic_to(tiles.plane, view, here, end);
        } else {
            // The site stands aside of the leg's own end: leave through the side's middle,
            // arrive square to the rim.
            let square = end * (1.0 - 0.5 * (end - gate).norm());
            p.curve_to(view.at(gate), view.at(square), view.at(end));
        }
        p.line_to(view.at(end * STONE.0));
        canvas.rib(level(size).saturating_sub(1), p.into_text());
    }
    stones::lay(scene, canvas, view, outer);
    canvas.drawn.sites += outer.len();
    if scene.options.numbers {
        stones::number(canvas, view, outer);
    }
}

/// A site off the rim: a peg with a lozenge at its end; none where the tile is too small.
fn peg(
    scene: &Scene<'_>,
    tiles: &Tiles,
    canvas: &mut Canvas,
    view: View,
    s: usize,
    d: Door,
) -> bool {
    let here = tiles.tiles[d.tensor].expect("a tile").centre;
    let end = tiles.along(d.tensor, d.side as f64, 1.0 + PEG);
    let (at, gate) = (view.at(end), view.at(tiles.gate(d.tensor, d.side)));
    canvas.sites[s] = SitePlace { at, angle: end.arg().rem_euclid(TAU) };
    let size = tiles.size(d.tensor) * view.unit;
    if size < SEEN {
        return false;
    }
    let mut p = Path::new();
    p.move_to(view.at(here));
    p.geodesic_to(tiles.plane, view, here, end);
    canvas.rib(level(size).saturating_sub(1), p.into_text());
    let r = (size * 0.24).min(11.0);
    let (dx, dy) = (at[0] - gate[0], at[1] - gate[1]);
    let far = dx.hypot(dy).max(1e-9);
    let (ux, uy) = (dx / far * r, dy / far * r);
    let mut p = Path::new();
    p.move_to([at[0] + ux, at[1] + uy]);
    p.line_to([at[0] - uy, at[1] + ux]);
    p.line_to([at[0] - ux, at[1] - uy]);
    p.line_to([at[0] + uy, at[1] - ux]);
    p.close();
    let class = if scene.marks.in_region(s) { "site region" } else { "site" };
    canvas.sheet.shape(Layer::Site, class, Canvas::site(scene, s), p.into_text());
    true
}

fn peg_numbers(
    tiles: &Tiles,
    canvas: &mut Canvas,
    views: &Views<'_>,
    doors: &[Option<Door>],
    disk: bool,
) {
    let mut taken: Vec<([f64; 2], f64)> = Vec::new();
    for (s, door) in doors.iter().enumerate() {
        let Some(d) = door else { continue };
        let view = views.of(d.tensor);
        let size = tiles.size(d.tensor) * view.unit;
        if (disk && d.outer) || size < TEXT * 0.6 {
            continue;
        }
        let (at, gate) = (canvas.sites[s].at, view.at(tiles.gate(d.tensor, d.side)));
        let (dx, dy) = (at[0] - gate[0], at[1] - gate[1]);
        let far = dx.hypot(dy).max(1e-9);
        let word = s.to_string();
        let half = text::width(&word, TEXT) / 2.0;
        let off = 15.0 + half * (dx / far).abs() + TEXT * 0.36 * (dy / far).abs();
        let c = [at[0] + dx / far * off, at[1] + dy / far * off];
        let free = taken
            .iter()
            .all(|(t, w)| (t[0] - c[0]).abs() > w + half + 3.0 || (t[1] - c[1]).abs() > TEXT * 0.9);
        if free {
            taken.push((c, half));
            canvas.sheet.word([c[0], c[1] + TEXT * 0.36], "middle", "", word);
        }
    }
}

/// The cut: the walls that it crosses bonds at, joined at corners of tiles, and carried to
/// the rim where the region begins and ends.
pub(super) fn cut(
    scene: &Scene<'_>,
    tiles: &Tiles,
    canvas: &mut Canvas,
    views: &Views<'_>,
    doors: &[Option<Door>],
) {
    for &label in &scene.marks.cut {
        for (t, s) in walls_of(scene, tiles, label) {
            let view = views.of(t);
            let size = tiles.size(t) * view.unit;
            if size < SEEN {
                continue;
            }
            let (a, b) = tiles.wall(t, s);
            let mut p = Path::new();
            p.move_to(view.at(a));
            p.geodesic_to(tiles.plane, view, a, b);
            canvas.cut(level(size), What::Nothing, p.into_text());
        }
    }
    let n = doors.len();
    let mut first = 0;
    for s in 0..n {
        let rim = |s: usize| doors[s].map(|d| d.rim);
        if rim(first) != rim(s) {
            first = s;
        }
        let next = if s + 1 < n && rim(s + 1) == rim(s) { s + 1 } else { first };
        if scene.marks.in_region(s) == scene.marks.in_region(next) {
            continue;
        }
        let (Some(d), Some(e)) = (doors[s], doors[next]) else { continue };
        let view = views.of(d.tensor);
        let corner = tiles.wall(d.tensor, d.side).1;
        if tiles.plane != Plane::Hyperbolic || !(d.outer && e.outer) {
            cut_end(tiles, canvas, view, d, e);
            continue;
        }
        let (a, b) = (canvas.sites[s].angle, canvas.sites[next].angle);
        let end = Complex64::from_polar(1.0, a + (b - a).rem_euclid(TAU) / 2.0);
        let mut p = Path::new();
        p.move_to(view.at(corner));
        p.geodesic_to(tiles.plane, view, corner, end);
        p.line_to(view.at(end * (STONE.1 + 0.012)));
        let size = tiles.size(d.tensor).min(tiles.size(e.tensor)) * view.unit;
        canvas.cut(level(size), What::Nothing, p.into_text());
    }
}

/// Carries the cut's curve from the corner between two pegs out between them.
fn cut_end(tiles: &Tiles, canvas: &mut Canvas, view: View, d: Door, e: Door) {
    let (corner, other) = (tiles.wall(d.tensor, d.side).1, tiles.wall(e.tensor, e.side).0);
    let small = tiles.size(d.tensor).min(tiles.size(e.tensor));
    if (corner - other).norm() > 0.2 * small {
        return;
    }
    let out = |d: Door| {
        let (from, to) =
            (tiles.gate(d.tensor, d.side), tiles.along(d.tensor, d.side as f64, 1.0 + PEG));
        (to - from) / (to - from).norm().max(1e-12)
    };
    let way = out(d) + out(e);
    if way.norm() < 1e-6 {
        return;
    }
    let end = corner + way / way.norm() * small * (PEG + 0.3);
    let mut p = Path::new();
    p.move_to(view.at(corner));
    p.line_to(view.at(end));
    canvas.cut(level(small * view.unit), What::Nothing, p.into_text());
}

/// The wall that a label crosses, seen from its larger tile: one in each patch.
fn walls_of(scene: &Scene<'_>, tiles: &Tiles, label: Label) -> Vec<(usize, usize)> {
    let mut walls: Vec<(usize, usize)> = Vec::new();
    for holder in scene.network.holders(label) {
        let t = holder.index();
        let Some(s) = tiles.tiles[t].and_then(|_| tiles.side(scene.network, t, label)) else {
            continue;
        };
        match walls.iter_mut().find(|w| tiles.sheet[w.0] == tiles.sheet[t]) {
            None => walls.push((t, s)),
            Some(w) if tiles.size(t) > tiles.size(w.0) => *w = (t, s),
            Some(_) => {}
        }
    }
    walls
}
