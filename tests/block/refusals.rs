//! What cannot be had is refused in a sentence that names the values.

use lierne::block::{self, BlockError, Request, from_dense};
use lierne::tensor::Dense;
use ndarray::ArrayD;

#[test]
fn refusals_are_sentences_with_values() {
    let refuse = |family: &str, dims: &[usize]| {
        block::make(&Request::new(family, dims.to_vec())).unwrap_err().to_string()
    };
    assert_eq!(
        refuse("four-leg", &[2; 4]),
        "no perfect tensor with 4 legs of dimension 2 exists (Phys. Lett. A 273, 213 (2000))"
    );
    assert!(refuse("perfect", &[2; 7]).contains("Phys. Rev. Lett. 118, 200502 (2017)"));
    assert!(refuse("perfect", &[4; 8]).contains("open"));
    assert!(refuse("five-legs", &[2; 5]).contains("there is no block `five-legs`"));
    assert!(refuse("five-leg", &[2; 4]).contains("has 5 legs, but 4"));
    assert!(refuse("six-leg", &[2, 2, 2, 2, 2, 3]).contains("one dimension"));
    assert!(refuse("bell", &[0, 0]).contains("dimensions from 1"));
    let mut request = Request::new("basis", vec![3]);
    request.options.insert("level".into(), "3".into());
    assert!(block::make(&request).unwrap_err().to_string().contains("from 0 to 2, not `3`"));
    request.options.clear();
    request.options.insert("height".into(), "1".into());
    assert!(matches!(block::make(&request), Err(BlockError::UnknownOption { .. })));
}

#[test]
fn arrays_that_are_no_tensors_are_refused() {
    let array = |shape: &[usize], values: Vec<f64>| {
        Dense::Real(ArrayD::from_shape_vec(shape.to_vec(), values).unwrap())
    };
    let fault = |a: Dense| from_dense("t.npy", a, 1e-10).unwrap_err().to_string();
    assert_eq!(
        fault(array(&[2, 2], vec![1.0, 0.0, f64::NAN, 1.0])),
        "entry [1, 0] of t.npy is not a finite number"
    );
    assert!(fault(array(&[2, 2], vec![0.0; 4])).contains("zero everywhere"));
    assert!(fault(array(&[], vec![1.0])).contains("shape []"));
    assert!(fault(array(&[2, 0], vec![])).contains("shape [2, 0]"));
    // Extreme scales change nothing.
    for scale in [1e-200, 1e200] {
        let block = from_dense("t", array(&[2, 2], vec![scale, 0.0, 0.0, scale]), 1e-10).unwrap();
        assert!(block.isometries().is_perfect());
    }
}
