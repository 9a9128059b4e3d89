//! What a block is asked for by, and the one door through which all are made.

use super::{Block, BlockError, family, pauli_text};
use std::collections::BTreeMap;

/// A request for one block.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Request {
    /// Name of the family, as in [`families`](super::families).
    pub family: String,
    /// Dimensions of the legs, in order.
    pub dims: Vec<usize>,
    /// Which of several constructions; `None` takes the family's first for these legs.
    pub construction: Option<String>,
    /// Further settings by name, such as `level` of a basis state.
    pub options: BTreeMap<String, String>,
    /// Seed of what is drawn at random.
    pub seed: u64,
}

impl Request {
    /// A request without options, seed 0.
    pub fn new(family: impl Into<String>, dims: Vec<usize>) -> Self {
        Self { family: family.into(), dims, ..Self::default() }
    }
    /// The one dimension of all legs.
    pub(super) fn one_dimension(&self) -> Result<usize, BlockError> {
        match self.dims.first() {
            Some(&d) if self.dims.iter().all(|&e| e == d) => Ok(d),
            _ => Err(BlockError::UnequalDimensions {
                family: self.family.clone(),
                dims: self.dims.clone(),
            }),
        }
    }
    fn unknown(&self) -> BlockError {
        BlockError::UnknownFamily {
            name: self.family.clone(),
            known: family::FAMILIES.iter().map(|f| f.name).collect::<Vec<_>>().join(", "),
        }
    }
    pub(super) fn bad_option(&self, option: &str, expected: impl Into<String>) -> BlockError {
        BlockError::BadOption {
            family: self.family.clone(),
            option: option.to_owned(),
            value: self.options.get(option).cloned().unwrap_or_default(),
            expected: expected.into(),
        }
    }
    /// An option that counts something, below or equal to `most`.
    pub(super) fn count(
        &self,
        option: &str,
        default: usize,
        most: usize,
    ) -> Result<usize, BlockError> {
        match self.options.get(option) {
            None => Ok(default),
            Some(text) => match text.trim().parse() {
                Ok(v) if v <= most => Ok(v),
                _ => Err(self.bad_option(option, format!("a whole number from 0 to {most}"))),
            },
        }
    }
}

/// Makes a block and proves what its table of isometries says.
///
/// # Errors
/// [`BlockError`]: an unknown family, construction or option, legs that the family does not
/// have, a state that does not exist or is not known to exist.
pub fn make(request: &Request) -> Result<Block, BlockError> {
    let family = family::find(&request.family).ok_or_else(|| request.unknown())?;
    if let Some(&d) = request.dims.iter().find(|&&d| d == 0 || d > 1 << 16) {
        return Err(BlockError::WrongDimensions {
            family: request.family.clone(),
            expected: format!("dimensions from 1 to 65536 (one is {d})"),
            dims: request.dims.clone(),
        });
    }
    if let Some(option) = request.options.keys().find(|o| !family.options.contains(&o.as_str())) {
        return Err(BlockError::UnknownOption {
            family: request.family.clone(),
            option: option.clone(),
            known: match family.options {
                [] => "none".to_owned(),
                some => some.join(", "),
            },
        });
    }
    if !family.legs.admits(request.dims.len()) {
        return Err(BlockError::WrongLegs {
            family: request.family.clone(),
            expected: family.legs.to_string(),
            got: request.dims.len(),
        });
    }
    (family.make)(request)
}

/// The dimensions of a family's legs when only one dimension, and perhaps the number of legs,
/// is given: encoders get one bulk leg that holds all logical levels.
///
/// # Errors
/// [`BlockError`] where the number of legs does not follow or the family does not exist.
pub fn usual_dims(
    family: &str,
    legs: Option<usize>,
    dimension: usize,
    options: &BTreeMap<String, String>,
) -> Result<Vec<usize>, BlockError> {
    let request = Request::new(family, Vec::new());
    let found = family::find(family).ok_or_else(|| request.unknown())?;
    let encoder = |sites: usize, logical: usize| -> Result<Vec<usize>, BlockError> {
        if legs == Some(sites + logical) || logical == 0 {
            return Ok(vec![dimension; sites + logical]);
        }
        let bulk = dimension.checked_pow(logical as u32).ok_or_else(|| BlockError::TooLarge {
            what: format!("the bulk leg of block `{family}`"),
            entries: format!("{dimension}^{logical} levels, so as many"),
            limit: 1 << 16,
        })?;
        let mut dims = vec![dimension; sites];
        dims.push(bulk);
        Ok(dims)
    };
    match family {
        "code-4-2-2" if legs.is_none_or(|n| n == 5) => encoder(4, 2),
        "stabilizer" => {
            let text = options.get("stabilizers").map_or("", String::as_str);
            let (sites, logical) = pauli_text::size(dimension, text).ok_or_else(|| {
                request.bad_option("stabilizers", "generators separated by commas")
            })?;
            encoder(sites, logical)
        }
        _ => match (found.legs, legs) {
            (family::Legs::Exactly(n), None) => Ok(vec![dimension; n]),
            (_, Some(n)) => Ok(vec![dimension; n]),
            (several, None) => Err(BlockError::LegsNeeded {
                family: family.to_owned(),
                expected: several.to_string(),
            }),
        },
    }
}
