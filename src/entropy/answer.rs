//! Questions, answers, prices and what can go wrong.

use super::Spectrum;
use super::cut::Cut;
use crate::network::{NetworkError, TensorId};
use serde::Serialize;
use std::fmt;
use thiserror::Error;

/// How an entropy is known, from the cheapest to the dearest and then to the least.
///
/// An answer made of several parts has the evidence of its last part in this order.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Evidence {
    /// Isometries absorb the whole network: the minimal cut is exact, the spectrum flat.
    Geometry,
    /// Ranks over finite fields: exact, the spectrum flat.
    FiniteField,
    /// Singular values of the contracted core, with a numerical error.
    Contraction,
    /// A random estimate with an error bar; only on request.
    Estimate,
    /// A proven lower and a proven upper bound that differ, or a state that could not be
    /// shown to differ from zero.
    Bounds,
}

impl fmt::Display for Evidence {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(match self {
            Evidence::Geometry => "geometry",
            Evidence::FiniteField => "finite-field",
            Evidence::Contraction => "contraction",
            Evidence::Estimate => "estimate",
            Evidence::Bounds => "bounds",
        })
    }
}

/// What may be spent, and which evidence is admitted.
#[derive(Debug, Clone, PartialEq)]
pub struct Request {
    /// Bytes that one core's contraction and decomposition may hold. Default 4 GiB.
    pub memory_bytes: u64,
    /// log10 of the multiply-adds that one core may take, contraction and decomposition
    /// together. Default 11.3, some ten seconds of work.
    pub log10_multiply_adds: f64,
    /// No core is begun after this many seconds by [`crate::watch::Watch::seconds`]. Default:
    /// no limit. Where it strikes, answers depend on the machine's speed.
    pub seconds: f64,
    /// Whether finite-field evidence is admitted. Default yes.
    pub finite_field: bool,
    /// Whether contraction is admitted. Default yes.
    pub contraction: bool,
    /// Whether an estimate is made where no exact answer fits. Default no.
    pub estimate: bool,
    /// Seed of the search for contraction orders and of all that is random. Default 0.
    pub seed: u64,
}

impl Default for Request {
    fn default() -> Self {
        Self {
            memory_bytes: 4 << 30,
            log10_multiply_adds: 11.3,
            seconds: f64::INFINITY,
            finite_field: true,
            contraction: true,
            estimate: false,
            seed: 0,
        }
    }
}

/// What an exact answer costs, of the dearest core.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Price {
    /// log10 of the multiply-adds of the contraction.
    pub log10_contraction: f64,
    /// log10 of the multiply-adds of the decomposition.
    pub log10_decomposition: f64,
    /// log2 of the bytes alive at the peak.
    pub log2_bytes: f64,
    /// Rows of the matrix between the two cuts, as log2.
    pub log2_rows: f64,
    /// Its columns, as log2.
    pub log2_columns: f64,
}

impl Price {
    /// log10 of all multiply-adds.
    pub fn log10_multiply_adds(&self) -> f64 {
        let top = self.log10_contraction.max(self.log10_decomposition);
        if top == f64::NEG_INFINITY {
            return top;
        }
        top + (10f64.powf(self.log10_contraction - top)
            + 10f64.powf(self.log10_decomposition - top))
        .log10()
    }
}

/// What is known about the entropy across one bipartition of one piece of a core.
#[derive(Debug, Clone, PartialEq)]
pub struct Part {
    /// Tensors of the piece.
    pub tensors: usize,
    /// Proven lower bound, nats.
    pub lower: f64,
    /// Proven upper bound, nats.
    pub upper: f64,
    /// How it is known.
    pub evidence: Evidence,
    /// Its spectrum, where it is known.
    pub spectrum: Option<Spectrum>,
    /// Numerical error of the entropy, nats (0 for exact evidence).
    pub error: f64,
    /// What the contraction cost, or would cost.
    pub price: Option<Price>,
    /// A random estimate of the entropy and its standard error, nats, where one was asked for.
    pub estimate: Option<(f64, f64)>,
    /// Rényi entropy of order 2, nats, from four copies: where the spectrum did not fit but
    /// this did. A lower bound on the entropy.
    pub renyi2: Option<f64>,
    /// Why it was not solved, where it was not.
    pub reason: Option<Unsolved>,
}

/// Why a piece of a core came back as bounds.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum Unsolved {
    /// The matrix or an intermediate tensor is larger than the memory given.
    Memory,
    /// It takes more multiply-adds than allowed.
    Work,
    /// The time was up, or a stop was asked for.
    Time,
    /// The request admits neither contraction nor a finite field for it.
    NotAdmitted,
}

impl fmt::Display for Unsolved {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(match self {
            Unsolved::Memory => "more memory than was given",
            Unsolved::Work => "more multiply-adds than were allowed",
            Unsolved::Time => "more time than was given",
            Unsolved::NotAdmitted => "evidence that was not admitted",
        })
    }
}

/// The entropy of one region, with its evidence.
#[derive(Debug, Clone, PartialEq)]
pub struct Answer {
    /// The minimal cut: an upper bound always.
    pub cut: Cut,
    /// Proven lower bound, nats. Equal to `upper` unless the evidence is `estimate` or `bounds`.
    pub lower: f64,
    /// Proven upper bound, nats.
    pub upper: f64,
    /// How it is known.
    pub evidence: Evidence,
    /// Numerical error, nats; 0 for geometry and finite fields.
    pub error: f64,
    /// The spectrum, where every part's is known.
    pub spectrum: Option<Spectrum>,
    /// Σ ln(dim) of the wires that run straight from one side to the other, nats.
    pub straight: f64,
    /// The pieces of the core.
    pub parts: Vec<Part>,
    /// The tensors of each piece.
    pub cores: Vec<Vec<TensorId>>,
}

impl Answer {
    /// The entropy in nats, where it is known exactly or within `error`; an estimate is not.
    pub fn entropy(&self) -> Option<f64> {
        (self.evidence < Evidence::Estimate).then_some(self.upper)
    }
    /// The estimate in nats and its standard error, where the evidence is `estimate`.
    pub fn estimate(&self) -> Option<(f64, f64)> {
        if self.evidence != Evidence::Estimate {
            return None;
        }
        let mut total = (self.straight, 0.0);
        for part in &self.parts {
            let (s, e) = part.estimate.unwrap_or((part.upper, part.error));
            total.0 += s;
            total.1 += e * e;
        }
        Some((total.0, total.1.sqrt()))
    }
    /// Whether the entropy is known and meets the minimal cut within `tolerance` nats; `None`
    /// where the bounds leave it open.
    pub fn meets_cut(&self, tolerance: f64) -> Option<bool> {
        if self.upper < self.cut.nats - tolerance {
            Some(false)
        } else if self.lower >= self.cut.nats - tolerance {
            Some(true)
        } else if self.evidence >= Evidence::Estimate {
            None
        } else {
            Some(false)
        }
    }
    /// The price of the dearest part that was contracted or would have to be.
    pub fn price(&self) -> Option<Price> {
        self.parts
            .iter()
            .filter_map(|p| p.price)
            .max_by(|a, b| a.log10_multiply_adds().total_cmp(&b.log10_multiply_adds()))
    }
}

/// Why there is no answer.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum EntropyError {
    /// The network contracts to zero: it is not a state.
    #[error(
        "the network contracts to zero (seen in the core of tensor {tensor:?}); there is no state whose entropy could be asked"
    )]
    Zero {
        /// A tensor of the piece that vanishes.
        tensor: String,
    },
    /// A network of pieces could not be built.
    #[error(transparent)]
    Network(#[from] NetworkError),
    /// The order of a core's contraction could not be found.
    #[error(transparent)]
    Order(#[from] crate::order::OrderError),
    /// A core's contraction failed.
    #[error(transparent)]
    Contract(#[from] crate::contract::ContractError),
    /// A core's decomposition failed.
    #[error(transparent)]
    Linalg(#[from] crate::linalg::LinalgError),
    /// A finite-field contraction failed.
    #[error(transparent)]
    Stabilizer(#[from] super::stabilizer::StabilizerError),
    /// Regions that do not suit a measure.
    #[error("{measure} takes {least} to {most} disjoint regions, but {given} were given{}",
        .overlap.map_or(String::new(), |(i, j)| format!(", and numbers {i} and {j} overlap")))]
    Regions {
        /// The measure.
        measure: String,
        /// Fewest regions.
        least: usize,
        /// Most regions.
        most: usize,
        /// Regions given.
        given: usize,
        /// Numbers of two that overlap.
        overlap: Option<(usize, usize)>,
    },
    /// A stop was asked for.
    #[error("stopped after {done} of {total} regions")]
    Stopped {
        /// Regions answered.
        done: usize,
        /// Regions asked.
        total: usize,
    },
}
