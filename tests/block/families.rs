//! Which blocks exist, and that every construction is what it says.

use super::{make, tables_agree};
use lierne::block::{self, BlockError, Request};
use num_complex::Complex64;

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
