//! Draws a patch of a regular tiling: in the Poincaré disk where it is hyperbolic, with
//! geodesic walls and ribs, boundary sites as stones of the rim.

use super::canvas::{Canvas, SEEN, WIDTH, level};
use super::geometry::Plane;
use super::ink::TEXT;
use super::marks::{Address, Share};
use super::pen::{Path, View};
use super::rim;
use super::scene::{Scene, SitePlace};
use super::sheet::{Layer, What};
use super::text;
use super::tiles::{Tiles, other};
use crate::network::TensorId;
use crate::tensor::Label;
use num_complex::Complex64;
use std::f64::consts::TAU;

/// Where a boundary site leaves its tile.
#[derive(Debug, Clone, Copy)]
struct Door {
    tensor: usize,
    side: usize,
    /// On the rim of the disk, or a peg in a hole or at a straight edge.
    outer: bool,
}

pub(super) fn draw(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas) {
    let doors = doors(scene, tiles);
    let view = frame(scene, tiles, canvas);
    let size = |t: usize| tiles.size(t) * view.unit;
    cells(scene, tiles, canvas, view);
    walls(scene, tiles, canvas, view);
    for t in 0..tiles.tiles.len() {
        let Some(tile) = tiles.tiles[t] else { continue };
        canvas.tensors[t] = Some(view.at(tile.centre));
        if size(t) < SEEN {
            continue;
        }
        canvas.drawn.visible_tensors += 1;
        ribs(scene, tiles, canvas, view, t);
        boss(scene, tiles, canvas, view, t);
    }
    sites(scene, tiles, canvas, view, &doors);
    if !scene.marks.cut.is_empty() {
        cut(scene, tiles, canvas, view, &doors);
    }
    if scene.options.names {
        names(scene, tiles, canvas, view);
    }
}

/// The door of each boundary site, and which of them look outwards rather than into a hole.
fn doors(scene: &Scene<'_>, tiles: &Tiles) -> Vec<Option<Door>> {
    let network = scene.network;
    let mut doors: Vec<Option<Door>> = network
        .boundary()
        .iter()
        .map(|&l| {
            let tensor = network.holders(l).first()?.index();
            tiles.tiles[tensor]?;
            Some(Door { tensor, side: tiles.side(network, tensor, l)?, outer: true })
        })
        .collect();
    // Runs of sites whose walls meet belong to one rim; the rim that reaches farthest out is
    // the outer one.
    let n = doors.len();
    let mut rim = vec![0usize; n];
    for s in 1..n {
        let touch = match (doors[s - 1], doors[s]) {
            (Some(a), Some(b)) => {
                let gap = (tiles.wall(a.tensor, a.side).1 - tiles.wall(b.tensor, b.side).0).norm();
                gap < 0.2 * tiles.size(a.tensor).min(tiles.size(b.tensor))
            }
            _ => false,
        };
        rim[s] = rim[s - 1] + usize::from(!touch);
    }
    let far = |s: usize| doors[s].map_or(0.0, |d| tiles.gate(d.tensor, d.side).norm());
    let farthest = (0..n).max_by(|&a, &b| far(a).total_cmp(&far(b)));
    if let Some(best) = farthest {
        let first = doors.first().copied().flatten();
        let last = doors.last().copied().flatten();
        let wraps = match (first, last) {
            (Some(a), Some(b)) => {
                let gap = (tiles.wall(b.tensor, b.side).1 - tiles.wall(a.tensor, a.side).0).norm();
                gap < 0.2 * tiles.size(a.tensor).min(tiles.size(b.tensor))
            }
            _ => false,
        };
        let (home, end) = (rim[best], rim[n - 1]);
        for s in 0..n {
            let same =
                rim[s] == home || (wraps && [0, end].contains(&rim[s]) && [0, end].contains(&home));
            if let Some(d) = &mut doors[s] {
                d.outer = same;
            }
        }
    }
    doors
}

/// Lays the drawing out on the canvas and draws the disk.
fn frame(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas) -> View {
    if tiles.plane == Plane::Hyperbolic {
        let digits = scene.network.boundary().len().to_string();
        let room = if scene.options.numbers { text::width(&digits, TEXT) + 8.0 } else { 0.0 };
        let unit = (WIDTH / 2.0 - 6.0 - room) / STONE.1;
        let middle = [WIDTH / 2.0, canvas.top + WIDTH / 2.0 - 4.0 - (room - TEXT).max(0.0)];
        let mut p = Path::new();
        p.circle(middle, unit);
        canvas.sheet.shape(Layer::Ground, "disk", What::Nothing, p.into_text());
        canvas.disk = Some((middle, unit));
        canvas.bottom = middle[1] + unit * STONE.1 + if room > 0.0 { TEXT + 6.0 } else { 4.0 };
        return View { origin: middle, unit };
    }
    let (mut low, mut high) = ([f64::INFINITY; 2], [f64::NEG_INFINITY; 2]);
    for t in 0..tiles.tiles.len() {
        if tiles.tiles[t].is_none() {
            continue;
        }
        for s in 0..tiles.p {
            for z in [tiles.wall(t, s).0, tiles.along(t, s as f64, 1.0 + PEG)] {
                if z.norm() < 1e3 {
                    for (k, x) in [z.re, z.im].into_iter().enumerate() {
                        low[k] = low[k].min(x);
                        high[k] = high[k].max(x);
                    }
                }
            }
        }
    }
    if low[0] > high[0] {
        (low, high) = ([-1.0; 2], [1.0; 2]);
    }
    let room = 44.0;
    let span = (high[0] - low[0]).max(high[1] - low[1]).max(1e-9);
    let unit = (WIDTH - 2.0 * room) / span;
    let origin =
        [WIDTH / 2.0 - unit * f64::midpoint(low[0], high[0]), canvas.top + room + unit * high[1]];
    canvas.bottom = canvas.top + 2.0 * room + unit * (high[1] - low[1]);
    View { origin, unit }
}

/// Inner and outer radius of the rim's stones.
const STONE: (f64, f64) = (1.012, 1.062);

/// How far a peg stands off its wall, in on-paper distances from centre to wall.
const PEG: f64 = 0.55;

fn outline(tiles: &Tiles, view: View, t: usize) -> String {
    let mut p = Path::new();
    let (mut at, _) = tiles.wall(t, 0);
    p.move_to(view.at(at));
    for s in 0..tiles.p {
        let next = if s + 1 < tiles.p { tiles.wall(t, s).1 } else { tiles.wall(t, 0).0 };
        p.geodesic_to(tiles.plane, view, at, next);
        at = next;
    }
    p.close();
    p.into_text()
}

fn cells(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, view: View) {
    let all = scene.options.address == Address::All;
    for t in 0..tiles.tiles.len() {
        if tiles.tiles[t].is_none() || tiles.size(t) * view.unit < SEEN / 2.0 {
            continue;
        }
        let share = scene.marks.share(t);
        if share == Share::Untold && !all {
            continue;
        }
        let class = format!("cell{}", share.class());
        canvas.sheet.shape(Layer::Cell, &class, Canvas::tensor(scene, t), outline(tiles, view, t));
    }
}

/// Tiles' sides, each once; a gate on each, where a script can show a cut.
fn walls(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, view: View) {
    let all = scene.options.address == Address::All;
    for t in 0..tiles.tiles.len() {
        let size = tiles.size(t) * view.unit;
        if tiles.tiles[t].is_none() || size < SEEN {
            continue;
        }
        let legs = scene.network.legs(TensorId::new(t as u32));
        for s in 0..tiles.p {
            let label = tiles.leg(t, s).map(|k| legs[k]);
            let across = label.and_then(|l| other(scene.network, l, t));
            let later = across.is_some_and(|u| {
                u < t && tiles.tiles[u].is_some() && tiles.size(u) * view.unit >= SEEN
            });
            if later {
                continue;
            }
            let (a, b) = tiles.wall(t, s);
            let mut p = Path::new();
            p.move_to(view.at(a));
            p.geodesic_to(tiles.plane, view, a, b);
            let d = p.into_text();
            let k = level(size);
            if let (true, Some(l)) = (all, label) {
                canvas.sheet.shape(
                    Layer::Cut,
                    &format!("gate k{k}"),
                    Canvas::label(scene, l.index()),
                    d.clone(),
                );
            }
            canvas.sheet.shape(Layer::Wall, &format!("wall k{k}"), What::Nothing, d);
        }
    }
}

fn ribs(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, view: View, t: usize) {
    let here = tiles.tiles[t].expect("a tile").centre;
    let legs = scene.network.legs(TensorId::new(t as u32));
    for (k, &label) in legs.iter().enumerate() {
        let Some(u) = other(scene.network, label, t) else { continue };
        // Each bond once, at the nearer end.
        let Some(there) = tiles.tiles[u] else {
            cap(canvas, tiles, view, t, k);
            continue;
        };
        let size = tiles.size(u) * view.unit;
        if size < SEEN || u < t {
            continue;
        }
        let mut p = Path::new();
        p.move_to(view.at(here));
        p.geodesic_to(tiles.plane, view, here, there.centre);
        let size = size.min(tiles.size(t) * view.unit);
        canvas.rib(level(size), p.into_text());
        canvas.drawn.bonds += 1;
        canvas.drawn.visible_bonds += 1;
    }
}

/// A state on a leg that has no side of its own: a small cap beside the boss.
fn cap(canvas: &mut Canvas, tiles: &Tiles, view: View, t: usize, k: usize) {
    let size = tiles.size(t) * view.unit;
    canvas.drawn.visible_bonds += 1;
    canvas.drawn.bonds += 1;
    if size < 9.0 {
        return;
    }
    let c = view.at(tiles.along(t, 0.5 + k as f64 - tiles.p as f64, 0.42));
    let r = (size * 0.09).min(6.0);
    let mut p = Path::new();
    p.move_to([c[0] - r, c[1] + r * 0.8]);
    p.line_to([c[0], c[1] - r * 1.1]);
    p.line_to([c[0] + r, c[1] + r * 0.8]);
    p.close();
    let mut stem = Path::new();
    stem.move_to(canvas.tensors[t].expect("placed before"));
    stem.line_to(c);
    canvas.sheet.shape(Layer::Rib, "rib k2", What::Nothing, stem.into_text());
    canvas.sheet.shape(Layer::Boss, "cap", What::Nothing, p.into_text());
}

fn boss(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, view: View, t: usize) {
    let at = view.at(tiles.tiles[t].expect("a tile").centre);
    let size = tiles.size(t) * view.unit;
    let reach = boss_reach(size);
    let looks: Vec<[f64; 2]> = (0..tiles.p)
        .filter(|&s| tiles.leg(t, s).is_some())
        .map(|s| {
            let to = view.at(tiles.along(t, s as f64, 0.3));
            let (x, y) = (to[0] - at[0], to[1] - at[1]);
            let far = x.hypot(y).max(1e-12);
            [x / far, y / far]
        })
        .collect();
    canvas.boss(scene, t, at, reach, &looks);
    if size > 4.0 {
        canvas.bulk(scene, t, at, reach);
    }
}

fn boss_reach(size: f64) -> f64 {
    (size * 0.36).min(26.0)
}

/// Boundary legs and their sites.
fn sites(
    scene: &Scene<'_>,
    tiles: &Tiles,
    canvas: &mut Canvas,
    view: View,
    doors: &[Option<Door>],
) {
    let n = doors.len();
    let disk = tiles.plane == Plane::Hyperbolic;
    canvas.sites = vec![SitePlace { at: view.origin, angle: 0.0 }; n];
    let outer: Vec<usize> = (0..n).filter(|&s| disk && doors[s].is_some_and(|d| d.outer)).collect();
    let natural: Vec<f64> = outer
        .iter()
        .map(|&s| {
            let d = doors[s].expect("filtered");
            tiles.ideal(d.tensor, d.side).arg()
        })
        .collect();
    let angles = rim::spread(&natural, TAU / outer.len().max(1) as f64 * 0.72);
    for (&s, &angle) in outer.iter().zip(&angles) {
        let angle = angle.rem_euclid(TAU);
        canvas.sites[s] = SitePlace { at: view.at(Complex64::from_polar(STONE.0, angle)), angle };
        let d = doors[s].expect("filtered");
        let size = tiles.size(d.tensor) * view.unit;
        if size >= SEEN {
            let (gate, here) =
                (tiles.gate(d.tensor, d.side), tiles.tiles[d.tensor].expect("a tile").centre);
            let end = Complex64::from_polar(1.0, angle);
            let mut p = Path::new();
            p.move_to(view.at(here));
            if (tiles.ideal(d.tensor, d.side) - end).norm() < 2e-3 {
                p.geodesic_to(tiles.plane, view, here, end);
            } else {
                // The site stands aside of the leg's own end: leave through the side's
                // middle, arrive square to the rim.
                let square = end * (1.0 - 0.5 * (end - gate).norm());
                p.curve_to(view.at(gate), view.at(square), view.at(end));
            }
            p.line_to(view.at(end * STONE.0));
            canvas.rib(level(size).saturating_sub(1), p.into_text());
        }
    }
    stones(scene, canvas, view, &outer);
    canvas.drawn.sites = outer.len();
    for (s, door) in doors.iter().enumerate() {
        let Some(d) = door else { continue };
        if !(disk && d.outer) && peg(scene, tiles, canvas, view, s, *d) {
            canvas.drawn.sites += 1;
        }
    }
    if scene.options.numbers && disk {
        numbers(canvas, view, &outer);
    }
    if scene.options.numbers && !disk {
        peg_numbers(tiles, canvas, view, doors);
    }
}

/// The sites on the rim as its stones, each from half way to its neighbour to half way to
/// the other; neighbours in the region grow together unless each needs an address.
fn stones(scene: &Scene<'_>, canvas: &mut Canvas, view: View, outer: &[usize]) {
    let n = outer.len();
    if n == 0 {
        return;
    }
    let angle = |k: usize| canvas.sites[outer[k % n]].angle;
    let ahead = |k: usize| {
        if n == 1 { TAU } else { (angle(k + 1) - angle(k)).rem_euclid(TAU) }
    };
    let bounds: Vec<(f64, f64)> = (0..n)
        .map(|k| {
            let (before, after) = (ahead((k + n - 1) % n) / 2.0, ahead(k) / 2.0);
            (angle(k) - before.min(0.12), angle(k) + after.min(0.12))
        })
        .collect();
    let addressed = scene.options.address != Address::None;
    let mut k = 0;
    while k < n {
        let inside = scene.marks.in_region(outer[k]);
        let mut last = k;
        if !addressed && n > 400 {
            while last + 1 < n
                && scene.marks.in_region(outer[last + 1]) == inside
                && bounds[last + 1].0 - bounds[last].1 < 1e-9
                && last - k < 64
            {
                last += 1;
            }
        }
        let (mut from, mut to) = (bounds[k].0, bounds[last].1);
        let joint = ((to - from) * 0.12).min(1.2 / view.unit);
        from += joint;
        to -= joint;
        let p = stone(view, from, to);
        let class = if inside { "site region" } else { "site" };
        canvas.sheet.shape(Layer::Site, class, Canvas::site(scene, outer[k]), p.into_text());
        k = last + 1;
    }
}

fn stone(view: View, from: f64, to: f64) -> Path {
    let at = |r: f64, a: f64| view.at(Complex64::from_polar(r, a));
    let mut p = Path::new();
    let long = to - from > std::f64::consts::PI;
    p.move_to(at(STONE.0, from));
    p.arc_to(STONE.0 * view.unit, long, false, at(STONE.0, to));
    p.line_to(at(STONE.1, to));
    p.arc_to(STONE.1 * view.unit, long, true, at(STONE.1, from));
    p.close();
    p
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

/// Every so manieth site's number outside the rim.
fn numbers(canvas: &mut Canvas, view: View, outer: &[usize]) {
    let n = outer.len();
    if n == 0 {
        return;
    }
    let widest = text::width(&n.to_string(), TEXT);
    let spacing = TAU * STONE.1 * view.unit / n as f64;
    let each = rim::stride(spacing * 0.8, widest.max(TEXT) + 4.0);
    let last = outer.last().copied().unwrap_or(0);
    for &s in outer {
        if s % each != 0 || (each > 1 && s + each / 2 > last && s != 0) {
            continue;
        }
        let angle = canvas.sites[s].angle;
        let (cos, sin) = (angle.cos(), angle.sin());
        let word = s.to_string();
        let half = text::width(&word, TEXT) / 2.0;
        // The word's box touches a circle just outside the rim.
        let off = 7.0 + half * cos.abs() + TEXT * 0.36 * sin.abs();
        let z = Complex64::from_polar(STONE.1 + off / view.unit, angle);
        let at = view.at(z);
        let mut tick = Path::new();
        tick.move_to(view.at(Complex64::from_polar(STONE.1, angle)));
        tick.line_to(view.at(Complex64::from_polar(STONE.1 + 5.0 / view.unit, angle)));
        canvas.sheet.shape(Layer::Site, "tick", What::Nothing, tick.into_text());
        canvas.sheet.word([at[0], at[1] + TEXT * 0.36], "middle", "", word);
    }
}

fn peg_numbers(tiles: &Tiles, canvas: &mut Canvas, view: View, doors: &[Option<Door>]) {
    let mut taken: Vec<([f64; 2], f64)> = Vec::new();
    for (s, door) in doors.iter().enumerate() {
        let Some(d) = door else { continue };
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
fn cut(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, view: View, doors: &[Option<Door>]) {
    for &label in &scene.marks.cut {
        let Some((t, s)) = wall_of(scene, tiles, label) else { continue };
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
    let n = doors.len();
    if n < 2 {
        return;
    }
    for s in 0..n {
        let next = (s + 1) % n;
        if scene.marks.in_region(s) == scene.marks.in_region(next) {
            continue;
        }
        let (Some(d), Some(e)) = (doors[s], doors[next]) else { continue };
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

/// The wall that a label crosses, seen from its larger tile.
fn wall_of(scene: &Scene<'_>, tiles: &Tiles, label: Label) -> Option<(usize, usize)> {
    let mut best: Option<(usize, usize)> = None;
    for holder in scene.network.holders(label) {
        let t = holder.index();
        if let (Some(_), Some(s)) = (tiles.tiles[t], tiles.side(scene.network, t, label))
            && best.is_none_or(|(u, _)| tiles.size(t) > tiles.size(u))
        {
            best = Some((t, s));
        }
    }
    best
}

/// Names of tensors, each in the corner of its tile that looks most downwards.
fn names(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, view: View) {
    for t in 0..tiles.tiles.len() {
        let size = tiles.size(t) * view.unit;
        let Some(at) = canvas.tensors[t] else { continue };
        let name = scene.network.tensor_name(TensorId::new(t as u32));
        if size < TEXT * 1.2 || text::width(&name, TEXT) > size * 1.5 {
            continue;
        }
        let look = |s: usize| {
            let to = view.at(tiles.along(t, s as f64 + 0.5, 0.5));
            let (x, y) = (to[0] - at[0], to[1] - at[1]);
            let far = x.hypot(y).max(1e-9);
            [x / far, y / far]
        };
        let best = (0..tiles.p)
            .map(look)
            .max_by(|a, b| (a[1] + 0.2 * a[0]).total_cmp(&(b[1] + 0.2 * b[0])))
            .unwrap_or([0.0, 1.0]);
        let half = text::width(&name, TEXT) / 2.0;
        let off = boss_reach(size) * 0.55 + 3.0;
        let c = [at[0] + best[0] * (off + half), at[1] + best[1] * (off + TEXT * 0.42)];
        canvas.sheet.word([c[0], c[1] + TEXT * 0.36], "middle", "name", name);
    }
}
