//! The folder that a study leaves.

use super::{Folder, Outcome, Provenance, StudyError, StudyFile, StudyResult, csv, report};
use std::path::Path;

/// Writes every file of the folder, each whole or not at all.
///
/// # Errors
/// [`StudyError::Write`].
pub fn write_results(
    path: &Path,
    file: &StudyFile,
    outcome: &Outcome,
    provenance: &Provenance,
) -> Result<StudyResult, StudyError> {
    let folder = Folder::open(path)?;
    let result = StudyResult::of(file, outcome);
    folder.write("result.json", &json(&result))?;
    if file.output.csv {
        folder.write("entropies.csv", csv::entropies(&result).as_bytes())?;
        folder.write("by_length.csv", csv::by_length(&result).as_bytes())?;
    }
    folder.write("provenance.json", &json(provenance))?;
    folder.write("report.html", report::page(&result, outcome, provenance).as_bytes())?;
    Ok(result)
}

fn json(value: &impl serde::Serialize) -> Vec<u8> {
    // Maps here have text keys and no value refuses to be written, so this cannot fail.
    let mut bytes = serde_json::to_vec_pretty(value).unwrap_or_default();
    bytes.push(b'\n');
    bytes
}
