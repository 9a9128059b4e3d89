//! Drawings as pixels, with the font that ships; behind the feature `png`.

#[cfg(not(feature = "png"))]
mod disabled;
#[cfg(feature = "png")]
mod enabled;

#[cfg(not(feature = "png"))]
pub use disabled::png;
#[cfg(feature = "png")]
pub use enabled::png;

/// Most pixels either way.
pub const MOST_PIXELS: u32 = 20_000;
