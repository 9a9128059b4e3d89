//! What can be wrong with a network file.

use crate::block::{BlockError, NpyError};
use crate::network::NetworkError;
use crate::tiling::TilingError;
use std::path::PathBuf;
use thiserror::Error;

/// A problem and the file in which it stands.
#[derive(Debug, Error)]
#[error("{}{}: {problem}", .path.display(), .line.map(|l| format!(", line {l}")).unwrap_or_default())]
pub struct FileError {
    /// The file.
    pub path: PathBuf,
    /// The line, where it is known, counted from 1.
    pub line: Option<usize>,
    /// What is wrong.
    #[source]
    pub problem: Box<Problem>,
}

/// What is wrong with a network file or recipe.
#[derive(Debug, Error)]
#[non_exhaustive]
pub enum Problem {
    /// The file cannot be opened or read.
    #[error("the file cannot be read ({reason})")]
    Unreadable {
        /// What the system says.
        reason: std::io::Error,
    },
    /// The file cannot be written.
    #[error("the file cannot be written ({reason})")]
    Unwritable {
        /// What the system says.
        reason: std::io::Error,
    },
    /// Neither TOML nor JSON by its name.
    #[error("a network file ends in .toml or .json")]
    Extension,
    /// Larger than the limit.
    #[error("{what} has {bytes} bytes; at most {limit} are read{advice}")]
    TooLarge {
        /// What is too large.
        what: String,
        /// Its size.
        bytes: u64,
        /// The limit.
        limit: u64,
        /// What to do about it.
        advice: &'static str,
    },
    /// Not UTF-8.
    #[error("the text is not UTF-8 (byte {at}); save it as UTF-8 without a byte order mark")]
    Encoding {
        /// Where it stops being UTF-8.
        at: usize,
    },
    /// Not well-formed TOML or JSON, or a value of the wrong kind.
    #[error("{message}")]
    Syntax {
        /// What the reader found.
        message: String,
    },
    /// A key that the format does not have.
    #[error("unknown key {key:?} in {place}; the nearest known key is {nearest:?}")]
    UnknownKey {
        /// The key.
        key: String,
        /// The table that holds it.
        place: String,
        /// The known key that is nearest to it.
        nearest: &'static str,
    },
    /// A key that stands twice in one table.
    #[error("key {key:?} stands twice in {place}")]
    KeyTwice {
        /// The key.
        key: String,
        /// The table that holds it.
        place: String,
    },
    /// A key that is needed and not there.
    #[error("{place} lacks the key {key:?}")]
    MissingKey {
        /// The key.
        key: &'static str,
        /// The table that should hold it.
        place: String,
    },
    /// The number of another format.
    #[error("the file has format version {found}; this program reads version 1")]
    Version {
        /// The number found.
        found: String,
    },
    /// A number outside its range.
    #[error("{key} in {place} is {value}; between {least} and {most} is taken")]
    Range {
        /// The key.
        key: &'static str,
        /// The table that holds it.
        place: String,
        /// The value found.
        value: String,
        /// Least value taken.
        least: u64,
        /// Greatest value taken.
        most: u64,
    },
    /// A word that is not among those known.
    #[error("{key} in {place} is {value:?}; known are {known}")]
    Word {
        /// The key.
        key: &'static str,
        /// The table that holds it.
        place: String,
        /// The value found.
        value: String,
        /// What is known.
        known: &'static str,
    },
    /// Settings that exclude each other.
    #[error("{place} has both {first} and {second}; keep one of them")]
    Both {
        /// The table.
        place: String,
        /// The one.
        first: String,
        /// The other.
        second: String,
    },
    /// Settings that do not go together.
    #[error("{place}: {what} {value} does not fit {other}")]
    Unfit {
        /// The table.
        place: String,
        /// What does not fit.
        what: &'static str,
        /// Its value.
        value: String,
        /// What it does not fit.
        other: String,
    },
    /// Nothing that makes a network.
    #[error("the file holds neither a [[tensor]] nor a recipe")]
    Empty,
    /// A label that could be taken for a boundary site.
    #[error(
        "label {label:?} of {place} is empty, a bare number or holds a comma or \"..\"; regions could not name it"
    )]
    LabelName {
        /// The label.
        label: String,
        /// The tensor or list that holds it.
        place: String,
    },
    /// A tensor's name that stands twice.
    #[error("two tensors are named {name:?}")]
    TensorTwice {
        /// The name.
        name: String,
    },
    /// A tensor made of nothing, or of several things.
    #[error("tensor {tensor:?} needs exactly one of block, array and values; it has {found}")]
    Substance {
        /// The tensor.
        tensor: String,
        /// What it has.
        found: String,
    },
    /// A label of unknown dimension.
    #[error(
        "label {label:?} on tensor {tensor:?} has no dimension; give `dimension` for all legs or list it in [legs]"
    )]
    NoDimension {
        /// The label.
        label: String,
        /// The tensor.
        tensor: String,
    },
    /// More elements than can be counted.
    #[error("tensor {tensor:?} would have {dimensions} elements, more than 2^63")]
    SizeOverflow {
        /// The tensor.
        tensor: String,
        /// Its dimensions, as a product.
        dimensions: String,
    },
    /// Too few or too many literal values.
    #[error("tensor {tensor:?} has {found} values; its legs ask for {expected}")]
    ValueCount {
        /// The tensor.
        tensor: String,
        /// Values found.
        found: usize,
        /// Values asked for.
        expected: u64,
    },
    /// A value that is no finite number.
    #[error("value {index} of tensor {tensor:?} is not a finite number")]
    NotFinite {
        /// The tensor.
        tensor: String,
        /// The first such value, counted from 0.
        index: usize,
    },
    /// A path that may lead elsewhere.
    #[error(
        "array {file:?} of tensor {tensor:?} leaves the folder of the network file; arrays lie beside it or in folders below"
    )]
    LeavesFolder {
        /// The path as written.
        file: String,
        /// The tensor.
        tensor: String,
    },
    /// An array file that cannot be read.
    #[error("array {file:?} of tensor {tensor:?}: {reason}")]
    ArrayFile {
        /// The path as written.
        file: String,
        /// The tensor.
        tensor: String,
        /// Why not.
        #[source]
        reason: Box<NpyError>,
    },
    /// An array that cannot serve as a tensor.
    #[error("array {file:?} of tensor {tensor:?}: {reason}")]
    Array {
        /// The path as written.
        file: String,
        /// The tensor.
        tensor: String,
        /// Why not.
        #[source]
        reason: Box<BlockError>,
    },
    /// An array of the wrong shape.
    #[error(
        "array {file:?} has shape {found:?}, but tensor {tensor:?} has legs of dimensions {expected:?}"
    )]
    ArrayShape {
        /// The path as written.
        file: String,
        /// The tensor.
        tensor: String,
        /// The array's shape.
        found: Vec<usize>,
        /// The legs' dimensions.
        expected: Vec<usize>,
    },
    /// A block that cannot be made.
    #[error("tensor {tensor:?}: {reason}")]
    Block {
        /// The tensor.
        tensor: String,
        /// Why not.
        #[source]
        reason: Box<BlockError>,
    },
    /// More of something than the limit.
    #[error("the network has {count} {what}; at most {limit} are taken")]
    TooMany {
        /// What there is too much of.
        what: &'static str,
        /// How many, or the first number past the limit.
        count: u64,
        /// The limit.
        limit: u64,
    },
    /// A selection of tensors that cannot be read.
    #[error("{key} in {place} is {text:?}; write none, all, centre, rings:0,2 or tiles:3,5..8")]
    Selection {
        /// The key.
        key: &'static str,
        /// The table.
        place: String,
        /// The text.
        text: String,
    },
    /// A selected tensor or ring past the end.
    #[error("{key} in {place} names {what} {number}, but there are {count} (0 to {})", .count.saturating_sub(1))]
    SelectedPastTheEnd {
        /// The key.
        key: &'static str,
        /// The table.
        place: String,
        /// `ring` or `tile`.
        what: &'static str,
        /// The number.
        number: u64,
        /// How many there are.
        count: u64,
    },
    /// The network breaks its rules.
    #[error(transparent)]
    Network(#[from] NetworkError),
    /// The tiling cannot be grown.
    #[error(transparent)]
    Tiling(#[from] TilingError),
}

impl Problem {
    /// The problem with its file.
    pub(in crate::network) fn at(self, path: &std::path::Path, line: Option<usize>) -> FileError {
        FileError { path: path.to_path_buf(), line, problem: Box::new(self) }
    }
}
