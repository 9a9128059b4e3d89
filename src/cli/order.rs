//! `lierne order`.

mod compare;
mod page;

use super::common::parse_bytes;
use super::{Common, Failure, Verdict};
use crate::network::{self, Limits, Network};
use crate::order::{self, Found, Method, Objective, Request, Shape};
use serde_json::json;
use std::path::PathBuf;

/// Arguments of `lierne order`.
#[derive(Debug, clap::Args)]
#[command(args_conflicts_with_subcommands = true, subcommand_negates_reqs = true)]
pub struct Args {
    #[command(subcommand)]
    command: Option<Sub>,
    /// The network (.toml or .json)
    #[arg(value_name = "NET", required_unless_present = "calibrate")]
    network: Option<PathBuf>,
    /// Time to spend; the work is set so that an ordinary core does it in this time, so the
    /// same seed gives the same plan unless the time runs out first
    #[arg(long, value_name = "S")]
    seconds: Option<f64>,
    /// Work to spend, in labels touched, instead of what --seconds says
    #[arg(long, value_name = "N")]
    work: Option<u64>,
    /// What is to be small: balanced (multiply-adds, and narrow steps at a small price),
    /// multiply-adds, size, or mix:WEIGHT (multiply-adds + WEIGHT × elements written)
    #[arg(long, default_value = "balanced", value_name = "WHAT")]
    objective: String,
    /// portfolio, exhaustive, greedy, elimination, bisection, annealing or windows
    #[arg(long, default_value = "portfolio", value_name = "NAME")]
    method: String,
    /// Slice the plan so that it runs in this memory (16 bytes an element), for example 4GiB
    #[arg(long, value_name = "SIZE", value_parser = parse_bytes)]
    memory: Option<u64>,
    /// Slice the plan into at least so many slices
    #[arg(long, default_value_t = 1, value_name = "N")]
    slices: u64,
    /// Seed of every random choice
    #[arg(long, default_value_t = 0, value_name = "N")]
    seed: u64,
    /// Price an existing plan and refine it
    #[arg(long, value_name = "FILE")]
    plan: Option<PathBuf>,
    /// Write the plan
    #[arg(long, value_name = "FILE")]
    save: Option<PathBuf>,
    /// Measure this machine's arithmetic against its memory and say the objective that models
    /// it
    #[arg(long)]
    calibrate: bool,
}

#[derive(Debug, clap::Subcommand)]
enum Sub {
    /// Run methods on networks with several seeds and budgets: a table and a page of charts
    Compare(compare::Args),
}

/// Labels touched in a second by one core of an ordinary machine.
const RATE: f64 = 8e7;

/// Runs the command.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if let Some(Sub::Compare(a)) = &args.command {
        return compare::run(a, common);
    }
    if args.calibrate {
        let c = order::calibrate(common);
        if common.json {
            common.say_json(&json!({
                "multiply_adds_a_second": c.multiply_adds,
                "elements_a_second": c.elements,
                "weight": c.weight(),
            }))?;
        } else {
            common.say(format!(
                "{:.3e} multiply-adds and {:.3e} elements a second: --objective mix:{:.1}",
                c.multiply_adds,
                c.elements,
                c.weight()
            ));
        }
    }
    let Some(path) = &args.network else { return Ok(Verdict::Yes) };
    let mut request = request(args)?;
    let network = network::load(path, &Limits::default())?;
    let shape = Shape::of(&network);
    let mut given = None;
    if let Some(path) = &args.plan {
        let plan = order::load(path, &shape)?;
        given = Some(order::cost(&shape, &plan)?);
        request.start = Some(plan);
    }
    let found = order::search(&shape, &request, common)?;
    if let Some(path) = &args.save {
        order::save(path, &shape, &found.plan)?;
    }
    common.clear();
    if common.json {
        common.say_json(&as_json(&network, &found, &request, given))?;
    } else {
        say(common, &network, &found, given);
    }
    if found.cut_short {
        common.remark("time ran out first: another run may give another plan");
    }
    Ok(Verdict::Yes)
}

fn request(args: &Args) -> Result<Request, Failure> {
    let mut request = Request {
        seed: args.seed,
        objective: objective(&args.objective)?,
        method: Method::parse(&args.method)?,
        memory: args.memory.map(|bytes| (bytes / 16).max(1)),
        slices: u128::from(args.slices.max(1)),
        ..Request::default()
    };
    if let Some(seconds) = args.seconds {
        if !(seconds.is_finite() && seconds >= 0.0) {
            return Err(Failure::new(format!("--seconds {seconds} is no time; give 0 or more")));
        }
        request.seconds = seconds;
        request.work = (seconds * RATE) as u64;
    }
    if let Some(work) = args.work {
        request.work = work;
    }
    Ok(request)
}

fn objective(text: &str) -> Result<Objective, Failure> {
    match text {
        "balanced" => Ok(Objective::Balanced),
        "multiply-adds" => Ok(Objective::MultiplyAdds),
        "size" => Ok(Objective::Size),
        _ => text
            .strip_prefix("mix:")
            .and_then(|w| w.parse::<f64>().ok())
            .filter(|w| w.is_finite() && *w > 0.0)
            .map(|weight| Objective::Mix { weight })
            .ok_or_else(|| {
                Failure::new(format!(
                    "--objective {text:?} is none of balanced, multiply-adds, size and mix:WEIGHT"
                ))
            }),
    }
}

fn as_json(
    network: &Network,
    found: &Found,
    request: &Request,
    given: Option<order::Cost>,
) -> serde_json::Value {
    let c = &found.cost;
    let sliced: Vec<&str> = found.plan.sliced.iter().map(|&l| network.label_name(l)).collect();
    // JSON has no infinities: a plan without steps has no multiply-adds.
    let finite = |x: f64| x.is_finite().then_some(x);
    let mut value = json!({
        "method": found.method,
        "log10_multiply_adds": finite(c.log10_multiply_adds),
        "multiply_adds": c.multiply_adds.and_then(|m| u64::try_from(m).ok()),
        "log2_peak_elements": c.log2_peak_elements,
        "log2_largest_tensor": c.log2_largest_tensor,
        "log2_elements_written": finite(c.log2_elements_written),
        "widest_step": c.widest_step,
        "widest_step_bound": found.widest_step_bound,
        "optimal": found.optimal,
        "slices": u64::try_from(c.slices).map_or(json!(c.slices as f64), |s| json!(s)),
        "sliced_labels": sliced,
        "slicing_log10_overhead": finite(found.slicing_log10_overhead),
        "seed": request.seed,
        "cut_short": found.cut_short,
        "steps": found.plan.steps,
    });
    if let Some(g) = given {
        value["given"] = json!({
            "log10_multiply_adds": finite(g.log10_multiply_adds),
            "log2_peak_elements": g.log2_peak_elements,
            "log2_largest_tensor": g.log2_largest_tensor,
            "widest_step": g.widest_step,
        });
    }
    value
}

fn say(common: &Common, network: &Network, found: &Found, given: Option<order::Cost>) {
    let c = &found.cost;
    let adds = |c: &order::Cost| match c.multiply_adds {
        Some(n) if n < 1_000_000 => n.to_string(),
        _ => format!("10^{:.3}", c.log10_multiply_adds),
    };
    if let Some(g) = given {
        common.say(format!(
            "given plan     {} multiply-adds, widest step {} labels, peak 2^{:.2} elements",
            adds(&g),
            g.widest_step,
            g.log2_peak_elements
        ));
    }
    let proof = if found.optimal { " (proven best)" } else { "" };
    common.say(format!("method         {}{proof}", found.method));
    common.say(format!("multiply-adds  {}", adds(c)));
    common.say(format!("peak           2^{:.2} elements", c.log2_peak_elements));
    common.say(format!("largest tensor 2^{:.2} elements", c.log2_largest_tensor));
    let bound = match found.widest_step_bound {
        b if b >= c.widest_step => "no order can do better".to_owned(),
        b => format!("no order can do better than {b}"),
    };
    common.say(format!("widest step    {} labels, {bound}", c.widest_step));
    if c.slices > 1 {
        let names: Vec<&str> = found.plan.sliced.iter().map(|&l| network.label_name(l)).collect();
        common.say(format!(
            "slices         {} over {}, {:.2} times the multiply-adds of the unsliced plan",
            c.slices,
            names.join(", "),
            10f64.powf(found.slicing_log10_overhead)
        ));
    }
}
