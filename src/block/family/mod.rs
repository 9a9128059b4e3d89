//! The families of blocks, one file each.
//!
//! A family turns a [`Request`] into a block whose table of isometries it has proven. A new
//! one is a file here and a line in [`FAMILIES`].

mod codes;
mod four_leg;
mod graph_state;
mod latin_squares;
mod mds;
mod one_leg;
mod perfect;
mod perfect_parts;
mod random_tensor;
mod random_unitary;
mod repetition;
mod six_level;
mod stabilizer_text;
mod symmetric;

use super::{Block, BlockError, Request};
use std::fmt;

/// How many legs a family comes with.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Legs {
    /// Exactly so many.
    Exactly(usize),
    /// So many or more, up to 20.
    AtLeast(usize),
    /// From so many to so many.
    Between(usize, usize),
    /// An even number from 2 to 20.
    Even,
    /// Any number.
    Any,
}

impl Legs {
    pub(crate) fn admits(self, legs: usize) -> bool {
        match self {
            Legs::Exactly(n) => legs == n,
            Legs::AtLeast(n) => (n..=20).contains(&legs),
            Legs::Between(a, b) => (a..=b).contains(&legs),
            Legs::Even => legs >= 2 && legs.is_multiple_of(2) && legs <= 20,
            Legs::Any => true,
        }
    }
}

impl fmt::Display for Legs {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Legs::Exactly(n) => write!(f, "{n}"),
            Legs::AtLeast(n) => write!(f, "{n} to 20"),
            Legs::Between(a, b) => write!(f, "{a} to {b}"),
            Legs::Even => write!(f, "an even number (up to 20) of"),
            Legs::Any => write!(f, "any number of"),
        }
    }
}

/// A family of blocks.
#[derive(Debug, Clone, Copy)]
pub struct Family {
    /// Its name, as requests give it.
    pub name: &'static str,
    /// Numbers of legs.
    pub legs: Legs,
    /// Dimensions, in words.
    pub dimensions: &'static str,
    /// How it is constructed.
    pub construction: &'static str,
    /// Journal reference of the construction.
    pub source: &'static str,
    /// Whether its members are stabilizer tensors, and over which field.
    pub stabilizer: &'static str,
    /// Which splits are isometric, in words.
    pub isometric: &'static str,
    /// Names of the options it reads.
    pub options: &'static [&'static str],
    pub(super) make: fn(&Request) -> Result<Block, BlockError>,
}

/// All families, in the order of `block list`.
pub const FAMILIES: &[Family] = &[
    perfect::FAMILY,
    four_leg::FAMILY,
    graph_state::FIVE,
    graph_state::SIX,
    graph_state::SEVEN,
    graph_state::EIGHT,
    mds::FAMILY,
    codes::FOUR,
    codes::FIVE,
    codes::SIX,
    codes::SEVEN,
    stabilizer_text::FAMILY,
    repetition::BELL,
    repetition::COPY,
    repetition::IDENTITY,
    symmetric::W,
    symmetric::DICKE,
    random_unitary::FAMILY,
    random_tensor::FAMILY,
    one_leg::BASIS,
    one_leg::PLUS,
    one_leg::RANDOM,
];

pub(super) fn find(name: &str) -> Option<&'static Family> {
    FAMILIES.iter().find(|f| f.name == name)
}

/// All families of blocks, in the order of `block list`.
pub fn families() -> &'static [Family] {
    FAMILIES
}

/// The constructions of four legs at dimension d.
pub(super) fn four_leg_constructions(d: usize) -> Vec<(&'static str, four_leg::Build)> {
    four_leg::constructions(d)
}
