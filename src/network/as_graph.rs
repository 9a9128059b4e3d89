//! A network as a petgraph graph, for the algorithms of that library.

use super::{Network, TensorId};
use crate::tensor::Label;
use petgraph::graph::{NodeIndex, UnGraph};

/// A node of the graph of a network.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum GraphNode {
    /// A tensor.
    Tensor(TensorId),
    /// A label that is open, or held by other than two legs: an end or a meeting of edges.
    Label(Label),
}

/// The graph of a network: a node a tensor (the first nodes, in order), an edge a bond, weighted
/// by its label. A label that is open or is no plain bond of two legs becomes a node of its own,
/// after the tensors, with an edge to each leg that holds it; so hyperedges and open legs keep
/// their meaning. Bonds of a tensor with itself are loops.
///
/// Linear in legs and labels.
///
/// ```
/// # use lierne::network::{self, Limits};
/// let network = network::load("networks/loop-3.toml".as_ref(), &Limits::default())?;
/// let graph = network::as_graph(&network);
/// assert_eq!(graph.node_count(), 3 + 6);
/// assert_eq!(petgraph::algo::connected_components(&graph), 1);
/// # Ok::<(), network::FileError>(())
/// ```
pub fn as_graph(network: &Network) -> UnGraph<GraphNode, Label> {
    let mut graph = UnGraph::with_capacity(network.tensors(), network.labels());
    for tensor in network.tensor_ids() {
        graph.add_node(GraphNode::Tensor(tensor));
    }
    let open = network.open_flags();
    for label in (0..network.labels() as u32).map(Label::new) {
        let holders = network.holders(label);
        if let (&[a, b], false) = (holders, open[label.index()]) {
            graph.add_edge(NodeIndex::new(a.index()), NodeIndex::new(b.index()), label);
        } else {
            let meeting = graph.add_node(GraphNode::Label(label));
            for holder in holders {
                graph.add_edge(NodeIndex::new(holder.index()), meeting, label);
            }
        }
    }
    graph
}
