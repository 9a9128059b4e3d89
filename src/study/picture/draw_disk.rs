//! Draws a network pinned to the rim of the Poincaré disk: bonds as geodesics, walls through
//! their middles from face to face, so that cells and cuts look as they do on a tiling.

use super::canvas::{Canvas, SEEN, level};
use super::faces::Faces;
use super::geometry::Plane;
use super::graph::Graph;
use super::ink::TEXT;
use super::marks::{Address, Share};
use super::pen::{Path, View};
use super::placement::Placement;
use super::scene::{Scene, SitePlace};
use super::sheet::{Layer, What};
use super::stones::{self, STONE};
use super::text;
use num_complex::Complex64;
use std::f64::consts::TAU;

const PLANE: Plane = Plane::Hyperbolic;

struct Drawing<'a> {
    graph: &'a Graph,
    /// Nodes, then sites, in the Poincaré disk.
    at: Vec<Complex64>,
    faces: Option<Faces>,
    /// The middle of each face.
    hearts: Vec<Complex64>,
    view: View,
}

impl Drawing<'_> {
    fn ends(&self, dart: usize) -> (usize, usize) {
        let k = dart / 2;
        let e = self.graph.edges.get(k).map_or_else(
            || {
                let s = k - self.graph.edges.len();
                [self.graph.sites[s], self.graph.nodes + s]
            },
            |e| [e.a, e.b],
        );
        (e[dart % 2], e[1 - dart % 2])
    }
    /// Half way along an edge; on a boundary leg nearer to its node, for sites are far away.
    fn middle(&self, dart: usize) -> Complex64 {
        let (a, b) = self.ends(dart & !1);
        let part = if b >= self.graph.nodes { 0.25 } else { 0.5 };
        let (a, b) = (klein(self.at[a]), klein(self.at[b]));
        poincare(a * (1.0 - part) + b * part)
    }
    /// On-paper size of a node's surroundings: half the way to its nearest neighbour.
    fn size(&self, v: usize) -> f64 {
        let near = |w: usize| (self.at[w] - self.at[v]).norm();
        let bonds = self.graph.around(v).iter().map(|a| near(a.0)).fold(f64::INFINITY, f64::min);
        let rim = (1.0 - self.at[v].norm()) * 1.2;
        bonds.min(rim).min(0.6) * 0.5 * self.view.unit
    }
}

fn klein(z: Complex64) -> Complex64 {
    2.0 * z / (1.0 + z.norm_sqr())
}

fn poincare(k: Complex64) -> Complex64 {
    k / (1.0 + (1.0 - k.norm_sqr()).max(0.0).sqrt())
}

pub(super) fn draw(scene: &Scene<'_>, graph: &Graph, placement: &Placement, canvas: &mut Canvas) {
    let view = stones::disks(scene, canvas, 1)[0];
    let sites = placement.sites.iter().map(|s| s.unwrap_or([1.0, 0.0]));
    let at: Vec<Complex64> =
        placement.nodes.iter().copied().chain(sites).map(|p| Complex64::new(p[0], p[1])).collect();
    let flat: Vec<[f64; 2]> = at.iter().map(|&z| klein(z)).map(|k| [k.re, k.im]).collect();
    let faces = Faces::of(graph, &flat);
    let hearts = faces.as_ref().map_or_else(Vec::new, |f| {
        f.vertices.iter().map(|vs| heart(vs, &flat, graph.nodes)).collect()
    });
    let drawing = Drawing { graph, at, faces, hearts, view };
    cells(scene, &drawing, canvas);
    walls(scene, &drawing, canvas);
    ribs(&drawing, canvas);
    bosses(scene, &drawing, canvas);
    legs(scene, &drawing, canvas);
    cut(scene, &drawing, canvas);
    if scene.options.names {
        names(scene, &drawing, canvas);
    }
}

/// The mean of a face's corners, in the Klein disk, where faces are convex more often than
/// not. A face at the rim has its heart nearer to the nodes at its two ends, drawn a little
/// towards their sites.
fn heart(vertices: &[usize], flat: &[[f64; 2]], nodes: usize) -> Complex64 {
    let n = vertices.len();
    let site = |k: usize| vertices[k % n] >= nodes;
    let at_rim = (0..n).any(site);
    let (mut sum, mut total) = (Complex64::new(0.0, 0.0), 0.0);
    for k in 0..n {
        let w = match (at_rim, site(k)) {
            (false, _) => 1.0,
            (true, true) => 0.3,
            (true, false) if site(k + 1) || site(k + n - 1) => 1.0,
            (true, false) => 0.5,
        };
        sum += w * Complex64::new(flat[vertices[k]][0], flat[vertices[k]][1]);
        total += w;
    }
    poincare(sum / f64::max(total, 0.1))
}

/// The wall that an edge passes through: from the heart of the face on its right to that on
/// its left.
fn wall(d: &Drawing<'_>, dart: usize) -> Option<String> {
    let f = d.faces.as_ref()?;
    let (l, r) = (f.left[dart], f.left[dart ^ 1]);
    let m = d.middle(dart);
    let mut p = Path::new();
    p.move_to(d.view.at(d.hearts[r]));
    p.geodesic_to(PLANE, d.view, d.hearts[r], m);
    p.geodesic_to(PLANE, d.view, m, d.hearts[l]);
    Some(p.into_text())
}

fn cells(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let Some(f) = &d.faces else { return };
    let all = scene.options.address == Address::All;
    for t in 0..d.graph.tensors {
        let share = scene.marks.share(t);
        if share == Share::Untold && !all {
            continue;
        }
        let darts = &f.around[t];
        let Some(&last) = darts.last() else { continue };
        let mut p = Path::new();
        let mut at = d.hearts[f.left[last]];
        p.move_to(d.view.at(at));
        for &dart in darts {
            for next in [d.middle(dart), d.hearts[f.left[dart]]] {
                p.geodesic_to(PLANE, d.view, at, next);
                at = next;
            }
        }
        p.close();
        let class = format!("cell{}", share.class());
        canvas.sheet.shape(Layer::Cell, &class, Canvas::tensor(scene, t), p.into_text());
    }
}

fn walls(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let all = scene.options.address == Address::All;
    for dart in (0..2 * (d.graph.edges.len() + d.graph.sites.len())).step_by(2) {
        let Some(path) = wall(d, dart) else { continue };
        let k = level(d.size(d.ends(dart).0));
        let label = label_of(scene, d.graph, dart);
        if all {
            canvas.sheet.shape(
                Layer::Cut,
                &format!("gate k{k}"),
                Canvas::label(scene, label.index()),
                path.clone(),
            );
        }
        canvas.sheet.shape(Layer::Wall, &format!("wall k{k}"), What::Nothing, path);
    }
}

fn label_of(scene: &Scene<'_>, graph: &Graph, dart: usize) -> crate::tensor::Label {
    let k = dart / 2;
    graph.edges.get(k).map_or_else(|| scene.network.boundary()[k - graph.edges.len()], |e| e.label)
}

/// Bonds; those that join the same two nodes lie side by side.
fn ribs(d: &Drawing<'_>, canvas: &mut Canvas) {
    let graph = d.graph;
    for (k, e) in graph.edges.iter().enumerate() {
        canvas.drawn.visible_bonds += 1;
        let (a, b) = (d.at[e.a], d.at[e.b]);
        let twins: Vec<usize> =
            graph.around(e.a).iter().filter(|n| n.0 == e.b).map(|n| n.1).collect();
        let size = d.size(e.a).min(d.size(e.b)).max(SEEN);
        let mut p = Path::new();
        p.move_to(d.view.at(a));
        if twins.len() > 1 {
            let place = twins.iter().position(|&t| t == k).unwrap_or(0) as f64;
            let low = e.a.min(e.b) == e.a;
            let shift = (place - (twins.len() - 1) as f64 / 2.0) * if low { 1.0 } else { -1.0 };
            let (from, to) = (d.view.at(a), d.view.at(b));
            let (dx, dy) = (to[0] - from[0], to[1] - from[1]);
            let m = [
                f64::midpoint(from[0], to[0]) - dy * 0.34 * shift,
                f64::midpoint(from[1], to[1]) + dx * 0.34 * shift,
            ];
            p.bend_to(m, to);
        } else {
            p.geodesic_to(PLANE, d.view, a, b);
        }
        canvas.rib(level(size), p.into_text());
        canvas.drawn.bonds += 1;
    }
    super::draw_free::loops(graph, canvas, |v| (d.view.at(d.at[v]), d.size(v)));
}

fn bosses(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let by_node = d.graph.sites_by_node();
    for (v, own) in by_node.iter().enumerate() {
        let at = d.view.at(d.at[v]);
        let size = d.size(v).max(1.0);
        if v >= d.graph.tensors {
            super::draw_free::knot(canvas, at, size);
            continue;
        }
        canvas.tensors[v] = Some(at);
        canvas.drawn.visible_tensors += 1;
        let looks: Vec<[f64; 2]> = d
            .graph
            .around(v)
            .iter()
            .map(|n| n.0)
            .chain(own.iter().map(|s| d.graph.nodes + s))
            .map(|w| {
                let to = PLANE.centre(d.at[v], d.at[w]);
                let far = to.norm().max(1e-12);
                [to.re / far, -to.im / far]
            })
            .collect();
        let reach = (size * 0.4).min(26.0);
        canvas.boss(scene, v, at, reach, &looks);
        canvas.bulk(scene, v, at, reach);
    }
}

fn legs(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let n = d.graph.sites.len();
    for s in 0..n {
        let end = d.at[d.graph.nodes + s];
        let v = d.graph.sites[s];
        let angle = end.arg().rem_euclid(TAU);
        canvas.sites.push(SitePlace { at: d.view.at(end * STONE.0), angle });
        let mut p = Path::new();
        p.move_to(d.view.at(d.at[v]));
        p.geodesic_to(PLANE, d.view, d.at[v], end);
        p.line_to(d.view.at(end * STONE.0));
        canvas.rib(level(d.size(v)).saturating_sub(1), p.into_text());
    }
    let all: Vec<usize> = (0..n).collect();
    stones::lay(scene, canvas, d.view, &all);
    canvas.drawn.sites = n;
    if scene.options.numbers {
        stones::number(canvas, d.view, &all);
    }
}

fn cut(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    if scene.marks.cut.is_empty() {
        return;
    }
    let crossed: std::collections::BTreeSet<usize> =
        scene.marks.cut.iter().map(|l| l.index()).collect();
    for dart in (0..2 * (d.graph.edges.len() + d.graph.sites.len())).step_by(2) {
        if crossed.contains(&label_of(scene, d.graph, dart).index())
            && let Some(path) = wall(d, dart)
        {
            canvas.cut(level(d.size(d.ends(dart).0)), What::Nothing, path);
        }
    }
    let Some(f) = &d.faces else { return };
    let n = d.graph.sites.len();
    for s in 0..n {
        let next = (s + 1) % n;
        if scene.marks.in_region(s) == scene.marks.in_region(next) {
            continue;
        }
        // The face after a site, counter-clockwise, lies to the left of the way out.
        let face = f.left[Faces::site_dart(d.graph, s)];
        debug_assert!(face != f.outside);
        let (a, b) = (canvas.sites[s].angle, canvas.sites[next].angle);
        let end = Complex64::from_polar(1.0, a + (b - a).rem_euclid(TAU) / 2.0);
        let mut p = Path::new();
        p.move_to(d.view.at(d.hearts[face]));
        p.geodesic_to(PLANE, d.view, d.hearts[face], end);
        p.line_to(d.view.at(end * (STONE.1 + 0.012)));
        canvas.cut(level(d.size(d.graph.sites[s])), What::Nothing, p.into_text());
    }
}

fn names(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    for v in 0..d.graph.tensors {
        let size = d.size(v);
        let name = Graph::shown(scene.network, v);
        if size < TEXT * 1.1 || text::width(&name, TEXT) > size * 1.9 {
            continue;
        }
        let at = d.view.at(d.at[v]);
        let half = text::width(&name, TEXT) / 2.0;
        let off = (size * 0.4).min(26.0) * 0.6 + 4.0;
        let look = super::draw_free::free_look(d.graph, v, |w| d.view.at(d.at[w]), at);
        let c = [at[0] + look[0] * (off + half), at[1] + look[1] * (off + TEXT * 0.42)];
        canvas.sheet.word([c[0], c[1] + TEXT * 0.36], "middle", "name", name);
    }
}
