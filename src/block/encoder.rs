//! Encoders of stabilizer codes as tensors: physical legs first, bulk legs last.

use super::pauli_text::{PauliRows, symplectic};
use super::prime_part::prime_field;
use super::{BlockError, PrimePart};
use crate::field::Matrix;

/// A stabilizer code over one prime with a chosen pair of operators for every logical digit.
pub(super) struct Encoder {
    prime: u32,
    sites: usize,
    /// Stabilizers, rows (x|z) and phases.
    rows: Vec<(Vec<u32>, u32)>,
    /// Logical shift and clock operators, one pair a logical digit.
    logical: Vec<[(Vec<u32>, u32); 2]>,
}

impl Encoder {
    /// Completes the generators by logical operators, chosen from the reduced echelon form of
    /// their centraliser by symplectic Gram–Schmidt steps.
    pub(super) fn complete(code: &PauliRows) -> Self {
        let (p, n) = (code.prime, code.sites);
        let field = prime_field(p);
        // w commutes with (x|z) where z·w_x − x·w_z = 0.
        let rules = Matrix::from_fn(&field, code.rows.len(), 2 * n, |i, j| {
            let r = &code.rows[i];
            if j < n { r[n + j] } else { (p - r[j - n]) % p }
        });
        let mut pool = rules.null_space().to_rows();
        let mut logical = Vec::new();
        while let Some(at) = pool.iter().position(|a| pool.iter().any(|b| symplectic(p, b, a) != 0))
        {
            let shift = pool.remove(at);
            let other = pool.iter().position(|b| symplectic(p, b, &shift) != 0);
            let mut clock = pool.remove(other.expect("some operator fails to commute with it"));
            let inverse = field.inv(symplectic(p, &clock, &shift));
            clock.iter_mut().for_each(|v| *v = field.mul(*v, inverse));
            for w in &mut pool {
                let with_shift = symplectic(p, w, &shift);
                let with_clock = symplectic(p, w, &clock);
                for (d, v) in w.iter_mut().enumerate() {
                    let take = field.mul(with_shift, clock[d]);
                    let give = field.mul(with_clock, shift[d]);
                    *v = field.add(field.sub(*v, take), give);
                }
            }
            let (s, c) = (hermitian_phase(p, &shift), hermitian_phase(p, &clock));
            logical.push([(shift, s), (clock, c)]);
        }
        let rows = code.rows.iter().cloned().zip(code.phases.iter().copied()).collect();
        Self { prime: p, sites: n, rows, logical }
    }

    /// With logical operators written out: all shifts, then all clocks.
    ///
    /// # Errors
    /// As [`PauliRows::parse`].
    pub(super) fn with_logical(code: &PauliRows, logical: &str) -> Result<Self, BlockError> {
        let mut out = Self::complete(code);
        let k = out.logical.len();
        let pieces: Vec<&str> = logical.split(',').collect();
        let one = |text: &str| -> Result<(Vec<u32>, u32), BlockError> {
            let mut p = PauliRows::parse(code.prime, text)?;
            Ok((p.rows.remove(0), p.phases[0]))
        };
        for i in 0..k {
            out.logical[i] = [one(pieces[i])?, one(pieces[k + i])?];
        }
        Ok(out)
    }

    /// Number of logical digits.
    pub(super) fn logical_digits(&self) -> usize {
        self.logical.len()
    }

    /// The tensor Σ_i |encoded i⟩|i⟩ of `copies` independent copies: one leg of `copies`
    /// digits a site, then the bulk: one leg of all logical digits, logical 0 the most
    /// significant, or one leg each.
    pub(super) fn tensor(&self, copies: usize, one_bulk_leg: bool) -> PrimePart {
        let (p, n, k) = (self.prime, self.sites, self.logical.len());
        let width = (n + k) * copies;
        let place = |site: usize, copy: usize| {
            if site < n || !one_bulk_leg {
                site * copies + copy
            } else {
                n * copies + (k - 1 - (site - n)) * copies + copy
            }
        };
        let mut generators = Vec::with_capacity(width);
        let mut phases = Vec::with_capacity(width);
        for copy in 0..copies {
            let mut push = |row: &(Vec<u32>, u32), bulk: Option<(usize, bool)>| {
                let mut out = vec![0; 2 * width];
                for site in 0..n {
                    out[place(site, copy)] = row.0[site];
                    out[width + place(site, copy)] = row.0[n + site];
                }
                match bulk {
                    Some((digit, true)) => out[place(n + digit, copy)] = 1,
                    Some((digit, false)) => out[width + place(n + digit, copy)] = p - 1,
                    None => {}
                }
                generators.push(out);
                phases.push(row.1);
            };
            self.rows.iter().for_each(|r| push(r, None));
            for (i, [shift, clock]) in self.logical.iter().enumerate() {
                push(shift, Some((i, true)));
                push(clock, Some((i, false)));
            }
        }
        let mut digits = vec![copies as u32; n];
        match (k, one_bulk_leg) {
            (0, _) => {}
            (_, true) => digits.push((k * copies) as u32),
            (_, false) => digits.extend(vec![copies as u32; k]),
        }
        PrimePart { prime: p, digits, generators, phases }
    }
}

/// The phase that makes an operator of qubits Hermitian: i for every XZ.
fn hermitian_phase(p: u32, row: &[u32]) -> u32 {
    let n = row.len() / 2;
    if p == 2 { (0..n).map(|d| row[d] * row[n + d]).sum::<u32>() % 4 } else { 0 }
}
