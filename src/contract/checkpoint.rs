//! Partial sums on disk, so that a killed run loses at most what it was working on.
//!
//! One file a partial sum, `sum-<height>-<place>.part`, written beside its place and
//! renamed. When two sums have been joined the file of the joint one is written first and
//! its parts removed after; whoever finds both ignores the parts.

use super::ContractError;
use super::record::{Refusal, decode, encode};
use super::sums::{Node, Sums};
use super::total::Total;
use crate::linalg::Scalar;
use std::fs::{self, File};
use std::io::Write;
use std::path::{Path, PathBuf};

/// A folder of partial sums of one computation.
pub(super) struct Checkpoint {
    folder: PathBuf,
    key: String,
}

impl Checkpoint {
    /// Takes a folder, which is made where it is not there, for the computation `key`.
    pub fn open(folder: &Path, key: &str) -> Result<Self, ContractError> {
        fs::create_dir_all(folder).map_err(|e| failed(folder, &e))?;
        Ok(Self { folder: folder.to_owned(), key: key.to_owned() })
    }

    fn path(&self, node: Node) -> PathBuf {
        self.folder.join(format!("sum-{}-{}.part", node.0, node.1))
    }

    /// Puts every partial sum found into `sums`. Large sums come first; what they hold
    /// already is passed over and removed.
    pub fn load<T: Scalar>(&self, sums: &mut Sums<T>) -> Result<(), ContractError> {
        let mut found: Vec<Node> = Vec::new();
        for entry in fs::read_dir(&self.folder).map_err(|e| failed(&self.folder, &e))? {
            let name = entry.map_err(|e| failed(&self.folder, &e))?.file_name();
            found.extend(name.to_str().and_then(node_of));
        }
        found.sort_unstable_by(|a, b| b.cmp(a));
        let mut taken: Vec<Node> = Vec::new();
        for node in found {
            let path = self.path(node);
            let inside = |t: &Node| t.0 >= node.0 && Sums::<T>::covers(*t, node.1 << node.0);
            if taken.iter().any(inside) {
                fs::remove_file(&path).map_err(|e| failed(&path, &e))?;
                continue;
            }
            let bytes = fs::read(&path).map_err(|e| failed(&path, &e))?;
            match decode::<T>(&self.key, &bytes) {
                Ok((written, total)) if written == node => {
                    sums.insert(node, total);
                    taken.push(node);
                }
                Ok(_) => {
                    return Err(ContractError::Checkpoint {
                        path: path.display().to_string(),
                        reason: "its name does not fit its contents".into(),
                    });
                }
                Err(Refusal::Other) => {
                    return Err(ContractError::OtherCheckpoint {
                        path: path.display().to_string(),
                    });
                }
                Err(Refusal::Damaged(reason)) => {
                    return Err(ContractError::Checkpoint {
                        path: path.display().to_string(),
                        reason,
                    });
                }
            }
        }
        Ok(())
    }

    /// Writes one partial sum and removes those that went into it.
    pub fn save<T: Scalar>(
        &self,
        node: Node,
        total: &Total<T>,
        parts: &[Node],
    ) -> Result<(), ContractError> {
        let path = self.path(node);
        let beside = self.folder.join(format!(".sum-{}-{}.{}", node.0, node.1, std::process::id()));
        let bytes = encode(&self.key, node, total);
        let write = || -> std::io::Result<()> {
            let mut file = File::create(&beside)?;
            file.write_all(&bytes)?;
            file.sync_all()?;
            fs::rename(&beside, &path)
        };
        write().map_err(|e| {
            // A part of a file is of no use; the first error is the one to tell.
            let _ = fs::remove_file(&beside);
            failed(&path, &e)
        })?;
        for part in parts {
            match fs::remove_file(self.path(*part)) {
                Err(e) if e.kind() != std::io::ErrorKind::NotFound => {
                    return Err(failed(&self.path(*part), &e));
                }
                _ => {}
            }
        }
        Ok(())
    }
}

/// The place that a file name gives.
fn node_of(name: &str) -> Option<Node> {
    let (height, place) = name.strip_prefix("sum-")?.strip_suffix(".part")?.split_once('-')?;
    let height: u32 = height.parse().ok()?;
    Some((height, place.parse().ok()?)).filter(|_| height < 64)
}

fn failed(path: &Path, e: &std::io::Error) -> ContractError {
    ContractError::Checkpoint { path: path.display().to_string(), reason: e.to_string() }
}
