//! What a chart shows.

use crate::study::picture::PictureError;

/// One observation, with an interval round it where it has one.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Point {
    /// Along the horizontal axis.
    pub x: f64,
    /// Along the vertical axis.
    pub y: f64,
    /// Lower and upper end of its error bar.
    pub interval: Option<(f64, f64)>,
}

impl Point {
    /// Without an interval.
    pub const fn new(x: f64, y: f64) -> Self {
        Self { x, y, interval: None }
    }
    /// With an error bar from `low` to `high`.
    pub const fn between(x: f64, y: f64, low: f64, high: f64) -> Self {
        Self { x, y, interval: Some((low, high)) }
    }
}

/// How a series is drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Look {
    /// A line through markers.
    #[default]
    Line,
    /// A line alone: fits, theory.
    Plain,
    /// Markers alone: scatters.
    Marks,
    /// Steps that keep their value to the next point: traces.
    Steps,
    /// Bars from the axis, each as wide as the distance to its neighbour allows.
    Bars,
}

/// Points that belong together.
#[derive(Debug, Clone, PartialEq)]
pub struct Series {
    /// Its name in the legend; empty for none.
    pub name: String,
    /// Its points, in the order in which a line joins them.
    pub points: Vec<Point>,
    /// How it is drawn.
    pub look: Look,
}

impl Series {
    /// A series of points.
    pub fn new(
        name: impl Into<String>,
        look: Look,
        points: impl IntoIterator<Item = Point>,
    ) -> Self {
        Self { name: name.into(), points: points.into_iter().collect(), look }
    }
    /// # Errors
    /// [`PictureError::Value`] at the first point that the axes cannot take.
    pub(super) fn check(&self, log: (bool, bool)) -> Result<(), PictureError> {
        let good = |v: f64, log: bool| v.is_finite() && (!log || v > 0.0);
        for (i, p) in self.points.iter().enumerate() {
            let bad =
                |value| Err(PictureError::Value { series: self.name.clone(), point: i, value });
            if !good(p.x, log.0) {
                return bad(p.x);
            }
            if !good(p.y, log.1) {
                return bad(p.y);
            }
            if let Some((a, b)) = p.interval
                && (!a.is_finite() || !b.is_finite())
            {
                return bad(if a.is_finite() { b } else { a });
            }
        }
        Ok(())
    }
}

/// Counts of `values` in `bins` equal bins from the least to the greatest, as bars at the
/// bins' middles; whole numbers that span less than `bins` get a bin each. Values that are
/// not finite are left out.
pub fn histogram(name: impl Into<String>, values: &[f64], bins: usize) -> Series {
    let finite: Vec<f64> = values.iter().copied().filter(|v| v.is_finite()).collect();
    let low = finite.iter().copied().fold(f64::INFINITY, f64::min);
    let high = finite.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let bins = bins.max(1);
    let mut points = Vec::new();
    if low <= high {
        let whole = finite.iter().all(|v| v.fract() == 0.0) && high - low < bins as f64;
        let (start, width, count) = if whole {
            (low - 0.5, 1.0, (high - low) as usize + 1)
        } else if low == high {
            (low - 0.5, 1.0, 1)
        } else {
            (low, (high - low) / bins as f64, bins)
        };
        let mut counts = vec![0u64; count];
        for v in &finite {
            counts[(((v - start) / width) as usize).min(count - 1)] += 1;
        }
        points = counts
            .iter()
            .enumerate()
            .map(|(k, &c)| Point::new(start + (k as f64 + 0.5) * width, c as f64))
            .collect();
    }
    Series { name: name.into(), points, look: Look::Bars }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bins_hold_every_value() {
        let whole = histogram("", &[1.0, 1.0, 3.0], 10);
        let pairs: Vec<_> = whole.points.iter().map(|p| (p.x, p.y)).collect();
        assert_eq!(pairs, [(1.0, 2.0), (2.0, 0.0), (3.0, 1.0)]);
        let spread = histogram("", &[0.0, 0.1, 0.95, 1.0, f64::NAN], 4);
        assert_eq!(spread.points.iter().map(|p| p.y).sum::<f64>(), 4.0);
        assert!(histogram("", &[], 3).points.is_empty());
    }
}
