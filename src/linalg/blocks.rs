//! The independent blocks of a matrix, found from its zeros.

use super::Scalar;
use ndarray::{Array2, ArrayView2};

/// Rows and columns that belong together, both ascending.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Patch {
    /// Rows.
    pub rows: Vec<usize>,
    /// Columns.
    pub columns: Vec<usize>,
}

impl Patch {
    /// The block's own entries.
    pub fn of<T: Scalar>(&self, a: &ArrayView2<'_, T>) -> Array2<T> {
        Array2::from_shape_fn((self.rows.len(), self.columns.len()), |(i, j)| {
            a[[self.rows[i], self.columns[j]]]
        })
    }
}

/// Splits a matrix into independent blocks: the connected components of the graph whose
/// nodes are rows and columns and whose edges are the entries with |a| > `floor`. Rows and
/// columns without such an entry are in no block. Blocks are ordered by their first row.
///
/// The singular values of the matrix are those of its blocks and zeros. `floor` 0 splits by
/// exact zeros, which leaves the spectrum as it is. Cost one pass over the m·n entries.
pub fn blocks<T: Scalar>(a: &ArrayView2<'_, T>, floor: f64) -> Vec<Patch> {
    let (m, n) = a.dim();
    let mut parent: Vec<u32> = (0..(m + n) as u32).collect();
    let mut used = vec![false; m + n];
    for i in 0..m {
        let mut root = find(&mut parent, i as u32);
        for j in 0..n {
            let x = a[[i, j]];
            if x.magnitude() > floor || (floor > 0.0 && x.abs2() > floor * floor) {
                used[i] = true;
                used[m + j] = true;
                let other = find(&mut parent, (m + j) as u32);
                if other != root {
                    let low = root.min(other);
                    parent[root.max(other) as usize] = low;
                    root = low;
                }
            }
        }
    }
    let mut number = vec![usize::MAX; m + n];
    let mut found: Vec<Patch> = Vec::new();
    for node in (0..m + n).filter(|&x| used[x]) {
        let root = find(&mut parent, node as u32) as usize;
        if number[root] == usize::MAX {
            number[root] = found.len();
            found.push(Patch { rows: Vec::new(), columns: Vec::new() });
        }
        let patch = &mut found[number[root]];
        if node < m { patch.rows.push(node) } else { patch.columns.push(node - m) }
    }
    found
}

fn find(parent: &mut [u32], mut x: u32) -> u32 {
    while parent[x as usize] != x {
        parent[x as usize] = parent[parent[x as usize] as usize];
        x = parent[x as usize];
    }
    x
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::linalg::singular_values;
    use crate::linalg::testing::dense;

    #[test]
    fn shuffled_blocks_are_found_and_keep_the_spectrum() {
        let (a, b) = (dense::<f64>(3, 4, 1), dense::<f64>(2, 2, 2));
        let rows = [4, 0, 6, 2, 5];
        let columns = [1, 6, 0, 3, 2, 5];
        let mut big = Array2::<f64>::zeros((7, 7));
        for i in 0..5 {
            for j in 0..6 {
                let x = match (i < 3, j < 4) {
                    (true, true) => a[[i, j]],
                    (false, false) => b[[i - 3, j - 4]],
                    _ => 0.0,
                };
                big[[rows[i], columns[j]]] = x;
            }
        }
        let found = blocks(&big.view(), 0.0);
        assert_eq!(found[0], Patch { rows: vec![0, 4, 6], columns: vec![0, 1, 3, 6] });
        assert_eq!(found[1], Patch { rows: vec![2, 5], columns: vec![2, 5] });
        assert_eq!(found.len(), 2);
        let mut parts: Vec<f64> = found
            .iter()
            .flat_map(|p| singular_values(&p.of(&big.view()).view()).unwrap())
            .collect();
        parts.sort_by(|x, y| y.total_cmp(x));
        let whole = singular_values(&big.view()).unwrap();
        for (x, y) in parts.iter().zip(&whole) {
            assert!((x - y).abs() < 1e-14, "{x} {y}");
        }
        assert!(whole[5..].iter().all(|x| x.abs() < 1e-14));
    }

    #[test]
    fn zero_and_empty_matrices_have_no_blocks() {
        assert!(blocks(&Array2::<f64>::zeros((3, 2)).view(), 0.0).is_empty());
        assert!(blocks(&Array2::<f64>::zeros((0, 2)).view(), 0.0).is_empty());
    }
}
