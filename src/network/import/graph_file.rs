//! A graph as a file tells it, and the two ways to read it as a network.

use super::{edge_list, gr, graphml};
use crate::network::file::{BlockShelf, Problem};
use crate::network::source::BlockSource;
use crate::network::{Limits, Network, NetworkBuilder};
use crate::tensor::Label;
use std::path::{Path, PathBuf};
use thiserror::Error;

/// Which notation a graph file has.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum GraphFormat {
    /// Two vertices a line, and a dimension where there is one; `#` and `%` begin comments.
    Edges,
    /// GraphML; hyperedges, and a dimension as the edge data named `dimension`.
    GraphMl,
    /// `p tw n m`, then one edge a line, vertices from 1; `c` begins comments.
    Gr,
}

impl GraphFormat {
    /// By the ending of a file's name; edge lists for any other.
    pub fn of(path: &Path) -> Self {
        match path.extension().and_then(|e| e.to_str()) {
            Some("graphml" | "xml") => Self::GraphMl,
            Some("gr") => Self::Gr,
            _ => Self::Edges,
        }
    }
}

/// How a graph becomes a network.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum GraphReading {
    /// Vertices are tensors, edges are bonds.
    Tensors,
    /// Vertices are labels, edges are tensors that hold the labels of their ends.
    Factors,
}

/// An edge: its vertices, two or more, and its dimension where the file tells it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Hyperedge {
    /// The vertices.
    pub ends: Vec<u32>,
    /// Its dimension.
    pub dimension: Option<usize>,
}

/// A graph as a file tells it.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct GraphFile {
    /// Names of the vertices, in the order of their numbers.
    pub names: Vec<String>,
    /// Edges, in the order of the file.
    pub edges: Vec<Hyperedge>,
}

/// What can be wrong with a graph file.
#[derive(Debug, Error)]
#[error("{}{}: {what}", .path.display(), .line.map(|l| format!(", line {l}")).unwrap_or_default())]
pub struct GraphError {
    /// The file.
    pub path: PathBuf,
    /// The line, where it is known, counted from 1.
    pub line: Option<usize>,
    /// What is wrong.
    #[source]
    pub what: GraphFault,
}

/// What is wrong with a graph file.
#[derive(Debug, Error)]
#[non_exhaustive]
pub enum GraphFault {
    /// It cannot be read.
    #[error("the file cannot be read ({reason})")]
    Unreadable {
        /// What the system says.
        reason: std::io::Error,
    },
    /// It is too large.
    #[error("the file has {bytes} bytes; at most {limit} are read")]
    TooLarge {
        /// Its size.
        bytes: u64,
        /// The limit.
        limit: u64,
    },
    /// It is not UTF-8.
    #[error("the text is not UTF-8 (byte {at})")]
    Encoding {
        /// Where it stops being UTF-8.
        at: usize,
    },
    /// A line or tag that is not what it should be.
    #[error("{found:?} is not {expected}")]
    Unexpected {
        /// What stands there.
        found: String,
        /// What should.
        expected: &'static str,
    },
    /// A vertex that there is not.
    #[error("vertex {vertex:?} is not among the graph's {count} vertices")]
    Vertex {
        /// The vertex.
        vertex: String,
        /// How many there are.
        count: usize,
    },
    /// Fewer or more edges than announced.
    #[error("the file announces {announced} {what} and holds {found}")]
    Count {
        /// Edges or vertices.
        what: &'static str,
        /// How many are announced.
        announced: u64,
        /// How many there are.
        found: u64,
    },
    /// More of something than the limit.
    #[error("the graph has {count} {what}; at most {limit} are taken")]
    TooMany {
        /// Of what.
        what: &'static str,
        /// How many, or the first number past the limit.
        count: u64,
        /// The limit.
        limit: u64,
    },
    /// Nothing in it.
    #[error("the file holds no vertex")]
    Empty,
}

/// A fault and its line.
pub(super) type Fault = (Option<usize>, GraphFault);

pub(super) fn unexpected(line: usize, found: &str, expected: &'static str) -> Fault {
    let found = found.chars().take(60).collect();
    (Some(line), GraphFault::Unexpected { found, expected })
}

/// Reads a graph file of at most `limits.toml_bytes` bytes. Linear in its length.
///
/// # Errors
/// [`GraphError`], which names the file and the line.
pub fn read_graph(
    path: &Path,
    format: GraphFormat,
    limits: &Limits,
) -> Result<GraphFile, GraphError> {
    let at = |(line, what): Fault| GraphError { path: path.to_path_buf(), line, what };
    let unreadable = |reason| at((None, GraphFault::Unreadable { reason }));
    let bytes = std::fs::metadata(path).map_err(unreadable)?.len();
    let limit = limits.toml_bytes;
    if bytes > limit {
        return Err(at((None, GraphFault::TooLarge { bytes, limit })));
    }
    let bytes = std::fs::read(path).map_err(unreadable)?;
    let text = std::str::from_utf8(&bytes)
        .map_err(|e| at((None, GraphFault::Encoding { at: e.valid_up_to() })))?;
    let graph = match format {
        GraphFormat::Edges => edge_list::parse(text, limits),
        GraphFormat::GraphMl => graphml::parse(text, limits),
        GraphFormat::Gr => gr::parse(text, limits),
    }
    .map_err(at)?;
    if graph.names.is_empty() {
        return Err(at((None, GraphFault::Empty)));
    }
    Ok(graph)
}

pub(super) fn too_many(
    what: &'static str,
    count: u64,
    limit: u64,
    line: usize,
) -> Result<(), Fault> {
    if count > limit {
        return Err((Some(line), GraphFault::TooMany { what, count, limit }));
    }
    Ok(())
}

impl GraphFile {
    /// The graph as a network.
    ///
    /// As tensors, bonds are `x0`, `x1`, … in the order of edges, and with `open` each tensor
    /// has the boundary leg `b` and its number last. As factors, labels are `v0`, `v1`, … in
    /// the order of vertices; one that stands once is summed over, and vertices without an
    /// edge have none. Legs have the dimension of their edge, or else `dimension`. Without a
    /// block tensors are random, each with its number as seed.
    ///
    /// # Errors
    /// [`Problem`].
    pub fn network(
        &self,
        name: &str,
        reading: GraphReading,
        open: bool,
        dimension: usize,
        block: Option<&BlockSource>,
        limits: &Limits,
    ) -> Result<Network, Problem> {
        let mut legs: Vec<Vec<Label>>;
        let mut builder = NetworkBuilder::new(name);
        match reading {
            GraphReading::Tensors => {
                legs = vec![Vec::new(); self.names.len()];
                for (e, edge) in self.edges.iter().enumerate() {
                    let label =
                        builder.label(&format!("x{e}"), edge.dimension.unwrap_or(dimension));
                    for &v in &edge.ends {
                        legs[v as usize].push(label);
                    }
                }
                if open {
                    for (v, legs) in legs.iter_mut().enumerate() {
                        let label = builder.label(&format!("b{v}"), dimension);
                        builder.boundary([label]);
                        legs.push(label);
                    }
                }
            }
            GraphReading::Factors => {
                let mut times = vec![0u32; self.names.len()];
                for &v in self.edges.iter().flat_map(|e| &e.ends) {
                    times[v as usize] += 1;
                }
                let mut label_of = vec![None; self.names.len()];
                for (v, &n) in times.iter().enumerate() {
                    if n > 0 {
                        let label = builder.label(&format!("v{v}"), dimension);
                        label_of[v] = Some(label);
                        if open {
                            builder.boundary([label]);
                        } else if n == 1 {
                            builder.summed([label]);
                        }
                    }
                }
                let held = |e: &Hyperedge| {
                    e.ends.iter().filter_map(|&v| label_of[v as usize]).collect::<Vec<_>>()
                };
                legs = self.edges.iter().map(held).collect();
            }
        }
        let (count, limit) = (legs.len() as u64, limits.tensors);
        if count > limit {
            return Err(Problem::TooMany { what: "tensors", count, limit });
        }
        let mut shelf = BlockShelf::new(Path::new(""), limits);
        // Names that are the vertices' numbers say nothing.
        let named = reading == GraphReading::Tensors
            && self.names.iter().enumerate().any(|(v, n)| *n != v.to_string());
        for (t, legs) in legs.iter().enumerate() {
            let dims: Vec<usize> = legs.iter().map(|&l| builder.dim(l)).collect();
            let source = crate::network::recipe::or_random(block, t);
            let made = shelf.block(&source, &dims, &|| format!("t{t}"))?;
            builder.source(&made, source);
            builder.tensor(named.then(|| self.names[t].as_str()), legs, &made)?;
        }
        Ok(builder.finish()?)
    }
}
