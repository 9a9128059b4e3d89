//! Perfect tensors at work: proven blocks, networks of them, entropies with evidence,
//! contraction orders and their execution.
//!
//! The modules are floors; each imports only from those above it in this list.
//!
//! | floor | module | what it holds |
//! |---|---|---|
//! | 0 | [`watch`] | how progress leaves the library and how a stop enters it |
//! | 0 | [`field`] | finite fields and matrices over them |
//! | 0 | [`linalg`] | dense linear algebra with checked spectra |
//! | 1 | [`tensor`] | labelled dense tensors |
//! | 2 | [`block`] | building blocks, their proofs, isometry tables and measures |
//! | 3 | [`network`] | networks, their files and families |
//! | 3 | [`tiling`] | patches of regular tilings |
//! | 4 | [`order`] | contraction orders |
//! | 5 | [`contract`] | contraction plans run on an algebra |
//! | 6 | [`entropy`] | boundary regions to entropies, with evidence |
//! | 7 | [`code`] | bulk legs as a quantum code |
//! | 8 | [`study`] | the whole job from one file |
//! | 9 | `cli` | the program (feature `cli`) |

#[cfg(doctest)]
#[doc = include_str!("../README.md")]
struct Readme;

pub mod block;
#[cfg(feature = "cli")]
pub mod cli;
pub mod code;
pub mod contract;
pub mod entropy;
pub mod field;
pub mod guide;
pub mod linalg;
pub mod network;
pub mod order;
pub mod study;
pub mod tensor;
pub mod tiling;
pub mod watch;
