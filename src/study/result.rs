//! `result.json`: everything that a study has found, in one object.
//!
//! The file holds no time and nothing of the machine, so that the same study, seed and
//! version give the same bytes; those are in `provenance.json`.

use super::answer::Evidence;
use super::case::Setting;
use super::questions::Finding;
use super::regions::Kind;
use super::row::{self, Row};
use super::run::{CaseOutcome, Outcome};
use super::{StudyFile, fit};
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;

/// Version of the layout of `result.json`.
pub const VERSION: u32 = 1;

/// The whole of `result.json`.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct StudyResult {
    /// [`VERSION`].
    pub lierne_result: u32,
    /// Version of the program.
    pub version: String,
    /// The study's name.
    pub name: String,
    /// What it is for.
    pub about: String,
    /// Its seed.
    pub seed: u64,
    /// Whether every question has its answer.
    pub complete: bool,
    /// Answers asked for.
    pub asked: u64,
    /// Answers at hand.
    pub answered: u64,
    /// The cases in the order of the study.
    pub cases: Vec<CaseResult>,
}

/// One network of the study.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CaseResult {
    /// What it is called in tables.
    pub case: String,
    /// Where it stands in the sweep.
    pub setting: Setting,
    /// SHA-256 of what the network was made from.
    pub digest: String,
    /// Tensors.
    pub tensors: u64,
    /// Bonds.
    pub bonds: u64,
    /// Boundary legs.
    pub boundary: u64,
    /// Bulk legs.
    pub bulk: u64,
    /// Common dimension of the boundary legs, where they have one.
    pub boundary_dimension: Option<u64>,
    /// The distinct blocks.
    pub blocks: Vec<BlockUse>,
    /// Counts of the answers.
    pub counts: Counts,
    /// Means over the intervals of each length, where all of them are known exactly.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub by_length: Vec<ByLength>,
    /// Fit of the means, where there are enough lengths.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub fit: Option<fit::Fit>,
    /// One object a region.
    pub regions: Vec<Row>,
    /// Answers to the other questions.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub findings: Vec<Finding>,
}

/// A block of a network.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct BlockUse {
    /// Its name.
    pub name: String,
    /// Dimensions of its legs.
    pub dimensions: Vec<u64>,
    /// Tensors that are this block.
    pub tensors: u64,
    /// Whether every set of at most half its legs is proven isometric.
    pub perfect: bool,
    /// Primes over which it is a stabilizer tensor; empty where it is none.
    pub stabilizer_primes: Vec<u32>,
}

/// Counts of answers.
#[derive(Debug, Clone, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Counts {
    /// By evidence, every kind listed.
    pub evidence: BTreeMap<String, u64>,
    /// By kind of region: how many, how many meet the cut, how many are proven below it.
    pub kinds: BTreeMap<String, KindCounts>,
}

/// Counts for one kind of region.
#[derive(Debug, Clone, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct KindCounts {
    /// Regions with an answer.
    pub regions: u64,
    /// Entropy equals the minimal cut.
    pub meet_cut: u64,
    /// Entropy proven below the minimal cut.
    pub below_cut: u64,
    /// Bounds only.
    pub open: u64,
}

/// The intervals of one length.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ByLength {
    /// Sites.
    pub length: u64,
    /// Intervals asked.
    pub intervals: u64,
    /// Mean entropy.
    pub mean_nats: f64,
    /// Mean entropy in legs.
    pub mean_legs: Option<f64>,
    /// Least entropy.
    pub least_nats: f64,
    /// Largest entropy.
    pub largest_nats: f64,
    /// Mean minimal cut.
    pub mean_cut_nats: f64,
}

impl StudyResult {
    /// Puts an outcome in order.
    pub fn of(file: &StudyFile, outcome: &Outcome) -> Self {
        Self {
            lierne_result: VERSION,
            version: env!("CARGO_PKG_VERSION").into(),
            name: file.shown_name(),
            about: file.about.clone(),
            seed: file.seed,
            complete: outcome.complete(),
            asked: outcome.total as u64,
            answered: outcome.done as u64,
            cases: outcome.cases.iter().map(case).collect(),
        }
    }
}

fn case(c: &CaseOutcome) -> CaseResult {
    let net = &c.network;
    let rows = row::rows(c);
    let by_length = by_length(&rows, net.boundary_dim().filter(|&d| d > 1));
    let n = net.boundary().len();
    CaseResult {
        case: c.case.id.clone(),
        setting: c.case.setting.clone(),
        digest: c.case.digest.clone(),
        tensors: net.tensors() as u64,
        bonds: net.bonds() as u64,
        boundary: n as u64,
        bulk: net.bulk().len() as u64,
        boundary_dimension: net.boundary_dim().map(|d| d as u64),
        blocks: blocks(c),
        counts: counts(&rows),
        // The law is one of pure states: with open bulk legs there is nothing to fit.
        fit: net
            .bulk()
            .is_empty()
            .then(|| {
                let means: Vec<(f64, f64)> =
                    by_length.iter().map(|l| (l.length as f64, l.mean_nats)).collect();
                fit::fit(&means, n)
            })
            .flatten(),
        by_length,
        regions: rows,
        findings: c.findings.iter().flatten().cloned().collect(),
    }
}

fn blocks(c: &CaseOutcome) -> Vec<BlockUse> {
    let net = &c.network;
    let mut used = vec![0u64; net.blocks().len()];
    for t in net.tensor_ids() {
        used[net.block_number(t)] += 1;
    }
    net.blocks()
        .iter()
        .zip(used)
        .map(|(b, tensors)| BlockUse {
            name: b.name().to_owned(),
            dimensions: b.dims().iter().map(|&d| d as u64).collect(),
            tensors,
            perfect: b.isometries().is_perfect(),
            stabilizer_primes: b
                .stabilizer()
                .map(|s| s.parts.iter().map(|p| p.prime).collect())
                .unwrap_or_default(),
        })
        .collect()
}

fn counts(rows: &[Row]) -> Counts {
    let mut out = Counts::default();
    for e in Evidence::ALL {
        out.evidence.insert(e.word().into(), 0);
    }
    for r in rows {
        *out.evidence.entry(r.evidence.word().into()).or_default() += 1;
        let k = out.kinds.entry(r.kind.word().into()).or_default();
        k.regions += 1;
        k.meet_cut += u64::from(r.meets_cut());
        k.below_cut += u64::from(r.below_cut());
        k.open += u64::from(r.evidence == Evidence::Bounds);
    }
    out
}

fn by_length(rows: &[Row], dim: Option<usize>) -> Vec<ByLength> {
    let mut groups: BTreeMap<u64, Vec<&Row>> = BTreeMap::new();
    for r in rows.iter().filter(|r| r.kind == Kind::Interval) {
        groups.entry(r.sites).or_default().push(r);
    }
    groups
        .into_iter()
        .filter_map(|(length, rows)| {
            let all: Vec<f64> = rows.iter().map(|r| r.entropy_nats).collect::<Option<_>>()?;
            let n = all.len() as f64;
            let mean_nats = all.iter().sum::<f64>() / n;
            Some(ByLength {
                length,
                intervals: all.len() as u64,
                mean_nats,
                mean_legs: dim.map(|d| row::legs(mean_nats, d)),
                least_nats: all.iter().copied().fold(f64::INFINITY, f64::min),
                largest_nats: all.iter().copied().fold(f64::NEG_INFINITY, f64::max),
                mean_cut_nats: rows.iter().map(|r| r.cut_nats).sum::<f64>() / n,
            })
        })
        .collect()
}
