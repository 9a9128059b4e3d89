//! `lierne block list`.

use super::super::{Common, Failure, Verdict};
use super::legs_in_words;
use crate::block;
use serde_json::json;

/// Arguments of `lierne block list`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// Run every built-in proof again and print a line each
    #[arg(long)]
    verify: bool,
}

pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    if args.verify {
        return verify(common);
    }
    if common.json {
        let families: Vec<_> = block::families()
            .iter()
            .map(|f| {
                json!({
                    "name": f.name,
                    "legs": f.legs.to_string(),
                    "dimensions": f.dimensions,
                    "construction": f.construction,
                    "source": f.source,
                    "stabilizer": f.stabilizer,
                    "isometric": f.isometric,
                    "options": f.options,
                })
            })
            .collect();
        common.say_json(&json!({ "families": families }))?;
        return Ok(Verdict::Yes);
    }
    for f in block::families() {
        common.say(f.name);
        common.say(format!("  legs          {}", f.legs));
        common.say(format!("  dimensions    {}", f.dimensions));
        common.say(format!("  construction  {}", f.construction));
        common.say(format!("  source        {}", f.source));
        common.say(format!("  stabilizer    {}", f.stabilizer));
        common.say(format!("  isometric     {}", f.isometric));
    }
    Ok(Verdict::Yes)
}

fn verify(common: &Common) -> Result<Verdict, Failure> {
    let mut lines = Vec::new();
    let mut failed = 0;
    let good = block::verify_all(common, |v| {
        failed += usize::from(v.fault.is_some());
        if common.json {
            lines.push(json!({
                "block": v.name,
                "dimensions": v.dims,
                "proven": v.fault.is_none(),
                "how": v.how,
                "fault": v.fault,
            }));
        } else {
            let legs = legs_in_words(&v.dims);
            match &v.fault {
                None => common.say(format!("proven  {}, {legs}: {}", v.name, v.how)),
                Some(fault) => common.say(format!("FAILED  {}, {legs}: {fault}", v.name)),
            }
        }
    });
    if common.json {
        common.say_json(&json!({ "proofs": lines, "failed": failed }))?;
    }
    Ok(if good { Verdict::Yes } else { Verdict::No })
}
