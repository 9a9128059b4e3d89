//! The boundary pinned to a circle, the rest held by springs.

use super::{Placement, Shape};
use crate::study::picture::graph::Graph;
use std::f64::consts::{FRAC_PI_2, TAU};

/// Places a connected network with at least three boundary sites; none where two nodes come
/// to lie on each other, or where bonds cross more than a few times.
///
/// Sites stand evenly on the unit circle, counter-clockwise from below; every node rests at
/// the mean of its neighbours and sites. Conjugate gradients: about the square root of the
/// condition number many sweeps over the edges.
pub(super) fn place(graph: &Graph) -> Option<Placement> {
    let n = graph.sites.len();
    if n < 3 || graph.components().len() != 1 {
        return None;
    }
    // Half a step off, so that the gap from the last to the first site is straight below.
    let angle = |s: usize| -FRAC_PI_2 + TAU * (s as f64 + 0.5) / n as f64;
    let pins: Vec<[f64; 2]> = (0..n).map(|s| [angle(s).cos(), angle(s).sin()]).collect();
    // Shallow networks are pulled towards the rim, or they would huddle in the middle.
    let strength = match depth(graph) {
        0 | 1 => 3.0,
        2 => 2.0,
        _ => 1.0,
    };
    let (loose, held) = pendants(graph);
    let mut weight = vec![0.0; graph.nodes];
    let mut pull = vec![[0.0; 2]; graph.nodes];
    for (s, &v) in graph.sites.iter().enumerate() {
        weight[v] += strength;
        pull[v][0] += strength * pins[s][0];
        pull[v][1] += strength * pins[s][1];
    }
    for e in graph.edges.iter().filter(|e| held[e.a] && held[e.b]) {
        weight[e.a] += 1.0;
        weight[e.b] += 1.0;
    }
    if (0..graph.nodes).any(|v| held[v] && weight[v] == 0.0) {
        return None;
    }
    let x = solve(graph, &held, &weight, &pull.iter().map(|p| p[0]).collect::<Vec<_>>());
    let y = solve(graph, &held, &weight, &pull.iter().map(|p| p[1]).collect::<Vec<_>>());
    let mut klein: Vec<[f64; 2]> = x.into_iter().zip(y).map(|(x, y)| [x, y]).collect();
    let mut set = held;
    for &v in loose.iter().rev() {
        hang(graph, &mut klein, &pins, &set, v);
        set[v] = true;
    }
    if !apart(graph, &klein) || crossings(graph, &klein, &pins) > 0 {
        return None;
    }
    let nodes = klein.into_iter().map(poincare).collect();
    Some(Placement { shape: Shape::Disk, nodes, sites: pins.into_iter().map(Some).collect() })
}

/// Most steps from a node to the nearest one with a site.
fn depth(graph: &Graph) -> u32 {
    let mut far = vec![u32::MAX; graph.nodes];
    let mut queue: std::collections::VecDeque<usize> = graph.sites.iter().copied().collect();
    for &v in &graph.sites {
        far[v] = 0;
    }
    let mut deepest = 0;
    while let Some(v) = queue.pop_front() {
        deepest = far[v];
        for &(w, _) in graph.around(v) {
            if far[w] == u32::MAX {
                far[w] = far[v] + 1;
                queue.push_back(w);
            }
        }
    }
    deepest
}

/// The point of the Poincaré disk that is this point of the Klein disk.
fn poincare(p: [f64; 2]) -> [f64; 2] {
    let f = 1.0 / (1.0 + (1.0 - p[0] * p[0] - p[1] * p[1]).max(0.0).sqrt());
    [p[0] * f, p[1] * f]
}

/// Nodes that springs would draw onto their only neighbour, in the order in which they fall
/// off, and one flag a node: whether it stays.
fn pendants(graph: &Graph) -> (Vec<usize>, Vec<bool>) {
    let mut held = vec![true; graph.nodes];
    let mut sited = vec![false; graph.nodes];
    for &v in &graph.sites {
        sited[v] = true;
    }
    let only = |v: usize, held: &[bool]| {
        let mut others = graph.around(v).iter().map(|n| n.0).filter(|&w| w != v && held[w]);
        let first = others.next();
        others.all(|w| Some(w) == first)
    };
    let mut loose: Vec<usize> = (0..graph.nodes).filter(|&v| !sited[v] && only(v, &held)).collect();
    let mut i = 0;
    while i < loose.len() {
        let v = loose[i];
        held[v] = false;
        for &(w, _) in graph.around(v) {
            if held[w] && !sited[w] && only(w, &held) && !loose.contains(&w) {
                loose.push(w);
            }
        }
        i += 1;
    }
    (loose, held)
}

/// Places a pendant in the widest gap at its neighbour, half as far as that one's nearest.
fn hang(graph: &Graph, at: &mut [[f64; 2]], pins: &[[f64; 2]], set: &[bool], v: usize) {
    let Some(&(w, _)) = graph.around(v).iter().find(|n| set[n.0]) else { return };
    let sites = (0..pins.len()).filter(|&s| graph.sites[s] == w).map(|s| pins[s]);
    let others: Vec<[f64; 2]> =
        graph.around(w).iter().filter(|n| set[n.0]).map(|n| at[n.0]).chain(sites).collect();
    let from = at[w];
    let mut looks: Vec<f64> =
        others.iter().map(|p| (p[1] - from[1]).atan2(p[0] - from[0])).collect();
    looks.sort_by(f64::total_cmp);
    let near = others.iter().map(|p| (p[0] - from[0]).hypot(p[1] - from[1]));
    let near = near.fold(0.4, f64::min) * 0.5;
    let mut best = (0.0, 0.0);
    for (i, &a) in looks.iter().enumerate() {
        let gap = (looks[(i + 1) % looks.len()] - a).rem_euclid(TAU);
        let gap = if looks.len() == 1 { TAU } else { gap };
        if gap > best.0 {
            best = (gap, a + gap / 2.0);
        }
    }
    at[v] = [from[0] + near * best.1.cos(), from[1] + near * best.1.sin()];
}

/// Solves (weights − adjacency) x = pull on the nodes that are held; others stay at 0.
fn solve(graph: &Graph, held: &[bool], weight: &[f64], pull: &[f64]) -> Vec<f64> {
    let n = graph.nodes;
    let weight: Vec<f64> = (0..n).map(|v| if held[v] { weight[v] } else { 1.0 }).collect();
    let weight = &weight;
    let apply = |x: &[f64]| -> Vec<f64> {
        (0..n)
            .map(|v| {
                if !held[v] {
                    return x[v];
                }
                let pulls = graph.around(v).iter().filter(|n| held[n.0]).map(|n| x[n.0]);
                weight[v] * x[v] - pulls.sum::<f64>()
            })
            .collect()
    };
    let dot = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| a * b).sum::<f64>();
    let mut x = vec![0.0; n];
    let mut r = pull.to_vec();
    let mut z: Vec<f64> = r.iter().zip(weight).map(|(r, w)| r / w).collect();
    let mut p = z.clone();
    let mut rz = dot(&r, &z);
    let goal = 1e-24 * rz.max(1e-300);
    for _ in 0..(20 * n).clamp(100, 4000) {
        if rz <= goal {
            break;
        }
        let q = apply(&p);
        let step = rz / dot(&p, &q);
        for v in 0..n {
            x[v] += step * p[v];
            r[v] -= step * q[v];
        }
        for v in 0..n {
            z[v] = r[v] / weight[v];
        }
        let next = dot(&r, &z);
        let keep = next / rz;
        for v in 0..n {
            p[v] = z[v] + keep * p[v];
        }
        rz = next;
    }
    x
}

/// Whether neighbouring nodes, and nodes that come next to each other when sorted along
/// either axis, keep a distance.
fn apart(graph: &Graph, at: &[[f64; 2]]) -> bool {
    let near = 0.25 / (graph.nodes as f64).max(4.0) / 4.0;
    let mut order: Vec<usize> = (0..at.len()).collect();
    order.sort_by(|&a, &b| at[a][0].total_cmp(&at[b][0]));
    for (i, &v) in order.iter().enumerate() {
        for &w in &order[i + 1..] {
            if at[w][0] - at[v][0] > near {
                break;
            }
            if (at[w][1] - at[v][1]).abs() < near {
                return false;
            }
        }
    }
    true
}

/// How many pairs of lines cross, found through a grid of cells about a mean line long.
fn crossings(graph: &Graph, at: &[[f64; 2]], pins: &[[f64; 2]]) -> usize {
    let mut lines: Vec<([f64; 2], [f64; 2], [usize; 2])> =
        graph.edges.iter().map(|e| (at[e.a], at[e.b], [e.a, e.b])).collect();
    for (s, &v) in graph.sites.iter().enumerate() {
        lines.push((at[v], pins[s], [v, graph.nodes + s]));
    }
    let mean = lines.iter().map(|l| (l.0[0] - l.1[0]).hypot(l.0[1] - l.1[1])).sum::<f64>()
        / lines.len().max(1) as f64;
    let cell = mean.max(0.01);
    let key = |p: f64| ((p + 1.5) / cell) as usize;
    let across = key(1.5) + 1;
    let mut grid: Vec<Vec<u32>> = vec![Vec::new(); across * across];
    let mut count = 0;
    for (k, (a, b, ends)) in lines.iter().enumerate() {
        let (x0, x1) = (key(a[0].min(b[0])), key(a[0].max(b[0])));
        let (y0, y1) = (key(a[1].min(b[1])), key(a[1].max(b[1])));
        let mut met: Vec<u32> = Vec::new();
        for gx in x0..=x1.min(across - 1) {
            for gy in y0..=y1.min(across - 1) {
                met.extend(&grid[gx * across + gy]);
                grid[gx * across + gy].push(k as u32);
            }
        }
        met.sort_unstable();
        met.dedup();
        for other in met {
            let (c, d, theirs) = &lines[other as usize];
            if ends.iter().any(|e| theirs.contains(e)) {
                continue;
            }
            count += usize::from(cross(*a, *b, *c, *d));
        }
    }
    count
}

/// Whether two segments cross at an inner point of both.
pub(in crate::study::picture) fn cross(a: [f64; 2], b: [f64; 2], c: [f64; 2], d: [f64; 2]) -> bool {
    let side = |p: [f64; 2], q: [f64; 2], r: [f64; 2]| {
        (q[0] - p[0]) * (r[1] - p[1]) - (q[1] - p[1]) * (r[0] - p[0])
    };
    let (s, t) = (side(a, b, c) * side(a, b, d), side(c, d, a) * side(c, d, b));
    s < -1e-18 && t < -1e-18
}
