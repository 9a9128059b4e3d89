//! Charts: lines with error bars, bars, scatters. One look for all of them; series differ by
//! colour, dash and marker at once, so that greyscale loses nothing.

mod axis;
mod draw;
mod series;

pub use axis::{Axis, Scale};
pub use draw::Chart;
pub use series::{Look, Point, Series, histogram};
