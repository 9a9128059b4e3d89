//! The line graph of a net: labels as vertices, joined where a tensor holds both.

use super::net::Net;

/// A graph on 0..n by rows of bits.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Graph {
    pub n: usize,
    pub words: usize,
    rows: Vec<u64>,
}

impl Graph {
    /// No edges.
    pub fn empty(n: usize) -> Self {
        let words = n.div_ceil(64).max(1);
        Self { n, words, rows: vec![0; n * words] }
    }
    /// Neighbours of v as bits.
    pub fn row(&self, v: usize) -> &[u64] {
        &self.rows[v * self.words..(v + 1) * self.words]
    }
    /// Joins u and v (u ≠ v).
    pub fn join(&mut self, u: usize, v: usize) {
        self.rows[u * self.words + v / 64] |= 1 << (v % 64);
        self.rows[v * self.words + u / 64] |= 1 << (u % 64);
    }
    /// Number of neighbours.
    pub fn degree(&self, v: usize) -> usize {
        self.row(v).iter().map(|w| w.count_ones() as usize).sum()
    }
    /// The neighbours in ascending order.
    pub fn neighbours(&self, v: usize) -> Vec<usize> {
        members(self.row(v))
    }
    /// Joins all neighbours of v with one another and takes v away; returns how many there
    /// were. `row` is scratch space.
    pub fn eliminate(&mut self, v: usize, row: &mut Vec<u64>) -> usize {
        let w = self.words;
        row.clear();
        row.extend_from_slice(self.row(v));
        let mut degree = 0;
        for (i, &word) in row.iter().enumerate() {
            let mut rest = word;
            degree += word.count_ones() as usize;
            while rest != 0 {
                let u = i * 64 + rest.trailing_zeros() as usize;
                rest &= rest - 1;
                let r = &mut self.rows[u * w..(u + 1) * w];
                r.iter_mut().zip(row.iter()).for_each(|(a, b)| *a |= b);
                r[i] &= !(1 << (u % 64));
                r[v / 64] &= !(1 << (v % 64));
            }
        }
        self.rows[v * w..(v + 1) * w].fill(0);
        degree
    }
    /// Takes v's edges away.
    pub fn isolate(&mut self, v: usize) {
        let w = self.words;
        for u in self.neighbours(v) {
            self.rows[u * w + v / 64] &= !(1 << (v % 64));
        }
        self.rows[v * w..(v + 1) * w].fill(0);
    }
    /// Merges v into its neighbour u.
    pub fn contract(&mut self, u: usize, v: usize) {
        for x in self.neighbours(v) {
            if x != u {
                self.join(u, x);
            }
        }
        self.isolate(v);
    }
    /// Pairs of neighbours of v that are not joined.
    pub fn fill_of(&self, v: usize) -> usize {
        let row = self.row(v);
        let degree = self.degree(v);
        let mut joined = 0;
        for u in self.neighbours(v) {
            joined += common(self.row(u), row);
        }
        (degree * degree.saturating_sub(1) - joined) / 2
    }
}

/// Bits in both.
pub(crate) fn common(a: &[u64], b: &[u64]) -> usize {
    a.iter().zip(b).map(|(x, y)| (x & y).count_ones() as usize).sum()
}

/// The numbers of the bits that are set.
pub(crate) fn members(bits: &[u64]) -> Vec<usize> {
    let mut list = Vec::new();
    for (i, &word) in bits.iter().enumerate() {
        let mut w = word;
        while w != 0 {
            list.push(i * 64 + w.trailing_zeros() as usize);
            w &= w - 1;
        }
    }
    list
}

/// The line graph of a net, with what its vertices stand for.
#[derive(Debug, Clone)]
pub(crate) struct LineGraph {
    pub graph: Graph,
    /// The label of each vertex.
    pub labels: Vec<u32>,
    /// log2 of its size.
    pub bits: Vec<f64>,
    /// Whether it stays open; open labels are joined with one another.
    pub open: Vec<bool>,
}

impl LineGraph {
    /// Builds it from the labels in use; `None` where these are more than `limit`.
    pub fn of(net: &Net, limit: usize) -> Option<Self> {
        let mut vertex = vec![usize::MAX; net.bits.len()];
        let mut labels = Vec::new();
        for &l in net.tensors.iter().flatten() {
            if vertex[l as usize] == usize::MAX {
                vertex[l as usize] = labels.len();
                labels.push(l);
            }
        }
        if labels.len() > limit {
            return None;
        }
        let mut graph = Graph::empty(labels.len());
        let mut clique = |set: &[u32]| {
            for (i, &a) in set.iter().enumerate() {
                for &b in &set[i + 1..] {
                    graph.join(vertex[a as usize], vertex[b as usize]);
                }
            }
        };
        net.tensors.iter().for_each(|t| clique(t));
        let open: Vec<u32> = labels.iter().copied().filter(|&l| net.open[l as usize]).collect();
        clique(&open);
        Some(Self {
            graph,
            bits: labels.iter().map(|&l| net.bits[l as usize]).collect(),
            open: labels.iter().map(|&l| net.open[l as usize]).collect(),
            labels,
        })
    }
}
