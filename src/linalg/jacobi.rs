//! One-sided Jacobi rotations: slow, simple, accurate to the last singular value.

use super::Scalar;
use ndarray::{Array2, ArrayView2};
use num_complex::Complex64;

/// Sweeps after which the method is given up; quadratic convergence needs about ten.
const SWEEPS: usize = 60;

/// Singular values by one-sided Jacobi rotations, descending; `None` where the rotations do
/// not settle. Cost about 6·m·n² a sweep for m ≥ n, some ten sweeps; meant as reference and
/// fallback. SIAM J. Matrix Anal. Appl. 13, 1204 (1992).
pub fn jacobi_singular_values<T: Scalar>(a: &ArrayView2<'_, T>) -> Option<Vec<f64>> {
    jacobi_svd(a).map(|(_, s, _)| s)
}

/// As [`jacobi_singular_values`], with thin U and V†.
pub(super) fn jacobi_svd<T: Scalar>(
    a: &ArrayView2<'_, T>,
) -> Option<(Array2<T>, Vec<f64>, Array2<T>)> {
    let (m, n) = a.dim();
    if m < n {
        let (u, s, vt) = jacobi_svd(&a.t())?;
        return Some((vt.reversed_axes(), s, u.reversed_axes()));
    }
    // Columns are held as rows of `w`, so that a rotation runs over contiguous memory.
    let mut w: Vec<Vec<Complex64>> =
        a.columns().into_iter().map(|c| c.iter().map(|x| x.to_c64()).collect()).collect();
    let mut v: Vec<Vec<Complex64>> = (0..n)
        .map(|i| (0..n).map(|j| Complex64::from(f64::from(u8::from(i == j)))).collect())
        .collect();
    let mut norms: Vec<f64> = w.iter().map(|c| c.iter().map(|x| x.norm_sqr()).sum()).collect();
    let floor = norms.iter().sum::<f64>() * 1e-32;
    let mut settled = false;
    for _ in 0..SWEEPS {
        let mut turned = false;
        for p in 0..n {
            for q in p + 1..n {
                let g: Complex64 = w[p].iter().zip(&w[q]).map(|(x, y)| x.conj() * y).sum();
                if g.norm() <= 1e-15 * (norms[p] * norms[q]).sqrt() || g.norm() <= floor {
                    continue;
                }
                turned = true;
                let phase = g / g.norm();
                let tau = (norms[q] - norms[p]) / (2.0 * g.norm());
                let t = if tau >= 0.0 { 1.0 } else { -1.0 } / (tau.abs() + tau.hypot(1.0));
                let c = 1.0 / t.hypot(1.0);
                let s = phase * (t * c);
                for set in [&mut w, &mut v] {
                    let (left, right) = set.split_at_mut(q);
                    for (x, y) in left[p].iter_mut().zip(&mut right[0]) {
                        let (old_x, old_y) = (*x, *y);
                        *x = old_x * c - old_y * s.conj();
                        *y = old_x * s + old_y * c;
                    }
                }
                for i in [p, q] {
                    norms[i] = w[i].iter().map(|x| x.norm_sqr()).sum();
                }
            }
        }
        if !turned {
            settled = true;
            break;
        }
    }
    if !settled {
        return None;
    }
    let mut order: Vec<usize> = (0..n).collect();
    order.sort_by(|&i, &j| norms[j].total_cmp(&norms[i]));
    let top = order.first().map_or(0.0, |&i| norms[i].sqrt());
    let mut s = Vec::with_capacity(n);
    let mut columns: Vec<Vec<Complex64>> = Vec::with_capacity(n);
    for &i in &order {
        let value = norms[i].sqrt();
        s.push(value);
        let column = if value > 1e-15 * top && value > 0.0 {
            w[i].iter().map(|x| x / value).collect()
        } else {
            complete(&columns, m)
        };
        columns.push(column);
    }
    let u = Array2::from_shape_fn((m, n), |(i, j)| T::from_c64(columns[j][i]));
    let vt = Array2::from_shape_fn((n, n), |(i, j)| T::from_c64(v[order[i]][j].conj()));
    Some((u, s, vt))
}

/// A unit vector orthogonal to all `columns`.
fn complete(columns: &[Vec<Complex64>], m: usize) -> Vec<Complex64> {
    for at in 0..m {
        let mut x = vec![Complex64::default(); m];
        x[at] = Complex64::from(1.0);
        for _ in 0..2 {
            for c in columns {
                let g: Complex64 = c.iter().zip(&x).map(|(c, x)| c.conj() * x).sum();
                for (x, c) in x.iter_mut().zip(c) {
                    *x -= g * c;
                }
            }
        }
        let norm = x.iter().map(|x| x.norm_sqr()).sum::<f64>().sqrt();
        // Some unit vector keeps at least √(1 − n/m) of its length; half of the least
        // possible share is enough to be well conditioned.
        if norm * norm * (2 * m) as f64 >= (m - columns.len()) as f64 {
            return x.into_iter().map(|x| x / norm).collect();
        }
    }
    vec![Complex64::default(); m]
}
