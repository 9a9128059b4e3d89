//! What an order is sought for: labels and sizes, no numbers.

use super::OrderError;
use crate::network::Network;
use crate::tensor::Label;
use sha2::{Digest, Sha256};

/// The shape of a contraction.
///
/// Labels are numbered 0..sizes.len(). A label in `open` stays; every other label is summed
/// once all tensors that hold it are one. A label may stand on any number of tensors, and
/// twice on one (its diagonal).
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Shape {
    /// Size of each label.
    pub sizes: Vec<u64>,
    /// Labels of each tensor, in the order of its axes.
    pub tensors: Vec<Vec<Label>>,
    /// Labels that stay open, in the order of the result's axes.
    pub open: Vec<Label>,
}

impl Shape {
    /// A checked shape.
    ///
    /// # Errors
    /// [`OrderError`]: no tensor, a label without a size, a size of 0, an open label that no
    /// tensor holds or that is listed twice.
    ///
    /// ```
    /// use lierne::{order::Shape, tensor::Label};
    /// let l = |n| Label::new(n);
    /// // ab,bc->ac with a = 2, b = 3, c = 4
    /// let shape = Shape::new(
    ///     vec![2, 3, 4],
    ///     vec![vec![l(0), l(1)], vec![l(1), l(2)]],
    ///     vec![l(0), l(2)],
    /// )?;
    /// assert_eq!(shape.tensors.len(), 2);
    /// # Ok::<(), lierne::order::OrderError>(())
    /// ```
    pub fn new(
        sizes: Vec<u64>,
        tensors: Vec<Vec<Label>>,
        open: Vec<Label>,
    ) -> Result<Self, OrderError> {
        let shape = Self { sizes, tensors, open };
        shape.check()?;
        Ok(shape)
    }

    /// The shape of a network: its tensors in order, its bonds, and as open labels its
    /// boundary followed by its bulk.
    pub fn of(network: &Network) -> Self {
        Self {
            sizes: (0..network.labels() as u32)
                .map(|l| network.dim(Label::new(l)) as u64)
                .collect(),
            tensors: network.tensor_ids().map(|t| network.legs(t).to_vec()).collect(),
            open: network.boundary().iter().chain(network.bulk()).copied().collect(),
        }
    }

    /// Checks what [`Self::new`] checks; for shapes whose fields were set by hand.
    ///
    /// # Errors
    /// As [`Self::new`].
    pub fn check(&self) -> Result<(), OrderError> {
        if self.tensors.is_empty() {
            return Err(OrderError::Empty);
        }
        // A plan numbers inputs and results together in 32 bits.
        let limit = (u32::MAX / 2) as usize;
        for (what, count) in [("tensors", self.tensors.len()), ("labels", self.sizes.len())] {
            if count > limit {
                return Err(OrderError::TooMany { what, count, limit });
            }
        }
        if let Some(l) = self.sizes.iter().position(|&s| s == 0) {
            return Err(OrderError::LabelSize { label: l as u32 });
        }
        let mut held = vec![false; self.sizes.len()];
        for (tensor, labels) in self.tensors.iter().enumerate() {
            for l in labels {
                match held.get_mut(l.index()) {
                    Some(h) => *h = true,
                    None => {
                        return Err(OrderError::LabelUnknown {
                            tensor,
                            label: l.number(),
                            labels: self.sizes.len(),
                        });
                    }
                }
            }
        }
        let mut listed = vec![false; self.sizes.len()];
        for l in &self.open {
            if !held.get(l.index()).copied().unwrap_or(false) {
                return Err(OrderError::OpenNowhere { label: l.number() });
            }
            if std::mem::replace(&mut listed[l.index()], true) {
                return Err(OrderError::ListedTwice { label: l.number(), list: "open" });
            }
        }
        Ok(())
    }

    /// SHA-256 of the shape, in hexadecimal; equal shapes and only they share it.
    pub fn hash(&self) -> String {
        let mut h = Sha256::new();
        let mut put = |n: u64| h.update(n.to_le_bytes());
        put(self.sizes.len() as u64);
        self.sizes.iter().for_each(|&s| put(s));
        put(self.tensors.len() as u64);
        for t in &self.tensors {
            put(t.len() as u64);
            t.iter().for_each(|l| put(u64::from(l.number())));
        }
        put(self.open.len() as u64);
        self.open.iter().for_each(|l| put(u64::from(l.number())));
        h.finalize().iter().map(|b| format!("{b:02x}")).collect()
    }
}
