//! How long does it take to grow a patch, to make its network, to write it and to read it?
//!
//! {4,5} by the vertex rule, 5 to 10 rings: 3 421 to 2 480 413 tiles. The largest runs once a
//! sample; cost per tile should not depend on the size.

use criterion::{BenchmarkId, Criterion, Throughput, criterion_group, criterion_main};
use lierne::network::{Limits, Recipe, TilingRecipe, load, save};
use lierne::tiling::{Growth, Rule, Tiling, geometry, grow};
use std::hint::black_box;

fn growth(rings: u32) -> Growth {
    Growth::regular(Tiling::new(4, 5).expect("a tiling"), rings, Rule::Vertex)
}

const SIZES: [(u32, usize); 4] = [(5, 3_421), (7, 47_713), (9, 664_621), (10, 2_480_413)];

fn patches(c: &mut Criterion) {
    let limit = Limits::default().tensors;
    let mut group = c.benchmark_group("grow {4,5}");
    group.sample_size(10);
    for (rings, tiles) in SIZES {
        assert_eq!(grow(&growth(rings), limit).expect("it fits").tiles(), tiles);
        group.throughput(Throughput::Elements(tiles as u64));
        group.bench_function(BenchmarkId::new("patch", rings), |b| {
            b.iter(|| grow(black_box(&growth(rings)), limit).expect("it fits"));
        });
        let recipe = Recipe::Tiling(TilingRecipe::new(growth(rings)));
        group.bench_function(BenchmarkId::new("network", rings), |b| {
            b.iter(|| recipe.network("bench", Some(3), &Limits::default()).expect("it fits"));
        });
    }
    let patch = grow(&growth(9), limit).expect("it fits");
    group.throughput(Throughput::Elements(patch.tiles() as u64));
    group.bench_function("places of 9 rings", |b| {
        b.iter(|| geometry::frames(black_box(&patch)).expect("tiles of one kind"));
    });
    group.finish();
}

fn files(c: &mut Criterion) {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("net.json");
    let recipe = Recipe::Tiling(TilingRecipe::new(growth(9)));
    let network = recipe.network("bench", Some(3), &Limits::default()).expect("it fits");
    save(&network, &path).expect("it can be written");
    assert_eq!(load(&path, &Limits::default()).expect("it reads").tensors(), 664_621);
    let mut group = c.benchmark_group("JSON of 664 621 tensors");
    group.sample_size(10);
    group.throughput(Throughput::Elements(664_621));
    group.bench_function("write", |b| b.iter(|| save(&network, &path).expect("it can be written")));
    group.bench_function("read", |b| {
        b.iter(|| load(&path, &Limits::default()).expect("it reads"));
    });
    group.finish();
}

criterion_group!(benches, patches, files);
criterion_main!(benches);
