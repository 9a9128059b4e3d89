//! A guide in pages, whose examples run.
//!
//! - [`first_steps`]: from one block to a study.
//! - [`study_files`]: every key of a study file, and the folder that it becomes.
//! - [`evidence`]: the theorems behind every kind of answer, with sources and limits.
//! - [`published`]: published values that this crate reproduces.

#[doc = include_str!("../docs/guide.md")]
pub mod first_steps {}

#[doc = include_str!("../docs/study-files.md")]
pub mod study_files {}

#[doc = include_str!("../docs/evidence.md")]
pub mod evidence {}

#[doc = include_str!("../docs/published.md")]
pub mod published {}
