//! Exact entries as JSON.

use super::{Exact, ExactValues};
use serde::{Deserialize, Serialize};
use thiserror::Error;

/// What can be wrong with a file of exact entries.
#[derive(Debug, Error)]
#[non_exhaustive]
pub enum ExactFileError {
    /// It is not JSON of this form.
    #[error("not a file of exact entries: {0}")]
    Form(#[from] serde_json::Error),
    /// The root, the scale or the shape is out of range.
    #[error("{what} is {value}, but must be {expected}")]
    Range {
        /// Which number.
        what: &'static str,
        /// Its value.
        value: String,
        /// What it must be.
        expected: &'static str,
    },
    /// An entry lies outside the array or has an impossible exponent.
    #[error("entry {number} at {at:?} {fault}")]
    Entry {
        /// Its number in the file, from 0.
        number: usize,
        /// Its place.
        at: Vec<usize>,
        /// What is wrong.
        fault: &'static str,
    },
}

/// `root`: order of ζ = exp(2πi/root); `scale_squared`: [num, den]; an entry is
/// √(num/den)·Σ c·ζ^e over its terms [e, c].
#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    block: String,
    dimensions: Vec<usize>,
    root: u32,
    scale_squared: (u64, u64),
    entries: Vec<Entry>,
}

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Entry {
    at: Vec<usize>,
    terms: Vec<(u32, i64)>,
}

/// One JSON object with every non-zero entry, in row-major order.
///
/// # Errors
/// [`ExactFileError::Range`] where the common factor does not fit 64 bits.
pub fn exact_to_json(name: &str, exact: &Exact) -> Result<String, ExactFileError> {
    let (num, den) = exact.scale_squared;
    let narrow = |v: u128| {
        u64::try_from(v).map_err(|_| ExactFileError::Range {
            what: "a part of the squared scale",
            value: v.to_string(),
            expected: "below 2^64",
        })
    };
    let entries = (0..exact.len())
        .map(|k| {
            let mut rest = exact.index[k];
            let mut at = vec![0; exact.dims.len()];
            for (a, &d) in at.iter_mut().zip(&exact.dims).rev() {
                *a = (rest % d as u64) as usize;
                rest /= d as u64;
            }
            Entry { at, terms: exact.terms(k) }
        })
        .collect();
    let file = File {
        block: name.to_owned(),
        dimensions: exact.dims.clone(),
        root: exact.root,
        scale_squared: (narrow(num)?, narrow(den)?),
        entries,
    };
    Ok(serde_json::to_string(&file)?)
}

/// Reads what [`exact_to_json`] wrote, checking every number; returns the name too.
///
/// # Errors
/// [`ExactFileError`].
pub fn exact_from_json(text: &str) -> Result<(String, Exact), ExactFileError> {
    let file: File = serde_json::from_str(text)?;
    let range = |what, value: String, expected| ExactFileError::Range { what, value, expected };
    if file.root == 0 || file.root > 1 << 16 {
        return Err(range("the root", file.root.to_string(), "from 1 to 65536"));
    }
    let (num, den) = file.scale_squared;
    if num == 0 || den == 0 {
        return Err(range("the squared scale", format!("{num}/{den}"), "positive"));
    }
    let size = file.dimensions.iter().try_fold(1u64, |s, &d| s.checked_mul(d as u64));
    if file.dimensions.is_empty() || size.is_none_or(|s| s == 0 || s > 1 << 62) {
        let shape = format!("{:?}", file.dimensions);
        return Err(range("the shape", shape, "of 1 to 2^62 places on at least one leg"));
    }
    if file.entries.is_empty() {
        return Err(range("the number of entries", "0".to_owned(), "positive"));
    }
    let mut entries: Vec<(u64, Vec<(u32, i64)>)> = Vec::with_capacity(file.entries.len());
    for (number, e) in file.entries.into_iter().enumerate() {
        let fault = |at: &[usize], fault| ExactFileError::Entry { number, at: at.to_vec(), fault };
        if e.at.len() != file.dimensions.len()
            || e.at.iter().zip(&file.dimensions).any(|(a, d)| a >= d)
        {
            return Err(fault(&e.at, "lies outside the array"));
        }
        if e.terms.is_empty() || e.terms.iter().any(|t| t.0 >= file.root) {
            return Err(fault(&e.at, "has no term, or an exponent not below the root"));
        }
        if e.terms.iter().any(|t| t.1.unsigned_abs() > 1 << 24) {
            return Err(fault(&e.at, "has a coefficient beyond 2^24"));
        }
        let place =
            e.at.iter().zip(&file.dimensions).fold(0u64, |i, (&a, &d)| i * d as u64 + a as u64);
        entries.push((place, e.terms));
    }
    entries.sort();
    if let Some(twice) = entries.windows(2).position(|w| w[0].0 == w[1].0) {
        return Err(ExactFileError::Entry {
            number: twice + 1,
            at: vec![entries[twice].0 as usize],
            fault: "stands twice (row-major place)",
        });
    }
    let (index, value) = entries.into_iter().unzip();
    let exact = Exact {
        dims: file.dimensions,
        root: file.root,
        scale_squared: (u128::from(num), u128::from(den)),
        index,
        value: ExactValues::Sums(value),
    };
    Ok((file.block, exact))
}
