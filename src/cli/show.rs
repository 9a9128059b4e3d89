//! `lierne show`: what a network consists of.

use super::{Common, Failure, Verdict};
use crate::network::{Limits, Network, Survey, load};
use std::collections::BTreeMap;
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
    tell(Survey::of(&network), common)?;
    Ok(Verdict::Yes)
}

/// Says what a network that was just written consists of; of a large one not whether it is
/// planar, which would take longer than to grow it.
pub(super) fn tell_grown(network: &Network, common: &Common) -> Result<(), Failure> {
    let large = network.labels() > 200_000;
    let survey = if large { Survey::without_planarity(network) } else { Survey::of(network) };
    tell(survey, common)
}

fn tell(s: Survey, common: &Common) -> Result<(), Failure> {
    if common.json {
        return common.say_json(&s);
    }
    let say = |key: &str, value: String| common.say(format_args!("{key:<16} {value}"));
    let list = |map: &BTreeMap<usize, usize>, of: &str| {
        let parts: Vec<String> = map.iter().map(|(k, n)| format!("{n} {of} {k}")).collect();
        parts.join(", ")
    };
    say("name", s.name);
    say("tensors", s.tensors.to_string());
    for (block, count) in &s.blocks {
        say("", format!("{count} × {block}"));
    }
    let hyper = match s.hyperedges {
        0 => String::new(),
        n => format!(", {n} of them on three tensors or more"),
    };
    say("bonds", format!("{}{hyper}", s.bonds));
    say("boundary legs", s.boundary.to_string());
    if let Some(cycles) = s.cycles_of_the_boundary.filter(|c| c.len() > 1) {
        let parts: Vec<String> = cycles.iter().map(u32::to_string).collect();
        say("", format!("in cycles of {}", parts.join(", ")));
    }
    say("bulk legs", s.bulk.to_string());
    if s.summed > 0 {
        say("summed legs", s.summed.to_string());
    }
    if let Some(rings) = s.rings {
        let parts: Vec<String> = rings.iter().map(usize::to_string).collect();
        say("rings", parts.join(", "));
    }
    say("dimensions", list(&s.dimensions, "of"));
    say("largest leg", s.largest_leg.to_string());
    say("largest tensor", format!("2^{:.2} elements", s.log2_largest_tensor));
    say("bonds a tensor", list(&s.degrees, "with"));
    say("parts", s.components.to_string());
    say("cycles", s.cycles.to_string());
    if let (Some(planar), Some(in_a_disk)) = (s.planar, s.planar_in_a_disk) {
        let words = match (planar, in_a_disk) {
            (false, _) => "no",
            (true, false) => "yes, but not with its boundary in this order on the rim of a disk",
            (true, true) => "yes, with its boundary in this order on the rim of a disk",
        };
        say("planar", words.to_owned());
    }
    if let Some(t) = s.tiling {
        say("tiling", format!("{{{},{}}}, {}", t.polygon, t.around, t.curvature));
        say("edge", format!("{:.9}", t.edge));
        say("inradius", format!("{:.9}, drawn {:.9}", t.inradius, t.edge_middle_drawn));
        say("circumradius", format!("{:.9}, drawn {:.9}", t.circumradius, t.vertex_drawn));
        say("area of a tile", format!("{:.9}", t.area));
        say("growth rate", format!("{:.6} a ring by the vertex rule", t.growth_rate));
    }
    Ok(())
}
