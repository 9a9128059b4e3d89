//! A checked network.

use super::{BlockSource, TensorId};
use crate::block::Block;
use crate::tensor::Label;
use std::sync::Arc;

/// A network of tensors. Made by [`super::NetworkBuilder`] or read from a file.
///
/// Invariants: (1) every leg has the dimension of its label; (2) `boundary` and `bulk` are
/// disjoint and without repetition; (3) a label on one tensor only is in `boundary`, `bulk`
/// or `summed`; (4) every label stands on some tensor. Storage is flat (a few machine words
/// a leg), so that millions of tensors fit.
#[derive(Debug, Clone)]
pub struct Network {
    pub(super) name: String,
    pub(super) dims: Vec<u32>,
    pub(super) label_text: String,
    pub(super) label_ends: Vec<u32>,
    pub(super) leg_starts: Vec<u32>,
    pub(super) legs: Vec<Label>,
    pub(super) holder_starts: Vec<u32>,
    pub(super) holders: Vec<TensorId>,
    pub(super) blocks: Vec<Arc<Block>>,
    pub(super) sources: Vec<Option<BlockSource>>,
    pub(super) block_of: Vec<u32>,
    pub(super) tensor_names: Vec<Option<Box<str>>>,
    pub(super) boundary: Vec<Label>,
    pub(super) bulk: Vec<Label>,
    pub(super) summed: Vec<Label>,
    pub(super) layout: Option<Layout>,
}

/// Where a network's tensors are drawn and which ring they belong to.
#[derive(Debug, Clone, PartialEq, Default)]
#[non_exhaustive]
pub struct Layout {
    /// Ring of each tensor, for networks grown by rings; else empty. Tensors past its end (the
    /// states that fix bulk legs) belong to no ring.
    pub ring: Vec<u32>,
    /// p and q of the tiling {p,q}, where it is one.
    pub tiling: Option<(u32, u32)>,
    /// Place of each tensor in the plane (the unit disk for hyperbolic tilings); else empty.
    /// A tiling without holes leaves it empty, too: [`crate::network::tile_frames`] finds the
    /// places from the bonds.
    pub place: Vec<[f64; 2]>,
    /// Direction, in radians, in which each tensor's leg 0 leaves a tile; empty where `place`
    /// is, or where directions mean nothing.
    pub angle: Vec<f64>,
    /// Which of several glued patches each tensor belongs to; empty where there is one patch.
    pub sheet: Vec<u32>,
    /// Lengths of the boundary's cycles, in the order of sites: the outer boundary first, then
    /// the rims of holes. Empty where it is not known to be a union of cycles.
    pub cycles: Vec<u32>,
}

impl Layout {
    /// Tensors in each ring.
    pub fn ring_sizes(&self) -> Vec<usize> {
        let rings = self.ring.iter().max().map_or(0, |&r| r as usize + 1);
        let mut sizes = vec![0; rings];
        for &r in &self.ring {
            sizes[r as usize] += 1;
        }
        sizes
    }
    /// The patch to which a tensor belongs.
    pub fn sheet_of(&self, tensor: TensorId) -> u32 {
        self.sheet.get(tensor.index()).copied().unwrap_or(0)
    }
}

impl Network {
    /// Its name.
    pub fn name(&self) -> &str {
        &self.name
    }
    /// Number of tensors.
    pub fn tensors(&self) -> usize {
        self.block_of.len()
    }
    /// All tensors.
    pub fn tensor_ids(&self) -> impl ExactSizeIterator<Item = TensorId> + use<> {
        (0..self.block_of.len() as u32).map(TensorId::new)
    }
    /// Number of labels.
    pub fn labels(&self) -> usize {
        self.dims.len()
    }
    /// Labels on two tensors or more, or twice on one, that are not left open.
    pub fn bonds(&self) -> usize {
        let open = self.open_flags();
        (0..self.labels())
            .filter(|&l| !open[l] && self.holder_starts[l + 1] - self.holder_starts[l] >= 2)
            .count()
    }
    /// One flag a label: whether it stays open.
    pub fn open_flags(&self) -> Vec<bool> {
        let mut open = vec![false; self.labels()];
        for l in self.boundary.iter().chain(&self.bulk) {
            open[l.index()] = true;
        }
        open
    }
    /// The labels of a tensor's legs, in the order of its axes.
    pub fn legs(&self, tensor: TensorId) -> &[Label] {
        let t = tensor.index();
        &self.legs[self.leg_starts[t] as usize..self.leg_starts[t + 1] as usize]
    }
    /// The block that a tensor is.
    pub fn block(&self, tensor: TensorId) -> &Arc<Block> {
        &self.blocks[self.block_of[tensor.index()] as usize]
    }
    /// The distinct blocks.
    pub fn blocks(&self) -> &[Arc<Block>] {
        &self.blocks
    }
    /// How each of [`Self::blocks`] is written in a file, where that is known.
    pub fn sources(&self) -> &[Option<BlockSource>] {
        &self.sources
    }
    /// Which of [`Self::blocks`] a tensor is.
    pub fn block_number(&self, tensor: TensorId) -> usize {
        self.block_of[tensor.index()] as usize
    }
    /// A tensor's name: the one given, or `t` and its number.
    pub fn tensor_name(&self, tensor: TensorId) -> String {
        match self.tensor_names.get(tensor.index()) {
            Some(Some(name)) => name.to_string(),
            _ => format!("t{}", tensor.index()),
        }
    }
    /// The name that a tensor was given, where it was given one.
    pub fn given_name(&self, tensor: TensorId) -> Option<&str> {
        self.tensor_names.get(tensor.index())?.as_deref()
    }
    /// Dimension of a label.
    pub fn dim(&self, label: Label) -> usize {
        self.dims[label.index()] as usize
    }
    /// The tensors that hold a label, in ascending order, once for each of their legs.
    pub fn holders(&self, label: Label) -> &[TensorId] {
        let l = label.index();
        &self.holders[self.holder_starts[l] as usize..self.holder_starts[l + 1] as usize]
    }
    /// A label's name.
    pub fn label_name(&self, label: Label) -> &str {
        let l = label.index();
        let start = if l == 0 { 0 } else { self.label_ends[l - 1] as usize };
        &self.label_text[start..self.label_ends[l] as usize]
    }
    /// The label of this name; looks through all names.
    pub fn find_label(&self, name: &str) -> Option<Label> {
        (0..self.labels() as u32).map(Label::new).find(|&l| self.label_name(l) == name)
    }
    /// Boundary legs in cyclic order, counter-clockwise.
    pub fn boundary(&self) -> &[Label] {
        &self.boundary
    }
    /// Bulk legs.
    pub fn bulk(&self) -> &[Label] {
        &self.bulk
    }
    /// Labels on one tensor that are summed over.
    pub fn summed(&self) -> &[Label] {
        &self.summed
    }
    /// The common dimension of the boundary legs, where they have one.
    pub fn boundary_dim(&self) -> Option<usize> {
        let first = self.dim(*self.boundary.first()?);
        self.boundary.iter().all(|&l| self.dim(l) == first).then_some(first)
    }
    /// Where it is drawn, where that is known.
    pub fn layout(&self) -> Option<&Layout> {
        self.layout.as_ref()
    }
}
