//! The three planes that regular tilings live in, as seen on paper.
//!
//! Hyperbolic plane: the Poincaré disk, |z| < 1, curvature −1. Sphere: stereographic
//! projection from the point opposite the first tile. Euclidean plane: itself. In all three
//! the motion that takes 0 to c is z ↦ (z + c)/(1 + κ c̄ z) with κ = 1, −1, 0.

use num_complex::Complex64;

/// Which plane a tiling {p,q} lives in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Plane {
    /// 1/p + 1/q < 1/2.
    Hyperbolic,
    /// 1/p + 1/q = 1/2.
    Euclidean,
    /// 1/p + 1/q > 1/2.
    Spherical,
}

impl Plane {
    /// The plane of {p,q}.
    pub(super) fn of(p: u32, q: u32) -> Self {
        let excess = (u64::from(p).saturating_sub(2)) * (u64::from(q).saturating_sub(2));
        match excess.cmp(&4) {
            std::cmp::Ordering::Less => Self::Spherical,
            std::cmp::Ordering::Equal => Self::Euclidean,
            std::cmp::Ordering::Greater => Self::Hyperbolic,
        }
    }
    fn kappa(self) -> f64 {
        match self {
            Self::Hyperbolic => 1.0,
            Self::Euclidean => 0.0,
            Self::Spherical => -1.0,
        }
    }
    /// Takes 0 to `c`.
    pub(super) fn carry(self, c: Complex64, z: Complex64) -> Complex64 {
        (z + c) / (1.0 + self.kappa() * c.conj() * z)
    }
    /// Takes `c` to 0.
    pub(super) fn centre(self, c: Complex64, z: Complex64) -> Complex64 {
        self.carry(-c, z)
    }
    /// How much a small figure at 0 is scaled when carried to `c`.
    pub(super) fn scale(self, c: Complex64) -> f64 {
        (1.0 - self.kappa() * c.norm_sqr()).abs()
    }
    /// On-paper distances from the centre of a tile of {p,q} to its side's middle and to its
    /// corner, the tile lying at 0. For the Euclidean plane the side's middle is at `half`
    /// the distance of neighbours.
    ///
    /// Hyperbolic: cosh r = cos(π/q)/sin(π/p), corner at √(cos(π/p+π/q)/cos(π/p−π/q))
    /// (Canad. Math. Bull. 40, 158 (1997)); the sphere has cos for cosh.
    pub(super) fn tile(self, p: u32, q: u32, half: f64) -> (f64, f64) {
        let (a, b) = (std::f64::consts::PI / f64::from(p), std::f64::consts::PI / f64::from(q));
        match self {
            Self::Euclidean => (half, half / a.cos()),
            Self::Hyperbolic => {
                let r = (b.cos() / a.sin()).acosh();
                ((r / 2.0).tanh(), ((a + b).cos() / (a - b).cos()).sqrt())
            }
            Self::Spherical => {
                let r = (b.cos() / a.sin()).acos();
                ((r / 2.0).tan(), (-(a + b).cos() / (a - b).cos()).sqrt())
            }
        }
    }
    /// The circle (centre, radius) that the straight line of this plane from `a` to `b` lies
    /// on; `None` where it is straight on paper as well.
    ///
    /// In the disk it meets the unit circle at right angles, |m|² = 1 + ρ²; on the sphere it
    /// cuts it in opposite points, |m|² = ρ² − 1.
    pub(super) fn line(self, a: Complex64, b: Complex64) -> Option<(Complex64, f64)> {
        if self == Self::Euclidean {
            return None;
        }
        let sign = self.kappa();
        let det = a.re * b.im - a.im * b.re;
        if det.abs() < 1e-12 {
            return None;
        }
        let (u, v) = ((sign + a.norm_sqr()) / 2.0, (sign + b.norm_sqr()) / 2.0);
        let m = Complex64::new((u * b.im - v * a.im) / det, (v * a.re - u * b.re) / det);
        let rho = (m.norm_sqr() - sign).max(0.0).sqrt();
        (rho.is_finite() && rho < 1e4).then_some((m, rho))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The geometry table of regular tilings: Canad. Math. Bull. 40, 158 (1997).
    #[test]
    fn tiles_have_the_published_measures() {
        for (p, q, corner, middle, radius, centre) in [
            (5, 4, 0.397975427, 0.303558659, 1.495348781, 1.798907440),
            (4, 5, 0.397975427, 0.259263587, 1.798907440, 2.058171027),
            (7, 3, 0.300742619, 0.266077245, 1.746114927, 2.012192173),
            (3, 7, 0.300742619, 0.140625930, 3.485219078, 3.625845008),
            (6, 4, 0.517638090, std::f64::consts::SQRT_2 - 1.0, 1.0, std::f64::consts::SQRT_2),
        ] {
            let plane = Plane::of(p, q);
            assert_eq!(plane, Plane::Hyperbolic);
            let (m, c) = plane.tile(p, q, 0.0);
            assert!((m - middle).abs() < 1e-9 && (c - corner).abs() < 1e-9, "{{{p},{q}}}");
            let a = std::f64::consts::PI / f64::from(p);
            let (from, to) = (Complex64::from_polar(c, -a), Complex64::from_polar(c, a));
            let (at, rho) = plane.line(from, to).expect("a curved side");
            assert!((rho - radius).abs() < 1e-8 && (at.norm() - centre).abs() < 1e-8);
        }
    }

    #[test]
    fn the_cube_closes() {
        let plane = Plane::of(4, 3);
        let (middle, corner) = plane.tile(4, 3, 0.0);
        let neighbour = Complex64::new(2.0 * middle / (1.0 - middle * middle), 0.0);
        let own = Complex64::from_polar(corner, std::f64::consts::FRAC_PI_4);
        let theirs = plane
            .carry(neighbour, Complex64::from_polar(corner, 3.0 * std::f64::consts::FRAC_PI_4));
        assert!((own - theirs).norm() < 1e-12);
    }
}
