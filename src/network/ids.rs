//! Numbers that name parts of a network.

/// A tensor of one network, numbered from 0 in the order of the file; valid for that network.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct TensorId(u32);

/// A boundary leg of one network by its place in cyclic order, counter-clockwise from 0.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct BoundarySite(u32);

macro_rules! number {
    ($name:ident) => {
        impl $name {
            /// The one with this number.
            pub const fn new(number: u32) -> Self {
                Self(number)
            }
            /// The number as an index.
            pub const fn index(self) -> usize {
                self.0 as usize
            }
        }
    };
}
number!(TensorId);
number!(BoundarySite);
