//! The perfect tensor with as many legs as are asked for.

use super::{Family, Legs, find, graph_state};
use crate::block::existence::obstruction;
use crate::block::{Block, BlockError, Request};

pub(super) const FAMILY: Family = Family {
    name: "perfect",
    legs: Legs::AtLeast(1),
    dimensions: "one dimension, wherever a construction is built in",
    construction: "the family for this number of legs",
    source: "as that family",
    stabilizer: "as that family",
    isometric: "all",
    options: &[],
    make,
};

fn make(request: &Request) -> Result<Block, BlockError> {
    let d = request.one_dimension()?;
    let n = request.dims.len();
    if let Some(refusal) = obstruction(n, d).and_then(|e| e.refusal(n, d)) {
        return Err(refusal);
    }
    let name = match n {
        1 => "basis",
        2 => "bell",
        3 => "copy",
        4 => "four-leg",
        5 => "five-leg",
        6 => "six-leg",
        7 => "seven-leg",
        8 => "eight-leg",
        _ => return graph_state::make(request),
    };
    let family = find(name).expect("a listed family");
    (family.make)(&Request { family: name.to_owned(), ..request.clone() })
}
