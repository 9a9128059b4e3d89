//! The whole job from one file.
