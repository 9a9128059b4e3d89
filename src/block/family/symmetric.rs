//! Permutation-invariant states of two-level excitations: W and Dicke states.

use super::{Family, Legs};
use crate::block::exact::Exact;
use crate::block::{Block, BlockError, IsometryTable, Proof, Request};

pub(super) const W: Family = Family {
    name: "w",
    legs: Legs::AtLeast(2),
    dimensions: "every D >= 2",
    construction: "equal sum of all levels 0...010...0, norm 1",
    source: "Phys. Rev. A 62, 062314 (2000), from memory",
    stabilizer: "no",
    isometric: "one leg of two, at D = 2",
    options: &[],
    make: |r| dicke(r, 1),
};

pub(super) const DICKE: Family = Family {
    name: "dicke",
    legs: Legs::AtLeast(2),
    dimensions: "every D >= 2",
    construction: "equal sum of all placings of k ones among zeros, norm 1 (option \
                   excitations, default half the legs)",
    source: "Phys. Rev. 93, 99 (1954), from memory",
    stabilizer: "no",
    isometric: "one leg where k is half the number of legs, at D = 2",
    options: &["excitations"],
    make: |r| {
        let n = r.dims.len();
        let k = r.count("excitations", n / 2, n)?;
        dicke(r, k)
    },
};

fn dicke(request: &Request, k: usize) -> Result<Block, BlockError> {
    let d = request.one_dimension()?;
    let n = request.dims.len();
    if d < 2 {
        return Err(BlockError::WrongDimensions {
            family: request.family.clone(),
            expected: "two levels or more a leg".to_owned(),
            dims: request.dims.clone(),
        });
    }
    let dims = request.dims.clone();
    let placings: Vec<u64> = (0..1u64 << n).filter(|m| m.count_ones() as usize == k).collect();
    let count = placings.len() as u128;
    // The reduced state of L legs has at most L + 1 non-zero eigenvalues
    // C(L,j)·C(n−L,k−j)/C(n,k) (Phys. Rev. A 67, 022112 (2003)), so only one leg can be
    // maximally mixed, and is where both eigenvalues agree.
    let table = IsometryTable::ask(n, |mask| mask.count_ones() == 1 && d == 2 && 2 * k == n);
    let shape = dims.clone();
    if shape.iter().try_fold(1u64, |s, &d| s.checked_mul(d as u64)).is_none_or(|s| s > 1 << 62) {
        return Err(BlockError::TooLarge {
            what: request.family.clone(),
            entries: format!("{dims:?} levels, so up to their product of"),
            limit: 1 << 62,
        });
    }
    Ok(Block::exact_lazy(&request.family, dims, table, None, count, move || {
        let place =
            |m: &u64| (0..n).fold(0, |i, leg| i * shape[leg] as u64 + (m >> (n - 1 - leg) & 1));
        let entries = placings.iter().map(|m| (place(m), 0)).collect();
        Exact::from_roots(shape.clone(), 1, (1, count), entries)
    })
    .proven(Proof::Formula))
}
