//! The questions, put to the floors below.

use super::answer::{Answer, Evidence};
use super::{Case, StudyError};
use crate::entropy::{self, Asker, EntropyError, Request, Wires};
use crate::network::{self, Network, Region};
use crate::watch::Watch;

/// What one question may use, and what of its answer is wanted.
#[derive(Debug, Clone, PartialEq)]
pub struct Terms {
    /// Bytes that a contraction may hold at its peak.
    pub memory: u64,
    /// log10 of the multiply-adds that one core may cost.
    pub log10_multiply_adds: f64,
    /// Whether the spectrum is kept.
    pub spectrum: bool,
    /// Further measures.
    pub measures: Vec<Measure>,
    /// Seed of the search for orders.
    pub seed: u64,
}

/// A measure besides the von Neumann entropy.
#[derive(Debug, Clone, PartialEq)]
pub struct Measure {
    /// As written: `renyi-2`.
    pub name: String,
    /// The order of the Rényi entropy that it is.
    pub order: f64,
}

impl Measure {
    /// Reads `renyi-a` with a ≥ 0 or `inf`.
    pub fn parse(name: &str) -> Option<Self> {
        let order = match name.strip_prefix("renyi-")? {
            "inf" => f64::INFINITY,
            text => text.parse().ok().filter(|a| *a >= 0.0 && f64::is_finite(*a))?,
        };
        Some(Self { name: name.to_owned(), order })
    }
}

/// Most levels of a spectrum that are kept; a longer one is left out.
const MOST_LEVELS: usize = 4096;

/// Makes the network of a case.
///
/// # Errors
/// [`StudyError::Network`].
pub fn network(case: &Case) -> Result<Network, StudyError> {
    network::from_toml(
        &case.table,
        &case.folder,
        &case.setting.network,
        &network::Limits::default(),
        &network::Overrides::default(),
    )
    .map_err(|e| StudyError::Network { case: case.id.clone(), message: e.to_string() })
}

/// Answers regions of one network.
pub struct CaseAsker<'w, 'n> {
    cheap: Asker<'w, 'n>,
    full: Asker<'w, 'n>,
    terms: Terms,
}

impl<'w, 'n> CaseAsker<'w, 'n> {
    /// Prepares.
    pub fn new(wires: &'w Wires<'n>, terms: Terms) -> Self {
        let request = Request {
            memory_bytes: terms.memory,
            log10_multiply_adds: terms.log10_multiply_adds,
            seed: terms.seed,
            ..Request::default()
        };
        let cheap = Request { contraction: false, ..request.clone() };
        Self { cheap: Asker::new(wires, cheap), full: Asker::new(wires, request), terms }
    }
    /// Answers that need no contraction; the others come back as bounds.
    ///
    /// # Errors
    /// [`EntropyError`].
    pub fn cheap(
        &self,
        regions: &[Region],
        watch: &dyn Watch,
    ) -> Result<Vec<Answer>, EntropyError> {
        Ok(self.cheap.ask_all(regions, watch)?.iter().map(|a| self.answer(a)).collect())
    }
    /// The answer by whatever evidence the budget allows.
    ///
    /// # Errors
    /// [`EntropyError`].
    pub fn full(&self, region: &Region, watch: &dyn Watch) -> Result<Answer, EntropyError> {
        Ok(self.answer(&self.full.ask(region, watch)?))
    }
    fn answer(&self, a: &entropy::Answer) -> Answer {
        let price = a.price();
        let spectrum = a.spectrum.as_ref();
        let finite = |x: f64| x.is_finite().then_some(x);
        Answer {
            cut_legs: a.cut.near.len() as u64,
            cut_nats: a.cut.nats,
            entropy_nats: a.entropy(),
            lower_nats: a.lower,
            upper_nats: a.upper,
            evidence: match a.evidence {
                entropy::Evidence::Geometry => Evidence::Geometry,
                entropy::Evidence::FiniteField => Evidence::FiniteField,
                entropy::Evidence::Contraction => Evidence::Contraction,
                entropy::Evidence::Estimate => Evidence::Estimate,
                entropy::Evidence::Bounds => Evidence::Bounds,
            },
            error_nats: a.error,
            core_tensors: a.cores.iter().map(|c| c.len() as u64).sum(),
            log10_multiply_adds: price.and_then(|p| finite(p.log10_multiply_adds())),
            peak_bytes: price.and_then(|p| finite(p.log2_bytes)).map(|b| b.exp2() as u64),
            spectrum: if self.terms.spectrum {
                spectrum
                    .and_then(|s| s.levels(MOST_LEVELS))
                    .map(|l| l.iter().map(|l| (l.probability, l.multiplicity)).collect())
                    .unwrap_or_default()
            } else {
                Vec::new()
            },
            measures: spectrum.map_or_else(Vec::new, |s| {
                self.terms.measures.iter().map(|m| (m.name.clone(), s.renyi(m.order))).collect()
            }),
            how: a
                .parts
                .iter()
                .find_map(|p| p.reason)
                .map_or_else(String::new, |r| format!("The exact answer would take {r}.")),
        }
    }
}
