//! The whole job from one file.
pub mod picture;
