//! Codes that are trees (concatenated codes and their like): survival of a bulk leg without
//! sampling, at any size.
//!
//! Seen from the bulk leg, each bond carries what the erased legs below it hold: a subgroup of
//! the bond's Pauli operators, one of 1 + (p+1) + 1 for a bond of prime dimension p. The
//! distribution over these subgroups is passed up from the leaves through each tensor's
//! stabilizer group. Nothing is lost: a tree has no two ways between two legs.

use super::span::{Packing, Span};
use super::{Code, CodeError};
use crate::block::PrimePart;
use crate::network::TensorId;
use crate::tensor::Label;
use std::collections::HashMap;

/// What erased legs hold of a bond: nothing, the multiples of one operator, or everything.
///
/// 0 is nothing, 1 + s the line of (x|z) = (1|s), 1 + p that of (0|1), 2 + p everything.
type State = usize;

/// Numbers that distributions are made of: probabilities at one rate, or counts of erasure
/// sets by size.
trait Amount: Clone {
    fn none() -> Self;
    fn add(&mut self, other: &Self);
    fn times(&self, other: &Self) -> Self;
}

impl Amount for f64 {
    fn none() -> Self {
        0.0
    }
    fn add(&mut self, other: &Self) {
        *self += other;
    }
    fn times(&self, other: &Self) -> Self {
        self * other
    }
}

/// Coefficient w counts sets of w legs.
impl Amount for Vec<u128> {
    fn none() -> Self {
        Vec::new()
    }
    fn add(&mut self, other: &Self) {
        if self.len() < other.len() {
            self.resize(other.len(), 0);
        }
        for (a, b) in self.iter_mut().zip(other) {
            *a += b;
        }
    }
    fn times(&self, other: &Self) -> Self {
        if self.is_empty() || other.is_empty() {
            return Vec::new();
        }
        let mut out = vec![0; self.len() + other.len() - 1];
        for (i, a) in self.iter().enumerate() {
            for (j, b) in other.iter().enumerate() {
                out[i + j] += a * b;
            }
        }
        out
    }
}

/// A tensor and what its legs lead to, seen from the bulk leg.
struct Knot {
    part: usize,
    up: usize,
    down: Vec<Down>,
}

#[derive(Clone, PartialEq, Eq, Hash)]
enum Down {
    /// A boundary leg.
    Boundary,
    /// Another bulk leg, or a leg whose other end nobody has.
    Nobody,
    /// The knot of this number.
    Knot(usize),
}

/// A tree seen from one bulk leg; equal subtrees are kept once.
pub struct Tree {
    prime: u32,
    parts: Vec<PrimePart>,
    knots: Vec<Knot>,
    boundary: usize,
    top: usize,
}

impl Tree {
    /// Looks at the network from a bulk leg; `None` where it is no tree from there, or a leg
    /// has no prime dimension (the same for all), or a tensor no stabilizer form.
    pub fn of(code: &Code<'_>, bulk_leg: usize) -> Option<Self> {
        let net = code.network();
        let root = net.bulk()[bulk_leg];
        let prime = u32::try_from(net.dim(root)).ok()?;
        let mut parts: Vec<PrimePart> = Vec::new();
        for b in net.blocks() {
            let s = b.stabilizer()?;
            let [part] = s.parts.as_slice() else { return None };
            if part.prime != prime || part.digits.iter().any(|&d| d != 1) {
                return None;
            }
            parts.push((**part).clone());
        }
        let [holder] = net.holders(root) else { return None };
        let mut is_boundary = vec![false; net.labels()];
        net.boundary().iter().for_each(|l| is_boundary[l.index()] = true);
        let open = net.open_flags();
        // Depth first without recursion: trees may be deep.
        let mut seen = vec![false; net.tensors()];
        seen[holder.index()] = true;
        let mut order: Vec<(TensorId, Label)> = vec![(*holder, root)];
        let mut at = 0;
        while at < order.len() {
            let (t, from) = order[at];
            at += 1;
            let legs = net.legs(t);
            if legs.iter().filter(|&&l| l == from).count() != 1 {
                return None;
            }
            for &l in legs.iter().filter(|&&l| l != from) {
                match (net.holders(l), open[l.index()]) {
                    ([_], true) => {}
                    ([a, b], false) => {
                        let other = if *a == t { *b } else { *a };
                        if seen[other.index()] {
                            return None;
                        }
                        seen[other.index()] = true;
                        order.push((other, l));
                    }
                    _ => return None,
                }
            }
        }
        let mut number: HashMap<(usize, usize, Vec<Down>), usize> = HashMap::new();
        let mut knot_of = vec![usize::MAX; net.tensors()];
        let mut knots = Vec::new();
        let mut boundary = 0;
        for &(t, from) in order.iter().rev() {
            let legs = net.legs(t);
            let up = legs.iter().position(|&l| l == from)?;
            let down: Vec<Down> = legs
                .iter()
                .filter(|&&l| l != from)
                .map(|&l| match net.holders(l) {
                    [a, b] => Down::Knot(knot_of[if *a == t { b } else { a }.index()]),
                    _ if is_boundary[l.index()] => Down::Boundary,
                    _ => Down::Nobody,
                })
                .collect();
            boundary += down.iter().filter(|d| **d == Down::Boundary).count();
            let key = (net.block_number(t), up, down.clone());
            knot_of[t.index()] = *number.entry(key).or_insert_with(|| {
                knots.push(Knot { part: net.block_number(t), up, down });
                knots.len() - 1
            });
        }
        Some(Self { prime, parts, knots, boundary, top: knot_of[holder.index()] })
    }
    /// Boundary legs below the bulk leg.
    pub fn boundary(&self) -> usize {
        self.boundary
    }
    /// Probability that the leg is lost at erasure rate p, exactly (up to rounding).
    ///
    /// Cost: for every distinct subtree the product over its branches of the subgroups that
    /// occur there, mostly 2 each.
    pub fn lost(&self, p: f64) -> f64 {
        let states = self.carry([1.0 - p, p], 1.0);
        states.iter().skip(1).sum()
    }
    /// Number of erasure sets of each size that lose the leg: exact for up to 120 boundary
    /// legs.
    ///
    /// # Errors
    /// [`CodeError::TooLarge`].
    pub fn polynomial(&self) -> Result<Vec<u128>, CodeError> {
        if self.boundary > 120 {
            return Err(CodeError::TooLarge {
                question: "the failure polynomial",
                need: format!("counts over {} legs", self.boundary),
                limit: "120 legs".to_owned(),
            });
        }
        let states = self.carry([vec![1], vec![0, 1]], vec![1]);
        let mut out = vec![0; self.boundary + 1];
        for s in states.iter().skip(1) {
            out.iter_mut().zip(s).for_each(|(a, b)| *a += b);
        }
        Ok(out)
    }
    fn states(&self) -> usize {
        self.prime as usize + 3
    }
    /// The distribution at the top; a boundary leg is kept or erased with these amounts.
    fn carry<A: Amount>(&self, leaf: [A; 2], one: A) -> Vec<A> {
        let everything = self.states() - 1;
        let mut done: Vec<Vec<(State, A)>> = Vec::with_capacity(self.knots.len());
        for knot in &self.knots {
            let branches: Vec<Vec<(State, A)>> = knot
                .down
                .iter()
                .map(|d| match d {
                    Down::Boundary => {
                        vec![(0, leaf[0].clone()), (everything, leaf[1].clone())]
                    }
                    Down::Nobody => vec![(everything, one.clone())],
                    Down::Knot(k) => done[*k].clone(),
                })
                .collect();
            let mut sum = vec![A::none(); self.states()];
            let mut choice = vec![0usize; branches.len()];
            'all: loop {
                let states: Vec<State> =
                    choice.iter().zip(&branches).map(|(&c, b)| b[c].0).collect();
                let mut amount = one.clone();
                for (&c, b) in choice.iter().zip(&branches) {
                    amount = amount.times(&b[c].1);
                }
                sum[self.held(knot, &states)].add(&amount);
                let mut i = 0;
                loop {
                    if i == choice.len() {
                        break 'all;
                    }
                    choice[i] += 1;
                    if choice[i] < branches[i].len() {
                        break;
                    }
                    choice[i] = 0;
                    i += 1;
                }
            }
            let mut reached = vec![false; self.states()];
            self.mark_reached(knot, &branches, &mut reached);
            done.push(sum.into_iter().enumerate().filter(|(s, _)| reached[*s]).collect());
        }
        let mut out = vec![A::none(); self.states()];
        for (s, a) in &done[self.top] {
            out[*s].add(a);
        }
        out
    }
    /// States that some choice of branch states gives.
    fn mark_reached<A>(&self, knot: &Knot, branches: &[Vec<(State, A)>], reached: &mut [bool]) {
        let mut choice = vec![0usize; branches.len()];
        loop {
            let states: Vec<State> = choice.iter().zip(branches).map(|(&c, b)| b[c].0).collect();
            reached[self.held(knot, &states)] = true;
            let Some(i) = (0..choice.len()).find(|&i| choice[i] + 1 < branches[i].len()) else {
                return;
            };
            choice[..i].fill(0);
            choice[i] += 1;
        }
    }
    /// What is held of a knot's upper leg when this is held of its lower legs.
    fn held(&self, knot: &Knot, states: &[State]) -> State {
        let part = &self.parts[knot.part];
        let p = u64::from(self.prime);
        let n = part.width();
        // Conditions first: for each lower leg the entries that must vanish, then the upper
        // leg's x and z. A line (1|s) becomes (1|−s) across a bond.
        let mut lower: Vec<usize> = (0..n).collect();
        lower.remove(knot.up);
        let mut conditions: Vec<(usize, u64, u64)> = Vec::new();
        for (&leg, &s) in lower.iter().zip(states) {
            if s == 0 {
                conditions.push((leg, 1, 0));
                conditions.push((leg, 0, 1));
            } else if s <= self.prime as usize {
                // z = −slope·x as seen from this side: slope·x + z = 0.
                conditions.push((leg, (s - 1) as u64, 1));
            } else if s == 1 + self.prime as usize {
                conditions.push((leg, 1, 0));
            }
        }
        let packing = Packing { prime: p, width: conditions.len() + 2 };
        let mut span = Span::new(packing);
        let mut v = vec![0; packing.stride()];
        for g in &part.generators {
            v.fill(0);
            for (i, &(leg, a, b)) in conditions.iter().enumerate() {
                packing.set(&mut v, i, (a * u64::from(g[leg]) + b * u64::from(g[n + leg])) % p);
            }
            packing.set(&mut v, conditions.len(), u64::from(g[knot.up]));
            packing.set(&mut v, conditions.len() + 1, u64::from(g[n + knot.up]));
            span.push(&v);
        }
        let free: Vec<usize> =
            (0..span.dimension()).filter(|&r| span.pivot(r) >= conditions.len()).collect();
        match free.as_slice() {
            [] => 0,
            [one] => {
                let (x, z) = (
                    packing.get(span.row(*one), conditions.len()),
                    packing.get(span.row(*one), conditions.len() + 1),
                );
                if x == 0 { 1 + self.prime as usize } else { 1 + z as usize }
            }
            _ => 2 + self.prime as usize,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::code::erasure::{Request, Target, run};
    use crate::code::samples::{pentagons, six_leg, state_of};
    use crate::network::{Network, NetworkBuilder};
    use crate::tiling::Rule;
    use crate::watch::Silent;

    /// The five-qubit code concatenated with itself in `first` of its five legs.
    fn concatenated(first: usize) -> Network {
        let block = six_leg();
        let mut b = NetworkBuilder::new("concatenated");
        let bulk = b.label("k", 2);
        let bonds: Vec<Label> = (0..5).map(|i| b.label(&format!("b{i}"), 2)).collect();
        let mut legs = bonds.clone();
        legs.push(bulk);
        b.tensor(None, &legs, &block).unwrap();
        let mut open = Vec::new();
        for (i, &bond) in bonds.iter().enumerate() {
            if i >= first {
                open.push(bond);
                continue;
            }
            let mut legs: Vec<Label> = (0..5).map(|j| b.label(&format!("o{i}{j}"), 2)).collect();
            open.extend_from_slice(&legs);
            legs.push(bond);
            b.tensor(None, &legs, &block).unwrap();
        }
        b.boundary(open);
        b.bulk([bulk]);
        b.finish().unwrap()
    }

    #[test]
    fn trees_agree_with_ranks_on_all_sets() {
        let net = concatenated(3);
        let code = Code::of(&net).unwrap().with_states(&[state_of(&net)]);
        let tree = Tree::of(&code, 0).unwrap();
        let request = Request { target: Target::Leg(0), ..Request::default() };
        let s = run(&code, &request, None, &Silent, &mut |_| ()).unwrap();
        let exact = s.polynomial().unwrap().1.unwrap();
        let counts = tree.polynomial().unwrap();
        assert_eq!(counts, exact.iter().map(|&c| u128::from(c)).collect::<Vec<_>>());
        for p in [0.03, 0.3, 0.5] {
            assert!((tree.lost(p) - s.at(p).exact.unwrap().value).abs() < 1e-12);
        }
    }

    /// One level fails as 10p³q² + 5p⁴q + p⁵ (any three of five erasures); two levels are
    /// that function of itself.
    #[test]
    fn two_levels_are_the_polynomial_of_the_polynomial() {
        let net = concatenated(5);
        let tree = Tree::of(&Code::of(&net).unwrap(), 0).unwrap();
        let f = |p: f64| {
            let q = 1.0 - p;
            10.0 * p.powi(3) * q * q + 5.0 * p.powi(4) * q + p.powi(5)
        };
        assert_eq!((tree.boundary(), tree.knots.len()), (25, 2));
        for p in [0.01, 0.2, 0.5, 0.7] {
            assert!((tree.lost(p) - f(f(p))).abs() < 1e-14);
        }
        assert_eq!(tree.polynomial().unwrap()[..10].iter().position(|&c| c > 0), Some(9));
    }

    #[test]
    fn loops_are_no_trees() {
        let net = pentagons(1, Rule::Vertex);
        assert!(Tree::of(&Code::of(&net).unwrap(), 0).is_none());
    }
}
