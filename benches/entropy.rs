//! What do entropies cost, by evidence and by size of network?
//!
//! `cargo bench --bench entropy` times the short ones; `cargo bench --bench entropy -- large`
//! runs each of the long ones once and prints seconds and peak memory.

use criterion::{Criterion, criterion_group};
use lierne::block::{self, Block};
use lierne::entropy::closure::{Turn, close};
use lierne::entropy::cut::Cutter;
use lierne::entropy::{Asker, Evidence, Intervals, Request, Wires};
use lierne::network::{Network, NetworkBuilder, Region};
use lierne::tensor::Label;
use lierne::tiling::{Growth, Rule, Tiling, grow};
use lierne::watch::Silent;
use rand::SeedableRng;
use rand::seq::SliceRandom;
use rand_chacha::ChaCha8Rng;
use std::hint::black_box;
use std::sync::Arc;
use std::time::Instant;

fn make(family: &str, dims: &[usize]) -> Arc<Block> {
    Arc::new(block::make(&block::Request::new(family, dims.to_vec())).expect(family))
}

/// A patch by vertex inflation; a block with one leg more than the tiles have sides has its
/// last leg fixed to |0⟩.
fn patch(polygon: u64, around: u64, rings: u32, block: &Arc<Block>) -> Network {
    let dim = block.dims()[0];
    let tiling = Tiling::new(polygon, around).unwrap();
    let patch = grow(&Growth::regular(tiling, rings, Rule::Vertex), 1 << 22).unwrap();
    let mut b = NetworkBuilder::new("patch");
    let mut labels: Vec<Option<Label>> = vec![None; patch.sides()];
    for n in 0..patch.sides() {
        if labels[n].is_none() {
            let label = b.label(&format!("s{n}"), dim);
            labels[n] = Some(label);
            if let Some(m) = patch.glued(n) {
                labels[m] = Some(label);
            }
        }
    }
    let zero = make("basis", &[dim]);
    let sides = polygon as usize;
    for tile in 0..patch.tiles() {
        let mut legs: Vec<Label> =
            labels[sides * tile..sides * (tile + 1)].iter().map(|l| l.unwrap()).collect();
        if block.dims().len() > sides {
            let bulk = b.label(&format!("k{tile}"), dim);
            b.tensor(None, &[bulk], &zero).unwrap();
            legs.push(bulk);
        }
        b.tensor(None, &legs, block).unwrap();
    }
    b.boundary(patch.boundary_numbers().iter().map(|&n| labels[n as usize].unwrap()));
    b.finish().unwrap()
}

fn unions(sites: usize, parts: usize, count: usize) -> Vec<Region> {
    let mut rng = ChaCha8Rng::seed_from_u64(0);
    let mut ends: Vec<usize> = (0..sites).collect();
    (0..count)
        .map(|_| {
            let (drawn, _) = ends.partial_shuffle(&mut rng, 2 * parts);
            let mut drawn = drawn.to_vec();
            drawn.sort_unstable();
            let mut flags = vec![false; sites];
            for pair in drawn.chunks(2) {
                flags[pair[0]..pair[1]].fill(true);
            }
            Region::new(flags, Vec::new())
        })
        .collect()
}

fn ring(n: usize, dim: usize) -> (Network, Region) {
    let block = make("four-leg", &[dim; 4]);
    let mut b = NetworkBuilder::new("ring");
    let bonds: Vec<Label> = (0..n).map(|k| b.label(&format!("x{k}"), dim)).collect();
    let mut outer = Vec::new();
    for k in 0..n {
        let a = b.label(&format!("a{k}"), dim);
        let c = b.label(&format!("b{k}"), dim);
        b.tensor(None, &[bonds[(k + 1) % n], a, c, bonds[k]], &block).unwrap();
        outer.extend([a, c]);
    }
    b.boundary(outer);
    let flags = (0..2 * n).map(|k| k % 2 == 0).collect();
    (b.finish().unwrap(), Region::new(flags, Vec::new()))
}

/// Minimal cut and closure of one interval of {4,5} patches of growing size.
fn one_interval(c: &mut Criterion) {
    let mut group = c.benchmark_group("cut and closure of one interval of {4,5}");
    group.sample_size(10);
    for rings in [2, 4, 5, 6, 7] {
        let network = patch(4, 5, rings, &make("four-leg", &[3; 4]));
        let wires = Wires::of(&network);
        let cutter = Cutter::new(&wires);
        let n = network.boundary().len();
        let inside = wires.inside(&Region::interval(n / 5, n / 3, n));
        let cut = cutter.cut(&inside);
        assert_eq!(close(&wires, &inside, Turn::RegionFirst, Some(&cut)).core_nodes(), 0);
        group.bench_function(format!("{} tensors", network.tensors()), |b| {
            b.iter(|| {
                let cut = cutter.cut(&inside);
                black_box(close(&wires, &inside, Turn::RegionFirst, Some(&cut)))
            });
        });
    }
    group.finish();
}

/// 1000 unions of five intervals on the two-ring network, no cache kept.
fn random_unions(c: &mut Criterion) {
    let network = patch(4, 5, 2, &make("four-leg", &[3; 4]));
    let wires = Wires::of(&network);
    let regions = unions(network.boundary().len(), 5, 1000);
    let mut group = c.benchmark_group("random unions");
    group.sample_size(10);
    group.bench_function("1000 of five intervals, {4,5} two rings, D = 3", |b| {
        b.iter(|| {
            let asker = Asker::new(&wires, Request::default());
            black_box(asker.ask_all(&regions, &Silent).unwrap().len())
        });
    });
    group.finish();
}

fn peak_mib() -> f64 {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    status
        .lines()
        .find_map(|l| l.strip_prefix("VmHWM:"))
        .and_then(|l| l.split_whitespace().next()?.parse::<f64>().ok())
        .map_or(f64::NAN, |kib| kib / 1024.0)
}

fn once(what: &str, run: impl FnOnce() -> String) {
    let start = Instant::now();
    let result = run();
    println!(
        "{what}: {:.2} s, peak so far {:.0} MiB; {result}",
        start.elapsed().as_secs_f64(),
        peak_mib()
    );
}

fn large() {
    let squares = patch(4, 5, 5, &make("four-leg", &[3; 4]));
    let wires = Wires::of(&squares);
    let pick = std::env::args().nth(2).filter(|a| !a.starts_with('-'));
    let wanted = |name: &str| pick.as_deref().is_none_or(|p| name.contains(p));
    if wanted("cuts") {
        once("all cuts, 3956 legs of {4,5}", || {
            let all = Intervals::of(&wires, false, &Silent).unwrap();
            assert!(all.is_planar());
            let averages = all.average_cuts(&wires);
            format!("average cut of half the boundary {:.4} nats", averages[1978])
        });
    }
    if wanted("unions") {
        let network = patch(4, 5, 2, &make("four-leg", &[3; 4]));
        let wires = Wires::of(&network);
        let regions = unions(network.boundary().len(), 5, 10_000);
        once("10000 unions of five intervals, {4,5} two rings, D = 3", || {
            let asker = Asker::new(&wires, Request::default());
            let answers = asker.ask_all(&regions, &Silent).unwrap();
            let count = |e| answers.iter().filter(|a| a.evidence == e).count();
            format!(
                "geometry {}, finite field {}, bounds {}",
                count(Evidence::Geometry),
                count(Evidence::FiniteField),
                count(Evidence::Bounds)
            )
        });
    }
    if wanted("core") {
        let (network, region) = ring(5, 6);
        once("six-level core of five, 7776 × 7776", || {
            let wires = Wires::of(&network);
            let a = Asker::new(&wires, Request::default()).ask(&region, &Silent).unwrap();
            format!("{:.6} legs by {}", a.entropy().unwrap() / 6f64.ln(), a.evidence)
        });
    }
    let stabilizer = |what: &str, network: &Network| {
        once(what, || {
            let wires = Wires::of(network);
            let all = Intervals::of(&wires, true, &Silent).unwrap();
            let averages = all.average_exact().unwrap();
            let n = all.sites();
            format!("average entropy of half the boundary {:.4} nats", averages[n / 2])
        });
    };
    if wanted("finite-1325") {
        let network = patch(5, 4, 4, &make("code-5-1-3", &[2; 6]));
        stabilizer("all intervals exact, 1325 legs of the pentagon code", &network);
    }
    if wanted("finite-4945") {
        let network = patch(5, 4, 5, &make("code-5-1-3", &[2; 6]));
        stabilizer("all intervals exact, 4945 legs of the pentagon code", &network);
    }
    if wanted("finite-3956") {
        stabilizer("all intervals exact, 3956 legs of {4,5}, D = 3", &squares);
    }
}

criterion_group!(short, one_interval, random_unions);

fn main() {
    if std::env::args().nth(1).as_deref() == Some("large") {
        large();
    } else {
        short();
        Criterion::default().configure_from_args().final_summary();
    }
}
