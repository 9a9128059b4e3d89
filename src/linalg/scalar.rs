//! The one trait of numbers.

use ndarray::LinalgScalar;
use num_complex::{Complex, Complex64};
use std::iter::Sum;
use std::ops::{AddAssign, Neg};

/// A number that tensors and matrices hold: `f64`, `Complex64`, and their single-precision
/// kin.
pub trait Scalar:
    faer::traits::ComplexField
    + LinalgScalar
    + Neg<Output = Self>
    + AddAssign
    + Sum
    + Default
    + Copy
    + Send
    + Sync
    + std::fmt::Debug
{
    /// Whether the type holds an imaginary part.
    const COMPLEX: bool;
    /// Distance from 1 to the next number.
    const EPSILON: f64;
    /// The number nearest to `x`; an imaginary part is dropped by real types.
    fn from_c64(x: Complex64) -> Self;
    /// The same number in double precision.
    fn to_c64(self) -> Complex64;
    /// Complex conjugate.
    fn conjugate(self) -> Self;
    /// |x|².
    fn abs2(self) -> f64;
    /// max(|re x|, |im x|): exact, and nothing overflows.
    fn magnitude(self) -> f64;
    /// x·2^e for a small exponent e; exact unless it leaves the range of the type.
    fn times_two_to(self, e: i32) -> Self;
    /// x·r.
    fn scaled(self, r: f64) -> Self;
    /// Neither NaN nor infinite.
    fn finite(self) -> bool;
}

macro_rules! real {
    ($t:ty) => {
        impl Scalar for $t {
            const COMPLEX: bool = false;
            const EPSILON: f64 = <$t>::EPSILON as f64;
            fn from_c64(x: Complex64) -> Self {
                x.re as $t
            }
            fn to_c64(self) -> Complex64 {
                Complex64::new(f64::from(self), 0.0)
            }
            #[inline(always)]
            fn conjugate(self) -> Self {
                self
            }
            #[inline(always)]
            fn abs2(self) -> f64 {
                f64::from(self) * f64::from(self)
            }
            #[inline(always)]
            fn magnitude(self) -> f64 {
                f64::from(self.abs())
            }
            #[inline(always)]
            fn times_two_to(self, e: i32) -> Self {
                (f64::from(self) * 2f64.powi(e)) as $t
            }
            #[inline(always)]
            fn scaled(self, r: f64) -> Self {
                (f64::from(self) * r) as $t
            }
            fn finite(self) -> bool {
                self.is_finite()
            }
        }
    };
}
macro_rules! complex {
    ($t:ty) => {
        impl Scalar for Complex<$t> {
            const COMPLEX: bool = true;
            const EPSILON: f64 = <$t>::EPSILON as f64;
            fn from_c64(x: Complex64) -> Self {
                Complex::new(x.re as $t, x.im as $t)
            }
            fn to_c64(self) -> Complex64 {
                Complex64::new(f64::from(self.re), f64::from(self.im))
            }
            #[inline(always)]
            fn conjugate(self) -> Self {
                self.conj()
            }
            #[inline(always)]
            fn abs2(self) -> f64 {
                self.re.abs2() + self.im.abs2()
            }
            #[inline(always)]
            fn magnitude(self) -> f64 {
                self.re.magnitude().max(self.im.magnitude())
            }
            #[inline(always)]
            fn times_two_to(self, e: i32) -> Self {
                Complex::new(self.re.times_two_to(e), self.im.times_two_to(e))
            }
            #[inline(always)]
            fn scaled(self, r: f64) -> Self {
                Complex::new(self.re.scaled(r), self.im.scaled(r))
            }
            fn finite(self) -> bool {
                self.re.is_finite() && self.im.is_finite()
            }
        }
    };
}
real!(f64);
real!(f32);
complex!(f64);
complex!(f32);
