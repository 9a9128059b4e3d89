//! Stochastic Lanczos quadrature: an entropy estimated without ever forming the matrix.

use super::answer::{EntropyError, Request};
use super::copies::conjugate;
use super::the_core::Piece;
use crate::block::{Block, Entries, IsometryTable};
use crate::contract::{self, Problem};
use crate::linalg;
use crate::order::{self, Plan, Shape};
use crate::tensor::{Dense, Label};
use crate::watch::Watch;
use ndarray::{Array2, ArrayD, IxDyn};
use num_complex::Complex64;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::sync::Arc;

/// Random vectors.
const SAMPLES: usize = 12;
/// Lanczos steps for each.
const STEPS: usize = 40;

/// Estimates S = −tr ρ ln ρ of a piece, with its standard error over the random vectors, in
/// nats; `None` where even one product with a vector does not fit.
///
/// With M the piece as a matrix and v a random vector of unit length on the smaller side,
/// K Lanczos steps on M M† (M† M) give nodes θ and weights w of a quadrature, and
/// n·Σ w f(θ) has the mean tr f(M M†) (SIAM J. Matrix Anal. Appl. 38, 1075 (2017), from
/// memory). S = ln T − F/T with T = tr M M† and F = tr (M M† ln M M†), both from the same
/// vectors. Each step contracts the piece with one vector, twice; vectors are kept
/// orthogonal to all before them.
pub(super) fn estimate(
    piece: &Piece,
    request: &Request,
    watch: &dyn Watch,
) -> Result<Option<(f64, f64)>, EntropyError> {
    let Some(operator) = Operator::of(piece, request, watch)? else { return Ok(None) };
    let n = operator.size();
    let mut rng = ChaCha8Rng::seed_from_u64(request.seed);
    let mut samples: Vec<(f64, f64)> = Vec::with_capacity(SAMPLES);
    for _ in 0..SAMPLES {
        if watch.stop() || watch.seconds() > request.seconds {
            break;
        }
        let mut v: Vec<Complex64> = (0..n).map(|_| gaussian(&mut rng)).collect();
        let norm = length(&v);
        v.iter_mut().for_each(|x| *x /= norm);
        let (nodes, weights) = operator.lanczos(v, watch)?;
        let moment = |f: &dyn Fn(f64) -> f64| -> f64 {
            n as f64 * nodes.iter().zip(&weights).map(|(&t, &w)| w * f(t)).sum::<f64>()
        };
        let trace = moment(&|t| t);
        let log = moment(&|t| if t > 0.0 { t * t.ln() } else { 0.0 });
        samples.push((trace, log));
    }
    if samples.len() < 2 {
        return Ok(None);
    }
    let count = samples.len() as f64;
    let mean = |f: &dyn Fn(&(f64, f64)) -> f64| samples.iter().map(f).sum::<f64>() / count;
    let (t, l) = (mean(&|s| s.0), mean(&|s| s.1));
    if t <= 0.0 {
        return Ok(None);
    }
    let entropy = t.ln() - l / t;
    // Linear propagation: δS = δT/T·(1 + L/T) − δL/T.
    let variance = samples
        .iter()
        .map(|s| ((s.0 - t) / t * (1.0 + l / t) - (s.1 - l) / t).powi(2))
        .sum::<f64>()
        / (count - 1.0);
    Ok(Some((entropy, (variance / count).sqrt())))
}

fn gaussian(rng: &mut ChaCha8Rng) -> Complex64 {
    let u: f64 = 1.0 - rng.random::<f64>();
    let angle = 2.0 * std::f64::consts::PI * rng.random::<f64>();
    Complex64::from_polar((-u.ln()).sqrt(), angle)
}

fn length(v: &[Complex64]) -> f64 {
    v.iter().map(|x| x.norm_sqr()).sum::<f64>().sqrt()
}

fn dot(a: &[Complex64], b: &[Complex64]) -> Complex64 {
    a.iter().zip(b).map(|(x, y)| x.conj() * y).sum()
}

/// One product: the piece, or its conjugate, contracted with a vector on one side.
struct Half {
    shape: Shape,
    blocks: Vec<Arc<Block>>,
    plan: Plan,
    dims: Vec<usize>,
}

impl Half {
    fn of(
        piece: &Piece,
        vector_on_region: bool,
        request: &Request,
        watch: &dyn Watch,
    ) -> Result<Option<Self>, EntropyError> {
        let network = &piece.network;
        let mut shape = Shape::of(network);
        let (region, complement) = network.boundary().split_at(piece.region_legs);
        let (held, open) =
            if vector_on_region { (region, complement) } else { (complement, region) };
        shape.tensors.push(held.to_vec());
        shape.open = open.to_vec();
        let order = order::Request { seed: request.seed, work: 300_000, ..Default::default() };
        let found = order::search(&shape, &order, watch)?;
        let applications = (2 * SAMPLES * STEPS) as f64;
        if found.cost.log10_multiply_adds + applications.log10() > request.log10_multiply_adds
            || found.cost.log2_peak_elements + 4.0 > (request.memory_bytes as f64).log2() - 1.0
        {
            return Ok(None);
        }
        let blocks = network
            .tensor_ids()
            .map(|t| {
                let block = network.block(t);
                // The way back is M†: the conjugated piece.
                if vector_on_region { conjugate(block) } else { Arc::clone(block) }
            })
            .collect();
        let dims = held.iter().map(|&l: &Label| network.dim(l)).collect();
        Ok(Some(Self { shape, blocks, plan: found.plan, dims }))
    }
    fn apply(&self, v: Vec<Complex64>, watch: &dyn Watch) -> Result<Vec<Complex64>, EntropyError> {
        let array = ArrayD::from_shape_vec(IxDyn(&self.dims), v).expect("a vector of the side");
        let dense = Dense::Complex(array);
        let block = Block::lazy(
            "vector",
            self.dims.clone(),
            IsometryTable::unknown(self.dims.len()),
            None,
            move || Entries::Dense(dense.clone()),
        );
        let mut blocks = self.blocks.clone();
        blocks.push(Arc::new(block));
        let problem = Problem { shape: self.shape.clone(), blocks };
        let outcome = contract::solve(&problem, &self.plan, &contract::Request::default(), watch)?;
        let scale = 10f64.powf(outcome.log10_scale);
        let array = outcome.tensor.into_parts().1.to_complex();
        Ok(array.iter().map(|x| x * scale).collect())
    }
}

/// M M† or M† M, on the smaller side.
struct Operator {
    first: Half,
    second: Half,
}

impl Operator {
    fn of(
        piece: &Piece,
        request: &Request,
        watch: &dyn Watch,
    ) -> Result<Option<Self>, EntropyError> {
        let network = &piece.network;
        let log2 = |labels: &[Label]| -> f64 {
            labels.iter().map(|&l| (network.dim(l) as f64).log2()).sum()
        };
        let (region, complement) = network.boundary().split_at(piece.region_legs);
        let on_region = log2(region) <= log2(complement);
        // Lanczos keeps all its vectors.
        let kept = log2(region).min(log2(complement)) + 4.0 + (STEPS as f64).log2();
        if kept > (request.memory_bytes as f64).log2() - 1.0 {
            return Ok(None);
        }
        let halves = (
            Half::of(piece, on_region, request, watch)?,
            Half::of(piece, !on_region, request, watch)?,
        );
        Ok(match halves {
            (Some(first), Some(second)) => Some(Self { first, second }),
            _ => None,
        })
    }
    fn size(&self) -> usize {
        self.first.dims.iter().product()
    }
    /// Nodes and weights of the quadrature that starts from a unit vector.
    fn lanczos(
        &self,
        start: Vec<Complex64>,
        watch: &dyn Watch,
    ) -> Result<(Vec<f64>, Vec<f64>), EntropyError> {
        let steps = STEPS.min(start.len());
        let mut basis = vec![start];
        let (mut alpha, mut beta): (Vec<f64>, Vec<f64>) = (Vec::new(), Vec::new());
        for k in 0..steps {
            let mut w = self.second.apply(self.first.apply(basis[k].clone(), watch)?, watch)?;
            alpha.push(dot(&basis[k], &w).re);
            // Twice is enough to be orthogonal to working precision.
            for _ in 0..2 {
                for b in &basis {
                    let c = dot(b, &w);
                    w.iter_mut().zip(b).for_each(|(x, y)| *x -= c * y);
                }
            }
            let norm = length(&w);
            let scale: f64 = alpha.iter().fold(0.0, |m, a| m.max(a.abs()));
            if k + 1 == steps || norm <= 1e-13 * scale {
                break;
            }
            beta.push(norm);
            w.iter_mut().for_each(|x| *x /= norm);
            basis.push(w);
        }
        let k = alpha.len();
        let mut t = Array2::<f64>::zeros((k, k));
        for i in 0..k {
            t[[i, i]] = alpha[i];
            if i + 1 < k {
                t[[i, i + 1]] = beta[i];
                t[[i + 1, i]] = beta[i];
            }
        }
        let (nodes, vectors) = linalg::hermitian_eigen(&t.view())?;
        let weights = (0..k).map(|j| vectors[[0, j]].powi(2)).collect();
        Ok((nodes, weights))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::entropy::contraction::by_contraction;
    use crate::entropy::solve::Solved;
    use crate::entropy::testing::ring;
    use crate::watch::Silent;

    #[test]
    fn the_estimate_lies_within_four_of_its_errors() {
        for (n, dim) in [(2, 6), (3, 6), (3, 3)] {
            let piece = ring(n, dim);
            let request = Request::default();
            let Solved::Values(spectrum, ..) =
                by_contraction(&piece, &request, &Silent).expect("it runs")
            else {
                panic!("a ring of {n} fits the budget")
            };
            let exact = spectrum.entropy();
            let (s, error) =
                estimate(&piece, &request, &Silent).expect("it runs").expect("it fits");
            assert!((s - exact).abs() < 4.0 * error + 1e-9, "{n}, {dim}: {s} ± {error}, {exact}");
            assert!(error < 0.3, "{n}, {dim}: an error of {error} says nothing");
        }
    }
}
