//! The face of all matrices over finite fields.

use super::Field;
use super::bits::Bits;
use super::trits::Trits;
use super::words::Words;

/// A dense matrix over GF(q), packed for q = 2 and 3.
///
/// Elimination is Gauss–Jordan, with tables of row combinations where packed. Shapes with no
/// row or no column are allowed everywhere.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Matrix {
    field: Field,
    store: Store,
}

#[derive(Debug, Clone, PartialEq, Eq)]
enum Store {
    Bits(Bits),
    Trits(Trits),
    Words(Words),
}

macro_rules! each {
    ($self:expr, $m:ident => $body:expr) => {
        match $self {
            Store::Bits($m) => $body,
            Store::Trits($m) => $body,
            Store::Words($m) => $body,
        }
    };
}

impl Matrix {
    /// The zero matrix.
    pub fn zeros(field: &Field, rows: usize, cols: usize) -> Self {
        let store = match field.order() {
            2 => Store::Bits(Bits::zeros(rows, cols)),
            3 => Store::Trits(Trits::zeros(rows, cols)),
            _ => Store::Words(Words::zeros(rows, cols)),
        };
        Self { field: field.clone(), store }
    }
    /// The identity.
    pub fn identity(field: &Field, size: usize) -> Self {
        let mut out = Self::zeros(field, size, size);
        for i in 0..size {
            out.set(i, i, 1);
        }
        out
    }
    /// The matrix whose entry (i, j) is `entry(i, j)`.
    ///
    /// # Panics
    /// Where an entry is no element of the field.
    #[track_caller]
    pub fn from_fn(
        field: &Field,
        rows: usize,
        cols: usize,
        mut entry: impl FnMut(usize, usize) -> u32,
    ) -> Self {
        let mut out = Self::zeros(field, rows, cols);
        for i in 0..rows {
            for j in 0..cols {
                let v = entry(i, j);
                if v != 0 {
                    out.set(i, j, v);
                }
            }
        }
        out
    }
    /// The matrix with these rows, all of `cols` entries.
    ///
    /// # Panics
    /// Where a row has another length or an entry is no element of the field.
    #[track_caller]
    pub fn from_rows<R: AsRef<[u32]>>(field: &Field, cols: usize, rows: &[R]) -> Self {
        for (i, r) in rows.iter().enumerate() {
            assert_eq!(r.as_ref().len(), cols, "row {i} must have {cols} entries");
        }
        Self::from_fn(field, rows.len(), cols, |i, j| rows[i].as_ref()[j])
    }
    /// The field of the entries.
    pub fn field(&self) -> &Field {
        &self.field
    }
    /// Number of rows.
    pub fn rows(&self) -> usize {
        each!(&self.store, m => m.rows)
    }
    /// Number of columns.
    pub fn cols(&self) -> usize {
        each!(&self.store, m => m.cols)
    }
    /// Entry (row, column).
    ///
    /// # Panics
    /// Outside the matrix.
    #[inline]
    #[track_caller]
    pub fn get(&self, row: usize, col: usize) -> u32 {
        assert!(row < self.rows() && col < self.cols(), "({row}, {col}) lies outside");
        each!(&self.store, m => m.get(row, col))
    }
    /// Sets entry (row, column).
    ///
    /// # Panics
    /// Outside the matrix, or where `value` is no element of the field.
    #[inline]
    #[track_caller]
    pub fn set(&mut self, row: usize, col: usize, value: u32) {
        assert!(row < self.rows() && col < self.cols(), "({row}, {col}) lies outside");
        assert!(value < self.field.order(), "{value} is no element of {:?}", self.field);
        each!(&mut self.store, m => m.set(row, col, value));
    }
    /// One row as numbers.
    pub fn row(&self, row: usize) -> Vec<u32> {
        (0..self.cols()).map(|j| self.get(row, j)).collect()
    }
    /// All rows as numbers.
    pub fn to_rows(&self) -> Vec<Vec<u32>> {
        (0..self.rows()).map(|i| self.row(i)).collect()
    }
    /// Exchanges two rows.
    pub fn swap_rows(&mut self, a: usize, b: usize) {
        each!(&mut self.store, m => m.swap_rows(a, b));
    }
    /// The transpose.
    pub fn transpose(&self) -> Self {
        Self::from_fn(&self.field, self.cols(), self.rows(), |i, j| self.get(j, i))
    }
    /// The columns listed, in this order (repetition allowed).
    pub fn select_columns(&self, columns: &[usize]) -> Self {
        Self::from_fn(&self.field, self.rows(), columns.len(), |i, j| self.get(i, columns[j]))
    }
    /// The rows listed, in this order (repetition allowed).
    pub fn select_rows(&self, rows: &[usize]) -> Self {
        Self::from_fn(&self.field, rows.len(), self.cols(), |i, j| self.get(rows[i], j))
    }
    /// `self` above `other`.
    ///
    /// # Panics
    /// Where fields or numbers of columns differ.
    #[track_caller]
    pub fn above(&self, other: &Self) -> Self {
        assert_eq!(self.field, other.field, "the fields differ");
        assert_eq!(self.cols(), other.cols(), "the numbers of columns differ");
        let top = self.rows();
        Self::from_fn(&self.field, top + other.rows(), self.cols(), |i, j| {
            if i < top { self.get(i, j) } else { other.get(i - top, j) }
        })
    }
    /// `self` left of `other`.
    ///
    /// # Panics
    /// Where fields or numbers of rows differ.
    #[track_caller]
    pub fn beside(&self, other: &Self) -> Self {
        assert_eq!(self.field, other.field, "the fields differ");
        assert_eq!(self.rows(), other.rows(), "the numbers of rows differ");
        let left = self.cols();
        Self::from_fn(&self.field, self.rows(), left + other.cols(), |i, j| {
            if j < left { self.get(i, j) } else { other.get(i, j - left) }
        })
    }
    /// The product self·other.
    ///
    /// # Panics
    /// Where fields or inner sizes differ.
    #[track_caller]
    pub fn product(&self, other: &Self) -> Self {
        assert_eq!(self.field, other.field, "the fields differ");
        assert_eq!(self.cols(), other.rows(), "the inner sizes differ");
        let f = &self.field;
        let right = other.to_rows();
        let mut out = Self::zeros(f, self.rows(), other.cols());
        for i in 0..self.rows() {
            let mut sum = vec![0u32; other.cols()];
            for (k, r) in right.iter().enumerate() {
                let c = self.get(i, k);
                if c != 0 {
                    for (s, &v) in sum.iter_mut().zip(r) {
                        *s = f.add(*s, f.mul(c, v));
                    }
                }
            }
            for (j, v) in sum.into_iter().enumerate() {
                out.set(i, j, v);
            }
        }
        out
    }
    /// Whether every entry is zero.
    pub fn is_zero(&self) -> bool {
        (0..self.rows()).all(|i| (0..self.cols()).all(|j| self.get(i, j) == 0))
    }
    /// Brings the matrix to reduced row echelon form and returns the pivot columns,
    /// ascending; row i holds the pivot of column `pivots[i]`, rows past them are zero.
    pub fn reduce(&mut self) -> Vec<usize> {
        self.eliminate(true)
    }
    fn eliminate(&mut self, full: bool) -> Vec<usize> {
        match &mut self.store {
            Store::Bits(m) => m.reduce(full),
            Store::Trits(m) => m.reduce(full),
            Store::Words(m) => m.reduce(&self.field, full),
        }
    }
    /// The rank. Costs about half of [`Self::reduce`], and a copy.
    pub fn rank(&self) -> usize {
        self.clone().eliminate(false).len()
    }
    /// A basis of all v with self·v = 0, one row each (cols − rank rows).
    pub fn null_space(&self) -> Self {
        let mut reduced = self.clone();
        let pivots = reduced.reduce();
        let mut is_pivot = vec![false; self.cols()];
        for &c in &pivots {
            is_pivot[c] = true;
        }
        let free: Vec<usize> = (0..self.cols()).filter(|&c| !is_pivot[c]).collect();
        let mut out = Self::zeros(&self.field, free.len(), self.cols());
        for (k, &c) in free.iter().enumerate() {
            out.set(k, c, 1);
            for (i, &p) in pivots.iter().enumerate() {
                let v = reduced.get(i, c);
                if v != 0 {
                    out.set(k, p, self.field.neg(v));
                }
            }
        }
        out
    }
    /// One v with self·v = b, with zeros at the free columns; `None` where there is none.
    ///
    /// # Panics
    /// Where `b` has not one entry a row.
    #[track_caller]
    pub fn solve(&self, b: &[u32]) -> Option<Vec<u32>> {
        assert_eq!(b.len(), self.rows(), "the right side must have one entry a row");
        let column = Self::from_fn(&self.field, b.len(), 1, |i, _| b[i]);
        let mut joined = self.beside(&column);
        let pivots = joined.reduce();
        let last = self.cols();
        if pivots.last() == Some(&last) {
            return None;
        }
        let mut out = vec![0; last];
        for (i, &p) in pivots.iter().enumerate() {
            out[p] = joined.get(i, last);
        }
        Some(out)
    }
    /// The inverse of a square matrix, where it has one.
    ///
    /// # Panics
    /// Where the matrix is not square.
    #[track_caller]
    pub fn inverse(&self) -> Option<Self> {
        let n = self.rows();
        assert_eq!(n, self.cols(), "only a square matrix has an inverse");
        let mut joined = self.beside(&Self::identity(&self.field, n));
        let pivots = joined.reduce();
        pivots
            .iter()
            .copied()
            .eq(0..n)
            .then(|| joined.select_columns(&(n..2 * n).collect::<Vec<_>>()))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use rand::{Rng, SeedableRng};
    use rand_chacha::ChaCha8Rng;

    /// The slow, obvious elimination.
    fn reference(f: &Field, rows: &mut [Vec<u32>], cols: usize) -> Vec<usize> {
        let mut pivots = Vec::new();
        for c in 0..cols {
            let k = pivots.len();
            let Some(r) = (k..rows.len()).find(|&r| rows[r][c] != 0) else {
                continue;
            };
            rows.swap(k, r);
            let inv = f.inv(rows[k][c]);
            rows[k].iter_mut().for_each(|v| *v = f.mul(*v, inv));
            let pivot = rows[k].clone();
            for (i, row) in rows.iter_mut().enumerate() {
                let x = row[c];
                if i != k && x != 0 {
                    for (v, &p) in row.iter_mut().zip(&pivot) {
                        *v = f.sub(*v, f.mul(x, p));
                    }
                }
            }
            pivots.push(c);
        }
        pivots
    }

    fn random(f: &Field, rows: usize, cols: usize, fill: f64, rng: &mut ChaCha8Rng) -> Matrix {
        Matrix::from_fn(f, rows, cols, |_, _| {
            if rng.random_bool(fill) { rng.random_range(0..f.order()) } else { 0 }
        })
    }

    #[test]
    fn every_storage_agrees_with_plain_elimination() {
        let mut rng = ChaCha8Rng::seed_from_u64(7);
        for q in [2u64, 3, 4, 5, 7, 8, 9, 25, 27, 251, 257, 256, 6561, 65521, 65536] {
            let f = Field::new(q).unwrap();
            let shapes = [
                (0, 0),
                (0, 5),
                (5, 0),
                (1, 1),
                (3, 7),
                (7, 3),
                (40, 40),
                (70, 150),
                (150, 70),
                (64, 128),
            ];
            for (rows, cols) in shapes {
                for fill in [0.02, 0.3, 1.0] {
                    let mut m = random(&f, rows, cols, fill, &mut rng);
                    // Force a rank below the full one now and then.
                    if rows > 8 && fill == 1.0 {
                        let low = random(&f, rows, rows / 3, 1.0, &mut rng);
                        m = low.product(&random(&f, rows / 3, cols, 1.0, &mut rng));
                    }
                    let mut plain = m.to_rows();
                    let expected = reference(&f, &mut plain, cols);
                    let mut reduced = m.clone();
                    assert_eq!(reduced.reduce(), expected, "GF({q}), {rows} × {cols}, {fill}");
                    assert_eq!(reduced.to_rows(), plain, "GF({q}), {rows} × {cols}, {fill}");
                    assert_eq!(m.rank(), expected.len());
                    let kernel = m.null_space();
                    assert_eq!(kernel.rows(), cols - expected.len());
                    assert_eq!(kernel.rank(), kernel.rows());
                    assert!(m.product(&kernel.transpose()).is_zero());
                    let v: Vec<u32> = (0..cols).map(|_| rng.random_range(0..f.order())).collect();
                    let column = Matrix::from_fn(&f, cols, 1, |i, _| v[i]);
                    let b: Vec<u32> = m.product(&column).to_rows().concat();
                    let x = m.solve(&b).expect("a solution was built in");
                    let back = Matrix::from_fn(&f, cols, 1, |i, _| x[i]);
                    assert_eq!(m.product(&back).to_rows().concat(), b);
                }
            }
        }
    }

    #[test]
    fn packed_groups_end_well_at_word_borders() {
        let mut rng = ChaCha8Rng::seed_from_u64(8);
        for q in [2, 3] {
            let f = Field::new(q).unwrap();
            for (rows, cols) in [(300, 300), (200, 700), (257, 129)] {
                // Runs of empty columns move the pivots off the borders of words.
                let gap = rng.random_range(0..90);
                let m = Matrix::from_fn(&f, rows, cols, |_, j| {
                    if (j / 50) % 2 == 0 || j < gap { 0 } else { rng.random_range(0..f.order()) }
                });
                let mut plain = m.to_rows();
                let expected = reference(&f, &mut plain, cols);
                let mut reduced = m.clone();
                assert_eq!(reduced.reduce(), expected);
                assert_eq!(reduced.to_rows(), plain);
            }
        }
    }

    #[test]
    fn inverses_and_unsolvable_systems() {
        let f = Field::new(9).unwrap();
        let mut rng = ChaCha8Rng::seed_from_u64(9);
        let m = random(&f, 12, 12, 1.0, &mut rng);
        let inverse = m.inverse().expect("this seed gives a full rank");
        assert_eq!(m.product(&inverse), Matrix::identity(&f, 12));
        let flat = Matrix::from_fn(&f, 2, 2, |_, _| 1);
        assert_eq!(flat.inverse(), None);
        assert_eq!(flat.solve(&[1, 2]), None);
        assert_eq!(flat.solve(&[2, 2]), Some(vec![2, 0]));
    }
}
