//! What a recipe is handed besides its own table.

use crate::network::file::{BlockShelf, Problem};
use crate::network::{Limits, NetworkError, Overrides};
use std::collections::BTreeMap;

/// Dimensions of labels: one for all, and exceptions by name.
#[derive(Debug)]
pub(in crate::network) struct LegDims {
    default: Option<usize>,
    /// The dimension, and whether a label of this name came up.
    given: BTreeMap<String, (usize, bool)>,
}

impl LegDims {
    pub(in crate::network) fn new(default: Option<usize>, given: Vec<(String, usize)>) -> Self {
        Self { default, given: given.into_iter().map(|(l, d)| (l, (d, false))).collect() }
    }
    /// The dimension of a label, or else `own`, or else that of every leg.
    pub(in crate::network) fn of_or(
        &mut self,
        label: &str,
        own: Option<usize>,
    ) -> Result<usize, Problem> {
        if !self.given.is_empty()
            && let Some((dim, met)) = self.given.get_mut(label)
        {
            *met = true;
            return Ok(*dim);
        }
        own.or(self.default)
            .ok_or_else(|| Problem::MissingKey { key: "dimension", place: "the file".into() })
    }
    /// Refuses exceptions for labels that never came up.
    pub(in crate::network) fn all_met(&self) -> Result<(), Problem> {
        match self.given.iter().find(|(_, (_, met))| !met) {
            None => Ok(()),
            Some((label, _)) => {
                let label = label.clone();
                Err(NetworkError::Nowhere { list: "[legs]", label }.into())
            }
        }
    }
}

/// What a recipe is handed besides its own table.
#[derive(Debug)]
pub(in crate::network) struct Setting<'a> {
    pub name: String,
    pub dims: LegDims,
    pub limits: &'a Limits,
    pub overrides: &'a Overrides,
    pub shelf: BlockShelf,
}
