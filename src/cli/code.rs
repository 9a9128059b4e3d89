//! `lierne code`.

use super::{Common, Failure, Verdict};

/// Arguments of `lierne code`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// What the command works on
    #[arg(value_name = "WORDS", trailing_var_arg = true, allow_hyphen_values = true)]
    words: Vec<String>,
}

/// Runs the command.
pub fn run(args: &Args, _common: &Common) -> Result<Verdict, Failure> {
    let _ = &args.words;
    Err(Failure::new("`lierne code` is not built yet"))
}
