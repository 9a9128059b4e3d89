//! Draws trees, lattices and anything else whose sites do not stand on a rim.

use super::canvas::{Canvas, WIDTH, level};
use super::cut_curve::{self, Crossing};
use super::free_frame::{Drawing, Line, distance, frame};
use super::graph::Graph;
use super::ink::TEXT;
use super::marks::{Address, Share};
use super::pen::Path;
use super::placement::{Placement, Shape};
use super::rim;
use super::scene::{Scene, SitePlace};
use super::sheet::{Layer, What};
use super::text;

pub(super) fn draw(scene: &Scene<'_>, graph: &Graph, placement: &Placement, canvas: &mut Canvas) {
    let d = frame(scene, graph, placement, canvas);
    pods(scene, &d, canvas);
    ribs(&d, canvas);
    loops(graph, canvas, |v| (d.at[v], d.size[v]));
    bosses(scene, &d, canvas);
    if d.shape == Shape::Upright {
        sill(scene, &d, canvas);
    } else {
        pegs(scene, &d, canvas);
    }
    gates(scene, &d, canvas);
    cut(scene, &d, canvas);
    if scene.options.names {
        names(scene, &d, canvas);
    }
}

/// What each side absorbed, as broad bands under tensors and the bonds between them.
fn pods(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let all = scene.options.address == Address::All;
    for t in 0..d.graph.tensors {
        let share = scene.marks.share(t);
        if share == Share::Untold && !all {
            continue;
        }
        let mut p = Path::new();
        p.circle(d.at[t], d.size[t] * 0.92);
        let class = format!("cell{}", share.class());
        canvas.sheet.shape(Layer::Cell, &class, Canvas::tensor(scene, t), p.into_text());
    }
    for (e, line) in d.graph.edges.iter().zip(&d.lines) {
        if e.b >= d.graph.tensors || matches!(line, Line::Stubs) {
            continue;
        }
        let share = scene.marks.share(e.a);
        if share == scene.marks.share(e.b) && matches!(share, Share::Region | Share::Rest) {
            let k = level(d.size[e.a].min(d.size[e.b]));
            let class = format!("pod{} k{k}", share.class());
            canvas.sheet.shape(Layer::Cell, &class, What::Nothing, bond(d, *e, *line));
        }
    }
}

fn bond(d: &Drawing<'_>, e: super::graph::Edge, line: Line) -> String {
    let (a, b) = (d.at[e.a], d.at[e.b]);
    let mut p = Path::new();
    match line {
        Line::Whole(None) => {
            p.move_to(a);
            p.line_to(b);
        }
        Line::Whole(Some(m)) => {
            p.move_to(a);
            p.bend_to(m, b);
        }
        Line::Arch => {
            let y = f64::midpoint(a[1], b[1]);
            p.move_to(a);
            p.curve_to([a[0], y], [b[0], y], b);
        }
        Line::Stubs => {
            let long = distance(a, b).max(1e-9);
            let (x, y) = ((b[0] - a[0]) / long, (b[1] - a[1]) / long);
            for (from, way) in [(a, -1.0), (b, 1.0)] {
                let end = [from[0] + way * x * d.step * 0.92, from[1] + way * y * d.step * 0.92];
                p.move_to(from);
                p.line_to(end);
                // A bar across tells that the bond goes on at the other side.
                let bar = (d.step * 0.16).min(6.0);
                p.move_to([end[0] - y * bar, end[1] + x * bar]);
                p.line_to([end[0] + y * bar, end[1] - x * bar]);
            }
        }
    }
    p.into_text()
}

fn ribs(d: &Drawing<'_>, canvas: &mut Canvas) {
    for (e, line) in d.graph.edges.iter().zip(&d.lines) {
        let k = level(d.size[e.a].min(d.size[e.b])).max(1);
        let path = bond(d, *e, *line);
        if matches!(line, Line::Stubs) {
            canvas.sheet.shape(Layer::Rib, &format!("rib k{}", k.min(3)), What::Nothing, path);
        } else {
            canvas.rib(k, path);
        }
        canvas.drawn.bonds += 1;
        canvas.drawn.visible_bonds += 1;
    }
}

/// Labels that stand twice on one tensor: a small loop above it.
pub(super) fn loops(graph: &Graph, canvas: &mut Canvas, at: impl Fn(usize) -> ([f64; 2], f64)) {
    for &(v, _) in &graph.loops {
        let ([x, y], size) = at(v);
        let r = size * 0.9;
        let mut p = Path::new();
        p.move_to([x, y]);
        p.curve_to([x - r, y - 1.4 * r], [x + r, y - 1.4 * r], [x, y]);
        canvas.rib(level(size).saturating_sub(1), p.into_text());
        canvas.drawn.bonds += 1;
        canvas.drawn.visible_bonds += 1;
    }
}

/// The point where a label's more than two ends meet.
pub(super) fn knot(canvas: &mut Canvas, at: [f64; 2], size: f64) {
    let mut p = Path::new();
    p.circle(at, (size * 0.16).clamp(0.8, 5.0));
    canvas.sheet.shape(Layer::Boss, "knot", What::Nothing, p.into_text());
}

fn reach(size: f64) -> f64 {
    (size * 0.46).min(22.0)
}

fn bosses(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let by_node = d.graph.sites_by_node();
    for (v, own) in by_node.iter().enumerate() {
        let at = d.at[v];
        if v >= d.graph.tensors {
            knot(canvas, at, d.size[v]);
            continue;
        }
        canvas.tensors[v] = Some(at);
        canvas.drawn.visible_tensors += 1;
        let towards = |p: [f64; 2]| {
            let far = distance(p, at).max(1e-9);
            [(p[0] - at[0]) / far, (p[1] - at[1]) / far]
        };
        let looks: Vec<[f64; 2]> =
            d.graph
                .around(v)
                .iter()
                .map(|&(w, k)| match d.lines[k] {
                    Line::Whole(Some(m)) => towards(m),
                    Line::Whole(None) => towards(d.at[w]),
                    Line::Arch => [0.0, (d.at[w][1] - at[1]).signum()],
                    Line::Stubs => towards(d.at[w]).map(|x| -x),
                })
                .chain(own.iter().map(|&s| {
                    if d.shape == Shape::Upright { [0.0, 1.0] } else { towards(d.pegs[s]) }
                }))
                .collect();
        let r = reach(d.size[v]);
        canvas.boss(scene, v, at, r, &looks);
        canvas.bulk(scene, v, at, r);
    }
}

/// Sites on pegs, each a lozenge at its end.
fn pegs(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let middle = [WIDTH / 2.0, f64::midpoint(canvas.top, canvas.bottom)];
    let mut taken: Vec<([f64; 2], f64)> = Vec::new();
    for (s, &at) in d.pegs.iter().enumerate() {
        let v = d.graph.sites[s];
        let from = d.at[v];
        let long = distance(from, at).max(1e-9);
        let (ux, uy) = ((at[0] - from[0]) / long, (at[1] - from[1]) / long);
        let angle = (middle[1] - at[1]).atan2(at[0] - middle[0]);
        canvas.sites.push(SitePlace { at, angle: angle.rem_euclid(std::f64::consts::TAU) });
        let mut p = Path::new();
        p.move_to(from);
        p.line_to(at);
        canvas.rib(level(d.size[v]).saturating_sub(1), p.into_text());
        let r = (d.step * 0.24).clamp(0.8, 9.0);
        let mut p = Path::new();
        p.move_to([at[0] + ux * r, at[1] + uy * r]);
        p.line_to([at[0] - uy * r, at[1] + ux * r]);
        p.line_to([at[0] - ux * r, at[1] - uy * r]);
        p.line_to([at[0] + uy * r, at[1] - ux * r]);
        p.close();
        let class = if scene.marks.in_region(s) { "site region" } else { "site" };
        canvas.sheet.shape(Layer::Site, class, Canvas::site(scene, s), p.into_text());
        canvas.drawn.sites += 1;
        if scene.options.numbers {
            let word = s.to_string();
            let half = text::width(&word, TEXT) / 2.0;
            let off = r + 5.0 + half * ux.abs() + TEXT * 0.36 * uy.abs();
            let c = [at[0] + ux * off, at[1] + uy * off];
            let free = taken.iter().all(|(t, w)| {
                (t[0] - c[0]).abs() > w + half + 3.0 || (t[1] - c[1]).abs() > TEXT * 0.9
            });
            let clear =
                d.at.iter()
                    .chain(&d.pegs)
                    .all(|p| (p[0] - c[0]).abs() > half + 4.0 || (p[1] - c[1]).abs() > TEXT * 0.5);
            if free && clear && c[0] > half && c[0] < WIDTH - half {
                taken.push((c, half));
                canvas.sheet.word([c[0], c[1] + TEXT * 0.36], "middle", "", word);
            }
        }
    }
}

/// Sites in a row at the bottom, as the stones of a sill.
fn sill(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let n = d.pegs.len();
    let mut row: Vec<usize> = (0..n).collect();
    row.sort_by(|&a, &b| d.pegs[a][0].total_cmp(&d.pegs[b][0]));
    let gap = row
        .windows(2)
        .map(|w| d.pegs[w[1]][0] - d.pegs[w[0]][0])
        .fold(WIDTH / 4.0, f64::min)
        .max(0.1);
    let tall = 17.0;
    let middle = [WIDTH / 2.0, f64::midpoint(canvas.top, canvas.bottom)];
    for (s, &at) in d.pegs.iter().enumerate() {
        let v = d.graph.sites[s];
        let from = d.at[v];
        let mut p = Path::new();
        p.move_to(from);
        let y = f64::midpoint(from[1], at[1]);
        p.curve_to([from[0], y], [at[0], y], at);
        canvas.rib(level(d.size[v].min(gap)).saturating_sub(1), p.into_text());
        let angle = (middle[1] - at[1]).atan2(at[0] - middle[0]);
        canvas.sites.push(SitePlace { at, angle: angle.rem_euclid(std::f64::consts::TAU) });
        let half = gap.min(44.0) / 2.0 * 0.94;
        let mut p = Path::new();
        p.move_to([at[0] - half, at[1]]);
        p.line_to([at[0] + half, at[1]]);
        p.line_to([at[0] + half, at[1] + tall]);
        p.line_to([at[0] - half, at[1] + tall]);
        p.close();
        let class = if scene.marks.in_region(s) { "site region" } else { "site" };
        canvas.sheet.shape(Layer::Site, class, Canvas::site(scene, s), p.into_text());
        canvas.drawn.sites += 1;
    }
    if scene.options.numbers && n > 0 {
        let each = rim::stride(gap, text::width(&(n - 1).to_string(), TEXT) + 5.0);
        for &s in row.iter().filter(|s| *s % each == 0) {
            let at = d.pegs[s];
            canvas.sheet.word([at[0], at[1] + tall + TEXT * 0.95], "middle", "", s.to_string());
        }
    }
}

/// Where a bond, or a site's leg, is crossed: a point and the way across.
fn crossing(d: &Drawing<'_>, k: usize) -> Crossing {
    let edges = &d.graph.edges;
    let (a, b, through) = edges.get(k).map_or_else(
        || {
            let s = k - edges.len();
            (d.at[d.graph.sites[s]], d.pegs[s], None)
        },
        |e| {
            let bow = match d.lines[k] {
                Line::Whole(bow) => bow,
                _ => None,
            };
            (d.at[e.a], d.at[e.b], bow)
        },
    );
    let mut at = [f64::midpoint(a[0], b[0]), f64::midpoint(a[1], b[1])];
    if let Some(m) = through {
        at = [f64::midpoint(at[0], m[0]), f64::midpoint(at[1], m[1])];
    }
    let mut along = [b[0] - a[0], b[1] - a[1]];
    let arch = d.shape == Shape::Upright && along[1].abs() > 1e-9;
    if arch {
        // Half way the arch runs steeper across than its chord.
        along[0] *= 1.5;
        along[1] *= 0.75;
    }
    if edges.get(k).is_some() && matches!(d.lines[k], Line::Stubs) {
        let long = distance(a, b).max(1e-9);
        at = [a[0] - along[0] / long * d.step * 0.6, a[1] - along[1] / long * d.step * 0.6];
    }
    let long = along[0].hypot(along[1]).max(1e-9);
    Crossing { at, across: [-along[1] / long, along[0] / long] }
}

fn label_of(scene: &Scene<'_>, graph: &Graph, k: usize) -> usize {
    graph
        .edges
        .get(k)
        .map_or_else(|| scene.network.boundary()[k - graph.edges.len()], |e| e.label)
        .index()
}

/// Where a script can show the cut through a bond.
fn gates(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    if scene.options.address != Address::All {
        return;
    }
    for k in 0..d.graph.edges.len() + d.graph.sites.len() {
        let c = crossing(d, k);
        let r = (d.step * 0.55).min(24.0);
        let mut p = Path::new();
        p.move_to([c.at[0] - c.across[0] * r, c.at[1] - c.across[1] * r]);
        p.line_to([c.at[0] + c.across[0] * r, c.at[1] + c.across[1] * r]);
        let label = Canvas::label(scene, label_of(scene, d.graph, k));
        canvas.sheet.shape(Layer::Cut, &format!("gate k{}", level(d.step)), label, p.into_text());
    }
}

fn cut(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    if scene.marks.cut.is_empty() {
        return;
    }
    let cut: std::collections::BTreeSet<usize> =
        scene.marks.cut.iter().map(|l| l.index()).collect();
    let mut crossings = Vec::new();
    let mut others: Vec<[[f64; 2]; 2]> = Vec::new();
    for k in 0..d.graph.edges.len() + d.graph.sites.len() {
        if cut.contains(&label_of(scene, d.graph, k)) {
            crossings.push(crossing(d, k));
        } else if let Some(e) = d.graph.edges.get(k) {
            if !matches!(d.lines[k], Line::Stubs) {
                others.push([d.at[e.a], d.at[e.b]]);
            }
        } else {
            let s = k - d.graph.edges.len();
            others.push([d.at[d.graph.sites[s]], d.pegs[s]]);
        }
    }
    // The curve keeps off tensors, too.
    let r = d.step * 0.3;
    for p in &d.at {
        others.push([[p[0] - r, p[1] - r], [p[0] + r, p[1] + r]]);
        others.push([[p[0] - r, p[1] + r], [p[0] + r, p[1] - r]]);
    }
    let overhang = (d.step * 0.5).min(22.0);
    for path in cut_curve::curves(&crossings, &others, 6.0 * d.step, overhang) {
        canvas.cut(level(d.step).min(5), What::Nothing, path);
    }
}

/// The direction, of sixteen, that keeps farthest from the bonds of a node; downwards and to
/// the right where several do.
pub(super) fn free_look(
    graph: &Graph,
    v: usize,
    at: impl Fn(usize) -> [f64; 2],
    here: [f64; 2],
) -> [f64; 2] {
    let mut looks: Vec<f64> = graph
        .around(v)
        .iter()
        .map(|&(w, _)| at(w))
        .chain((0..graph.sites.len()).filter(|&s| graph.sites[s] == v).map(|s| at(graph.nodes + s)))
        .map(|p| (p[1] - here[1]).atan2(p[0] - here[0]))
        .collect();
    if looks.is_empty() {
        looks.push(-std::f64::consts::FRAC_PI_2);
    }
    let tau = std::f64::consts::TAU;
    let mut best = (f64::NEG_INFINITY, [0.0, 1.0]);
    for k in 0..16 {
        let a = tau * f64::from(k) / 16.0;
        let near = looks
            .iter()
            .map(|l| {
                let d = (a - l).rem_euclid(tau);
                d.min(tau - d)
            })
            .fold(f64::INFINITY, f64::min);
        let worth = near.min(0.9) + 0.12 * a.sin() + 0.03 * a.cos();
        if worth > best.0 + 1e-9 {
            best = (worth, [a.cos(), a.sin()]);
        }
    }
    best.1
}

fn names(scene: &Scene<'_>, d: &Drawing<'_>, canvas: &mut Canvas) {
    let mut taken: Vec<([f64; 2], f64)> = Vec::new();
    for v in 0..d.graph.tensors {
        let name = Graph::shown(scene.network, v);
        if d.step < TEXT * 0.7 || text::width(&name, TEXT) > d.step * 2.2 {
            continue;
        }
        let at = d.at[v];
        let points = |w: usize| if w < d.graph.nodes { d.at[w] } else { d.pegs[w - d.graph.nodes] };
        let look =
            if d.shape == Shape::Upright { [0.98, 0.2] } else { free_look(d.graph, v, points, at) };
        let half = text::width(&name, TEXT) / 2.0;
        let off = reach(d.size[v]) * 0.6 + 4.0;
        let c = [at[0] + look[0] * (off + half), at[1] + look[1] * (off + TEXT * 0.42)];
        let free = taken
            .iter()
            .all(|(t, w)| (t[0] - c[0]).abs() > w + half + 2.0 || (t[1] - c[1]).abs() > TEXT * 0.9);
        let clear = d.at.iter().chain(&d.pegs).enumerate().all(|(w, p)| {
            w == v || (p[0] - c[0]).abs() > half + 5.0 || (p[1] - c[1]).abs() > TEXT * 0.55
        });
        if free && clear && c[0] > half && c[0] < WIDTH - half {
            taken.push((c, half));
            canvas.sheet.word([c[0], c[1] + TEXT * 0.36], "middle", "name", name);
        }
    }
}
