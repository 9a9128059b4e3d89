//! `lierne block find`.

use super::super::{Common, Failure, Verdict};
use super::legs_in_words;
use crate::block::{self, FindRequest, Reason, Start, read_npy, write_npy};
use crate::tensor::Dense;
use serde_json::json;
use std::path::{Path, PathBuf};

/// Arguments of `lierne block find`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// Number of legs
    #[arg(long, value_name = "N", default_value_t = 4)]
    legs: usize,
    /// Dimension of every leg
    #[arg(long, value_name = "D")]
    dimension: usize,
    /// Where starts come from: `random`, `permutation`, `bell-diagonal` (four legs, D² phases),
    /// or an array file
    #[arg(long, value_name = "START", default_value = "random")]
    from: String,
    /// Size of the noise on permutations and on later starts from a file
    #[arg(long, value_name = "X", default_value_t = 0.3)]
    noise: f64,
    /// Starts tried at most
    #[arg(long, value_name = "N", default_value_t = 64)]
    starts: usize,
    /// Rounds of projections a start may take
    #[arg(long, value_name = "N", default_value_t = 20_000)]
    rounds: usize,
    /// Seconds after which the search ends with the best array so far
    #[arg(long, value_name = "S")]
    seconds: Option<f64>,
    /// Defect at which a start has succeeded
    #[arg(long, value_name = "X", default_value_t = 1e-14)]
    tolerance: f64,
    /// Seed of all starts
    #[arg(long, default_value_t = 0)]
    seed: u64,
    /// File for the best array (complex128)
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,
}

pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let finite = |name: &str, v: f64| {
        if v.is_finite() && v >= 0.0 {
            Ok(v)
        } else {
            Err(Failure::new(format!("--{name} is {v}; it must be finite and not negative")))
        }
    };
    let start = match args.from.as_str() {
        "random" => Start::Random,
        "permutation" => Start::Permutation,
        "bell-diagonal" => Start::BellDiagonal,
        file => {
            let path = Path::new(file);
            if !path.exists() {
                return Err(Failure::new(format!(
                    "--from {file}: no such file, and no start of this name (random, \
                     permutation, bell-diagonal)"
                )));
            }
            let array = read_npy(path)?;
            // The same refusals as everywhere: NaN, zero, no legs.
            block::from_dense(file, array.clone(), 1e-10)?;
            Start::Array(array.to_complex())
        }
    };
    let request = FindRequest {
        noise: finite("noise", args.noise)?,
        starts: args.starts,
        iterations: args.rounds,
        seconds: args.seconds.map(|s| finite("seconds", s)).transpose()?,
        tolerance: finite("tolerance", args.tolerance)?,
        seed: args.seed,
        ..FindRequest::new(args.legs, args.dimension, start)
    };
    let found = block::find(&request, common)?;
    let converged = found.reason == Reason::Converged;
    if let Some(path) = &args.out {
        write_npy(path, &Dense::Complex(found.array.clone()))?;
    }
    if common.json {
        common.say_json(&json!({
            "legs": args.legs,
            "dimension": args.dimension,
            "from": args.from,
            "seed": args.seed,
            "converged": converged,
            "defect": found.defect,
            "reason": found.reason.to_string(),
            "start": found.start,
            "starts_run": found.starts_run,
            "rounds": found.rounds,
            "file": args.out,
        }))?;
    } else {
        let legs = legs_in_words(&vec![args.dimension; args.legs]);
        let from = &args.from;
        common.say(format!(
            "{legs} from {from}, seed {}: defect {:.2e} ({}; start {}, {} rounds, {} starts run)",
            args.seed, found.defect, found.reason, found.start, found.rounds, found.starts_run
        ));
        if !converged {
            common.say("nothing is proven by a search that does not converge");
        }
        if let Some(path) = &args.out {
            common.say(format!("written to {}", path.display()));
        }
    }
    Ok(if converged { Verdict::Yes } else { Verdict::No })
}
