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

#[test]
fn four_legs_of_every_dimension() {
    for d in (3..=100).filter(|&d| d != 6) {
        let block = make("four-leg", &[d; 4]);
        assert!(block.isometries().is_perfect(), "dimension {d}");
        let exact = block.exact().unwrap();
        assert_eq!((exact.len(), exact.root), (d * d, 1), "dimension {d}");
        for mask in [0b0011, 0b0101, 0b1001] {
            assert!(exact.is_isometry(mask), "dimension {d}");
        }
    }
}

#[test]
fn every_construction_of_a_family() {
    let cases: &[(&str, usize, usize, &[&str])] = &[
        ("four-leg", 4, 6, &["cube-roots", "quadratic", "quadratic-mixed"]),
        ("four-leg", 4, 3, &["linear-squares", "graph", "cyclic-squares"]),
        ("four-leg", 4, 4, &["linear-squares", "graph"]),
        ("four-leg", 4, 9, &["linear-squares", "graph", "cyclic-squares"]),
        ("four-leg", 4, 10, &["difference-matrix"]),
        ("four-leg", 4, 14, &["difference-matrix"]),
        ("four-leg", 4, 18, &["wilson"]),
        ("seven-leg", 7, 7, &["graph", "mds"]),
        ("eight-leg", 8, 7, &["graph", "mds"]),
    ];
    for (family, legs, d, constructions) in cases {
        for name in *constructions {
            let mut request = Request::new(*family, vec![*d; *legs]);
            request.construction = Some((*name).to_owned());
            let block = block::make(&request).unwrap_or_else(|e| panic!("{e}"));
            assert!(block.isometries().is_perfect(), "{family} {d} {name}");
        }
        let mut request = Request::new(*family, vec![*d; *legs]);
        request.construction = Some("nothing".to_owned());
        let message = block::make(&request).unwrap_err().to_string();
        for name in *constructions {
            assert!(message.contains(name), "{message}");
        }
    }
    for name in ["cube-roots", "quadratic", "quadratic-mixed"] {
        let mut request = Request::new("four-leg", vec![6; 4]);
        request.construction = Some(name.to_owned());
        let block = block::make(&request).unwrap();
        assert_eq!(block.nonzeros(), 180, "{name}");
        tables_agree(&block);
    }
}

/// Perfect tensors at every place of the published table of existence where one is known
/// (Open Quantum Problem 35, statement of 2026), and refusals elsewhere.
#[test]
fn existence() {
    // Y built, N impossible, O open; one letter a dimension from 2 to 10.
    let table = [
        (2, "YYYYYYYYY"),
        (3, "YYYYYYYYY"),
        (4, "NYYYYYYYY"),
        (5, "YYYYYYYYY"),
        (6, "YYYYYYYYY"),
        (7, "NYYYOYYYO"),
        (8, "NNOYOYYYO"),
    ];
    for (legs, row) in table {
        for (k, letter) in row.chars().enumerate() {
            let d = k + 2;
            let made = block::make(&Request::new("perfect", vec![d; legs]));
            let found = match &made {
                Ok(block) => {
                    assert!(block.isometries().is_perfect());
                    'Y'
                }
                Err(BlockError::NoSuchState { .. }) => 'N',
                Err(BlockError::Open { .. }) => 'O',
                Err(other) => panic!("{legs} legs of {d}: {other}"),
            };
            assert_eq!(found, letter, "{legs} legs of dimension {d}");
        }
    }
    for (legs, d) in [(9, 3), (10, 3), (9, 8), (10, 9), (12, 11), (7, 16), (8, 35)] {
        assert!(make("perfect", &vec![d; legs]).isometries().is_perfect(), "{legs} of {d}");
    }
    for (legs, d) in [(12, 3), (12, 4), (9, 2), (20, 2)] {
        let made = block::make(&Request::new("perfect", vec![d; legs]));
        assert!(matches!(made, Err(BlockError::NoSuchState { .. })), "{legs} legs of {d}");
    }
}

/// Every contiguous set of legs, the bulk legs standing last in the cycle, that is no larger
/// than its complement is isometric; and the smallest set of physical legs that knows
/// something of the bulk has the size of the distance.
#[test]
fn codes_have_their_distance_and_leg_order() {
    let cases: &[(&str, &[usize], usize, usize)] = &[
        ("code-4-2-2", &[2, 2, 2, 2, 4], 4, 2),
        ("code-4-2-2", &[3, 3, 3, 3, 9], 4, 2),
        ("code-4-2-2", &[6, 6, 6, 6, 36], 4, 2),
        ("code-5-1-3", &[2; 6], 5, 3),
        ("code-5-1-3", &[3; 6], 5, 3),
        ("code-5-1-3", &[10; 6], 5, 3),
        ("code-6-1-3", &[2; 7], 6, 3),
        ("code-7-1-3", &[2; 8], 7, 3),
    ];
    for (family, dims, sites, distance) in cases {
        let block = make(family, dims);
        let legs = dims.len();
        for length in 1..legs {
            for start in 0..legs {
                let mask = (0..length).fold(0u64, |m, k| m | 1 << ((start + k) % legs));
                let level = |m: u64| -> usize {
                    (0..legs).filter(|l| m >> l & 1 == 1).map(|l| dims[l]).product()
                };
                if level(mask) <= level(!mask & ((1 << legs) - 1)) {
                    assert!(block.isometries().is_isometry(mask), "{family}: {mask:b}");
                }
            }
        }
        let s = block.stabilizer().unwrap();
        let bulk = 1u64 << sites;
        let knows = |m: u64| s.entropy_nats(m) + s.entropy_nats(bulk) - s.entropy_nats(m | bulk);
        let found =
            (1..1u64 << sites).filter(|&m| knows(m) > 1e-9).map(u64::count_ones).min().unwrap();
        assert_eq!(found as usize, *distance, "{family} {dims:?}");
    }
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
