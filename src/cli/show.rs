//! `lierne show`: what a network consists of.

use super::{Common, Failure, Verdict};
use crate::network::{Limits, Network, load};
use serde_json::{Map, Value, json};
use std::path::PathBuf;

/// Arguments of `lierne show`.
#[derive(Debug, clap::Args)]
pub struct Args {
    /// The network file
    #[arg(value_name = "NET")]
    network: PathBuf,
}

/// Runs the command.
///
/// # Errors
/// A sentence on what is wrong with the file.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let network = load(&args.network, &Limits::default())?;
    tell(&network, common)?;
    Ok(Verdict::Yes)
}

/// Says what a network consists of.
pub(super) fn tell(network: &Network, common: &Common) -> Result<(), Failure> {
    let mut map = Map::new();
    map.insert("name".into(), json!(network.name()));
    map.insert("tensors".into(), json!(network.tensors()));
    map.insert("bonds".into(), json!(network.bonds()));
    map.insert("boundary".into(), json!(network.boundary().len()));
    map.insert("bulk".into(), json!(network.bulk().len()));
    if let Some(layout) = network.layout()
        && !layout.ring.is_empty()
    {
        map.insert("rings".into(), json!(layout.ring_sizes()));
    }
    if common.json {
        return common.say_json(&map);
    }
    for (key, value) in &map {
        match value {
            Value::String(s) => common.say(format_args!("{key:<12}{s}")),
            other => common.say(format_args!("{key:<12}{other}")),
        }
    }
    Ok(())
}
