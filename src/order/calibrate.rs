//! What a multiply-add costs on this machine against moving an element.

use crate::linalg;
use crate::tensor::permuted;
use crate::watch::Watch;
use ndarray::{Array2, ArrayD, IxDyn};
use num_complex::Complex64;

/// Rates of one machine.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Calibration {
    /// Complex multiply-adds a second in a large product.
    pub multiply_adds: f64,
    /// Complex elements a second that are permuted: read and written.
    pub elements: f64,
}

impl Calibration {
    /// Multiply-adds that take as long as moving one element: the weight of
    /// [`super::Objective::Mix`].
    pub fn weight(&self) -> f64 {
        self.multiply_adds / self.elements
    }
}

/// Side of the matrices of the product.
const SIDE: usize = 512;
/// log2 of the elements that are permuted.
const BITS: u32 = 22;
/// Each figure is the best of so many runs.
const RUNS: usize = 5;

/// Measures by the watch's clock; a watch without one gives rates that are not finite.
/// Takes about a second and 200 MB.
pub fn calibrate(watch: &dyn Watch) -> Calibration {
    let timed = |work: &mut dyn FnMut()| {
        (0..RUNS)
            .map(|_| {
                let start = watch.seconds();
                work();
                watch.seconds() - start
            })
            .fold(f64::INFINITY, f64::min)
    };
    let a = Array2::from_shape_fn((SIDE, SIDE), |(i, j)| {
        Complex64::new((i % 7) as f64 - 3.0, (j % 5) as f64 - 2.0)
    });
    let product = timed(&mut || {
        std::hint::black_box(linalg::product(&a.view(), &a.view()));
    });
    // The axes of a typical large tensor, turned round.
    let axes = BITS as usize;
    let tensor = ArrayD::from_elem(IxDyn(&vec![2; axes]), Complex64::new(1.0, 0.5));
    let order: Vec<usize> = (0..axes).map(|i| (i * 9 + 4) % axes).collect();
    let moved = timed(&mut || {
        std::hint::black_box(permuted(&tensor.view(), &order));
    });
    Calibration {
        multiply_adds: (SIDE as f64).powi(3) / product,
        elements: f64::from(BITS).exp2() / moved,
    }
}
