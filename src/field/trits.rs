//! Matrices over GF(3), two bits an entry in two planes.

/// Rows of word pairs: an entry 0, 1, 2 is (support, sign) = (0,0), (1,0), (1,1), so that
/// negation is one exclusive or. Words 2k and 2k+1 of a row hold support and sign of columns
/// 64k…64k+63. Invariants: sign ⊆ support, nothing past the last column.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Trits {
    pub(super) rows: usize,
    pub(super) cols: usize,
    /// Words a row, both planes.
    stride: usize,
    data: Vec<u64>,
}

/// Pivots whose combinations one table holds.
const TABLE_TRITS: usize = 4;
/// 3^4.
const TABLE_ROWS: usize = 81;
/// Tables used together, so that a row is read and written once for all of them.
const TABLES: usize = 4;

/// a + b on 64 entries in six operations (bit-sliced arithmetic: arXiv:0901.1413, from
/// memory; the formula is proven by the table in the tests).
#[inline(always)]
fn sum((a0, a1): (u64, u64), (b0, b1): (u64, u64)) -> (u64, u64) {
    let s = a0 ^ b1;
    let t = a1 ^ b0;
    ((a0 ^ b0) | (s ^ a1), s & t)
}

/// a − b, likewise.
#[inline(always)]
fn difference(a: (u64, u64), (b0, b1): (u64, u64)) -> (u64, u64) {
    sum(a, (b0, b0 ^ b1))
}

#[inline(always)]
fn entry(pair: &[u64], bit: usize) -> u32 {
    ((pair[0] >> bit & 1) + (pair[1] >> bit & 1)) as u32
}

/// dst += c·src with c = 1 or 2.
fn add_multiple(dst: &mut [u64], src: &[u64], c: u32) {
    for (d, s) in dst.chunks_exact_mut(2).zip(src.chunks_exact(2)) {
        let a = (d[0], d[1]);
        let b = (s[0], s[1]);
        (d[0], d[1]) = if c == 1 { sum(a, b) } else { difference(a, b) };
    }
}

impl Trits {
    pub(super) fn zeros(rows: usize, cols: usize) -> Self {
        let stride = 2 * cols.div_ceil(64);
        Self { rows, cols, stride, data: vec![0; rows * stride] }
    }
    #[inline]
    pub(super) fn get(&self, r: usize, c: usize) -> u32 {
        let at = r * self.stride + c / 64 * 2;
        entry(&self.data[at..at + 2], c % 64)
    }
    #[inline]
    pub(super) fn set(&mut self, r: usize, c: usize, v: u32) {
        let at = r * self.stride + c / 64 * 2;
        let bit = c % 64;
        self.data[at] = self.data[at] & !(1 << bit) | u64::from(v != 0) << bit;
        self.data[at + 1] = self.data[at + 1] & !(1 << bit) | u64::from(v == 2) << bit;
    }
    pub(super) fn swap_rows(&mut self, a: usize, b: usize) {
        if a != b {
            let (low, high) = (a.min(b), a.max(b));
            let (head, tail) = self.data.split_at_mut(high * self.stride);
            head[low * self.stride..(low + 1) * self.stride]
                .swap_with_slice(&mut tail[..self.stride]);
        }
    }
    fn negate_row(&mut self, r: usize) {
        for pair in self.data[r * self.stride..(r + 1) * self.stride].chunks_exact_mut(2) {
            pair[1] ^= pair[0];
        }
    }
    /// row\[dst\] += c·row\[src\], words from `from` on.
    fn add_row(&mut self, dst: usize, src: usize, c: u32, from: usize) {
        let s = self.stride;
        let (low, high) = (dst.min(src), dst.max(src));
        let (head, tail) = self.data.split_at_mut(high * s);
        let (a, b) = (&mut head[low * s + from..(low + 1) * s], &mut tail[from..s]);
        let (d, x) = if dst < src { (a, b) } else { (b, a) };
        add_multiple(d, x, c);
    }

    /// The same method as over GF(2), with 3^4 combinations a table.
    /// O(r·c·rank/(4·64)) word operations.
    pub(super) fn reduce(&mut self, full: bool) -> Vec<usize> {
        let mut pivots: Vec<usize> = Vec::new();
        let mut col = 0;
        let mut table = vec![0u64; TABLES * TABLE_ROWS * self.stride];
        let spacing = TABLE_ROWS * self.stride;
        while col < self.cols && pivots.len() < self.rows {
            let first = pivots.len();
            let from = col / 64 * 2;
            let width = self.stride - from;
            self.gather(&mut col, &mut pivots, first, from);
            let found = pivots.len() - first;
            if found == 0 {
                break;
            }
            let count = found.div_ceil(TABLE_TRITS);
            for t in 0..count {
                let size = TABLE_TRITS.min(found - t * TABLE_TRITS);
                let part = &mut table[t * spacing..(t + 1) * spacing];
                part[..width].fill(0);
                let mut filled = 1;
                for k in 0..size {
                    let row = first + t * TABLE_TRITS + k;
                    let source = &self.data[row * self.stride + from..(row + 1) * self.stride];
                    for c in 1..3 {
                        for i in 0..filled {
                            let at = (c as usize * filled + i) * width;
                            let (done, next) = part.split_at_mut(at);
                            next[..width].copy_from_slice(&done[i * width..(i + 1) * width]);
                            add_multiple(&mut next[..width], source, c);
                        }
                    }
                    filled *= 3;
                }
            }
            let columns = &pivots[first..];
            let start = if full { 0 } else { first + found };
            for r in start..self.rows {
                if (first..first + found).contains(&r) {
                    continue;
                }
                // All columns of a group lie in one word (see `gather`).
                let at = r * self.stride + columns[0] / 64 * 2;
                let word = [self.data[at], self.data[at + 1]];
                let mut place = [0usize; TABLES];
                let mut power = 1;
                for (i, &c) in columns.iter().enumerate() {
                    if i % TABLE_TRITS == 0 {
                        power = 1;
                    }
                    let v = entry(&word, c % 64) as usize;
                    place[i / TABLE_TRITS] += (3 - v) % 3 * power;
                    power *= 3;
                }
                let row = &mut self.data[r * self.stride + from..(r + 1) * self.stride];
                let piece = |t: usize| {
                    let at = t * spacing + place[t] * width;
                    &table[at..at + width]
                };
                if count == TABLES {
                    let others = piece(0)
                        .chunks_exact(2)
                        .zip(piece(1).chunks_exact(2))
                        .zip(piece(2).chunks_exact(2))
                        .zip(piece(3).chunks_exact(2));
                    for (x, (((a, b), c), d)) in row.chunks_exact_mut(2).zip(others) {
                        let left = sum((a[0], a[1]), (b[0], b[1]));
                        let right = sum((c[0], c[1]), (d[0], d[1]));
                        (x[0], x[1]) = sum((x[0], x[1]), sum(left, right));
                    }
                } else {
                    for t in 0..count {
                        add_multiple(row, piece(t), 1);
                    }
                }
            }
        }
        pivots
    }

    /// Finds pivots from column `col` on within one word of columns, as many as the tables
    /// hold; moves their rows to `first…`, scales them to a leading one and reduces them
    /// among themselves. Rows below stay as they were, only the word under inspection is
    /// followed beside them.
    fn gather(&mut self, col: &mut usize, pivots: &mut Vec<usize>, first: usize, from: usize) {
        let group = TABLE_TRITS * TABLES;
        let mut window = *col / 64;
        let look = |data: &[u64], stride: usize, r: usize, window: usize| {
            let at = r * stride + 2 * window;
            [data[at], data[at + 1]]
        };
        let mut seen: Vec<[u64; 2]> =
            (first..self.rows).map(|r| look(&self.data, self.stride, r, window)).collect();
        while *col < self.cols && pivots.len() < self.rows && pivots.len() - first < group {
            if *col / 64 != window {
                if pivots.len() > first {
                    return;
                }
                window = *col / 64;
                for (r, s) in seen.iter_mut().enumerate() {
                    *s = look(&self.data, self.stride, first + r, window);
                }
            }
            let bit = *col % 64;
            let rank = pivots.len();
            let Some(found) = (rank..self.rows).find(|&r| seen[r - first][0] >> bit & 1 == 1)
            else {
                *col += 1;
                continue;
            };
            self.swap_rows(rank, found);
            seen.swap(rank - first, found - first);
            for (k, &c) in pivots[first..].iter().enumerate() {
                let v = self.get(rank, c);
                if v != 0 {
                    self.add_row(rank, first + k, 3 - v, from);
                }
            }
            if self.get(rank, *col) == 2 {
                self.negate_row(rank);
            }
            for r in first..rank {
                let v = self.get(r, *col);
                if v != 0 {
                    self.add_row(r, rank, 3 - v, from);
                }
            }
            let pivot = look(&self.data, self.stride, rank, window);
            for s in &mut seen[rank - first + 1..] {
                let v = entry(s, bit);
                if v != 0 {
                    add_multiple(s, &pivot, 3 - v);
                }
            }
            pivots.push(*col);
            *col += 1;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sliced_sums_follow_the_table() {
        let code = [(0u64, 0u64), (1, 0), (1, 1)];
        for a in 0..3 {
            for b in 0..3 {
                assert_eq!(sum(code[a], code[b]), code[(a + b) % 3], "{a} + {b}");
                assert_eq!(difference(code[a], code[b]), code[(a + 3 - b) % 3], "{a} − {b}");
            }
        }
    }
}
