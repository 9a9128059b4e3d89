//! What all commands share: common options, outcomes, failures, progress on stderr.

use crate::watch::{News, Watch};
use clap::Args;
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::io::{self, IsTerminal, Write};
use std::path::Path;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Instant;

/// Options that every command takes.
#[derive(Debug, Clone, Default, Args)]
pub struct CommonArgs {
    /// Print one JSON object on stdout instead of text
    #[arg(long, global = true, help_heading = "Common options")]
    pub json: bool,
    /// No progress and no remarks on stderr, errors only
    #[arg(long, global = true, help_heading = "Common options")]
    pub quiet: bool,
    /// Threads to use; 0 takes every core
    #[arg(
        long,
        global = true,
        default_value_t = 0,
        value_name = "N",
        help_heading = "Common options"
    )]
    pub threads: usize,
}

/// How a command ended that did its work.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Verdict {
    /// Exit status 0.
    Yes,
    /// A clear negative answer: exit status 1.
    No,
}

/// Why a command did not do its work: one sentence, exit status 2.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Failure(String);

impl Failure {
    /// A failure with this sentence.
    pub fn new(sentence: impl Into<String>) -> Self {
        Self(sentence.into())
    }
    /// The same failure, its place named first: `place: sentence`.
    #[must_use]
    pub fn at(self, place: impl std::fmt::Display) -> Self {
        Self(format!("{place}: {}", self.0))
    }
    /// The sentence.
    pub fn sentence(&self) -> &str {
        &self.0
    }
}

impl<E: std::error::Error> From<E> for Failure {
    fn from(error: E) -> Self {
        let mut text = error.to_string();
        let mut cause = error.source();
        while let Some(c) = cause {
            let more = c.to_string();
            if !text.contains(&more) {
                text.push_str(": ");
                text.push_str(&more);
            }
            cause = c.source();
        }
        Self(text)
    }
}

/// Set by the first SIGINT or SIGTERM.
pub(super) static STOP: AtomicBool = AtomicBool::new(false);

/// What a command is handed besides its own arguments.
pub struct Common {
    /// `--json`.
    pub json: bool,
    /// `--quiet`.
    pub quiet: bool,
    /// Threads in use.
    pub threads: usize,
    /// Whether `--threads` was given.
    pub threads_given: bool,
    start: Instant,
    bar: ProgressBar,
}

impl Common {
    pub(super) fn new(args: &CommonArgs) -> Self {
        let shown = !args.quiet && io::stderr().is_terminal();
        let bar = ProgressBar::with_draw_target(
            None,
            if shown {
                ProgressDrawTarget::stderr_with_hz(8)
            } else {
                ProgressDrawTarget::hidden()
            },
        );
        bar.set_style(spinner());
        Self {
            json: args.json,
            quiet: args.quiet,
            threads: rayon::current_num_threads(),
            threads_given: args.threads > 0,
            start: Instant::now(),
            bar,
        }
    }
    /// Writes a line to stdout; a closed pipe ends the program quietly.
    pub fn say(&self, line: impl std::fmt::Display) {
        self.bar.suspend(|| emit(&format!("{line}\n")));
    }
    /// Writes a JSON object to stdout, on one line.
    ///
    /// # Errors
    /// Where the value does not serialise.
    pub fn say_json(&self, value: &impl serde::Serialize) -> Result<(), Failure> {
        let text = serde_json::to_string(value)?;
        self.say(text);
        Ok(())
    }
    /// A remark on stderr, unless `--quiet`.
    pub fn remark(&self, line: impl std::fmt::Display) {
        if !self.quiet {
            self.bar.suspend(|| {
                let _ = writeln!(io::stderr(), "{line}");
            });
        }
    }
    /// Takes the progress line away.
    pub fn clear(&self) {
        self.bar.finish_and_clear();
    }
}

fn spinner() -> ProgressStyle {
    ProgressStyle::with_template("{msg}  {elapsed}").expect("a fixed template")
}

fn emit(text: &str) {
    let mut out = io::stdout().lock();
    if out.write_all(text.as_bytes()).and_then(|()| out.flush()).is_err() {
        std::process::exit(0);
    }
}

impl Watch for Common {
    fn tell(&self, news: News<'_>) {
        match news {
            News::Stage(name) => {
                self.bar.set_style(spinner());
                self.bar.set_message(name.to_owned());
                self.bar.tick();
            }
            News::Progress { done, total } if total > 0 => {
                if self.bar.length() != Some(total) {
                    self.bar.set_length(total);
                    self.bar.set_style(
                        ProgressStyle::with_template("{msg}  {pos}/{len} {wide_bar} {eta} left")
                            .expect("a fixed template")
                            .progress_chars("─╴ "),
                    );
                }
                self.bar.set_position(done);
            }
            News::Progress { done, .. } => self.bar.set_position(done),
            News::Best(text) => {
                self.bar.set_message(text.to_owned());
                self.bar.tick();
            }
        }
    }
    fn seconds(&self) -> f64 {
        self.start.elapsed().as_secs_f64()
    }
    fn stop(&self) -> bool {
        STOP.load(Ordering::Relaxed)
    }
}

/// A size in bytes: `4GiB`, `512 MiB`, `2GB`, `1000000`.
///
/// # Errors
/// A sentence that names the text where it is none of these.
pub fn parse_bytes(text: &str) -> Result<u64, String> {
    let t = text.trim();
    let split = t.find(|c: char| !(c.is_ascii_digit() || c == '.')).unwrap_or(t.len());
    let (number, unit) = t.split_at(split);
    let number: f64 =
        number.parse().map_err(|_| format!("{text:?} is no size; write for example 4GiB"))?;
    let factor: f64 = match unit.trim().to_ascii_lowercase().as_str() {
        "" | "b" => 1.0,
        "kib" => 1024.0,
        "mib" => 1024.0 * 1024.0,
        "gib" => 1024.0 * 1024.0 * 1024.0,
        "tib" => 1024.0f64.powi(4),
        "kb" => 1e3,
        "mb" => 1e6,
        "gb" => 1e9,
        "tb" => 1e12,
        other => {
            return Err(format!("{text:?} has the unit {other:?}; write KiB, MiB, GiB or TiB"));
        }
    };
    let bytes = number * factor;
    if bytes.is_finite() && bytes < 1.8e19 {
        Ok(bytes as u64)
    } else {
        Err(format!("{text:?} is more than 64 bits can count"))
    }
}

/// Bytes in words: `1.5 GiB`.
pub fn show_bytes(bytes: f64) -> String {
    let mut x = bytes;
    for unit in ["B", "KiB", "MiB", "GiB", "TiB", "PiB"] {
        if x < 1024.0 {
            return if unit == "B" { format!("{x:.0} B") } else { format!("{x:.1} {unit}") };
        }
        x /= 1024.0;
    }
    format!("{x:.3e} EiB")
}

/// 70 % of the memory that is free now; 4 GiB where the system does not tell.
pub fn default_memory() -> u64 {
    let free = std::fs::read_to_string("/proc/meminfo").ok().and_then(|text| {
        let line = text.lines().find(|l| l.starts_with("MemAvailable:"))?.to_owned();
        line.split_whitespace().nth(1)?.parse::<u64>().ok()
    });
    free.map_or(4 << 30, |kib| kib * 1024 / 10 * 7)
}

/// Writes a file beside its place and renames it, so that no half of it is ever seen.
///
/// # Errors
/// A sentence that names the file.
pub fn write_file(path: &Path, bytes: &[u8]) -> Result<(), Failure> {
    let name = path
        .file_name()
        .ok_or_else(|| Failure::new(format!("{} names no file to write", path.display())))?;
    let mut beside = path.to_path_buf();
    beside.set_file_name(format!(".{}.{}.part", name.to_string_lossy(), std::process::id()));
    let written = std::fs::write(&beside, bytes).and_then(|()| std::fs::rename(&beside, path));
    written.map_err(|e| {
        let _ = std::fs::remove_file(&beside);
        Failure::new(format!("cannot write {}: {e}", path.display()))
    })
}
