//! Logarithmic negativity between two regions.

use super::answer::{EntropyError, Evidence, Price};
use super::ask::Asker;
use super::measure::{Measured, union};
use super::stabilizer;
use crate::contract;
use crate::linalg;
use crate::network::Region;
use crate::order::{self, Shape};
use crate::watch::Watch;
use ndarray::Array2;
use num_complex::Complex64;

/// ln ‖ρ_AB^{T_A}‖₁ of two regions, or of one region and its complement.
///
/// 1. Where A and B are everything, the state is pure and the measure is the Rényi entropy of
///    order 1/2.
/// 2. For stabilizer networks: the elements of the group supported on A ∪ B, restricted to A,
///    commute up to powers of ω; half the rank of that antisymmetric matrix over GF(p) is the
///    number of maximally entangled pairs of digits (Phys. Rev. Lett. 125, 200502 (2020),
///    from memory).
/// 3. Else the dense state, where dim(AB) is at most 2048 and the whole fits the memory: the
///    eigenvalues of the partial transpose.
/// 4. Else bounds: 0 ≤ E ≤ the smaller cut of A and of B (E ≤ S_{1/2}(A) ≤ ln rank(ρ_A)).
pub(super) fn of(
    asker: &Asker<'_, '_>,
    regions: &[Region],
    watch: &dyn Watch,
) -> Result<Measured, EntropyError> {
    let wires = asker.wires();
    let a = wires.inside(&regions[0]);
    let both = match regions {
        [one] => vec![true; wires.inside(one).len()],
        _ => wires.inside(&union(&[&regions[0], &regions[1]])),
    };
    if both.iter().all(|&f| f) {
        return Ok(Measured::renyi(&asker.ask(&regions[0], watch)?, 0.5));
    }
    if asker.request().finite_field && stabilizer::has_states(wires) {
        let value = stabilizer::states(wires, watch)?
            .iter()
            .map(|s| s.negative_pairs(&a, &both) as f64 * f64::from(s.prime()).ln())
            .sum();
        return Ok(Measured {
            lower: value,
            upper: value,
            evidence: Evidence::FiniteField,
            error: 0.0,
        });
    }
    let b: Vec<bool> = both.iter().zip(&a).map(|(w, x)| *w && !x).collect();
    match dense(asker, &a, &b, watch)? {
        Some(measured) => Ok(measured),
        None => {
            let upper = asker.cut(&regions[0]).nats.min(asker.cut(&regions[1]).nats);
            Ok(Measured { lower: 0.0, upper, evidence: Evidence::Bounds, error: 0.0 })
        }
    }
}

/// Largest dimension of A ∪ B whose partial transpose is decomposed.
const MOST: f64 = 2048.0;

fn dense(
    asker: &Asker<'_, '_>,
    a: &[bool],
    b: &[bool],
    watch: &dyn Watch,
) -> Result<Option<Measured>, EntropyError> {
    let network = asker.wires().network();
    let request = asker.request();
    let open: Vec<_> = network.boundary().iter().chain(network.bulk()).copied().collect();
    let size = |flags: &dyn Fn(usize) -> bool| -> f64 {
        open.iter()
            .enumerate()
            .filter(|(k, _)| flags(*k))
            .map(|(_, &l)| network.dim(l) as f64)
            .product()
    };
    let (size_a, size_b) = (size(&|k| a[k]), size(&|k| b[k]));
    if size_a * size_b > MOST || !request.contraction {
        return Ok(None);
    }
    let shape = Shape::of(network);
    let order = order::Request { seed: request.seed, work: 100_000, ..Default::default() };
    let found = order::search(&shape, &order, watch)?;
    let price = Price {
        log10_contraction: found.cost.log10_multiply_adds,
        log10_decomposition: 3.0 * (size_a * size_b).log10() + 1.0,
        log2_bytes: found.cost.log2_peak_elements + 5.0,
        log2_rows: (size_a * size_b).log2(),
        log2_columns: (size_a * size_b).log2(),
    };
    if price.log2_bytes > (request.memory_bytes as f64).log2()
        || price.log10_multiply_adds() > request.log10_multiply_adds
    {
        return Ok(None);
    }
    let outcome = contract::run(network, &found.plan, &contract::Request::default(), watch)?;
    let tensor = outcome.tensor.into_parts().1.to_complex();
    let all = || 0..open.len();
    let order: Vec<usize> = all()
        .filter(|&k| a[k])
        .chain(all().filter(|&k| b[k]))
        .chain(all().filter(|&k| !a[k] && !b[k]))
        .collect();
    let (da, db) = (size_a as usize, size_b as usize);
    let rest = tensor.len() / (da * db);
    let psi = tensor.permuted_axes(order).as_standard_layout().into_owned();
    let psi = psi.into_shape_with_order((da * db, rest)).expect("A and B make the rows");
    let adjoint = psi.t().mapv(|x: Complex64| x.conj());
    let rho = linalg::product(&psi.view(), &adjoint.view());
    let trace: f64 = (0..da * db).map(|i| rho[[i, i]].re).sum();
    if trace <= 0.0 {
        return Err(EntropyError::Zero {
            tensor: network.tensor_name(crate::network::TensorId::new(0)),
        });
    }
    let transposed = Array2::from_shape_fn((da * db, da * db), |(r, c)| {
        let (ra, rb, ca, cb) = (r / db, r % db, c / db, c % db);
        rho[[ca * db + rb, ra * db + cb]] / trace
    });
    let values = linalg::hermitian_eigenvalues(&transposed.view())?;
    let value = values.iter().map(|v| v.abs()).sum::<f64>().ln();
    let error = 8.0 * f64::EPSILON * (da * db) as f64;
    Ok(Some(Measured { lower: value, upper: value, evidence: Evidence::Contraction, error }))
}
