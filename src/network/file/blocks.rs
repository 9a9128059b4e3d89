//! The blocks of one file: each distinct one is made once and shared.

use super::Problem;
use crate::block::{self, Block, Entries, IsometryTable};
use crate::network::limits::Limits;
use crate::network::source::{BlockSource, NamedBlock};
use crate::tensor::Dense;
use ndarray::{ArrayD, IxDyn};
use num_complex::Complex64;
use std::collections::BTreeMap;
use std::path::{Component, Path, PathBuf};
use std::sync::Arc;

/// How far a user's array may be from an isometry and still be called one.
const TOLERANCE: f64 = 1e-9;

/// The first value that is not finite.
pub(super) fn finite(values: &[Complex64]) -> Option<usize> {
    values.iter().position(|v| !(v.re.is_finite() && v.im.is_finite()))
}

/// Blocks made so far.
#[derive(Debug)]
pub(in crate::network) struct BlockShelf {
    folder: PathBuf,
    limits: Limits,
    named: BTreeMap<(NamedBlock, Vec<usize>), Arc<Block>>,
    arrays: BTreeMap<String, Arc<Block>>,
    array_bytes: u64,
}

impl BlockShelf {
    /// An empty shelf; array files are looked for in `folder`.
    pub(in crate::network) fn new(folder: &Path, limits: &Limits) -> Self {
        Self {
            folder: folder.to_path_buf(),
            limits: *limits,
            named: BTreeMap::new(),
            arrays: BTreeMap::new(),
            array_bytes: 0,
        }
    }
    /// The block of a tensor with legs of these dimensions.
    pub(in crate::network) fn block(
        &mut self,
        source: &BlockSource,
        dims: &[usize],
        tensor: &dyn Fn() -> String,
    ) -> Result<Arc<Block>, Problem> {
        let size = dims.iter().try_fold(1u64, |s, &d| s.checked_mul(d as u64));
        let Some(size) = size.filter(|&s| s <= 1 << 63) else {
            let list: Vec<String> = dims.iter().map(usize::to_string).collect();
            return Err(Problem::SizeOverflow { tensor: tensor(), dimensions: shorten(&list) });
        };
        match source {
            BlockSource::Named(named) => self.named(named, dims, tensor),
            BlockSource::Array(file) => {
                let block = self.array(file, tensor)?;
                if block.dims() != dims {
                    return Err(Problem::ArrayShape {
                        file: file.clone(),
                        tensor: tensor(),
                        found: block.dims().to_vec(),
                        expected: dims.to_vec(),
                    });
                }
                Ok(block)
            }
            BlockSource::Values(values) => {
                if values.len() as u64 != size {
                    return Err(Problem::ValueCount {
                        tensor: tensor(),
                        found: values.len(),
                        expected: size,
                    });
                }
                let name = format!("values of {}", tensor());
                if let ([], [value]) = (dims, &values[..]) {
                    let entries = Entries::Dense(dense(&[*value], dims));
                    return Ok(Arc::new(Block::ready(
                        name,
                        IsometryTable::unknown(0),
                        None,
                        entries,
                    )));
                }
                block::from_dense(name, dense(values, dims), TOLERANCE)
                    .map(Arc::new)
                    .map_err(|reason| Problem::Block { tensor: tensor(), reason: Box::new(reason) })
            }
        }
    }
    fn named(
        &mut self,
        named: &NamedBlock,
        dims: &[usize],
        tensor: &dyn Fn() -> String,
    ) -> Result<Arc<Block>, Problem> {
        let key = (named.clone(), dims.to_vec());
        if let Some(block) = self.named.get(&key) {
            return Ok(Arc::clone(block));
        }
        let request = block::Request {
            family: named.family.clone(),
            dims: dims.to_vec(),
            construction: named.construction.clone(),
            options: named.options.clone(),
            seed: named.seed,
        };
        let block = block::make(&request)
            .map_err(|reason| Problem::Block { tensor: tensor(), reason: Box::new(reason) })?;
        let block = Arc::new(block);
        self.named.insert(key, Arc::clone(&block));
        Ok(block)
    }
    /// The block of an array file, whatever its shape.
    pub(in crate::network) fn array(
        &mut self,
        file: &str,
        tensor: &dyn Fn() -> String,
    ) -> Result<Arc<Block>, Problem> {
        if let Some(block) = self.arrays.get(file) {
            return Ok(Arc::clone(block));
        }
        let relative = Path::new(file);
        let below = !file.is_empty()
            && !file.contains('\\')
            && relative.components().all(|c| matches!(c, Component::Normal(_)));
        let leaves = || Problem::LeavesFolder { file: file.to_owned(), tensor: tensor() };
        if !below {
            return Err(leaves());
        }
        let path = self.folder.join(relative);
        // A link could still lead out of the folder.
        let base = if self.folder.as_os_str().is_empty() { Path::new(".") } else { &self.folder };
        if let (Ok(base), Ok(real)) = (base.canonicalize(), path.canonicalize())
            && !real.starts_with(base)
        {
            return Err(leaves());
        }
        if let Ok(about) = std::fs::metadata(&path) {
            let bytes = about.len();
            for (what, bytes, limit) in [
                (format!("array {file:?}"), bytes, self.limits.array_bytes),
                (
                    "all arrays together".to_owned(),
                    bytes + self.array_bytes,
                    self.limits.all_array_bytes,
                ),
            ] {
                if bytes > limit {
                    return Err(Problem::TooLarge { what, bytes, limit, advice: "" });
                }
            }
            self.array_bytes += bytes;
        }
        let numbers = block::read_npy(&path).map_err(|reason| Problem::ArrayFile {
            file: file.to_owned(),
            tensor: tensor(),
            reason: Box::new(reason),
        })?;
        let block =
            block::from_dense(format!("array {file}"), numbers, TOLERANCE).map_err(|reason| {
                Problem::Array { file: file.to_owned(), tensor: tensor(), reason: Box::new(reason) }
            })?;
        let block = Arc::new(block);
        self.arrays.insert(file.to_owned(), Arc::clone(&block));
        Ok(block)
    }
}

fn dense(values: &[Complex64], dims: &[usize]) -> Dense {
    let shape = IxDyn(dims);
    if values.iter().all(|v| v.im == 0.0) {
        let real = values.iter().map(|v| v.re).collect();
        Dense::Real(ArrayD::from_shape_vec(shape, real).expect("as many values as places"))
    } else {
        let all = values.to_vec();
        Dense::Complex(ArrayD::from_shape_vec(shape, all).expect("as many values as places"))
    }
}

fn shorten(list: &[String]) -> String {
    if list.len() <= 12 {
        list.join("·")
    } else {
        format!("{}·… ({} legs)", list[..6].join("·"), list.len())
    }
}
