//! What an error on each boundary leg does to the checks of a stabilizer code and to its bulk.

use super::span::{Packing, Span, Words};
use crate::block::PrimePart;

/// A stabilizer code read from the state that its network is on boundary and bulk legs
/// together, for one prime.
///
/// The state's stabilizer group V is a Lagrangian subspace of GF(p)^{2(n+k)}. An error e on
/// the boundary is *silent* when it commutes with every element of V that is trivial on the
/// bulk (the code's checks); a silent error acts on the bulk as some l with (e, l) ∈ V up to
/// signs. Every generator X and Z of a boundary digit has a *column*: which checks it
/// violates, followed by the bulk operator that is due to it. A set E of boundary legs holds
/// the bulk operators L(E) = the bulk parts of those combinations of its columns that violate
/// no check, and L(E) and L(complement of E) are each other's symplectic complements.
///
/// Where the map from bulk to boundary is no isometry, some bulk operators are stabilized
/// outright ([`Self::kernel`]) and belong to every L(E).
///
/// Making it costs one elimination of (n+k) × 2(n+k).
#[derive(Debug, Clone)]
pub struct Checks {
    prime: u32,
    packing: Packing,
    /// Columns, two a boundary digit: X then Z.
    columns: Vec<u64>,
    /// First column of each boundary leg, and the end.
    leg_columns: Vec<u32>,
    /// First bulk digit of each bulk leg, and the end.
    bulk_start: Vec<u32>,
    checks: usize,
    kernel: Vec<Vec<u32>>,
    check_rows: Vec<Vec<u32>>,
}

impl Checks {
    /// Reads the code off a stabilizer state whose first `boundary` legs are the boundary.
    ///
    /// # Panics
    /// Where the state has fewer legs than that, or generators of a wrong length.
    #[track_caller]
    pub fn of(state: &PrimePart, boundary: usize) -> Self {
        let p = u64::from(state.prime);
        let width = state.width();
        assert!(state.digits.len() >= boundary, "the state has fewer legs than its boundary");
        let n: usize = state.digits[..boundary].iter().map(|&d| d as usize).sum();
        let k = width - n;
        // Bulk columns first, so that elimination leaves the checks below the bulk's rows.
        // Bulk digit j stands at 2j (x) and 2j+1 (z), boundary digit i behind them likewise.
        let place = |digit: usize, z: usize| {
            if digit >= n { 2 * (digit - n) + z } else { 2 * k + 2 * digit + z }
        };
        let full = Packing { prime: p, width: 2 * width };
        let mut span = Span::new(full);
        let mut row = vec![0u64; full.stride()];
        for g in &state.generators {
            assert_eq!(g.len(), 2 * width, "a generator has two entries a digit");
            row.fill(0);
            for d in 0..width {
                full.set(&mut row, place(d, 0), u64::from(g[d]));
                full.set(&mut row, place(d, 1), u64::from(g[width + d]));
            }
            span.push(&row);
        }
        let mut order: Vec<usize> = (0..span.dimension()).collect();
        order.sort_by_key(|&r| span.pivot(r));
        let tied = order.iter().filter(|&&r| span.pivot(r) < 2 * k).count();
        let mut bulk_rows: Vec<Vec<u64>> =
            order[..tied].iter().map(|&r| span.row(r).to_vec()).collect();
        let pivots: Vec<usize> = order[..tied].iter().map(|&r| span.pivot(r)).collect();
        // Back-substitution among the bulk's rows, so that each pivot column is a unit vector.
        for i in (1..tied).rev() {
            let (head, tail) = bulk_rows.split_at_mut(i);
            for h in head {
                let c = full.get(h, pivots[i]);
                if c != 0 {
                    full.add(h, p - c, &tail[0], 0);
                }
            }
        }
        let check_rows: Vec<Vec<u64>> =
            order[tied..].iter().map(|&r| span.row(r).to_vec()).collect();
        let checks = check_rows.len();
        let packing = Packing { prime: p, width: checks + 2 * k };
        let mut columns = vec![0u64; 2 * n * packing.stride()];
        for (c, column) in columns.chunks_exact_mut(packing.stride().max(1)).take(2 * n).enumerate()
        {
            // X meets z, Z meets x with the other sign: ⟨(x|z),(x'|z')⟩ = x·z' − z·x'.
            let (digit, is_z) = (c / 2, c % 2 == 1);
            let meets = place(digit, usize::from(!is_z));
            let value = |v: u64| if is_z { (p - v) % p } else { v };
            for (i, r) in check_rows.iter().enumerate() {
                packing.set(column, i, value(full.get(r, meets)));
            }
            for (i, r) in bulk_rows.iter().enumerate() {
                // ⟨l, row⟩ = −⟨e, row⟩ with the row's bulk part a unit vector at its pivot.
                let v = (p - value(full.get(r, meets))) % p;
                let (j, pivot_is_z) = (pivots[i] / 2, pivots[i] % 2 == 1);
                if pivot_is_z {
                    packing.set(column, checks + 2 * j, v);
                } else {
                    packing.set(column, checks + 2 * j + 1, (p - v) % p);
                }
            }
        }
        let kernel = kernel(&bulk_rows, &pivots, full, k);
        let mut leg_columns = vec![0u32];
        let mut bulk_start = vec![0u32];
        for (l, &d) in state.digits.iter().enumerate() {
            if l < boundary {
                leg_columns.push(leg_columns[l] + 2 * d);
            } else {
                bulk_start.push(bulk_start[l - boundary] + d);
            }
        }
        let unpack = |r: &Vec<u64>| {
            let mut out = vec![0u32; 2 * n];
            for d in 0..n {
                out[d] = full.get(r, place(d, 0)) as u32;
                out[n + d] = full.get(r, place(d, 1)) as u32;
            }
            out
        };
        let check_rows = check_rows.iter().map(unpack).collect();
        Self {
            prime: state.prime,
            packing,
            columns,
            leg_columns,
            bulk_start,
            checks,
            kernel,
            check_rows,
        }
    }
    /// The prime.
    pub fn prime(&self) -> u32 {
        self.prime
    }
    /// Boundary legs.
    pub fn boundary(&self) -> usize {
        self.leg_columns.len() - 1
    }
    /// Digits on the boundary.
    pub fn boundary_digits(&self) -> usize {
        self.leg_columns[self.boundary()] as usize / 2
    }
    /// Digits of a boundary leg.
    pub fn digits(&self, leg: usize) -> usize {
        (self.leg_columns[leg + 1] - self.leg_columns[leg]) as usize / 2
    }
    /// Bulk legs.
    pub fn bulk(&self) -> usize {
        self.bulk_start.len() - 1
    }
    /// Digits in the bulk.
    pub fn bulk_digits(&self) -> usize {
        self.bulk_start[self.bulk()] as usize
    }
    /// Digits of a bulk leg.
    pub fn digits_of_bulk(&self, leg: usize) -> std::ops::Range<usize> {
        self.bulk_start[leg] as usize..self.bulk_start[leg + 1] as usize
    }
    /// Independent checks.
    pub fn count(&self) -> usize {
        self.checks
    }
    /// A basis of the checks, as (x|z) on the boundary's digits.
    pub fn rows(&self) -> &[Vec<u32>] {
        &self.check_rows
    }
    /// Bulk operators that the state stabilizes alone: x, z in turn, digit by digit. Empty
    /// where the map from bulk to boundary is an isometry; otherwise the map's rank is
    /// p^(digits − length).
    pub fn kernel(&self) -> &[Vec<u32>] {
        &self.kernel
    }
    /// The same code with another basis of its checks, given as (x|z) rows.
    pub(super) fn with_rows(&self, rows: Vec<Vec<u32>>) -> Self {
        let n = self.boundary_digits();
        let p = u64::from(self.prime);
        debug_assert_eq!(rows.len(), self.checks);
        let mut out = Self { check_rows: rows, ..self.clone() };
        let stride = self.packing.stride();
        for (c, column) in out.columns.chunks_exact_mut(stride.max(1)).take(2 * n).enumerate() {
            let (digit, is_z) = (c / 2, c % 2 == 1);
            for (i, r) in out.check_rows.iter().enumerate() {
                let v = if is_z { (p - u64::from(r[digit])) % p } else { u64::from(r[n + digit]) };
                self.packing.set(column, i, v);
            }
        }
        out
    }
    pub(super) fn packing(&self) -> Packing {
        self.packing
    }
    pub(super) fn column(&self, column: usize) -> &Words {
        let s = self.packing.stride();
        &self.columns[column * s..(column + 1) * s]
    }
    pub(super) fn columns_of(&self, leg: usize) -> std::ops::Range<usize> {
        self.leg_columns[leg] as usize..self.leg_columns[leg + 1] as usize
    }
    /// Places in a column that speak of a bulk leg.
    pub(super) fn places_of_bulk(&self, leg: usize) -> std::ops::Range<usize> {
        let d = self.digits_of_bulk(leg);
        self.checks + 2 * d.start..self.checks + 2 * d.end
    }
}

/// Bulk vectors that commute with every row's bulk part.
fn kernel(rows: &[Vec<u64>], pivots: &[usize], full: Packing, k: usize) -> Vec<Vec<u32>> {
    let p = full.prime;
    let mut is_pivot = vec![None; 2 * k];
    for (i, &c) in pivots.iter().enumerate() {
        is_pivot[c] = Some(i);
    }
    // Null space y of the reduced rows, then ⟨l, ·⟩ = y: x of l sits where y has z.
    (0..2 * k)
        .filter(|&c| is_pivot[c].is_none())
        .map(|free| {
            let mut y = vec![0u64; 2 * k];
            y[free] = 1;
            for (i, &c) in pivots.iter().enumerate() {
                y[c] = (p - full.get(&rows[i], free)) % p;
            }
            let mut l = vec![0u32; 2 * k];
            for j in 0..k {
                l[2 * j] = y[2 * j + 1] as u32;
                l[2 * j + 1] = ((p - y[2 * j]) % p) as u32;
            }
            l
        })
        .collect()
}

/// The bulk operators that a growing set of boundary legs holds.
///
/// Legs are added one by one and can be taken back in reverse order.
#[derive(Debug, Clone)]
pub struct Held<'c> {
    checks: &'c Checks,
    span: Span,
    bare: usize,
    added: Vec<u32>,
}

impl<'c> Held<'c> {
    /// The empty set of legs.
    pub fn new(checks: &'c Checks) -> Self {
        let packing = checks.packing;
        let mut span = Span::new(packing);
        let mut v = vec![0; packing.stride()];
        for l in &checks.kernel {
            v.fill(0);
            for (i, &x) in l.iter().enumerate() {
                packing.set(&mut v, checks.checks + i, u64::from(x));
            }
            span.push(&v);
        }
        let bare = span.dimension();
        Self { checks, span, bare, added: Vec::new() }
    }
    /// Adds a boundary leg.
    pub fn add(&mut self, leg: usize) {
        self.added.push(self.span.dimension() as u32);
        for c in self.checks.columns_of(leg) {
            self.span.push(self.checks.column(c));
        }
    }
    /// Takes the last leg back.
    pub fn take_back(&mut self) {
        if let Some(d) = self.added.pop() {
            self.span.rewind(d as usize);
        }
    }
    /// Makes the set empty.
    pub fn clear(&mut self) {
        self.added.clear();
        self.span.rewind(self.bare);
    }
    /// Rows of the span so far: a mark for [`Self::touched_since`].
    pub(super) fn rows(&self) -> usize {
        self.span.dimension()
    }
    /// Marks the bulk legs on which operators act that came in at or after row `mark`.
    pub(super) fn touched_since(&self, mark: usize, touched: &mut [bool]) {
        for r in (mark..self.span.dimension()).filter(|&r| self.span.pivot(r) >= self.checks.checks)
        {
            let row = self.span.row(r);
            for (k, t) in touched.iter_mut().enumerate() {
                *t = *t || !self.checks.packing.vanishes(row, self.checks.places_of_bulk(k));
            }
        }
    }
    /// Legs added.
    pub fn legs(&self) -> usize {
        self.added.len()
    }
    fn operators(&self) -> impl Iterator<Item = usize> + '_ {
        (0..self.span.dimension()).filter(|&r| self.span.pivot(r) >= self.checks.checks)
    }
    /// dim L: how many independent bulk operators the set holds.
    pub fn dimension(&self) -> usize {
        self.operators().count()
    }
    /// Whether the set holds a bulk operator that the code does not stabilize outright.
    pub fn any(&self) -> bool {
        self.dimension() > self.bare
    }
    /// Whether an operator of the set acts on this bulk leg: then the leg cannot be
    /// recovered from the other boundary legs.
    pub fn touches(&self, bulk_leg: usize) -> bool {
        let places = self.checks.places_of_bulk(bulk_leg);
        self.operators().any(|r| !self.checks.packing.vanishes(self.span.row(r), places.clone()))
    }
    /// How many independent actions on this bulk leg the set holds, counted on the leg alone.
    pub(super) fn acting_on(&self, bulk_leg: usize) -> usize {
        let p = self.checks.packing;
        let places = self.checks.places_of_bulk(bulk_leg);
        let small = Packing { prime: p.prime, width: places.len() };
        let mut span = Span::new(small);
        for r in self.operators() {
            let mut v = vec![0; small.stride()];
            for (i, c) in places.clone().enumerate() {
                small.set(&mut v, i, p.get(self.span.row(r), c));
            }
            span.push(&v);
        }
        span.dimension()
    }
    /// Whether the set holds every operator of this bulk leg (trivial on all other bulk
    /// legs): then the leg can be recovered from the set.
    pub fn holds(&self, bulk_leg: usize) -> bool {
        let p = self.checks.packing;
        let mut v = vec![0; p.stride()];
        self.checks.places_of_bulk(bulk_leg).all(|i| {
            v.fill(0);
            p.set(&mut v, i, 1);
            self.span.holds(&mut v)
        })
    }
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;

    /// A qubit state from strings of I, X, Y, Z.
    pub(crate) fn qubits(rows: &[&str]) -> PrimePart {
        let n = rows[0].len();
        let generators = rows
            .iter()
            .map(|r| {
                let bit =
                    |set: &str| r.chars().map(|c| u32::from(set.contains(c))).collect::<Vec<_>>();
                [bit("XY"), bit("ZY")].concat()
            })
            .collect();
        PrimePart { prime: 2, digits: vec![1; n], generators, phases: vec![0; rows.len()] }
    }

    /// The six-leg perfect tensor of JHEP 06 (2015) 149, bulk leg last.
    pub(crate) fn five_one_three() -> PrimePart {
        qubits(&["XZZXII", "IXZZXI", "XIXZZI", "ZXIXZI", "XXXXXX", "ZZZZZZ"])
    }

    #[test]
    fn three_of_five_legs_hold_the_bulk() {
        let state = five_one_three();
        let c = Checks::of(&state, 5);
        assert_eq!((c.count(), c.bulk(), c.boundary()), (4, 1, 5));
        assert!(c.kernel().is_empty());
        let mut held = Held::new(&c);
        for set in 0u32..32 {
            held.clear();
            (0..5).filter(|l| set >> l & 1 == 1).for_each(|l| held.add(l));
            let many = set.count_ones() >= 3;
            assert_eq!(held.dimension(), if many { 2 } else { 0 });
            assert_eq!((held.holds(0), held.touches(0)), (many, many));
        }
    }

    #[test]
    fn a_code_word_that_is_no_isometry_shows_its_kernel() {
        // Boundary |0⟩, bulk |+⟩: the bulk's X is stabilized.
        let c = Checks::of(&qubits(&["ZI", "IX"]), 1);
        assert_eq!(c.kernel(), &[vec![1, 0]]);
        let held = Held::new(&c);
        assert!(held.touches(0) && !held.any() && !held.holds(0));
    }
}
