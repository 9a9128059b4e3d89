//! One observation: a region of a case with its answer, as tables hold it.

use super::answer::{Answer, Evidence};
use super::regions::{Kind, parts};
use super::run::CaseOutcome;
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;

/// One region with its answer. In legs where all boundary legs share one dimension.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Row {
    /// The region, as `0..5,7`.
    pub region: String,
    /// Why it was asked about.
    pub kind: Kind,
    /// Its name, for a named one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub name: Option<String>,
    /// First site, for an interval.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub start: Option<u64>,
    /// Boundary sites.
    pub sites: u64,
    /// Maximal runs of sites.
    pub intervals: u64,
    /// Legs that the minimal cut crosses.
    pub cut_legs: u64,
    /// log of the product of their dimensions.
    pub cut_nats: f64,
    /// The entropy; none for `bounds`.
    pub entropy_nats: Option<f64>,
    /// The entropy in legs.
    pub entropy_legs: Option<f64>,
    /// Proven lower bound.
    pub lower_nats: f64,
    /// Proven upper bound.
    pub upper_nats: f64,
    /// Proven lower bound in legs.
    pub lower_legs: Option<f64>,
    /// Proven upper bound in legs.
    pub upper_legs: Option<f64>,
    /// How it is known.
    pub evidence: Evidence,
    /// Numerical error or error bar.
    pub error_nats: f64,
    /// Tensors of the core.
    pub core_tensors: u64,
    /// log10 of multiply-adds spent, or of those that the exact answer would cost.
    pub log10_multiply_adds: Option<f64>,
    /// Bytes at the peak.
    pub peak_bytes: Option<u64>,
    /// Further measures, in nats.
    #[serde(default, skip_serializing_if = "BTreeMap::is_empty")]
    pub measures: BTreeMap<String, f64>,
    /// How it was found.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub how: String,
}

impl Row {
    /// Whether the entropy is known and equals the minimal cut (to 10⁻⁹ nats).
    pub fn meets_cut(&self) -> bool {
        self.entropy_nats.is_some_and(|s| (s - self.cut_nats).abs() < 1e-9)
    }
    /// Whether the entropy is proven to lie below the minimal cut.
    pub fn below_cut(&self) -> bool {
        self.upper_nats < self.cut_nats - 1e-9
    }
}

/// Nats in legs of dimension `dim`, rounded to 10⁻¹² so that whole numbers read as such.
pub fn legs(nats: f64, dim: usize) -> f64 {
    let x = nats / (dim as f64).ln();
    (x * 1e12).round() / 1e12
}

/// The rows of a case, in the order asked; regions without an answer are left out.
pub fn rows(c: &CaseOutcome) -> Vec<Row> {
    let dim = c.network.boundary_dim().filter(|&d| d > 1);
    let in_legs = |nats: f64| dim.map(|d| legs(nats, d));
    c.asked
        .iter()
        .zip(&c.answers)
        .filter_map(|(asked, answer)| Some((asked, answer.as_ref()?)))
        .map(|(asked, a): (_, &Answer)| Row {
            region: asked.region.show(&c.network),
            kind: asked.kind,
            name: asked.name.clone(),
            start: asked.interval.map(|(s, _)| s as u64),
            sites: asked.region.sites() as u64,
            intervals: parts(&asked.region) as u64,
            cut_legs: a.cut_legs,
            cut_nats: a.cut_nats,
            entropy_nats: a.entropy_nats,
            entropy_legs: a.entropy_nats.and_then(in_legs),
            lower_nats: a.lower_nats,
            upper_nats: a.upper_nats,
            lower_legs: in_legs(a.lower_nats),
            upper_legs: in_legs(a.upper_nats),
            evidence: a.evidence,
            error_nats: a.error_nats,
            core_tensors: a.core_tensors,
            log10_multiply_adds: a.log10_multiply_adds,
            peak_bytes: a.peak_bytes,
            measures: a.measures.iter().cloned().collect(),
            how: a.how.clone(),
        })
        .collect()
}
