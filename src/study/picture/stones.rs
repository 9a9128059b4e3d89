//! The rim of the disk: boundary sites as its stones, with their numbers.

use super::canvas::{Canvas, WIDTH};
use super::ink::TEXT;
use super::marks::Address;
use super::pen::{Path, View};
use super::rim;
use super::scene::Scene;
use super::sheet::{Layer, What};
use super::text;
use num_complex::Complex64;
use std::f64::consts::TAU;

/// Inner and outer radius of the rim's stones.
pub(super) const STONE: (f64, f64) = (1.012, 1.062);

/// Half the widest stone, in radians.
const WIDEST: f64 = 0.3;

/// Lays unit disks out on the canvas, one below the other, and draws them.
pub(super) fn disks(scene: &Scene<'_>, canvas: &mut Canvas, count: usize) -> Vec<View> {
    let digits = scene.network.boundary().len().to_string();
    let room = if scene.options.numbers { text::width(&digits, TEXT) + 8.0 } else { 0.0 };
    let unit = (WIDTH / 2.0 - 6.0 - room) / STONE.1;
    let below = unit * STONE.1 + if room > 0.0 { TEXT + 6.0 } else { 4.0 };
    let above = WIDTH / 2.0 - 4.0 - (room - TEXT).max(0.0);
    let mut top = canvas.top;
    let mut views = Vec::with_capacity(count);
    for _ in 0..count {
        let view = View { origin: [WIDTH / 2.0, top + above], unit, globe: false };
        let mut p = Path::new();
        p.circle(view.origin, unit);
        canvas.sheet.shape(Layer::Ground, "disk", What::Nothing, p.into_text());
        top = view.origin[1] + below;
        views.push(view);
    }
    canvas.disk = (count == 1).then(|| (views[0].origin, unit));
    canvas.bottom = top;
    views
}

/// The sites on the rim as its stones, each from half way to its neighbour to half way to
/// the other; neighbours in the region grow together unless each needs an address.
pub(super) fn lay(scene: &Scene<'_>, canvas: &mut Canvas, view: View, outer: &[usize]) {
    let n = outer.len();
    if n == 0 {
        return;
    }
    let angle = |k: usize| canvas.sites[outer[k % n]].angle;
    let ahead = |k: usize| {
        if n == 1 { TAU } else { (angle(k + 1) - angle(k)).rem_euclid(TAU) }
    };
    let bounds: Vec<(f64, f64)> = (0..n)
        .map(|k| {
            let (before, after) = (ahead((k + n - 1) % n) / 2.0, ahead(k) / 2.0);
            (angle(k) - before.min(WIDEST), angle(k) + after.min(WIDEST))
        })
        .collect();
    let addressed = scene.options.address != Address::None;
    let mut k = 0;
    while k < n {
        let inside = scene.marks.in_region(outer[k]);
        let mut last = k;
        if !addressed && n > 400 {
            while last + 1 < n
                && scene.marks.in_region(outer[last + 1]) == inside
                && bounds[last + 1].0 - bounds[last].1 < 1e-9
                && last - k < 64
            {
                last += 1;
            }
        }
        let (mut from, mut to) = (bounds[k].0, bounds[last].1);
        let joint = ((to - from) * 0.12).min(1.2 / view.unit);
        from += joint;
        to -= joint;
        let p = stone(view, from, to);
        let class = if inside { "site region" } else { "site" };
        canvas.sheet.shape(Layer::Site, class, Canvas::site(scene, outer[k]), p.into_text());
        k = last + 1;
    }
}

fn stone(view: View, from: f64, to: f64) -> Path {
    let at = |r: f64, a: f64| view.at(Complex64::from_polar(r, a));
    let mut p = Path::new();
    let long = to - from > std::f64::consts::PI;
    p.move_to(at(STONE.0, from));
    p.arc_to(STONE.0 * view.unit, long, false, at(STONE.0, to));
    p.line_to(at(STONE.1, to));
    p.arc_to(STONE.1 * view.unit, long, true, at(STONE.1, from));
    p.close();
    p
}

/// Every so manieth site's number outside the rim.
pub(super) fn number(canvas: &mut Canvas, view: View, outer: &[usize]) {
    let n = outer.len();
    if n == 0 {
        return;
    }
    let widest = text::width(&n.to_string(), TEXT);
    let spacing = TAU * STONE.1 * view.unit / n as f64;
    let each = rim::stride(spacing * 0.8, widest.max(TEXT) + 4.0);
    let last = outer.last().copied().unwrap_or(0);
    for &s in outer {
        if s % each != 0 || (each > 1 && s + each / 2 > last && s != 0) {
            continue;
        }
        let angle = canvas.sites[s].angle;
        let (cos, sin) = (angle.cos(), angle.sin());
        let word = s.to_string();
        let half = text::width(&word, TEXT) / 2.0;
        // The word's box touches a circle just outside the rim.
        let off = 7.0 + half * cos.abs() + TEXT * 0.36 * sin.abs();
        let z = Complex64::from_polar(STONE.1 + off / view.unit, angle);
        let at = view.at(z);
        let mut tick = Path::new();
        tick.move_to(view.at(Complex64::from_polar(STONE.1, angle)));
        tick.line_to(view.at(Complex64::from_polar(STONE.1 + 5.0 / view.unit, angle)));
        canvas.sheet.shape(Layer::Site, "tick", What::Nothing, tick.into_text());
        canvas.sheet.word([at[0], at[1] + TEXT * 0.36], "middle", "", word);
    }
}
