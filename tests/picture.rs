//! Pictures: what should be drawn is drawn, files are well-formed and small, text is there.

#![cfg(all(feature = "png", feature = "cli"))]

mod picture {
    pub mod drawing;
    pub mod families;
    pub mod gallery;
    pub mod patch;
    pub mod program;
}

use lierne::network::{Limits, Network, Overrides, Region, TensorId, from_toml};
use lierne::study::picture::{
    Address, Axis, Chart, Ink, Look, Marks, Options, PictureError, Point, Reach, Scene, Series,
    Share, png,
};
use lierne::tensor::Label;
use num_complex::Complex64;
use picture::drawing::Drawing;
use picture::{families, gallery, patch, program};
use proptest::prelude::*;
use std::path::Path;

fn addressed() -> Options {
    Options { address: Address::All, names: true, ..Options::default() }
}

fn draw(network: &Network, marks: Marks, options: Options) -> lierne::study::picture::Picture {
    Scene { network, marks, options }.draw().expect("a picture")
}

/// Thirds of the tensors to the region, the core and the rest; the bonds that leave the
/// region's third are the cut.
fn thirds(network: &Network) -> Marks {
    let n = network.boundary().len();
    let shares: Vec<Share> = network
        .tensor_ids()
        .map(|t| match 3 * t.index() / network.tensors() {
            0 => Share::Region,
            1 => Share::Core,
            _ => Share::Rest,
        })
        .collect();
    let mine = |t: &TensorId| shares[t.index()] == Share::Region;
    let cut = (0..network.labels() as u32)
        .map(Label::new)
        .filter(|&l| {
            let holders = network.holders(l);
            holders.iter().any(mine) && !holders.iter().all(mine)
        })
        .collect();
    let reaches = [Reach::Region, Reach::Rest, Reach::Nobody].into_iter().cycle();
    let bulk = network.bulk().iter().copied().zip(reaches).collect();
    Marks { region: Some(Region::interval(0, n / 3, n)), cut, shares, bulk }
}

fn tilings() -> Vec<Network> {
    [(4, 5, 1), (5, 4, 2), (7, 3, 2), (3, 7, 3), (6, 4, 1), (4, 4, 2), (6, 3, 1)]
        .into_iter()
        .map(|(p, q, rings)| patch::grow(p, q, rings).0)
        // An open piece of a sphere, and two closed ones.
        .chain([(5, 3, 1), (4, 3, 2), (3, 5, 3)].map(|(p, q, rings)| grown(p, q, rings)))
        .collect()
}

#[test]
fn everything_is_drawn() {
    for network in tilings().iter().chain(&families::all()) {
        for marks in [Marks::default(), thirds(network)] {
            let picture = draw(network, marks, addressed());
            let name = network.name();
            let drawing = Drawing::read(&picture.svg);
            assert_eq!(
                drawing.numbers("site", "data-site"),
                (0..network.boundary().len()).collect::<Vec<_>>(),
                "sites of {name}"
            );
            assert_eq!(
                drawing.numbers("boss", "data-tensor"),
                (0..network.tensors()).collect::<Vec<_>>(),
                "tensors of {name}"
            );
            let bulk: Vec<usize> = network.bulk().iter().map(|l| l.index()).collect();
            assert_eq!(drawing.numbers("bulk", "data-label"), bulk, "bulk legs of {name}");
            assert_eq!(picture.drawn.tensors, network.tensors(), "{name}");
            assert_eq!(picture.drawn.sites, network.boundary().len(), "{name}");
            assert!(picture.drawn.bonds >= network.bonds(), "{name}: {:?}", picture.drawn);
            assert_eq!(picture.sites.len(), network.boundary().len(), "{name}");
        }
    }
}

#[test]
fn every_bond_can_be_cut() {
    for network in tilings().iter().chain(&families::all()) {
        let drawing = Drawing::read(&draw(network, Marks::default(), addressed()).svg);
        let mut gates = drawing.numbers("gate", "data-label");
        gates.dedup();
        let loops = |l: &Label| matches!(network.holders(*l), [a, b] if a == b);
        let bulk = |l: &Label| network.bulk().contains(l);
        let wanted: Vec<usize> = (0..network.labels() as u32)
            .map(Label::new)
            .filter(|l| !loops(l) && !bulk(l))
            .map(Label::index)
            .collect();
        assert_eq!(gates, wanted, "{}", network.name());
    }
}

#[test]
fn nothing_leaves_the_sheet() {
    for network in tilings().iter().chain(&families::all()) {
        let picture = draw(network, thirds(network), addressed());
        let drawing = Drawing::read(&picture.svg);
        for (x, y) in drawing.points() {
            let [w, h] = picture.size;
            assert!(
                (-1.0..=w + 1.0).contains(&x) && (-1.0..=h + 1.0).contains(&y),
                "{}: ({x}, {y}) lies outside {w} by {h}",
                network.name()
            );
        }
    }
}

/// Sides of tiles are geodesics: circles that meet the unit circle at right angles, so the
/// square of the distance of their centre is one more than the square of their radius.
#[test]
fn walls_are_orthogonal_to_the_rim() {
    for (p, q, rings) in [(5, 4, 2), (4, 5, 3), (7, 3, 2), (3, 7, 4)] {
        let (network, _) = patch::grow(p, q, rings);
        let picture = draw(&network, Marks::default(), Options::default());
        let (middle, unit) = picture.disk.expect("a disk");
        let mut arcs = 0;
        for class in ["wall", "rib"] {
            for arc in Drawing::read(&picture.svg).arcs(class) {
                let plane = |x: [f64; 2]| {
                    Complex64::new((x[0] - middle[0]) / unit, (middle[1] - x[1]) / unit)
                };
                let (a, b) = (plane(arc.from), plane(arc.to));
                let (chord, radius) = ((b - a).norm(), arc.radius / unit);
                if chord < 0.05 {
                    continue;
                }
                let height = (radius * radius - chord * chord / 4.0).max(0.0).sqrt();
                let across = (b - a) * Complex64::i() / chord;
                let side = if arc.clockwise { -1.0 } else { 1.0 };
                let centre = (a + b) / 2.0 + across * height * side;
                let excess = centre.norm_sqr() - radius * radius;
                // Points are rounded to a tenth of a unit.
                let slack = 3.0 * radius * (1.0 + radius / chord) / unit;
                assert!((excess - 1.0).abs() < slack, "{{{p},{q}}}: {excess} ± {slack}");
                arcs += 1;
            }
        }
        assert!(arcs > 10, "{{{p},{q}}} has curved sides");
    }
}

#[test]
fn the_cut_stands_where_its_bonds_are() {
    let (network, _) = patch::grow(4, 5, 2);
    let first = TensorId::new(0);
    let marks = Marks { cut: network.legs(first).to_vec(), ..Marks::default() };
    let picture = draw(&network, marks, Options { legend: false, ..Options::default() });
    let (middle, unit) = picture.disk.expect("a disk");
    let drawing = Drawing::read(&picture.svg);
    let points = drawing.points_of("cut");
    assert!(!points.is_empty());
    // The corners of the middle tile, at the published distance: Canad. Math. Bull. 40, 158.
    for (x, y) in points {
        let far = (x - middle[0]).hypot(y - middle[1]) / unit;
        assert!((far - 0.397_975_427).abs() < 2e-3, "{far}");
    }
}

fn grown(polygon: u32, around: u32, rings: u32) -> Network {
    let text = format!(
        "dimension = 3\n[tiling]\npolygon = {polygon}\naround = {around}\nrings = {rings}\n"
    );
    let table = text.parse().expect("a table");
    from_toml(&table, Path::new("."), "patch", &Limits::default(), &Overrides::default())
        .expect("a patch")
}

/// The library's own growth and the slow one by coordinates give the same drawing's parts.
#[test]
fn places_found_from_bonds_fit_places_told() {
    let own = draw(&grown(4, 5, 1), Marks::default(), Options::default());
    assert_eq!(own.drawn.tensors, 13);
    assert_eq!(own.drawn.sites, 20);
    assert!(own.disk.is_some());
    let angles: Vec<f64> = own.sites.iter().map(|s| s.angle).collect();
    let turns: usize = (0..20).filter(|&s| angles[(s + 1) % 20] < angles[s]).count();
    assert_eq!(turns, 1, "sites go once round, counter-clockwise");
}

#[test]
fn ten_thousand_tiles_stay_small() {
    let network = grown(4, 5, 6);
    assert!(network.tensors() > 10_000, "{}", network.tensors());
    let n = network.boundary().len();
    let marks = Marks { region: Some(Region::interval(5, n / 3, n)), ..thirds(&network) };
    for marks in [Marks::default(), marks] {
        let picture = draw(&network, marks, Options { names: true, ..Options::default() });
        assert!(picture.svg.len() < 5_000_000, "{} bytes", picture.svg.len());
        let drawn = picture.drawn;
        assert_eq!(drawn.tensors, drawn.visible_tensors);
        assert_eq!(drawn.bonds, drawn.visible_bonds);
        assert!(drawn.tensors > 500 && drawn.tensors < network.tensors(), "{drawn:?}");
        assert_eq!(drawn.sites, n, "the rim holds every site");
        Drawing::read(&picture.svg);
    }
}

#[test]
fn other_large_networks_stay_small() {
    let network = families::circulant(10_000, &[1, 100]);
    let picture = draw(&network, Marks::default(), Options::default());
    assert!(picture.svg.len() < 5_000_000, "{} bytes", picture.svg.len());
    assert_eq!(picture.drawn.tensors, 10_000);
    assert_eq!(picture.drawn.bonds, 20_000);
}

#[test]
fn text_becomes_pixels() {
    let network = families::chain(4);
    let picture = draw(&network, Marks::default(), Options { names: true, ..Options::default() });
    assert!(picture.svg.contains(">t1</text>"));
    let with = png(&picture.svg, 600).expect("pixels");
    let mut bare = String::new();
    for line in picture.svg.lines().filter(|l| !l.starts_with("<text")) {
        bare.push_str(line);
        bare.push('\n');
    }
    let without = png(&bare, 600).expect("pixels");
    let dark = |bytes: &[u8]| {
        let pixels = resvg::tiny_skia::Pixmap::decode_png(bytes).expect("a PNG");
        pixels.pixels().iter().filter(|p| p.red() < 100 && p.green() < 100).count()
    };
    let letters = dark(&with).saturating_sub(dark(&without));
    assert!(letters > 60, "{letters} dark pixels are letters");
}

#[test]
fn a_text_without_letters_is_an_error() {
    let svg =
        "<svg xmlns='http://www.w3.org/2000/svg' width='9' height='9'><text y='8'></text></svg>";
    assert!(matches!(png(svg, 90), Err(PictureError::Raster { .. })));
    assert!(matches!(png("no drawing", 90), Err(PictureError::Raster { .. })));
}

#[test]
fn unreasonable_sizes_are_refused() {
    let svg = "<svg xmlns='http://www.w3.org/2000/svg' width='1' height='1000'/>";
    assert!(matches!(png(svg, 2000), Err(PictureError::Pixels { height: 2_000_000, .. })));
    assert!(matches!(png(svg, 0), Err(PictureError::Pixels { .. })));
}

#[test]
fn the_same_scene_gives_the_same_bytes() {
    for network in families::all() {
        let once = draw(&network, thirds(&network), addressed());
        let again = draw(&network, thirds(&network), addressed());
        assert_eq!(once, again, "{}", network.name());
    }
}

#[test]
fn marks_of_another_network_are_refused() {
    let network = families::chain(4);
    let scene = |marks| Scene { network: &network, marks, options: Options::default() }.draw();
    let long = Marks { region: Some(Region::interval(0, 1, 9)), ..Marks::default() };
    assert_eq!(
        scene(long),
        Err(PictureError::Marks { what: "boundary sites", given: 9, expected: 4 })
    );
    let few = Marks { shares: vec![Share::Core], ..Marks::default() };
    assert_eq!(
        scene(few),
        Err(PictureError::Marks { what: "shares of tensors", given: 1, expected: 4 })
    );
    let past = Marks { cut: vec![Label::new(99)], ..Marks::default() };
    assert!(matches!(scene(past), Err(PictureError::Marks { what: "label", given: 100, .. })));
}

#[test]
fn names_are_escaped() {
    let network = families::build("a < b & \"c\"", 1, &[("<leg>".into(), vec![0])]);
    let options = Options { title: Some("x < y".into()), names: true, ..Options::default() };
    let svg = draw(&network, Marks::default(), options).svg;
    assert!(Drawing::read(&svg).texts().contains(&"x < y".to_owned()));
}

#[test]
fn pages_use_variables_and_no_paper() {
    let network = families::ring(5);
    let options = Options { ink: Ink::Page, id: "p1".into(), ..addressed() };
    let svg = draw(&network, thirds(&network), options).svg;
    assert!(svg.contains("var(--lierne-ink,") && !svg.contains("<rect width=\"850"));
    let css = lierne::study::picture::theme_css();
    for part in svg.split("var(--lierne-").skip(1) {
        let name = part.split(',').next().expect("a name");
        assert!(css.contains(&format!("--lierne-{name}:")), "{name} has a value in both themes");
    }
    for id in Drawing::read(&svg).ids() {
        assert!(id.starts_with("p1"), "{id}");
    }
}

#[test]
fn charts_show_every_point() {
    let points =
        |k: u32| (0..9).map(move |x| Point::between(f64::from(x), f64::from(x * k), 0.0, 20.0));
    let series = vec![
        Series::new("one", Look::Marks, points(1)),
        Series::new("two", Look::Line, points(2)),
        Series::new("three", Look::Bars, points(1)),
    ];
    let chart = Chart {
        x: Axis::linear("x (sites)"),
        y: Axis::linear("y (legs)"),
        series,
        ..Chart::default()
    };
    let svg = chart.draw().expect("a chart");
    let drawing = Drawing::read(&svg);
    let texts = drawing.texts();
    for word in ["x (sites)", "y (legs)", "one", "two", "three", "0"] {
        assert!(texts.iter().any(|t| t == word), "{word} in {texts:?}");
    }
    // A lozenge a point and one in the legend.
    assert_eq!(drawing.closed("mark s0"), 10);
    assert_eq!(drawing.closed("bar s2"), 10);
    assert_eq!(drawing.closed("mark s1"), 10);
    png(&svg, 500).expect("pixels");
}

#[test]
fn charts_refuse_what_no_axis_holds() {
    let chart = |x, y, axis| Chart {
        y: axis,
        series: vec![Series::new("s", Look::Line, [Point::new(1.0, 1.0), Point::new(x, y)])],
        ..Chart::default()
    };
    let refused = chart(2.0, f64::NAN, Axis::linear("y")).draw();
    assert!(matches!(refused, Err(PictureError::Value { point: 1, .. })));
    let refused = chart(2.0, 0.0, Axis::log("y")).draw();
    assert_eq!(refused, Err(PictureError::Value { series: "s".into(), point: 1, value: 0.0 }));
    chart(2.0, 3.0, Axis::log("y")).draw().expect("positive numbers");
}

#[test]
fn empty_charts_are_charts() {
    let svg = Chart::default().draw().expect("axes alone");
    Drawing::read(&svg);
}

#[test]
fn the_gallery_is_complete() {
    gallery::check();
}

#[test]
#[ignore = "writes docs/gallery anew"]
fn gallery_anew() {
    gallery::write();
}

#[test]
fn the_program_draws_to_files_and_to_stdout() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = |name: &str| folder.path().join(name).display().to_string();
    let (svg, png_file) = (path("a.svg"), path("a.png"));
    let net = "networks/loop-4.toml";
    let marks = ["--region", "0..3", "--cut", "--closure", "--label"];
    let mut all = vec![net];
    all.extend(marks);
    all.extend(["--out", &svg, "--png", "--json"]);
    let out = program::status(&all, 0);
    let told: serde_json::Value = serde_json::from_slice(&out.stdout).expect("JSON");
    assert_eq!(told["tensors_drawn"], 4);
    assert_eq!(told["sites_drawn"], 8);
    let written = std::fs::read_to_string(&svg).expect("the SVG");
    let drawing = Drawing::read(&written);
    for word in ["region A", "minimal cut", "t0"] {
        assert!(drawing.texts().iter().any(|t| t == word), "{word}");
    }
    let pixels = std::fs::read(&png_file).expect("the PNG");
    assert_eq!(resvg::tiny_skia::Pixmap::decode_png(&pixels).expect("a PNG").width(), 1004);
    let mut all = vec![net];
    all.extend(marks);
    let out = program::status(&all, 0);
    assert_eq!(String::from_utf8_lossy(&out.stdout).trim_end(), written.trim_end());
}

#[test]
fn the_program_draws_the_cut_that_entropy_finds() {
    // Two of four neighbouring tensors' pairs of legs: the loop is cut twice.
    let out = program::status(&["networks/loop-4.toml", "--region", "0..4", "--cut"], 0);
    let svg = String::from_utf8(out.stdout).expect("UTF-8");
    assert!(svg.contains("The cut crosses 2 legs."), "{svg}");
}

#[test]
fn bad_requests_end_in_a_sentence() {
    let folder = tempfile::tempdir().expect("a folder");
    let target = folder.path().join("a.gif").display().to_string();
    let good = folder.path().join("a.svg").display().to_string();
    let net = "networks/loop-4.toml";
    for (arguments, part) in [
        (vec![net, "--out", &target], "neither .svg nor .png"),
        (vec![net, "--region", "0..99", "--out", &good], "99"),
        (vec![net, "--cut", "--out", &good], "--region"),
        (vec![net, "--region", "0..2", "--recover", "--out", &good], "no bulk legs"),
        (vec!["networks/missing.toml", "--out", &good], "missing.toml"),
        (vec![net, "--width", "1", "--out", &good], "millimetres"),
        (vec![net, "--json"], "--out"),
    ] {
        let out = program::status(&arguments, 2);
        let told = String::from_utf8_lossy(&out.stderr).into_owned();
        assert!(told.contains(part), "{arguments:?}: {told}");
    }
    assert_eq!(std::fs::read_dir(folder.path()).expect("a folder").count(), 0, "no file is left");
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(48))]

    /// Random graphs with random open legs: every part is on the sheet, once.
    #[test]
    fn random_networks_are_drawn_whole(
        n in 1usize..24,
        pairs in proptest::collection::vec((0usize..24, 0usize..24), 0..50),
        open in proptest::collection::vec(0usize..24, 0..12),
        hyper in proptest::collection::vec(proptest::collection::vec(0usize..24, 3..5), 0..3),
    ) {
        let mut labels = Vec::new();
        let mut push = |name: String, holders: Vec<usize>| labels.push((name, holders));
        for (k, (a, b)) in pairs.into_iter().enumerate() {
            push(format!("x{k}"), vec![a % n, b % n]);
        }
        for (k, t) in open.into_iter().enumerate() {
            push(format!("{}{k}", if k % 3 == 0 { "k" } else { "b" }), vec![t % n]);
        }
        for (k, holders) in hyper.into_iter().enumerate() {
            push(format!("h{k}"), holders.into_iter().map(|t| t % n).collect());
        }
        let network = families::build("random", n, &labels);
        let picture = draw(&network, thirds(&network), addressed());
        let drawing = Drawing::read(&picture.svg);
        prop_assert_eq!(drawing.numbers("boss", "data-tensor"), (0..n).collect::<Vec<_>>());
        let sites = network.boundary().len();
        prop_assert_eq!(drawing.numbers("site", "data-site"), (0..sites).collect::<Vec<_>>());
        prop_assert!(picture.drawn.bonds >= network.bonds());
    }
}
