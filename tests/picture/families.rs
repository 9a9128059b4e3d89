//! Small networks of every shape that a picture must cope with.

use super::patch::blank;
use lierne::network::{Layout, Network, NetworkBuilder};

/// Builds a network from hyperedges: each entry names a label and the tensors on it. Labels
/// on one tensor go to the boundary in the order given, unless their name begins with `k`
/// (bulk).
pub fn build(name: &str, tensors: usize, labels: &[(String, Vec<usize>)]) -> Network {
    build_placed(name, tensors, labels, Layout::default())
}

pub fn build_placed(
    name: &str,
    tensors: usize,
    labels: &[(String, Vec<usize>)],
    layout: Layout,
) -> Network {
    let mut b = NetworkBuilder::new(name);
    let mut legs = vec![Vec::new(); tensors];
    let (mut boundary, mut bulk) = (Vec::new(), Vec::new());
    for (text, holders) in labels {
        let label = b.label(text, 2);
        for &t in holders {
            legs[t].push(label);
        }
        if holders.len() == 1 {
            if text.starts_with('k') { bulk.push(label) } else { boundary.push(label) }
        }
    }
    for own in &legs {
        b.tensor(None, own, &blank(own.len())).expect("legs as many as dims");
    }
    b.boundary(boundary);
    b.bulk(bulk);
    b.layout(layout);
    b.finish().expect("a sound network")
}

fn label(text: impl Into<String>, holders: &[usize]) -> (String, Vec<usize>) {
    (text.into(), holders.to_vec())
}

/// A complete binary tree with `depth` levels below the root, two boundary legs a leaf.
pub fn tree(depth: u32) -> Network {
    let n = (1usize << (depth + 1)) - 1;
    let mut labels = vec![label("k0", &[0])];
    for t in 1..n {
        labels.push(label(format!("x{t}"), &[(t - 1) / 2, t]));
    }
    for t in (1 << depth) - 1..n {
        labels.push(label(format!("a{t}"), &[t]));
        labels.push(label(format!("b{t}"), &[t]));
    }
    build(&format!("binary tree, {depth} levels"), n, &labels)
}

pub fn chain(n: usize) -> Network {
    let mut labels: Vec<_> = (1..n).map(|t| label(format!("x{t}"), &[t - 1, t])).collect();
    labels.extend((0..n).map(|t| label(format!("b{t}"), &[t])));
    build(&format!("chain of {n}"), n, &labels)
}

/// A loop of `n` tensors with two boundary legs each.
pub fn ring(n: usize) -> Network {
    let mut labels: Vec<_> = (0..n).map(|t| label(format!("x{t}"), &[t, (t + 1) % n])).collect();
    for t in 0..n {
        labels.push(label(format!("a{t}"), &[t]));
        labels.push(label(format!("b{t}"), &[t]));
    }
    build(&format!("loop of {n}"), n, &labels)
}

/// An open square lattice with no boundary; `places` and `periodic` at will.
pub fn lattice(w: usize, h: usize, periodic: bool, places: bool) -> Network {
    let at = |x: usize, y: usize| (y % h) * w + x % w;
    let mut labels = Vec::new();
    for y in 0..h {
        for x in 0..w {
            if x + 1 < w || periodic {
                labels.push(label(format!("h{x}.{y}"), &[at(x, y), at(x + 1, y)]));
            }
            if y + 1 < h || periodic {
                labels.push(label(format!("v{x}.{y}"), &[at(x, y), at(x, y + 1)]));
            }
        }
    }
    let mut layout = Layout::default();
    if places {
        layout.place = (0..w * h).map(|t| [(t % w) as f64, (t / w) as f64]).collect();
    }
    let name = format!("{w} by {h}{}", if periodic { ", periodic" } else { "" });
    build_placed(&name, w * h, &labels, layout)
}

/// A lattice with boundary legs all round, counter-clockwise.
pub fn patch_with_legs(w: usize, h: usize) -> Network {
    let at = |x: usize, y: usize| y * w + x;
    let mut labels = Vec::new();
    for y in 0..h {
        for x in 0..w {
            if x + 1 < w {
                labels.push(label(format!("h{x}.{y}"), &[at(x, y), at(x + 1, y)]));
            }
            if y + 1 < h {
                labels.push(label(format!("v{x}.{y}"), &[at(x, y), at(x, y + 1)]));
            }
            labels.push(label(format!("k{x}.{y}"), &[at(x, y)]));
        }
    }
    labels.extend((0..w).map(|x| label(format!("s{x}"), &[at(x, 0)])));
    labels.extend((0..h).map(|y| label(format!("e{y}"), &[at(w - 1, y)])));
    labels.extend((0..w).rev().map(|x| label(format!("n{x}"), &[at(x, h - 1)])));
    labels.extend((0..h).rev().map(|y| label(format!("w{y}"), &[at(0, y)])));
    build(&format!("{w} by {h} with legs"), w * h, &labels)
}

/// The Petersen graph, a boundary leg on each outer tensor, one hyperedge, a double bond and
/// a separate pair.
pub fn odd() -> Network {
    let mut labels = Vec::new();
    for k in 0..5 {
        labels.push(label(format!("o{k}"), &[k, (k + 1) % 5]));
        labels.push(label(format!("s{k}"), &[k, k + 5]));
        labels.push(label(format!("i{k}"), &[k + 5, (k + 2) % 5 + 5]));
        labels.push(label(format!("b{k}"), &[k]));
    }
    labels.push(label("hyper", &[0, 6, 8]));
    labels.push(label("twin", &[0, 1]));
    labels.push(label("pair", &[10, 11]));
    labels.push(label("k", &[11]));
    labels.push(label("c", &[10]));
    build("odds and ends", 12, &labels)
}

pub fn complete(n: usize) -> Network {
    let labels: Vec<_> =
        (0..n).flat_map(|a| (a + 1..n).map(move |b| label(format!("x{a}.{b}"), &[a, b]))).collect();
    build(&format!("complete graph of {n}"), n, &labels)
}

/// A circulant graph: deterministic, not planar.
pub fn circulant(n: usize, steps: &[usize]) -> Network {
    let labels: Vec<_> = (0..n)
        .flat_map(|a| steps.iter().map(move |s| label(format!("x{a}.{s}"), &[a, (a + s) % n])))
        .collect();
    build(&format!("circulant of {n}"), n, &labels)
}

pub fn all() -> Vec<Network> {
    vec![
        tree(3),
        tree(6),
        chain(6),
        ring(3),
        ring(5),
        lattice(6, 4, false, false),
        lattice(5, 4, true, true),
        lattice(6, 5, true, false),
        patch_with_legs(4, 3),
        odd(),
        complete(7),
        circulant(40, &[1, 9]),
        build("one tensor", 1, &[label("a", &[0]), label("b", &[0]), label("k", &[0])]),
        build("two tensors", 2, &[label("a", &[0]), label("x", &[0, 1]), label("b", &[1])]),
        build("nothing", 0, &[]),
    ]
}
