//! Finished answers, kept so that a later run goes on where an earlier one ended.
//!
//! The journal is one JSON object a line, `{"key":…,"answer":…}`. A key is a hash of
//! everything that the answer depends on, so that an answer whose inputs changed is never
//! found again. Lines are only ever added; one that a killed run left half written is
//! passed over.

use super::StudyError;
use super::case::hex;
use serde::{Serialize, de::DeserializeOwned};
use sha2::{Digest, Sha256};
use std::collections::HashMap;
use std::fs::{File, OpenOptions};
use std::io::Write;
use std::path::{Path, PathBuf};
use std::sync::Mutex;

/// The journal of one folder.
#[derive(Debug)]
pub struct Journal {
    path: PathBuf,
    known: HashMap<String, serde_json::Value>,
    file: Mutex<Option<File>>,
}

#[derive(serde::Deserialize)]
struct Line {
    key: String,
    answer: serde_json::Value,
}

impl Journal {
    /// The file's name in the study's folder.
    pub const NAME: &'static str = "answers.jsonl";

    /// Reads what is there; nothing is written before the first [`Self::put`].
    ///
    /// # Errors
    /// [`StudyError::Read`] where there is a file that cannot be read.
    pub fn open(folder: &Path) -> Result<Self, StudyError> {
        let path = folder.join(Self::NAME);
        let mut known = HashMap::new();
        match std::fs::read(&path) {
            Ok(bytes) => {
                for line in bytes.split(|&b| b == b'\n') {
                    if let Ok(Line { key, answer }) = serde_json::from_slice(line) {
                        known.insert(key, answer);
                    }
                }
            }
            Err(e) if e.kind() == std::io::ErrorKind::NotFound => {}
            Err(cause) => return Err(StudyError::Read { path, cause }),
        }
        Ok(Self { path, known, file: Mutex::new(None) })
    }
    /// The answer of this key from an earlier run, where it is there and can be read.
    pub fn get<T: DeserializeOwned>(&self, key: &str) -> Option<T> {
        self.known.get(key).and_then(|v| serde_json::from_value(v.clone()).ok())
    }
    /// Adds an answer.
    ///
    /// # Errors
    /// [`StudyError::Write`].
    pub fn put(&self, key: &str, answer: &impl Serialize) -> Result<(), StudyError> {
        let wrong = |cause: std::io::Error| StudyError::Write { path: self.path.clone(), cause };
        let answer = serde_json::to_value(answer).map_err(|e| wrong(e.into()))?;
        let line = format!("{}\n", serde_json::json!({ "key": key, "answer": answer }));
        let mut guard = self.file.lock().unwrap_or_else(std::sync::PoisonError::into_inner);
        if guard.is_none() {
            let mut file =
                OpenOptions::new().create(true).append(true).open(&self.path).map_err(wrong)?;
            // A line that an earlier run left half written must not swallow the first new one.
            if file.metadata().map_err(wrong)?.len() > 0 {
                file.write_all(b"\n").map_err(wrong)?;
            }
            *guard = Some(file);
        }
        match guard.as_mut() {
            Some(file) => file.write_all(line.as_bytes()).map_err(wrong),
            None => Ok(()),
        }
    }
}

/// The key of an answer: a hash of all the texts that it depends on.
pub fn key(parts: &[&str]) -> String {
    let mut hash = Sha256::new();
    for p in parts {
        hash.update((p.len() as u64).to_le_bytes());
        hash.update(p.as_bytes());
    }
    hex(&hash.finalize()[..16])
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_half_written_line_is_passed_over_and_the_next_is_whole() {
        let dir = tempfile::tempdir().unwrap();
        let j = Journal::open(dir.path()).unwrap();
        j.put("a", &1).unwrap();
        let path = dir.path().join(Journal::NAME);
        let mut bytes = std::fs::read(&path).unwrap();
        bytes.extend_from_slice(b"{\"key\":\"b\",\"ans");
        std::fs::write(&path, &bytes).unwrap();
        let j = Journal::open(dir.path()).unwrap();
        assert_eq!(j.get::<i32>("a"), Some(1));
        assert_eq!(j.get::<i32>("b"), None);
        j.put("c", &3).unwrap();
        let j = Journal::open(dir.path()).unwrap();
        assert_eq!((j.get::<i32>("a"), j.get::<i32>("c")), (Some(1), Some(3)));
    }

    #[test]
    fn keys_tell_parts_apart() {
        assert_ne!(key(&["ab", "c"]), key(&["a", "bc"]));
        assert_eq!(key(&["ab"]), key(&["ab"]));
    }
}
