//! Certificates: what was found about a region, so that it can be checked without trust.

use super::closure::{self, Closure, ReplayError, Side};
use super::cut::Cut;
use super::the_core::split;
use super::wires::{End, Node, Wires};
use crate::network::{Region, RegionError};
use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};
use thiserror::Error;

/// The record of one region: who absorbs what, in which order, and a cut.
///
/// It proves Σ ln(dim) over `straight` + S(core) = S(region), and S(region) ≤ Σ ln(dim) over
/// `cut`. With an empty core the first is the entropy itself.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct Certificate {
    /// Format version.
    pub lierne_certificate: u32,
    /// SHA-256 over tensors, legs, dimensions and block names of the network.
    pub network: String,
    /// The region, as written.
    pub region: String,
    /// Tensors absorbed by the region's side (`"region"`) or the complement's, in order. A
    /// node beyond the tensors is the copy tensor or the sum of a label.
    pub steps: Vec<(Sided, u32)>,
    /// Labels of wires that run straight from one side to the other.
    pub straight: Vec<String>,
    /// Nodes of the core.
    pub core: Vec<u32>,
    /// Labels of a cut that separates region and complement.
    pub cut: Vec<String>,
    /// Proven lower bound on the entropy without the core, nats.
    pub lower_nats: f64,
    /// Proven upper bound, nats.
    pub upper_nats: f64,
}

/// A side, as written.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Sided {
    /// The region's side.
    Region,
    /// The complement's side.
    Complement,
}

/// Why a certificate does not hold.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum CertificateError {
    /// Another format.
    #[error("certificate of format {found}; format 1 is read")]
    Version {
        /// The format found.
        found: u32,
    },
    /// Another network.
    #[error("the certificate belongs to another network ({found}, not {expected})")]
    Network {
        /// Fingerprint of the network at hand.
        expected: String,
        /// Fingerprint in the certificate.
        found: String,
    },
    /// The region is none of this network.
    #[error(transparent)]
    Region(#[from] RegionError),
    /// A step does not hold.
    #[error(transparent)]
    Step(#[from] ReplayError),
    /// What remains after the steps is not what the certificate says.
    #[error("after the steps {what} is {actual:?}, but the certificate says {claimed:?}")]
    Remains {
        /// What differs.
        what: &'static str,
        /// What the steps leave.
        actual: Vec<String>,
        /// What is claimed.
        claimed: Vec<String>,
    },
    /// The cut does not separate.
    #[error(
        "the cut does not separate the region from its complement: site or leg {leg:?} is still joined to it"
    )]
    Joined {
        /// An open leg of the complement that the region reaches.
        leg: String,
    },
    /// A label of the cut that the network does not have.
    #[error("the cut names label {label:?}, which the network does not have")]
    NoSuchLabel {
        /// The label.
        label: String,
    },
    /// A number that does not follow.
    #[error("the certificate claims {what} = {claimed} nats, but the record gives {actual}")]
    Number {
        /// Which bound.
        what: &'static str,
        /// What is claimed.
        claimed: f64,
        /// What follows.
        actual: f64,
    },
}

/// Fingerprint of a network's tensors, legs and dimensions.
pub fn fingerprint(wires: &Wires<'_>) -> String {
    let network = wires.network();
    let mut hash = Sha256::new();
    for t in network.tensor_ids() {
        hash.update(network.block(t).name());
        for &l in network.legs(t) {
            hash.update([0]);
            hash.update(network.label_name(l));
            hash.update((network.dim(l) as u64).to_le_bytes());
        }
        hash.update([1]);
    }
    for list in [network.boundary(), network.bulk(), network.summed()] {
        for &l in list {
            hash.update(network.label_name(l));
            hash.update([2]);
        }
        hash.update([3]);
    }
    hash.finalize().iter().take(16).map(|b| format!("{b:02x}")).collect()
}

impl Certificate {
    /// Writes down a closure and a cut of a region.
    pub fn record(wires: &Wires<'_>, region: &Region, closure: &Closure, cut: &Cut) -> Self {
        let network = wires.network();
        let inside = wires.inside(region);
        let parts = split(wires, &inside, closure);
        let name = |l: &crate::tensor::Label| network.label_name(*l).to_owned();
        let nats = |labels: &[crate::tensor::Label]| -> f64 {
            labels.iter().map(|&l| (network.dim(l) as f64).ln()).sum()
        };
        let mut straight: Vec<String> = parts.straight.iter().map(name).collect();
        straight.sort_unstable();
        let mut core: Vec<u32> = parts.cores.iter().flat_map(|c| c.nodes.clone()).collect();
        core.sort_unstable();
        Self {
            lierne_certificate: 1,
            network: fingerprint(wires),
            region: region.show(network),
            steps: closure
                .steps
                .iter()
                .map(|&(side, n)| {
                    (if side == Side::Region { Sided::Region } else { Sided::Complement }, n)
                })
                .collect(),
            lower_nats: nats(&parts.straight),
            straight,
            core,
            cut: cut.near.iter().map(name).collect(),
            upper_nats: nats(&cut.near),
        }
    }
    /// Checks every claim against the network: each step by one question to the tensor's
    /// table, what remains by looking, the cut by walking from the region without crossing it.
    ///
    /// # Errors
    /// The first claim that does not hold.
    pub fn verify(&self, wires: &Wires<'_>) -> Result<(), CertificateError> {
        let network = wires.network();
        if self.lierne_certificate != 1 {
            return Err(CertificateError::Version { found: self.lierne_certificate });
        }
        let expected = fingerprint(wires);
        if expected != self.network {
            return Err(CertificateError::Network { expected, found: self.network.clone() });
        }
        let inside = wires.inside(&Region::parse(&self.region, network)?);
        let steps: Vec<(Side, u32)> = self
            .steps
            .iter()
            .map(|&(s, n)| (if s == Sided::Region { Side::Region } else { Side::Complement }, n))
            .collect();
        let owner = closure::replay(wires, &inside, &steps)?;
        let core: Vec<String> =
            (0..owner.len()).filter(|&n| owner[n].is_none()).map(|n| n.to_string()).collect();
        let claimed: Vec<String> = self.core.iter().map(u32::to_string).collect();
        if core != claimed {
            return Err(CertificateError::Remains { what: "the core", actual: core, claimed });
        }
        let side_of = |end: End| match end {
            End::Open(k) if inside[k as usize] => Some(Side::Region),
            End::Open(_) => Some(Side::Complement),
            End::Node { node, .. } => owner[node as usize],
        };
        let mut straight = Vec::new();
        let mut lower = 0.0;
        for w in 0..wires.count() as u32 {
            let [a, b] = wires.ends(w).map(side_of);
            if a.is_some() && b.is_some() && a != b {
                straight.push(network.label_name(wires.label(w)).to_owned());
                lower += (wires.dim(w) as f64).ln();
            }
        }
        straight.sort_unstable();
        if straight != self.straight {
            return Err(CertificateError::Remains {
                what: "the list of straight wires",
                actual: straight,
                claimed: self.straight.clone(),
            });
        }
        let mut upper = 0.0;
        let mut severed = vec![false; network.labels()];
        for name in &self.cut {
            let label = network
                .find_label(name)
                .ok_or_else(|| CertificateError::NoSuchLabel { label: name.clone() })?;
            if !std::mem::replace(&mut severed[label.index()], true) {
                upper += (network.dim(label) as f64).ln();
            }
        }
        if let Some(leg) = reaches(wires, &inside, &severed) {
            let leg = network.label_name(wires.open_label(leg)).to_owned();
            return Err(CertificateError::Joined { leg });
        }
        for (what, claimed, actual) in
            [("lower", self.lower_nats, lower), ("upper", self.upper_nats, upper)]
        {
            if (claimed - actual).abs() > 1e-9 * (1.0 + actual.abs()) {
                return Err(CertificateError::Number { what, claimed, actual });
            }
        }
        Ok(())
    }
}

/// An open leg of the complement that the region reaches without crossing a severed label.
/// Wires of dimension 1 hold nothing together.
fn reaches(wires: &Wires<'_>, inside: &[bool], severed: &[bool]) -> Option<usize> {
    let passes = |w: u32| !severed[wires.label(w).index()] && wires.dim(w) > 1;
    let mut seen = vec![false; wires.nodes()];
    let mut stack: Vec<u32> = Vec::new();
    for (k, _) in inside.iter().enumerate().filter(|(_, i)| **i) {
        let w = wires.open_wire(k);
        if passes(w) {
            for end in wires.ends(w) {
                if let End::Node { node, .. } = end {
                    stack.push(node);
                }
            }
        }
    }
    while let Some(n) = stack.pop() {
        if std::mem::replace(&mut seen[n as usize], true) {
            continue;
        }
        debug_assert!(!matches!(wires.node(n as usize), Node::Copy(l) if severed[l.index()]));
        for &w in wires.wires_of(n as usize) {
            if !passes(w) {
                continue;
            }
            for end in wires.ends(w) {
                match end {
                    End::Node { node, .. } => stack.push(node),
                    End::Open(k) if !inside[k as usize] => return Some(k as usize),
                    End::Open(_) => {}
                }
            }
        }
    }
    None
}
