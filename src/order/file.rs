//! Plans as files.

use super::{OrderError, Plan, Shape, cost};
use crate::tensor::Label;
use serde::{Deserialize, Serialize};
use std::path::Path;

/// Version of the plan file.
const VERSION: u64 = 1;

#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Written {
    /// Version.
    lierne_plan: u64,
    /// Hash of the shape.
    shape: String,
    steps: Vec<(u32, u32)>,
    sliced: Vec<Label>,
}

/// Writes a plan for this shape as JSON: beside its place first, then renamed.
///
/// The file is one object: `lierne_plan` (version, 1), `shape` (SHA-256 of the shape it was
/// made for), `steps` and `sliced` as in [`Plan`].
///
/// # Errors
/// [`OrderError::File`], or what [`cost`] finds wrong with the plan.
pub fn save(path: &Path, shape: &Shape, plan: &Plan) -> Result<(), OrderError> {
    cost(shape, plan)?;
    let fail = |e: &dyn std::fmt::Display| OrderError::File {
        path: path.display().to_string(),
        reason: e.to_string(),
    };
    let written = Written {
        lierne_plan: VERSION,
        shape: shape.hash(),
        steps: plan.steps.clone(),
        sliced: plan.sliced.clone(),
    };
    let mut text = serde_json::to_string(&written).map_err(|e| fail(&e))?;
    text.push('\n');
    let mut beside = path.as_os_str().to_owned();
    beside.push(".part");
    std::fs::write(&beside, text).map_err(|e| fail(&e))?;
    std::fs::rename(&beside, path).map_err(|e| {
        // The half-made file is of no use to anybody; the first error is the one to tell.
        let _ = std::fs::remove_file(&beside);
        fail(&e)
    })
}

/// Reads a plan and checks that it was made for this shape and is one.
///
/// # Errors
/// [`OrderError`]: the file cannot be read, is no plan, has another version, belongs to
/// another shape, or holds steps that do not contract it.
pub fn load(path: &Path, shape: &Shape) -> Result<Plan, OrderError> {
    let shown = || path.display().to_string();
    let text = std::fs::read_to_string(path)
        .map_err(|e| OrderError::File { path: shown(), reason: e.to_string() })?;
    let format = |reason: String| OrderError::Format { path: shown(), reason };
    // The version is looked at first: another version may have other keys.
    let value: serde_json::Value =
        serde_json::from_str(&text).map_err(|e| format(e.to_string()))?;
    match value.get("lierne_plan").map(serde_json::Value::as_u64) {
        Some(Some(VERSION)) => {}
        Some(Some(found)) => {
            return Err(OrderError::Version { path: shown(), found, known: VERSION });
        }
        _ => {
            return Err(format("it has no version number under \"lierne_plan\"".into()));
        }
    }
    let written: Written = serde_json::from_value(value).map_err(|e| format(e.to_string()))?;
    let expected = shape.hash();
    if written.shape != expected {
        return Err(OrderError::OtherShape { path: shown(), found: written.shape, expected });
    }
    let plan = Plan { steps: written.steps, sliced: written.sliced };
    cost(shape, &plan)?;
    Ok(plan)
}
