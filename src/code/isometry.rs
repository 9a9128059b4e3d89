//! Whether the map from bulk to boundary is an isometry, and what is to blame if not.

use super::dense::{self, Budget};
use super::greedy::NONE;
use super::{Code, CodeError};
use crate::entropy::Evidence;
use crate::linalg;
use crate::watch::Watch;
use ndarray::Array2;
use num_complex::Complex64;
use serde::Serialize;

/// Legs and bulk legs of the patch that ends with a ring.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct RingCount {
    /// The ring.
    pub ring: u32,
    /// Tensors of the ring.
    pub tensors: usize,
    /// Open boundary legs of the patch that ends with this ring.
    pub boundary: usize,
    /// Bulk legs of that patch.
    pub bulk: usize,
    /// `bulk`/`boundary`, weighted by ln of the dimensions.
    pub rate: f64,
}

/// What the bulk encodes.
#[derive(Debug, Clone, PartialEq)]
pub struct Isometry {
    /// Boundary legs n.
    pub boundary: usize,
    /// Bulk legs k.
    pub bulk: usize,
    /// Σ ln(dim) of the bulk legs over Σ ln(dim) of the boundary legs; k/n where all
    /// dimensions are one.
    pub rate: f64,
    /// Whether V†V is a multiple of 1 for the map V from bulk to boundary; `None` where
    /// neither proof nor disproof was affordable.
    pub isometry: Option<bool>,
    /// How that is known.
    pub evidence: Evidence,
    /// Bulk legs to blame: by ranks, those on which an operator acts that the map sends to a
    /// number; by contraction, those on which V†V does not act as 1; by closure alone, those that were not reached.
    pub blamed: Vec<usize>,
    /// ln of the bulk space's dimension minus ln of the map's rank, by prime digits
    /// (p, digits lost), for stabilizer networks.
    pub lost_digits: Vec<(u32, usize)>,
    /// Dimension of the map's kernel, where it is known and fits.
    pub kernel: Option<u128>,
    /// Largest deviation of a singular value from their common size, relative to it
    /// (contraction only).
    pub defect: Option<f64>,
    /// Counts by ring, where rings are known.
    pub rings: Vec<RingCount>,
}

/// Judges the map from bulk to boundary by the cheapest evidence that suffices: closure from
/// the whole boundary, ranks over finite fields, contraction within `budget`.
///
/// # Errors
/// Those of an order search or a contraction; a network too large for the budget is no error
/// but an undecided answer with evidence `bounds`.
pub fn judge(code: &Code<'_>, budget: &Budget, watch: &dyn Watch) -> Result<Isometry, CodeError> {
    let net = code.network();
    let weight = |labels: &[crate::tensor::Label]| -> f64 {
        labels.iter().map(|&l| (net.dim(l) as f64).ln()).sum()
    };
    let mut out = Isometry {
        boundary: code.boundary(),
        bulk: code.bulk(),
        rate: rate(code.bulk(), code.boundary(), weight(net.bulk()), weight(net.boundary())),
        isometry: None,
        evidence: Evidence::Bounds,
        blamed: Vec::new(),
        lost_digits: Vec::new(),
        kernel: None,
        defect: None,
        rings: ring_counts(code),
    };
    let mut bench = code.greedy().bench();
    code.greedy().recover(&mut bench, &vec![NONE; code.boundary()]);
    if code.greedy().absorbs_all(&bench, 0) {
        out.isometry = Some(true);
        out.evidence = Evidence::Geometry;
        out.kernel = Some(0);
        return Ok(out);
    }
    if code.is_stabilizer() {
        by_ranks(code, &mut out);
        return Ok(out);
    }
    match by_contraction(code, budget, watch, &mut out) {
        Err(CodeError::TooLarge { .. }) => {
            out.blamed =
                (0..code.bulk()).filter(|&k| code.greedy().lost(&bench, k)[0] & 1 == 1).collect();
        }
        other => other?,
    }
    Ok(out)
}

fn by_ranks(code: &Code<'_>, out: &mut Isometry) {
    out.evidence = Evidence::FiniteField;
    let mut blamed = vec![false; code.bulk()];
    let mut ln_rank = 0.0;
    for c in code.checks() {
        let lost = c.kernel().len();
        out.lost_digits.push((c.prime(), lost));
        ln_rank -= lost as f64 * f64::from(c.prime()).ln();
        for (k, b) in blamed.iter_mut().enumerate() {
            let d = c.digits_of_bulk(k);
            *b |= c.kernel().iter().any(|l| l[2 * d.start..2 * d.end].iter().any(|&x| x != 0));
        }
    }
    out.isometry = Some(ln_rank == 0.0);
    out.blamed = (0..code.bulk()).filter(|&k| blamed[k]).collect();
    let full = code
        .network()
        .bulk()
        .iter()
        .try_fold(1u128, |s, &l| s.checked_mul(code.network().dim(l) as u128));
    let lost = out
        .lost_digits
        .iter()
        .try_fold(1u128, |s, &(p, d)| s.checked_mul(u128::from(p).checked_pow(d as u32)?));
    out.kernel = if ln_rank == 0.0 { Some(0) } else { full.zip(lost).map(|(f, l)| f - f / l) };
}

fn by_contraction(
    code: &Code<'_>,
    budget: &Budget,
    watch: &dyn Watch,
    out: &mut Isometry,
) -> Result<(), CodeError> {
    const TOLERANCE: f64 = 1e-9;
    let array = dense::array(code, "isometry by contraction", budget, watch)?;
    let (n, k) = (code.boundary(), code.bulk());
    let rows: Vec<usize> = (0..n).collect();
    let m = dense::matrix(&array, &rows);
    let (long, short) = (m.nrows().max(m.ncols()) as u64, m.ncols() as u64);
    if short > budget.side || long * short > budget.entries {
        return Err(CodeError::TooLarge {
            question: "isometry by contraction",
            need: format!("singular values of {} × {}", m.nrows(), m.ncols()),
            limit: format!("{}", budget.side),
        });
    }
    let values = linalg::singular_values(&m.view())?;
    let top = values.iter().copied().fold(0.0, f64::max);
    let rank = linalg::rank(&values, 1e-12);
    let missing = m.ncols() - rank;
    out.kernel = Some(missing as u128);
    let low = if missing > 0 { 0.0 } else { values.iter().copied().fold(f64::INFINITY, f64::min) };
    let defect = if top > 0.0 { (top - low) / top } else { 1.0 };
    out.defect = Some(defect);
    out.evidence = Evidence::Contraction;
    out.isometry = Some(defect <= TOLERANCE);
    if defect > TOLERANCE {
        let conjugate = m.t().mapv(|z: Complex64| z.conj());
        let rho = linalg::product(&conjugate.view(), &m.view());
        let dims = &array.shape()[n..];
        out.blamed = (0..k).filter(|&leg| tied(&rho, dims, leg, TOLERANCE)).collect();
    }
    Ok(())
}

/// Encoded over physical size; k/n to the last digit where all legs have one dimension.
fn rate(bulk: usize, boundary: usize, ln_bulk: f64, ln_boundary: f64) -> f64 {
    if ln_boundary <= 0.0 {
        return 0.0;
    }
    let plain = bulk as f64 / boundary as f64;
    let weighted = ln_bulk / ln_boundary;
    if (plain - weighted).abs() <= 1e-12 * weighted { plain } else { weighted }
}

/// Whether V†V differs from 1/d ⊗ (its trace over the leg): then the leg is not free.
fn tied(rho: &Array2<Complex64>, dims: &[usize], leg: usize, tolerance: f64) -> bool {
    let d = dims[leg];
    let inner: usize = dims[leg + 1..].iter().product();
    let outer: usize = dims[..leg].iter().product();
    let scale = (0..rho.nrows()).map(|i| rho[(i, i)].re).fold(0.0, f64::max);
    let place = |o: usize, v: usize, i: usize| (o * d + v) * inner + i;
    let sites: Vec<(usize, usize)> =
        (0..outer).flat_map(|o| (0..inner).map(move |i| (o, i))).collect();
    sites.iter().any(|&(o, i)| {
        sites.iter().any(|&(o2, i2)| {
            let at = |v: usize, w: usize| rho[(place(o, v, i), place(o2, w, i2))];
            let even = (0..d).map(|v| at(v, v)).sum::<Complex64>() / d as f64;
            (0..d).any(|v| {
                (0..d).any(|w| {
                    let expected = if v == w { even } else { Complex64::new(0.0, 0.0) };
                    (at(v, w) - expected).norm() > tolerance * scale
                })
            })
        })
    })
}

/// Counts of the patches that end with each ring: a leg to a later ring is open there.
fn ring_counts(code: &Code<'_>) -> Vec<RingCount> {
    let Some(ring) = code.rings() else { return Vec::new() };
    let net = code.network();
    let last = ring.iter().copied().max().unwrap_or(0);
    // Tensors past the end of the list (states that fix bulk legs) go with whom they touch.
    let of = |t: crate::network::TensorId| ring.get(t.index()).copied();
    let open = net.open_flags();
    let mut is_bulk = vec![false; net.labels()];
    net.bulk().iter().for_each(|l| is_bulk[l.index()] = true);
    (0..=last)
        .map(|r| {
            let (mut boundary, mut bulk) = (0, 0);
            let (mut ln_boundary, mut ln_bulk) = (0.0, 0.0);
            for l in (0..net.labels() as u32).map(crate::tensor::Label::new) {
                let mut rings = net.holders(l).iter().filter_map(|&t| of(t));
                let Some(first) = rings.next() else { continue };
                let inside = first <= r || rings.clone().any(|x| x <= r);
                let outside = first > r || rings.any(|x| x > r);
                let ln = (net.dim(l) as f64).ln();
                if is_bulk[l.index()] && inside {
                    bulk += 1;
                    ln_bulk += ln;
                } else if inside && (outside || open[l.index()]) {
                    boundary += 1;
                    ln_boundary += ln;
                }
            }
            let tensors = ring.iter().filter(|&&x| x == r).count();
            let rate = rate(bulk, boundary, ln_bulk, ln_boundary);
            RingCount { ring: r, tensors, boundary, bulk, rate }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::block::{Request, make};
    use crate::code::samples::{pentagons, state_of};
    use crate::network::{Network, NetworkBuilder};
    use crate::tiling::Rule;
    use crate::watch::Silent;
    use std::sync::Arc;

    #[test]
    fn counts_by_ring() {
        // [[n,k]] by edge layers and by vertex inflation, and tiles a layer (OEIS A054888).
        let net = pentagons(3, Rule::Edge);
        let i = judge(&Code::of(&net).unwrap(), &Budget::default(), &Silent).unwrap();
        assert_eq!((i.isometry, i.evidence), (Some(true), Evidence::Geometry));
        let got: Vec<_> = i.rings.iter().map(|r| (r.tensors, r.boundary, r.bulk)).collect();
        assert_eq!(got, [(1, 5, 1), (5, 20, 6), (15, 55, 21), (40, 145, 61)]);
        let net = pentagons(2, Rule::Vertex);
        let i = judge(&Code::of(&net).unwrap(), &Budget::default(), &Silent).unwrap();
        let got: Vec<_> = i.rings.iter().map(|r| (r.tensors, r.boundary, r.bulk)).collect();
        assert_eq!(got, [(1, 5, 1), (10, 25, 11), (40, 95, 51)]);
    }

    /// Two bulk legs into a Bell pair and one boundary leg: bulk b0 is joined to bulk b1, so
    /// the map kills everything but one state of the two.
    fn leaky(dim: usize) -> Network {
        let mut b = NetworkBuilder::new("leaky");
        let legs: Vec<_> = ["s0", "b0", "b1", "b2"].map(|n| b.label(n, dim)).to_vec();
        let pair = Arc::new(make(&Request::new("bell", vec![dim, dim])).unwrap());
        b.tensor(None, &[legs[1], legs[2]], &pair).unwrap();
        b.tensor(None, &[legs[0], legs[3]], &pair).unwrap();
        b.boundary([legs[0]]);
        b.bulk([legs[1], legs[2], legs[3]]);
        b.finish().unwrap()
    }

    #[test]
    fn ranks_and_contraction_blame_alike() {
        let net = leaky(2);
        let plain = Code::of(&net).unwrap();
        let exact = plain.clone().with_states(&[state_of(&net)]);
        let a = judge(&exact, &Budget::default(), &Silent).unwrap();
        let b = judge(&plain, &Budget::default(), &Silent).unwrap();
        assert_eq!((a.evidence, b.evidence), (Evidence::FiniteField, Evidence::Contraction));
        assert_eq!((a.isometry, b.isometry), (Some(false), Some(false)));
        assert_eq!((a.kernel, b.kernel), (Some(6), Some(6)));
        assert_eq!((a.blamed, a.lost_digits), (vec![0, 1], vec![(2, 2)]));
        assert_eq!(b.blamed, [0, 1]);
    }
}
