//! What do the checks and the safe path of the decompositions cost?

use criterion::{Criterion, criterion_group, criterion_main};
use lierne::linalg::{product, rank, singular_values, thin_svd};
use ndarray::Array2;
use num_complex::Complex64;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::hint::black_box;

fn random(m: usize, n: usize, seed: u64) -> Array2<Complex64> {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    Array2::from_shape_simple_fn((m, n), || {
        Complex64::new(rng.random_range(-1.0..1.0), rng.random_range(-1.0..1.0))
    })
}

fn singular(c: &mut Criterion) {
    for (n, r) in [(128, 64), (512, 128)] {
        let a = product(&random(n, r, 1).view(), &random(r, n, 2).view());
        assert_eq!(rank(&singular_values(&a.view()).unwrap(), 1e-12), r);
        let mut group = c.benchmark_group(format!("{n} × {n} of rank {r}"));
        group.sample_size(10);
        group.bench_function("singular values, checked", |b| {
            b.iter(|| black_box(singular_values(&a.view()).unwrap()));
        });
        group.bench_function("thin decomposition, checked", |b| {
            b.iter(|| black_box(thin_svd(&a.view()).unwrap()));
        });
        let m = faer::Mat::from_fn(n, n, |i, j| a[[i, j]]);
        group.bench_function("singular values, backend's default", |b| {
            b.iter(|| black_box(m.singular_values().unwrap()));
        });
        group.finish();
    }
}

criterion_group!(benches, singular);
criterion_main!(benches);
