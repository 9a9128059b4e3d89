//! Pictures of networks and charts of numbers, as SVG (and PNG by feature `png`).
//!
//! - A network with marks on it: [`Scene`]. Tilings come out in the Poincaré disk, trees and
//!   lattices in their natural shape, anything else by its distances.
//! - [`Ink::Page`] with [`theme_css`] for drawings inside a page that knows light and dark;
//!   [`Address`] gives shapes their own elements for a script: `.site[data-site="3"]` (class
//!   `region` darkens it), `.cell[data-tensor="7"]` (classes `a`, `b`, `core` shade it),
//!   `.gate[data-label="12"]` (class `cut` shows the cut through that bond).
//! - Numbers: [`Chart`] of [`Series`], with error bars; [`histogram`] counts values into bars.
//!
//! Everything is drawn in units of a tenth of a millimetre at one journal column (85 mm).

mod canvas;
mod chart;
mod cut_curve;
mod draw_disk;
mod draw_free;
mod draw_graph;
mod draw_tiles;
mod error;
mod faces;
mod free_frame;
mod geometry;
mod graph;
mod ink;
mod marks;
mod pen;
mod placement;
mod raster;
mod rim;
mod scene;
mod sheet;
mod stones;
mod text;
mod tile_sites;
mod tiles;

pub use chart::{Axis, Chart, Look, Point, Scale, Series, histogram};
pub use error::PictureError;
pub use ink::{Ink, TEXT, theme_css};
pub use marks::{Address, Marks, Options, Reach, Share};
pub use raster::{MOST_PIXELS, png};
pub use scene::{Drawn, MOST_TENSORS, Picture, Scene, SitePlace};
