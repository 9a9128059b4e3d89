//! `lierne block make`.

use super::super::common::write_file;
use super::super::{Common, Failure, Verdict};
use super::{Which, isometric_in_words, legs_in_words};
use crate::block::{self, exact_to_json, write_npy_entries};
use clap::ValueEnum;
use serde_json::json;
use std::path::PathBuf;

/// Arguments of `lierne block make`.
#[derive(Debug, clap::Args)]
pub struct Args {
    #[command(flatten)]
    which: Which,
    /// File to write; without it the block is only made and described
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,
    /// What is written: a complex128 array, or the exact entries; `json` without --out prints
    #[arg(long, value_enum, default_value_t = Format::Npy)]
    format: Format,
    /// Seed of random blocks
    #[arg(long, default_value_t = 0)]
    seed: u64,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum Format {
    Npy,
    Json,
}

/// Most places of a dense array that is written (64 GiB).
const MOST_PLACES: u128 = 1 << 32;

pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let request = args.which.request(args.seed)?;
    let block = block::make(&request)?;
    let writes = args.out.is_some() || args.format == Format::Json;
    if writes && block.nonzeros() > u128::from(block::MOST_ENTRIES) {
        return Err(Failure::new(format!(
            "{} has {} non-zero entries, more than the {} that are written",
            block.name(),
            block.nonzeros(),
            block::MOST_ENTRIES
        )));
    }
    let mut printed = false;
    match (args.format, &args.out) {
        (Format::Npy, None) => {}
        (Format::Npy, Some(path)) => {
            let places = block.dims().iter().map(|&d| d as u128).product::<u128>();
            if places > MOST_PLACES {
                return Err(Failure::new(format!(
                    "a dense array of {places} entries is not written; --format json writes the \
                     {} that are not zero",
                    block.nonzeros()
                )));
            }
            write_npy_entries(path, block.entries())?;
        }
        (Format::Json, out) => {
            let exact = block.exact().ok_or_else(|| {
                Failure::new(format!("{} has no exact entries; write .npy", block.name()))
            })?;
            let text = exact_to_json(block.name(), &exact)?;
            match out {
                Some(path) => write_file(path, format!("{text}\n").as_bytes())?,
                None => {
                    common.say(text);
                    printed = true;
                }
            }
        }
    }
    if printed {
        return Ok(Verdict::Yes);
    }
    let stabilizer: Option<Vec<_>> = block
        .stabilizer()
        .map(|s| s.parts.iter().map(|p| json!({ "prime": p.prime, "digits": p.digits })).collect());
    let nonzeros = block.nonzeros();
    if common.json {
        common.say_json(&json!({
            "block": block.name(),
            "legs": block.dims().len(),
            "dimensions": block.dims(),
            "nonzeros": nonzeros,
            "perfect": block.isometries().is_perfect(),
            "table": isometric_in_words(&block),
            "proof": block.proof().to_string(),
            "stabilizer": stabilizer,
            "seed": args.seed,
            "file": args.out,
        }))?;
    } else {
        common.say(format!(
            "{}, {}: {}, found {}; {nonzeros} non-zero entries{}",
            block.name(),
            legs_in_words(block.dims()),
            isometric_in_words(&block),
            block.proof(),
            if stabilizer.is_some() { "; a stabilizer tensor" } else { "" }
        ));
        if let Some(path) = &args.out {
            common.say(format!("written to {}", path.display()));
        }
    }
    Ok(Verdict::Yes)
}
