//! Runs `lierne draw`.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};

pub fn root() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
}

pub fn draw(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_lierne"))
        .arg("draw")
        .args(arguments)
        .current_dir(root())
        .output()
        .expect("the program starts")
}

/// # Panics
/// Where the status is another; shows the command and both streams.
pub fn status(arguments: &[&str], wanted: i32) -> Output {
    let out = draw(arguments);
    assert_eq!(
        out.status.code(),
        Some(wanted),
        "lierne draw {arguments:?}\n{}\n{}",
        String::from_utf8_lossy(&out.stdout),
        String::from_utf8_lossy(&out.stderr)
    );
    out
}

/// The network and study files that ship.
pub fn networks() -> Vec<PathBuf> {
    let mut files: Vec<PathBuf> = std::fs::read_dir(root().join("networks"))
        .expect("networks/ ships")
        .map(|f| f.expect("an entry").path())
        .filter(|p| p.extension().is_some_and(|e| e == "toml" || e == "json"))
        .collect();
    files.sort();
    files
}

pub fn stem(path: &Path) -> String {
    path.file_stem().expect("a file").to_string_lossy().into_owned()
}

/// What a file says about itself: its leading comment, as one line.
pub fn comment(path: &Path) -> String {
    let text = std::fs::read_to_string(path).expect("a readable file");
    text.lines().map_while(|l| l.strip_prefix('#')).map(str::trim).collect::<Vec<_>>().join(" ")
}
