//! Graphs: random ones, and questions about any.

mod geometric;
mod planar;
mod regular;

pub use geometric::geometric;
pub use planar::is_planar;
pub use regular::regular;

/// Edges as pairs of vertices, in order.
pub type Edges = Vec<(u32, u32)>;
