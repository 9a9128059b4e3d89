//! Partial sums as bytes: for checkpoints and for messages between machines.
//!
//! One line of JSON (format, key, place in the tree, exponent, shape, kind of number, SHA-256
//! of the rest), then the entries in row-major order as little-endian doubles, real and
//! imaginary part in turn for complex numbers.

use super::sums::Node;
use super::total::Total;
use crate::linalg::Scalar;
use ndarray::{ArrayD, IxDyn};
use num_complex::Complex64;
use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};

const FORMAT: u64 = 1;

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Head {
    lierne_sum: u64,
    key: String,
    height: u32,
    place: u64,
    exponent: Option<i64>,
    shape: Vec<usize>,
    complex: bool,
    sha256: String,
}

/// Why bytes were refused.
#[derive(Debug, Clone, PartialEq, Eq)]
pub(super) enum Refusal {
    /// They belong to another network, plan or version.
    Other,
    /// They are damaged.
    Damaged(String),
}

/// A partial sum as bytes. `key` names the network, the plan and all that decides the bits.
pub(super) fn encode<T: Scalar>(key: &str, node: Node, total: &Total<T>) -> Vec<u8> {
    let mut body = Vec::with_capacity(total.values.len() * if T::COMPLEX { 16 } else { 8 });
    for x in &total.values {
        let x = x.to_c64();
        body.extend_from_slice(&x.re.to_le_bytes());
        if T::COMPLEX {
            body.extend_from_slice(&x.im.to_le_bytes());
        }
    }
    let head = Head {
        lierne_sum: FORMAT,
        key: key.to_owned(),
        height: node.0,
        place: node.1,
        exponent: total.exponent,
        shape: total.values.shape().to_vec(),
        complex: T::COMPLEX,
        sha256: hex(&Sha256::digest(&body)),
    };
    let mut bytes = serde_json::to_vec(&head).expect("a head is plain data");
    bytes.push(b'\n');
    bytes.append(&mut body);
    bytes
}

/// Reads what [`encode`] wrote.
pub(super) fn decode<T: Scalar>(key: &str, bytes: &[u8]) -> Result<(Node, Total<T>), Refusal> {
    let damaged = |what: &str| Refusal::Damaged(what.to_owned());
    let end = bytes.iter().position(|&b| b == b'\n').ok_or_else(|| damaged("its head is cut"))?;
    let head: Head =
        serde_json::from_slice(&bytes[..end]).map_err(|e| Refusal::Damaged(e.to_string()))?;
    if head.lierne_sum != FORMAT || head.key != key || head.complex != T::COMPLEX {
        return Err(Refusal::Other);
    }
    let body = &bytes[end + 1..];
    if hex(&Sha256::digest(body)) != head.sha256 {
        return Err(damaged("its checksum does not fit"));
    }
    let width = if T::COMPLEX { 16 } else { 8 };
    let number = |b: &[u8]| f64::from_le_bytes(b.try_into().expect("eight bytes"));
    let values: Vec<T> = body
        .chunks_exact(width)
        .map(|b| {
            let im = if T::COMPLEX { number(&b[8..]) } else { 0.0 };
            T::from_c64(Complex64::new(number(&b[..8]), im))
        })
        .collect();
    let values = ArrayD::from_shape_vec(IxDyn(&head.shape), values)
        .map_err(|_| damaged("its length does not fit its shape"))?;
    Ok(((head.height, head.place), Total { values, exponent: head.exponent }))
}

pub(super) fn hex(bytes: &[u8]) -> String {
    bytes.iter().map(|b| format!("{b:02x}")).collect()
}
