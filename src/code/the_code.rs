//! A network with bulk legs, made ready for questions about the code that it is.

use super::checks::{Checks, Held};
use super::greedy::Greedy;
use crate::block::PrimePart;
use crate::entropy::{Wires, stabilizer};
use crate::network::{Network, TensorId};
use crate::tensor::Label;
use crate::watch::Watch;
use std::sync::Arc;
use thiserror::Error;

/// Why a question about a code has no answer.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum CodeError {
    /// Nothing is encoded.
    #[error("network {network:?} has no bulk leg, so it encodes nothing; list one in bulk")]
    NoBulk {
        /// The network's name.
        network: String,
    },
    /// A bulk leg that does not exist.
    #[error(
        "{leg:?} is no bulk leg of network {network:?}; it has {count}, from {first:?} to {last:?}"
    )]
    NoSuchLeg {
        /// The leg as named.
        leg: String,
        /// The network's name.
        network: String,
        /// How many bulk legs there are.
        count: usize,
        /// The first.
        first: String,
        /// The last.
        last: String,
    },
    /// The question needs a stabilizer network.
    #[error(
        "{question} needs a network of stabilizer tensors, and tensor {tensor:?} ({block}) is not known to be one"
    )]
    NotStabilizer {
        /// What was asked.
        question: &'static str,
        /// The first tensor without stabilizer form.
        tensor: String,
        /// Its block.
        block: String,
    },
    /// Too large for the method.
    #[error("{question} would take {need}; at most {limit} is allowed")]
    TooLarge {
        /// What was asked.
        question: &'static str,
        /// What it would take, in words.
        need: String,
        /// The limit, in words.
        limit: String,
    },
    /// A rate that is no probability.
    #[error("erasure rate {rate} is not between 0 and 1")]
    Rate {
        /// The rate.
        rate: f64,
    },
    /// A ring that does not exist.
    #[error("ring {ring} was asked for, but network {network:?} has rings 0 to {last}")]
    NoSuchRing {
        /// The ring.
        ring: u32,
        /// The network's name.
        network: String,
        /// Its last ring.
        last: u32,
    },
    /// No rings are known.
    #[error("network {network:?} was not grown by rings, so it cannot be cut back to some of them")]
    NoRings {
        /// The network's name.
        network: String,
    },
    /// A region that does not determine what is asked of it.
    #[error(
        "region {region:?} cannot hold this operator of bulk leg {leg:?}: the rest of the boundary holds {against} independent operators that act on the leg, and what the region does must commute with them"
    )]
    CannotHold {
        /// The bulk leg.
        leg: String,
        /// The region.
        region: String,
        /// Independent actions on the leg that the rest holds.
        against: usize,
    },
    /// The best operator on a region is not good enough.
    #[error(
        "region {region:?} cannot hold this operator of bulk leg {leg:?}: the best operator on it misses by {defect:.3e} of its size"
    )]
    Defect {
        /// The bulk leg.
        leg: String,
        /// The region.
        region: String,
        /// The relative miss.
        defect: f64,
    },
    /// An operator of a wrong shape.
    #[error("the operator is an array of {rows} × {columns}, but the bulk leg has dimension {dim}")]
    OperatorShape {
        /// Rows.
        rows: usize,
        /// Columns.
        columns: usize,
        /// The leg's dimension.
        dim: usize,
    },
    /// The network's stabilizer state could not be had.
    #[error(transparent)]
    Stabilizer(#[from] stabilizer::StabilizerError),
    /// The search for a contraction order failed.
    #[error(transparent)]
    Order(#[from] crate::order::OrderError),
    /// A contraction failed.
    #[error(transparent)]
    Contract(#[from] crate::contract::ContractError),
    /// A decomposition failed.
    #[error(transparent)]
    Linalg(#[from] crate::linalg::LinalgError),
    /// An entropy could not be had.
    #[error(transparent)]
    Entropy(#[from] crate::entropy::EntropyError),
    /// Saved work of another question.
    #[error(
        "the saved samples belong to another network or request (theirs {theirs}, this {ours})"
    )]
    OtherWork {
        /// Fingerprint of the saved work.
        theirs: String,
        /// Fingerprint of the request.
        ours: String,
    },
}

/// A network read as a code from its bulk legs to its boundary.
///
/// Holds the network's wires, its rules for greedy recovery and, once [`Self::with_states`]
/// gave them, the checks of its stabilizer form, one set a prime.
#[derive(Debug, Clone)]
pub struct Code<'n> {
    network: &'n Network,
    wires: Wires<'n>,
    greedy: Greedy,
    checks: Vec<Checks>,
    states: Arc<[PrimePart]>,
}

impl<'n> Code<'n> {
    /// Reads a network; linear in its legs.
    ///
    /// # Errors
    /// [`CodeError::NoBulk`].
    pub fn of(network: &'n Network) -> Result<Self, CodeError> {
        if network.bulk().is_empty() {
            return Err(CodeError::NoBulk { network: network.name().to_owned() });
        }
        let wires = Wires::of(network);
        let greedy = Greedy::of(&wires);
        Ok(Self { network, wires, greedy, checks: Vec::new(), states: Arc::from([]) })
    }
    /// Adds the exact answers' foundation: the state on the open legs (boundary, then bulk,
    /// in the network's order), one part a prime.
    #[must_use]
    pub fn with_states(mut self, states: &[PrimePart]) -> Self {
        let sites = self.network.boundary().len();
        self.states = states.into();
        self.checks = states.iter().map(|s| Checks::of(s, sites)).collect();
        self
    }
    /// Reads a network and, where all of its tensors are stabilizer states, contracts it to
    /// the state on its open legs, so that exact answers can be had.
    ///
    /// # Errors
    /// [`CodeError::NoBulk`], [`CodeError::Stabilizer`] (a network that contracts to zero).
    pub fn prepared(network: &'n Network, watch: &dyn Watch) -> Result<Self, CodeError> {
        let code = Self::of(network)?;
        if !stabilizer::has_states(&code.wires) {
            return Ok(code);
        }
        let states: Vec<PrimePart> = stabilizer::states(&code.wires, watch)?
            .iter()
            .map(|s| PrimePart {
                prime: s.prime(),
                digits: (0..s.legs()).map(|l| s.columns(l).len() as u32).collect(),
                generators: s.generators(),
                phases: (0..s.width()).map(|r| s.phase(r)).collect(),
            })
            .collect();
        Ok(code.with_states(&states))
    }
    /// The network.
    pub fn network(&self) -> &'n Network {
        self.network
    }
    /// Its wires.
    pub fn wires(&self) -> &Wires<'n> {
        &self.wires
    }
    /// Its rules for greedy recovery.
    pub fn greedy(&self) -> &Greedy {
        &self.greedy
    }
    /// Checks of its stabilizer form, primes ascending; empty where there is none.
    pub fn checks(&self) -> &[Checks] {
        &self.checks
    }
    /// The stabilizer states that it was given, primes ascending.
    pub fn states(&self) -> &[PrimePart] {
        &self.states
    }
    /// Whether exact answers over finite fields can be had.
    pub fn is_stabilizer(&self) -> bool {
        !self.checks.is_empty()
    }
    /// Boundary legs.
    pub fn boundary(&self) -> usize {
        self.network.boundary().len()
    }
    /// Bulk legs.
    pub fn bulk(&self) -> usize {
        self.network.bulk().len()
    }
    /// Name of a bulk leg.
    pub fn bulk_name(&self, leg: usize) -> &'n str {
        self.network.label_name(self.network.bulk()[leg])
    }
    /// The bulk leg of this name: its place in the network's list.
    ///
    /// # Errors
    /// [`CodeError::NoSuchLeg`].
    pub fn find_bulk(&self, name: &str) -> Result<usize, CodeError> {
        (0..self.bulk()).find(|&k| self.bulk_name(k) == name).ok_or_else(|| CodeError::NoSuchLeg {
            leg: name.to_owned(),
            network: self.network.name().to_owned(),
            count: self.bulk(),
            first: self.bulk_name(0).to_owned(),
            last: self.bulk_name(self.bulk() - 1).to_owned(),
        })
    }
    /// The tensor that holds a bulk leg (the first, where several do).
    pub fn tensor_of_bulk(&self, leg: usize) -> TensorId {
        self.network.holders(self.network.bulk()[leg])[0]
    }
    /// The ring of each tensor, where known.
    pub fn rings(&self) -> Option<&[u32]> {
        self.network.layout().map(|l| l.ring.as_slice()).filter(|r| !r.is_empty())
    }
    /// The bulk leg in the middle: of the least ring where rings are known, else the one
    /// farthest from the boundary; the first of several.
    pub fn centre(&self) -> usize {
        if let Some(rings) = self.rings() {
            return (0..self.bulk())
                .min_by_key(|&k| rings[self.tensor_of_bulk(k).index()])
                .unwrap_or(0);
        }
        let depth = self.depths();
        (0..self.bulk())
            .max_by_key(|&k| (depth[self.tensor_of_bulk(k).index()], std::cmp::Reverse(k)))
            .unwrap_or(0)
    }
    /// Steps from the boundary to each tensor.
    fn depths(&self) -> Vec<u32> {
        let net = self.network;
        let mut depth = vec![u32::MAX; net.tensors()];
        let mut queue = std::collections::VecDeque::new();
        for &l in net.boundary() {
            for &t in net.holders(l) {
                if depth[t.index()] == u32::MAX {
                    depth[t.index()] = 0;
                    queue.push_back(t);
                }
            }
        }
        while let Some(t) = queue.pop_front() {
            for &l in net.legs(t) {
                for &u in net.holders(l) {
                    if depth[u.index()] == u32::MAX {
                        depth[u.index()] = depth[t.index()] + 1;
                        queue.push_back(u);
                    }
                }
            }
        }
        depth
    }
    /// The first tensor that has no stabilizer form, as an error.
    pub(super) fn not_stabilizer(&self, question: &'static str) -> CodeError {
        let net = self.network;
        let tensor = net
            .tensor_ids()
            .find(|&t| net.block(t).stabilizer().is_none())
            .unwrap_or(TensorId::new(0));
        CodeError::NotStabilizer {
            question,
            tensor: net.tensor_name(tensor),
            block: net.block(tensor).name().to_owned(),
        }
    }
    /// Empty holdings of boundary legs, one a prime.
    pub(super) fn held(&self) -> Vec<Held<'_>> {
        self.checks.iter().map(Held::new).collect()
    }
    /// Places of bulk labels in the network's list.
    pub fn bulk_places(&self, labels: &[Label]) -> Vec<usize> {
        labels.iter().filter_map(|l| self.network.bulk().iter().position(|b| b == l)).collect()
    }
}
