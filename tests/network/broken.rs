//! Broken and hostile files: one sentence each, exit 2, at once, nothing written.

use lierne::network::{Limits, load};
use std::fs;
use std::path::Path;
use std::time::{Duration, Instant};

const TENSOR: &str = "[[tensor]]\nlegs = [\"a\", \"b\"]\nblock = \"bell\"\n";

/// Text of a TOML file, and what the sentence on it must hold.
fn toml_cases() -> Vec<(String, &'static str)> {
    let head = "lierne = 1\ndimension = 2\nboundary = [\"a\", \"b\"]\n";
    let with = |text: &str| format!("{head}{text}");
    let tiling = |text: &str| format!("lierne = 1\ndimension = 3\n[tiling]\n{text}");
    let square = "polygon = 4\naround = 5\nrings = 1\n";
    vec![
        (String::new(), "lacks the key \"lierne\""),
        ("lierne = 1\n".into(), "neither a [[tensor]] nor a recipe"),
        (format!("lierne = 2\n{TENSOR}"), "format version 2; this program reads version 1"),
        (format!("lierne = \"1\"\n{TENSOR}"), "format version \"1\""),
        ("lierne = 1\nlierne = 1\n".into(), "line 2"),
        ("lierne = 1\ndimensoin = 3\n".into(), "unknown key \"dimensoin\" in the file; the nearest known key is \"dimension\""),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\nblok = \"bell\"\n"), "unknown key \"blok\" in tensor 0 (counted from 0); the nearest known key is \"block\""),
        (with("[[tensor]]\nblock = \"bell\"\n"), "lacks the key \"legs\""),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\n"), "exactly one of block, array and values; it has none"),
        (with("[[tensor]]\nname = \"t\"\nlegs = [\"a\", \"b\"]\nblock = \"bell\"\nvalues = [1]\n"), "tensor \"t\" needs exactly one of block, array and values; it has block and values"),
        (with("[[tensor]]\nlegs = [\"a\", \"c\"]\nblock = \"bell\"\n"), "boundary lists label \"b\", which no tensor holds"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\", \"c\"]\nblock = \"copy\"\n"), "label \"c\" stands on tensor \"t0\" only; list it in boundary, bulk or summed"),
        (with(&format!("bulk = [\"a\"]\n{TENSOR}")), "\"a\" is listed twice (boundary and bulk)"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\nblock = \"nonesuch\"\n"), "nonesuch"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\nblock = 3\n"), "must be a name, or a table"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\nvalues = [1, 0, 0]\n"), "has 3 values; its legs ask for 4"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\nvalues = [1, 0, 0, nan]\n"), "value 3 of tensor \"t0\" is not a finite number"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\nvalues = [1, [0, inf], 0, 1]\n"), "value 1 of tensor"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\nvalues = [1, [0, 1, 2], 0, 1]\n"), "a complex number is [re, im]"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\nvalues = [0, 0, 0, 0]\n"), "t0"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\narray = \"../secret.npy\"\n"), "\"../secret.npy\" of tensor \"t0\" leaves the folder"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\narray = \"/etc/passwd\"\n"), "leaves the folder"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\narray = \"x/../../y.npy\"\n"), "leaves the folder"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\narray = \"missing.npy\"\n"), "missing.npy"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\narray = \"short.npy\"\n"), "short.npy"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\narray = \"huge.npy\"\n"), "huge.npy"),
        (with("[[tensor]]\nlegs = [\"a\", \"b\"]\narray = \"text.npy\"\n"), "text.npy"),
        (format!("lierne = 1\nboundary = [\"a\", \"b\"]\n{TENSOR}"), "label \"a\" on tensor \"t0\" has no dimension"),
        (with(&format!("[legs]\nz = 3\n{TENSOR}")), "[legs] lists label \"z\", which no tensor holds"),
        (with(&format!("[legs]\na = 0\n{TENSOR}")), "is 0; between 1 and 2147483647"),
        (with(&format!("[legs]\na = 3\n{TENSOR}")), "t0"),
        (format!("lierne = 1\ndimension = -1\nboundary = [\"a\", \"b\"]\n{TENSOR}"), "dimension in the file is -1"),
        (format!("lierne = 1\ndimension = 2.5\nboundary = [\"a\", \"b\"]\n{TENSOR}"), "is 2.5"),
        ("lierne = 1\ndimension = 2147483647\nboundary = [\"a\", \"b\", \"c\"]\n[[tensor]]\nlegs = [\"a\", \"b\", \"c\"]\nblock = \"copy\"\n".into(), "more than 2^63"),
        ("lierne = 1\ndimension = 2\nboundary = [\"0\"]\n".into(), "\"0\" of boundary is empty, a bare number"),
        ("lierne = 1\ndimension = 2\nboundary = [\"a,b\"]\n".into(), "\"a,b\" of boundary"),
        ("lierne = 1\ndimension = 2\nboundary = [\"\"]\n".into(), "\"\" of boundary"),
        ("lierne = 1\ndimension = 2\nboundary = [3]\n".into(), "a label in quotes"),
        ("lierne = 1\ndimension = 2\nboundary = \"ab\"\n".into(), "a list of labels"),
        (with("[[tensor]]\nname = \"t\"\nlegs = [\"a\", \"x\"]\nblock = \"bell\"\n[[tensor]]\nname = \"t\"\nlegs = [\"x\", \"b\"]\nblock = \"bell\"\n"), "two tensors are named \"t\""),
        (with(&format!("[layout]\nrings = [1, 2]\n{TENSOR}")), "rings of 3 tensors in all does not fit the 1 tensors"),
        (with(&format!("[layout]\ntiling = [4]\n{TENSOR}")), "tiling"),
        (with(&format!("[layout]\ncycles = [7]\n{TENSOR}")), "cycles of 7 legs in all does not fit the 2 boundary legs"),
        (with(&format!("[layout]\nring = [1]\n{TENSOR}")), "the nearest known key is \"rings\""),
        ("lierne = 1\n[[tensor]\n".into(), "line 2"),
        ("lierne = 1\nname = \"never closed\n".into(), "line 2"),
        (format!("lierne = 1\nname = {}1{}\n", "[".repeat(5000), "]".repeat(5000)), "line 2"),
        (tiling(square) + "[tree]\narity = 2\ndepth = 2\n", "has both [tiling] and [tree]"),
        (format!("lierne = 1\ndimension = 3\nboundary = [\"b0\"]\n[tiling]\n{square}"), "has both [tiling] and boundary"),
        (format!("lierne = 1\n[tiling]\n{square}"), "lacks the key \"dimension\""),
        (tiling("polygon = 4\naround = 5\n"), "[tiling] lacks the key \"rings\""),
        (tiling("polygon = 2\naround = 5\nrings = 1\n"), "polygon in [tiling] is 2; between 3 and"),
        (tiling("polygon = 4\naround = 5\nring = 1\n"), "nearest known key is \"rings\""),
        (tiling("polygon = 4\naround = 5\nrings = 1000000000\n"), "more than 4000000 tiles"),
        (tiling("polygon = 4\naround = 4\nrings = 4294967295\n"), "more than 4000000 tiles"),
        (tiling("polygon = 3\naround = 7\nrings = 4294967295\ngrowth = \"edge\"\n"), "more than 4000000 tiles"),
        (tiling("polygon = 10000\naround = 10000\nrings = 1\n"), "more than 4000000 tiles"),
        (tiling("polygon = 10000\naround = 100\nrings = 1\n"), "more than 64000000 sides"),
        (tiling("polygon = 10000\naround = 10000\nrings = 0\ncentre = \"vertex\"\n"), "more than 64000000 sides"),
        (tiling("polygon = 4\naround = 3\nrings = 9\n"), "closes into a sphere of 6 tiles"),
        (tiling(&format!("{square}growth = \"corner\"\n")), "growth in [tiling] is \"corner\"; known are vertex, edge"),
        (tiling(&format!("{square}bulk = \"some\"\n")), "bulk in [tiling] is \"some\"; write none"),
        (tiling(&format!("{square}bulk = \"rings:2\"\n")), "names ring 2, but there are 2 (0 to 1)"),
        (tiling(&format!("{square}remove = \"all\"\n")), "needs a tile that stays"),
        (tiling(&format!("{square}block = \"five-leg\"\n")), "five-leg"),
        (format!("lierne = 1\ndimension = 2\n[tiling]\n{square}"), "no perfect tensor with 4 legs of dimension 2 exists"),
        (tiling(square) + "[[tiling.tile]]\nblock = \"copy\"\n", "a tile of [tiling] lacks the key \"tiles\""),
        (format!("lierne = 1\ndimension = 3\n[wormhole.one]\n{square}"), "[wormhole.one] lacks the key \"remove\""),
        ("lierne = 1\ndimension = 3\n[lattice]\nkind = \"square\"\nsize = [100000, 100000]\n".into(), "the network has 10000000000 tensors"),
        ("lierne = 1\ndimension = 3\n[lattice]\nkind = \"cubic\"\nsize = [4294967295, 4294967295, 4294967295]\n".into(), "tensors; at most"),
        ("lierne = 1\ndimension = 3\n[lattice]\nkind = \"square\"\nsize = [3]\n".into(), "does not fit a lattice of 2 directions"),
        ("lierne = 1\ndimension = 3\n[lattice]\nkind = \"round\"\nsize = [3, 3]\n".into(), "known are square, cubic, hexagonal, triangular"),
        ("lierne = 1\ndimension = 3\n[tree]\narity = 10000\ndepth = 4294967295\n".into(), "tensors; at most"),
        ("lierne = 1\ndimension = 3\n[layered]\nlayers = 64\n".into(), "tensors; at most"),
        ("lierne = 1\ndimension = 3\n[chain]\nlength = 4294967295\n".into(), "tensors; at most"),
        ("lierne = 1\ndimension = 3\n[regular]\nvertices = 5\ndegree = 3\n".into(), "degree 3 does not fit 5 vertices"),
        ("lierne = 1\ndimension = 3\n[regular]\nvertices = 4000000\ndegree = 10000\n".into(), "legs; at most"),
        ("lierne = 1\ndimension = 3\n[geometric]\nvertices = 9\nmean_degree = -1\n".into(), "positive numbers"),
        ("lierne = 1\ndimension = 3\n[complete]\nvertices = 4294967295\n".into(), "legs; at most"),
        ("lierne = 1\ndimension = 3\ntiling = 4\n".into(), "tiling must be a table"),
        // Studies stand for their network; they can name a network file, but no chain of them.
        ("study = 1\n".into(), "the study lacks the key \"network\""),
        ("study = 1\n[network]\nfile = \"net.toml\"\n".into(), "unknown key"),
        ("study = 1\n[network]\nfile = \"missing.toml\"\n".into(), "missing.toml"),
        ("study = 1\n[[network]]\n[[network]]\n".into(), "a list of 2"),
    ]
}

/// The same for JSON.
fn json_cases() -> Vec<(Vec<u8>, &'static str)> {
    let mut huge = b"{\"lierne\": 1, \"dimension\": 2, \"tensor\": [{\"legs\": [".to_vec();
    for k in 0..20_000 {
        huge.extend(format!("\"l{k}\",").bytes());
    }
    let utf16: Vec<u8> = "{\"lierne\": 1}".encode_utf16().flat_map(u16::to_le_bytes).collect();
    vec![
        (b"".to_vec(), "ends in the middle"),
        (b"{\"lierne\": 1".to_vec(), "ends in the middle"),
        (b"[1]".to_vec(), "a table that describes a network"),
        (
            b"{\"lierne\": 1, \"name\": \"a\", \"name\": \"b\"}".to_vec(),
            "key \"name\" stands twice in the file",
        ),
        (
            b"{\"lierne\": 1, \"tensor\": [{\"legs\": [], \"legs\": []}]}".to_vec(),
            "key \"legs\" stands twice in tensor 0",
        ),
        (
            b"{\"lierne\": 1,\n \"tree\": {\"arity\": 2, \"arity\": 3}}".to_vec(),
            "line 2: key \"arity\" stands twice in [tree]",
        ),
        (b"{\"lierne\": 1, \"dimension\": 1e400}".to_vec(), "number out of range"),
        (
            b"{\"lierne\": 1, \"dimension\": 99999999999999999999}".to_vec(),
            "dimension in the file is",
        ),
        (b"{\"lierne\": 1} x".to_vec(), "trailing characters"),
        (b"{\"lierne\": 1, \"name\": \"\xff\xfe\"}".to_vec(), "line 1"),
        (utf16, "line 1"),
        (b"\xef\xbb\xbf{\"lierne\": 1}".to_vec(), "line 1"),
        (
            [b"{\"lierne\": 1, \"tree\": ".to_vec(), b"[".repeat(100_000)].concat(),
            "recursion limit",
        ),
        ([b"{\"lierne\": 1, \"name\": ".to_vec(), b"{\"a\":".repeat(100_000)].concat(), "line 1"),
        (huge, "legs on one tensor; at most 10000 are taken"),
        (b"{\"lierne\": 1, \"legs\": {\"a\": 2.0}, \"tensor\": []}".to_vec(), "is 2.0"),
        (b"{\"lierne\": 1, \"legs\": [1000000000]}".to_vec(), "a table of labels and dimensions"),
        (b"{\"lierne\": 1, \"tensor\": {}}".to_vec(), "a list of tensors"),
        (b"{\"lierne\": 1, \"tensor\": [[]]}".to_vec(), "a tensor, which is a table"),
    ]
}

fn folder() -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    let put = |name: &str, bytes: &[u8]| fs::write(folder.path().join(name), bytes).unwrap();
    let npy = |shape: &str, body: &[u8]| {
        let mut head = format!("{{'descr': '<f8', 'fortran_order': False, 'shape': ({shape}), }}");
        while (10 + head.len() + 1) % 64 != 0 {
            head.push(' ');
        }
        head.push('\n');
        let mut bytes = b"\x93NUMPY\x01\x00".to_vec();
        bytes.extend((head.len() as u16).to_le_bytes());
        bytes.extend(head.bytes());
        bytes.extend(body);
        bytes
    };
    put("short.npy", &npy("2, 2", &[0; 24]));
    put("huge.npy", &npy("1000000000, 1000000000", &[0; 24]));
    put("text.npy", b"this is no array");
    folder
}

/// Every sentence names the file, stands on one line, holds what it must, and comes within a
/// second (ten where the machine is busy: what matters is that nothing large is built).
#[test]
fn every_broken_file_gets_its_sentence() {
    let folder = folder();
    let limits = Limits::default();
    let mut faults: Vec<String> = Vec::new();
    let mut check = |path: &Path, shown: &str, part: &str| {
        let began = Instant::now();
        let told = match load(path, &limits) {
            Ok(_) => "nothing: it is taken".to_owned(),
            Err(error) => error.to_string(),
        };
        let name = path.file_name().unwrap().to_str().unwrap();
        let one_line = !told.contains('\n') && told.contains(name) && told.len() < 700;
        let quick = began.elapsed() < Duration::from_secs(10);
        if !(told.contains(part) && one_line && quick) {
            let took = began.elapsed();
            faults.push(format!("{shown}\ngets: {told}\nwanted: {part}\nafter {took:?}"));
        }
    };
    let shown = |bytes: &[u8]| String::from_utf8_lossy(&bytes[..bytes.len().min(300)]).into_owned();
    for (text, part) in toml_cases() {
        let path = folder.path().join("net.toml");
        fs::write(&path, &text).unwrap();
        let part = if part == "missing.toml" {
            // The file that a study names is told by its own name.
            let told = load(&path, &limits).map(|_| ()).unwrap_err().to_string();
            assert!(told.contains(part), "{told}");
            continue;
        } else {
            part
        };
        check(&path, &shown(text.as_bytes()), part);
    }
    for (bytes, part) in json_cases() {
        let path = folder.path().join("net.json");
        fs::write(&path, &bytes).unwrap();
        check(&path, &shown(&bytes), part);
    }
    let latin = folder.path().join("latin.toml");
    fs::write(&latin, b"lierne = 1\nname = \"caf\xe9\"\n").unwrap();
    check(&latin, "Latin-1", "the text is not UTF-8 (byte 22)");
    check(&folder.path().join("none.toml"), "a missing file", "cannot be read");
    check(&folder.path().join("net.yaml"), "another ending", "ends in .toml or .json");
    fs::create_dir(folder.path().join("dir.json")).unwrap();
    check(&folder.path().join("dir.json"), "a folder", "cannot be read");
    assert!(faults.is_empty(), "{} faults\n\n{}", faults.len(), faults.join("\n\n"));
    let long = folder.path().join("long.json");
    fs::write(&long, vec![b' '; 4096]).unwrap();
    let small = Limits { json_bytes: 4000, ..limits };
    let told = load(&long, &small).map(|_| ()).unwrap_err().to_string();
    assert!(told.contains("the file has 4096 bytes; at most 4000 are read"), "{told}");
}

#[cfg(unix)]
#[test]
fn a_link_does_not_lead_out_of_the_folder() {
    let outside = tempfile::tempdir().unwrap();
    let array = ndarray::arr2(&[[1.0, 0.0], [0.0, 1.0]]);
    ndarray_npy::write_npy(outside.path().join("a.npy"), &array).unwrap();
    let folder = tempfile::tempdir().unwrap();
    std::os::unix::fs::symlink(outside.path().join("a.npy"), folder.path().join("a.npy")).unwrap();
    let path = folder.path().join("net.toml");
    let text = "lierne = 1\nboundary = [\"a\", \"b\"]\n[[tensor]]\nlegs = [\"a\", \"b\"]\narray = \"a.npy\"\n";
    fs::write(&path, text).unwrap();
    let told = load(&path, &Limits::default()).map(|_| ()).unwrap_err().to_string();
    assert!(told.contains("leaves the folder"), "{told}");
}

#[cfg(feature = "cli")]
mod program {
    use super::*;
    use std::process::{Command, Output};

    fn run(args: &[&str], folder: &Path) -> Output {
        let mut command = Command::new(env!("CARGO_BIN_EXE_lierne"));
        command.args(args).current_dir(folder).output().unwrap()
    }
    fn told(args: &[&str], out: &Output) -> String {
        let (o, e) = (String::from_utf8_lossy(&out.stdout), String::from_utf8_lossy(&out.stderr));
        format!(
            "lierne {}\nstatus {:?}\nstdout: {o}\nstderr: {e}",
            args.join(" "),
            out.status.code()
        )
    }

    #[test]
    fn broken_input_ends_with_status_2_and_writes_nothing() {
        let folder = folder();
        let file = "lierne = 1\n[[tensor]]\nlegs = [\"a\"]\nblock = \"plus\"\n";
        fs::write(folder.path().join("net.toml"), file).unwrap();
        fs::write(folder.path().join("out.toml"), "kept").unwrap();
        let before = fs::read_dir(folder.path()).unwrap().count();
        let cases: [(&[&str], &str); 9] = [
            (&["show", "net.toml"], "net.toml: label \"a\" on tensor \"t0\" has no dimension"),
            (&["show", "none.json"], "none.json: the file cannot be read"),
            (
                &[
                    "grow",
                    "tiling",
                    "--polygon",
                    "4",
                    "--around",
                    "5",
                    "--rings",
                    "1",
                    "--dimension",
                    "2",
                    "--out",
                    "out.toml",
                ],
                "no perfect tensor with 4 legs of dimension 2",
            ),
            (
                &[
                    "grow",
                    "tiling",
                    "--polygon",
                    "4",
                    "--around",
                    "5",
                    "--rings",
                    "50",
                    "--out",
                    "out.toml",
                ],
                "more than 4000000 tiles",
            ),
            (
                &[
                    "grow",
                    "tiling",
                    "--polygon",
                    "4",
                    "--around",
                    "5",
                    "--rings",
                    "1",
                    "--out",
                    "out.yaml",
                ],
                "ends in .toml or .json",
            ),
            (
                &[
                    "grow",
                    "tiling",
                    "--polygon",
                    "4",
                    "--around",
                    "5",
                    "--rings",
                    "1",
                    "--bulk",
                    "x",
                    "--out",
                    "out.toml",
                ],
                "--bulk \"x\"",
            ),
            (
                &["grow", "einsum", "ab,bc->ad", "--out", "out.toml"],
                "\"d\" of the result stands on no operand",
            ),
            (
                &["grow", "einsum", "ab,bc->ac", "--size", "a", "--out", "out.toml"],
                "--size \"a\": write label=size",
            ),
            (&["grow", "graph", "text.npy", "--out", "out.toml"], "text.npy, line 1"),
        ];
        for (args, part) in cases {
            let out = run(args, folder.path());
            let stderr = String::from_utf8_lossy(&out.stderr);
            assert_eq!(out.status.code(), Some(2), "{}", told(args, &out));
            assert!(
                stderr.contains(part) && stderr.trim().lines().count() == 1,
                "{}",
                told(args, &out)
            );
            assert!(out.stdout.is_empty(), "{}", told(args, &out));
        }
        assert_eq!(fs::read_to_string(folder.path().join("out.toml")).unwrap(), "kept");
        assert_eq!(fs::read_dir(folder.path()).unwrap().count(), before);
    }

    #[test]
    fn grown_networks_are_shown_with_the_promised_keys() {
        let folder = tempfile::tempdir().unwrap();
        let grow = [
            "grow",
            "tiling",
            "--polygon",
            "4",
            "--around",
            "5",
            "--rings",
            "2",
            "--out",
            "net.json",
            "--json",
        ];
        let out = run(&grow, folder.path());
        assert_eq!(out.status.code(), Some(0), "{}", told(&grow, &out));
        let args = ["show", "net.json", "--json"];
        let shown = run(&args, folder.path());
        let value: serde_json::Value = serde_json::from_slice(&shown.stdout)
            .unwrap_or_else(|e| panic!("{e}: {}", told(&args, &shown)));
        assert_eq!(value["tensors"], 61);
        assert_eq!(value["boundary"], 76);
        assert_eq!(value["bulk"], 0);
        assert_eq!(value["rings"], serde_json::json!([1, 12, 48]));
        assert_eq!(
            (value["planar"].as_bool(), value["planar_in_a_disk"].as_bool()),
            (Some(true), Some(true))
        );
        assert!((value["tiling"]["edge"].as_f64().unwrap() - 1.253739326).abs() < 1e-9);
        // A recipe makes the same network as its explicit file.
        let recipe = [
            "grow",
            "tiling",
            "--polygon",
            "4",
            "--around",
            "5",
            "--rings",
            "2",
            "--recipe",
            "--name",
            "net",
            "--out",
            "recipe.toml",
        ];
        assert_eq!(run(&recipe, folder.path()).status.code(), Some(0));
        let other = run(&["show", "recipe.toml", "--json"], folder.path());
        assert_eq!(shown.stdout, other.stdout);
        // Without --out the network itself goes to stdout.
        let printed = run(&["grow", "chain", "--length", "3", "--json"], folder.path());
        fs::write(folder.path().join("printed.json"), &printed.stdout).unwrap();
        assert_eq!(run(&["show", "printed.json"], folder.path()).status.code(), Some(0));
    }
}
