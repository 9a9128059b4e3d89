//! Tables, generators and entries of stabilizer blocks must tell one story.

use super::{make, tables_agree};
use lierne::block::{self, Block, Request, SparseEntries, Stabilizer};
use num_complex::Complex64;

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
        for ((unit, value), &count) in units.iter_mut().zip(&values).zip(&part.digits) {
            let size = (part.prime as usize).pow(count);
            *unit /= size;
            let mut v = value / *unit % size;
            for _ in 0..count {
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
        for (value, &count) in values.iter_mut().zip(&part.digits) {
            let mut v = 0;
            for d in (0..count as usize).rev() {
                v = v * part.prime as usize + row[at + d] as usize;
            }
            at += count as usize;
            *value = *value * (part.prime as usize).pow(count) + v;
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
        // Large blocks: every third generator will do.
        let step = if entries.index().len() > 50_000 { 3 } else { 1 };
        let omega = Complex64::from_polar(1.0, std::f64::consts::TAU / f64::from(p));
        let tau = if p == 2 { Complex64::i() } else { omega };
        for (g, &t) in part.generators.iter().zip(&part.phases).step_by(step) {
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

/// Family, dimensions, Σ|entry|².
const STABILIZER_BLOCKS: &[(&str, &[usize], u64)] = &[
    ("four-leg", &[3; 4], 9),
    ("four-leg", &[4; 4], 16),
    ("four-leg", &[5; 4], 25),
    ("four-leg", &[8; 4], 64),
    ("four-leg", &[9; 4], 81),
    ("four-leg", &[12; 4], 144),
    ("four-leg", &[15; 4], 225),
    ("five-leg", &[2; 5], 4),
    ("five-leg", &[3; 5], 9),
    ("five-leg", &[4; 5], 16),
    ("five-leg", &[6; 5], 36),
    ("six-leg", &[2; 6], 8),
    ("six-leg", &[3; 6], 27),
    ("six-leg", &[4; 6], 64),
    ("six-leg", &[6; 6], 216),
    ("seven-leg", &[3; 7], 27),
    ("seven-leg", &[4; 7], 64),
    ("eight-leg", &[5; 8], 625),
    ("mds", &[5; 6], 125),
    ("mds", &[4; 5], 16),
    ("mds", &[9; 4], 81),
    ("mds", &[7; 2], 7),
    ("perfect", &[5], 1),
    ("perfect", &[6; 2], 6),
    ("perfect", &[10; 3], 10),
    ("code-4-2-2", &[2, 2, 2, 2, 4], 4),
    ("code-4-2-2", &[2; 6], 4),
    ("code-4-2-2", &[3, 3, 3, 3, 9], 9),
    ("code-4-2-2", &[4, 4, 4, 4, 16], 16),
    ("code-4-2-2", &[6, 6, 6, 6, 36], 36),
    ("code-5-1-3", &[2; 6], 2),
    ("code-5-1-3", &[3; 6], 3),
    ("code-5-1-3", &[4; 6], 4),
    ("code-5-1-3", &[5; 6], 5),
    ("code-5-1-3", &[6; 6], 6),
    ("code-6-1-3", &[2; 7], 2),
    ("code-7-1-3", &[2; 8], 2),
    ("bell", &[6; 2], 6),
    ("copy", &[12; 3], 12),
    ("copy", &[2; 5], 2),
    ("identity", &[2, 6, 2, 6], 12),
    ("identity", &[4; 2], 4),
    ("basis", &[12], 1),
    ("plus", &[18], 1),
];

#[test]
fn generators_fix_the_entries() {
    for (family, dims, _) in STABILIZER_BLOCKS {
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
    for (family, dims, _) in STABILIZER_BLOCKS {
        let size: usize = dims.iter().product();
        if size <= 21_000 {
            tables_agree(&make(family, dims));
        }
    }
    tables_agree(&make("four-leg", &[6; 4]));
    tables_agree(&make("random-state", &[7]));
    tables_agree(&make("random-unitary", &[2, 3, 3, 2]));
    for n in 2..=6 {
        tables_agree(&make("w", &vec![2; n]));
        tables_agree(&make("dicke", &vec![2; n]));
        tables_agree(&make("w", &vec![3; n]));
    }
}

#[test]
fn blocks_are_normalised_as_isometries() {
    for (family, dims, expected) in STABILIZER_BLOCKS {
        let norm = norm_squared(&make(family, dims));
        assert!((norm / *expected as f64 - 1.0).abs() < 1e-10, "{family} {dims:?}: {norm}");
    }
    assert!((norm_squared(&make("four-leg", &[6; 4])) - 36.0).abs() < 1e-12);
    assert!((norm_squared(&make("random-state", &[9])) - 1.0).abs() < 1e-12);
}

#[test]
fn stabilizers_from_text() {
    let text = |dims: &[usize], stabilizers: &str| {
        let mut request = Request::new("stabilizer", dims.to_vec());
        request.options.insert("stabilizers".into(), stabilizers.into());
        block::make(&request)
    };
    // The six-leg tensor of JHEP 06 (2015) 149: all sets of up to three legs are maximally
    // mixed.
    let six = text(&[2; 6], "XZZXII,IXZZXI,XIXZZI,ZXIXZI,XXXXXX,ZZZZZZ").unwrap();
    assert!(six.isometries().is_perfect());
    generators_fix(&six);
    for mask in 1..64u64 {
        let size = mask.count_ones();
        let expected = f64::from(size.min(6 - size)) * 2f64.ln();
        assert!((six.stabilizer().unwrap().entropy_nats(mask) - expected).abs() < 1e-12);
    }
    // The same code as an encoder, and qutrits written with powers.
    for (dims, words) in [
        (vec![2; 6], "XZZXI,IXZZX,XIXZZ,ZXIXZ"),
        (vec![3; 6], "XZZ2X2I,IXZZ2X2,X2IXZZ2,Z2X2IXZ"),
        (vec![3; 6], "X Z Z2 X2 I, I X Z Z2 X2, X2 I X Z Z2, Z2 X2 I X Z"),
    ] {
        let block = text(&dims, words).unwrap();
        generators_fix(&block);
        assert!(block.isometries().is_perfect(), "{words}");
    }
    // Signs choose the state: the singlet is odd.
    let singlet = text(&[2, 2], "-XX,-ZZ").unwrap();
    generators_fix(&singlet);
    let values = singlet.entries().to_sparse();
    assert_eq!(values.index(), [1, 2]);
    assert!((values.value()[0] + values.value()[1]).norm() < 1e-15);
    let y = text(&[2], "-Y").unwrap();
    generators_fix(&y);
    let message = text(&[2; 5], "XZZXI,IXZZX,XIXZZ,ZXIXZ").unwrap_err().to_string();
    assert!(message.contains("5 legs and a bulk leg of dimension 2"), "{message}");
    let message = text(&[6; 2], "XX,ZZ").unwrap_err().to_string();
    assert!(message.contains("prime dimension"), "{message}");
}
