//! `lierne order compare`: methods against networks, over seeds and budgets.

use super::{RATE, page};
use crate::cli::common::write_file;
use crate::cli::{Common, Failure, Verdict};
use crate::network::{self, Limits};
use crate::order::{self, Method, Objective, OrderError, Request, Shape};
use crate::watch::{News, Watch};
use serde_json::json;
use std::fmt::Write;
use std::path::PathBuf;

/// Arguments of `lierne order compare`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// The networks
    #[arg(value_name = "NET", required = true)]
    networks: Vec<PathBuf>,
    /// Largest time that a method gets on a network; it is also run with 1/4 and 1/16 of it
    #[arg(long, default_value_t = 4.0, value_name = "S")]
    seconds: f64,
    /// First seed
    #[arg(long, default_value_t = 0, value_name = "N")]
    seed: u64,
    /// Number of seeds
    #[arg(long, default_value_t = 3, value_name = "N")]
    seeds: u64,
    /// Methods, separated by commas
    #[arg(long, value_delimiter = ',', value_name = "NAMES")]
    methods: Vec<String>,
    /// Folder for orders.csv and orders.html
    #[arg(long, value_name = "DIR")]
    out: PathBuf,
}

/// Shares of the time, smallest first.
const LADDER: [f64; 3] = [1.0 / 16.0, 1.0 / 4.0, 1.0];
/// Doublings below the unsliced peak at which the memory frontier is looked at.
const FRONTIER: [u32; 5] = [2, 4, 6, 8, 10];

/// One run.
#[derive(Debug, Clone)]
pub(super) struct Row {
    pub network: String,
    pub tensors: usize,
    pub labels: usize,
    pub method: &'static str,
    pub seed: u64,
    pub given: f64,
    pub spent: f64,
    /// log2 of the elements allowed, where there was a limit.
    pub memory: Option<f64>,
    pub cost: order::Cost,
    pub bound: usize,
    pub optimal: bool,
}

/// Runs the command.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if !(args.seconds.is_finite() && args.seconds > 0.0) {
        return Err(Failure::new(format!("--seconds {} is no time to spend", args.seconds)));
    }
    if args.seeds == 0 {
        return Err(Failure::new("--seeds 0 leaves nothing to run; give at least 1"));
    }
    let methods: Vec<Method> = if args.methods.is_empty() {
        Method::ALL.to_vec()
    } else {
        args.methods.iter().map(|m| Method::parse(m)).collect::<Result<_, _>>()?
    };
    let mut shapes = Vec::new();
    for path in &args.networks {
        let network = network::load(path, &Limits::default())?;
        let name = path.file_stem().map_or_else(String::new, |s| s.to_string_lossy().into());
        shapes.push((name, Shape::of(&network)));
    }
    let mut rows = Vec::new();
    let total = (shapes.len() * methods.len()) as u64 * args.seeds;
    let mut done = 0;
    for (name, shape) in &shapes {
        for &method in &methods {
            for seed in args.seed..args.seed + args.seeds {
                for share in LADDER {
                    if common.stop() {
                        break;
                    }
                    let given = args.seconds * share;
                    rows.extend(once(common, name, shape, method, seed, given, None)?);
                }
                done += 1;
                common.tell(News::Stage("comparing orders"));
                common.tell(News::Progress { done, total });
            }
        }
        frontier(args, common, name, shape, &mut rows)?;
    }
    std::fs::create_dir_all(&args.out)
        .map_err(|e| Failure::new(format!("cannot make {}: {e}", args.out.display())))?;
    let (table, html) = (args.out.join("orders.csv"), args.out.join("orders.html"));
    write_file(&table, csv(&rows).as_bytes())?;
    write_file(&html, page::write(&rows)?.as_bytes())?;
    common.clear();
    if common.json {
        common.say_json(&json!({
            "runs": rows.len(),
            "table": table.display().to_string(),
            "page": html.display().to_string(),
        }))?;
    } else {
        common.say(format!("{} runs in {} and {}", rows.len(), table.display(), html.display()));
    }
    Ok(Verdict::Yes)
}

/// One run; nothing where the exhaustive method cannot do it.
fn once(
    common: &Common,
    name: &str,
    shape: &Shape,
    method: Method,
    seed: u64,
    given: f64,
    memory: Option<f64>,
) -> Result<Option<Row>, Failure> {
    let request = Request {
        seed,
        method,
        objective: Objective::MultiplyAdds,
        work: (given * RATE) as u64,
        seconds: given,
        memory: memory.map(|bits| bits.exp2() as u64),
        ..Request::default()
    };
    let start = common.seconds();
    let found = match order::search(shape, &request, common) {
        Ok(found) => found,
        Err(OrderError::TooWide { .. } | OrderError::Memory { .. }) => return Ok(None),
        Err(e) => return Err(Failure::from(e).at(name)),
    };
    Ok(Some(Row {
        network: name.to_owned(),
        tensors: shape.tensors.len(),
        labels: shape.sizes.len(),
        method: method.name(),
        seed,
        given,
        spent: common.seconds() - start,
        memory,
        cost: found.cost,
        bound: found.widest_step_bound,
        optimal: found.optimal,
    }))
}

/// The portfolio's plan at smaller and smaller memory.
fn frontier(
    args: &Args,
    common: &Common,
    name: &str,
    shape: &Shape,
    rows: &mut Vec<Row>,
) -> Result<(), Failure> {
    let peak = rows
        .iter()
        .filter(|r| r.network == name && r.method == Method::Portfolio.name())
        .map(|r| r.cost.log2_peak_elements)
        .min_by(f64::total_cmp);
    let Some(peak) = peak else { return Ok(()) };
    for doublings in FRONTIER {
        let memory = peak - f64::from(doublings);
        if !(1.0..=62.0).contains(&memory) || common.stop() {
            continue;
        }
        let m = Method::Portfolio;
        rows.extend(once(common, name, shape, m, args.seed, args.seconds, Some(memory))?);
    }
    Ok(())
}

fn csv(rows: &[Row]) -> String {
    let mut text = String::from(
        "network,tensors,labels,method,seed,seconds_given,seconds_spent,log2_memory,slices,\
         log10_multiply_adds,log2_peak_elements,log2_largest_tensor,widest_step,\
         widest_step_bound,optimal\n",
    );
    for r in rows {
        let name = if r.network.contains([',', '"', '\n']) {
            format!("\"{}\"", r.network.replace('"', "\"\""))
        } else {
            r.network.clone()
        };
        let memory = r.memory.map_or_else(String::new, |m| format!("{m:.3}"));
        let c = &r.cost;
        let _ = writeln!(
            text,
            "{name},{},{},{},{},{:.4},{:.4},{memory},{},{:.6},{:.4},{:.4},{},{},{}",
            r.tensors,
            r.labels,
            r.method,
            r.seed,
            r.given,
            r.spent,
            c.slices,
            c.log10_multiply_adds,
            c.log2_peak_elements,
            c.log2_largest_tensor,
            c.widest_step,
            r.bound,
            r.optimal
        );
    }
    text
}
