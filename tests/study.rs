//! Studies through the program: what comes out, what is refused, what survives a kill.

use lierne::study::StudyResult;
use lierne::study::answer::Evidence;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};
use std::time::{Duration, Instant};

fn lierne(args: &[&str], folder: &Path) -> Output {
    Command::new(env!("CARGO_BIN_EXE_lierne"))
        .args(args)
        .current_dir(folder)
        .output()
        .expect("the program starts")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8_lossy(bytes).into_owned()
}

/// Runs a command that must succeed; shows both streams where it does not.
fn good(args: &[&str], folder: &Path) -> Output {
    let out = lierne(args, folder);
    assert!(
        out.status.success(),
        "lierne {}\nstdout: {}\nstderr: {}",
        args.join(" "),
        text(&out.stdout),
        text(&out.stderr)
    );
    out
}

fn result(path: &Path) -> StudyResult {
    let text = fs::read_to_string(path.join("result.json")).expect("result.json is there");
    serde_json::from_str(&text).expect("result.json has the published layout and no other field")
}

/// A study that takes moments: intervals, a named region, unions, a spectrum.
const SMALL: &str = r#"
study = 1
name = "small"
seed = 5
dimensions = [3, 4]

[network]
name = "squares"

[network.tiling]
polygon = 4
around = 5
rings = 1
growth = "vertex"
block = "four-leg"

[entropies]
intervals = "all"
measures = ["renyi-2"]
spectra = true

[[entropies.region]]
name = "two pieces"
sites = "0..3,10..13"

[[entropies.union]]
count = 30
parts = [4, 5]

[budget]
memory = "1GiB"
"#;

fn write(folder: &Path, name: &str, text: &str) -> PathBuf {
    let path = folder.join(name);
    fs::write(&path, text).expect("the folder can be written");
    path
}

/// Files of a result folder that must not depend on when and where it was made.
const SAME: [&str; 6] = [
    "result.json",
    "entropies.csv",
    "by_length.csv",
    "entropies.npz",
    "spectra.npz",
    "figures/region.svg",
];

#[test]
fn a_study_answers_everything_and_leaves_a_whole_folder() {
    let dir = tempfile::tempdir().unwrap();
    write(dir.path(), "small.toml", SMALL);
    let out = good(&["study", "small.toml", "--out", "out"], dir.path());
    assert!(text(&out.stdout).contains("Results are in out"), "{}", text(&out.stdout));
    let folder = dir.path().join("out");
    for name in SAME.iter().chain(&["report.html", "provenance.json", "README.txt", "study.toml"]) {
        assert!(folder.join(name).exists(), "{name} is missing");
    }
    let r = result(&folder);
    assert!(r.complete);
    assert_eq!(r.seed, 5);
    assert_eq!(r.cases.len(), 2);
    for c in &r.cases {
        // {4,5}, vertex rule, one ring: 13 tiles and 20 open sides.
        assert_eq!((c.tensors, c.boundary), (13, 20));
        assert_eq!(c.regions.len(), 20 * 19 + 1 + 30);
        let by_evidence: u64 = c.counts.evidence.values().sum();
        assert_eq!(by_evidence, c.regions.len() as u64);
        for row in &c.regions {
            assert!(row.lower_nats <= row.upper_nats + 1e-12, "{row:?}");
            assert!(row.upper_nats <= row.cut_nats + 1e-9, "{row:?}");
            if row.evidence != Evidence::Bounds {
                assert!(row.measures["renyi-2"] <= row.entropy_nats.unwrap() + 1e-9);
            }
        }
        // Planar, perfect and without bulk legs: connected regions meet the cut
        // (J. High Energy Phys. 06 (2015) 149, theorem 2).
        let intervals = &c.counts.kinds["interval"];
        assert_eq!(intervals.meet_cut, intervals.regions);
        // An interval and its complement are equally entangled.
        let s = |start: u64, sites: u64| {
            c.regions
                .iter()
                .find(|r| r.start == Some(start) && r.sites == sites)
                .and_then(|r| r.entropy_nats)
                .unwrap()
        };
        for start in 0..20 {
            for sites in 1..20 {
                assert!((s(start, sites) - s((start + sites) % 20, 20 - sites)).abs() < 1e-9);
            }
        }
    }
}

#[test]
fn the_table_says_what_the_result_says() {
    let dir = tempfile::tempdir().unwrap();
    write(dir.path(), "small.toml", SMALL);
    good(&["study", "small.toml", "--out", "out", "--quiet"], dir.path());
    let r = result(&dir.path().join("out"));
    let table = fs::read_to_string(dir.path().join("out/entropies.csv")).unwrap();
    let mut lines = table.lines();
    let head: Vec<&str> = lines.next().unwrap().split(',').collect();
    let at = |name: &str| head.iter().position(|h| *h == name).unwrap_or_else(|| panic!("{name}"));
    let (nats, evidence) = (at("entropy_nats"), at("evidence"));
    let rows: Vec<Vec<String>> = lines.map(cells).collect();
    let all: Vec<_> = r.cases.iter().flat_map(|c| &c.regions).collect();
    assert_eq!(rows.len(), all.len());
    for (cells, row) in rows.iter().zip(all) {
        assert_eq!(cells.len(), head.len());
        assert_eq!(cells[at("region")], row.region);
        assert_eq!(cells[evidence], row.evidence.word());
        assert_eq!(cells[nats].parse::<f64>().ok(), row.entropy_nats);
    }
}

/// Cells of a line of the table, quotes taken away.
fn cells(line: &str) -> Vec<String> {
    let mut out = vec![String::new()];
    let mut quoted = false;
    for ch in line.chars() {
        match ch {
            '"' => quoted = !quoted,
            ',' if !quoted => out.push(String::new()),
            ch => out.last_mut().unwrap().push(ch),
        }
    }
    out
}

#[test]
fn threads_and_repetition_change_no_byte() {
    let dir = tempfile::tempdir().unwrap();
    write(dir.path(), "small.toml", SMALL);
    good(&["study", "small.toml", "--out", "one", "--threads", "1"], dir.path());
    good(&["study", "small.toml", "--out", "two", "--threads", "2"], dir.path());
    // Again into the same folder: everything is kept.
    let again = good(&["study", "small.toml", "--out", "two", "--json"], dir.path());
    let said: serde_json::Value = serde_json::from_slice(&again.stdout).expect("one JSON object");
    assert_eq!(said["kept"], said["asked"]);
    for name in SAME {
        let a = fs::read(dir.path().join("one").join(name)).unwrap();
        let b = fs::read(dir.path().join("two").join(name)).unwrap();
        assert!(a == b, "{name} differs");
    }
}

#[test]
fn changed_inputs_are_asked_again() {
    let dir = tempfile::tempdir().unwrap();
    write(dir.path(), "small.toml", SMALL);
    good(&["study", "small.toml", "--out", "out", "--quiet"], dir.path());
    // Another dimension beside the old ones: only its answers are new.
    write(dir.path(), "small.toml", &SMALL.replace("[3, 4]", "[3, 4, 5]"));
    let out = good(&["study", "small.toml", "--out", "out", "--json"], dir.path());
    let said: serde_json::Value = serde_json::from_slice(&out.stdout).unwrap();
    assert_eq!(said["asked"], 3 * 411);
    assert_eq!(said["kept"], 2 * 411);
    // Another block: nothing can be kept.
    let other =
        SMALL.replace("\"four-leg\"", "\"random-unitary\"").replace("count = 30", "count = 3");
    write(dir.path(), "other.toml", &other.replace("intervals = \"all\"", "intervals = \"none\""));
    let out = good(&["study", "other.toml", "--out", "out", "--json"], dir.path());
    let said: serde_json::Value = serde_json::from_slice(&out.stdout).unwrap();
    assert_eq!(said["kept"], 0);
}

#[test]
fn a_killed_run_goes_on_to_the_same_bytes() {
    let dir = tempfile::tempdir().unwrap();
    write(dir.path(), "small.toml", SMALL);
    good(&["study", "small.toml", "--out", "whole", "--quiet"], dir.path());
    let began = Instant::now();
    good(&["study", "small.toml", "--out", "timed", "--quiet"], dir.path());
    let whole = began.elapsed();
    for part in 1..6u32 {
        let mut child = Command::new(env!("CARGO_BIN_EXE_lierne"))
            .args(["study", "small.toml", "--out", "cut", "--quiet"])
            .current_dir(dir.path())
            .stdout(Stdio::null())
            .spawn()
            .unwrap();
        std::thread::sleep(whole * part / 7);
        let _ = child.kill();
        let _ = child.wait();
        // Whatever is there is whole.
        if dir.path().join("cut/result.json").exists() {
            result(&dir.path().join("cut"));
        }
    }
    // A line that a kill left half written.
    let journal = dir.path().join("cut/answers.jsonl");
    if let Ok(mut bytes) = fs::read(&journal) {
        bytes.truncate(bytes.len().saturating_sub(7));
        fs::write(&journal, bytes).unwrap();
    }
    good(&["study", "small.toml", "--out", "cut", "--quiet"], dir.path());
    for name in SAME {
        let a = fs::read(dir.path().join("whole").join(name)).unwrap();
        let b = fs::read(dir.path().join("cut").join(name)).unwrap();
        assert!(a == b, "{name} differs after kills");
    }
    let left: Vec<_> = fs::read_dir(dir.path().join("cut"))
        .unwrap()
        .filter_map(|e| e.ok().map(|e| e.file_name().to_string_lossy().into_owned()))
        .filter(|n| n.ends_with(".part"))
        .collect();
    // A file that was being written beside its place when the kill came may lie about; it is
    // never mistaken for a result.
    assert!(left.iter().all(|n| n.starts_with('.')), "{left:?}");
}

#[test]
fn bad_studies_get_one_sentence_and_no_folder() {
    let dir = tempfile::tempdir().unwrap();
    let cases: [(&str, String, &str); 9] = [
        ("no such key", SMALL.replace("seed = 5", "sead = 5"), "\"seed\""),
        ("no version", SMALL.replace("study = 1", ""), "needs the key \"study\""),
        ("a later version", SMALL.replace("study = 1", "study = 7"), "version 1"),
        ("a site past the end", SMALL.replace("10..13", "10..33"), "20 sites"),
        ("too many parts", SMALL.replace("[4, 5]", "[40]"), "80 sites"),
        ("no such block", SMALL.replace("four-leg", "for-leg"), "for-leg"),
        ("no such state", SMALL.replace("[3, 4]", "[2]"), "273, 213"),
        ("not TOML", SMALL.replace("[network]", "[network"), "line"),
        ("no such file", "study = 1\n[network]\nfile = \"x.toml\"\n[entropies]\n".into(), "x.toml"),
    ];
    for (what, study, wanted) in cases {
        write(dir.path(), "bad.toml", &study);
        for arguments in
            [vec!["study", "bad.toml", "--out", "out"], vec!["study", "bad.toml", "--check"]]
        {
            let out = lierne(&arguments, dir.path());
            let said = text(&out.stderr);
            assert_eq!(out.status.code(), Some(2), "{what}: {said}");
            assert!(said.contains(wanted), "{what}: {said}");
            assert_eq!(said.trim_end().lines().count(), 1, "{what}: {said}");
            assert!(out.stdout.is_empty(), "{what}");
            assert!(!dir.path().join("out").exists(), "{what}: a folder was made");
        }
    }
}

#[test]
fn a_new_study_checks_and_runs_as_it_stands() {
    let dir = tempfile::tempdir().unwrap();
    good(&["study", "--new", "mine.toml"], dir.path());
    let out = good(&["study", "mine.toml", "--check"], dir.path());
    assert!(text(&out.stdout).contains("by geometry"), "{}", text(&out.stdout));
    assert!(!dir.path().join("out").exists());
    good(&["study", "mine.toml", "--out", "out"], dir.path());
    assert!(result(&dir.path().join("out")).complete);
    // What is there already is not written over.
    let out = lierne(&["study", "--new", "mine.toml"], dir.path());
    assert_eq!(out.status.code(), Some(2));
}

#[test]
fn codes_and_orders_are_answered_too() {
    let dir = tempfile::tempdir().unwrap();
    let study = r#"
study = 1
dimensions = [2]
[network]
name = "pentagons"
[network.tiling]
polygon = 5
around = 4
rings = 1
growth = "vertex"
bulk = "all"
[codes]
isometry = true
distance = true
recover = ["0..12"]
erasure = { p = [0.1, 0.5], samples = 200, legs = "centre" }
[orders]
methods = ["greedy", "portfolio"]
work = 1000000
"#;
    write(dir.path(), "codes.toml", study);
    good(&["study", "codes.toml", "--out", "out"], dir.path());
    let text = fs::read_to_string(dir.path().join("out/result.json")).unwrap();
    let r: serde_json::Value = serde_json::from_str(&text).unwrap();
    let findings = r["cases"][0]["findings"].as_array().unwrap();
    let of =
        |q: &str| findings.iter().find(|f| f["question"] == q).unwrap_or_else(|| panic!("{q}"));
    // [[25,11,3]] with exactly five supports of weight 3, recomputed by exhaustive rank tests.
    assert_eq!(of("isometry")["boundary"], 25);
    assert_eq!(of("isometry")["bulk"], 11);
    assert_eq!(of("isometry")["isometry"], true);
    assert_eq!(of("distance")["distance"], 3);
    assert_eq!(of("distance")["minimal_supports"], 5);
    assert_eq!(of("erasure")["points"].as_array().unwrap().len(), 2);
    assert!(dir.path().join("out/erasure.csv").exists());
    assert!(dir.path().join("out/orders.csv").exists());
    assert!(dir.path().join("out/plans/0-greedy-0.json").exists());
}

#[test]
fn the_page_asks_the_network_for_nothing() {
    let dir = tempfile::tempdir().unwrap();
    write(
        dir.path(),
        "small.toml",
        &SMALL.replace("name = \"small\"", "name = \"a </script><b> & co\""),
    );
    good(&["study", "small.toml", "--out", "out", "--quiet"], dir.path());
    let page = fs::read_to_string(dir.path().join("out/report.html")).unwrap();
    for mark in ["src=\"http", "href=\"http", "@import", "url(http", "fetch(", "XMLHttpRequest"] {
        assert!(!page.contains(mark), "the page holds {mark}");
    }
    // Nothing in the data ends the element that holds it.
    assert_eq!(page.matches("</script>").count(), 2);
    assert!(page.len() < 5_000_000);
}

/// Every study that ships runs to its end. Heavy; run with `--ignored`.
#[test]
#[ignore = "runs every study that ships"]
fn every_study_that_ships_runs() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let mut studies = Vec::new();
    for folder in ["networks", "networks/studies"] {
        let Ok(list) = fs::read_dir(root.join(folder)) else { continue };
        for entry in list.flatten() {
            let path = entry.path();
            let is_study = path.extension().is_some_and(|e| e == "toml")
                && fs::read_to_string(&path)
                    .is_ok_and(|t| t.lines().any(|l| l.starts_with("study =")));
            if is_study {
                studies.push(path);
            }
        }
    }
    studies.sort();
    assert!(studies.len() > 1, "{studies:?}");
    for study in studies {
        let dir = tempfile::tempdir().unwrap();
        let began = Instant::now();
        good(&["study", study.to_str().unwrap(), "--out", "out"], dir.path());
        let r = result(&dir.path().join("out"));
        assert!(r.complete, "{}", study.display());
        let size = fs::metadata(dir.path().join("out/report.html")).unwrap().len();
        assert!(size < 5_000_000, "{}: the page has {size} bytes", study.display());
        assert!(began.elapsed() < Duration::from_secs(600), "{}", study.display());
    }
}

/// The commands of the README, as written: lines of its `sh` blocks that call the program.
/// What builds, tests or benchmarks is left to whoever runs this.
#[test]
#[ignore = "runs every command of the README"]
fn the_readme_does_what_it_says() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let readme = fs::read_to_string(root.join("README.md")).unwrap();
    let dir = tempfile::tempdir().unwrap();
    copy(&root.join("networks"), &dir.path().join("networks"));
    let mut in_shell = false;
    let mut whole = String::new();
    let mut commands = Vec::new();
    for line in readme.lines() {
        if let Some(language) = line.strip_prefix("```") {
            in_shell = !in_shell && (language == "sh" || language == "console");
            continue;
        }
        if !in_shell {
            continue;
        }
        let line = line.strip_prefix("$ ").unwrap_or(line);
        if let Some(first) = line.strip_suffix('\\') {
            whole.push_str(first);
            continue;
        }
        whole.push_str(line);
        let command = std::mem::take(&mut whole);
        let bare = command.replace("cargo run --release -- ", "lierne ");
        if bare.trim_start().starts_with("lierne ") {
            commands.push(bare);
        }
    }
    assert!(commands.iter().any(|c| c.contains("six-level-squares.toml")), "{commands:?}");
    let bin = Path::new(env!("CARGO_BIN_EXE_lierne")).parent().unwrap();
    let path = format!("{}:{}", bin.display(), std::env::var("PATH").unwrap_or_default());
    for command in commands {
        let out = Command::new("sh")
            .args(["-c", &command])
            .env("PATH", &path)
            .current_dir(dir.path())
            .output()
            .unwrap();
        // 1 is a clear negative answer, which a README may well show.
        let code = out.status.code();
        assert!(
            code == Some(0) || code == Some(1),
            "{command}\nstdout: {}\nstderr: {}",
            text(&out.stdout),
            text(&out.stderr)
        );
    }
}

fn copy(from: &Path, to: &Path) {
    fs::create_dir_all(to).unwrap();
    for entry in fs::read_dir(from).unwrap().flatten() {
        let target = to.join(entry.file_name());
        if entry.path().is_dir() {
            copy(&entry.path(), &target);
        } else {
            fs::copy(entry.path(), target).unwrap();
        }
    }
}

#[test]
fn help_has_pages_and_names_the_nearest() {
    let dir = tempfile::tempdir().unwrap();
    let out = good(&["help", "conventions"], dir.path());
    for word in ["0..3,7..9", "nats", "NO_COLOR", "Exit 1"] {
        assert!(text(&out.stdout).contains(word), "{word}");
    }
    good(&["help", "study-file"], dir.path());
    let out = good(&["help", "study"], dir.path());
    assert!(text(&out.stdout).contains("Examples"), "{}", text(&out.stdout));
    let out = lierne(&["help", "convention"], dir.path());
    assert_eq!(out.status.code(), Some(2));
    assert!(text(&out.stderr).contains("conventions"), "{}", text(&out.stderr));
}

#[test]
fn completions_and_man_pages_cover_every_command() {
    let dir = tempfile::tempdir().unwrap();
    good(&["manners", "--out", "m"], dir.path());
    let bash = fs::read_to_string(dir.path().join("m/completions/lierne.bash")).unwrap();
    for command in
        ["study", "block", "grow", "show", "draw", "entropy", "order", "contract", "code"]
    {
        assert!(bash.contains(command), "{command}");
        assert!(dir.path().join(format!("m/man/lierne-{command}.1")).exists(), "{command}");
    }
}

#[test]
fn a_closed_pipe_is_quiet() {
    let dir = tempfile::tempdir().unwrap();
    let mut child = Command::new(env!("CARGO_BIN_EXE_lierne"))
        .args(["help", "conventions"])
        .current_dir(dir.path())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let out = child.wait_with_output().unwrap();
    assert!(out.stderr.is_empty(), "{}", text(&out.stderr));
    assert_ne!(out.status.code(), Some(2));
    assert_ne!(out.status.code(), Some(101));
}
