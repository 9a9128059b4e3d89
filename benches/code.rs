//! How fast are bulk legs judged: many erasures by closure, one region by ranks, distances?

use criterion::{Criterion, criterion_group, criterion_main};
use lierne::code::distance::{self, Request as DistanceRequest};
use lierne::code::erasure::{Request, Target, run};
use lierne::code::{Code, recover};
use lierne::network::{Limits, Network, Overrides, Region, from_toml};
use lierne::watch::Silent;
use std::path::Path;
use std::time::Duration;

fn tiling(text: &str) -> Network {
    let text = format!("dimension = 2\n[tiling]\naround = 4\n{text}");
    let table: toml::Table = text.parse().expect("TOML");
    let none = Overrides::default();
    from_toml(&table, Path::new(""), "bench", &Limits::default(), &none).expect("a network")
}

fn pentagons(rings: u32, growth: &str) -> Network {
    tiling(&format!(
        "polygon = 5\nrings = {rings}\ngrowth = \"{growth}\"\nblock = \"code-5-1-3\"\nbulk = \"all\"\n"
    ))
}

/// 10^5 erasure patterns of about 5000 boundary legs.
fn greedy(c: &mut Criterion) {
    let mut group = c.benchmark_group("greedy-100000-samples");
    group.sample_size(10).measurement_time(Duration::from_secs(10));
    let single = "polygon = [5, 6]\nthen = \"last\"\nrings = 5\ngrowth = \"edge\"\nblock = \"six-leg\"\nbulk = \"centre\"\n";
    for (name, net, p) in [
        ("single-qubit-4945-legs", tiling(single), 0.46),
        ("pentagons-6820-legs", pentagons(7, "edge"), 0.1),
    ] {
        let code = Code::of(&net).expect("a code");
        let target = Target::Leg(code.centre());
        let request = Request {
            rates: vec![p],
            samples: 100_000,
            target,
            exact: false,
            listed: 0,
            ..Request::default()
        };
        let ask = || run(&code, &request, None, &Silent, &mut |_| ()).expect("samples").at(p);
        let failure = ask().greedy;
        assert!(failure.value > 0.01 && failure.value < 0.3, "{failure:?}");
        group.bench_function(name, |b| b.iter(ask));
    }
    group.finish();
}

/// All bulk legs of the 1325-leg pentagon code judged for one region by ranks.
fn ranks(c: &mut Criterion) {
    let mut group = c.benchmark_group("exact-recovery");
    group.sample_size(10).measurement_time(Duration::from_secs(10));
    let net = pentagons(4, "vertex");
    let code = Code::prepared(&net, &Silent).expect("a code");
    assert_eq!((code.boundary(), code.bulk()), (1325, 761));
    let region = Region::parse("0..300,400..700,900..1000", &net).expect("a region");
    let ask = || {
        recover::judge(&code, &region, &lierne::entropy::Request::default(), &Silent)
            .expect("an answer")
    };
    let answer = ask();
    assert!(answer.greedy.len() <= answer.recoverable.len());
    assert!(!answer.recoverable.is_empty() && !answer.neither.is_empty());
    group.bench_function("one-region-1325-legs", |b| b.iter(ask));
    group.bench_function("state-and-checks-1325-legs", |b| {
        b.iter(|| Code::prepared(&net, &Silent).expect("a code"));
    });
    group.finish();
}

fn distances(c: &mut Criterion) {
    let mut group = c.benchmark_group("distance");
    group.sample_size(10);
    for (name, net, supports) in
        [("25-legs", pentagons(1, "vertex"), 5), ("55-legs", pentagons(2, "edge"), 45)]
    {
        let code = Code::prepared(&net, &Silent).expect("a code");
        let ask =
            || distance::search(&code, &DistanceRequest::default(), &Silent).expect("a distance");
        let d = ask();
        assert_eq!((d.exact(), d.supports.len()), (Some(3), supports));
        group.bench_function(name, |b| b.iter(ask));
    }
    group.finish();
}

criterion_group!(benches, greedy, ranks, distances);
criterion_main!(benches);
