//! `lierne draw`: a network as a picture.

use super::common::{default_memory, write_file};
use super::{Common, Failure, Verdict};
use crate::code::Code;
use crate::code::recover::judge;
use crate::entropy::closure::Side;
use crate::entropy::{Asker, Request, Wires};
use crate::network::{Limits, Network, Overrides, Region, TensorId, from_toml, load};
use crate::study::picture::{Ink, Marks, Options, Picture, Reach, Scene, Share, png};
use crate::study::{StudyFile, case};
use crate::tensor::Label;
use serde_json::json;
use std::path::{Path, PathBuf};

/// Arguments of `lierne draw`.
#[derive(Debug, clap::Args)]
#[command(after_help = "\
Examples:
  lierne draw networks/six-level-squares.toml --out squares.svg
  lierne draw net.toml --region 0..5 --cut --closure --out region.svg --png
  lierne draw code.toml --region 0..12 --recover --label --out code.png --pixels 2008

A drawing is made for one journal column: 85 mm wide, text of 6 points. Hyperbolic tilings
are drawn in the Poincaré disk; tiles smaller than a printed dot are left out.")]
pub struct Args {
    /// The network file; of a study file, the first network is drawn
    #[arg(value_name = "NET")]
    network: PathBuf,
    /// File to write, .svg or .png; without it the SVG goes to stdout
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,
    /// Write a PNG beside the SVG
    #[arg(long, requires = "out")]
    png: bool,
    /// Boundary region whose sites are coloured, as 0..5 or 0..3,7..9
    #[arg(long, value_name = "REGION")]
    region: Option<String>,
    /// Draw the minimal cut of the region
    #[arg(long, requires = "region")]
    cut: bool,
    /// Shade what the region and its complement absorb; the core stays plain
    #[arg(long, requires = "region")]
    closure: bool,
    /// Shade the bulk legs that the region, or its complement, can recover
    #[arg(long, requires = "region")]
    recover: bool,
    /// Write the names of tensors beside them, where there is room
    #[arg(long)]
    label: bool,
    /// A line above the drawing
    #[arg(long, value_name = "TEXT")]
    title: Option<String>,
    /// Light lines on dark paper
    #[arg(long)]
    dark: bool,
    /// Width on paper in millimetres
    #[arg(long, value_name = "MM", default_value_t = 85.0, value_parser = width)]
    width: f64,
    /// Width of the PNG in pixels; 1004 are 300 to the inch at 85 mm
    #[arg(long, value_name = "N", default_value_t = 1004,
          value_parser = clap::value_parser!(u32).range(16..=20_000))]
    pixels: u32,
}

fn width(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        Ok(w) if (10.0..=2000.0).contains(&w) => Ok(w),
        _ => Err(format!("{text:?} is no width; between 10 and 2000 (millimetres) is taken")),
    }
}

/// Runs the command.
///
/// # Errors
/// A sentence on what is wrong with the network, the region or the file to write.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let kind = match &args.out {
        None => "svg",
        Some(path) => match path.extension().and_then(|e| e.to_str()) {
            Some("svg") => "svg",
            Some("png") => "png",
            _ => {
                return Err(Failure::new(format!(
                    "{} ends in neither .svg nor .png",
                    path.display()
                )));
            }
        },
    };
    if args.out.is_none() && common.json {
        return Err(Failure::new("with --json the picture needs a file; name one with --out"));
    }
    let network = network_of(&args.network)?;
    let marks = marks(args, &network, common)?;
    let options = Options {
        width_mm: args.width,
        ink: if args.dark { Ink::Dark } else { Ink::Light },
        names: args.label,
        title: args.title.clone(),
        ..Options::default()
    };
    let picture = Scene { network: &network, marks, options }.draw()?;
    let Some(out) = &args.out else {
        common.say(picture.svg.trim_end());
        return Ok(Verdict::Yes);
    };
    let mut files: Vec<(PathBuf, usize)> = Vec::new();
    let mut keep = |path: &Path, bytes: &[u8]| -> Result<(), Failure> {
        write_file(path, bytes)?;
        files.push((path.to_path_buf(), bytes.len()));
        Ok(())
    };
    // Pixels first: where they fail, no file is left behind.
    let pixels =
        if kind == "png" || args.png { Some(png(&picture.svg, args.pixels)?) } else { None };
    if kind == "svg" {
        keep(out, picture.svg.as_bytes())?;
    }
    if let Some(pixels) = pixels {
        keep(&out.with_extension("png"), &pixels)?;
    }
    tell(common, &network, &picture, &files)?;
    Ok(Verdict::Yes)
}

fn tell(
    common: &Common,
    network: &Network,
    picture: &Picture,
    files: &[(PathBuf, usize)],
) -> Result<(), Failure> {
    let drawn = picture.drawn;
    if common.json {
        return common.say_json(&json!({
            "files": files.iter().map(|(path, bytes)| json!({
                "file": path.display().to_string(),
                "bytes": bytes,
            })).collect::<Vec<_>>(),
            "tensors": network.tensors(),
            "tensors_drawn": drawn.tensors,
            "bonds": network.bonds(),
            "bonds_drawn": drawn.bonds,
            "boundary": network.boundary().len(),
            "sites_drawn": drawn.sites,
        }));
    }
    for (path, bytes) in files {
        common.say(format_args!("{}  {bytes} bytes", path.display()));
    }
    if drawn.tensors < network.tensors() {
        common.remark(format_args!(
            "{} of {} tensors are large enough to be drawn",
            drawn.tensors,
            network.tensors()
        ));
    }
    Ok(())
}

/// What is marked on the picture.
fn marks(args: &Args, network: &Network, common: &Common) -> Result<Marks, Failure> {
    let Some(text) = &args.region else { return Ok(Marks::default()) };
    let region = Region::parse(text, network)?;
    let mut marks = Marks::default();
    let wires = Wires::of(network);
    let inside = wires.inside(&region);
    if args.cut || args.closure {
        let asker = Asker::new(&wires, Request::default());
        let (closure, cut) = asker.close(&inside);
        let owner = &closure.owner[..network.tensors()];
        if args.cut {
            // Of several minimal cuts, the one where the region's share ends.
            let front = front(network, &region, owner);
            let nats: f64 = front.iter().map(|&l| (network.dim(l) as f64).ln()).sum();
            marks.cut = if (nats - cut.nats).abs() < 1e-9 { front } else { cut.near };
        }
        if args.closure {
            marks.shares = owner
                .iter()
                .map(|owner| match owner {
                    Some(Side::Region) => Share::Region,
                    Some(Side::Complement) => Share::Rest,
                    None => Share::Core,
                })
                .collect();
        }
    }
    if args.recover {
        if network.bulk().is_empty() {
            return Err(Failure::new("--recover: the network has no bulk legs"));
        }
        marks.bulk = recoverable(network, &region, common)?;
    }
    marks.region = Some(region);
    Ok(marks)
}

/// The labels that join what the region absorbed, its own legs included, to the rest.
fn front(network: &Network, region: &Region, owner: &[Option<Side>]) -> Vec<Label> {
    let mut open: Vec<Option<bool>> = vec![None; network.labels()];
    for (site, l) in network.boundary().iter().enumerate() {
        open[l.index()] = Some(region.flags()[site]);
    }
    for l in network.bulk() {
        open[l.index()] = Some(region.bulk().contains(l));
    }
    (0..network.labels() as u32)
        .map(Label::new)
        .filter(|&l| {
            let mine = |t: &TensorId| owner[t.index()] == Some(Side::Region);
            let holders = network.holders(l);
            let outside = open[l.index()];
            let some = holders.iter().any(mine) || outside == Some(true);
            let all = holders.iter().all(mine) && outside != Some(false);
            some && !all
        })
        .collect()
}

/// Who can recover each bulk leg; those that the default budget leaves open get no mark.
fn recoverable(
    network: &Network,
    region: &Region,
    common: &Common,
) -> Result<Vec<(Label, Reach)>, Failure> {
    let code = Code::prepared(network, common)?;
    let budget = Request { memory_bytes: default_memory(), ..Request::default() };
    let answer = judge(&code, region, &budget, common)?;
    common.clear();
    let lists = [
        (&answer.recoverable, Reach::Region),
        (&answer.from_complement, Reach::Rest),
        (&answer.neither, Reach::Nobody),
    ];
    if !answer.undecided.is_empty() {
        common.remark(format_args!(
            "{} bulk legs are undecided and stay unmarked",
            answer.undecided.len()
        ));
    }
    Ok(lists
        .into_iter()
        .flat_map(|(legs, reach)| legs.iter().map(move |&k| (network.bulk()[k], reach)))
        .collect())
}

/// The network of a file; of a study file, the first that it asks about.
fn network_of(path: &Path) -> Result<Network, Failure> {
    let limits = Limits::default();
    let error = match load(path, &limits) {
        Ok(network) => return Ok(network),
        Err(error) => error,
    };
    // A study file is no network file; whatever else is wrong is told as the network's.
    let Ok(study) = StudyFile::load(path) else { return Err(error.into()) };
    let cases = case::all(&study)?;
    let first = cases.first().ok_or(error)?;
    Ok(from_toml(&first.table, &first.folder, &first.id, &limits, &Overrides::default())?)
}
