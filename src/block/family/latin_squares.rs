//! Pairs of orthogonal Latin squares for every order but 2 and 6.
//!
//! A pair is held as an orthogonal array: n² rows (row, column, L, M) of which any two columns
//! show every pair of symbols once. As a tensor with entry 1 at each row it is perfect.

use crate::block::exact::Exact;
use crate::block::{Block, BlockError, IsometryTable, Proof};
use crate::field::{Field, factorise};

type Row = [u32; 4];

/// An orthogonal array of strength 2 with four columns over n symbols. Invariant, proven by
/// counting in [`Array::prove`]: any two columns show every pair once.
struct Array {
    order: u32,
    rows: Vec<Row>,
}

impl Array {
    /// Proves the invariant by counting: n² rows, and no pair twice in any two columns.
    fn prove(order: u32, rows: Vec<Row>) -> Option<Self> {
        let n = order as usize;
        if rows.len() != n * n || rows.iter().flatten().any(|&s| s >= order) {
            return None;
        }
        for a in 0..4 {
            for b in 0..a {
                let mut seen = vec![false; n * n];
                for r in &rows {
                    let pair = r[a] as usize * n + r[b] as usize;
                    if std::mem::replace(&mut seen[pair], true) {
                        return None;
                    }
                }
            }
        }
        Some(Self { order, rows })
    }

    fn into_block(self) -> Block {
        let n = u64::from(self.order);
        let dims = vec![self.order as usize; 4];
        let count = u128::from(n * n);
        let rows = self.rows;
        Block::exact_lazy(
            "four-leg",
            dims.clone(),
            IsometryTable::perfect(4),
            None,
            count,
            move || {
                let place = |r: &Row| r.iter().fold(0, |i, &s| i * n + u64::from(s));
                let entries = rows.iter().map(|r| (place(r), 0)).collect();
                Exact::from_roots(dims.clone(), 1, (1, 1), entries)
            },
        )
        .proven(Proof::Counting)
    }
}

/// i + j and i − j modulo n, for odd n.
pub(super) fn cyclic(n: usize) -> Result<Block, BlockError> {
    let n = n as u32;
    let rows = pairs(n).map(|(i, j)| [i, j, (i + j) % n, (i + n - j) % n]).collect();
    finish(n, rows)
}

/// Quasi-difference matrices over Z_7 and Z_11 with three points at infinity, for orders 10
/// and 14 (recomputed; the orders exist by Proc. Natl. Acad. Sci. 45, 734 (1959)).
pub(super) fn difference_matrix(n: usize) -> Result<Block, BlockError> {
    finish(n as u32, difference_rows(n as u32))
}

/// Wilson's theorem with m = 3 (Discrete Math. 9, 181 (1974), from memory; the result is
/// counted, so nothing rests on the memory).
pub(super) fn wilson(n: usize) -> Result<Block, BlockError> {
    finish(n as u32, squares(n as u32).unwrap_or_default())
}

/// Whether a pair of squares of this order ≡ 2 (mod 4) is reached by Wilson's theorem.
pub(super) fn wilson_reaches(n: usize) -> bool {
    n % 4 == 2 && n >= 18 && wilson_split(n as u32).is_some()
}

fn finish(n: u32, rows: Vec<Row>) -> Result<Block, BlockError> {
    Array::prove(n, rows)
        .map(Array::into_block)
        .ok_or(BlockError::ProofFailed { family: "four-leg".to_owned(), legs: vec![0, 1] })
}

fn pairs(n: u32) -> impl Iterator<Item = (u32, u32)> {
    (0..n).flat_map(move |i| (0..n).map(move |j| (i, j)))
}

/// An orthogonal array for any order but 2 and 6, in the way that suits the order.
fn squares(n: u32) -> Option<Vec<Row>> {
    match n {
        0 | 2 | 6 => return None,
        1 => return Some(vec![[0; 4]]),
        10 | 14 => return Some(difference_rows(n)),
        _ => {}
    }
    if n % 4 == 2 {
        let (t, u) = wilson_split(n)?;
        return wilson_rows(t, u);
    }
    let mut rows = linear_rows(n, 2)?;
    Some(rows.drain(..).map(|r| [r[0], r[1], r[2], r[3]]).collect())
}

/// Rows (i, j, i + a₁j, …, i + a_k j) over the direct product of the fields of n's prime
/// powers, a_c distinct and not zero in each; `None` where a factor has too few elements.
fn linear_rows(n: u32, squares: usize) -> Option<Vec<Vec<u32>>> {
    let mut rows: Vec<Vec<u32>> = vec![vec![0; squares + 2]];
    for (p, m) in factorise(u64::from(n)) {
        let q = p.pow(m);
        if q < squares as u64 + 1 {
            return None;
        }
        let field = Field::new(q).ok()?;
        let mut next = Vec::with_capacity(rows.len() * (q * q) as usize);
        for row in &rows {
            for (i, j) in pairs(q as u32) {
                let mut out = Vec::with_capacity(squares + 2);
                out.push(row[0] * q as u32 + i);
                out.push(row[1] * q as u32 + j);
                for c in 0..squares {
                    let v = field.add(i, field.mul(c as u32 + 1, j));
                    out.push(row[c + 2] * q as u32 + v);
                }
                next.push(out);
            }
        }
        rows = next;
    }
    Some(rows)
}

/// Columns over Z_n with empty places; all four rotations of each base column, developed
/// through Z_n, an empty place becoming the next point at infinity of its row.
fn difference_rows(order: u32) -> Vec<Row> {
    const NONE: u32 = u32::MAX;
    let (n, whole, holed): (u32, Vec<Row>, Vec<Row>) = if order == 10 {
        (7, vec![], [1, 2, 4].map(|m| [NONE, 0, m, 4 * m % 7]).to_vec())
    } else {
        (11, vec![[0, 1, 4, 6]], vec![[NONE, 0, 4, 1], [NONE, 0, 6, 2], [NONE, 0, 9, 8]])
    };
    let rotations = |c: &Row| (0..4).map(|k| std::array::from_fn(|r| c[(r + 4 - k) % 4])).collect();
    let mut columns: Vec<Row> = vec![[0; 4]];
    columns.extend(whole.iter().chain(&holed).flat_map(|c| -> Vec<Row> { rotations(c) }));
    let mut holes = [0; 4];
    let mut rows = Vec::new();
    for column in columns {
        let infinite: Row = std::array::from_fn(|r| {
            if column[r] == NONE {
                holes[r] += 1;
                n + holes[r] - 1
            } else {
                0
            }
        });
        for s in 0..n {
            rows.push(std::array::from_fn(|r| {
                if column[r] == NONE { infinite[r] } else { (column[r] + s) % n }
            }));
        }
    }
    // The points at infinity among themselves: squares of order 3.
    rows.extend(pairs(3).map(|(i, j)| [i, j, (i + j) % 3, (i + 2 * j) % 3].map(|v| n + v)));
    rows
}

/// n = 3t + u with three orthogonal squares of order t and a pair of order u ≤ t.
fn wilson_split(n: u32) -> Option<(u32, u32)> {
    (1..=n / 3).rev().map(|t| (t, n - 3 * t)).find(|&(t, u)| {
        u <= t
            && factorise(u64::from(t)).iter().all(|&(p, m)| p.pow(m) >= 4)
            && t > 1
            && (u < 2 || u % 4 != 2 && u != 2 || u == 10 || u == 14 || wilson_reaches(u as usize))
    })
}

/// A transversal design on five groups of t points gives one on four groups of 3t + u: the
/// fifth group is cut down to u points, which become new points of every group. A block that
/// misses them is inflated by squares of order 3, a block through one of them by squares of
/// order 4 that share that point; the new points among themselves carry squares of order u.
fn wilson_rows(t: u32, u: u32) -> Option<Vec<Row>> {
    let design = linear_rows(t, 3)?;
    let small = squares(3)?;
    let large = squares(4)?;
    let mut rows = Vec::new();
    for block in &design {
        let new_point = 3 * t + block[4];
        let kept = block[4] < u;
        for r in if kept { &large } else { &small } {
            // In the squares of order 4 symbol 0 is the shared point; their row of zeros
            // falls to the squares of order u.
            if kept && *r == [0; 4] {
                continue;
            }
            rows.push(std::array::from_fn(|c| match (kept, r[c]) {
                (true, 0) => new_point,
                (true, s) => 3 * block[c] + s - 1,
                (false, s) => 3 * block[c] + s,
            }));
        }
    }
    if u > 0 {
        rows.extend(squares(u)?.into_iter().map(|r| r.map(|s| 3 * t + s)));
    }
    Some(rows)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_order_but_two_and_six_has_squares() {
        for n in (1..=150).filter(|n| ![2, 6].contains(n)) {
            let rows = squares(n).unwrap_or_else(|| panic!("order {n}"));
            assert!(Array::prove(n, rows).is_some(), "order {n}");
        }
        assert!(squares(2).is_none() && squares(6).is_none());
    }

    #[test]
    fn a_wrong_square_is_noticed() {
        let mut rows = squares(10).unwrap();
        rows[17][3] = (rows[17][3] + 1) % 10;
        assert!(Array::prove(10, rows).is_none());
    }
}
