//! The name of a leg, as a number.

use serde::{Deserialize, Serialize};

/// A label names a leg; two tensors that hold the same label share a bond.
///
/// Labels are numbered from 0 within one network (or one shape); a `Label` is valid for
/// the network that issued it and for every sub-network cut out of it, and for nothing else.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(transparent)]
pub struct Label(u32);

impl Label {
    /// The label with this number.
    pub const fn new(number: u32) -> Self {
        Self(number)
    }
    /// The number as an index into tables that hold one entry a label.
    pub const fn index(self) -> usize {
        self.0 as usize
    }
    /// The number.
    pub const fn number(self) -> u32 {
        self.0
    }
}
