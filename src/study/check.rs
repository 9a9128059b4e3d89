//! What a study would cost, before it is run.

use super::answer::Evidence;
use super::ask::CaseAsker;
use super::run::{CaseOutcome, Limits, terms};
use super::{StudyError, StudyFile};
use crate::entropy::Wires;
use crate::network::Region;
use crate::watch::{News, Watch};
use serde::Serialize;

/// The forecast of one case.
#[derive(Debug, Clone, Default, PartialEq, Serialize)]
pub struct Forecast {
    /// The case.
    pub case: String,
    /// Tensors.
    pub tensors: u64,
    /// Boundary legs.
    pub boundary: u64,
    /// Regions asked.
    pub regions: u64,
    /// Answered by geometry.
    pub geometry: u64,
    /// Answered by ranks over finite fields.
    pub finite_field: u64,
    /// To be contracted within the budget.
    pub contraction: u64,
    /// Beyond the budget: these would come back as bounds.
    pub beyond: u64,
    /// Distinct prices are counted once for equal cores: log10 of the multiply-adds of those
    /// within the budget, at most.
    pub log10_multiply_adds: Option<f64>,
    /// Bytes at the largest peak within the budget.
    pub peak_bytes: Option<u64>,
    /// log10 of the multiply-adds of the dearest core beyond the budget.
    pub log10_dearest_beyond: Option<f64>,
}

/// Forecasts every case: geometry and finite fields are run, contractions only priced.
///
/// # Errors
/// [`StudyError::Question`].
pub fn forecast(
    file: &StudyFile,
    prepared: &[CaseOutcome],
    limits: &Limits,
    watch: &dyn Watch,
) -> Result<Vec<Forecast>, StudyError> {
    let terms = terms(file, limits);
    let mut out = Vec::new();
    for c in prepared {
        watch.tell(News::Stage(&c.case.id));
        let wires = Wires::of(&c.network);
        let asker = CaseAsker::new(&wires, terms.clone());
        let regions: Vec<Region> = c.asked.iter().map(|a| a.region.clone()).collect();
        let answers = asker.cheap(&regions, watch).map_err(|e| StudyError::Question {
            case: c.case.id.clone(),
            question: "its regions".into(),
            message: e.to_string(),
        })?;
        let mut f = Forecast {
            case: c.case.id.clone(),
            tensors: c.network.tensors() as u64,
            boundary: c.network.boundary().len() as u64,
            regions: regions.len() as u64,
            ..Forecast::default()
        };
        let mut sum = 0.0;
        for a in &answers {
            match a.evidence {
                Evidence::Geometry => f.geometry += 1,
                Evidence::FiniteField => f.finite_field += 1,
                _ => {
                    let price = a.log10_multiply_adds.unwrap_or(f64::INFINITY);
                    let bytes = a.peak_bytes.unwrap_or(u64::MAX);
                    if price <= terms.log10_multiply_adds && bytes <= limits.memory {
                        f.contraction += 1;
                        sum += 10f64.powf(price);
                        f.peak_bytes = Some(f.peak_bytes.unwrap_or(0).max(bytes));
                    } else {
                        f.beyond += 1;
                        if price.is_finite() {
                            let dearest = f.log10_dearest_beyond.unwrap_or(price);
                            f.log10_dearest_beyond = Some(dearest.max(price));
                        }
                    }
                }
            }
        }
        f.log10_multiply_adds = (sum > 0.0).then(|| sum.log10());
        out.push(f);
    }
    Ok(out)
}
