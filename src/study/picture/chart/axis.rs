//! Axes: their span, their ticks, how numbers on them are written.

/// How an axis measures.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Scale {
    /// Evenly.
    #[default]
    Linear,
    /// By powers of ten.
    Log,
}

/// One axis.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Axis {
    /// What it measures, with the unit.
    pub label: String,
    /// How it measures.
    pub scale: Scale,
    /// Its ends; taken from the data where none are given.
    pub range: Option<(f64, f64)>,
    /// Ticks that say something else than their number, as (place, word): categories.
    pub words: Vec<(f64, String)>,
}

impl Axis {
    /// An even axis.
    pub fn linear(label: impl Into<String>) -> Self {
        Self { label: label.into(), ..Self::default() }
    }
    /// An axis by powers of ten.
    pub fn log(label: impl Into<String>) -> Self {
        Self { label: label.into(), scale: Scale::Log, ..Self::default() }
    }
    /// The same axis between these ends.
    #[must_use]
    pub fn between(mut self, low: f64, high: f64) -> Self {
        self.range = Some((low, high));
        self
    }
}

/// An axis with its ends settled.
#[derive(Debug, Clone, Copy)]
pub(super) struct Span {
    pub(super) low: f64,
    pub(super) high: f64,
    pub(super) log: bool,
}

impl Span {
    /// The ends for these values, on round numbers.
    pub(super) fn of(axis: &Axis, values: impl Iterator<Item = f64>, from_zero: bool) -> Self {
        let log = axis.scale == Scale::Log;
        if let Some((low, high)) = axis.range
            && low < high
            && (!log || low > 0.0)
            && low.is_finite()
            && high.is_finite()
        {
            return Self { low, high, log };
        }
        let (mut low, mut high) = values
            .filter(|v| v.is_finite() && (!log || *v > 0.0))
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(a, b), v| (a.min(v), b.max(v)));
        if low > high {
            (low, high) = if log { (0.1, 10.0) } else { (0.0, 1.0) };
        }
        if log {
            let (mut a, mut b) = (low.log10().floor(), high.log10().ceil());
            if a == b {
                (a, b) = (a - 1.0, b + 1.0);
            }
            return Self { low: 10f64.powf(a), high: 10f64.powf(b), log };
        }
        if from_zero || (low > 0.0 && low < 0.4 * high) {
            low = low.min(0.0);
        }
        if low == high {
            (low, high) = (low - 0.5, high + 0.5);
        }
        let step = nice((high - low) / 5.0);
        Self { low: (low / step).floor() * step, high: ((high / step) - 1e-9).ceil() * step, log }
    }
    /// Where a value lies between the ends, 0 to 1.
    pub(super) fn share(self, v: f64) -> f64 {
        if self.log {
            (v.max(1e-300) / self.low).log10() / (self.high / self.low).log10()
        } else {
            (v - self.low) / (self.high - self.low)
        }
    }
    /// Ticks with their words, at most about `most` of them.
    pub(super) fn ticks(self, most: usize) -> Vec<(f64, String)> {
        if self.log {
            let (a, b) = (self.low.log10(), self.high.log10());
            if b - a >= 1.0 {
                let step = ((b - a) / most as f64).ceil().max(1.0);
                let mut at = (a / step - 1e-9).ceil() * step;
                let mut ticks = Vec::new();
                while at <= b + 1e-9 {
                    ticks.push((10f64.powf(at), power(at.round() as i64)));
                    at += step;
                }
                return ticks;
            }
        }
        let step = nice((self.high - self.low) / most as f64);
        let places = (-step.log10().floor()).max(0.0) as usize;
        let big = self.low.abs().max(self.high.abs()) >= 1e6;
        let first = (self.low / step - 1e-9).ceil() as i64;
        let last = (self.high / step + 1e-9).floor() as i64;
        (first..=last)
            .map(|k| {
                let v = k as f64 * step;
                let word = if big {
                    format!("{v:.1e}")
                } else {
                    let places = if places > 0 || step.fract() != 0.0 { places.max(1) } else { 0 };
                    format!("{v:.places$}").replace('-', "−")
                };
                (v, word)
            })
            .collect()
    }
}

/// The round number (1, 2, 2.5 or 5 times a power of ten) at or above `x`.
fn nice(x: f64) -> f64 {
    let unit = 10f64.powf(x.log10().floor());
    let m = x / unit;
    let round = [1.0, 2.0, 5.0, 10.0].into_iter().find(|r| m <= r * (1.0 + 1e-9)).unwrap_or(10.0);
    round * unit
}

/// A power of ten, its exponent raised.
fn power(exponent: i64) -> String {
    match exponent {
        0 => return "1".into(),
        1 => return "10".into(),
        _ => {}
    }
    let digits = exponent.to_string();
    let raised = digits.chars().map(|c| match c {
        '-' => '⁻',
        '1' => '¹',
        '2' => '²',
        '3' => '³',
        d => char::from_u32('⁰' as u32 + d.to_digit(10).unwrap_or(0)).unwrap_or('⁰'),
    });
    std::iter::once("10".to_owned()).chain(raised.map(String::from)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round() {
        let axis = Axis::linear("legs");
        let span = Span::of(&axis, [0.3, 7.2].into_iter(), false);
        assert_eq!((span.low, span.high), (0.0, 8.0));
        let words: Vec<_> = span.ticks(5).into_iter().map(|t| t.1).collect();
        assert_eq!(words, ["0", "2", "4", "6", "8"]);
        let fine = Span { low: 0.0, high: 0.2, log: false };
        let words: Vec<_> = fine.ticks(4).into_iter().map(|t| t.1).collect();
        assert_eq!(words, ["0.00", "0.05", "0.10", "0.15", "0.20"]);
    }

    #[test]
    fn powers_of_ten_are_raised() {
        let span = Span::of(&Axis::log("p"), [0.002, 40.0].into_iter(), false);
        let words: Vec<_> = span.ticks(8).into_iter().map(|t| t.1).collect();
        assert_eq!(words, ["10⁻³", "10⁻²", "10⁻¹", "1", "10", "10²"]);
    }

    #[test]
    fn equal_values_still_span() {
        let span = Span::of(&Axis::linear(""), [3.0, 3.0].into_iter(), false);
        assert!(span.low < 3.0 && span.high > 3.0);
    }
}
