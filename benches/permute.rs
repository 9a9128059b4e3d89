//! How far is moving the axes of a large tensor from copying the same bytes?

use criterion::{Criterion, criterion_group, criterion_main};
use lierne::tensor::permuted;
use ndarray::{ArrayD, IxDyn};
use num_complex::Complex64;
use rand::SeedableRng;
use rand::seq::SliceRandom;
use rand_chacha::ChaCha8Rng;
use rayon::prelude::*;
use std::hint::black_box;

const ENTRIES: usize = 1 << 24;

fn entries(dims: &[usize]) -> ArrayD<Complex64> {
    let values = (0..ENTRIES).map(|i| Complex64::new(i as f64, -(i as f64))).collect();
    ArrayD::from_shape_vec(IxDyn(dims), values).unwrap()
}

/// A copy over all threads into fresh memory, as a permutation's result is fresh.
fn copy(from: &[Complex64]) -> Vec<Complex64> {
    from.par_iter().with_min_len(1 << 16).copied().collect()
}

fn permute(c: &mut Criterion) {
    let mut group = c.benchmark_group("permute 2^24 complex entries");
    group.sample_size(10);
    let mut order: Vec<usize> = (0..24).collect();
    order.shuffle(&mut ChaCha8Rng::seed_from_u64(0));
    for (name, dims, order) in
        [("24 axes", vec![2; 24], order), ("two axes of 4096", vec![4096; 2], vec![1, 0])]
    {
        let a = entries(&dims);
        let want = a.view().permuted_axes(IxDyn(&order));
        assert!(permuted(&a.view(), &order) == want, "{name}");
        group.bench_function(format!("{name}, moved"), |b| {
            b.iter(|| black_box(permuted(&a.view(), &order)));
        });
        group.bench_function(format!("{name}, copied"), |b| {
            b.iter(|| black_box(copy(a.as_slice().unwrap())));
        });
    }
    group.finish();
}

criterion_group!(benches, permute);
criterion_main!(benches);
