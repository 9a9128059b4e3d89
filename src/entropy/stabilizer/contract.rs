//! Networks of stabilizer tensors contracted as groups.

use super::digits::Packing;
use super::state::{Rows, State, Work};
use super::tableau::Tableau;
use crate::block::PrimePart;
use crate::entropy::the_core::copy_stabilizer;
use crate::entropy::{Node, Wires};
use crate::field::factorise;
use crate::network::TensorId;
use crate::order::{self, OrderError, Shape};
use crate::tensor::Label;
use crate::watch::{News, Watch};
use std::sync::Arc;
use thiserror::Error;

/// Why a network has no stabilizer state here.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum StabilizerError {
    /// A tensor without a known stabilizer form.
    #[error("tensor {tensor:?} ({block}) has no known stabilizer form")]
    NotStabilizer {
        /// The tensor.
        tensor: String,
        /// Its block.
        block: String,
    },
    /// The network contracts to zero.
    #[error("the network contracts to zero (seen at tensor {tensor:?}, modulo {prime})")]
    Zero {
        /// A tensor of the part that vanishes.
        tensor: String,
        /// The prime at which it was seen.
        prime: u32,
    },
    /// No order of contraction.
    #[error(transparent)]
    Order(#[from] OrderError),
    /// A stop was asked for.
    #[error("stopped while contracting over GF({prime}), after {done} of {total} steps")]
    Stopped {
        /// The prime.
        prime: u32,
        /// Steps done.
        done: usize,
        /// Steps in all.
        total: usize,
    },
}

/// Whether every tensor has a known stabilizer form, so that [`states`] can be asked.
pub fn has_states(wires: &Wires<'_>) -> bool {
    let network = wires.network();
    network.blocks().iter().all(|b| b.stabilizer().is_some())
}

/// The primes that divide some dimension of the network, ascending.
pub fn primes(wires: &Wires<'_>) -> Vec<u32> {
    let network = wires.network();
    let mut dims: Vec<usize> =
        (0..network.labels() as u32).map(|l| network.dim(Label::new(l))).collect();
    dims.sort_unstable();
    dims.dedup();
    let mut all: Vec<u32> =
        dims.iter().flat_map(|&d| factorise(d as u64)).map(|(p, _)| p as u32).collect();
    all.sort_unstable();
    all.dedup();
    all
}

/// Contracts a network of stabilizer tensors: one state a prime, which together are the state
/// (a product dimension is a product of spaces, and a stabilizer tensor is the product of its
/// parts on them).
///
/// Tensors are joined pairwise along a plan of [`crate::order`]. A bond joins digits a and b
/// by ⟨Φ| = Σ_j ⟨jj|: of the product group the elements with x_a = x_b and z_a = −z_b
/// survive, their digits a and b fall away, and their phase stays because
/// ⟨Φ|(X^x Z^z ⊗ X^x Z^−z) = ⟨Φ|. An element that then is a multiple of the identity must
/// have phase 1; otherwise the network is zero. Phases are tracked for every prime (powers of
/// exp(2πi/p); of i for p = 2).
///
/// Cost: 2·Σ digits of the bonds eliminations, each over the rows that it touches.
///
/// # Errors
/// [`StabilizerError`].
pub fn states(wires: &Wires<'_>, watch: &dyn Watch) -> Result<Vec<State>, StabilizerError> {
    let network = wires.network();
    for t in network.tensor_ids() {
        if network.block(t).stabilizer().is_none() {
            return Err(StabilizerError::NotStabilizer {
                tensor: network.tensor_name(t),
                block: network.block(t).name().to_owned(),
            });
        }
    }
    primes(wires)
        .into_iter()
        .map(|prime| Rows::dispatch(prime, OnePrime { wires, prime, watch }))
        .collect()
}

struct OnePrime<'a, 'n> {
    wires: &'a Wires<'n>,
    prime: u32,
    watch: &'a dyn Watch,
}

/// A part of the network on the way: generators over the digits of wires not yet joined.
struct Partial<P: Packing> {
    tableau: Tableau<P>,
    /// (wire, column of its digit 0); its further digits follow.
    legs: Vec<(u32, usize)>,
    /// A tensor of the part, to name it.
    tensor: u32,
}

impl Work<Result<State, StabilizerError>> for OnePrime<'_, '_> {
    fn with<P: Packing>(self, wrap: fn(Tableau<P>) -> Rows) -> Result<State, StabilizerError> {
        let digits: Vec<u32> = (0..self.wires.count() as u32).map(|w| self.digits(w)).collect();
        let open_wires: Vec<u32> =
            (0..self.wires.open()).map(|k| self.wires.open_wire(k)).collect();
        let open_digits: Vec<u32> = open_wires.iter().map(|&w| digits[w as usize]).collect();
        let nodes = self.wires.nodes();
        let mut parts: Vec<Option<Partial<P>>> =
            (0..nodes).map(|n| Some(self.leaf(n, &digits))).collect();
        let steps = self.steps(&digits, &open_wires)?;
        let total = steps.len();
        for (done, (a, b)) in steps.into_iter().enumerate() {
            if done % 64 == 0 {
                self.watch.tell(News::Progress { done: done as u64, total: total as u64 });
                if self.watch.stop() {
                    return Err(StabilizerError::Stopped { prime: self.prime, done, total });
                }
            }
            let (a, b) = (parts[a as usize].take(), parts[b as usize].take());
            let (a, b) = (a.expect("a plan uses a part once"), b.expect("a plan uses a part once"));
            parts.push(Some(self.join(&a, &b, &digits)?));
        }
        let last = match parts.pop().flatten() {
            Some(last) => last,
            None => Partial { tableau: Tableau::empty(self.prime, 0), legs: Vec::new(), tensor: 0 },
        };
        let mut place = vec![usize::MAX; self.wires.count()];
        for &(w, column) in &last.legs {
            place[w as usize] = column;
        }
        let columns: Vec<usize> = open_wires
            .iter()
            .flat_map(|&w| (0..digits[w as usize] as usize).map(move |d| (w, d)))
            .map(|(w, d)| place[w as usize] + d)
            .collect();
        Ok(State::new(self.prime, &open_digits, wrap(last.tableau.select(&columns))))
    }
}

impl OnePrime<'_, '_> {
    fn digits(&self, wire: u32) -> u32 {
        let mut dim = self.wires.dim(wire);
        let mut count = 0;
        while dim.is_multiple_of(self.prime as usize) {
            dim /= self.prime as usize;
            count += 1;
        }
        count
    }
    /// The plan: the same search as for numbers, each wire as large as its part at this prime.
    fn steps(&self, digits: &[u32], open: &[u32]) -> Result<Vec<(u32, u32)>, StabilizerError> {
        if self.wires.nodes() < 2 {
            return Ok(Vec::new());
        }
        let shape = Shape {
            sizes: digits.iter().map(|&d| u64::from(self.prime).pow(d)).collect(),
            tensors: (0..self.wires.nodes())
                .map(|n| self.wires.wires_of(n).iter().map(|&w| Label::new(w)).collect())
                .collect(),
            open: open.iter().map(|&w| Label::new(w)).collect(),
        };
        // Groups grow with the number of legs, not with the product of their dimensions: any
        // order that keeps neighbours together will do.
        let request = order::Request { work: 1, ..order::Request::default() };
        Ok(order::search(&shape, &request, self.watch)?.plan.steps)
    }
    fn leaf<P: Packing>(&self, node: usize, digits: &[u32]) -> Partial<P> {
        let network = self.wires.network();
        let wires = self.wires.wires_of(node);
        let part: Option<Arc<PrimePart>> = match self.wires.node(node) {
            Node::Tensor(t) => network
                .block(t)
                .stabilizer()
                .and_then(|s| s.parts.iter().find(|p| p.prime == self.prime).cloned()),
            Node::Copy(l) => copy_stabilizer(network.dim(l), wires.len())
                .and_then(|s| s.parts.into_iter().find(|p| p.prime == self.prime)),
            Node::Ones(l) => copy_stabilizer(network.dim(l), 1)
                .and_then(|s| s.parts.into_iter().find(|p| p.prime == self.prime)),
        };
        let mut legs = Vec::with_capacity(wires.len());
        let mut width = 0;
        for &w in wires {
            legs.push((w, width));
            width += digits[w as usize] as usize;
        }
        let mut tableau = Tableau::empty(self.prime, width);
        if let Some(part) = part {
            debug_assert_eq!(part.width(), width);
            for (row, generator) in part.generators.iter().enumerate() {
                tableau.push_zero(part.phases[row]);
                for c in 0..width {
                    tableau.set(row, c, false, generator[c]);
                    tableau.set(row, c, true, generator[width + c]);
                }
            }
        }
        Partial { tableau, legs, tensor: node as u32 }
    }
    fn join<P: Packing>(
        &self,
        a: &Partial<P>,
        b: &Partial<P>,
        digits: &[u32],
    ) -> Result<Partial<P>, StabilizerError> {
        let offset = a.tableau.columns();
        let mut tableau = a.tableau.beside(&b.tableau);
        let mut legs: Vec<(u32, usize)> = Vec::with_capacity(a.legs.len() + b.legs.len());
        let mut pairs: Vec<(usize, usize)> = Vec::new();
        let mut of_b: Vec<(u32, usize)> = b.legs.iter().map(|&(w, c)| (w, c + offset)).collect();
        of_b.sort_unstable();
        let mut bond = vec![false; of_b.len()];
        for &(w, c) in &a.legs {
            match of_b.binary_search_by_key(&w, |l| l.0) {
                Ok(k) => {
                    bond[k] = true;
                    pairs.extend((0..digits[w as usize] as usize).map(|d| (c + d, of_b[k].1 + d)));
                }
                Err(_) => legs.push((w, c)),
            }
        }
        legs.extend(of_b.iter().zip(&bond).filter(|(_, b)| !**b).map(|(l, _)| *l));
        let p = self.prime;
        for &(u, v) in &pairs {
            tableau.restrict(|t, r| (t.x(r, u) + p - t.x(r, v)) % p, true);
            tableau.restrict(|t, r| (t.z(r, u) + t.z(r, v)) % p, true);
        }
        for &(u, v) in &pairs {
            tableau.clear(u);
            tableau.clear(v);
        }
        let kept: usize = legs.iter().map(|l| digits[l.0 as usize] as usize).sum();
        if tableau.rows() > kept {
            let columns: Vec<usize> =
                legs.iter().flat_map(|&(w, c)| c..c + digits[w as usize] as usize).collect();
            let rank = tableau.echelon(&columns, true);
            while tableau.rows() > rank {
                let last = tableau.rows() - 1;
                if tableau.phase(last) != 0 {
                    return Err(self.zero(a.tensor));
                }
                tableau.swap_remove(last);
            }
        }
        if 2 * kept + 64 < tableau.columns() {
            let mut columns = Vec::with_capacity(kept);
            for (w, c) in &mut legs {
                let from = *c;
                *c = columns.len();
                columns.extend(from..from + digits[*w as usize] as usize);
            }
            tableau = tableau.select(&columns);
        }
        Ok(Partial { tableau, legs, tensor: a.tensor })
    }
    fn zero(&self, node: u32) -> StabilizerError {
        let network = self.wires.network();
        let t = node.min(network.tensors().saturating_sub(1) as u32);
        StabilizerError::Zero { tensor: network.tensor_name(TensorId::new(t)), prime: self.prime }
    }
}
