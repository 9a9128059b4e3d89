//! `lierne code NET distance`.

use super::{Code, Common, Failure, Verdict, leg};
use crate::code::bounds;
use crate::code::distance::{Request, search};
use crate::code::erasure::Target;
use serde_json::json;

/// Arguments of `distance`.
#[derive(Debug, clap::Args)]
pub(super) struct Args {
    /// A bulk leg by name, or `centre`; without it the whole code
    #[arg(long, value_name = "LEG")]
    leg: Option<String>,
    /// Time after which the search ends with bounds
    #[arg(long, value_name = "S", default_value_t = 60.0)]
    seconds: f64,
    /// Minimal supports to print
    #[arg(long, value_name = "N", default_value_t = 20)]
    supports: usize,
    /// Seed of the random sets that give the first upper bound
    #[arg(long, value_name = "N", default_value_t = 0)]
    seed: u64,
}

pub(super) fn run(code: &Code<'_>, args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let target = match &args.leg {
        None => Target::Every,
        Some(name) => Target::Leg(leg(code, name)?),
    };
    let request = Request { target, seconds: args.seconds, seed: args.seed, ..Request::default() };
    let (found, evidence) = if code.is_stabilizer() {
        (search(code, &request, common)?, "finite-field")
    } else {
        (bounds::by_closure(code, &request, common), "geometry")
    };
    let by_cuts = if target == Target::Every { bounds::by_cuts(code) } else { None };
    // A cut proves that some set hurts; ranks or closure may not have found one as small.
    let upper = found.upper.min(by_cuts.unwrap_or(usize::MAX));
    let distance = (found.lower == upper).then_some(upper);
    let what = match target {
        Target::Every => "code".to_owned(),
        Target::Leg(k) => code.bulk_name(k).to_owned(),
    };
    let evidence = if distance.is_some() { evidence } else { "bounds" };
    let supports: Vec<_> = found.supports.iter().take(args.supports).collect();
    if common.json {
        common.say_json(&json!({
            "of": what,
            "distance": distance,
            "lower": found.lower,
            "upper": upper,
            "upper_by_cuts": by_cuts,
            "minimal_supports": found.complete.then_some(found.supports.len()),
            "supports": supports,
            "evidence": evidence,
            "nodes": found.nodes,
            "seed": args.seed,
        }))?;
        return Ok(Verdict::Yes);
    }
    match distance {
        Some(d) => common.say(format_args!("distance of {what}: {d} (evidence: {evidence})")),
        None => common.say(format_args!(
            "distance of {what}: at least {}, at most {upper} (time or method gave no more)",
            found.lower
        )),
    }
    if found.complete {
        common.say(format_args!("minimal supports: {}", found.supports.len()));
    }
    for s in supports {
        let sites: Vec<String> = s.iter().map(u32::to_string).collect();
        common.say(format_args!("  {}", sites.join(",")));
    }
    if let Some(b) = by_cuts {
        common.say(format_args!("upper bound by minimal cuts: {b}"));
    }
    Ok(Verdict::Yes)
}
