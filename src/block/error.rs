//! What can be wrong with a request for a block or with a user's array.

use thiserror::Error;

/// Why a block cannot be had.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum BlockError {
    /// No family has this name.
    #[error("there is no block `{name}`; the known ones are {known}")]
    UnknownFamily {
        /// Name asked for.
        name: String,
        /// Names that exist, joined.
        known: String,
    },
    /// The family has no construction of this name for these legs.
    #[error(
        "block `{family}` at dimension {dimension} has no construction `{name}`; it has {known}"
    )]
    UnknownConstruction {
        /// The family.
        family: String,
        /// Dimension of the legs.
        dimension: usize,
        /// Construction asked for.
        name: String,
        /// Constructions that exist there, joined.
        known: String,
    },
    /// The family does not come with so many legs.
    #[error("block `{family}` has {expected} legs, but {got} were asked for")]
    WrongLegs {
        /// The family.
        family: String,
        /// What it has, in words.
        expected: String,
        /// Legs asked for.
        got: usize,
    },
    /// The family comes with several numbers of legs and none was asked for.
    #[error("block `{family}` has {expected} legs; say how many")]
    LegsNeeded {
        /// The family.
        family: String,
        /// What it has, in words.
        expected: String,
    },
    /// The family wants legs of one dimension.
    #[error("all legs of block `{family}` have one dimension, but {dims:?} were asked for")]
    UnequalDimensions {
        /// The family.
        family: String,
        /// Dimensions asked for.
        dims: Vec<usize>,
    },
    /// The family does not come in these dimensions.
    #[error("block `{family}` needs {expected}, but the dimensions {dims:?} were asked for")]
    WrongDimensions {
        /// The family.
        family: String,
        /// What it needs, in words.
        expected: String,
        /// Dimensions asked for.
        dims: Vec<usize>,
    },
    /// Proven impossible.
    #[error("no perfect tensor with {legs} legs of dimension {dimension} exists ({source_text})")]
    NoSuchState {
        /// Number of legs.
        legs: usize,
        /// Dimension of each.
        dimension: usize,
        /// Where that is proven.
        source_text: String,
    },
    /// Nobody knows.
    #[error(
        "whether a perfect tensor with {legs} legs of dimension {dimension} exists is open ({source_text})"
    )]
    Open {
        /// Number of legs.
        legs: usize,
        /// Dimension of each.
        dimension: usize,
        /// Where that is recorded.
        source_text: String,
    },
    /// Neither a construction nor a proof of absence is built in.
    #[error(
        "no construction of a perfect tensor with {legs} legs of dimension {dimension} is built in, and no proof that none exists"
    )]
    NoConstruction {
        /// Number of legs.
        legs: usize,
        /// Dimension of each.
        dimension: usize,
    },
    /// An option's value is not what it must be.
    #[error("option {option} of block `{family}` must be {expected}, not `{value}`")]
    BadOption {
        /// The family.
        family: String,
        /// Name of the option.
        option: String,
        /// Value given.
        value: String,
        /// What it must be.
        expected: String,
    },
    /// The family has no such option.
    #[error("block `{family}` has no option {option}; it has {known}")]
    UnknownOption {
        /// The family.
        family: String,
        /// Name given.
        option: String,
        /// Options that exist.
        known: String,
    },
    /// The non-zero entries would not fit.
    #[error("{what} has {entries} non-zero entries, more than the {limit} that are built")]
    TooLarge {
        /// Name of the block.
        what: String,
        /// How many entries.
        entries: String,
        /// The limit.
        limit: u64,
    },
    /// An entry is NaN or infinite.
    #[error("entry {place:?} of {what} is not a finite number")]
    NotFinite {
        /// Name of the array.
        what: String,
        /// Indices of the entry.
        place: Vec<usize>,
    },
    /// All entries vanish.
    #[error("{what} is zero everywhere, so it is no tensor of a network")]
    Zero {
        /// Name of the array.
        what: String,
    },
    /// An axis has no entry, or there is no axis.
    #[error(
        "{what} has shape {shape:?}; every tensor needs at least one leg, and every leg at least one level"
    )]
    Shape {
        /// Name of the array.
        what: String,
        /// Its shape.
        shape: Vec<usize>,
    },
    /// A stabilizer generator does not read as one.
    #[error("stabilizer {number} `{text}` {fault}")]
    Generator {
        /// Its number in the list, from 1.
        number: usize,
        /// Its text.
        text: String,
        /// What is wrong.
        fault: String,
    },
    /// A built-in proof failed; the block is withheld.
    #[error(
        "the proof of block `{family}` failed: it is no isometry from legs {legs:?}; please report this"
    )]
    ProofFailed {
        /// The family.
        family: String,
        /// The legs on which it failed.
        legs: Vec<usize>,
    },
}
