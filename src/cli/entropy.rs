//! `lierne entropy`: entropies of boundary regions, each with its evidence.

mod ask;
mod certificate;
mod show;

use super::common::{default_memory, parse_bytes};
use super::{Common, Failure, Verdict};
use crate::entropy::measure::Measure;
use std::path::PathBuf;

/// Arguments of `lierne entropy`.
#[derive(Debug, clap::Args)]
#[command(after_help = "Examples:
  lierne entropy networks/loop-5.toml --region 0,2,4,6,8 --explain
  lierne entropy NET --intervals --csv > intervals.csv
  lierne entropy NET --random 200 --unions 5 --seed 3 --json
  lierne entropy NET --region 0..5 --and 9..12 --measure mutual-information
  lierne entropy NET --region 0..5 --certificate cut.json
  lierne entropy NET --verify cut.json

Evidence, from the cheapest: geometry, finite-field, contraction, estimate (only with
--estimate), bounds. Bulk legs join a region by their labels; those it does not name belong
to the complement, with the reference they are entangled with.")]
pub struct Args {
    /// The network (.toml or .json)
    #[arg(value_name = "NET")]
    network: PathBuf,
    /// A region: half-open ranges, sites and bulk labels, e.g. 0..5,9,k0; may be repeated
    #[arg(long, value_name = "REGION")]
    region: Vec<String>,
    /// All intervals of the boundary
    #[arg(long)]
    intervals: bool,
    /// Only intervals of this length
    #[arg(long, value_name = "L", requires = "intervals")]
    length: Option<usize>,
    /// N random unions of intervals
    #[arg(long, value_name = "N")]
    random: Option<usize>,
    /// Intervals of a random union
    #[arg(long, value_name = "K", default_value_t = 1, requires = "random")]
    unions: usize,
    /// All subsets of the boundary, up to 20 sites
    #[arg(long)]
    all_subsets: bool,
    /// Further regions of a measure that takes two or three
    #[arg(long, value_name = "REGION", requires = "region")]
    and: Vec<String>,
    /// entropy, renyi:A (A ≥ 0 or inf), negativity, mutual-information,
    /// conditional-mutual-information, tripartite-information; may be repeated
    #[arg(long, value_name = "NAME", value_parser = Measure::parse)]
    measure: Vec<Measure>,
    /// Print the spectrum with multiplicities
    #[arg(long)]
    spectrum: bool,
    /// Average over all positions at each length, and the fit S = (c/3) ln((N/π) sin(πl/N)) + s
    #[arg(long, requires = "intervals")]
    average: bool,
    /// Say in a few sentences how each number was found
    #[arg(long)]
    explain: bool,
    /// A table of comma-separated values on stdout
    #[arg(long, conflicts_with = "json")]
    csv: bool,
    /// Write a certificate of the first region's closure
    #[arg(long, value_name = "FILE")]
    certificate: Option<PathBuf>,
    /// Check a certificate against the network; exit status 1 where it does not hold
    #[arg(long, value_name = "FILE", conflicts_with_all = ["region", "intervals", "random", "all_subsets"])]
    verify: Option<PathBuf>,
    /// Only the minimal cuts
    #[arg(long)]
    cut: bool,
    /// Where an exact answer does not fit: a random estimate with an error bar
    #[arg(long)]
    estimate: bool,
    /// Memory for one core, e.g. 4GiB [default: 70 % of what is free]
    #[arg(long, value_name = "SIZE", value_parser = parse_bytes)]
    memory: Option<u64>,
    /// log10 of the multiply-adds that one core may take
    #[arg(long, value_name = "X", default_value_t = 11.5)]
    work: f64,
    /// Begin no further core after this many seconds
    #[arg(long, value_name = "S")]
    seconds: Option<f64>,
    /// Seed of every random choice
    #[arg(long, value_name = "N", default_value_t = 0)]
    seed: u64,
}

/// Runs the command.
///
/// # Errors
/// A sentence on what is wrong with the network, a region or a certificate.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if let Some(path) = &args.verify {
        return certificate::verify(&args.network, path, common);
    }
    let memory = args.memory.unwrap_or_else(default_memory);
    ask::run(args, memory, common)
}
