//! Faces of a drawing without crossings: the tiles' corners of a network that is no tiling.

use super::graph::Graph;

/// The faces of a network drawn in the disk, its sites joined in a ring round it.
///
/// Darts: edge `k` is dart `2k` from its first end to its second and dart `2k + 1` back;
/// edges are the graph's, then one from each site's node to the site, then the rim.
#[derive(Debug)]
pub(super) struct Faces {
    /// The face to the left of each dart.
    pub(super) left: Vec<usize>,
    /// Darts that leave each vertex (nodes, then sites), counter-clockwise.
    pub(super) around: Vec<Vec<usize>>,
    /// The vertices of each face, counter-clockwise about it.
    pub(super) vertices: Vec<Vec<usize>>,
    /// The face outside the rim.
    pub(super) outside: usize,
}

impl Faces {
    /// The faces of straight lines between these points; none where the drawing is not that
    /// of a connected plane graph. `at` holds nodes, then sites, sites on a circle in
    /// counter-clockwise order.
    pub(super) fn of(graph: &Graph, at: &[[f64; 2]]) -> Option<Self> {
        let n = graph.sites.len();
        if n < 3 {
            return None;
        }
        let mut ends: Vec<[usize; 2]> = graph.edges.iter().map(|e| [e.a, e.b]).collect();
        ends.extend(graph.sites.iter().enumerate().map(|(s, &v)| [v, graph.nodes + s]));
        let rim = ends.len();
        ends.extend((0..n).map(|s| [graph.nodes + s, graph.nodes + (s + 1) % n]));
        let vertices = graph.nodes + n;
        let mut around: Vec<Vec<usize>> = vec![Vec::new(); vertices];
        for (k, e) in ends.iter().enumerate() {
            around[e[0]].push(2 * k);
            around[e[1]].push(2 * k + 1);
        }
        for (v, darts) in around.iter_mut().enumerate() {
            if v >= graph.nodes {
                // Round a site on the rim: the next site, inwards, the site before.
                let s = v - graph.nodes;
                *darts =
                    vec![2 * (rim + s), 2 * (rim - n + s) + 1, 2 * (rim + (s + n - 1) % n) + 1];
                continue;
            }
            let angle = |d: usize| {
                let to = ends[d / 2][1 - d % 2];
                (at[to][1] - at[v][1]).atan2(at[to][0] - at[v][0])
            };
            // Bonds between the same two nodes lie side by side: ascending at one end,
            // descending at the other.
            let twin = |d: usize| if d.is_multiple_of(2) { d as isize } else { -(d as isize) };
            darts.sort_by(|&a, &b| angle(a).total_cmp(&angle(b)).then(twin(a).cmp(&twin(b))));
        }
        let mut place = vec![0; 2 * ends.len()];
        for darts in &around {
            for (i, &d) in darts.iter().enumerate() {
                place[d] = i;
            }
        }
        let mut left = vec![usize::MAX; 2 * ends.len()];
        let mut faces: Vec<Vec<usize>> = Vec::new();
        for start in 0..left.len() {
            if left[start] != usize::MAX {
                continue;
            }
            let mut face = Vec::new();
            let mut d = start;
            while left[d] == usize::MAX {
                left[d] = faces.len();
                face.push(ends[d / 2][d % 2]);
                let v = ends[d / 2][1 - d % 2];
                let back = d ^ 1;
                let turn = &around[v];
                d = turn[(place[back] + turn.len() - 1) % turn.len()];
            }
            faces.push(face);
        }
        let plane = vertices + faces.len() == ends.len() + 2;
        let outside = left[2 * rim + 1];
        let rim_clean =
            (0..n).all(|s| left[2 * (rim + s) + 1] == outside) && faces[outside].len() == n;
        (plane && rim_clean).then_some(Self { left, around, vertices: faces, outside })
    }
    /// The dart from a site's node to the site.
    pub(super) fn site_dart(graph: &Graph, s: usize) -> usize {
        2 * (graph.edges.len() + s)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::picture::draw_graph::tests::wheel;

    /// A loop of n tensors with a leg each: n faces between neighbouring legs, one inside,
    /// one outside.
    #[test]
    fn a_loop_has_its_faces() {
        for n in 3..8 {
            let network = wheel(n);
            let graph = Graph::of(&network);
            let at: Vec<[f64; 2]> = [0.5, 1.0]
                .iter()
                .flat_map(|r| {
                    (0..n).map(move |k| {
                        let a = std::f64::consts::TAU * k as f64 / n as f64;
                        [r * a.cos(), r * a.sin()]
                    })
                })
                .collect();
            let faces = Faces::of(&graph, &at).expect("a plane drawing");
            assert_eq!(faces.vertices.len(), n + 2);
            let mut sizes: Vec<usize> = faces.vertices.iter().map(Vec::len).collect();
            sizes.sort_unstable();
            let mut wanted = vec![4; n];
            wanted.extend([n, n]);
            wanted.sort_unstable();
            assert_eq!(sizes, wanted);
        }
    }
}
