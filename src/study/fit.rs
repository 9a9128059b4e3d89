//! Fit of mean entropies of intervals to the logarithmic law.

use serde::{Deserialize, Serialize};

/// S(l) = (c/3) ln((N/π) sin(πl/N)) + s₀, fitted by least squares, all lengths alike.
///
/// Source of the law: J. Stat. Mech. (2004) P06002.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Fit {
    /// c.
    pub central_charge: f64,
    /// Its standard error from the scatter about the line.
    pub central_charge_error: f64,
    /// s₀ in nats.
    pub constant_nats: f64,
    /// Root of the mean square deviation, in nats.
    pub deviation_nats: f64,
    /// Lengths used.
    pub lengths: u64,
}

/// The fit to (length, mean entropy) on a boundary of `n` sites; none below four lengths.
pub fn fit(points: &[(f64, f64)], n: usize) -> Option<Fit> {
    let m = points.len() as f64;
    if points.len() < 4 {
        return None;
    }
    let n = n as f64;
    let pi = std::f64::consts::PI;
    let xy: Vec<(f64, f64)> =
        points.iter().map(|&(l, s)| ((n / pi * (pi * l / n).sin()).ln() / 3.0, s)).collect();
    let mean_x = xy.iter().map(|p| p.0).sum::<f64>() / m;
    let mean_y = xy.iter().map(|p| p.1).sum::<f64>() / m;
    let sxx: f64 = xy.iter().map(|p| (p.0 - mean_x).powi(2)).sum();
    let sxy: f64 = xy.iter().map(|p| (p.0 - mean_x) * (p.1 - mean_y)).sum();
    // NaN comes from a length out of range.
    if sxx.is_nan() || sxx <= 1e-12 {
        return None;
    }
    let c = sxy / sxx;
    let s0 = mean_y - c * mean_x;
    let rest: f64 = xy.iter().map(|p| (p.1 - s0 - c * p.0).powi(2)).sum();
    Some(Fit {
        central_charge: c,
        central_charge_error: (rest / (m - 2.0) / sxx).sqrt(),
        constant_nats: s0,
        deviation_nats: (rest / m).sqrt(),
        lengths: points.len() as u64,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_exact_law_is_found_again() {
        let n = 30;
        let law = |l: f64| {
            let pi = std::f64::consts::PI;
            0.5 * (30.0 / pi * (pi * l / 30.0).sin()).ln() + 0.7
        };
        let points: Vec<_> = (1..30).map(|l| (l as f64, law(l as f64))).collect();
        let f = fit(&points, n).unwrap();
        assert!((f.central_charge - 1.5).abs() < 1e-12);
        assert!((f.constant_nats - 0.7).abs() < 1e-12);
        assert!(f.central_charge_error < 1e-12);
        assert_eq!(fit(&points[..3], n), None);
    }
}
