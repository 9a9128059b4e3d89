//! Orders: prices against a slow count, methods against the proven optimum, plans as files.

#[path = "order_graphs/mod.rs"]
mod order_graphs;

use lierne::block::{Block, Entries, IsometryTable};
use lierne::contract;
use lierne::order::{
    self, Cost, Method, Objective, OrderError, Plan, Request, Shape, cost, search,
};
use lierne::tensor::{Dense, Label};
use lierne::watch::{Silent, Watch};
use ndarray::{ArrayD, IxDyn};
use order_graphs as graphs;
use proptest::prelude::*;
use std::collections::BTreeSet;
use std::sync::Arc;
use std::sync::atomic::{AtomicUsize, Ordering};

/// The convention of `Cost` once more, with sets of names and nothing clever.
fn slow_cost(shape: &Shape, plan: &Plan) -> (u128, u128, usize) {
    let sliced: BTreeSet<Label> = plan.sliced.iter().copied().collect();
    let open: BTreeSet<Label> = shape.open.iter().copied().collect();
    let mut live: Vec<Option<BTreeSet<Label>>> = shape
        .tensors
        .iter()
        .map(|t| Some(t.iter().copied().filter(|l| !sliced.contains(l)).collect()))
        .collect();
    let size = |s: &BTreeSet<Label>| {
        s.iter().map(|l| u128::from(shape.sizes[l.index()])).product::<u128>()
    };
    let needed = |live: &[Option<BTreeSet<Label>>], l: &Label, but: usize| {
        open.contains(l)
            || live
                .iter()
                .enumerate()
                .any(|(t, s)| t != but && s.as_ref().is_some_and(|s| s.contains(l)))
    };
    for t in 0..live.len() {
        let set = live[t].clone().unwrap();
        live[t] = Some(set.into_iter().filter(|l| needed(&live, l, t)).collect());
    }
    let alive = |live: &[Option<BTreeSet<Label>>]| live.iter().flatten().map(size).sum::<u128>();
    let (mut adds, mut peak, mut widest) = (0, alive(&live), 0);
    for &(a, b) in &plan.steps {
        let before = alive(&live);
        let x = live[a as usize].take().unwrap();
        let y = live[b as usize].take().unwrap();
        let union: BTreeSet<Label> = x.union(&y).copied().collect();
        widest = widest.max(union.len());
        adds += size(&union);
        let result: BTreeSet<Label> =
            union.into_iter().filter(|l| needed(&live, l, usize::MAX)).collect();
        peak = peak.max(before + size(&result));
        live.push(Some(result));
    }
    let slices: u128 = plan.sliced.iter().map(|l| u128::from(shape.sizes[l.index()])).product();
    (adds * slices, peak, widest)
}

/// The fewest multiply-adds over all orders, by trying every pair again and again.
fn fewest(shape: &Shape, steps: &mut Vec<(u32, u32)>, alive: &[u32], best: &mut u128) {
    if alive.len() == 1 {
        let plan = Plan { steps: steps.clone(), sliced: Vec::new() };
        *best = (*best).min(slow_cost(shape, &plan).0);
        return;
    }
    for i in 0..alive.len() {
        for j in i + 1..alive.len() {
            let (a, b) = (alive[i], alive[j]);
            let mut rest: Vec<u32> = alive.iter().copied().filter(|&t| t != a && t != b).collect();
            rest.push((shape.tensors.len() + steps.len()) as u32);
            steps.push((a, b));
            fewest(shape, steps, &rest, best);
            steps.pop();
        }
    }
}

fn request(method: Method, work: u64, seed: u64) -> Request {
    Request { method, work, seed, objective: Objective::MultiplyAdds, ..Request::default() }
}

fn agree(shape: &Shape, plan: &Plan, c: &Cost) {
    let (adds, peak, widest) = slow_cost(shape, plan);
    assert_eq!((c.multiply_adds, c.peak_elements, c.widest_step), (Some(adds), Some(peak), widest));
}

/// Any shape: labels on up to four tensors or twice on one, any of them open, sizes from 1.
fn any_shape() -> impl Strategy<Value = Shape> {
    (1usize..9, 0usize..14).prop_flat_map(|(n, labels)| {
        let label = (1u64..4, proptest::collection::vec(0..n, 1..4), any::<bool>(), 0..6u8);
        proptest::collection::vec(label, labels).prop_map(move |labels| {
            let mut tensors = vec![Vec::new(); n];
            let (mut sizes, mut open) = (Vec::new(), Vec::new());
            for (l, (size, held, _, dice)) in labels.into_iter().enumerate() {
                sizes.push(size);
                for t in held {
                    tensors[t].push(Label::new(l as u32));
                }
                if dice == 0 {
                    open.push(Label::new(l as u32));
                }
            }
            Shape::new(sizes, tensors, open).expect("a valid shape")
        })
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 150, ..ProptestConfig::default() })]

    #[test]
    fn every_method_gives_a_valid_plan_whose_price_the_slow_count_confirms(
        shape in any_shape(), seed in 0u64..1000,
    ) {
        for method in Method::ALL {
            let found = search(&shape, &request(method, 20_000, seed), &Silent).unwrap();
            prop_assert_eq!(found.cost, cost(&shape, &found.plan).unwrap());
            agree(&shape, &found.plan, &found.cost);
            prop_assert!(found.widest_step_bound <= found.cost.widest_step);
        }
    }

    #[test]
    fn the_executor_counts_what_the_plan_says(shape in any_shape(), seed in 0u64..1000) {
        let found = search(&shape, &request(Method::Greedy, 2_000, seed), &Silent).unwrap();
        let mut plan = found.plan;
        if let Some(l) = (0..shape.sizes.len() as u32).map(Label::new).nth(seed as usize % 5) {
            plan.sliced.push(l);
        }
        let price = cost(&shape, &plan).unwrap();
        let blocks = shape.tensors.iter().map(|t| {
            let dims: Vec<usize> = t.iter().map(|l| shape.sizes[l.index()] as usize).collect();
            let array = ArrayD::from_elem(IxDyn(&dims), 0.5);
            let table = IsometryTable::unknown(dims.len());
                Arc::new(Block::lazy("half", dims, table, None, move || Entries::Dense(Dense::Real(array.clone()))))
        }).collect();
        let problem = contract::Problem { shape: shape.clone(), blocks };
        let outcome =
            contract::solve(&problem, &plan, &contract::Request::default(), &Silent).unwrap();
        prop_assert_eq!(Some(outcome.multiply_adds), price.multiply_adds);
    }
}

#[test]
fn the_exhaustive_method_meets_a_search_of_all_trees() {
    for seed in 0..12 {
        let shape = graphs::random(5 + seed as usize % 2, 4, 5, seed);
        let mut best = u128::MAX;
        let all: Vec<u32> = (0..shape.tensors.len() as u32).collect();
        fewest(&shape, &mut Vec::new(), &all, &mut best);
        let found = search(&shape, &request(Method::Exhaustive, 1 << 30, 0), &Silent).unwrap();
        assert_eq!(found.cost.multiply_adds, Some(best), "seed {seed}");
        assert!(found.optimal);
    }
}

#[test]
fn an_outer_product_is_taken_where_it_is_best() {
    // a(i), b(j), c(i,j,k) with i = j = 10, k = 1000: joining a and b first is best.
    let l = Label::new;
    let shape = Shape::new(
        vec![10, 10, 1000],
        vec![vec![l(0)], vec![l(1)], vec![l(0), l(1), l(2)]],
        vec![l(2)],
    )
    .unwrap();
    let found = search(&shape, &Request::default(), &Silent).unwrap();
    assert_eq!(found.cost.multiply_adds, Some(100 + 100_000));
}

#[test]
fn named_graphs_reach_their_proven_optima_by_the_exhaustive_method() {
    for (name, (n, edges), largest, adds) in graphs::named() {
        let shape = graphs::bonds(n, &edges, 2);
        let found = search(&shape, &request(Method::Exhaustive, 1 << 40, 0), &Silent).unwrap();
        assert_eq!(found.cost.multiply_adds, Some(adds), "{name}");
        assert!(found.widest_step_bound <= found.cost.widest_step, "{name}");
        let small =
            Request { objective: Objective::Size, ..request(Method::Exhaustive, 1 << 40, 0) };
        let found = search(&shape, &small, &Silent).unwrap();
        assert_eq!(found.cost.log2_largest_tensor, largest, "{name}");
    }
}

#[test]
fn named_graphs_come_within_five_percent_without_the_exhaustive_method() {
    for (name, (n, edges), _, adds) in graphs::named() {
        let shape = graphs::bonds(n, &edges, 2);
        let heuristic = Request { exhaustive: 0, ..request(Method::Portfolio, 4_000_000, 1) };
        let found = search(&shape, &heuristic, &Silent).unwrap();
        let got = found.cost.multiply_adds.unwrap();
        assert!(got >= adds && got * 100 <= adds * 105, "{name}: {got} against {adds}");
    }
}

#[test]
fn the_same_seed_gives_the_same_plan_whatever_the_threads() {
    for (n, edges) in [graphs::lattice(&[6, 6], false), graphs::regular(40, 3, 5)] {
        let shape = graphs::bonds(n, &edges, 2);
        let plans: Vec<Plan> = [1, 2, 3]
            .into_iter()
            .map(|threads| {
                let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
                let ask = Request { work: 2_000_000, seed: 7, slices: 16, ..Request::default() };
                pool.install(|| search(&shape, &ask, &Silent).unwrap().plan)
            })
            .collect();
        assert_eq!(plans[0], plans[1]);
        assert_eq!(plans[0], plans[2]);
    }
}

#[test]
fn grids_need_no_tensor_larger_than_their_side() {
    for n in 2..=8 {
        let (v, edges) = graphs::lattice(&[n, n], false);
        let ask = Request { work: 5_000_000, objective: Objective::Size, ..Request::default() };
        let found = search(&graphs::bonds(v, &edges, 2), &ask, &Silent).unwrap();
        // Two halves, then quarters: n labels for even n. For odd n the larger quarter needs
        // one more, and no order of 3x3 or 5x5 does with less: a part between a third and
        // two thirds of the 5x5 grid has a border of 5 only if it is two or three full rows.
        let least = (n + if n > 2 { n % 2 } else { 0 }) as f64;
        assert_eq!(found.cost.log2_largest_tensor, least, "{n}");
    }
}

#[test]
fn copies_of_a_part_and_scalars_are_ordered_and_joined() {
    let l = Label::new;
    let mut tensors = vec![Vec::new(), Vec::new()];
    let mut sizes = Vec::new();
    for _ in 0..3 {
        let at = sizes.len() as u32;
        sizes.extend([2, 3, 4, 5]);
        tensors.push(vec![l(at), l(at + 1), l(at + 3)]);
        tensors.push(vec![l(at + 1), l(at + 2)]);
        tensors.push(vec![l(at + 2), l(at)]);
    }
    let shape = Shape::new(sizes, tensors, vec![l(3), l(7), l(11)]).unwrap();
    let found = search(&shape, &Request::default(), &Silent).unwrap();
    agree(&shape, &found.plan, &found.cost);
    assert!(found.optimal);
}

#[test]
fn a_sliced_plan_fits_its_memory_and_costs_little_more() {
    let (n, edges) = graphs::lattice(&[8, 8], true);
    let shape = graphs::bonds(n, &edges, 2);
    let ask = Request { work: 20_000_000, ..Request::default() };
    let free = search(&shape, &ask, &Silent).unwrap();
    let memory = (free.cost.log2_peak_elements.exp2() / 64.0) as u64;
    let found = search(&shape, &Request { memory: Some(memory), ..ask }, &Silent).unwrap();
    agree(&shape, &found.plan, &found.cost);
    assert!(found.cost.peak_elements.unwrap() <= u128::from(memory));
    assert!(found.cost.slices > 1 && found.cost.slices <= 1 << 10, "{}", found.cost.slices);
    assert!(found.cost.log10_multiply_adds < free.cost.log10_multiply_adds + 0.6);
}

#[test]
fn a_memory_below_the_result_is_refused() {
    let l = Label::new;
    let shape = Shape::new(vec![100; 2], vec![vec![l(0)], vec![l(1)]], vec![l(0), l(1)]).unwrap();
    let found = search(&shape, &Request { memory: Some(1000), ..Request::default() }, &Silent);
    assert!(matches!(found, Err(OrderError::Memory { limit: 1000, .. })), "{found:?}");
}

#[test]
fn a_given_plan_is_never_made_worse() {
    let (n, edges) = graphs::regular(30, 3, 2);
    let shape = graphs::bonds(n, &edges, 2);
    let first = search(&shape, &request(Method::Greedy, 0, 0), &Silent).unwrap();
    let ask = Request { start: Some(first.plan), ..request(Method::Portfolio, 2_000_000, 0) };
    let second = search(&shape, &ask, &Silent).unwrap();
    assert!(second.cost.log10_multiply_adds <= first.cost.log10_multiply_adds);
}

/// Asks to stop after so many looks.
struct Impatient(AtomicUsize);
impl Watch for Impatient {
    fn stop(&self) -> bool {
        self.0.fetch_add(1, Ordering::Relaxed) > 3
    }
}

#[test]
fn a_search_that_is_stopped_gives_its_best_so_far() {
    let (n, edges) = graphs::lattice(&[12, 12], false);
    let shape = graphs::bonds(n, &edges, 2);
    let ask = Request { work: u64::MAX / 4, ..Request::default() };
    let found = search(&shape, &ask, &Impatient(AtomicUsize::new(0))).unwrap();
    assert!(found.cut_short);
    assert_eq!(found.cost, cost(&shape, &found.plan).unwrap());
}

#[test]
fn long_chains_and_stars_do_not_overflow_the_stack() {
    let n = 20_000;
    let chain: Vec<(usize, usize)> = (1..n).map(|v| (v - 1, v)).collect();
    let tree: Vec<(usize, usize)> = (1..n).map(|v| ((v - 1) / 3, v)).collect();
    for edges in [chain, tree] {
        let shape = graphs::bonds(n, &edges, 2);
        let ask = Request { work: 1_000_000, ..Request::default() };
        let found = search(&shape, &ask, &Silent).unwrap();
        // Four legs are the most of any tensor; fewest multiply-adds may take a little more.
        assert!(found.cost.log2_largest_tensor <= 6.0);
    }
}

#[test]
fn plans_are_kept_in_files_and_refused_elsewhere() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("plan.json");
    let (n, edges) = graphs::petersen();
    let shape = graphs::bonds(n, &edges, 2);
    let plan = search(&shape, &Request::default(), &Silent).unwrap().plan;
    order::save(&path, &shape, &plan).unwrap();
    assert_eq!(order::load(&path, &shape).unwrap(), plan);

    let other = graphs::bonds(n, &edges, 3);
    assert!(matches!(order::load(&path, &other), Err(OrderError::OtherShape { .. })));
    let text = std::fs::read_to_string(&path).unwrap();
    let broken = |text: String| {
        std::fs::write(&path, text).unwrap();
        order::load(&path, &shape).unwrap_err()
    };
    let newer = text.replace("\"lierne_plan\":1", "\"lierne_plan\":2");
    assert!(matches!(broken(newer), OrderError::Version { found: 2, .. }));
    assert!(matches!(broken(text[..text.len() / 2].into()), OrderError::Format { .. }));
    assert!(matches!(broken("{}".into()), OrderError::Format { .. }));
    let first = format!("[{},{}]", plan.steps[0].0, plan.steps[0].1);
    let twice = text.replacen(&first, "[0,0]", 1);
    assert!(matches!(broken(twice), OrderError::StepTensor { step: 0, .. }));
    assert!(matches!(
        order::load(&folder.path().join("none.json"), &shape),
        Err(OrderError::File { .. })
    ));
}

#[test]
fn the_bench_networks_are_what_their_recipes_make() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("networks/bench");
    for bench in graphs::bench_set::all() {
        let path = folder.join(format!("{}.json", bench.name));
        let text = std::fs::read_to_string(&path).unwrap_or_default();
        assert!(
            text == bench.json(),
            "{}: run `cargo test --test order write_the_bench_networks -- --ignored`",
            path.display()
        );
        let network = lierne::network::load(&path, &lierne::network::Limits::default()).unwrap();
        let read = Shape::of(&network);
        assert_eq!(read.tensors.len(), bench.tensors.len());
        assert_eq!(read.sizes.len(), bench.labels as usize);
    }
}

#[test]
#[ignore = "writes networks/bench"]
fn write_the_bench_networks() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("networks/bench");
    std::fs::create_dir_all(&folder).unwrap();
    for bench in graphs::bench_set::all() {
        std::fs::write(folder.join(format!("{}.json", bench.name)), bench.json()).unwrap();
    }
}

#[derive(serde::Deserialize)]
struct NumpyPath {
    name: String,
    sizes: Vec<u64>,
    tensors: Vec<Vec<u32>>,
    open: Vec<u32>,
    greedy: u128,
    optimal: Option<u128>,
}

/// Paths of NumPy's `einsum_path`, made and priced by `tests/outside/order_paths.py`.
#[test]
fn no_plan_is_dearer_than_the_paths_of_numpy() {
    let text = include_str!("data/order_paths.json");
    let record: Vec<NumpyPath> = serde_json::from_str(text).unwrap();
    assert!(record.len() > 80);
    for case in record {
        let list = |s: &Vec<u32>| s.iter().map(|&l| Label::new(l)).collect::<Vec<_>>();
        let shape =
            Shape::new(case.sizes, case.tensors.iter().map(list).collect(), list(&case.open))
                .unwrap();
        let ask = Request { work: 8_000_000, ..Request::default() };
        let ours = search(&shape, &ask, &Silent).unwrap().cost.multiply_adds.unwrap();
        assert!(ours <= case.greedy, "{}: {ours} against greedy {}", case.name, case.greedy);
        if let Some(optimal) = case.optimal {
            assert!(ours <= optimal, "{}: {ours} against optimal {optimal}", case.name);
        }
    }
}

/// Runs the program in the repository's folder.
fn program(words: &[&str]) -> (Option<i32>, String, String) {
    let out = std::process::Command::new(env!("CARGO_BIN_EXE_lierne"))
        .args(words)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .unwrap();
    let text = |b: Vec<u8>| String::from_utf8_lossy(&b).into_owned();
    (out.status.code(), text(out.stdout), text(out.stderr))
}

#[test]
fn the_program_finds_saves_refines_and_refuses_plans() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("plan.json");
    let plan = path.to_str().unwrap();
    let loop5 = "networks/loop-5.toml";
    let (code, out, err) = program(&["order", loop5, "--seconds", "1", "--json", "--save", plan]);
    assert_eq!(code, Some(0), "{out}{err}");
    let value: serde_json::Value = serde_json::from_str(&out).unwrap();
    for key in [
        "method",
        "log10_multiply_adds",
        "log2_peak_elements",
        "log2_largest_tensor",
        "widest_step",
        "slices",
        "sliced_labels",
        "steps",
    ] {
        assert!(!value[key].is_null(), "{key}: {out}");
    }
    assert_eq!(value["steps"].as_array().unwrap().len(), 4);

    let (code, out, err) = program(&["order", loop5, "--plan", plan, "--slices", "6", "--json"]);
    assert_eq!(code, Some(0), "{out}{err}");
    let sliced: serde_json::Value = serde_json::from_str(&out).unwrap();
    assert!(sliced["slices"].as_u64().unwrap() >= 6, "{out}");
    assert!(sliced["given"]["widest_step"].as_u64().is_some(), "{out}");

    let refused: [&[&str]; 5] = [
        &["order", "networks/loop-4.toml", "--plan", plan],
        &["order", loop5, "--method", "sorcery"],
        &["order", loop5, "--objective", "mix:-1"],
        &["order", loop5, "--seconds", "-1"],
        &["order", loop5, "--memory", "10KiB"],
    ];
    for words in refused {
        let (code, out, err) = program(words);
        assert_eq!((code, out.as_str()), (Some(2), ""), "{words:?}: {err}");
        assert!(err.lines().count() >= 1, "{words:?}: {err}");
    }
}

#[test]
fn the_program_compares_methods() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("orders");
    let words = ["order", "compare", "networks/loop-4.toml", "networks/bench/torus-8x8.json"];
    let more = ["--seconds", "0.05", "--seeds", "2", "--out", out.to_str().unwrap()];
    let (code, said, err) = program(&[&words[..], &more[..]].concat());
    assert_eq!(code, Some(0), "{said}{err}");
    let table = std::fs::read_to_string(out.join("orders.csv")).unwrap();
    assert!(table.lines().count() > 60, "{table}");
    assert!(table.lines().all(|l| l.split(',').count() == 15), "{table}");
    let page = std::fs::read_to_string(out.join("orders.html")).unwrap();
    assert!(page.contains("torus-8x8") && page.matches("<svg").count() >= 5);
}
