//! The network inside a study file, so that whatever takes a network takes a study, too.

use super::read::{from_toml, load_plain};
use super::{FileError, Problem};
use crate::network::Network;
use crate::network::limits::{Limits, Overrides};
use std::path::Path;
use toml::{Table, Value};

/// Whether a text may be a study: only then it is worth a look.
pub(super) fn may_be_study(text: &str) -> bool {
    text.lines().any(|l| {
        l.trim_start().strip_prefix("study").is_some_and(|r| r.trim_start().starts_with('='))
    })
}

/// The network of a study: its table `network`, or the file that the table names. Nothing
/// where the text is no study. Where the network has no dimension of its own, it is the first
/// that the study sweeps over.
pub(super) fn network_of_study(
    path: &Path,
    text: &str,
    limits: &Limits,
    overrides: &Overrides,
) -> Option<Result<Network, FileError>> {
    // What is no TOML at all is told by the reader of networks, with its line.
    let study: Table = toml::from_str(text).ok()?;
    study.get("study")?;
    Some(taken(path, &study, limits, overrides))
}

fn taken(
    path: &Path,
    study: &Table,
    limits: &Limits,
    overrides: &Overrides,
) -> Result<Network, FileError> {
    let folder = path.parent().unwrap_or(Path::new(""));
    let first = study.get("dimensions").and_then(|d| d.as_array()?.first()?.as_integer());
    let first = first.and_then(|d| usize::try_from(d).ok());
    let table = match study.get("network") {
        Some(Value::Table(t)) => Ok(t),
        Some(Value::Array(list)) => match &list[..] {
            [Value::Table(t)] => Ok(t),
            _ => Err(Problem::Word {
                key: "network",
                place: "the study".into(),
                value: format!("a list of {}", list.len()),
                known: "one table, where a single network is asked for",
            }),
        },
        _ => Err(Problem::MissingKey { key: "network", place: "the study".into() }),
    };
    let table = table.map_err(|problem| problem.at(path, None))?;
    let own = table.get("dimension").is_some();
    let dimension = overrides.dimension.or(first.filter(|_| !own));
    let overrides = Overrides { dimension, ..*overrides };
    if let Some(Value::String(file)) = table.get("file") {
        // A network file names no other file, so this ends here.
        return load_plain(&folder.join(file), limits, &overrides);
    }
    let name = study.get("name").and_then(Value::as_str);
    let stem = path.file_stem().map(|s| s.to_string_lossy().into_owned()).unwrap_or_default();
    from_toml(table, folder, name.unwrap_or(&stem), limits, &overrides)
        .map_err(|problem| problem.at(path, None))
}
