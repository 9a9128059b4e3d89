//! Entangling power, gate typicality, enumerators and uniformity against published values.

use super::make;
use lierne::block::{CheckRequest, Report, check_block, check_dense, gate};
use lierne::tensor::Dense;
use lierne::watch::Silent;
use ndarray::{Array2, ArrayD, IxDyn};
use num_complex::Complex64;

const I: Complex64 = Complex64::new(0.0, 1.0);

/// A gate on two D-level systems as an array with four legs.
fn judge_gate(d: usize, gate: &Array2<Complex64>) -> Report {
    let array = ArrayD::from_shape_vec(IxDyn(&[d; 4]), gate.iter().copied().collect()).unwrap();
    check_dense("gate", &Dense::Complex(array), &CheckRequest::default(), &Silent).unwrap()
}

fn permutation(d: usize, image: impl Fn(usize, usize) -> (usize, usize)) -> Array2<Complex64> {
    let mut m = Array2::zeros((d * d, d * d));
    for i in 0..d {
        for j in 0..d {
            let (k, l) = image(i, j);
            m[[k * d + l, i * d + j]] = Complex64::new(1.0, 0.0);
        }
    }
    m
}

/// cos(t) + i sin(t)·P for an operator with P² = 1.
fn turn(t: f64, p: &Array2<Complex64>) -> Array2<Complex64> {
    let one = Array2::<Complex64>::eye(p.nrows());
    one.mapv(|v| v * t.cos()) + p.mapv(|v| v * I * t.sin())
}

fn fourier(n: usize) -> Array2<Complex64> {
    Array2::from_shape_fn((n, n), |(a, b)| {
        let angle = std::f64::consts::TAU * ((a * b) % n) as f64 / n as f64;
        Complex64::from_polar(1.0 / (n as f64).sqrt(), angle)
    })
}

/// Definitions of Phys. Rev. A 62, 030301 (2000) and Phys. Rev. A 95, 040302 (2017); the
/// values of named gates recomputed independently with NumPy.
#[test]
fn named_gates() {
    let one = |v: f64| Complex64::new(v, 0.0);
    let pauli_xx = permutation(2, |i, j| (1 - i, 1 - j));
    let mut pauli_yy = Array2::<Complex64>::zeros((4, 4));
    for (k, sign) in [(0, -1.0), (1, 1.0), (2, 1.0), (3, -1.0)] {
        pauli_yy[[k, 3 - k]] = one(sign);
    }
    let pi = std::f64::consts::PI;
    let swap = |d: usize| permutation(d, |i, j| (j, i));
    let mut iswap = swap(2);
    iswap[[1, 2]] = I;
    iswap[[2, 1]] = I;
    let mut root_of_swap = Array2::<Complex64>::eye(4);
    for (a, b, v) in [(1, 1, 1.0), (1, 2, -1.0), (2, 1, -1.0), (2, 2, 1.0)] {
        root_of_swap[[a, b]] = Complex64::new(0.5, 0.5 * v);
    }
    let csum = |d: usize| permutation(d, move |i, j| (i, (i + j) % d));
    let cphase = |d: usize| {
        Array2::from_diag(&ndarray::Array1::from_shape_fn(d * d, |k| {
            let angle = std::f64::consts::TAU * ((k / d) * (k % d)) as f64 / d as f64;
            Complex64::from_polar(1.0, angle)
        }))
    };
    let squares = |d: usize| permutation(d, move |i, j| ((i + j) % d, (i + 2 * j) % d));
    let b_gate = turn(pi / 4.0, &pauli_xx).dot(&turn(pi / 8.0, &pauli_yy));
    // Name, D, gate, e_p, g_t.
    let third = 1.0 / 3.0;
    let cases = [
        ("identity", 2, Array2::eye(4), 0.0, 0.0),
        ("identity", 3, Array2::eye(9), 0.0, 0.0),
        ("swap", 2, swap(2), 0.0, 1.0),
        ("swap", 5, swap(5), 0.0, 1.0),
        ("controlled not", 2, csum(2), 2.0 * third, third),
        ("controlled Z", 2, cphase(2), 2.0 * third, third),
        ("iswap", 2, iswap, 2.0 * third, 2.0 * third),
        (
            "double controlled not",
            2,
            permutation(2, |i, j| (j, (i + j) % 2)),
            2.0 * third,
            2.0 * third,
        ),
        ("B", 2, b_gate, 2.0 * third, 0.5),
        ("root of swap", 2, root_of_swap, 0.5, 0.5),
        ("controlled sum", 3, csum(3), 0.75, 3.0 / 8.0),
        ("controlled sum", 5, csum(5), 5.0 / 6.0, 5.0 / 12.0),
        ("controlled phase", 4, cphase(4), 0.8, 0.4),
        ("orthogonal squares", 3, squares(3), 1.0, 0.5),
        ("orthogonal squares", 7, squares(7), 1.0, 0.5),
        ("Fourier", 2, fourier(4), third, 0.833_333_333),
        ("Fourier", 3, fourier(9), 0.343_385, 0.828_308),
        ("Fourier", 6, fourier(36), 0.344_357, 0.827_822),
    ];
    for (name, d, u, power, typicality) in cases {
        let report = judge_gate(d, &u);
        let close = if name == "Fourier" { 1e-6 } else { 1e-12 };
        let found = report.entangling_power.unwrap_or_else(|| panic!("{name}: not unitary"));
        assert!((found - power).abs() < close, "{name}, {d} levels: e_p {found}");
        let found = report.gate_typicality.unwrap();
        assert!((found - typicality).abs() < close, "{name}, {d} levels: g_t {found}");
        assert_eq!(report.perfect, (power - 1.0f64).abs() < 1e-12, "{name}, {d} levels");
    }
}

/// The best permutation of order 36: e_p = 314/315 (Phys. Rev. Lett. 128, 080507 (2022);
/// recomputed from a classical pair of squares with 34 distinct pairs).
#[test]
fn the_best_permutation_of_six_levels() {
    let a = ["563412", "216534", "651243", "435621", "142356", "324165"];
    let b = ["125634", "651243", "436512", "564321", "243156", "312465"];
    let symbol = |s: &str, j: usize| usize::from(s.as_bytes()[j] - b'1');
    let u = permutation(6, |i, j| match (i, j) {
        (4, 4) => (4, 4),
        (4, 5) => (4, 5),
        (5, 4) => (5, 5),
        (5, 5) => (5, 4),
        _ => (symbol(a[i], j), symbol(b[i], j)),
    });
    let report = judge_gate(6, &u);
    let power = report.entangling_power.unwrap();
    assert!((power - 314.0 / 315.0).abs() < 1e-14, "{power}");
    assert!(!report.perfect);
    assert_eq!(report.uniformity, 1);
}

/// (purity of 02|13, purity of 03|12) of a permutation, counted: Tr (M M†)² is the number of
/// (rows r, s; columns c, e) with entries at rc, sc, se, re.
fn counted(d: usize, image: &[usize]) -> (f64, f64) {
    let mut out = [0.0; 2];
    for (k, swapped) in [false, true].into_iter().enumerate() {
        // Gram matrix of rows: pairs of rows that share columns.
        let mut rows = vec![vec![0u32; d * d]; d * d];
        for (from, &to) in image.iter().enumerate() {
            let (i, j, a, b) = (to / d, to % d, from / d, from % d);
            let (row, col) = if swapped { (i * d + b, j * d + a) } else { (i * d + a, j * d + b) };
            rows[row][col] += 1;
        }
        let mut sum = 0u32;
        for r in &rows {
            for s in &rows {
                let dot: u32 = r.iter().zip(s).map(|(x, y)| x * y).sum();
                sum += dot * dot;
            }
        }
        out[k] = f64::from(sum) / (d * d * d * d) as f64;
    }
    (out[0], out[1])
}

fn permutations(n: usize, mut each: impl FnMut(&[usize])) {
    let mut p: Vec<usize> = (0..n).collect();
    let mut c = vec![0; n];
    each(&p);
    let mut i = 0;
    while i < n {
        if c[i] < i {
            p.swap(if i % 2 == 0 { 0 } else { c[i] }, i);
            each(&p);
            c[i] += 1;
            i = 0;
        } else {
            c[i] = 0;
            i += 1;
        }
    }
}

/// Of the 24 permutations of two qubits 8 have e_p = 0 and 16 have 2/3 (recomputed; the
/// classification is that of Phys. Rev. A 72, 012314 (2005)).
#[test]
fn all_permutations_of_two_qubits() {
    let (mut zero, mut two_thirds) = (0, 0);
    permutations(4, |p| {
        let (realigned, swapped) = counted(2, p);
        let (power, _) = gate(2, realigned, swapped);
        let report = judge_gate(2, &permutation(2, |i, j| (p[2 * i + j] / 2, p[2 * i + j] % 2)));
        assert!((report.entangling_power.unwrap() - power).abs() < 1e-14);
        zero += usize::from(power.abs() < 1e-14);
        two_thirds += usize::from((power - 2.0 / 3.0).abs() < 1e-14);
    });
    assert_eq!((zero, two_thirds), (8, 16));
}

/// All 362880 permutations of two three-level systems (counts recomputed; classification of
/// Phys. Rev. A 72, 012314 (2005)).
#[test]
#[ignore = "a minute of counting"]
fn all_permutations_of_two_qutrits() {
    let expected: [(u32, usize); 15] = [
        (36, 72),
        (32, 3888),
        (30, 22464),
        (29, 46656),
        (28, 44712),
        (27, 101_376),
        (26, 44064),
        (25, 36288),
        (24, 27432),
        (23, 20736),
        (22, 10368),
        (20, 1296),
        (18, 864),
        (16, 2592),
        (0, 72),
    ];
    // Counts by 36·e_p.
    let mut found = std::collections::BTreeMap::new();
    permutations(9, |p| {
        let (realigned, swapped) = counted(3, p);
        let (power, _) = gate(3, realigned, swapped);
        *found.entry((36.0 * power).round() as u32).or_insert(0) += 1;
    });
    let found: Vec<(u32, usize)> = found.into_iter().rev().collect();
    assert_eq!(found, expected);
}

/// Enumerators of stabilizer perfect tensors (recomputed independently).
#[test]
fn enumerators_of_perfect_tensors() {
    for (family, legs, d, expected) in [
        ("five-leg", 5, 2, &[1.0, 0.0, 0.0, 10.0, 15.0, 6.0][..]),
        ("six-leg", 6, 2, &[1.0, 0.0, 0.0, 0.0, 45.0, 0.0, 18.0]),
        ("four-leg", 4, 3, &[1.0, 0.0, 0.0, 32.0, 48.0]),
        ("six-leg", 6, 3, &[1.0, 0.0, 0.0, 0.0, 120.0, 240.0, 368.0]),
    ] {
        let block = make(family, &vec![d; legs]);
        let report = check_block(&block, &CheckRequest::default(), &Silent).unwrap();
        let found = report.enumerator.unwrap();
        assert_eq!(found.len(), expected.len());
        for (a, b) in found.iter().zip(expected) {
            assert!((a - b).abs() < 1e-9, "{family} {d}: {found:?}");
        }
        assert_eq!(report.uniformity, legs / 2);
    }
}

/// The phase vectors of Special Matrices 12, 20240010 (2024), equations (10)–(15), in the
/// ansatz of Quantum 8, 1528 (2024), in both published forms.
#[test]
fn published_six_level_solutions() {
    let rows = |text: &str| -> Vec<Vec<u32>> {
        text.split(' ').map(|r| r.bytes().map(|b| u32::from(b - b'0')).collect()).collect()
    };
    // Exponents of exp(πi/3); the third vector is of cube roots.
    let vectors = [
        (rows("010133 331524 213123 112035 532325 441551"), 1),
        (rows("023320 032204 203500 050020 225324 230200"), 1),
        (rows("022001 011121 020222 202221 112022 012210"), 2),
    ];
    let zeta =
        |e: i64| Complex64::from_polar(1.0, std::f64::consts::TAU * e.rem_euclid(6) as f64 / 6.0);
    for (number, (e, unit)) in vectors.iter().enumerate() {
        let lambda = |a: usize, b: usize| i64::from(e[a][b] * unit);
        let mut bell = Array2::<Complex64>::zeros((36, 36));
        let mut hadamard = Array2::<Complex64>::zeros((36, 36));
        for a in 0..6 {
            for b in 0..6 {
                for j in 0..6 {
                    for l in 0..6 {
                        let (i, k) = ((j + a) % 6, (l + a) % 6);
                        let turn = (b * (j + 6 - l)) as i64 + lambda(a, b);
                        bell[[i * 6 + j, k * 6 + l]] += zeta(turn) / 6.0;
                    }
                }
            }
        }
        for k in 0..6i64 {
            for l in 0..6i64 {
                for m in 0..6i64 {
                    for n in 0..6i64 {
                        let mut sum = Complex64::default();
                        for a in 0..6i64 {
                            for b in 0..6i64 {
                                let phase = a * (l - n) - b * (k + m);
                                sum += zeta(phase + lambda(a as usize, b as usize));
                            }
                        }
                        hadamard[[(k * 6 + l) as usize, (m * 6 + n) as usize]] =
                            zeta(l * k + n * m) * sum / 36.0;
                    }
                }
            }
        }
        for (form, u) in [("Bell-diagonal", &bell), ("Hadamard", &hadamard)] {
            let report = judge_gate(6, u);
            assert!(report.perfect, "vector {}, {form}: {}", number + 1, report.largest_defect);
            assert!((report.entangling_power.unwrap() - 1.0).abs() < 1e-12);
        }
        assert!(hadamard.iter().all(|v| (v.norm() - 1.0 / 6.0).abs() < 1e-12));
        // One phase turned, and the verdict turns too.
        bell[[0, 0]] *= I;
        assert!(!judge_gate(6, &bell).perfect);
    }
}

#[test]
fn sparse_and_dense_roads_agree() {
    // A local unitary on the first leg fills the zeros and changes no verdict.
    let block = make("four-leg", &[6; 4]);
    let sparse = check_block(&block, &CheckRequest::default(), &Silent).unwrap();
    let matrix = block.to_dense().to_complex().into_shape_with_order((6, 216)).unwrap();
    let filled = fourier(6).dot(&matrix);
    let array = filled.into_shape_with_order(vec![6; 4]).unwrap();
    let dense =
        check_dense("filled", &Dense::Complex(array), &CheckRequest::default(), &Silent).unwrap();
    assert!(dense.nonzeros > 3 * sparse.nonzeros);
    assert!(dense.perfect && sparse.perfect);
    for (a, b) in dense.splits.iter().zip(&sparse.splits) {
        assert_eq!((&a.left, a.rank), (&b.left, b.rank));
        assert!((a.entropy_nats - b.entropy_nats).abs() < 1e-12);
    }
}
