//! Contraction orders to compare.

use super::{Finding, Question};
use crate::network::Network;
use crate::order::{self, Method, Plan, Shape};
use crate::study::{StudyError, StudyFile};
use crate::watch::Watch;
use serde::{Deserialize, Serialize};

/// An order of the whole network, with its price.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Order {
    /// The method asked for.
    pub method: String,
    /// Its seed.
    pub seed: u64,
    /// The method that found it.
    pub found_by: String,
    /// log10 of the multiply-adds.
    pub log10_multiply_adds: f64,
    /// log2 of the most elements alive at once.
    pub log2_peak_elements: f64,
    /// log2 of the elements of the largest tensor.
    pub log2_largest_tensor: f64,
    /// Most distinct labels in one step.
    pub widest_step: u64,
    /// No order has a widest step of fewer labels.
    pub widest_step_bound: u64,
    /// Whether it is proven best.
    pub optimal: bool,
    /// The plan.
    pub plan: Plan,
}

/// The questions of `[orders]`: methods × seeds.
///
/// # Errors
/// [`StudyError::Value`].
pub fn questions(file: &StudyFile) -> Result<Vec<Question>, StudyError> {
    let Some(orders) = &file.orders else { return Ok(Vec::new()) };
    let methods = if orders.methods.is_empty() {
        vec![Method::default().name().to_owned()]
    } else {
        orders.methods.clone()
    };
    let mut out = Vec::new();
    for method in methods {
        if let Err(e) = Method::parse(&method) {
            return Err(StudyError::Value {
                place: format!("{}, table orders", file.place),
                key: "methods".into(),
                value: format!("{method:?}"),
                why: format!("is no method ({e})"),
            });
        }
        for k in 0..orders.seeds {
            let seed = file.seed.wrapping_add(k);
            out.push(Question::Order { method: method.clone(), seed, work: orders.work });
        }
    }
    Ok(out)
}

/// Searches one.
///
/// # Errors
/// A sentence.
pub fn answer(
    network: &Network,
    method: &str,
    seed: u64,
    work: u64,
    watch: &dyn Watch,
) -> Result<Finding, String> {
    let shape = Shape::of(network);
    let request = order::Request {
        method: Method::parse(method).map_err(|e| e.to_string())?,
        seed,
        work,
        ..order::Request::default()
    };
    let found = order::search(&shape, &request, watch).map_err(|e| e.to_string())?;
    Ok(Finding::Order(Order {
        method: method.to_owned(),
        seed,
        found_by: found.method,
        log10_multiply_adds: found.cost.log10_multiply_adds.max(0.0),
        log2_peak_elements: found.cost.log2_peak_elements,
        log2_largest_tensor: found.cost.log2_largest_tensor,
        widest_step: found.cost.widest_step as u64,
        widest_step_bound: found.widest_step_bound as u64,
        optimal: found.optimal,
        plan: found.plan,
    }))
}
