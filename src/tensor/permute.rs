//! Moving the axes of an array, block by block and over all threads.
//!
//! A plain walk in the order of the result reads memory with huge strides and pays a cache
//! line an entry. Here a tile of the fastest axes of the source times the fastest axes of
//! the result is moved at once, so that every cache line touched is used whole.

use ndarray::{ArrayD, ArrayViewD, IxDyn};
use rayon::prelude::*;
use std::mem::MaybeUninit;

/// Entries that a tile takes along the fastest axes of each side.
const RUN: usize = 32;
/// Entries below which one thread does it all.
const ALONE: usize = 1 << 15;

/// One loop of a move: how often, and how far source and result step.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
struct Loop {
    size: usize,
    from: isize,
    to: isize,
}

/// The array with its axes in the order `order`: axis i of the result is axis `order[i]` of
/// `array`. The result is in row-major order.
///
/// # Panics
/// Where `order` is no permutation of the axes.
///
/// ```
/// use ndarray::arr2;
/// let a = arr2(&[[1, 2, 3], [4, 5, 6]]).into_dyn();
/// let t = lierne::tensor::permuted(&a.view(), &[1, 0]);
/// assert_eq!(t, arr2(&[[1, 4], [2, 5], [3, 6]]).into_dyn());
/// ```
#[track_caller]
pub fn permuted<T: Copy + Send + Sync>(array: &ArrayViewD<'_, T>, order: &[usize]) -> ArrayD<T> {
    let view = array.clone().permuted_axes(IxDyn(order));
    let dims: Vec<usize> = view.shape().to_vec();
    // SAFETY: the view vouches for its pointer, sizes and strides.
    let out = unsafe { collect(&dims, view.strides(), view.as_ptr()) };
    ArrayD::from_shape_vec(IxDyn(&dims), out).expect("the buffer has one entry a place")
}

/// Copies `from`, whose axis i of size `dims[i]` steps by `strides[i]`, into `to` in
/// row-major order.
///
/// # Panics
/// Where `to` has another length than the product of `dims`, or `from` is too short.
#[track_caller]
pub(crate) fn gather<T: Copy + Send + Sync>(
    dims: &[usize],
    strides: &[usize],
    from: &[T],
    to: &mut [MaybeUninit<T>],
) {
    assert_eq!(to.len(), dims.iter().product::<usize>(), "the result has another size");
    if to.is_empty() {
        return;
    }
    let last: usize = dims.iter().zip(strides).map(|(&d, &s)| (d - 1) * s).sum();
    assert!(last < from.len(), "the source is too short");
    let loops: Vec<Loop> = row_major(dims)
        .zip(strides)
        .zip(dims)
        .map(|((to, &from), &size)| Loop { size, from: from as isize, to })
        .collect();
    // SAFETY: the furthest read and the number of writes were just checked.
    unsafe { run(&loops, from.as_ptr(), to.as_mut_ptr().cast::<T>()) }
}

/// The entries of a strided array in row-major order.
///
/// # Safety
/// Every place first + Σ index·stride with indices below `dims` may be read.
pub(super) unsafe fn collect<T: Copy + Send + Sync>(
    dims: &[usize],
    strides: &[isize],
    first: *const T,
) -> Vec<T> {
    let entries = dims.iter().product();
    let mut out: Vec<T> = Vec::with_capacity(entries);
    let loops: Vec<Loop> = row_major(dims)
        .zip(strides)
        .zip(dims)
        .map(|((to, &from), &size)| Loop { size, from, to })
        .collect();
    // SAFETY: the caller's promise; the result's places are those of a fresh buffer, each
    // written once before the length is set.
    unsafe {
        run(&loops, first, out.as_mut_ptr());
        out.set_len(entries);
    }
    out
}

fn row_major(dims: &[usize]) -> impl Iterator<Item = isize> + use<> {
    let mut steps = vec![1isize; dims.len()];
    for i in (1..dims.len()).rev() {
        steps[i - 1] = steps[i] * dims[i].max(1) as isize;
    }
    steps.into_iter()
}

/// Drops loops that run once and joins neighbours that step as one.
fn fuse(loops: &[Loop]) -> Vec<Loop> {
    let mut fused: Vec<Loop> = Vec::with_capacity(loops.len());
    for &l in loops.iter().filter(|l| l.size != 1) {
        match fused.last_mut() {
            Some(p) if p.from == l.from * l.size as isize && p.to == l.to * l.size as isize => {
                *p = Loop { size: p.size * l.size, ..l };
            }
            _ => fused.push(l),
        }
    }
    fused
}

/// Splits a long loop among `loops[at]` so that its inner part has about [`RUN`] rounds.
/// Gives the rest that does not divide back as a second set of loops with its offsets.
type Rest = (Vec<Loop>, isize, isize);
fn cut(loops: &mut Vec<Loop>, at: usize) -> Option<Rest> {
    let l = loops[at];
    if l.size < 2 * RUN {
        return None;
    }
    let block = (RUN..=2 * RUN).find(|b| l.size.is_multiple_of(*b)).unwrap_or(RUN);
    let whole = l.size / block;
    let rest = (!l.size.is_multiple_of(block)).then(|| {
        let mut others = loops.clone();
        others[at].size = l.size % block;
        let done = (whole * block) as isize;
        (others, done * l.from, done * l.to)
    });
    loops[at].size = block;
    let (from, to) = (l.from * block as isize, l.to * block as isize);
    loops.insert(at, Loop { size: whole, from, to });
    rest
}

struct Ends<T>(*const T, *mut T);
// SAFETY: the threads write disjoint places and only read the source.
unsafe impl<T: Sync> Sync for Ends<T> {}

/// Moves everything; `loops` are in the order of the result, slowest first.
///
/// # Safety
/// All places reached from `from` may be read, all reached from `to` written, the latter are
/// distinct and nobody else touches them.
unsafe fn run<T: Copy + Send + Sync>(loops: &[Loop], from: *const T, to: *mut T) {
    if loops.iter().any(|l| l.size == 0) {
        return;
    }
    let mut loops = fuse(loops);
    if loops.is_empty() {
        // SAFETY: one place to one place.
        unsafe { to.write(from.read()) };
        return;
    }
    if let Some(l) = loops.last()
        && l.from == 1
        && l.to == 1
        && l.size >= RUN
    {
        // SAFETY: the caller's promise.
        unsafe { tiles(&loops, &[loops.len() - 1], &[], from, to) };
        return;
    }
    // The source's fastest loop is cut first: its place in the list is found anew after.
    let mut pending: Vec<Rest> = Vec::new();
    let fastest = |loops: &[Loop]| {
        (0..loops.len()).min_by_key(|&i| (loops[i].from.unsigned_abs(), usize::MAX - i))
    };
    if let Some(at) = fastest(&loops) {
        pending.extend(cut(&mut loops, at));
    }
    let end = loops.len() - 1;
    pending.extend(cut(&mut loops, end));
    let mut inner: Vec<usize> = Vec::new();
    let mut length = 1;
    for i in (0..loops.len()).rev() {
        if length >= RUN {
            break;
        }
        length *= loops[i].size;
        inner.push(i);
    }
    inner.reverse();
    let mut by_source: Vec<usize> = (0..loops.len()).collect();
    by_source.sort_by_key(|&i| (loops[i].from.unsigned_abs(), usize::MAX - i));
    let mut across: Vec<usize> = Vec::new();
    let mut length = 1;
    for &i in &by_source {
        if length >= RUN {
            break;
        }
        length *= loops[i].size;
        if !inner.contains(&i) {
            across.push(i);
        }
    }
    across.sort_unstable();
    // SAFETY: the caller's promise; the rests cover exactly what the cuts left out.
    unsafe {
        tiles(&loops, &inner, &across, from, to);
        for (loops, a, b) in pending {
            run(&loops, from.offset(a), to.offset(b));
        }
    }
}

/// Offsets reached by some of the loops, the last fastest.
fn offsets(loops: &[Loop], which: &[usize]) -> Vec<(isize, isize)> {
    let mut table = vec![(0, 0)];
    for &i in which {
        let l = loops[i];
        table = table
            .iter()
            .flat_map(|&(a, b)| (0..l.size as isize).map(move |k| (a + k * l.from, b + k * l.to)))
            .collect();
    }
    table
}

/// # Safety
/// As [`run`]; `inner` and `across` name different loops.
unsafe fn tiles<T: Copy + Send + Sync>(
    loops: &[Loop],
    inner: &[usize],
    across: &[usize],
    from: *const T,
    to: *mut T,
) {
    let outer: Vec<Loop> = (0..loops.len())
        .filter(|i| !inner.contains(i) && !across.contains(i))
        .map(|i| loops[i])
        .collect();
    let row = offsets(loops, inner);
    let rows = offsets(loops, across);
    let straight = row.iter().enumerate().all(|(i, r)| *r == (i as isize, i as isize));
    let packed = row.iter().enumerate().all(|(i, r)| r.1 == i as isize);
    let reads: Vec<isize> = row.iter().map(|r| r.0).collect();
    let rounds: usize = outer.iter().map(|l| l.size).product();
    let tile = row.len() * rows.len();
    let ends = Ends(from, to);
    let work = |range: std::ops::Range<usize>| {
        let ends = &ends;
        let mut at = vec![0usize; outer.len()];
        let (mut a, mut b) = (0isize, 0isize);
        let mut left = range.start;
        for (i, l) in outer.iter().enumerate().rev() {
            at[i] = left % l.size;
            left /= l.size;
            a += at[i] as isize * l.from;
            b += at[i] as isize * l.to;
        }
        for _ in range {
            for &(ra, rb) in &rows {
                // SAFETY: sums of offsets of the loops, each place of the result once.
                unsafe {
                    let (s, d) = (ends.0.offset(a + ra), ends.1.offset(b + rb));
                    if straight {
                        std::ptr::copy_nonoverlapping(s, d, row.len());
                    } else if packed {
                        for (i, &r) in reads.iter().enumerate() {
                            d.add(i).write(s.offset(r).read());
                        }
                    } else {
                        for &(x, y) in &row {
                            d.offset(y).write(s.offset(x).read());
                        }
                    }
                }
            }
            for (i, l) in outer.iter().enumerate().rev() {
                at[i] += 1;
                a += l.from;
                b += l.to;
                if at[i] < l.size {
                    break;
                }
                a -= l.size as isize * l.from;
                b -= l.size as isize * l.to;
                at[i] = 0;
            }
        }
    };
    if rounds * tile < ALONE || rounds == 1 {
        work(0..rounds);
    } else {
        let piece = (ALONE / tile).max(1);
        (0..rounds.div_ceil(piece))
            .into_par_iter()
            .for_each(|p| work(p * piece..((p + 1) * piece).min(rounds)));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use ndarray::Slice;

    fn check(dims: &[usize], order: &[usize]) {
        let n: usize = dims.iter().product();
        let a = ArrayD::from_shape_vec(IxDyn(dims), (0..n as u32).collect()).unwrap();
        let want = a.view().permuted_axes(IxDyn(order)).as_standard_layout().to_owned();
        assert_eq!(permuted(&a.view(), order), want, "{dims:?} {order:?}");
    }

    #[test]
    fn agrees_with_ndarray_over_shapes_and_orders() {
        for dims in [
            vec![],
            vec![5],
            vec![3, 0, 2],
            vec![1, 7, 1],
            vec![64, 64],
            vec![67, 131],
            vec![4, 4, 4, 4],
            vec![2, 3, 5, 7],
            vec![100, 3, 2, 40],
            vec![2, 70, 1, 2, 33],
        ] {
            let mut order: Vec<usize> = (0..dims.len()).collect();
            loop {
                check(&dims, &order);
                let Some(i) = (1..order.len()).rev().find(|&i| order[i - 1] < order[i]) else {
                    break;
                };
                let j = (i..order.len()).rev().find(|&j| order[j] > order[i - 1]).unwrap();
                order.swap(i - 1, j);
                order[i..].reverse();
            }
        }
    }

    #[test]
    fn many_small_axes_in_reverse() {
        check(&[2; 16], &(0..16).rev().collect::<Vec<_>>());
        check(&[3; 10], &[4, 9, 0, 3, 8, 1, 7, 2, 6, 5]);
    }

    #[test]
    fn reads_views_with_gaps_and_backward_strides() {
        let a = ArrayD::from_shape_vec(IxDyn(&[40, 50, 6]), (0..12000u32).collect()).unwrap();
        let mut v = a.view();
        v.slice_axis_inplace(ndarray::Axis(0), Slice::new(3, None, 2));
        v.slice_axis_inplace(ndarray::Axis(1), Slice::new(0, Some(47), -3));
        let want = v.clone().permuted_axes(IxDyn(&[2, 0, 1])).as_standard_layout().to_owned();
        assert_eq!(permuted(&v, &[2, 0, 1]), want);
    }
}
