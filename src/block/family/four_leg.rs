//! Perfect tensors with four legs: pairs of orthogonal Latin squares, and six levels.

use super::perfect_parts::{self, Recipe, field_of};
use super::{Family, Legs, latin_squares, six_level};
use crate::block::existence::obstruction;
use crate::block::{Block, BlockError, PrimePart, Request, Stabilizer};
use crate::field::factorise;

pub(super) const FAMILY: Family = Family {
    name: "four-leg",
    legs: Legs::Exactly(4),
    dimensions: "every D >= 3",
    construction: "T[i,j,L(i,j),M(i,j)] = 1 for two orthogonal Latin squares L, M; at D = 6 \
                   roots of unity",
    source: "Phys. Rev. A 72, 012314 (2005)",
    stabilizer: "over GF(q) for each prime power q of D, where D is not 2 modulo 4",
    isometric: "all",
    options: &[],
    make,
};

fn make(request: &Request) -> Result<Block, BlockError> {
    let d = request.one_dimension()?;
    if let Some(refusal) = obstruction(4, d).and_then(|e| e.refusal(4, d)) {
        return Err(refusal);
    }
    let known = constructions(d);
    let choice = match &request.construction {
        None => known.first().ok_or(BlockError::NoConstruction { legs: 4, dimension: d })?.0,
        Some(name) => known.iter().find(|(n, _)| n == name).map(|(n, _)| *n).ok_or_else(|| {
            BlockError::UnknownConstruction {
                family: "four-leg".to_owned(),
                dimension: d,
                name: name.clone(),
                known: known.iter().map(|k| k.0).collect::<Vec<_>>().join(", "),
            }
        })?,
    };
    let (name, build) = known.into_iter().find(|k| k.0 == choice).expect("chosen from the list");
    build(d).map(|b| b.named(format!("four-leg ({name})")))
}

pub(in crate::block) type Build = fn(usize) -> Result<Block, BlockError>;

/// The constructions that yield dimension d, the preferred one first.
pub(in crate::block) fn constructions(d: usize) -> Vec<(&'static str, Build)> {
    let mut out: Vec<(&'static str, Build)> = Vec::new();
    if d == 6 {
        out.push(("cube-roots", six_level::cube_roots));
        out.push(("quadratic", six_level::quadratic));
        out.push(("quadratic-mixed", six_level::quadratic_mixed));
    }
    let factors = factorise(d as u64);
    if d == 1 || factors.iter().all(|&(p, m)| p.pow(m) >= 3) {
        out.push(("linear-squares", linear_squares));
        out.push(("graph", graph));
    }
    if d % 2 == 1 && d > 1 {
        out.push(("cyclic-squares", latin_squares::cyclic));
    }
    if d == 10 || d == 14 {
        out.push(("difference-matrix", latin_squares::difference_matrix));
    }
    if latin_squares::wilson_reaches(d) {
        out.push(("wilson", latin_squares::wilson));
    }
    out
}

/// T[i,j,i+j,i+a·j] = 1 over GF(q), a ∉ {0, 1} (2 for odd primes, the generator x for
/// proper powers), and the product over the prime powers of d.
fn linear_squares(d: usize) -> Result<Block, BlockError> {
    let mut parts = Vec::new();
    for (p, m) in factorise(d as u64) {
        let field = field_of(p, m);
        let a = if m == 1 { 2 } else { field.generator() };
        parts.push(PrimePart::from_field_code(&field, &[vec![1, 0, 1, 1], vec![0, 1, 1, a]]));
    }
    Stabilizer::new(parts).into_perfect("four-leg", 4, d)
}

/// A weighted graph on four vertices, over every prime power of d.
fn graph(d: usize) -> Result<Block, BlockError> {
    let request = Request::new("four-leg", vec![d; 4]);
    perfect_parts::product(&request, |n, q| perfect_parts::graph(n, q).map(Recipe::Graph))
}
