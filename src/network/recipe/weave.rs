//! From a graph whose vertices know their legs, in order, to a network.

use super::Setting;
use crate::network::file::Problem;
use crate::network::source::BlockSource;
use crate::network::{Layout, Network, NetworkBuilder};
use crate::tensor::Label;
use std::fmt::Write;

/// A leg of a vertex.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Leg {
    /// The end of an edge, by the edge's number; each number stands twice.
    Bond(u32),
    /// An open leg of the boundary.
    Open,
    /// A bulk leg.
    Bulk,
}

/// A graph on its way to a network: flat lists of legs, counter-clockwise where that means
/// something.
#[derive(Debug, Default)]
pub(super) struct Weave {
    starts: Vec<u32>,
    legs: Vec<Leg>,
    bonds: u32,
    /// Dimension of bonds, of open legs, where they are their own.
    pub bond_dim: Option<usize>,
    pub open_dim: Option<usize>,
    pub layout: Layout,
    /// Open legs by number, in the order of boundary sites, where neither the cycles nor the
    /// order of vertices tell it.
    pub sites: Option<Vec<u32>>,
}

impl Weave {
    pub(super) fn vertices(&self) -> usize {
        self.starts.len()
    }
    /// A new vertex without legs; the following calls give it legs.
    pub(super) fn vertex(&mut self) {
        self.starts.push(self.legs.len() as u32);
    }
    pub(super) fn leg(&mut self, leg: Leg) {
        if let Leg::Bond(b) = leg {
            self.bonds = self.bonds.max(b + 1);
        }
        self.legs.push(leg);
    }
    /// Legs so far, which is the number of the next.
    pub(super) fn legs(&self) -> u32 {
        self.legs.len() as u32
    }
    /// Vertices 0..n joined by edges; each vertex's legs follow the order of edges, and open
    /// ones come last.
    pub(super) fn of_edges(n: usize, edges: &[(u32, u32)], open: bool) -> Self {
        let mut starts = vec![0u32; n + 1];
        for &(a, b) in edges {
            starts[a as usize + 1] += 1;
            starts[b as usize + 1] += 1;
        }
        for v in 0..n {
            starts[v + 1] += starts[v] + u32::from(open);
        }
        let mut legs = vec![Leg::Open; starts[n] as usize];
        let mut next: Vec<u32> = starts[..n].to_vec();
        for (e, &(a, b)) in edges.iter().enumerate() {
            for v in [a, b] {
                legs[next[v as usize] as usize] = Leg::Bond(e as u32);
                next[v as usize] += 1;
            }
        }
        starts.truncate(n);
        Self { starts, legs, bonds: edges.len() as u32, ..Self::default() }
    }
    fn range(&self, vertex: usize) -> std::ops::Range<usize> {
        let end = self.starts.get(vertex + 1).map_or(self.legs.len(), |&e| e as usize);
        self.starts[vertex] as usize..end
    }
    /// Open legs as cycles, each with the graph on its left: from an open leg, turn to the
    /// vertex's next leg, and across bonds until a leg is open. True for legs that stand
    /// counter-clockwise.
    fn cycles(&self) -> Vec<Vec<u32>> {
        let mut ends = vec![[u32::MAX; 2]; self.bonds as usize];
        let mut vertex_of = vec![0u32; self.legs.len()];
        for v in 0..self.vertices() {
            for at in self.range(v) {
                vertex_of[at] = v as u32;
                if let Leg::Bond(b) = self.legs[at] {
                    let pair = &mut ends[b as usize];
                    pair[usize::from(pair[0] != u32::MAX)] = at as u32;
                }
            }
        }
        let turn = |at: usize| {
            let range = self.range(vertex_of[at] as usize);
            if at + 1 == range.end { range.start } else { at + 1 }
        };
        let mut seen = vec![false; self.legs.len()];
        let mut cycles = Vec::new();
        for start in 0..self.legs.len() {
            if self.legs[start] != Leg::Open || seen[start] {
                continue;
            }
            let (mut cycle, mut at) = (Vec::new(), start);
            while !seen[at] {
                seen[at] = true;
                cycle.push(at as u32);
                at = turn(at);
                while self.legs[at] != Leg::Open {
                    if let Leg::Bond(b) = self.legs[at] {
                        let [a, z] = ends[b as usize];
                        at = if a as usize == at { z as usize } else { a as usize };
                    }
                    at = turn(at);
                }
            }
            cycles.push(cycle);
        }
        cycles
    }
    /// The network. With `planar` the boundary is numbered along its cycles, else by vertex
    /// and leg. Boundary labels are `b0`, `b1`, …, bonds `x0`, …, bulk legs `k0`, ….
    pub(super) fn network(
        mut self,
        setting: &mut Setting<'_>,
        planar: bool,
        mut block: impl FnMut(usize) -> BlockSource,
    ) -> Result<Network, Problem> {
        let (most, legs) = (setting.limits.tensors, setting.limits.legs);
        for (what, count, limit) in
            [("tensors", self.vertices() as u64, most), ("legs", self.legs.len() as u64, legs)]
        {
            if count > limit {
                return Err(Problem::TooMany { what, count, limit });
            }
        }
        let mut builder = NetworkBuilder::new(setting.name.clone());
        let mut text = String::new();
        let mut label_of = vec![Label::new(u32::MAX); self.legs.len()];
        let mut name = |builder: &mut NetworkBuilder,
                        letter: char,
                        n: usize,
                        own: Option<usize>|
         -> Result<Label, Problem> {
            text.clear();
            text.push(letter);
            let _ = write!(text, "{n}");
            let dim = setting.dims.of_or(&text, own)?;
            Ok(builder.label(&text, dim))
        };
        let open: Vec<u32> = if let Some(sites) = self.sites.take() {
            sites
        } else if planar {
            let cycles = self.cycles();
            self.layout.cycles = cycles.iter().map(|c| c.len() as u32).collect();
            cycles.concat()
        } else {
            (0..self.legs.len() as u32).filter(|&l| self.legs[l as usize] == Leg::Open).collect()
        };
        for (site, &at) in open.iter().enumerate() {
            let label = name(&mut builder, 'b', site, self.open_dim)?;
            builder.boundary([label]);
            label_of[at as usize] = label;
        }
        let mut bonds = vec![Label::new(u32::MAX); self.bonds as usize];
        let mut bulk = 0;
        for (at, leg) in self.legs.iter().enumerate() {
            match leg {
                Leg::Open => {}
                Leg::Bulk => {
                    label_of[at] = name(&mut builder, 'k', bulk, None)?;
                    builder.bulk([label_of[at]]);
                    bulk += 1;
                }
                Leg::Bond(b) => {
                    let known = &mut bonds[*b as usize];
                    if known.number() == u32::MAX {
                        *known = name(&mut builder, 'x', *b as usize, self.bond_dim)?;
                    }
                    label_of[at] = *known;
                }
            }
        }
        let mut dims = Vec::new();
        for v in 0..self.vertices() {
            let legs = &label_of[self.range(v)];
            dims.clear();
            dims.extend(legs.iter().map(|&l| builder.dim(l)));
            let source = block(v);
            let made = setting.shelf.block(&source, &dims, &|| format!("t{v}"))?;
            builder.source(&made, source);
            builder.tensor(None, legs, &made)?;
        }
        setting.dims.all_met()?;
        builder.layout(self.layout);
        Ok(builder.finish()?)
    }
}
