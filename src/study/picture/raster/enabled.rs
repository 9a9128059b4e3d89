//! With the rasteriser.

use super::MOST_PIXELS;
use crate::study::picture::PictureError;
use resvg::tiny_skia::{Pixmap, Transform};
use resvg::usvg::{Group, Node, Options, Tree, fontdb};
use std::sync::{Arc, OnceLock};

/// DejaVu Sans Condensed, the characters that drawings need; licence beside the file.
const FONT: &[u8] = include_bytes!("../../../../assets/fonts/DejaVuSansCondensed-subset.ttf");

/// The font that ships and no other: the same pixels on every machine.
fn fonts() -> Arc<fontdb::Database> {
    static FONTS: OnceLock<Arc<fontdb::Database>> = OnceLock::new();
    Arc::clone(FONTS.get_or_init(|| {
        let mut fonts = fontdb::Database::new();
        fonts.load_font_data(FONT.to_vec());
        fonts.set_sans_serif_family("DejaVu Sans Condensed");
        Arc::new(fonts)
    }))
}

/// A drawing as a PNG file `width` pixels wide, its proportions kept. At one column (85 mm),
/// 1004 pixels are 300 to the inch.
///
/// The rasteriser drops text without a word where it lacks a font; so every text of the
/// drawing is counted again before it is painted.
///
/// # Errors
/// [`PictureError::Raster`] where the drawing is none or loses a text,
/// [`PictureError::Pixels`].
pub fn png(svg: &str, width: u32) -> Result<Vec<u8>, PictureError> {
    let raster = |reason: String| PictureError::Raster { reason };
    let options = Options {
        fontdb: fonts(),
        font_family: "DejaVu Sans Condensed".into(),
        resources_dir: None,
        ..Options::default()
    };
    let tree = Tree::from_str(svg, &options).map_err(|e| raster(e.to_string()))?;
    let (wanted, found) = (svg.matches("<text").count(), texts(tree.root()));
    if found < wanted {
        return Err(raster(format!("{} of {wanted} texts have no letters", wanted - found)));
    }
    let size = tree.size();
    let scale = f64::from(width) / f64::from(size.width());
    let height = (f64::from(size.height()) * scale).round().max(1.0) as u64;
    let most = u64::from(MOST_PIXELS);
    let refused = PictureError::Pixels { width: width.into(), height, limit: most };
    if width == 0 || u64::from(width) > most || height > most {
        return Err(refused);
    }
    let mut pixels = Pixmap::new(width, height as u32).ok_or(refused)?;
    resvg::render(&tree, Transform::from_scale(scale as f32, scale as f32), &mut pixels.as_mut());
    pixels.encode_png().map_err(|e| raster(e.to_string()))
}

/// Texts that became letters.
fn texts(group: &Group) -> usize {
    group
        .children()
        .iter()
        .map(|node| match node {
            Node::Text(t) => usize::from(!t.flattened().children().is_empty()),
            Node::Group(g) => texts(g),
            _ => 0,
        })
        .sum()
}
