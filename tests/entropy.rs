//! Entropies: every kind of evidence against the full state and against each other.

use lierne::block::{self, Block};
use lierne::entropy::{Asker, Evidence, Request, Wires, of_region};
use lierne::linalg;
use lierne::network::{Network, NetworkBuilder, Region};
use lierne::tensor::Label;
use lierne::tiling::{Growth, Rule, Tiling, grow};
use lierne::watch::Silent;
use ndarray::Array2;
use num_complex::Complex64;
use rand::seq::SliceRandom;
use rand::{Rng, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::collections::BTreeMap;
use std::sync::Arc;

fn make(family: &str, dims: &[usize]) -> Arc<Block> {
    Arc::new(block::make(&block::Request::new(family, dims.to_vec())).expect(family))
}

/// The state on all open legs (boundary, then bulk) by joining the tensors' non-zero entries
/// one by one and summing the closed labels at the end: slow and obvious.
fn full_state(network: &Network) -> Vec<(Vec<usize>, Complex64)> {
    let mut terms: BTreeMap<BTreeMap<Label, usize>, Complex64> = BTreeMap::new();
    terms.insert(BTreeMap::new(), Complex64::new(1.0, 0.0));
    for t in network.tensor_ids() {
        let entries = network.block(t).entries().to_sparse();
        let mut next = BTreeMap::new();
        for (fixed, amplitude) in &terms {
            for (&place, &value) in entries.index().iter().zip(entries.value()) {
                let mut rest = place as usize;
                let mut joined = fixed.clone();
                let mut fits = true;
                for (&l, &d) in network.legs(t).iter().zip(entries.dims()).rev() {
                    let index = rest % d;
                    rest /= d;
                    fits &= *joined.entry(l).or_insert(index) == index;
                }
                if fits {
                    *next.entry(joined).or_insert(Complex64::ZERO) += amplitude * value;
                }
            }
        }
        terms = next;
    }
    let open: Vec<Label> = network.boundary().iter().chain(network.bulk()).copied().collect();
    let mut state: BTreeMap<Vec<usize>, Complex64> = BTreeMap::new();
    for (fixed, amplitude) in terms {
        let index: Vec<usize> = open.iter().map(|l| fixed[l]).collect();
        *state.entry(index).or_insert(Complex64::ZERO) += amplitude;
    }
    state.into_iter().collect()
}

/// Entropy in nats by the singular values of the full state; `None` for a zero state.
fn slow_entropy(network: &Network, inside: &[bool]) -> Option<f64> {
    let state = full_state(network);
    let mut rows: BTreeMap<Vec<usize>, usize> = BTreeMap::new();
    let mut columns: BTreeMap<Vec<usize>, usize> = BTreeMap::new();
    let mut entries = Vec::new();
    for (index, value) in state {
        let of = |side: bool| -> Vec<usize> {
            index.iter().zip(inside).filter(|(_, i)| **i == side).map(|(v, _)| *v).collect()
        };
        let next = rows.len();
        let r = *rows.entry(of(true)).or_insert(next);
        let next = columns.len();
        let c = *columns.entry(of(false)).or_insert(next);
        entries.push((r, c, value));
    }
    let mut m = Array2::<Complex64>::zeros((rows.len(), columns.len()));
    for (r, c, v) in entries {
        m[[r, c]] = v;
    }
    let s = linalg::singular_values(&m.view()).expect("finite");
    let norm: f64 = s.iter().map(|x| x * x).sum();
    if norm < 1e-20 {
        return None;
    }
    Some(s.iter().map(|x| x * x / norm).filter(|&p| p > 1e-15).map(|p| -p * p.ln()).sum())
}

/// n tensors in a ring, legs (next, A, B, previous) round it; region A.
fn ring(n: usize, dim: usize) -> Network {
    let block = make("four-leg", &[dim; 4]);
    let mut b = NetworkBuilder::new(format!("ring of {n}"));
    let bonds: Vec<Label> = (0..n).map(|k| b.label(&format!("x{k}"), dim)).collect();
    let mut outer = Vec::new();
    for k in 0..n {
        let a = b.label(&format!("a{k}"), dim);
        let c = b.label(&format!("b{k}"), dim);
        b.tensor(None, &[bonds[(k + 1) % n], a, c, bonds[k]], &block).unwrap();
        outer.extend([a, c]);
    }
    b.boundary(outer);
    b.finish().unwrap()
}

fn every_second(network: &Network) -> Region {
    Region::new((0..network.boundary().len()).map(|k| k % 2 == 0).collect(), Vec::new())
}

/// Values stated with the six-level tensor's construction: rings whose outer legs alternate.
#[test]
fn alternating_rings_have_the_stated_entropies() {
    let cases = [
        (3, 3, 2.0, Evidence::FiniteField),
        (3, 5, 2.0, Evidence::FiniteField),
        (3, 6, 2.803_78, Evidence::Contraction),
        (4, 3, 2.0, Evidence::FiniteField),
        (4, 5, 2.0, Evidence::FiniteField),
        (4, 6, 3.722_915, Evidence::Contraction),
    ];
    for (n, dim, legs, evidence) in cases {
        let network = ring(n, dim);
        let region = every_second(&network);
        let answer = of_region(&network, &region, &Request::default(), &Silent).unwrap();
        let got = answer.entropy().unwrap() / (dim as f64).ln();
        assert!((got - legs).abs() < 5e-6, "ring of {n}, dimension {dim}: {got} for {legs}");
        assert_eq!(answer.evidence, evidence, "ring of {n}, dimension {dim}");
        let dense = Request { finite_field: false, ..Request::default() };
        let again = of_region(&network, &region, &dense, &Silent).unwrap();
        assert!((again.entropy().unwrap() - answer.entropy().unwrap()).abs() < 1e-10);
    }
}

/// A patch of {polygon, around} grown by vertices, one block a tile, legs counter-clockwise.
fn patch(polygon: u64, around: u64, rings: u32, block: &Arc<Block>) -> Network {
    let dim = block.dims()[0];
    let tiling = Tiling::new(polygon, around).unwrap();
    let patch = grow(&Growth::regular(tiling, rings, Rule::Vertex), 1 << 20).unwrap();
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
    let mut at = 0;
    for tile in 0..patch.tiles() {
        let sides = patch.sides_of(tile as u32) as usize;
        let legs: Vec<Label> = labels[at..at + sides].iter().map(|l| l.unwrap()).collect();
        at += sides;
        b.tensor(None, &legs, block).unwrap();
    }
    b.boundary(patch.boundary_numbers().iter().map(|&n| labels[n as usize].unwrap()));
    b.finish().unwrap()
}

/// Unions of `parts` intervals with random ends.
fn unions(sites: usize, parts: usize, count: usize, rng: &mut ChaCha8Rng) -> Vec<Region> {
    (0..count)
        .map(|_| {
            let mut ends: Vec<usize> = (0..sites).collect();
            ends.shuffle(rng);
            ends.truncate(2 * parts);
            ends.sort_unstable();
            let mut flags = vec![false; sites];
            for pair in ends.chunks(2) {
                flags[pair[0]..pair[1]].fill(true);
            }
            Region::new(flags, Vec::new())
        })
        .collect()
}

#[test]
fn every_interval_of_the_six_level_squares_meets_the_cut() {
    for dim in [3, 6] {
        let network = patch(4, 5, 1, &make("four-leg", &[dim; 4]));
        assert_eq!((network.tensors(), network.boundary().len()), (13, 20));
        let wires = Wires::of(&network);
        let asker = Asker::new(&wires, Request::default());
        let intervals: Vec<Region> =
            (0..20).flat_map(|a| (1..20).map(move |l| Region::interval(a, l, 20))).collect();
        for (region, answer) in intervals.iter().zip(asker.ask_all(&intervals, &Silent).unwrap()) {
            let shown = region.show(&network);
            assert_eq!(answer.meets_cut(1e-9), Some(true), "{shown} at dimension {dim}");
        }
    }
}

#[test]
#[ignore = "looks at the time of the main job; run by hand with --release --nocapture"]
fn main_job() {
    for dim in [3, 4, 5, 6] {
        let network = patch(4, 5, 1, &make("four-leg", &[dim; 4]));
        let mut rng = ChaCha8Rng::seed_from_u64(0);
        let regions: Vec<Region> =
            (0..200).flat_map(|k| unions(20, 4 + k % 3, 1, &mut rng)).collect();
        let wires = Wires::of(&network);
        let asker = Asker::new(&wires, Request { log10_multiply_adds: 12.5, ..Request::default() });
        let start = std::time::Instant::now();
        let answers = asker.ask_all(&regions, &Silent).unwrap();
        let mut count: BTreeMap<String, usize> = BTreeMap::new();
        for a in &answers {
            let legs = |x: f64| x / (dim as f64).ln();
            let part = a.parts.iter().max_by_key(|p| p.tensors);
            let p = part.and_then(|p| p.price);
            *count
                .entry(format!(
                    "{:13} cut {:.3} [{:.4}, {:.4}] core {:?} rows {:.2} work {:.2} {:?}",
                    a.evidence.to_string(),
                    legs(a.cut.nats),
                    legs(a.lower),
                    legs(a.upper),
                    part.map(|p| p.tensors),
                    p.map_or(0.0, |p| p.log2_rows / (dim as f64).log2()),
                    p.map_or(0.0, |p| p.log10_multiply_adds()),
                    part.and_then(|p| p.reason),
                ))
                .or_default() += 1;
        }
        println!("dimension {dim}: {:?}", start.elapsed());
        for (k, v) in count {
            println!("{v:4} {k}");
        }
    }
}

/// A random connected network of mixed blocks with hyperedges, diagonals, summed labels and
/// bulk legs, small enough for its full state.
fn random_network(rng: &mut ChaCha8Rng) -> Network {
    loop {
        let dim = [2, 2, 3, 3, 4, 5, 6][rng.random_range(0..7)];
        let mut b = NetworkBuilder::new("random");
        let tensors = rng.random_range(1..5usize);
        let mut legs_of: Vec<(Arc<Block>, usize)> = Vec::new();
        for _ in 0..tensors {
            let (family, legs) = match rng.random_range(0..9) {
                0 if dim != 2 => ("four-leg", 4),
                1 | 2 if dim != 2 => ("four-leg", 4),
                3 => ("perfect", 3),
                4 => ("copy", rng.random_range(1..5)),
                5 => ("w", rng.random_range(2..5)),
                6 => ("random-state", 1),
                7 => ("identity", 2),
                8 if dim == 2 => ("perfect", 5),
                _ => ("perfect", 2),
            };
            let mut request = block::Request::new(family, vec![dim; legs]);
            request.seed = rng.random();
            if let Ok(block) = block::make(&request) {
                legs_of.push((Arc::new(block), legs));
            }
        }
        if legs_of.is_empty() {
            continue;
        }
        let slots: usize = legs_of.iter().map(|l| l.1).sum();
        // Slots are shuffled and cut into groups: single legs stay open or are summed, pairs
        // are bonds, larger groups hyperedges.
        let mut order: Vec<usize> = (0..slots).collect();
        order.shuffle(rng);
        let mut label_of = vec![Label::new(0); slots];
        let (mut boundary, mut bulk, mut summed) = (Vec::new(), Vec::new(), Vec::new());
        let mut at = 0;
        let mut closed = 0;
        while at < slots {
            let size = [1, 1, 1, 2, 2, 2, 2, 3][rng.random_range(0..8)].min(slots - at);
            let label = b.label(&format!("l{at}"), dim);
            for &slot in &order[at..at + size] {
                label_of[slot] = label;
            }
            at += size;
            let open = size == 1 || (size > 2 && rng.random_bool(0.3)) || rng.random_bool(0.05);
            if open {
                match rng.random_range(0..12) {
                    0 => bulk.push(label),
                    1 if size == 1 => summed.push(label),
                    _ => boundary.push(label),
                }
            } else {
                closed += 1;
            }
        }
        let open = boundary.len() + bulk.len();
        if boundary.is_empty() || (dim as f64).powi((open + closed) as i32) > 3e5 {
            continue;
        }
        let mut slot = 0;
        for (block, legs) in &legs_of {
            b.tensor(None, &label_of[slot..slot + legs], block).unwrap();
            slot += legs;
        }
        b.boundary(boundary);
        b.bulk(bulk);
        b.summed(summed);
        return b.finish().unwrap();
    }
}

/// Requests that open one road each, and the bounds.
fn roads() -> [(&'static str, Request); 3] {
    let base = Request::default();
    [
        ("cheapest", base.clone()),
        ("no finite field", Request { finite_field: false, ..base.clone() }),
        ("bounds", Request { finite_field: false, contraction: false, ..base }),
    ]
}

fn check_against_full_state(network: &Network, region: &Region, what: &str) {
    let wires = Wires::of(network);
    let inside = wires.inside(region);
    let slow = slow_entropy(network, &inside);
    for (road, request) in roads() {
        let answer = Asker::new(&wires, request).ask(region, &Silent);
        let Some(slow) = slow else {
            // A zero network is either refused or left open, never given an entropy.
            if let Ok(answer) = answer {
                assert_eq!(answer.evidence, Evidence::Bounds, "{what}, {road}: zero network");
            }
            continue;
        };
        let answer = answer.unwrap_or_else(|e| panic!("{what}, {road}: {e}"));
        assert!(answer.upper <= answer.cut.nats + 1e-9, "{what}, {road}: above the cut");
        if answer.evidence == Evidence::Bounds {
            assert!(
                answer.lower <= slow + 1e-9 && slow <= answer.upper + 1e-9,
                "{what}, {road}: {slow} is not in [{}, {}]",
                answer.lower,
                answer.upper
            );
        } else {
            let got = answer.entropy().unwrap();
            assert!(
                (got - slow).abs() < 1e-9,
                "{what}, {road}: {got} by {}, {slow} by the full state",
                answer.evidence
            );
        }
    }
}

#[test]
fn all_roads_agree_with_the_full_state_on_random_networks() {
    let mut rng = ChaCha8Rng::seed_from_u64(20);
    for case in 0..400 {
        let network = random_network(&mut rng);
        let sites = network.boundary().len();
        let flags: Vec<bool> = (0..sites).map(|_| rng.random_bool(0.5)).collect();
        let bulk =
            network.bulk().iter().copied().filter(|_| rng.random_bool(0.5)).collect::<Vec<_>>();
        let region = Region::new(flags, bulk);
        check_against_full_state(&network, &region, &format!("case {case}"));
    }
}
