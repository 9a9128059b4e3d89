//! Closure: what a set of open legs absorbs by isometries alone.
//!
//! If a tensor is an isometry from the legs that are not yet known to those that are, then
//! the state is that isometry applied to a smaller network's state, and no spectrum across
//! the two sides changes. Starting from the legs of a region, tensors are absorbed until
//! nothing moves; then likewise from the complement among the rest. What neither side absorbs
//! is the core. Every set of tensors that one side absorbs is independent of the order of
//! absorption, because a subset of an isometric set of legs is isometric.
//!
//! A closure is a sequence of steps, and each step is checked by one question to a verified
//! table; see [`replay`].

use super::cut::Cut;
use super::wires::{End, Node, Wires};
use thiserror::Error;

/// The two sides of a bipartition of the open legs.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Side {
    /// The region's.
    Region,
    /// The complement's, the reference included.
    Complement,
}

/// One step: which side absorbed which node.
pub type Step = (Side, u32);

/// Which node was absorbed by whom.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Closure {
    /// One entry a node of the [`Wires`]; `None` for the core.
    pub owner: Vec<Option<Side>>,
    /// The steps in the order in which they were taken.
    pub steps: Vec<Step>,
}

impl Closure {
    /// Number of nodes in the core.
    pub fn core_nodes(&self) -> usize {
        self.owner.len() - self.steps.len()
    }
}

/// A step that does not hold.
#[derive(Debug, Error, Clone, PartialEq, Eq)]
#[non_exhaustive]
pub enum ReplayError {
    /// A node that does not exist.
    #[error("step {step} absorbs node {node}, but there are {nodes} nodes")]
    NoSuchNode {
        /// The step's number.
        step: usize,
        /// The node.
        node: u32,
        /// Nodes there are.
        nodes: usize,
    },
    /// A node absorbed twice.
    #[error("step {step} absorbs node {node} again")]
    Again {
        /// The step's number.
        step: usize,
        /// The node.
        node: u32,
    },
    /// The tensor is not known to be an isometry from its unknown legs.
    #[error(
        "step {step} absorbs node {node}, which is not known to be an isometry from its legs {unknown:?}"
    )]
    NotIsometric {
        /// The step's number.
        step: usize,
        /// The node.
        node: u32,
        /// Its legs that are not known at that step.
        unknown: Vec<usize>,
    },
}

/// The front of one side: which legs of which node it knows, and what it may absorb next.
///
/// Legs can be added at any time, and absorption goes on from where it stood: all intervals
/// from one start cost one pass.
#[derive(Debug, Clone)]
pub struct Front<'w, 'n> {
    wires: &'w Wires<'n>,
    side: Side,
    known: Vec<u64>,
    left: Vec<u32>,
    queue: std::collections::VecDeque<u32>,
}

impl<'w, 'n> Front<'w, 'n> {
    /// A front that knows nothing.
    pub fn new(wires: &'w Wires<'n>, side: Side) -> Self {
        let left = (0..wires.nodes()).map(|n| wires.wires_of(n).len() as u32).collect();
        let known = vec![0; wires.nodes()];
        Self { wires, side, known, left, queue: std::collections::VecDeque::new() }
    }
    /// Learns an open leg.
    pub fn learn_open(&mut self, open: usize) {
        for end in self.wires.ends(self.wires.open_wire(open)) {
            self.learn(end);
        }
    }
    /// Learns one end of a wire. Each end is learnt once.
    fn learn(&mut self, end: End) {
        if let End::Node { node, leg } = end {
            if leg < 64 {
                self.known[node as usize] |= 1 << leg;
            }
            self.left[node as usize] -= 1;
            self.queue.push_back(node);
        }
    }
    /// Whether the front could absorb this node now.
    fn ready(&self, node: usize) -> bool {
        let legs = self.wires.wires_of(node).len();
        if self.left[node] as usize == legs && legs > 0 {
            return false;
        }
        let all = if legs >= 64 { u64::MAX } else { (1 << legs) - 1 };
        self.wires.absorbs(node, all & !self.known[node], self.left[node])
    }
    /// Absorbs one node if any can be had, among those without owner that `may` admits.
    pub fn step(&mut self, owner: &mut [Option<Side>], may: &dyn Fn(usize) -> bool) -> Option<u32> {
        while let Some(node) = self.queue.pop_front() {
            let n = node as usize;
            if owner[n].is_some() || !may(n) || !self.ready(n) {
                continue;
            }
            owner[n] = Some(self.side);
            let legs = self.wires.wires_of(n).len();
            for leg in 0..legs as u32 {
                // An end that faces this node and is not known to it becomes known beyond it.
                let wire = self.wires.wires_of(n)[leg as usize];
                let known = leg < 64 && self.known[n] >> leg & 1 == 1;
                if !known {
                    let other = self.wires.other_end(wire, node, leg);
                    self.learn(other);
                }
            }
            return Some(node);
        }
        None
    }
    /// Absorbs until nothing moves.
    pub fn run(
        &mut self,
        owner: &mut [Option<Side>],
        steps: &mut Vec<Step>,
        may: &dyn Fn(usize) -> bool,
    ) {
        while let Some(node) = self.step(owner, may) {
            steps.push((self.side, node));
        }
    }
    /// Looks again at one node: what was barred before may be open now.
    pub fn wake_node(&mut self, node: u32) {
        if (self.left[node as usize] as usize) < self.wires.wires_of(node as usize).len() {
            self.queue.push_back(node);
        }
    }
    /// Looks again at every node that it touches: what was barred before may be open now.
    fn wake(&mut self) {
        for n in 0..self.wires.nodes() {
            if (self.left[n] as usize) < self.wires.wires_of(n).len() {
                self.queue.push_back(n as u32);
            }
        }
    }
}

/// How the two sides share the tensors that both could absorb.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Turn {
    /// The region takes all it can, then the complement.
    RegionFirst,
    /// The complement takes all it can, then the region.
    ComplementFirst,
    /// One tensor each in turn.
    ByTurns,
    /// Each side stays on its side of the minimal cut nearest to the region, then both go on.
    WithinNearCut,
    /// Each side stays on its side of the minimal cut nearest to the complement, then both go on.
    WithinFarCut,
}

impl Turn {
    /// All of them, in the order in which they are tried.
    pub const ALL: [Turn; 5] = [
        Turn::RegionFirst,
        Turn::ComplementFirst,
        Turn::WithinNearCut,
        Turn::WithinFarCut,
        Turn::ByTurns,
    ];
}

/// Closes both sides. `inside` has one flag an open leg; `cut` is needed by the two ways that
/// stay within a cut (without it they are the same as [`Turn::RegionFirst`]).
///
/// # Panics
/// Where `inside` has not one flag an open leg.
#[track_caller]
pub fn close(wires: &Wires<'_>, inside: &[bool], turn: Turn, cut: Option<&Cut>) -> Closure {
    assert_eq!(inside.len(), wires.open(), "one flag an open leg");
    let mut region = Front::new(wires, Side::Region);
    let mut complement = Front::new(wires, Side::Complement);
    for (k, &of_region) in inside.iter().enumerate() {
        if of_region { region.learn_open(k) } else { complement.learn_open(k) }
    }
    let mut owner = vec![None; wires.nodes()];
    let mut steps = Vec::with_capacity(wires.nodes());
    let everywhere = |_: usize| true;
    match (turn, cut) {
        (Turn::ComplementFirst, _) => {
            complement.run(&mut owner, &mut steps, &everywhere);
            region.run(&mut owner, &mut steps, &everywhere);
        }
        (Turn::ByTurns, _) => loop {
            let a = region.step(&mut owner, &everywhere);
            steps.extend(a.map(|n| (Side::Region, n)));
            let b = complement.step(&mut owner, &everywhere);
            steps.extend(b.map(|n| (Side::Complement, n)));
            if a.is_none() && b.is_none() {
                break;
            }
        },
        (Turn::WithinNearCut | Turn::WithinFarCut, Some(cut)) => {
            let side = if turn == Turn::WithinNearCut { &cut.near_side } else { &cut.far_side };
            let of_region = |n: usize| match wires.node(n) {
                Node::Tensor(t) => side[t.index()],
                _ => true,
            };
            let of_complement = |n: usize| match wires.node(n) {
                Node::Tensor(t) => !side[t.index()],
                _ => true,
            };
            region.run(&mut owner, &mut steps, &of_region);
            complement.run(&mut owner, &mut steps, &of_complement);
            region.wake();
            region.run(&mut owner, &mut steps, &everywhere);
            complement.wake();
            complement.run(&mut owner, &mut steps, &everywhere);
        }
        _ => {
            region.run(&mut owner, &mut steps, &everywhere);
            complement.run(&mut owner, &mut steps, &everywhere);
        }
    }
    Closure { owner, steps }
}

/// Everything that one set of open legs absorbs when nobody else takes part: one flag a
/// node. `known` has one flag an open leg.
///
/// # Panics
/// Where `known` has not one flag an open leg.
#[track_caller]
pub fn reach(wires: &Wires<'_>, known: &[bool]) -> Vec<bool> {
    assert_eq!(known.len(), wires.open(), "one flag an open leg");
    let mut front = Front::new(wires, Side::Region);
    for (k, _) in known.iter().enumerate().filter(|(_, k)| **k) {
        front.learn_open(k);
    }
    let mut owner = vec![None; wires.nodes()];
    front.run(&mut owner, &mut Vec::new(), &|_| true);
    owner.iter().map(Option::is_some).collect()
}

/// Checks a record of steps without trusting whoever wrote it, in one pass and with no state
/// but the list of what was absorbed. Gives the owners after the last step.
///
/// # Errors
/// The first step that does not hold.
pub fn replay(
    wires: &Wires<'_>,
    inside: &[bool],
    steps: &[Step],
) -> Result<Vec<Option<Side>>, ReplayError> {
    let mut owner: Vec<Option<Side>> = vec![None; wires.nodes()];
    for (step, &(side, node)) in steps.iter().enumerate() {
        let n = node as usize;
        if n >= owner.len() {
            return Err(ReplayError::NoSuchNode { step, node, nodes: owner.len() });
        }
        if owner[n].is_some() {
            return Err(ReplayError::Again { step, node });
        }
        let unknown: Vec<usize> = (0..wires.wires_of(n).len())
            .filter(|&leg| {
                let wire = wires.wires_of(n)[leg];
                match wires.other_end(wire, node, leg as u32) {
                    End::Open(k) => inside[k as usize] != (side == Side::Region),
                    End::Node { node: m, .. } => owner[m as usize] != Some(side),
                }
            })
            .collect();
        let mask = unknown.iter().filter(|&&l| l < 64).fold(0u64, |m, l| m | 1 << l);
        if !wires.absorbs(n, mask, unknown.len() as u32) {
            return Err(ReplayError::NotIsometric { step, node, unknown });
        }
        owner[n] = Some(side);
    }
    Ok(owner)
}
