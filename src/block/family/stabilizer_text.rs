//! Any stabilizer code or state over a prime, from its generators.

use super::{Family, Legs};
use crate::block::encoder::Encoder;
use crate::block::pauli_text::PauliRows;
use crate::block::{Block, BlockError, Request, Stabilizer};
use crate::field::prime_power;

pub(super) const FAMILY: Family = Family {
    name: "stabilizer",
    legs: Legs::AtLeast(1),
    dimensions: "physical legs of one prime D, then the bulk: one leg of D^k or k legs of D",
    construction: "generators as text (option stabilizers): XZZXI,IXZZX,... or X1Z2 I X,...; \
                   option logical: shifts, then clocks",
    source: "arXiv:quant-ph/9705052, from memory",
    stabilizer: "over GF(D)",
    isometric: "found by ranks",
    options: &["stabilizers", "logical"],
    make,
};

fn make(request: &Request) -> Result<Block, BlockError> {
    let d = request.dims[0];
    let wrong = |expected: String| BlockError::WrongDimensions {
        family: request.family.clone(),
        expected,
        dims: request.dims.clone(),
    };
    let Some((p, 1)) = prime_power(d as u64) else {
        return Err(wrong("legs of a prime dimension".to_owned()));
    };
    let text = request.options.get("stabilizers").map_or("", String::as_str);
    if text.trim().is_empty() {
        return Err(request.bad_option("stabilizers", "generators separated by commas"));
    }
    let code = PauliRows::parse(p as u32, text)?;
    let n = code.sites;
    let mut encoder = Encoder::complete(&code);
    let k = encoder.logical_digits();
    if let Some(logical) = request.options.get("logical") {
        if logical.split(',').count() != 2 * k {
            return Err(request.bad_option(
                "logical",
                format!("{k} shift and {k} clock operators separated by commas"),
            ));
        }
        encoder = Encoder::with_logical(&code, logical)?;
    }
    let bulk = request.dims.get(n..).unwrap_or_default();
    let one = d.checked_pow(k as u32).is_some_and(|b| bulk == [b]) && k > 0;
    let each = bulk.len() == k && bulk.iter().all(|&b| b == d);
    if request.dims.len() < n || request.dims[..n].iter().any(|&e| e != d) || !(one || each) {
        return Err(wrong(match k {
            0 => format!("{n} legs of dimension {d}"),
            1 => format!("{n} legs and a bulk leg of dimension {d}"),
            _ => format!(
                "{n} legs of dimension {d}, then one bulk leg of dimension {d}^{k} or {k} of {d}"
            ),
        }));
    }
    let part = encoder.tensor(1, one && !each);
    part.check().map_err(|fault| {
        request.bad_option("logical", format!("a set of operators of the code (it {fault})"))
    })?;
    let stabilizer = Stabilizer::new(vec![part]);
    let norm = if k > 0 {
        (d as u128).pow(k as u32)
    } else if stabilizer.isometries(&request.dims).is_perfect() {
        (d as u128).pow(n as u32 / 2)
    } else {
        1
    };
    stabilizer.into_block(&request.family, request.dims.clone(), norm)
}
