//! The program within its memory, killed, stopped, and refused by the disk.

use lierne::network::{self, Limits};
use lierne::order::{self, Plan, Shape};
use lierne::watch::Silent;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};
use std::time::{Duration, Instant};

const LIERNE: &str = env!("CARGO_BIN_EXE_lierne");

/// An n × n torus of four-leg blocks, no leg open.
fn torus(folder: &Path, n: usize, dimension: usize) -> PathBuf {
    let mut tensors = Vec::new();
    for i in 0..n {
        for j in 0..n {
            let legs = [
                format!("h{i}_{j}"),
                format!("v{i}_{j}"),
                format!("h{i}_{}", (j + 1) % n),
                format!("v{}_{j}", (i + 1) % n),
            ];
            tensors.push(serde_json::json!({ "legs": legs, "block": "four-leg" }));
        }
    }
    let net = serde_json::json!({
        "lierne": 1, "name": "torus", "dimension": dimension,
        "boundary": [], "bulk": [], "summed": [], "tensor": tensors,
    });
    let path = folder.join("torus.json");
    std::fs::write(&path, net.to_string()).unwrap();
    path
}

/// A plan with these labels sliced.
fn plan(folder: &Path, net: &Path, sliced: &[&str]) -> PathBuf {
    let network = network::load(net, &Limits::default()).unwrap();
    let shape = Shape::of(&network);
    let request = order::Request { work: 300_000, ..order::Request::default() };
    let steps = order::search(&shape, &request, &Silent).unwrap().plan.steps;
    let sliced = sliced.iter().map(|l| network.find_label(l).unwrap()).collect();
    let path = folder.join("plan.json");
    order::save(&path, &shape, &Plan { steps, sliced }).unwrap();
    path
}

fn contract(net: &Path, plan: &Path, more: &[&str]) -> Command {
    let mut c = Command::new(LIERNE);
    c.arg("contract").arg(net).arg("--plan").arg(plan).args(["--json", "--quiet", "--dense"]);
    c.args(more);
    c
}

fn told(output: &Output) -> String {
    format!(
        "{}\n{}\n{}",
        output.status,
        String::from_utf8_lossy(&output.stdout),
        String::from_utf8_lossy(&output.stderr)
    )
}

fn json(output: &Output) -> serde_json::Value {
    assert!(output.status.success(), "{}", told(output));
    serde_json::from_slice(&output.stdout).unwrap_or_else(|e| panic!("{e}: {}", told(output)))
}

/// Mantissa with all its bits, and scale.
fn bits(output: &Output) -> (u64, u64) {
    let v = json(output);
    let x = v["mantissa"][0].as_f64().unwrap().to_bits();
    (x, v["log10_scale"].as_f64().unwrap().to_bits())
}

#[test]
fn killed_at_thirty_random_moments_it_goes_on_with_the_same_bits() {
    let home = tempfile::tempdir().unwrap();
    let net = torus(home.path(), 4, 3);
    let plan = plan(home.path(), &net, &["h0_0", "v0_0", "h1_2", "v2_1", "h3_3"]);
    let start = Instant::now();
    let whole = bits(&contract(&net, &plan, &[]).output().unwrap());
    let takes = start.elapsed().as_secs_f64();
    let mut rng = ChaCha8Rng::seed_from_u64(0);
    let (mut kills, mut ends) = (0, 0);
    let mut folder = tempfile::tempdir().unwrap();
    while kills < 30 {
        let at = folder.path().to_str().unwrap().to_owned();
        let mut child = contract(&net, &plan, &["--checkpoint", &at])
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        std::thread::sleep(Duration::from_secs_f64(rng.random_range(0.0..0.7 * takes)));
        if child.try_wait().unwrap().is_none() {
            child.kill().unwrap();
            child.wait().unwrap();
            kills += 1;
            continue;
        }
        assert_eq!(bits(&child.wait_with_output().unwrap()), whole);
        ends += 1;
        folder = tempfile::tempdir().unwrap();
    }
    let at = folder.path().to_str().unwrap().to_owned();
    let last = contract(&net, &plan, &["--checkpoint", &at]).output().unwrap();
    assert_eq!(bits(&last), whole, "after {kills} kills and {ends} full runs");
}

#[cfg(unix)]
#[test]
fn a_signal_ends_it_cleanly_and_it_says_how_to_go_on() {
    let home = tempfile::tempdir().unwrap();
    let net = torus(home.path(), 4, 4);
    let sliced = ["h0_0", "v0_0", "h1_2", "v2_1", "h3_3", "v3_2"];
    let plan = plan(home.path(), &net, &sliced);
    let at = home.path().join("sums");
    let child = contract(&net, &plan, &["--checkpoint", at.to_str().unwrap()])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    // Until the first partial sum is there.
    let start = Instant::now();
    let files = || std::fs::read_dir(&at).map_or(0, |d| d.count());
    while files() == 0 && start.elapsed() < Duration::from_secs(60) {
        std::thread::sleep(Duration::from_millis(2));
    }
    let id = child.id().to_string();
    assert!(Command::new("kill").args(["-INT", &id]).status().unwrap().success());
    let output = child.wait_with_output().unwrap();
    assert_eq!(output.status.code(), Some(2), "{}", told(&output));
    let text = String::from_utf8_lossy(&output.stderr);
    assert!(text.contains("of 4096 slices; the same command goes on from"), "{}", told(&output));
    assert!(files() > 0);
}

#[cfg(unix)]
#[test]
fn it_stays_within_the_memory_under_a_hard_address_space_limit() {
    let home = tempfile::tempdir().unwrap();
    // The first step makes a tensor of 9^8 entries, 344 MB of real numbers.
    let t = |legs: &str| {
        let legs: Vec<String> = legs.chars().map(String::from).collect();
        serde_json::json!({ "legs": legs, "block": "four-leg" })
    };
    let net = serde_json::json!({
        "lierne": 1, "name": "wide", "dimension": 9, "boundary": [], "bulk": [], "summed": [],
        "tensor": [t("abcd"), t("efgh"), t("abef"), t("cdgh")],
    });
    let path = home.path().join("wide.json");
    std::fs::write(&path, net.to_string()).unwrap();
    let network = network::load(&path, &Limits::default()).unwrap();
    let steps = vec![(0, 1), (4, 2), (5, 3)];
    let file = home.path().join("plan.json");
    order::save(&file, &Shape::of(&network), &Plan { steps, sliced: vec![] }).unwrap();
    let free = contract(&path, &file, &["--memory", "2GiB"]).output().unwrap();
    assert_eq!(json(&free)["slices"], 1);
    assert!(json(&free)["peak_bytes"].as_u64().unwrap() > 344_000_000);
    let tight = |memory: &str, address_space: u64| {
        let line = format!(
            "ulimit -v {address_space}; exec {LIERNE} contract {} --plan {} --json --quiet --dense \
             --threads 2 --memory {memory}",
            path.display(),
            file.display()
        );
        Command::new("sh").args(["-c", &line]).output().unwrap()
    };
    // 100 MiB and 200 MiB for everything else.
    let output = tight("100MiB", 300 * 1024);
    let v = json(&output);
    assert!(v["slices"].as_u64().unwrap() >= 4, "{v}");
    assert!(v["peak_bytes"].as_u64().unwrap() <= 100 << 20, "{v}");
    assert_eq!(v["value"], json(&free)["value"]);
    // What cannot be had is refused before anything is allocated.
    let output = tight("10KiB", 300 * 1024);
    assert_eq!(output.status.code(), Some(2), "{}", told(&output));
    let text = String::from_utf8_lossy(&output.stderr);
    assert!(
        text.contains("bytes even when it is sliced") && text.contains("10240 are allowed"),
        "{text}"
    );
}

#[cfg(unix)]
#[test]
fn a_disk_that_takes_no_more_ends_it_in_a_sentence_and_keeps_the_checkpoint() {
    let home = tempfile::tempdir().unwrap();
    let net = torus(home.path(), 3, 3);
    let plan = plan(home.path(), &net, &["h0_0", "v0_0", "h1_2"]);
    let whole = bits(&contract(&net, &plan, &[]).output().unwrap());
    let at = home.path().join("sums");
    let folder = at.to_str().unwrap();
    assert_eq!(bits(&contract(&net, &plan, &["--checkpoint", folder]).output().unwrap()), whole);
    // Half of the work, as if the rest had not been done: the sum of all is put aside and
    // one of a part is left.
    let names = || {
        let mut names: Vec<String> = std::fs::read_dir(&at)
            .unwrap()
            .map(|e| e.unwrap().file_name().to_string_lossy().into_owned())
            .collect();
        names.sort();
        names
    };
    assert_eq!(names().len(), 1);
    for name in names() {
        std::fs::remove_file(at.join(name)).unwrap();
    }
    // A file of no size is all that the shell lets it write.
    let line = format!(
        "trap '' XFSZ; ulimit -f 0; exec {LIERNE} contract {} --plan {} --quiet --dense \
         --checkpoint {folder}",
        net.display(),
        plan.display()
    );
    let output = Command::new("sh").args(["-c", &line]).output().unwrap();
    assert_eq!(output.status.code(), Some(2), "{}", told(&output));
    let text = String::from_utf8_lossy(&output.stderr);
    assert!(text.contains("checkpoint") && text.contains("sum-"), "{text}");
    assert_eq!(text.lines().count(), 1, "{text}");
    assert!(names().is_empty(), "nothing half-written is left: {:?}", names());
    // A file where a folder should be, and a folder that cannot be made.
    let output = contract(&net, &plan, &["--checkpoint", net.to_str().unwrap()]).output().unwrap();
    assert_eq!(output.status.code(), Some(2), "{}", told(&output));
    let out = home.path().join("nowhere").join("r.npy");
    let output = contract(&net, &plan, &["--out", out.to_str().unwrap()]).output().unwrap();
    assert_eq!(output.status.code(), Some(2), "{}", told(&output));
    assert_eq!(bits(&contract(&net, &plan, &["--checkpoint", folder]).output().unwrap()), whole);
}

#[test]
fn the_result_is_a_numpy_file() {
    let home = tempfile::tempdir().unwrap();
    let net = serde_json::json!({
        "lierne": 1, "name": "two", "dimension": 2, "boundary": ["c", "a"], "bulk": [], "summed": [],
        "tensor": [
            { "legs": ["a", "b"], "values": [1, 2, 3, 4] },
            { "legs": ["b", "c"], "values": [[0, 1], 0, 1, [0, -1]] },
        ],
    });
    let path = home.path().join("two.json");
    std::fs::write(&path, net.to_string()).unwrap();
    let out = home.path().join("r.npy");
    let output = Command::new(LIERNE)
        .arg("contract")
        .arg(&path)
        .args(["--json", "--quiet", "--out"])
        .arg(&out)
        .output()
        .unwrap();
    let v = json(&output);
    assert_eq!((&v["shape"], &v["multiply_adds"]), (&serde_json::json!([2, 2]), &8.into()));
    let array: ndarray::Array2<num_complex::Complex64> = ndarray_npy::read_npy(&out).unwrap();
    let c = |re, im| num_complex::Complex64::new(re, im);
    // The product is [[2 + i, −2i], [4 + 3i, −4i]], transposed.
    assert_eq!(array, ndarray::array![[c(2., 1.), c(4., 3.)], [c(0., -2.), c(0., -4.)]]);
}
