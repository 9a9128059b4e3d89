//! What a network consists of, in numbers.

use super::graph::is_planar;
use super::{Network, TensorId};
use crate::tensor::Label;
use crate::tiling::Tiling;
use crate::tiling::geometry::Lengths;
use serde::Serialize;
use std::collections::BTreeMap;

/// Counts and shape of a network. As JSON it is what `lierne show --json` prints.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Survey {
    /// Its name.
    pub name: String,
    /// Tensors.
    pub tensors: usize,
    /// Labels that are summed over and stand twice or more.
    pub bonds: usize,
    /// Those of them that stand three times or more.
    pub hyperedges: usize,
    /// Boundary legs.
    pub boundary: usize,
    /// Bulk legs.
    pub bulk: usize,
    /// Labels on one tensor that are summed over.
    pub summed: usize,
    /// Tensors in each ring, for networks grown by rings.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub rings: Option<Vec<usize>>,
    /// Lengths of the boundary's cycles, where they are known: the outer boundary first.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub cycles_of_the_boundary: Option<Vec<u32>>,
    /// Each dimension and how many labels have it.
    pub dimensions: BTreeMap<usize, usize>,
    /// Largest dimension of a label.
    pub largest_leg: usize,
    /// log2 of the elements of the largest tensor.
    pub log2_largest_tensor: f64,
    /// Each number of bonds and how many tensors have it; a label that stands twice on one
    /// tensor counts twice.
    pub degrees: BTreeMap<usize, usize>,
    /// Connected parts.
    pub components: usize,
    /// Independent cycles: 0 for a forest.
    pub cycles: usize,
    /// Whether it can be drawn in the plane without crossings; nothing where it was not asked.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub planar: Option<bool>,
    /// Whether it can be drawn in a disk without crossings, the boundary legs ending on the
    /// rim in their order; nothing where it was not asked.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub planar_in_a_disk: Option<bool>,
    /// Blocks and how many tensors are made of each, by name and dimensions.
    pub blocks: BTreeMap<String, usize>,
    /// Lengths of the tiling, where it is one.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub tiling: Option<TilingSurvey>,
}

/// Lengths of a tiling, in units of the curvature radius; edges are 1 in the plane.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct TilingSurvey {
    /// Sides of a tile.
    pub polygon: u32,
    /// Tiles at a vertex.
    pub around: u32,
    /// `hyperbolic`, `euclidean` or `spherical`.
    pub curvature: &'static str,
    /// Length of an edge.
    pub edge: f64,
    /// From the middle of a tile to the middle of an edge.
    pub inradius: f64,
    /// From the middle of a tile to a vertex.
    pub circumradius: f64,
    /// Area of a tile.
    pub area: f64,
    /// Circumradius of the middle tile as it is drawn.
    pub vertex_drawn: f64,
    /// Inradius of the middle tile as it is drawn.
    pub edge_middle_drawn: f64,
    /// Factor by which a ring outgrows the last, by the vertex rule.
    pub growth_rate: f64,
}

impl Survey {
    /// Looks a network through. Time and memory linear in legs, but for a sort of the bonds.
    pub fn of(network: &Network) -> Self {
        Self {
            planar: Some(planar(network, false)),
            planar_in_a_disk: Some(planar(network, true)),
            ..Self::without_planarity(network)
        }
    }
    /// Like [`Self::of`], but does not ask for planarity, which takes most of the time and
    /// memory.
    pub fn without_planarity(network: &Network) -> Self {
        let mut dimensions = BTreeMap::new();
        let open = network.open_flags();
        let mut hyperedges = 0;
        let mut parts = Parts::new(network.tensors());
        // Each label joins its holders: as many independent joins as holders less one.
        let mut joins = 0usize;
        for l in (0..network.labels() as u32).map(Label::new) {
            *dimensions.entry(network.dim(l)).or_insert(0) += 1;
            let holders = network.holders(l);
            if holders.len() < 2 {
                continue;
            }
            hyperedges += usize::from(!open[l.index()] && holders.len() > 2);
            joins += holders.len() - 1;
            for pair in holders.windows(2) {
                parts.join(pair[0].index(), pair[1].index());
            }
        }
        let components = parts.count();
        let mut degrees = BTreeMap::new();
        let mut log2_largest_tensor = 0f64;
        let mut of_block = vec![0usize; network.blocks().len()];
        for t in network.tensor_ids() {
            let bonded = |l: &&Label| network.holders(**l).len() > 1;
            let degree = network.legs(t).iter().filter(bonded).count();
            *degrees.entry(degree).or_insert(0) += 1;
            let size = network.legs(t).iter().map(|&l| (network.dim(l) as f64).log2()).sum();
            log2_largest_tensor = log2_largest_tensor.max(size);
            of_block[network.block_number(t)] += 1;
        }
        let mut blocks = BTreeMap::new();
        for (block, count) in network.blocks().iter().zip(of_block) {
            *blocks.entry(block_words(block.name(), block.dims())).or_insert(0) += count;
        }
        let layout = network.layout();
        Self {
            name: network.name().to_owned(),
            tensors: network.tensors(),
            bonds: network.bonds(),
            hyperedges,
            boundary: network.boundary().len(),
            bulk: network.bulk().len(),
            summed: network.summed().len(),
            rings: layout.filter(|l| !l.ring.is_empty()).map(super::Layout::ring_sizes),
            cycles_of_the_boundary: layout
                .filter(|l| !l.cycles.is_empty())
                .map(|l| l.cycles.clone()),
            largest_leg: dimensions.keys().copied().max().unwrap_or(1),
            dimensions,
            log2_largest_tensor,
            degrees,
            components,
            cycles: joins + components - network.tensors(),
            planar: None,
            planar_in_a_disk: None,
            blocks,
            tiling: layout.and_then(|l| l.tiling).and_then(tiling),
        }
    }
}

fn block_words(name: &str, dims: &[usize]) -> String {
    match dims.first() {
        None => format!("{name}, no legs"),
        Some(d) if dims.iter().all(|e| e == d) => {
            let legs = if dims.len() == 1 { "leg" } else { "legs" };
            format!("{name}, {} {legs} of {d}", dims.len())
        }
        Some(_) => format!("{name}, legs of {dims:?}"),
    }
}

fn tiling((p, q): (u32, u32)) -> Option<TilingSurvey> {
    let tiling = Tiling::new(u64::from(p), u64::from(q)).ok()?;
    let lengths = Lengths::of(tiling);
    Some(TilingSurvey {
        polygon: p,
        around: q,
        curvature: lengths.curvature.word(),
        edge: lengths.edge,
        inradius: lengths.inradius,
        circumradius: lengths.circumradius,
        area: lengths.area,
        vertex_drawn: lengths.vertex_drawn,
        edge_middle_drawn: lengths.edge_middle_drawn,
        growth_rate: tiling.growth_rate(),
    })
}

/// Whether the network is planar: a label on three tensors or more is a vertex of its own. In
/// a disk, the boundary legs end on a wheel whose rim holds them in their order.
fn planar(network: &Network, in_a_disk: bool) -> bool {
    let mut vertices = network.tensors() as u32;
    let mut edges: Vec<(u32, u32)> = Vec::with_capacity(network.labels());
    let number = |t: TensorId| t.index() as u32;
    let open = network.open_flags();
    for l in (0..network.labels() as u32).map(Label::new) {
        match network.holders(l) {
            [a, b] if !open[l.index()] => edges.push((number(*a), number(*b))),
            [_] | [] => {}
            many => {
                edges.extend(many.iter().map(|&t| (number(t), vertices)));
                vertices += 1;
            }
        }
    }
    if in_a_disk && !network.boundary().is_empty() {
        let sites = network.boundary().len() as u32;
        let (hub, rim) = (vertices, vertices + 1);
        vertices += 1 + sites;
        for (k, &l) in network.boundary().iter().enumerate() {
            let k = k as u32;
            edges.extend(network.holders(l).iter().map(|&t| (number(t), rim + k)));
            edges.push((hub, rim + k));
            edges.push((rim + k, rim + (k + 1) % sites));
        }
    }
    is_planar(vertices as usize, &edges)
}

struct Parts {
    parent: Vec<u32>,
    count: usize,
}

impl Parts {
    fn new(n: usize) -> Self {
        Self { parent: (0..n as u32).collect(), count: n }
    }
    fn root(&mut self, mut v: usize) -> usize {
        while self.parent[v] as usize != v {
            self.parent[v] = self.parent[self.parent[v] as usize];
            v = self.parent[v] as usize;
        }
        v
    }
    fn join(&mut self, a: usize, b: usize) {
        let (a, b) = (self.root(a), self.root(b));
        if a != b {
            self.parent[a.max(b)] = a.min(b) as u32;
            self.count -= 1;
        }
    }
    fn count(&self) -> usize {
        self.count
    }
}
