//! Measures derived from entropies, each with the evidence of its parts.

use super::answer::{Answer, EntropyError, Evidence};
use super::ask::Asker;
use crate::network::Region;
use crate::watch::Watch;
use std::fmt;

/// What is asked of one, two or three regions.
#[derive(Debug, Clone, Copy, PartialEq)]
#[non_exhaustive]
pub enum Measure {
    /// S(A).
    Entropy,
    /// Rényi entropy of this order α ≥ 0 (0: ln of the rank; ∞: −ln of the greatest value).
    Renyi(f64),
    /// Logarithmic negativity ln ‖ρ_AB^{T_A}‖₁ between A and B, in nats; with A alone, between
    /// A and its complement.
    Negativity,
    /// I(A:B) = S(A) + S(B) − S(AB).
    MutualInformation,
    /// I(A:B|C) = S(AC) + S(BC) − S(ABC) − S(C).
    ConditionalMutualInformation,
    /// I₃(A:B:C) = S(A) + S(B) + S(C) − S(AB) − S(AC) − S(BC) + S(ABC).
    TripartiteInformation,
}

impl Measure {
    /// Reads a measure's name.
    ///
    /// # Errors
    /// A sentence that lists the names.
    pub fn parse(text: &str) -> Result<Self, String> {
        Ok(match text {
            "entropy" => Self::Entropy,
            "negativity" => Self::Negativity,
            "mutual-information" => Self::MutualInformation,
            "conditional-mutual-information" => Self::ConditionalMutualInformation,
            "tripartite-information" => Self::TripartiteInformation,
            _ => {
                let order = text.strip_prefix("renyi:").and_then(|a| match a {
                    "inf" => Some(f64::INFINITY),
                    a => a.parse().ok().filter(|a| *a >= 0.0 && f64::is_finite(*a)),
                });
                return order.map(Self::Renyi).ok_or_else(|| {
                    format!(
                        "{text:?} is no measure; take entropy, renyi:A with A ≥ 0 or inf, \
                         negativity, mutual-information, conditional-mutual-information or \
                         tripartite-information"
                    )
                });
            }
        })
    }
    /// How many regions it takes, at least and at most.
    pub fn regions(&self) -> (usize, usize) {
        match self {
            Self::Entropy | Self::Renyi(_) => (1, 1),
            Self::Negativity => (1, 2),
            Self::MutualInformation => (2, 2),
            Self::ConditionalMutualInformation | Self::TripartiteInformation => (3, 3),
        }
    }
}

impl fmt::Display for Measure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Entropy => f.pad("entropy"),
            Self::Renyi(a) => write!(f, "renyi:{a}"),
            Self::Negativity => f.pad("negativity"),
            Self::MutualInformation => f.pad("mutual-information"),
            Self::ConditionalMutualInformation => f.pad("conditional-mutual-information"),
            Self::TripartiteInformation => f.pad("tripartite-information"),
        }
    }
}

/// The value of a measure, in nats.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Measured {
    /// Proven lower bound.
    pub lower: f64,
    /// Proven upper bound; equal to `lower` unless the evidence is `bounds`.
    pub upper: f64,
    /// The evidence of the weakest part.
    pub evidence: Evidence,
    /// Numerical error, the parts' errors added.
    pub error: f64,
}

impl Measured {
    /// The value, where it is known.
    pub fn value(&self) -> Option<f64> {
        (self.evidence < Evidence::Estimate).then_some(self.upper)
    }
    /// The Rényi entropy of an answer. Where its spectrum is not known, the straight wires
    /// bound every order from below, the cut bounds it from above, and for α ≤ 1 the lower
    /// bound on the von Neumann entropy holds too.
    pub fn renyi(answer: &Answer, alpha: f64) -> Self {
        let (lower, upper, evidence) = match &answer.spectrum {
            Some(s) => (s.renyi(alpha), s.renyi(alpha), answer.evidence),
            None => {
                let below = if alpha <= 1.0 { answer.lower } else { answer.straight };
                (below, answer.cut.nats, Evidence::Bounds)
            }
        };
        Self { lower, upper, evidence, error: answer.error }
    }
    /// The von Neumann entropy of an answer.
    pub fn entropy(answer: &Answer) -> Self {
        Self {
            lower: answer.lower,
            upper: answer.upper,
            evidence: answer.evidence,
            error: answer.error,
        }
    }
}

/// The union of regions.
pub fn union(regions: &[&Region]) -> Region {
    let sites = regions.iter().map(|r| r.flags().len()).max().unwrap_or(0);
    let flags =
        (0..sites).map(|k| regions.iter().any(|r| r.flags().get(k) == Some(&true))).collect();
    let mut bulk = Vec::new();
    for l in regions.iter().flat_map(|r| r.bulk()) {
        if !bulk.contains(l) {
            bulk.push(*l);
        }
    }
    Region::new(flags, bulk)
}

/// Whether two regions share a site or a bulk leg.
pub fn overlap(a: &Region, b: &Region) -> bool {
    a.flags().iter().zip(b.flags()).any(|(x, y)| *x && *y)
        || a.bulk().iter().any(|l| b.bulk().contains(l))
}

/// A measure of disjoint regions of a network, by the asker's budget.
///
/// # Errors
/// [`EntropyError`]; [`EntropyError::Regions`] where the number of regions is not the
/// measure's or two of them overlap.
pub fn of(
    asker: &Asker<'_, '_>,
    measure: Measure,
    regions: &[Region],
    watch: &dyn Watch,
) -> Result<Measured, EntropyError> {
    let (least, most) = measure.regions();
    let clash = (0..regions.len())
        .flat_map(|i| (0..i).map(move |j| (j, i)))
        .find(|&(i, j)| overlap(&regions[i], &regions[j]));
    if regions.len() < least || regions.len() > most || clash.is_some() {
        return Err(EntropyError::Regions {
            measure: measure.to_string(),
            least,
            most,
            given: regions.len(),
            overlap: clash,
        });
    }
    let sum = |terms: &[(f64, &[usize])]| -> Result<Measured, EntropyError> {
        let mut total =
            Measured { lower: 0.0, upper: 0.0, evidence: Evidence::Geometry, error: 0.0 };
        for (sign, members) in terms {
            let members: Vec<&Region> = members.iter().map(|&k| &regions[k]).collect();
            let answer = asker.ask(&union(&members), watch)?;
            let (below, above) = if *sign > 0.0 {
                (answer.lower, answer.upper)
            } else {
                (-answer.upper, -answer.lower)
            };
            total.lower += below;
            total.upper += above;
            total.evidence = total.evidence.max(answer.evidence);
            total.error += answer.error;
        }
        Ok(total)
    };
    match measure {
        Measure::Entropy => sum(&[(1.0, &[0])]),
        Measure::Renyi(alpha) => Ok(Measured::renyi(&asker.ask(&regions[0], watch)?, alpha)),
        Measure::Negativity => super::negativity::of(asker, regions, watch),
        Measure::MutualInformation => {
            let mut m = sum(&[(1.0, &[0]), (1.0, &[1]), (-1.0, &[0, 1])])?;
            if m.evidence >= Evidence::Estimate {
                m.lower = m.lower.max(0.0);
            }
            Ok(m)
        }
        Measure::ConditionalMutualInformation => {
            let mut m = sum(&[(1.0, &[0, 2]), (1.0, &[1, 2]), (-1.0, &[0, 1, 2]), (-1.0, &[2])])?;
            if m.evidence >= Evidence::Estimate {
                m.lower = m.lower.max(0.0);
            }
            Ok(m)
        }
        Measure::TripartiteInformation => sum(&[
            (1.0, &[0]),
            (1.0, &[1]),
            (1.0, &[2]),
            (-1.0, &[0, 1]),
            (-1.0, &[0, 2]),
            (-1.0, &[1, 2]),
            (1.0, &[0, 1, 2]),
        ]),
    }
}
