//! Questions besides entropies: bulk legs as a code ([`codes`]) and contraction orders to
//! compare ([`orders`]). Each [`Question`] about a case has one [`Finding`].

pub mod codes;
pub mod orders;

use super::{StudyError, StudyFile};
use crate::network::Network;
use crate::watch::Watch;
use serde::{Deserialize, Serialize};

/// A question about one network.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[serde(tag = "question", rename_all = "kebab-case")]
pub enum Question {
    /// Whether the map from bulk to boundary is an isometry.
    Isometry,
    /// Which bulk legs a region recovers.
    Recovery {
        /// The region.
        region: String,
    },
    /// The distance.
    Distance {
        /// Seconds after which bounds are given.
        seconds: f64,
    },
    /// An erasure curve.
    Erasure {
        /// Erasure rates.
        rates: Vec<f64>,
        /// Samples a rate.
        samples: u64,
        /// Whether only the central bulk leg counts.
        centre: bool,
        /// Seed of the samples.
        seed: u64,
    },
    /// A contraction order.
    Order {
        /// The method.
        method: String,
        /// Its seed.
        seed: u64,
        /// Work to spend, in labels touched.
        work: u64,
    },
}

/// What was found.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(tag = "question", rename_all = "kebab-case")]
pub enum Finding {
    /// Answer to [`Question::Isometry`].
    Isometry(codes::Isometry),
    /// Answer to [`Question::Recovery`].
    Recovery(codes::Recovery),
    /// Answer to [`Question::Distance`].
    Distance(codes::Distance),
    /// Answer to [`Question::Erasure`].
    Erasure(codes::Erasure),
    /// Answer to [`Question::Order`].
    Order(orders::Order),
    /// A question that has no answer on this network.
    None(Refusal),
}

/// Why a question has no answer.
#[derive(Debug, Clone, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Refusal {
    /// Which question.
    pub asked: String,
    /// Why.
    pub why: String,
}

impl Question {
    /// In words, for messages.
    pub fn words(&self) -> String {
        match self {
            Self::Isometry => "isometry from bulk to boundary".into(),
            Self::Recovery { region } => format!("recovery from {region}"),
            Self::Distance { .. } => "distance".into(),
            Self::Erasure { .. } => "erasure curve".into(),
            Self::Order { method, seed, .. } => format!("order by {method}, seed {seed}"),
        }
    }
    /// Everything that its answer depends on besides the network.
    pub fn key(&self) -> String {
        serde_json::to_string(self).unwrap_or_default()
    }
}

/// The questions of a study, in the order in which they are reported.
///
/// # Errors
/// [`StudyError::Value`].
pub fn all(file: &StudyFile) -> Result<Vec<Question>, StudyError> {
    let mut out = codes::questions(file)?;
    out.extend(orders::questions(file)?);
    Ok(out)
}

/// Answers one question. Nothing where a stop came first.
///
/// # Errors
/// [`StudyError::Question`].
pub fn answer(
    question: &Question,
    network: &Network,
    memory: u64,
    watch: &dyn Watch,
) -> Result<Option<Finding>, StudyError> {
    let found = match question {
        Question::Order { method, seed, work } => {
            orders::answer(network, method, *seed, *work, watch)
        }
        other => codes::answer(other, network, memory, watch),
    };
    match found {
        Ok(_) if watch.stop() => Ok(None),
        Ok(f) => Ok(Some(f)),
        Err(_) if watch.stop() => Ok(None),
        Err(why) => Ok(Some(Finding::None(Refusal { asked: question.words(), why }))),
    }
}
