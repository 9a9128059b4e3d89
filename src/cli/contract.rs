//! `lierne contract`.

use super::common::{default_memory, parse_bytes, show_bytes};
use super::{Common, Failure, Verdict};
use crate::contract::{self, Alone, ContractError, Kind, Outcome, Precision, Problem, Team};
use crate::network::{self, Limits, Network};
use crate::order::{self, OrderError, Plan};
use crate::tensor::Dense;
use crate::watch::{News, Watch};
use ndarray_npy::WriteNpyExt;
use num_complex::Complex64;
use serde_json::json;
use std::io::{BufWriter, Write};
use std::path::{Path, PathBuf};
use std::sync::Mutex;

/// Arguments of `lierne contract`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// The network (.toml or .json)
    #[arg(value_name = "NET")]
    network: PathBuf,
    /// Write the result as a NumPy array, axes in the order of boundary, then bulk
    #[arg(long, value_name = "FILE.npy")]
    out: Option<PathBuf>,
    /// Run this plan instead of searching for one
    #[arg(long, value_name = "FILE")]
    plan: Option<PathBuf>,
    /// Time to spend on the search for a plan
    #[arg(long, value_name = "S", default_value_t = 2.0)]
    seconds: f64,
    /// Seed of the search
    #[arg(long, default_value_t = 0, value_name = "N")]
    seed: u64,
    /// Memory to use, for example 4GiB; default 70 % of what is free
    #[arg(long, value_name = "SIZE", value_parser = parse_bytes)]
    memory: Option<u64>,
    /// Keep partial sums of slices in this folder and go on from those found there
    #[arg(long, value_name = "DIR")]
    checkpoint: Option<PathBuf>,
    /// Dense tensors throughout, even where sparse ones are estimated to be cheaper
    #[arg(long)]
    dense: bool,
    /// Single-precision numbers: half the memory, about 7 digits
    #[arg(long)]
    single: bool,
    /// Spread the slices over the processes that mpirun started
    #[arg(long)]
    distributed: bool,
}

/// Most axes that NumPy takes.
const AXES: usize = 64;
/// Labels touched in a second by the search on one core of an ordinary machine.
const RATE: f64 = 4e7;

/// Runs the command.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if !args.distributed {
        return on(&Alone, args, common);
    }
    let team = contract::world()?;
    let verdict = on(&*team, args, common);
    if let Err(failure) = &verdict
        && team.size() > 1
    {
        // The other ranks would wait for this one.
        common.clear();
        let _ = writeln!(
            std::io::stderr(),
            "lierne: rank {} of {}: {}",
            team.rank(),
            team.size(),
            failure.sentence()
        );
        team.abort(2);
    }
    verdict
}

fn on(team: &dyn Team, args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if !(args.seconds.is_finite() && args.seconds >= 0.0) {
        return Err(Failure::new(format!("--seconds {} is no time; give 0 or more", args.seconds)));
    }
    let network = network::load(&args.network, &Limits::default())?;
    let problem = Problem::of(&network);
    if let Some(out) = &args.out {
        writable(out, problem.shape.open.len())?;
    }
    let memory = args.memory.unwrap_or_else(default_memory);
    let plan =
        if team.rank() == 0 { plan(args, &problem, memory, common)? } else { Plan::default() };
    let plan = shared(team, plan)?;
    let request = contract::Request {
        memory: Some(memory),
        checkpoint: args.checkpoint.clone(),
        kind: if args.dense { Kind::Dense } else { Kind::Automatic },
        precision: if args.single { Precision::Single } else { Precision::Double },
    };
    if team.rank() == 0 {
        let ahead = contract::forecast(&problem, &plan, &request)?;
        common.remark(format!(
            "{} slices, {} at the peak, about {} on one thread",
            ahead.slices,
            show_bytes(ahead.bytes as f64),
            span(ahead.seconds)
        ));
    }
    let start = common.seconds();
    let watch = Rated { common, start, last: Mutex::new(0.0), heard: team.rank() == 0 };
    let outcome = match contract::share(&problem, &plan, &request, team, &watch) {
        Ok(Some(outcome)) => outcome,
        Ok(None) => return Ok(Verdict::Yes),
        Err(e @ ContractError::Stopped { .. }) => {
            return Err(Failure::new(match &args.checkpoint {
                Some(folder) => format!("{e}; the same command goes on from {}", folder.display()),
                None => format!("{e}; with --checkpoint DIR a run can be taken up again"),
            }));
        }
        Err(e) => return Err(e.into()),
    };
    let seconds = common.seconds() - start;
    common.clear();
    if let Some(out) = &args.out {
        write_array(out, outcome.tensor.data())?;
    }
    if common.json {
        common.say_json(&as_json(&network, &outcome, seconds))?;
    } else {
        say(common, &network, &outcome, args, seconds);
    }
    Ok(Verdict::Yes)
}

/// The plan found or given. Where no plan fits the memory by the search's own reckoning the
/// executor has the last word, since it frees tensors earlier.
fn plan(args: &Args, problem: &Problem, memory: u64, common: &Common) -> Result<Plan, Failure> {
    if let Some(path) = &args.plan {
        return Ok(order::load(path, &problem.shape)?);
    }
    let request = order::Request {
        seed: args.seed,
        seconds: args.seconds,
        work: (args.seconds * RATE) as u64,
        memory: Some((memory / 24).max(1)),
        ..order::Request::default()
    };
    let found = match order::search(&problem.shape, &request, common) {
        Err(OrderError::Memory { .. }) => {
            order::search(&problem.shape, &order::Request { memory: None, ..request }, common)?
        }
        other => other?,
    };
    Ok(found.plan)
}

/// Rank 0's plan in everybody's hands.
fn shared(team: &dyn Team, plan: Plan) -> Result<Plan, Failure> {
    if team.size() == 1 {
        return Ok(plan);
    }
    let bytes = team.broadcast(serde_json::to_vec(&plan)?);
    Ok(serde_json::from_slice(&bytes)?)
}

/// Refuses early what could not be written in the end.
fn writable(out: &Path, axes: usize) -> Result<(), Failure> {
    if axes > AXES {
        return Err(Failure::new(format!(
            "the result has {axes} axes, but a NumPy array has at most {AXES}; leave fewer legs open"
        )));
    }
    let folder = match out.parent() {
        Some(p) if !p.as_os_str().is_empty() => p,
        _ => Path::new("."),
    };
    if out.file_name().is_none() || !folder.is_dir() {
        return Err(Failure::new(format!("cannot write {}: no such folder", out.display())));
    }
    Ok(())
}

/// Streams the array to a file beside its place and renames it.
fn write_array(out: &Path, data: &Dense) -> Result<(), Failure> {
    let name = out.file_name().map(|n| n.to_string_lossy().into_owned()).unwrap_or_default();
    let beside = out.with_file_name(format!(".{name}.{}.part", std::process::id()));
    let write = || -> Result<(), Failure> {
        let mut file = BufWriter::new(std::fs::File::create(&beside)?);
        match data {
            Dense::Real(a) => a.write_npy(&mut file)?,
            Dense::Complex(a) => a.write_npy(&mut file)?,
        }
        file.into_inner().map_err(|e| Failure::from(e.into_error()))?.sync_all()?;
        std::fs::rename(&beside, out)?;
        Ok(())
    };
    write().map_err(|e| {
        // A part of a file is of no use; the first error is the one to tell.
        let _ = std::fs::remove_file(&beside);
        Failure::new(format!("cannot write {}: {}", out.display(), e.sentence()))
    })
}

/// log10 of the Frobenius norm of the value; −∞ for 0.
fn log10_norm(outcome: &Outcome) -> f64 {
    let data = outcome.tensor.data();
    let top = match data {
        Dense::Real(a) => a.iter().map(|x| x.abs()).fold(0.0, f64::max),
        Dense::Complex(a) => a.iter().map(|x| x.re.abs().max(x.im.abs())).fold(0.0, f64::max),
    };
    if top == 0.0 {
        return f64::NEG_INFINITY;
    }
    let sum: f64 = match data {
        Dense::Real(a) => a.iter().map(|x| (x / top).powi(2)).sum(),
        Dense::Complex(a) => a.iter().map(|x| (x / top).norm_sqr()).sum(),
    };
    outcome.log10_scale + top.log10() + 0.5 * sum.log10()
}

fn scalar(outcome: &Outcome) -> Option<Complex64> {
    match outcome.tensor.data() {
        Dense::Real(a) if a.ndim() == 0 => a.first().map(|&x| Complex64::from(x)),
        Dense::Complex(a) if a.ndim() == 0 => a.first().copied(),
        _ => None,
    }
}

fn as_json(network: &Network, outcome: &Outcome, seconds: f64) -> serde_json::Value {
    // JSON has no infinities.
    let finite = |x: f64| x.is_finite().then_some(x);
    let count = |n: u128| u64::try_from(n).map_or(json!(n as f64), |n| json!(n));
    let sliced: Vec<&str> = outcome.sliced.iter().map(|&l| network.label_name(l)).collect();
    let mut value = json!({
        "log10_magnitude": finite(log10_norm(outcome)),
        "log10_scale": outcome.log10_scale,
        "shape": outcome.tensor.data().shape(),
        "complex": matches!(outcome.tensor.data(), Dense::Complex(_)),
        "multiply_adds": count(outcome.multiply_adds),
        "multiply_adds_done": count(outcome.done),
        "peak_bytes": outcome.peak_bytes,
        "slices": count(outcome.slices),
        "sliced_labels": sliced,
        "seconds": seconds,
    });
    if let Some(x) = scalar(outcome) {
        value["value"] = if outcome.log10_scale == 0.0 { json!([x.re, x.im]) } else { json!(null) };
        value["mantissa"] = json!([x.re, x.im]);
    }
    value
}

fn say(common: &Common, network: &Network, outcome: &Outcome, args: &Args, seconds: f64) {
    let magnitude = log10_norm(outcome);
    match scalar(outcome) {
        Some(x) => {
            let number = if x.im == 0.0 { format!("{}", x.re) } else { format!("{x}") };
            let factor = if outcome.log10_scale == 0.0 {
                String::new()
            } else {
                format!(" × 10^{}", outcome.log10_scale)
            };
            common.say(format!("value          {number}{factor}"));
            common.say(format!("magnitude      10^{magnitude:.12}"));
        }
        None => {
            let names: Vec<String> = network
                .boundary()
                .iter()
                .chain(network.bulk())
                .map(|&l| format!("{} {}", network.label_name(l), network.dim(l)))
                .collect();
            common.say(format!("axes           {}", names.join(", ")));
            common.say(format!("norm           10^{magnitude:.12}"));
            if outcome.log10_scale != 0.0 {
                common.say(format!(
                    "scale          the value is the array × 10^{}",
                    outcome.log10_scale
                ));
            }
        }
    }
    if outcome.slices > 1 {
        common.say(format!("slices         {}", outcome.slices));
    }
    common.say(format!("multiply-adds  {}", outcome.multiply_adds));
    if outcome.done < outcome.multiply_adds {
        common.say(format!("               of which {} were done", outcome.done));
    }
    common.say(format!("peak memory    {}", show_bytes(outcome.peak_bytes as f64)));
    common.say(format!("time           {}", span(seconds)));
    if let Some(out) = &args.out {
        common.say(format!("written to     {}", out.display()));
    }
}

/// A stretch of time in words.
fn span(seconds: f64) -> String {
    match seconds {
        s if s < 60.0 => format!("{s:.3} s"),
        s if s < 3600.0 => format!("{:.1} min", s / 60.0),
        s if s < 86400.0 * 3.0 => format!("{:.1} h", s / 3600.0),
        s if s < 86400.0 * 1000.0 => format!("{:.1} days", s / 86400.0),
        s => format!("{:.3e} years", s / 86400.0 / 365.25),
    }
}

/// Passes news on and adds the rate.
struct Rated<'a> {
    common: &'a Common,
    start: f64,
    last: Mutex<f64>,
    heard: bool,
}

impl Watch for Rated<'_> {
    fn tell(&self, news: News<'_>) {
        if !self.heard {
            return;
        }
        let News::Progress { done, .. } = news else {
            self.common.tell(news);
            return;
        };
        let now = self.common.seconds();
        let Ok(mut last) = self.last.try_lock() else { return };
        if now - *last < 0.1 {
            return;
        }
        *last = now;
        let rate = done as f64 / 1e3 / (now - self.start).max(1e-3);
        self.common.tell(news);
        self.common.tell(News::Best(&format!("contracting, {rate:.2} G multiply-adds a second")));
    }
    fn seconds(&self) -> f64 {
        self.common.seconds()
    }
    fn stop(&self) -> bool {
        self.common.stop()
    }
}
