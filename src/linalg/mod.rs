//! Dense linear algebra with checked spectra, an ndarray face over a pure-Rust backend.
