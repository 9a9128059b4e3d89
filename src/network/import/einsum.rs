//! Einsum expressions: `ab,bc,cd->ad`.

use crate::network::file::raw::label_is_sound;
use crate::network::file::{BlockShelf, Problem, nearest};
use crate::network::source::BlockSource;
use crate::network::{Limits, Network, NetworkBuilder};
use crate::tensor::Label;
use num_complex::Complex64;
use std::collections::BTreeMap;
use std::path::Path;
use thiserror::Error;

/// What can be wrong with an einsum expression.
#[derive(Debug, Error)]
#[non_exhaustive]
pub enum EinsumError {
    /// More than one arrow.
    #[error("the expression has {arrows} arrows; one or none is taken")]
    Arrows {
        /// How many.
        arrows: usize,
    },
    /// Something that is no label.
    #[error("{found:?} in the expression cannot be a label; letters and names without commas can")]
    Label {
        /// What stands there.
        found: String,
    },
    /// An ellipsis.
    #[error("the expression has an ellipsis; name every leg")]
    Ellipsis,
    /// An output label that no operand has.
    #[error("label {label:?} of the result stands on no operand")]
    Nowhere {
        /// The label.
        label: String,
    },
    /// An output label that stands twice.
    #[error("label {label:?} stands twice in the result")]
    Twice {
        /// The label.
        label: String,
    },
    /// A label without a size.
    #[error("label {label:?} has no size; give one for it, or one for all")]
    NoSize {
        /// The label.
        label: String,
    },
    /// A size for a label that is not there.
    #[error(
        "a size is given for {label:?}, which stands nowhere in the expression; the nearest label is {nearest:?}"
    )]
    UnknownSize {
        /// The label.
        label: String,
        /// The label that is nearest.
        nearest: String,
    },
    /// Fewer or more arrays than operands.
    #[error("{arrays} arrays were given for {operands} operands")]
    Arrays {
        /// Arrays given.
        arrays: usize,
        /// Operands of the expression.
        operands: usize,
    },
    /// The network cannot be made.
    #[error(transparent)]
    Problem(#[from] Problem),
}

/// An einsum expression, taken apart.
///
/// Where an operand has white space between labels, labels are the words: `left mid, mid
/// right -> left right`. Else they are single characters of any script. Without an arrow the
/// result holds the labels that stand once, in the order of their characters, as NumPy has it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Einsum {
    /// Labels of each operand.
    pub operands: Vec<Vec<String>>,
    /// Labels of the result.
    pub result: Vec<String>,
}

impl Einsum {
    /// Reads an expression.
    ///
    /// # Errors
    /// [`EinsumError`].
    pub fn parse(text: &str) -> Result<Self, EinsumError> {
        if text.contains("...") || text.contains('…') {
            return Err(EinsumError::Ellipsis);
        }
        let parts: Vec<&str> = text.split("->").collect();
        if parts.len() > 2 {
            return Err(EinsumError::Arrows { arrows: parts.len() - 1 });
        }
        let terms: Vec<&str> = parts[0].split(',').map(str::trim).collect();
        let words = terms.iter().chain(&parts[1..]).any(|t| t.trim().contains(char::is_whitespace));
        let labels = |term: &str| -> Result<Vec<String>, EinsumError> {
            let list: Vec<String> = if words {
                term.split_whitespace().map(str::to_owned).collect()
            } else {
                term.trim().chars().map(String::from).collect()
            };
            match list.iter().find(|l| !label_is_sound(l) || l.contains(['>', '(', ')'])) {
                Some(found) => Err(EinsumError::Label { found: found.clone() }),
                None => Ok(list),
            }
        };
        let operands = terms.iter().map(|t| labels(t)).collect::<Result<Vec<_>, _>>()?;
        let mut times: BTreeMap<&str, usize> = BTreeMap::new();
        for l in operands.iter().flatten() {
            *times.entry(l).or_default() += 1;
        }
        let result = match parts.get(1) {
            Some(text) => labels(text)?,
            None => times.iter().filter(|(_, n)| **n == 1).map(|(l, _)| (*l).to_owned()).collect(),
        };
        for (k, l) in result.iter().enumerate() {
            if !times.contains_key(l.as_str()) {
                return Err(EinsumError::Nowhere { label: l.clone() });
            }
            if result[..k].contains(l) {
                return Err(EinsumError::Twice { label: l.clone() });
            }
        }
        Ok(Self { operands, result })
    }
}

/// The network of an expression: one tensor an operand, the result's labels as boundary, in
/// their order. Sizes come from `sizes`, or else `size` for all. Operands are the arrays
/// (paths relative to `folder`), or else the block, or else random numbers.
///
/// # Errors
/// [`EinsumError`].
#[allow(clippy::too_many_arguments)]
pub fn einsum(
    name: &str,
    text: &str,
    sizes: &BTreeMap<String, usize>,
    size: Option<usize>,
    block: Option<&BlockSource>,
    arrays: &[String],
    folder: &Path,
    limits: &Limits,
) -> Result<Network, EinsumError> {
    let parsed = Einsum::parse(text)?;
    let operands = parsed.operands.len();
    if !arrays.is_empty() && arrays.len() != operands {
        return Err(EinsumError::Arrays { arrays: arrays.len(), operands });
    }
    if operands as u64 > limits.tensors {
        let (count, limit) = (operands as u64, limits.tensors);
        return Err(Problem::TooMany { what: "tensors", count, limit }.into());
    }
    let mut shelf = BlockShelf::new(folder, limits);
    let mut known = sizes.clone();
    for (t, (file, labels)) in arrays.iter().zip(&parsed.operands).enumerate() {
        let shape = shelf.array(file, &|| format!("t{t}"))?;
        // A size that contradicts is told by the tensor's own check below.
        for (l, &d) in labels.iter().zip(shape.dims()) {
            known.entry(l.clone()).or_insert(d);
        }
    }
    let mut builder = NetworkBuilder::new(name);
    let mut label_of: BTreeMap<&str, (Label, usize)> = BTreeMap::new();
    for l in parsed.operands.iter().flatten() {
        if let Some((_, times)) = label_of.get_mut(l.as_str()) {
            *times += 1;
            continue;
        }
        let dim = known.get(l).copied().or(size);
        let dim = dim.ok_or_else(|| EinsumError::NoSize { label: l.clone() })?;
        label_of.insert(l, (builder.label(l, dim), 1));
    }
    if let Some(unknown) = sizes.keys().find(|l| !label_of.contains_key(l.as_str())) {
        let labels: Vec<&str> = label_of.keys().copied().collect();
        let nearest = nearest(unknown, &labels).to_owned();
        return Err(EinsumError::UnknownSize { label: unknown.clone(), nearest });
    }
    builder.boundary(parsed.result.iter().map(|l| label_of[l.as_str()].0));
    for (name, (label, times)) in &label_of {
        if *times == 1 && !parsed.result.iter().any(|l| l == name) {
            builder.summed([*label]);
        }
    }
    for (t, labels) in parsed.operands.iter().enumerate() {
        let legs: Vec<Label> = labels.iter().map(|l| label_of[l.as_str()].0).collect();
        let dims: Vec<usize> = legs.iter().map(|&l| builder.dim(l)).collect();
        let source = match arrays.get(t) {
            Some(file) => BlockSource::Array(file.clone()),
            None if legs.is_empty() => BlockSource::Values(vec![Complex64::new(1.0, 0.0)]),
            None => crate::network::recipe::or_random(block, t),
        };
        let made = shelf.block(&source, &dims, &|| format!("t{t}"))?;
        builder.source(&made, source);
        builder.tensor(None, &legs, &made).map_err(Problem::from)?;
    }
    Ok(builder.finish().map_err(Problem::from)?)
}
