//! What a step costs a method, in doublings.

use super::Objective;
use super::greedy::log2_sum;

/// The price of a step, log2 of
/// 2^(`steps` · bits of the labels met) + 2^(`weight` + `results` · bits of the result).
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Price {
    /// Power of the labels met.
    pub steps: f64,
    /// log2 of the weight of results; −∞ for none.
    pub weight: f64,
    /// Power of results.
    pub results: f64,
    /// Bits of a step beyond which every further bit costs [`STEEP`] doublings.
    pub limit: f64,
}

/// Doublings that each bit beyond the limit costs.
const STEEP: f64 = 16.0;

impl Price {
    /// Multiply-adds.
    pub const ADDS: Self =
        Self { steps: 1.0, weight: f64::NEG_INFINITY, results: 1.0, limit: f64::INFINITY };
    /// A steep price on wide steps, under which a search looks for narrow ones.
    pub const NARROW: Self =
        Self { steps: 3.0, weight: f64::NEG_INFINITY, results: 1.0, limit: f64::INFINITY };
    /// A steep price on large results.
    pub const SMALL: Self = Self { steps: 1.0, weight: 0.0, results: 4.0, limit: f64::INFINITY };

    /// The price that leads towards this objective.
    pub fn of(objective: Objective) -> Self {
        match objective {
            Objective::MultiplyAdds | Objective::Balanced => Self::ADDS,
            Objective::Size => Self::SMALL,
            Objective::Mix { weight } => Self { weight: weight.log2(), ..Self::ADDS },
        }
    }
    /// The same price among orders whose steps all stay within so many bits.
    pub fn within(self, limit: f64) -> Self {
        Self { limit, ..self }
    }
    /// The price of a step that meets labels of so many bits and leaves so many.
    pub fn step(self, met: f64, left: f64) -> f64 {
        let mut steps = self.steps * met;
        if met > self.limit + 1e-9 {
            steps += STEEP * (met - self.limit);
        }
        if self.weight == f64::NEG_INFINITY {
            steps
        } else {
            log2_sum(steps, self.weight + self.results * left)
        }
    }
}
