//! How fast is elimination over finite fields?

use criterion::{BatchSize, Criterion, criterion_group, criterion_main};
use lierne::field::{Field, Matrix};
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::time::Duration;

fn random(q: u64, rows: usize, cols: usize) -> Matrix {
    let field = Field::new(q).expect("a prime power");
    let mut rng = ChaCha8Rng::seed_from_u64(1);
    Matrix::from_fn(&field, rows, cols, |_, _| rng.random_range(0..q as u32))
}

fn reduce(c: &mut Criterion) {
    let mut group = c.benchmark_group("reduce");
    group.sample_size(10).measurement_time(Duration::from_secs(8));
    for (q, rows, cols) in [
        (2, 4096, 8192),
        (3, 4096, 8192),
        (4, 1024, 2048),
        (5, 1024, 2048),
        (9, 512, 1024),
        (251, 1024, 2048),
        (65521, 1024, 2048),
        (65536, 512, 1024),
    ] {
        let m = random(q, rows, cols);
        assert_eq!(m.rank(), rows, "this seed gives full rank");
        group.bench_function(format!("gf{q}-{rows}x{cols}"), |b| {
            b.iter_batched(|| m.clone(), |mut m| m.reduce(), BatchSize::LargeInput);
        });
    }
    group.finish();
}

fn rank_of_small(c: &mut Criterion) {
    // The shape that entropies of regions ask for most: many ranks of small matrices.
    let mut group = c.benchmark_group("rank");
    for (q, size) in [(2, 64), (3, 64), (5, 64), (2, 512), (3, 512)] {
        let m = random(q, size, size);
        let rank = m.rank();
        assert!(rank + 8 > size);
        group.bench_function(format!("gf{q}-{size}"), |b| b.iter(|| m.rank()));
    }
    group.finish();
}

criterion_group!(benches, reduce, rank_of_small);
criterion_main!(benches);
