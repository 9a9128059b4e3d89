//! Slices spread over MPI ranks; needs the feature `mpi` and `mpirun`.
#![cfg(feature = "mpi")]

use lierne::network::{self, Limits};
use lierne::order::{self, Plan, Shape};
use lierne::watch::Silent;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

const LIERNE: &str = env!("CARGO_BIN_EXE_lierne");

fn files(folder: &Path) -> (PathBuf, PathBuf) {
    let n = 4;
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
        "lierne": 1, "name": "torus", "dimension": 3,
        "boundary": [], "bulk": [], "summed": [], "tensor": tensors,
    });
    let path = folder.join("torus.json");
    std::fs::write(&path, net.to_string()).unwrap();
    let network = network::load(&path, &Limits::default()).unwrap();
    let shape = Shape::of(&network);
    let request = order::Request { work: 300_000, ..order::Request::default() };
    let steps = order::search(&shape, &request, &Silent).unwrap().plan.steps;
    let labels = ["h0_0", "v0_0", "h1_2", "v2_1"];
    let sliced = labels.iter().map(|l| network.find_label(l).unwrap()).collect();
    let plan = folder.join("plan.json");
    order::save(&plan, &shape, &Plan { steps, sliced }).unwrap();
    (path, plan)
}

fn ranks(n: usize) -> Command {
    let mut c = Command::new("mpirun");
    c.env("OMPI_ALLOW_RUN_AS_ROOT", "1").env("OMPI_ALLOW_RUN_AS_ROOT_CONFIRM", "1");
    c.args(["-n", &n.to_string(), "--oversubscribe", LIERNE]);
    c.args(["contract", "--json", "--quiet", "--dense"]);
    c
}

fn mantissa(output: &Output) -> (u64, u64) {
    let text = String::from_utf8_lossy(&output.stdout);
    assert!(output.status.success(), "{text}\n{}", String::from_utf8_lossy(&output.stderr));
    let v: serde_json::Value =
        serde_json::from_str(text.trim()).unwrap_or_else(|e| panic!("{e}: {text}"));
    (v["mantissa"][0].as_f64().unwrap().to_bits(), v["multiply_adds"].as_u64().unwrap())
}

#[test]
fn two_and_three_ranks_give_the_bits_of_one_process() {
    let home = tempfile::tempdir().unwrap();
    let (net, plan) = files(home.path());
    let alone = Command::new(LIERNE)
        .args(["contract", "--json", "--quiet", "--dense"])
        .arg(&net)
        .arg("--plan")
        .arg(&plan)
        .output()
        .unwrap();
    let alone = mantissa(&alone);
    for n in [1, 2, 3] {
        let output =
            ranks(n).arg(&net).arg("--plan").arg(&plan).arg("--distributed").output().unwrap();
        assert_eq!(mantissa(&output), alone, "{n} ranks");
    }
    // A checkpoint of three ranks, a part of it lost, serves two.
    let at = home.path().join("sums");
    let with = |n: usize| {
        let mut c = ranks(n);
        c.arg(&net).arg("--plan").arg(&plan).arg("--distributed").arg("--checkpoint").arg(&at);
        c.output().unwrap()
    };
    assert_eq!(mantissa(&with(3)), alone);
    assert_eq!(mantissa(&with(2)), alone);
}

#[test]
fn a_rank_that_fails_ends_the_job_with_its_message() {
    let home = tempfile::tempdir().unwrap();
    let output = ranks(2).arg(home.path().join("none.json")).arg("--distributed").output().unwrap();
    assert!(!output.status.success());
    let text = String::from_utf8_lossy(&output.stderr);
    assert!(text.contains("rank") && text.contains("none.json"), "{text}");
}
