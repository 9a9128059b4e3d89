//! From the networks and sweeps of a study to the single networks that it asks about.

use super::{StudyError, StudyFile};
use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};
use std::path::{Path, PathBuf};
use toml::{Table, Value};

/// One network of a study, not yet made.
#[derive(Debug, Clone)]
pub struct Case {
    /// What it is called in tables; unique within the study.
    pub id: String,
    /// What the sweep has set.
    pub setting: Setting,
    /// The keys of a network file.
    pub table: Table,
    /// The folder that file names in [`Self::table`] are relative to.
    pub folder: PathBuf,
    /// SHA-256, in hexadecimal, of everything that the network is made from: the table and
    /// the bytes of every array that it names.
    pub digest: String,
}

/// Where a case stands in the sweep.
#[derive(Debug, Clone, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Setting {
    /// The network's name.
    pub network: String,
    /// Default leg dimension, where the sweep or the network sets one.
    pub dimension: Option<u64>,
    /// Rings of the tiling, where swept.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub rings: Option<u64>,
    /// Polygon and tiles around a vertex, where swept.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub tiling: Option<[u64; 2]>,
    /// Block, where swept.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub block: Option<String>,
    /// Construction of the block, where swept.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub construction: Option<String>,
}

/// All cases of a study: networks in the order of the file; for each, tilings, rings,
/// blocks, constructions and dimensions in the order of the sweep, the last fastest.
///
/// # Errors
/// [`StudyError::Read`] for a file that cannot be read, [`StudyError::Syntax`],
/// [`StudyError::Missing`], [`StudyError::Value`] for a sweep over what is no recipe.
pub fn all(file: &StudyFile) -> Result<Vec<Case>, StudyError> {
    let tables: Vec<Table> = match &file.network {
        Value::Table(t) => vec![t.clone()],
        Value::Array(a) if !a.is_empty() && a.iter().all(Value::is_table) => {
            a.iter().filter_map(Value::as_table).cloned().collect()
        }
        other => {
            return Err(StudyError::Value {
                place: file.place.clone(),
                key: "network".into(),
                value: super::keys::kind(other).into(),
                why: "must be a table or a list of tables".into(),
            });
        }
    };
    let several = tables.len() > 1;
    let mut cases = Vec::new();
    for (number, written) in tables.into_iter().enumerate() {
        let (mut table, folder) = open(file, written)?;
        table.entry("lierne").or_insert(Value::Integer(1));
        let name = match table.get("name").and_then(Value::as_str) {
            Some(n) => n.to_owned(),
            None if several => format!("{} {}", file.shown_name(), number + 1),
            None => file.shown_name(),
        };
        table.insert("name".into(), Value::String(name.clone()));
        for setting in settings(file, &table, &name)? {
            let mut table = table.clone();
            apply(&setting, &mut table);
            let digest = digest(&table, &folder)?;
            let id = id(&setting, several);
            cases.push(Case { id, setting, table, folder: folder.clone(), digest });
        }
    }
    for at in 1..cases.len() {
        if let Some(twin) = cases[..at].iter().find(|c| c.id == cases[at].id) {
            return Err(StudyError::Value {
                place: file.place.clone(),
                key: "network".into(),
                value: format!("{:?}", twin.id),
                why: "stands twice in the study; give each network a name of its own".into(),
            });
        }
    }
    Ok(cases)
}

/// The table as written, or the one of the file that it names.
fn open(file: &StudyFile, mut written: Table) -> Result<(Table, PathBuf), StudyError> {
    let Some(name) = written.remove("file") else {
        return Ok((written, file.folder.clone()));
    };
    let place = format!("{}, table network", file.place);
    let Value::String(name) = name else {
        return Err(StudyError::Value {
            place,
            key: "file".into(),
            value: name.to_string(),
            why: "is not the name of a file".into(),
        });
    };
    super::keys::check(&written, &["name"], &place)?;
    let path = file.folder.join(&name);
    let text = std::fs::read_to_string(&path)
        .map_err(|cause| StudyError::Read { path: path.clone(), cause })?;
    let syntax = |message: String| StudyError::Syntax {
        place: path.display().to_string(),
        message: message.replace('\n', " "),
    };
    let mut table: Table = if path.extension().is_some_and(|e| e == "json") {
        let value: serde_json::Value =
            serde_json::from_str(&text).map_err(|e| syntax(e.to_string()))?;
        Table::try_from(value).map_err(|e| syntax(e.to_string()))?
    } else {
        toml::from_str(&text).map_err(|e| syntax(e.message().to_owned()))?
    };
    if let Some(own) = written.remove("name") {
        table.insert("name".into(), own);
    }
    let folder = path.parent().map(Path::to_owned).unwrap_or_default();
    Ok((table, folder))
}

fn settings(file: &StudyFile, table: &Table, name: &str) -> Result<Vec<Setting>, StudyError> {
    let sweep = &file.sweep;
    let recipe = table.get("tiling").is_some_and(Value::is_table);
    let swept = [
        ("rings", !sweep.rings.is_empty()),
        ("tilings", !sweep.tilings.is_empty()),
        ("blocks", !sweep.blocks.is_empty()),
        ("constructions", !sweep.constructions.is_empty()),
    ];
    if let Some((key, _)) = swept.iter().find(|(_, s)| *s && !recipe) {
        return Err(StudyError::Value {
            place: format!("{}, table sweep", file.place),
            key: (*key).into(),
            value: "[..]".into(),
            why: format!("sweeps over a tiling, but network {name:?} has no table tiling"),
        });
    }
    let own = table.get("dimension").and_then(Value::as_integer).map(|d| d.unsigned_abs());
    let optional = |list: &[u64]| -> Vec<Option<u64>> {
        if list.is_empty() { vec![None] } else { list.iter().copied().map(Some).collect() }
    };
    let words = |list: &[String]| -> Vec<Option<String>> {
        if list.is_empty() { vec![None] } else { list.iter().cloned().map(Some).collect() }
    };
    let tilings: Vec<Option<[u64; 2]>> = if sweep.tilings.is_empty() {
        vec![None]
    } else {
        sweep.tilings.iter().copied().map(Some).collect()
    };
    let mut out = Vec::new();
    for &tiling in &tilings {
        for &rings in &optional(&sweep.rings) {
            for block in &words(&sweep.blocks) {
                for construction in &words(&sweep.constructions) {
                    for &dimension in &optional(&file.dimensions) {
                        out.push(Setting {
                            network: name.to_owned(),
                            dimension: dimension.or(own),
                            rings,
                            tiling,
                            block: block.clone(),
                            construction: construction.clone(),
                        });
                    }
                }
            }
        }
    }
    Ok(out)
}

fn apply(setting: &Setting, table: &mut Table) {
    if let Some(d) = setting.dimension {
        table.insert("dimension".into(), Value::Integer(d as i64));
    }
    if let Some(Value::Table(recipe)) = table.get_mut("tiling") {
        if let Some([p, q]) = setting.tiling {
            recipe.insert("polygon".into(), Value::Integer(p as i64));
            recipe.insert("around".into(), Value::Integer(q as i64));
        }
        if let Some(r) = setting.rings {
            recipe.insert("rings".into(), Value::Integer(r as i64));
        }
        if let Some(b) = &setting.block {
            recipe.insert("block".into(), Value::String(b.clone()));
        }
        if let Some(c) = &setting.construction {
            // A block with settings is a table: { family = …, construction = … }.
            let mut block = match recipe.get("block") {
                Some(Value::Table(t)) => t.clone(),
                Some(family) => Table::from_iter([("family".to_owned(), family.clone())]),
                None => Table::from_iter([("family".to_owned(), Value::from("perfect"))]),
            };
            block.insert("construction".into(), Value::String(c.clone()));
            recipe.insert("block".into(), Value::Table(block));
        }
    }
}

fn id(setting: &Setting, several: bool) -> String {
    let mut parts = Vec::new();
    if several {
        parts.push(setting.network.clone());
    }
    if let Some([p, q]) = setting.tiling {
        parts.push(format!("{{{p},{q}}}"));
    }
    if let Some(r) = setting.rings {
        parts.push(format!("{r} rings"));
    }
    parts.extend(setting.block.clone());
    parts.extend(setting.construction.clone());
    if let Some(d) = setting.dimension {
        parts.push(format!("D={d}"));
    }
    if parts.is_empty() { setting.network.clone() } else { parts.join(", ") }
}

/// Hash of the table and of every array beside it that it names.
fn digest(table: &Table, folder: &Path) -> Result<String, StudyError> {
    let mut hash = Sha256::new();
    let text = toml::to_string(table).map_err(|e| StudyError::Syntax {
        place: folder.display().to_string(),
        message: e.to_string(),
    })?;
    hash.update(text.as_bytes());
    let mut arrays = Vec::new();
    find_arrays(&Value::Table(table.clone()), &mut arrays);
    for name in arrays {
        let path = folder.join(&name);
        let bytes =
            std::fs::read(&path).map_err(|cause| StudyError::Read { path: path.clone(), cause })?;
        hash.update(name.as_bytes());
        hash.update((bytes.len() as u64).to_le_bytes());
        hash.update(&bytes);
    }
    Ok(hex(&hash.finalize()))
}

fn find_arrays(value: &Value, out: &mut Vec<String>) {
    match value {
        Value::Table(t) => {
            for (key, v) in t {
                match v {
                    Value::String(name) if key == "array" => out.push(name.clone()),
                    v => find_arrays(v, out),
                }
            }
        }
        Value::Array(a) => a.iter().for_each(|v| find_arrays(v, out)),
        _ => {}
    }
}

/// Bytes in hexadecimal.
pub(super) fn hex(bytes: &[u8]) -> String {
    bytes.iter().map(|b| format!("{b:02x}")).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn study(text: &str) -> StudyFile {
        StudyFile::parse(text, "s.toml", Path::new(".")).unwrap()
    }

    #[test]
    fn dimensions_and_rings_are_swept_in_order() {
        let s = study(
            "study = 1\ndimensions = [3, 5]\n[network]\nname = \"n\"\n[network.tiling]\npolygon = 4\n[sweep]\nrings = [1, 2]\n[entropies]\n",
        );
        let cases = all(&s).unwrap();
        let ids: Vec<&str> = cases.iter().map(|c| c.id.as_str()).collect();
        assert_eq!(ids, ["1 rings, D=3", "1 rings, D=5", "2 rings, D=3", "2 rings, D=5"]);
        assert_eq!(cases[3].table["dimension"], Value::Integer(5));
        assert_eq!(cases[3].table["tiling"]["rings"], Value::Integer(2));
        let digests: std::collections::BTreeSet<_> = cases.iter().map(|c| &c.digest).collect();
        assert_eq!(digests.len(), 4);
    }

    #[test]
    fn a_sweep_over_what_is_no_recipe_is_refused() {
        let s = study("study = 1\n[network]\nname = \"n\"\n[sweep]\nrings = [1]\n[entropies]\n");
        assert!(all(&s).unwrap_err().to_string().contains("no table tiling"));
    }
}
