//! How close orders come to proven and published optima, and how they scale: the tables of
//! `benches/RESULTS.md`.
//!
//! `cargo bench --bench order_targets -- SECTION… [seconds=S]` with sections treewidth, named,
//! small, grids, tori, regular, scale, tiling,
//! slicing. Prints one line a case. Without a section it
//! does nothing, so that building and running all benches stays quick.
#![allow(missing_docs)]

#[path = "../tests/order_graphs/mod.rs"]
mod order_graphs;

use lierne::order::{Found, Method, Objective, Request, Shape, search};
use lierne::watch::Watch;
use order_graphs as graphs;
use std::time::Instant;

struct Clock(Instant);
impl Watch for Clock {
    fn seconds(&self) -> f64 {
        self.0.elapsed().as_secs_f64()
    }
}

/// The program's own rate: labels touched in a second.
const RATE: f64 = 8e7;

/// Seconds on the clock and seconds of processor time of a run.
#[derive(Clone, Copy)]
struct Spent(f64, f64);

impl std::fmt::Display for Spent {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{:.2} s (processors {:.2} s)", self.0, self.1)
    }
}

/// Processor seconds of this process, where the system tells.
fn processors() -> f64 {
    let stat = std::fs::read_to_string("/proc/self/stat").unwrap_or_default();
    let ticks: u64 = stat
        .rsplit(')')
        .next()
        .map(|rest| {
            rest.split_whitespace().skip(11).take(2).filter_map(|w| w.parse::<u64>().ok()).sum()
        })
        .unwrap_or(0);
    ticks as f64 / 100.0
}

fn run(shape: &Shape, request: &Request) -> (Found, Spent) {
    let clock = Clock(Instant::now());
    let before = processors();
    let found = search(shape, request, &clock).expect("an order");
    (found, Spent(clock.seconds(), processors() - before))
}

fn within(seconds: f64, seed: u64) -> Request {
    // What the program does with --seconds, but without a clock, so that a busy machine changes
    // no result.
    Request { seed, work: (seconds * RATE) as u64, ..Request::default() }
}

fn median(values: &mut [f64]) -> f64 {
    values.sort_by(f64::total_cmp);
    let n = values.len();
    (values[(n - 1) / 2] + values[n / 2]) / 2.0
}

fn main() {
    let words: Vec<String> = std::env::args().skip(1).collect();
    let asked = |name: &str| words.iter().any(|w| w == name);
    let seconds = words.iter().find_map(|w| w.strip_prefix("seconds=")?.parse().ok());
    let only = words.iter().find_map(|w| w.strip_prefix("only="));
    if asked("treewidth") {
        treewidth(seconds.unwrap_or(20.0), only);
    }
    if asked("named") {
        named(seconds.unwrap_or(2.0));
    }
    if asked("small") {
        small(seconds.unwrap_or(2.0));
    }
    if asked("grids") {
        grids(seconds.unwrap_or(10.0), false);
    }
    if asked("tori") {
        grids(seconds.unwrap_or(10.0), true);
    }
    if asked("regular") {
        regular(seconds.unwrap_or(10.0));
    }
    if asked("scale") {
        scale();
    }
    if asked("tiling") {
        large_tiling(seconds.unwrap_or(60.0));
    }
    if asked("slicing") {
        slicing(seconds.unwrap_or(10.0));
    }
}

fn data(name: &str) -> String {
    let path = format!("{}/tests/data/treewidth/{name}", env!("CARGO_MANIFEST_DIR"));
    std::fs::read_to_string(&path).unwrap_or_else(|e| panic!("{path}: {e}"))
}

fn treewidth(seconds: f64, only: Option<&str>) {
    let (mut exact, mut one_more, mut cases) = (0, 0, 0);
    for line in data("optimum.tsv").lines().skip(1) {
        let words: Vec<&str> = line.split('\t').collect();
        if only.is_some_and(|o| !o.split(',').any(|o| o == words[0])) {
            continue;
        }
        let least: usize = words[1].parse::<usize>().expect("a treewidth") + 1;
        let (n, edges) = graphs::read_gr(&data(&format!("{}.gr", words[0])));
        let (found, spent) = run(&graphs::factors(n, &edges), &within(seconds, 0));
        let above = found.cost.widest_step - least;
        cases += 1;
        exact += usize::from(above == 0);
        one_more += usize::from(above == 1);
        println!(
            "{} {n} labels {} tensors: widest step {} (optimum {least}, +{above}), bound {}, 2^{:.2} multiply-adds, {spent}",
            words[0],
            edges.len(),
            found.cost.widest_step,
            found.widest_step_bound,
            found.cost.log10_multiply_adds / std::f64::consts::LOG10_2,
        );
    }
    println!("treewidth: {exact} of {cases} exactly, {one_more} one more");
}

fn named(seconds: f64) {
    for (name, (n, edges), largest, adds) in graphs::named() {
        let shape = graphs::bonds(n, &edges, 2);
        let ask = Request { objective: Objective::MultiplyAdds, ..within(seconds, 0) };
        let (all, spent) = run(&shape, &Request { method: Method::Exhaustive, ..ask.clone() });
        let (size, _) = run(
            &shape,
            &Request { objective: Objective::Size, method: Method::Exhaustive, ..ask.clone() },
        );
        let (portfolio, _) = run(&shape, &Request { exhaustive: 0, ..ask });
        let got = portfolio.cost.multiply_adds.expect("a small count");
        println!(
            "{name}: {adds} multiply-adds known, exhaustive {} in {spent}, portfolio without it {got} ({:+.2} %); largest 2^{largest} known, exhaustive 2^{}",
            all.cost.multiply_adds.expect("a small count"),
            (got as f64 / adds as f64 - 1.0) * 100.0,
            size.cost.log2_largest_tensor,
        );
    }
}

fn small(seconds: f64) {
    let mut met = 0;
    let mut slowest = 0.0f64;
    for seed in 0..50u64 {
        let n = 8 + (seed % 13) as usize;
        let shape = graphs::random(n, n, 6, seed);
        let ask = Request { objective: Objective::MultiplyAdds, ..within(seconds, 0) };
        let (best, spent) = run(&shape, &Request { method: Method::Exhaustive, ..ask.clone() });
        slowest = slowest.max(spent.1);
        let (found, _) = run(&shape, &Request { exhaustive: 0, ..ask });
        let ratio = found.cost.multiply_adds.expect("fits") as f64
            / best.cost.multiply_adds.expect("fits") as f64;
        met += usize::from(ratio == 1.0);
        if ratio != 1.0 {
            println!("random network {seed} of {n} tensors: {ratio:.4} times the optimum");
        }
    }
    println!(
        "small: the portfolio without the exhaustive method meets the optimum on {met} of 50; slowest exhaustive run {slowest:.2} s of processor time"
    );
    // The dense worst case: all pairs bonded.
    for n in [16, 18, 20] {
        let (n, edges) = graphs::complete(n);
        let (found, spent) = run(
            &graphs::bonds(n, &edges, 2),
            &Request {
                method: Method::Exhaustive,
                objective: Objective::MultiplyAdds,
                ..within(60.0, 0)
            },
        );
        println!("complete graph of {n}: widest step {} in {spent}", found.cost.widest_step);
    }
    let (n, edges) = graphs::regular(20, 3, 1);
    let ask = Request {
        method: Method::Exhaustive,
        objective: Objective::MultiplyAdds,
        ..within(60.0, 0)
    };
    let (_, spent) = run(&graphs::bonds(n, &edges, 2), &ask);
    println!("random cubic graph of {n}: {spent}");
}

fn grids(seconds: f64, periodic: bool) {
    for n in [3, 4, 5, 6, 8, 10, 12, 15, 20, 25, 30] {
        let (v, edges) = graphs::lattice(&[n, n], periodic);
        let shape = graphs::bonds(v, &edges, 2);
        let (found, spent) = run(&shape, &within(seconds, 0));
        let (small, _) = run(&shape, &Request { objective: Objective::Size, ..within(seconds, 0) });
        println!(
            "{} {n}x{n}: largest tensor 2^{} by default, 2^{} where size is asked for; widest step {}, 2^{:.2} multiply-adds, {spent}",
            if periodic { "torus" } else { "grid" },
            found.cost.log2_largest_tensor,
            small.cost.log2_largest_tensor,
            found.cost.widest_step,
            found.cost.log10_multiply_adds / std::f64::consts::LOG10_2,
        );
    }
}

fn regular(seconds: f64) {
    for n in [100, 200, 300, 400] {
        let mut exponents: Vec<f64> = (0..20)
            .map(|seed| {
                let (v, edges) = graphs::regular(n, 3, seed);
                let ask = Request { objective: Objective::MultiplyAdds, ..within(seconds, seed) };
                let (found, _) = run(&graphs::bonds(v, &edges, 2), &ask);
                found.cost.log10_multiply_adds / std::f64::consts::LOG10_2 / n as f64
            })
            .collect();
        let mean = exponents.iter().sum::<f64>() / 20.0;
        let deviation = (exponents.iter().map(|e| (e - mean).powi(2)).sum::<f64>() / 19.0).sqrt();
        let middle = median(&mut exponents);
        println!(
            "random cubic graphs of {n}: log2 multiply-adds a vertex {mean:.4} ± {deviation:.4} over 20, median {middle:.4}, {:.4} to {:.4}",
            exponents[0], exponents[19]
        );
    }
}

fn scale() {
    for (name, side) in [("250 000", 500), ("1 000 000", 1000)] {
        let (v, edges) = graphs::lattice(&[side, side], false);
        let shape = graphs::bonds(v, &edges, 2);
        let ask = Request { method: Method::Greedy, work: 0, ..Request::default() };
        let (_, spent) = run(&shape, &ask);
        println!("greedy, grid of {name} tensors: {spent}");
    }
    for n in [125_000, 250_000, 500_000, 1_000_000] {
        let (v, edges) = graphs::looped_tree(n, n / 20, 1);
        let ask = Request { method: Method::Greedy, work: 0, ..Request::default() };
        let (_, spent) = run(&graphs::bonds(v, &edges, 2), &ask);
        println!("greedy, tree of {n} tensors with {} loops: {spent}", n / 20);
    }
}

fn large_tiling(seconds: f64) {
    for open in [false, true] {
        let shape = graphs::tiling(4, 5, 100_000, open);
        let (found, spent) = run(&shape, &within(seconds, 0));
        println!(
            "portfolio, tiling of {} tensors, boundary {}: 10^{:.1} multiply-adds, widest step {}, {spent}",
            shape.tensors.len(),
            if open { "open" } else { "summed" },
            found.cost.log10_multiply_adds,
            found.cost.widest_step,
        );
    }
}

fn slicing(seconds: f64) {
    let mut factors = Vec::new();
    for (name, shape) in graphs::bench_set::all().into_iter().map(|b| (b.name.clone(), b.shape())) {
        let ask = Request { objective: Objective::MultiplyAdds, ..within(seconds, 0) };
        let (free, _) = run(&shape, &ask);
        let (sliced, spent) = run(&shape, &Request { slices: 1 << 10, ..ask });
        let factor = 10f64.powf(sliced.cost.log10_multiply_adds - free.cost.log10_multiply_adds);
        println!(
            "{name}: {} slices, {factor:.2} times the multiply-adds, peak 2^{:.1} to 2^{:.1}, {spent}",
            sliced.cost.slices, free.cost.log2_peak_elements, sliced.cost.log2_peak_elements,
        );
        factors.push(factor);
    }
    println!(
        "slicing by 2^10: median factor {:.2} over {} networks",
        median(&mut factors),
        factors.len()
    );
}
