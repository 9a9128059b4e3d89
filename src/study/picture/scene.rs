//! A network, marks on it, and how to draw them: in, an SVG picture out.

use super::canvas::Canvas;
use super::marks::{Marks, Options};
use super::tiles::Tiles;
use super::{PictureError, draw_tiles};
use crate::network::Network;

/// Tensors beyond which no picture is made.
pub const MOST_TENSORS: usize = 2_000_000;

/// Something to draw.
///
/// ```
/// # use lierne::network::NetworkBuilder;
/// use lierne::study::picture::{Marks, Options, Scene};
/// # fn main() -> Result<(), Box<dyn std::error::Error>> {
/// # let network = NetworkBuilder::new("nothing").finish()?;
/// let scene = Scene { network: &network, marks: Marks::default(), options: Options::default() };
/// let picture = scene.draw()?;
/// assert!(picture.svg.starts_with("<svg"));
/// # Ok(()) }
/// ```
#[derive(Debug, Clone)]
pub struct Scene<'a> {
    /// The network.
    pub network: &'a Network,
    /// What is marked on it.
    pub marks: Marks,
    /// How it is drawn.
    pub options: Options,
}

/// A boundary site on the canvas.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SitePlace {
    /// Where it is, in units of the drawing, y down.
    pub at: [f64; 2],
    /// Its angle as seen from the middle of the drawing, in radians, counter-clockwise from
    /// the right; between sites of a disk these ascend round the rim.
    pub angle: f64,
}

/// What of the network is to be seen: far tiles are smaller than a printed dot and left out.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Drawn {
    /// Tensors with a boss.
    pub tensors: usize,
    /// Bonds with a rib.
    pub bonds: usize,
    /// Boundary sites on the rim.
    pub sites: usize,
    /// Tensors large enough to be drawn.
    pub visible_tensors: usize,
    /// Bonds both of whose ends are large enough.
    pub visible_bonds: usize,
}

/// A finished picture.
#[derive(Debug, Clone, PartialEq)]
pub struct Picture {
    /// The SVG document. Inside a page it can stand as it is.
    pub svg: String,
    /// Width and height in units of the drawing.
    pub size: [f64; 2],
    /// Where each boundary site is.
    pub sites: Vec<SitePlace>,
    /// Where each tensor is, in units of the drawing; none for tensors that have no place.
    pub tensors: Vec<Option<[f64; 2]>>,
    /// Centre and radius of the disk, where there is one.
    pub disk: Option<([f64; 2], f64)>,
    /// What is to be seen.
    pub drawn: Drawn,
}

impl Scene<'_> {
    /// Draws it: tilings in their plane (the Poincaré disk for hyperbolic ones) with
    /// geodesic edges, other networks as their shape suggests. Deterministic.
    ///
    /// Cost: linear in legs for tilings with places.
    ///
    /// # Errors
    /// [`PictureError::Marks`], [`PictureError::TooMany`].
    pub fn draw(&self) -> Result<Picture, PictureError> {
        self.marks.check(self.network)?;
        if self.network.tensors() > MOST_TENSORS {
            return Err(PictureError::TooMany {
                tensors: self.network.tensors(),
                limit: MOST_TENSORS,
            });
        }
        let mut canvas = Canvas::new(self);
        match Tiles::of(self.network) {
            Some(tiles) => draw_tiles::draw(self, &tiles, &mut canvas),
            None => super::draw_graph::draw(self, &mut canvas),
        }
        Ok(canvas.finish(self))
    }
}
