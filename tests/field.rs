//! Finite fields and their matrices against values recorded with the Python library galois
//! (`tests/outside/field.py`).

use lierne::field::{Field, Matrix};
use serde::Deserialize;

#[derive(Deserialize)]
struct Recorded {
    fields: Vec<OneField>,
}

#[derive(Deserialize)]
struct OneField {
    order: u64,
    /// Leading coefficient first.
    polynomial: Vec<u32>,
    /// a, b, a + b, a − b, a·b, a/b, a^5, trace of a.
    samples: Vec<[u32; 8]>,
    matrices: Vec<OneMatrix>,
}

#[derive(Deserialize)]
struct OneMatrix {
    matrix: Vec<Vec<u32>>,
    rank: usize,
    reduced: Vec<Vec<u32>>,
    null_space_reduced: Vec<Vec<u32>>,
    x: Vec<u32>,
    a_x: Vec<u32>,
}

fn recorded() -> Recorded {
    serde_json::from_str(include_str!("data/field.json")).expect("the recorded file is JSON")
}

#[test]
fn arithmetic() {
    for one in recorded().fields {
        let f = Field::new(one.order).unwrap();
        let mut polynomial = f.modulus().to_vec();
        polynomial.push(1);
        polynomial.reverse();
        assert_eq!(polynomial, one.polynomial, "GF({})", one.order);
        for [a, b, sum, difference, product, quotient, fifth, trace] in one.samples {
            let q = one.order;
            assert_eq!(f.add(a, b), sum, "GF({q}): {a} + {b}");
            assert_eq!(f.sub(a, b), difference, "GF({q}): {a} − {b}");
            assert_eq!(f.mul(a, b), product, "GF({q}): {a}·{b}");
            assert_eq!(f.mul(a, f.inv(b)), quotient, "GF({q}): {a}/{b}");
            assert_eq!(f.pow(a, 5), fifth, "GF({q}): {a}^5");
            assert_eq!(f.trace(a), trace, "GF({q}): trace of {a}");
        }
    }
}

#[test]
fn matrices() {
    for one in recorded().fields {
        let f = Field::new(one.order).unwrap();
        for (k, m) in one.matrices.into_iter().enumerate() {
            let place = format!("GF({}), matrix {k}", one.order);
            let cols = m.x.len();
            let a = Matrix::from_rows(&f, cols, &m.matrix);
            assert_eq!(a.rank(), m.rank, "{place}");
            let mut reduced = a.clone();
            reduced.reduce();
            assert_eq!(reduced.to_rows(), m.reduced, "{place}");
            let mut kernel = a.null_space();
            kernel.reduce();
            assert_eq!(kernel.to_rows(), m.null_space_reduced, "{place}");
            let column = |v: &[u32]| Matrix::from_fn(&f, v.len(), 1, |i, _| v[i]);
            assert_eq!(a.product(&column(&m.x)).to_rows().concat(), m.a_x, "{place}");
            let y = a.solve(&m.a_x).expect("a solution was built in");
            assert_eq!(a.product(&column(&y)).to_rows().concat(), m.a_x, "{place}");
        }
    }
}
