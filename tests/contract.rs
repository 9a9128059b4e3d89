//! Plans run: against the definition, against NumPy, against exact counts.

use lierne::block::{Block, Entries, IsometryTable};
use lierne::contract::{Outcome, Problem, Request, solve};
use lierne::order::{self, Plan, Shape};
use lierne::tensor::{Dense, Label};
use lierne::watch::Silent;
use ndarray::{ArrayD, IxDyn};
use num_complex::Complex64;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::sync::Arc;

fn block(data: Dense) -> Arc<Block> {
    let dims = data.shape().to_vec();
    let table = IsometryTable::unknown(dims.len());
    Arc::new(Block::lazy("test", dims, table, None, move || Entries::Dense(data.clone())))
}

fn random_dense(dims: &[usize], complex: bool, rng: &mut ChaCha8Rng) -> Dense {
    if complex {
        Dense::Complex(ArrayD::from_shape_simple_fn(IxDyn(dims), || {
            Complex64::new(rng.random_range(-1.0..1.0), rng.random_range(-1.0..1.0))
        }))
    } else {
        Dense::Real(ArrayD::from_shape_simple_fn(IxDyn(dims), || rng.random_range(-1.0..1.0)))
    }
}

/// A random problem: labels of sizes 1 to 4, each on one to four tensors, perhaps twice on
/// one, some open.
fn random_problem(seed: u64, complex: bool) -> Problem {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let n = rng.random_range(1..=6usize);
    let mut tensors: Vec<Vec<Label>> = vec![Vec::new(); n];
    let mut sizes = Vec::new();
    let mut open = Vec::new();
    for l in 0..rng.random_range(1..=8u32) {
        let label = Label::new(l);
        sizes.push(rng.random_range(1..=4u64));
        for _ in 0..rng.random_range(1..=4usize) {
            let t = rng.random_range(0..n);
            if tensors[t].len() < 5 {
                tensors[t].push(label);
            }
        }
        if tensors.iter().any(|t| t.contains(&label)) && rng.random_bool(0.35) {
            open.push(label);
        }
    }
    let blocks = tensors
        .iter()
        .map(|t| {
            let dims: Vec<usize> = t.iter().map(|l| sizes[l.index()] as usize).collect();
            let one_is_complex = complex && rng.random_bool(0.7);
            block(random_dense(&dims, one_is_complex, &mut rng))
        })
        .collect();
    Problem { shape: Shape { sizes, tensors, open }, blocks }
}

fn random_plan(problem: &Problem, seed: u64) -> Plan {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let n = problem.shape.tensors.len() as u32;
    let mut live: Vec<u32> = (0..n).collect();
    let mut steps = Vec::new();
    while live.len() > 1 {
        let a = live.swap_remove(rng.random_range(0..live.len()));
        let b = live.swap_remove(rng.random_range(0..live.len()));
        live.push(n + steps.len() as u32);
        steps.push((a, b));
    }
    let mut sliced = Vec::new();
    for l in used(&problem.shape) {
        if rng.random_bool(0.2) {
            sliced.push(Label::new(l as u32));
        }
    }
    Plan { steps, sliced }
}

/// The definition: a sum over all values of all labels.
fn slow(problem: &Problem) -> ArrayD<Complex64> {
    let shape = &problem.shape;
    let arrays: Vec<ArrayD<Complex64>> =
        problem.blocks.iter().map(|b| b.entries().to_dense().to_complex()).collect();
    let dims: Vec<usize> = shape.open.iter().map(|l| shape.sizes[l.index()] as usize).collect();
    let mut out = ArrayD::zeros(IxDyn(&dims));
    let total: u64 = used(shape).iter().map(|&l| shape.sizes[l]).product();
    let mut value = vec![0usize; shape.sizes.len()];
    for k in 0..total {
        let mut left = k;
        for l in used(shape) {
            value[l] = (left % shape.sizes[l]) as usize;
            left /= shape.sizes[l];
        }
        let at = |labels: &[Label]| labels.iter().map(|l| value[l.index()]).collect::<Vec<_>>();
        let product: Complex64 =
            shape.tensors.iter().zip(&arrays).map(|(t, a)| a[IxDyn(&at(t))]).product();
        out[IxDyn(&at(&shape.open))] += product;
    }
    out
}

fn used(shape: &Shape) -> Vec<usize> {
    (0..shape.sizes.len())
        .filter(|&l| shape.tensors.iter().any(|t| t.iter().any(|x| x.index() == l)))
        .collect()
}

fn value(outcome: &Outcome) -> ArrayD<Complex64> {
    outcome.tensor.data().to_complex() * Complex64::from(10f64.powf(outcome.log10_scale))
}

#[test]
fn random_networks_agree_with_the_definition_and_cost_what_the_plan_says() {
    let mut sliced = 0;
    for seed in 0..300 {
        let problem = random_problem(seed, seed % 2 == 1);
        let plan = random_plan(&problem, seed + 5000);
        let got = solve(&problem, &plan, &Request::default(), &Silent)
            .unwrap_or_else(|e| panic!("seed {seed}: {e}"));
        let want = slow(&problem);
        let found = value(&got);
        assert_eq!(found.shape(), want.shape(), "seed {seed}");
        let scale = want.iter().map(|x| x.norm()).fold(1e-3, f64::max);
        let off = found.iter().zip(&want).map(|(x, y)| (x - y).norm()).fold(0.0, f64::max);
        assert!(off < 1e-12 * scale, "seed {seed}: off by {off:e}");
        let price = order::cost(&problem.shape, &plan).unwrap();
        assert_eq!(Some(got.multiply_adds), price.multiply_adds, "seed {seed}");
        sliced += usize::from(price.slices > 1);
        if seed % 2 == 0 {
            assert!(matches!(got.tensor.data(), Dense::Real(_)), "real input stays real");
        }
    }
    assert!(sliced > 100, "only {sliced} plans were sliced");
}
