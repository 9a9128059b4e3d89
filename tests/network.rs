//! Networks: recipes against published counts, files there and back, what a survey says
//! against NetworkX, and every broken file in one sentence.

#[path = "network/broken.rs"]
mod broken;

use lierne::block;
use lierne::network::graph::{self, is_planar};
use lierne::network::import::{GraphFormat, GraphReading, einsum, read_graph};
use lierne::network::{
    FILE_KEYS, Format, Limits, Network, NetworkBuilder, Overrides, Recipe, Selection, Survey,
    TensorId, load, load_with, save, tile_frames, to_bytes,
};
use lierne::tensor::Label;
use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::Arc;

fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

/// The network of a file with this text.
fn read(text: &str) -> Network {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("net.toml");
    fs::write(&path, text).unwrap();
    load(&path, &Limits::default()).unwrap_or_else(|e| panic!("{e}\n{text}"))
}

fn tiling(table: &str) -> Network {
    read(&format!("lierne = 1\ndimension = 2\n[tiling]\n{table}"))
}

// ---- recipes against published counts --------------------------------------------------

/// Boundary and bulk legs of holographic codes on {5,4}: JHEP 06 (2015) 149 and the counts
/// that follow from its rules (computed independently).
#[test]
fn pentagon_codes_have_the_known_numbers_of_legs() {
    let code = |rest: &str, rings: u32| {
        let n = tiling(&format!("around = 4\nrings = {rings}\n{rest}"));
        (n.boundary().len(), n.bulk().len())
    };
    let by_edge = "polygon = 5\ngrowth = \"edge\"\nbulk = \"all\"";
    let edge: Vec<_> = (0..6).map(|r| code(by_edge, r)).collect();
    assert_eq!(edge, [(5, 1), (20, 6), (55, 21), (145, 61), (380, 166), (995, 441)]);
    let by_vertex = "polygon = 5\nbulk = \"all\"";
    let vertex: Vec<_> = (0..5).map(|r| code(by_vertex, r)).collect();
    assert_eq!(vertex, [(5, 1), (25, 11), (95, 51), (355, 201), (1325, 761)]);
    let mixed = |r: u32| {
        let even: Vec<String> = (0..=r).step_by(2).map(|k| k.to_string()).collect();
        let bulk =
            format!("polygon = [5, 6]\ngrowth = \"edge\"\nbulk = \"rings:{}\"", even.join(","));
        code(&bulk, r)
    };
    let alternating: Vec<_> = (1..7).map(mixed).collect();
    let known = [(25, 1), (75, 21), (255, 21), (745, 221), (2525, 221), (7375, 2201)];
    assert_eq!(alternating, known);
    let single = "polygon = [5, 6]\nthen = \"last\"\ngrowth = \"edge\"\nbulk = \"centre\"";
    let single: Vec<_> = (0..6).map(|r| code(single, r)).collect();
    assert_eq!(single, [(5, 1), (25, 1), (95, 1), (355, 1), (1325, 1), (4945, 1)]);
}

#[test]
fn bulk_turn_and_blocks_follow_rings_and_exceptions() {
    let n = tiling(
        "polygon = 5\naround = 4\nrings = 1\nbulk = \"rings:1\"\nbulk_dimension = 4\n\
         blocks = [\"random-tensor\", {family = \"random-tensor\", seed = 5}]\nturn = [0, 2]\n\
         [[tiling.tile]]\ntiles = \"tiles:0,3..5\"\nbulk = false\nturn = 1\n\
         [[tiling.tile]]\ntiles = \"tiles:4\"\nbulk = true\nbulk_state = \"plus\"",
    );
    // 11 tiles and the state on tile 4; tiles 0 and 3 have no bulk leg.
    assert_eq!((n.tensors(), n.bulk().len()), (12, 8));
    assert!(n.bulk().iter().all(|&l| n.dim(l) == 4));
    let legs = |t: u32| n.legs(TensorId::new(t)).len();
    assert_eq!((legs(0), legs(3), legs(4), legs(5), legs(11)), (5, 5, 6, 6, 1));
    assert_eq!(n.block(TensorId::new(11)).name(), "plus");
    assert_eq!(n.legs(TensorId::new(11)), &n.legs(TensorId::new(4))[5..]);
    // Turned by one, leg 4 of the middle tile lies on side 0; the plain patch tells which
    // neighbour that is.
    let plain = tiling("polygon = 5\naround = 4\nrings = 1\nblock = \"random-tensor\"");
    let neighbour = |net: &Network, t: u32, leg: usize| {
        let l = net.legs(TensorId::new(t))[leg];
        net.holders(l).iter().map(|h| h.index()).find(|&h| h != t as usize)
    };
    for side in 0..5 {
        assert_eq!(neighbour(&n, 0, (side + 4) % 5), neighbour(&plain, 0, side));
        assert_eq!(neighbour(&n, 7, (side + 3) % 5), neighbour(&plain, 7, side));
    }
    assert_ne!(n.block_number(TensorId::new(2)), n.block_number(TensorId::new(0)));
}

#[test]
fn holes_have_their_own_rim_and_a_seam_joins_two_of_them() {
    let hole = "polygon = 5\naround = 4\nrings = 2\nblock = \"random-tensor\"\nremove = ";
    let n = tiling(&format!("{hole}\"centre\""));
    assert_eq!((n.tensors(), n.boundary().len()), (50, 100));
    assert_eq!(n.layout().unwrap().cycles, [95, 5]);
    // The rim of a hole is a cycle: neighbouring sites belong to tiles that touch.
    let rim: Vec<TensorId> = n.boundary()[95..].iter().map(|&l| n.holders(l)[0]).collect();
    for k in 0..5 {
        let (a, b) = (rim[k], rim[(k + 1) % 5]);
        let next_tile = |t: TensorId| {
            n.legs(t)
                .iter()
                .flat_map(|&l| n.holders(l).to_vec())
                .any(|h| n.legs(h).iter().any(|&l| n.holders(l).contains(&b)))
        };
        assert!(next_tile(a), "sites {k} and {} of the rim are far apart", k + 1);
    }
    let n = tiling(&format!("{hole}\"rings:0,1\""));
    assert_eq!((n.tensors(), n.layout().unwrap().ring_sizes()), (40, vec![0, 0, 40]));
    assert_eq!(n.layout().unwrap().cycles.iter().sum::<u32>() as usize, n.boundary().len());

    let twisted = |twist: u32| {
        read(&format!(
            "lierne = 1\ndimension = 2\n[wormhole]\ntwist = {twist}\n[wormhole.one]\npolygon = 5\n\
             around = 4\nrings = 1\nblock = \"five-leg\"\nremove = \"centre\""
        ))
    };
    for twist in 0..5 {
        let n = twisted(twist);
        let s = Survey::of(&n);
        assert_eq!((s.tensors, s.bonds, s.boundary, s.components), (20, 25, 50, 1));
        assert_eq!(s.cycles_of_the_boundary, Some(vec![25, 25]));
        // An annulus: planar, but its two boundary cycles do not lie on one rim.
        assert_eq!((s.planar, s.planar_in_a_disk), (Some(true), Some(false)));
        let sheets = |t: TensorId| n.layout().unwrap().sheet_of(t);
        let seam = (0..n.labels() as u32).map(Label::new).filter(|&l| {
            let h = n.holders(l);
            h.len() == 2 && sheets(h[0]) != sheets(h[1])
        });
        assert_eq!(seam.count(), 5);
    }
}

#[test]
fn families_have_the_counts_that_paper_gives() {
    let count = |text: &str| {
        let s = Survey::of(&read(&format!("lierne = 1\ndimension = 3\n{text}")));
        (s.tensors, s.bonds, s.boundary, s.bulk, s.components, s.cycles)
    };
    let random = "block = \"random-tensor\"";
    // n·m sites; n(m−1) + m(n−1) bonds; 2(n+m) legs at the rim.
    assert_eq!(count("[lattice]\nkind = \"square\"\nsize = [3, 4]"), (12, 17, 14, 0, 1, 6));
    let torus = format!("[lattice]\nkind = \"square\"\nsize = [4, 5]\nperiodic = true\n{random}");
    assert_eq!(count(&torus), (20, 40, 0, 0, 1, 21));
    let cylinder =
        format!("[lattice]\nkind = \"square\"\nsize = [4, 5]\nperiodic = [true, false]\n{random}");
    assert_eq!(count(&cylinder), (20, 36, 8, 0, 1, 17));
    let cubic =
        format!("[lattice]\nkind = \"cubic\"\nsize = [2, 3, 4]\nopen = \"sites\"\n{random}");
    assert_eq!(count(&cubic), (24, 46, 24, 0, 1, 23));
    let honey =
        format!("[lattice]\nkind = \"hexagonal\"\nsize = [3, 3]\nperiodic = true\n{random}");
    assert_eq!(count(&honey), (18, 27, 0, 0, 1, 10));
    let triangles =
        format!("[lattice]\nkind = \"triangular\"\nsize = [4, 4]\nperiodic = true\n{random}");
    assert_eq!(count(&triangles), (16, 48, 0, 0, 1, 33));
    // One site round itself: both legs of a direction are one label.
    let loops = format!("[lattice]\nkind = \"square\"\nsize = [1, 1]\nperiodic = true\n{random}");
    assert_eq!(count(&loops), (1, 2, 0, 0, 1, 2));
    assert_eq!(count("[tree]\narity = 2\ndepth = 3\nroot = \"bulk\""), (15, 14, 16, 1, 1, 0));
    assert_eq!(count(&format!("[tree]\narity = 5\ndepth = 2\n{random}")), (31, 30, 125, 0, 1, 0));
    assert_eq!(count("[chain]\nlength = 7"), (7, 6, 7, 0, 1, 0));
    assert_eq!(count("[chain]\nlength = 7\nperiodic = true"), (7, 7, 7, 0, 1, 1));
    assert_eq!(count("[complete]\nvertices = 7\nopen = true"), (7, 21, 7, 0, 1, 15));
    assert_eq!(count("[layered]\nlayers = 3"), (29, 42, 16, 0, 1, 14));
    assert_eq!(
        count("[layered]\nkind = \"ternary\"\nlayers = 2\nclose = \"bulk\""),
        (16, 22, 18, 2, 1, 7)
    );
    let (tensors, bonds, ..) = count("[regular]\nvertices = 60\ndegree = 3\nseed = 4");
    assert_eq!((tensors, bonds), (60, 90));
}

/// In a layered network boundary site i belongs to the tensor that stands over place i.
#[test]
fn layered_networks_number_their_boundary_from_left_to_right() {
    let n = read("lierne = 1\ndimension = 3\n[layered]\nlayers = 2\ntop = 2");
    let holder = |site: usize| n.holders(n.boundary()[site])[0];
    // Two-site tensors span sites 1-2, 3-4, 5-6 and 7-0.
    for (a, b) in [(1, 2), (3, 4), (5, 6), (7, 0)] {
        assert_eq!(holder(a), holder(b));
        let legs = n.legs(holder(a));
        assert_eq!((legs[0], legs[1]), (n.boundary()[a], n.boundary()[b]));
    }
}

#[test]
fn random_graphs_repeat_and_are_what_they_say() {
    for (n, d) in [(10, 3), (40, 4), (17, 6), (12, 9), (30, 29), (5, 0)] {
        for seed in 0..5 {
            let edges = graph::regular(n, d, seed).unwrap();
            assert_eq!(edges, graph::regular(n, d, seed).unwrap());
            let mut degree = vec![0; n];
            for &(a, b) in &edges {
                assert!(a < b);
                degree[a as usize] += 1;
                degree[b as usize] += 1;
            }
            assert!(degree.iter().all(|&k| k == d), "{n} vertices of degree {d}: {degree:?}");
            assert!(edges.windows(2).all(|w| w[0] < w[1]), "an edge stands twice");
        }
    }
    assert_ne!(graph::regular(40, 3, 0), graph::regular(40, 3, 1));
    assert!(graph::regular(5, 5, 0).is_none() && graph::regular(5, 3, 0).is_none());
    // Geometric graphs against all pairs.
    for periodic in [false, true] {
        for (n, mean) in [(1, 3.0), (2, 100.0), (80, 5.0), (300, 2.5), (60, 59.0)] {
            let (points, edges) = graph::geometric(n, mean, periodic, 7);
            let radius = (mean / (std::f64::consts::PI * n as f64)).sqrt();
            let gap = |a: f64, b: f64| {
                let d = (a - b).abs();
                if periodic { d.min(1.0 - d) } else { d }
            };
            let mut all = Vec::new();
            for a in 0..n {
                for b in a + 1..n {
                    let (p, q) = (points[a], points[b]);
                    if gap(p[0], q[0]).hypot(gap(p[1], q[1])) < radius {
                        all.push((a as u32, b as u32));
                    }
                }
            }
            assert_eq!(edges, all, "{n} points, periodic: {periodic}");
        }
    }
}

// ---- places --------------------------------------------------------------------------------

/// Frames found from bonds against frames found while the patch was grown.
#[test]
fn places_found_from_bonds_close_up() {
    for text in [
        "polygon = 4\naround = 5\nrings = 2\nturn = [0, 1, 3]",
        "polygon = 7\naround = 3\nrings = 3\ncentre = \"vertex\"",
        "polygon = 4\naround = 4\nrings = 3",
        "polygon = 5\naround = 4\nrings = 2\nremove = \"tiles:0,7\"",
    ] {
        let n = tiling(&format!("{text}\nblock = \"random-tensor\""));
        let (tiling, frames) = tile_frames(&n).unwrap();
        let corners: Vec<_> = frames
            .iter()
            .map(|f| lierne::tiling::geometry::tile_vertices(tiling, f.as_ref().unwrap()))
            .collect();
        let p = tiling.polygon() as usize;
        for l in (0..n.labels() as u32).map(Label::new) {
            let &[a, b] = n.holders(l) else { continue };
            let side = |t: TensorId| n.legs(t).iter().position(|&m| m == l).unwrap();
            let (i, j) = (side(a), side(b));
            let (u, v) = (corners[a.index()][i], corners[b.index()][(j + 1) % p]);
            let far = (u[0] - v[0]).hypot(u[1] - v[1]);
            assert!(far < 1e-8, "{text}: bond {} is torn by {far}", n.label_name(l));
        }
    }
}

// ---- surveys against NetworkX --------------------------------------------------------------

const GROWN: [(&str, &str); 12] = [
    ("squares.json", "[tiling]\npolygon = 4\naround = 5\nrings = 1"),
    ("heptagons.json", "[tiling]\npolygon = 7\naround = 3\nrings = 2"),
    ("wormhole.json", "[wormhole.one]\npolygon = 5\naround = 4\nrings = 1\nremove = \"centre\""),
    ("honeycomb.json", "[lattice]\nkind = \"hexagonal\"\nsize = [3, 4]"),
    ("torus.json", "[lattice]\nkind = \"square\"\nsize = [4, 5]\nperiodic = true"),
    ("cubes.json", "[lattice]\nkind = \"cubic\"\nsize = [3, 3, 2]\nopen = \"sites\""),
    ("triangles.json", "[lattice]\nkind = \"triangular\"\nsize = [4, 3]"),
    ("tree.json", "[tree]\narity = 3\ndepth = 3"),
    ("layers.json", "[layered]\nlayers = 3"),
    ("regular.json", "[regular]\nvertices = 30\ndegree = 3\nseed = 1"),
    ("dense.json", "[regular]\nvertices = 13\ndegree = 8\nseed = 2"),
    ("near.json", "[geometric]\nvertices = 70\nmean_degree = 4\nseed = 3\nopen = true"),
];

fn grown(recipe: &str) -> Network {
    // The last table takes the block: its numbers do not matter here.
    let cap = "turn = \"random-tensor\"\nmerge = \"random-tensor\"\ncap = \"random-tensor\"";
    let block = if recipe.starts_with("[layered]") { cap } else { "block = \"random-tensor\"" };
    read(&format!("lierne = 1\nname = \"grown\"\ndimension = 2\n{recipe}\n{block}"))
}

#[test]
#[ignore = "writes tests/data/grown anew, for tests/outside/networkx_graphs.py"]
fn write_the_grown_networks() {
    for (file, recipe) in GROWN {
        save(&grown(recipe), &root().join("tests/data/grown").join(file)).unwrap();
    }
}

/// tests/outside/networkx_graphs.py recorded NetworkX's verdict on these very files.
#[test]
fn surveys_agree_with_networkx() {
    let text = fs::read_to_string(root().join("tests/data/networkx_graphs.json")).unwrap();
    let data: serde_json::Value = serde_json::from_str(&text).unwrap();
    let cases = data["grown"].as_array().unwrap();
    assert_eq!(cases.len(), GROWN.len());
    for (file, recipe) in GROWN {
        let path = root().join("tests/data/grown").join(file);
        let n = grown(recipe);
        let bytes = to_bytes(&n, Format::Json).unwrap();
        assert!(bytes == fs::read(&path).unwrap(), "{file} is grown otherwise now");
        let s = Survey::of(&load(&path, &Limits::default()).unwrap());
        let known = cases.iter().find(|c| c["file"] == file).unwrap();
        assert_eq!(known["planar"].as_bool(), s.planar, "{file}");
        assert_eq!(known["planar_in_a_disk"].as_bool(), s.planar_in_a_disk, "{file}");
        assert_eq!(known["components"], s.components, "{file}");
        assert_eq!(known["cycles"], s.cycles, "{file}");
        assert_eq!(known["tree"], s.cycles == 0 && s.components == 1, "{file}");
        let degrees: Vec<usize> = s.degrees.keys().copied().collect();
        assert_eq!(known["degrees"], serde_json::json!(degrees), "{file}");
        assert_eq!(known["regular"], degrees.len() == 1, "{file}");
    }
}

#[test]
fn planarity_agrees_with_networkx() {
    let text = fs::read_to_string(root().join("tests/data/networkx_graphs.json")).unwrap();
    let data: serde_json::Value = serde_json::from_str(&text).unwrap();
    let mut verdicts = [0, 0];
    for case in data["planar"].as_array().unwrap() {
        let edges: Vec<(u32, u32)> = serde_json::from_value(case["edges"].clone()).unwrap();
        let n = case["vertices"].as_u64().unwrap() as usize;
        let planar = case["planar"].as_bool().unwrap();
        assert_eq!(is_planar(n, &edges), planar, "{}", case["name"]);
        verdicts[usize::from(planar)] += 1;
    }
    assert!(verdicts.iter().all(|&v| v > 100), "{verdicts:?} planar and not");
}

/// A long path of nested cycles must not overflow the stack.
#[test]
fn planarity_takes_deep_graphs() {
    let n = 300_000u32;
    let ladder: Vec<(u32, u32)> = (0..n - 2).flat_map(|v| [(v, v + 1), (v, v + 2)]).collect();
    assert!(is_planar(n as usize, &ladder));
    let mut crossed = ladder;
    crossed.extend([(0, n - 1), (1, n / 2), (2, n - 3)]);
    assert!(!is_planar(n as usize, &crossed));
}

/// The boundary of a grown patch lies on the rim of a disk in its order; any other order of
/// a network that has more than one way to be drawn does not.
#[test]
fn boundary_order_agrees_with_planarity() {
    for text in [
        "polygon = 4\naround = 5\nrings = 1",
        "polygon = 5\naround = 4\nrings = 2\ngrowth = \"edge\"",
        "polygon = 3\naround = 7\nrings = 2",
        "polygon = [5, 6]\naround = 4\nrings = 2\ngrowth = \"edge\"",
        "polygon = 6\naround = 3\nrings = 2\ncentre = \"vertex\"",
    ] {
        let n = tiling(&format!("{text}\nblock = \"random-tensor\""));
        assert_eq!(Survey::of(&n).planar_in_a_disk, Some(true), "{text}");
        // Two sites of different tensors, exchanged.
        let sites = n.boundary().len();
        let far = (1..sites).find(|&k| n.holders(n.boundary()[k]) != n.holders(n.boundary()[0]));
        let mut b = NetworkBuilder::new("exchanged");
        for l in (0..n.labels() as u32).map(Label::new) {
            b.label(n.label_name(l), n.dim(l));
        }
        for t in n.tensor_ids() {
            b.tensor(None, n.legs(t), n.block(t)).unwrap();
        }
        let mut order = n.boundary().to_vec();
        order.swap(0, far.unwrap() + sites / 3);
        b.boundary(order);
        let exchanged = Survey::of(&b.finish().unwrap());
        assert_eq!(exchanged.planar_in_a_disk, Some(false), "{text}, exchanged");
    }
}

// ---- files ---------------------------------------------------------------------------------

fn assert_same(a: &Network, b: &Network) {
    assert_eq!((a.name(), a.tensors(), a.labels()), (b.name(), b.tensors(), b.labels()));
    let names = |n: &Network, list: &[Label]| {
        list.iter().map(|&l| (n.label_name(l).to_owned(), n.dim(l))).collect::<Vec<_>>()
    };
    for t in a.tensor_ids() {
        assert_eq!(a.tensor_name(t), b.tensor_name(t));
        assert_eq!(names(a, a.legs(t)), names(b, b.legs(t)));
        assert_eq!(a.block(t).dims(), b.block(t).dims());
        assert_eq!(
            a.block(t).entries().to_dense().to_complex(),
            b.block(t).entries().to_dense().to_complex()
        );
    }
    assert_eq!(names(a, a.boundary()), names(b, b.boundary()));
    assert_eq!(names(a, a.bulk()), names(b, b.bulk()));
    assert_eq!(names(a, a.summed()), names(b, b.summed()));
    assert_eq!(
        a.layout().unwrap_or(&Default::default()),
        b.layout().unwrap_or(&Default::default())
    );
}

fn there_and_back(n: &Network) {
    let folder = tempfile::tempdir().unwrap();
    for format in ["toml", "json"] {
        let path = folder.path().join(format!("net.{format}"));
        save(n, &path).unwrap();
        let back = load(&path, &Limits::default()).unwrap_or_else(|e| panic!("{e}"));
        assert_same(n, &back);
        let again = folder.path().join(format!("again.{format}"));
        save(&back, &again).unwrap();
        // What is written anew is the same to the byte.
        let bytes = |p: &Path| fs::read_to_string(p).unwrap().replace("again.", "net.");
        assert_eq!(bytes(&path), bytes(&again));
    }
}

#[test]
fn networks_survive_their_files() {
    for (_, recipe) in GROWN {
        there_and_back(&grown(recipe));
    }
    there_and_back(&tiling(
        "polygon = 5\naround = 4\nrings = 1\nbulk = \"all\"\nbulk_state = {family = \"basis\", level = 1}",
    ));
    there_and_back(&tiling(
        "polygon = 5\naround = 4\nrings = 1\nblock = \"five-leg\"\nremove = \"tiles:0\"",
    ));
}

#[test]
fn recipes_survive_their_tables() {
    let lattice = read("lierne = 1\ndimension = 3\n[lattice]\nkind = \"square\"\nsize = [2, 2]");
    let recipe = Recipe::Lattice(lierne::network::LatticeRecipe {
        kind: lierne::network::LatticeKind::Square,
        size: vec![2, 2],
        periodic: vec![false],
        open: lierne::network::LatticeOpen::Rim,
        block: None,
    });
    let other = recipe.network("net", Some(3), &Limits::default()).unwrap();
    assert_same(&lattice, &other);
    // A recipe with all that a tiling takes, read, written as a table and read again.
    let text = "polygon = [5, 6]\nthen = \"last\"\naround = 4\nrings = 2\ngrowth = \"edge\"\n\
        block = \"random-tensor\"\nblocks = [\"copy\", {family = \"random-tensor\", seed = 3}]\n\
        turn = [1, 2]\nbulk = \"rings:0,1\"\nbulk_state = {family = \"basis\", level = 1}\n\
        remove = \"tiles:7..9\"\n[[tiling.tile]]\ntiles = \"tiles:2\"\nbulk = false\nturn = 3";
    let one = tiling(text);
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("net.toml");
    save(&one, &path).unwrap();
    assert_same(&one, &load(&path, &Limits::default()).unwrap());
}

#[test]
fn overrides_replace_dimension_and_rings() {
    let path = root().join("networks/pentagon-code-vertex.toml");
    let o = Overrides { dimension: Some(3), rings: Some(0) };
    let n = load_with(&path, &Limits::default(), &o).unwrap();
    assert_eq!((n.tensors(), n.boundary_dim()), (1, Some(3)));
    // A study stands for its network.
    let o = Overrides { dimension: Some(5), rings: None };
    let study = root().join("networks/six-level-squares.toml");
    let n = load_with(&study, &Limits::default(), &o).unwrap();
    assert_eq!((n.tensors(), n.boundary().len(), n.boundary_dim()), (13, 20, Some(5)));
    assert_eq!(load(&study, &Limits::default()).unwrap().boundary_dim(), Some(3));
}

#[test]
fn arrays_give_and_check_dimensions() {
    let folder = tempfile::tempdir().unwrap();
    let array =
        ndarray::Array3::<f64>::from_shape_fn((2, 3, 2), |(i, j, k)| (i + 2 * j + 5 * k) as f64);
    fs::create_dir(folder.path().join("arrays")).unwrap();
    ndarray_npy::write_npy(folder.path().join("arrays/a.npy"), &array).unwrap();
    let path = folder.path().join("net.toml");
    let text = "lierne = 1\nboundary = [\"a\", \"b\"]\n[[tensor]]\nlegs = [\"a\", \"x\", \"b\"]\n\
                array = \"arrays/a.npy\"\n[[tensor]]\nlegs = [\"x\"]\nvalues = [1, [0.5, -1], -0.0]\n";
    fs::write(&path, text).unwrap();
    let n = load(&path, &Limits::default()).unwrap();
    let x = n.find_label("x").unwrap();
    assert_eq!((n.dim(n.boundary()[0]), n.dim(x)), (2, 3));
    let other = folder.path().join("copy/net.json");
    fs::create_dir(folder.path().join("copy")).unwrap();
    save(&n, &other).unwrap();
    assert_same(&n, &load(&other, &Limits::default()).unwrap());
    let small = Limits { array_bytes: 100, ..Limits::default() };
    let refused = load(&path, &small).unwrap_err().to_string();
    assert!(refused.contains("at most 100 are read"), "{refused}");
}

/// Any leg of a recipe may be an array of the user's own; a random state is another one on
/// each tile.
#[test]
fn recipes_take_arrays_and_random_states() {
    let folder = tempfile::tempdir().unwrap();
    let state = ndarray::arr1(&[0.6, 0.8]);
    ndarray_npy::write_npy(folder.path().join("psi.npy"), &state).unwrap();
    let path = folder.path().join("net.toml");
    let net = |state: &str| {
        let text = format!(
            "lierne = 1\ndimension = 2\n[tiling]\npolygon = 5\naround = 4\nrings = 1\n\
             bulk = \"all\"\nbulk_state = {state}\n"
        );
        fs::write(&path, text).unwrap();
        load(&path, &Limits::default()).unwrap_or_else(|e| panic!("{e}"))
    };
    let n = net("{array = \"psi.npy\"}");
    let psi = |t: u32| n.block(TensorId::new(t)).entries().to_dense().to_complex();
    assert_eq!((n.tensors(), psi(11)[0].re, psi(21)[1].re), (22, 0.6, 0.8));
    let n = net("\"random-state\"");
    let psi = |t: u32| n.block(TensorId::new(t)).entries().to_dense().to_complex();
    assert_ne!(psi(11), psi(12));
    there_and_back(&n);
}

mod properties {
    use super::*;
    use proptest::prelude::*;

    fn label() -> impl Strategy<Value = String> {
        "[\\PC&&[^,0-9]]{1,6}"
            .prop_filter("sound", |l| l.trim() == l && !l.is_empty() && !l.contains(".."))
    }

    proptest! {
        #![proptest_config(ProptestConfig { cases: 60, ..ProptestConfig::default() })]
        /// Any names and any finite numbers come back to the bit.
        #[test]
        fn odd_networks_survive_their_files(
            names in prop::collection::btree_set(label(), 4),
            title in "\\PC{0,12}",
            dims in prop::collection::vec(1usize..4, 4),
            numbers in prop::collection::vec((any::<f64>(), any::<f64>()), 81),
            tensor_name in "\\PC{1,8}",
        ) {
            let mut b = NetworkBuilder::new(title);
            let labels: Vec<Label> =
                names.iter().zip(&dims).map(|(n, &d)| b.label(n, d)).collect();
            let shape = [dims[0], dims[1], dims[2], dims[3]];
            let size: usize = shape.iter().product();
            let finite = |x: f64| if x.is_finite() { x } else { 1.5 };
            let mut values: Vec<num_complex::Complex64> = numbers[..size]
                .iter()
                .map(|&(re, im)| num_complex::Complex64::new(finite(re) / 2.0, finite(im) / 2.0))
                .collect();
            values[0] = num_complex::Complex64::new(1e-3, 0.0);
            let array = ndarray::ArrayD::from_shape_vec(shape.to_vec(), values.clone()).unwrap();
            let dense = lierne::tensor::Dense::Complex(array);
            // Norms that overflow are refused, which is told elsewhere.
            let Ok(block) = block::from_dense("odd", dense, 1e-9) else { return Ok(()) };
            b.tensor(Some(&tensor_name), &labels, &Arc::new(block)).unwrap();
            b.boundary(labels[..2].to_vec());
            b.bulk([labels[2]]);
            b.summed([labels[3]]);
            there_and_back(&b.finish().unwrap());
        }
    }
}

// ---- graphs and expressions of others ---------------------------------------------------

#[test]
fn graph_files_are_read_both_ways() {
    let folder = tempfile::tempdir().unwrap();
    let put = |name: &str, text: &str| {
        let path = folder.path().join(name);
        fs::write(&path, text).unwrap();
        path
    };
    let edges = put(
        "g.txt",
        "# a square\nnorth east\neast, south 5\nsouth west\nwest\tnorth\nwest x % tail\n",
    );
    let gr = put("g.gr", "c a square and a tail\np tw 6 5\n1 2\n2 3\n3 4\n4 1\n4 5\n");
    let xml = put(
        "g.graphml",
        "<?xml version='1.0'?><graphml xmlns=\"http://graphml.graphdrawing.org/xmlns\">\n\
         <key id=\"d0\" for=\"edge\" attr.name=\"dimension\" attr.type=\"int\"/>\n\
         <graph edgedefault=\"undirected\"><!-- <node id='no'/> -->\n\
         <node id=\"a&amp;b\"/><node id=\"1\"><data key=\"x\">3</data></node><node id='c'/><node id='d'/>\n\
         <edge source=\"a&amp;b\" target=\"1\"><data key=\"d0\">7</data></edge>\n\
         <hyperedge><endpoint node=\"1\"/><endpoint node=\"c\"/><endpoint node=\"d\"/></hyperedge>\n\
         </graph></graphml>",
    );
    let limits = Limits::default();
    let net = |path: &Path, reading, open| {
        let graph =
            read_graph(path, GraphFormat::of(path), &limits).unwrap_or_else(|e| panic!("{e}"));
        graph.network("g", reading, open, 2, None, &limits).unwrap_or_else(|e| panic!("{e}"))
    };
    let n = net(&edges, GraphReading::Tensors, true);
    assert_eq!((n.tensors(), n.bonds(), n.boundary().len()), (5, 5, 5));
    assert_eq!(n.tensor_name(TensorId::new(2)), "south");
    assert_eq!(n.dim(n.find_label("x1").unwrap()), 5);
    let n = net(&gr, GraphReading::Tensors, false);
    assert_eq!((n.tensors(), n.bonds(), Survey::of(&n).components), (6, 5, 2));
    let n = net(&gr, GraphReading::Factors, false);
    assert_eq!((n.tensors(), n.labels(), n.bonds(), n.summed().len()), (5, 5, 4, 1));
    let n = net(&xml, GraphReading::Tensors, false);
    assert_eq!((n.tensors(), n.bonds(), Survey::of(&n).hyperedges), (4, 2, 1));
    assert_eq!(
        (n.tensor_name(TensorId::new(0)), n.dim(n.find_label("x0").unwrap())),
        ("a&b".into(), 7)
    );

    let refused = [
        ("g.gr", "p tw 2 1\n1 3\n", "line 2: vertex \"3\" is not among the graph's 2 vertices"),
        ("g.gr", "p tw 2 2\n1 2\n", "announces 2 edges and holds 1"),
        ("g.gr", "p tw 4000000000 4000000000\n", "vertices; at most 4000000 are taken"),
        ("g.gr", "1 2\n", "is not a line `p tw` vertices edges"),
        ("g.txt", "a b c\n", "line 1: \"c\" is not a dimension"),
        ("g.txt", "a\n", "is not an edge"),
        ("g.txt", "", "holds no vertex"),
        ("g.graphml", "<graphml><graph><node id='a'/>", "is not closed before the file ends"),
        ("g.graphml", "<!DOCTYPE lolz [<!ENTITY a 'b'>]><graphml/>", "without document type"),
        ("g.graphml", "<graph><edge source='a' target='b'/></graph>", "vertex \"a\" is not among"),
        ("g.graphml", "<graph><node/></graph>", "is not a node with an id"),
        ("g.graphml", "<graph><node id='&lol;'/></graph>", "is not a known entity"),
    ];
    for (name, text, part) in refused {
        let path = put(name, text);
        let told =
            read_graph(&path, GraphFormat::of(&path), &limits).map(|_| ()).unwrap_err().to_string();
        assert!(told.contains(part) && !told.contains('\n'), "{text:?}: {told}");
    }
    let deep = put("g.graphml", &"<a>".repeat(100_000));
    let told =
        read_graph(&deep, GraphFormat::GraphMl, &limits).map(|_| ()).unwrap_err().to_string();
    assert!(told.contains("nested less than 64 deep"), "{told}");
}

#[test]
fn einsum_expressions_become_networks() {
    let net = |text: &str, sizes: &[(&str, usize)]| {
        let sizes: BTreeMap<String, usize> =
            sizes.iter().map(|&(l, d)| (l.to_owned(), d)).collect();
        einsum("e", text, &sizes, None, None, &[], Path::new(""), &Limits::default())
    };
    let n = net("ab,bc,cd->ad", &[("a", 3), ("b", 8), ("c", 4), ("d", 5)]).unwrap();
    assert_eq!((n.tensors(), n.bonds(), n.boundary().len()), (3, 2, 2));
    assert_eq!((n.dim(n.boundary()[0]), n.dim(n.boundary()[1])), (3, 5));
    // A diagonal, a hyperedge, a label summed over alone, a scalar.
    let n = net("iij,jk,jl,->k", &[("i", 2), ("j", 3), ("k", 4), ("l", 5)]).unwrap();
    assert_eq!((n.tensors(), n.bonds(), n.summed().len()), (4, 2, 1));
    assert_eq!(n.legs(TensorId::new(3)), &[]);
    // Without an arrow: what stands once, in order.
    let n = net("ba,bc", &[("a", 2), ("b", 2), ("c", 2)]).unwrap();
    let names: Vec<&str> = n.boundary().iter().map(|&l| n.label_name(l)).collect();
    assert_eq!(names, ["a", "c"]);
    // A label in the result stays though two operands hold it.
    let n = net("ab,ab->a", &[("a", 2), ("b", 2)]).unwrap();
    assert_eq!((n.bonds(), n.boundary().len()), (1, 1));
    let n = net("αβ,βγ->αγ", &[("α", 2), ("β", 3), ("γ", 2)]).unwrap();
    assert_eq!(n.label_name(n.boundary()[1]), "γ");
    let n =
        net("left mid, mid right -> left right", &[("left", 2), ("mid", 3), ("right", 4)]).unwrap();
    assert_eq!((n.tensors(), n.dim(n.boundary()[1])), (2, 4));
    // More labels than there are letters.
    let words: Vec<String> = (0..200).map(|k| format!("l{k} l{}", k + 1)).collect();
    let text = format!("{} -> l0 l200", words.join(", "));
    let all: BTreeMap<String, usize> = (0..=200).map(|k| (format!("l{k}"), 2)).collect();
    let n = einsum("e", &text, &all, None, None, &[], Path::new(""), &Limits::default()).unwrap();
    assert_eq!((n.tensors(), n.labels()), (200, 201));
    for (text, sizes, part) in [
        ("ab->ac", vec![("a", 2), ("b", 2)], "\"c\" of the result stands on no operand"),
        ("ab->aa", vec![("a", 2), ("b", 2)], "\"a\" stands twice in the result"),
        ("a...->a", vec![("a", 2)], "ellipsis"),
        ("a->b->c", vec![], "2 arrows"),
        ("a1->a", vec![("a", 2)], "\"1\" in the expression cannot be a label"),
        ("ab->a", vec![("a", 2)], "\"b\" has no size"),
        ("ab->a", vec![("a", 2), ("b", 2), ("z", 2)], "a size is given for \"z\""),
    ] {
        let told = net(text, &sizes).map(|_| ()).unwrap_err().to_string();
        assert!(told.contains(part), "{text}: {told}");
    }
}

#[test]
fn selections_are_read_and_written() {
    for text in ["none", "all", "centre", "rings:0,2", "rings:1..4", "tiles:3,5..8"] {
        assert_eq!(Selection::parse(text).unwrap().to_string(), text);
    }
    for text in ["", "rings", "rings:", "rings:3..1", "tiles:-1", "tiles:a", "sides:1"] {
        assert_eq!(Selection::parse(text), None, "{text}");
    }
    let s = Selection::parse("tiles:3,5..8").unwrap();
    let held: Vec<u32> = (0..10).filter(|&t| s.holds(t, 0)).collect();
    assert_eq!(held, [3, 5, 6, 7]);
}

// ---- what ships ------------------------------------------------------------------------------

/// Name, tensors, boundary, bulk of each file in networks/.
const SHIPPED: [(&str, usize, usize, usize); 18] = [
    ("binary-tree-code", 15, 16, 1),
    ("black-hole", 50, 100, 50),
    ("fixed-bulk", 22, 25, 0),
    ("heptagon-code", 8, 28, 8),
    ("hexagon-state", 13, 42, 0),
    ("layered-binary", 29, 16, 0),
    ("layered-ternary", 16, 18, 2),
    ("loop-3", 3, 6, 0),
    ("loop-4", 4, 8, 0),
    ("loop-5", 5, 10, 0),
    ("pentagon-code", 21, 55, 21),
    ("pentagon-code-vertex", 11, 25, 11),
    ("pentagon-hexagon", 26, 75, 21),
    ("periodic-lattice", 16, 0, 0),
    ("single-qubit-code", 26, 95, 1),
    ("six-level-squares", 13, 20, 0),
    ("triangle-state", 61, 33, 0),
    ("wormhole", 20, 50, 0),
];

#[test]
fn every_shipped_network_loads_and_says_what_it_is_for() {
    for (name, tensors, boundary, bulk) in SHIPPED {
        let path = root().join(format!("networks/{name}.toml"));
        let n = load(&path, &Limits::default()).unwrap_or_else(|e| panic!("{e}"));
        assert_eq!(
            (n.tensors(), n.boundary().len(), n.bulk().len()),
            (tensors, boundary, bulk),
            "{name}"
        );
        let text = fs::read_to_string(&path).unwrap();
        assert!(text.starts_with("# "), "{name} does not say what it is for");
        let planar = Survey::of(&n).planar_in_a_disk == Some(true);
        let flat =
            !matches!(name, "periodic-lattice" | "wormhole" | "black-hole" | "layered-ternary");
        assert!(!flat || planar, "{name} should lie in a disk");
    }
    for entry in fs::read_dir(root().join("networks")).unwrap() {
        let path = entry.unwrap().path();
        if path.extension().is_some_and(|e| e == "toml") {
            load(&path, &Limits::default()).unwrap_or_else(|e| panic!("{e}"));
        }
    }
}

/// The published schema and the reader know the same keys.
#[test]
fn the_schema_has_the_keys_of_the_reader() {
    let text = fs::read_to_string(root().join("docs/network.schema.json")).unwrap();
    let schema: serde_json::Value = serde_json::from_str(&text).unwrap();
    for (table, keys) in FILE_KEYS {
        let part = match *table {
            "" => &schema,
            "tiling.tile" => &schema["$defs"]["tile"],
            other => &schema["$defs"][other],
        };
        let known: Vec<&String> = part["properties"].as_object().unwrap().keys().collect();
        let mut mine: Vec<&str> = keys.to_vec();
        if table.is_empty() {
            mine.extend(FILE_KEYS[3..].iter().map(|k| k.0).filter(|k| *k != "tiling.tile"));
        }
        mine.sort_unstable();
        assert_eq!(known, mine, "table {table:?}");
        assert_eq!(part["additionalProperties"], false, "table {table:?}");
    }
}
