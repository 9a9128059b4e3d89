//! Singular values of a piece's matrix, block by block.
//!
//! The zero pattern splits the matrix into independent blocks. Blocks that a shift carries
//! onto each other ([`Sectors`]) have the same singular values. A shift that keeps a block,
//! of order r on rows and on columns, makes it block-circulant up to phases,
//! M[a + s, b + s] = c·M[a, b], so that a Fourier transform over the shift splits it into r
//! parts Σ_d ω^{dk} M[a, b + d·s] on representatives a, b of the orbits.

use super::answer::EntropyError;
use super::sectors::Sectors;
use crate::linalg::{self, Patch, Scalar};
use ndarray::{Array2, ArrayD, ArrayView2, Ix2};
use num_complex::Complex64;

/// Singular values of a tensor read as a matrix whose first axes make `rows` rows.
pub(super) fn singular_values<T: Scalar>(
    a: &ArrayD<T>,
    rows: usize,
    sectors: &Sectors,
) -> Result<Vec<f64>, EntropyError> {
    let columns = a.len() / rows.max(1);
    let flat = a.as_standard_layout();
    let matrix: ArrayView2<'_, T> = flat
        .view()
        .into_shape_with_order((rows, columns))
        .expect("the axes of one side make the rows")
        .into_dimensionality::<Ix2>()
        .expect("two axes");
    let patches = linalg::blocks(&matrix, 0.0);
    let same_as = related(&patches, rows, sectors);
    let keeping = sectors.keeping();
    let mut solved: Vec<Vec<f64>> = Vec::with_capacity(patches.len());
    for (k, patch) in patches.iter().enumerate() {
        let values = if same_as[k] < k {
            solved[same_as[k]].clone()
        } else {
            let parts =
                keeping.as_ref().and_then(|shift| circulant(&matrix, patch, sectors, shift));
            match parts {
                Some(parts) => {
                    let mut all = Vec::new();
                    for part in parts {
                        all.extend(of_block(&part.view())?);
                    }
                    all
                }
                None => of_block(&patch.of(&matrix).view())?,
            }
        };
        solved.push(values);
    }
    Ok(solved.into_iter().flatten().collect())
}

/// From this many rows and columns on the Gram matrix is tried first.
const GRAM_FROM: usize = 400;
/// Eigenvalues of the Gram matrix below this times the greatest are zeros…
const GRAM_ZERO: f64 = 1e-12;
/// …and those above this carry enough digits.
const GRAM_SOUND: f64 = 1e-6;

/// Singular values of one block. A large one goes by the eigenvalues of its Gram matrix,
/// several times faster, where these leave no doubt: none lies between what is certainly
/// sound and what is certainly rounding.
fn of_block<T: Scalar>(block: &ArrayView2<'_, T>) -> Result<Vec<f64>, EntropyError> {
    let (m, n) = block.dim();
    if m.min(n) >= GRAM_FROM {
        let adjoint = block.t().mapv(T::conjugate);
        let gram = if m <= n {
            linalg::product(block, &adjoint.view())
        } else {
            linalg::product(&adjoint.view(), block)
        };
        let values = linalg::hermitian_eigenvalues(&gram.view())?;
        let top = values.iter().copied().fold(0.0, f64::max);
        if values.iter().all(|&v| v < GRAM_ZERO * top || v > GRAM_SOUND * top) {
            return Ok(values
                .into_iter()
                .map(|v| if v < GRAM_ZERO * top { 0.0 } else { v.sqrt() })
                .collect());
        }
    }
    Ok(linalg::singular_values(block)?)
}

/// For each block the first one that shifts carry onto it. A shift counts only where it
/// carries all rows of a block onto all rows of one other with as many columns.
fn related(patches: &[Patch], rows: usize, sectors: &Sectors) -> Vec<usize> {
    let mut of_row = vec![usize::MAX; rows];
    for (k, patch) in patches.iter().enumerate() {
        for &r in &patch.rows {
            of_row[r] = k;
        }
    }
    let mut same_as: Vec<usize> = (0..patches.len()).collect();
    // Blocks are few and shifts fewer: repeated passes settle the classes.
    loop {
        let mut moved = false;
        for shift in sectors.shifts() {
            for (k, patch) in patches.iter().enumerate() {
                let to = of_row[sectors.shifted_row(patch.rows[0], shift)];
                if to == usize::MAX || same_as[to] == same_as[k] {
                    continue;
                }
                let other = &patches[to];
                let onto = other.rows.len() == patch.rows.len()
                    && other.columns.len() == patch.columns.len()
                    && patch.rows.iter().all(|&r| of_row[sectors.shifted_row(r, shift)] == to);
                if onto {
                    let low = same_as[to].min(same_as[k]);
                    same_as[to] = low;
                    same_as[k] = low;
                    moved = true;
                }
            }
        }
        if !moved {
            return same_as;
        }
    }
}

/// Orbits of `members` under a shift, each as the list of its places in order; `None` where
/// the shift leads out of them.
fn orbits(members: &[usize], step: impl Fn(usize) -> usize) -> Option<Vec<Vec<usize>>> {
    let mut seen = vec![false; members.len()];
    let mut all = Vec::new();
    for k in 0..members.len() {
        if seen[k] {
            continue;
        }
        let mut orbit = Vec::new();
        let mut at = members[k];
        loop {
            let place = members.binary_search(&at).ok()?;
            if seen[place] {
                break;
            }
            seen[place] = true;
            orbit.push(at);
            at = step(at);
        }
        all.push(orbit);
    }
    Some(all)
}

/// The Fourier parts of a block that a shift keeps; `None` where it does not keep it.
fn circulant<T: Scalar>(
    matrix: &ArrayView2<'_, T>,
    patch: &Patch,
    sectors: &Sectors,
    shift: &[u32],
) -> Option<Vec<Array2<Complex64>>> {
    let rows = orbits(&patch.rows, |r| sectors.shifted_row(r, shift))?;
    let columns = orbits(&patch.columns, |c| sectors.shifted_column(c, shift))?;
    let order = rows.first()?.len();
    if order < 2 || rows.iter().chain(&columns).any(|o| o.len() != order) {
        return None;
    }
    // The rule is held against the numbers before it is used: with the phase c of the greatest
    // entry, M[a + s, b + s] = c·M[a, b] must hold for the representatives' rows.
    let mut top = (0.0, Complex64::ZERO, Complex64::ZERO);
    for row in &rows {
        for column in &columns {
            for d in 0..order {
                let here = matrix[[row[0], column[d]]].to_c64();
                if here.norm_sqr() > top.0 {
                    let there = matrix[[row[1], column[(d + 1) % order]]].to_c64();
                    top = (here.norm_sqr(), here, there);
                }
            }
        }
    }
    let phase = top.2 / top.1;
    for row in &rows {
        for column in &columns {
            for d in 0..order {
                let here = matrix[[row[0], column[d]]].to_c64();
                let there = matrix[[row[1], column[(d + 1) % order]]].to_c64();
                if (there - phase * here).norm_sqr() > 1e-24 * top.0 {
                    return None;
                }
            }
        }
    }
    let omega = |j: usize| {
        Complex64::from_polar(1.0, 2.0 * std::f64::consts::PI * (j % order) as f64 / order as f64)
    };
    let parts = (0..order)
        .map(|k| {
            Array2::from_shape_fn((rows.len(), columns.len()), |(a, b)| {
                (0..order)
                    .map(|d| matrix[[rows[a][0], columns[b][d]]].to_c64() * omega(d * k))
                    .sum()
            })
        })
        .collect();
    Some(parts)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::entropy::Piece;
    use crate::network::NetworkBuilder;
    use crate::order::{self, Shape};
    use crate::watch::Silent;
    use std::sync::Arc;

    /// Three six-level tensors in a ring, in every orientation of the middle one.
    #[test]
    fn blocks_shifts_and_fourier_parts_keep_the_spectrum() {
        let request = crate::block::Request::new("four-leg", vec![6; 4]);
        let block = Arc::new(crate::block::make(&request).unwrap());
        for turn in 0..4 {
            let mut b = NetworkBuilder::new("ring");
            let x: Vec<_> = (0..3).map(|k| b.label(&format!("x{k}"), 6)).collect();
            let (mut region, mut rest) = (Vec::new(), Vec::new());
            for k in 0..3 {
                let a = b.label(&format!("a{k}"), 6);
                let c = b.label(&format!("b{k}"), 6);
                let mut legs = [x[(k + 1) % 3], a, c, x[k]];
                legs.rotate_left(if k == 1 { turn } else { 0 });
                b.tensor(None, &legs, &block).unwrap();
                region.push(a);
                rest.push(c);
            }
            b.boundary(region.into_iter().chain(rest));
            let piece = Piece { network: b.finish().unwrap(), region_legs: 3 };
            let shape = Shape::of(&piece.network);
            let plan = order::search(&shape, &order::Request::default(), &Silent).unwrap().plan;
            let outcome = crate::contract::run(
                &piece.network,
                &plan,
                &crate::contract::Request::default(),
                &Silent,
            )
            .unwrap();
            let dense = outcome.tensor.into_parts().1.to_complex();
            let sectors = Sectors::of(&piece);
            let mut fast = singular_values(&dense, 216, &sectors).unwrap();
            let matrix = dense.into_shape_with_order((216, 216)).unwrap();
            let mut slow = linalg::singular_values(&matrix.view()).unwrap();
            fast.resize(slow.len(), 0.0);
            fast.sort_by(|a, b| b.total_cmp(a));
            slow.sort_by(|a, b| b.total_cmp(a));
            for (f, s) in fast.iter().zip(&slow) {
                assert!((f - s).abs() < 1e-12 * slow[0], "turn {turn}: {f} {s}");
            }
            let (blocks, different, split) = sectors.count();
            assert!(blocks / different * split > 1.0, "turn {turn}: no rule was found");
        }
    }
}
