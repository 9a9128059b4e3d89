//! Draws a patch of a regular tiling: in the Poincaré disk where it is hyperbolic, with
//! geodesic walls and ribs, boundary sites as stones of the rim.

use super::canvas::{Canvas, SEEN, WIDTH, level};
use super::geometry::Plane;
use super::ink::TEXT;
use super::marks::{Address, Share};
use super::pen::{Path, View};
use super::scene::Scene;
use super::sheet::{Layer, What};
use super::stones;
use super::text;
use super::tile_sites::{self, PEG};
use super::tiles::{Tiles, other};
use crate::network::TensorId;
use crate::tensor::Label;

/// Where each patch of tiles lies on the canvas.
pub(super) struct Views<'a> {
    sheet: &'a [u32],
    pub(super) views: Vec<View>,
}

impl Views<'_> {
    pub(super) fn of(&self, t: usize) -> View {
        self.views[self.sheet[t] as usize]
    }
}

pub(super) fn draw(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas) {
    let doors = tile_sites::doors(scene, tiles);
    let views = Views { sheet: &tiles.sheet, views: frame(scene, tiles, canvas) };
    cells(scene, tiles, canvas, &views);
    walls(scene, tiles, canvas, &views);
    for t in 0..tiles.tiles.len() {
        let Some(tile) = tiles.tiles[t] else { continue };
        canvas.tensors[t] = Some(views.of(t).at(tile.centre));
        if tiles.size(t) * views.of(t).unit < SEEN {
            continue;
        }
        canvas.drawn.visible_tensors += 1;
        ribs(scene, tiles, canvas, &views, t);
        boss(scene, tiles, canvas, &views, t);
    }
    tile_sites::draw(scene, tiles, canvas, &views, &doors);
    if !scene.marks.cut.is_empty() {
        tile_sites::cut(scene, tiles, canvas, &views, &doors);
    }
    if scene.options.names {
        names(scene, tiles, canvas, &views);
    }
}

/// Lays the drawing out on the canvas, patch beside patch, and draws the disks.
fn frame(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas) -> Vec<View> {
    if tiles.plane == Plane::Hyperbolic {
        return stones::disks(scene, canvas, tiles.sheets);
    }
    if tiles.plane == Plane::Spherical {
        let wide = WIDTH / tiles.sheets as f64;
        let unit = wide / 2.0 - 46.0;
        let views: Vec<View> = (0..tiles.sheets)
            .map(|k| View {
                origin: [wide * (k as f64 + 0.5), canvas.top + 30.0 + unit],
                unit,
                globe: true,
            })
            .collect();
        for view in &views {
            let mut p = Path::new();
            p.circle(view.origin, unit);
            canvas.sheet.shape(Layer::Ground, "disk", What::Nothing, p.into_text());
        }
        canvas.bottom = canvas.top + 2.0 * unit + 60.0;
        return views;
    }
    let (mut low, mut high) = ([f64::INFINITY; 2], [f64::NEG_INFINITY; 2]);
    for t in (0..tiles.tiles.len()).filter(|&t| tiles.tiles[t].is_some()) {
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
    let wide = WIDTH / tiles.sheets as f64;
    let unit = (wide - 2.0 * room) / span;
    canvas.bottom = canvas.top + 2.0 * room + unit * (high[1] - low[1]);
    (0..tiles.sheets)
        .map(|k| View {
            origin: [
                wide * (k as f64 + 0.5) - unit * f64::midpoint(low[0], high[0]),
                canvas.top + room + unit * high[1],
            ],
            unit,
            globe: false,
        })
        .collect()
}

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

fn cells(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, views: &Views) {
    let all = scene.options.address == Address::All;
    for t in 0..tiles.tiles.len() {
        let view = views.of(t);
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
fn walls(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, views: &Views) {
    let all = scene.options.address == Address::All;
    for t in 0..tiles.tiles.len() {
        let view = views.of(t);
        let size = tiles.size(t) * view.unit;
        if tiles.tiles[t].is_none() || size < SEEN {
            continue;
        }
        let legs = scene.network.legs(TensorId::new(t as u32));
        for s in 0..tiles.p {
            let label = tiles.leg(t, s).map(|k| legs[k]);
            let across = label.and_then(|l| other(scene.network, l, t));
            let later = across.is_some_and(|u| {
                u < t
                    && tiles.sheet[u] == tiles.sheet[t]
                    && tiles.tiles[u].is_some()
                    && tiles.size(u) * view.unit >= SEEN
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

fn ribs(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, views: &Views, t: usize) {
    let view = views.of(t);
    let here = tiles.tiles[t].expect("a tile").centre;
    let legs = scene.network.legs(TensorId::new(t as u32));
    for (k, &label) in legs.iter().enumerate() {
        let Some(u) = other(scene.network, label, t) else { continue };
        // Each bond once, at the nearer end.
        let Some(there) = tiles.tiles[u] else {
            cap(scene, canvas, tiles, view, [t, u, k]);
            continue;
        };
        if tiles.sheet[u] != tiles.sheet[t] {
            seam(scene, tiles, canvas, views, t, label);
            continue;
        }
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

/// A bond to a tile of another patch: a stub at either end, with the bond's number.
fn seam(
    scene: &Scene<'_>,
    tiles: &Tiles,
    canvas: &mut Canvas,
    views: &Views<'_>,
    t: usize,
    label: Label,
) {
    let view = views.of(t);
    let size = tiles.size(t) * view.unit;
    let Some(side) = tiles.side(scene.network, t, label) else { return };
    let (here, end) =
        (tiles.tiles[t].expect("a tile").centre, tiles.along(t, side as f64, 1.0 + PEG * 0.7));
    let mut p = Path::new();
    p.move_to(view.at(here));
    p.geodesic_to(tiles.plane, view, here, end);
    canvas.rib(level(size), p.into_text());
    let (at, gate) = (view.at(end), view.at(tiles.gate(t, side)));
    let mut ring = Path::new();
    ring.circle(at, (size * 0.12).clamp(0.6, 5.0));
    canvas.sheet.shape(Layer::Boss, "cap", What::Nothing, ring.into_text());
    let first = other(scene.network, label, t).is_none_or(|u| t < u);
    let number = if first { canvas.seams.len() } else { 0 };
    let number = *canvas.seams.entry(label.index()).or_insert(number);
    if first {
        canvas.drawn.bonds += 1;
        canvas.drawn.visible_bonds += 1;
    }
    if size > TEXT * 0.6 {
        let (dx, dy) = (at[0] - gate[0], at[1] - gate[1]);
        let far = dx.hypot(dy).max(1e-9);
        let word = letters(number);
        let half = text::width(&word, TEXT) / 2.0;
        let off = 8.0 + half * (dx / far).abs() + TEXT * 0.36 * (dy / far).abs();
        let c = [at[0] + dx / far * off, at[1] + dy / far * off + TEXT * 0.3];
        canvas.sheet.word(c, "middle", "soft", word);
    }
}

/// a, b, … z, aa, ab, …
fn letters(number: usize) -> String {
    let mut word = String::new();
    let mut rest = number + 1;
    while rest > 0 {
        rest -= 1;
        word.insert(0, (b'a' + (rest % 26) as u8) as char);
        rest /= 26;
    }
    word
}

/// A state on a leg that has no side of its own: a small cap beside the boss.
fn cap(
    scene: &Scene<'_>,
    canvas: &mut Canvas,
    tiles: &Tiles,
    view: View,
    [t, state, k]: [usize; 3],
) {
    let size = tiles.size(t) * view.unit;
    if size < SEEN {
        return;
    }
    canvas.drawn.tensors += 1;
    canvas.drawn.visible_tensors += 1;
    canvas.drawn.visible_bonds += 1;
    canvas.drawn.bonds += 1;
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
    canvas.tensors[state] = Some(c);
    let class = if size < 9.0 { "boss cap far" } else { "boss cap" };
    canvas.sheet.shape(Layer::Boss, class, Canvas::tensor(scene, state), p.into_text());
}

fn boss(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, views: &Views, t: usize) {
    let view = views.of(t);
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

/// Names of tensors, each in the corner of its tile that looks most downwards.
fn names(scene: &Scene<'_>, tiles: &Tiles, canvas: &mut Canvas, views: &Views) {
    for t in 0..tiles.tiles.len() {
        let view = views.of(t);
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
