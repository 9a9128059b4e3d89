//! The spectrum of a reduced state, with multiplicities.

/// A value of the spectrum.
#[derive(Debug, Clone, Copy, PartialEq, serde::Serialize)]
pub struct Level {
    /// Eigenvalue of the reduced density matrix.
    pub probability: f64,
    /// How often it occurs.
    pub multiplicity: f64,
}

/// A product of spectra: a flat one of e^`flat_nats` equal values and any number of others.
///
/// Invariants: (1) in each part Σ multiplicity·probability = 1 within rounding; (2) levels
/// descend in probability and are positive.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Spectrum {
    flat_nats: f64,
    parts: Vec<Vec<Level>>,
}

/// Relative distance below which two eigenvalues are counted as one.
const SAME: f64 = 1e-9;

impl Spectrum {
    /// e^`nats` equal values.
    pub fn flat(nats: f64) -> Self {
        Self { flat_nats: nats, parts: Vec::new() }
    }
    /// The spectrum that belongs to these singular values (any order, any positive norm).
    /// Values below `cut` times the greatest are taken for zeros. `None` where all vanish.
    pub fn of_singular_values(values: &[f64], cut: f64) -> Option<Self> {
        let top = values.iter().copied().fold(0.0, f64::max);
        if top <= 0.0 {
            return None;
        }
        let mut p: Vec<f64> =
            values.iter().filter(|&&s| s > cut * top).map(|s| (s / top).powi(2)).collect();
        p.sort_by(|a, b| b.total_cmp(a));
        let total: f64 = p.iter().rev().sum();
        let mut levels: Vec<Level> = Vec::new();
        let mut at = 0;
        while at < p.len() {
            let mut end = at + 1;
            while end < p.len() && p[end - 1] - p[end] <= SAME * p[end - 1] {
                end += 1;
            }
            let count = (end - at) as f64;
            let mean = p[at..end].iter().sum::<f64>() / count / total;
            levels.push(Level { probability: mean, multiplicity: count });
            at = end;
        }
        if let [only] = levels[..] {
            return Some(Self::flat(only.multiplicity.ln()));
        }
        Some(Self { flat_nats: 0.0, parts: vec![levels] })
    }
    /// The product of two spectra: of a state that is a product on both sides.
    #[must_use]
    pub fn times(mut self, other: &Self) -> Self {
        self.flat_nats += other.flat_nats;
        self.parts.extend(other.parts.iter().cloned());
        self
    }
    /// Whether all values are equal.
    pub fn is_flat(&self) -> bool {
        self.parts.is_empty()
    }
    /// von Neumann entropy −Σ p ln p, in nats.
    pub fn entropy(&self) -> f64 {
        self.renyi(1.0)
    }
    /// Rényi entropy of order α ≥ 0 in nats: ln(Σ p^α)/(1−α), with the limits ln(rank) at 0,
    /// −Σ p ln p at 1 and −ln(max p) at ∞.
    ///
    /// # Panics
    /// Where α is negative or not a number.
    #[track_caller]
    pub fn renyi(&self, alpha: f64) -> f64 {
        assert!(alpha >= 0.0, "a Rényi order is at least 0, not {alpha}");
        let part = |levels: &Vec<Level>| -> f64 {
            let sum = |f: &dyn Fn(f64) -> f64| -> f64 {
                levels.iter().map(|l| l.multiplicity * f(l.probability)).sum()
            };
            if alpha == 0.0 {
                sum(&|_| 1.0).ln()
            } else if alpha == 1.0 {
                sum(&|p| -p * p.ln())
            } else if alpha.is_infinite() {
                -levels[0].probability.ln()
            } else {
                // Powers of p / p_max: nothing underflows at large orders.
                let top = levels[0].probability;
                let scaled = sum(&|p| (p / top).powf(alpha)).ln();
                (alpha * top.ln() + scaled) / (1.0 - alpha)
            }
        };
        self.flat_nats + self.parts.iter().map(part).sum::<f64>()
    }
    /// (Σ √p)²: 1 + 2·negativity of a pure state with this spectrum, as a natural logarithm.
    pub fn log_negativity(&self) -> f64 {
        self.renyi(0.5)
    }
    /// All levels of the product, descending; `None` where there would be more than `most`.
    /// Multiplicities are counted in floating point, exact up to 2^53.
    pub fn levels(&self, most: usize) -> Option<Vec<Level>> {
        let scale = (-self.flat_nats).exp();
        let count = self.flat_nats.exp();
        let count = if count < 9e15 { count.round() } else { count };
        let mut all = vec![Level { probability: scale, multiplicity: count }];
        for part in &self.parts {
            if all.len().checked_mul(part.len())? > most.max(1) * 64 {
                return None;
            }
            let mut next: Vec<Level> = all
                .iter()
                .flat_map(|a| {
                    part.iter().map(|b| Level {
                        probability: a.probability * b.probability,
                        multiplicity: a.multiplicity * b.multiplicity,
                    })
                })
                .collect();
            next.sort_by(|a, b| b.probability.total_cmp(&a.probability));
            all.clear();
            for level in next {
                match all.last_mut() {
                    Some(last)
                        if last.probability - level.probability <= SAME * last.probability =>
                    {
                        last.multiplicity += level.multiplicity;
                    }
                    _ => all.push(level),
                }
            }
        }
        (all.len() <= most).then_some(all)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn levels_are_grouped_and_normalised() {
        let s = Spectrum::of_singular_values(&[1.0, 2.0, 1.0, 0.0, 1e-14], 1e-12).unwrap();
        let levels = s.levels(10).unwrap();
        assert_eq!(levels.len(), 2);
        assert!((levels[0].probability - 4.0 / 6.0).abs() < 1e-15);
        assert_eq!(levels[1].multiplicity, 2.0);
        let by_hand = -(2.0f64 / 3.0) * (2.0f64 / 3.0).ln() - (1.0f64 / 3.0) * (1.0f64 / 6.0).ln();
        assert!((s.entropy() - by_hand).abs() < 1e-14);
        assert_eq!(s.renyi(0.0), 3f64.ln());
        assert!((s.renyi(f64::INFINITY) - 1.5f64.ln()).abs() < 1e-15);
        // Rényi entropies fall with the order.
        let mut last = f64::INFINITY;
        for a in [0.0, 0.3, 0.999, 1.0, 1.001, 2.0, 7.0, 300.0, f64::INFINITY] {
            let now = s.renyi(a);
            assert!(now <= last + 1e-9, "order {a}: {now} after {last}");
            last = now;
        }
    }

    #[test]
    fn a_product_adds_entropies_and_multiplies_levels() {
        let a = Spectrum::of_singular_values(&[3.0, 1.0], 1e-12).unwrap();
        let p = a.clone().times(&a).times(&Spectrum::flat(5f64.ln()));
        assert!((p.entropy() - 2.0 * a.entropy() - 5f64.ln()).abs() < 1e-14);
        let levels = p.levels(10).unwrap();
        let counts: Vec<f64> = levels.iter().map(|l| l.multiplicity).collect();
        assert_eq!(counts, [5.0, 10.0, 5.0]);
        let total: f64 = levels.iter().map(|l| l.probability * l.multiplicity).sum();
        assert!((total - 1.0).abs() < 1e-14);
        assert!(p.levels(2).is_none());
    }

    #[test]
    fn nothing_has_no_spectrum() {
        assert!(Spectrum::of_singular_values(&[0.0, 0.0], 1e-12).is_none());
        assert!(Spectrum::of_singular_values(&[], 1e-12).is_none());
    }
}
