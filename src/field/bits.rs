//! Matrices over GF(2), one bit an entry.

/// Rows of 64-bit words; bit j % 64 of word j / 64 is column j. Invariant: bits past the
/// last column are zero.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Bits {
    pub(super) rows: usize,
    pub(super) cols: usize,
    stride: usize,
    data: Vec<u64>,
}

/// Pivots gathered before all rows are cleared at once; a table holds 2^8 combinations.
const TABLE_BITS: usize = 8;
/// Tables used together, so that a row is read and written once for all of them.
const TABLES: usize = 4;

impl Bits {
    pub(super) fn zeros(rows: usize, cols: usize) -> Self {
        let stride = cols.div_ceil(64);
        Self { rows, cols, stride, data: vec![0; rows * stride] }
    }
    #[inline]
    pub(super) fn get(&self, r: usize, c: usize) -> u32 {
        (self.data[r * self.stride + c / 64] >> (c % 64) & 1) as u32
    }
    #[inline]
    pub(super) fn set(&mut self, r: usize, c: usize, v: u32) {
        let word = &mut self.data[r * self.stride + c / 64];
        *word = *word & !(1 << (c % 64)) | u64::from(v & 1) << (c % 64);
    }
    pub(super) fn swap_rows(&mut self, a: usize, b: usize) {
        if a != b {
            let (low, high) = (a.min(b), a.max(b));
            let (head, tail) = self.data.split_at_mut(high * self.stride);
            head[low * self.stride..(low + 1) * self.stride]
                .swap_with_slice(&mut tail[..self.stride]);
        }
    }
    /// row\[dst\] += row\[src\], words from `from` on.
    fn add_row(&mut self, dst: usize, src: usize, from: usize) {
        let s = self.stride;
        let (low, high) = (dst.min(src), dst.max(src));
        let (head, tail) = self.data.split_at_mut(high * s);
        let (a, b) = (&mut head[low * s + from..(low + 1) * s], &mut tail[from..s]);
        let (d, x) = if dst < src { (a, b) } else { (b, a) };
        for (d, x) in d.iter_mut().zip(x.iter()) {
            *d ^= *x;
        }
    }

    /// Reduction by the Method of Four Russians: pivots are gathered in small groups, all
    /// combinations of a group are tabulated, and every other row is cleared by one
    /// look-up a group (Dokl. Akad. Nauk SSSR 194, 487 (1970); for elimination, from memory,
    /// arXiv:1111.6549). O(r·c·rank/(8·64)) word operations.
    pub(super) fn reduce(&mut self, full: bool) -> Vec<usize> {
        let mut pivots: Vec<usize> = Vec::new();
        let mut col = 0;
        let mut table = vec![0u64; TABLES * (self.stride << TABLE_BITS)];
        while col < self.cols && pivots.len() < self.rows {
            let first = pivots.len();
            let from = col / 64;
            let width = self.stride - from;
            let group = TABLE_BITS * TABLES;
            self.gather(&mut col, &mut pivots, first, group, from);
            let found = pivots.len() - first;
            if found == 0 {
                break;
            }
            let sizes: Vec<usize> = (0..found.div_ceil(TABLE_BITS))
                .map(|t| TABLE_BITS.min(found - t * TABLE_BITS))
                .collect();
            for (t, &size) in sizes.iter().enumerate() {
                let part = &mut table[t * (self.stride << TABLE_BITS)..];
                part[..width].fill(0);
                for k in 0..size {
                    let row = first + t * TABLE_BITS + k;
                    let source = &self.data[row * self.stride + from..(row + 1) * self.stride];
                    for combination in 0..1usize << k {
                        let (done, next) = part.split_at_mut((combination + (1 << k)) * width);
                        let base = &done[combination * width..(combination + 1) * width];
                        for ((n, b), s) in next[..width].iter_mut().zip(base).zip(source) {
                            *n = b ^ s;
                        }
                    }
                }
            }
            let columns = &pivots[first..];
            let side_by_side = columns[found - 1] - columns[0] + 1 == found;
            let start = if full { 0 } else { first + found };
            for r in start..self.rows {
                if (first..first + found).contains(&r) {
                    continue;
                }
                // All columns of a group lie in one word (see `gather`), mostly side by side.
                let word = self.data[r * self.stride + columns[0] / 64];
                let mut place = [0usize; TABLES];
                if side_by_side {
                    let bits = word >> (columns[0] % 64);
                    for (t, (p, &size)) in place.iter_mut().zip(&sizes).enumerate() {
                        *p = (bits >> (t * TABLE_BITS)) as usize & ((1 << size) - 1);
                    }
                } else {
                    for (i, &c) in columns.iter().enumerate() {
                        let bit = (word >> (c % 64) & 1) as usize;
                        place[i / TABLE_BITS] |= bit << (i % TABLE_BITS);
                    }
                }
                if place == [0; TABLES] {
                    continue;
                }
                let row = &mut self.data[r * self.stride + from..(r + 1) * self.stride];
                let piece = |t: usize| {
                    let at = t * (self.stride << TABLE_BITS) + place[t] * width;
                    &table[at..at + width]
                };
                if sizes.len() == TABLES {
                    let (a, b, c, d) = (piece(0), piece(1), piece(2), piece(3));
                    for ((((x, a), b), c), d) in row.iter_mut().zip(a).zip(b).zip(c).zip(d) {
                        *x ^= a ^ b ^ c ^ d;
                    }
                } else {
                    for t in 0..sizes.len() {
                        for (x, a) in row.iter_mut().zip(piece(t)) {
                            *x ^= a;
                        }
                    }
                }
            }
        }
        pivots
    }

    /// Finds up to `group` pivots from column `col` on, moves their rows to `first…`, and
    /// reduces these rows among themselves. Rows below are left as they were: what a
    /// candidate would be after clearing is worked out only as far as it is looked at.
    fn gather(
        &mut self,
        col: &mut usize,
        pivots: &mut Vec<usize>,
        first: usize,
        group: usize,
        from: usize,
    ) {
        // Words of the rows below, as if cleared by the pivots found so far, for the window
        // of columns under inspection.
        let mut window = *col / 64;
        let mut seen: Vec<u64> =
            (0..self.rows - first).map(|r| self.data[(first + r) * self.stride + window]).collect();
        while *col < self.cols && pivots.len() < self.rows && pivots.len() - first < group {
            if *col / 64 != window {
                // The next word of every row must be brought up to date with the pivots of
                // this group; end the group instead, so that this stays a rare, cheap case.
                if pivots.len() > first {
                    return;
                }
                window = *col / 64;
                for (r, s) in seen.iter_mut().enumerate() {
                    *s = self.data[(first + r) * self.stride + window];
                }
            }
            let bit = *col % 64;
            let rank = pivots.len();
            let Some(found) = (rank..self.rows).find(|&r| seen[r - first] >> bit & 1 == 1) else {
                *col += 1;
                continue;
            };
            self.swap_rows(rank, found);
            seen.swap(rank - first, found - first);
            // Bring the whole row up to date, then clear its column in the group's rows.
            for (k, &c) in pivots[first..].iter().enumerate() {
                if self.get(rank, c) == 1 {
                    self.add_row(rank, first + k, from);
                }
            }
            debug_assert_eq!(self.data[rank * self.stride + window], seen[rank - first]);
            for r in first..rank {
                if self.get(r, *col) == 1 {
                    self.add_row(r, rank, from);
                }
            }
            let pivot = seen[rank - first];
            for s in &mut seen[rank - first + 1..] {
                if *s >> bit & 1 == 1 {
                    *s ^= pivot;
                }
            }
            pivots.push(*col);
            *col += 1;
        }
    }
}
