//! `lierne block` as a user meets it.
#![cfg(feature = "cli")]

use serde_json::Value;
use std::path::Path;
use std::process::{Command, Output};

fn lierne(words: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_lierne")).arg("block").args(words).output().unwrap()
}

/// Runs and shows everything where the status is another.
fn expect(status: i32, words: &[&str]) -> (String, String) {
    let out = lierne(words);
    let text = |b: &[u8]| String::from_utf8_lossy(b).into_owned();
    let (stdout, stderr) = (text(&out.stdout), text(&out.stderr));
    assert_eq!(
        out.status.code(),
        Some(status),
        "lierne block {words:?}\n--- stdout\n{stdout}\n--- stderr\n{stderr}"
    );
    (stdout, stderr)
}

fn json(status: i32, words: &[&str]) -> Value {
    let (stdout, _) = expect(status, words);
    assert_eq!(stdout.lines().count(), 1, "{stdout}");
    serde_json::from_str(&stdout).unwrap_or_else(|e| panic!("{words:?}: {e}\n{stdout}"))
}

fn path(folder: &Path, name: &str) -> String {
    folder.join(name).to_str().unwrap().to_owned()
}

#[test]
fn make_then_check() {
    let folder = tempfile::tempdir().unwrap();
    for d in ["3", "4", "5", "6", "7", "8", "9", "10", "12"] {
        let file = path(folder.path(), &format!("t{d}.npy"));
        let made = json(0, &["make", "--legs", "4", "--dimension", d, "--out", &file, "--json"]);
        assert_eq!(made["perfect"], true);
        let report = json(0, &["check", &file, "--json"]);
        assert_eq!(report["perfect"], true, "dimension {d}");
        assert_eq!(report["legs"], 4);
        let near = |key: &str, v: f64| (report[key].as_f64().unwrap() - v).abs() < 1e-12;
        assert!(near("entangling_power", 1.0) && near("gate_typicality", 0.5), "{report}");
        assert_eq!(report["splits"].as_array().unwrap().len(), 7);
    }
    // Nothing is left beside the files.
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 9);
}

#[test]
fn a_large_block_is_checked_without_its_dense_array() {
    // 10^8 places, 10^4 entries.
    let report = json(0, &["check", "--legs", "4", "--dimension", "100", "--json"]);
    assert_eq!((&report["perfect"], &report["nonzeros"]), (&true.into(), &10_000.into()));
}

#[test]
fn exact_entries_come_back() {
    let folder = tempfile::tempdir().unwrap();
    let file = path(folder.path(), "six.json");
    let make = ["make", "--legs", "4", "--dimension", "6", "--format", "json"];
    expect(0, &[&make[..], &["--out", &file]].concat());
    let (printed, _) = expect(0, &make);
    assert_eq!(printed, std::fs::read_to_string(&file).unwrap());
    let value: Value = serde_json::from_str(&printed).unwrap();
    assert_eq!(value["root"], 6);
    assert_eq!(value["scale_squared"], serde_json::json!([1, 36]));
    assert_eq!(value["entries"].as_array().unwrap().len(), 180);
    assert_eq!(json(0, &["check", &file, "--json"])["perfect"], true);
    let (_, stderr) = expect(
        2,
        &[
            "make",
            "--block",
            "random-unitary",
            "--legs",
            "2",
            "--dimension",
            "3",
            "--format",
            "json",
        ],
    );
    assert!(stderr.contains("no exact entries"), "{stderr}");
}

#[test]
fn negative_answers_and_refusals() {
    let folder = tempfile::tempdir().unwrap();
    let file = path(folder.path(), "copy.npy");
    expect(0, &["make", "--block", "copy", "--legs", "4", "--dimension", "2", "--out", &file]);
    let report = json(1, &["check", &file, "--json"]);
    assert_eq!((&report["perfect"], &report["uniformity"]), (&false.into(), &1.into()));
    let data = |name: &str| {
        path(Path::new(env!("CARGO_MANIFEST_DIR")), &format!("tests/data/npy/{name}.npy"))
    };
    let none = path(folder.path(), "none.npy");
    let never = path(folder.path(), "never.npy");
    let cases: &[(&[&str], &str)] = &[
        (&["make", "--legs", "4", "--dimension", "2", "--out", &never], "Phys. Lett. A 273, 213"),
        (&["make", "--legs", "7", "--dimension", "2", "--out", &never], "118, 200502"),
        (&["make", "--legs", "8", "--dimension", "4", "--out", &never], "open"),
        (&["make", "--legs", "4", "--out", &never], "--dimension"),
        (&["make", "--block", "nothing", "--dimension", "2"], "there is no block `nothing`"),
        (&["make", "--block", "copy", "--dimension", "2"], "say how many"),
        (&["make", "--legs", "4", "--dimension", "6", "--construction", "x"], "quadratic"),
        (&["make", "--dimension", "2", "--stabilizers", "XX,ZI"], "does not commute"),
        (&["make", "--legs", "6", "--dimension", "100", "--out", &never], "more than the"),
        (&["check", &none], "none.npy"),
        (&["check", &data("nan")], "not a finite number"),
        (&["check", &data("zeros")], "zero everywhere"),
        (&["check", &data("scalar")], "shape []"),
        (&["check", &data("empty")], "shape [2, 0, 3]"),
        (&["check", &data("truncated")], "should hold 96 bytes"),
        (&["check", &data("float16")], "`<f2`"),
        (&["check", &data("object_free_text")], "type"),
        (&["check", &data("no_array")], "no NumPy array file"),
        (&["check"], "name an array file"),
        (&["check", &file, "--tolerance", "nan"], "tolerance"),
        (&["find", "--dimension", "1"], "dimension 1"),
        (&["find", "--dimension", "3", "--from", "nowhere"], "no such file"),
        (&["find", "--dimension", "3", "--starts", "0"], "at least one start"),
    ];
    for (words, expected) in cases {
        let (stdout, stderr) = expect(2, words);
        assert!(stderr.contains(expected), "{words:?}: {stderr}");
        assert_eq!(stderr.trim_end().lines().count(), 1, "{words:?}: {stderr}");
        assert!(stdout.is_empty(), "{words:?}: {stdout}");
    }
    assert!(!Path::new(&never).exists());
}

#[test]
fn encoders_and_stabilizers() {
    let made = json(0, &["make", "--block", "code-4-2-2", "--dimension", "2", "--json"]);
    assert_eq!(made["dimensions"], serde_json::json!([2, 2, 2, 2, 4]));
    let words = ["make", "--dimension", "2", "--json", "--stabilizers"];
    let made = json(0, &[&words[..], &["XZZXI,IXZZX,XIXZZ,ZXIXZ"]].concat());
    assert_eq!((&made["legs"], &made["perfect"]), (&6.into(), &true.into()));
    let made = json(0, &[&words[..], &["-XX,-ZZ"]].concat());
    assert_eq!((&made["legs"], &made["perfect"]), (&2.into(), &true.into()));
}

#[test]
fn find_writes_what_check_confirms() {
    let folder = tempfile::tempdir().unwrap();
    let (a, b) = (path(folder.path(), "a.npy"), path(folder.path(), "b.npy"));
    for file in [&a, &b] {
        let words = ["find", "--dimension", "3", "--from", "permutation", "--seed", "5", "--json"];
        let found = json(0, &[&words[..], &["--out", file]].concat());
        assert_eq!(found["converged"], true);
        assert!(found["defect"].as_f64().unwrap() < 1e-13);
        json(0, &["check", file, "--tolerance", "1e-12", "--json"]);
    }
    assert_eq!(std::fs::read(&a).unwrap(), std::fs::read(&b).unwrap());
    // From a file without noise the first start is at its goal at once.
    let found = json(0, &["find", "--dimension", "3", "--from", &a, "--json"]);
    assert_eq!((&found["start"], &found["converged"]), (&0.into(), &true.into()));
    let found =
        json(1, &["find", "--dimension", "2", "--starts", "2", "--rounds", "300", "--json"]);
    assert_eq!(found["converged"], false);
}

#[test]
fn the_list_names_every_family() {
    let list = json(0, &["list", "--json"]);
    let names: Vec<&str> =
        list["families"].as_array().unwrap().iter().map(|f| f["name"].as_str().unwrap()).collect();
    for name in ["perfect", "four-leg", "eight-leg", "mds", "code-7-1-3", "stabilizer", "dicke"] {
        assert!(names.contains(&name), "{names:?}");
    }
    let (text, _) = expect(0, &["list"]);
    assert!(names.iter().all(|n| text.lines().any(|l| l == *n)));
}

/// `block list --verify` prints only proofs that passed.
#[test]
#[ignore = "minutes without optimisation"]
fn every_proof_passes() {
    let (text, _) = expect(0, &["list", "--verify"]);
    assert!(text.lines().count() > 200);
    assert!(text.lines().all(|l| l.starts_with("proven")), "{text}");
}
