//! NumPy's array files, read whatever their order and width, written as complex128.
//!
//! Format: NumPy Enhancement Proposal 1 (npy versions 1 to 3).

use super::Entries;
use crate::tensor::Dense;
use ndarray::{ArrayD, IxDyn, ShapeBuilder};
use num_complex::Complex64;
use std::io::Write;
use std::path::{Path, PathBuf};
use thiserror::Error;

/// Most entries read from a file.
const MOST_ENTRIES: usize = 1 << 28;

/// What can be wrong with an array file.
#[derive(Debug, Error)]
#[non_exhaustive]
pub enum NpyError {
    /// The file cannot be read or written.
    #[error("{path}: {fault}")]
    Io {
        /// The file.
        path: PathBuf,
        /// What the system says.
        fault: std::io::Error,
    },
    /// It does not start like an array file.
    #[error("{path} is no NumPy array file: {fault}")]
    Header {
        /// The file.
        path: PathBuf,
        /// What is wrong.
        fault: String,
    },
    /// Numbers of a kind that is not read.
    #[error(
        "{path} holds numbers of type `{found}`; read are float32, float64, complex64, \
         complex128, booleans and integers up to 64 bits"
    )]
    Kind {
        /// The file.
        path: PathBuf,
        /// NumPy's code of the type.
        found: String,
    },
    /// The file ends early or goes on too long.
    #[error(
        "{path} should hold {expected} bytes of numbers for shape {shape:?}, but holds {found}"
    )]
    Length {
        /// The file.
        path: PathBuf,
        /// Its shape.
        shape: Vec<usize>,
        /// Bytes that the shape needs.
        expected: u128,
        /// Bytes that are there.
        found: u64,
    },
    /// More entries than are read.
    #[error("{path} has shape {shape:?}, more than the {limit} entries that are read")]
    TooLarge {
        /// The file.
        path: PathBuf,
        /// Its shape.
        shape: Vec<usize>,
        /// The limit.
        limit: usize,
    },
    /// A whole number that float64 does not hold.
    #[error("{path}: entry {place} is {value}, a whole number beyond 2^53 that would be rounded")]
    Rounded {
        /// The file.
        path: PathBuf,
        /// Its place in the file.
        place: usize,
        /// The number.
        value: String,
    },
}

/// Reads an array; real types give a real array, both byte orders and both axis orders are
/// understood.
///
/// # Errors
/// [`NpyError`]; nothing is guessed.
pub fn read_npy(path: &Path) -> Result<Dense, NpyError> {
    let io = |fault| NpyError::Io { path: path.to_owned(), fault };
    let bytes = std::fs::read(path).map_err(io)?;
    parse(path, &bytes)
}

fn parse(path: &Path, bytes: &[u8]) -> Result<Dense, NpyError> {
    let header_fault =
        |fault: &str| NpyError::Header { path: path.to_owned(), fault: fault.to_owned() };
    if bytes.len() < 10 || &bytes[..6] != b"\x93NUMPY" {
        return Err(header_fault("it does not start with NumPy's mark"));
    }
    let (start, length) = match bytes[6] {
        1 => (10, usize::from(u16::from_le_bytes([bytes[8], bytes[9]]))),
        2 | 3 if bytes.len() >= 12 => {
            (12, u32::from_le_bytes([bytes[8], bytes[9], bytes[10], bytes[11]]) as usize)
        }
        2 | 3 => return Err(header_fault("it ends within its header")),
        v => return Err(header_fault(&format!("its format version {v} is unknown"))),
    };
    let end = start + length;
    let text = bytes
        .get(start..end)
        .and_then(|b| std::str::from_utf8(b).ok())
        .ok_or_else(|| header_fault("it ends within its header"))?;
    let descr = quoted(text, "descr").ok_or_else(|| header_fault("its type is not readable"))?;
    let fortran = match field(text, "fortran_order") {
        Some(t) if t.starts_with("True") => true,
        Some(t) if t.starts_with("False") => false,
        _ => return Err(header_fault("its axis order is not readable")),
    };
    let shape = shape_of(text).ok_or_else(|| header_fault("its shape is not readable"))?;
    let kind = || NpyError::Kind { path: path.to_owned(), found: descr.to_owned() };
    let (order, code) = descr.split_at(descr.find(|c: char| !"<>|=".contains(c)).unwrap_or(0));
    let width: usize = code.get(1..).and_then(|w| w.parse().ok()).ok_or_else(kind)?;
    let big = order == ">";
    if !matches!(
        code,
        "b1" | "i1" | "i2" | "i4" | "i8" | "u1" | "u2" | "u4" | "u8" | "f4" | "f8" | "c8" | "c16"
    ) {
        return Err(kind());
    }
    let size = shape.iter().try_fold(1usize, |s, &d| s.checked_mul(d));
    let count = match size {
        Some(s) if s <= MOST_ENTRIES => s,
        _ => {
            return Err(NpyError::TooLarge { path: path.to_owned(), shape, limit: MOST_ENTRIES });
        }
    };
    let body = &bytes[end..];
    if body.len() != count * width {
        return Err(NpyError::Length {
            path: path.to_owned(),
            shape,
            expected: (count * width) as u128,
            found: body.len() as u64,
        });
    }
    let layout = IxDyn(&shape).set_f(fortran);
    if code.starts_with('c') {
        let half = width / 2;
        let values: Vec<Complex64> = body
            .chunks_exact(width)
            .map(|b| Complex64::new(float(&b[..half], big), float(&b[half..], big)))
            .collect();
        let array = ArrayD::from_shape_vec(layout, values).expect("the count was checked");
        return Ok(Dense::Complex(array.as_standard_layout().into_owned()));
    }
    let mut values = Vec::with_capacity(count);
    for (place, b) in body.chunks_exact(width).enumerate() {
        values.push(if code.starts_with('f') {
            float(b, big)
        } else {
            let v = integer(b, big, code.starts_with('i'));
            if v.unsigned_abs() > 1 << 53 {
                return Err(NpyError::Rounded {
                    path: path.to_owned(),
                    place,
                    value: v.to_string(),
                });
            }
            v as f64
        });
    }
    let array = ArrayD::from_shape_vec(layout, values).expect("the count was checked");
    Ok(Dense::Real(array.as_standard_layout().into_owned()))
}

fn float(b: &[u8], big: bool) -> f64 {
    if b.len() == 4 {
        let b = [b[0], b[1], b[2], b[3]];
        f64::from(if big { f32::from_be_bytes(b) } else { f32::from_le_bytes(b) })
    } else {
        let b = [b[0], b[1], b[2], b[3], b[4], b[5], b[6], b[7]];
        if big { f64::from_be_bytes(b) } else { f64::from_le_bytes(b) }
    }
}

fn integer(b: &[u8], big: bool, signed: bool) -> i128 {
    let mut v = 0i128;
    for k in 0..b.len() {
        v = v << 8 | i128::from(b[if big { k } else { b.len() - 1 - k }]);
    }
    let bits = 8 * b.len();
    if signed && v >> (bits - 1) & 1 == 1 { v - (1 << bits) } else { v }
}

/// What follows `'key':` in the header.
fn field<'a>(text: &'a str, key: &str) -> Option<&'a str> {
    let at = text.find(&format!("'{key}'")).or_else(|| text.find(&format!("\"{key}\"")))?;
    let rest = &text[at + key.len() + 2..];
    Some(rest.trim_start().strip_prefix(':')?.trim_start())
}

fn quoted<'a>(text: &'a str, key: &str) -> Option<&'a str> {
    let rest = field(text, key)?;
    let quote = rest.chars().next().filter(|c| *c == '\'' || *c == '"')?;
    rest[1..].split_once(quote).map(|p| p.0)
}

fn shape_of(text: &str) -> Option<Vec<usize>> {
    let inside = field(text, "shape")?.strip_prefix('(')?.split_once(')')?.0;
    inside
        .split(',')
        .map(str::trim)
        .filter(|s| !s.is_empty())
        .map(|s| s.trim_end_matches('L').parse().ok())
        .collect()
}

/// Writes a complex128 array in row-major order, beside its place first, so that a reader
/// never sees half of it.
///
/// # Errors
/// [`NpyError::Io`].
pub fn write_npy(path: &Path, data: &Dense) -> Result<(), NpyError> {
    write(path, data.shape(), |out| match data {
        Dense::Real(a) => a.iter().try_for_each(|v| put(out, *v, 0.0)),
        Dense::Complex(a) => a.iter().try_for_each(|v| put(out, v.re, v.im)),
    })
}

/// As [`write_npy`]; sparse entries are never held as a dense array.
///
/// # Errors
/// [`NpyError::Io`].
pub fn write_npy_entries(path: &Path, entries: &Entries) -> Result<(), NpyError> {
    match entries {
        Entries::Dense(data) => write_npy(path, data),
        Entries::Sparse(s) => write(path, s.dims(), |out| {
            let places: u64 = s.dims().iter().map(|&d| d as u64).product();
            let mut at = 0;
            for (&index, v) in s.index().iter().zip(s.value()) {
                zeros(out, index - at)?;
                put(out, v.re, v.im)?;
                at = index + 1;
            }
            zeros(out, places - at)
        }),
    }
}

type Out = std::io::BufWriter<std::fs::File>;

fn write(
    path: &Path,
    shape: &[usize],
    body: impl FnOnce(&mut Out) -> std::io::Result<()>,
) -> Result<(), NpyError> {
    let io = |fault| NpyError::Io { path: path.to_owned(), fault };
    let name = path.file_name().unwrap_or_default().to_string_lossy();
    let beside = path.with_file_name(format!(".{name}.part"));
    let written = std::fs::File::create(&beside)
        .and_then(|file| {
            let mut out = std::io::BufWriter::with_capacity(1 << 16, file);
            out.write_all(&header(shape))?;
            body(&mut out)?;
            out.flush()
        })
        .and_then(|()| std::fs::rename(&beside, path));
    if written.is_err() {
        let _ = std::fs::remove_file(&beside);
    }
    written.map_err(io)
}

/// So many zero entries.
fn zeros(out: &mut Out, count: u64) -> std::io::Result<()> {
    const CHUNK: [u8; 1 << 14] = [0; 1 << 14];
    let mut bytes = 16 * count;
    while bytes > 0 {
        let now = bytes.min(CHUNK.len() as u64);
        out.write_all(&CHUNK[..now as usize])?;
        bytes -= now;
    }
    Ok(())
}

fn put(out: &mut Out, re: f64, im: f64) -> std::io::Result<()> {
    out.write_all(&re.to_le_bytes())?;
    out.write_all(&im.to_le_bytes())
}

fn header(shape: &[usize]) -> Vec<u8> {
    let sizes: String = shape.iter().map(|d| format!("{d}, ")).collect();
    let sizes = match shape.len() {
        1 => sizes.trim_end().to_owned(),
        _ => sizes.trim_end_matches(", ").to_owned(),
    };
    let mut text = format!("{{'descr': '<c16', 'fortran_order': False, 'shape': ({sizes}), }}");
    // The numbers start at a multiple of 64 bytes.
    while (10 + text.len() + 1) % 64 != 0 {
        text.push(' ');
    }
    text.push('\n');
    let mut out = b"\x93NUMPY\x01\x00".to_vec();
    out.extend((text.len() as u16).to_le_bytes());
    out.extend(text.into_bytes());
    out
}

#[cfg(test)]
mod tests {
    use super::super::SparseEntries;
    use super::*;

    fn file(descr: &str, fortran: &str, shape: &str, body: &[u8]) -> Vec<u8> {
        let text =
            format!("{{'descr': '{descr}', 'fortran_order': {fortran}, 'shape': {shape}, }}\n");
        let mut out = b"\x93NUMPY\x01\x00".to_vec();
        out.extend((text.len() as u16).to_le_bytes());
        out.extend(text.into_bytes());
        out.extend(body);
        out
    }
    fn read(bytes: &[u8]) -> Result<Dense, String> {
        parse(Path::new("t.npy"), bytes).map_err(|e| e.to_string())
    }

    #[test]
    fn orders_and_widths() {
        let f: Vec<u8> = [1.0f64, 2.0, 3.0, 4.0].iter().flat_map(|v| v.to_be_bytes()).collect();
        let Ok(Dense::Real(a)) = read(&file(">f8", "True", "(2, 2)", &f)) else { panic!() };
        assert_eq!(a[[0, 1]], 3.0);
        let c: Vec<u8> = [1.5f32, -2.0].iter().flat_map(|v| v.to_le_bytes()).collect();
        let Ok(Dense::Complex(a)) = read(&file("<c8", "False", "(1,)", &c)) else { panic!() };
        assert_eq!(a[[0]], Complex64::new(1.5, -2.0));
        let Ok(Dense::Real(a)) = read(&file("|i1", "False", "(2,)", &[255, 3])) else { panic!() };
        assert_eq!(a.as_slice().unwrap(), [-1.0, 3.0]);
        let Ok(Dense::Real(a)) = read(&file("<f8", "False", "()", &1f64.to_le_bytes())) else {
            panic!()
        };
        assert_eq!(a.ndim(), 0);
    }

    #[test]
    fn refusals_name_what_is_wrong() {
        for (bytes, expected) in [
            (b"PK\x03\x04 not an array".to_vec(), "mark"),
            (file("<f2", "False", "(1,)", &[0, 0]), "`<f2`"),
            (file("<U4", "False", "(1,)", &[0; 16]), "`<U4`"),
            (file("<f8", "False", "(3,)", &[0; 16]), "should hold 24 bytes"),
            (file("<f8", "False", "(1,)", &[0; 16]), "should hold 8 bytes"),
            (file("<f8", "Maybe", "(1,)", &[0; 8]), "axis order"),
            (file("<f8", "False", "(99999999999, 99999999999)", &[]), "more than"),
            (file("<i8", "False", "(1,)", &i64::MAX.to_le_bytes()), "rounded"),
            (b"\x93NUMPY\x01\x00\xff\xff{".to_vec(), "ends within its header"),
        ] {
            let message = read(&bytes).expect_err(expected);
            assert!(message.contains(expected), "{message}");
        }
    }

    #[test]
    fn what_is_written_is_read() {
        let dir = tempfile::tempdir().unwrap();
        for shape in [vec![2, 3], vec![4], vec![]] {
            let n: usize = shape.iter().product();
            let values = (0..n).map(|k| Complex64::new(k as f64, -0.5)).collect();
            let array = Dense::Complex(ArrayD::from_shape_vec(shape, values).unwrap());
            let path = dir.path().join("a.npy");
            write_npy(&path, &array).unwrap();
            assert_eq!(read_npy(&path).unwrap(), array);
        }
        let sparse = SparseEntries::collect(
            vec![3, 2],
            vec![(1, Complex64::new(0.5, 2.0)), (4, Complex64::new(-1.0, 0.0))],
        );
        let path = dir.path().join("a.npy");
        write_npy_entries(&path, &Entries::Sparse(sparse.clone())).unwrap();
        assert_eq!(Entries::Dense(read_npy(&path).unwrap()).to_sparse(), sparse);
        assert_eq!(std::fs::read_dir(dir.path()).unwrap().count(), 1);
    }
}
