//! Pieces for the unit tests of this folder.

use super::the_core::Piece;
use crate::block;
use crate::network::NetworkBuilder;
use std::sync::Arc;

/// A ring of four-leg tensors, legs (next, A, B, previous); the region holds the A.
pub(super) fn ring(n: usize, dim: usize) -> Piece {
    let four = block::make(&block::Request::new("four-leg", vec![dim; 4])).expect("a block");
    let four = Arc::new(four);
    let mut b = NetworkBuilder::new("ring");
    let x: Vec<_> = (0..n).map(|k| b.label(&format!("x{k}"), dim)).collect();
    let (mut region, mut rest) = (Vec::new(), Vec::new());
    for k in 0..n {
        let a = b.label(&format!("a{k}"), dim);
        let c = b.label(&format!("b{k}"), dim);
        b.tensor(None, &[x[(k + 1) % n], a, c, x[k]], &four).expect("legs fit");
        region.push(a);
        rest.push(c);
    }
    b.boundary(region.into_iter().chain(rest));
    Piece { network: b.finish().expect("a network"), region_legs: n }
}
