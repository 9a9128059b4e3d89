//! A curve through the bonds that a cut crosses and through no others.

use super::pen::Path;
use super::placement::cross;

/// Where the curve crosses a bond, and the unit vector across it.
#[derive(Debug, Clone, Copy)]
pub(super) struct Crossing {
    pub(super) at: [f64; 2],
    pub(super) across: [f64; 2],
}

/// Crossings beyond which each is drawn by itself.
const MOST: usize = 400;

/// Joins crossings by short links, the shortest first, at most two at each, none of which
/// meets another bond (`others`), is longer than `longest` or closes a loop too early; draws each chain as one smooth
/// curve that overhangs its ends.
///
/// Cost: crossings² × other bonds at worst, links being tried from the shortest on.
pub(super) fn curves(
    crossings: &[Crossing],
    others: &[[[f64; 2]; 2]],
    longest: f64,
    overhang: f64,
) -> Vec<String> {
    let n = crossings.len();
    let mut links: Vec<Vec<usize>> = vec![Vec::new(); n];
    if n <= MOST {
        let gap = |i: usize, j: usize| {
            let (a, b) = (crossings[i].at, crossings[j].at);
            (a[0] - b[0]).hypot(a[1] - b[1])
        };
        let mut pairs: Vec<(usize, usize)> =
            (0..n).flat_map(|i| (i + 1..n).map(move |j| (i, j))).collect();
        pairs.sort_by(|&(a, b), &(c, d)| gap(a, b).total_cmp(&gap(c, d)));
        let mut root: Vec<usize> = (0..n).collect();
        fn top(root: &mut [usize], mut v: usize) -> usize {
            while root[v] != v {
                root[v] = root[root[v]];
                v = root[v];
            }
            v
        }
        for (i, j) in pairs {
            if gap(i, j) > longest {
                break;
            }
            if links[i].len() >= 2 || links[j].len() >= 2 {
                continue;
            }
            let (a, b) = (top(&mut root, i), top(&mut root, j));
            if a == b {
                continue;
            }
            // The second link of a crossing must leave on the other side of the bond.
            let side = |v: usize, w: usize| {
                let (p, q, x) = (crossings[v].at, crossings[w].at, crossings[v].across);
                (q[0] - p[0]) * x[0] + (q[1] - p[1]) * x[1] > 0.0
            };
            let turns =
                |v: usize, w: usize| links[v].first().is_some_and(|&u| side(v, u) == side(v, w));
            if turns(i, j) || turns(j, i) {
                continue;
            }
            let (p, q) = (crossings[i].at, crossings[j].at);
            if others.iter().any(|o| cross(p, q, o[0], o[1])) {
                continue;
            }
            root[a] = b;
            links[i].push(j);
            links[j].push(i);
        }
    }
    let mut seen = vec![false; n];
    let mut out = Vec::new();
    for start in (0..n).filter(|&v| links[v].len() < 2) {
        if seen[start] {
            continue;
        }
        let mut chain = vec![start];
        seen[start] = true;
        while let Some(&next) =
            links[*chain.last().expect("never empty")].iter().find(|&&w| !seen[w])
        {
            seen[next] = true;
            chain.push(next);
        }
        out.push(draw(crossings, &chain, overhang));
    }
    out
}

fn draw(crossings: &[Crossing], chain: &[usize], overhang: f64) -> String {
    // Each crossing's way across, turned to run along the chain.
    let n = chain.len();
    let point = |i: usize| crossings[chain[i]].at;
    let way = |i: usize| {
        let x = crossings[chain[i]].across;
        if n == 1 {
            return x;
        }
        let (p, q) = (point(i.saturating_sub(1)), point((i + 1).min(n - 1)));
        let along = (q[0] - p[0]) * x[0] + (q[1] - p[1]) * x[1];
        if along < 0.0 { [-x[0], -x[1]] } else { x }
    };
    let step = |p: [f64; 2], w: [f64; 2], d: f64| [p[0] + w[0] * d, p[1] + w[1] * d];
    let mut path = Path::new();
    path.move_to(step(point(0), way(0), -overhang));
    path.line_to(point(0));
    for i in 1..n {
        let (p, q) = (point(i - 1), point(i));
        let third = (q[0] - p[0]).hypot(q[1] - p[1]) / 3.0;
        path.curve_to(step(p, way(i - 1), third), step(q, way(i), -third), q);
    }
    path.line_to(step(point(n - 1), way(n - 1), overhang));
    path.into_text()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_row_of_bonds_is_cut_by_one_curve() {
        let crossings: Vec<Crossing> = (0..5)
            .map(|k| Crossing { at: [f64::from(k) * 10.0, 0.0], across: [1.0, 0.0] })
            .collect();
        assert_eq!(curves(&crossings, &[], 50.0, 4.0).len(), 1);
        // A bond that stays whole between two of them parts the curve.
        let wall = [[25.0, -9.0], [25.0, 9.0]];
        assert_eq!(curves(&crossings, &[wall], 50.0, 4.0).len(), 2);
    }
}
