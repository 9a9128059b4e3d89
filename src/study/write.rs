//! The folder that a study leaves.

use super::journal::Journal;
use super::questions::Finding;
use super::{
    Folder, Outcome, Provenance, StudyError, StudyFile, StudyResult, arrays, csv, figures, report,
};
use crate::order::{self, Shape};
use std::fmt::Write;
use std::path::Path;

/// Writes the tables and the page, each whole or not at all: what can be read while a run
/// goes on.
///
/// # Errors
/// [`StudyError::Write`].
pub fn write_tables(
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

/// Writes every file of the folder, each whole or not at all. Also returned: what could not
/// be drawn, in sentences.
///
/// # Errors
/// [`StudyError::Write`].
pub fn write_results(
    path: &Path,
    file: &StudyFile,
    outcome: &Outcome,
    provenance: &Provenance,
) -> Result<(StudyResult, Vec<String>), StudyError> {
    let result = write_tables(path, file, outcome, provenance)?;
    let folder = Folder::open(path)?;
    folder.write("study.toml", file.text.as_bytes())?;
    for (name, text) in
        [("erasure.csv", csv::erasure(&result)), ("orders.csv", csv::orders(&result))]
    {
        if file.output.csv && !text.is_empty() {
            folder.write(name, text.as_bytes())?;
        }
    }
    plans(&folder, outcome)?;
    if file.output.arrays {
        arrays::write(&folder, outcome, &result)?;
    }
    let mut left_out = Vec::new();
    if file.output.figures {
        left_out = figures::write(&folder, outcome, &result)?;
    }
    folder.write("README.txt", readme(file, &result, provenance).as_bytes())?;
    Ok((result, left_out))
}

/// The plans of compared orders, as `plans/case-method-seed.json`; `lierne contract --plan`
/// reads them.
fn plans(folder: &Folder, outcome: &Outcome) -> Result<(), StudyError> {
    for (number, c) in outcome.cases.iter().enumerate() {
        for f in c.findings.iter().flatten() {
            let Finding::Order(o) = f else { continue };
            let name = format!("plans/{number}-{}-{}.json", o.method, o.seed);
            let path = folder.path().join(&name);
            folder.make("plans")?;
            order::save(&path, &Shape::of(&c.network), &o.plan).map_err(|e| StudyError::Write {
                path,
                cause: std::io::Error::other(e.to_string()),
            })?;
        }
    }
    Ok(())
}

/// What the folder holds, for whoever finds it.
fn readme(file: &StudyFile, result: &StudyResult, provenance: &Provenance) -> String {
    let mut out = String::new();
    let _ = writeln!(out, "{}\n", result.name);
    if !result.about.is_empty() {
        let _ = writeln!(out, "{}\n", result.about);
    }
    let _ = writeln!(
        out,
        "Written by lierne {} from {} ({} of {} answers), seed {}:\n\n    {}\n",
        result.version,
        provenance.study_file,
        result.answered,
        result.asked,
        result.seed,
        provenance.command
    );
    let rows: Vec<(&str, bool, &str)> = vec![
        ("report.html", true, "the page to begin with; opens from disk in any browser"),
        (
            "result.json",
            true,
            "everything, with the evidence of every number; the same study, seed and version give the same bytes",
        ),
        (
            "entropies.csv",
            file.output.csv,
            "one region a row; units are in the names of the columns",
        ),
        ("by_length.csv", file.output.csv, "means over the intervals of each length"),
        (
            "entropies.npz",
            file.output.arrays,
            "for numpy.load: intervals_k (rows: length from 1, columns: first site), regions_k, regions_k_nats, regions_k_bounds for case k of result.json",
        ),
        (
            "spectra.npz",
            file.output.arrays && file.entropies.as_ref().is_some_and(|e| e.spectra),
            "spectrum_k_r for region r of case k: eigenvalue and multiplicity",
        ),
        ("figures/", file.output.figures, "the figures as SVG and PNG"),
        (
            "erasure.csv",
            file.codes.as_ref().is_some_and(|c| c.erasure.is_some()),
            "failure of recovery by erasure rate, with 95 % confidence intervals",
        ),
        (
            "orders.csv",
            file.orders.is_some(),
            "contraction orders by method and seed; their plans are in plans/ as case-method-seed",
        ),
        ("study.toml", true, "the study as it was asked"),
        ("provenance.json", true, "version, command, seed, machine, times"),
        (
            Journal::NAME,
            true,
            "finished answers; the same command goes on from them, and they may be deleted",
        ),
    ];
    for (name, there, what) in rows {
        if there {
            let _ = writeln!(out, "{name:<16} {what}");
        }
    }
    out.push_str(
        "\nEntropies are in nats; in legs they are divided by log D, D being the dimension of the \
         boundary legs.\nBoundary sites count from 0, counter-clockwise; 3..6 means 3, 4, 5 and \
         18..2 wraps past the last site.\nEvidence: geometry and finite-field are exact; \
         contraction has the numerical error given; bounds are a\nproven lower and upper bound \
         where the exact answer was beyond the budget.\n",
    );
    out
}

fn json(value: &impl serde::Serialize) -> Vec<u8> {
    // Maps here have text keys and no value refuses to be written, so this cannot fail.
    let mut bytes = serde_json::to_vec_pretty(value).unwrap_or_default();
    bytes.push(b'\n');
    bytes
}
