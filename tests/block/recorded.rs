//! Blocks, measures and array files against values recorded with NumPy
//! (`tests/outside/block.py`).

use lierne::block::{self, CheckRequest, Request, check_dense, from_dense, gate, read_npy};
use lierne::tensor::Dense;
use lierne::watch::Silent;
use ndarray::ArrayD;
use num_complex::Complex64;
use serde::Deserialize;
use std::collections::BTreeMap;
use std::path::PathBuf;

#[derive(Deserialize)]
struct Recorded {
    blocks: Vec<OneBlock>,
    judged: Vec<Judged>,
    files: BTreeMap<String, OneFile>,
}

#[derive(Deserialize)]
struct OneBlock {
    family: String,
    dimension: usize,
    legs: usize,
    index: Vec<u64>,
    value: Vec<[f64; 2]>,
}

#[derive(Deserialize)]
struct Judged {
    name: String,
    shape: Vec<usize>,
    re: Vec<f64>,
    im: Vec<f64>,
    splits: Vec<OneSplit>,
    enumerator: Vec<f64>,
    purity: Option<[f64; 2]>,
}

#[derive(Deserialize)]
struct OneSplit {
    left: Vec<usize>,
    defect: f64,
    entropy: f64,
}

#[derive(Deserialize)]
struct OneFile {
    shape: Vec<usize>,
    values: Option<Vec<[f64; 2]>>,
}

fn recorded() -> Recorded {
    serde_json::from_str(include_str!("../data/block.json")).expect("the recorded file is JSON")
}

#[test]
fn entries_follow_their_formulas() {
    for one in recorded().blocks {
        let place = format!("{} of dimension {}", one.family, one.dimension);
        let request = Request::new(one.family, vec![one.dimension; one.legs]);
        let entries = block::make(&request).unwrap().entries().to_sparse();
        assert_eq!(entries.index(), one.index, "{place}");
        // A common phase is free.
        let recorded = |k: usize| Complex64::new(one.value[k][0], one.value[k][1]);
        let phase = entries.value()[0] / recorded(0);
        assert!((phase.norm() - 1.0).abs() < 1e-12, "{place}: magnitude");
        for (k, v) in entries.value().iter().enumerate() {
            assert!((v - phase * recorded(k)).norm() < 1e-12, "{place}: entry {k}");
        }
    }
}

#[test]
fn verdicts_on_arrays() {
    for one in recorded().judged {
        let values = one.re.iter().zip(&one.im).map(|(&a, &b)| Complex64::new(a, b)).collect();
        let array = Dense::Complex(ArrayD::from_shape_vec(one.shape.clone(), values).unwrap());
        let report = check_dense(&one.name, &array, &CheckRequest::default(), &Silent).unwrap();
        for split in &report.splits {
            let expected = one.splits.iter().find(|s| s.left == split.left).unwrap();
            let place = format!("{}, legs {:?}", one.name, split.left);
            assert!((split.entropy_nats - expected.entropy).abs() < 1e-11, "{place}: entropy");
            assert!((split.defect - expected.defect).abs() < 1e-10, "{place}: defect");
        }
        for (j, (a, b)) in report.enumerator.unwrap().iter().zip(&one.enumerator).enumerate() {
            assert!((a - b).abs() < 1e-9, "{}: weight {j}: {a} against {b}", one.name);
        }
        if let (Some(power), Some([realigned, swapped])) = (report.entangling_power, one.purity) {
            let (expected, _) = gate(one.shape[0], realigned, swapped);
            assert!((power - expected).abs() < 1e-12, "{}", one.name);
        }
        // The table of isometries asks the same questions with its own arithmetic.
        let table = from_dense(one.name.clone(), array, 1e-8).unwrap();
        for s in &one.splits {
            let mask = s.left.iter().fold(0u64, |m, l| m | 1 << l);
            let columns: usize = s.left.iter().map(|&l| one.shape[l]).product();
            let rows: usize = one.shape.iter().product::<usize>() / columns;
            if columns <= rows {
                assert_eq!(
                    table.isometries().is_isometry(mask),
                    s.defect < 1e-8,
                    "{}, legs {:?}",
                    one.name,
                    s.left
                );
            }
        }
    }
}

fn file(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/data/npy").join(format!("{name}.npy"))
}

#[test]
fn files_that_numpy_wrote() {
    for (name, one) in recorded().files {
        let read = read_npy(&file(&name));
        match one.values {
            Some(values) => {
                let array = read.unwrap_or_else(|e| panic!("{name}: {e}"));
                assert_eq!(array.shape(), one.shape, "{name}");
                for (v, w) in array.to_complex().iter().zip(values) {
                    assert_eq!((v.re, v.im), (w[0], w[1]), "{name}");
                }
            }
            None if name == "nan" => {
                let message = from_dense(name, read.unwrap(), 1e-10).unwrap_err().to_string();
                assert!(message.contains("entry [0, 1]"), "{message}");
            }
            None => {
                let message = read.expect_err(&name).to_string();
                assert!(message.contains("holds numbers of type"), "{name}: {message}");
            }
        }
    }
    for (name, expected) in [("truncated", "should hold 96 bytes"), ("no_array", "no NumPy array")]
    {
        let message = read_npy(&file(name)).expect_err(name).to_string();
        assert!(message.contains(expected), "{message}");
    }
}
