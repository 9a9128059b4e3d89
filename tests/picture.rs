//! Pictures: what should be drawn is drawn, files are well-formed and small.

mod picture {
    pub mod families;
    pub mod patch;
}

use lierne::network::Region;
use lierne::study::picture::{
    Axis, Chart, Look, Marks, Options, Point, Reach, Scene, Series, Share, histogram,
};
use lierne::tensor::Label;
use picture::{families, patch};

/// Writes a few pictures to look at.
#[test]
#[ignore = "writes pictures to look at; LIERNE_LOOK names the folder"]
fn look() {
    let folder = std::env::var("LIERNE_LOOK").expect("LIERNE_LOOK names a folder");
    for (p, q, rings) in [(4, 5, 1), (5, 4, 2), (7, 3, 3), (3, 7, 4), (4, 4, 2), (4, 5, 4)] {
        let (network, _) = patch::grow(p, q, rings);
        let n = network.boundary().len();
        let region = Region::interval(1, n / 3, n);
        let shares = network
            .tensor_ids()
            .map(|t| match t.index() % 3 {
                0 => Share::Region,
                1 => Share::Rest,
                _ => Share::Core,
            })
            .collect();
        let cut = network.legs(network.tensor_ids().next().unwrap()).to_vec();
        for (kind, marks) in [
            ("plain", Marks::default()),
            ("marked", Marks { region: Some(region), cut, shares, ..Marks::default() }),
        ] {
            let scene = Scene {
                network: &network,
                marks,
                options: Options {
                    names: true,
                    title: Some(network.name().into()),
                    ..Options::default()
                },
            };
            let picture = scene.draw().unwrap();
            let file = format!("{folder}/tiling-{p}-{q}-{rings}-{kind}.svg");
            println!("{file}: {} bytes, {:?}", picture.svg.len(), picture.drawn);
            std::fs::write(file, picture.svg).unwrap();
        }
    }
    for network in families::all() {
        let n = network.boundary().len();
        let shares: Vec<Share> = network
            .tensor_ids()
            .map(|t| match 3 * t.index() / network.tensors() {
                0 => Share::Region,
                1 => Share::Core,
                _ => Share::Rest,
            })
            .collect();
        let cut = (0..network.labels() as u32)
            .map(Label::new)
            .filter(|&l| match network.holders(l) {
                [a, b] => {
                    (shares[a.index()] == Share::Region) != (shares[b.index()] == Share::Region)
                }
                _ => false,
            })
            .collect();
        let bulk = network
            .bulk()
            .iter()
            .zip([Reach::Region, Reach::Rest, Reach::Nobody].into_iter().cycle())
            .map(|(&l, r)| (l, r))
            .collect();
        let marks = Marks { region: Some(Region::interval(0, n / 3, n)), cut, shares, bulk };
        let file = format!("{folder}/{}.svg", network.name().replace([' ', ','], "-"));
        for (file, marks) in [(file.replace(".svg", "-plain.svg"), Marks::default()), (file, marks)]
        {
            let options =
                Options { names: true, title: Some(network.name().into()), ..Options::default() };
            let picture = Scene { network: &network, marks, options }.draw().unwrap();
            println!("{file}: {} bytes, {:?}", picture.svg.len(), picture.drawn);
            std::fs::write(file, picture.svg).unwrap();
        }
    }
    let lengths = 1..=20;
    let curve = |name: &str, c: f64| {
        Series::new(
            name,
            Look::Line,
            lengths.clone().map(move |l| {
                let y = c * (1.0 + f64::from(l)).ln();
                Point::between(f64::from(l), y, y - 0.2, y + 0.3)
            }),
        )
    };
    let mut series: Vec<Series> =
        (0..6).map(|k| curve(&format!("dimension {}", k + 3), 1.0 + 0.3 * k as f64)).collect();
    series[5].look = Look::Plain;
    series[4].look = Look::Steps;
    let chart = Chart {
        x: Axis::linear("length of the interval (sites)"),
        y: Axis::linear("entropy (legs)"),
        series,
        ..Chart::default()
    };
    std::fs::write(format!("{folder}/chart-lines.svg"), chart.draw().unwrap()).unwrap();
    let values: Vec<f64> = (0..300).map(|k| f64::from(k % 7 + k % 3)).collect();
    let other: Vec<f64> = (0..200).map(|k| f64::from(k % 5 + k % 4)).collect();
    let chart = Chart {
        x: Axis::linear("deficit (legs)"),
        y: Axis::linear("regions"),
        series: vec![histogram("D = 3", &values, 20), histogram("D = 6", &other, 20)],
        ..Chart::default()
    };
    std::fs::write(format!("{folder}/chart-bars.svg"), chart.draw().unwrap()).unwrap();
    let cloud = |name: &str, k: u32| {
        Series::new(
            name,
            Look::Marks,
            (1..40).map(move |i| {
                Point::new(
                    10f64.powf(f64::from(i) / 9.0 + f64::from(k)),
                    10f64.powf(f64::from((i * 7 + k * 3) % 11) / 4.0),
                )
            }),
        )
    };
    let chart = Chart {
        x: Axis::log("multiply-adds"),
        y: Axis::log("peak elements"),
        series: vec![cloud("greedy", 0), cloud("bisection", 1), cloud("annealing", 2)],
        ..Chart::default()
    };
    std::fs::write(format!("{folder}/chart-scatter.svg"), chart.draw().unwrap()).unwrap();
}
