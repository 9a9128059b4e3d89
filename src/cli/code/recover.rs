//! `lierne code NET recover`.

use super::{Code, Common, Failure, Verdict, listed, names};
use crate::cli::common::{default_memory, parse_bytes, write_file};
use crate::code::reach::Reach;
use crate::code::recover::{Recovery, judge};
use crate::entropy;
use crate::network::Region;
use crate::study::picture;
use serde_json::json;
use std::path::PathBuf;

/// Boundary legs up to which the shortest intervals are found by ranks.
const EXACT_INTERVALS: usize = 400;
/// Boundary legs up to which they are found by closure.
const GREEDY_INTERVALS: usize = 6000;

/// Arguments of `recover`.
#[derive(Debug, clap::Args)]
pub(super) struct Args {
    /// Boundary sites, for example 0..5,8 (half open, wraps)
    #[arg(long, value_name = "REGION")]
    region: String,
    /// Leave out the shortest intervals that recover each bulk leg
    #[arg(long)]
    no_intervals: bool,
    /// Draw the network, bulk legs marked by who recovers them
    #[arg(long, value_name = "FILE.svg")]
    draw: Option<PathBuf>,
    /// Memory to use where something has to be contracted, for example 4GiB
    #[arg(long, value_name = "SIZE", value_parser = parse_bytes)]
    memory: Option<u64>,
}

pub(super) fn run(code: &Code<'_>, args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let region = Region::parse(&args.region, code.network())?;
    if let Some(&l) = region.bulk().first() {
        return Err(Failure::new(format!(
            "region {:?} names bulk leg {:?}; recover takes boundary sites only",
            args.region,
            code.network().label_name(l)
        )));
    }
    let budget = entropy::Request {
        memory_bytes: args.memory.unwrap_or_else(default_memory),
        ..entropy::Request::default()
    };
    let answer = judge(code, &region, &budget, common)?;
    let n = code.boundary();
    let exact = code.is_stabilizer() && n <= EXACT_INTERVALS;
    let reach = (!args.no_intervals && n <= GREEDY_INTERVALS)
        .then(|| if exact { Reach::exact(code, common) } else { Reach::greedy(code, common) });
    if let Some(path) = &args.draw {
        draw(code, &region, &answer, path)?;
    }
    let shown = region.show(code.network());
    let intervals: Vec<_> = reach
        .iter()
        .flat_map(|r| (0..code.bulk()).map(|k| (code.bulk_name(k), r.shortest(k))))
        .collect();
    let how = if exact { "finite-field" } else { "geometry" };
    if common.json {
        let intervals: Vec<_> = intervals
            .iter()
            .map(|(leg, s)| {
                json!({"leg": leg, "length": s.length, "starts": s.starts, "evidence": how})
            })
            .collect();
        common.say_json(&json!({
            "region": shown,
            "recoverable": names(code, &answer.recoverable),
            "from_complement": names(code, &answer.from_complement),
            "neither": names(code, &answer.neither),
            "undecided": names(code, &answer.undecided),
            "evidence": answer.evidence,
            "greedy": names(code, &answer.greedy),
            "greedy_from_complement": names(code, &answer.greedy_complement),
            "greedy_equals_exact": answer.greedy_is_exact,
            "intervals": intervals,
        }))?;
        return Ok(Verdict::Yes);
    }
    common.say(format_args!("region {shown} ({} of {n} sites)", region.sites()));
    common.say(format_args!("recoverable: {}", listed(&names(code, &answer.recoverable))));
    common.say(format_args!("from the rest: {}", listed(&names(code, &answer.from_complement))));
    common.say(format_args!("from neither: {}", listed(&names(code, &answer.neither))));
    if !answer.undecided.is_empty() {
        common.say(format_args!("undecided: {}", listed(&names(code, &answer.undecided))));
    }
    common.say(format_args!(
        "evidence: {}; closure alone finds {} of {} and {} of {}",
        answer.evidence,
        answer.greedy.len(),
        answer.recoverable.len(),
        answer.greedy_complement.len(),
        answer.from_complement.len()
    ));
    for (leg, s) in intervals {
        match s.length {
            Some(l) => common.say(format_args!(
                "{leg}: shortest intervals {l} sites, {} of them, the first from site {} ({how})",
                s.starts.len(),
                s.starts[0]
            )),
            None => common.say(format_args!("{leg}: no interval recovers it ({how})")),
        }
    }
    Ok(Verdict::Yes)
}

fn draw(
    code: &Code<'_>,
    region: &Region,
    answer: &Recovery,
    path: &std::path::Path,
) -> Result<(), Failure> {
    let net = code.network();
    let of = |k: usize| {
        if answer.recoverable.contains(&k) {
            picture::Reach::Region
        } else if answer.from_complement.contains(&k) {
            picture::Reach::Rest
        } else {
            picture::Reach::Nobody
        }
    };
    let marks = picture::Marks {
        region: Some(region.clone()),
        bulk: net.bulk().iter().enumerate().map(|(k, &l)| (l, of(k))).collect(),
        ..picture::Marks::default()
    };
    let scene = picture::Scene { network: net, marks, options: picture::Options::default() };
    write_file(path, scene.draw()?.svg.as_bytes())
}
