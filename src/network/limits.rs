//! How much a network may be.

/// Limits on what is read or grown, checked before anything large is allocated.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Limits {
    /// Most tensors.
    pub tensors: u64,
    /// Most legs of one tensor.
    pub legs_of_a_tensor: u64,
    /// Most legs of all tensors together.
    pub legs: u64,
    /// Most bytes of a JSON file.
    pub json_bytes: u64,
    /// Most bytes of a TOML file, which is held in memory as a whole.
    pub toml_bytes: u64,
    /// Most bytes of one array file.
    pub array_bytes: u64,
    /// Most bytes of all array files of a network together.
    pub all_array_bytes: u64,
}

impl Default for Limits {
    /// 4 million tensors, 10 000 legs each, 64 million legs in all, 4 GiB of JSON, 256 MiB of
    /// TOML, 1 GiB an array, 4 GiB all arrays.
    fn default() -> Self {
        Self {
            tensors: 4_000_000,
            legs_of_a_tensor: 10_000,
            legs: 64_000_000,
            json_bytes: 4 << 30,
            toml_bytes: 256 << 20,
            array_bytes: 1 << 30,
            all_array_bytes: 4 << 30,
        }
    }
}

/// What the caller sets over what the file says.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Overrides {
    /// The default dimension of every leg.
    pub dimension: Option<usize>,
    /// Rings of a recipe that grows by rings.
    pub rings: Option<u32>,
}
