//! Perfect tensors searched for by alternating polar projections.
//!
//! One step replaces the array, read as a matrix in one balanced split, by the nearest
//! isometry, then goes on to the next split (for four legs: Phys. Rev. Lett. 128, 080507
//! (2022)). This is a heuristic: where it ends without success nothing is proven, and what it
//! finds is a numerical solution with a stated defect.

use super::gaussian::gaussian;
use super::numeric::matrix;
use super::stabilizer_tensor::halves;
use crate::linalg::{LinalgError, blocks, thin_svd};
use crate::watch::{News, Watch};
use ndarray::{Array2, ArrayD, IxDyn};
use num_complex::Complex64;
use rand::seq::SliceRandom;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use rayon::prelude::*;
use std::sync::Mutex;
use std::sync::atomic::{AtomicUsize, Ordering};
use thiserror::Error;

/// Where a search starts.
#[derive(Debug, Clone, PartialEq)]
pub enum Start {
    /// Complex Gaussian entries.
    Random,
    /// A random permutation of the levels of the first half to those of the second, with
    /// noise (an even number of legs only).
    Permutation,
    /// A given array, with noise.
    Array(ArrayD<Complex64>),
    /// Random phases in the family of matrices diagonal in the basis (X^a Z^b ⊗ 1)Σ|kk⟩ (four
    /// legs only; D² phases; the steps never leave the family): Quantum 8, 1528 (2024).
    BellDiagonal,
}

/// What a search is asked for.
#[derive(Debug, Clone, PartialEq)]
pub struct FindRequest {
    /// Number of legs.
    pub legs: usize,
    /// Dimension of each.
    pub dimension: usize,
    /// Where it starts.
    pub start: Start,
    /// Size of the noise added to permutations and given arrays, relative to an entry's root
    /// mean square; the first start from a given array has none.
    pub noise: f64,
    /// Starts tried; each draws from its own stream of the seed.
    pub starts: usize,
    /// Steps through all splits that one start may take.
    pub iterations: usize,
    /// Seconds after which no start goes on, by the caller's clock.
    pub seconds: Option<f64>,
    /// Defect at which a start has succeeded.
    pub tolerance: f64,
    /// Seed.
    pub seed: u64,
}

impl FindRequest {
    /// 64 starts of up to 20000 rounds, noise 0.3, to a defect of 1e-14, seed 0.
    pub fn new(legs: usize, dimension: usize, start: Start) -> Self {
        Self {
            legs,
            dimension,
            start,
            noise: 0.3,
            starts: 64,
            iterations: 20_000,
            seconds: None,
            tolerance: 1e-14,
            seed: 0,
        }
    }
}

/// Why a start ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[non_exhaustive]
pub enum Reason {
    /// The defect fell to the tolerance, or to the rounding error near it.
    Converged,
    /// The defect stopped falling.
    Stuck,
    /// All rounds were used.
    Rounds,
    /// The time was used.
    Time,
    /// The caller asked to stop.
    Stopped,
}

impl std::fmt::Display for Reason {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Reason::Converged => "converged",
            Reason::Stuck => "the defect stopped falling",
            Reason::Rounds => "all rounds were used",
            Reason::Time => "the time was used",
            Reason::Stopped => "stopped from outside",
        })
    }
}

/// The best array of a search.
#[derive(Debug, Clone, PartialEq)]
pub struct Found {
    /// The array, normalised as an isometry.
    pub array: ArrayD<Complex64>,
    /// The largest ‖M†M − 1‖ (spectral norm) over all balanced splits.
    pub defect: f64,
    /// Number of the start that led to it.
    pub start: usize,
    /// Rounds that this start took.
    pub rounds: usize,
    /// Why it ended.
    pub reason: Reason,
    /// Starts finished when the search ended, up to the one reported.
    pub starts_run: usize,
}

/// Why a search cannot begin or failed.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum FindError {
    /// Too few or too many legs or levels.
    #[error(
        "a search needs 2 to 10 legs of dimension 2 or more with at most {most} entries, not \
         {legs} legs of dimension {dimension}"
    )]
    Size {
        /// Legs.
        legs: usize,
        /// Dimension.
        dimension: usize,
        /// Most entries.
        most: usize,
    },
    /// The start does not fit the legs.
    #[error("a start from {start} needs {needs}, not {legs} legs")]
    Start {
        /// Which start.
        start: &'static str,
        /// What it needs.
        needs: &'static str,
        /// Legs asked for.
        legs: usize,
    },
    /// The array to start from has another shape.
    #[error("the array to start from has shape {found:?}, but {expected:?} is searched for")]
    Shape {
        /// Its shape.
        found: Vec<usize>,
        /// The shape searched for.
        expected: Vec<usize>,
    },
    /// No start was asked for.
    #[error("a search needs at least one start and one round")]
    Nothing,
    /// A decomposition failed its own check.
    #[error(transparent)]
    Linalg(#[from] LinalgError),
}

const MOST_ENTRIES: usize = 1 << 22;

/// Searches for a perfect tensor. The first start (by number) that converges wins, so that
/// the result does not depend on the number of threads; without success the smallest defect
/// is reported.
///
/// Cost a round: one singular value decomposition a balanced split, of D^⌊n/2⌋ columns, or of
/// the independent blocks where the matrices have such.
///
/// # Errors
/// [`FindError`]. Failing to converge is no error: the reason stands in [`Found`].
pub fn find(request: &FindRequest, watch: &dyn Watch) -> Result<Found, FindError> {
    validate(request)?;
    let began = watch.seconds();
    let best = Mutex::new(f64::INFINITY);
    let winner = AtomicUsize::new(usize::MAX);
    watch.tell(News::Stage("alternating projections"));
    let runs: Vec<Option<Result<Found, FindError>>> = (0..request.starts)
        .into_par_iter()
        .map(|number| {
            if winner.load(Ordering::Relaxed) < number {
                return None;
            }
            let halt = || -> Option<Reason> {
                if watch.stop() {
                    Some(Reason::Stopped)
                } else if request.seconds.is_some_and(|s| watch.seconds() - began > s) {
                    Some(Reason::Time)
                } else if winner.load(Ordering::Relaxed) < number {
                    Some(Reason::Stuck)
                } else {
                    None
                }
            };
            if number > 0 && halt().is_some() {
                return None;
            }
            let tell = |defect: f64, round: usize| {
                let mut least = best.lock().expect("no holder panics");
                if defect < 0.99 * *least {
                    *least = defect;
                    let text = format!("best defect {defect:.3e} (start {number}, round {round})");
                    watch.tell(News::Best(&text));
                }
            };
            let run = run(request, number, &halt, &tell);
            if matches!(&run, Ok(found) if found.reason == Reason::Converged) {
                winner.fetch_min(number, Ordering::Relaxed);
            }
            Some(run)
        })
        .collect();
    let mut chosen: Option<Found> = None;
    let mut finished = 0;
    for run in runs.into_iter().flatten() {
        let run = run?;
        finished += 1;
        let converged = run.reason == Reason::Converged;
        if converged || chosen.as_ref().is_none_or(|c| run.defect < c.defect) {
            chosen = Some(run);
        }
        if converged {
            break;
        }
    }
    let mut found = chosen.expect("start 0 always runs");
    found.starts_run = finished;
    Ok(found)
}

fn validate(request: &FindRequest) -> Result<(), FindError> {
    let (legs, d) = (request.legs, request.dimension);
    let size = d.checked_pow(legs as u32);
    if !(2..=10).contains(&legs) || d < 2 || size.is_none_or(|s| s > MOST_ENTRIES) {
        return Err(FindError::Size { legs, dimension: d, most: MOST_ENTRIES });
    }
    if request.starts == 0 || request.iterations == 0 {
        return Err(FindError::Nothing);
    }
    match &request.start {
        Start::Permutation if legs % 2 == 1 => {
            Err(FindError::Start { start: "a permutation", needs: "an even number of legs", legs })
        }
        Start::BellDiagonal if legs != 4 => {
            Err(FindError::Start { start: "Bell-diagonal phases", needs: "four legs", legs })
        }
        Start::Array(a) if a.shape() != vec![d; legs] => {
            Err(FindError::Shape { found: a.shape().to_vec(), expected: vec![d; legs] })
        }
        _ => Ok(()),
    }
}

fn run(
    request: &FindRequest,
    number: usize,
    halt: &dyn Fn() -> Option<Reason>,
    tell: &dyn Fn(f64, usize),
) -> Result<Found, FindError> {
    let masks: Vec<u64> = halves(request.legs).collect();
    let mut rng = ChaCha8Rng::seed_from_u64(request.seed);
    rng.set_stream(number as u64);
    let mut array = begin(request, number, &mut rng);
    let mut best = (f64::INFINITY, 0, array.clone());
    let mut reason = Reason::Rounds;
    // The defect a while ago, to notice when it no longer falls.
    let mut earlier = f64::INFINITY;
    let mut rounds = 0;
    for round in 1..=request.iterations {
        rounds = round;
        let before = array.clone();
        let mut defect: f64 = 0.0;
        for &mask in &masks {
            let worst;
            (array, worst) = project(&array, mask)?;
            defect = defect.max(worst);
        }
        // The first split's defect belongs to `before`, and so does the largest only in the
        // limit; what is reported is measured anew below.
        if defect < best.0 {
            best = (defect, round, before);
        }
        if round % 8 == 0 {
            tell(best.0, round);
            if let Some(why) = halt() {
                reason = why;
                break;
            }
        }
        if defect <= request.tolerance {
            reason = Reason::Converged;
            break;
        }
        if round % 256 == 0 {
            // Near rounding error the last digits wander; above it a plateau is the end.
            if best.0 > 0.999 * earlier {
                reason =
                    if best.0 < 100.0 * f64::EPSILON { Reason::Converged } else { Reason::Stuck };
                break;
            }
            earlier = best.0;
        }
    }
    let array = best.2;
    let mut defect: f64 = 0.0;
    for &mask in &masks {
        defect = defect.max(project(&array, mask)?.1);
    }
    Ok(Found { array, defect, start: number, rounds, reason, starts_run: 0 })
}

/// The nearest isometry in one split, and ‖M†M − 1‖ before.
fn project(array: &ArrayD<Complex64>, mask: u64) -> Result<(ArrayD<Complex64>, f64), LinalgError> {
    let m = matrix(array, mask);
    let mut out = Array2::<Complex64>::zeros(m.dim());
    let mut defect: f64 = 0.0;
    let mut covered = 0;
    for patch in blocks(&m.view(), 0.0) {
        let svd = thin_svd(&patch.of(&m.view()).view())?;
        covered += patch.columns.len();
        defect = svd.s.iter().map(|s| (s * s - 1.0).abs()).fold(defect, f64::max);
        if patch.rows.len() < patch.columns.len() {
            defect = defect.max(1.0);
        }
        let nearest = svd.u.dot(&svd.vt);
        for (i, &r) in patch.rows.iter().enumerate() {
            for (j, &c) in patch.columns.iter().enumerate() {
                out[[r, c]] = nearest[[i, j]];
            }
        }
    }
    if covered < m.ncols() {
        defect = defect.max(1.0);
    }
    Ok((restore(&out, array.shape(), mask), defect))
}

/// The inverse of reading an array as a matrix from the legs in the mask to the rest.
fn restore(m: &Array2<Complex64>, shape: &[usize], mask: u64) -> ArrayD<Complex64> {
    let legs = shape.len();
    let mut order: Vec<usize> = (0..legs).filter(|l| mask >> l & 1 == 0).collect();
    order.extend((0..legs).filter(|l| mask >> l & 1 == 1));
    let permuted: Vec<usize> = order.iter().map(|&l| shape[l]).collect();
    let mut back = vec![0; legs];
    for (at, &l) in order.iter().enumerate() {
        back[l] = at;
    }
    m.view()
        .into_shape_with_order(IxDyn(&permuted))
        .expect("the sizes multiply to the whole")
        .permuted_axes(back)
        .as_standard_layout()
        .into_owned()
}

fn begin(request: &FindRequest, number: usize, rng: &mut ChaCha8Rng) -> ArrayD<Complex64> {
    let (legs, d) = (request.legs, request.dimension);
    let shape = vec![d; legs];
    let size = d.pow(legs as u32);
    let unit = (d.pow(legs as u32 / 2) as f64 / size as f64).sqrt();
    let mut values = match &request.start {
        Start::Random => gaussian(rng, size).into_iter().map(|v| v * unit).collect(),
        Start::Permutation => {
            let half = d.pow(legs as u32 / 2);
            let mut image: Vec<usize> = (0..half).collect();
            image.shuffle(rng);
            let mut values = vec![Complex64::default(); size];
            for (row, col) in image.into_iter().enumerate() {
                values[row * half + col] = Complex64::new(1.0, 0.0);
            }
            values
        }
        Start::Array(a) => {
            let norm = a.iter().map(Complex64::norm_sqr).sum::<f64>().sqrt();
            let target = (d.pow(legs as u32 / 2) as f64).sqrt();
            a.iter().map(|v| v * (target / norm)).collect()
        }
        Start::BellDiagonal => bell_diagonal(d, rng),
    };
    let noisy = match request.start {
        Start::Permutation => true,
        Start::Array(_) => number > 0,
        _ => false,
    };
    if noisy && request.noise > 0.0 {
        let noise = gaussian(rng, size);
        for (v, n) in values.iter_mut().zip(noise) {
            *v += n * (unit * request.noise);
        }
    }
    ArrayD::from_shape_vec(shape, values).expect("one value an entry")
}

/// U_{ij,kl} = (1/D) Σ_b λ_{ab} ω^{b(j−l)} where i − j = k − l = a, with random |λ| = 1.
fn bell_diagonal(d: usize, rng: &mut ChaCha8Rng) -> Vec<Complex64> {
    let turn = std::f64::consts::TAU;
    let phases: Vec<f64> = (0..d * d).map(|_| turn * rng.random::<f64>()).collect();
    let mut values = vec![Complex64::default(); d.pow(4)];
    for a in 0..d {
        for j in 0..d {
            for l in 0..d {
                let sum: Complex64 = (0..d)
                    .map(|b| {
                        let angle = turn * (b * (j + d - l) % d) as f64 / d as f64;
                        Complex64::from_polar(1.0, phases[a * d + b] + angle)
                    })
                    .sum();
                let (i, k) = ((j + a) % d, (l + a) % d);
                values[((i * d + j) * d + k) * d + l] = sum / d as f64;
            }
        }
    }
    values
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::watch::Silent;

    #[test]
    fn three_levels_are_found_from_random() {
        let request = FindRequest::new(4, 3, Start::Random);
        let found = find(&request, &Silent).unwrap();
        assert_eq!(found.reason, Reason::Converged);
        assert!(found.defect < 1e-13, "{}", found.defect);
    }

    #[test]
    fn six_levels_are_found_among_bell_diagonal_phases() {
        let request = FindRequest::new(4, 6, Start::BellDiagonal);
        let found = find(&request, &Silent).unwrap();
        assert_eq!(found.reason, Reason::Converged, "{}", found.defect);
        assert!(found.defect < 1e-13, "{}", found.defect);
    }

    #[test]
    fn two_levels_end_without_success() {
        let mut request = FindRequest::new(4, 2, Start::Random);
        request.starts = 2;
        request.iterations = 600;
        let found = find(&request, &Silent).unwrap();
        assert_ne!(found.reason, Reason::Converged);
        assert!(found.defect > 0.1);
        assert_eq!(found.starts_run, 2);
    }

    #[test]
    fn the_number_of_threads_changes_nothing() {
        let request = FindRequest::new(4, 3, Start::Permutation);
        let one = rayon::ThreadPoolBuilder::new().num_threads(1).build().unwrap();
        let many = rayon::ThreadPoolBuilder::new().num_threads(3).build().unwrap();
        let a = one.install(|| find(&request, &Silent).unwrap());
        let b = many.install(|| find(&request, &Silent).unwrap());
        assert_eq!(a, b);
    }
}
