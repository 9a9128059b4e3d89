//! The program: arguments, progress, exit codes.

use std::process::ExitCode;

/// Runs the program on the process's arguments.
pub fn main() -> ExitCode {
    ExitCode::from(2)
}
