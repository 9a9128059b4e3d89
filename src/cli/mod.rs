//! The program: arguments, progress, exit codes.
//!
//! Each command is a file with `Args` (what was parsed) and `run` (which turns it into the
//! library's typed requests). Results go to stdout, everything else to stderr. Exit status
//! 0 is success, 1 a clear negative answer, 2 an error, told in one sentence.

mod block;
mod code;
pub mod common;
mod contract;
mod draw;
mod entropy;
mod grow;
mod help;
mod manners;
mod order;
mod show;
mod study;

use clap::error::ErrorKind;
use clap::{CommandFactory, Parser, Subcommand};
pub use common::{Common, Failure, Verdict};
use common::{CommonArgs, STOP};
use std::io::Write;
use std::process::ExitCode;
use std::sync::atomic::Ordering;

/// Perfect tensors at work: blocks with proofs, networks, entropies with evidence,
/// contraction orders and their execution.
#[derive(Debug, Parser)]
#[command(
    name = "lierne",
    version,
    propagate_version = true,
    arg_required_else_help = true,
    disable_help_subcommand = true
)]
struct Program {
    #[command(flatten)]
    common: CommonArgs,
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// The whole job from one study file: numbers, tables, pictures, report
    Study(study::Args),
    /// Make, check, list and find building blocks
    Block(block::Args),
    /// Write a network: a tiling, lattice, tree, random or given graph
    Grow(grow::Args),
    /// Say what a network consists of
    Show(show::Args),
    /// Draw a network
    Draw(draw::Args),
    /// Entropies of boundary regions, each with its evidence
    Entropy(entropy::Args),
    /// Find a contraction order
    Order(order::Args),
    /// Contract a network
    Contract(contract::Args),
    /// The network as a code: isometry, recovery, distance, erasures, operators
    Code(code::Args),
    /// Help on a command, or a page on a topic: conventions, study-file
    Help(help::Args),
    /// Write shell completions and man pages
    #[command(hide = true)]
    Manners(manners::Args),
}

/// Runs the program on the process's arguments.
pub fn main() -> ExitCode {
    let program = match Program::try_parse() {
        Ok(p) => p,
        Err(e) if matches!(e.kind(), ErrorKind::DisplayHelp | ErrorKind::DisplayVersion) => {
            let _ = e.print();
            return ExitCode::SUCCESS;
        }
        Err(e) => {
            let _ = e.print();
            return ExitCode::from(2);
        }
    };
    if program.common.threads > 0 {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(program.common.threads);
        if let Err(e) = pool.build_global() {
            return fail(&Failure::from(e));
        }
    }
    // A second signal ends the program at once; the first asks it to end at a safe point.
    let handler = ctrlc::set_handler(|| {
        if STOP.swap(true, Ordering::Relaxed) {
            std::process::exit(130);
        }
    });
    if let Err(e) = handler {
        return fail(&Failure::from(e));
    }
    let common = Common::new(&program.common);
    let outcome = match &program.command {
        Command::Study(a) => study::run(a, &common),
        Command::Block(a) => block::run(a, &common),
        Command::Grow(a) => grow::run(a, &common),
        Command::Show(a) => show::run(a, &common),
        Command::Draw(a) => draw::run(a, &common),
        Command::Entropy(a) => entropy::run(a, &common),
        Command::Order(a) => order::run(a, &common),
        Command::Contract(a) => contract::run(a, &common),
        Command::Code(a) => code::run(a, &common),
        Command::Help(a) => help::run(a, Program::command(), &common),
        Command::Manners(a) => manners::run(a, Program::command(), &common),
    };
    common.clear();
    match outcome {
        Ok(Verdict::Yes) => ExitCode::SUCCESS,
        Ok(Verdict::No) => ExitCode::from(1),
        Err(failure) => fail(&failure),
    }
}

fn fail(failure: &Failure) -> ExitCode {
    let _ = writeln!(std::io::stderr(), "lierne: {}", failure.sentence());
    ExitCode::from(2)
}
