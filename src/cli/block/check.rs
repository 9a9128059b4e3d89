//! `lierne block check`.

use super::super::{Common, Failure, Verdict};
use super::{Which, joined, legs_in_words};
use crate::block::{self, CheckRequest, Report, exact_from_json, read_npy};
use std::path::{Path, PathBuf};

/// Arguments of `lierne block check`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// A NumPy array (.npy), or exact entries as `block make --format json` writes them (.json)
    #[arg(value_name = "FILE", conflicts_with_all = ["block", "legs", "dimension", "dimensions"])]
    file: Option<PathBuf>,
    #[command(flatten)]
    which: Which,
    /// Largest defect that still counts as isometric
    #[arg(long, value_name = "X", default_value_t = 1e-10)]
    tolerance: f64,
    /// Seed of random blocks
    #[arg(long, default_value_t = 0)]
    seed: u64,
}

pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if !(args.tolerance >= 0.0 && args.tolerance < 1.0) {
        return Err(Failure::new(format!(
            "the tolerance is {}; it must be at least 0 and below 1",
            args.tolerance
        )));
    }
    let request = CheckRequest { tolerance: args.tolerance };
    let (name, report) = match &args.file {
        Some(path) => (path.display().to_string(), check_file(path, &request, common)?),
        None if args.which.given() => {
            let block = block::make(&args.which.request(args.seed)?)?;
            (block.name().to_owned(), block::check_block(&block, &request, common)?)
        }
        None => {
            return Err(Failure::new("name an array file, or a block by --legs and --dimension"));
        }
    };
    if common.json {
        common.say_json(&report)?;
    } else {
        show(&name, &report, common);
    }
    Ok(if report.perfect { Verdict::Yes } else { Verdict::No })
}

fn check_file(path: &Path, request: &CheckRequest, common: &Common) -> Result<Report, Failure> {
    let name = path.display();
    if path.extension().is_some_and(|e| e == "json") {
        let text = std::fs::read_to_string(path)
            .map_err(|e| Failure::new(format!("cannot read {name}: {e}")))?;
        let (_, exact) = exact_from_json(&text).map_err(|e| Failure::from(e).at(name))?;
        return Ok(block::check_entries(&exact.to_sparse(), request, common)?);
    }
    let array = read_npy(path)?;
    Ok(block::check_dense(&name.to_string(), &array, request, common)?)
}

fn show(name: &str, report: &Report, common: &Common) {
    common.say(format!(
        "{name}, {}: {}perfect (largest defect {:.2e}, tolerance {:e})",
        legs_in_words(&report.dimensions),
        if report.perfect { "" } else { "not " },
        report.largest_defect,
        report.tolerance
    ));
    common.say(format!(
        "sum of squares {}, {} non-zero entries, {}-uniform",
        short(report.norm_squared),
        report.nonzeros,
        report.uniformity
    ));
    let width = report.splits.iter().map(|s| joined(&s.left).len()).max().unwrap_or(0).max(4);
    common.say(format!(
        "{:width$}  {:>9}  {:>14}  {:>6}",
        "left", "defect", "entropy (nats)", "rank"
    ));
    for s in &report.splits {
        common.say(format!(
            "{:width$}  {:>9.2e}  {:>14.10}  {:>6}",
            joined(&s.left),
            s.defect,
            s.entropy_nats,
            s.rank
        ));
    }
    if let (Some(power), Some(typicality)) = (report.entangling_power, report.gate_typicality) {
        common.say(format!(
            "entangling power {}, gate typicality {}",
            short(power),
            short(typicality)
        ));
    }
    if let Some(cuts) = &report.schmidt {
        for (cut, values) in ["01|23", "02|13", "03|12"].iter().zip(cuts) {
            common.say(format!("Schmidt weights of {cut}: {}", gathered(values)));
        }
    }
    if let Some(a) = &report.enumerator {
        let a: Vec<String> = a.iter().map(|&v| short(v)).collect();
        common.say(format!("weight enumerator {}", a.join(", ")));
    }
}

/// Ten digits without trailing zeros; rounding error near zero is shown as 0.
fn short(v: f64) -> String {
    if v.abs() < 5e-11 {
        return "0".to_owned();
    }
    if !(1e-4..1e9).contains(&v.abs()) {
        return format!("{v:.10e}");
    }
    format!("{v:.10}").trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// `36 × 0.0277777778`, runs of equal values gathered.
fn gathered(values: &[f64]) -> String {
    let mut runs: Vec<(usize, String)> = Vec::new();
    for &v in values {
        let text = short(v);
        match runs.last_mut() {
            Some((n, last)) if *last == text => *n += 1,
            _ => runs.push((1, text)),
        }
    }
    let shown: Vec<String> = runs.iter().take(12).map(|(n, v)| format!("{n} × {v}")).collect();
    let rest = runs.len().saturating_sub(12);
    if rest > 0 {
        format!("{}, and {rest} more values", shown.join(", "))
    } else {
        shown.join(", ")
    }
}
