//! Encoders of small codes that holographic networks use.
//!
//! The order of physical legs makes every contiguous set of legs isometric that is no larger
//! than its complement, the bulk leg standing last in the cycle; found by trying all orders.

use super::{Family, Legs};
use crate::block::encoder::Encoder;
use crate::block::pauli_text::PauliRows;
use crate::block::{Block, BlockError, Request, Stabilizer};
use crate::field::factorise;

pub(super) const FOUR: Family = Family {
    name: "code-4-2-2",
    legs: Legs::Between(5, 6),
    dimensions: "four legs of D, then one bulk leg of D^2 or two of D; every D >= 2",
    construction: "stabilizers X X^-1 X X^-1 and Z Z Z Z over each prime of D",
    source: "Phys. Rev. A 54, R1741 (1996), from memory; distance recomputed",
    stabilizer: "over GF(p) for each prime p of D",
    isometric: "contiguous ones, bulk leg last; and the bulk leg with any one other",
    options: &[],
    make: |r| make(r, &CODES[0]),
};

pub(super) const FIVE: Family = Family {
    name: "code-5-1-3",
    legs: Legs::Exactly(6),
    dimensions: "every D >= 2",
    construction: "cyclic shifts of X Z Z^-1 X^-1 I over each prime of D",
    source: "Phys. Rev. Lett. 77, 198 (1996), from memory; distance recomputed",
    stabilizer: "over GF(p) for each prime p of D",
    isometric: "all",
    options: &[],
    make: |r| make(r, &CODES[1]),
};

pub(super) const SIX: Family = Family {
    name: "code-6-1-3",
    legs: Legs::Exactly(7),
    dimensions: "2",
    construction: "the six-qubit code that is no extension of the five-qubit one",
    source: "Phys. Rev. A 78, 012337 (2008), from memory; distance recomputed",
    stabilizer: "over GF(2)",
    isometric: "contiguous ones, bulk leg last",
    options: &[],
    make: |r| make(r, &CODES[2]),
};

pub(super) const SEVEN: Family = Family {
    name: "code-7-1-3",
    legs: Legs::Exactly(8),
    dimensions: "2",
    construction: "both kinds of checks from the [7,4] Hamming code",
    source: "Proc. R. Soc. A 452, 2551 (1996), from memory; distance recomputed",
    stabilizer: "over GF(2)",
    isometric: "contiguous ones, bulk leg last",
    options: &[],
    make: |r| make(r, &CODES[3]),
};

struct Code {
    sites: usize,
    logical_digits: usize,
    /// Generators for qubits.
    qubit: &'static str,
    /// Logical shifts, then clocks, for qubits.
    logical: &'static str,
    /// Generators for any prime, −1 standing for p − 1; empty where only qubits exist.
    any_prime: &'static [(&'static [i32], &'static [i32])],
}

const CODES: [Code; 4] = [
    Code {
        sites: 4,
        logical_digits: 2,
        qubit: "XXXX,ZZZZ",
        logical: "XXII,XIXI,ZIZI,ZZII",
        any_prime: &[(&[1, -1, 1, -1], &[0; 4]), (&[0; 4], &[1; 4])],
    },
    Code {
        sites: 5,
        logical_digits: 1,
        qubit: "XZZXI,IXZZX,XIXZZ,ZXIXZ",
        logical: "XXXXX,ZZZZZ",
        any_prime: &[
            (&[1, 0, 0, -1, 0], &[0, 1, -1, 0, 0]),
            (&[0, 1, 0, 0, -1], &[0, 0, 1, -1, 0]),
            (&[-1, 0, 1, 0, 0], &[0, 0, 0, 1, -1]),
            (&[0, -1, 0, 1, 0], &[-1, 0, 0, 0, 1]),
        ],
    },
    Code {
        sites: 6,
        logical_digits: 1,
        qubit: "YIXZXY,ZXIIXZ,IZXXXX,IIZIIZ,ZZIZZI",
        logical: "ZIIXXI,IZIIZZ",
        any_prime: &[],
    },
    Code {
        sites: 7,
        logical_digits: 1,
        qubit: "XXXIXII,XXIXIIX,XIXIIXX,ZZZIZII,ZZIZIIZ,ZIZIIZZ",
        logical: "XXXXXXX,ZZZZZZZ",
        any_prime: &[],
    },
];

fn make(request: &Request, code: &Code) -> Result<Block, BlockError> {
    let (n, k) = (code.sites, code.logical_digits);
    let dims = &request.dims;
    let d = dims[0];
    let wrong = || BlockError::WrongDimensions {
        family: request.family.clone(),
        expected: match (code.any_prime.is_empty(), k) {
            (true, _) => format!("{n} legs and a bulk leg of dimension 2"),
            (false, 1) => format!("{n} legs and a bulk leg of one dimension from 2 on"),
            (false, _) => {
                format!(
                    "{n} legs of one dimension D from 2 on, then one bulk leg of D^{k} or {k} of D"
                )
            }
        },
        dims: dims.clone(),
    };
    let one_bulk_leg = dims.len() == n + 1;
    let bulk = if one_bulk_leg { vec![d.pow(k as u32)] } else { vec![d; k] };
    if d < 2
        || (code.any_prime.is_empty() && d != 2)
        || dims[..n].iter().any(|&e| e != d)
        || dims[n..] != bulk[..]
    {
        return Err(wrong());
    }
    let mut parts = Vec::new();
    for (p, m) in factorise(d as u64) {
        let p = p as u32;
        let encoder = if p == 2 {
            Encoder::with_logical(&PauliRows::parse(2, code.qubit)?, code.logical)?
        } else {
            let entry = |v: &i32| v.rem_euclid(p as i32) as u32;
            let rows: Vec<Vec<u32>> = code
                .any_prime
                .iter()
                .map(|(x, z)| x.iter().chain(z.iter()).map(entry).collect())
                .collect();
            let phases = vec![0; rows.len()];
            Encoder::complete(&PauliRows { prime: p, sites: n, rows, phases })
        };
        parts.push(encoder.tensor(m as usize, one_bulk_leg));
    }
    let norm = bulk.iter().map(|&b| b as u128).product();
    Stabilizer::new(parts).into_block(&request.family, dims.clone(), norm)
}
