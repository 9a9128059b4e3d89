//! Where a result came from: what differs from run to run and from machine to machine.

use serde::{Deserialize, Serialize};

/// The whole of `provenance.json`. The library reads neither clock nor environment: the
/// caller fills this in.
#[derive(Debug, Clone, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Provenance {
    /// Version of the program.
    pub version: String,
    /// Revision of the source that the program was built from, where known.
    pub revision: Option<String>,
    /// The command as given.
    pub command: String,
    /// Name of the study file.
    pub study_file: String,
    /// SHA-256 of its text.
    pub study_sha256: String,
    /// The study's seed.
    pub seed: u64,
    /// Threads in use.
    pub threads: u64,
    /// Bytes that a contraction might hold.
    pub memory_bytes: u64,
    /// Operating system and processor.
    pub machine: String,
    /// When the run began, UTC, as 2026-01-31T12:00:00Z.
    pub started: String,
    /// Seconds that the run took.
    pub wall_seconds: f64,
    /// Answers that an earlier run had left.
    pub answers_kept: u64,
    /// Answers found by this run.
    pub answers_found: u64,
}
