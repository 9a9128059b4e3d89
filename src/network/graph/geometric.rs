//! Random geometric graphs.

use super::Edges;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;

/// n points in the unit square, from the seed, and the pairs nearer than the radius at which a
/// point has `mean_degree` neighbours in the mean, far from the edges: n·π·r² = mean degree.
/// With `periodic` opposite edges of the square are one. Expected time linear in points and
/// edges.
pub fn geometric(n: usize, mean_degree: f64, periodic: bool, seed: u64) -> (Vec<[f64; 2]>, Edges) {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let points: Vec<[f64; 2]> = (0..n).map(|_| [rng.random(), rng.random()]).collect();
    let radius = (mean_degree / (std::f64::consts::PI * n as f64)).sqrt();
    // Cells no smaller than the radius, and no more of them than points.
    let cells = ((1.0 / radius) as usize).min((n as f64).sqrt() as usize).max(1);
    let cell_of = |x: f64| ((x * cells as f64) as usize).min(cells - 1);
    let mut members: Vec<Vec<u32>> = vec![Vec::new(); cells * cells];
    for (k, p) in points.iter().enumerate() {
        members[cell_of(p[1]) * cells + cell_of(p[0])].push(k as u32);
    }
    let gap = |a: f64, b: f64| {
        let d = (a - b).abs();
        if periodic { d.min(1.0 - d) } else { d }
    };
    let mut edges = Vec::new();
    let mut near = Vec::new();
    for (k, p) in points.iter().enumerate() {
        near.clear();
        for cell in around(cell_of(p[1]), cells, periodic) {
            for other in around(cell_of(p[0]), cells, periodic) {
                near.extend(members[cell * cells + other].iter().copied().filter(|&j| {
                    let q = points[j as usize];
                    j as usize > k && gap(p[0], q[0]).hypot(gap(p[1], q[1])) < radius
                }));
            }
        }
        near.sort_unstable();
        edges.extend(near.iter().map(|&j| (k as u32, j)));
    }
    (points, edges)
}

/// A cell's number and its neighbours' in one direction, each once.
fn around(cell: usize, cells: usize, periodic: bool) -> Vec<usize> {
    let mut list = vec![cell];
    for step in [cells - 1, 1] {
        let next = (cell + step) % cells;
        let wraps = if step == 1 { next != cell + 1 } else { next + 1 != cell };
        if (periodic || !wraps) && !list.contains(&next) {
            list.push(next);
        }
    }
    list
}
