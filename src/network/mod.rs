//! Networks: which tensors there are, which legs they share, which legs are left open.

mod build;
mod ids;
mod region;
mod the_network;

pub use build::{NetworkBuilder, NetworkError};
pub use ids::{BoundarySite, TensorId};
pub use region::{Region, RegionError};
pub use the_network::{Layout, Network};
