//! How long orders take: pricing, greedy orders, all subsets, annealing at fixed work.
#![allow(missing_docs)]

#[path = "../tests/order_graphs/mod.rs"]
mod order_graphs;

use criterion::{Criterion, criterion_group, criterion_main};
use lierne::order::{Method, Objective, Request, cost, search};
use lierne::watch::Silent;
use order_graphs as graphs;

fn ask(method: Method, work: u64) -> Request {
    Request { method, work, objective: Objective::MultiplyAdds, ..Request::default() }
}

fn orders(c: &mut Criterion) {
    let mut group = c.benchmark_group("order");
    group.sample_size(10);

    let (n, edges) = graphs::lattice(&[100, 100], false);
    let grid = graphs::bonds(n, &edges, 2);
    let plan = search(&grid, &ask(Method::Greedy, 0), &Silent).expect("an order").plan;
    assert!(cost(&grid, &plan).expect("a price").widest_step >= 100);
    group.bench_function("price, grid of 10 000", |b| b.iter(|| cost(&grid, &plan)));
    group.bench_function("greedy, grid of 10 000", |b| {
        b.iter(|| search(&grid, &ask(Method::Greedy, 0), &Silent))
    });

    let (n, edges) = graphs::lattice(&[4, 4], true);
    let torus = graphs::bonds(n, &edges, 2);
    let best = search(&torus, &ask(Method::Exhaustive, 1 << 30), &Silent).expect("an order");
    assert_eq!(best.cost.multiply_adds, Some(13328));
    group.bench_function("exhaustive, torus 4x4", |b| {
        b.iter(|| search(&torus, &ask(Method::Exhaustive, 1 << 30), &Silent))
    });

    let (n, edges) = graphs::regular(100, 3, 0);
    let cubic = graphs::bonds(n, &edges, 2);
    for method in [Method::Elimination, Method::Bisection, Method::Annealing] {
        group.bench_function(format!("{}, cubic graph of 100, work 10^6", method.name()), |b| {
            b.iter(|| search(&cubic, &ask(method, 1_000_000), &Silent))
        });
    }
    group.finish();
}

criterion_group!(benches, orders);
criterion_main!(benches);
