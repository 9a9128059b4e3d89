//! Arrays for NumPy: `entropies.npz` and, where spectra are kept, `spectra.npz`.

use super::regions::Kind;
use super::result::StudyResult;
use super::{Folder, Outcome, StudyError};
use ndarray::{Array1, Array2};
use ndarray_npy::{NpzWriter, WriteNpzError};
use std::io::Cursor;

/// Writes both files.
///
/// `entropies.npz` holds for each case k (its number in `result.json`, from 0) of which all
/// intervals were asked `intervals_k`, a matrix of entropies in nats with one row a length
/// from 1 and one column a first site, NaN where only bounds are known; and for all other
/// regions `regions_k`, a boolean matrix with one row a region and one column a site, with
/// `regions_k_nats` and `regions_k_bounds` (two columns: lower, upper).
/// `spectra.npz` holds `spectrum_k_r` for region r of case k: two columns, eigenvalue of the
/// reduced state and its multiplicity.
///
/// # Errors
/// [`StudyError::Write`].
pub fn write(folder: &Folder, outcome: &Outcome, result: &StudyResult) -> Result<(), StudyError> {
    let wrong = |e: WriteNpzError| StudyError::Write {
        path: folder.path().join("entropies.npz"),
        cause: std::io::Error::other(e.to_string()),
    };
    let mut npz = NpzWriter::new(Cursor::new(Vec::new()));
    let mut spectra = NpzWriter::new(Cursor::new(Vec::new()));
    let mut any = false;
    for (k, (c, r)) in outcome.cases.iter().zip(&result.cases).enumerate() {
        let n = c.network.boundary().len();
        let intervals: Vec<_> = r.regions.iter().filter(|x| x.kind == Kind::Interval).collect();
        if n > 1 && intervals.len() == n * (n - 1) {
            let mut m = Array2::from_elem((n - 1, n), f64::NAN);
            for row in intervals {
                if let (Some(start), Some(s)) = (row.start, row.entropy_nats) {
                    m[[row.sites as usize - 1, start as usize]] = s;
                }
            }
            npz.add_array(format!("intervals_{k}"), &m).map_err(wrong)?;
        }
        let asked: Vec<_> = c
            .asked
            .iter()
            .zip(&c.answers)
            .filter(|(a, _)| a.kind != Kind::Interval)
            .filter_map(|(a, answer)| Some((a, answer.as_ref()?)))
            .collect();
        if !asked.is_empty() {
            let sites =
                Array2::from_shape_fn((asked.len(), n), |(i, s)| asked[i].0.region.flags()[s]);
            let nats: Array1<f64> =
                asked.iter().map(|(_, a)| a.entropy_nats.unwrap_or(f64::NAN)).collect();
            let bounds = Array2::from_shape_fn((asked.len(), 2), |(i, side)| {
                if side == 0 { asked[i].1.lower_nats } else { asked[i].1.upper_nats }
            });
            npz.add_array(format!("regions_{k}"), &sites).map_err(wrong)?;
            npz.add_array(format!("regions_{k}_nats"), &nats).map_err(wrong)?;
            npz.add_array(format!("regions_{k}_bounds"), &bounds).map_err(wrong)?;
        }
        for (i, answer) in c.answers.iter().enumerate() {
            let Some(answer) = answer else { continue };
            if answer.spectrum.is_empty() {
                continue;
            }
            let levels = Array2::from_shape_fn((answer.spectrum.len(), 2), |(l, side)| {
                if side == 0 { answer.spectrum[l].0 } else { answer.spectrum[l].1 }
            });
            spectra.add_array(format!("spectrum_{k}_{i}"), &levels).map_err(wrong)?;
            any = true;
        }
    }
    folder.write("entropies.npz", &npz.finish().map_err(wrong)?.into_inner())?;
    if any {
        folder.write("spectra.npz", &spectra.finish().map_err(wrong)?.into_inner())?;
    }
    Ok(())
}
