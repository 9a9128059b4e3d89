//! Puts a network together and checks it.

use super::{BlockSource, Layout, Network, TensorId};
use crate::block::Block;
use crate::tensor::Label;
use std::collections::HashMap;
use std::sync::Arc;
use thiserror::Error;

/// What can be wrong with a network.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum NetworkError {
    /// One label, two dimensions.
    #[error("label {label:?} has dimension {known} elsewhere but {found} on tensor {tensor:?}")]
    Dimensions {
        /// The label's name.
        label: String,
        /// Its dimension as known.
        known: usize,
        /// The dimension met.
        found: usize,
        /// The tensor where it was met.
        tensor: String,
    },
    /// Legs named and legs of the block differ in number.
    #[error("tensor {tensor:?} names {named} legs but its block has {block}")]
    LegCount {
        /// The tensor.
        tensor: String,
        /// Legs named.
        named: usize,
        /// Legs of the block.
        block: usize,
    },
    /// A label on one tensor that is on no list.
    #[error(
        "label {label:?} stands on tensor {tensor:?} only; list it in boundary, bulk or summed"
    )]
    Dangling {
        /// The label.
        label: String,
        /// The tensor.
        tensor: String,
    },
    /// A listed label that no tensor holds.
    #[error("{list} lists label {label:?}, which no tensor holds")]
    Nowhere {
        /// The list.
        list: &'static str,
        /// The label.
        label: String,
    },
    /// A label listed twice.
    #[error("label {label:?} is listed twice ({first} and {second}); list it once")]
    ListedTwice {
        /// The label.
        label: String,
        /// The list where it stood first.
        first: &'static str,
        /// The list where it stands again.
        second: &'static str,
    },
    /// Too much of something.
    #[error("the network has {count} {what}; at most {limit} are taken")]
    TooMany {
        /// What there is too much of.
        what: &'static str,
        /// How many.
        count: u64,
        /// The limit.
        limit: u64,
    },
}

/// Collects labels and tensors; [`Self::finish`] checks the whole.
#[derive(Debug, Default)]
pub struct NetworkBuilder {
    name: String,
    dims: Vec<u32>,
    label_text: String,
    label_ends: Vec<u32>,
    leg_starts: Vec<u32>,
    legs: Vec<Label>,
    blocks: Vec<Arc<Block>>,
    sources: Vec<Option<BlockSource>>,
    known: HashMap<usize, u32>,
    block_of: Vec<u32>,
    tensor_names: Vec<Option<Box<str>>>,
    boundary: Vec<Label>,
    bulk: Vec<Label>,
    summed: Vec<Label>,
    layout: Option<Layout>,
}

impl NetworkBuilder {
    /// An empty network of this name.
    pub fn new(name: impl Into<String>) -> Self {
        Self { name: name.into(), leg_starts: vec![0], ..Self::default() }
    }
    /// A new label. The caller keeps names distinct.
    pub fn label(&mut self, name: &str, dim: usize) -> Label {
        self.label_text.push_str(name);
        self.label_ends.push(self.label_text.len() as u32);
        self.dims.push(dim as u32);
        Label::new(self.dims.len() as u32 - 1)
    }
    /// A tensor with these legs. Blocks are shared by pointer: hand in clones of one `Arc`.
    ///
    /// # Errors
    /// [`NetworkError::LegCount`], [`NetworkError::Dimensions`].
    pub fn tensor(
        &mut self,
        name: Option<&str>,
        legs: &[Label],
        block: &Arc<Block>,
    ) -> Result<TensorId, NetworkError> {
        let id = TensorId::new(self.block_of.len() as u32);
        let shown = || name.map_or_else(|| format!("t{}", id.index()), str::to_owned);
        if legs.len() != block.dims().len() {
            return Err(NetworkError::LegCount {
                tensor: shown(),
                named: legs.len(),
                block: block.dims().len(),
            });
        }
        for (&l, &d) in legs.iter().zip(block.dims()) {
            let known = self.dims[l.index()] as usize;
            if known != d {
                return Err(NetworkError::Dimensions {
                    label: self.label_name(l).to_owned(),
                    known,
                    found: d,
                    tensor: shown(),
                });
            }
        }
        self.legs.extend_from_slice(legs);
        self.leg_starts.push(self.legs.len() as u32);
        let number = self.block_number(block);
        self.block_of.push(number);
        if name.is_some() && self.tensor_names.is_empty() {
            self.tensor_names.resize(id.index(), None);
        }
        if name.is_some() || !self.tensor_names.is_empty() {
            self.tensor_names.push(name.map(Into::into));
        }
        Ok(id)
    }
    fn block_number(&mut self, block: &Arc<Block>) -> u32 {
        let key = Arc::as_ptr(block) as usize;
        *self.known.entry(key).or_insert_with(|| {
            self.blocks.push(Arc::clone(block));
            self.sources.push(None);
            self.blocks.len() as u32 - 1
        })
    }
    /// Notes how a block is written in a file. A block without a note is written as numbers.
    pub fn source(&mut self, block: &Arc<Block>, source: BlockSource) {
        let number = self.block_number(block);
        self.sources[number as usize] = Some(source);
    }
    /// Tensors so far.
    pub fn tensors(&self) -> usize {
        self.block_of.len()
    }
    /// Dimension of a label issued by this builder.
    pub fn dim(&self, label: Label) -> usize {
        self.dims[label.index()] as usize
    }
    /// Boundary legs, in cyclic order, counter-clockwise.
    pub fn boundary(&mut self, labels: impl IntoIterator<Item = Label>) {
        self.boundary.extend(labels);
    }
    /// Bulk legs.
    pub fn bulk(&mut self, labels: impl IntoIterator<Item = Label>) {
        self.bulk.extend(labels);
    }
    /// Labels on one tensor to be summed over.
    pub fn summed(&mut self, labels: impl IntoIterator<Item = Label>) {
        self.summed.extend(labels);
    }
    /// Where it is drawn.
    pub fn layout(&mut self, layout: Layout) {
        self.layout = Some(layout);
    }
    fn label_name(&self, label: Label) -> &str {
        let l = label.index();
        let start = if l == 0 { 0 } else { self.label_ends[l - 1] as usize };
        &self.label_text[start..self.label_ends[l] as usize]
    }
    /// Checks the invariants of [`Network`].
    ///
    /// # Errors
    /// The first violation found, in the order of labels.
    pub fn finish(self) -> Result<Network, NetworkError> {
        let labels = self.dims.len();
        let mut starts = vec![0u32; labels + 1];
        for l in &self.legs {
            starts[l.index() + 1] += 1;
        }
        for i in 0..labels {
            starts[i + 1] += starts[i];
        }
        let mut holders = vec![TensorId::new(0); self.legs.len()];
        let mut next = starts.clone();
        for t in 0..self.block_of.len() {
            let range = self.leg_starts[t] as usize..self.leg_starts[t + 1] as usize;
            for l in &self.legs[range] {
                holders[next[l.index()] as usize] = TensorId::new(t as u32);
                next[l.index()] += 1;
            }
        }
        let mut listed: Vec<Option<&'static str>> = vec![None; labels];
        for (list, members) in
            [("boundary", &self.boundary), ("bulk", &self.bulk), ("summed", &self.summed)]
        {
            for &l in members {
                if let Some(first) = listed[l.index()] {
                    return Err(NetworkError::ListedTwice {
                        label: self.label_name(l).to_owned(),
                        first,
                        second: list,
                    });
                }
                listed[l.index()] = Some(list);
                if starts[l.index()] == starts[l.index() + 1] {
                    return Err(NetworkError::Nowhere {
                        list,
                        label: self.label_name(l).to_owned(),
                    });
                }
            }
        }
        let name_of = |t: TensorId| match self.tensor_names.get(t.index()) {
            Some(Some(n)) => n.to_string(),
            _ => format!("t{}", t.index()),
        };
        for l in 0..labels {
            if starts[l + 1] - starts[l] == 1 && listed[l].is_none() {
                return Err(NetworkError::Dangling {
                    label: self.label_name(Label::new(l as u32)).to_owned(),
                    tensor: name_of(holders[starts[l] as usize]),
                });
            }
        }
        Ok(Network {
            name: self.name,
            dims: self.dims,
            label_text: self.label_text,
            label_ends: self.label_ends,
            leg_starts: self.leg_starts,
            legs: self.legs,
            holder_starts: starts,
            holders,
            blocks: self.blocks,
            sources: self.sources,
            block_of: self.block_of,
            tensor_names: self.tensor_names,
            boundary: self.boundary,
            bulk: self.bulk,
            summed: self.summed,
            layout: self.layout,
        })
    }
}
