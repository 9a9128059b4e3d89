//! Multilevel bisection of a weighted hypergraph.
//!
//! Own and pure Rust: the established partitioners are C or C++ libraries, and the default
//! build is Rust alone. Coarsening by heavy-edge matching, several grown first
//! halves, and refinement by single moves with hill climbing on every level (the scheme of
//! Proc. 19th Design Automation Conf. 175 (1982) and IEEE Trans. VLSI 7, 69 (1999)).

use rand::Rng;
use rand::seq::SliceRandom;
use rand_chacha::ChaCha8Rng;
use std::collections::{BTreeMap, BinaryHeap};

/// Edges with more pins than this do not guide the coarsening.
const LONG: usize = 40;
/// Coarsening ends at so many vertices.
const COARSE: usize = 48;
/// First halves grown on the coarsest level.
const STARTS: usize = 6;
/// Moves without a new best cut after which a pass ends.
const PATIENCE: usize = 120;

/// A hypergraph.
#[derive(Debug, Clone, Default)]
pub(crate) struct Hypergraph {
    /// Weight of each vertex.
    pub vertices: Vec<f64>,
    /// Pins (distinct vertices) and weight of each edge.
    pub edges: Vec<(Vec<u32>, f64)>,
}

struct Level {
    graph: Hypergraph,
    edges_of: Vec<Vec<u32>>,
}

impl Level {
    fn new(graph: Hypergraph) -> Self {
        let mut edges_of = vec![Vec::new(); graph.vertices.len()];
        for (e, (pins, _)) in graph.edges.iter().enumerate() {
            for &v in pins {
                edges_of[v as usize].push(e as u32);
            }
        }
        Self { graph, edges_of }
    }
    /// Matches neighbours and merges them; the map from fine to coarse vertices.
    fn coarsen(&self, heaviest: f64, rng: &mut ChaCha8Rng) -> (Hypergraph, Vec<u32>) {
        let n = self.graph.vertices.len();
        let mut order: Vec<u32> = (0..n as u32).collect();
        order.shuffle(rng);
        let mut mate = vec![u32::MAX; n];
        let mut rating = vec![0.0f64; n];
        let mut near = Vec::new();
        for &v in &order {
            if mate[v as usize] != u32::MAX {
                continue;
            }
            for &e in &self.edges_of[v as usize] {
                let (pins, w) = &self.graph.edges[e as usize];
                if pins.len() > LONG {
                    continue;
                }
                for &u in pins {
                    if u != v && mate[u as usize] == u32::MAX {
                        if rating[u as usize] == 0.0 {
                            near.push(u);
                        }
                        rating[u as usize] += w / (pins.len() - 1) as f64;
                    }
                }
            }
            let own = self.graph.vertices[v as usize];
            let mut best = (0.0, v);
            for &u in &near {
                let w = self.graph.vertices[u as usize];
                let r = rating[u as usize] / (own * w).sqrt();
                if own + w <= heaviest && (r > best.0 || (r == best.0 && u < best.1)) {
                    best = (r, u);
                }
                rating[u as usize] = 0.0;
            }
            near.clear();
            mate[v as usize] = best.1;
            mate[best.1 as usize] = v;
        }
        let mut map = vec![u32::MAX; n];
        let mut vertices = Vec::new();
        for v in 0..n {
            if map[v] == u32::MAX {
                let c = vertices.len() as u32;
                let m = mate[v] as usize;
                map[v] = c;
                map[m] = c;
                let w = self.graph.vertices[v];
                vertices.push(if m == v { w } else { w + self.graph.vertices[m] });
            }
        }
        let mut merged: BTreeMap<Vec<u32>, f64> = BTreeMap::new();
        for (pins, w) in &self.graph.edges {
            let mut p: Vec<u32> = pins.iter().map(|&v| map[v as usize]).collect();
            p.sort_unstable();
            p.dedup();
            if p.len() > 1 {
                *merged.entry(p).or_insert(0.0) += w;
            }
        }
        (Hypergraph { vertices, edges: merged.into_iter().collect() }, map)
    }
    fn cut(&self, side: &[bool]) -> f64 {
        self.graph
            .edges
            .iter()
            .filter(|(pins, _)| {
                let first = side[pins[0] as usize];
                pins.iter().any(|&v| side[v as usize] != first)
            })
            .map(|(_, w)| w)
            .sum()
    }
    /// Grows a half from a random vertex on.
    fn grow(&self, rng: &mut ChaCha8Rng) -> Vec<bool> {
        let n = self.graph.vertices.len();
        let total: f64 = self.graph.vertices.iter().sum();
        let mut side = vec![false; n];
        let mut pull = vec![0.0f64; n];
        let mut v = rng.random_range(0..n);
        let mut weight = 0.0;
        loop {
            side[v] = true;
            weight += self.graph.vertices[v];
            if weight * 2.0 >= total {
                return side;
            }
            for &e in &self.edges_of[v] {
                let (pins, w) = &self.graph.edges[e as usize];
                for &u in pins {
                    pull[u as usize] += w / pins.len() as f64;
                }
            }
            let next = (0..n)
                .filter(|&u| !side[u])
                .max_by(|&a, &b| pull[a].total_cmp(&pull[b]).then(b.cmp(&a)));
            match next {
                Some(u) => v = u,
                None => return side,
            }
        }
    }
    /// Passes of single moves, each rolled back to its best state.
    fn refine(&self, side: &mut [bool], most: f64) {
        for _ in 0..8 {
            if !self.refine_once(side, most) {
                break;
            }
        }
    }
    fn gain(&self, v: usize, side: &[bool], count: &[[u32; 2]]) -> f64 {
        let own = usize::from(side[v]);
        self.edges_of[v]
            .iter()
            .map(|&e| {
                let c = count[e as usize];
                let w = self.graph.edges[e as usize].1;
                if c[own] == 1 {
                    w
                } else if c[1 - own] == 0 {
                    -w
                } else {
                    0.0
                }
            })
            .sum()
    }
    fn refine_once(&self, side: &mut [bool], most: f64) -> bool {
        let n = self.graph.vertices.len();
        let mut count = vec![[0u32; 2]; self.graph.edges.len()];
        for (c, (pins, _)) in count.iter_mut().zip(&self.graph.edges) {
            for &v in pins {
                c[usize::from(side[v as usize])] += 1;
            }
        }
        let mut weight = [0.0; 2];
        for v in 0..n {
            weight[usize::from(side[v])] += self.graph.vertices[v];
        }
        let mut gains: Vec<f64> = (0..n).map(|v| self.gain(v, side, &count)).collect();
        let mut heap: BinaryHeap<(Gain, u32)> = BinaryHeap::new();
        for (v, &gain) in gains.iter().enumerate() {
            let cut = self.edges_of[v].iter().any(|&e| {
                let c = count[e as usize];
                c[0] > 0 && c[1] > 0
            });
            if cut || n <= 2 * COARSE {
                heap.push((Gain(gain), v as u32));
            }
        }
        let mut locked = vec![false; n];
        let mut moved: Vec<u32> = Vec::new();
        let mut stale: Vec<u32> = Vec::new();
        let (mut sum, mut best, mut best_at) = (0.0, 1e-9, 0);
        let over = |w: &[f64; 2]| (w[0].max(w[1]) - most).max(0.0);
        let mut best_over = over(&weight);
        while let Some((Gain(g), v)) = heap.pop() {
            let v = v as usize;
            if locked[v] || g != gains[v] {
                continue;
            }
            let own = usize::from(side[v]);
            let w = self.graph.vertices[v];
            let too_heavy = weight[1 - own] + w > most;
            if too_heavy && weight[1 - own] + w > weight[own] {
                continue;
            }
            locked[v] = true;
            side[v] = !side[v];
            weight[own] -= w;
            weight[1 - own] += w;
            sum += g;
            moved.push(v as u32);
            let now_over = over(&weight);
            if now_over < best_over - 1e-9 || (now_over <= best_over + 1e-9 && sum > best) {
                best = sum;
                best_over = now_over;
                best_at = moved.len();
            }
            if moved.len() > best_at + PATIENCE {
                break;
            }
            stale.clear();
            for &e in &self.edges_of[v] {
                let c = &mut count[e as usize];
                let before = *c;
                c[own] -= 1;
                c[1 - own] += 1;
                // Only an edge that is or was nearly on one side changes gains.
                if before[own] <= 2 || before[1 - own] <= 1 {
                    stale.extend(
                        self.graph.edges[e as usize].0.iter().filter(|&&u| !locked[u as usize]),
                    );
                }
            }
            for &u in &stale {
                let g = self.gain(u as usize, side, &count);
                if g != gains[u as usize] {
                    gains[u as usize] = g;
                    heap.push((Gain(g), u));
                }
            }
        }
        for &v in &moved[best_at..] {
            side[v as usize] = !side[v as usize];
        }
        best_at > 0
    }
}

#[derive(PartialEq)]
struct Gain(f64);
impl Eq for Gain {}
impl PartialOrd for Gain {
    fn partial_cmp(&self, other: &Self) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}
impl Ord for Gain {
    fn cmp(&self, other: &Self) -> std::cmp::Ordering {
        self.0.total_cmp(&other.0)
    }
}

/// Two sides, neither heavier than (1/2 + `slack`) of the whole (or the heaviest vertex), with
/// little weight of edges between them. Heuristic. Both sides have a vertex if there are two.
pub(crate) fn bisect(graph: Hypergraph, slack: f64, rng: &mut ChaCha8Rng) -> Vec<bool> {
    let total: f64 = graph.vertices.iter().sum();
    let most = total * (0.5 + slack);
    let mut levels = vec![Level::new(graph)];
    let mut maps: Vec<Vec<u32>> = Vec::new();
    loop {
        let top = &levels[levels.len() - 1];
        let n = top.graph.vertices.len();
        if n <= COARSE {
            break;
        }
        let (coarse, map) = top.coarsen(total / 12.0, rng);
        if coarse.vertices.len() * 20 > n * 19 {
            break;
        }
        levels.push(Level::new(coarse));
        maps.push(map);
    }
    let top = &levels[levels.len() - 1];
    let mut side = Vec::new();
    let mut least = f64::INFINITY;
    for _ in 0..STARTS {
        let mut s = top.grow(rng);
        top.refine(&mut s, most);
        let cut = top.cut(&s);
        if cut < least {
            least = cut;
            side = s;
        }
    }
    for (level, map) in levels.iter().zip(&maps).rev() {
        side = map.iter().map(|&c| side[c as usize]).collect();
        level.refine(&mut side, most);
    }
    if side.iter().all(|&s| s == side[0]) {
        let half = side.len() / 2;
        side.iter_mut().take(half.max(1)).for_each(|s| *s = !*s);
    }
    side
}
