//! Complex Gaussian numbers from a seed.

use num_complex::Complex64;
use rand::Rng;
use rand_chacha::ChaCha8Rng;

/// Independent complex numbers of unit variance (Ann. Math. Stat. 29, 610 (1958)).
pub(super) fn gaussian(rng: &mut ChaCha8Rng, count: usize) -> Vec<Complex64> {
    (0..count)
        .map(|_| {
            let radius = (-(1.0 - rng.random::<f64>()).ln()).sqrt();
            Complex64::from_polar(radius, std::f64::consts::TAU * rng.random::<f64>())
        })
        .collect()
}
