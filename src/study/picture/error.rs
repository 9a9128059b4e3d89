//! What can go wrong when a picture is made.

use thiserror::Error;

/// What can be wrong with what a picture was asked for.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum PictureError {
    /// Marks for another network than the one drawn.
    #[error("{what}: {given} marks were given, but the network has {expected}")]
    Marks {
        /// What is marked.
        what: &'static str,
        /// Marks given.
        given: usize,
        /// Marks needed.
        expected: usize,
    },
    /// More tensors than a picture can hold.
    #[error("the network has {tensors} tensors; a picture is made of at most {limit}")]
    TooMany {
        /// Tensors there are.
        tensors: usize,
        /// The limit.
        limit: usize,
    },
    /// A number in a chart that is not finite.
    #[error("series {series:?}, point {point}: {value} cannot be drawn on this axis")]
    Value {
        /// The series' name.
        series: String,
        /// Which point of it.
        point: usize,
        /// The value.
        value: f64,
    },
    /// The rasteriser refused the drawing.
    #[error("the picture could not be turned into pixels: {reason}")]
    Raster {
        /// The rasteriser's reason.
        reason: String,
    },
    /// A size in pixels that cannot be had.
    #[error(
        "a picture {width} pixels wide and {height} high cannot be made; at most {limit} either way"
    )]
    Pixels {
        /// Width asked for.
        width: u64,
        /// Height that goes with it.
        height: u64,
        /// The limit.
        limit: u64,
    },
    /// The build lacks the rasteriser.
    #[error("this build has no rasteriser; build with the feature `png` or write SVG")]
    NoRaster,
}
