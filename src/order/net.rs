//! The form of a shape that the methods work on.

use super::Shape;
use super::cost::Leaves;
use crate::tensor::Label;

/// Pairwise steps as in [`super::Plan`].
pub(crate) type Steps = Vec<(u32, u32)>;

/// A shape in leaf form, without labels of size 1 and without sliced ones.
///
/// Every tensor is a sorted list of distinct labels that other tensors hold too, and a
/// number of bits for the open labels that it holds alone: these stay on whatever it becomes
/// part of, so only their size matters.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Net {
    /// log2 of the size of each label.
    pub bits: Vec<f64>,
    /// Whether each label stays.
    pub open: Vec<bool>,
    /// The shared labels of each tensor.
    pub tensors: Vec<Vec<u32>>,
    /// log2 of the size of the open labels that each tensor holds alone.
    pub lone: Vec<f64>,
}

impl Net {
    /// The leaf form of a checked shape with these labels sliced.
    pub fn of(shape: &Shape, sliced: &[Label]) -> Self {
        let mut gone: Vec<bool> = shape.sizes.iter().map(|&s| s == 1).collect();
        for l in sliced {
            gone[l.index()] = true;
        }
        let leaves = Leaves::of(shape, &gone);
        let bits: Vec<f64> = shape.sizes.iter().map(|&s| (s as f64).log2()).collect();
        let mut open = vec![false; shape.sizes.len()];
        for l in &shape.open {
            open[l.index()] = !gone[l.index()];
        }
        let lone = leaves.lone.iter().map(|s| s.iter().map(|&l| bits[l as usize]).sum()).collect();
        Self { bits, open, tensors: leaves.sets, lone }
    }
    /// How many tensors hold each label, open counting as one more.
    pub fn counts(&self) -> Vec<u32> {
        let mut left: Vec<u32> = self.open.iter().map(|&o| u32::from(o)).collect();
        for &l in self.tensors.iter().flatten() {
            left[l as usize] += 1;
        }
        left
    }
    /// The tensors that hold each label, ascending.
    pub fn holders(&self) -> Vec<Vec<u32>> {
        let mut holders = vec![Vec::new(); self.bits.len()];
        for (t, set) in self.tensors.iter().enumerate() {
            for &l in set {
                holders[l as usize].push(t as u32);
            }
        }
        holders
    }
    /// log2 of the product of these labels' sizes.
    pub fn size(&self, set: &[u32]) -> f64 {
        set.iter().map(|&l| self.bits[l as usize]).sum()
    }
}
