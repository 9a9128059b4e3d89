//! Path data, written short: tenths of a unit (a hundredth of a millimetre on paper).

use super::geometry::Plane;
use num_complex::Complex64;

/// Appends a number, rounded to a tenth, without needless signs.
pub(super) fn number(out: &mut String, x: f64) {
    let tenths = (x * 10.0).round();
    let mut tenths = if tenths.is_finite() { tenths.clamp(-1e12, 1e12) as i64 } else { 0 };
    if tenths < 0 {
        out.push('-');
        tenths = -tenths;
    }
    let (whole, rest) = (tenths / 10, tenths % 10);
    if whole > 0 || rest == 0 {
        out.push_str(&whole.to_string());
    }
    if rest > 0 {
        out.push('.');
        out.push((b'0' + rest as u8) as char);
    }
}

/// Where the plane of a drawing lies on the canvas: y up there, y down here.
#[derive(Debug, Clone, Copy)]
pub(super) struct View {
    pub(super) origin: [f64; 2],
    pub(super) unit: f64,
    /// Whether points are those of a sphere in stereographic projection, to be shown in the
    /// unit disk by the projection that keeps areas, r = sin(θ/2).
    pub(super) globe: bool,
}

impl View {
    pub(super) fn at(self, z: Complex64) -> [f64; 2] {
        let z = if self.globe { z / (1.0 + z.norm_sqr()).sqrt() } else { z };
        [self.origin[0] + self.unit * z.re, self.origin[1] - self.unit * z.im]
    }
}

/// A path that grows. Points are given in the drawing's plane and land on the canvas.
#[derive(Debug, Clone, Default)]
pub(super) struct Path {
    d: String,
}

impl Path {
    pub(super) fn new() -> Self {
        Self::default()
    }
    pub(super) fn into_text(self) -> String {
        self.d
    }
    fn op(&mut self, letter: char) {
        self.d.push(letter);
    }
    fn num(&mut self, x: f64) {
        let start = self.d.len();
        number(&mut self.d, x);
        let before = start.checked_sub(1).map(|i| self.d.as_bytes()[i]);
        let glued =
            self.d.as_bytes()[start] == b'-' || before.is_none_or(|b| b.is_ascii_alphabetic());
        if !glued {
            self.d.insert(start, ' ');
        }
    }
    fn pair(&mut self, p: [f64; 2]) {
        self.num(p[0]);
        self.num(p[1]);
    }
    pub(super) fn move_to(&mut self, p: [f64; 2]) {
        self.op('M');
        self.pair(p);
    }
    pub(super) fn line_to(&mut self, p: [f64; 2]) {
        self.op('L');
        self.pair(p);
    }
    /// A quadratic curve to `p`, drawn towards `towards`.
    pub(super) fn bend_to(&mut self, towards: [f64; 2], p: [f64; 2]) {
        self.op('Q');
        self.pair(towards);
        self.pair(p);
    }
    /// A cubic curve.
    pub(super) fn curve_to(&mut self, a: [f64; 2], b: [f64; 2], p: [f64; 2]) {
        self.op('C');
        self.pair(a);
        self.pair(b);
        self.pair(p);
    }
    /// An arc of a circle of this radius, the shorter one or the longer one; `clockwise` as
    /// seen on paper.
    pub(super) fn arc_to(&mut self, radius: f64, long: bool, clockwise: bool, p: [f64; 2]) {
        self.op('A');
        self.num(radius);
        self.num(radius);
        self.num(0.0);
        self.num(if long { 1.0 } else { 0.0 });
        self.num(if clockwise { 1.0 } else { 0.0 });
        self.pair(p);
    }
    pub(super) fn close(&mut self) {
        self.op('Z');
    }
    /// The straight line of the plane from `a`, where the pen stands, to `b`.
    pub(super) fn geodesic_to(&mut self, plane: Plane, view: View, a: Complex64, b: Complex64) {
        if view.globe {
            return self.great_circle_to(view, a, b);
        }
        let end = view.at(b);
        match plane.line(a, b) {
            // The arc strays from its chord by chord²/(8·radius); below a twentieth of a
            // unit nobody sees the difference.
            Some((m, rho)) if (b - a).norm_sqr() / (8.0 * rho) * view.unit > 0.05 => {
                let turn = (a - m).re * (b - m).im - (a - m).im * (b - m).re;
                self.arc_to(rho * view.unit, false, turn < 0.0, end);
            }
            _ => self.line_to(end),
        }
    }
    /// The great circle's shorter arc from `a` to `b` in steps, parted where it runs through
    /// the pole that the whole rim stands for.
    fn great_circle_to(&mut self, view: View, a: Complex64, b: Complex64) {
        let plane = Plane::Spherical;
        let way = plane.centre(a, b);
        let far = way.norm();
        if far < 1e-12 {
            return self.line_to(view.at(b));
        }
        let steps = 48;
        let mut last = view.at(a);
        for k in 1..=steps {
            let part = (far.atan() * f64::from(k) / f64::from(steps)).tan();
            let next = view.at(plane.carry(a, way / far * part));
            let jump = (next[0] - last[0]).hypot(next[1] - last[1]) > view.unit * 0.7;
            if jump {
                self.move_to(next)
            } else {
                self.line_to(next)
            }
            last = next;
        }
    }
    /// A full circle. Centre and radius are rounded first, so that the two halves meet.
    pub(super) fn circle(&mut self, c: [f64; 2], r: f64) {
        let tenth = |x: f64| (x * 10.0).round() / 10.0;
        let (c, r) = ([tenth(c[0]), tenth(c[1])], tenth(r).max(0.1));
        self.move_to([c[0] - r, c[1]]);
        self.arc_to(r, false, true, [c[0] + r, c[1]]);
        self.arc_to(r, false, true, [c[0] - r, c[1]]);
        self.close();
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_short() {
        for (x, text) in
            [(0.0, "0"), (-0.04, "0"), (0.5, ".5"), (-0.5, "-.5"), (12.34, "12.3"), (-7.0, "-7")]
        {
            let mut out = String::new();
            number(&mut out, x);
            assert_eq!(out, text);
        }
    }

    #[test]
    fn signs_and_letters_part_numbers() {
        let mut p = Path::new();
        p.move_to([1.0, -2.0]);
        p.line_to([0.5, 3.0]);
        assert_eq!(p.into_text(), "M1-2L.5 3");
    }
}
