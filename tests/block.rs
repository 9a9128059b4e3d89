//! Built-in blocks: their tables, generators and entries must tell one story.

use lierne::block::{self, Block, BlockError, Request, SparseEntries, Stabilizer, from_dense};
use lierne::tensor::Dense;
use ndarray::ArrayD;
use num_complex::Complex64;

fn make(family: &str, dims: &[usize]) -> Block {
    block::make(&Request::new(family, dims.to_vec()))
        .unwrap_or_else(|e| panic!("{family} {dims:?}: {e}"))
}

/// Digits of every leg's index, prime by prime, as the stabilizer's convention states them.
fn digits(stabilizer: &Stabilizer, dims: &[usize], index: u64) -> Vec<Vec<u32>> {
    let mut values = vec![0; dims.len()];
    let mut rest = index as usize;
    for l in (0..dims.len()).rev() {
        values[l] = rest % dims[l];
        rest /= dims[l];
    }
    let mut units = dims.to_vec();
    let mut out = Vec::new();
    for part in &stabilizer.parts {
        let mut row = Vec::new();
        for l in 0..dims.len() {
            let size = (part.prime as usize).pow(part.digits[l]);
            units[l] /= size;
            let mut v = values[l] / units[l] % size;
            for _ in 0..part.digits[l] {
                row.push((v % part.prime as usize) as u32);
                v /= part.prime as usize;
            }
        }
        out.push(row);
    }
    out
}

fn index(stabilizer: &Stabilizer, dims: &[usize], digits: &[Vec<u32>]) -> u64 {
    let mut values = vec![0usize; dims.len()];
    for (part, row) in stabilizer.parts.iter().zip(digits) {
        let mut at = 0;
        for l in 0..dims.len() {
            let mut v = 0;
            for d in (0..part.digits[l] as usize).rev() {
                v = v * part.prime as usize + row[at + d] as usize;
            }
            at += part.digits[l] as usize;
            values[l] = values[l] * (part.prime as usize).pow(part.digits[l]) + v;
        }
    }
    values.iter().zip(dims).fold(0, |i, (v, d)| i * *d as u64 + *v as u64)
}

/// Applies every generator to the entries and compares.
fn generators_fix(block: &Block) {
    let s = block.stabilizer().expect("a stabilizer block");
    let entries: SparseEntries = block.entries().to_sparse();
    let (dims, name) = (block.dims(), block.name());
    for (k, part) in s.parts.iter().enumerate() {
        part.check().unwrap_or_else(|e| panic!("{name} {dims:?}: prime {} {e}", part.prime));
        let p = part.prime;
        let width = part.width();
        let omega = Complex64::from_polar(1.0, std::f64::consts::TAU / f64::from(p));
        let tau = if p == 2 { Complex64::i() } else { omega };
        for (g, &t) in part.generators.iter().zip(&part.phases) {
            let moved: Vec<(u64, Complex64)> = entries
                .index()
                .iter()
                .zip(entries.value())
                .map(|(&i, &v)| {
                    let mut d = digits(s, dims, i);
                    let turn: u32 = (0..width).map(|j| g[width + j] * d[k][j]).sum();
                    (0..width).for_each(|j| d[k][j] = (d[k][j] + g[j]) % p);
                    (index(s, dims, &d), v * tau.powu(t) * omega.powu(turn % p))
                })
                .collect();
            let moved = SparseEntries::collect(dims.to_vec(), moved);
            assert_eq!(moved.index(), entries.index(), "{name} {dims:?}: {g:?}");
            for (a, b) in moved.value().iter().zip(entries.value()) {
                assert!((a - b).norm() < 1e-12, "{name} {dims:?}: {g:?}");
            }
        }
    }
}

fn norm_squared(block: &Block) -> f64 {
    block.entries().to_sparse().value().iter().map(Complex64::norm_sqr).sum()
}

/// The numerical table of the dense array must agree with the proven one.
fn tables_agree(block: &Block) {
    let judged = from_dense("copy", block.to_dense(), 1e-10).unwrap();
    for mask in 0..1u64 << block.dims().len() {
        assert_eq!(
            block.isometries().is_isometry(mask),
            judged.isometries().is_isometry(mask),
            "{} {:?}: legs {mask:b}",
            block.name(),
            block.dims()
        );
    }
}

const STABILIZER_BLOCKS: &[(&str, &[usize])] = &[
    ("four-leg", &[3; 4]),
    ("four-leg", &[4; 4]),
    ("four-leg", &[5; 4]),
    ("four-leg", &[8; 4]),
    ("four-leg", &[9; 4]),
    ("four-leg", &[12; 4]),
    ("four-leg", &[15; 4]),
    ("five-leg", &[2; 5]),
    ("five-leg", &[3; 5]),
    ("five-leg", &[4; 5]),
    ("five-leg", &[6; 5]),
    ("six-leg", &[2; 6]),
    ("six-leg", &[3; 6]),
    ("six-leg", &[4; 6]),
    ("six-leg", &[6; 6]),
    ("perfect", &[5]),
    ("perfect", &[6; 2]),
    ("perfect", &[10; 3]),
    ("bell", &[6; 2]),
    ("copy", &[12; 3]),
    ("copy", &[2; 5]),
    ("identity", &[2, 6, 2, 6]),
    ("identity", &[4, 4]),
    ("basis", &[12]),
    ("plus", &[18]),
];

#[test]
fn generators_fix_the_entries() {
    for (family, dims) in STABILIZER_BLOCKS {
        generators_fix(&make(family, dims));
    }
    for level in 0..12 {
        let mut request = Request::new("basis", vec![12]);
        request.options.insert("level".into(), level.to_string());
        let block = block::make(&request).unwrap();
        generators_fix(&block);
        assert_eq!(block.entries().to_sparse().index(), [level]);
    }
}

#[test]
fn proven_tables_agree_with_numerical_ones() {
    for (family, dims) in STABILIZER_BLOCKS {
        let size: usize = dims.iter().product();
        if size <= 21_000 {
            tables_agree(&make(family, dims));
        }
    }
    tables_agree(&make("four-leg", &[6; 4]));
    tables_agree(&make("random-state", &[7]));
}

#[test]
fn blocks_are_normalised_as_isometries() {
    for (family, dims) in STABILIZER_BLOCKS {
        let block = make(family, dims);
        let half: usize = dims.iter().take(dims.len() / 2).product();
        let expected = if block.isometries().is_perfect() {
            half
        } else if *family == "copy" {
            dims[0]
        } else {
            half
        };
        let norm = norm_squared(&block);
        assert!((norm - expected as f64).abs() < 1e-9, "{family} {dims:?}: {norm}");
    }
    assert!((norm_squared(&make("four-leg", &[6; 4])) - 36.0).abs() < 1e-12);
    assert!((norm_squared(&make("random-state", &[9])) - 1.0).abs() < 1e-12);
}

#[test]
fn four_legs_of_prime_powers_are_permutations() {
    for d in [3usize, 4, 5, 7, 8, 9, 11, 16, 25, 27] {
        let block = make("four-leg", &[d; 4]);
        let entries = block.entries().to_sparse();
        assert_eq!(entries.index().len(), d * d);
        assert!(entries.value().iter().all(|v| *v == Complex64::new(1.0, 0.0)));
        assert!(block.isometries().is_perfect());
    }
    // The defining formula at a prime.
    for &i in make("four-leg", &[5; 4]).entries().to_sparse().index() {
        let (a, b, c, e) = (i / 125, i / 25 % 5, i / 5 % 5, i % 5);
        assert_eq!((c, e), ((a + b) % 5, (a + 2 * b) % 5));
    }
}

#[test]
fn six_levels() {
    let block = make("four-leg", &[6; 4]);
    assert_eq!(block.nonzeros(), 180);
    assert!(block.isometries().is_perfect());
    assert!(block.stabilizer().is_none());
    let exact = block.exact().unwrap();
    for mask in [0b0011, 0b0101, 0b1001, 0b1100] {
        assert!(exact.is_isometry(mask));
    }
    // An entry turned by a sixth root is noticed.
    let mut wrong = exact.clone();
    if let lierne::block::ExactValues::Sums(s) = &mut wrong.value {
        s[7].iter_mut().for_each(|t| t.0 = (t.0 + 1) % 6);
    }
    assert!(!wrong.is_isometry(0b0011) || !wrong.is_isometry(0b0101));
}

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
