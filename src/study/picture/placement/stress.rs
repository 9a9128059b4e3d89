//! Distances on paper as near as possible to the numbers of steps in the graph.

use super::{Placement, Shape};
use crate::study::picture::graph::Graph;

/// Nodes up to which distances between all pairs are balanced.
const ALL_PAIRS: usize = 1200;
/// Pivots from which distances are measured.
const PIVOTS: usize = 40;

/// Places each component by itself and sets them side by side, the largest first.
///
/// A component starts from the two leading directions of its centred squared distances to
/// pivots (Lect. Notes Comput. Sci. 4372, 42 (2007)) and is then relaxed by stress
/// majorisation, Σ_{i<j} (|x_i − x_j| − d_ij)²/d_ij² (Lect. Notes Comput. Sci. 3383, 239
/// (2004)): between all pairs up to 1200 nodes, between neighbours and pivots beyond.
pub(super) fn place(graph: &Graph) -> Placement {
    let parts = graph.components();
    let mut nodes = vec![[0.0; 2]; graph.nodes];
    let mut boxes = Vec::new();
    for part in &parts {
        let at = component(graph, part);
        let mut low = [f64::INFINITY; 2];
        let mut high = [f64::NEG_INFINITY; 2];
        for p in &at {
            for k in 0..2 {
                low[k] = low[k].min(p[k]);
                high[k] = high[k].max(p[k]);
            }
        }
        boxes.push((at, low, [high[0] - low[0], high[1] - low[1]]));
    }
    let area: f64 = boxes.iter().map(|b| (b.2[0] + 1.5) * (b.2[1] + 1.5)).sum();
    let wide = boxes.iter().map(|b| b.2[0]).fold(area.sqrt() * 1.2, f64::max);
    let (mut x, mut y, mut tall) = (0.0, 0.0, 0.0f64);
    for (part, (at, low, size)) in parts.iter().zip(&boxes) {
        if x > 0.0 && x + size[0] > wide {
            x = 0.0;
            y -= tall + 1.5;
            tall = 0.0;
        }
        for (&v, p) in part.iter().zip(at) {
            nodes[v] = [x + p[0] - low[0], y - size[1] + p[1] - low[1]];
        }
        x += size[0] + 1.5;
        tall = tall.max(size[1]);
    }
    Placement { shape: Shape::Free, nodes, sites: vec![None; graph.sites.len()] }
}

fn component(graph: &Graph, part: &[usize]) -> Vec<[f64; 2]> {
    let n = part.len();
    if n == 1 {
        return vec![[0.0; 2]];
    }
    let mut number = vec![usize::MAX; graph.nodes];
    for (i, &v) in part.iter().enumerate() {
        number[v] = i;
    }
    // Pivots: each the farthest from those before.
    let count = if n <= ALL_PAIRS { n.min(PIVOTS) } else { PIVOTS };
    let mut near = vec![u32::MAX; n];
    let mut pivots = Vec::new();
    let mut next = 0;
    let mut far: Vec<Vec<f64>> = Vec::new();
    for _ in 0..count {
        pivots.push(next);
        let steps = graph.steps(part[next]);
        let own: Vec<u32> = part.iter().map(|&v| steps[v]).collect();
        for (a, b) in near.iter_mut().zip(&own) {
            *a = (*a).min(*b);
        }
        far.push(own.into_iter().map(f64::from).collect());
        let best = near.iter().copied().max().unwrap_or(0);
        if best == 0 {
            break;
        }
        next = near.iter().position(|&d| d == best).unwrap_or(0);
    }
    let mut at = leading(&far, n);
    if n <= ALL_PAIRS {
        let all: Vec<Vec<f64>> = (0..n)
            .map(|i| {
                let steps = graph.steps(part[i]);
                part.iter().map(|&v| f64::from(steps[v])).collect()
            })
            .collect();
        let pairs = |i: usize| -> Vec<(usize, f64)> {
            (0..n).filter(|&j| j != i).map(|j| (j, all[i][j])).collect()
        };
        relax(&mut at, &(0..n).map(pairs).collect::<Vec<_>>(), if n < 300 { 200 } else { 60 });
    } else {
        let pairs: Vec<Vec<(usize, f64)>> = (0..n)
            .map(|i| {
                let mut list: Vec<(usize, f64)> =
                    graph.around(part[i]).iter().map(|&(w, _)| (number[w], 1.0)).collect();
                list.extend(
                    pivots.iter().zip(&far).filter(|(p, _)| **p != i).map(|(&p, f)| (p, f[i])),
                );
                list
            })
            .collect();
        relax(&mut at, &pairs, 40);
    }
    straighten(&mut at);
    at
}

/// The two leading directions of the doubly centred squared distances to the pivots.
fn leading(far: &[Vec<f64>], n: usize) -> Vec<[f64; 2]> {
    let k = far.len();
    let mut c: Vec<Vec<f64>> =
        far.iter().map(|row| row.iter().map(|d| -0.5 * d * d).collect()).collect();
    for row in &mut c {
        let mean = row.iter().sum::<f64>() / n as f64;
        row.iter_mut().for_each(|x| *x -= mean);
    }
    for i in 0..n {
        let mean = c.iter().map(|r| r[i]).sum::<f64>() / k as f64;
        c.iter_mut().for_each(|r| r[i] -= mean);
    }
    let mut gram = vec![vec![0.0; k]; k];
    for a in 0..k {
        for b in 0..=a {
            let s = c[a].iter().zip(&c[b]).map(|(x, y)| x * y).sum::<f64>();
            gram[a][b] = s;
            gram[b][a] = s;
        }
    }
    let mut found: Vec<Vec<f64>> = Vec::new();
    for d in 0..2 {
        let mut v: Vec<f64> =
            (0..k).map(|i| 1.0 + ((i * (7 + d * 4) + 3) % 11) as f64 * 0.1).collect();
        for _ in 0..200 {
            let mut w: Vec<f64> =
                gram.iter().map(|r| r.iter().zip(&v).map(|(a, b)| a * b).sum()).collect();
            for f in &found {
                let along: f64 = w.iter().zip(f).map(|(a, b)| a * b).sum();
                w.iter_mut().zip(f).for_each(|(x, y)| *x -= along * y);
            }
            let size = w.iter().map(|x| x * x).sum::<f64>().sqrt();
            if size < 1e-12 {
                break;
            }
            w.iter_mut().for_each(|x| *x /= size);
            v = w;
        }
        found.push(v);
    }
    let mut at: Vec<[f64; 2]> = (0..n)
        .map(|i| {
            let along = |f: &[f64]| c.iter().zip(f).map(|(r, w)| r[i] * w).sum::<f64>();
            [along(&found[0]), along(&found[1])]
        })
        .collect();
    // To the scale of single steps; a touch of unevenness parts nodes that coincide.
    let reach = far.iter().flatten().copied().fold(1.0, f64::max);
    let wide = at.iter().map(|p| p[0].abs().max(p[1].abs())).fold(1e-12, f64::max);
    for (i, p) in at.iter_mut().enumerate() {
        let golden = i as f64 * 2.399_963_229_728_653;
        p[0] = p[0] / wide * reach / 2.0 + 0.02 * golden.cos();
        p[1] = p[1] / wide * reach / 2.0 + 0.02 * golden.sin();
    }
    at
}

/// Moves every node to where its wanted distances balance, again and again.
fn relax(at: &mut [[f64; 2]], pairs: &[Vec<(usize, f64)>], sweeps: usize) {
    for _ in 0..sweeps {
        let mut moved = 0.0f64;
        for i in 0..at.len() {
            let (mut sum, mut total) = ([0.0; 2], 0.0);
            for &(j, d) in &pairs[i] {
                let w = 1.0 / (d * d);
                let (dx, dy) = (at[i][0] - at[j][0], at[i][1] - at[j][1]);
                let r = dx.hypot(dy).max(1e-9);
                sum[0] += w * (at[j][0] + d * dx / r);
                sum[1] += w * (at[j][1] + d * dy / r);
                total += w;
            }
            if total > 0.0 {
                let p = [sum[0] / total, sum[1] / total];
                moved = moved.max((p[0] - at[i][0]).abs() + (p[1] - at[i][1]).abs());
                at[i] = p;
            }
        }
        if moved < 1e-4 {
            break;
        }
    }
}

/// Turns the whole so that its longest extent lies across.
fn straighten(at: &mut [[f64; 2]]) {
    let n = at.len() as f64;
    let mean = at.iter().fold([0.0; 2], |m, p| [m[0] + p[0] / n, m[1] + p[1] / n]);
    let (mut xx, mut xy, mut yy) = (0.0, 0.0, 0.0);
    for p in at.iter() {
        let (x, y) = (p[0] - mean[0], p[1] - mean[1]);
        xx += x * x;
        xy += x * y;
        yy += y * y;
    }
    let turn = -0.5 * (2.0 * xy).atan2(xx - yy);
    let (c, s) = (turn.cos(), turn.sin());
    for p in at.iter_mut() {
        let (x, y) = (p[0] - mean[0], p[1] - mean[1]);
        *p = [c * x - s * y, s * x + c * y];
    }
}
