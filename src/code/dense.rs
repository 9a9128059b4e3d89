//! A small network as one matrix between chosen boundary legs and the rest.

use super::{Code, CodeError};
use crate::contract;
use crate::order::{self, Shape};
use crate::watch::Watch;
use ndarray::{Array2, ArrayD};
use num_complex::Complex64;

/// How large a network may be to be written out.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Budget {
    /// Most entries of the array over all open legs.
    pub entries: u64,
    /// log10 of the multiply-adds of its contraction.
    pub log10_multiply_adds: f64,
    /// Most singular values of a decomposition (its smaller side).
    pub side: u64,
}

impl Default for Budget {
    /// 2^24 entries, 10^12 multiply-adds, sides of 4096.
    fn default() -> Self {
        Self { entries: 1 << 24, log10_multiply_adds: 12.0, side: 4096 }
    }
}

/// The array of the network, axes in the order boundary, bulk; its overall factor is left out.
///
/// # Errors
/// [`CodeError::TooLarge`], [`CodeError::Order`], [`CodeError::Contract`].
pub(super) fn array(
    code: &Code<'_>,
    question: &'static str,
    budget: &Budget,
    watch: &dyn Watch,
) -> Result<ArrayD<Complex64>, CodeError> {
    let net = code.network();
    let entries = net
        .boundary()
        .iter()
        .chain(net.bulk())
        .try_fold(1u64, |s, &l| s.checked_mul(net.dim(l) as u64))
        .unwrap_or(u64::MAX);
    if entries > budget.entries {
        return Err(CodeError::TooLarge {
            question,
            need: format!("an array over {} open legs", net.boundary().len() + net.bulk().len()),
            limit: format!("{} entries", budget.entries),
        });
    }
    let shape = Shape::of(net);
    let found =
        order::search(&shape, &order::Request { work: 5_000_000, ..Default::default() }, watch)?;
    if found.cost.log10_multiply_adds > budget.log10_multiply_adds {
        return Err(CodeError::TooLarge {
            question,
            need: format!("10^{:.1} multiply-adds", found.cost.log10_multiply_adds),
            limit: format!("10^{:.1}", budget.log10_multiply_adds),
        });
    }
    let outcome = contract::run(net, &found.plan, &contract::Request::default(), watch)?;
    Ok(outcome.tensor.into_parts().1.to_complex())
}

/// The array as a matrix: axes in `rows` (in this order) against all others (in order).
pub(super) fn matrix(array: &ArrayD<Complex64>, rows: &[usize]) -> Array2<Complex64> {
    let rest: Vec<usize> = (0..array.ndim()).filter(|a| !rows.contains(a)).collect();
    let axes: Vec<usize> = rows.iter().chain(&rest).copied().collect();
    let m: usize = rows.iter().map(|&a| array.shape()[a]).product();
    let turned = array.view().permuted_axes(axes);
    let flat: Vec<Complex64> = turned.iter().copied().collect();
    let n = flat.len() / m.max(1);
    Array2::from_shape_vec((m, n), flat).expect("a product of axes fills the matrix")
}
