//! What closure leaves: independent small networks between two cuts.

use super::closure::{Closure, Side};
use super::wires::{End, Node, Wires};
use crate::block::{Block, Entries, IsometryTable, PrimePart, SparseEntries, Stabilizer};
use crate::network::{Network, NetworkBuilder, NetworkError, TensorId};
use crate::tensor::Label;
use num_complex::Complex64;
use std::collections::HashMap;
use std::sync::Arc;

/// One connected piece of what neither side absorbed.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Core {
    /// Its nodes, ascending.
    pub nodes: Vec<u32>,
    /// (node, leg) of every wire that leads to the region's side.
    pub region: Vec<(u32, u32)>,
    /// (node, leg) of every wire that leads to the complement's side.
    pub complement: Vec<(u32, u32)>,
}

/// A closure taken apart.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Split {
    /// Labels of the wires that run straight from one side to the other: each contributes
    /// ln(dim) to the entropy.
    pub straight: Vec<Label>,
    /// The pieces of the core, by their first nodes.
    pub cores: Vec<Core>,
}

/// Takes a closure apart: straight wires, and the connected pieces of the core.
pub fn split(wires: &Wires<'_>, inside: &[bool], closure: &Closure) -> Split {
    let side_of = |end: End| match end {
        End::Open(k) => Some(if inside[k as usize] { Side::Region } else { Side::Complement }),
        End::Node { node, .. } => closure.owner[node as usize],
    };
    let mut straight = Vec::new();
    for w in 0..wires.count() as u32 {
        if let [Some(a), Some(b)] = wires.ends(w).map(side_of)
            && a != b
        {
            straight.push(wires.label(w));
        }
    }
    let mut cores = Vec::new();
    if closure.core_nodes() > 0 {
        let mut seen = vec![false; wires.nodes()];
        for root in 0..wires.nodes() as u32 {
            if seen[root as usize] || closure.owner[root as usize].is_some() {
                continue;
            }
            seen[root as usize] = true;
            let mut core = Core { nodes: vec![root], region: Vec::new(), complement: Vec::new() };
            let mut at = 0;
            while at < core.nodes.len() {
                let node = core.nodes[at];
                at += 1;
                for (leg, &w) in wires.wires_of(node as usize).iter().enumerate() {
                    let there = wires.other_end(w, node, leg as u32);
                    match (side_of(there), there) {
                        (Some(Side::Region), _) => core.region.push((node, leg as u32)),
                        (Some(Side::Complement), _) => core.complement.push((node, leg as u32)),
                        (None, End::Node { node: next, .. }) => {
                            if !seen[next as usize] {
                                seen[next as usize] = true;
                                core.nodes.push(next);
                            }
                        }
                        (None, End::Open(_)) => unreachable!("an open leg has a side"),
                    }
                }
            }
            core.nodes.sort_unstable();
            core.region.sort_unstable();
            core.complement.sort_unstable();
            cores.push(core);
        }
    }
    Split { straight, cores }
}

/// The identity of dimension `dim` as a block with two legs.
pub(super) fn identity(dim: usize) -> Arc<Block> {
    copy(dim, 2)
}

/// The copy tensor of `legs` legs.
fn copy(dim: usize, legs: usize) -> Arc<Block> {
    let table = IsometryTable::ask(legs, |set| {
        let n = set.count_ones();
        n == 0 || (n == 1 && legs > 1)
    });
    let make = move || {
        let stride: u64 = (0..legs).fold(0, |s, _| s * dim as u64 + 1);
        let entries = (0..dim as u64).map(|j| (j * stride, Complex64::new(1.0, 0.0))).collect();
        Entries::Sparse(SparseEntries::collect(vec![dim; legs], entries))
    };
    let name = if legs == 2 { "identity" } else { "copy" };
    Arc::new(Block::lazy(name, vec![dim; legs], table, copy_stabilizer(dim, legs), make))
}

/// Generators of the copy tensor, digit by digit: X on all legs, Z on one and Z⁻¹ on the next.
pub(super) fn copy_stabilizer(dim: usize, legs: usize) -> Option<Stabilizer> {
    let mut parts = Vec::new();
    let mut rest = dim;
    let mut p = 2;
    while rest > 1 {
        if p * p > rest {
            p = rest;
        }
        let mut m = 0;
        while rest.is_multiple_of(p) {
            rest /= p;
            m += 1;
        }
        if m > 0 {
            let width = m * legs;
            let mut generators = Vec::with_capacity(width);
            for digit in 0..m {
                let mut x = vec![0; 2 * width];
                for leg in 0..legs {
                    x[leg * m + digit] = 1;
                }
                generators.push(x);
                for leg in 1..legs {
                    let mut z = vec![0; 2 * width];
                    z[width + digit] = 1;
                    z[width + leg * m + digit] = p as u32 - 1;
                    generators.push(z);
                }
            }
            parts.push(Arc::new(PrimePart {
                prime: u32::try_from(p).ok()?,
                digits: vec![m as u32; legs],
                phases: vec![0; generators.len()],
                generators,
            }));
        }
        p += 1;
    }
    Some(Stabilizer { parts })
}

/// A piece of the core as a network of its own: its boundary lists first the legs towards the
/// region, then those towards the complement.
#[derive(Debug, Clone)]
pub struct Piece {
    /// The network.
    pub network: Network,
    /// How many of its boundary legs lead to the region.
    pub region_legs: usize,
}

impl Piece {
    /// One flag an open leg: whether it leads to the region.
    pub fn inside(&self) -> Vec<bool> {
        (0..self.network.boundary().len()).map(|k| k < self.region_legs).collect()
    }
}

impl Core {
    /// Cuts the piece out of its network. A copy tensor becomes a label shared by all that
    /// hold it; where it leads to a side, however often, one leg towards that side is kept
    /// (the others are copies of it, which an isometry takes away).
    ///
    /// # Errors
    /// [`NetworkError`] where the network was not sound.
    pub fn cut_out(&self, wires: &Wires<'_>) -> Result<Piece, NetworkError> {
        let network = wires.network();
        let mut b = NetworkBuilder::new(format!("core of {}", network.name()));
        let mut identities: HashMap<usize, Arc<Block>> = HashMap::new();
        let mut of_wire: HashMap<u32, Label> = HashMap::new();
        let mut next = 0;
        let mut fresh = |b: &mut NetworkBuilder, dim: usize| {
            next += 1;
            b.label(&format!("w{}", next - 1), dim)
        };
        let mut sides: [Vec<Label>; 2] = [Vec::new(), Vec::new()];
        let leads = |node: u32, leg: u32| {
            if self.region.binary_search(&(node, leg)).is_ok() {
                Some(0)
            } else if self.complement.binary_search(&(node, leg)).is_ok() {
                Some(1)
            } else {
                None
            }
        };
        let mut summed = Vec::new();
        for &node in &self.nodes {
            let Node::Copy(label) = wires.node(node as usize) else { continue };
            let dim = network.dim(label);
            let hub = fresh(&mut b, dim);
            let mut to_side = [false, false];
            let mut held = 0;
            for (leg, &w) in wires.wires_of(node as usize).iter().enumerate() {
                match leads(node, leg as u32) {
                    Some(side) => to_side[side] = true,
                    None => {
                        held += 1;
                        of_wire.insert(w, hub);
                    }
                }
            }
            let out: Vec<usize> = (0..2).filter(|&s| to_side[s]).collect();
            if let ([side], true) = (&out[..], held > 0) {
                sides[*side].push(hub);
            } else {
                for &side in &out {
                    let end = fresh(&mut b, dim);
                    let block = identities.entry(dim).or_insert_with(|| identity(dim));
                    b.tensor(None, &[hub, end], block)?;
                    held += 1;
                    sides[side].push(end);
                }
                if held == 1 {
                    summed.push(hub);
                }
            }
        }
        for &node in &self.nodes {
            let Node::Tensor(t) = wires.node(node as usize) else { continue };
            let mut legs = Vec::with_capacity(wires.wires_of(node as usize).len());
            for (leg, &w) in wires.wires_of(node as usize).iter().enumerate() {
                let label = match of_wire.get(&w) {
                    Some(&l) => l,
                    None => {
                        let l = fresh(&mut b, wires.dim(w));
                        of_wire.insert(w, l);
                        match (leads(node, leg as u32), wires.other_end(w, node, leg as u32)) {
                            (Some(side), _) => sides[side].push(l),
                            (None, End::Node { node: m, .. })
                                if matches!(wires.node(m as usize), Node::Ones(_)) =>
                            {
                                summed.push(l);
                            }
                            _ => {}
                        }
                        l
                    }
                };
                legs.push(label);
            }
            b.tensor(Some(&network.tensor_name(t)), &legs, network.block(t))?;
        }
        let region_legs = sides[0].len();
        b.boundary(sides.into_iter().flatten());
        b.summed(summed);
        Ok(Piece { network: b.finish()?, region_legs })
    }
    /// The network's tensors in the piece.
    pub fn tensors(&self, wires: &Wires<'_>) -> Vec<TensorId> {
        self.nodes
            .iter()
            .filter_map(|&n| match wires.node(n as usize) {
                Node::Tensor(t) => Some(t),
                _ => None,
            })
            .collect()
    }
    /// A key that equal pieces share: same tensors joined in the same way, whichever of its
    /// two sides is called the region. Different pieces have different keys; pieces that
    /// differ only by a symmetry of a tensor have different keys too.
    pub fn key(&self, wires: &Wires<'_>) -> Vec<u32> {
        let place: HashMap<u32, usize> =
            self.nodes.iter().enumerate().map(|(k, &n)| (n, k)).collect();
        let roots = if self.nodes.len() <= 400 { self.nodes.len() } else { 1 };
        let mut best: Option<Vec<u32>> = None;
        for swapped in [false, true] {
            for &root in &self.nodes[..roots] {
                let word = self.walk(wires, &place, root, swapped, best.as_deref());
                if let Some(word) = word {
                    best = Some(word);
                }
            }
        }
        best.unwrap_or_default()
    }
    /// The piece as read by a walk from `root`; `None` where it is not below `best`.
    fn walk(
        &self,
        wires: &Wires<'_>,
        place: &HashMap<u32, usize>,
        root: u32,
        swapped: bool,
        best: Option<&[u32]>,
    ) -> Option<Vec<u32>> {
        const FIRST_NUMBER: u32 = 4;
        let network = wires.network();
        let mut number = vec![u32::MAX; self.nodes.len()];
        let mut order = vec![root];
        number[place[&root]] = 0;
        let mut word = Vec::new();
        let mut at = 0;
        let mut below = best.is_none();
        while at < order.len() {
            let node = order[at];
            at += 1;
            let from = word.len();
            match wires.node(node as usize) {
                Node::Tensor(t) => word.extend([0, network.block_number(t) as u32]),
                Node::Copy(l) => word.extend([1, network.dim(l) as u32]),
                Node::Ones(l) => word.extend([2, network.dim(l) as u32]),
            }
            let legs = wires.wires_of(node as usize);
            word.push(legs.len() as u32);
            for (leg, &w) in legs.iter().enumerate() {
                if self.region.binary_search(&(node, leg as u32)).is_ok() {
                    word.push(u32::from(swapped));
                } else if self.complement.binary_search(&(node, leg as u32)).is_ok() {
                    word.push(u32::from(!swapped));
                } else if let End::Node { node: m, leg: other } =
                    wires.other_end(w, node, leg as u32)
                {
                    let k = place[&m];
                    if number[k] == u32::MAX {
                        number[k] = order.len() as u32;
                        order.push(m);
                    }
                    word.extend([FIRST_NUMBER + number[k], other]);
                }
            }
            if let (false, Some(best)) = (below, best) {
                let upto = word.len().min(best.len());
                match word[from..upto].cmp(&best[from.min(upto)..upto]) {
                    std::cmp::Ordering::Less => below = true,
                    std::cmp::Ordering::Greater => return None,
                    std::cmp::Ordering::Equal => {}
                }
            }
        }
        (below || best.is_some_and(|b| word[..] < *b)).then_some(word)
    }
}
