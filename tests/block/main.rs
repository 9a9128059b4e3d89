//! Building blocks: constructions, proofs, measures, files, and the commands that show them.

mod families;
mod measures;
mod program;
mod recorded;
mod refusals;
mod stabilizers;

use lierne::block::{self, Block, Request, from_dense};

pub(crate) fn make(family: &str, dims: &[usize]) -> Block {
    block::make(&Request::new(family, dims.to_vec()))
        .unwrap_or_else(|e| panic!("{family} {dims:?}: {e}"))
}

/// The numerical table of the dense array must agree with the proven one.
pub(crate) fn tables_agree(block: &Block) {
    let judged = from_dense("copy", block.to_dense(), 1e-10).unwrap();
    for mask in 0..1u64 << block.dims().len() {
        assert_eq!(
            block.isometries().is_isometry(mask),
            judged.isometries().is_isometry(mask),
            "{} {:?}: legs {mask:b}",
            block.name(),
            block.dims()
        );
    }
}
