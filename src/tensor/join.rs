//! The pairwise contraction of two strided arrays: loops around matrix products.

use crate::linalg::{Operand, Scalar, Target, multiply, multiply_here};
use rayon::prelude::*;
use std::mem::MaybeUninit;

/// One label's size and how far each of the three arrays steps along it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct Leg {
    pub size: usize,
    pub left: usize,
    pub right: usize,
    pub out: usize,
}

/// C[b,m,n] = Σ_k A[b,m,k]·B[b,k,n], every group any number of labels, any strides. A group
/// holds 0 for the array that lacks its labels. Places of C are distinct.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub(crate) struct Join {
    pub batch: Vec<Leg>,
    pub rows: Vec<Leg>,
    pub sum: Vec<Leg>,
    pub columns: Vec<Leg>,
}

/// Multiply-adds below which threads are not worth their trouble.
const ALONE: u128 = 1 << 17;

/// Drops legs of size 1 and joins those that step as one, slowest first.
fn fuse(mut legs: Vec<Leg>, key: impl Fn(&Leg) -> usize) -> Vec<Leg> {
    legs.retain(|l| l.size != 1);
    legs.sort_by_key(|l| std::cmp::Reverse(key(l)));
    let mut out: Vec<Leg> = Vec::with_capacity(legs.len());
    for l in legs {
        match out.last_mut() {
            Some(p)
                if p.left == l.left * l.size
                    && p.right == l.right * l.size
                    && p.out == l.out * l.size =>
            {
                *p = Leg { size: p.size * l.size, ..l };
            }
            _ => out.push(l),
        }
    }
    out
}

/// Takes the longest leg out for the matrix product.
fn longest(legs: &mut Vec<Leg>) -> Leg {
    let one = Leg { size: 1, left: 0, right: 0, out: 0 };
    let at = (0..legs.len()).max_by_key(|&i| (legs[i].size, i));
    at.map_or(one, |i| legs.remove(i))
}

struct Ends<T>(*const T, *const T, *mut T);
// SAFETY: the threads write disjoint places and only read the operands.
unsafe impl<T: Sync> Sync for Ends<T> {}

/// Calls `f` with the three offsets of each combination of indices.
fn each(legs: &[Leg], range: std::ops::Range<usize>, mut f: impl FnMut(usize, usize, usize)) {
    let mut at = vec![0usize; legs.len()];
    let (mut a, mut b, mut c) = (0, 0, 0);
    let mut left = range.start;
    for (i, l) in legs.iter().enumerate().rev() {
        at[i] = left % l.size;
        left /= l.size;
        a += at[i] * l.left;
        b += at[i] * l.right;
        c += at[i] * l.out;
    }
    for _ in range {
        f(a, b, c);
        for (i, l) in legs.iter().enumerate().rev() {
            at[i] += 1;
            a += l.left;
            b += l.right;
            c += l.out;
            if at[i] < l.size {
                break;
            }
            a -= l.size * l.left;
            b -= l.size * l.right;
            c -= l.size * l.out;
            at[i] = 0;
        }
    }
}

impl Join {
    fn groups(&self) -> [&Vec<Leg>; 4] {
        [&self.batch, &self.rows, &self.sum, &self.columns]
    }
    /// Scalar multiply-adds: the product of all sizes.
    pub fn multiply_adds(&self) -> u128 {
        self.groups().iter().flat_map(|g| g.iter()).map(|l| l.size as u128).product()
    }
    /// One more than the last place of `step` that is touched.
    fn reach(&self, step: impl Fn(&Leg) -> usize) -> usize {
        1 + self
            .groups()
            .iter()
            .flat_map(|g| g.iter())
            .map(|l| (l.size - 1) * step(l))
            .sum::<usize>()
    }

    /// Runs it; `out` must have as many entries as C.
    ///
    /// The same bits whatever the number of threads: every entry of C is computed by one
    /// thread in one order.
    ///
    /// # Panics
    /// Where a buffer is too short.
    #[track_caller]
    pub fn run<T: Scalar>(&self, a: &[T], b: &[T], out: &mut [MaybeUninit<T>]) {
        let places: usize = [&self.batch, &self.rows, &self.columns]
            .iter()
            .flat_map(|g| g.iter())
            .map(|l| l.size)
            .product();
        assert_eq!(out.len(), places, "the result of a contraction has another size");
        if places == 0 {
            return;
        }
        if self.sum.iter().any(|l| l.size == 0) {
            out.fill(MaybeUninit::new(T::zero()));
            return;
        }
        assert!(self.reach(|l| l.left) <= a.len(), "the left operand is too short");
        assert!(self.reach(|l| l.right) <= b.len(), "the right operand is too short");
        assert!(self.reach(|l| l.out) <= out.len(), "the result is too short");
        let mut rows = fuse(self.rows.clone(), |l| l.out);
        let mut columns = fuse(self.columns.clone(), |l| l.out);
        let mut sum = fuse(self.sum.clone(), |l| l.left);
        let mut outer = fuse(self.batch.clone(), |l| l.out);
        let (m, k, n) = (longest(&mut rows), longest(&mut sum), longest(&mut columns));
        outer.extend(rows);
        outer.extend(columns);
        outer.sort_by_key(|l| std::cmp::Reverse(l.out));
        let outer = fuse(outer, |l| l.out);
        let mut sums: Vec<(usize, usize)> = Vec::new();
        each(&sum, 0..sum.iter().map(|l| l.size).product(), |a, b, _| sums.push((a, b)));
        let rounds: usize = outer.iter().map(|l| l.size).product();
        let size = (m.size, k.size, n.size);
        let each_round = sums.len() as u128 * m.size as u128 * k.size as u128 * n.size as u128;
        let ends = Ends(a.as_ptr(), b.as_ptr(), out.as_mut_ptr().cast::<T>());
        let work = |range: std::ops::Range<usize>, spread: bool| {
            let ends = &ends;
            each(&outer, range, |x, y, z| {
                for (i, &(sx, sy)) in sums.iter().enumerate() {
                    // SAFETY: offsets are sums of index·step within the reach checked above;
                    // different rounds write different places of C.
                    unsafe {
                        let a = Operand {
                            at: ends.0.add(x + sx),
                            rows: m.left as isize,
                            cols: k.left as isize,
                        };
                        let b = Operand {
                            at: ends.1.add(y + sy),
                            rows: k.right as isize,
                            cols: n.right as isize,
                        };
                        let c = Target {
                            at: ends.2.add(z),
                            rows: m.out as isize,
                            cols: n.out as isize,
                        };
                        if spread {
                            multiply(size, a, b, c, i > 0);
                        } else {
                            multiply_here(size, a, b, c, i > 0);
                        }
                    }
                }
            });
        };
        if each_round * (rounds as u128) < ALONE {
            work(0..rounds, false);
        } else if each_round >= 1 << 25 || rounds == 1 {
            work(0..rounds, true);
        } else {
            let piece = (ALONE / each_round.max(1)).max(1) as usize;
            (0..rounds.div_ceil(piece))
                .into_par_iter()
                .for_each(|p| work(p * piece..((p + 1) * piece).min(rounds), false));
        }
    }
}
