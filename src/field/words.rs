//! Matrices with sixteen bits an entry, over any field.

use super::Field;

/// Row-major entries; invariant: every entry is below the field's order.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct Words {
    pub(super) rows: usize,
    pub(super) cols: usize,
    pub(super) data: Vec<u16>,
}

impl Words {
    pub(super) fn zeros(rows: usize, cols: usize) -> Self {
        Self { rows, cols, data: vec![0; rows * cols] }
    }
    pub(super) fn get(&self, r: usize, c: usize) -> u32 {
        u32::from(self.data[r * self.cols + c])
    }
    pub(super) fn set(&mut self, r: usize, c: usize, v: u32) {
        self.data[r * self.cols + c] = v as u16;
    }
    pub(super) fn swap_rows(&mut self, a: usize, b: usize) {
        if a != b {
            let (low, high) = (a.min(b), a.max(b));
            let (head, tail) = self.data.split_at_mut(high * self.cols);
            head[low * self.cols..(low + 1) * self.cols].swap_with_slice(&mut tail[..self.cols]);
        }
    }
    /// Gauss–Jordan elimination; `full` also clears above the pivots.
    pub(super) fn reduce(&mut self, field: &Field, full: bool) -> Vec<usize> {
        let mut pivots = Vec::new();
        let mut pivot_row = vec![0u16; self.cols];
        for col in 0..self.cols {
            let rank = pivots.len();
            if rank == self.rows {
                break;
            }
            let Some(found) = (rank..self.rows).find(|&r| self.data[r * self.cols + col] != 0)
            else {
                continue;
            };
            self.swap_rows(rank, found);
            let inverse = field.inv(self.get(rank, col));
            let row = &mut self.data[rank * self.cols..(rank + 1) * self.cols];
            for v in &mut row[col..] {
                *v = field.mul(u32::from(*v), inverse) as u16;
            }
            pivot_row[col..].copy_from_slice(&row[col..]);
            let first = if full { 0 } else { rank + 1 };
            for r in first..self.rows {
                let c = self.get(r, col);
                if r != rank && c != 0 {
                    let dst = &mut self.data[r * self.cols + col..(r + 1) * self.cols];
                    add_multiple(field, dst, &pivot_row[col..], field.neg(c));
                }
            }
            pivots.push(col);
        }
        pivots
    }
}

/// dst += c·src.
pub(super) fn add_multiple(field: &Field, dst: &mut [u16], src: &[u16], c: u32) {
    if field.degree() == 1 {
        let p = field.prime();
        if p < 256 {
            // (p−1)² + (p−1) fits sixteen bits; the quotient estimate is one short at most.
            let (p, c) = (p as u16, c as u16);
            let m = ((1u32 << 16) / u32::from(p)) as u16;
            for (d, &s) in dst.iter_mut().zip(src) {
                let x = *d + c * s;
                let quotient = ((u32::from(x) * u32::from(m)) >> 16) as u16;
                let r = x.wrapping_sub(quotient.wrapping_mul(p));
                *d = r.min(r.wrapping_sub(p));
            }
        } else {
            let m = (1u64 << 32) / u64::from(p);
            for (d, &s) in dst.iter_mut().zip(src) {
                let x = u32::from(*d) + c * u32::from(s);
                let quotient = ((u64::from(x) * m) >> 32) as u32;
                let r = x.wrapping_sub(quotient.wrapping_mul(p));
                *d = r.min(r.wrapping_sub(p)) as u16;
            }
        }
        return;
    }
    if c == 0 {
        return;
    }
    let (log, exp) = (field.log_table(), field.exp_table());
    let lc = usize::from(log[c as usize]);
    let times = |s: u16| if s == 0 { 0 } else { exp[lc + usize::from(log[usize::from(s)])] };
    let q = field.order() as usize;
    if q <= 256 {
        // One short table of multiples of c serves the whole row.
        let mut multiple = [0u16; 256];
        for (v, m) in multiple[..q].iter_mut().enumerate() {
            *m = times(v as u16);
        }
        if field.prime() == 2 {
            for (d, &s) in dst.iter_mut().zip(src) {
                *d ^= multiple[usize::from(s) & 255];
            }
        } else {
            let sums = field.sum_table();
            for (d, &s) in dst.iter_mut().zip(src) {
                *d = sums[usize::from(*d) * q + usize::from(multiple[usize::from(s) & 255])];
            }
        }
        return;
    }
    for (d, &s) in dst.iter_mut().zip(src) {
        let product = times(s);
        *d = if field.prime() == 2 {
            *d ^ product
        } else {
            field.add(u32::from(*d), u32::from(product)) as u16
        };
    }
}
