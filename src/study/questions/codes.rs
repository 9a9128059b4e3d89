//! Questions about bulk legs.

use super::{Finding, Question};
use crate::block::PrimePart;
use crate::code::{self, Code, distance, erasure, isometry, recover};
use crate::entropy::stabilizer;
use crate::entropy::{Evidence, Request};
use crate::network::{Network, Region};
use crate::study::file::rates;
use crate::study::{StudyError, StudyFile};
use crate::watch::Watch;
use serde::{Deserialize, Serialize};

/// Whether the map from bulk to boundary is an isometry.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Isometry {
    /// Boundary legs.
    pub boundary: u64,
    /// Bulk legs.
    pub bulk: u64,
    /// Encoded over physical size, in logarithms of dimensions.
    pub rate: f64,
    /// Whether it is one; none where neither was proven.
    pub isometry: Option<bool>,
    /// How that is known.
    pub evidence: String,
    /// Bulk legs to blame where it is none.
    pub blamed: Vec<String>,
}

/// Which bulk legs a region recovers.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Recovery {
    /// The region.
    pub region: String,
    /// Recoverable from it.
    pub recoverable: Vec<String>,
    /// Recoverable from its complement.
    pub from_complement: Vec<String>,
    /// Recoverable from neither.
    pub neither: Vec<String>,
    /// Left open.
    pub undecided: Vec<String>,
    /// Whether closure alone finds all of it.
    pub greedy_is_exact: Option<bool>,
    /// How that is known.
    pub evidence: String,
}

/// The distance.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Distance {
    /// The distance, where both bounds meet.
    pub distance: Option<u64>,
    /// Proven lower bound.
    pub lower: u64,
    /// Proven upper bound.
    pub upper: u64,
    /// Number of smallest boundary sets that hurt, where all are known.
    pub minimal_supports: Option<u64>,
    /// The first of them, at most a hundred.
    pub supports: Vec<Vec<u32>>,
}

/// An erasure curve.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Erasure {
    /// The bulk leg asked about; none for all together.
    pub leg: Option<String>,
    /// Samples asked for, a rate.
    pub samples: u64,
    /// Whether failures were judged by ranks too.
    pub exact: bool,
    /// One object a rate.
    pub points: Vec<ErasurePoint>,
}

/// One rate of an erasure curve; intervals are 95 % confidence.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ErasurePoint {
    /// Erasure rate.
    pub p: f64,
    /// Probability that greedy recovery fails.
    pub greedy_failure: f64,
    /// Lower end.
    pub greedy_low: f64,
    /// Upper end.
    pub greedy_high: f64,
    /// Probability that recovery is impossible.
    pub exact_failure: Option<f64>,
    /// Lower end.
    pub exact_low: Option<f64>,
    /// Upper end.
    pub exact_high: Option<f64>,
}

/// The questions of `[codes]`.
///
/// # Errors
/// [`StudyError::Value`].
pub fn questions(file: &StudyFile) -> Result<Vec<Question>, StudyError> {
    let Some(codes) = &file.codes else { return Ok(Vec::new()) };
    let bad = |key: &str, value: String, why: &str| StudyError::Value {
        place: format!("{}, table codes", file.place),
        key: key.into(),
        value,
        why: why.into(),
    };
    let mut out = Vec::new();
    if codes.isometry {
        out.push(Question::Isometry);
    }
    for region in &codes.recover {
        out.push(Question::Recovery { region: region.clone() });
    }
    if codes.distance {
        out.push(Question::Distance { seconds: codes.distance_seconds });
    }
    if let Some(e) = &codes.erasure {
        let list = rates(&e.p).ok_or_else(|| {
            bad(
                "p",
                e.p.to_string(),
                "is no list of rates between 0 and 1, such as \"0.05..0.5:0.05\"",
            )
        })?;
        let centre = match e.legs.as_str() {
            "all" => false,
            "centre" => true,
            other => {
                return Err(bad("legs", format!("{other:?}"), "is neither \"all\" nor \"centre\""));
            }
        };
        out.push(Question::Erasure { rates: list, samples: e.samples, centre, seed: file.seed });
    }
    Ok(out)
}

/// Answers one of them.
///
/// # Errors
/// A sentence.
pub fn answer(
    question: &Question,
    network: &Network,
    memory: u64,
    watch: &dyn Watch,
) -> Result<Finding, String> {
    let bare = Code::of(network).map_err(|e| e.to_string())?;
    let code = if stabilizer::has_states(bare.wires()) {
        let states = stabilizer::states(bare.wires(), watch).map_err(|e| e.to_string())?;
        let parts: Vec<PrimePart> = states.iter().map(part).collect();
        bare.with_states(&parts)
    } else {
        bare
    };
    let names = |legs: &[usize]| -> Vec<String> {
        legs.iter().map(|&k| code.bulk_name(k).to_owned()).collect()
    };
    match question {
        Question::Isometry => {
            let j = isometry::judge(&code, &code::Budget::default(), watch)
                .map_err(|e| e.to_string())?;
            Ok(Finding::Isometry(Isometry {
                boundary: j.boundary as u64,
                bulk: j.bulk as u64,
                rate: j.rate,
                isometry: j.isometry,
                evidence: j.evidence.to_string(),
                blamed: names(&j.blamed),
            }))
        }
        Question::Recovery { region } => {
            let parsed = Region::parse(region, network).map_err(|e| e.to_string())?;
            let budget = Request { memory_bytes: memory, ..Request::default() };
            let r = recover::judge(&code, &parsed, &budget, watch).map_err(|e| e.to_string())?;
            Ok(Finding::Recovery(Recovery {
                region: parsed.show(network),
                recoverable: names(&r.recoverable),
                from_complement: names(&r.from_complement),
                neither: names(&r.neither),
                undecided: names(&r.undecided),
                greedy_is_exact: r.greedy_is_exact,
                evidence: shown(r.evidence),
            }))
        }
        Question::Distance { seconds } => {
            let request = distance::Request {
                seconds: watch.seconds() + seconds,
                ..distance::Request::default()
            };
            let d = distance::search(&code, &request, watch).map_err(|e| e.to_string())?;
            Ok(Finding::Distance(Distance {
                distance: d.exact().map(|x| x as u64),
                lower: d.lower as u64,
                upper: d.upper as u64,
                minimal_supports: d.complete.then_some(d.supports.len() as u64),
                supports: d.supports.into_iter().take(100).collect(),
            }))
        }
        Question::Erasure { rates, samples, centre, seed } => {
            let leg = centre.then(|| code.centre());
            let request = erasure::Request {
                rates: rates.clone(),
                samples: *samples,
                seed: *seed,
                target: leg.map_or(erasure::Target::Every, erasure::Target::Leg),
                exact: code.is_stabilizer(),
                ..erasure::Request::default()
            };
            let s = erasure::run(&code, &request, None, watch, &mut |_| ())
                .map_err(|e| e.to_string())?;
            let points = rates
                .iter()
                .map(|&p| {
                    let at = s.at(p);
                    ErasurePoint {
                        p,
                        greedy_failure: at.greedy.value,
                        greedy_low: at.greedy.low,
                        greedy_high: at.greedy.high,
                        exact_failure: at.exact.map(|e| e.value),
                        exact_low: at.exact.map(|e| e.low),
                        exact_high: at.exact.map(|e| e.high),
                    }
                })
                .collect();
            Ok(Finding::Erasure(Erasure {
                leg: leg.map(|k| code.bulk_name(k).to_owned()),
                samples: *samples,
                exact: s.exact,
                points,
            }))
        }
        Question::Order { .. } => Err("no question about a code".into()),
    }
}

fn shown(evidence: Evidence) -> String {
    evidence.to_string()
}

/// The state of one prime as the code floor takes it.
fn part(state: &stabilizer::State) -> PrimePart {
    let n = state.width();
    PrimePart {
        prime: state.prime(),
        digits: (0..state.legs()).map(|l| state.columns(l).len() as u32).collect(),
        generators: state.generators(),
        phases: (0..n).map(|r| state.phase(r)).collect(),
    }
}
