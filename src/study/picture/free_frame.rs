//! Fits a placement without a rim on the canvas: how bonds run, where pegs stand.

use super::canvas::{Canvas, SEEN, WIDTH};
use super::graph::Graph;
use super::ink::TEXT;
use super::pen::View;
use super::placement::{Placement, Shape};
use super::scene::Scene;
use num_complex::Complex64;

/// How a bond is drawn.
#[derive(Debug, Clone, Copy)]
pub(super) enum Line {
    /// Straight, or bowed through this point.
    Whole(Option<[f64; 2]>),
    /// Down from one node and down into the other.
    Arch,
    /// Out at one side of the lattice and in at the other: a stub at either end.
    Stubs,
}

pub(super) struct Drawing<'a> {
    pub(super) graph: &'a Graph,
    pub(super) shape: Shape,
    /// Nodes on the canvas.
    pub(super) at: Vec<[f64; 2]>,
    /// Sites on the canvas.
    pub(super) pegs: Vec<[f64; 2]>,
    pub(super) lines: Vec<Line>,
    /// Half the median length of a bond on the canvas.
    pub(super) step: f64,
    /// Half the distance to the nearest neighbour, at most `step`.
    pub(super) size: Vec<f64>,
}

fn median(mut lengths: Vec<f64>) -> f64 {
    lengths.retain(|l| *l > 0.0);
    if lengths.is_empty() {
        return 1.0;
    }
    let mid = lengths.len() / 2;
    *lengths.select_nth_unstable_by(mid, f64::total_cmp).1
}

pub(super) fn distance(a: [f64; 2], b: [f64; 2]) -> f64 {
    (a[0] - b[0]).hypot(a[1] - b[1])
}

/// Fits the placement on the canvas.
pub(super) fn frame<'a>(
    scene: &Scene<'_>,
    graph: &'a Graph,
    placement: &Placement,
    canvas: &mut Canvas,
) -> Drawing<'a> {
    let nodes = &placement.nodes;
    let step = median(graph.edges.iter().map(|e| distance(nodes[e.a], nodes[e.b])).collect()) / 2.0;
    let lines = lines(graph, placement, step);
    let pegs = peg_places(graph, placement, &lines, step);
    let (mut low, mut high) = ([f64::INFINITY; 2], [f64::NEG_INFINITY; 2]);
    for p in nodes.iter().chain(&pegs) {
        for k in 0..2 {
            low[k] = low[k].min(p[k]);
            high[k] = high[k].max(p[k]);
        }
    }
    if low[0] > high[0] {
        (low, high) = ([0.0; 2], [1.0; 2]);
    }
    let stubs = lines.iter().any(|l| matches!(l, Line::Stubs));
    let margin = if placement.shape == Shape::Upright { 34.0 } else { 46.0 };
    let extra = if stubs { step } else { 0.0 };
    let span = [high[0] - low[0] + 2.0 * extra, high[1] - low[1] + 2.0 * extra];
    let across = (WIDTH - 2.0 * margin) / span[0].max(1e-9);
    let up = WIDTH * 1.15 / span[1].max(1e-9);
    // Few tensors need not fill the sheet.
    let unit = across.min(up).min(90.0 / step.max(1e-9));
    let origin = [
        WIDTH / 2.0 - unit * f64::midpoint(low[0], high[0]),
        canvas.top + margin + unit * (high[1] + extra),
    ];
    let view = View { origin, unit, globe: false };
    let put = |p: &[f64; 2]| view.at(Complex64::new(p[0], p[1]));
    let at: Vec<[f64; 2]> = nodes.iter().map(put).collect();
    let below = if placement.shape == Shape::Upright && scene.options.numbers {
        TEXT + 30.0
    } else {
        margin
    };
    canvas.bottom = view.at(Complex64::new(0.0, low[1] - extra))[1] + below;
    let step = step * unit;
    let mut size = vec![step.min(34.0); graph.nodes];
    for (e, line) in graph.edges.iter().zip(&lines) {
        if !matches!(line, Line::Stubs) {
            let half = (distance(at[e.a], at[e.b]) / 2.0).max(SEEN);
            size[e.a] = size[e.a].min(half);
            size[e.b] = size[e.b].min(half);
        }
    }
    // Bows are told in the placement's plane.
    let lines = lines
        .into_iter()
        .map(|l| match l {
            Line::Whole(Some(m)) => Line::Whole(Some(put(&m))),
            other => other,
        })
        .collect();
    let pegs = pegs.iter().map(put).collect();
    Drawing { graph, shape: placement.shape, at, pegs, lines, step, size }
}

/// How each bond is drawn: bows for bonds that join the same nodes, arches in trees, stubs
/// for bonds that close a lattice on itself.
fn lines(graph: &Graph, placement: &Placement, step: f64) -> Vec<Line> {
    let nodes = &placement.nodes;
    let far = |e: &super::graph::Edge| distance(nodes[e.a], nodes[e.b]) > 3.2 * step;
    graph
        .edges
        .iter()
        .enumerate()
        .map(|(k, e)| {
            if placement.shape == Shape::Lattice && far(e) && passes(graph, nodes, e, step) {
                return Line::Stubs;
            }
            let twins: Vec<usize> =
                graph.around(e.a).iter().filter(|n| n.0 == e.b).map(|n| n.1).collect();
            if twins.len() > 1 {
                let place = twins.iter().position(|&t| t == k).unwrap_or(0) as f64;
                let way = if e.a < e.b { 1.0 } else { -1.0 };
                let shift = (place - (twins.len() - 1) as f64 / 2.0) * way * 0.36;
                let (a, b) = (nodes[e.a], nodes[e.b]);
                return Line::Whole(Some([
                    f64::midpoint(a[0], b[0]) - (b[1] - a[1]) * shift,
                    f64::midpoint(a[1], b[1]) + (b[0] - a[0]) * shift,
                ]));
            }
            let upright = placement.shape == Shape::Upright;
            if upright && (nodes[e.a][1] - nodes[e.b][1]).abs() > 1e-9 {
                Line::Arch
            } else {
                Line::Whole(None)
            }
        })
        .collect()
}

/// Whether the straight line of a bond runs over another node.
fn passes(graph: &Graph, nodes: &[[f64; 2]], e: &super::graph::Edge, step: f64) -> bool {
    let (a, b) = (nodes[e.a], nodes[e.b]);
    let (dx, dy) = (b[0] - a[0], b[1] - a[1]);
    let long = dx.hypot(dy);
    // A node in the way is a neighbour of an end, on a lattice.
    graph
        .around(e.a)
        .iter()
        .chain(graph.around(e.b))
        .map(|n| n.0)
        .filter(|&w| w != e.a && w != e.b)
        .any(|w| {
            let (x, y) = (nodes[w][0] - a[0], nodes[w][1] - a[1]);
            let along = (x * dx + y * dy) / long;
            let off = (x * dy - y * dx).abs() / long;
            along > 0.2 * step && along < long - 0.2 * step && off < 0.3 * step
        })
}

/// The direction in which a bond leaves a node, in the placement's plane.
fn leaves(nodes: &[[f64; 2]], line: Line, v: usize, w: usize) -> f64 {
    let (a, b) = (nodes[v], nodes[w]);
    match line {
        Line::Whole(Some(m)) => (m[1] - a[1]).atan2(m[0] - a[0]),
        Line::Stubs => (a[1] - b[1]).atan2(a[0] - b[0]),
        _ => (b[1] - a[1]).atan2(b[0] - a[0]),
    }
}

/// Where sites stand: as the placement says, else on pegs that leave their node in the
/// widest gaps between its bonds, in boundary order counter-clockwise.
fn peg_places(graph: &Graph, placement: &Placement, lines: &[Line], step: f64) -> Vec<[f64; 2]> {
    let tau = std::f64::consts::TAU;
    let nodes = &placement.nodes;
    let mut pegs = vec![[0.0; 2]; graph.sites.len()];
    for (v, own) in graph.sites_by_node().iter().enumerate() {
        if own.is_empty() {
            continue;
        }
        let mut taken: Vec<f64> = graph
            .around(v)
            .iter()
            .map(|&(w, k)| leaves(nodes, lines[k], v, w).rem_euclid(tau))
            .collect();
        taken.sort_by(f64::total_cmp);
        // Gaps: where each begins and how wide it is.
        let mut gaps: Vec<(f64, f64, usize)> = (0..taken.len())
            .map(|i| {
                let next = taken[(i + 1) % taken.len()];
                let wide = (next - taken[i]).rem_euclid(tau);
                (taken[i], if taken.len() == 1 { tau } else { wide }, 0)
            })
            .collect();
        if gaps.is_empty() {
            gaps.push((-tau / 4.0, tau, 0));
        }
        for _ in own {
            let share = |g: &(f64, f64, usize)| g.1 / (g.2 + 1) as f64;
            let mut best = 0;
            for i in 1..gaps.len() {
                if share(&gaps[i]) > share(&gaps[best]) + 1e-9 {
                    best = i;
                }
            }
            gaps[best].2 += 1;
        }
        // Begin in the gap after the widest stretch without a site.
        let empty = (0..gaps.len()).find(|&i| gaps[i].2 == 0).map_or(0, |i| i + 1);
        let mut looks = Vec::with_capacity(own.len());
        for i in 0..gaps.len() {
            let (start, wide, count) = gaps[(empty + i) % gaps.len()];
            let whole = graph.around(v).is_empty();
            for k in 0..count {
                let part = if whole {
                    k as f64 / count as f64
                } else {
                    (k + 1) as f64 / (count + 1) as f64
                };
                looks.push(start + wide * part);
            }
        }
        for (&s, look) in own.iter().zip(looks) {
            let far = step * 1.05;
            pegs[s] = placement.sites[s]
                .unwrap_or([nodes[v][0] + far * look.cos(), nodes[v][1] + far * look.sin()]);
        }
    }
    pegs
}
