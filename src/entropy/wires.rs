//! A network as nodes joined by wires that have two ends each.

use crate::network::{Network, Region, TensorId};
use crate::tensor::Label;

/// What a node of [`Wires`] stands for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Node {
    /// A tensor of the network; its wires are its legs, in the order of its axes.
    Tensor(TensorId),
    /// The copy tensor Σ_j |j…j⟩ of a label that more than two legs share, that stays open
    /// although several legs hold it, or that stands twice on one tensor.
    Copy(Label),
    /// The one-leg tensor Σ_j |j⟩ of a label that is summed over alone.
    Ones(Label),
}

/// One end of a wire.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum End {
    /// On a node.
    Node {
        /// The node's number.
        node: u32,
        /// Which of its wires it is.
        leg: u32,
    },
    /// An open leg by number: boundary sites first, then bulk legs in the network's order.
    Open(u32),
}

/// The network in the form in which regions are judged: every hyperedge is written as a
/// copy tensor, so that every wire has exactly two ends and all nodes are tensors.
///
/// Built once a network in O(legs); all searches of this module run on it. Invariants:
/// (1) wire `w` names (node, leg) as one of its ends exactly where `wires_of(node)[leg]` is
/// `w`; (2) every open leg is an end of exactly one wire, whose other end is on a node;
/// (3) nodes 0..tensors are the network's tensors in order.
#[derive(Debug, Clone)]
pub struct Wires<'n> {
    network: &'n Network,
    extra: Vec<Node>,
    starts: Vec<u32>,
    wires: Vec<u32>,
    ends: Vec<[End; 2]>,
    labels: Vec<Label>,
    open: Vec<u32>,
}

impl<'n> Wires<'n> {
    /// Reads a network.
    pub fn of(network: &'n Network) -> Self {
        let tensors = network.tensors();
        let mut open_number = vec![u32::MAX; network.labels()];
        for (k, l) in network.boundary().iter().chain(network.bulk()).enumerate() {
            open_number[l.index()] = k as u32;
        }
        let opens = network.boundary().len() + network.bulk().len();
        // For each label: a plain wire, or a node of its own.
        let mut extra = Vec::new();
        let mut own_node = vec![u32::MAX; network.labels()];
        for l in (0..network.labels() as u32).map(Label::new) {
            let holders = network.holders(l);
            let is_open = open_number[l.index()] != u32::MAX;
            let node = match (holders.len(), is_open) {
                (1, true) => continue,
                (2, false) if holders[0] != holders[1] => continue,
                (1, false) => Node::Ones(l),
                _ => Node::Copy(l),
            };
            own_node[l.index()] = (tensors + extra.len()) as u32;
            extra.push(node);
        }
        let mut starts = Vec::with_capacity(tensors + extra.len() + 1);
        starts.push(0u32);
        let mut total = 0u32;
        for t in network.tensor_ids() {
            total += network.legs(t).len() as u32;
            starts.push(total);
        }
        for node in &extra {
            total += match *node {
                Node::Copy(l) => {
                    network.holders(l).len() as u32 + u32::from(open_number[l.index()] != u32::MAX)
                }
                _ => 1,
            };
            starts.push(total);
        }
        let mut wires = vec![u32::MAX; total as usize];
        let mut ends: Vec<[End; 2]> = Vec::new();
        let mut labels = Vec::new();
        let mut open = vec![u32::MAX; opens];
        let mut half = vec![u32::MAX; network.labels()];
        let mut used = vec![0u32; extra.len()];
        for t in network.tensor_ids() {
            for (leg, &l) in network.legs(t).iter().enumerate() {
                let here = End::Node { node: t.index() as u32, leg: leg as u32 };
                let place = starts[t.index()] as usize + leg;
                let own = own_node[l.index()];
                if own != u32::MAX {
                    let at = &mut used[own as usize - tensors];
                    let there = End::Node { node: own, leg: *at };
                    wires[(starts[own as usize] + *at) as usize] = ends.len() as u32;
                    *at += 1;
                    wires[place] = ends.len() as u32;
                    ends.push([here, there]);
                    labels.push(l);
                } else if open_number[l.index()] != u32::MAX {
                    let k = open_number[l.index()];
                    open[k as usize] = ends.len() as u32;
                    wires[place] = ends.len() as u32;
                    ends.push([here, End::Open(k)]);
                    labels.push(l);
                } else if half[l.index()] == u32::MAX {
                    half[l.index()] = ends.len() as u32;
                    wires[place] = ends.len() as u32;
                    ends.push([here, here]);
                    labels.push(l);
                } else {
                    let w = half[l.index()];
                    wires[place] = w;
                    ends[w as usize][1] = here;
                }
            }
        }
        for (x, node) in extra.iter().enumerate() {
            if let Node::Copy(l) = *node
                && open_number[l.index()] != u32::MAX
            {
                let k = open_number[l.index()];
                let own = (tensors + x) as u32;
                let at = used[x];
                open[k as usize] = ends.len() as u32;
                wires[(starts[own as usize] + at) as usize] = ends.len() as u32;
                ends.push([End::Node { node: own, leg: at }, End::Open(k)]);
                labels.push(l);
            }
        }
        Self { network, extra, starts, wires, ends, labels, open }
    }
    /// The network it was read from.
    pub fn network(&self) -> &'n Network {
        self.network
    }
    /// Number of nodes.
    pub fn nodes(&self) -> usize {
        self.starts.len() - 1
    }
    /// What a node is.
    pub fn node(&self, node: usize) -> Node {
        match node.checked_sub(self.network.tensors()) {
            None => Node::Tensor(TensorId::new(node as u32)),
            Some(x) => self.extra[x],
        }
    }
    /// The wires at a node, one a leg.
    pub fn wires_of(&self, node: usize) -> &[u32] {
        &self.wires[self.starts[node] as usize..self.starts[node + 1] as usize]
    }
    /// Number of wires.
    pub fn count(&self) -> usize {
        self.ends.len()
    }
    /// Both ends of a wire.
    pub fn ends(&self, wire: u32) -> [End; 2] {
        self.ends[wire as usize]
    }
    /// The end that is not leg `leg` of node `node`.
    pub fn other_end(&self, wire: u32, node: u32, leg: u32) -> End {
        let [a, b] = self.ends[wire as usize];
        if a == (End::Node { node, leg }) { b } else { a }
    }
    /// The label that a wire carries.
    pub fn label(&self, wire: u32) -> Label {
        self.labels[wire as usize]
    }
    /// Dimension of a wire.
    pub fn dim(&self, wire: u32) -> usize {
        self.network.dim(self.labels[wire as usize])
    }
    /// Number of open legs: boundary sites, then bulk legs.
    pub fn open(&self) -> usize {
        self.open.len()
    }
    /// The wire of an open leg.
    pub fn open_wire(&self, open: usize) -> u32 {
        self.open[open]
    }
    /// The label of an open leg.
    pub fn open_label(&self, open: usize) -> Label {
        self.labels[self.open[open] as usize]
    }
    /// One flag an open leg: whether the region holds it. Bulk legs that the region does not
    /// name belong to the complement, which holds the reference they are entangled with.
    pub fn inside(&self, region: &Region) -> Vec<bool> {
        let mut flags = region.flags().to_vec();
        flags.resize(self.network.boundary().len(), false);
        flags.extend(self.network.bulk().iter().map(|l| region.bulk().contains(l)));
        flags
    }
    /// Whether a node is an isometry from its legs in `unknown` to its other legs.
    ///
    /// For a tensor this asks its verified table; a copy tensor is one from any single leg;
    /// every non-zero tensor is one from no leg. `left` is the number of unknown legs (the
    /// mask holds 64 legs only, and beyond that only `left = 0` is granted for tensors).
    pub fn absorbs(&self, node: usize, unknown: u64, left: u32) -> bool {
        if left == 0 {
            return true;
        }
        match self.node(node) {
            Node::Tensor(t) => {
                let legs = self.wires_of(node).len();
                legs <= 64 && self.network.block(t).isometries().is_isometry(unknown)
            }
            Node::Copy(_) => left == 1 && self.wires_of(node).len() > 1,
            Node::Ones(_) => false,
        }
    }
}
