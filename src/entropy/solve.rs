//! One piece of a core to its spectrum, by the cheapest evidence that suffices.

use super::Spectrum;
use super::answer::{EntropyError, Evidence, Part, Price, Request, Unsolved};
use super::bounds::bounds;
use super::closure::reach;
use super::contraction::by_contraction;
use super::copies::renyi2;
use super::estimate::estimate;
use super::stabilizer;
use super::the_core::Piece;
use super::wires::Wires;
use crate::watch::Watch;

/// What one kind of evidence said.
pub(super) enum Solved {
    /// The spectrum, what it cost and the numerical error of its entropy.
    Values(Spectrum, Price, f64),
    /// Why not, and what it would cost.
    Refused(Unsolved, Option<Price>),
}

/// Solves a piece within the request's budget; what does not fit comes back as bounds.
///
/// # Errors
/// [`EntropyError`]: the piece vanishes, or a floor below failed.
pub(super) fn solve(
    piece: &Piece,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Part, EntropyError> {
    let network = &piece.network;
    let mut part = Part {
        tensors: network.tensors(),
        lower: 0.0,
        upper: 0.0,
        evidence: Evidence::Geometry,
        spectrum: Some(Spectrum::flat(0.0)),
        error: 0.0,
        price: None,
        estimate: None,
        renyi2: None,
        reason: None,
    };
    let one_sided = piece.region_legs == 0 || piece.region_legs == network.boundary().len();
    if one_sided && nowhere_zero(piece) {
        return Ok(part);
    }
    if request.finite_field {
        let wires = Wires::of(network);
        if stabilizer::has_states(&wires) {
            let inside = piece.inside();
            let entropy = stabilizer::states(&wires, watch)?
                .iter()
                .map(|s| s.entropy(&inside) as f64 * f64::from(s.prime()).ln())
                .sum();
            part.lower = entropy;
            part.upper = entropy;
            part.evidence = Evidence::FiniteField;
            part.spectrum = Some(Spectrum::flat(entropy));
            return Ok(part);
        }
    }
    match by_contraction(piece, request, watch)? {
        Solved::Values(spectrum, price, error) => {
            let entropy = spectrum.entropy();
            part.lower = entropy;
            part.upper = entropy;
            part.evidence = Evidence::Contraction;
            part.spectrum = Some(spectrum);
            part.price = Some(price);
            part.error = error;
        }
        Solved::Refused(reason, price) => {
            let (lower, upper) = if one_sided { (0.0, 0.0) } else { bounds(piece) };
            part.lower = lower;
            part.upper = upper;
            part.evidence = Evidence::Bounds;
            part.spectrum = None;
            part.price = price;
            part.reason = Some(reason);
            if request.contraction && !one_sided && reason != Unsolved::Time {
                part.renyi2 = renyi2(piece, request, watch)?;
                // S₂ ≤ S; the allowance covers the rounding of two contractions.
                if let Some(s) = part.renyi2 {
                    part.lower = part.lower.max(s - 1e-9).min(part.upper);
                }
                if request.estimate {
                    part.estimate = estimate(piece, request, watch)?;
                    if let Some((_, error)) = part.estimate {
                        part.evidence = Evidence::Estimate;
                        part.error = error;
                    }
                }
            }
        }
    }
    Ok(part)
}

/// Whether closure from all legs absorbs the piece, so that its norm is not zero.
fn nowhere_zero(piece: &Piece) -> bool {
    let wires = Wires::of(&piece.network);
    reach(&wires, &vec![true; wires.open()]).into_iter().all(|r| r)
}
