//! Commuting generalised Pauli operators as rows of digits with phases.

use super::digits::{Packing, inverse};

/// Rows (x|z; t), each the operator τ^t ⊗_d X^{x_d} Z^{z_d} in the convention of
/// [`crate::block::PrimePart`]. A column is one digit; columns may be unused (all zero).
#[derive(Debug, Clone)]
pub(super) struct Tableau<P: Packing> {
    pub(super) packing: P,
    /// Words of one half of a row.
    words: usize,
    /// Row after row: x half, then z half.
    data: Vec<P::Word>,
    phases: Vec<u32>,
}

impl<P: Packing> Tableau<P> {
    /// No rows, room for `columns` digits.
    pub(super) fn empty(prime: u32, columns: usize) -> Self {
        Self {
            packing: P::new(prime),
            words: columns.div_ceil(P::PER_WORD),
            data: Vec::new(),
            phases: Vec::new(),
        }
    }
    /// Columns there is room for.
    pub(super) fn columns(&self) -> usize {
        self.words * P::PER_WORD
    }
    pub(super) fn rows(&self) -> usize {
        self.phases.len()
    }
    pub(super) fn phase(&self, row: usize) -> u32 {
        self.phases[row]
    }
    /// Order of τ: p, or 4 for p = 2.
    fn turns(&self) -> u32 {
        if self.packing.prime() == 2 { 4 } else { self.packing.prime() }
    }
    pub(super) fn push_zero(&mut self, phase: u32) {
        self.data.resize(self.data.len() + 2 * self.words, P::Word::default());
        self.phases.push(phase);
    }
    fn half(&self, row: usize, z: bool) -> &[P::Word] {
        let at = (2 * row + usize::from(z)) * self.words;
        &self.data[at..at + self.words]
    }
    pub(super) fn x(&self, row: usize, column: usize) -> u32 {
        self.packing.get(self.half(row, false), column)
    }
    pub(super) fn z(&self, row: usize, column: usize) -> u32 {
        self.packing.get(self.half(row, true), column)
    }
    pub(super) fn get(&self, row: usize, column: usize, z: bool) -> u32 {
        self.packing.get(self.half(row, z), column)
    }
    pub(super) fn set(&mut self, row: usize, column: usize, z: bool, value: u32) {
        let at = (2 * row + usize::from(z)) * self.words;
        self.packing.set(&mut self.data[at..at + self.words], column, value);
    }
    pub(super) fn weight(&self, row: usize) -> usize {
        self.packing.weight(self.half(row, false)) + self.packing.weight(self.half(row, true))
    }
    /// Row `dst` becomes (row dst)·(row src)^c.
    pub(super) fn multiply(&mut self, dst: usize, src: usize, c: u32, phases: bool) {
        debug_assert!(dst != src && c > 0);
        if phases {
            let p = u64::from(self.packing.prime());
            let turns = u64::from(self.turns());
            let unit = if p == 2 { 2 } else { 1 };
            let c = u64::from(c);
            // (τ^t X^x Z^z)^c = τ^{ct} ω^{z·x·c(c−1)/2} X^{cx} Z^{cz};
            // X^x Z^z X^{x'} Z^{z'} = ω^{z·x'} X^{x+x'} Z^{z+z'}.
            let own = u64::from(self.packing.dot(self.half(src, true), self.half(src, false)));
            let across = u64::from(self.packing.dot(self.half(dst, true), self.half(src, false)));
            let omega = (own * (c * (c - 1) / 2 % p) + across * c) % p;
            let t = u64::from(self.phases[dst]) + c * u64::from(self.phases[src]) + unit * omega;
            self.phases[dst] = (t % turns) as u32;
        }
        let w = 2 * self.words;
        let (low, high) = (dst.min(src), dst.max(src));
        let (head, tail) = self.data.split_at_mut(high * w);
        let (a, b) = (&mut head[low * w..(low + 1) * w], &mut tail[..w]);
        let (d, s) = if dst < src { (a, b) } else { (b, a) };
        self.packing.add(d, s, c);
    }
    pub(super) fn swap_remove(&mut self, row: usize) {
        let last = self.rows() - 1;
        let w = 2 * self.words;
        self.data.copy_within(last * w.., row * w);
        self.data.truncate(last * w);
        self.phases.swap_remove(row);
    }
    pub(super) fn swap(&mut self, a: usize, b: usize) {
        if a == b {
            return;
        }
        let w = 2 * self.words;
        let (low, high) = (a.min(b), a.max(b));
        let (head, tail) = self.data.split_at_mut(high * w);
        head[low * w..(low + 1) * w].swap_with_slice(&mut tail[..w]);
        self.phases.swap(a, b);
    }
    /// Rows of both, on disjoint columns: those of `other` come behind by the columns of
    /// `self`.
    pub(super) fn beside(&self, other: &Self) -> Self {
        let mut all = Self::empty(self.packing.prime(), self.columns() + other.columns());
        let zeros = |n: usize| vec![P::Word::default(); n];
        all.data.reserve(2 * all.words * (self.rows() + other.rows()));
        for r in 0..self.rows() {
            for z in [false, true] {
                all.data.extend_from_slice(self.half(r, z));
                all.data.extend(zeros(other.words));
            }
        }
        for r in 0..other.rows() {
            for z in [false, true] {
                all.data.extend(zeros(self.words));
                all.data.extend_from_slice(other.half(r, z));
            }
        }
        all.phases.extend_from_slice(&self.phases);
        all.phases.extend_from_slice(&other.phases);
        all
    }
    /// Only these columns, in this order.
    pub(super) fn select(&self, columns: &[usize]) -> Self {
        let mut out = Self::empty(self.packing.prime(), columns.len());
        out.data.reserve(2 * out.words * self.rows());
        for r in 0..self.rows() {
            out.push_zero(self.phases[r]);
            for z in [false, true] {
                let half = self.half(r, z);
                let at = (2 * r + usize::from(z)) * out.words;
                let target = &mut out.data[at..at + out.words];
                for (to, &from) in columns.iter().enumerate() {
                    let v = self.packing.get(half, from);
                    if v != 0 {
                        self.packing.set(target, to, v);
                    }
                }
            }
        }
        out
    }
    /// Keeps the subgroup on which `form` vanishes. The pivot is the lightest row.
    pub(super) fn restrict(&mut self, form: impl Fn(&Self, usize) -> u32, phases: bool) {
        let hits: Vec<(usize, u32)> =
            (0..self.rows()).map(|r| (r, form(self, r))).filter(|&(_, v)| v != 0).collect();
        let Some(&(pivot, value)) = hits.iter().min_by_key(|&&(r, _)| (self.weight(r), r)) else {
            return;
        };
        let p = self.packing.prime();
        let inv = u64::from(inverse(value, p));
        for &(r, v) in &hits {
            if r != pivot {
                let c = (u64::from(p - v) * inv % u64::from(p)) as u32;
                self.multiply(r, pivot, c, phases);
            }
        }
        self.swap_remove(pivot);
    }
    /// Clears one digit (x and z) of every row.
    pub(super) fn clear(&mut self, column: usize) {
        for r in 0..self.rows() {
            self.set(r, column, false, 0);
            self.set(r, column, true, 0);
        }
    }
    /// Echelon form over these columns, x before z of each; pivot rows come first. Gives the
    /// rank.
    pub(super) fn echelon(&mut self, columns: &[usize], phases: bool) -> usize {
        let p = self.packing.prime();
        let mut rank = 0;
        for &column in columns {
            for z in [false, true] {
                let Some(found) = (rank..self.rows())
                    .filter(|&r| self.get(r, column, z) != 0)
                    .min_by_key(|&r| if r < rank + 64 { self.weight(r) } else { usize::MAX })
                else {
                    continue;
                };
                self.swap(rank, found);
                let inv = u64::from(inverse(self.get(rank, column, z), p));
                for r in rank + 1..self.rows() {
                    let v = self.get(r, column, z);
                    if v != 0 {
                        let c = (u64::from(p - v) * inv % u64::from(p)) as u32;
                        self.multiply(r, rank, c, phases);
                    }
                }
                rank += 1;
                if rank == self.rows() {
                    return rank;
                }
            }
        }
        rank
    }
}
