//! Averages over positions and the logarithmic law.

/// S(l) = (c/3)·ln((N/π)·sin(π·l/N)) + s, fitted by least squares.
#[derive(Debug, Clone, Copy, PartialEq, serde::Serialize)]
pub struct LogFit {
    /// c, the effective central charge.
    pub charge: f64,
    /// Its standard error from the scatter about the line.
    pub charge_error: f64,
    /// The constant s, in nats.
    pub constant: f64,
    /// Its standard error.
    pub constant_error: f64,
    /// Root of the mean squared distance from the line, in nats.
    pub scatter: f64,
}

/// Fits average entropies in nats, `averages[l]` at length l, of a ring of `sites` sites
/// (Phys. Rev. A 105, L020401 (2022) uses the form for patches of regular tilings). Lengths 0 and `sites` are left
/// out. `None` for fewer than three lengths.
pub fn fit(averages: &[(usize, f64)], sites: usize) -> Option<LogFit> {
    let n = sites as f64;
    let points: Vec<(f64, f64)> = averages
        .iter()
        .filter(|&&(l, _)| l > 0 && l < sites)
        .map(|&(l, s)| {
            let chord = n / std::f64::consts::PI * (std::f64::consts::PI * l as f64 / n).sin();
            (chord.ln(), s)
        })
        .collect();
    let count = points.len() as f64;
    if points.len() < 3 {
        return None;
    }
    let mean_x = points.iter().map(|p| p.0).sum::<f64>() / count;
    let mean_y = points.iter().map(|p| p.1).sum::<f64>() / count;
    let sxx: f64 = points.iter().map(|p| (p.0 - mean_x).powi(2)).sum();
    if sxx <= 0.0 {
        return None;
    }
    let slope = points.iter().map(|p| (p.0 - mean_x) * (p.1 - mean_y)).sum::<f64>() / sxx;
    let constant = mean_y - slope * mean_x;
    let squares: f64 = points.iter().map(|p| (p.1 - constant - slope * p.0).powi(2)).sum();
    let variance = squares / (count - 2.0);
    Some(LogFit {
        charge: 3.0 * slope,
        charge_error: 3.0 * (variance / sxx).sqrt(),
        constant,
        constant_error: (variance * (1.0 / count + mean_x * mean_x / sxx)).sqrt(),
        scatter: (squares / count).sqrt(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_is_fitted_exactly_and_noise_shows_in_the_error() {
        let law = |l: usize| {
            1.5 / 3.0
                * (100.0 / std::f64::consts::PI * (std::f64::consts::PI * l as f64 / 100.0).sin())
                    .ln()
                + 0.7
        };
        let exact: Vec<_> = (1..100).map(|l| (l, law(l))).collect();
        let f = fit(&exact, 100).unwrap();
        assert!((f.charge - 1.5).abs() < 1e-12 && (f.constant - 0.7).abs() < 1e-12);
        assert!(f.charge_error < 1e-12);
        let noisy: Vec<_> =
            (1..100).map(|l| (l, law(l) + if l % 2 == 0 { 0.1 } else { -0.1 })).collect();
        let f = fit(&noisy, 100).unwrap();
        assert!((f.charge - 1.5).abs() < 3.0 * f.charge_error && f.charge_error > 0.01);
        assert!(fit(&exact[..2], 100).is_none());
    }
}
