//! `lierne study`.

use super::common::{default_memory, parse_bytes, show_bytes, write_file};
use super::{Common, Failure, Verdict};
use crate::study::answer::Evidence;
use crate::study::template::TEMPLATE;
use crate::study::{
    Limits, Outcome, Provenance, StudyError, StudyFile, StudyResult, check, run, write_results,
    write_tables,
};
use crate::watch::{News, Watch};
use serde_json::json;
use sha2::{Digest, Sha256};
use std::path::{Path, PathBuf};
use std::time::{SystemTime, UNIX_EPOCH};

/// Arguments of `lierne study`.
#[derive(Debug, clap::Args)]
#[command(after_help = "Examples:
  lierne study networks/six-level-squares.toml --out results/six-level-squares
  lierne study --new my.toml                         a commented file to begin with
  lierne study my.toml --check                       what it would cost
  lierne study my.toml --out results/my --memory 8GiB --seed 3

A study that was stopped goes on from where it was when the same command is given again.
Entropies are in nats and, where all boundary legs share one dimension D, in legs (log D).
Keys of a study file: lierne help study-file.")]
pub struct Args {
    /// The study file (TOML)
    #[arg(value_name = "FILE", required_unless_present = "new")]
    file: Option<PathBuf>,
    /// Folder for the results; made where it is missing
    #[arg(long, value_name = "DIR", required_unless_present_any = ["new", "check"])]
    out: Option<PathBuf>,
    /// Write a commented study file to begin with, and stop
    #[arg(long, value_name = "FILE", conflicts_with_all = ["file", "out", "check"])]
    new: Option<PathBuf>,
    /// Check the study and say what it would cost, without running it
    #[arg(long)]
    check: bool,
    /// Memory for one contraction, e.g. 4GiB; overrides the study's [default: the study's,
    /// or 70 % of what is free, rounded down to a power of two]
    #[arg(long, value_name = "SIZE", value_parser = parse_bytes)]
    memory: Option<u64>,
    /// Seed of all that is drawn; overrides the study's
    #[arg(long, value_name = "N")]
    seed: Option<u64>,
}

/// Runs the command.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if let Some(path) = &args.new {
        return begin(path, common);
    }
    let path = args.file.as_ref().ok_or_else(|| Failure::new("name a study file"))?;
    let mut file = StudyFile::load(path)?;
    if let Some(seed) = args.seed {
        file.seed = seed;
    }
    // Rounded down to a power of two: the memory decides which answers are found, so a later
    // run keeps them although a little more or less is free by then.
    let mut limits = Limits::of(&file, 1 << default_memory().max(1).ilog2())?;
    if let Some(memory) = args.memory {
        limits.memory = memory;
    }
    if args.check {
        return price(&file, &limits, common);
    }
    let out = args.out.as_ref().ok_or_else(|| Failure::new("name a folder with --out"))?;
    let threads = file.budget.threads.filter(|_| !common.threads_given);
    match threads {
        Some(n) => rayon::ThreadPoolBuilder::new()
            .num_threads(n as usize)
            .build()?
            .install(|| answer(out, &file, &limits, common)),
        None => answer(out, &file, &limits, common),
    }
}

fn answer(
    out: &Path,
    file: &StudyFile,
    limits: &Limits,
    common: &Common,
) -> Result<Verdict, Failure> {
    let began = common.seconds();
    let mut provenance = Provenance {
        version: env!("CARGO_PKG_VERSION").into(),
        revision: revision(),
        command: command(),
        study_file: file.place.clone(),
        study_sha256: Sha256::digest(file.text.as_bytes())
            .iter()
            .map(|b| format!("{b:02x}"))
            .collect(),
        seed: file.seed,
        threads: rayon::current_num_threads() as u64,
        memory_bytes: limits.memory,
        machine: machine(),
        started: utc(SystemTime::now()),
        ..Provenance::default()
    };
    let mut stamp = |outcome: &Outcome| {
        provenance.wall_seconds = ((common.seconds() - began) * 1000.0).round() / 1000.0;
        provenance.answers_kept = outcome.kept as u64;
        provenance.answers_found = (outcome.done - outcome.kept) as u64;
        provenance.clone()
    };
    // Whatever is wrong with the study is found before the folder is touched.
    let prepared = run::prepare(file, common)?;
    std::fs::create_dir_all(out)
        .map_err(|cause| StudyError::Write { path: out.to_owned(), cause })?;
    let outcome = run::run(file, prepared, limits, out, common, |o| {
        write_tables(out, file, o, &stamp(o)).map(drop)
    })?;
    common.tell(News::Stage("report"));
    let (result, left_out) = write_results(out, file, &outcome, &stamp(&outcome))?;
    common.clear();
    for sentence in left_out {
        common.remark(format!("not drawn: {sentence}"));
    }
    if common.json {
        common.say_json(&json!({
            "study": result.name,
            "out": out,
            "complete": result.complete,
            "asked": result.asked,
            "answered": result.answered,
            "kept": outcome.kept,
            "seconds": common.seconds() - began,
            "seed": result.seed,
            "cases": result.cases.iter().map(|c| json!({
                "case": c.case,
                "tensors": c.tensors,
                "boundary": c.boundary,
                "counts": c.counts,
            })).collect::<Vec<_>>(),
        }))?;
    } else {
        table(&result, common);
        common.say(closing(out, common.seconds() - began, &result));
    }
    if !outcome.complete() {
        return Err(StudyError::Stopped { done: outcome.done, total: outcome.total }.into());
    }
    Ok(Verdict::Yes)
}

fn begin(path: &Path, common: &Common) -> Result<Verdict, Failure> {
    if path.exists() {
        return Err(Failure::new(format!("{} is there already", path.display())));
    }
    write_file(path, TEMPLATE.as_bytes())?;
    if common.json {
        common.say_json(&json!({ "file": path }))?;
    } else {
        common.say(format!(
            "{} is a study that runs as it stands; edit it, then: lierne study {} --check",
            path.display(),
            path.display()
        ));
    }
    Ok(Verdict::Yes)
}

/// Multiply-adds a second that the forecast assumes of one core.
const RATE: f64 = 4e9;

fn price(file: &StudyFile, limits: &Limits, common: &Common) -> Result<Verdict, Failure> {
    let prepared = run::prepare(file, common)?;
    let forecasts = check::forecast(file, &prepared, limits, common)?;
    common.clear();
    let rate = RATE * common.threads as f64;
    let seconds = |log10: Option<f64>| log10.map_or(0.0, |x| 10f64.powf(x) / rate);
    if common.json {
        let total: f64 = forecasts.iter().map(|f| seconds(f.log10_multiply_adds)).sum();
        common.say_json(&json!({
            "study": file.shown_name(),
            "cases": forecasts,
            "seconds_about": total,
            "memory_bytes": limits.memory,
        }))?;
        return Ok(Verdict::Yes);
    }
    for f in &forecasts {
        let mut parts = vec![format!("{} by geometry", f.geometry)];
        if f.finite_field > 0 {
            parts.push(format!("{} by finite field", f.finite_field));
        }
        if f.contraction > 0 {
            parts.push(format!(
                "{} by contraction: at most {} multiply-adds, about {}, {}",
                f.contraction,
                power(f.log10_multiply_adds.unwrap_or(0.0)),
                duration(seconds(f.log10_multiply_adds)),
                show_bytes(f.peak_bytes.unwrap_or(0) as f64)
            ));
        }
        if f.beyond > 0 {
            let dearest = f
                .log10_dearest_beyond
                .map_or_else(String::new, |x| format!(" (the dearest {} multiply-adds)", power(x)));
            parts.push(format!(
                "{} beyond the budget, to be bracketed by bounds{dearest}",
                f.beyond
            ));
        }
        common.say(format!(
            "{}: {} tensors, {} boundary legs, {} regions: {}",
            f.case,
            f.tensors,
            f.boundary,
            f.regions,
            parts.join(", ")
        ));
    }
    common.say("The study is sound; run it with --out DIR.");
    Ok(Verdict::Yes)
}

/// 10^12.4 as 2.5·10^12.
fn power(log10: f64) -> String {
    if log10 < 4.0 {
        return format!("{:.0}", 10f64.powf(log10));
    }
    let e = log10.floor();
    format!("{:.1}·10^{e:.0}", 10f64.powf(log10 - e))
}

fn duration(seconds: f64) -> String {
    match seconds {
        s if s < 1.0 => "less than a second".into(),
        s if s < 120.0 => format!("{s:.0} s"),
        s if s < 7200.0 => format!("{:.0} min", s / 60.0),
        s if s < 172_800.0 => format!("{:.0} h", s / 3600.0),
        s if s < 3.2e7 => format!("{:.0} days", s / 86_400.0),
        s => format!("{:.0e} years", s / 3.156e7),
    }
}

fn table(result: &StudyResult, common: &Common) {
    let used: Vec<Evidence> = Evidence::ALL
        .into_iter()
        .filter(|e| result.cases.iter().any(|c| c.counts.evidence.get(e.word()) > Some(&0)))
        .collect();
    let mut head = format!(
        "{:<14} {:>8} {:>9} {:>8} {:>9}",
        "case", "regions", "meet cut", "below", "undecided"
    );
    for e in &used {
        head.push_str(&format!(" {:>13}", e.word()));
    }
    common.say(&head);
    for c in &result.cases {
        let sum = |f: fn(&crate::study::result::KindCounts) -> u64| -> u64 {
            c.counts.kinds.values().map(f).sum()
        };
        let (all, meet, below) = (sum(|k| k.regions), sum(|k| k.meet_cut), sum(|k| k.below_cut));
        let mut line =
            format!("{:<14} {all:>8} {meet:>9} {below:>8} {:>9}", c.case, all - meet - below);
        for e in &used {
            line.push_str(&format!(
                " {:>13}",
                c.counts.evidence.get(e.word()).copied().unwrap_or(0)
            ));
        }
        common.say(line);
    }
}

fn closing(out: &Path, seconds: f64, result: &StudyResult) -> String {
    format!(
        "{} answers in {seconds:.1} s, seed {}. Results are in {}; open {} to explore them.",
        result.answered,
        result.seed,
        out.display(),
        out.join("report.html").display()
    )
}

/// The command as it was given, the program by its bare name.
fn command() -> String {
    let mut words = vec!["lierne".to_owned()];
    words.extend(std::env::args().skip(1).map(|a| {
        let plain =
            !a.is_empty() && a.chars().all(|c| c.is_ascii_alphanumeric() || "-_./=,:+".contains(c));
        if plain { a } else { format!("'{}'", a.replace('\'', "'\\''")) }
    }));
    words.join(" ")
}

/// The git revision of the source that the program was built from: the one that the build
/// was told, or, for a program that still lies in its source folder, the one checked out.
fn revision() -> Option<String> {
    if let Some(told) = option_env!("LIERNE_REVISION") {
        return Some(told.to_owned());
    }
    let source = Path::new(env!("CARGO_MANIFEST_DIR"));
    std::env::current_exe().ok()?.strip_prefix(source).ok()?;
    let git = source.join(".git");
    let head = std::fs::read_to_string(git.join("HEAD")).ok()?;
    match head.trim().strip_prefix("ref: ") {
        None => Some(head.trim().to_owned()),
        Some(name) => {
            let loose = std::fs::read_to_string(git.join(name)).ok();
            let packed = || {
                let list = std::fs::read_to_string(git.join("packed-refs")).ok()?;
                let line = list.lines().find(|l| l.ends_with(name))?.to_owned();
                line.split(' ').next().map(str::to_owned)
            };
            loose.or_else(packed).map(|r| r.trim().to_owned())
        }
    }
}

fn machine() -> String {
    let cpu = std::fs::read_to_string("/proc/cpuinfo").ok().and_then(|text| {
        let line = text.lines().find(|l| l.starts_with("model name"))?.to_owned();
        Some(line.split_once(':')?.1.trim().to_owned())
    });
    let cores = std::thread::available_parallelism().map_or(0, usize::from);
    let kind = format!("{}, {}", std::env::consts::OS, std::env::consts::ARCH);
    match cpu {
        Some(name) => format!("{kind}, {cores} cores, {name}"),
        None => format!("{kind}, {cores} cores"),
    }
}

/// A time as 2026-01-31T12:00:00Z.
fn utc(time: SystemTime) -> String {
    let s = time.duration_since(UNIX_EPOCH).map_or(0, |d| d.as_secs());
    let (days, rest) = (s / 86400, s % 86400);
    // Civil date from days since 1970-01-01: eras of 400 years begin on 1 March.
    let z = days + 719_468;
    let (era, doe) = (z / 146_097, z % 146_097);
    let yoe = (doe - doe / 1460 + doe / 36_524 - doe / 146_096) / 365;
    let doy = doe - (365 * yoe + yoe / 4 - yoe / 100);
    let mp = (5 * doy + 2) / 153;
    let day = doy - (153 * mp + 2) / 5 + 1;
    let month = if mp < 10 { mp + 3 } else { mp - 9 };
    let year = yoe + era * 400 + u64::from(month <= 2);
    format!(
        "{year:04}-{month:02}-{day:02}T{:02}:{:02}:{:02}Z",
        rest / 3600,
        rest / 60 % 60,
        rest % 60
    )
}

#[cfg(test)]
mod tests {
    use super::utc;
    use std::time::{Duration, UNIX_EPOCH};

    #[test]
    fn dates_are_civil() {
        let at = |s| utc(UNIX_EPOCH + Duration::from_secs(s));
        assert_eq!(at(0), "1970-01-01T00:00:00Z");
        assert_eq!(at(951_782_400), "2000-02-29T00:00:00Z");
        assert_eq!(at(1_767_225_599), "2025-12-31T23:59:59Z");
    }
}
