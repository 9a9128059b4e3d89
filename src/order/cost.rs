//! What a plan costs.

/// The price of a plan, all slices together except where said.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Cost {
    /// log10 of the scalar multiply-adds; −∞ for none.
    pub log10_multiply_adds: f64,
    /// The scalar multiply-adds, where they fit.
    pub multiply_adds: Option<u128>,
    /// log2 of the most elements alive at once, in one slice.
    pub log2_peak_elements: f64,
    /// log2 of the elements of the largest tensor, inputs and result included, in one slice.
    pub log2_largest_tensor: f64,
    /// Most distinct labels in one pairwise step, in one slice.
    pub widest_step: usize,
    /// log2 of the elements written in all.
    pub log2_elements_written: f64,
    /// Number of slices.
    pub slices: u128,
}
