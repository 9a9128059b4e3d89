//! Stabilizer generators as people write them.

use super::BlockError;

/// Products of generalised Pauli operators over one prime: rows (x|z) with phases in τ, as
/// in [`PrimePart`](super::PrimePart).
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) struct PauliRows {
    pub(super) prime: u32,
    pub(super) sites: usize,
    pub(super) rows: Vec<Vec<u32>>,
    pub(super) phases: Vec<u32>,
}

impl PauliRows {
    /// Reads generators separated by commas.
    ///
    /// A generator is one operator a site: `I`, `X`, `Z`, for qubits also `Y`, each with an
    /// optional power (`X2`), and for a leading `-` (qubits) the opposite sign. Where it
    /// contains spaces these separate the sites and a site may hold an X and a Z power
    /// (`X1Z2`); without spaces every letter starts a new site (`XZ2ZX2I`).
    ///
    /// # Errors
    /// [`BlockError::Generator`] with the generator and the fault.
    pub(super) fn parse(prime: u32, text: &str) -> Result<Self, BlockError> {
        let mut out = Self { prime, sites: 0, rows: vec![], phases: vec![] };
        for (k, piece) in text.split(',').enumerate() {
            let fault = |fault: String| BlockError::Generator {
                number: k + 1,
                text: piece.trim().to_owned(),
                fault,
            };
            let (sites, phase) = generator(prime, piece.trim()).map_err(fault)?;
            if k == 0 {
                out.sites = sites.len();
            } else if sites.len() != out.sites {
                return Err(fault(format!(
                    "acts on {} sites, but the first one on {}",
                    sites.len(),
                    out.sites
                )));
            }
            let x = sites.iter().map(|s| s.0);
            let z = sites.iter().map(|s| s.1);
            out.rows.push(x.chain(z).collect());
            out.phases.push(phase);
        }
        out.judge(text)?;
        Ok(out)
    }

    /// Generators must commute, be independent and not generate −1.
    fn judge(&self, text: &str) -> Result<(), BlockError> {
        let pieces: Vec<&str> = text.split(',').map(str::trim).collect();
        let field = super::prime_part::prime_field(self.prime);
        for (i, piece) in pieces.iter().enumerate() {
            let fault = |fault: String| BlockError::Generator {
                number: i + 1,
                text: (*piece).to_owned(),
                fault,
            };
            for j in 0..i {
                if symplectic(self.prime, &self.rows[i], &self.rows[j]) != 0 {
                    return Err(fault(format!("does not commute with generator {}", j + 1)));
                }
            }
            let width = 2 * self.sites;
            let rank = crate::field::Matrix::from_rows(&field, width, &self.rows[..=i]).rank();
            if rank <= i {
                return Err(fault("is a product of those before it, up to a phase".to_owned()));
            }
        }
        Ok(())
    }
}

/// Numbers of sites and of logical digits of a list of generators over a prime; `None` where
/// it does not read as one.
pub(super) fn size(prime: usize, text: &str) -> Option<(usize, usize)> {
    let Some((p, 1)) = crate::field::prime_power(prime as u64) else {
        return text.split(',').next().map(|t| (t.trim().len(), 0)).filter(|s| s.0 > 0);
    };
    let pieces: Vec<&str> = text.split(',').map(str::trim).collect();
    let (sites, _) = generator(p as u32, pieces[0]).ok()?;
    Some((sites.len(), sites.len().saturating_sub(pieces.len())))
}

/// Σ z·x' − x·z' modulo p; zero where the operators commute.
pub(super) fn symplectic(p: u32, a: &[u32], b: &[u32]) -> u32 {
    let n = a.len() / 2;
    (0..n).fold(0, |s, d| (s + a[n + d] * b[d] + (p - a[d]) * b[n + d]) % p)
}

/// Powers (x, z) on every site, and the exponent of τ.
fn generator(p: u32, text: &str) -> Result<(Vec<(u32, u32)>, u32), String> {
    let (negative, body) = match text.strip_prefix('-') {
        Some(rest) => (true, rest.trim()),
        None => (false, text.strip_prefix('+').unwrap_or(text).trim()),
    };
    if body.is_empty() {
        return Err("is empty".to_owned());
    }
    if negative && p != 2 {
        return Err("has a sign, which only qubit operators take".to_owned());
    }
    let spaced = body.contains(char::is_whitespace);
    let mut sites: Vec<(u32, u32)> = Vec::new();
    let mut ys = 0;
    for word in body.split_whitespace() {
        if spaced {
            sites.push((0, 0));
        }
        let mut rest = word;
        while let Some(letter) = rest.chars().next() {
            rest = &rest[letter.len_utf8()..];
            let end = rest.find(|c: char| !c.is_ascii_digit()).unwrap_or(rest.len());
            let power = match &rest[..end] {
                "" => 1,
                digits => digits.parse::<u32>().map_err(|_| format!("has the power {digits}"))? % p,
            };
            rest = &rest[end..];
            if !spaced {
                sites.push((0, 0));
            }
            let site = sites.last_mut().expect("a site was opened");
            match letter {
                'I' => {}
                'X' if site.0 == 0 && site.1 == 0 => site.0 = power,
                'Z' if site.1 == 0 => site.1 = power,
                'Y' if p == 2 && *site == (0, 0) => {
                    *site = (power, power);
                    ys += power;
                }
                'X' | 'Z' | 'Y' if p == 2 || letter != 'Y' => {
                    return Err(format!("repeats or misorders {letter} on one site"));
                }
                'Y' => return Err("has a Y, which only qubits have".to_owned()),
                other => {
                    return Err(format!("has the letter {other:?}; use I, X, Y, Z and powers"));
                }
            }
        }
    }
    // Y = iXZ; an XZ on a qubit site squares to −1 and fixes nothing.
    let phase = if p == 2 { (ys + 2 * u32::from(negative)) % 4 } else { 0 };
    let xz: u32 = sites.iter().map(|s| s.0 * s.1).sum();
    if p == 2 && !(xz + phase).is_multiple_of(2) {
        return Err("squares to -1 (write Y instead of X1Z1)".to_owned());
    }
    Ok((sites, phase))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn forms_and_faults() {
        let five = PauliRows::parse(2, "XZZXI,IXZZX,XIXZZ,ZXIXZ").unwrap();
        assert_eq!((five.sites, five.rows.len()), (5, 4));
        let y = PauliRows::parse(2, "-YY").unwrap();
        assert_eq!((y.rows[0].clone(), y.phases[0]), (vec![1, 1, 1, 1], 0));
        let two = PauliRows::parse(3, "X1Z2 I Z, I X2 I").unwrap();
        assert_eq!(two.rows, [[1, 0, 0, 2, 0, 1], [0, 2, 0, 0, 0, 0]]);
        assert_eq!(PauliRows::parse(3, "X1Z2 I X").unwrap().rows[0], [1, 0, 1, 2, 0, 0]);
        assert_eq!(PauliRows::parse(3, "XZ2I").unwrap().rows[0], [1, 0, 0, 0, 2, 0]);
        for (p, text, expected) in [
            (2, "XX,ZI", "does not commute with generator 1"),
            (2, "XX,XX", "is a product of those before it"),
            (2, "XX,ZZ,-YY", "is a product of those before it"),
            (2, "XX,XXX", "acts on 3 sites"),
            (2, "XQ", "'Q'"),
            (3, "XY", "only qubits"),
            (3, "-XX", "sign"),
            (2, "XX,,ZZ", "is empty"),
            (2, "X1Z1 I", "squares to -1"),
        ] {
            let message = PauliRows::parse(p, text).unwrap_err().to_string();
            assert!(message.contains(expected), "{text}: {message}");
        }
    }
}
