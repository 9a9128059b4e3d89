//! Plans run: against the definition, against NumPy, against exact counts.

#[path = "contract/algebras.rs"]
mod algebras;
#[path = "contract/counts.rs"]
mod counts;

use lierne::block::{Block, Entries, IsometryTable};
use lierne::contract::{
    ContractError, Kind, Outcome, Precision, Problem, Request, forecast, solve,
};
use lierne::order::{self, Plan, Shape};
use lierne::tensor::{Dense, Label};
use lierne::watch::{Silent, Watch};
use ndarray::{ArrayD, IxDyn};
use num_complex::Complex64;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::sync::Arc;
use std::sync::atomic::{AtomicU64, Ordering};

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

fn dense() -> Request {
    Request { kind: Kind::Dense, ..Request::default() }
}

/// A ladder of random tensors, wide enough for many slices: 2 × n sites, bonds of size 3,
/// one open leg at each end.
fn ladder(n: usize, sparse: bool) -> Problem {
    let mut rng = ChaCha8Rng::seed_from_u64(n as u64);
    let mut sizes = Vec::new();
    let mut label = |s: u64| {
        sizes.push(s);
        Label::new(sizes.len() as u32 - 1)
    };
    let along: Vec<[Label; 2]> = (0..=n).map(|_| [label(3), label(3)]).collect();
    let rungs: Vec<Label> = (0..n).map(|_| label(2)).collect();
    let mut tensors = Vec::new();
    let mut blocks = Vec::new();
    for i in 0..n {
        for (side, (&from, &to)) in along[i].iter().zip(&along[i + 1]).enumerate() {
            tensors.push(vec![from, rungs[i], to]);
            let Dense::Complex(mut a) = random_dense(&[3, 2, 3], true, &mut rng) else { continue };
            if sparse {
                for (k, x) in a.iter_mut().enumerate() {
                    if (k * 7 + i + side) % 5 > 1 {
                        *x = Complex64::default();
                    }
                }
            }
            blocks.push(block(Dense::Complex(a)));
        }
    }
    let open = vec![along[0][0], along[0][1], along[n][1], along[n][0]];
    Problem { shape: Shape { sizes, tensors, open }, blocks }
}

fn sweep(problem: &Problem, sliced: &[u32]) -> Plan {
    let n = problem.shape.tensors.len() as u32;
    let steps = (1..n).map(|t| (if t == 1 { 0 } else { n + t - 2 }, t)).collect();
    Plan { steps, sliced: sliced.iter().map(|&l| Label::new(l)).collect() }
}

#[test]
fn sparse_and_dense_agree_and_sparse_does_less() {
    for seed in 0..200 {
        let mut problem = random_problem(seed, seed % 2 == 1);
        // Two entries in three vanish.
        problem.blocks = problem
            .blocks
            .iter()
            .enumerate()
            .map(|(t, b)| {
                let mut a = b.entries().to_dense().to_complex();
                for (k, x) in a.iter_mut().enumerate() {
                    if !(k * k + t + seed as usize).is_multiple_of(3) {
                        *x = Complex64::default();
                    }
                }
                block(Dense::Complex(a))
            })
            .collect();
        let plan = random_plan(&problem, seed);
        let a = solve(&problem, &plan, &Request::default(), &Silent).unwrap();
        let b = solve(&problem, &plan, &dense(), &Silent).unwrap();
        let (x, y) = (value(&a), value(&b));
        let scale = y.iter().map(|v| v.norm()).fold(1e-3, f64::max);
        assert!(x.iter().zip(&y).all(|(p, q)| (p - q).norm() < 1e-12 * scale), "seed {seed}");
        assert_eq!(b.done, b.multiply_adds);
        assert_eq!(a.multiply_adds, b.multiply_adds);
        assert!(a.done <= b.done);
    }
    // A chain of four matrices with one entry a row each.
    let l = Label::new;
    let blocks = (0..4)
        .map(|t| {
            let entry =
                |i: usize, j: usize| if j == (i * 7 + t) % 150 { 1.0 + i as f64 } else { 0.0 };
            block(Dense::Real(ArrayD::from_shape_fn(IxDyn(&[150, 150]), |i| entry(i[0], i[1]))))
        })
        .collect();
    let tensors = (0..4).map(|t| vec![l(t), l(t + 1)]).collect();
    let shape = Shape { sizes: vec![150; 5], tensors, open: vec![l(0), l(4)] };
    let problem = Problem { shape, blocks };
    let plan = sweep(&problem, &[]);
    let a = solve(&problem, &plan, &Request::default(), &Silent).unwrap();
    let b = solve(&problem, &plan, &dense(), &Silent).unwrap();
    assert_eq!(value(&a), value(&b));
    assert_eq!((a.done, b.done), (3 * 150, 3 * 150 * 150 * 150));
}

#[test]
fn numpy_agrees() {
    let text = include_str!("data/contraction.json");
    let record: serde_json::Value = serde_json::from_str(text).unwrap();
    let number = |v: &serde_json::Value| match v.as_array() {
        Some(p) => Complex64::new(p[0].as_f64().unwrap(), p[1].as_f64().unwrap()),
        None => Complex64::from(v.as_f64().unwrap()),
    };
    let mut hyperedges = 0;
    for (n, case) in record["cases"].as_array().unwrap().iter().enumerate() {
        let sizes: Vec<u64> =
            case["sizes"].as_array().unwrap().iter().map(|v| v.as_u64().unwrap()).collect();
        let (inputs, output) = case["einsum"].as_str().unwrap().split_once("->").unwrap();
        let labels = |s: &str| s.bytes().map(|b| Label::new(u32::from(b - b'a'))).collect();
        let tensors: Vec<Vec<Label>> = inputs.split(',').map(labels).collect();
        let blocks = tensors
            .iter()
            .zip(case["tensors"].as_array().unwrap())
            .map(|(t, values)| {
                let dims: Vec<usize> = t.iter().map(|l| sizes[l.index()] as usize).collect();
                let values = values.as_array().unwrap().iter().map(number).collect();
                block(Dense::Complex(ArrayD::from_shape_vec(IxDyn(&dims), values).unwrap()))
            })
            .collect();
        let holders = |l: u32| tensors.iter().filter(|t| t.contains(&Label::new(l))).count();
        hyperedges += usize::from((0..sizes.len() as u32).any(|l| holders(l) > 2));
        let problem = Problem { shape: Shape { sizes, tensors, open: labels(output) }, blocks };
        let want: Vec<Complex64> = case["result"].as_array().unwrap().iter().map(number).collect();
        for seed in 0..3 {
            let plan = random_plan(&problem, seed);
            for request in [Request::default(), dense()] {
                let got = solve(&problem, &plan, &request, &Silent).unwrap();
                // All entries are small integers: nothing is rounded on the way.
                assert_eq!(value(&got).into_raw_vec_and_offset().0, want, "case {n}, plan {seed}");
            }
        }
    }
    assert!(hyperedges > 20, "only {hyperedges} cases hold hyperedges");
}

#[test]
fn same_bits_on_any_number_of_threads_and_close_to_the_unsliced_value() {
    for sparse in [false, true] {
        let problem = ladder(6, sparse);
        let plan = sweep(&problem, &[2, 5, 9, 15, 16]);
        let on = |threads| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            pool.install(|| solve(&problem, &plan, &Request::default(), &Silent).unwrap())
        };
        let one = on(1);
        assert_eq!(one.slices, 3 * 3 * 3 * 2 * 2);
        assert_eq!(one, on(3));
        let whole = solve(&problem, &sweep(&problem, &[]), &dense(), &Silent).unwrap();
        let (x, y) = (value(&one), value(&whole));
        let scale = y.iter().map(|v| v.norm()).fold(0.0, f64::max);
        assert!(x.iter().zip(&y).all(|(p, q)| (p - q).norm() < 1e-12 * scale));
    }
}

#[test]
fn single_precision_is_close() {
    let problem = ladder(5, false);
    let plan = sweep(&problem, &[4]);
    let request = Request { precision: Precision::Single, ..dense() };
    let a = value(&solve(&problem, &plan, &request, &Silent).unwrap());
    let b = value(&solve(&problem, &plan, &dense(), &Silent).unwrap());
    let scale = b.iter().map(|v| v.norm()).fold(0.0, f64::max);
    let off = a.iter().zip(&b).map(|(x, y)| (x - y).norm()).fold(0.0, f64::max) / scale;
    assert!(off < 1e-5 && off > 1e-12, "{off:e}");
}

#[test]
fn a_plan_is_sliced_until_it_fits_the_memory_or_refused() {
    // A ring of four 3-leg tensors with bonds of size 40 and small open legs.
    let l = Label::new;
    let mut rng = ChaCha8Rng::seed_from_u64(4);
    let sizes = vec![40, 40, 40, 40, 2, 2, 2, 2];
    let tensors: Vec<Vec<Label>> = (0..4).map(|i| vec![l(i), l(4 + i), l((i + 1) % 4)]).collect();
    let blocks: Vec<Arc<Block>> =
        (0..4).map(|_| block(random_dense(&[40, 2, 40], true, &mut rng))).collect();
    let shape = Shape { sizes, tensors, open: (4..8).map(l).collect() };
    let problem = Problem { shape, blocks };
    let plan = Plan { steps: vec![(0, 2), (1, 3), (4, 5)], sliced: vec![] };
    let free = forecast(&problem, &plan, &dense()).unwrap();
    assert_eq!(free.slices, 1);
    let want = value(&solve(&problem, &plan, &dense(), &Silent).unwrap());
    let tight = Request { memory: Some(free.bytes / 20), ..dense() };
    let ahead = forecast(&problem, &plan, &tight).unwrap();
    assert!(ahead.slices > 1 && ahead.bytes <= free.bytes / 20);
    let got = solve(&problem, &plan, &tight, &Silent).unwrap();
    assert_eq!((got.peak_bytes, got.slices), (ahead.bytes, ahead.slices));
    let price = order::cost(&problem.shape, &ahead.plan).unwrap();
    assert_eq!(Some(got.multiply_adds), price.multiply_adds);
    let scale = want.iter().map(|v| v.norm()).fold(0.0, f64::max);
    assert!(value(&got).iter().zip(&want).all(|(x, y)| (x - y).norm() < 1e-12 * scale));
    let hopeless = Request { memory: Some(1000), ..dense() };
    match solve(&problem, &plan, &hopeless, &Silent) {
        Err(ContractError::Memory { needed, limit: 1000 }) => {
            assert!(needed > 1000 && needed < free.bytes);
        }
        other => panic!("{other:?}"),
    }
}

/// Asks to stop from the n-th question on.
struct StopAfter(AtomicU64, u64);
impl Watch for StopAfter {
    fn stop(&self) -> bool {
        self.0.fetch_add(1, Ordering::Relaxed) >= self.1
    }
}

#[test]
fn a_stopped_run_goes_on_from_its_checkpoint_with_the_same_bits() {
    let problem = ladder(6, false);
    let plan = sweep(&problem, &[2, 5, 9, 15]);
    let whole = solve(&problem, &plan, &dense(), &Silent).unwrap();
    let folder = tempfile::tempdir().unwrap();
    let request = Request { checkpoint: Some(folder.path().to_owned()), ..dense() };
    let steps = plan.steps.len() as u64;
    let mut last = 0;
    for round in 1.. {
        // Rounds grow, so that the run ends.
        match solve(&problem, &plan, &request, &StopAfter(AtomicU64::new(0), 4 * round * steps)) {
            Err(ContractError::Stopped { done, slices: 54 }) => {
                assert!(done >= last, "{done} of 54 after {last}");
                last = done;
            }
            Ok(end) => {
                assert!(last > 10, "stopped after {last} slices only");
                assert_eq!(
                    (end.tensor, end.log10_scale),
                    (whole.tensor.clone(), whole.log10_scale)
                );
                assert!(end.done < whole.done, "{} multiply-adds done again", end.done);
                break;
            }
            Err(other) => panic!("{other}"),
        }
    }
    // Everything is there: nothing is done any more.
    let again = solve(&problem, &plan, &request, &Silent).unwrap();
    assert_eq!((again.done, again.tensor), (0, whole.tensor));
    // Another plan is another computation.
    let other = sweep(&problem, &[2, 5, 9, 16]);
    let e = solve(&problem, &other, &request, &Silent).unwrap_err();
    assert!(matches!(e, ContractError::OtherCheckpoint { .. }), "{e}");
    let mut changed = problem.clone();
    changed.blocks.swap(0, 2);
    let e = solve(&changed, &plan, &request, &Silent).unwrap_err();
    assert!(matches!(e, ContractError::OtherCheckpoint { .. }), "{e}");
}

#[test]
fn a_damaged_checkpoint_and_a_place_that_takes_none_are_told() {
    let problem = ladder(3, false);
    let plan = sweep(&problem, &[2]);
    let folder = tempfile::tempdir().unwrap();
    let request = Request { checkpoint: Some(folder.path().to_owned()), ..dense() };
    solve(&problem, &plan, &request, &Silent).unwrap();
    let file = std::fs::read_dir(folder.path()).unwrap().next().unwrap().unwrap().path();
    let mut bytes = std::fs::read(&file).unwrap();
    let end = bytes.len() - 3;
    bytes[end] ^= 1;
    std::fs::write(&file, bytes).unwrap();
    let e = solve(&problem, &plan, &request, &Silent).unwrap_err();
    assert!(e.to_string().contains("its checksum does not fit"), "{e}");
    // A file where the folder should be.
    let request = Request { checkpoint: Some(file.clone()), ..dense() };
    let e = solve(&problem, &plan, &request, &Silent).unwrap_err();
    assert!(e.to_string().contains(&*file.to_string_lossy()), "{e}");
}

#[test]
fn bad_problems_are_named() {
    let problem = ladder(2, false);
    let plan = sweep(&problem, &[]);
    let mut few = problem.clone();
    few.blocks.pop();
    let e = solve(&few, &plan, &dense(), &Silent).unwrap_err();
    assert_eq!(e, ContractError::BlockCount { blocks: 3, tensors: 4 });
    let mut odd = problem.clone();
    odd.blocks[1] = block(Dense::Real(ArrayD::zeros(IxDyn(&[3, 3, 2]))));
    let e = solve(&odd, &plan, &dense(), &Silent).unwrap_err();
    let sentence = "tensor 1 has sizes [3, 2, 3] by its labels but its block has [3, 3, 2]";
    assert_eq!(e.to_string(), sentence);
    let mut nan = problem.clone();
    let mut a = ArrayD::zeros(IxDyn(&[3, 2, 3]));
    a[[1, 1, 1]] = f64::INFINITY;
    nan.blocks[2] = block(Dense::Real(a));
    for request in [dense(), Request::default()] {
        let e = solve(&nan, &plan, &request, &Silent).unwrap_err();
        assert_eq!(e, ContractError::NotFinite { tensor: 2, block: "test".into() });
    }
    let e = solve(&problem, &Plan { steps: vec![(0, 1)], sliced: vec![] }, &dense(), &Silent);
    assert!(matches!(e, Err(ContractError::Plan(_))));
    let mut idle = problem.clone();
    idle.shape.sizes.push(2);
    let e = solve(&idle, &sweep(&idle, &[idle.shape.sizes.len() as u32 - 1]), &dense(), &Silent);
    assert!(matches!(e, Err(ContractError::SlicedNowhere { .. })));
}
