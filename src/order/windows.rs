//! Windows of a tree solved exactly.
//!
//! A window is a result with a few of the results below it opened up: a small net of its own,
//! whose tensors are the window's frontier and whose open labels are those of the window's
//! top. Its best order is found over all subsets and put in place of what was there. A pass
//! over all results never makes the tree dearer.

use super::net::Net;
use super::price::Price;
use super::subsets::{self, Aim, Held};
use super::tree::Tree;
use crate::watch::Watch;
use std::collections::HashMap;

/// One pass over the results, the dearest windows' tops first, until `work` is spent.
/// Returns the work done and whether anything changed.
pub(crate) fn pass(
    net: &Net,
    tree: &mut Tree,
    price: Price,
    width: usize,
    work: u64,
    watch: &dyn Watch,
) -> (u64, bool) {
    let mut tops: Vec<u32> = (tree.leaves..tree.children.len()).map(|v| v as u32).collect();
    let key = |tree: &Tree, v: u32| price.step(tree.met[v as usize], tree.size[v as usize]);
    tops.sort_by(|&a, &b| key(tree, b).total_cmp(&key(tree, a)).then(a.cmp(&b)));
    let mut spent = 0;
    let mut changed = false;
    for (i, &top) in tops.iter().enumerate() {
        if spent >= work || (i % 16 == 0 && watch.stop()) {
            break;
        }
        let (w, c) = improve(net, tree, price, width, top);
        spent += w;
        changed |= c;
    }
    (spent, changed)
}

/// Solves the window under `top`.
fn improve(net: &Net, tree: &mut Tree, price: Price, width: usize, top: u32) -> (u64, bool) {
    let mut frontier = tree.children[top as usize].to_vec();
    let mut inside = vec![top];
    while frontier.len() < width {
        // The dearest step on the frontier is opened next.
        let dearest = frontier.iter().enumerate().filter(|&(_, &v)| !tree.is_leaf(v)).max_by(
            |(_, a), (_, b)| {
                tree.met[**a as usize].total_cmp(&tree.met[**b as usize]).then(b.cmp(a))
            },
        );
        let Some((at, &v)) = dearest else { break };
        inside.push(v);
        let [a, b] = tree.children[v as usize];
        frontier[at] = a;
        frontier.push(b);
    }
    let k = frontier.len();
    if k < 3 {
        return (10, false);
    }
    let mut place: HashMap<u32, usize> = HashMap::new();
    let mut labels: Vec<Held> = Vec::new();
    let mut touched = 0;
    for (i, &v) in frontier.iter().enumerate() {
        touched += tree.sets[v as usize].len() as u64;
        for &l in &tree.sets[v as usize] {
            let at = *place.entry(l).or_insert_with(|| {
                labels.push(Held { by: 0, open: false, bits: net.bits[l as usize] });
                labels.len() - 1
            });
            labels[at].by |= 1 << i;
        }
        if tree.lone[v as usize] > 0.0 {
            labels.push(Held { by: 1 << i, open: true, bits: tree.lone[v as usize] });
        }
    }
    for l in &tree.sets[top as usize] {
        labels[place[l]].open = true;
    }
    let old = inside
        .iter()
        .map(|&v| price.step(tree.met[v as usize], tree.size[v as usize]))
        .fold(f64::NEG_INFINITY, super::greedy::log2_sum);
    let work = touched * 4 + 3u64.pow(k as u32) / 4 + (k as u64) * (1 << k);
    // Sizes common to the whole window only scale its price.
    let Some((steps, new)) = subsets::best(k, &labels, Aim::Sum(price), old) else {
        return (work, false);
    };
    if new >= old - 1e-9 {
        return (work, false);
    }
    // Results are put into the nodes that the window frees, the top last.
    let open: Vec<bool> = labels.iter().map(|l| l.open).collect();
    inside.reverse();
    let mut node: Vec<u32> = frontier.clone();
    let mut held: Vec<u32> = (0..k).map(|i| 1u32 << i).collect();
    for (s, &(a, b)) in steps.iter().enumerate() {
        let v = inside[s];
        let mask = held[a as usize] | held[b as usize];
        let (x, y) = (node[a as usize], node[b as usize]);
        let mut union = Vec::new();
        super::cost::merge(&tree.sets[x as usize], &tree.sets[y as usize], &mut union);
        union.retain(|l| {
            let at = place[l];
            open[at] || labels[at].by & !mask != 0
        });
        tree.rehang(net, v, [x, y], union);
        node.push(v);
        held.push(mask);
    }
    (work, true)
}
