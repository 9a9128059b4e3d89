//! Evidence by contraction: the piece as a matrix between its two cuts.

use super::answer::{EntropyError, Request, Unsolved};
use super::solve::Solved;
use super::the_core::Piece;
use crate::watch::Watch;

/// Contracts a piece and takes the singular values of the matrix between its sides.
pub(super) fn by_contraction(
    _piece: &Piece,
    _request: &Request,
    _watch: &dyn Watch,
) -> Result<Solved, EntropyError> {
    Ok(Solved::Refused(Unsolved::NotAdmitted, None))
}
