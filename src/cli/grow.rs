//! `lierne grow`: writes a network of a known family.

use super::common::write_file;
use super::{Common, Failure, Verdict, show};
use crate::network::import::{GraphFormat, GraphReading, einsum, read_graph};
use crate::network::{
    BlockSource, ChainRecipe, CompleteRecipe, Format, GeometricRecipe, LatticeKind, LatticeOpen,
    LatticeRecipe, LayeredKind, LayeredRecipe, LayeredTop, Limits, Network, Recipe, RegularRecipe,
    RootLeg, Selection, TilingRecipe, TreeRecipe, Turns, WormholeRecipe, save, to_bytes,
};
use crate::tiling::{Centre, Growth, Rule, Tiling};
use clap::{Subcommand, ValueEnum};
use std::collections::BTreeMap;
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
    /// Two equal patches of a tiling, each with a hole, glued along the rims of the holes
    Wormhole(WormholeArgs),
    /// A square, cubic, hexagonal or triangular lattice, open or periodic
    Lattice(LatticeArgs),
    /// A complete tree in which every tensor has k children
    Tree(TreeArgs),
    /// A layered isometric network, binary or ternary
    Layered(LayeredArgs),
    /// A chain of tensors, one a site
    Chain(ChainArgs),
    /// A random regular graph
    Regular(RegularArgs),
    /// A random geometric graph
    Geometric(GeometricArgs),
    /// A complete graph
    Complete(CompleteArgs),
    /// A graph from a file: edge list, GraphML or .gr
    Graph(GraphArgs),
    /// An einsum expression with sizes, as 'ab,bc,cd->ad'
    Einsum(EinsumArgs),
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
    /// block with as many legs as it needs. Here and elsewhere a name that ends in .npy is an
    /// array file, relative to the folder of --out
    #[arg(long, value_name = "NAME", value_delimiter = ',')]
    block: Vec<String>,
    /// Tiles with a bulk leg: none, all, centre, rings:0,2 or tiles:3,5..8
    #[arg(long, value_name = "TILES", default_value = "none")]
    bulk: String,
    /// Dimension of the bulk legs, where it is not that of the others
    #[arg(long, value_name = "D")]
    bulk_dimension: Option<usize>,
    /// State to which every bulk leg is fixed: basis, plus, random-state or a .npy file
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

#[derive(Debug, clap::Args)]
struct WormholeArgs {
    #[command(flatten)]
    patch: TilingArgs,
    /// By how many sides the second rim is turned against the first
    #[arg(long, value_name = "K", default_value_t = 0)]
    twist: u64,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum LatticeWord {
    Square,
    Cubic,
    Hexagonal,
    Triangular,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum OpenWord {
    /// The legs that stick out at the rim
    Rim,
    /// One leg more on every site
    Sites,
    /// None
    None,
}

#[derive(Debug, clap::Args)]
struct LatticeArgs {
    /// Which lattice
    #[arg(long, value_enum, default_value = "square")]
    kind: LatticeWord,
    /// Cells in each direction, as 4,4 or 3,3,3
    #[arg(long, value_name = "N,N", value_delimiter = ',', required = true)]
    size: Vec<u64>,
    /// Close every direction into a circle
    #[arg(long)]
    periodic: bool,
    /// Which legs stay open
    #[arg(long, value_enum, default_value = "rim")]
    open: OpenWord,
    /// Block of every site; without it the perfect block with as many legs as needed
    #[arg(long, value_name = "NAME")]
    block: Option<String>,
    #[command(flatten)]
    output: Output,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum RootWord {
    /// The root has no leg upwards
    None,
    /// The root's leg upwards is boundary site 0
    Boundary,
    /// The root's leg upwards is a bulk leg
    Bulk,
}

#[derive(Debug, clap::Args)]
struct TreeArgs {
    /// Children of every tensor
    #[arg(long, value_name = "K")]
    arity: u64,
    /// Generations beside the root
    #[arg(long, value_name = "N")]
    depth: u64,
    /// What becomes of the leg by which the root would have a parent
    #[arg(long, value_enum, default_value = "none")]
    root: RootWord,
    /// Block of every tensor; without it the perfect block with as many legs as needed
    #[arg(long, value_name = "NAME")]
    block: Option<String>,
    #[command(flatten)]
    output: Output,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum LayeredWord {
    /// Two sites become one
    Binary,
    /// Three sites become one
    Ternary,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum CloseWord {
    /// One tensor closes the legs on top
    Tensor,
    /// The legs on top are bulk legs
    Bulk,
}

#[derive(Debug, clap::Args)]
struct LayeredArgs {
    /// How many sites become one
    #[arg(long, value_enum, default_value = "binary")]
    kind: LayeredWord,
    /// Layers
    #[arg(long, value_name = "N")]
    layers: u64,
    /// Sites left after the last layer
    #[arg(long, value_name = "N", default_value_t = 2)]
    top: u64,
    /// What closes them
    #[arg(long, value_enum, default_value = "tensor")]
    close: CloseWord,
    /// The last site does not neighbour the first
    #[arg(long)]
    open_ended: bool,
    /// The two-site tensors; without it the perfect four-leg block
    #[arg(long, value_name = "NAME")]
    turn: Option<String>,
    /// The tensors that make one site of several; without it perfect blocks
    #[arg(long, value_name = "NAME")]
    merge: Option<String>,
    /// The tensor on top; without it a perfect block
    #[arg(long, value_name = "NAME")]
    cap: Option<String>,
    #[command(flatten)]
    output: Output,
}

#[derive(Debug, clap::Args)]
struct ChainArgs {
    /// Sites
    #[arg(long, value_name = "N")]
    length: u64,
    /// Join the last site to the first
    #[arg(long)]
    periodic: bool,
    /// Dimension of the bonds, where it is not that of every leg
    #[arg(long, value_name = "D")]
    bond_dimension: Option<usize>,
    /// Block of every tensor; without it random numbers
    #[arg(long, value_name = "NAME")]
    block: Option<String>,
    #[command(flatten)]
    output: Output,
}

#[derive(Debug, clap::Args)]
struct GraphOptions {
    /// Give every tensor an open leg, too
    #[arg(long)]
    open: bool,
    /// Block of every tensor; without it random numbers
    #[arg(long, value_name = "NAME")]
    block: Option<String>,
    #[command(flatten)]
    output: Output,
}

#[derive(Debug, clap::Args)]
struct RegularArgs {
    /// Vertices
    #[arg(long, value_name = "N")]
    vertices: u64,
    /// Neighbours of each
    #[arg(long, value_name = "D")]
    degree: u64,
    /// Seed
    #[arg(long, value_name = "S", default_value_t = 0)]
    seed: u64,
    #[command(flatten)]
    graph: GraphOptions,
}

#[derive(Debug, clap::Args)]
struct GeometricArgs {
    /// Vertices
    #[arg(long, value_name = "N")]
    vertices: u64,
    /// Neighbours of a vertex in the mean, far from the edges
    #[arg(long, value_name = "X")]
    mean_degree: f64,
    /// Opposite edges of the square are one
    #[arg(long)]
    periodic: bool,
    /// Seed
    #[arg(long, value_name = "S", default_value_t = 0)]
    seed: u64,
    #[command(flatten)]
    graph: GraphOptions,
}

#[derive(Debug, clap::Args)]
struct CompleteArgs {
    /// Vertices
    #[arg(long, value_name = "N")]
    vertices: u64,
    #[command(flatten)]
    graph: GraphOptions,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum FormatWord {
    /// Two vertices a line, and a dimension where there is one
    Edges,
    /// GraphML
    Graphml,
    /// `p tw n m`, then one edge a line
    Gr,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum ReadingWord {
    /// Vertices are tensors, edges are bonds
    Tensors,
    /// Vertices are indices, edges are two-leg tensors that hold those of their ends
    Factors,
}

#[derive(Debug, clap::Args)]
struct GraphArgs {
    /// The graph file
    #[arg(value_name = "FILE")]
    file: PathBuf,
    /// What vertices and edges become
    #[arg(long = "as", value_enum, default_value = "tensors")]
    reading: ReadingWord,
    /// Notation of the file; without it, told by the file's ending
    #[arg(long, value_enum)]
    format: Option<FormatWord>,
    #[command(flatten)]
    graph: GraphOptions,
}

#[derive(Debug, clap::Args)]
struct EinsumArgs {
    /// The expression; with white space inside an operand, labels are words
    #[arg(value_name = "EXPRESSION")]
    expression: String,
    /// Sizes, as a=3,b=8; other labels have the size --dimension
    #[arg(long, value_name = "LABEL=SIZE", value_delimiter = ',')]
    size: Vec<String>,
    /// NumPy files of the operands, in order, relative to the folder of --out
    #[arg(long, value_name = "FILE", value_delimiter = ',')]
    array: Vec<String>,
    /// Block of every operand; without it random numbers
    #[arg(long, value_name = "NAME")]
    block: Option<String>,
    #[command(flatten)]
    output: Output,
}

/// Runs the command.
///
/// # Errors
/// A sentence on what cannot be grown or written.
pub fn run(args: &Args, common: &Common) -> Result<Verdict, Failure> {
    let (recipe, output) = match &args.family {
        Family::Tiling(a) => (Recipe::Tiling(a.recipe()?), &a.output),
        Family::Wormhole(a) => {
            let one = a.patch.recipe()?;
            let recipe = WormholeRecipe { other: one.clone(), one, twist: a.twist };
            (Recipe::Wormhole(Box::new(recipe)), &a.patch.output)
        }
        Family::Lattice(a) => (Recipe::Lattice(a.recipe()), &a.output),
        Family::Tree(a) => (Recipe::Tree(a.recipe()), &a.output),
        Family::Layered(a) => (Recipe::Layered(a.recipe()), &a.output),
        Family::Chain(a) => {
            let recipe = ChainRecipe {
                length: a.length,
                periodic: a.periodic,
                bond_dimension: a.bond_dimension,
                block: named(a.block.as_ref()),
            };
            (Recipe::Chain(recipe), &a.output)
        }
        Family::Regular(a) => {
            let recipe = RegularRecipe {
                vertices: a.vertices,
                degree: a.degree,
                seed: a.seed,
                open: a.graph.open,
                block: named(a.graph.block.as_ref()),
            };
            (Recipe::Regular(recipe), &a.graph.output)
        }
        Family::Geometric(a) => {
            if !(a.mean_degree > 0.0 && a.mean_degree.is_finite()) {
                return Err(Failure::new(format!(
                    "--mean-degree is {}; a positive number is taken",
                    a.mean_degree
                )));
            }
            let recipe = GeometricRecipe {
                vertices: a.vertices,
                mean_degree: a.mean_degree,
                seed: a.seed,
                periodic: a.periodic,
                open: a.graph.open,
                block: named(a.graph.block.as_ref()),
            };
            (Recipe::Geometric(recipe), &a.graph.output)
        }
        Family::Complete(a) => {
            let recipe = CompleteRecipe {
                vertices: a.vertices,
                open: a.graph.open,
                block: named(a.graph.block.as_ref()),
            };
            (Recipe::Complete(recipe), &a.graph.output)
        }
        Family::Graph(a) => return a.run(common),
        Family::Einsum(a) => return a.run(common),
    };
    deliver(&recipe, output, common)
}

/// A block by name, or an array file where the text ends in `.npy`.
fn source(text: &String) -> BlockSource {
    if text.ends_with(".npy") {
        BlockSource::Array(text.clone())
    } else {
        BlockSource::family(text)
    }
}

fn named(text: Option<&String>) -> Option<BlockSource> {
    text.map(source)
}

impl GraphArgs {
    fn run(&self, common: &Common) -> Result<Verdict, Failure> {
        let output = &self.graph.output;
        output.no_recipe("a graph file")?;
        let format = match self.format {
            None => GraphFormat::of(&self.file),
            Some(FormatWord::Edges) => GraphFormat::Edges,
            Some(FormatWord::Graphml) => GraphFormat::GraphMl,
            Some(FormatWord::Gr) => GraphFormat::Gr,
        };
        let reading = match self.reading {
            ReadingWord::Tensors => GraphReading::Tensors,
            ReadingWord::Factors => GraphReading::Factors,
        };
        let limits = output.limits();
        let graph = read_graph(&self.file, format, &limits)?;
        let stem = self.file.file_stem().map(|s| s.to_string_lossy().into_owned());
        let network = graph.network(
            &output.name_or(&stem.unwrap_or_default()),
            reading,
            self.graph.open,
            output.dimension as usize,
            named(self.graph.block.as_ref()).as_ref(),
            &limits,
        )?;
        deliver_network(&network, output, common)
    }
}

impl EinsumArgs {
    fn run(&self, common: &Common) -> Result<Verdict, Failure> {
        self.output.no_recipe("an einsum expression")?;
        let mut sizes = BTreeMap::new();
        for text in &self.size {
            let pair = text.split_once('=').and_then(|(label, size)| {
                let size =
                    size.trim().parse::<u32>().ok().filter(|&s| (1..1 << 31).contains(&s))?;
                Some((label.trim().to_owned(), size as usize))
            });
            let Some((label, size)) = pair else {
                return Err(Failure::new(format!("--size {text:?}: write label=size, as a=3")));
            };
            if sizes.insert(label.clone(), size).is_some_and(|s| s != size) {
                return Err(Failure::new(format!("--size gives two sizes for {label:?}")));
            }
        }
        let folder = self.output.folder();
        let network = einsum(
            &self.output.name_or("einsum"),
            &self.expression,
            &sizes,
            Some(self.output.dimension as usize),
            named(self.block.as_ref()).as_ref(),
            &self.array,
            folder,
            &self.output.limits(),
        )?;
        deliver_network(&network, &self.output, common)
    }
}

impl LatticeArgs {
    fn recipe(&self) -> LatticeRecipe {
        LatticeRecipe {
            kind: match self.kind {
                LatticeWord::Square => LatticeKind::Square,
                LatticeWord::Cubic => LatticeKind::Cubic,
                LatticeWord::Hexagonal => LatticeKind::Hexagonal,
                LatticeWord::Triangular => LatticeKind::Triangular,
            },
            size: self.size.clone(),
            periodic: vec![self.periodic],
            open: match self.open {
                OpenWord::Rim => LatticeOpen::Rim,
                OpenWord::Sites => LatticeOpen::Sites,
                OpenWord::None => LatticeOpen::None,
            },
            block: named(self.block.as_ref()),
        }
    }
}

impl TreeArgs {
    fn recipe(&self) -> TreeRecipe {
        TreeRecipe {
            arity: self.arity,
            depth: self.depth,
            root: match self.root {
                RootWord::None => RootLeg::None,
                RootWord::Boundary => RootLeg::Boundary,
                RootWord::Bulk => RootLeg::Bulk,
            },
            block: named(self.block.as_ref()),
        }
    }
}

impl LayeredArgs {
    fn recipe(&self) -> LayeredRecipe {
        LayeredRecipe {
            kind: match self.kind {
                LayeredWord::Binary => LayeredKind::Binary,
                LayeredWord::Ternary => LayeredKind::Ternary,
            },
            layers: self.layers,
            top: self.top,
            close: match self.close {
                CloseWord::Tensor => LayeredTop::Tensor,
                CloseWord::Bulk => LayeredTop::Bulk,
            },
            periodic: !self.open_ended,
            turn: named(self.turn.as_ref()),
            merge: named(self.merge.as_ref()),
            cap: named(self.cap.as_ref()),
        }
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
        let mut blocks: Vec<_> = self.block.iter().map(source).collect();
        if blocks.len() == 1 {
            recipe.block = blocks.pop();
        } else {
            recipe.blocks = blocks;
        }
        recipe.turns = Turns(self.turn.clone());
        recipe.bulk = select(&self.bulk, "--bulk")?;
        recipe.bulk_dimension = self.bulk_dimension;
        recipe.bulk_state = named(self.bulk_state.as_ref());
        recipe.remove = select(&self.remove, "--remove")?;
        Ok(recipe)
    }
}

fn deliver(recipe: &Recipe, output: &Output, common: &Common) -> Result<Verdict, Failure> {
    let limits = output.limits();
    let name = output.name_or(recipe.to_table().0);
    // The network is made in any case: a recipe that cannot be made is not written.
    let dimension = Some(output.dimension as usize);
    let network = recipe.network_beside(&name, dimension, output.folder(), &limits)?;
    if !output.recipe {
        return deliver_network(&network, output, common);
    }
    let Some(path) = &output.out else {
        let format = if common.json { Format::Json } else { Format::Toml };
        common.say(recipe_text(recipe, &name, output.dimension, format)?.trim_end());
        return Ok(Verdict::Yes);
    };
    let text = recipe_text(recipe, &name, output.dimension, format_of(path)?)?;
    write_file(path, text.as_bytes())?;
    show::tell_grown(&network, common)?;
    Ok(Verdict::Yes)
}

fn deliver_network(
    network: &Network,
    output: &Output,
    common: &Common,
) -> Result<Verdict, Failure> {
    match &output.out {
        None => {
            let format = if common.json { Format::Json } else { Format::Toml };
            common.say(String::from_utf8_lossy(&to_bytes(network, format)?).trim_end());
        }
        Some(path) => {
            save(network, path)?;
            show::tell_grown(network, common)?;
        }
    }
    Ok(Verdict::Yes)
}

impl Output {
    /// Where array files are looked for.
    fn folder(&self) -> &Path {
        self.out.as_deref().and_then(Path::parent).unwrap_or(Path::new(""))
    }
    fn limits(&self) -> Limits {
        Limits { tensors: self.most_tensors, ..Limits::default() }
    }
    fn no_recipe(&self, what: &str) -> Result<(), Failure> {
        if self.recipe {
            let sentence = format!("--recipe: {what} has no recipe; leave it out");
            return Err(Failure::new(sentence));
        }
        Ok(())
    }
    /// The name given, or else that of the file, or else that of the family.
    fn name_or(&self, family: &str) -> String {
        let stem = || Some(self.out.as_ref()?.file_stem()?.to_string_lossy().into_owned());
        self.name.clone().or_else(stem).unwrap_or_else(|| family.to_owned())
    }
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
