//! `lierne block`: building blocks listed, made, checked and searched for.

mod check;
mod find;
mod list;
mod make;

use super::{Common, Failure, Verdict};
use crate::block::{self, Block, Request};
use clap::{Args as ClapArgs, Subcommand};
use std::collections::BTreeMap;

/// Arguments of `lierne block`.
#[derive(Debug, ClapArgs)]
pub struct Args {
    #[command(subcommand)]
    action: Action,
}

#[derive(Debug, Subcommand)]
enum Action {
    /// Every family of blocks; with --verify, every built-in proof run again
    List(list::Args),
    /// Make a block and write it as a NumPy array or as exact entries
    Make(make::Args),
    /// Judge an array or a block in every split: defect, entropy, rank, measures
    Check(check::Args),
    /// Search for a perfect tensor by alternating polar projections
    Find(find::Args),
}

/// Runs the command.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    match &args.action {
        Action::List(a) => list::run(a, common),
        Action::Make(a) => make::run(a, common),
        Action::Check(a) => check::run(a, common),
        Action::Find(a) => find::run(a, common),
    }
}

/// Which built-in block is meant.
#[derive(Debug, ClapArgs)]
struct Which {
    /// Family of the block (see `block list`); `perfect` takes the one for the number of legs
    #[arg(long, value_name = "NAME")]
    block: Option<String>,
    /// Number of legs
    #[arg(long, value_name = "N")]
    legs: Option<usize>,
    /// Dimension of every leg (encoders get one bulk leg for all that they encode)
    #[arg(long, value_name = "D", conflicts_with = "dimensions")]
    dimension: Option<usize>,
    /// Dimensions leg by leg
    #[arg(long, value_name = "D,D,…", value_delimiter = ',')]
    dimensions: Vec<usize>,
    /// One of several constructions of the family
    #[arg(long, value_name = "NAME")]
    construction: Option<String>,
    /// Stabilizer generators for --block stabilizer: `XZZXI,IXZZX,…`, or for qudits with powers,
    /// sites separated by spaces: `X1Z2 I X,…`
    #[arg(long, value_name = "TEXT", allow_hyphen_values = true)]
    stabilizers: Option<String>,
    /// Logical operators for --block stabilizer: all shifts, then all clocks
    #[arg(long, value_name = "TEXT", allow_hyphen_values = true)]
    logical: Option<String>,
    /// Level of --block basis
    #[arg(long, value_name = "K")]
    level: Option<usize>,
    /// Number of ones in --block dicke
    #[arg(long, value_name = "K")]
    excitations: Option<usize>,
}

impl Which {
    fn given(&self) -> bool {
        self.block.is_some()
            || self.legs.is_some()
            || self.dimension.is_some()
            || !self.dimensions.is_empty()
    }

    fn request(&self, seed: u64) -> Result<Request, Failure> {
        let mut options = BTreeMap::new();
        let mut put = |key: &str, value: Option<String>| {
            if let Some(v) = value {
                options.insert(key.to_owned(), v);
            }
        };
        put("stabilizers", self.stabilizers.clone());
        put("logical", self.logical.clone());
        put("level", self.level.map(|v| v.to_string()));
        put("excitations", self.excitations.map(|v| v.to_string()));
        let family = self.block.clone().unwrap_or_else(|| {
            if self.stabilizers.is_some() { "stabilizer" } else { "perfect" }.to_owned()
        });
        let dims = match (self.dimension, self.dimensions.as_slice()) {
            (Some(d), _) => block::usual_dims(&family, self.legs, d, &options)?,
            (None, []) => {
                return Err(Failure::new("say --dimension D, or --dimensions D,D,… leg by leg"));
            }
            (None, listed) => listed.to_vec(),
        };
        if let Some(legs) = self.legs.filter(|&n| n != dims.len()) {
            return Err(Failure::new(format!(
                "--legs {legs} does not go with {} dimensions",
                dims.len()
            )));
        }
        let construction = self.construction.clone();
        Ok(Request { family, dims, construction, options, seed })
    }
}

/// `4 legs of dimension 6`, `legs of dimensions 2, 2, 4`.
fn legs_in_words(dims: &[usize]) -> String {
    match dims {
        [d] => format!("1 leg of dimension {d}"),
        [d, rest @ ..] if rest.iter().all(|e| e == d) => {
            format!("{} legs of dimension {d}", dims.len())
        }
        _ => format!("legs of dimensions {}", joined(dims)),
    }
}

fn joined<T: ToString>(items: &[T]) -> String {
    items.iter().map(ToString::to_string).collect::<Vec<_>>().join(", ")
}

/// What its table says, in words.
fn isometric_in_words(block: &Block) -> String {
    let n = block.dims().len();
    let table = block.isometries();
    if n == 1 {
        return "a state".to_owned();
    }
    if table.is_perfect() && block.dims().iter().all(|d| *d == block.dims()[0]) {
        return "perfect".to_owned();
    }
    if n > block::IsometryTable::MOST_LEGS {
        return "with an unknown table of isometries".to_owned();
    }
    let all = (1u64 << n) - 1;
    let level = |m: u64| -> u128 {
        (0..n).filter(|l| m >> l & 1 == 1).map(|l| block.dims()[l] as u128).product()
    };
    let sides: Vec<u64> = (1..all)
        .filter(|&m| {
            let (a, b) = (level(m), level(all & !m));
            a < b || (a == b && m & 1 == 1)
        })
        .collect();
    let good = sides.iter().filter(|&&m| table.is_isometry(m)).count();
    format!("isometric in {good} of {} splits", sides.len())
}
