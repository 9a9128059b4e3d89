//! Where the tensors and boundary sites of a network stand in the report's disk.

use crate::network::{self, Network};
use crate::tiling::Curvature;
use std::f64::consts::TAU;

/// Places in the unit disk.
#[derive(Debug, Clone, PartialEq)]
pub struct Placed {
    /// One point a tensor.
    pub tensors: Vec<[f64; 2]>,
    /// Angle of each boundary site, rising with the site.
    pub angles: Vec<f64>,
    /// p and q, where the places are those of a hyperbolic tiling {p,q}.
    pub tiling: Option<(u32, u32)>,
}

/// Rounds of averaging for a network that brings no places.
const ROUNDS: usize = 400;

/// Places the network.
///
/// A hyperbolic patch in one piece, all of whose sites lie on its outer boundary, stands as it
/// lies in the disk; places that the network brings otherwise are scaled into the disk. For
/// everything else the boundary sites are set round the circle and every tensor at the mean of
/// its neighbours, which draws a planar network without crossings (Proc. London Math. Soc. 13,
/// 743 (1963)).
pub fn place(network: &Network) -> Placed {
    let n = network.boundary().len();
    let layout = network.layout();
    let one_rim = layout.is_none_or(|l| l.sheet.is_empty() && l.cycles.len() < 2);
    if let Some((tiling, frames)) = network::tile_frames(network).filter(|_| one_rim)
        && tiling.curvature() == Curvature::Hyperbolic
    {
        let known: Vec<Option<[f64; 2]>> =
            frames.iter().map(|f| f.as_ref().map(|f| f.place())).collect();
        // States that fix bulk legs stand on the tile that they fix.
        let tensors: Vec<[f64; 2]> = network
            .tensor_ids()
            .map(|t| {
                known[t.index()].unwrap_or_else(|| {
                    network
                        .legs(t)
                        .iter()
                        .flat_map(|&l| network.holders(l))
                        .find_map(|h| known[h.index()])
                        .unwrap_or([0.0, 0.0])
                })
            })
            .collect();
        let angles = angles(network, &tensors);
        return Placed { tensors, angles, tiling: Some((tiling.polygon(), tiling.around())) };
    }
    let own = layout.filter(|l| one_rim && l.place.len() == network.tensors());
    let Some(own) = own else {
        let angles: Vec<f64> = (0..n).map(|s| TAU * (s as f64 + 0.5) / n as f64).collect();
        return Placed { tensors: average(network, &angles), angles, tiling: None };
    };
    let mut tensors = own.place.clone();
    let k = tensors.len().max(1) as f64;
    let centre = tensors.iter().fold([0.0, 0.0], |c, p| [c[0] + p[0] / k, c[1] + p[1] / k]);
    let reach =
        tensors.iter().map(|p| (p[0] - centre[0]).hypot(p[1] - centre[1])).fold(1e-9, f64::max);
    for p in &mut tensors {
        *p = [(p[0] - centre[0]) / reach * 0.85, (p[1] - centre[1]) / reach * 0.85];
    }
    let angles = angles(network, &tensors);
    Placed { tensors, angles, tiling: None }
}

/// Angles that rise with the site: half way between an even spacing and the directions in
/// which the tensors that hold the sites stand.
fn angles(network: &Network, tensors: &[[f64; 2]]) -> Vec<f64> {
    let n = network.boundary().len();
    let step = TAU / n.max(1) as f64;
    let direction = |s: usize| {
        let t = network.holders(network.boundary()[s])[0].index();
        tensors[t][1].atan2(tensors[t][0])
    };
    // The even spacing is turned so that it fits the directions best (circular mean).
    let (mut x, mut y) = (0.0, 0.0);
    for s in 0..n {
        let off = direction(s) - step * s as f64;
        x += off.cos();
        y += off.sin();
    }
    let turn = y.atan2(x);
    let mut last = f64::NEG_INFINITY;
    (0..n)
        .map(|s| {
            let even = step * s as f64 + turn;
            let off = (direction(s) - even + TAU / 2.0).rem_euclid(TAU) - TAU / 2.0;
            let wanted = even + 0.5 * off.clamp(-4.0 * step, 4.0 * step);
            last = wanted.max(last + 0.2 * step);
            last
        })
        .collect()
}

/// Every tensor at the mean of its neighbours and of the boundary points that it holds.
fn average(network: &Network, angles: &[f64]) -> Vec<[f64; 2]> {
    let m = network.tensors();
    let mut fixed: Vec<Vec<[f64; 2]>> = vec![Vec::new(); m];
    for (s, &l) in network.boundary().iter().enumerate() {
        for t in network.holders(l) {
            fixed[t.index()].push([angles[s].cos(), angles[s].sin()]);
        }
    }
    let neighbours: Vec<Vec<usize>> = network
        .tensor_ids()
        .map(|t| {
            network
                .legs(t)
                .iter()
                .flat_map(|&l| network.holders(l).iter().map(|h| h.index()))
                .filter(|&h| h != t.index())
                .collect()
        })
        .collect();
    let mut at: Vec<[f64; 2]> = (0..m)
        .map(|t| {
            let a = TAU * t as f64 / m as f64;
            [0.5 * a.cos(), 0.5 * a.sin()]
        })
        .collect();
    if angles.is_empty() {
        return at;
    }
    for _ in 0..ROUNDS {
        for t in 0..m {
            let k = (fixed[t].len() + neighbours[t].len()) as f64;
            if k == 0.0 {
                continue;
            }
            let mut sum = [0.0, 0.0];
            for p in fixed[t].iter().copied().chain(neighbours[t].iter().map(|&u| at[u])) {
                sum = [sum[0] + p[0], sum[1] + p[1]];
            }
            at[t] = [sum[0] / k, sum[1] / k];
        }
    }
    at
}
