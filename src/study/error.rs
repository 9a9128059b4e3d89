//! What can go wrong with a study.

use std::path::PathBuf;
use thiserror::Error;

/// Why a study could not be read, run or written.
#[derive(Debug, Error)]
#[non_exhaustive]
pub enum StudyError {
    /// A file that cannot be read.
    #[error("cannot read {}: {cause}", .path.display())]
    Read {
        /// The file.
        path: PathBuf,
        /// What the system said.
        cause: std::io::Error,
    },
    /// A file or folder that cannot be written.
    #[error("cannot write {}: {cause}", .path.display())]
    Write {
        /// The file.
        path: PathBuf,
        /// What the system said.
        cause: std::io::Error,
    },
    /// Not TOML, or a value of the wrong kind.
    #[error("{place}: {message}")]
    Syntax {
        /// File and, where known, line and column.
        place: String,
        /// What the parser said, on one line.
        message: String,
    },
    /// A key that the schema does not have.
    #[error("{place}: unknown key {key:?}; the nearest known key is {nearest:?}")]
    UnknownKey {
        /// The table it stands in.
        place: String,
        /// The key.
        key: String,
        /// The known key that is spelt most like it.
        nearest: String,
    },
    /// A key that must be there.
    #[error("{place} needs the key {key:?}")]
    Missing {
        /// The table.
        place: String,
        /// The key.
        key: &'static str,
    },
    /// A value that is of the right kind but means nothing here.
    #[error("{place}: {key} = {value} {why}")]
    Value {
        /// The table.
        place: String,
        /// The key.
        key: String,
        /// The value as written.
        value: String,
        /// What is wrong with it, as the end of a sentence.
        why: String,
    },
    /// Another format version.
    #[error("{place}: study = {found}, but this program reads version {known}")]
    Version {
        /// The file.
        place: String,
        /// The version found.
        found: i64,
        /// The version known.
        known: i64,
    },
    /// A network that cannot be made.
    #[error("network {case:?}: {message}")]
    Network {
        /// The case of the study.
        case: String,
        /// What was wrong with it.
        message: String,
    },
    /// A region that cannot be read on a network.
    #[error("network {case:?}: {message}")]
    Region {
        /// The case of the study.
        case: String,
        /// What was wrong with it.
        message: String,
    },
    /// A question whose computation failed.
    #[error("network {case:?}, {question}: {message}")]
    Question {
        /// The case of the study.
        case: String,
        /// The question.
        question: String,
        /// What went wrong.
        message: String,
    },
    /// The caller asked to stop; what is finished is kept.
    #[error("stopped after {done} of {total} answers; the same command goes on from there")]
    Stopped {
        /// Answers at hand.
        done: usize,
        /// Answers asked for.
        total: usize,
    },
}
