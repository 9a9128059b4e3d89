//! `lierne code`: the network as a code from its bulk legs to its boundary.

mod distance;
mod erasure;
mod isometry;
mod push;
mod range;
mod recover;
mod weights;

use super::{Common, Failure, Verdict};
use crate::code::Code;
use crate::network::{Limits, Network, Overrides, load_with};
use std::path::PathBuf;

/// Arguments of `lierne code`.
#[derive(Debug, clap::Args)]
#[command(after_help = "Examples:
  lierne code networks/pentagon-code.toml isometry
  lierne code networks/pentagon-code.toml recover --region 0..12
  lierne code networks/pentagon-code.toml distance --leg centre
  lierne code networks/pentagon-code.toml erasure --p 0.05..0.5:0.05 --legs centre
  lierne code networks/pentagon-code.toml push --leg k0 --operator X --region 0..14

Erasures are located: whoever recovers knows which legs are gone, and nothing else goes
wrong. Greedy results are lower bounds on what survives. Nothing here models gate noise.")]
pub struct Args {
    /// The network (.toml or .json)
    #[arg(value_name = "NET")]
    network: PathBuf,
    /// Dimension of every leg that the file does not set
    #[arg(long, value_name = "D")]
    dimension: Option<usize>,
    #[command(subcommand)]
    question: Question,
}

#[derive(Debug, clap::Subcommand)]
enum Question {
    /// Whether bulk to boundary is an isometry; legs, rate, counts by ring
    Isometry(isometry::Args),
    /// Which bulk legs a boundary region recovers
    Recover(recover::Args),
    /// The smallest erasure that hurts the code or one bulk leg
    Distance(distance::Args),
    /// How bulk legs survive erasures, by rate
    Erasure(erasure::Args),
    /// Push an operator on a bulk leg to a boundary region
    Push(push::Args),
    /// Weight enumerators of a small code
    Weights(weights::Args),
}

/// Runs the command.
///
/// # Errors
/// A sentence on what is wrong with the file or the question.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if let Question::Erasure(a) = &args.question {
        return erasure::run(args, a, common);
    }
    let network = args.load(None)?;
    let code = Code::prepared(&network, common)?;
    match &args.question {
        Question::Isometry(a) => isometry::run(&code, a, common),
        Question::Recover(a) => recover::run(&code, a, common),
        Question::Distance(a) => distance::run(&code, a, common),
        Question::Push(a) => push::run(&code, a, common),
        Question::Weights(a) => weights::run(&code, a, common),
        Question::Erasure(_) => unreachable!("answered above"),
    }
}

impl Args {
    fn load(&self, rings: Option<u32>) -> Result<Network, Failure> {
        let overrides = Overrides { dimension: self.dimension, rings };
        Ok(load_with(&self.network, &Limits::default(), &overrides)?)
    }
}

/// A bulk leg by name; `centre` is the one in the middle unless a leg has that name.
fn leg(code: &Code<'_>, name: &str) -> Result<usize, Failure> {
    match code.find_bulk(name) {
        Ok(k) => Ok(k),
        Err(_) if name == "centre" => Ok(code.centre()),
        Err(e) => Err(e.into()),
    }
}

/// Names of bulk legs.
fn names(code: &Code<'_>, legs: &[usize]) -> Vec<String> {
    legs.iter().map(|&k| code.bulk_name(k).to_owned()).collect()
}

/// A list for people: `k0 k3 k7`, `none`.
fn listed(names: &[String]) -> String {
    if names.is_empty() { "none".to_owned() } else { names.join(" ") }
}

/// A count as JSON: a number where it fits, text where it does not.
fn count(n: u128) -> serde_json::Value {
    u64::try_from(n).map_or_else(|_| n.to_string().into(), Into::into)
}
