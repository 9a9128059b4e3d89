//! The pairwise contraction of two strided arrays: loops around matrix products.

use crate::linalg::{Operand, Scalar, Target, multiply, multiply_here};
use rayon::prelude::*;
use std::mem::MaybeUninit;
use std::ops::Range;

/// One label's size and how far each of the three arrays steps along it.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct Leg {
    pub size: usize,
    pub left: usize,
    pub right: usize,
    pub out: usize,
}

const ONE: Leg = Leg { size: 1, left: 0, right: 0, out: 0 };

/// `C[b,m,n] = Σ_k A[b,m,k]·B[b,k,n]`, every group any number of labels, any strides. A group
/// holds 0 for the array that lacks its labels. Places of C are distinct.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub(crate) struct Join {
    pub batch: Vec<Leg>,
    pub rows: Vec<Leg>,
    pub sum: Vec<Leg>,
    pub columns: Vec<Leg>,
}

/// A [`Join`] with its strategy: which legs the matrix product takes, which are looped over.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(crate) struct Loops {
    /// Legs that C has, looped over outside.
    outer: Vec<Leg>,
    /// Summed legs looped over outside.
    sums: Vec<Leg>,
    rows: Leg,
    sum: Leg,
    columns: Leg,
    /// A batch leg that runs innermost, entry by entry, instead of a matrix product.
    along: Option<Leg>,
    places: usize,
    reach: [usize; 3],
    empty: bool,
}

/// Multiply-adds below which threads are not worth their trouble.
const ALONE: u128 = 1 << 17;
/// Multiply-adds of one product from which on the product itself is spread over threads.
const WIDE: u128 = 1 << 22;
/// Matrix products below this many multiply-adds give way to a loop along a batch leg.
const TINY: usize = 100;
/// Summed entries from which on the sum itself is cut into pieces for threads.
const LONG: usize = 1 << 17;

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

/// Takes the leg out that serves a matrix product best: the longest, with preference for one
/// that some array has contiguous.
fn best(legs: &mut Vec<Leg>) -> Leg {
    let merit = |l: &Leg| l.size * if l.left == 1 || l.right == 1 || l.out == 1 { 3 } else { 2 };
    let at = (0..legs.len()).max_by_key(|&i| (merit(&legs[i]), i));
    at.map_or(ONE, |i| legs.remove(i))
}

fn count(legs: &[Leg]) -> usize {
    legs.iter().map(|l| l.size).product()
}

impl Join {
    fn groups(&self) -> [&Vec<Leg>; 4] {
        [&self.batch, &self.rows, &self.sum, &self.columns]
    }
    fn reach(&self, step: impl Fn(&Leg) -> usize) -> usize {
        let legs = self.groups().into_iter().flatten();
        1 + legs.map(|l| l.size.saturating_sub(1) * step(l)).sum::<usize>()
    }

    /// Decides the loops.
    pub fn plan(&self) -> Loops {
        let mut rows = fuse(self.rows.clone(), |l| l.out);
        let mut columns = fuse(self.columns.clone(), |l| l.out);
        let mut sums = fuse(self.sum.clone(), |l| l.left.max(l.right));
        let mut outer = fuse(self.batch.clone(), |l| l.out);
        let (m, k, n) = (best(&mut rows), best(&mut sums), best(&mut columns));
        let along = outer
            .iter()
            .position(|l| l.size >= 8 && l.left == 1 && l.right == 1 && l.out == 1)
            .filter(|_| m.size * k.size * n.size < TINY)
            .map(|at| outer.remove(at));
        outer.extend(rows);
        outer.extend(columns);
        if along.is_some() {
            outer.extend([m, n]);
            sums.push(k);
        }
        Loops {
            outer: fuse(outer, |l| l.out),
            sums: fuse(sums, |l| l.left.max(l.right)),
            rows: if along.is_some() { ONE } else { m },
            sum: if along.is_some() { ONE } else { k },
            columns: if along.is_some() { ONE } else { n },
            along,
            places: count(&self.batch) * count(&self.rows) * count(&self.columns),
            reach: [self.reach(|l| l.left), self.reach(|l| l.right), self.reach(|l| l.out)],
            empty: count(&self.sum) == 0,
        }
    }
}

struct Ends<T>(*const T, *const T, *mut T);
// SAFETY: the threads write disjoint places and only read the operands.
unsafe impl<T: Sync> Sync for Ends<T> {}

/// Calls `f` with the three offsets of each combination of indices.
fn each(legs: &[Leg], range: Range<usize>, mut f: impl FnMut(usize, usize, usize)) {
    if range.is_empty() {
        return;
    }
    if legs.is_empty() {
        f(0, 0, 0);
        return;
    }
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

impl Loops {
    /// Scalar multiply-adds: the product of all sizes.
    pub fn multiply_adds(&self) -> u128 {
        let inner = [self.rows, self.sum, self.columns, self.along.unwrap_or(ONE)];
        let legs = self.outer.iter().chain(&self.sums).chain(&inner);
        legs.map(|l| l.size as u128).product()
    }

    /// Estimated time on one thread in nanoseconds, for entries of so many bytes.
    pub fn nanoseconds(&self, complex: bool, bytes: usize) -> f64 {
        let rounds = count(&self.outer) as f64;
        let sums = count(&self.sums) as f64;
        if let Some(l) = self.along {
            return rounds * sums * (8.0 + l.size as f64 * if complex { 0.6 } else { 0.25 });
        }
        let (m, k, n) = (self.rows.size as f64, self.sum.size as f64, self.columns.size as f64);
        let line = 64.0 / bytes as f64;
        // A block neither of whose legs is contiguous uses a part of each cache line, unless
        // a loop around it soon comes for the rest.
        let next = self.outer.last().copied().unwrap_or(ONE);
        let waste = |x: (usize, usize), y: (usize, usize), around: usize| {
            let run = [x, y].iter().filter(|s| s.0 == 1).map(|s| s.1 as f64).fold(1.0, f64::max);
            let bare = (line / run).max(1.0);
            if around == 1 { bare.min(1.5) } else { bare }
        };
        let (r, s, c) = (self.rows, self.sum, self.columns);
        let a = m * k * waste((r.left, r.size), (s.left, s.size), next.left);
        let b = k * n * waste((s.right, s.size), (c.right, c.size), next.right);
        let o = m * n * waste((r.out, r.size), (c.out, c.size), next.out);
        let traffic = (a + b + o) * bytes as f64 * 0.04;
        rounds * sums * (25.0 + m * k * n * if complex { 0.08 } else { 0.02 } + traffic)
    }

    /// Runs it; `out` must have as many entries as C.
    ///
    /// The same bits whatever the number of threads: every entry of C is computed in one
    /// order, and where work is split depends on sizes alone.
    ///
    /// # Panics
    /// Where a buffer is too short.
    #[track_caller]
    pub fn run<T: Scalar>(&self, a: &[T], b: &[T], out: &mut [MaybeUninit<T>]) {
        assert_eq!(out.len(), self.places, "the result of a contraction has another size");
        if self.places == 0 {
            return;
        }
        if self.empty {
            out.fill(MaybeUninit::new(T::zero()));
            return;
        }
        assert!(self.reach[0] <= a.len(), "the left operand is too short");
        assert!(self.reach[1] <= b.len(), "the right operand is too short");
        assert!(self.reach[2] <= out.len(), "the result is too short");
        if self.sum.size >= LONG && self.sums.is_empty() && self.places <= 1 << 12 {
            self.long(a, b, out);
            return;
        }
        let rounds = count(&self.outer);
        let each_round = self.multiply_adds() / rounds as u128;
        let ends = Ends(a.as_ptr(), b.as_ptr(), out.as_mut_ptr().cast::<T>());
        if each_round * (rounds as u128) < ALONE {
            self.rounds(&ends, 0..rounds, false);
        } else if each_round >= WIDE || rounds == 1 {
            self.rounds(&ends, 0..rounds, true);
        } else {
            let piece = (ALONE / each_round.max(1)).max(1) as usize;
            (0..rounds.div_ceil(piece)).into_par_iter().for_each(|p| {
                self.rounds(&ends, p * piece..((p + 1) * piece).min(rounds), false);
            });
        }
    }

    fn rounds<T: Scalar>(&self, ends: &Ends<T>, range: Range<usize>, spread: bool) {
        let size = (self.rows.size, self.sum.size, self.columns.size);
        let sums = count(&self.sums);
        each(&self.outer, range, |x, y, z| {
            let mut add = false;
            each(&self.sums, 0..sums, |sx, sy, _| {
                // SAFETY: offsets are sums of index·step within the reach that was checked;
                // different rounds write different places of C.
                unsafe {
                    let (a, b, c) = (ends.0.add(x + sx), ends.1.add(y + sy), ends.2.add(z));
                    if let Some(l) = self.along {
                        along(l.size, a, b, c, add);
                    } else {
                        let a = Operand {
                            at: a,
                            rows: self.rows.left as isize,
                            cols: self.sum.left as isize,
                        };
                        let b = Operand {
                            at: b,
                            rows: self.sum.right as isize,
                            cols: self.columns.right as isize,
                        };
                        let c = Target {
                            at: c,
                            rows: self.rows.out as isize,
                            cols: self.columns.out as isize,
                        };
                        if spread {
                            multiply(size, a, b, c, add);
                        } else {
                            multiply_here(size, a, b, c, add);
                        }
                    }
                }
                add = true;
            });
        });
    }

    /// A long sum into few places: cut into pieces of fixed length, added up in order.
    fn long<T: Scalar>(&self, a: &[T], b: &[T], out: &mut [MaybeUninit<T>]) {
        let piece = LONG / 4;
        let parts: Vec<Vec<T>> = (0..self.sum.size.div_ceil(piece))
            .into_par_iter()
            .map(|p| {
                let start = p * piece;
                let sum = Leg { size: piece.min(self.sum.size - start), ..self.sum };
                let part = Self { sum, ..self.clone() };
                let mut values: Vec<T> = vec![T::zero(); self.places];
                // SAFETY: the piece's offsets stay within the reach of the whole.
                let ends = unsafe {
                    Ends(
                        a.as_ptr().add(start * self.sum.left),
                        b.as_ptr().add(start * self.sum.right),
                        values.as_mut_ptr(),
                    )
                };
                part.rounds(&ends, 0..count(&self.outer), false);
                values
            })
            .collect();
        for (i, place) in out.iter_mut().enumerate() {
            place.write(parts.iter().map(|p| p[i]).sum());
        }
    }
}

/// `c[i] = a[i]·b[i]`, or added to it.
///
/// # Safety
/// All three reach over `n` entries; `c` is nobody else's.
unsafe fn along<T: Scalar>(n: usize, a: *const T, b: *const T, c: *mut T, add: bool) {
    // SAFETY: the caller's promise; the places may be uninitialised unless `add` is set, and
    // are then only written.
    unsafe {
        if add {
            for i in 0..n {
                *c.add(i) += *a.add(i) * *b.add(i);
            }
        } else {
            for i in 0..n {
                c.add(i).write(*a.add(i) * *b.add(i));
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use num_complex::Complex64;
    use rand::seq::SliceRandom;
    use rand::{Rng, SeedableRng};
    use rand_chacha::ChaCha8Rng;

    /// Lays the legs of one array out in a random order; gives their strides.
    fn scatter(sizes: &[usize], rng: &mut ChaCha8Rng) -> (Vec<usize>, usize) {
        let mut order: Vec<usize> = (0..sizes.len()).collect();
        if rng.random_bool(0.7) {
            order.shuffle(rng);
        }
        let mut strides = vec![0; sizes.len()];
        let mut step = 1;
        for &i in order.iter().rev() {
            strides[i] = step;
            step *= sizes[i];
        }
        (strides, step)
    }

    fn check<T: Scalar>(groups: [&[usize]; 4], seed: u64, tolerance: f64) {
        let mut rng = ChaCha8Rng::seed_from_u64(seed);
        let [b, m, k, n] = groups;
        let (sa, la) = scatter(&[b, m, k].concat(), &mut rng);
        let (sb, lb) = scatter(&[b, k, n].concat(), &mut rng);
        let (sc, lc) = scatter(&[b, m, n].concat(), &mut rng);
        let leg =
            |sizes: &[usize], left: Option<usize>, right: Option<usize>, out: Option<usize>| {
                (0..sizes.len())
                    .map(|i| Leg {
                        size: sizes[i],
                        left: left.map_or(0, |o| sa[o + i]),
                        right: right.map_or(0, |o| sb[o + i]),
                        out: out.map_or(0, |o| sc[o + i]),
                    })
                    .collect::<Vec<_>>()
            };
        let (nb, nm, nk) = (b.len(), m.len(), k.len());
        let join = Join {
            batch: leg(b, Some(0), Some(0), Some(0)),
            rows: leg(m, Some(nb), None, Some(nb)),
            sum: leg(k, Some(nb + nm), Some(nb), None),
            columns: leg(n, None, Some(nb + nk), Some(nb + nm)),
        };
        let mut some = || {
            T::from_c64(Complex64::new(rng.random_range(-1.0..1.0), rng.random_range(-1.0..1.0)))
        };
        let x: Vec<T> = (0..la).map(|_| some()).collect();
        let y: Vec<T> = (0..lb).map(|_| some()).collect();
        let mut got = vec![MaybeUninit::new(T::from_c64(Complex64::new(7.0, 7.0))); lc];
        let loops = join.plan();
        loops.run(&x, &y, &mut got);
        let mut want = vec![T::zero(); lc];
        let outer = [join.batch, join.rows, join.columns].concat();
        each(&outer, 0..count(&outer), |a, b, c| {
            each(&join.sum, 0..count(&join.sum), |ka, kb, _| want[c] += x[a + ka] * y[b + kb]);
        });
        for (g, w) in got.iter().zip(&want) {
            // SAFETY: initialised above.
            let g = unsafe { g.assume_init() };
            assert!((g - *w).magnitude() <= tolerance, "{groups:?} seed {seed}: {g:?} {w:?}");
        }
        let all: u128 = groups.iter().flat_map(|g| g.iter()).map(|&s| s as u128).product();
        assert_eq!(loops.multiply_adds(), all);
    }

    #[test]
    fn agrees_with_the_definition_over_shapes_orders_and_strides() {
        let cases: [[&[usize]; 4]; 12] = [
            [&[], &[], &[], &[]],
            [&[], &[5], &[], &[4]],
            [&[], &[], &[6], &[]],
            [&[], &[2, 3], &[4], &[5]],
            [&[], &[2, 1, 3], &[2, 2], &[3, 2]],
            [&[3], &[2, 2], &[3], &[2]],
            [&[12], &[2], &[2], &[3]],
            [&[9], &[], &[2, 2], &[]],
            [&[2, 4], &[1, 3], &[], &[2, 2]],
            [&[], &[3, 0], &[2], &[2]],
            [&[], &[3], &[0], &[2]],
            [&[4], &[7, 8], &[9, 4], &[6, 10]],
        ];
        for groups in cases {
            for seed in 0..12 {
                check::<f64>(groups, seed, 1e-12);
                check::<Complex64>(groups, seed, 1e-12);
            }
        }
        check::<f32>([&[3], &[4, 2], &[5], &[6]], 0, 1e-5);
    }

    #[test]
    fn large_steps_run_in_pieces() {
        for seed in 0..4 {
            check::<f64>([&[], &[40, 50], &[30], &[60]], seed, 1e-11);
            check::<Complex64>([&[300], &[5, 4], &[6], &[8]], seed, 1e-11);
            check::<f64>([&[], &[3], &[LONG + 5], &[2]], seed, 1e-9);
            check::<f64>([&[2000], &[2], &[3], &[2, 2]], seed, 1e-11);
        }
    }
}
