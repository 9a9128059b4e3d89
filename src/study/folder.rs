//! Writing the results so that no half of a file is ever seen.

use super::StudyError;
use std::fs;
use std::path::{Path, PathBuf};

/// The folder that a study writes to.
#[derive(Debug, Clone)]
pub struct Folder {
    path: PathBuf,
}

impl Folder {
    /// Makes the folder where it is missing.
    ///
    /// # Errors
    /// [`StudyError::Write`].
    pub fn open(path: &Path) -> Result<Self, StudyError> {
        fs::create_dir_all(path)
            .map_err(|cause| StudyError::Write { path: path.to_owned(), cause })?;
        Ok(Self { path: path.to_owned() })
    }
    /// Where it is.
    pub fn path(&self) -> &Path {
        &self.path
    }
    /// Makes a folder inside.
    ///
    /// # Errors
    /// [`StudyError::Write`].
    pub fn make(&self, name: &str) -> Result<(), StudyError> {
        let path = self.path.join(name);
        fs::create_dir_all(&path).map_err(|cause| StudyError::Write { path, cause })
    }
    /// Writes a file beside its place and renames it.
    ///
    /// # Errors
    /// [`StudyError::Write`], with the file as it was before.
    pub fn write(&self, name: &str, bytes: &[u8]) -> Result<(), StudyError> {
        let path = self.path.join(name);
        if let Some(parent) = path.parent() {
            fs::create_dir_all(parent)
                .map_err(|cause| StudyError::Write { path: parent.to_owned(), cause })?;
        }
        let mut beside = path.clone();
        let file = path.file_name().unwrap_or_default().to_string_lossy().into_owned();
        beside.set_file_name(format!(".{file}.{}.part", std::process::id()));
        fs::write(&beside, bytes).and_then(|()| fs::rename(&beside, &path)).map_err(|cause| {
            let _ = fs::remove_file(&beside);
            StudyError::Write { path, cause }
        })
    }
}
