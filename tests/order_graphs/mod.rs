//! Graphs and networks that tests and benches of orders share.
#![allow(dead_code, missing_docs)]

use lierne::order::Shape;
use lierne::tensor::Label;
use lierne::tiling;
use rand::Rng;
use rand::seq::SliceRandom;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::SeedableRng;

pub mod bench_set;

pub type Edges = Vec<(usize, usize)>;

/// Tensors on the vertices, bonds of one size on the edges, nothing open.
pub fn bonds(n: usize, edges: &[(usize, usize)], size: u64) -> Shape {
    let mut tensors = vec![Vec::new(); n];
    for (l, &(a, b)) in edges.iter().enumerate() {
        tensors[a].push(Label::new(l as u32));
        tensors[b].push(Label::new(l as u32));
    }
    Shape::new(vec![size; edges.len()], tensors, Vec::new()).expect("a valid shape")
}

/// Labels of size 2 on the vertices, a two-leg factor on each edge.
pub fn factors(n: usize, edges: &[(usize, usize)]) -> Shape {
    let l = |v: usize| Label::new(v as u32);
    let tensors = edges.iter().map(|&(a, b)| vec![l(a), l(b)]).collect();
    Shape::new(vec![2; n], tensors, Vec::new()).expect("a valid shape")
}

pub fn complete(n: usize) -> (usize, Edges) {
    (n, (0..n).flat_map(|a| (a + 1..n).map(move |b| (a, b))).collect())
}

pub fn bipartite(a: usize, b: usize) -> (usize, Edges) {
    (a + b, (0..a).flat_map(|x| (0..b).map(move |y| (x, a + y))).collect())
}

/// A lattice of these extents, periodic or not; an extent of 2 is never doubled.
pub fn lattice(extents: &[usize], periodic: bool) -> (usize, Edges) {
    let n: usize = extents.iter().product();
    let mut edges = Vec::new();
    for v in 0..n {
        let mut stride = 1;
        for &e in extents {
            let x = v / stride % e;
            if x + 1 < e {
                edges.push((v, v + stride));
            } else if periodic && e > 2 {
                edges.push((v, v - x * stride));
            }
            stride *= e;
        }
    }
    (n, edges)
}

/// A cubic graph from its chord lengths round a Hamiltonian cycle, repeated.
pub fn chords(lengths: &[i64], times: usize) -> (usize, Edges) {
    let n = lengths.len() * times;
    let mut edges: Edges = (0..n).map(|v| (v.min((v + 1) % n), v.max((v + 1) % n))).collect();
    for v in 0..n {
        let w = (v as i64 + lengths[v % lengths.len()]).rem_euclid(n as i64) as usize;
        if v < w {
            edges.push((v, w));
        }
    }
    (n, edges)
}

pub fn petersen() -> (usize, Edges) {
    let mut edges = Vec::new();
    for i in 0..5 {
        edges.push((i, (i + 1) % 5));
        edges.push((i, 5 + i));
        edges.push((5 + i, 5 + (i + 2) % 5));
    }
    (10, edges)
}

pub fn octahedron() -> (usize, Edges) {
    let (n, edges) = complete(6);
    (n, edges.into_iter().filter(|&(a, b)| a + 3 != b).collect())
}

pub fn icosahedron() -> (usize, Edges) {
    let mut edges = Vec::new();
    for i in 0..5 {
        let (up, down) = (1 + i, 6 + i);
        edges.push((0, up));
        edges.push((11, down));
        edges.push((up, 1 + (i + 1) % 5));
        edges.push((down, 6 + (i + 1) % 5));
        edges.push((up, down));
        edges.push((up, 6 + (i + 1) % 5));
    }
    (12, edges)
}

/// A random graph in which every vertex has `degree` neighbours, no loops, no double edges;
/// pairings are drawn until one is simple and connected.
pub fn regular(n: usize, degree: usize, seed: u64) -> (usize, Edges) {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    loop {
        let mut stubs: Vec<usize> = (0..n * degree).map(|s| s / degree).collect();
        stubs.shuffle(&mut rng);
        let mut edges: Edges = stubs.chunks(2).map(|p| (p[0].min(p[1]), p[0].max(p[1]))).collect();
        edges.sort_unstable();
        let simple = edges.iter().all(|e| e.0 != e.1) && edges.windows(2).all(|w| w[0] != w[1]);
        if simple && connected(n, &edges) {
            return (n, edges);
        }
    }
}

pub fn connected(n: usize, edges: &[(usize, usize)]) -> bool {
    let mut near = vec![Vec::new(); n];
    for &(a, b) in edges {
        near[a].push(b);
        near[b].push(a);
    }
    let (mut seen, mut todo, mut count) = (vec![false; n], vec![0], 0);
    while let Some(v) = todo.pop() {
        if !std::mem::replace(&mut seen[v], true) {
            count += 1;
            todo.extend(&near[v]);
        }
    }
    count == n
}

/// A random network of `n` tensors: a random tree and `extra` further labels on two tensors or
/// three, sizes 2 to `largest`, some labels open.
pub fn random(n: usize, extra: usize, largest: u64, seed: u64) -> Shape {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let mut tensors = vec![Vec::new(); n];
    let mut sizes = Vec::new();
    let mut open = Vec::new();
    for t in 1..n {
        let l = Label::new(sizes.len() as u32);
        sizes.push(rng.random_range(2..=largest));
        tensors[t].push(l);
        tensors[rng.random_range(0..t)].push(l);
    }
    for _ in 0..extra {
        let l = Label::new(sizes.len() as u32);
        sizes.push(rng.random_range(2..=largest));
        let held = if rng.random::<f64>() < 0.2 { 3 } else { 2 };
        for _ in 0..held {
            tensors[rng.random_range(0..n)].push(l);
        }
        if rng.random::<f64>() < 0.15 {
            open.push(l);
        }
    }
    for t in &mut tensors {
        if rng.random::<f64>() < 0.2 {
            let l = Label::new(sizes.len() as u32);
            sizes.push(rng.random_range(2..=largest));
            t.push(l);
            open.push(l);
        }
    }
    Shape::new(sizes, tensors, open).expect("a valid shape")
}

/// A `.gr` file: vertices and edges.
pub fn read_gr(text: &str) -> (usize, Edges) {
    let (mut n, mut edges) = (0, Vec::new());
    for line in text.lines() {
        let words: Vec<&str> = line.split_whitespace().collect();
        match words.as_slice() {
            ["p", "tw", vertices, _] => n = vertices.parse().expect("a number of vertices"),
            [a, b] => {
                let end = |w: &str| w.parse::<usize>().expect("a vertex") - 1;
                if end(a) != end(b) {
                    edges.push((end(a), end(b)));
                }
            }
            _ => {}
        }
    }
    (n, edges)
}

/// Name, graph, log2 of the largest intermediate and fewest multiply-adds at bond size 2:
/// computed by an independent dynamic programme over all subsets, in Python (from the project's
/// table of checks).
pub fn named() -> Vec<(&'static str, (usize, Edges), f64, u128)> {
    vec![
        ("K33", bipartite(3, 3), 4.0, 168),
        ("octahedron", octahedron(), 6.0, 784),
        ("Q3", lattice(&[2, 2, 2], false), 4.0, 264),
        ("Wagner", chords(&[4], 8), 4.0, 264),
        ("K44", bipartite(4, 4), 8.0, 2576),
        ("grid 3x3", lattice(&[3, 3], false), 4.0, 196),
        ("torus 3x3", lattice(&[3, 3], true), 6.0, 1680),
        ("Petersen", petersen(), 5.0, 520),
        ("Frucht", chords(&[-5, -2, -4, 2, 5, -2, 2, 5, -2, -5, 4, 2], 1), 4.0, 328),
        ("icosahedron", icosahedron(), 10.0, 46112),
        ("Heawood", chords(&[5, -5], 7), 6.0, 1192),
        ("torus 3x5", lattice(&[3, 5], true), 6.0, 3472),
        ("grid 4x4", lattice(&[4, 4], false), 4.0, 580),
        ("Q4", lattice(&[4, 4], true), 8.0, 13328),
    ]
}

/// A random tree of `n` vertices, each joined to one of the eight before it, and `loops` more
/// edges between vertices that are near in number.
pub fn looped_tree(n: usize, loops: usize, seed: u64) -> (usize, Edges) {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let mut edges: Edges = (1..n).map(|v| (v - 1 - rng.random_range(0..v.min(8)), v)).collect();
    for _ in 0..loops {
        let a = rng.random_range(0..n - 12);
        edges.push((a, a + rng.random_range(1..12)));
    }
    (n, edges)
}

/// A patch of {p,q} with at least `tiles` tiles, grown by shared vertices; its free sides are
/// open, or left out.
pub fn tiling(polygon: u64, around: u64, tiles: usize, open: bool) -> Shape {
    let rule = tiling::Rule::Vertex;
    let kind = tiling::Tiling::new(polygon, around).expect("a tiling");
    let patch = (0..60)
        .map(|rings| tiling::Growth::regular(kind, rings, rule))
        .map(|g| tiling::grow(&g, 4_000_000).expect("a patch"))
        .find(|p| p.tiles() >= tiles)
        .expect("rings enough");
    let (mut tensors, mut out) = (vec![Vec::new(); patch.tiles()], Vec::new());
    let mut labels = 0;
    for side in 0..patch.sides() {
        let tile = patch.side(side).tile as usize;
        match patch.glued(side) {
            Some(other) if other > side => {
                let l = Label::new(labels);
                tensors[tile].push(l);
                tensors[patch.side(other).tile as usize].push(l);
                labels += 1;
            }
            None if open => {
                let l = Label::new(labels);
                tensors[tile].push(l);
                out.push(l);
                labels += 1;
            }
            _ => {}
        }
    }
    Shape::new(vec![2; labels as usize], tensors, out).expect("a valid shape")
}
