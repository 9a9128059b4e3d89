//! Without the rasteriser.

use crate::study::picture::PictureError;

/// A drawing as a PNG file `width` pixels wide; this build has no rasteriser.
///
/// # Errors
/// Always [`PictureError::NoRaster`].
pub fn png(_svg: &str, _width: u32) -> Result<Vec<u8>, PictureError> {
    Err(PictureError::NoRaster)
}
