//! `lierne code NET weights`.

use super::{Code, Common, Failure, Verdict, count};
use crate::code::enumerator::enumerate;
use serde_json::json;

/// Arguments of `weights`.
#[derive(Debug, clap::Args)]
pub(super) struct Args {}

pub(super) fn run(code: &Code<'_>, _: &Args, common: &Common) -> Result<Verdict, Failure> {
    let e = enumerate(code)?;
    let counts = |v: &[u128]| v.iter().map(|&c| count(c)).collect::<Vec<_>>();
    if common.json {
        common.say_json(&json!({
            "boundary": code.boundary(),
            "bulk": code.bulk(),
            "stabilizer": counts(&e.stabilizer),
            "normalizer": counts(&e.normalizer),
            "distance": e.distance(),
        }))?;
        return Ok(Verdict::Yes);
    }
    common.say("weight  stabilizer  normalizer");
    for (w, (a, b)) in e.stabilizer.iter().zip(&e.normalizer).enumerate() {
        common.say(format_args!("{w:>6}{a:>12}{b:>12}"));
    }
    if let Some(d) = e.distance() {
        common.say(format_args!("distance {d}"));
    }
    Ok(Verdict::Yes)
}
