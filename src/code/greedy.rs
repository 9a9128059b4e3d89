//! Greedy recovery of many erasure patterns at once, 64 in every machine word.
//!
//! The rule is that of [`crate::entropy::closure`]: a tensor is absorbed once it is an
//! isometry from its unknown legs to its known ones, and then all its legs are known. A bulk
//! leg is recovered when its tensor is absorbed. What is recovered greedily can be recovered;
//! the converse does not hold.

use crate::entropy::{End, Node, Wires};
use std::collections::HashMap;

/// Words a bundle holds.
pub const WORDS: usize = 4;
/// Patterns judged together.
pub const BUNDLE: usize = 64 * WORDS;
/// One bit for each pattern of a bundle.
pub type Bits = [u64; WORDS];

/// No pattern.
pub const NONE: Bits = [0; WORDS];

/// When a tensor is absorbed.
#[derive(Debug, Clone, PartialEq, Eq)]
enum Rule {
    /// At least this many legs are known.
    Count(u32),
    /// All legs of one of these sets are known.
    Sets(Vec<u64>),
}

/// A network compiled for greedy recovery. Memory: a few words a leg.
#[derive(Debug, Clone)]
pub struct Greedy {
    /// Wires of each node, the nodes in order of distance from the boundary.
    starts: Vec<u32>,
    wires: Vec<u32>,
    rules: Vec<Rule>,
    rule_of: Vec<u32>,
    /// Nodes (in that order) at the ends of each wire; `u32::MAX` for an open end.
    ends: Vec<[u32; 2]>,
    boundary: Vec<u32>,
    bulk: Vec<u32>,
}

/// Scratch space of [`Greedy::recover`].
#[derive(Debug, Clone)]
pub struct Bench {
    known: Vec<Bits>,
    absorbed: Vec<Bits>,
    stirred: Vec<bool>,
}

impl Greedy {
    /// Compiles a network; the isometry table of every block is asked.
    pub fn of(wires: &Wires<'_>) -> Self {
        let network = wires.network();
        let nodes = wires.nodes();
        let sites = network.boundary().len();
        let order = by_distance(wires, sites);
        let mut place = vec![0u32; nodes];
        for (i, &n) in order.iter().enumerate() {
            place[n as usize] = i as u32;
        }
        let mut out = Self {
            starts: vec![0],
            wires: Vec::new(),
            rules: Vec::new(),
            rule_of: Vec::with_capacity(nodes),
            ends: Vec::with_capacity(wires.count()),
            boundary: (0..sites).map(|s| wires.open_wire(s)).collect(),
            bulk: (sites..wires.open()).map(|s| wires.open_wire(s)).collect(),
        };
        let mut known: HashMap<(bool, usize), u32> = HashMap::new();
        for &n in &order {
            let n = n as usize;
            let legs = wires.wires_of(n);
            out.wires.extend_from_slice(legs);
            out.starts.push(out.wires.len() as u32);
            // One rule a distinct block, one a size of copy tensors.
            let key = match wires.node(n) {
                Node::Tensor(t) => (true, network.block_number(t)),
                Node::Copy(_) | Node::Ones(_) => (false, legs.len()),
            };
            let rule = *known.entry(key).or_insert_with(|| {
                out.rules.push(rule(legs.len(), |unknown| {
                    wires.absorbs(n, unknown, unknown.count_ones())
                }));
                out.rules.len() as u32 - 1
            });
            out.rule_of.push(rule);
        }
        for w in 0..wires.count() as u32 {
            out.ends.push(wires.ends(w).map(|e| match e {
                End::Node { node, .. } => place[node as usize],
                End::Open(_) => u32::MAX,
            }));
        }
        out
    }
    /// Boundary legs.
    pub fn boundary(&self) -> usize {
        self.boundary.len()
    }
    /// Bulk legs.
    pub fn bulk(&self) -> usize {
        self.bulk.len()
    }
    /// Scratch space for this network.
    pub fn bench(&self) -> Bench {
        Bench {
            known: vec![NONE; self.ends.len()],
            absorbed: vec![NONE; self.rule_of.len()],
            stirred: vec![true; self.rule_of.len()],
        }
    }
    /// Recovers what can be recovered greedily where `erased[leg]` says in which patterns a
    /// boundary leg is erased. Read the outcome with [`Self::lost`].
    ///
    /// Tensors are visited from the boundary inwards and back until nothing moves, only
    /// those with a leg that became known since the last visit.
    ///
    /// # Panics
    /// Where `erased` has not one entry a boundary leg.
    #[track_caller]
    pub fn recover(&self, bench: &mut Bench, erased: &[Bits]) {
        assert_eq!(erased.len(), self.boundary.len(), "one entry a boundary leg");
        bench.known.fill(NONE);
        bench.absorbed.fill(NONE);
        bench.stirred.fill(true);
        for (&w, e) in self.boundary.iter().zip(erased) {
            bench.known[w as usize] = e.map(|x| !x);
        }
        let nodes = self.rule_of.len();
        let mut moved = true;
        let mut inwards = true;
        while moved {
            moved = false;
            for i in 0..nodes {
                let n = if inwards { i } else { nodes - 1 - i };
                if std::mem::take(&mut bench.stirred[n]) {
                    moved |= self.visit(bench, n);
                }
            }
            inwards = !inwards;
        }
    }
    fn visit(&self, bench: &mut Bench, n: usize) -> bool {
        let legs = &self.wires[self.starts[n] as usize..self.starts[n + 1] as usize];
        let now = match &self.rules[self.rule_of[n] as usize] {
            Rule::Count(least) => at_least(*least as usize, legs, &bench.known),
            Rule::Sets(sets) => any_set(sets, legs, &bench.known),
        };
        let before = bench.absorbed[n];
        if (0..WORDS).all(|k| now[k] & !before[k] == 0) {
            return false;
        }
        let all: Bits = std::array::from_fn(|k| now[k] | before[k]);
        bench.absorbed[n] = all;
        for &w in legs {
            let known = &mut bench.known[w as usize];
            if (0..WORDS).any(|k| all[k] & !known[k] != 0) {
                for k in 0..WORDS {
                    known[k] |= all[k];
                }
                for end in self.ends[w as usize] {
                    if end != u32::MAX && end as usize != n {
                        bench.stirred[end as usize] = true;
                    }
                }
            }
        }
        true
    }
    /// Whether every tensor was absorbed in a pattern.
    pub fn absorbs_all(&self, bench: &Bench, pattern: usize) -> bool {
        let (k, b) = (pattern / 64, pattern % 64);
        bench.absorbed.iter().all(|a| a[k] >> b & 1 == 1)
    }
    /// In which patterns a bulk leg was not recovered.
    pub fn lost(&self, bench: &Bench, bulk_leg: usize) -> Bits {
        bench.known[self.bulk[bulk_leg] as usize].map(|x| !x)
    }
}

/// Patterns in which at least `least` of the legs are known.
fn at_least(least: usize, legs: &[u32], known: &[Bits]) -> Bits {
    const MOST: usize = 12;
    if least == 0 {
        return [!0; WORDS];
    }
    if least > MOST {
        return at_least_wide(least, legs, known);
    }
    // reached[j]: at least j+1 of the legs so far.
    let mut reached = [NONE; MOST];
    for &w in legs {
        let here = known[w as usize];
        for j in (1..least).rev() {
            for k in 0..WORDS {
                reached[j][k] |= reached[j - 1][k] & here[k];
            }
        }
        for k in 0..WORDS {
            reached[0][k] |= here[k];
        }
    }
    reached[least - 1]
}

fn at_least_wide(least: usize, legs: &[u32], known: &[Bits]) -> Bits {
    let mut out = NONE;
    for bit in 0..BUNDLE {
        let (k, b) = (bit / 64, bit % 64);
        let count = legs.iter().filter(|&&w| known[w as usize][k] >> b & 1 == 1).count();
        out[k] |= u64::from(count >= least) << b;
    }
    out
}

fn any_set(sets: &[u64], legs: &[u32], known: &[Bits]) -> Bits {
    let mut out = NONE;
    for &set in sets {
        let mut all = [!0; WORDS];
        let mut rest = set;
        while rest != 0 {
            let here = known[legs[rest.trailing_zeros() as usize] as usize];
            for k in 0..WORDS {
                all[k] &= here[k];
            }
            rest &= rest - 1;
        }
        for k in 0..WORDS {
            out[k] |= all[k];
        }
    }
    out
}

/// The rule of a tensor from its answers; the least sets that must be known are the
/// complements of the largest isometric sets.
fn rule(legs: usize, absorbs: impl Fn(u64) -> bool) -> Rule {
    // Perfect tensors of any size answer by count; larger tables hold every subset.
    let full = if legs >= 64 { !0 } else { (1u64 << legs) - 1 };
    if legs > crate::block::IsometryTable::MOST_LEGS {
        // Only a perfect tensor has a table here, and it answers by count.
        let most = (0..legs.min(63)).take_while(|&u| absorbs((1u64 << u) - 1)).last().unwrap_or(0);
        return Rule::Count((legs - most).max(1) as u32);
    }
    let isometric = |m: u64| m == 0 || (m != full && absorbs(m));
    let mut sets: Vec<u64> = Vec::new();
    let mut smallest = legs;
    let mut masks: Vec<u64> = (0..=full).filter(|&m| isometric(m)).collect();
    masks.sort_by_key(|m| (std::cmp::Reverse(m.count_ones()), *m));
    for &m in &masks {
        let grown = (0..legs).any(|l| m >> l & 1 == 0 && isometric(m | 1 << l));
        if !grown && full & !m != 0 {
            let known = full & !m;
            smallest = smallest.min(known.count_ones() as usize);
            sets.push(known);
        }
    }
    let symmetric = sets.iter().all(|s| s.count_ones() as usize == smallest)
        && sets.len() as u128 == choose(legs as u64, smallest as u64);
    if symmetric && smallest > 0 { Rule::Count(smallest as u32) } else { Rule::Sets(sets) }
}

/// C(n, k), saturating.
pub(super) fn choose(n: u64, k: u64) -> u128 {
    if k > n {
        return 0;
    }
    let k = k.min(n - k);
    let mut out: u128 = 1;
    for i in 0..k {
        match out.checked_mul(u128::from(n - i)) {
            Some(x) => out = x / u128::from(i + 1),
            None => return u128::MAX,
        }
    }
    out
}

/// Nodes by distance from the boundary, breadth first; unreachable ones last.
fn by_distance(wires: &Wires<'_>, sites: usize) -> Vec<u32> {
    let mut seen = vec![false; wires.nodes()];
    let mut order: Vec<u32> = Vec::with_capacity(wires.nodes());
    let visit = |w: u32, seen: &mut Vec<bool>, order: &mut Vec<u32>| {
        for end in wires.ends(w) {
            if let End::Node { node, .. } = end
                && !seen[node as usize]
            {
                seen[node as usize] = true;
                order.push(node);
            }
        }
    };
    for s in 0..sites {
        visit(wires.open_wire(s), &mut seen, &mut order);
    }
    let mut at = 0;
    while at < order.len() {
        for &w in wires.wires_of(order[at] as usize) {
            visit(w, &mut seen, &mut order);
        }
        at += 1;
    }
    let rest: Vec<u32> = (0..wires.nodes() as u32).filter(|&n| !seen[n as usize]).collect();
    order.extend(rest);
    order
}
