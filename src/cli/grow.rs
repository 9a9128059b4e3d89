//! `lierne grow`: writes a network of a known family.

use super::common::write_file;
use super::{Common, Failure, Verdict, show};
use crate::network::{
    Format, Limits, NamedBlock, Recipe, Selection, TilingRecipe, Turns, save, to_bytes,
};
use crate::tiling::{Centre, Growth, Rule, Tiling};
use clap::{Subcommand, ValueEnum};
use std::path::{Path, PathBuf};

/// Arguments of `lierne grow`.
#[derive(Debug, clap::Args)]
pub struct Args {
    #[command(subcommand)]
    family: Family,
}

#[derive(Debug, Subcommand)]
enum Family {
    /// A patch of a regular tiling {p,q}, ring by ring, one tensor a tile
    Tiling(TilingArgs),
}

#[derive(Debug, clap::Args)]
struct Output {
    /// File to write, .toml or .json; without it the network goes to stdout as TOML
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,
    /// Write the recipe instead of the explicit network
    #[arg(long)]
    recipe: bool,
    /// Name of the network
    #[arg(long, value_name = "TEXT")]
    name: Option<String>,
    /// Dimension of every leg
    #[arg(long, default_value_t = 3, value_name = "D",
          value_parser = clap::value_parser!(u32).range(1..))]
    dimension: u32,
    /// Most tensors that are made
    #[arg(long, value_name = "N", default_value_t = Limits::default().tensors)]
    most_tensors: u64,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum GrowthWord {
    /// A ring adds every tile that shares a vertex with the patch
    Vertex,
    /// A ring adds every tile that shares an edge with the patch
    Edge,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum CentreWord {
    /// Ring 0 is one tile
    Tile,
    /// Ring 0 is the tiles round one vertex
    Vertex,
}

#[derive(Debug, clap::Args)]
struct TilingArgs {
    /// Sides of a tile; several alternate by ring, as 5,6
    #[arg(long, value_name = "P", value_delimiter = ',', required = true)]
    polygon: Vec<u64>,
    /// Tiles at a vertex
    #[arg(long, value_name = "Q")]
    around: u64,
    /// Rings beside ring 0
    #[arg(long, value_name = "N")]
    rings: u32,
    /// Which tiles a ring adds
    #[arg(long, value_enum, default_value = "vertex")]
    growth: GrowthWord,
    /// From where the patch grows
    #[arg(long, value_enum, default_value = "tile")]
    centre: CentreWord,
    /// Keep the last of several polygons for all later rings instead of beginning again
    #[arg(long)]
    keep_last: bool,
    /// Block of every tile; several alternate by ring. Without it a tile gets the perfect
    /// block with as many legs as it needs
    #[arg(long, value_name = "NAME", value_delimiter = ',')]
    block: Vec<String>,
    /// Tiles with a bulk leg: none, all, centre, rings:0,2 or tiles:3,5..8
    #[arg(long, value_name = "TILES", default_value = "none")]
    bulk: String,
    /// Dimension of the bulk legs, where it is not that of the others
    #[arg(long, value_name = "D")]
    bulk_dimension: Option<usize>,
    /// State to which every bulk leg is fixed: basis, plus or random-state
    #[arg(long, value_name = "NAME")]
    bulk_state: Option<String>,
    /// Tiles to take out, as for --bulk; what lay beside them becomes boundary
    #[arg(long, value_name = "TILES", default_value = "none")]
    remove: String,
    /// By how many sides blocks are turned; several alternate by ring
    #[arg(long, value_name = "K", value_delimiter = ',')]
    turn: Vec<u32>,
    #[command(flatten)]
    output: Output,
}

/// Runs the command.
///
/// # Errors
/// A sentence on what cannot be grown or written.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    match &args.family {
        Family::Tiling(a) => deliver(&Recipe::Tiling(a.recipe()?), &a.output, common),
    }
}

impl TilingArgs {
    fn recipe(&self) -> Result<TilingRecipe, Failure> {
        for &p in &self.polygon {
            Tiling::new(p, self.around)?;
        }
        let select = |text: &str, flag: &str| {
            Selection::parse(text).ok_or_else(|| {
                Failure::new(format!(
                    "{flag} {text:?}: write none, all, centre, rings:0,2 or tiles:3,5..8"
                ))
            })
        };
        let growth = Growth {
            polygons: self.polygon.iter().map(|&p| p as u32).collect(),
            keep_last: self.keep_last,
            around: self.around as u32,
            rings: self.rings,
            centre: match self.centre {
                CentreWord::Tile => Centre::Tile,
                CentreWord::Vertex => Centre::Vertex,
            },
            rule: match self.growth {
                GrowthWord::Vertex => Rule::Vertex,
                GrowthWord::Edge => Rule::Edge,
            },
        };
        let mut recipe = TilingRecipe::new(growth);
        let mut blocks: Vec<_> = self.block.iter().map(NamedBlock::family).collect();
        if blocks.len() == 1 {
            recipe.block = blocks.pop();
        } else {
            recipe.blocks = blocks;
        }
        recipe.turns = Turns(self.turn.clone());
        recipe.bulk = select(&self.bulk, "--bulk")?;
        recipe.bulk_dimension = self.bulk_dimension;
        recipe.bulk_state = self.bulk_state.as_ref().map(NamedBlock::family);
        recipe.remove = select(&self.remove, "--remove")?;
        Ok(recipe)
    }
}

fn deliver(recipe: &Recipe, output: &Output, common: &Common) -> Result<Verdict, Failure> {
    let limits = Limits { tensors: output.most_tensors, ..Limits::default() };
    let name = match (&output.name, &output.out) {
        (Some(name), _) => name.clone(),
        (None, Some(path)) => {
            path.file_stem().map(|s| s.to_string_lossy().into_owned()).unwrap_or_default()
        }
        (None, None) => recipe.to_table().0.to_owned(),
    };
    // The network is made in any case: a recipe that cannot be made is not written.
    let network = recipe.network(&name, Some(output.dimension as usize), &limits)?;
    match &output.out {
        None => {
            let format = if common.json { Format::Json } else { Format::Toml };
            let bytes = if output.recipe {
                recipe_text(recipe, &name, output.dimension, format)?.into_bytes()
            } else {
                to_bytes(&network, format)?
            };
            common.say(String::from_utf8_lossy(&bytes).trim_end());
        }
        Some(path) => {
            if output.recipe {
                let format = format_of(path)?;
                let text = recipe_text(recipe, &name, output.dimension, format)?;
                write_file(path, text.as_bytes())?;
            } else {
                save(&network, path)?;
            }
            show::tell(&network, common)?;
        }
    }
    Ok(Verdict::Yes)
}

fn format_of(path: &Path) -> Result<Format, Failure> {
    match path.extension().and_then(|e| e.to_str()) {
        Some("toml") => Ok(Format::Toml),
        Some("json") => Ok(Format::Json),
        _ => Err(Failure::new("a network file ends in .toml or .json").at(path.display())),
    }
}

fn recipe_text(
    recipe: &Recipe,
    name: &str,
    dimension: u32,
    format: Format,
) -> Result<String, Failure> {
    let (family, table) = recipe.to_table();
    let mut whole = serde_json::Map::new();
    whole.insert("lierne".into(), 1.into());
    whole.insert("name".into(), name.into());
    whole.insert("dimension".into(), dimension.into());
    whole.insert(family.into(), table.into());
    Ok(match format {
        Format::Toml => toml::to_string(&whole)?,
        Format::Json => serde_json::to_string_pretty(&whole)? + "\n",
    })
}
