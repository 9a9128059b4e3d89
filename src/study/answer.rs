//! What is known about one region.

use serde::{Deserialize, Serialize};

/// How an entropy was found. Listed from the cheapest on.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Evidence {
    /// Closure from both sides met: the cut is exact and the spectrum flat.
    Geometry,
    /// Ranks over a finite field.
    FiniteField,
    /// A contraction of the core, with singular values.
    Contraction,
    /// An estimate with an error bar.
    Estimate,
    /// Proven lower and upper bound only.
    Bounds,
}

impl Evidence {
    /// All, from the cheapest on.
    pub const ALL: [Self; 5] =
        [Self::Geometry, Self::FiniteField, Self::Contraction, Self::Estimate, Self::Bounds];
    /// As written in tables.
    pub fn word(self) -> &'static str {
        match self {
            Self::Geometry => "geometry",
            Self::FiniteField => "finite-field",
            Self::Contraction => "contraction",
            Self::Estimate => "estimate",
            Self::Bounds => "bounds",
        }
    }
}

/// The entropy of one region, with its evidence. Entropies in nats.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Answer {
    /// Legs that the minimal cut crosses.
    pub cut_legs: u64,
    /// log of the product of their dimensions.
    pub cut_nats: f64,
    /// The entropy; none for `bounds`.
    pub entropy_nats: Option<f64>,
    /// Proven lower bound.
    pub lower_nats: f64,
    /// Proven upper bound.
    pub upper_nats: f64,
    /// How it is known.
    pub evidence: Evidence,
    /// Numerical error of a contraction, error bar of an estimate.
    pub error_nats: f64,
    /// Tensors of the core; 0 for `geometry`.
    pub core_tensors: u64,
    /// log10 of the multiply-adds spent, or that the exact answer would cost.
    pub log10_multiply_adds: Option<f64>,
    /// Bytes at the peak of that contraction.
    pub peak_bytes: Option<u64>,
    /// Distinct Schmidt values, descending, each with its multiplicity; where kept.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub spectrum: Vec<(f64, f64)>,
    /// Further measures by name, in nats.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub measures: Vec<(String, f64)>,
    /// How it was found, in a sentence.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub how: String,
}
