//! Networks from what others wrote: graphs and einsum expressions.
//!
//! | text | read by |
//! |---|---|
//! | edge list, one edge a line | [`read_graph`] with [`GraphFormat::Edges`] |
//! | GraphML | [`read_graph`] with [`GraphFormat::GraphMl`] |
//! | `.gr`, the treewidth challenge's format | [`read_graph`] with [`GraphFormat::Gr`] |
//! | `ab,bc->ac` | [`einsum()`] |

mod edge_list;
mod einsum;
mod gr;
mod graph_file;
mod graphml;

pub use einsum::{Einsum, EinsumError, einsum};
pub use graph_file::{
    GraphError, GraphFault, GraphFile, GraphFormat, GraphReading, Hyperedge, read_graph,
};
