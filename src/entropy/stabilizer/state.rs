//! The state of a network of stabilizer tensors, one prime at a time.

use super::digits::{Bits, Packing, Plain, Trits};
use super::tableau::Tableau;
use crate::field::{Field, Matrix};

/// A stabilizer state on the open legs of a network, in the digits of one prime.
///
/// Rows are the generators of its stabilizer group with their phases, in the convention of
/// [`crate::block::PrimePart`]; columns are the digits of the open legs in the order of
/// [`crate::entropy::Wires`] (boundary, then bulk), digit 0 of a leg first. Invariant: as many
/// independent, commuting rows as digits.
#[derive(Debug, Clone)]
pub struct State {
    prime: u32,
    starts: Vec<u32>,
    rows: Rows,
}

#[derive(Debug, Clone)]
pub(super) enum Rows {
    Two(Tableau<Bits>),
    Three(Tableau<Trits>),
    Any(Tableau<Plain>),
}

macro_rules! each {
    ($rows:expr, $t:ident => $body:expr) => {
        match $rows {
            Rows::Two($t) => $body,
            Rows::Three($t) => $body,
            Rows::Any($t) => $body,
        }
    };
}
pub(super) use each;

impl State {
    pub(super) fn new(prime: u32, digits: &[u32], rows: Rows) -> Self {
        let mut starts = vec![0];
        for d in digits {
            starts.push(starts[starts.len() - 1] + d);
        }
        Self { prime, starts, rows }
    }
    /// The prime.
    pub fn prime(&self) -> u32 {
        self.prime
    }
    /// Number of open legs.
    pub fn legs(&self) -> usize {
        self.starts.len() - 1
    }
    /// Columns of an open leg's digits.
    pub fn columns(&self, leg: usize) -> std::ops::Range<usize> {
        self.starts[leg] as usize..self.starts[leg + 1] as usize
    }
    /// Digits in all.
    pub fn width(&self) -> usize {
        self.starts[self.legs()] as usize
    }
    /// x and z of a generator at a column.
    pub fn entry(&self, row: usize, column: usize) -> (u32, u32) {
        each!(&self.rows, t => (t.x(row, column), t.z(row, column)))
    }
    /// Exponent of τ of a generator (modulo p, or modulo 4 for p = 2).
    pub fn phase(&self, row: usize) -> u32 {
        each!(&self.rows, t => t.phase(row))
    }
    pub(super) fn rows(&self) -> &Rows {
        &self.rows
    }
    /// All generators: x of every column, then z of every column.
    pub fn generators(&self) -> Vec<Vec<u32>> {
        let n = self.width();
        (0..n)
            .map(|r| {
                let entries: Vec<_> = (0..n).map(|c| self.entry(r, c)).collect();
                entries.iter().map(|e| e.0).chain(entries.iter().map(|e| e.1)).collect()
            })
            .collect()
    }
    /// Rank of the generators restricted to these columns (x and z of each). Cost
    /// O(rows·columns²/64) word operations for p = 2 and 3.
    pub fn rank_on(&self, columns: &[usize]) -> usize {
        each!(&self.rows, t => {
            let mut part = t.select(columns);
            let all: Vec<usize> = (0..columns.len()).collect();
            part.echelon(&all, false)
        })
    }
    /// Maximally entangled pairs of digits between A (`a`) and the rest of A ∪ B (`both`), one
    /// flag an open leg: half the rank of the commutators, on A, of the elements supported on
    /// A ∪ B. The logarithmic negativity is this times ln p.
    pub fn negative_pairs(&self, a: &[bool], both: &[bool]) -> usize {
        let columns = |keep: &dyn Fn(usize) -> bool| -> Vec<usize> {
            (0..self.legs()).filter(|&l| keep(l)).flat_map(|l| self.columns(l)).collect()
        };
        let outside = columns(&|l| !both[l]);
        let on_a = columns(&|l| a[l] && both[l]);
        each!(&self.rows, t => {
            let mut t = t.clone();
            let rank = t.echelon(&outside, false);
            let p = u64::from(self.prime);
            let rows: Vec<usize> = (rank..t.rows()).collect();
            let commutators: Vec<Vec<u32>> = rows
                .iter()
                .map(|&r| {
                    rows.iter()
                        .map(|&s| {
                            let sum: u64 = on_a
                                .iter()
                                .map(|&c| {
                                    let (xr, zr) = (u64::from(t.x(r, c)), u64::from(t.z(r, c)));
                                    let (xs, zs) = (u64::from(t.x(s, c)), u64::from(t.z(s, c)));
                                    xr * zs + (p - zr) % p * xs
                                })
                                .sum();
                            (sum % p) as u32
                        })
                        .collect()
                })
                .collect();
            let field = Field::new(p).expect("a prime is the order of a field");
            Matrix::from_rows(&field, rows.len(), &commutators).rank() / 2
        })
    }
    /// Entropy between the open legs with a flag and the others, in digits of the prime:
    /// rank of the generators restricted to one side, minus that side's digits (Phys. Rev. A
    /// 71, 022315 (2005)). The smaller side is taken.
    ///
    /// # Panics
    /// Where there is not one flag an open leg.
    #[track_caller]
    pub fn entropy(&self, inside: &[bool]) -> usize {
        assert_eq!(inside.len(), self.legs(), "one flag an open leg");
        let of = |side: bool| -> Vec<usize> {
            (0..self.legs()).filter(|&l| inside[l] == side).flat_map(|l| self.columns(l)).collect()
        };
        let (a, b) = (of(true), of(false));
        let small = if a.len() <= b.len() { a } else { b };
        self.rank_on(&small) - small.len()
    }
}

impl Rows {
    /// The packing for this prime.
    pub(super) fn dispatch<R>(prime: u32, work: impl Work<R>) -> R {
        match prime {
            2 => work.with::<Bits>(Rows::Two),
            3 => work.with::<Trits>(Rows::Three),
            _ => work.with::<Plain>(Rows::Any),
        }
    }
}

/// Work that is the same for all packings.
pub(super) trait Work<R> {
    /// Does it with one packing; `wrap` makes rows of its tableau.
    fn with<P: Packing>(self, wrap: fn(Tableau<P>) -> Rows) -> R;
}
