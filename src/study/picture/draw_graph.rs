//! Draws any network.

use super::canvas::Canvas;
use super::scene::Scene;

pub(super) fn draw(_scene: &Scene<'_>, _canvas: &mut Canvas) {}
