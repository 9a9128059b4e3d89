//! `lierne code NET erasure`.

use super::range::{Rates, Rings, rates, rings};
use super::{Args as CodeArgs, Code, Common, Failure, Verdict, count, leg};
use crate::cli::common::write_file;
use crate::code::CodeError;
use crate::code::erasure::{Request, Survival, Target, Work, run as sample};
use crate::code::reach::{Bursts, Reach};
use crate::code::strata::{Crossing, Tally, crossing};
use crate::code::tree::Tree;
use crate::network::Network;
use crate::study::picture::{Axis, Chart, Look, Point, Series};
use crate::watch::{News, Watch};
use serde::{Deserialize, Serialize};
use serde_json::{Value, json};
use std::cell::Cell;
use std::collections::BTreeMap;
use std::fmt::Write;
use std::path::{Path, PathBuf};

/// Boundary legs up to which ranks are used without being asked for.
const EXACT: usize = 400;
/// Seconds between two writings of the saved work.
const SAVE_EVERY: f64 = 2.0;

/// Arguments of `erasure`.
#[derive(Debug, clap::Args)]
pub(super) struct Args {
    /// Erasure rates: 0.1,0.2 or 0.05..0.6:0.05 (both ends taken)
    #[arg(long, value_name = "RATES", value_parser = rates, default_value = "0.05..0.6:0.05")]
    p: Rates,
    /// Samples a rate
    #[arg(long, value_name = "N", default_value_t = 10_000)]
    samples: u64,
    /// Seed of every random choice
    #[arg(long, value_name = "N", default_value_t = 0)]
    seed: u64,
    /// Whose survival: `centre`, `all`, or a bulk leg by name
    #[arg(long, value_name = "LEGS", default_value = "centre")]
    legs: String,
    /// Numbers of rings to compare, 1..4 (both ends taken); the file must be a recipe
    #[arg(long, value_name = "RINGS", value_parser = rings)]
    rings: Option<Rings>,
    /// Judge by ranks too, however large the code is
    #[arg(long, conflicts_with = "greedy")]
    exact: bool,
    /// Judge by closure alone
    #[arg(long)]
    greedy: bool,
    /// Erasure sets that are listed one by one instead of sampled, fewest erasures first
    #[arg(long, value_name = "N", default_value_t = 1 << 18)]
    listed: u64,
    /// Also judge every burst: erased legs next to each other
    #[arg(long)]
    bursts: bool,
    /// Write one row a rate, ring and judgement
    #[arg(long, value_name = "FILE.csv")]
    csv: Option<PathBuf>,
    /// Write a chart of survival against rate
    #[arg(long, value_name = "FILE.svg")]
    chart: Option<PathBuf>,
    /// Keep finished samples in this file and go on from those found there
    #[arg(long, value_name = "FILE.json")]
    resume: Option<PathBuf>,
}

/// Saved work, by number of rings (`as-written` for the file's own).
#[derive(Debug, Default, Serialize, Deserialize)]
struct Saved(BTreeMap<String, Work>);

/// One code of the sweep.
struct Row {
    rings: Option<u32>,
    boundary: usize,
    bulk: usize,
    of: String,
    survival: Survival,
    tree: Option<(Vec<f64>, Option<Vec<u128>>)>,
    bursts: Option<(Bursts, &'static str)>,
}

pub(super) fn run(code: &CodeArgs, args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let mut saved = match &args.resume {
        Some(path) if path.exists() => {
            let text = std::fs::read_to_string(path)
                .map_err(|e| Failure::new(format!("cannot read {}: {e}", path.display())))?;
            serde_json::from_str(&text).map_err(|e| Failure::from(e).at(path.display()))?
        }
        _ => Saved::default(),
    };
    let list: Vec<Option<u32>> = match &args.rings {
        None => vec![None],
        Some(r) => r.0.iter().copied().map(Some).collect(),
    };
    let mut rows = Vec::new();
    for rings in list {
        let network = code.load(rings)?;
        if let Some(ring) = rings {
            grown(&network, ring)?;
            common.tell(News::Stage(&format!("{} boundary legs", network.boundary().len())));
        }
        let wants_ranks = !args.greedy && (args.exact || network.boundary().len() <= EXACT);
        let code =
            if wants_ranks { Code::prepared(&network, common)? } else { Code::of(&network)? };
        if args.exact && !code.is_stabilizer() {
            return Err(Failure::new(format!(
                "--exact needs a network of stabilizer tensors, which {:?} is not known to be",
                network.name()
            )));
        }
        let row = one(&code, args, rings, &mut saved, common)?;
        let finished = row.survival.finished;
        rows.push(row);
        if !finished {
            return Err(Failure::new(match &args.resume {
                Some(path) => format!(
                    "stopped before all samples were taken; the same command goes on from {}",
                    path.display()
                ),
                None => "stopped before all samples were taken; --resume FILE would have kept them"
                    .to_owned(),
            }));
        }
    }
    let crossings = crossings(&rows, args);
    if let Some(path) = &args.csv {
        write_file(path, csv(&rows, args).as_bytes())?;
    }
    if let Some(path) = &args.chart {
        write_file(path, chart(&rows, args)?.as_bytes())?;
    }
    if common.json {
        common.say_json(&to_json(&rows, &crossings, args))?;
    } else {
        tell(&rows, &crossings, args, common);
    }
    Ok(Verdict::Yes)
}

/// Refuses a network whose file does not grow it by as many rings as asked.
fn grown(network: &Network, ring: u32) -> Result<(), Failure> {
    let name = || network.name().to_owned();
    let layout = network.layout().filter(|l| !l.ring.is_empty());
    let Some(layout) = layout else { return Err(CodeError::NoRings { network: name() }.into()) };
    let last = layout.ring.iter().copied().max().unwrap_or(0);
    if layout.tiling.is_some() && last != ring {
        return Err(CodeError::NoSuchRing { ring, network: name(), last }.into());
    }
    Ok(())
}

fn one(
    code: &Code<'_>,
    args: &Args,
    rings: Option<u32>,
    saved: &mut Saved,
    common: &Common,
) -> Result<Row, Failure> {
    let target = match args.legs.as_str() {
        "all" if code.find_bulk("all").is_err() => Target::Every,
        name => Target::Leg(leg(code, name)?),
    };
    let request = Request {
        rates: args.p.0.clone(),
        samples: args.samples,
        seed: args.seed,
        target,
        exact: !args.greedy,
        listed: u128::from(args.listed),
    };
    let key = rings.map_or_else(|| "as-written".to_owned(), |r| r.to_string());
    let mut failure = None;
    let written = Cell::new(common.seconds());
    let begin = saved.0.remove(&key);
    let survival = sample(code, &request, begin, common, &mut |work| {
        let Some(path) = &args.resume else { return };
        saved.0.insert(key.clone(), work.clone());
        if common.stop() || common.seconds() - written.get() > SAVE_EVERY {
            written.set(common.seconds());
            failure = failure.take().or(save(path, saved).err());
        }
    })?;
    if let Some(path) = &args.resume {
        save(path, saved)?;
    }
    if let Some(f) = failure {
        return Err(f);
    }
    let tree = match target {
        Target::Leg(k) if !args.greedy => Tree::of(code, k).map(|t| {
            let lost = args.p.0.iter().map(|&p| t.lost(p)).collect();
            (lost, t.polynomial().ok())
        }),
        _ => None,
    };
    let bursts = args.bursts.then(|| {
        if code.is_stabilizer() {
            (Reach::exact(code, common).bursts(target), "finite-field")
        } else {
            (Reach::greedy(code, common).bursts(target), "geometry")
        }
    });
    let of = match target {
        Target::Every => "all".to_owned(),
        Target::Leg(k) => code.bulk_name(k).to_owned(),
    };
    Ok(Row { rings, boundary: code.boundary(), bulk: code.bulk(), of, survival, tree, bursts })
}

fn save(path: &Path, saved: &Saved) -> Result<(), Failure> {
    write_file(path, &serde_json::to_vec(saved)?)
}

/// Where the curves of neighbouring numbers of rings cross, by judgement.
fn crossings(rows: &[Row], args: &Args) -> Vec<(u32, u32, &'static str, Option<Crossing>)> {
    let (from, to) = (args.p.0[0], args.p.0[args.p.0.len() - 1]);
    let mut out = Vec::new();
    for pair in rows.windows(2) {
        let (Some(a), Some(b)) = (pair[0].rings, pair[1].rings) else { continue };
        let mut put = |how, inner: Option<Vec<Tally>>, outer: Option<Vec<Tally>>| {
            if let (Some(i), Some(o)) = (inner, outer) {
                out.push((a, b, how, crossing(&i, &o, from, to)));
            }
        };
        put("greedy", Some(pair[0].survival.greedy()), Some(pair[1].survival.greedy()));
        put("exact", pair[0].survival.exact(), pair[1].survival.exact());
    }
    out
}

fn to_json(
    rows: &[Row],
    crossings: &[(u32, u32, &'static str, Option<Crossing>)],
    args: &Args,
) -> Value {
    let codes: Vec<Value> = rows
        .iter()
        .map(|r| {
            let points: Vec<Value> = args
                .p
                .0
                .iter()
                .enumerate()
                .map(|(i, &p)| {
                    let mut v = json!(r.survival.at(p));
                    if let Some((lost, _)) = &r.tree {
                        v["tree"] = json!(lost[i]);
                    }
                    v
                })
                .collect();
            let polynomial = r
                .survival
                .polynomial()
                .map(|(greedy, exact)| json!({"greedy": greedy, "exact": exact}));
            let tree = r
                .tree
                .as_ref()
                .and_then(|t| t.1.as_ref())
                .map(|c| c.iter().map(|&x| count(x)).collect::<Vec<_>>());
            let bursts = r.bursts.as_ref().map(|(b, how)| {
                json!({"losing": b.losing, "shortest": b.shortest, "safe": b.safe, "evidence": how})
            });
            json!({
                "rings": r.rings,
                "boundary": r.boundary,
                "bulk": r.bulk,
                "legs": r.of,
                "points": points,
                "failing_sets": polynomial,
                "failing_sets_tree": tree,
                "bursts": bursts,
            })
        })
        .collect();
    let crossings: Vec<Value> = crossings
        .iter()
        .map(|(a, b, how, c)| {
            json!({"rings": [a, b], "judgement": how, "p": c.map(|c| c.p), "error": c.map(|c| c.error)})
        })
        .collect();
    json!({"samples": args.samples, "seed": args.seed, "codes": codes, "crossings": crossings})
}

fn tell(
    rows: &[Row],
    crossings: &[(u32, u32, &'static str, Option<Crossing>)],
    args: &Args,
    common: &Common,
) {
    for r in rows {
        let rings = r.rings.map_or_else(String::new, |x| format!("{x} rings, "));
        common.say(format_args!(
            "{rings}[[{},{}]], survival of {}, {} samples a rate, seed {}",
            r.boundary, r.bulk, r.of, args.samples, args.seed
        ));
        common
            .say("     p   greedy failure (95 % interval)          exact failure (95 % interval)");
        for (i, &p) in args.p.0.iter().enumerate() {
            let at = r.survival.at(p);
            let show = |e: crate::code::strata::Estimate| {
                format!("{:.4e} ({:.3e} to {:.3e})", e.value, e.low, e.high)
            };
            let exact = match (&r.tree, at.exact) {
                (Some((lost, _)), _) => format!("{:.10e} (tree, no sampling)", lost[i]),
                (None, Some(e)) => show(e),
                (None, None) => "not asked".to_owned(),
            };
            common.say(format_args!("{p:>6.4}   {:<38}  {exact}", show(at.greedy)));
        }
        if let Some((greedy, exact)) = r.survival.polynomial() {
            common.say(format_args!("failing sets by number of erasures, greedy: {greedy:?}"));
            if let Some(e) = exact {
                common.say(format_args!("failing sets by number of erasures, exact: {e:?}"));
            }
        }
        if let Some((b, how)) = &r.bursts {
            match b.shortest {
                Some(s) => common.say(format_args!(
                    "bursts: every one of {} legs is survived; {} of {} of {s} legs are not ({how})",
                    b.safe, b.losing[s], r.boundary
                )),
                None => common.say(format_args!("bursts: none loses it ({how})")),
            }
        }
    }
    for (a, b, how, c) in crossings {
        match c {
            Some(c) => common.say(format_args!(
                "{a} and {b} rings cross at p = {:.4} ± {:.4} ({how})",
                c.p, c.error
            )),
            None => common.say(format_args!(
                "{a} and {b} rings do not cross between the rates asked ({how})"
            )),
        }
    }
}

fn csv(rows: &[Row], args: &Args) -> String {
    let mut out = String::from(
        "rings,boundary_legs,bulk_legs,legs,judgement,erasure_rate,failure,failure_low95,failure_high95,survival\n",
    );
    for r in rows {
        let rings = r.rings.map_or_else(String::new, |x| x.to_string());
        for (i, &p) in args.p.0.iter().enumerate() {
            let at = r.survival.at(p);
            let mut put = |how: &str, v: f64, low: f64, high: f64| {
                let _ = writeln!(
                    out,
                    "{rings},{},{},{},{how},{p},{v:e},{low:e},{high:e},{}",
                    r.boundary,
                    r.bulk,
                    r.of,
                    1.0 - v
                );
            };
            put("greedy", at.greedy.value, at.greedy.low, at.greedy.high);
            if let Some(e) = at.exact {
                put("exact", e.value, e.low, e.high);
            }
            if let Some((lost, _)) = &r.tree {
                put("tree", lost[i], lost[i], lost[i]);
            }
        }
    }
    out
}

fn chart(rows: &[Row], args: &Args) -> Result<String, Failure> {
    let mut series = Vec::new();
    for r in rows {
        let name = |how: &str| match r.rings {
            Some(x) => format!("{x} rings, {how}"),
            None => how.to_owned(),
        };
        let points = |of: &dyn Fn(f64) -> crate::code::strata::Estimate| {
            args.p
                .0
                .iter()
                .map(|&p| {
                    let e = of(p);
                    Point::between(p, 1.0 - e.value, 1.0 - e.high, 1.0 - e.low)
                })
                .collect::<Vec<_>>()
        };
        series.push(Series::new(name("greedy"), Look::Line, points(&|p| r.survival.at(p).greedy)));
        if let Some(exact) = r.survival.exact() {
            let at = |p| crate::code::strata::probability(&exact, p, crate::code::strata::Z95);
            series.push(Series::new(name("exact"), Look::Line, points(&at)));
        }
    }
    let chart = Chart {
        title: format!("survival of {} under located erasures", args.legs),
        x: Axis::linear("erasure rate"),
        y: Axis::linear("probability of survival").between(0.0, 1.0),
        series,
        ..Chart::default()
    };
    Ok(chart.draw()?)
}
