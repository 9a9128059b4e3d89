//! How near does a step come to the backend's own matrix product of the same sizes?

use criterion::{Criterion, criterion_group, criterion_main};
use faer::linalg::matmul::matmul;
use faer::{Accum, Mat, Par};
use lierne::block::{Block, Entries, IsometryTable};
use lierne::contract::{Kind, Problem, Request, solve};
use lierne::order::{Plan, Shape};
use lierne::tensor::{Dense, Label};
use lierne::watch::Silent;
use ndarray::{ArrayD, IxDyn};
use num_complex::Complex64;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::hint::black_box;
use std::sync::Arc;

fn block(dims: &[usize], rng: &mut ChaCha8Rng) -> Arc<Block> {
    let data = Dense::Complex(ArrayD::from_shape_simple_fn(IxDyn(dims), || {
        Complex64::new(rng.random_range(-1.0..1.0), rng.random_range(-1.0..1.0))
    }));
    let table = IsometryTable::unknown(dims.len());
    Arc::new(Block::lazy("bench", dims.to_vec(), table, None, move || Entries::Dense(data.clone())))
}

/// Two tensors with legs of size d: a of them on the left, k shared, b on the right, the
/// shared ones first on one and last on the other.
fn pair(d: usize, a: usize, k: usize, b: usize) -> Problem {
    let mut rng = ChaCha8Rng::seed_from_u64(1);
    let l = |i: usize| Label::new(i as u32);
    let left: Vec<Label> = (a..a + k).chain(0..a).map(l).collect();
    let right: Vec<Label> = (a + k..a + k + b).chain(a..a + k).map(l).collect();
    let open: Vec<Label> = (0..a).chain(a + k..a + k + b).map(l).collect();
    let blocks = vec![block(&vec![d; a + k], &mut rng), block(&vec![d; b + k], &mut rng)];
    let shape = Shape { sizes: vec![d as u64; a + k + b], tensors: vec![left, right], open };
    Problem { shape, blocks }
}

fn steps(c: &mut Criterion) {
    let request = Request { kind: Kind::Dense, ..Request::default() };
    let plan = Plan { steps: vec![(0, 1)], sliced: vec![] };
    for (name, d, a, k, b) in [
        ("1024 × 1024 × 1024", 1024, 1, 1, 1),
        ("4^5 × 4^5 × 4^5", 4, 5, 5, 5),
        ("6^4 × 6^4 × 6^4", 6, 4, 4, 4),
        ("32 × 32 × 32", 32, 1, 1, 1),
    ] {
        let problem = pair(d, a, k, b);
        let (m, n, s) = (d.pow(a as u32), d.pow(b as u32), d.pow(k as u32));
        let outcome = solve(&problem, &plan, &request, &Silent).unwrap();
        assert_eq!(outcome.multiply_adds, (m * n * s) as u128);
        let mut group = c.benchmark_group(name);
        group.sample_size(10);
        group.bench_function("step, leaves and result included", |bench| {
            bench.iter(|| black_box(solve(&problem, &plan, &request, &Silent).unwrap()));
        });
        let x = Mat::from_fn(m, s, |i, j| Complex64::new(i as f64, j as f64));
        let y = Mat::from_fn(s, n, |i, j| Complex64::new(j as f64, i as f64));
        let mut z = Mat::<Complex64>::zeros(m, n);
        group.bench_function("the backend's product", |bench| {
            bench.iter(|| {
                let one = Complex64::new(1.0, 0.0);
                matmul(z.as_mut(), Accum::Replace, x.as_ref(), y.as_ref(), one, Par::rayon(0));
                black_box(&z);
            });
        });
        group.finish();
    }
}

criterion_group!(benches, steps);
criterion_main!(benches);
