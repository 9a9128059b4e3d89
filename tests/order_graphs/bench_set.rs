//! The recipes of `networks/bench/`: networks to compare orders on.

use super::{Edges, factors, lattice, looped_tree, read_gr, regular};
use lierne::order::Shape;
use lierne::tensor::Label;
use lierne::tiling;
use rand::Rng;
use rand_chacha::ChaCha8Rng;
use rand_chacha::rand_core::SeedableRng;
use std::fmt::Write;

/// A network as its file holds it.
#[derive(Debug, Clone)]
pub struct Bench {
    pub name: String,
    pub words: String,
    pub dimension: u64,
    pub block: &'static str,
    /// One block a tensor; the common one where there is none.
    pub blocks: Vec<&'static str>,
    pub tensors: Vec<Vec<u32>>,
    pub labels: u32,
    pub open: Vec<u32>,
}

impl Bench {
    fn of_graph(name: &str, words: &str, dimension: u64, (n, edges): (usize, Edges)) -> Self {
        let mut b = Self::empty(name, words, dimension, "perfect");
        b.tensors = vec![Vec::new(); n];
        for (x, y) in edges {
            let l = b.label();
            b.tensors[x].push(l);
            b.tensors[y].push(l);
        }
        b
    }
    fn empty(name: &str, words: &str, dimension: u64, block: &'static str) -> Self {
        Self {
            name: name.into(),
            words: words.into(),
            dimension,
            block,
            blocks: Vec::new(),
            tensors: Vec::new(),
            labels: 0,
            open: Vec::new(),
        }
    }
    fn label(&mut self) -> u32 {
        self.labels += 1;
        self.labels - 1
    }
    pub fn shape(&self) -> Shape {
        let l = |s: &Vec<u32>| s.iter().map(|&n| Label::new(n)).collect::<Vec<_>>();
        Shape::new(
            vec![self.dimension; self.labels as usize],
            self.tensors.iter().map(l).collect(),
            l(&self.open),
        )
        .expect("a valid shape")
    }
    /// The file. Labels are named in the order in which tensors first hold them, as a
    /// reader numbers them.
    pub fn json(&self) -> String {
        let list = |s: &[u32]| s.iter().map(|l| format!("\"x{l}\"")).collect::<Vec<_>>().join(",");
        let mut text = format!(
            "{{\"lierne\":1,\"name\":\"{}\",\"dimension\":{},\"boundary\":[{}],\"bulk\":[],\"summed\":[],\"tensor\":[\n",
            self.words,
            self.dimension,
            list(&self.open)
        );
        for (t, legs) in self.tensors.iter().enumerate() {
            let block = self.blocks.get(t).copied().unwrap_or(self.block);
            let end = if t + 1 == self.tensors.len() { "\n" } else { ",\n" };
            let kind = if block == "values" {
                // 0 and 1 may not both be 1: counts independent sets.
                "\"values\":[1,1,1,0]".to_owned()
            } else {
                format!("\"block\":\"{block}\"")
            };
            let _ = write!(text, "{{\"legs\":[{}],{kind}}}{end}", list(legs));
        }
        text.push_str("]}\n");
        text
    }
}

/// A patch whose open sides all stay, or only those of a region of `kept` sites.
fn patch(name: &str, words: &str, p: u64, q: u64, rings: u32, kept: Option<usize>) -> Bench {
    let kind = tiling::Tiling::new(p, q).expect("a tiling");
    let growth = tiling::Growth::regular(kind, rings, tiling::Rule::Vertex);
    let patch = tiling::grow(&growth, 1_000_000).expect("a patch");
    let mut b = Bench::empty(name, words, 3, "perfect");
    b.tensors = vec![Vec::new(); patch.tiles()];
    let mut label = vec![u32::MAX; patch.sides()];
    for side in 0..patch.sides() {
        let other = patch.glued(side);
        label[side] = match other {
            Some(o) if o < side => label[o],
            _ => b.label(),
        };
        b.tensors[patch.side(side).tile as usize].push(label[side]);
    }
    for (site, &side) in patch.boundary_numbers().iter().enumerate() {
        if kept.is_none_or(|k| site < k) {
            b.open.push(label[side as usize]);
        } else {
            // Outside the region a site is fixed to a state.
            b.tensors.push(vec![label[side as usize]]);
            b.blocks.resize(patch.tiles(), "perfect");
            b.blocks.push("basis");
        }
    }
    b
}

/// ⟨ψ|ψ⟩ of a patch with part of its boundary traced between the two layers, the rest open on both:
/// the reduced state of a region.
fn doubled(name: &str, words: &str, p: u64, q: u64, rings: u32, kept: usize) -> Bench {
    let one = patch(name, words, p, q, rings, None);
    let mut b = one.clone();
    let traced: Vec<u32> = one.open[kept..].to_vec();
    let image: Vec<u32> =
        (0..one.labels).map(|l| if traced.contains(&l) { l } else { b.label() }).collect();
    b.tensors.extend(one.tensors.iter().map(|t| t.iter().map(|&l| image[l as usize]).collect()));
    let inner = &one.open[..kept];
    b.open = inner.iter().copied().chain(inner.iter().map(|&l| image[l as usize])).collect();
    b
}

/// Two-leg-in two-leg-out gates on a grid, four patterns of pairs in turn, one-leg states at both
/// ends.
fn circuit(name: &str, words: &str, rows: usize, columns: usize, depth: usize, seed: u64) -> Bench {
    let mut b = Bench::empty(name, words, 2, "random-unitary");
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let mut wire: Vec<u32> = (0..rows * columns)
        .map(|_| {
            let l = b.label();
            b.tensors.push(vec![l]);
            b.blocks.push("plus");
            l
        })
        .collect();
    for layer in 0..depth {
        let (down, shift) = (layer % 2 == 1, layer / 2 % 2);
        for r in 0..rows {
            for c in 0..columns {
                let (at, next, along) =
                    if down { (r, r + 1 < rows, r) } else { (c, c + 1 < columns, c) };
                // A gate in twelve is left out, so that no two layers are alike.
                if along % 2 != shift || !next || rng.random_range(0..12) == 0 {
                    continue;
                }
                let _ = at;
                let x = r * columns + c;
                let y = if down { x + columns } else { x + 1 };
                let (p, q) = (b.label(), b.label());
                b.tensors.push(vec![wire[x], wire[y], p, q]);
                b.blocks.push("random-unitary");
                wire[x] = p;
                wire[y] = q;
            }
        }
    }
    for l in wire {
        b.tensors.push(vec![l]);
        b.blocks.push("basis");
    }
    b
}

fn of_gr(instance: &str) -> Bench {
    let path = format!("{}/tests/data/treewidth/{instance}.gr", env!("CARGO_MANIFEST_DIR"));
    let (n, edges) = read_gr(&std::fs::read_to_string(path).expect("a graph"));
    let shape = factors(n, &edges);
    let words = format!("independent sets of {instance}");
    let mut b = Bench::empty(&format!("factors-{instance}"), &words, 2, "values");
    b.labels = n as u32;
    b.tensors = shape.tensors.iter().map(|t| t.iter().map(|l| l.number()).collect()).collect();
    b
}

/// All of them.
pub fn all() -> Vec<Bench> {
    let grid = |e: &[usize]| lattice(e, false);
    let torus = |e: &[usize]| lattice(e, true);
    let mut set = vec![
        patch("tiling-45-region", "squares, five at a vertex, region of 8 sites", 4, 5, 2, Some(8)),
        patch(
            "tiling-54-region",
            "pentagons, four at a vertex, region of 10 sites",
            5,
            4,
            2,
            Some(10),
        ),
        patch("tiling-45-state", "squares, five at a vertex, all sites open", 4, 5, 1, None),
        Bench::of_graph("lattice-10x10", "square lattice", 3, grid(&[10, 10])),
        Bench::of_graph("lattice-16x16", "square lattice", 2, grid(&[16, 16])),
        Bench::of_graph("lattice-5x5x5", "cubic lattice", 2, grid(&[5, 5, 5])),
        Bench::of_graph("torus-8x8", "periodic square lattice", 2, torus(&[8, 8])),
        Bench::of_graph("torus-10x10", "periodic square lattice", 2, torus(&[10, 10])),
        Bench::of_graph("torus-4x4x4", "periodic cubic lattice", 2, torus(&[4, 4, 4])),
        Bench::of_graph("regular-100", "random cubic graph", 2, regular(100, 3, 0)),
        Bench::of_graph("regular-220", "random cubic graph", 2, regular(220, 3, 1)),
        Bench::of_graph("regular-60-4", "random graph of degree 4", 3, regular(60, 4, 2)),
        Bench::of_graph("looped-tree-400", "tree with loops", 2, looped_tree(400, 120, 3)),
        doubled("doubled-45", "reduced state of 6 sites, squares, five at a vertex", 4, 5, 1, 6),
        doubled("doubled-54", "reduced state of 6 sites, pentagons, four at a vertex", 5, 4, 1, 6),
        doubled(
            "doubled-45-wide",
            "reduced state of 8 sites, squares, five at a vertex",
            4,
            5,
            2,
            8,
        ),
        circuit("circuit-4x5-12", "gates on a 4 by 5 grid, depth 12", 4, 5, 12, 1),
        circuit("circuit-6x6-16", "gates on a 6 by 6 grid, depth 16", 6, 6, 16, 2),
        circuit("circuit-7x7-24", "gates on a 7 by 7 grid, depth 24", 7, 7, 24, 3),
    ];
    set.extend(["ex013", "ex024", "ex062", "ex063", "ex147"].map(of_gr));
    // Vertices without an edge would be tensors without legs.
    for b in &mut set {
        let copies = ["lattice-16", "lattice-5x5x5", "looped", "torus"];
        if copies.iter().any(|c| b.name.starts_with(c)) {
            b.block = "copy";
        }
    }
    for b in &mut set {
        if b.block == "copy" {
            // A copy has two legs at least.
            b.blocks =
                b.tensors.iter().map(|t| if t.len() == 1 { "plus" } else { "copy" }).collect();
        }
    }
    set
}
