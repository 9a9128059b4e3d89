//! Exact counts as contractions.

use super::block;
use lierne::contract::{Kind, Problem, Request, solve};
use lierne::order::{self, Plan, Shape};
use lierne::tensor::{Dense, Label};
use lierne::watch::Silent;
use ndarray::{ArrayD, IxDyn};

/// A graph by its edges; vertices are 0..n.
struct Graph {
    vertices: usize,
    edges: Vec<(usize, usize)>,
}

impl Graph {
    fn grid(m: usize, n: usize) -> Self {
        let mut edges = Vec::new();
        for i in 0..m {
            for j in 0..n {
                if j + 1 < n {
                    edges.push((i * n + j, i * n + j + 1));
                }
                if i + 1 < m {
                    edges.push((i * n + j, (i + 1) * n + j));
                }
            }
        }
        Self { vertices: m * n, edges }
    }
    fn torus(m: usize, n: usize) -> Self {
        let at = |i: usize, j: usize| (i % m) * n + j % n;
        let mut edges = Vec::new();
        for i in 0..m {
            for j in 0..n {
                edges.push((at(i, j), at(i, j + 1)));
                edges.push((at(i, j), at(i + 1, j)));
            }
        }
        Self { vertices: m * n, edges }
    }
    /// The generalised Petersen graph: an outer n-ring, spokes, an inner ring with step k.
    fn petersen(n: usize, k: usize) -> Self {
        let mut edges = Vec::new();
        for i in 0..n {
            edges.extend([(i, (i + 1) % n), (i, n + i), (n + i, n + (i + k) % n)]);
        }
        Self { vertices: 2 * n, edges }
    }
    fn complete(n: usize) -> Self {
        let edges = (0..n).flat_map(|i| (i + 1..n).map(move |j| (i, j))).collect();
        Self { vertices: n, edges }
    }
    fn k33() -> Self {
        Self { vertices: 6, edges: (0..3).flat_map(|i| (3..6).map(move |j| (i, j))).collect() }
    }
    fn heawood() -> Self {
        let mut edges: Vec<(usize, usize)> = (0..14).map(|i| (i, (i + 1) % 14)).collect();
        edges.extend((0..14).step_by(2).map(|i| (i, (i + 5) % 14)));
        Self { vertices: 14, edges }
    }

    /// One label a vertex, one matrix an edge, and one vector a vertex.
    fn on_vertices(
        &self,
        states: usize,
        edge: impl Fn(usize, usize) -> f64,
        vertex: impl Fn(usize) -> f64,
    ) -> Problem {
        let l = |v: usize| Label::new(v as u32);
        let matrix = block(Dense::Real(ArrayD::from_shape_fn(IxDyn(&[states, states]), |i| {
            edge(i[0], i[1])
        })));
        let vector = block(Dense::Real(ArrayD::from_shape_fn(IxDyn(&[states]), |i| vertex(i[0]))));
        let mut tensors: Vec<Vec<Label>> =
            self.edges.iter().map(|&(a, b)| vec![l(a), l(b)]).collect();
        let mut blocks = vec![matrix; tensors.len()];
        for v in 0..self.vertices {
            tensors.push(vec![l(v)]);
            blocks.push(vector.clone());
        }
        let sizes = vec![states as u64; self.vertices];
        Problem { shape: Shape { sizes, tensors, open: vec![] }, blocks }
    }

    /// One label an edge, one tensor a vertex that depends on the states of its edges.
    fn on_edges(&self, states: usize, vertex: impl Fn(&[usize]) -> f64) -> Problem {
        let mut tensors = vec![Vec::new(); self.vertices];
        for (e, &(a, b)) in self.edges.iter().enumerate() {
            tensors[a].push(Label::new(e as u32));
            tensors[b].push(Label::new(e as u32));
        }
        let blocks = tensors
            .iter()
            .map(|t| {
                let dims = vec![states; t.len()];
                block(Dense::Real(ArrayD::from_shape_fn(IxDyn(&dims), |i| {
                    vertex(ndarray::Dimension::slice(&i))
                })))
            })
            .collect();
        let sizes = vec![states as u64; self.edges.len()];
        Problem { shape: Shape { sizes, tensors, open: vec![] }, blocks }
    }

    fn colourings(&self, q: usize) -> Problem {
        self.on_vertices(q, |a, b| f64::from(u8::from(a != b)), |_| 1.0)
    }
    fn matchings(&self) -> Problem {
        self.on_edges(2, |s| f64::from(u8::from(s.iter().sum::<usize>() == 1)))
    }
    fn independent_sets(&self) -> Problem {
        self.on_vertices(2, |a, b| f64::from(u8::from(a + b < 2)), |_| 1.0)
    }
    fn edge_colourings(&self) -> Problem {
        self.on_edges(3, |s| {
            let different = (0..s.len()).all(|i| s[..i].iter().all(|x| *x != s[i]));
            f64::from(u8::from(different))
        })
    }
    fn ising(&self, k: f64) -> Problem {
        self.on_vertices(2, |a, b| if a == b { k.exp() } else { (-k).exp() }, |_| 1.0)
    }
}

fn plan(problem: &Problem) -> Plan {
    let request = order::Request { work: 300_000, ..order::Request::default() };
    order::search(&problem.shape, &request, &Silent).unwrap().plan
}

/// Mantissa and log10 of the factor, dense and sparse alike.
fn count(problem: &Problem) -> (f64, f64) {
    let plan = plan(problem);
    let run = |kind| {
        let request = Request { kind, ..Request::default() };
        let outcome = solve(problem, &plan, &request, &Silent).unwrap();
        let Dense::Real(a) = outcome.tensor.data() else { panic!("real input stays real") };
        (a[IxDyn(&[])], outcome.log10_scale)
    };
    let (a, b) = (run(Kind::Dense), run(Kind::Automatic));
    assert!((a.0 - b.0).abs() <= 1e-13 * a.0.abs() && a.1 == b.1, "dense {a:?}, sparse {b:?}");
    a
}

/// Integers up to 2^53 must come out exactly, larger ones to their last digits.
fn is(problem: &Problem, want: u64, what: &str) {
    let (got, scale) = count(problem);
    assert_eq!(scale, 0.0, "{what}");
    if want < 1 << 53 {
        assert_eq!(got, want as f64, "{what}");
    } else {
        assert!((got / want as f64 - 1.0).abs() < 1e-13, "{what}: {got}");
    }
}

/// Domino tilings of the 2n × 2n square: OEIS A004003; Physica 27, 1209 (1961).
#[test]
fn domino_tilings() {
    let known = [2, 36, 6728, 12_988_816, 258_584_046_368, 53_060_477_521_960_000];
    for (i, &want) in known.iter().enumerate() {
        let n = 2 * (i + 1);
        is(&Graph::grid(n, n).matchings(), want, &format!("{n}×{n} dominoes"));
    }
}

/// Dimers on tori, recomputed independently with NumPy.
#[test]
fn dimers_on_tori() {
    for (m, n, want) in [(4, 4, 272), (4, 6, 3108), (6, 6, 90176)] {
        is(&Graph::torus(m, n).matchings(), want, &format!("{m}×{n} torus"));
    }
}

/// Colourings of the n × n grid: OEIS A182406.
#[test]
fn colourings_of_grids() {
    let known: [(usize, &[u64]); 4] = [
        (3, &[3, 18, 246, 7812, 580_986, 101_596_896, 41_869_995_708]),
        (4, &[4, 84, 9612, 6_000_732, 20_442_892_764, 380_053_267_505_964]),
        (5, &[5, 260, 142_820, 828_850_160, 50_820_390_410_180]),
        (6, &[6, 630, 1_166_910, 38_128_724_910]),
    ];
    for (q, values) in known {
        for (i, &want) in values.iter().enumerate() {
            let n = i + 1;
            is(&Graph::grid(n, n).colourings(q), want, &format!("{q} colours on {n}×{n}"));
        }
    }
}

/// Independent sets of the n × n grid: OEIS A006506.
#[test]
fn independent_sets_of_grids() {
    let known = [2, 7, 63, 1234, 55_447, 5_598_861, 1_280_128_950, 660_647_962_955];
    for (i, &want) in known.iter().enumerate() {
        let n = i + 1;
        is(&Graph::grid(n, n).independent_sets(), want, &format!("independent sets of {n}×{n}"));
    }
}

/// Arrows on the edges of a square patch, two in and two out at each of n × n vertices, free
/// at the rim: one third of the 3-colourings of (n+1) × (n+1) squares, OEIS A068253.
#[test]
fn ice() {
    for (i, &want) in [6, 82, 2604, 193_662, 33_865_632].iter().enumerate() {
        let n = i + 1;
        // Horizontal labels run right, vertical ones down; state 1 points against.
        let h = |r: usize, c: usize| Label::new((r * (n + 1) + c) as u32);
        let v = |r: usize, c: usize| Label::new((n * (n + 1) + r * n + c) as u32);
        let mut tensors = Vec::new();
        for r in 0..n {
            for c in 0..n {
                tensors.push(vec![h(r, c), v(r, c), h(r, c + 1), v(r + 1, c)]);
            }
        }
        let vertex = block(Dense::Real(ArrayD::from_shape_fn(IxDyn(&[2; 4]), |s| {
            f64::from(u8::from(s[0] + s[1] == s[2] + s[3]))
        })));
        let blocks = vec![vertex; n * n];
        let shape = Shape { sizes: vec![2; 2 * n * (n + 1)], tensors, open: vec![] };
        is(&Problem { shape, blocks }, want, &format!("ice on {n}×{n}"));
    }
}

/// 3-edge-colourings, 3-colourings, 4-colourings, perfect matchings, independent sets;
/// recomputed independently with NumPy.
#[test]
fn small_graphs() {
    let known: [(&str, Graph, [u64; 5]); 9] = [
        ("K4", Graph::complete(4), [6, 0, 24, 3, 5]),
        ("K33", Graph::k33(), [12, 42, 420, 6, 15]),
        ("prism", Graph::petersen(3, 1), [6, 12, 264, 4, 13]),
        ("cube", Graph::petersen(4, 1), [24, 114, 2652, 9, 35]),
        ("Petersen", Graph::petersen(5, 2), [0, 120, 12960, 6, 76]),
        ("Heawood", Graph::heawood(), [48, 2106, 719_052, 24, 458]),
        ("Möbius–Kantor", Graph::petersen(8, 3), [120, 5634, u64::MAX, 33, 1091]),
        ("dodecahedron", Graph::petersen(10, 2), [60, 7200, u64::MAX, 36, 5828]),
        ("Desargues", Graph::petersen(10, 3), [u64::MAX; 5]),
    ];
    for (name, graph, [edge, three, four, matchings, sets]) in known {
        let cases = [
            (graph.edge_colourings(), edge),
            (graph.colourings(3), three),
            (graph.colourings(4), four),
            (graph.matchings(), matchings),
            (graph.independent_sets(), sets),
        ];
        for (i, (problem, want)) in cases.iter().enumerate() {
            if *want < u64::MAX {
                is(problem, *want, &format!("{name}, count {i}"));
            }
        }
    }
}

/// ln Z of the Ising model on the m × n torus, K everywhere: Phys. Rev. 76, 1232 (1949).
fn kaufman(m: usize, n: usize, k: f64) -> f64 {
    let gamma = |l: usize| -> f64 {
        if l == 0 {
            return 2.0 * k + k.tanh().ln();
        }
        let c = (2.0 * k).cosh() * (2.0 * k).cosh() / (2.0 * k).sinh();
        (c - (std::f64::consts::PI * l as f64 / n as f64).cos()).acosh()
    };
    let ln_2cosh = |x: f64| x.abs() + (-2.0 * x.abs()).exp().ln_1p();
    let ln_2sinh = |x: f64| x.abs() + (-(-2.0 * x.abs()).exp()).ln_1p();
    let half = m as f64 / 2.0;
    let odd: Vec<f64> = (0..n).map(|r| half * gamma(2 * r + 1)).collect();
    let even: Vec<f64> = (0..n).map(|r| half * gamma(2 * r)).collect();
    let sign = gamma(0).signum();
    let terms = [
        (odd.iter().map(|&x| ln_2cosh(x)).sum::<f64>(), 1.0),
        (odd.iter().map(|&x| ln_2sinh(x)).sum::<f64>(), 1.0),
        (even.iter().map(|&x| ln_2cosh(x)).sum::<f64>(), 1.0),
        (even.iter().map(|&x| ln_2sinh(x)).sum::<f64>(), sign),
    ];
    let top = terms.iter().map(|t| t.0).fold(f64::NEG_INFINITY, f64::max);
    let sum: f64 = terms.iter().map(|t| t.1 * (t.0 - top).exp()).sum();
    top + sum.ln() - 2f64.ln() + (m * n) as f64 / 2.0 * (2.0 * (2.0 * k).sinh()).ln()
}

/// Values recomputed independently with NumPy; Z at the critical coupling is an integer.
#[test]
fn ising_values_to_twelve_digits() {
    let kc = (1.0 + 2f64.sqrt()).ln() / 2.0;
    let known = [
        (Graph::torus(4, 4), kc, 5_509_120.0),
        (Graph::torus(4, 4), 0.3, 357_011.518_773_654),
        (Graph::torus(4, 4), 0.6, 513_383_087.827_778),
        (Graph::grid(3, 3), kc, 1_812.077_343_935),
        (Graph::grid(4, 4), kc, 870_058.075_100_652_8),
    ];
    for (graph, k, want) in known {
        let (got, scale) = count(&graph.ising(k));
        assert_eq!(scale, 0.0);
        assert!((got / want - 1.0).abs() < 2e-13, "{got} {want}");
    }
    for (n, want) in [(8, 0.939_715_324_8), (10, kaufman(10, 10, kc) / 100.0)] {
        let (got, scale) = count(&Graph::torus(n, n).ising(kc));
        let per_site = (got.ln() + scale * std::f64::consts::LN_10) / (n * n) as f64;
        assert!((per_site - want).abs() < 1e-10, "{n}: {per_site} {want}");
    }
    assert!((kaufman(4, 4, kc).exp() / 5_509_120.0 - 1.0).abs() < 1e-12);
    assert!((kaufman(16, 16, kc) / 256.0 - 0.932_196_315_0).abs() < 1e-9);
}

/// The partition function of 10^4 spins is beyond the range of a double by thousands of
/// orders of magnitude.
#[test]
fn ten_thousand_spins_neither_overflow_nor_underflow() {
    let (m, n) = (2500, 4);
    for k in [0.3, 0.9] {
        let problem = Graph::torus(m, n).ising(k);
        // Along the ring: the edges of the torus come row by row, each vertex's vector last.
        let edges = 2 * m * n;
        let all = edges + m * n;
        let mut order: Vec<u32> = Vec::new();
        for v in 0..m * n {
            order.extend([2 * v as u32, 2 * v as u32 + 1, (edges + v) as u32]);
        }
        let steps = (1..all)
            .map(|i| (if i == 1 { order[0] } else { (all + i - 2) as u32 }, order[i]))
            .collect();
        let plan = Plan { steps, sliced: vec![] };
        let outcome = solve(&problem, &plan, &Request::default(), &Silent).unwrap();
        let Dense::Real(a) = outcome.tensor.data() else { panic!("real input stays real") };
        let got = a[IxDyn(&[])].log10() + outcome.log10_scale;
        let want = kaufman(m, n, k) / std::f64::consts::LN_10;
        assert!(want > 3000.0 && (got / want - 1.0).abs() < 1e-12, "{got} {want}");
        // The same with all weights scaled down: far below the smallest double.
        let mut small = problem.clone();
        let tiny = block(Dense::Real(ArrayD::from_elem(IxDyn(&[2]), 1e-30)));
        small.blocks[edges..].fill(tiny);
        let outcome = solve(&small, &plan, &Request::default(), &Silent).unwrap();
        let Dense::Real(a) = outcome.tensor.data() else { panic!("real input stays real") };
        let got = a[IxDyn(&[])].log10() + outcome.log10_scale;
        let want = want - 30.0 * (m * n) as f64;
        assert!((got / want - 1.0).abs() < 1e-12, "{got} {want}");
    }
}
